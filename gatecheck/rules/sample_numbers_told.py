"""The words in which figures of a sample are told that do not fit together: sizes, summaries, counts and items."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import TYPE_CHECKING

from gatecheck.columns import F
from gatecheck.compare.agreement import Agreement
from gatecheck.compare.written import places
from gatecheck.model.record import Sample, Test
from gatecheck.rules.numbers_told import Explained, Tell, either, ends, estimate_of, sample_of, test_of
from gatecheck.rules.rule import Said, Table
from gatecheck.rules.words import plural, tell_number, tell_statistic

_NORMAL = 1.959964
_MOST_EXACT = 10_000
_LEAST_PLACES = 2
#: What a form of chi-squared is called where it is a z.
_OF_Z = {"Pearson": "pooled"}

if TYPE_CHECKING:
    from gatecheck.compare.proportion_numbers import Proportion


def _tell_sizes(table: Table, row: int, _: Agreement) -> Said:
    sample = sample_of(table, row)
    groups = " + ".join(str(group.n) for group in sample.groups)
    together = sum(group.n for group in sample.groups)
    return Said(
        f"the groups of {groups} hold {together} {plural(sample.unit)}, and n says {sample.n}",
        "Give the units analysed in each group, and list those left out in sample.excluded with the reason.",
    )


def _tell_df(table: Table, row: int, agreement: Agreement) -> Said:
    test, sample, column = test_of(table, row), sample_of(table, row), table.columns.test
    if test.statistic == "chi2":
        return Said(
            f"{tell_statistic(test)} has not the df of events in {len(sample.groups)} groups, "
            f"{agreement.high[row]:g}",
            "Check the df, or name the test if it is not one of these counts.",
        )
    df = (column.df2 if column.statistic[row] == F else column.df1).value[row]
    in_groups = sum(group.n for group in sample.groups)
    counted = in_groups if len(sample.groups) > 1 or sample.n is None else sample.n
    gap = float(agreement.high[row] - df)
    short = f": {gap:g} {'is' if gap == 1 else 'are'} missing without a reason" if gap > 0 else ""
    implied = counted - gap
    return Said(
        f"the df of {tell_statistic(test)} imply {implied:g} {plural(sample.unit)} analysed, and n says "
        f"{_counted(sample, counted)}{short}",
        "List those left out in sample.excluded with the reason, or correct n or df, or name test and covariates.",
    )


def _counted(sample: Sample, counted: int) -> str:
    groups = f" ({' + '.join(str(group.n) for group in sample.groups)})" if len(sample.groups) > 1 else ""
    return f"{counted}{groups}"


def _tell_units(table: Table, row: int, agreement: Agreement) -> Said:
    test, sample = test_of(table, row), sample_of(table, row)
    clusters = sample.clusters is not None
    counted = f"{sample.clusters} clusters" if clusters else f"{_most(sample)} {plural(sample.unit)}"
    return Said(
        f"the df of {tell_statistic(test)} need more independent units than the {counted} that there are, which "
        f"allow {agreement.high[row]:g} at most",
        "Analyse the units that were assigned or sampled, or name the model that has units within them.",
    )


def _most(sample: Sample) -> int:
    return max(sample.n or 0, sum(group.n for group in sample.groups))


def _tell_proportion(table: Table, row: int, agreement: Agreement) -> Said:
    group = sample_of(table, row).groups[0]
    return Said(
        f"{group.events} of {group.n} are {100 * agreement.low[row]:.4g} %, and "
        f"{tell_number(estimate_of(table, row).value)} is reported",
        "Take the proportion from its counts.",
    )


def _tell_proportion_error(table: Table, row: int, agreement: Agreement) -> Said:
    from gatecheck.compare.proportion_numbers import implied_error, proportion_of  # noqa: PLC0415  # rarely told

    found = proportion_of(estimate_of(table, row), sample_of(table, row))
    error = implied_error(table.columns, row)
    independent = float(agreement.low[row])
    units = plural(sample_of(table, row).unit)
    needed = found.unit**2 * found.share * (1 - found.share) / error.value**2
    away = abs(float(table.columns.estimate.value.value[row])) / independent
    value, half = found.share * found.unit, _NORMAL * independent
    p = math.erfc(away / math.sqrt(2))
    exact = _tell_exact_binomial(found, float(table.columns.estimate.null[row]) / found.unit)
    return Said(
        f"a standard error of {error.value:.3g} would take {needed:,.0f} independent {units}, and there are "
        f"{found.n:g}: theirs is {independent:.2g}, {away:.2g} of which lie between the estimate and "
        f"{table.columns.estimate.null[row]:g} (p = {p:.2g}{exact}, 95 % interval {value - half:.3g} to "
        f"{value + half:.3g})",
        f"Take the error over {units}; runs or measurements of the same {units} are not more of them.",
    )


def _tell_exact_binomial(found: Proportion, null: float) -> str:
    from gatecheck.compare.splits import exact_binomial  # noqa: PLC0415  # rarely told

    if not 0 < null < 1 or found.n > _MOST_EXACT:
        return ""
    return f", exact binomial {exact_binomial(round(found.share * found.n), int(found.n), null):.2g}"


def _tell_group_statistic(table: Table, row: int, agreement: Agreement) -> Said:
    test = test_of(table, row)
    message = (
        f"the summaries of the groups give {test.statistic} = {ends(agreement, row)} in size, "
        f"and {tell_number(test.value)} is reported"
    )
    hint = _errors_for_deviations(table, row, agreement.name)
    if hint:
        return Explained(message, hint)
    return Said(message, "Take statistic and summaries from the same units, and name the test.")


def _errors_for_deviations(table: Table, row: int, name: str) -> str:
    """What to do where standard errors stand for standard deviations; empty where that would not fit."""
    from gatecheck.compare.group_numbers import as_errors  # noqa: PLC0415  # rarely told

    deviations = as_errors(table.columns.found[row], name)
    if not deviations:
        return ""
    sizes = [group.n for group in sample_of(table, row).groups]
    by = f"times √{sizes[0]}" if len(set(sizes)) == 1 else "times the root of n"
    given = " and ".join(f"{deviation:.2g}" for deviation in deviations)
    return f"Give the standard deviations: these look like standard errors, which {by} are {given}."


def _tell_welch_df(table: Table, row: int, agreement: Agreement) -> Said:
    return Said(
        f"the summaries of the groups give Welch's test {ends(agreement, row, 4)} df, and "
        f"{tell_number((test_of(table, row).df or (None,))[0])} is reported",
        "Check that the summaries are of the units tested.",
    )


def _tell_group_estimate(table: Table, row: int, agreement: Agreement) -> Said:
    return Said(
        f"the means of the groups differ by {ends(agreement, row)}, and "
        f"{tell_number(estimate_of(table, row).value)} is reported",
        "Take estimate and means from the same units, and give covariates if there are any.",
    )


def _tell_group_effect(table: Table, row: int, agreement: Agreement) -> Said:
    return Said(
        f"the summaries of the groups give a standardised difference of {ends(agreement, row)}, and "
        f"{tell_number(estimate_of(table, row).value)} is reported",
        "Say in estimate.measure by which standard deviation it is standardised.",
    )


def _tell_group_error(table: Table, row: int, agreement: Agreement) -> Said:
    return Said(
        f"the summaries of the groups give a standard error of {ends(agreement, row)}, and "
        f"{tell_number(estimate_of(table, row).standard_error)} is reported",
        "Take both from the same units.",
    )


def _tell_counts(table: Table, row: int, _: Agreement) -> Said:
    groups = [each for each in sample_of(table, row).groups if each.events is not None and each.events > each.n]
    told = ", ".join(f"{group.events} of {group.n}" for group in groups)
    return Said(
        f"more units have the event than there are ({told})",
        "Count units with the event, not episodes.",
    )


def _tell_count_statistic(table: Table, row: int, _: Agreement) -> Said:
    from gatecheck.compare.count_numbers import usual_forms  # noqa: PLC0415  # rarely told

    test = test_of(table, row)
    forms = [_tell_form(test, *form) for form in usual_forms(table.record(row))]
    return Said(
        f"{_tell_events(table, row)} give {test.statistic} = {either(forms)}, and {tell_number(test.value)} is "
        "none of these nor another form in use",
        "Check the counts, and name the test.",
    )


def _tell_form(test: Test, name: str, square: float) -> str:
    """One form of the statistic, in the digits that tell it from the one reported."""
    digits = max(_LEAST_PLACES, (places(test.value) if test.value is not None else None) or 0)
    if test.statistic == "z":
        return f"{math.sqrt(square):.{digits}f} ({_OF_Z.get(name, name)})"
    return f"{square:.{digits}f} ({name})"


def _tell_events(table: Table, row: int) -> str:
    return " and ".join(f"{group.events} of {group.n}" for group in sample_of(table, row).groups)


def _tell_count_estimate(table: Table, row: int, agreement: Agreement) -> Said:
    estimate = estimate_of(table, row)
    return Said(
        f"{_tell_events(table, row)} give {agreement.low[row]:.3g} or {agreement.high[row]:.3g} as "
        f"{estimate.measure}, by the order of the groups, and "
        f"{tell_number(estimate.value)} is reported",
        "Check the counts and the estimate.",
    )


def _tell_count_error(table: Table, row: int, agreement: Agreement) -> Said:
    return Said(
        f"{_tell_events(table, row)} give a standard error of {ends(agreement, row)}, and "
        f"{tell_number(estimate_of(table, row).standard_error)} is reported",
        "Check the counts and the scale of the standard error (ratios: of the logarithm).",
    )


def _tell_count_exact(table: Table, row: int, agreement: Agreement) -> Said:
    return Said(
        f"{_tell_events(table, row)} give an exact p of {ends(agreement, row)}, and "
        f"{tell_number(test_of(table, row).p)} is reported",
        "Check the counts, and name the test.",
    )


def _tell_item_mean(table: Table, row: int, agreement: Agreement) -> Said:
    from gatecheck.compare.possible_values import compare_mean, first_impossible, of_items  # noqa: PLC0415  # rare

    group = first_impossible(of_items(table.record(row)), compare_mean)
    told = "" if group is None else f"{tell_number(group.mean)} of {group.name} (n {group.n})"
    return Said(
        f"no whole-number items have the mean {told}; the nearest are {ends(agreement, row, 5)}",
        "Check mean, n and integer_items.",
    )


def _tell_item_sd(table: Table, row: int, agreement: Agreement) -> Said:
    from gatecheck.compare.possible_values import compare_sd, first_impossible, of_items  # noqa: PLC0415  # rare

    group = first_impossible(of_items(table.record(row)), compare_sd)
    told = "" if group is None else f"{tell_number(group.sd)} of {group.name} (n {group.n})"
    return Said(
        f"no whole-number items with this mean have the standard deviation {told}; the nearest are "
        f"{ends(agreement, row, 5)}",
        "Check standard deviation, mean, n and integer_items.",
    )


def _tell_permutation(table: Table, row: int, agreement: Agreement) -> Said:
    test = test_of(table, row)
    of = "" if test.resamples is None else f" of {test.resamples} resamples"
    below = test.p is not None and test.p.value < agreement.low[row]
    if below or test.resamples is None:
        least = "above 0" if test.resamples is None else f"at least {agreement.low[row]:.3g}"
        return Said(
            f"a permutation p{of} is {least}, and {tell_number(test.p)} is reported",
            "Count the data themselves as one arrangement: (hits + 1) / (resamples + 1).",
        )
    return Said(
        f"no count{of} gives p = {tell_number(test.p)}; the nearest p is {agreement.high[row]:.6g}",
        "Check p and test.resamples.",
    )


TELL: Mapping[str, Tell] = {
    "sizes": _tell_sizes,
    "df": _tell_df,
    "df-n": _tell_df,
    "units": _tell_units,
    "proportion": _tell_proportion,
    "proportion-error": _tell_proportion_error,
    "groups-statistic": _tell_group_statistic,
    "welch-df": _tell_welch_df,
    "groups-estimate": _tell_group_estimate,
    "groups-effect": _tell_group_effect,
    "groups-error": _tell_group_error,
    "counts": _tell_counts,
    "counts-statistic": _tell_count_statistic,
    "counts-estimate": _tell_count_estimate,
    "counts-error": _tell_count_error,
    "counts-exact": _tell_count_exact,
    "item-mean": _tell_item_mean,
    "item-sd": _tell_item_sd,
    "permutation": _tell_permutation,
}
