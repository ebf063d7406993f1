"""Counts of events in two groups against the statistic, the effect, its standard error and an exact p.

A statistic of two proportions is set against every form in use: with the proportions pooled and apart, with and
without the continuity correction, the likelihood ratio, and Wald's of the logarithms of odds and risks (textbook
forms, from memory). One that is none of these disagrees.
"""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np

from gatecheck import weigh
from gatecheck.columns import CHI2, Booleans, Columns, Interval, Z
from gatecheck.compare.agreement import Agreement, Compared, Kind, gathered
from gatecheck.compare.design_names import FISHER, MODELLED, PROPORTIONS, says, test_name
from gatecheck.compare.interval_shapes import SAME_MULTIPLE
from gatecheck.compare.two_proportions import (
    Table,
    log_odds,
    log_risks,
    squares,
    variance_of_odds,
    variance_of_risks,
)
from gatecheck.model.record import Estimate, Record

COUNTS = "the counts of the groups"
_OTHER_TEST = (
    "the test is another one (stratified, paired, with covariates)",
    "the counts are of other units than those analysed",
)
_STATISTIC = Kind("counts-statistic", (COUNTS, "the statistic"), _OTHER_TEST, (COUNTS, "the statistic"))
_ESTIMATE = Kind(
    "counts-estimate",
    (COUNTS, "the estimate"),
    ("the estimate is adjusted or conditional",),
    (COUNTS, "the estimate"),
)
_ERROR = Kind("counts-error", (COUNTS, "the standard error"), _OTHER_TEST, (COUNTS, "the standard error"))
_INTERVAL = Kind(
    "counts-interval",
    (COUNTS, "the interval"),
    ("the interval is adjusted or of another level", "the counts are of other units than those analysed"),
    (COUNTS, "the interval"),
)
_EXACT = Kind("counts-exact", (COUNTS, "p"), ("the exact p is of another test (mid-p, unconditional)",))
_IMPOSSIBLE = Kind("counts", (COUNTS,), ("the events are counted by episode, not by unit",))
#: Relative difference between figures of careful programs that are given in all their digits.
_SAME = 1e-6
#: A statistic so small is 0 but for the rounding inside a program.
_NOTHING = 1e-12
_PAIR = 2
#: From here on, whole numbers are not all doubles.
_LARGEST = 2**53
#: Of more tables with these margins an exact p is not summed.
_MOST_TABLES = 1_000_000
_PERCENT = 100.0
_ADJUSTED = r"(?<!un)adjusted|conditional|pooled|median|common"
_ODDS = r"odds ratio"
_RISKS = r"risk ratio|relative risk|ratio of proportions"
_DIFFERENCE = r"difference"
#: What a ratio of risks is told as when it is told by how much it is below or above 1.
_RELATIVE_CHANGE = r"reduction|increase|decrease|change"
_IN_PERCENT = r"%|per ?cent"
_LOGARITHM = r"\blog"
_OF_PROPORTIONS = rf"{_ODDS}|{_RISKS}|(?:risk|absolute) difference|difference (?:of|in|between) (?:proportion|risk)"
_PRINTED = ("Pearson", "continuity", "likelihood ratio", "unpooled")


def count_numbers(columns: Columns) -> tuple[Agreement, ...]:
    """Every comparison with counts of events, of all rows; none where no record gives them."""
    found: dict[Kind, dict[int, Compared]] = {}
    for row, one in enumerate(columns.found):
        sample = one.record.sample
        if sample is None or not any(group.events is not None for group in sample.groups):
            continue
        for kind, compare in _COMPARE:
            compared = compare(columns, row, one.record)
            if compared is not None:
                found.setdefault(kind, {})[row] = compared
    return tuple(gathered(kind, found[kind], len(columns.found)) for kind, _ in _COMPARE if kind in found)


def _possible(_: Columns, __: int, record: Record) -> Compared:
    groups = () if record.sample is None else record.sample.groups
    counted = [(group.events, group.n) for group in groups if group.events is not None]
    events, n = max(counted, key=lambda pair: pair[0] - pair[1])
    return Compared(events <= n, 0.0, float(n))


def usual_forms(record: Record) -> list[tuple[str, float]]:
    """Chi-squared of the counts of a record in the forms that programs print, from the least to the greatest."""
    table = _table(record)
    found = {} if table is None else squares(table)
    told = [(name, found[name]) for name in _PRINTED if math.isfinite(found.get(name, math.nan))]
    return sorted(told, key=lambda form: form[1])


def _table(record: Record) -> Table | None:
    """The counts of two groups of independent units."""
    sample = record.sample
    if sample is None or sample.clusters is not None or record.covariates or len(sample.groups) != _PAIR:
        return None
    one, other = sample.groups
    if one.events is None or other.events is None or max(one.n, other.n) > _LARGEST:
        return None
    if not (0 < one.n >= one.events and 0 < other.n >= other.events):
        return None
    return Table(float(one.events), float(one.n), float(other.events), float(other.n))


def _crude(columns: Columns, row: int, record: Record) -> Table | None:
    """The counts, where the test is plainly one of two proportions, or there is none and the measure is of them."""
    name, measure = test_name(columns, row), "" if record.estimate is None else record.estimate.measure
    plain = says(PROPORTIONS, name) or (record.test is None and says(_OF_PROPORTIONS, measure))
    return _table(record) if plain and not says(MODELLED, name) and not says(MODELLED, measure) else None


def _statistic(columns: Columns, row: int, record: Record) -> Compared | None:
    table, test = _crude(columns, row, record), columns.test
    of_one_df = test.statistic[row] == Z or (test.statistic[row] == CHI2 and test.df1.value[row] == 1)
    if table is None or not test.value.known[row] or not of_one_df or columns.no_effect_aim[row]:
        return None
    of_chi2 = [square for square in squares(table).values() if math.isfinite(square)]
    forms = [math.sqrt(square) for square in of_chi2] if test.statistic[row] == Z else of_chi2
    fits = any(_covers(test.value, row, form) or _covers(test.value, row, -form) for form in forms)
    fits |= abs(test.value.value[row]) < _NOTHING > min(forms)
    return Compared(fits, min(forms), max(forms))


def _covers(given: Interval, row: int, value: float) -> bool:
    """Whether a reported number may stand for this one, computed in all digits."""
    slack = _SAME * abs(value)
    return bool(given.low[row] - slack <= value <= given.high[row] + slack)


def _estimate(columns: Columns, row: int, record: Record) -> Compared | None:
    table, given = _crude(columns, row, record), record.estimate
    if table is None or given is None or says(_ADJUSTED, given.measure):
        return None
    forms = [form for form in _effects(table, given) if math.isfinite(form)]
    null, log_scale = float(columns.estimate.null[row]), bool(columns.estimate.log_scale[row])
    if not forms or (log_scale and min(forms) <= 0):
        return None
    scaled = [math.log(form) - math.log(null) if log_scale else form - null for form in forms]
    fits = any(_covers(columns.estimate.value, row, form) for form in scaled)
    return Compared(fits, *sorted(forms[:_PAIR]))


def _effects(table: Table, estimate: Estimate) -> tuple[float, ...]:
    """The effect in either direction, also with half a unit added to every cell as some programs do."""
    logarithm = says(_LOGARITHM, estimate.measure)
    if says(_RELATIVE_CHANGE, estimate.measure):
        return _changes(table, estimate)
    if says(_ODDS, estimate.measure):
        halves = Table(table.events1 + 0.5, table.n1 + 1, table.events2 + 0.5, table.n2 + 1)
        return _both_ways(logarithm, log_odds(table), log_odds(halves))
    if says(_RISKS, estimate.measure):
        return _both_ways(logarithm, log_risks(table))
    if says(_DIFFERENCE, estimate.measure) and estimate.scale == "linear":
        difference = table.events1 / table.n1 - table.events2 / table.n2
        return difference, -difference, _PERCENT * difference, -_PERCENT * difference
    return ()


def _changes(table: Table, estimate: Estimate) -> tuple[float, ...]:
    """By how much the risks of either group are below those of the other one, also told as how much above."""
    if not says(_RISKS, estimate.measure):
        return ()
    unit = _PERCENT if says(_IN_PERCENT, f"{estimate.measure} {estimate.unit}") else 1.0
    below = [1 - ratio for ratio in _both_ways(False, log_risks(table))]
    return tuple(sign * unit * each for sign in (1, -1) for each in below)


def _both_ways(as_logarithm: bool, *logs: float) -> tuple[float, ...]:
    signed = [sign * log for log in logs for sign in (1, -1)]
    return tuple(signed) if as_logarithm else tuple(map(math.exp, signed))


def _error(columns: Columns, row: int, record: Record) -> Compared | None:
    table, given = _crude(columns, row, record), record.estimate
    if table is None or given is None or given.standard_error is None or says(_ADJUSTED, given.measure):
        return None
    forms = [form for form in _errors(table, given) if math.isfinite(form)]
    if not forms:
        return None
    fits = any(_covers(columns.estimate.standard_error, row, form) for form in forms)
    return Compared(fits, min(forms), max(forms))


def _errors(table: Table, estimate: Estimate) -> tuple[float, ...]:
    if says(_RELATIVE_CHANGE, estimate.measure):
        return ()
    if says(_ODDS, estimate.measure):
        return _of_ratio(estimate, log_odds(table), math.sqrt(variance_of_odds(table)))
    if says(_RISKS, estimate.measure):
        return _of_ratio(estimate, log_risks(table), math.sqrt(variance_of_risks(table)))
    if not says(_DIFFERENCE, estimate.measure) or estimate.scale != "linear":
        return ()
    p1, p2 = table.events1 / table.n1, table.events2 / table.n2
    pooled = (table.events1 + table.events2) / (table.n1 + table.n2)
    together = math.sqrt(pooled * (1 - pooled) * (1 / table.n1 + 1 / table.n2))
    apart = math.sqrt(p1 * (1 - p1) / table.n1 + p2 * (1 - p2) / table.n2)
    unbiased = math.sqrt(p1 * (1 - p1) / max(table.n1 - 1, 1) + p2 * (1 - p2) / max(table.n2 - 1, 1))
    return tuple(unit * error for error in (together, apart, unbiased) for unit in (1.0, _PERCENT))


def _of_ratio(estimate: Estimate, log: float, error: float) -> tuple[float, ...]:
    """The error of the logarithm; that of the ratio itself too, where the record does not say the scale."""
    logarithmic = estimate.scale == "log" or says(_LOGARITHM, estimate.measure)
    return (error,) if logarithmic else (error, *(ratio * error for ratio in _both_ways(False, log)))


def made_by_counts(columns: Columns, rows: Booleans, half: Interval) -> Booleans:
    """Which of these rows have counts that give their statistic, or p, and the half width of their interval alike.

    The two may then stand on different sides of no effect, for the test is corrected for continuity or pools the
    proportions, and the interval does neither.
    """
    found = np.zeros(rows.shape, np.bool_)
    for row in np.flatnonzero(rows).tolist():
        record = columns.found[row].record
        table, estimate = _crude(columns, row, record), record.estimate
        if table is not None and estimate is not None:
            found[row] = _gives_p(columns, row, table) and _gives_half(columns, row, _errors(table, estimate), half)
    return found


def _gives_p(columns: Columns, row: int, table: Table) -> bool:
    compared = _statistic(columns, row, columns.found[row].record)
    if compared is not None:
        return compared.agrees
    forms = [math.erfc(math.sqrt(square / 2)) for square in squares(table).values() if math.isfinite(square)]
    return any(_covers(columns.test.p, row, form) for form in forms)


def _gives_half(columns: Columns, row: int, errors: tuple[float, ...], half: Interval) -> bool:
    multiple = float(weigh.t_quantile_two_sided(columns.estimate.level[row], np.inf))
    slack = SAME_MULTIPLE * half.value[row]
    return any(half.low[row] - slack <= multiple * error <= half.high[row] + slack for error in errors)


def _interval(columns: Columns, row: int, record: Record) -> Compared | None:
    """The interval against those that the counts give by the usual methods."""
    table, given = _crude(columns, row, record), record.estimate
    if table is None or given is None or given.interval is None or says(_ADJUSTED, given.measure):
        return None
    if says(_RELATIVE_CHANGE, given.measure):
        return None
    from gatecheck.compare.count_intervals import Measure, compare_interval  # noqa: PLC0415  # few give both

    words: tuple[tuple[Measure, str], ...] = ("odds", _ODDS), ("risks", _RISKS), ("difference", _DIFFERENCE)
    measure = next((each for each, text in words if says(text, given.measure)), None)
    if measure is None or (measure == "difference" and given.scale == "log"):
        return None
    return compare_interval(measure, table, given, as_logarithm=says(_LOGARITHM, given.measure))


def _exact(columns: Columns, row: int, record: Record) -> Compared | None:
    """Fisher's exact p, by the tables that are less probable, doubled or of one side."""
    table, test = _table(record), record.test
    if table is None or test is None or test.p is None or not says(FISHER, test_name(columns, row)):
        return None
    if test.p_kind not in {"exact", "raw"} or says(MODELLED, test_name(columns, row)):
        return None
    forms = _fisher(table, one_sided=test.sides == 1)
    reported = test.p.as_rounded()
    fits = any(reported.low <= form * (1 + _SAME) and reported.high >= form * (1 - _SAME) for form in forms)
    return Compared(fits, min(forms), max(forms)) if forms else None


def _fisher(table: Table, *, one_sided: bool) -> tuple[float, ...]:
    drawn, total = table.events1 + table.events2, table.n1 + table.n2
    first, last = max(0.0, drawn - table.n2), min(drawn, table.n1)
    if last - first > _MOST_TABLES:
        return ()
    cells = np.arange(first, last + 1)
    # From one table to the next, the probability changes by this factor.
    steps = np.log((drawn - cells[:-1]) * (table.n1 - cells[:-1])) - np.log(
        (cells[:-1] + 1) * (total - table.n1 - drawn + cells[:-1] + 1)
    )
    logs = np.concatenate([[0.0], np.cumsum(steps)])
    share = np.exp(logs - logs.max())
    share /= share.sum()
    at = int(table.events1 - first)
    tails = float(share[: at + 1].sum()), float(share[at:].sum())
    if one_sided:
        return tails
    return float(share[share <= share[at] * (1 + _SAME)].sum()), min(1.0, 2 * min(tails))


_Compare = Callable[[Columns, int, Record], Compared | None]
_COMPARE: tuple[tuple[Kind, _Compare], ...] = (
    (_IMPOSSIBLE, _possible),
    (_STATISTIC, _statistic),
    (_ESTIMATE, _estimate),
    (_ERROR, _error),
    (_INTERVAL, _interval),
    (_EXACT, _exact),
)
