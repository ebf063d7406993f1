"""Effect sizes turned into each other, and exact intervals for them from non-central distributions.

An interval holds the effects that neither tail of the statistic as observed rejects, each at ``(1 - level)/2``.

References
----------
Hedges, L. V. (1981). Distribution theory for Glass's estimator of effect size and related estimators. Journal of
Educational Statistics 6, 107-128 (the correction; from memory).
Steiger, J. H. (2004). Beyond the F test. Psychological Methods 9, 164-182 (intervals; from memory).
Borenstein, M. et al. (2009). Introduction to Meta-Analysis. Wiley, chapter 7 (d, r and the log odds ratio; from
memory).
Dowell, M. & Jarratt, P. (1971). A modified regula falsi method for computing the root of an equation. BIT 11,
168-174 (the search; from memory).
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy import special

from gatecheck.weigh.arrays import rowwise
from gatecheck.weigh.noncentral import (
    FEWEST_PAIRS,
    log_gamma_half_step,
    lower_tail_f,
    upper_tail_f,
    upper_tail_r,
    upper_tail_t,
)

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray

    Interval = tuple[FloatArray, FloatArray]
    Score = Callable[[FloatArray], FloatArray]

# A logistic variable has this standard deviation.
LOGISTIC_SD = float(np.pi / np.sqrt(3.0))
MOST_STEPS = 100
# In units of the normal score of a tail, in which the searches are made.
CLOSE_ENOUGH = 1e-13
# Beyond it tanh is 1 in double precision.
MOST_ATANH = 18.0


def pooled_sd(sd1: ArrayLike, n1: ArrayLike, sd2: ArrayLike, n2: ArrayLike) -> FloatArray:
    """Root of the variances of two groups, each weighted by its degrees of freedom ``n - 1``."""
    return rowwise(
        lambda s1, n1, s2, n2: np.sqrt(((n1 - 1) * s1 * s1 + (n2 - 1) * s2 * s2) / (n1 + n2 - 2)),
        lambda s1, n1, s2, n2: (s1 >= 0) & (s2 >= 0) & (n1 >= 1) & (n2 >= 1) & ((n1 - 1) + (n2 - 1) > 0),
        sd1,
        n1,
        sd2,
        n2,
    )


def d_from_difference(difference: ArrayLike, sd: ArrayLike) -> FloatArray:
    """Standardise a difference of means; ``sd`` above zero, else nan."""
    return rowwise(lambda difference, sd: difference / sd, lambda _, sd: sd > 0, difference, sd)


def difference_from_d(d: ArrayLike, sd: ArrayLike) -> FloatArray:
    """Turn a standardised difference into one in the unit of ``sd`` (above zero, else nan)."""
    return rowwise(lambda d, sd: d * sd, lambda _, sd: sd > 0, d, sd)


def d_from_t(t: ArrayLike, n1: ArrayLike, n2: ArrayLike) -> FloatArray:
    """Standardised difference of two groups from their pooled t: ``t sqrt(1/n1 + 1/n2)``."""
    return rowwise(lambda t, n1, n2: t * np.sqrt(1 / n1 + 1 / n2), _has_groups, t, n1, n2)


def t_from_d(d: ArrayLike, n1: ArrayLike, n2: ArrayLike) -> FloatArray:
    """Pooled t of two groups from their standardised difference; the inverse of :func:`d_from_t`."""
    return rowwise(lambda d, n1, n2: d / np.sqrt(1 / n1 + 1 / n2), _has_groups, d, n1, n2)


def hedges_correction(df: ArrayLike) -> FloatArray:
    """Exact factor that frees d from bias, ``Gamma(df/2) / (sqrt(df/2) Gamma((df-1)/2))``; nan unless df > 1."""
    return rowwise(_correction_rows, lambda df: (df > 1) & np.isfinite(df), df)


def g_from_d(d: ArrayLike, df: ArrayLike) -> FloatArray:
    """Free d from its small-sample bias; ``df`` of its standard deviation, above 1."""
    return rowwise(lambda d, df: d * _correction_rows(df), lambda _, df: (df > 1) & np.isfinite(df), d, df)


def d_from_g(g: ArrayLike, df: ArrayLike) -> FloatArray:
    """Turn the unbiased g back into d; the inverse of :func:`g_from_d`."""
    return rowwise(lambda g, df: g / _correction_rows(df), lambda _, df: (df > 1) & np.isfinite(df), g, df)


def r_from_d(d: ArrayLike, n1: ArrayLike, n2: ArrayLike) -> FloatArray:
    """Point-biserial correlation with the group: ``d / sqrt(d^2 + (n1 + n2)^2/(n1 n2))``."""
    return rowwise(lambda d, n1, n2: d / np.hypot(d, _group_term(n1, n2)), _has_groups, d, n1, n2)


def d_from_r(r: ArrayLike, n1: ArrayLike, n2: ArrayLike) -> FloatArray:
    """Standardised difference from the correlation with the group; the inverse of :func:`r_from_d`."""
    return rowwise(
        lambda r, n1, n2: r * _group_term(n1, n2) / np.sqrt((1 - r) * (1 + r)),
        lambda r, n1, n2: (np.abs(r) < 1) & _has_groups(r, n1, n2),
        r,
        n1,
        n2,
    )


def d_from_log_odds_ratio(log_odds_ratio: ArrayLike) -> FloatArray:
    """Standardised difference of the logistic variable behind two proportions: the log times ``sqrt(3)/pi``."""
    return rowwise(lambda log_odds_ratio: log_odds_ratio / LOGISTIC_SD, np.isfinite, log_odds_ratio)


def log_odds_ratio_from_d(d: ArrayLike) -> FloatArray:
    """Turn d into a log odds ratio; the inverse of :func:`d_from_log_odds_ratio`."""
    return rowwise(lambda d: d * LOGISTIC_SD, np.isfinite, d)


def f2_from_eta2(eta2: ArrayLike) -> FloatArray:
    """Explained over unexplained variance from the share explained (0 to below 1, else nan)."""
    return rowwise(lambda eta2: eta2 / (1 - eta2), lambda eta2: (eta2 >= 0) & (eta2 < 1), eta2)


def eta2_from_f2(f2: ArrayLike) -> FloatArray:
    """Share of variance explained from explained over unexplained variance (at least 0, else nan)."""
    return rowwise(lambda f2: f2 / (1 + f2), lambda f2: (f2 >= 0) & np.isfinite(f2), f2)


def eta2_from_f(f: ArrayLike, df1: ArrayLike, df2: ArrayLike) -> FloatArray:
    """Share of the sample's variance explained, partial where there are other terms: ``f df1/(f df1 + df2)``."""
    return rowwise(
        lambda f, df1, df2: f * df1 / (f * df1 + df2),
        lambda f, df1, df2: (f >= 0) & (df1 > 0) & (df2 > 0),
        f,
        df1,
        df2,
    )


def interval_ncp_t(t: ArrayLike, df: ArrayLike, level: ArrayLike) -> Interval:
    """Interval of the non-centrality of a t as observed.

    Parameters
    ----------
    t : array_like
        The statistic, signed.
    df : array_like
        Degrees of freedom, above zero; infinity means the normal distribution.
    level : array_like
        Coverage, strictly between 0 and 1.

    Returns
    -------
    tuple of two ndarrays of float64
        Lower and upper limit, broadcast shape; nan outside the domain.
    """
    lower = rowwise(_lower_ncp_t, _legal_t, t, df, level)
    upper = rowwise(lambda t, df, level: -_lower_ncp_t(-t, df, level), _legal_t, t, df, level)
    return lower, upper


def interval_ncp_f(f: ArrayLike, df1: ArrayLike, df2: ArrayLike, level: ArrayLike) -> Interval:
    """Interval of the non-centrality of an F as observed, ``f >= 0``; a limit is 0 where no effect reaches it.

    Finite degrees of freedom above zero, ``level`` strictly between 0 and 1; outside the domain nan.
    """
    return (
        rowwise(_lower_ncp_f, _legal_f, f, df1, df2, level),
        rowwise(_upper_ncp_f, _legal_f, f, df1, df2, level),
    )


def interval_d_one_sample(d: ArrayLike, n: ArrayLike, level: ArrayLike) -> Interval:
    """Interval of the standardised mean of one sample (or of differences of pairs), ``n >= 2``; else nan."""
    t = rowwise(lambda d, n: d * np.sqrt(n), lambda _, n: n > 1, d, n)
    limits = interval_ncp_t(t, np.subtract(n, 1.0), level)
    lower, upper = (
        rowwise(lambda ncp, n: ncp / np.sqrt(n), lambda ncp, _: np.isfinite(ncp), ncp, n) for ncp in limits
    )
    return lower, upper


def interval_d_two_sample(d: ArrayLike, n1: ArrayLike, n2: ArrayLike, level: ArrayLike) -> Interval:
    """Interval of the standardised difference of two groups, pooled standard deviation; ``n1 + n2 > 2``."""
    df = rowwise(lambda n1, n2: n1 + n2 - 2, lambda n1, n2: (n1 > 0) & (n2 > 0), n1, n2)
    lower, upper = interval_ncp_t(t_from_d(d, n1, n2), df, level)
    return d_from_t(lower, n1, n2), d_from_t(upper, n1, n2)


def interval_f2(f: ArrayLike, df1: ArrayLike, df2: ArrayLike, level: ArrayLike) -> Interval:
    """Interval of explained over unexplained variance, the non-centrality over ``df1 + df2 + 1`` units."""
    lower, upper = interval_ncp_f(f, df1, df2, level)
    return _per_unit(lower, df1, df2), _per_unit(upper, df1, df2)


def interval_eta2(f: ArrayLike, df1: ArrayLike, df2: ArrayLike, level: ArrayLike) -> Interval:
    """Interval of the share of variance explained, from that of :func:`interval_f2`."""
    lower, upper = interval_f2(f, df1, df2, level)
    return eta2_from_f2(lower), eta2_from_f2(upper)


def interval_r_fisher(r: ArrayLike, n: ArrayLike, level: ArrayLike) -> Interval:
    """Interval of a correlation by Fisher's z, an approximation: ``tanh(atanh r -+ z/sqrt(n - 3))``, ``n > 3``."""

    def limit(side: float) -> FloatArray:
        return rowwise(
            lambda r, n, level: np.tanh(np.arctanh(r) + side * special.ndtri((1 + level) / 2) / np.sqrt(n - 3)),
            lambda r, n, level: (np.abs(r) < 1) & (n > FEWEST_PAIRS) & _is_level(level),
            r,
            n,
            level,
        )

    return limit(-1.0), limit(1.0)


def interval_r_exact(r: ArrayLike, n: ArrayLike, level: ArrayLike) -> Interval:
    """Interval of a correlation from the exact distribution of ``r`` in ``n >= 3`` bivariate normal pairs."""
    lower = rowwise(_lower_r, _legal_r, r, n, level)
    upper = rowwise(lambda r, n, level: -_lower_r(-r, n, level), _legal_r, r, n, level)
    return lower, upper


def _correction_rows(df: FloatArray) -> FloatArray:
    return np.exp(log_gamma_half_step((df - 1) / 2)) / np.sqrt(df / 2)


def _group_term(n1: FloatArray, n2: FloatArray) -> FloatArray:
    return np.sqrt(n1 / n2 + 2 + n2 / n1)


def _per_unit(ncp: FloatArray, df1: ArrayLike, df2: ArrayLike) -> FloatArray:
    return rowwise(lambda ncp, df1, df2: ncp / (df1 + df2 + 1), lambda ncp, *_: np.isfinite(ncp), ncp, df1, df2)


def _lower_ncp_t(t: FloatArray, df: FloatArray, level: FloatArray) -> FloatArray:
    wanted = special.ndtri((1 - level) / 2)

    def short(ncp: FloatArray) -> FloatArray:
        return special.ndtri(upper_tail_t(t, df, ncp)) - wanted

    spread = np.sqrt(1 + t * t / (2 * df))
    return _crossing(short, _beyond(short, t, -spread), _beyond(short, t, spread))


def _lower_ncp_f(f: FloatArray, df1: FloatArray, df2: FloatArray, level: FloatArray) -> FloatArray:
    wanted = special.ndtri((1 - level) / 2)
    return _ncp_f(lambda root: special.ndtri(upper_tail_f(f, df1, df2, root * root)) - wanted, f, df1, df2)


def _upper_ncp_f(f: FloatArray, df1: FloatArray, df2: FloatArray, level: FloatArray) -> FloatArray:
    wanted = special.ndtri((1 - level) / 2)
    return _ncp_f(lambda root: wanted - special.ndtri(lower_tail_f(f, df1, df2, root * root)), f, df1, df2)


def _ncp_f(short: Score, f: FloatArray, df1: FloatArray, df2: FloatArray) -> FloatArray:
    """Search along the root of the non-centrality, in which a normal score of the tail is nearly straight."""
    none = np.zeros_like(f)
    root = _crossing(short, none, _beyond(short, none, np.sqrt(1 + f * df1 * (1 + f * df1 / df2))))
    return root * root


def _lower_r(r: FloatArray, n: FloatArray, level: FloatArray) -> FloatArray:
    wanted = special.ndtri((1 - level) / 2)

    def short(zeta: FloatArray) -> FloatArray:
        return special.ndtri(upper_tail_r(r, n, np.tanh(zeta))) - wanted

    ends = np.full_like(r, MOST_ATANH)
    return np.tanh(_crossing(short, -ends, ends))


def _beyond(short: Score, start: FloatArray, step: FloatArray) -> FloatArray:
    """Go from ``start`` in doubling steps until the increasing function has the sign of the step."""
    point = start + step
    while (on_the_way := short(point) * np.sign(step) < 0).any():
        step = np.where(on_the_way, 2 * step, step)
        point = np.where(on_the_way, point + step, point)
    return point


def _crossing(short: Score, low: FloatArray, high: FloatArray) -> FloatArray:
    """Find where the increasing function is zero; ``low`` where it is not below zero even there.

    Along straight lines between the ends; the value of an end that stays twice is halved.
    """
    below, above = short(low), short(high)
    found = np.where(below >= 0, low, np.nan)
    fell = rose = np.zeros(low.shape, dtype=np.bool_)
    for _ in range(MOST_STEPS):
        if not np.isnan(found).any():
            break
        middle = low + (high - low) * below / (below - above)
        inside = (middle > low) & (middle < high)
        middle = np.where(inside, middle, low + (high - low) / 2)
        there = short(middle)
        found = np.where(np.isnan(found) & (np.abs(there) <= CLOSE_ENOUGH), middle, found)
        falls = there < 0
        below = np.where(falls, there, np.where(rose, below / 2, below))
        above = np.where(falls, np.where(fell, above / 2, above), there)
        low, high = np.where(falls, middle, low), np.where(falls, high, middle)
        fell, rose = falls, ~falls
    return np.where(np.isnan(found), low, found)


def _has_groups(effect: FloatArray, n1: FloatArray, n2: FloatArray) -> BoolArray:
    return np.isfinite(effect) & (n1 > 0) & (n2 > 0)


def _is_level(level: FloatArray) -> BoolArray:
    return (level > 0) & (level < 1)


def _legal_t(t: FloatArray, df: FloatArray, level: FloatArray) -> BoolArray:
    return np.isfinite(t) & (df > 0) & _is_level(level)


def _legal_f(f: FloatArray, df1: FloatArray, df2: FloatArray, level: FloatArray) -> BoolArray:
    degrees = (df1 > 0) & np.isfinite(df1) & (df2 > 0) & np.isfinite(df2)
    return (f >= 0) & np.isfinite(f) & degrees & _is_level(level)


def _legal_r(r: FloatArray, n: FloatArray, level: FloatArray) -> BoolArray:
    return (np.abs(r) < 1) & (n >= FEWEST_PAIRS) & np.isfinite(n) & _is_level(level)
