"""Rule `practical-size`: an effect that is claimed to matter is not wholly below the smallest effect of interest.

A claim says that its effect matters with `importance: true`; with the setting `claims: all` every claim that names
a smallest effect of interest is held to it. It falls short where the whole interval lies below that effect in size:
the difference is then real-looking and too small to care about.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import KW_ONLY
from typing import Annotated, Literal

import numpy as np

from gatecheck.columns import Booleans
from gatecheck.model.struct import struct
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Judgement, Rule, Said, Table
from gatecheck.rules.words import describe_result, tell_number


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
    estimate = table.columns.estimate
    reach = np.maximum(np.abs(estimate.low.value), np.abs(estimate.high.value))
    return Judgement(
        reach < estimate.smallest, reach, estimate.smallest, known=np.isfinite(reach + estimate.smallest)
    )


def explain(table: Table, row: int, _: Settings, judgement: Judgement) -> Said:
    """How the interval lies against the smallest effect of interest."""
    record = table.record(row)
    if judgement.known is not None and not judgement.known[row]:
        return Said(
            f"The claim is that the effect matters, and the record ({describe_result(record)}) does not give both "
            "an interval with two limits and the smallest effect of interest.",
            "Give estimate.interval and estimate.smallest_effect.",
        )
    smallest = tell_number(record.estimate.smallest_effect if record.estimate else None)
    if judgement.short[row]:
        return Said(
            f"The whole interval ({describe_result(record)}) is below the smallest effect of interest, {smallest}; "
            "the policy wants a claim of importance to leave room for an effect of that size.",
            "The wording that the data allow: a difference smaller than we care about.",
        )
    return Said(f"The interval ({describe_result(record)}) reaches the smallest effect of interest, {smallest}.")


RULE = Rule(
    name="practical-size",
    asks="an effect that is claimed to matter is not wholly below the smallest effect of interest",
    settings=Settings,
    judge=judge,
    explain=explain,
    concerns=concerns,
)
