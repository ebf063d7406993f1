"""The figures of one record against each other: which of them determine each other, and whether they agree.

Every figure is an interval, the numbers that it may stand for after rounding; two figures disagree only where
no numbers in their intervals fit together. An exact number written with few digits is taken as rounded to
them: many writers round before they write a number, and that is no disagreement between results.
"""

from __future__ import annotations

import numpy as np

from gatecheck.columns import Columns
from gatecheck.compare.agreement import Agreement
from gatecheck.compare.interval_numbers import interval_numbers
from gatecheck.compare.p_numbers import adjusted_p, p_from_statistic
from gatecheck.compare.written import with_lost_zeros
from gatecheck.evidence import Evidence

__all__ = ["Agreement", "own_numbers"]

#: Parts of what effect sizes are called, and those that are called by a letter.
_EFFECT_SIZES = (
    "cohen", "hedges", "glass", "smd", "standardi", "correlation", "effect size r", "cram", "phi", "φ",
    "eta squared", "eta-squared", "eta_", "eta2", "eta²", "eta^2", "η", "omega", "ω", "epsilon", "ε",
)  # fmt: skip
_LETTERS = {"d", "g", "r", "f", "f2", "f²", "eta", "partial eta"}
_SHARES = ("percent", "per cent", "proportion", "share", "fraction", "prevalence")
_MANY = 3


def own_numbers(columns: Columns, evidence: Evidence) -> tuple[Agreement, ...]:
    """Compare the figures within each record, in the order in which they are reported.

    Comparisons that no record allows are left out.
    """
    columns = with_lost_zeros(columns)
    with np.errstate(all="ignore"):
        adjusted = adjusted_p(columns, evidence)
        return (
            p_from_statistic(columns, evidence),
            *([] if adjusted is None else [adjusted]),
            *interval_numbers(columns),
            *_effect_numbers(columns),
            *_sample_numbers(columns),
        )


def _effect_numbers(columns: Columns) -> tuple[Agreement, ...]:
    """The comparisons of effect sizes with statistics, and of differences with the records that they compare."""
    measures = {one.record.estimate.measure.lower() for one in columns.found if one.record.estimate is not None}
    found: list[Agreement] = []
    if any(word in measure for measure in measures for word in _EFFECT_SIZES) or not _LETTERS.isdisjoint(measures):
        from gatecheck.compare.effect_numbers import effect_numbers  # noqa: PLC0415  # effect sizes

        found += effect_numbers(columns)
    if any(one.record.compares is not None for one in columns.found):
        from gatecheck.compare.compared_effects import compared_effects  # noqa: PLC0415  # few compare records

        found += compared_effects(columns)
    return tuple(found)


def _sample_numbers(columns: Columns) -> tuple[Agreement, ...]:
    """The comparisons with what the sample tells; their modules load where a record tells it."""
    samples = [one.record.sample for one in columns.found if one.record.sample is not None]
    groups = [group for sample in samples for group in sample.groups]
    found: list[Agreement] = []
    if samples:
        from gatecheck.compare.proportion_numbers import proportion_numbers  # noqa: PLC0415  # samples
        from gatecheck.compare.sizes_and_df import sizes_and_df  # noqa: PLC0415  # samples

        found += [*sizes_and_df(columns), *proportion_numbers(columns)]
    if any(group.mean is not None for group in groups):
        from gatecheck.compare.group_numbers import group_numbers  # noqa: PLC0415  # means

        found += group_numbers(columns)
    if any(group.events is not None for group in groups):
        from gatecheck.compare.count_numbers import count_numbers  # noqa: PLC0415  # events

        found += count_numbers(columns)
    if any(len(sample.groups) >= _MANY and sample.groups[0].events is not None for sample in samples):
        from gatecheck.compare.many_proportions import many_proportions  # noqa: PLC0415  # events of many groups

        found += many_proportions(columns)
    permuted = any(one.record.test is not None and one.record.test.p_kind == "permutation" for one in columns.found)
    if permuted or _has_share(columns) or any(group.integer_items is not None for group in groups):
        from gatecheck.compare.possible_values import possible_values  # noqa: PLC0415  # items, shares, permutations

        found += possible_values(columns)
    return tuple(found)


def _has_share(columns: Columns) -> bool:
    """Whether some record may estimate a share of its units."""
    estimates = [one.record.estimate for one in columns.found if one.record.sample is not None]
    measures = {estimate.measure.lower() for estimate in estimates if estimate is not None}
    return any(word in measure for measure in measures for word in _SHARES)
