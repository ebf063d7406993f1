"""Log likelihood ratio of an F statistic.

With ``a = (df1+df2)/2``, ``b = df1/2`` and ``x = (ncp/2) df1 F / (df2 + df1 F)`` the ratio of the non-central
to the central density is ``exp(-ncp/2) 1F1(a; b; x)``: a mixture over ``j`` of ``(a)_j x^j / ((b)_j j!)``.

References
----------
NIST Digital Library of Mathematical Functions, 13.2 (series), 13.7 (large argument), 5.11 (Stirling).
"""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np
from scipy import special

from gatecheck.weigh.arrays import piecewise, rowwise
from gatecheck.weigh.chi2 import log_lr_chi2_rows
from gatecheck.weigh.gamma import HALF_LOG_TWO_PI, large_stirling_remainder, stirling_remainder
from gatecheck.weigh.t import log_lr_t_rows

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray

SMALL_RATIO = 0.05
SMALL_TERMS = 12
LARGE_X = 200.0
LARGE_MARGIN = 15.0
LARGE_TERMS = 30
# From this mode on the terms of the mixture vary slowly enough to be summed in strides.
LEAST_MODE = 80.0
# Below it rows with similar modes are summed together, for they need similar numbers of terms.
SERIES_MODES = (0.0, 5.0, 15.0, 35.0, LEAST_MODE)
# The trapezoidal rule errs by exp(-2 (pi NODES_PER_SIGMA)^2), and leaves out what lies beyond ten sigma.
NODES_PER_SIGMA = 1.4
NODES_EACH_SIDE = 15


def log_lr_f(f: ArrayLike, df1: ArrayLike, df2: ArrayLike, ncp: ArrayLike) -> FloatArray:
    """Natural log of the likelihood ratio, ``ncp`` against zero, of an F statistic as observed.

    Parameters
    ----------
    f : array_like
        The statistic, not negative.
    df1, df2 : array_like
        Degrees of freedom of numerator and error, above zero; ``df2`` infinite: chi-squared over ``df1``.
    ncp : array_like
        Non-centrality under the alternative, not negative.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain.
    """
    return rowwise(log_lr_f_rows, _legal, f, df1, df2, ncp)


def observed_f(f: ArrayLike, df1: ArrayLike, df2: ArrayLike) -> FloatArray:
    """Log likelihood ratio at the effect as observed: ``ncp = df1 F``, so that ``df1 = 1`` equals t."""
    return rowwise(
        lambda f, df1, df2: log_lr_f_rows(f, df1, df2, df1 * f),
        lambda f, df1, df2: _legal(f, df1, df2, df1 * f),
        f,
        df1,
        df2,
    )


def log_lr_f_rows(f: FloatArray, df1: FloatArray, df2: FloatArray, ncp: FloatArray) -> FloatArray:
    """Compute rows known to be legal."""
    single = df1 == 1
    chi2 = np.isinf(df2) & ~single
    return piecewise(
        [
            (single, _as_t),
            (chi2, lambda f, df1, _, ncp: log_lr_chi2_rows(df1 * f, df1, ncp)),
            (~single & ~chi2, _general),
        ],
        f,
        df1,
        df2,
        ncp,
    )


def _as_t(f: FloatArray, _: FloatArray, df2: FloatArray, ncp: FloatArray) -> FloatArray:
    return log_lr_t_rows(np.sqrt(f), df2, np.sqrt(ncp), np.zeros(f.shape, dtype=np.bool_))


def _general(f: FloatArray, df1: FloatArray, df2: FloatArray, ncp: FloatArray) -> FloatArray:
    a, b = (df1 + df2) / 2, df1 / 2
    odds = df1 / df2 * f
    x = ncp / 2 / (1 + 1 / odds)
    mode = _mode(a, b, x)
    # What -ncp/2 and x leave of each other, without their difference.
    left = -ncp / 2 / (1 + odds)
    small = a * x < SMALL_RATIO * b
    large = ~small & (x > LARGE_X) & (x > (a + LARGE_MARGIN) ** 2)
    rest = ~small & ~large
    pieces = [(small, _small_argument), (large, _large_argument), (rest & (mode >= LEAST_MODE), _by_mixture)]
    for least, above in pairwise(SERIES_MODES):
        pieces.append((rest & (mode >= least) & (mode < above), _middle_argument))
    return piecewise(pieces, a, b, x, left, mode, ncp)


def _mode(a: FloatArray, b: FloatArray, x: FloatArray) -> FloatArray:
    """Return the positive root of ``j (b + j) = (a + j) x``, where successive terms are equal."""
    excess = (x - b) / 2
    root = np.hypot(excess, np.sqrt(a * x))
    return np.where(excess > 0, excess + root, a * x / (root - excess))


def _small_argument(
    a: FloatArray, b: FloatArray, x: FloatArray, _left: FloatArray, _mode: FloatArray, ncp: FloatArray
) -> FloatArray:
    total, term = np.zeros_like(x), np.ones_like(x)
    for j in range(SMALL_TERMS):
        term *= (a + j) * x / ((b + j) * (j + 1))
        total += term
    return -ncp / 2 + np.log1p(total)


def _middle_argument(
    a: FloatArray, b: FloatArray, x: FloatArray, _left: FloatArray, mode: FloatArray, ncp: FloatArray
) -> FloatArray:
    """Sum the series; the library's 1F1 overflows here where ``a`` is next to a large ``b``."""
    # Beyond the mode the terms fall at least as fast as those of a Poisson distribution with that mean.
    furthest = float(mode.max())
    total, term = np.zeros_like(x), np.ones_like(x)
    for j in range(int(furthest + 10 * furthest**0.5 + 20)):
        term *= (a + j) * x / ((b + j) * (j + 1))
        total += term
    return -ncp / 2 + np.log1p(total)


def _large_argument(
    a: FloatArray, b: FloatArray, x: FloatArray, left: FloatArray, _mode: FloatArray, _ncp: FloatArray
) -> FloatArray:
    total, term = np.ones_like(x), np.ones_like(x)
    for s in range(LARGE_TERMS):
        term *= (b - a + s) * (1 - a + s) / ((s + 1) * x)
        total += term
    scale: FloatArray = special.gammaln(b) - special.gammaln(a)
    return left + (a - b) * np.log(x) + scale + np.log(total)


def _by_mixture(
    a: FloatArray, b: FloatArray, x: FloatArray, left: FloatArray, mode: FloatArray, _ncp: FloatArray
) -> FloatArray:
    """Sum the mixture in strides around its mode, from which all is measured: large parts drop out."""
    top = (
        left
        + (a * x / mode - b)
        + (a - 0.5) * np.log1p(mode / a)
        - (b - 0.5) * np.log1p(mode / b)
        - np.log(mode) / 2
        - HALF_LOG_TWO_PI
        + (large_stirling_remainder(a + mode) - stirling_remainder(a))
        - (large_stirling_remainder(b + mode) - stirling_remainder(b))
        - large_stirling_remainder(mode)
    )
    stride = 1 / np.sqrt(1 / mode + 1 / (b + mode) - 1 / (a + mode)) / NODES_PER_SIGMA
    total = np.zeros_like(x)
    for node in range(-NODES_EACH_SIDE, NODES_EACH_SIDE + 1):
        # Where this holds a node back, the mixture has long died away.
        step = np.maximum(node * stride, 1 - mode)
        total += np.exp(step + _rise(a + mode, step, -0.5) - _rise(b + mode, step, -0.5) - _rise(mode, step, 0.5))
    remainders = _brief(a + mode) - _brief(b + mode) - _brief(mode)
    return top - remainders + np.log(total * stride)


def _rise(z: FloatArray, step: FloatArray, shift: float) -> FloatArray:
    """Rise of ``log Gamma`` from ``z`` to ``z + step``, less ``step log z - step`` and a constant.

    A shift of -1/2 belongs to ``Gamma(z)``, of 1/2 to ``Gamma(z + 1)``.
    """
    upper = z + step
    return (upper + shift) * np.log1p(step / z) + _brief(upper)


def _brief(z: FloatArray) -> FloatArray:
    return large_stirling_remainder(z, terms=3)


def _legal(f: FloatArray, df1: FloatArray, df2: FloatArray, ncp: FloatArray) -> BoolArray:
    sizes = (f >= 0) & (df1 > 0) & (df2 > 0) & (ncp >= 0)
    return sizes & np.isfinite(f) & np.isfinite(df1) & np.isfinite(ncp)
