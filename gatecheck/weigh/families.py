"""P values of a whole family of tests, adjusted so that each can be held against the level of the family.

Each procedure multiplies the sorted p values by factors and then makes them rise in step. It is written once
for p values and their logarithms; only how to multiply and where one lies differs.

References
----------
Holm, S. (1979). A simple sequentially rejective multiple test procedure. Scand. J. Statist. 6, 65-70.
Hochberg, Y. (1988). A sharper Bonferroni procedure for multiple tests of significance. Biometrika 75, 800-802.
Hommel, G. (1988). A stagewise rejective multiple test procedure based on a modified Bonferroni test.
Biometrika 75, 383-386.
Simes, R. J. (1986). An improved Bonferroni procedure for multiple tests of significance. Biometrika 73, 751-754.
Benjamini, Y. & Hochberg, Y. (1995). Controlling the false discovery rate. JRSS B 57(1), 289-300.
Benjamini, Y. & Yekutieli, D. (2001). The control of the false discovery rate in multiple testing under
dependency. Ann. Statist. 29, 1165-1188.
Storey, J. D. (2002). A direct approach to false discovery rates. JRSS B 64(3), 479-498 (from memory).
"""

from __future__ import annotations

from enum import IntEnum
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray


# A p value over a smaller share could overflow.
SMALLEST_SHARE = 1e-300


class Procedure(IntEnum):
    """What controls the error of a family: the chance of any false rejection, or the share of false ones.

    Bonferroni, Holm and fixed sequence control the former, and Benjamini-Yekutieli the latter, however the
    p values depend on each other. Hochberg, Hommel and Benjamini-Hochberg ask for independence or a positive
    dependence of the kind for which Simes' inequality holds.
    """

    NONE = 0
    BONFERRONI = 1
    HOLM = 2
    HOCHBERG = 3
    HOMMEL = 4
    BENJAMINI_HOCHBERG = 5
    BENJAMINI_YEKUTIELI = 6
    FIXED_SEQUENCE = 7


class _Scale(NamedTuple):
    times: Callable[[FloatArray, FloatArray], FloatArray]
    zero: float
    one: float


_PLAIN = _Scale(np.multiply, 0.0, 1.0)
_LOG = _Scale(lambda log_p, factor: log_p + np.log(factor), -np.inf, 0.0)


def adjusted_p(procedure: Procedure, p: ArrayLike) -> FloatArray:
    """Least level of the family at which each member is rejected.

    Parameters
    ----------
    procedure : Procedure
        For the fixed sequence the order of ``p`` is the order of testing; for all others it plays no part.
    p : array_like, shape (n,)
        Raw p values of all members of the family, from 0 to 1. A member that was planned and not reported
        is a 1.

    Returns
    -------
    ndarray of float64, shape (n,)
        In the order of ``p``, at most 1; all nan if any member is outside the domain, for no adjusted value is
        known before all raw ones are.

    Notes
    -----
    The time grows as that of sorting, but for Hommel's procedure: with the square of the size of the family.
    """
    return _adjusted(procedure, np.asarray(p, dtype=np.float64), _PLAIN)


def log_adjusted_p(procedure: Procedure, log_p: ArrayLike) -> FloatArray:
    """Natural log of the adjusted p values from the logs of the raw ones, which may lie below any double."""
    return _adjusted(procedure, np.asarray(log_p, dtype=np.float64), _LOG)


def rejects(procedure: Procedure, p: ArrayLike, alpha: float) -> BoolArray:
    """Whether each member is rejected at level ``alpha`` of the family; arguments as in :func:`adjusted_p`.

    An incomplete family rejects nothing.
    """
    return adjusted_p(procedure, p) <= alpha


def weighted_bonferroni(p: ArrayLike, weights: ArrayLike) -> FloatArray:
    """Adjusted p values ``p / w``, the weights taken as shares of their sum.

    Parameters
    ----------
    p : array_like, shape (n,)
        As in :func:`adjusted_p`.
    weights : array_like, shape (n,)
        Above zero and finite, in any unit; none below 1e-300 of the sum.

    Returns
    -------
    ndarray of float64, shape (n,)
        At most 1; all nan outside the domain.
    """
    raw, shares = np.asarray(p, dtype=np.float64), _shares(weights)
    if not _legal_weighted(raw, shares):
        return np.full(raw.shape, np.nan)
    return np.minimum(raw, shares) / shares


def weighted_holm(p: ArrayLike, weights: ArrayLike) -> FloatArray:
    """Adjusted p values of Holm's procedure with weights (Holm 1979, section 4); as :func:`weighted_bonferroni`."""
    raw, shares = np.asarray(p, dtype=np.float64), _shares(weights)
    if not _legal_weighted(raw, shares):
        return np.full(raw.shape, np.nan)
    order = np.argsort(raw / shares, kind="stable")
    among_left = shares[order] / np.cumsum(shares[order][::-1])[::-1]
    return _in_order_of(order, np.maximum.accumulate(np.minimum(raw[order], among_left) / among_left))


def share_of_true_nulls(p: ArrayLike, threshold: ArrayLike) -> FloatArray:
    """Estimated share of members without an effect: ``#{p >= threshold} / (n (1 - threshold))``, at most 1.

    It rests on p values that are uniform where there is no effect and at most weakly dependent, and leans
    upward, since some members with an effect lie above the threshold as well. A higher threshold leans less and
    varies more. It says little of a small family, and nothing of one whose p values were selected, discrete
    or one-sided with effects in the other direction.

    Parameters
    ----------
    p : array_like, shape (n,)
        Raw p values of all members, as in :func:`adjusted_p`.
    threshold : array_like
        From 0 to below 1, usually 0.5.

    Returns
    -------
    ndarray of float64
        The shape of ``threshold``; nan where it is outside the domain, or the family is incomplete or empty.
    """
    raw, limit = np.asarray(p, dtype=np.float64), np.asarray(threshold, dtype=np.float64)
    if not (raw.size and _legal(raw, _PLAIN)):
        return np.full(limit.shape, np.nan)
    below = np.searchsorted(np.sort(raw), limit, side="left")
    legal = (limit >= 0) & (limit < 1)
    room = np.where(legal, 1 - limit, 1.0)
    return np.where(legal, np.minimum((raw.size - below) / raw.size / room, 1.0), np.nan)


def _adjusted(procedure: Procedure, p: FloatArray, scale: _Scale) -> FloatArray:
    if not _legal(p, scale):
        return np.full(p.shape, np.nan)
    if p.size == 0:
        return p.copy()
    if procedure == Procedure.FIXED_SEQUENCE:
        return np.maximum.accumulate(p)
    order = np.argsort(p, kind="stable")
    return _in_order_of(order, np.minimum(_SORTED[procedure](p[order], scale), scale.one))


def _in_order_of(order: np.ndarray[tuple[int, ...], np.dtype[np.intp]], values: FloatArray) -> FloatArray:
    result = np.empty_like(values)
    result[order] = values
    return result


def _raw(p: FloatArray, _: _Scale) -> FloatArray:
    return p


def _bonferroni(p: FloatArray, scale: _Scale) -> FloatArray:
    return scale.times(p, np.full(p.size, float(p.size)))


def _holm(p: FloatArray, scale: _Scale) -> FloatArray:
    return np.maximum.accumulate(scale.times(p, np.arange(p.size, 0.0, -1.0)))


def _hochberg(p: FloatArray, scale: _Scale) -> FloatArray:
    return _least_from_here(scale.times(p, np.arange(p.size, 0.0, -1.0)))


def _benjamini_hochberg(p: FloatArray, scale: _Scale) -> FloatArray:
    return _least_from_here(scale.times(p, p.size / np.arange(1.0, p.size + 1)))


def _benjamini_yekutieli(p: FloatArray, scale: _Scale) -> FloatArray:
    ranks = np.arange(1.0, p.size + 1)
    return _least_from_here(scale.times(p, p.size * (1 / ranks).sum() / ranks))


def _hommel(p: FloatArray, scale: _Scale) -> FloatArray:
    """Largest Simes p value of all sets that hold the member: of each size, it and the largest others.

    A set of ``size`` holds the largest members. Where the member is not one of them it takes the place of
    the smallest of them.
    """
    n = p.size
    ranks = np.arange(1.0, n + 1)
    adjusted = p.copy()
    for size in range(2, n + 1):
        outside = n - size + 1
        of_others = scale.times(p[outside:], size / ranks[1:size]).min()
        alone = scale.times(p[:outside], np.full(outside, float(size)))
        simes = np.minimum(alone, of_others)
        np.maximum(adjusted[:outside], simes, out=adjusted[:outside])
        np.maximum(adjusted[outside:], simes[-1], out=adjusted[outside:])
    return adjusted


_SORTED: dict[Procedure, Callable[[FloatArray, _Scale], FloatArray]] = {
    Procedure.NONE: _raw,
    Procedure.BONFERRONI: _bonferroni,
    Procedure.HOLM: _holm,
    Procedure.HOCHBERG: _hochberg,
    Procedure.HOMMEL: _hommel,
    Procedure.BENJAMINI_HOCHBERG: _benjamini_hochberg,
    Procedure.BENJAMINI_YEKUTIELI: _benjamini_yekutieli,
}


def _least_from_here(values: FloatArray) -> FloatArray:
    return np.minimum.accumulate(values[::-1])[::-1]


def _legal(p: FloatArray, scale: _Scale) -> bool:
    return p.ndim == 1 and bool(((p >= scale.zero) & (p <= scale.one)).all())


def _shares(weights: ArrayLike) -> FloatArray:
    """Weights as shares of their sum; nan where a weight is not above zero, or with an infinite sum 0 or nan."""
    sizes = np.asarray(weights, dtype=np.float64)
    with np.errstate(all="ignore"):
        return np.where(sizes > 0, sizes / sizes.sum(), np.nan)


def _legal_weighted(p: FloatArray, shares: FloatArray) -> bool:
    return _legal(p, _PLAIN) and p.shape == shares.shape and bool((shares >= SMALLEST_SHARE).all())
