"""The limits of an interval against each other, the estimate between them, and the error that puts them there.

Intervals that are skewed by nature (profile, bootstrap) miss the place where the standard error puts a limit at
both ends. Where one limit lies just there and the other far off, one figure is likely a slip.
"""

from __future__ import annotations

import numpy as np

from gatecheck import weigh
from gatecheck.columns import Booleans, Columns, Interval, R, T, Z
from gatecheck.compare.agreement import Agreement, in_size, minus, over_ends, overlap, where, widened
from gatecheck.compare.design_names import PROPORTIONS, named
from gatecheck.compare.interval_shapes import (
    ERROR,
    ESTIMATE,
    INTERVAL,
    SAME_MULTIPLE,
    STATISTIC,
    apart_from_test,
    multiples,
    of_plain_t,
    otherwise_made,
    own_df,
    statistic_size,
)  # fmt: skip

#: How sharp the place of a limit must be known, and by which shares of its distance the other one then is off,
#: away from the estimate and toward it (common practice, no source).
_SHARPNESS = ((0.03, 0.10, 0.10), (0.10, 0.25, 0.25), (0.30, 2.00, 2.00))
#: The same where the interval is plainly of the error of a t; one by resampling is rather too narrow than too wide.
_SHARPNESS_OF_T = ((0.05, 0.03, 0.10),)
#: An interval of a correlation by ranks is at most so much wider than Fisher's (common practice, no source).
_BY_RANKS = 1.25
_SKEWED = ("it is a profile or bootstrap interval", "it was made on the log scale", "the level is another one")


def limit_numbers(columns: Columns, half: Interval) -> tuple[Agreement, ...]:
    """Every comparison of single limits; `half` is the half width of the intervals that are symmetric."""
    return _limits(columns, half), _lone_limit(columns), _centre(columns, half), *_correlation(columns)


def _implied_error(columns: Columns) -> Interval:
    """The standard error reported, or the one that the estimate and a t or z of it imply."""
    error, test = columns.estimate.standard_error, columns.test
    size, value = in_size(columns.estimate.value), _size_or_z(columns)
    usable = (test.is_one_of(T, Z) | ~test.value.known) & ~columns.no_effect_aim
    implied = Interval(size.value / value.value, size.low / value.high, size.high / value.low)
    return where(error.known, error, where(usable, implied))


def _size_or_z(columns: Columns) -> Interval:
    """The size of the statistic; that of a ratio without one is the z of its p."""
    test = columns.test
    of_ratio = columns.estimate.log_scale & ~test.value.known & test.p_is_raw & (test.p.low > 0) & ~test.one_sided
    low, value, high = (
        weigh.z_from_log_p(np.log(np.where(of_ratio, end, np.nan)), one_sided=False)
        for end in (test.p.high, test.p.value, np.minimum(test.p.low, 1.0))
    )
    return where(of_ratio, Interval(value, low, high), statistic_size(columns))


def _usable(columns: Columns) -> Booleans:
    """Where an interval is that of one estimate against no effect."""
    usable: Booleans = ~columns.estimate.adjusted & ~columns.no_effect_aim
    return usable


def _limits(columns: Columns, half: Interval) -> Agreement:
    """Of an interval that is not symmetric, the limit that the standard error gives against the other."""
    estimate, error = columns.estimate, _implied_error(columns)
    to_low, to_high = minus(estimate.value, estimate.low), minus(estimate.high, estimate.value)
    infinite = np.full_like(estimate.level, np.inf)
    places = [
        over_ends(lambda end, by=by: end * by, widened(error, SAME_MULTIPLE))
        for by in (weigh.t_quantile_two_sided(estimate.level, df) for df in (own_df(columns), infinite))
    ]
    one_off = np.logical_or.reduce([_one_off(to_low, to_high, each) for each in places])
    one_off |= of_plain_t(columns, _one_off(to_low, to_high, places[0], _SHARPNESS_OF_T) & ~one_off)
    usable = _usable(columns) & np.isfinite(error.high) & (error.low > 0) & ~half.known
    usable &= estimate.low.known & estimate.high.known
    usable &= ~otherwise_made(columns, usable & one_off) & ~apart_from_test(columns, usable & one_off)
    least, most = multiples(columns)
    return Agreement(
        "limits", (INTERVAL, ESTIMATE), usable, ~one_off, error.low * least, error.high * most, _SKEWED
    )


def _one_off(
    to_low: Interval,
    to_high: Interval,
    expected: Interval,
    sharpness: tuple[tuple[float, float, float], ...] = _SHARPNESS,
) -> Booleans:
    """Where one distance is sharply the one expected and the other is far from it."""
    one_off = np.zeros(expected.value.shape, np.bool_)
    for sharp, away, toward in sharpness:
        size = expected.value
        far = Interval(size, expected.low - toward * size, expected.high + away * size)
        for near, other in ((to_low, to_high), (to_high, to_low)):
            blurred = (expected.high - expected.low) + (near.high - near.low)
            one_off |= overlap(near, expected) & ~overlap(other, far) & (blurred < sharp * size)
    return one_off


def _lone_limit(columns: Columns) -> Agreement:
    """The only limit of an interval, which lies between one-sided and two-sided multiples of the error."""
    estimate, error = columns.estimate, _implied_error(columns)
    to_low, to_high = minus(estimate.value, estimate.low), minus(estimate.high, estimate.value)
    one_sided = weigh.t_quantile_two_sided(2 * estimate.level - 1, np.full_like(estimate.level, np.inf))
    within = Interval(error.value, error.low * one_sided * (1 - SAME_MULTIPLE), error.high * multiples(columns)[1])
    alone = (estimate.low.known ^ estimate.high.known) & (estimate.level > 1 / 2)
    usable = _usable(columns) & alone & np.isfinite(error.high) & (error.low > 0)
    agrees = overlap(where(estimate.low.known, to_low, to_high), within)
    usable &= ~otherwise_made(columns, usable & ~agrees) & ~apart_from_test(columns, usable & ~agrees)
    return Agreement("lone-limit", (INTERVAL, ESTIMATE, ERROR), usable, agrees, within.low, within.high, _SKEWED)


def _centre(columns: Columns, half: Interval) -> Agreement:
    """The estimate against the middle of an interval whose width and statistic fit just that middle."""
    estimate, found = columns.estimate, _size_or_z(columns)
    middle = over_ends(lambda a, b: (a + b) / 2, estimate.low, estimate.high)
    reach = over_ends(lambda end: end / 2, minus(estimate.high, estimate.low))
    size = in_size(middle)
    infinite = np.full_like(estimate.level, np.inf)
    fits, sharp = np.zeros(half.value.shape, np.bool_), found.high - found.low < _SHARPNESS[0][0] * found.value
    for df in (own_df(columns), infinite):
        by = weigh.t_quantile_two_sided(estimate.level, df)
        expected = Interval(size.value, size.low / reach.high * by, size.high / reach.low * by)
        fits |= overlap(found, widened(expected, SAME_MULTIPLE)) & (
            expected.high - expected.low < 0.1 * found.value
        )
    apart = in_size(minus(estimate.value, middle)).low > _SHARPNESS[0][1] * reach.value
    usable = _usable(columns) & fits & sharp & ~half.known & (reach.low > 0)
    usable &= ~otherwise_made(columns, usable & apart) & ~apart_from_test(columns, usable & apart)
    # Intervals of differences of proportions are commonly drawn toward 0 (Newcombe, or units added).
    usable &= ~named(columns, usable & apart & ~estimate.log_scale, PROPORTIONS)
    return Agreement("centre", (ESTIMATE,), usable, ~apart, middle.low, middle.high, _SKEWED)


def _correlation(columns: Columns) -> tuple[Agreement, ...]:
    """The r of a correlation test against the correlation that is estimated, and its interval against the df."""
    test, estimate = columns.test, columns.estimate
    rows = test.is_one_of(R) & estimate.value.known & ~estimate.log_scale
    of_r = np.zeros(rows.shape, np.bool_)
    for row in np.flatnonzero(rows).tolist():
        given = columns.found[row].record.estimate
        of_r[row] = given is not None and "correlation" in given.measure.lower()
    if not of_r.any():
        return ()
    same = Agreement(
        "correlation",
        (ESTIMATE, STATISTIC),
        of_r & test.value.known & (estimate.null == 0),
        overlap(in_size(test.value), in_size(estimate.value)),
        in_size(test.value).low,
        in_size(test.value).high,
        ("the estimate is another coefficient than the one tested",),
    )
    return same, _fisher(columns, of_r)


def _fisher(columns: Columns, of_r: Booleans) -> Agreement:
    """The interval of a correlation, symmetric in the inverse hyperbolic tangent, against its df.

    Fisher's error there is 1 over the root of df - 1 (Metron 1 (1921) 3-32; from memory).
    """
    estimate = columns.estimate
    low, value, high = (_arctanh(each) for each in (estimate.low, estimate.value, estimate.high))
    to_low, to_high = minus(value, low), minus(high, value)
    normal = weigh.t_quantile_two_sided(estimate.level, np.full_like(estimate.level, np.inf))
    reach = normal / np.sqrt(columns.test.df1.value - 1)
    expected = widened(Interval(reach, reach, reach), SAME_MULTIPLE)
    ranks = Interval(reach, expected.low, expected.high * _BY_RANKS)
    symmetric = overlap(to_low, to_high)
    whole = over_ends(lambda end: end / 2, minus(high, low))
    usable = of_r & np.isfinite(whole.value) & np.isfinite(reach) & ~estimate.adjusted & (estimate.null == 0)
    usable &= ~otherwise_made(columns, usable)
    return Agreement(
        "fisher",
        (INTERVAL, "the df"),
        usable,
        np.where(symmetric, overlap(whole, ranks), ~_one_off(to_low, to_high, expected)),
        np.tanh(value.value - reach),
        np.tanh(value.value + reach),
        ("the interval is of another method (bootstrap, t)", "it is adjusted for several comparisons"),
    )


def _arctanh(numbers: Interval) -> Interval:
    return over_ends(lambda end: np.arctanh(np.clip(end, -1, 1)), numbers)
