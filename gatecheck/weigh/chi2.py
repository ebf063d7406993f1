"""Log likelihood ratio of a chi-squared statistic.

The ratio of the non-central to the central density is ``exp(-ncp/2) 0F1(; df/2; ncp x/4)``, a modified Bessel
function of order ``v = df/2 - 1`` without its power. Debye's expansion gives its logarithm for orders from 20
on; lower orders follow from two neighbours above by a recursion of positive terms.

References
----------
NIST Digital Library of Mathematical Functions, sections 10.25 and 10.29 (series and recursion), 10.40 (large
argument), 10.41 (Debye's expansion).
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy import special

from gatecheck.weigh.arrays import piecewise, polynomial, rowwise
from gatecheck.weigh.polynomials import debye_terms

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray

# The argument of 0F1 up to which its series is summed.
SMALL_W = 4.0
SMALL_TERMS = 24
LEAST_ORDER = 20.0
DEBYE_TERMS = 9
# Lifts the least order, just above -1, to the orders where Debye's expansion holds.
STEPS_ABOVE = 21
LARGE_Z = 1e4
LARGE_TERMS = 10


def log_lr_chi2(x: ArrayLike, df: ArrayLike, ncp: ArrayLike) -> FloatArray:
    """Natural log of the likelihood ratio, ``ncp`` against zero, of a chi-squared statistic as observed.

    Parameters
    ----------
    x : array_like
        The statistic, not negative.
    df : array_like
        Degrees of freedom, above zero.
    ncp : array_like
        Non-centrality under the alternative, not negative (the sum of squared means).

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain.
    """
    return rowwise(log_lr_chi2_rows, _legal, x, df, ncp)


def observed_chi2(x: ArrayLike, df: ArrayLike) -> FloatArray:
    """Log likelihood ratio at the effect as observed: ``ncp = x``, so that one degree of freedom equals z."""
    return rowwise(lambda x, df: log_lr_chi2_rows(x, df, x), lambda x, df: _legal(x, df, x), x, df)


def log_lr_chi2_rows(x: FloatArray, df: FloatArray, ncp: FloatArray) -> FloatArray:
    """Compute rows known to be legal."""
    v = df / 2 - 1
    z = np.sqrt(ncp) * np.sqrt(x)
    small = z * z < 4 * SMALL_W
    debye = ~small & (v >= LEAST_ORDER)
    low = ~small & ~debye
    large = low & (z > LARGE_Z)
    pieces = [(small, _log_series), (debye, _log_debye), (large, _log_large), (low & ~large, _log_recursion)]
    return -ncp / 2 + piecewise(pieces, v, z)


def _log_series(v: FloatArray, z: FloatArray) -> FloatArray:
    w = z * z / 4
    total, term = np.zeros_like(w), np.ones_like(w)
    for j in range(SMALL_TERMS):
        term *= w / ((v + 1 + j) * (j + 1))
        total += term
    return np.log1p(total)


def _log_debye(v: FloatArray, z: FloatArray) -> FloatArray:
    """Log of ``0F1(; v+1; z^2/4)`` for large ``v``."""
    zeta = z / v
    # One more than h is the root of 1 + zeta^2.
    h = zeta * (zeta / (1 + np.hypot(1.0, zeta)))
    p = 1 / (1 + h)
    inverse = 1 / v
    step, square = p * inverse, p * p
    terms = debye_terms(DEBYE_TERMS)
    varying, constant = np.zeros_like(v), np.zeros_like(v)
    for start, *rest in reversed(terms):
        varying += polynomial(rest, square)
        varying *= step
        constant += start
        constant *= inverse
    logarithm: FloatArray = v * (h - np.log1p(h / 2)) - np.log1p(h) / 2 + (varying + constant)
    return logarithm


def _log_recursion(v: FloatArray, z: FloatArray) -> FloatArray:
    """Log of the same for small ``v``: ``F(b-1) = F(b) + w F(b+1) / (b (b-1))``, downward."""
    w = z * z / 4
    b = v + 1 + STEPS_ABOVE
    start = _log_debye(b - 1, z)
    upper = np.exp(_log_debye(b, z) - start)
    current = np.ones_like(w)
    free = np.empty_like(w)
    for _ in range(STEPS_ABOVE):
        np.subtract(b, 1, out=free)
        b *= free
        np.divide(w, b, out=b)
        b *= upper
        b += current
        upper, current, b, free = current, b, free, upper
    return start + np.log(current)


def _log_large(v: FloatArray, z: FloatArray) -> FloatArray:
    inverse = 1 / (8 * z)
    total, term = np.ones_like(z), np.ones_like(z)
    for j in range(1, LARGE_TERMS):
        term *= -(4 * v * v - (2 * j - 1) ** 2) / j * inverse
        total += term
    scale: FloatArray = special.gammaln(v + 1) - (v + 0.5) * np.log(z / 2) - np.log(4 * np.pi) / 2
    return z + scale + np.log(total)


def _legal(x: FloatArray, df: FloatArray, ncp: FloatArray) -> BoolArray:
    return np.isfinite(x) & np.isfinite(df) & np.isfinite(ncp) & (x >= 0) & (df > 0) & (ncp >= 0)
