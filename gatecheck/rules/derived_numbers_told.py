"""The words in which figures are told that do not follow from others: effect sizes, intervals of counts, shares."""

from __future__ import annotations

from collections.abc import Mapping

from gatecheck.compare.agreement import Agreement
from gatecheck.model.record import Interval
from gatecheck.rules.numbers_told import Tell, ends, estimate_of, sample_of, test_of
from gatecheck.rules.rule import Said, Table
from gatecheck.rules.words import plural, tell_number, tell_statistic

_EMPTY_LEVEL = 0.5
_MOST_GROUPS = 6


def _tell_effect_of_statistic(table: Table, row: int, agreement: Agreement) -> Said:
    estimate, sample = estimate_of(table, row), sample_of(table, row)
    groups = f" with groups of {' and '.join(str(group.n) for group in sample.groups)}" if sample.groups else ""
    n = f" with n {sample.n}" if not groups and sample.n is not None else ""
    at_most = agreement.low[row] <= 0 < agreement.high[row]
    follows = f"at most {agreement.high[row]:.3g}" if at_most else ends(agreement, row)
    return Said(
        f"{tell_statistic(test_of(table, row))}{groups}{n} gives {follows} as {estimate.measure} by every usual "
        f"form, and {tell_number(estimate.value)} is reported",
        "Take the effect size from the test, and say in estimate.measure by which form it is made.",
    )


def _tell_count_interval(table: Table, row: int, agreement: Agreement) -> Said:
    interval = estimate_of(table, row).interval or Interval(_EMPTY_LEVEL)
    return Said(
        f"{_events(table, row)} give a {100 * interval.level:.4g} % interval near {ends(agreement, row)} by every "
        f"usual method, and {tell_number(interval.low)} to {tell_number(interval.high)} is reported",
        "Take the interval from these counts, and check its level.",
    )


def _tell_table_statistic(table: Table, row: int, agreement: Agreement) -> Said:
    return Said(
        f"{_events(table, row)} give chi2 = {agreement.low[row]:.3g} (Pearson) or {agreement.high[row]:.3g} "
        f"(likelihood ratio), and {tell_number(test_of(table, row).value)} is none of the usual forms",
        "Check the counts, and name the test.",
    )


def _events(table: Table, row: int) -> str:
    groups = sample_of(table, row).groups
    told = [f"{group.events} of {group.n}" for group in groups[:_MOST_GROUPS]]
    more = len(groups) - len(told)
    last = f"{more} more" if more else told.pop()
    return f"{', '.join(told)} and {last}"


def _tell_df_between(table: Table, row: int, agreement: Agreement) -> Said:
    groups = len(sample_of(table, row).groups)
    return Said(
        f"a one-way analysis of variance of {groups} groups has {agreement.high[row]:g} df between them, and "
        f"{tell_statistic(test_of(table, row))} is reported",
        "Check the df, or name all groups, or name the test.",
    )


def _tell_compared(table: Table, row: int, agreement: Agreement) -> Said:
    names = table.record(row).compares or ()
    return Said(
        f"{' and '.join(names)} differ by {_ratio_or_difference(table, row)}{ends(agreement, row)}, and "
        f"{tell_number(estimate_of(table, row).value)} is reported as their difference",
        "Take the difference and the two effects from the same model.",
    )


def _ratio_or_difference(table: Table, row: int) -> str:
    return "a factor of " if table.columns.estimate.log_scale[row] else ""


def _tell_share(table: Table, row: int, agreement: Agreement) -> Said:
    sample, estimate = sample_of(table, row), estimate_of(table, row)
    unit = "" if estimate.unit in {None, "1"} else f" {estimate.unit}"
    n = sample.n if sample.n is not None else sum(group.n for group in sample.groups)
    return Said(
        f"no count of {n} {plural(sample.unit)} is a share of {tell_number(estimate.value)}{unit}; the nearest "
        f"shares are {ends(agreement, row, 4)}{unit}",
        "Check the share and n, and give the events of the group.",
    )


TELL: Mapping[str, Tell] = {
    "effect-statistic": _tell_effect_of_statistic,
    "counts-interval": _tell_count_interval,
    "table-statistic": _tell_table_statistic,
    "df-between": _tell_df_between,
    "compared": _tell_compared,
    "share": _tell_share,
}
