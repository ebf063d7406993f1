"""Critical values for looks that were planned: constant shapes, and the error spent look by look.

Two conventions carry the name of a two-sided O'Brien-Fleming-type spending function. Here each side spends
its own half of alpha, ``2 (2 - 2 Phi(z_{alpha/4} / sqrt t))`` in all (five equal looks at 0.05: 4.877, 3.357,
2.680, 2.290, 2.031). The other puts the whole alpha into the one-sided formula, ``2 - 2 Phi(z_{alpha/2} / sqrt t)``
(4.383, 3.100, 2.553, 2.254, 2.063): that is :func:`spent_obrien_fleming` at the whole alpha, handed to
:func:`spending_boundary`. The Pocock-type function is proportional to alpha and knows no such difference.

References
----------
Pocock, S. J. (1977). Group sequential methods in the design and analysis of clinical trials. Biometrika
64, 191-199.
O'Brien, P. C. & Fleming, T. R. (1979). A multiple testing procedure for clinical trials. Biometrics 35, 549-556.
Haybittle, J. L. (1971). Repeated assessment of results in clinical trials of cancer treatment. British Journal
of Radiology 44, 793-797 (z = 3 at interim looks).
Lan, K. K. G. & DeMets, D. L. (1983). Discrete sequential boundaries for clinical trials. Biometrika 70, 659-663.
All from memory but for the spending functions.
"""

from __future__ import annotations

from enum import IntEnum
from math import e, inf, log
from typing import TYPE_CHECKING

import numpy as np
from scipy import special

from gatecheck.weigh.arrays import rowwise
from gatecheck.weigh.looks import (
    ONE_SIDED,
    START,
    TWO_SIDED,
    exits_at,
    fractions,
    going_on,
    type_one_error,
)
from gatecheck.weigh.roots import crossing

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray
    from gatecheck.weigh.looks import Paths

HAYBITTLE_Z = 3.0
# No critical value reaches so far: the normal tail beyond underflows.
FARTHEST_Z = 38.0
# Below, the tails that the integration leaves out would begin to count.
LEAST_ALPHA = 1e-15
SMALLEST = 1e-320


class BoundaryKind(IntEnum):
    """The shapes of a boundary."""

    POCOCK = 0
    OBRIEN_FLEMING = 1
    HAYBITTLE_PETO = 2
    SPENDING_OBRIEN_FLEMING = 3
    SPENDING_POCOCK = 4


def boundary(kind: BoundaryKind, information: ArrayLike, alpha: float, *, sides: int = TWO_SIDED) -> FloatArray:
    """Critical z of each look, such that all looks together have type I error ``alpha``.

    Parameters
    ----------
    kind : BoundaryKind
        Pocock: the same z at each look. O'Brien-Fleming: z falls with the square root of information.
        Haybittle-Peto: z = 3 before the last look, which takes what is left. Spending: see the module.
    information : array_like, shape (k,)
        Information at each planned look, the last one being the end; any unit, equally spaced or not, above
        zero, rising by at least ``2**-10`` of the last.
    alpha : float
        Type I error of the whole, over both sides if two-sided; from 1e-15 to below ``sides / 2``.
    sides : {1, 2}
        Whether a look stops at ``Z >= z`` or at ``|Z| >= z``.

    Returns
    -------
    ndarray of float64, shape (k,)
        Infinite where a look has nothing to spend; all nan outside the domain, or where the looks before the
        last of a Haybittle-Peto boundary already cost more than ``alpha``.
    """
    levels = fractions(information)
    if not (levels.size and sides in {ONE_SIDED, TWO_SIDED} and LEAST_ALPHA <= alpha < sides / 2):
        return np.full(np.size(information), np.nan)
    if kind in _SPENDING:
        each_side = _SPENDING[kind](alpha / sides, levels)
        return spending_boundary(sides * each_side, levels, sides=sides)
    if kind == BoundaryKind.HAYBITTLE_PETO:
        return _haybittle_peto(levels, alpha, sides)
    shape = 1 / np.sqrt(levels) if kind == BoundaryKind.OBRIEN_FLEMING else np.ones(levels.size)
    return shape * _constant(shape, levels, alpha, sides)


def spending_boundary(spent: ArrayLike, information: ArrayLike, *, sides: int = TWO_SIDED) -> FloatArray:
    """Critical z of each look, such that the type I error up to each look is what ``spent`` says.

    Parameters
    ----------
    spent : array_like, shape (k,)
        Error spent up to each look, over both sides if two-sided: not falling, from 0 to below ``sides / 2``.
    information : array_like, shape (k,)
        As in :func:`boundary`.
    sides : {1, 2}
        As in :func:`boundary`.

    Returns
    -------
    ndarray of float64, shape (k,)
        Infinite where nothing is spent; all nan outside the domain.
    """
    levels = fractions(information)
    increments = np.diff(np.ravel(np.asarray(spent, dtype=np.float64)), prepend=0.0)
    if not (levels.size and sides in {ONE_SIDED, TWO_SIDED} and _legal_increments(increments, levels, sides)):
        return np.full(np.size(information), np.nan)
    limits = np.empty(levels.size)
    paths = START
    for look, increment in enumerate(increments):
        limits[look] = _limit_for(float(increment), paths, levels, look, sides=sides)
        paths = going_on(paths, limits[look], levels, look, sides=sides)
    return limits


def spent_obrien_fleming(alpha: ArrayLike, fraction: ArrayLike) -> FloatArray:
    """Error that one side has spent: ``2 - 2 Phi(z_{alpha/2} / sqrt t)``.

    ``alpha`` is above 0 and below 1, the ``fraction`` t of the full information above 0 and at most 1; the
    result has the broadcast shape, nan outside the domain.
    """
    return rowwise(_spent_obrien_fleming, _legal_spending, alpha, fraction)


def spent_pocock(alpha: ArrayLike, fraction: ArrayLike) -> FloatArray:
    """Error that one side has spent: ``alpha ln(1 + (e - 1) t)``; arguments as above."""
    return rowwise(lambda alpha, fraction: alpha * np.log1p((e - 1) * fraction), _legal_spending, alpha, fraction)


_SPENDING: dict[BoundaryKind, Callable[[ArrayLike, ArrayLike], FloatArray]] = {
    BoundaryKind.SPENDING_OBRIEN_FLEMING: spent_obrien_fleming,
    BoundaryKind.SPENDING_POCOCK: spent_pocock,
}


def nominal_p(boundaries: ArrayLike, *, sides: int = TWO_SIDED) -> FloatArray:
    """P value that just crosses each critical z, of as many sides as the boundary has."""
    return rowwise(lambda z: sides * special.ndtr(-z), lambda z: ~np.isnan(z), boundaries)


def _constant(shape: FloatArray, levels: FloatArray, alpha: float, sides: int) -> float:
    """Factor of ``shape``: between the z of a single look and that of Bonferroni, with some room for rounding."""
    single = -float(special.ndtri(alpha / sides))
    bonferroni = -float(special.ndtri(alpha / sides / levels.size))
    return crossing(
        lambda factor: _log_ratio(type_one_error(factor * shape, levels, sides=sides), alpha),
        max(single - 1, 0.0),
        bonferroni + 1,
    )


def _haybittle_peto(levels: FloatArray, alpha: float, sides: int) -> FloatArray:
    interim = np.full(levels.size - 1, HAYBITTLE_Z)

    def excess(last: float) -> float:
        return _log_ratio(type_one_error(np.append(interim, last), levels, sides=sides), alpha)

    if excess(FARTHEST_Z) >= 0:
        return np.full(levels.size, np.nan)
    return np.append(interim, crossing(excess, 0.0, FARTHEST_Z))


def _limit_for(increment: float, paths: Paths, levels: FloatArray, look: int, *, sides: int) -> float:
    """Critical z at which ``paths`` leave with probability ``increment``."""

    def exits(limit: float) -> float:
        return sum(exits_at(paths, limit, levels, look, sides=sides))

    if increment <= exits(FARTHEST_Z):
        return inf
    nearest = 0.0 if sides == TWO_SIDED else -FARTHEST_Z
    return crossing(lambda limit: _log_ratio(exits(limit), increment), nearest, FARTHEST_Z)


def _log_ratio(probability: float, wanted: float) -> float:
    """Compare in logarithms, in which the tails are nearly straight."""
    return log(max(probability, SMALLEST)) - log(wanted)


def _spent_obrien_fleming(alpha: FloatArray, fraction: FloatArray) -> FloatArray:
    spent: FloatArray = 2 * special.ndtr(special.ndtri(alpha / 2) / np.sqrt(fraction))
    return spent


def _legal_spending(alpha: FloatArray, fraction: FloatArray) -> BoolArray:
    return (alpha > 0) & (alpha < 1) & (fraction > 0) & (fraction <= 1)


def _legal_increments(increments: FloatArray, levels: FloatArray, sides: int) -> bool:
    if increments.shape != levels.shape or not (increments >= 0).all():
        return False
    return bool(increments.sum() < sides / 2)
