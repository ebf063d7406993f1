"""Probability that a test of a given size finds an effect of a given size.

Two-sided power counts rejections in both directions, so that it is ``alpha`` where there is no effect. Where a
source counts the promised direction only, its figure is the one-sided power at ``alpha / 2``. A one-sided test
promises the positive direction. Sizes need not be whole numbers.

References
----------
Cohen, J. (1988). Statistical Power Analysis for the Behavioral Sciences, 2nd ed. (d, h, w, f; from memory).
Fleiss, J. L. (1981). Statistical Methods for Rates and Proportions, 2nd ed. Wiley (two proportions with the pooled
variance under no effect; from memory).
Schoenfeld, D. A. (1983). Sample-size formula for the proportional-hazards regression model. Biometrics 39, 499-503.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy import special

from gatecheck.weigh.arrays import rowwise
from gatecheck.weigh.noncentral import upper_tail_chi2, upper_tail_f, upper_tail_r, upper_tail_t
from gatecheck.weigh.quantiles import chi2_from_log_p, f_from_log_p, t_from_log_p, z_from_log_p
from gatecheck.weigh.t import r_from_t

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray


def power_t(ncp: ArrayLike, df: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Power of a t test from its non-centrality.

    Parameters
    ----------
    ncp : array_like
        Expected effect over its true standard error; for one-sided rows signed, the promised direction positive.
    df : array_like
        Degrees of freedom, above zero; infinity means the normal distribution.
    alpha : array_like
        Level of the whole test, strictly between 0 and 1.
    one_sided : array_like of bool
        Whether only the positive direction rejects; otherwise ``|t|`` does, in both.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain.
    """
    critical = t_from_log_p(_log_level(alpha), df, one_sided=one_sided)
    return _of_sides(lambda shift: upper_tail_t(critical, df, shift), ncp, one_sided)


def power_z(ncp: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Power of a test of known variance; arguments as of :func:`power_t`."""
    critical = z_from_log_p(_log_level(alpha), one_sided=one_sided)
    return _of_sides(lambda shift: special.ndtr(shift - critical), ncp, one_sided)


def power_one_sample_z(d: ArrayLike, n: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Power of the z test of one sample of ``n``, ``d`` known standard deviations from the null."""
    return power_z(_times_root(d, n), alpha, one_sided=one_sided)


def power_two_sample_z(
    d: ArrayLike, n1: ArrayLike, n2: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike
) -> FloatArray:
    """Power of the z test of groups of ``n1`` and ``n2`` that lie ``d`` known standard deviations apart."""
    return power_z(_times_root(d, _half_harmonic(n1, n2)), alpha, one_sided=one_sided)


def power_one_sample_t(d: ArrayLike, n: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Power of the t test of one sample of ``n``, ``d`` standard deviations from the null; see :func:`power_t`."""
    (n,) = _columns(n)
    return power_t(_times_root(d, n), n - 1, alpha, one_sided=one_sided)


def power_two_sample_t(
    d: ArrayLike, n1: ArrayLike, n2: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike
) -> FloatArray:
    """Power of the pooled t test of groups of ``n1`` and ``n2`` that lie ``d`` standard deviations apart."""
    df = rowwise(lambda n1, n2: n1 + n2 - 2, _both_above_zero, n1, n2)
    return power_t(_times_root(d, _half_harmonic(n1, n2)), df, alpha, one_sided=one_sided)


def power_paired_t(
    d: ArrayLike, n_pairs: ArrayLike, correlation: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike
) -> FloatArray:
    """Power of the paired t test, ``d`` in standard deviations of the measurement, not of the differences.

    ``correlation`` is that of the two measurements, -1 to below 1, whose standard deviations are taken as equal.
    """
    of_differences = rowwise(
        lambda d, correlation: d / np.sqrt(2 * (1 - correlation)),
        lambda d, correlation: np.isfinite(d) & (correlation >= -1) & (correlation < 1),
        d,
        correlation,
    )
    return power_one_sample_t(of_differences, n_pairs, alpha, one_sided=one_sided)


def cohen_h(p1: ArrayLike, p2: ArrayLike) -> FloatArray:
    """Difference of two proportions on the arcsine scale, ``2 asin sqrt(p1) - 2 asin sqrt(p2)``."""
    return rowwise(
        lambda p1, p2: 2 * (np.arcsin(np.sqrt(p1)) - np.arcsin(np.sqrt(p2))),
        lambda p1, p2: _is_probability(p1) & _is_probability(p2),
        p1,
        p2,
    )


def power_proportions_arcsine(
    h: ArrayLike, n1: ArrayLike, n2: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike
) -> FloatArray:
    """Power of the test of two proportions on the arcsine scale, ``h`` of :func:`cohen_h`."""
    return power_two_sample_z(h, n1, n2, alpha, one_sided=one_sided)


def power_proportions_pooled(
    p1: ArrayLike, p2: ArrayLike, n_each: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike
) -> FloatArray:
    """Power of the z test of two proportions, equal groups of ``n_each``, without continuity correction.

    The critical difference has the pooled variance, the difference itself the variance of its two proportions.
    One-sided rows promise ``p1 > p2``. Where both proportions are 0 or 1 the difference is certain.
    """
    critical = z_from_log_p(_log_level(alpha), one_sided=one_sided)
    up = rowwise(_pooled_rows, _legal_pooled, p1, p2, n_each, critical)
    down = rowwise(_pooled_rows, _legal_pooled, p2, p1, n_each, critical)
    return up + np.where(one_sided, 0.0, down)


def power_correlation_exact(rho: ArrayLike, n: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Power of the t test of a correlation, from the exact distribution of ``r`` in bivariate normal pairs.

    Parameters
    ----------
    rho : array_like
        Correlation of the population, strictly between -1 and 1.
    n : array_like
        Number of pairs, at least 3.
    alpha, one_sided : array_like
        As of :func:`power_t`.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain.
    """
    (n,) = _columns(n)
    df = n - 2
    critical = r_from_t(t_from_log_p(_log_level(alpha), df, one_sided=one_sided), df)
    return _of_sides(lambda rho: upper_tail_r(critical, n, rho), rho, one_sided)


def power_correlation_fisher(rho: ArrayLike, n: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Power of the z test of ``atanh r``, an approximation: mean ``atanh rho``, variance ``1/(n - 3)``."""
    transformed = rowwise(np.arctanh, lambda rho: np.abs(rho) < 1, rho)
    (n,) = _columns(n)
    return power_z(_times_root(transformed, n - 3), alpha, one_sided=one_sided)


def power_chi2(w: ArrayLike, n: ArrayLike, df: ArrayLike, alpha: ArrayLike) -> FloatArray:
    """Power of the chi-squared test of ``n`` units; non-centrality ``n w^2``, ``w >= 0``; else nan."""
    ncp = rowwise(lambda w, n: w * w * n, lambda w, n: (w >= 0) & (n > 0), w, n)
    return upper_tail_chi2(chi2_from_log_p(_log_level(alpha), df), df, ncp)


def power_f(ncp: ArrayLike, df1: ArrayLike, df2: ArrayLike, alpha: ArrayLike) -> FloatArray:
    """Power of an F test from its non-centrality (sum of squares of the means over the error variance)."""
    return upper_tail_f(f_from_log_p(_log_level(alpha), df1, df2), df1, df2, ncp)


def power_anova(f: ArrayLike, groups: ArrayLike, n_each: ArrayLike, alpha: ArrayLike) -> FloatArray:
    """Power of the one-way analysis of equal groups; non-centrality ``f^2`` times all units.

    ``f`` is the standard deviation of the group means (divisor: the number of groups) in units of that within.
    """
    ncp = rowwise(lambda f, groups, n: f * f * groups * n, lambda f, *_: f >= 0, f, groups, n_each)
    df2 = rowwise(lambda groups, n: groups * (n - 1), _both_above_zero, groups, n_each)
    (groups,) = _columns(groups)
    return power_f(ncp, groups - 1, df2, alpha)


def power_regression(f2: ArrayLike, df1: ArrayLike, df2: ArrayLike, alpha: ArrayLike) -> FloatArray:
    """Power of the F test of ``df1`` coefficients; non-centrality ``f2 (df1 + df2 + 1)``: ``f2`` times all units.

    ``f2`` is explained over unexplained variance, at least zero.
    """
    ncp = rowwise(lambda f2, df1, df2: f2 * (df1 + df2 + 1), lambda f2, *_: f2 >= 0, f2, df1, df2)
    return power_f(ncp, df1, df2, alpha)


def power_log_rank(
    hazard_ratio: ArrayLike, events: ArrayLike, share: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike
) -> FloatArray:
    """Power of the log-rank test after so many events in both arms, by Schoenfeld's approximation.

    Parameters
    ----------
    hazard_ratio : array_like
        Above zero; one-sided rows promise a ratio below one.
    events : array_like
        Number of events in both arms together.
    share : array_like
        Share of the units in one arm, strictly between 0 and 1.
    alpha, one_sided : array_like
        As of :func:`power_t`.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain.
    """
    ncp = rowwise(
        lambda ratio, events, share: -np.log(ratio) * np.sqrt(events * share * (1 - share)),
        lambda ratio, events, share: (ratio > 0) & (events >= 0) & (share > 0) & (share < 1),
        hazard_ratio,
        events,
        share,
    )
    return power_z(ncp, alpha, one_sided=one_sided)


def _of_sides(upper: Callable[[FloatArray], FloatArray], effect: ArrayLike, one_sided: ArrayLike) -> FloatArray:
    (effect,) = _columns(effect)
    return upper(effect) + np.where(one_sided, 0.0, upper(-effect))


def _pooled_rows(p1: FloatArray, p2: FloatArray, n: FloatArray, critical: FloatArray) -> FloatArray:
    pooled = (p1 + p2) / 2
    beyond = np.sqrt(n) * (p1 - p2) - critical * np.sqrt(2 * pooled * (1 - pooled))
    spread = np.sqrt(p1 * (1 - p1) + p2 * (1 - p2))
    certain = np.where(beyond > 0, 1.0, 0.0)
    return np.where(spread > 0, special.ndtr(beyond / spread), certain)


def _legal_pooled(p1: FloatArray, p2: FloatArray, n: FloatArray, critical: FloatArray) -> BoolArray:
    return _is_probability(p1) & _is_probability(p2) & (n > 0) & np.isfinite(critical)


def _is_probability(p: FloatArray) -> BoolArray:
    return (p >= 0) & (p <= 1)


def _columns(*columns: ArrayLike) -> tuple[FloatArray, ...]:
    return tuple(np.asarray(column, dtype=np.float64) for column in columns)


def _log_level(alpha: ArrayLike) -> FloatArray:
    return rowwise(np.log, lambda alpha: (alpha > 0) & (alpha < 1), alpha)


def _half_harmonic(n1: ArrayLike, n2: ArrayLike) -> FloatArray:
    return rowwise(lambda n1, n2: n1 / (n1 + n2) * n2, _both_above_zero, n1, n2)


def _times_root(effect: ArrayLike, n: ArrayLike) -> FloatArray:
    return rowwise(lambda effect, n: effect * np.sqrt(n), lambda _, n: n > 0, effect, n)


def _both_above_zero(n1: FloatArray, n2: FloatArray) -> BoolArray:
    return (n1 > 0) & (n2 > 0)
