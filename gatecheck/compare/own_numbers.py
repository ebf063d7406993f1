"""The figures of one record against each other: which of them determine each other, and whether they agree.

Every figure is an interval, the numbers that it may stand for after rounding; two figures disagree only where
no numbers in their intervals fit together. An exact number written with few digits is taken as rounded to
them: many writers round before they write a number, and that is no disagreement between results.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from gatecheck import weigh
from gatecheck.columns import CHI2, Booleans, Columns, F, Floats, Interval, R, T, Z
from gatecheck.evidence import Evidence
from gatecheck.model.struct import struct

#: Relative differences that two careful programs may show: between p-values, and between multiples of an
#: error (1.96 is written for 1.959964).
_SAME_LOG_P = 1e-6
_SAME_MULTIPLE = 1e-3
#: A score test and a Wald interval of the same data may differ by this much (common practice, no source).
_OTHER_METHOD = 0.10
_OTHER_METHOD_P = 1.5
#: Smallest double above 0: a p below it is written as 0.
_LOG_SMALLEST = -744.4


@struct
class Agreement:
    """One comparison of shape (n,): where it could be made, where the figures agree, and what would fit.

    `low` and `high` bound the figure that the others imply.
    """

    name: str
    checked: Booleans
    agrees: Booleans
    low: Floats
    high: Floats

    @property
    def disagrees(self) -> Booleans:
        """Where it was made and the figures do not fit together."""
        return self.checked & ~self.agrees


def own_numbers(columns: Columns, evidence: Evidence) -> tuple[Agreement, ...]:
    """Compare the figures within each record, in the order in which they are reported."""
    with np.errstate(all="ignore"):
        half = _half_width(columns)
        return (
            _p_from_statistic(columns, evidence),
            _estimate_inside(columns),
            _interval_from_error(columns, half),
            _statistic_from_estimate(columns, half),
            _interval_and_p(columns, half),
        )


def _p_from_statistic(columns: Columns, evidence: Evidence) -> Agreement:
    """The p that statistic, df and sides give, against the p reported."""
    test, statistics = columns.test, evidence.statistics

    def log_p(value: Floats, df1: Floats, df2: Floats) -> Floats:
        return weigh.log_p(statistics.kind, value, df1, df2, statistics.one_sided)

    low, high = _range_over(log_p, _signed_value(columns, evidence), test.df1, test.df2)
    checked = test.p_is_raw & test.value.known & np.isfinite(low) & test.p.known
    reported_low, reported_high = np.log(np.maximum(test.p.low, 0)), np.log(test.p.high)
    slack = _SAME_LOG_P * np.maximum(1, np.abs(high))
    fits = (low <= reported_high + slack) & (high >= reported_low - slack)
    underflown = (test.p.high == 0) & (low < _LOG_SMALLEST)
    return Agreement("p", checked, fits | underflown, np.exp(low), np.exp(high))


def _signed_value(columns: Columns, evidence: Evidence) -> Interval:
    """The statistic's interval as it is weighed: correlations as t, one-sided ones toward their direction."""
    test = columns.test
    as_r = test.is_one_of(R)
    ends = [
        np.where(as_r, weigh.t_from_r(np.where(as_r, np.clip(end, -1, 1), 0.0), test.df1.value), end)
        for end in (test.value.low, test.value.high)
    ]
    signs = np.where(evidence.statistics.one_sided, test.toward, 1.0)
    low, high = np.minimum(*(end * signs for end in ends)), np.maximum(*(end * signs for end in ends))
    folded = test.is_one_of(T, Z, R) & ~evidence.statistics.one_sided
    nearest = np.where((low <= 0) & (high >= 0), 0.0, np.minimum(np.abs(low), np.abs(high)))
    farthest = np.maximum(np.abs(low), np.abs(high))
    other = ~test.is_one_of(T, Z, R)
    low = np.where(folded, nearest, np.where(other, np.maximum(low, 0), low))
    return Interval(evidence.statistics.value, low, np.where(folded, farthest, high))


def _range_over(
    log_p: Callable[[Floats, Floats, Floats], Floats], value: Interval, df1: Interval, df2: Interval
) -> tuple[Floats, Floats]:
    """The least and the greatest log p over the corners of the intervals; p is monotone in each of them."""
    corners = np.stack([
        log_p(v, a, b) for v in (value.low, value.high) for a in (df1.low, df1.high) for b in (df2.low, df2.high)
    ])
    return corners.min(axis=0), corners.max(axis=0)


def _estimate_inside(columns: Columns) -> Agreement:
    """The estimate against the limits of its interval."""
    estimate = columns.estimate
    below = estimate.high.known & (estimate.value.low > estimate.high.high)
    above = estimate.low.known & (estimate.value.high < estimate.low.low)
    checked = estimate.value.known & (estimate.low.known | estimate.high.known)
    return Agreement("inside", checked, ~(below | above), estimate.low.value, estimate.high.value)


def _half_width(columns: Columns) -> Interval:
    """Half the width of the interval where it is symmetric about the estimate within rounding; else nan.

    An interval that is not (profile, bootstrap, exact) was made another way, and its width says nothing of
    the standard error.
    """
    low, value, high = columns.estimate.low, columns.estimate.value, columns.estimate.high
    upper, lower = Interval(*_minus(high, value)), Interval(*_minus(value, low))
    slack = _SAME_MULTIPLE * np.abs(high.value - low.value)
    symmetric = (upper.low <= lower.high + slack) & (lower.low <= upper.high + slack)
    ends = (high.value - low.value, high.low - low.high, high.high - low.low)
    return Interval(*(np.where(symmetric, end / 2, np.nan) for end in ends))


def _minus(a: Interval, b: Interval) -> tuple[Floats, Floats, Floats]:
    return a.value - b.value, a.low - b.high, a.high - b.low


def _multiples(columns: Columns) -> tuple[Floats, Floats]:
    """The least and the greatest multiple of the standard error that an interval of this level may use.

    That of the normal, and where a t with its df is reported that of the t; without a statistic the df are not
    known, so nothing bounds it from above.
    """
    level = columns.estimate.level
    normal = weigh.t_quantile_two_sided(level, np.full_like(level, np.inf))
    student = weigh.t_quantile_two_sided(level, columns.test.df1.low)
    unknown = np.where(columns.test.is_one_of(Z), normal, np.inf)
    most = np.where(columns.test.is_one_of(T, R) & np.isfinite(student), student, unknown)
    return normal * (1 - _SAME_MULTIPLE), most * (1 + _SAME_MULTIPLE)


def _interval_from_error(columns: Columns, half: Interval) -> Agreement:
    """The width of the interval against its level and the standard error."""
    error = columns.estimate.standard_error
    least, most = _multiples(columns)
    checked = half.known & (error.value > 0) & ~columns.estimate.adjusted & (half.low > 0)
    agrees = (half.high / error.low >= least) & (half.low / error.high <= most)
    return Agreement("width", checked, agrees, half.value / most, half.value / least)


def _statistic_from_estimate(columns: Columns, half: Interval) -> Agreement:
    """The statistic against the estimate divided by its standard error, reported or implied by the interval."""
    test, estimate = columns.test, columns.estimate
    least, most = _multiples(columns)
    own = estimate.standard_error.known
    error_low = np.where(own, estimate.standard_error.low, half.low / most)
    error_high = np.where(own, estimate.standard_error.high, half.high / least)
    low, high = _absolute(estimate.value)
    low, high = low / error_high, high / error_low
    value_low, value_high = _absolute(test.value)
    slack = np.where(test.is_one_of(T), _SAME_MULTIPLE, _OTHER_METHOD)
    comparable = test.is_one_of(T, Z) & test.value.known & np.isfinite(low) & np.isfinite(high)
    # Against a margin the statistic counts from the margin, not from no effect.
    checked = comparable & (own | ~estimate.adjusted) & (error_low > 0) & ~columns.no_effect_aim
    agrees = (low * (1 - slack) <= value_high) & (high * (1 + slack) >= value_low)
    return Agreement("statistic", checked, agrees, low, high)


def _absolute(numbers: Interval) -> tuple[Floats, Floats]:
    low, high = np.abs(numbers.low), np.abs(numbers.high)
    crosses = (numbers.low <= 0) & (numbers.high >= 0)
    return np.where(crosses, 0.0, np.minimum(low, high)), np.maximum(low, high)


def _interval_and_p(columns: Columns, half: Interval) -> Agreement:
    """Whether interval and p stand on the same side of no effect.

    A score test beside a Wald interval may differ a little near the limit, so the p that the interval implies
    must also be far from the one reported.
    """
    test, estimate = columns.test, columns.estimate
    alpha = 1 - estimate.level
    two_sided = np.where(test.one_sided, 2 * np.minimum(test.p.value, 1 - test.p.value), test.p.value)
    excludes = (estimate.low.low > 0) | (estimate.high.high < 0)
    includes = (estimate.low.high < 0) & (estimate.high.low > 0)
    differs = (excludes & (two_sided > alpha)) | (includes & (two_sided < alpha))
    normal = weigh.t_quantile_two_sided(estimate.level, np.full_like(alpha, np.inf))
    student = weigh.t_quantile_two_sided(estimate.level, test.df1.value)
    by_t = test.is_one_of(T, R) & np.isfinite(student)
    multiple = np.abs(estimate.value.value) / half.value * np.where(by_t, student, normal)
    kind = np.where(by_t, weigh.Statistic.T, weigh.Statistic.Z)
    df = np.where(by_t, test.df1.value, np.nan)
    implied = np.exp(weigh.log_p(kind, multiple, df, df, np.zeros(df.shape, np.bool_)))
    far = np.abs(np.log(implied / two_sided)) > np.log(_OTHER_METHOD_P)
    plain = test.p_is_raw & test.p.known & np.isfinite(test.p.high) & ~estimate.adjusted
    # An omnibus statistic tests more than the one estimate beside it.
    single = ~test.is_one_of(F, CHI2) | (test.df1.value == 1)
    checked = plain & single & np.isfinite(implied) & ~columns.no_effect_aim
    return Agreement("sides", checked, ~(differs & far), implied, implied)
