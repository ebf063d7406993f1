"""Rule `planned-split`: the sizes of the groups are those that the planned split gives.

The sizes of the groups are those of `sample.planned_split`, such as `[1, 1]`: a split as far from it has a p of
`limit` (0.001) or more, by chi-squared, or exactly for few units in two groups. A claim on groups that something
sorted (assignment, logging, a filter afterwards) tells no effect. It concerns claims whose record names a planned
split.

Where units were split between groups by chance and more came to one than chance would give, something sorted
them, and it may have sorted them by what is measured. A limit of 0.001 to 0.01 is usual in online experiments
(common practice, no source).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import KW_ONLY
from typing import Annotated

from gatecheck.columns import Booleans
from gatecheck.compare.splits import Splits, expected_sizes, splits
from gatecheck.model.record import OpenProbability, Sample
from gatecheck.model.shown import decimal
from gatecheck.model.struct import struct
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Judgement, Rule, Said, Table, setting
from gatecheck.rules.words import plural

_NO_SAMPLE = Sample()


@struct
class Settings(RuleSettings):
    """How improbable a split may be under the plan."""

    _: KW_ONLY
    limit: Annotated[OpenProbability, "p below which a split is not that of the plan"] = 0.001


def concerns(table: Table, _: Sequence[Settings | None]) -> Booleans:
    """Claims on groups for which a split was planned."""
    return table.columns.claims & splits(table.columns).planned


def judge(table: Table, settings: Sequence[Settings | None]) -> Judgement:
    """Short where a split as far from the plan is less probable than the limit."""
    found = splits(table.columns)
    limit = setting(settings, "limit")
    return Judgement(found.p < limit, found.p, limit, known=found.p >= 0, facts=found)


def explain(table: Table, row: int, settings: Settings, judgement: Judgement) -> Said:
    """The sizes that came and those that the plan gives."""
    found: Splits = judgement.facts
    sample = table.record(row).sample or _NO_SAMPLE
    sizes = " + ".join(f"{group.n:,}" for group in sample.groups)
    planned = ":".join(f"{share:g}" for share in sample.planned_split or ())
    if not found.p[row] >= 0:
        return Said(
            f"The split {planned} was planned, and the record does not give the sizes of so many groups.",
            "Give sample.groups with their n, in the order of sample.planned_split.",
        )
    expected = " + ".join(f"{size:,.6g}" for size in expected_sizes(sample))
    return Said(
        f"The groups hold {sizes} {plural(sample.unit)}, and the planned split {planned} gives {expected} "
        f"(p = {decimal(float(found.p[row]), settings.limit)}); the policy wants a p of "
        f"{decimal(settings.limit, settings.limit)} or more.",
        "Find what sorted the units (assignment, logging, a filter after assignment) before any effect is told; a "
        "split that was planned otherwise stands in sample.planned_split.",
    )


RULE = Rule(
    name="planned-split",
    asks="the sizes of the groups are those that the planned split gives",
    settings=Settings,
    judge=judge,
    explain=explain,
    concerns=concerns,
)
