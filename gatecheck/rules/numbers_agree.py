"""Rule `numbers-agree`: the figures of a record that determine each other agree within their rounding.

Statistic, degrees of freedom, sides and p; estimate and interval; interval, level and standard error; statistic
and estimate; interval and p on the same side of no effect. A p that is adjusted, exact or from resampling is not
compared with a statistic, and an interval that is not symmetric about its estimate not with a standard error.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence

import numpy as np

from gatecheck.compare.own_numbers import Agreement
from gatecheck.model.numbers import exact
from gatecheck.model.record import Estimate, Interval, Test
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Judgement, Rule, Said, Table
from gatecheck.rules.words import describe_result, tell_number, tell_statistic

_CLOSE = 0.02
_EMPTY_LEVEL = 0.5


def judge(table: Table, settings: Sequence[RuleSettings | None]) -> Judgement:
    """Short where any two figures of the record cannot both be right."""
    disagrees = [agreement.disagrees for agreement in table.own_numbers]
    return Judgement(np.logical_or.reduce([*disagrees, np.zeros(len(settings), np.bool_)]))


def explain(table: Table, row: int, _: RuleSettings, __: Judgement) -> Said:
    """Which figures do not fit together, and which figure would."""
    record = table.record(row)
    told = [_TELL[each.name](table, row, each) for each in table.own_numbers if each.disagrees[row]]
    if not told:
        checked = [_CHECKED[each.name] for each in table.own_numbers if each.checked[row]]
        compared = f"compared: {', '.join(checked)}" if checked else "no two of its figures determine each other"
        return Said(f"{describe_result(record)}: {compared}.")
    found = "; ".join(each.message for each in told)
    return Said(f"{found}; the policy wants figures that fit together.", _in_one_sentence(told))


def _in_one_sentence(told: list[Said]) -> str:
    """What to do about each disagreement, without repeats, so that a shortfall stays short."""
    first, *others = dict.fromkeys(each.remedy.removesuffix(".") for each in told)
    return "; ".join([first, *(f"{other[0].lower()}{other[1:]}" for other in others)]) + "."


def _tell_p(table: Table, row: int, agreement: Agreement) -> Said:
    test = table.record(row).test or Test()
    implied = math.exp(float(table.evidence.statistics.log_p[row]))
    rounded = test.value is not None and test.value.text is not None
    within = f" ({agreement.low[row]:.3g} to {agreement.high[row]:.3g} within its rounding)" if rounded else ""
    message = f"{tell_statistic(test)} gives p = {implied:.3g}{within}, and {tell_number(test.p)} is reported"
    return Said(message, _hint_on_p(float(table.columns.test.p.value[row]), implied))


def _hint_on_p(reported: float, implied: float) -> str:
    """The harmless explanation that the two figures suggest."""
    if reported == 0:
        return "Give all digits of p: some writers round to four decimals, which turns a small p into 0."
    if abs(2 * reported - implied) < _CLOSE * implied:
        return "The reported p is half of it: if one side was tested, say sides: 1 and which tail."
    if abs(reported - 2 * implied) < _CLOSE * reported:
        return "The reported p is twice it: if two sides were tested, say sides: 2."
    return "Take statistic, df and p from the same run; an adjusted or resampled p is named by p_kind."


def _tell_inside(table: Table, row: int, _: Agreement) -> Said:
    estimate = _estimate(table, row)
    return Said(
        f"the estimate {tell_number(estimate.value)} lies outside its own interval {_limits(estimate)}",
        "Take estimate and interval from the same run and on the same scale.",
    )


def _tell_width(table: Table, row: int, _: Agreement) -> Said:
    estimate, column = _estimate(table, row), table.columns.estimate
    width = (column.high.value[row] - column.low.value[row]) / 2
    multiple = width / column.standard_error.value[row]
    return Said(
        f"the {100 * column.level[row]:.4g} % interval {_limits(estimate)} reaches {width:.3g} to either side"
        f"{_on_log_scale(table, row)}, which is {multiple:.3g} standard errors of "
        f"{tell_number(estimate.standard_error)}",
        "Check the level, the scale (ratios: log) and whether a standard deviation stands for the standard error.",
    )


def _tell_statistic(table: Table, row: int, agreement: Agreement) -> Said:
    test = table.record(row).test or Test()
    source = "standard error" if table.columns.estimate.standard_error.known[row] else "interval"
    size = float(agreement.low[row] / 2 + agreement.high[row] / 2)
    return Said(
        f"estimate and {source}{_on_log_scale(table, row)} give {test.statistic} = {size:.3g} in size, and "
        f"{tell_number(test.value)} is reported",
        "Take estimate and statistic from the same test, and say in estimate.null what it is compared with.",
    )


def _tell_sides(table: Table, row: int, agreement: Agreement) -> Said:
    estimate, column = _estimate(table, row), table.columns.estimate
    excludes = column.low.low[row] > 0 or column.high.high[row] < 0
    test = table.record(row).test or Test()
    return Said(
        f"the interval {_limits(estimate)} {'excludes' if excludes else 'includes'} {column.null[row]:g}, which "
        f"goes with p = {agreement.low[row]:.2g}{_on_log_scale(table, row)}, and {tell_number(test.p)} is reported",
        "Check the scale, the level, and whether one of the two is adjusted (p_kind, interval.adjusted).",
    )


def _on_log_scale(table: Table, row: int) -> str:
    return " on the log scale" if table.columns.estimate.log_scale[row] else ""


def _estimate(table: Table, row: int) -> Estimate:
    return table.record(row).estimate or Estimate("estimate", exact(math.nan))


def _limits(estimate: Estimate) -> str:
    interval = estimate.interval or Interval(_EMPTY_LEVEL)
    return f"{tell_number(interval.low)} to {tell_number(interval.high)}"


#: How a disagreement is told, and what the comparison is called, by the name of the comparison.
_TELL: dict[str, Callable[[Table, int, Agreement], Said]] = {
    "p": _tell_p,
    "inside": _tell_inside,
    "width": _tell_width,
    "statistic": _tell_statistic,
    "sides": _tell_sides,
}
_CHECKED = {
    "p": "statistic, df, sides and p",
    "inside": "estimate and interval",
    "width": "interval and standard error",
    "statistic": "estimate and statistic",
    "sides": "interval and p",
}

RULE = Rule(
    name="numbers-agree",
    asks="figures that determine each other agree within the rounding of what was reported",
    settings=RuleSettings,
    judge=judge,
    explain=explain,
    always_on=True,
)
