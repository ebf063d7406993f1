"""Effect sizes that follow from a statistic: shares of variance, association in a table, correlations, and d.

Eta squared is `df1 F / (df1 F + df2)` where one factor is analysed or where it is partial, and at most that where
there are other factors; omega squared and epsilon squared free it from bias. Phi is the root of chi-squared over n,
and Cramér's V that over the lesser side of the table less one. The correlation with the group is
`t / sqrt(t^2 + df)` (textbook forms, from memory). What no usual form gives disagrees.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable
from typing import NamedTuple

from gatecheck.columns import CHI2, Columns, F, T
from gatecheck.compare.agreement import Agreement, Compared, Kind, gathered
from gatecheck.compare.design_names import (
    MODELLED,
    ONE_WAY,
    PAIRED,
    PROPORTIONS,
    T_TEST,
    says,
    test_name,
)
from gatecheck.compare.standardised_effects import STANDARDISED, standardised_difference
from gatecheck.model.record import Estimate, Record

_KIND = Kind(
    "effect-statistic",
    ("the statistic", "the estimate"),
    (
        "the effect size is of another contrast or of other units than the test",
        "it is standardised or corrected in a way of its own (name it in estimate.measure)",
    ),
    ("the statistic", "the estimate"),
)
_SAME = 1e-6
#: The F of these tests is no ratio of the sums of squares that an effect size is made of.
_NO_SUMS_OF_SQUARES = (
    r"welch|brown|mixed|multilevel|hierarch|random|satterth|kenward|\bgee\b|robust|sandwich|cluster|survey|weighted"
    r"|multivariate|manova|pillai|wilks|hotelling|rank|kruskal|friedman|bootstrap|permut|imput|bayes|trimm|yuen"
)
_VARIANCE = r"\b(?:partial |generali[sz]ed )?eta\b|\beta(?=[-_ ]?(?:p|2|²|sq))|η"
_LESS_BIASED = r"\b(?:omega|epsilon)(?=[-_ ]?(?:p|2|²|sq|partial))|ω|ε"
_COHENS_F = r"cohen['’]?s? f\b|cohen['’]?s? f(?:2|²)|^f(?:2|²)?$"
_PARTIAL = r"partial|[ηω]p|[ηω]_p|eta[-_ ]?p"
_SQUARED = r"squared?\b|2\b|²|\bsq"
_ASSOCIATION = r"\bphi\b|φ|cram[eé]r|cohen['’]?s? w\b"
_CRAMER = r"cram[eé]r"
_TABLE = rf"{PROPORTIONS}|association|goodness"
_NO_PEARSON = r"likelihood|\bg[- ]test|exact"
_CORRELATION = (
    r"^(?:effect size )?r$|^(?:the )?(?:pearson(?:['’]s)? |point[- ]biserial )?correlation(?: coefficient)?\b"
)
_ADJUSTED = r"(?<!un)adjusted|shrunk"
_CORRECTED = r"partial|adjusted|corrected|attenuat|intraclass|rank|semi"
#: A statistic with the continuity correction beside a phi without it: by so much over n if neither side of the
#: table is rarer than one in twenty-five (from the forms).
_LOST_BY_CORRECTION = 5.0
_IN_PERCENT = r"^\s*(?:%|percent|per cent)\s*$"
_PERCENT = 100.0

_WITHOUT_CORRECTION = r"(?:without|no|un)[- ]?(?:yates|continuity|correct)"

_Range = tuple[float, float]


class _Ratio(NamedTuple):
    """Explained over unexplained variance within rounding, and its df."""

    low: float
    high: float
    df1: float
    df2: float


def effect_numbers(columns: Columns) -> tuple[Agreement, ...]:
    """Every comparison of an effect size with the statistic beside it, of all rows; none where there is none."""
    found: dict[int, Compared] = {}
    known = columns.test.value.known & columns.estimate.value.known & ~columns.estimate.log_scale
    for row in (known & (columns.estimate.null == 0) & ~columns.no_effect_aim).nonzero()[0].tolist():
        record = columns.found[row].record
        compared = None if record.estimate is None else _compare(columns, row, record, record.estimate)
        if compared is not None:
            found[row] = compared
    return (gathered(_KIND, found, len(columns.found)),) if found else ()


def _compare(columns: Columns, row: int, record: Record, estimate: Estimate) -> Compared | None:
    """Set the effect size against every form that its measure may stand for."""
    if says(_ADJUSTED, estimate.measure):
        return None
    for measure, ranges_of in _BY_MEASURE:
        if says(measure, estimate.measure):
            ranges = [each for each in ranges_of(columns, row, record) if not math.isnan(each[0] + each[1])]
            return _within(columns, row, ranges, estimate) if ranges else None
    return None


def _within(columns: Columns, row: int, ranges: list[_Range], estimate: Estimate) -> Compared:
    """Whether the size of the estimate lies in one of the ranges; they are not negative but for lack of bias."""
    unit = _PERCENT if says(_IN_PERCENT, estimate.unit or "") else 1.0
    given = columns.estimate.value
    low, high = float(given.low[row]) / unit, float(given.high[row]) / unit
    if min(end for end, _ in ranges) >= 0:
        size = abs(low), abs(high)
        low, high = (0.0 if low < 0 < high else min(size)), max(size)
    fits = any(low <= most + _SAME * abs(most) and high >= least - _SAME * abs(least) for least, most in ranges)
    return Compared(fits, unit * min(least for least, _ in ranges), unit * max(most for _, most in ranges))


def _ratio(columns: Columns, row: int) -> _Ratio | None:
    """Explained over unexplained variance from F, or from the square of a t; none where it is no such ratio."""
    test, df1, df2 = columns.test, columns.test.df1, columns.test.df2
    if says(_NO_SUMS_OF_SQUARES, test_name(columns, row)):
        return None
    low, high = float(test.value.low[row]), float(test.value.high[row])
    if test.statistic[row] == F:
        least, most = max(low, 0.0) * df1.low[row] / df2.high[row], high * df1.high[row] / df2.low[row]
        return _Ratio(float(least), float(most), float(df1.value[row]), float(df2.value[row]))
    if test.statistic[row] == T:
        square = 0.0 if low <= 0 <= high else min(low * low, high * high)
        least, most = square / df1.high[row], max(low * low, high * high) / df1.low[row]
        return _Ratio(float(least), float(most), 1.0, float(df1.value[row]))
    return None


def _alone(columns: Columns, row: int, record: Record) -> bool:
    """Whether the factor tested is the only one, so that nothing else takes a part of the variance."""
    name = test_name(columns, row)
    of_groups = says(T_TEST, name) and columns.test.statistic[row] == T and not says(PAIRED, name)
    return (says(ONE_WAY, name) or of_groups) and not says(MODELLED, name) and not record.covariates


def _explained(columns: Columns, row: int, record: Record) -> Iterable[_Range]:
    ratio, measure = _ratio(columns, row), _measure(record)
    if ratio is None:
        return ()
    exact = _alone(columns, row, record) or says(_PARTIAL, measure)
    least, most = (ratio.low / (1 + ratio.low) if exact else 0.0), ratio.high / (1 + ratio.high)
    if says(_SQUARED, measure):
        return ((least, most),)
    return (least, most), (math.sqrt(least), math.sqrt(most))


def _less_biased(columns: Columns, row: int, record: Record) -> Iterable[_Range]:
    """From omega squared to epsilon squared; below 0, which they may be, programs give 0 too."""
    ratio = _ratio(columns, row)
    if ratio is None:
        return ()
    part = ratio.df1 / ratio.df2
    omega = (ratio.low - part) / (ratio.low + 1 + 1 / ratio.df2)
    epsilon = (ratio.high - part) / (ratio.high + 1)
    least = omega if omega > 0 and _alone(columns, row, record) else min(omega, 0.0)
    return ((least, max(epsilon, 0.0)),)


def _cohens_f(columns: Columns, row: int, record: Record) -> Iterable[_Range]:
    """The root of explained over unexplained variance, also by all units, or its square."""
    ratio, measure = _ratio(columns, row), _measure(record)
    if ratio is None:
        return ()
    exact = _alone(columns, row, record) or says(_PARTIAL, measure)
    by_all_units = ratio.df2 / (ratio.df1 + ratio.df2 + 1)
    least, most = (ratio.low * by_all_units if exact else 0.0), ratio.high
    return ((least, most) if says(_SQUARED, measure) else (math.sqrt(least), math.sqrt(most)),)


def _association(columns: Columns, row: int, record: Record) -> Iterable[_Range]:
    """Phi, w or V of every table that may have these df, also freed from bias, from chi-squared and n."""
    test, name, sample = columns.test, test_name(columns, row), record.sample
    of_table = test.statistic[row] == CHI2 and says(_TABLE, name) and not says(_NO_PEARSON, name)
    counts = [] if sample is None else [sample.n, sum(group.n for group in sample.groups)]
    counted = [float(each) for each in counts if each]
    df = float(test.df1.value[row])
    if not of_table or not counted or not df.is_integer() or says(MODELLED, name) or record.covariates:
        return ()
    excluded = 0 if sample is None else sum(each.n for each in sample.excluded)
    fewest, most = max(min(counted) - excluded, 1.0), max(counted)
    low, high = float(test.value.low[row]) / most, float(test.value.high[row]) / fewest
    uncorrected = _LOST_BY_CORRECTION / fewest if df == 1 and not says(_WITHOUT_CORRECTION, name) else 0.0
    if not says(_CRAMER, _measure(record)):
        return ((math.sqrt(max(low, 0.0)), math.sqrt(high) + uncorrected),)
    unbiased = max(low - df / max(most - 1, 1.0), 0.0)
    sides = [side for side in range(1, int(min(df, _PERCENT)) + 1) if df % side == 0]
    return [(math.sqrt(unbiased / side), math.sqrt(high / side) + uncorrected) for side in sides]


def _correlation(columns: Columns, row: int, record: Record) -> Iterable[_Range]:
    """The correlation with the group, or of two variables, from the t that tests it."""
    test, name, measure = columns.test, test_name(columns, row), _measure(record)
    tested = says(T_TEST, name) or says(PAIRED, name) or says("correlation", name)
    if test.statistic[row] != T or not tested or says(MODELLED, name) or record.covariates:
        return ()
    if says(_CORRECTED, f"{measure} {name}"):
        return ()
    ratio = _ratio(columns, row)
    if ratio is None:
        return ()
    groups = () if record.sample is None else tuple(float(group.n) for group in record.sample.groups)
    # Of groups of unlike sizes the correlation is also made from d as if they were of one size.
    of_one_size = 4 / sum(1 / n for n in groups) if len(groups) > 1 and min(groups) > 0 else ratio.df2
    least, most = ratio.low * ratio.df2, ratio.high * ratio.df2
    fewest, all_units = min(ratio.df2, of_one_size), max(ratio.df2 + 2, of_one_size)
    return ((math.sqrt(least / (least + all_units)), math.sqrt(most / (most + fewest))),)


def _standardised(columns: Columns, row: int, record: Record) -> Iterable[_Range]:
    return standardised_difference(columns, row, record)


def _measure(record: Record) -> str:
    return "" if record.estimate is None else record.estimate.measure


_BY_MEASURE: tuple[tuple[str, Callable[[Columns, int, Record], Iterable[_Range]]], ...] = (
    (_LESS_BIASED, _less_biased),
    (_VARIANCE, _explained),
    (_COHENS_F, _cohens_f),
    (_ASSOCIATION, _association),
    (_CORRELATION, _correlation),
    (STANDARDISED, _standardised),
)
