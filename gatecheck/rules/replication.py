"""Rule `replication`: a claim whose result was tested again on data of its own held up there.

A claim whose result was tested again (a record says that it `replicates` another, on data of its own) held up
there, by the `criteria` of the policy, all of which must be met at the one-sided `alpha` (0.025):
`direction-and-p`, `interval` (the new estimate lies in the prediction interval of the first), `sceptical` (the
sceptical p-value at its golden level). It binds both records; several repetitions are taken together.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import KW_ONLY
from typing import Annotated, Literal

import numpy as np

from gatecheck.columns import Booleans
from gatecheck.compare.replications import Replication, replications
from gatecheck.model.marks import OneOrMore, Range
from gatecheck.model.shown import decimal
from gatecheck.model.struct import struct
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Exemption, Judgement, Rule, Said, Table
from gatecheck.rules.words import describe_result

Criterion = Literal["direction-and-p", "interval", "sceptical"]
_OneSided = Annotated[float, Range(0, 0.5, low_open=True, high_open=True)]


@struct
class Settings(RuleSettings):
    """By which criteria a repetition confirms a result."""

    _: KW_ONLY
    criteria: Annotated[tuple[Criterion, ...], OneOrMore(), "criteria that must all be met"] = ("direction-and-p",)
    alpha: Annotated[_OneSided, "one-sided level"] = 0.025


def concerns(table: Table, _: Sequence[Settings | None]) -> Booleans:
    """Claims that are repeated in this tree, or repeat another."""
    part = np.array([each is not None for each in replications(table.columns)], np.bool_)
    return table.columns.claims & part & ~table.columns.no_effect_aim


def judge(table: Table, settings: Sequence[Settings | None]) -> Judgement:
    """Short where a criterion is not met; undecided where the two results cannot be compared."""
    facts = replications(table.columns)
    short = [
        fact is not None and each is not None and bool(_unmet(fact, each))
        for fact, each in zip(facts, settings, strict=True)
    ]
    known = [fact is None or not fact.apart for fact in facts]
    observed = np.exp(np.array([np.nan if fact is None else fact.log_p_direction for fact in facts]))
    limit = np.array([np.nan if each is None else each.alpha for each in settings])
    return Judgement(np.array(short, np.bool_), observed, limit, known=np.array(known, np.bool_), facts=facts)


def _unmet(fact: Replication, settings: Settings) -> list[Criterion]:
    met = {
        "direction-and-p": fact.log_p_direction <= math.log(settings.alpha),
        "interval": fact.log_p_difference > math.log(2 * settings.alpha),
        "sceptical": fact.log_p_sceptical <= math.log(settings.alpha),
    }
    return [criterion for criterion in settings.criteria if not met[criterion]]


def explain(table: Table, row: int, settings: Settings, judgement: Judgement) -> Said:
    """The original, what came of it when it was tested again, and by which criteria."""
    fact: Replication = judgement.facts[row]
    original, again = table.record(fact.original), [table.record(each) for each in fact.repeated_in]
    named = " and ".join(f"{record.id} ({describe_result(record)})" for record in again)
    tested = f"{original.id} ({describe_result(original)}) was tested again in {named}"
    if fact.apart:
        return Said(
            f"{tested}, and the two cannot be compared: {fact.apart}.",
            "Report both with the same measure and unit and with their standard errors, each from data of its own.",
        )
    p = {
        "direction-and-p": f"one-sided p {decimal(math.exp(fact.log_p_direction), settings.alpha)} that way",
        "interval": f"p of the difference {decimal(math.exp(fact.log_p_difference), 2 * settings.alpha)}",
        "sceptical": f"sceptical p {decimal(math.exp(fact.log_p_sceptical), settings.alpha)}",
    }
    unmet = _unmet(fact, settings)
    wanted = f"the policy asks for {' and '.join(settings.criteria)} at {settings.alpha:g}, one-sided"
    outcome = f"which fails by {' and '.join(unmet)}" if unmet else "which meets every criterion"
    return Said(
        f"{tested}, {outcome} ({', '.join(p.values())}); {wanted}.",
        "Claim what both results together support, or test it once more, large enough for the smaller effect.",
    )


RULE = Rule(
    name="replication",
    asks="a result that was tested again on data of its own held up there",
    settings=Settings,
    judge=judge,
    explain=explain,
    exempt=(
        Exemption(
            lambda table, _: table.columns.harm,
            "A safety outcome: nobody needs it repeated to report a possible harm.",
        ),
    ),
    concerns=concerns,
)
