"""The difference of two proportions by its score test, which stands where no unit or every unit has the event.

At each difference the variance is that of the proportions which fit the counts best under it. The difference is
compared with the standard error so made, N units in all counting as N - 1; all differences that the test does not
reject make up the interval.

References
----------
Miettinen, O. & Nurminen, M. (1985). Comparative analysis of two rates. Statistics in Medicine 4, 213-226 (from
memory; held against direct maximisation of the likelihood in the tests).
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from gatecheck.weigh.arrays import rowwise

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray

# So many halvings take an interval of length 2 below the last digit of its ends.
HALVINGS = 60


def score_z(
    events1: ArrayLike, n1: ArrayLike, events2: ArrayLike, n2: ArrayLike, difference: ArrayLike
) -> FloatArray:
    """Standardised distance of the observed difference of two proportions from a hypothetical one.

    Parameters
    ----------
    events1, n1, events2, n2 : array_like
        Units with the event and all units of the two groups, ``0 <= events <= n``, ``n > 0``.
    difference : array_like
        Hypothetical first proportion less the second, between -1 and 1; beyond, no counts are possible and the
        distance is infinite.

    Returns
    -------
    ndarray of float64
        Broadcast shape; positive where the observed difference is the greater one, nan outside the domain.
    """
    return rowwise(_score, _legal, events1, n1, events2, n2, difference)


def score_interval(
    events1: ArrayLike, n1: ArrayLike, events2: ArrayLike, n2: ArrayLike, critical: ArrayLike
) -> tuple[FloatArray, FloatArray]:
    """Least and greatest difference of two proportions with a `score_z` no further from zero than ``critical``.

    ``critical`` is above zero; other arguments as of :func:`score_z`.
    """
    columns = (events1, n1, events2, n2, critical)

    def legal(x1: FloatArray, n1: FloatArray, x2: FloatArray, n2: FloatArray, critical: FloatArray) -> BoolArray:
        return _legal(x1, n1, x2, n2, critical) & (critical > 0) & np.isfinite(critical)

    # The lower end is minus the upper end of the groups exchanged.
    lower = rowwise(lambda x1, n1, x2, n2, critical: -_greatest(x2, n2, x1, n1, critical), legal, *columns)
    return lower, rowwise(_greatest, legal, *columns)


def _greatest(x1: FloatArray, n1: FloatArray, x2: FloatArray, n2: FloatArray, critical: FloatArray) -> FloatArray:
    return _last_true(
        lambda difference: _score(x1, n1, x2, n2, difference) >= -critical, x1 / n1 - x2 / n2, np.ones_like(x1)
    )


def _score(x1: FloatArray, n1: FloatArray, x2: FloatArray, n2: FloatArray, difference: FloatArray) -> FloatArray:
    possible = np.clip(difference, -1.0, 1.0)

    def rising(second: FloatArray) -> BoolArray:
        """Whether the counts become more likely with a greater second proportion."""
        first = second + possible
        return x1 / first + x2 / second > (n1 - x1) / (1 - first) + (n2 - x2) / (1 - second)

    second = _last_true(rising, np.maximum(0.0, -possible), np.minimum(1.0, 1 - possible))
    first = np.clip(second + possible, 0.0, 1.0)
    variance = (first * (1 - first) / n1 + second * (1 - second) / n2) * (n1 + n2) / (n1 + n2 - 1)
    beyond = x1 / n1 - x2 / n2 - difference
    impossible = (np.abs(difference) > 1) | (variance == 0)
    return np.where(beyond == 0, 0.0, np.where(impossible, np.copysign(np.inf, beyond), beyond / np.sqrt(variance)))


def _last_true(holds: Callable[[FloatArray], BoolArray], low: FloatArray, high: FloatArray) -> FloatArray:
    """Halve towards the place from which on a condition that begins true no longer holds."""
    for _ in range(HALVINGS):
        middle = (low + high) / 2
        still = holds(middle)
        low, high = np.where(still, middle, low), np.where(still, high, middle)
    return (low + high) / 2


def _legal(x1: FloatArray, n1: FloatArray, x2: FloatArray, n2: FloatArray, last: FloatArray) -> BoolArray:
    counts = (x1 >= 0) & (x1 <= n1) & (n1 > 0) & (x2 >= 0) & (x2 <= n2) & (n2 > 0)
    return counts & np.isfinite(n1) & np.isfinite(n2) & ~np.isnan(last)
