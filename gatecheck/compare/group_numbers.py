"""Means, standard deviations and sizes of groups against the statistic, the effect and its standard error.

Student's and Welch's t with the df of Satterthwaite, the t of one sample and the F of a one-way analysis of
variance, all in their textbook forms (from memory); a test is set against the one that its df are those of.
"""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from gatecheck.columns import Booleans, Columns, Floats, Integers, Interval, T, Z, columns_of
from gatecheck.compare.agreement import Agreement, in_size, minus, on_all, over_ends, overlap, where, widened
from gatecheck.compare.design_names import T_TEST, WELCH
from gatecheck.compare.group_summaries import (
    HARMLESS,
    SAME,
    SUMMARIES,
    Group,
    Summaries,
    at,
    fits,
    measured,
    named_rows,
    of_groups,
    over,
    over_root,
    quotient,
    summarised,
    unmodelled,
)  # fmt: skip
from gatecheck.model.found import Found
from gatecheck.model.numbers import Reported
from gatecheck.model.struct import struct

_LOST = 1e-12
#: The correction for small samples by its approximation and exactly (common practice, no source).
_CORRECTION = 2e-3
_STANDARDISED = r"standardi[sz]ed|cohen|hedges|glass|\bsmd\b|effect size"
_DIFFERENCE = r"difference|change|\bmean"
_Z_OF_MEANS = r"two[- ]sample z"


def group_numbers(columns: Columns) -> tuple[Agreement, ...]:
    """Every comparison with the summaries of groups, of all rows; none where no record gives them."""
    return _compared(columns, [summarised(columns, row) for row in range(len(columns.found))])


def as_errors(one: Found, name: str) -> tuple[float, ...]:
    """The standard deviations of the groups of a record if those that it gives are standard errors.

    None where the comparison of that `name` does not agree with them.
    """
    columns = columns_of([one])
    groups = tuple(
        Group(group.n, group.mean, _times(group.sd, math.sqrt(group.n))) for group in summarised(columns, 0)
    )
    with np.errstate(all="ignore"):
        compared = [each for each in _compared(columns, [groups]) if each.name == name]
    fits = any(each.checked[0] and each.agrees[0] for each in compared)
    return tuple(group.sd.value for group in groups) if fits else ()


def _times(number: Reported, by: float) -> Reported:
    return Reported(number.value * by, number.low * by, number.high * by, text=number.text)


def _compared(columns: Columns, by_row: Sequence[tuple[Group, ...]]) -> tuple[Agreement, ...]:
    """The comparisons with these groups of each row."""
    from gatecheck.compare.analysis_of_variance import analysis_of_variance  # noqa: PLC0415  # F is rarer than t

    found: list[Agreement] = []
    for number, compare in ((1, _one_sample), (2, _two_samples)):
        rows = np.array([row for row, groups in enumerate(by_row) if len(groups) == number], np.intp)
        if rows.size:
            groups = [of_groups([by_row[row][place] for row in rows]) for place in range(number)]
            found += [on_all(each, rows, len(by_row)) for each in compare(columns, rows, groups)]
    return (*found, *analysis_of_variance(columns, by_row))


def _one_sample(columns: Columns, rows: Integers, groups: list[Summaries]) -> tuple[Agreement, ...]:
    """The t of one sample, from the estimate less no effect and the standard deviation."""
    (one,), test = groups, columns.test
    df = at(test.df1, rows)
    of_one = (df.low <= one.n - 1) & (df.high >= one.n - 1)
    estimate, error = at(columns.estimate.value, rows), over(one.sd, np.sqrt(one.n))
    size = in_size(estimate)
    expected = quotient(size, error)
    usable = unmodelled(columns, rows) & of_one & test.is_one_of(T)[rows] & ~columns.no_effect_aim[rows]
    return (
        Agreement(
            "groups-statistic",
            (SUMMARIES, "the statistic"),
            usable & expected.known & test.value.known[rows] & (error.low > 0),
            fits(in_size(at(test.value, rows)), expected, over_root(expected, one.n)),
            expected.low,
            expected.high,
            HARMLESS,
            (SUMMARIES, "the statistic"),
        ),
    )


@struct
class _Design:
    """Which test each row's df are those of, and the standard errors of the difference that this allows.

    `error` is that of the test; `others` are allowed beside it: those of standard deviations with divisor n, as
    some programs compute them.
    """

    pooled: Booleans
    welch: Booleans
    paired: Booleans
    satterthwaite: Interval
    error: Interval
    others: tuple[Interval, ...]


def _two_samples(columns: Columns, rows: Integers, groups: list[Summaries]) -> tuple[Agreement, ...]:
    first, second = groups
    plain = unmodelled(columns, rows) & (columns.estimate.null[rows] == 0)
    design = _design(columns, rows, first, second)
    own = in_size(at(columns.test.value, rows))
    difference = _difference(first, second)
    expected = quotient(difference, design.error)
    of_t = columns.test.is_one_of(T)[rows] & (design.pooled | design.welch)
    of_z = columns.test.is_one_of(Z)[rows] & named_rows(columns, rows, _Z_OF_MEANS)
    statistic = Agreement(
        "groups-statistic",
        (SUMMARIES, "the statistic"),
        plain & own.known & (of_t | of_z) & ~columns.no_effect_aim[rows] & (design.error.low > 0),
        fits(own, expected, *(quotient(difference, each) for each in design.others)),
        expected.low,
        expected.high,
        HARMLESS,
        (SUMMARIES, "the statistic"),
    )
    return statistic, _satterthwaite(columns, rows, design, plain), *_estimates(columns, rows, groups, design)


def has_welch_df(columns: Columns, row: int) -> bool:
    """Whether the df of a row are those of Welch's t by the standard deviations of its two groups."""
    groups, df = summarised(columns, row), columns.test.df1
    if len(groups) != 2:  # noqa: PLR2004  # two samples
        return False
    expected = _satterthwaite_df(*(of_groups([group]) for group in groups))
    return bool(df.low[row] <= expected.high[0] * (1 + SAME) and df.high[row] >= expected.low[0] * (1 - SAME))


def _design(columns: Columns, rows: Integers, first: Summaries, second: Summaries) -> _Design:
    df = at(columns.test.df1, rows)
    of_t = columns.test.is_one_of(T)[rows] & df.known
    satterthwaite = _satterthwaite_df(first, second)
    # A t test with a fraction of a df is Welch's, whatever its summaries say.
    fractional = (df.value != np.rint(df.value)) & named_rows(columns, rows, T_TEST)
    welch = of_t & (overlap(df, widened(satterthwaite, SAME)) | fractional)
    both = first.n + second.n - 2
    pooled = of_t & (df.low <= both) & (df.high >= both) & ~named_rows(columns, rows, WELCH)
    pairs = of_t & (first.n == second.n) & (df.low <= first.n - 1) & (df.high >= first.n - 1)
    alike, apart = (_errors(first, second, pooled=each) for each in (True, False))
    # A z of means is commonly that of errors apart; where the df allow both tests, both errors may stand.
    main = [where(pooled, a, b) for a, b in zip(alike, apart, strict=True)]
    beside = [where(welch | ~of_t, a, b) for a, b in zip(apart, alike, strict=True)]
    return _Design(pooled, welch, pairs & ~pooled & ~welch, satterthwaite, main[0], (main[1], *beside))


def _satterthwaite_df(first: Summaries, second: Summaries) -> Interval:
    """The df of Welch's t over the rounding of standard deviations; greatest where the errors balance."""

    def share(sd1: Floats, sd2: Floats) -> Floats:
        return (sd1**2 / first.n) / (sd2**2 / second.n)

    def df(share: Floats) -> Floats:
        return (1 + share) ** 2 / (share**2 / (first.n - 1) + 1 / (second.n - 1))

    low, high = share(first.sd.low, second.sd.high), share(first.sd.high, second.sd.low)
    balance = (first.n - 1) / (second.n - 1)
    greatest = np.where((low <= balance) & (balance <= high), balance, np.where(high < balance, high, low))
    least = np.minimum(df(low), df(high))
    return Interval(df(share(first.sd.value, second.sd.value)), least, df(greatest))


def _errors(first: Summaries, second: Summaries, *, pooled: bool) -> tuple[Interval, Interval]:
    """The standard error of the difference by standard deviations with divisor n - 1, and with divisor n."""
    n1, n2 = first.n, second.n

    def error(sd1: Floats, sd2: Floats, less: float) -> Floats:
        if pooled:
            variance = ((n1 - less) * sd1**2 + (n2 - less) * sd2**2) / (n1 + n2 - 2)
            return np.sqrt(variance * (1 / n1 + 1 / n2))
        return np.sqrt(sd1**2 / (n1 - 1 + less) + sd2**2 / (n2 - 1 + less))

    by_less_one, by_n = (
        over_ends(lambda a, b, less=less: error(a, b, less), first.sd, second.sd) for less in (1.0, 0.0)
    )
    return by_less_one, by_n


def _satterthwaite(columns: Columns, rows: Integers, design: _Design, plain: Booleans) -> Agreement:
    """The df of a test that is named Welch's against the standard deviations and sizes."""
    df = at(columns.test.df1, rows)
    fractional = (df.value != np.rint(df.value)) & named_rows(columns, rows, T_TEST)
    welch = columns.test.is_one_of(T)[rows] & (named_rows(columns, rows, WELCH) | fractional)
    return Agreement(
        "welch-df",
        (SUMMARIES, "the df"),
        plain & welch & df.known & np.isfinite(design.satterthwaite.low + design.satterthwaite.high),
        overlap(df, widened(design.satterthwaite, SAME)),
        design.satterthwaite.low,
        design.satterthwaite.high,
        ("the summaries are of all units before exclusions",),
    )


def _estimates(columns: Columns, rows: Integers, groups: list[Summaries], design: _Design) -> tuple[Agreement, ...]:
    """The estimate and its standard error against the summaries, where the test is plainly of two samples."""
    unadjusted = unmodelled(columns, rows) & (columns.estimate.null[rows] == 0)
    by_name = named_rows(columns, rows, T_TEST) & ~columns.test.df1.known[rows]
    alone = unadjusted & (design.pooled | design.welch | by_name)
    standardised = measured(columns, rows, _STANDARDISED)
    raw = measured(columns, rows, _DIFFERENCE) & ~standardised
    estimate = in_size(at(columns.estimate.value, rows))
    error = at(columns.estimate.standard_error, rows)
    return (
        _means(groups, estimate, raw & (alone | (unadjusted & design.paired))),
        _effect(groups, estimate, standardised & alone),
        Agreement(
            "groups-error",
            (SUMMARIES, "the standard error"),
            alone & raw & error.known,
            fits(error, design.error, *design.others),
            design.error.low,
            design.error.high,
            HARMLESS,
            (SUMMARIES, "the standard error"),
        ),
    )


def _means(groups: list[Summaries], estimate: Interval, where_raw: Booleans) -> Agreement:
    first, second = groups
    difference = _difference(first, second)
    return Agreement(
        "groups-estimate",
        ("the means of the groups", "the estimate"),
        where_raw & estimate.known,
        fits(estimate, difference),
        difference.low,
        difference.high,
        ("the estimate is adjusted for covariates", "it is in another unit or on another scale"),
        ("the means of the groups", "the estimate"),
    )


def _effect(groups: list[Summaries], estimate: Interval, where_standardised: Booleans) -> Agreement:
    first, second = groups
    effects = _standardised_effects(first, second, _difference(first, second))
    return Agreement(
        "groups-effect",
        (SUMMARIES, "the estimate"),
        where_standardised & estimate.known & (effects[0].low >= 0),
        fits(estimate, *effects),
        effects[0].low,
        effects[0].high,
        ("it is standardised by another standard deviation",),
    )


def _difference(first: Summaries, second: Summaries) -> Interval:
    """The size of the difference, with the digits that a subtraction of means in all their digits loses."""
    size = in_size(minus(first.mean, second.mean))
    lost = _LOST * (np.abs(first.mean.value) + np.abs(second.mean.value))
    return Interval(size.value, np.maximum(size.low - lost, 0), size.high + lost)


def _standardised_effects(first: Summaries, second: Summaries, difference: Interval) -> list[Interval]:
    """The difference over each standard deviation in use, with and without the correction for small samples."""
    n1, n2 = first.n, second.n
    alike, by_n = _errors(first, second, pooled=True)
    harmonic = np.sqrt(1 / n1 + 1 / n2)
    one, other = first.sd, second.sd
    average = over_ends(lambda a, b: np.sqrt((a**2 + b**2) / 2), one, other)
    spreads = [over(alike, harmonic), over(by_n, harmonic), one, other, average]
    plain = [quotient(difference, each) for each in spreads]
    # Hedges' correction, exact and as it is commonly approximated, differ by less than its own slack here.
    correction = 1 - 3 / (4 * (n1 + n2 - 2) - 1)
    corrected = [widened(over(each, 1 / correction), _CORRECTION) for each in plain]
    return [*plain, *corrected]
