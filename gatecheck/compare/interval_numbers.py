"""Estimate, standard error, interval and statistic against each other, on the scale of the estimate."""

from __future__ import annotations

import numpy as np

from gatecheck import weigh
from gatecheck.columns import CHI2, Booleans, Columns, F, Floats, Interval, R, T, Z
from gatecheck.compare.agreement import Agreement, in_size, minus, overlap, widened
from gatecheck.compare.design_names import (
    CONTINUITY,
    FISHER,
    OTHER_METHOD,
    PROPORTIONS,
    RATIO_OR_CHANGE,
    WALD,
    named,
    says,
)
from gatecheck.compare.interval_shapes import (
    ERROR,
    ESTIMATE,
    INTERVAL,
    SAME_MULTIPLE,
    STATISTIC,
    apart_from_test,
    half_width,
    multiples,
    of_plain_t,
    otherwise_made,
    own_df,
    statistic_size,
)  # fmt: skip
from gatecheck.compare.limit_numbers import limit_numbers
from gatecheck.model.record import Estimate

#: A score test and a Wald interval of the same data may differ by this much (common practice, no source).
_OTHER_METHOD = 0.10
#: Likelihood ratio and Wald differ more, and the continuity correction makes chi-squared smaller still.
_LESS_BY_CORRECTION = 0.50
_MORE_BY_METHOD = 0.25
#: An interval by bootstrap, profile or score is so much wider or narrower than that of the statistic at most.
_OTHER_INTERVAL = 0.50
_OTHER_METHOD_P = 1.5
#: An interval that is not symmetric was made another way, and its nearer limit says less about p.
_SKEWED_P = 10.0
#: Fewest df of an estimate of which the record tells neither df nor n (common practice, no source).
_FEWEST_DF = 4.0

_METHODS = (
    "the interval is adjusted for several comparisons",
    "it is a profile or bootstrap interval",
    "p is of another method than the interval (score, likelihood ratio, Wald)",
)


def interval_numbers(columns: Columns) -> tuple[Agreement, ...]:
    """Every comparison of an estimate with its precision and its test, on the scale that a record gives or fits."""
    found = numbers_on_one_scale(columns)
    if not any(may_be_ratio(one.record.estimate) for one in columns.found):
        return found
    from gatecheck.compare.ratio_scales import compared_as_read  # noqa: PLC0415  # ratios that do not say their scale

    return compared_as_read(found, columns, numbers_on_one_scale)


def may_be_ratio(estimate: Estimate | None) -> bool:
    """Whether an estimate may be a ratio, or a relative change, of which the record does not say that it is one."""
    return estimate is not None and estimate.scale == "linear" and says(RATIO_OR_CHANGE, estimate.measure)


def numbers_on_one_scale(columns: Columns) -> tuple[Agreement, ...]:
    """The same, on the scale of the columns."""
    half = half_width(columns)
    return (
        _estimate_inside(columns),
        _interval_from_error(columns, half),
        *limit_numbers(columns, half),
        _statistic_from_error(columns),
        _statistic_from_interval(columns, half),
        _interval_and_p(columns, half),
        _p_from_estimate(columns, half),
    )


def _estimate_inside(columns: Columns) -> Agreement:
    """The estimate against the limits of its interval."""
    estimate = columns.estimate
    below = estimate.high.known & (estimate.value.low > estimate.high.high)
    above = estimate.low.known & (estimate.value.high < estimate.low.low)
    checked = estimate.value.known & (estimate.low.known | estimate.high.known)
    ends = estimate.low.value, estimate.high.value
    return Agreement("inside", (ESTIMATE, INTERVAL), checked, ~(below | above), *ends)


def _interval_from_error(columns: Columns, half: Interval) -> Agreement:
    """The width of the interval against its level and the standard error; an adjusted one is at least as wide."""
    estimate, error = columns.estimate, columns.estimate.standard_error
    least, most = multiples(columns)
    checked = half.known & (error.low > 0) & np.isfinite(error.high) & (half.low > 0)
    fits = (half.high / error.low >= least) & ((half.low / error.high <= most) | estimate.adjusted)
    # Intervals of proportions are commonly by score or exact, and those of ratios by the error of the logarithm.
    doubtful = checked & ~fits & ~estimate.log_scale
    other = otherwise_made(columns, checked & ~fits)
    other |= named(columns, doubtful, PROPORTIONS) | named(columns, doubtful, FISHER)
    return Agreement(
        "width",
        (INTERVAL, ERROR),
        checked,
        fits | other,
        error.value * least,
        error.value * most,
        (
            "the interval is adjusted for several comparisons",
            "it is of another level",
            "a standard deviation stands for the standard error",
        ),
        (INTERVAL, ERROR),
    )


def _statistic_from_error(columns: Columns) -> Agreement:
    """The statistic against the estimate divided by the standard error reported."""
    error = columns.estimate.standard_error
    return _statistic(columns, "statistic", error, (ESTIMATE, ERROR, STATISTIC), error.known)


def _statistic_from_interval(columns: Columns, half: Interval) -> Agreement:
    """The statistic against the estimate divided by the standard error that the interval implies."""
    least, most = multiples(columns)
    error = Interval(half.value / least, half.low / most, half.high / least)
    usable = ~columns.estimate.standard_error.known & ~columns.estimate.adjusted
    return _statistic(columns, "statistic-interval", error, (ESTIMATE, INTERVAL, STATISTIC), usable)


def _statistic(
    columns: Columns, name: str, error: Interval, figures: tuple[str, ...], usable: Booleans
) -> Agreement:
    test, estimate = columns.test, columns.estimate
    size, found = in_size(estimate.value), statistic_size(columns)
    low, high = size.low / error.high, size.high / error.low
    checked = usable & found.known & np.isfinite(low) & np.isfinite(high) & (error.low > 0)
    # Against a margin the statistic counts from the margin, not from no effect.
    checked &= ~columns.no_effect_aim
    of_z = checked & test.is_one_of(Z)
    slack = np.where(test.is_one_of(T) | named(columns, of_z, WALD), SAME_MULTIPLE, _OTHER_METHOD)
    loose = test.is_one_of(CHI2) | named(columns, of_z, OTHER_METHOD) | named(columns, of_z, CONTINUITY)
    more, less = np.where(loose, _MORE_BY_METHOD, slack), np.where(loose, _LESS_BY_CORRECTION, slack)
    agrees = (low * (1 - less) <= found.high) & (high * (1 + more) >= found.low)
    other = otherwise_made(columns, checked & ~agrees & ~estimate.standard_error.known)
    agrees |= other & overlap(widened(Interval(low, low, high), _OTHER_INTERVAL), found)
    # What is tested on one side has that side's sign, in the statistic as in the estimate.
    directed = test.one_sided & test.is_one_of(T, Z)
    against = ((test.value.low > 0) & (estimate.value.high < 0)) | (
        (test.value.high < 0) & (estimate.value.low > 0)
    )
    return Agreement(
        name,
        figures,
        checked & ~apart_from_test(columns, checked & ~agrees),
        agrees & ~(directed & against),
        low,
        high,
        (
            "the statistic is of another method (score, likelihood ratio, continuity correction)",
            "it is for another contrast",
            "the value of no effect is another one",
            *((_METHODS[1],) if INTERVAL in figures else ()),
        ),
        figures,
    )


def _two_sided(columns: Columns) -> Floats:
    p = columns.test.p.value
    return np.where(columns.test.one_sided, 2 * np.minimum(p, 1 - p), p)


def _comparable_p(columns: Columns) -> Booleans:
    """Where p is that of the estimate alone: raw, no bound from below, and of no more than one df."""
    test, estimate = columns.test, columns.estimate
    plain = test.p_is_raw & test.p.known & np.isfinite(test.p.high) & ~estimate.adjusted
    single = ~test.is_one_of(F, CHI2) | (test.df1.value == 1)
    comparable: Booleans = plain & single & ~columns.no_effect_aim
    return comparable


def _interval_and_p(columns: Columns, half: Interval) -> Agreement:
    """Whether interval and p stand on the same side of no effect.

    A score test beside a Wald interval may differ a little near the limit, so the p that the interval implies
    must also be far from the one reported. Of an interval that is not symmetric the limit toward no effect tells.
    """
    estimate = columns.estimate
    alpha = 1 - estimate.level
    two_sided = _two_sided(columns)
    excludes = (estimate.low.low > 0) | (estimate.high.high < 0)
    includes = (estimate.low.high < 0) & (estimate.high.low > 0)
    differs = (excludes & (two_sided > alpha)) | (includes & (two_sided < alpha))
    positive, negative = estimate.value.value > 0, estimate.value.value < 0
    to_low, to_high = minus(estimate.value, estimate.low).value, minus(estimate.high, estimate.value).value
    toward = np.where(positive, to_low, np.where(negative, to_high, np.nan))
    inside = (toward > 0) & ~(to_low < 0) & ~(to_high < 0)
    reach = np.where(half.known, half.value, np.where(inside, toward, np.nan))
    implied = _p_of(columns, np.abs(estimate.value.value) / reach)
    apart = np.abs(np.log(implied / two_sided))
    checked = _comparable_p(columns) & np.isfinite(implied)
    checked &= ~apart_from_test(columns, checked & differs)
    near = half.known | of_plain_t(columns, checked & differs & includes & ~half.known)
    near &= ~otherwise_made(columns, checked & differs & near)
    # The correction for continuity makes p larger, and an interval is commonly without it.
    near &= ~(excludes & named(columns, checked & differs & excludes, CONTINUITY))
    far = apart > np.log(np.where(near, _OTHER_METHOD_P, _SKEWED_P))
    checked &= ~_made_by_counts(columns, checked & differs & far, half)
    return Agreement("sides", (INTERVAL, "p"), checked, ~(differs & far), implied, implied, _METHODS)


def _made_by_counts(columns: Columns, rows: Booleans, half: Interval) -> Booleans:
    """Which of these rows have interval and p from the same counts of events, by two methods."""
    if not rows.any():
        return rows
    from gatecheck.compare.count_numbers import made_by_counts  # noqa: PLC0415  # most intervals and p agree

    return made_by_counts(columns, rows, half)


def _p_of(columns: Columns, halves: Floats, df: Floats | None = None) -> Floats:
    """The two-sided p of an estimate that is so many half widths of its interval away from no effect."""
    level = columns.estimate.level
    of_test = np.where(columns.test.is_one_of(T, R), columns.test.df1.value, np.inf)
    df = np.where(np.isfinite(of_test), of_test, np.inf) if df is None else df
    return _p_of_t(halves * weigh.t_quantile_two_sided(level, df), df)


def _p_of_t(size: Floats, df: Floats) -> Floats:
    kind = np.where(np.isfinite(df), weigh.Statistic.T, weigh.Statistic.Z)
    return np.exp(weigh.log_p(kind, size, df, df, np.zeros(df.shape, np.bool_)))


def _p_from_estimate(columns: Columns, half: Interval) -> Agreement:
    """P against estimate and precision where the record gives no statistic: from the normal to a t of few df."""
    estimate, test = columns.estimate, columns.test
    size, error = in_size(estimate.value), estimate.standard_error
    fewest = np.where(columns.sample.n > 2, np.minimum(columns.sample.n - 2, _FEWEST_DF), 1.0)  # noqa: PLR2004
    fewest = np.where(np.isfinite(columns.sample.n), fewest, _FEWEST_DF)
    fewest = np.where(np.isfinite(own_df(columns)), own_df(columns), fewest)
    infinite = np.full_like(fewest, np.inf)
    halves = widened(Interval(size.value, size.low / half.high, size.high / half.low), _OTHER_METHOD)
    errors = widened(Interval(size.value, size.low / error.high, size.high / error.low), _OTHER_METHOD)
    corners = np.stack([
        np.where(error.known, _p_of_t(in_errors, df), _p_of(columns, in_halves, df))
        for in_errors, in_halves in ((errors.low, halves.low), (errors.high, halves.high))
        for df in (fewest, infinite)
    ])
    low, high = corners.min(axis=0), corners.max(axis=0)
    one_sided = test.one_sided
    reported_low = np.where(one_sided, 2 * np.minimum(test.p.low, 1 - test.p.high), test.p.low)
    reported_high = np.where(one_sided, 2 * np.minimum(test.p.high, 1 - test.p.low), test.p.high)
    checked = _comparable_p(columns) & ~test.value.known & np.isfinite(low) & (error.known | (half.low > 0))
    agrees = (reported_low <= high) & (reported_high >= low)
    checked &= ~apart_from_test(columns, checked & ~agrees) & ~otherwise_made(columns, checked & ~agrees)
    larger = named(columns, checked & ~agrees & (reported_low > high), CONTINUITY)
    checked &= ~(larger & (reported_low <= _SKEWED_P * high)) & ~_made_by_counts(columns, checked & ~agrees, half)
    return Agreement("p-estimate", (ESTIMATE, "its precision", "p"), checked, agrees, low, high, _METHODS)
