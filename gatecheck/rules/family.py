"""Rule `family`: the set of tests behind a claim is whole, has one procedure, and the claim stands in it.

All members are in the tree, as many as declared; they declare one size and one procedure; the member's p, adjusted
anew from the raw p of all of them, is at most `alpha`; and an adjusted p that is reported agrees with that. The
likelihood ratio plays no part here: it comes from the raw result. Safety outcomes are exempt.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import KW_ONLY
from typing import Annotated

import numpy as np

from gatecheck.columns import Booleans
from gatecheck.compare.families import FamilyFacts, family_facts
from gatecheck.model.record import Family, OpenProbability
from gatecheck.model.shown import decimal
from gatecheck.model.struct import struct
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Exemption, Judgement, Rule, Said, Table, setting
from gatecheck.rules.words import describe_result, tell_number

_SAME = 1e-6
_NO_FAMILY = Family("none")
_TAKE_ANEW = "Report every member, with one size and one procedure, and the adjusted p of the same run."


@struct
class Settings(RuleSettings):
    """The level of the family."""

    _: KW_ONLY
    alpha: Annotated[OpenProbability, "level that the family's procedure controls"] = 0.05


def concerns(table: Table, _: Sequence[Settings | None]) -> Booleans:
    """Claims that name the family behind them."""
    named = [one.record.family is not None for one in table.columns.found]
    return table.columns.claims & np.array(named, np.bool_)


def judge(table: Table, settings: Sequence[Settings | None]) -> Judgement:
    """Short where the family is not whole or the claim does not stand in it, undecided where it cannot be told."""
    facts = family_facts(table.columns, table.evidence)
    families = [one.record.family for one in table.columns.found]
    alpha = setting(settings, "alpha")
    adjusted = np.array([np.nan if each is None else each.adjusted for each in facts], np.float64)
    broken = [each is not None and bool(_broken(each)) for each in facts]
    differs = [each is not None and _differs(each, family) for each, family in zip(facts, families, strict=True)]
    short = np.array(broken) | np.array(differs) | (adjusted > alpha)
    return Judgement(short, adjusted, alpha, known=np.array(broken) | np.isfinite(adjusted), facts=facts)


def _broken(facts: FamilyFacts) -> list[str]:
    """What is wrong with the family itself."""
    told = []
    if len(facts.sizes) > 1:
        told.append(f"its members declare the sizes {' and '.join(map(str, facts.sizes))}")
    if len(facts.procedures) > 1:
        told.append(f"its members declare the procedures {' and '.join(facts.procedures)}")
    if len(facts.sizes) == 1 and facts.members != facts.sizes[0]:
        told.append(f"{facts.members} of {facts.sizes[0]} members are in this tree")
    return told


def _differs(facts: FamilyFacts, family: Family | None) -> bool:
    """Whether an adjusted p is reported that does not agree with the one made anew."""
    reported = None if family is None or family.adjusted_p is None else family.adjusted_p.as_rounded()
    if reported is None or not np.isfinite(facts.adjusted):
        return False
    slack = _SAME * facts.adjusted
    return not reported.low - slack <= facts.adjusted <= reported.high + slack


def explain(table: Table, row: int, settings: Settings, judgement: Judgement) -> Said:
    """What is wrong with the family, or where the member stands in it."""
    facts: FamilyFacts = judgement.facts[row]
    family = table.record(row).family or _NO_FAMILY
    result = describe_result(table.record(row))
    if judgement.known is not None and not judgement.known[row]:
        return Said(
            f"The place of {result} in the family {family.name} cannot be told: a raw p of a member, or its place "
            "in a fixed sequence, is missing.",
            "Give every member its statistic or raw p, and family.position where the sequence is fixed.",
        )
    if broken := _broken(facts):
        return Said(f"The family {family.name} is not whole: {'; '.join(broken)}.", _TAKE_ANEW)
    adjusted = decimal(facts.adjusted, settings.alpha)
    whole = f"{family.procedure}, {facts.members} members"
    place = f"{result} has an adjusted p of {adjusted} in the family {family.name} ({whole})"
    if _differs(facts, family):
        return Said(f"{place}, and {tell_number(family.adjusted_p)} is reported.", _TAKE_ANEW)
    return Said(
        f"{place}; the policy allows {decimal(settings.alpha, settings.alpha)}.",
        "Claim the members that the procedure rejects, or confirm this one in a study of its own.",
    )


RULE = Rule(
    name="family",
    asks="the set of tests behind a claim is whole, has one procedure, and the claim stands in it",
    settings=Settings,
    judge=judge,
    explain=explain,
    exempt=(
        Exemption(
            lambda table, _: table.columns.harm,
            "A safety outcome: no penalty for several tests is put on reporting a possible harm.",
        ),
    ),
    concerns=concerns,
)
