"""Rule `practical-size`: an effect that is claimed to matter is not wholly below the smallest effect of interest.

A claim says that its effect matters with `importance: true`; with the setting `claims: all` every claim that names
a smallest effect of interest is held to it. It falls short where the whole interval lies below that effect in size:
the difference is then real-looking and too small to care about. The interval is the one reported; where there is
none, that of 95 % by the standard error.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import KW_ONLY
from typing import Annotated, Literal

import numpy as np

from gatecheck import weigh
from gatecheck.columns import Booleans, Floats
from gatecheck.model.struct import struct
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Judgement, Rule, Said, Table
from gatecheck.rules.words import as_reported, describe_result, tell_number
from gatecheck.standard_errors import standard_error, t_df

_USUAL_LEVEL = 0.95


@struct
class Settings(RuleSettings):
    """Which claims are held to the smallest effect of interest."""

    _: KW_ONLY
    claims: Annotated[
        Literal["important", "all"], "important: those with importance true; all: also those that name the effect"
    ] = "important"


def concerns(table: Table, settings: Sequence[Settings | None]) -> Booleans:
    """Claims of importance, and where the setting is `all` those that name a smallest effect of interest."""
    every = np.array([each is not None and each.claims == "all" for each in settings], np.bool_)
    named = np.isfinite(table.columns.estimate.smallest)
    return table.columns.claims & (table.columns.importance | (every & named))


def judge(table: Table, _: Sequence[Settings | None]) -> Judgement:
    """Short where the interval lies wholly below the smallest effect in size."""
    ends, smallest = _interval(table), table.columns.estimate.smallest
    reach = np.maximum(np.abs(ends[0]), np.abs(ends[1]))
    return Judgement(reach < smallest, reach, smallest, known=np.isfinite(reach + smallest), facts=ends)


def _interval(table: Table) -> tuple[Floats, Floats]:
    """The interval reported; without one, that of the usual level which the standard error gives."""
    estimate = table.columns.estimate
    half = weigh.t_quantile_two_sided(_USUAL_LEVEL, t_df(table.columns)) * standard_error(table.columns)
    reported = np.isfinite(estimate.low.value) | np.isfinite(estimate.high.value)
    return (
        np.where(reported, estimate.low.value, estimate.value.value - half),
        np.where(reported, estimate.high.value, estimate.value.value + half),
    )


def explain(table: Table, row: int, _: Settings, judgement: Judgement) -> Said:
    """How the interval lies against the smallest effect of interest."""
    record = table.record(row)
    if judgement.known is not None and not judgement.known[row]:
        return _tell_missing(table, row)
    smallest = tell_number(record.estimate.smallest_effect if record.estimate else None)
    result = describe_result(record)
    if record.estimate is None or record.estimate.interval is None:
        low, high = (as_reported(table.columns, row, ends[row]) for ends in judgement.facts)
        result += f"; 95 % interval by its standard error {low} to {high}"
    if judgement.short[row]:
        return Said(
            f"The whole interval ({result}) is below the smallest effect of interest, {smallest}; "
            "the policy wants a claim of importance to leave room for an effect of that size.",
            "The wording that the data allow: a difference smaller than we care about.",
        )
    return Said(f"The interval ({result}) reaches the smallest effect of interest, {smallest}.")


def _tell_missing(table: Table, row: int) -> Said:
    wanted = []
    if not np.isfinite(table.columns.estimate.smallest[row]):
        wanted.append(("the smallest effect of interest", "estimate.smallest_effect"))
    if not all(np.isfinite(ends[row]) for ends in _interval(table)):
        wanted.append(("an interval with two limits", "estimate.interval, or estimate.standard_error"))
    result = describe_result(table.record(row))
    return Said(
        f"The claim is that the effect matters, and the record ({result}) does not give "
        f"{' and '.join(what for what, _ in wanted)}.",
        f"Give {' and '.join(field for _, field in wanted)}.",
    )


RULE = Rule(
    name="practical-size",
    asks="an effect that is claimed to matter is not wholly below the smallest effect of interest",
    settings=Settings,
    judge=judge,
    explain=explain,
    concerns=concerns,
)
