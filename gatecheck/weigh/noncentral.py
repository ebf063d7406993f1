"""Tail areas of t, chi-squared and F under an effect, and of a correlation: no digits lost in either tail.

The non-central density is the central one times the likelihood ratio, which is exact and never overflows. The
tail that lies away from the bulk is the integral of that density; the other tail is what it leaves of one. The
density is smooth in ``asinh(t / sqrt(df))``, in ``log x`` and in ``atanh(r)``, where a rule of doubly exponential
steps serves every width at once.

References
----------
Takahasi, H. & Mori, M. (1974). Double exponential formulas for numerical integration. Publications of the
Research Institute for Mathematical Sciences 9, 721-741 (the rule; from memory).
Hotelling, H. (1953). New light on the correlation coefficient and its transforms. Journal of the Royal
Statistical Society B 15, 193-232 (density of the correlation; from memory).
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy import special

from gatecheck.weigh.arrays import piecewise, rowwise
from gatecheck.weigh.chi2 import log_lr_chi2_rows
from gatecheck.weigh.f import log_lr_f_rows
from gatecheck.weigh.gamma import HALF_LOG_TWO_PI, stirling_remainder
from gatecheck.weigh.t import log_lr_t_rows
from gatecheck.weigh.tails import log_density_of_log_chi2, log_density_of_log_f

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray

    LogDensity = Callable[..., FloatArray]

# Far enough that a heavy tail beyond a narrow bulk is not cut off.
STEP = 0.06
STEPS = np.arange(-3.6, 6.4, STEP)
POINTS = np.exp(STEPS - np.exp(-STEPS))
WEIGHTS = STEP * POINTS * (1 + np.exp(-STEPS))
# Widths between which the density falls by a factor of e, and the halvings of their ratio's logarithm.
LEAST_WIDTH, MOST_WIDTH = 1e-10, 100.0
HALVINGS = 6
# Beyond it squares and exponentials overflow, and the densities hold nothing there.
FARTHEST = 340.0
LEAST_X = 1e-300
LOG_TWO = float(np.log(2.0))
LOG_PI = float(np.log(np.pi))
FEWEST_PAIRS = 3


def upper_tail_t(t: ArrayLike, df: ArrayLike, ncp: ArrayLike) -> FloatArray:
    """Probability that non-central t is at least ``t``.

    Parameters
    ----------
    t : array_like
        Any finite number.
    df : array_like
        Degrees of freedom, above zero, not necessarily whole; infinity means the normal distribution.
    ncp : array_like
        Non-centrality, of either sign.

    Returns
    -------
    ndarray of float64
        Broadcast shape, right in its relative digits down to the smallest double; nan outside the domain.
    """
    return rowwise(_upper_t, _legal_t, t, df, ncp)


def lower_tail_t(t: ArrayLike, df: ArrayLike, ncp: ArrayLike) -> FloatArray:
    """Probability that non-central t is at most ``t``; arguments as of :func:`upper_tail_t`."""
    return rowwise(lambda t, df, ncp: _upper_t(-t, df, -ncp), _legal_t, t, df, ncp)


def upper_tail_chi2(x: ArrayLike, df: ArrayLike, ncp: ArrayLike) -> FloatArray:
    """Probability that non-central chi-squared is at least ``x >= 0``, ``df > 0``, ``ncp >= 0``; else nan."""
    return rowwise(lambda *columns: _chi2_tail(*columns, upper=True), _legal_chi2, x, df, ncp)


def lower_tail_chi2(x: ArrayLike, df: ArrayLike, ncp: ArrayLike) -> FloatArray:
    """Probability that non-central chi-squared is at most ``x``; domain as of :func:`upper_tail_chi2`."""
    return rowwise(lambda *columns: _chi2_tail(*columns, upper=False), _legal_chi2, x, df, ncp)


def upper_tail_f(f: ArrayLike, df1: ArrayLike, df2: ArrayLike, ncp: ArrayLike) -> FloatArray:
    """Probability that non-central F is at least ``f >= 0``; ``df1``, ``df2`` above zero and finite, ``ncp >= 0``.

    Outside the domain nan.
    """
    return rowwise(lambda *columns: _f_tail(*columns, upper=True), _legal_f, f, df1, df2, ncp)


def lower_tail_f(f: ArrayLike, df1: ArrayLike, df2: ArrayLike, ncp: ArrayLike) -> FloatArray:
    """Probability that non-central F is at most ``f``; domain as of :func:`upper_tail_f`."""
    return rowwise(lambda *columns: _f_tail(*columns, upper=False), _legal_f, f, df1, df2, ncp)


def upper_tail_r(r: ArrayLike, n: ArrayLike, rho: ArrayLike) -> FloatArray:
    """Probability that the correlation of ``n`` bivariate normal pairs is at least ``r``.

    Parameters
    ----------
    r, rho : array_like
        Correlation of the sample and of the population, strictly between -1 and 1.
    n : array_like
        Number of pairs, at least 3.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain.
    """
    return rowwise(_upper_r, _legal_r, r, n, rho)


def log_gamma_half_step(a: FloatArray) -> FloatArray:
    """Compute ``log Gamma(a + 1/2) - log Gamma(a)`` for ``a > 0`` (one-dimensional), right for large ``a``."""
    powers = a * np.log1p(0.5 / a) - 0.5 + np.log(a) / 2
    return powers + stirling_remainder(a + 0.5) - stirling_remainder(a)


def _upper_t(t: FloatArray, df: FloatArray, ncp: FloatArray) -> FloatArray:
    normal, above = np.isinf(df), t >= ncp
    return piecewise(
        [
            (normal, lambda t, _, ncp: special.ndtr(ncp - t)),
            (
                ~normal & above,
                lambda t, df, ncp: _integral(_log_density_t, 1, np.arcsinh(t / np.sqrt(df)), df, ncp),
            ),
            (
                ~normal & ~above,
                lambda t, df, ncp: 1 - _integral(_log_density_t, -1, np.arcsinh(t / np.sqrt(df)), df, ncp),
            ),
        ],
        t,
        df,
        ncp,
    )


def _chi2_tail(x: FloatArray, df: FloatArray, ncp: FloatArray, *, upper: bool) -> FloatArray:
    return _away_from_bulk(_log_density_chi2, x >= df + ncp, upper, x, df, ncp)


def _f_tail(f: FloatArray, df1: FloatArray, df2: FloatArray, ncp: FloatArray, *, upper: bool) -> FloatArray:
    return _away_from_bulk(_log_density_f, f * df1 >= df1 + ncp, upper, f, df1, df2, ncp)


def _away_from_bulk(
    log_density: LogDensity, above: BoolArray, upper: bool, x: FloatArray, *parameters: FloatArray
) -> FloatArray:
    def one_way(direction: int) -> Callable[..., FloatArray]:
        def rows(x: FloatArray, *parameters: FloatArray) -> FloatArray:
            tail = _integral(log_density, direction, np.log(np.maximum(x, LEAST_X)), *parameters)
            return tail if upper == (direction > 0) else 1 - tail

        return rows

    return piecewise([(above, one_way(1)), (~above, one_way(-1))], x, *parameters)


def _upper_r(r: FloatArray, n: FloatArray, rho: FloatArray) -> FloatArray:
    above = r >= rho
    return piecewise(
        [
            (above, lambda r, n, rho: _integral(_log_density_r, 1, np.arctanh(r), n, rho)),
            (~above, lambda r, n, rho: 1 - _integral(_log_density_r, -1, np.arctanh(r), n, rho)),
        ],
        r,
        n,
        rho,
    )


def _integral(log_density: LogDensity, direction: int, start: FloatArray, *parameters: FloatArray) -> FloatArray:
    """Integrate from ``start`` to infinity of the sign of ``direction``."""
    width = _width(log_density, direction, start, *parameters)
    points = start[:, None] + direction * width[:, None] * POINTS
    within = np.clip(points, -FARTHEST, FARTHEST).ravel()
    values = log_density(within, *(np.repeat(parameter, POINTS.size) for parameter in parameters))
    total: FloatArray = width * (np.exp(values).reshape(points.shape) * WEIGHTS).sum(axis=1)
    return total


def _width(log_density: LogDensity, direction: int, start: FloatArray, *parameters: FloatArray) -> FloatArray:
    """Find roughly how far the density falls by a factor of e."""
    at_start = log_density(start, *parameters)
    low = np.full_like(start, np.log(LEAST_WIDTH))
    high = np.full_like(start, np.log(MOST_WIDTH))
    for _ in range(HALVINGS):
        middle = (low + high) / 2
        there = np.clip(start + direction * np.exp(middle), -FARTHEST, FARTHEST)
        short = at_start - log_density(there, *parameters) < 1
        low, high = np.where(short, middle, low), np.where(short, high, middle)
    return np.exp((low + high) / 2)


def _log_density_t(y: FloatArray, df: FloatArray, ncp: FloatArray) -> FloatArray:
    """Log density of ``asinh(t / sqrt(df))``."""
    one_sided = np.ones(y.shape, dtype=np.bool_)
    central = log_gamma_half_step(df / 2) - LOG_PI / 2 - df * _log_cosh(y)
    return central + log_lr_t_rows(np.sqrt(df) * np.sinh(y), df, ncp, one_sided)


def _log_density_chi2(y: FloatArray, df: FloatArray, ncp: FloatArray) -> FloatArray:
    return log_density_of_log_chi2(y - LOG_TWO, df / 2) + log_lr_chi2_rows(np.exp(y), df, ncp)


def _log_density_f(y: FloatArray, df1: FloatArray, df2: FloatArray, ncp: FloatArray) -> FloatArray:
    return log_density_of_log_f(y, df1 / 2, df2 / 2) + log_lr_f_rows(np.exp(y), df1, df2, ncp)


def _log_density_r(y: FloatArray, n: FloatArray, rho: FloatArray) -> FloatArray:
    """Log density of ``atanh(r)``."""
    r = np.tanh(y)
    scale = np.log(n - 2) - log_gamma_half_step(n - 1) - HALF_LOG_TWO_PI
    powers = (n - 1) / 2 * np.log1p(-rho * rho) - (n - 2) * _log_cosh(y) - (n - 1.5) * np.log1p(-rho * r)
    log_density: FloatArray = scale + powers + np.log(special.hyp2f1(0.5, 0.5, n - 0.5, (1 + rho * r) / 2))
    return log_density


def _log_cosh(y: FloatArray) -> FloatArray:
    size = np.abs(y)
    near = np.sinh(np.minimum(size, 1.0))
    far: FloatArray = size + np.log1p(np.exp(-2 * size)) - LOG_TWO
    return np.where(size < 1, np.log1p(near * near) / 2, far)


def _legal_t(t: FloatArray, df: FloatArray, ncp: FloatArray) -> BoolArray:
    return np.isfinite(t) & (df > 0) & np.isfinite(ncp)


def _legal_chi2(x: FloatArray, df: FloatArray, ncp: FloatArray) -> BoolArray:
    return (x >= 0) & np.isfinite(x) & (df > 0) & np.isfinite(df) & (ncp >= 0) & np.isfinite(ncp)


def _legal_f(f: FloatArray, df1: FloatArray, df2: FloatArray, ncp: FloatArray) -> BoolArray:
    return _legal_chi2(f, df1, ncp) & (df2 > 0) & np.isfinite(df2)


def _legal_r(r: FloatArray, n: FloatArray, rho: FloatArray) -> BoolArray:
    return (np.abs(r) < 1) & (n >= FEWEST_PAIRS) & np.isfinite(n) & (np.abs(rho) < 1)
