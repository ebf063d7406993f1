"""What Stirling's formula leaves out of the logarithm of the gamma function."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy import special

from gatecheck.weigh.arrays import piecewise, polynomial

if TYPE_CHECKING:
    from gatecheck.weigh.arrays import FloatArray

HALF_LOG_TWO_PI = float(np.log(2 * np.pi)) / 2
LEAST_FOR_SERIES = 10.0
# B_{2m} / (2m (2m-1)), m = 1, 2, ...: NIST Digital Library of Mathematical Functions, 5.11.1.
SERIES = (1 / 12, -1 / 360, 1 / 1260, -1 / 1680, 1 / 1188, -691 / 360360, 1 / 156)


def stirling_remainder(z: FloatArray) -> FloatArray:
    """Compute ``log Gamma(z) - (z - 1/2) log z + z - log(2 pi)/2`` for ``z > 0`` (one-dimensional)."""
    large = z >= LEAST_FOR_SERIES
    return piecewise([(large, large_stirling_remainder), (~large, _by_log_gamma)], z)


def large_stirling_remainder(z: FloatArray, terms: int = len(SERIES)) -> FloatArray:
    """Compute the same where ``z`` is at least 10 (with three terms: at least 50)."""
    inverse = 1 / z
    return inverse * polynomial(SERIES[:terms], inverse * inverse)


def _by_log_gamma(z: FloatArray) -> FloatArray:
    return special.gammaln(z) - (z - 0.5) * np.log(z) + z - HALF_LOG_TWO_PI
