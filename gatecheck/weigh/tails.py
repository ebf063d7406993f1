"""Logarithms of p values, right however small the p value is.

Down to 1e-17 the library's tail functions serve. Beyond, the tail is its density at the statistic times an
integral of a slowly varying function against ``exp(-v)``, for which 24 Gauss-Laguerre nodes suffice.
A two-sided t is an F on one degree of freedom.
"""

from __future__ import annotations

from functools import cache
from typing import TYPE_CHECKING

import numpy as np
from scipy import special

from gatecheck.weigh.arrays import piecewise, rowwise
from gatecheck.weigh.gamma import HALF_LOG_TWO_PI, stirling_remainder

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray

NODES = 24
LEAST_ORDINARY = 1e-17
HALF = 0.5
# From this logarithm of F on, F and F - 1 are the same number.
LARGE_LOG_F = 100.0
LOG_TWO = float(np.log(2.0))


def log_p_z(z: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Natural log of ``P(Z >= z)`` (one-sided) or of ``P(|Z| >= |z|)`` of a normal statistic."""
    return rowwise(log_p_z_rows, lambda z, _: np.isfinite(z), z, one_sided)


def log_p_t(t: ArrayLike, df: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Natural log of the p value of Student's t.

    Parameters
    ----------
    t : array_like
        The statistic; for one-sided rows signed so that the promised direction is positive.
    df : array_like
        Degrees of freedom, above zero; infinity means the normal distribution.
    one_sided : array_like of bool
        ``P(T >= t)`` where true, ``P(|T| >= |t|)`` where false.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain.
    """
    return rowwise(log_p_t_rows, lambda t, df, _: np.isfinite(t) & (df > 0), t, df, one_sided)


def log_p_chi2(x: ArrayLike, df: ArrayLike) -> FloatArray:
    """Natural log of the upper tail of chi-squared, ``x >= 0``, ``df > 0``; nan outside the domain."""
    return rowwise(log_p_chi2_rows, _legal_chi2, x, df)


def log_p_f(f: ArrayLike, df1: ArrayLike, df2: ArrayLike) -> FloatArray:
    """Natural log of the upper tail of F, ``f >= 0``, degrees of freedom above zero; nan outside the domain.

    ``df2`` infinite means chi-squared over ``df1``.
    """
    return rowwise(log_p_f_rows, _legal_f, f, df1, df2)


def log_p_z_rows(z: FloatArray, one_sided: BoolArray) -> FloatArray:
    """Compute rows known to be legal."""
    return np.where(one_sided, special.log_ndtr(-z), LOG_TWO + special.log_ndtr(-np.abs(z)))


def log_p_t_rows(t: FloatArray, df: FloatArray, one_sided: BoolArray) -> FloatArray:
    """Compute rows known to be legal."""
    both = log_p_of_log_t(np.log(np.abs(t)), df)
    upper = np.where(t >= 0, both - LOG_TWO, np.log1p(-np.exp(both) / 2))
    return np.where(one_sided, upper, both)


def log_p_of_log_t(log_size: FloatArray, df: FloatArray) -> FloatArray:
    """Two-sided log p from ``log |t|``, which may lie beyond the logarithm of the largest double."""
    normal = np.isinf(df)
    return piecewise(
        [
            (normal, lambda log_size, _: LOG_TWO + special.log_ndtr(-np.exp(log_size))),
            (~normal, _finite_log_p_t),
        ],
        log_size,
        df,
    )


def log_p_chi2_rows(x: FloatArray, df: FloatArray) -> FloatArray:
    """Compute rows known to be legal."""
    a, y = df / 2, x / 2
    upper = special.gammaincc(a, y)
    return piecewise(
        [
            (upper < LEAST_ORDINARY, _chi2_tail),
            (upper > HALF, lambda a, y, _: np.log1p(-special.gammainc(a, y))),
            ((upper >= LEAST_ORDINARY) & (upper <= HALF), lambda _a, _y, upper: np.log(upper)),
        ],
        a,
        y,
        upper,
    )


def log_p_f_rows(f: FloatArray, df1: FloatArray, df2: FloatArray) -> FloatArray:
    """Compute rows known to be legal."""
    return log_p_of_log_f(np.log(f), df1, df2)


def log_p_of_log_f(log_f: FloatArray, df1: FloatArray, df2: FloatArray) -> FloatArray:
    """Log p from ``log F``, which may lie beyond the logarithm of the largest double."""
    chi2 = np.isinf(df2)
    return piecewise(
        [(chi2, lambda log_f, df1, _: log_p_chi2_rows(df1 * np.exp(log_f), df1)), (~chi2, _finite_log_p_f)],
        log_f,
        df1,
        df2,
    )


def _finite_log_p_t(log_size: FloatArray, df: FloatArray) -> FloatArray:
    upper = 2 * special.stdtr(df, -np.exp(log_size))
    return _log_beta_tail(upper, 2 * log_size, np.full_like(df, 0.5), df / 2)


def _finite_log_p_f(log_f: FloatArray, df1: FloatArray, df2: FloatArray) -> FloatArray:
    a, b = df1 / 2, df2 / 2
    return _log_beta_tail(_beta_tail(log_f, a, b, special.betaincc, special.betainc), log_f, a, b)


def _log_beta_tail(upper: FloatArray, log_f: FloatArray, a: FloatArray, b: FloatArray) -> FloatArray:
    """Logarithm of ``upper``, the tail of F on ``2a`` and ``2b``, with all digits near 1 and far below."""
    return piecewise(
        [
            (upper < LEAST_ORDINARY, _f_tail),
            (upper > HALF, _log_by_lower_tail),
            ((upper >= LEAST_ORDINARY) & (upper <= HALF), lambda _l, _a, _b, upper: np.log(upper)),
        ],
        log_f,
        a,
        b,
        upper,
    )


def _log_by_lower_tail(log_f: FloatArray, a: FloatArray, b: FloatArray, _: FloatArray) -> FloatArray:
    return np.log1p(-_beta_tail(log_f, a, b, special.betainc, special.betaincc))


def _beta_tail(
    log_f: FloatArray,
    a: FloatArray,
    b: FloatArray,
    of_share: Callable[..., FloatArray],
    of_rest: Callable[..., FloatArray],
) -> FloatArray:
    """Tail of F by the incomplete beta function of ``aF/(b + aF)`` or of the rest, whichever is smaller."""
    odds = a / b * np.exp(log_f)
    low = odds < 1
    return piecewise(
        [
            (low, lambda odds, a, b: of_share(a, b, odds / (1 + odds))),
            (~low, lambda odds, a, b: of_rest(b, a, 1 / (1 + odds))),
        ],
        odds,
        a,
        b,
    )


def log_density_of_log_chi2(log_y: FloatArray, a: FloatArray) -> FloatArray:
    """Log density of ``log y``, ``y`` = half a chi-squared variable on ``2a`` degrees of freedom."""
    excess = np.expm1(log_y - np.log(a))
    exponent = a * ((log_y - np.log(a)) - excess)
    return exponent + np.log(a) / 2 - HALF_LOG_TWO_PI - stirling_remainder(a)


def log_density_of_log_f(log_f: FloatArray, a: FloatArray, b: FloatArray) -> FloatArray:
    """Log density of ``log F`` on ``2a`` and ``2b`` degrees of freedom."""
    share_a, share_b = a / (a + b), b / (a + b)
    exponent = -a * _log_one_plus(share_b, -log_f) - b * _log_one_plus(share_a, log_f)
    scale = (np.log(a) + np.log(share_b)) / 2 - HALF_LOG_TWO_PI
    return exponent + scale - (stirling_remainder(a) + stirling_remainder(b) - stirling_remainder(a + b))


def _log_one_plus(share: FloatArray, log_f: FloatArray) -> FloatArray:
    """Compute ``log(1 + share (F - 1))`` from ``log F``."""
    large = log_f > LARGE_LOG_F
    ordinary = np.log1p(share * np.expm1(np.minimum(log_f, LARGE_LOG_F)))
    return np.where(large, log_f + np.log(share), ordinary)


def _f_tail(log_f: FloatArray, a: FloatArray, b: FloatArray, _: FloatArray) -> FloatArray:
    """Deep tail of F on ``2a`` and ``2b``: with ``x = b/(b+aF)``, ``x^b (1-x)^(a-1) / B`` times an integral.

    The integral over ``s`` is of ``exp(-b s) ((1 - x e^-s)/(1-x))^(a-1)``; its rate at 0 scales the nodes.
    """
    odds = b / a * np.exp(-log_f)
    rate = b - (a - 1) * odds
    nodes, weights = _laguerre()
    total = np.zeros_like(log_f)
    for node, weight in zip(nodes, weights, strict=True):
        s = node / rate
        total += weight * np.exp(node - b * s + (a - 1) * np.log1p(-odds * np.expm1(-s)))
    return log_density_of_log_f(log_f, a, b) + np.log1p(odds) - np.log(rate) + np.log(total)


def _chi2_tail(a: FloatArray, y: FloatArray, _: FloatArray) -> FloatArray:
    """Deep tail of gamma: ``y^a e^-y / Gamma(a)`` times the integral of ``e^(-ys) (1+s)^(a-1)``."""
    rate = y - (a - 1)
    nodes, weights = _laguerre()
    total = np.zeros_like(y)
    for node, weight in zip(nodes, weights, strict=True):
        s = node / rate
        total += weight * np.exp((a - 1) * (np.log1p(s) - s))
    return log_density_of_log_chi2(np.log(y), a) - np.log(rate) + np.log(total)


@cache
def _laguerre() -> tuple[tuple[float, ...], tuple[float, ...]]:
    nodes, weights = np.polynomial.laguerre.laggauss(NODES)
    return tuple(map(float, nodes)), tuple(map(float, weights))


def _legal_chi2(x: FloatArray, df: FloatArray) -> BoolArray:
    return np.isfinite(x) & np.isfinite(df) & (x >= 0) & (df > 0)


def _legal_f(f: FloatArray, df1: FloatArray, df2: FloatArray) -> BoolArray:
    return np.isfinite(f) & np.isfinite(df1) & (f >= 0) & (df1 > 0) & (df2 > 0)
