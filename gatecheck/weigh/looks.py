"""How often repeated looks at growing data cross a boundary: exact, by recursive numerical integration.

The score ``S_k = Z_k sqrt(I_k)`` is a sum of independent normal steps with variance ``I_k - I_{k-1}``. The
density of the paths that go on is carried from look to look on the Gauss-Legendre nodes of the region that
the boundary leaves open. The weights turn densities into masses, so that every integral is a plain sum.

References
----------
Armitage, P., McPherson, C. K. & Rowe, B. C. (1969). Repeated significance tests on accumulating data.
Journal of the Royal Statistical Society A 132(2), 235-244 (the recursion and Table 2).
Jennison, C. & Turnbull, B. W. (2000). Group Sequential Methods with Applications to Clinical Trials.
Chapman & Hall/CRC, chapter 19 (numerical integration; from memory).
"""

from __future__ import annotations

from functools import cache
from math import ceil, inf, nan, pi, sqrt
from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from scipy import special

from gatecheck.weigh.arrays import rowwise
from gatecheck.weigh.roots import crossing

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray

ONE_SIDED, TWO_SIDED = 1, 2
MOST_LOOKS = 1000
# Steps of a smaller share of the full information would need thousands of nodes.
LEAST_STEP = 2.0**-10
# Beyond so many standard deviations of the unstopped score lies less than 1e-32 of it.
REACH = 12.0
LEAST_NODES, NODES_AT_LEAST_BESIDE, NODES_PER_STEP = 32, 8, 4.5
# Counts of nodes are multiples of this, lest a search for a boundary needs new nodes at each trial.
NODES_TOGETHER = 16
MOST_MASS_LOST = 1e-9
# In standard deviations at the last look.
MOST_DRIFT = 1e4
# Standard deviations above an upper bound, for an interval that is never empty.
ROOM = 1.0


class Paths(NamedTuple):
    """The paths that no look has stopped yet: at which scores, and with what probability at each."""

    score: FloatArray
    mass: FloatArray


def exit_probabilities(
    boundaries: ArrayLike, information: ArrayLike, drift: float = 0.0, *, sides: int = TWO_SIDED
) -> FloatArray:
    """Probability to cross the boundary for the first time at each look.

    Parameters
    ----------
    boundaries : array_like, shape (k,)
        Critical z of each look; not negative where two-sided, infinite where a look cannot stop.
    information : array_like, shape (k,)
        Information at each look, in any unit: above zero, rising by at least ``2**-10`` of the last.
    drift : float
        ``Z_k`` has mean ``drift * sqrt(information_k)`` and variance 1.
    sides : {1, 2}
        Whether a look stops at ``Z >= boundary`` or at ``|Z| >= boundary``.

    Returns
    -------
    ndarray of float64, shape (k,)
        All nan where the looks are outside the domain.

    Raises
    ------
    ArithmeticError
        The integration lost or made probability.
    """
    upper, lower = exit_probabilities_by_side(boundaries, information, drift, sides=sides)
    either: FloatArray = upper + lower
    return either


def exit_probabilities_by_side(
    boundaries: ArrayLike, information: ArrayLike, drift: float = 0.0, *, sides: int = TWO_SIDED
) -> FloatArray:
    """As :func:`exit_probabilities`, shape (2, k): over the upper boundary, then under the lower one."""
    limits = np.asarray(boundaries, dtype=np.float64)
    exits = np.full((2, limits.size), np.nan)
    levels, drift = fractions(information), float(drift) * full_deviation(information)
    if not (_legal_boundaries(limits, sides) and limits.shape == levels.shape and abs(drift) <= MOST_DRIFT):
        return exits
    paths = START
    for look, limit in enumerate(limits):
        exits[:, look] = exits_at(paths, limit, levels, look, drift, sides=sides)
        paths = going_on(paths, limit, levels, look, drift, sides=sides)
        _assert_whole(float(exits[:, : look + 1].sum() + paths.mass.sum()))
    return exits


def type_one_error(boundaries: ArrayLike, information: ArrayLike, *, sides: int = TWO_SIDED) -> float:
    """Probability that any look crosses the boundary where there is no effect; arguments as above."""
    return _any_of(exit_probabilities(boundaries, information, sides=sides))


def power_of_looks(boundaries: ArrayLike, information: ArrayLike, drift: float, *, sides: int = TWO_SIDED) -> float:
    """Probability that any look crosses the upper boundary at ``drift``.

    A crossing in the wrong direction is no success and is not counted, unlike in :func:`exit_probabilities`.
    """
    return _any_of(exit_probabilities_by_side(boundaries, information, drift, sides=sides)[0])


def drift_needed(
    boundaries: ArrayLike, information: ArrayLike, power_wanted: float, *, sides: int = TWO_SIDED
) -> float:
    """Drift at which :func:`power_of_looks` is ``power_wanted``.

    Not a number where the power wanted is below that at no drift or not below 1, or the looks are outside the
    domain. At the drift where one look alone would have that power, all together have more: there the search ends.
    """
    without_effect = power_of_looks(boundaries, information, 0.0, sides=sides)
    if not without_effect <= power_wanted < 1:
        return nan
    levels = fractions(information)
    alone = np.maximum(boundaries, 0.0) + special.ndtri(max(power_wanted, 1 / 2)) + ROOM
    highest = float((alone / np.sqrt(levels)).min())
    if not highest <= MOST_DRIFT:
        return nan
    standard = crossing(
        lambda drift: power_of_looks(boundaries, levels, drift, sides=sides) - power_wanted, 0.0, highest
    )
    return standard / full_deviation(information)


def error_of_unplanned_looks(looks: ArrayLike, alpha: ArrayLike) -> FloatArray:
    """Type I error of equally spaced looks, each tested two-sided at ``alpha`` as if it were the only one.

    Parameters
    ----------
    looks : array_like
        How many looks, a whole number from 1 to 1000.
    alpha : array_like
        The nominal level of each, above 0 and below 1.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain.
    """
    return rowwise(_unplanned_rows, _legal_unplanned, looks, alpha)


def error_of_looks_taken(information: ArrayLike, alpha: float, *, sides: int = TWO_SIDED) -> float:
    """Type I error of looks at this information, each tested at ``alpha`` as if it were the only one.

    Parameters
    ----------
    information : array_like, shape (k,)
        As in :func:`exit_probabilities`, such as the number of units at each look.
    alpha : float
        The nominal level of each, above 0 and below 1.
    sides : {1, 2}
        Whether each is tested in one direction or in both.

    Returns
    -------
    float
        Not a number outside the domain.
    """
    if sides not in {ONE_SIDED, TWO_SIDED} or not 0 < alpha < 1:
        return nan
    limit = -float(special.ndtri(alpha / sides))
    return type_one_error(np.full(np.size(information), limit), information, sides=sides)


def apart(information: ArrayLike) -> FloatArray:
    """Of looks at rising information, those that stand far enough apart for the integration; the last always.

    Shape (m,), with m at most that of `information`; a look that is left out lies just before one that is kept.
    """
    levels = np.asarray(information, dtype=np.float64)
    kept = list(levels[-1:])
    for level in levels[-2::-1]:
        if kept[-1] - level >= LEAST_STEP * levels[-1]:
            kept.append(level)
    return np.array(kept[::-1])


def fractions(information: ArrayLike) -> FloatArray:
    """Information as shares of its last level; empty where these are no looks, or too close to each other."""
    levels = np.asarray(information, dtype=np.float64)
    if levels.ndim != 1 or not 1 <= levels.size <= MOST_LOOKS or not (np.isfinite(levels) & (levels > 0)).all():
        return np.empty(0)
    if not (np.diff(levels) > 0).all():
        return np.empty(0)
    shares = levels / levels[-1]
    return shares if (np.diff(shares) >= LEAST_STEP).all() else np.empty(0)


def full_deviation(information: ArrayLike) -> float:
    """Standard deviation of the score at the last look (legal information only; else anything)."""
    return float(np.sqrt(np.abs(np.ravel(information)[-1:]).sum()))


def exits_at(
    paths: Paths, limit: float, levels: FloatArray, look: int, drift: float = 0.0, *, sides: int
) -> tuple[float, float]:
    """Probability that ``paths`` leave at ``look`` over the critical z ``limit``, and under ``-limit``."""
    step, _ = _steps(levels, look)
    edge = limit * sqrt(levels[look])
    mean = paths.score + drift * step
    upper = paths.mass @ special.ndtr((mean - edge) / sqrt(step))
    lower = paths.mass @ special.ndtr((-edge - mean) / sqrt(step)) if sides == TWO_SIDED else 0.0
    return float(upper), float(lower)


def going_on(paths: Paths, limit: float, levels: FloatArray, look: int, drift: float = 0.0, *, sides: int) -> Paths:
    """Those of ``paths`` that ``look`` does not stop, at their new scores."""
    step, next_step = _steps(levels, look)
    deviation = sqrt(levels[look])
    mean, edge = drift * levels[look], limit * deviation
    low = mean - REACH * deviation
    high = max(min(edge, mean + REACH * deviation), low)
    if sides == TWO_SIDED:
        low = min(max(low, -edge), high)
    half = (high - low) / 2
    nodes, weights = _legendre(_node_count(half / sqrt(min(step, next_step))))
    score = low + half * (1 + nodes)
    distance = (score[:, None] - (paths.score + drift * step)) / sqrt(step)
    density = np.exp(-distance * distance / 2) @ paths.mass / sqrt(2 * pi * step)
    return Paths(score, half * weights * density)


START = Paths(np.zeros(1), np.ones(1))


def _any_of(exits: FloatArray) -> float:
    """Probability of any of the exits; of no looks nothing is known."""
    return float(exits.sum()) if exits.size else nan


def _unplanned_rows(looks: FloatArray, alpha: FloatArray) -> FloatArray:
    """One run to the largest number of looks serves all smaller ones at the same level."""
    result = np.empty(looks.size)
    for level in np.unique(alpha):
        rows = alpha == level
        most = int(looks[rows].max())
        limit = -special.ndtri(level / 2)
        spent = np.cumsum(exit_probabilities(np.full(most, limit), np.arange(1.0, most + 1)))
        result[rows] = spent[looks[rows].astype(np.intp) - 1]
    return result


def _legal_unplanned(looks: FloatArray, alpha: FloatArray) -> BoolArray:
    legal: BoolArray = (looks >= 1) & (looks <= MOST_LOOKS) & (looks == np.floor(looks)) & (alpha > 0) & (alpha < 1)
    return legal


def _legal_boundaries(limits: FloatArray, sides: int) -> bool:
    if sides not in {ONE_SIDED, TWO_SIDED} or not limits.size or np.isnan(limits).any():
        return False
    return sides == ONE_SIDED or bool((limits >= 0).all())


def _steps(levels: FloatArray, look: int) -> tuple[float, float]:
    """Information from the last look to this one, and from this one to the next (after the last: no end)."""
    before = levels[look - 1] if look else 0.0
    after = levels[look + 1] if look + 1 < levels.size else inf
    return float(levels[look] - before), float(after - levels[look])


def _node_count(half_width: float) -> int:
    """Nodes for a region of so many of the narrower neighbouring steps: errors fall to 1e-13 and below."""
    wanted = max(LEAST_NODES, NODES_AT_LEAST_BESIDE + NODES_PER_STEP * half_width)
    return NODES_TOGETHER * ceil(wanted / NODES_TOGETHER)


def _assert_whole(total: float) -> None:
    """What has left and what goes on is everything: too few nodes would show here."""
    if not abs(total - 1) <= MOST_MASS_LOST:
        raise ArithmeticError(f"the probabilities of the looks add up to {total!r} instead of 1")


@cache
def _legendre(count: int) -> tuple[FloatArray, FloatArray]:
    nodes, weights = np.polynomial.legendre.leggauss(count)
    return nodes.astype(np.float64), weights.astype(np.float64)
