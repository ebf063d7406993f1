"""The statistic that belongs to a p value, from the logarithm of the p value.

The log p value is concave in the logarithm of ``|t|`` and of F, and in chi-squared itself, so that Newton's
steps cannot miss: after at most one step too far they close in from one side.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy import special

from gatecheck.weigh.arrays import piecewise, rowwise
from gatecheck.weigh.tails import (
    LOG_TWO,
    log_density_of_log_chi2,
    log_density_of_log_f,
    log_p_chi2_rows,
    log_p_of_log_f,
    log_p_of_log_t,
)

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray

MOST_STEPS = 60
# Convergence is quadratic: a step taken from so close ends at rounding error.
CLOSE_ENOUGH = 1e-10
# The library inverts the incomplete gamma function down to here; the rest of the way is nearly straight.
LEAST_LOG_P_TO_START = -600.0


def z_from_log_p(log_p: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Normal statistic of a log p value, not negative where two-sided; nan unless ``log_p <= 0``."""
    return rowwise(z_from_log_p_rows, lambda log_p, _: _is_log_p(log_p), log_p, one_sided)


def t_from_log_p(log_p: ArrayLike, df: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Student's t of a log p value.

    Parameters
    ----------
    log_p : array_like
        Natural log of the p value, at most zero.
    df : array_like
        Degrees of freedom, above zero; infinity means the normal distribution.
    one_sided : array_like of bool
        Whether the p value is ``P(T >= t)`` or ``P(|T| >= |t|)``; the latter gives ``|t|``.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain, infinite where t lies beyond the largest double.
    """
    return rowwise(t_from_log_p_rows, lambda log_p, df, _: _is_log_p(log_p) & (df > 0), log_p, df, one_sided)


def chi2_from_log_p(log_p: ArrayLike, df: ArrayLike) -> FloatArray:
    """Chi-squared of the log of its upper tail; nan where ``log_p > 0`` or ``df <= 0``."""
    return rowwise(chi2_from_log_p_rows, lambda log_p, df: _is_log_p(log_p) & (df > 0) & np.isfinite(df), log_p, df)


def f_from_log_p(log_p: ArrayLike, df1: ArrayLike, df2: ArrayLike) -> FloatArray:
    """F of the log of its upper tail; ``df2`` infinite: chi-squared over ``df1``; nan outside the domain."""
    return rowwise(
        f_from_log_p_rows,
        lambda log_p, df1, df2: _is_log_p(log_p) & (df1 > 0) & np.isfinite(df1) & (df2 > 0),
        log_p,
        df1,
        df2,
    )


def t_quantile_two_sided(level: ArrayLike, df: ArrayLike) -> FloatArray:
    """Half-width in standard errors of the two-sided interval at ``level``, 0 to below 1; infinite df: z."""
    with np.errstate(all="ignore"):
        log_p = np.log1p(-np.asarray(level, dtype=np.float64))
    return t_from_log_p(log_p, df, one_sided=False)


def z_from_log_p_rows(log_p: FloatArray, one_sided: BoolArray) -> FloatArray:
    """Compute rows known to be legal."""
    both = np.maximum(-special.ndtri_exp(log_p - LOG_TWO), 0.0)
    return np.where(one_sided, -special.ndtri_exp(log_p), both)


def t_from_log_p_rows(log_p: FloatArray, df: FloatArray, one_sided: BoolArray) -> FloatArray:
    """Compute rows known to be legal."""
    normal = np.isinf(df)
    return piecewise(
        [(normal, lambda log_p, _, one_sided: z_from_log_p_rows(log_p, one_sided)), (~normal, _finite_t)],
        log_p,
        df,
        one_sided,
    )


def chi2_from_log_p_rows(log_p: FloatArray, df: FloatArray) -> FloatArray:
    """Compute rows known to be legal."""
    start = special.gammainccinv(df / 2, np.exp(np.maximum(log_p, LEAST_LOG_P_TO_START)))
    return np.where(start > 0, 2 * _newton(_chi2_rates, start, log_p, df), 0.0)


def f_from_log_p_rows(log_p: FloatArray, df1: FloatArray, df2: FloatArray) -> FloatArray:
    """Compute rows known to be legal."""
    chi2 = np.isinf(df2)
    return piecewise(
        [(chi2, lambda log_p, df1, _: chi2_from_log_p_rows(log_p, df1) / df1), (~chi2, _finite_f)],
        log_p,
        df1,
        df2,
    )


def _finite_f(log_p: FloatArray, df1: FloatArray, df2: FloatArray) -> FloatArray:
    x = chi2_from_log_p_rows(log_p, df1)
    start = np.log(df2 / df1) + _log_expm1(x / df2)
    return np.where(x > 0, np.exp(_newton(_f_rates, start, log_p, df1, df2)), 0.0)


def _finite_t(log_p: FloatArray, df: FloatArray, one_sided: BoolArray) -> FloatArray:
    upper = log_p <= -LOG_TWO
    of_side = LOG_TWO + np.where(upper, log_p, np.log(-np.expm1(log_p)))
    size = _two_sided_t(np.where(one_sided, np.minimum(of_side, 0.0), log_p), df)
    return np.where(one_sided & ~upper, -size, size)


def _two_sided_t(log_p: FloatArray, df: FloatArray) -> FloatArray:
    z = z_from_log_p_rows(log_p, np.zeros(log_p.shape, dtype=np.bool_))
    start = (np.log(df) + _log_expm1(z * z / df)) / 2
    return np.where(z > 0, np.exp(_newton(_t_rates, start, log_p, df)), 0.0)


def _chi2_rates(half_x: FloatArray, df: FloatArray) -> tuple[FloatArray, FloatArray]:
    log_half_x = np.log(half_x)
    return log_p_chi2_rows(2 * half_x, df), log_density_of_log_chi2(log_half_x, df / 2) - log_half_x


def _f_rates(log_f: FloatArray, df1: FloatArray, df2: FloatArray) -> tuple[FloatArray, FloatArray]:
    return log_p_of_log_f(log_f, df1, df2), log_density_of_log_f(log_f, df1 / 2, df2 / 2)


def _t_rates(log_t: FloatArray, df: FloatArray) -> tuple[FloatArray, FloatArray]:
    density = LOG_TWO + log_density_of_log_f(2 * log_t, np.full_like(df, 0.5), df / 2)
    return log_p_of_log_t(log_t, df), density


def _newton(
    rates: Callable[..., tuple[FloatArray, FloatArray]],
    start: FloatArray,
    log_p: FloatArray,
    *parameters: FloatArray,
) -> FloatArray:
    """Follow the log p value to ``log_p``; ``rates`` gives it and the log density at a point."""
    point = start.copy()
    rows = np.arange(start.size)
    for _ in range(MOST_STEPS):
        reached, log_density = rates(point[rows], *(parameter[rows] for parameter in parameters))
        gap = reached - log_p[rows]
        point[rows] += gap * np.exp(reached - log_density)
        rows = rows[np.abs(gap) > CLOSE_ENOUGH * np.abs(log_p[rows])]
        if not rows.size:
            break
    return point


def _log_expm1(x: FloatArray) -> FloatArray:
    return x + np.log(-np.expm1(-x))


def _is_log_p(log_p: FloatArray) -> BoolArray:
    return np.isfinite(log_p) & (log_p <= 0)
