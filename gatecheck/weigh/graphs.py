"""Families whose members hand on their share of the error when they are rejected: the graphical procedure.

References
----------
Bretz, F., Maurer, W., Brannath, W. & Posch, M. (2009). A graphical approach to sequentially rejective multiple
test procedures. Statistics in Medicine 28(4), 586-604 (the update of the graph and the adjusted p values;
from memory).
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import FloatArray

# Sums of shares that are written in decimals miss 1 by rounding.
ROUNDING = 1e-12


def graph_adjusted_p(p: ArrayLike, weights: ArrayLike, transitions: ArrayLike) -> FloatArray:
    """Least level of the family at which each member is rejected by the graphical procedure.

    The member with the least ``p / weight`` goes first. It hands its weight to the others by its row of
    ``transitions``, and they are linked to each other through it. The chance of any false rejection is
    controlled however the p values depend on each other.

    Parameters
    ----------
    p : array_like, shape (n,)
        Raw p values of all members, from 0 to 1.
    weights : array_like, shape (n,)
        Shares of the level at the start: not negative, at most 1 in sum.
    transitions : array_like, shape (n, n)
        Share of the weight of the row's member that goes to the column's: not negative, rows at most 1 in
        sum, zeros on the diagonal.

    Returns
    -------
    ndarray of float64, shape (n,)
        At most 1, and 1 for a member that no weight ever reaches; all nan outside the domain.
    """
    raw, weight = np.asarray(p, dtype=np.float64), np.array(weights, dtype=np.float64)
    links = np.array(transitions, dtype=np.float64)
    if not _legal(raw, weight, links):
        return np.full(raw.shape, np.nan)
    adjusted = np.ones(raw.size)
    open_members = np.ones(raw.size, dtype=np.bool_)
    level = 0.0
    while (open_members & (weight > 0)).any():
        ratio = np.full(raw.size, np.inf)
        # A ratio above 1 is as good as 1, and cannot overflow.
        np.divide(np.minimum(raw, weight), weight, out=ratio, where=open_members & (weight > 0))
        first = int(np.argmin(ratio))
        level = max(level, float(ratio[first]))
        adjusted[first] = level
        open_members[first] = False
        weight, links = _without(first, weight, links)
    return adjusted


def _without(member: int, weight: FloatArray, links: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Hand on the member's weight, and join each way into it to each way out of it."""
    out_of, into = links[member], links[:, member]
    there_and_back = into * out_of
    stays = there_and_back < 1 - ROUNDING
    joined = links + np.outer(into, out_of)
    joined /= np.where(stays, 1 - there_and_back, 1.0)[:, None]
    joined[~stays] = 0.0
    joined[member] = joined[:, member] = 0.0
    np.fill_diagonal(joined, 0.0)
    handed_on = weight + weight[member] * out_of
    handed_on[member] = 0.0
    return handed_on, joined


def _legal(p: FloatArray, weight: FloatArray, links: FloatArray) -> bool:
    if p.ndim != 1 or weight.shape != p.shape or links.shape != (p.size, p.size):
        return False
    shares = bool((weight >= 0).all() and weight.sum() <= 1 + ROUNDING and (links >= 0).all())
    rows = bool((links.sum(axis=1) <= 1 + ROUNDING).all() and not links.diagonal().any())
    return shares and rows and bool(((p >= 0) & (p <= 1)).all())
