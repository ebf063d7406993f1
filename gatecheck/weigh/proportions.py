"""Bayes factor of two proportions from their counts, under conjugate beta priors, in logarithms.

Under the alternative both proportions are drawn from the same beta distribution, each by itself; under no effect
one proportion is drawn for both groups. The factor is a ratio of beta functions::

    B(a+k1, b+n1-k1) B(a+k2, b+n2-k2) / [ B(a, b) B(a+k1+k2, b+n1+n2-k1-k2) ]

Their logarithms grow with the counts and would cancel; by Stirling's formula the parts that grow make up the
divergence of the groups from the pool, which is summed as such.

References
----------
Jeffreys, H. (1961). Theory of Probability, 3rd edition, Oxford, section 5.1 (contingency; from memory).
NIST Digital Library of Mathematical Functions, 5.11 and 5.12 (Stirling's formula, the beta function).
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy import special

from gatecheck.weigh.arrays import polynomial, rowwise
from gatecheck.weigh.gamma import HALF_LOG_TWO_PI, stirling_remainder

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray

# (1+u) log(1+u) - u is u^2 times the sum of (-u)^j / ((j+1)(j+2)).
SMALL_DEVIATION = 0.1
SERIES = tuple((-1) ** j / ((j + 1) * (j + 2)) for j in range(15))
LARGEST_COUNT = 1e100


def log_bf_proportions(
    successes: ArrayLike,
    trials: ArrayLike,
    successes2: ArrayLike,
    trials2: ArrayLike,
    *,
    prior_successes: ArrayLike = 1.0,
    prior_failures: ArrayLike = 1.0,
) -> FloatArray:
    """Natural log of the Bayes factor, two different proportions against a common one.

    Parameters
    ----------
    successes, trials : array_like
        Counts of the first group, ``0 <= successes <= trials``.
    successes2, trials2 : array_like
        Counts of the second group.
    prior_successes, prior_failures : array_like
        Parameters of the beta prior, above zero; 1 and 1 make it uniform.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain.
    """
    columns = (successes, trials, successes2, trials2, prior_successes, prior_failures)
    return rowwise(_rows, _legal, *columns)


def _rows(*columns: FloatArray) -> FloatArray:
    k, n, k2, n2, a, b = columns
    pooled = (a + (k + k2), b + ((n - k) + (n2 - k2)))
    groups = ((a + k, b + (n - k)), (a + k2, b + (n2 - k2)))
    total = pooled[0] + pooled[1]
    shares = (pooled[0] / total, pooled[1] / total)
    apart = sum((_divergence(group, shares) for group in groups), np.zeros_like(k))
    rest = _slow_part(*groups[0]) + _slow_part(*groups[1]) - _slow_part(*pooled)
    prior: FloatArray = a * np.log(shares[0]) + b * np.log(shares[1]) - special.betaln(a, b)
    return apart + rest + prior


def _divergence(
    group: tuple[FloatArray, FloatArray],
    shares: tuple[FloatArray, FloatArray],
) -> FloatArray:
    """Twice it is the deviance of one group's counts from those that the pooled shares predict."""
    size = group[0] + group[1]
    # Failures deviate by as much, the other way.
    deviation = group[0] * shares[1] - group[1] * shares[0]
    return _excess(deviation, size * shares[0]) + _excess(-deviation, size * shares[1])


def _excess(deviation: FloatArray, expected: FloatArray) -> FloatArray:
    """Compute ``x log(x/e) - (x-e)`` of a count ``x = e + deviation``."""
    u = deviation / expected
    small = np.abs(u) < SMALL_DEVIATION
    series = u * u * polynomial(SERIES, np.where(small, u, 0.0))
    return expected * np.where(small, series, special.xlog1py(1 + u, u) - u)


def _slow_part(x: FloatArray, y: FloatArray) -> FloatArray:
    """Log of the beta function less ``x log(x/(x+y)) + y log(y/(x+y))``."""
    total = x + y
    remainders = stirling_remainder(x) + stirling_remainder(y) - stirling_remainder(total)
    return HALF_LOG_TWO_PI + (np.log(total) - np.log(x) - np.log(y)) / 2 + remainders


def _legal(*columns: FloatArray) -> BoolArray:
    k, n, k2, n2, a, b = columns
    counts = (k >= 0) & (k <= n) & (k2 >= 0) & (k2 <= n2)
    small = (n < LARGEST_COUNT) & (n2 < LARGEST_COUNT) & (a < LARGEST_COUNT) & (b < LARGEST_COUNT)
    return counts & small & (a > 0) & (b > 0)
