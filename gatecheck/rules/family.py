"""Rule `family`: the set of tests behind a claim is whole, has one procedure, and the claim stands in it.

The set of tests behind a claim (`family: {name, size, procedure}`) is whole: as many members in the tree as
declared, with one size and one procedure. The claim's p, adjusted anew from the raw p of all members, is at most
`alpha` (0.05 unless the policy says otherwise), and an `adjusted_p` that is reported agrees with that.
Procedures: `bonferroni`, `holm`, `hochberg`, `hommel`, `benjamini-hochberg`, `benjamini-yekutieli`,
`fixed-sequence` (in the order of `family.position`), and `none`, where the raw p counts. An absent member counts
as one that showed nothing. Safety outcomes are exempt.

Two more procedures give each member a share of alpha of its own, `family.weight`, as it was planned. In
`weighted-holm` the shares are above 0 and sum to 1 (to within 0.01, for they are written in few decimals). In
`graphical` they sum to at most 1 and may be 0, and a member that is rejected passes parts of its share, at most 1
in sum, on to others: `passes_on: {"growth/height": 0.5, "growth/leaf-area": 0.5}`. Where a share is missing, or
names no member, the claim is undecided. Of a family of 100 members or more it is also told how large the share of
true nulls in it seems to be (Storey 2002, at 0.5), and so how many of those rejected are expected to be false;
from that size on the standard error of that estimate is at most 0.1. It changes no decision, and is not told of
procedures in which the members differ in their order or share.

With a base, a member that the family had there and has no more, unless an `aliases` entry explains it, and a size
declared smaller than there make it fall short too. The likelihood ratio plays no part here: it comes from the raw
result. `weighted-holm` is Holm 1979, section 4; `graphical` is Bretz and others 2009 (from memory).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import KW_ONLY
from typing import Annotated

import numpy as np

from gatecheck.columns import Booleans
from gatecheck.compare.families import BY_SHARES, LARGEST_GRAPH, FamilyFacts, Kind, ShareFlaw, family_facts
from gatecheck.model.record import Family, OpenProbability
from gatecheck.model.shown import decimal, percent
from gatecheck.model.struct import struct
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Exemption, Judgement, Rule, Said, Table, setting
from gatecheck.rules.words import describe_result, tell_number

_SAME = 1e-6
_MOST_NAMED = 3
_NO_FAMILY = Family("none")
_TAKE_ANEW = "Report every member, with one size and one procedure, and the adjusted p of the same run."
_GIVE_P = "Give every member its statistic or raw p, and family.position where the sequence is fixed."
_GIVE_SHARES = "Give every member family.weight, its share of alpha as planned; the shares sum to 1."
_GIVE_PARTS = "Name other members of the family in family.passes_on, by id, with parts that sum to at most 1."
#: What is wrong with the shares of a family, and what to do.
_FLAWS: dict[Kind, tuple[str, str]] = {
    "too-large": (
        f"a graph of more than {LARGEST_GRAPH} members is not computed",
        "Divide the family as it was planned, or take another procedure.",
    ),
    "no-share": ("{member} has no family.weight", _GIVE_SHARES),
    "empty-share": ("{member} has no share of alpha above 0, which {procedure} wants", _GIVE_SHARES),
    "sum": ("the shares of its members sum to {total:.4g} and not to 1", _GIVE_SHARES),
    "no-member": ("{member} passes its share on to {other}, which is no member in this tree", _GIVE_PARTS),
    "itself": ("{member} passes its share on to itself", _GIVE_PARTS),
    "passes-too-much": ("{member} passes on parts that sum to {total:.4g}, which is more than all", _GIVE_PARTS),
}


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
    broken = [bool(_broken(each, table, family)) for each, family in zip(facts, families, strict=True)]
    differs = [each is not None and _differs(each, family) for each, family in zip(facts, families, strict=True)]
    short = np.array(broken) | np.array(differs) | (adjusted > alpha)
    return Judgement(short, adjusted, alpha, known=np.array(broken) | np.isfinite(adjusted), facts=facts)


def _broken(facts: FamilyFacts | None, table: Table, family: Family | None) -> list[str]:
    """What is wrong with the family itself."""
    if facts is None or family is None:
        return []
    told = _lost(table, family, facts)
    if len(facts.sizes) > 1:
        told.append(f"its members declare the sizes {' and '.join(map(str, facts.sizes))}")
    if len(facts.procedures) > 1:
        told.append(f"its members declare the procedures {' and '.join(facts.procedures)}")
    if len(facts.sizes) == 1 and facts.members != facts.sizes[0]:
        told.append(f"{facts.members} of {facts.sizes[0]} members are in this tree")
    return told


def _lost(table: Table, family: Family, facts: FamilyFacts) -> list[str]:
    """What the family had at the base and has no more: results that did not fit must not vanish from it."""
    before = table.families_before.get(family.name)
    if before is None:
        return []
    told = []
    if before.lost:
        more = f" and {len(before.lost) - _MOST_NAMED} more" if len(before.lost) > _MOST_NAMED else ""
        lost = f"{', '.join(before.lost[:_MOST_NAMED])}{more}"
        told.append(f"since the base it has lost {lost} (gone, or renamed without aliases)")
    if before.size is not None and facts.sizes and max(facts.sizes) < before.size:
        told.append(f"it had {before.size} members at the base and declares {max(facts.sizes)}")
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
        why, advice = _why_unknown(facts.flaw, family)
        return Said(f"The place of {result} in the family {family.name} cannot be told: {why}.", advice)
    if broken := _broken(facts, table, family):
        return Said(f"The family {family.name} is not whole: {'; '.join(broken)}.", _TAKE_ANEW)
    adjusted = decimal(facts.adjusted, settings.alpha)
    whole = f"{family.procedure}, {facts.members} members{_tell_share(family)}"
    place = f"{result} has an adjusted p of {adjusted} in the family {family.name} ({whole})"
    if _differs(facts, family):
        return Said(f"{place}, and {tell_number(family.adjusted_p)} is reported.", _TAKE_ANEW)
    nulls = _tell_true_nulls(facts, settings.alpha)
    return Said(
        f"{place}; the policy allows {decimal(settings.alpha, settings.alpha)}.{nulls}",
        "Claim the members that the procedure rejects, or confirm this one in a study of its own.",
    )


def _why_unknown(flaw: ShareFlaw | None, family: Family) -> tuple[str, str]:
    """Why the adjusted p cannot be told, and what to do."""
    if flaw is None:
        return "a raw p of a member, or its place in a fixed sequence, is missing", _GIVE_P
    why, advice = _FLAWS[flaw.kind]
    told = why.format(member=flaw.member, other=flaw.other, total=flaw.total, procedure=family.procedure)
    return told, advice


def _tell_share(family: Family) -> str:
    """The member's share of alpha, where the procedure has such shares."""
    if family.procedure not in BY_SHARES or family.weight is None:
        return ""
    at_the_start = " at the start" if family.procedure == "graphical" else ""
    return f", share of alpha {family.weight:.4g}{at_the_start}"


def _tell_true_nulls(facts: FamilyFacts, alpha: float) -> str:
    """A sentence on a large family: how many members seem to have no effect, and how many rejections are false."""
    nulls = facts.true_nulls
    if nulls is None:
        return ""
    share = f"The share of true nulls in it is estimated at {percent(nulls.share)}"
    rejected = nulls.rejected(alpha)
    if not rejected:
        return f" {share}, and none of its members is rejected."
    false = decimal(nulls.false_ones(alpha))
    return f" {share}, so about {false} of the {rejected} members rejected are expected to be false."


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
