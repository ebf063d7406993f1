"""Rule `family`: the set of tests behind a claim is whole, has one procedure, and the claim stands in it.

The set of tests behind a claim (`family: {name, size, procedure}`) is whole: as many members in the tree as
declared, with one size and one procedure. The claim's p, adjusted anew from the raw p of all members, is at most
`alpha` (0.05 unless the policy says otherwise, and less where the plan of the claim gives its family less), and an
`adjusted_p` that is reported agrees with that.
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

With a base, a member that the family had there and has no more, unless an `aliases` entry explains it, a size
smaller than there, and a procedure that may reject more than the one there make it fall short too, and so does a
claim that has left its family. A family that is renamed in all its members at once goes on under the new name. The
likelihood ratio plays no part here: it comes from the raw result. `weighted-holm` is Holm 1979, section 4;
`graphical` is Bretz and others 2009 (from memory).
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import KW_ONLY
from typing import Annotated

import numpy as np

from gatecheck.columns import Booleans, Floats
from gatecheck.compare.families import BY_SHARES, LARGEST_GRAPH, FamilyFacts, Kind, ShareFlaw, family_facts
from gatecheck.compare.families_before import Before, FamiliesSinceBase, families_since_base, family_name, loosened
from gatecheck.model.promise import Promise
from gatecheck.model.record import Family, OpenProbability, Record
from gatecheck.model.shown import decimal, percent
from gatecheck.model.struct import struct
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Exemption, Judgement, Rule, Said, Table, setting
from gatecheck.rules.words import describe_result, tell_number

_SAME = 1e-6
_MOST_NAMED = 3
_NO_FAMILY = Family("none")
_TAKE_ANEW = "Report every member, with one size and one procedure, and the adjusted p of the same run."
_NAME_AGAIN = (
    "Name the family {family} again, with its size and procedure; to rename it, do so in all its members at once."
)
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
    """Claims that name the family behind them, or have left the one that they named at the base."""
    found = table.columns.found
    left = families_since_base(found, table.families_before).left
    named = [one.record.family is not None or was is not None for one, was in zip(found, left, strict=True)]
    return table.columns.claims & np.array(named, np.bool_)


def judge(table: Table, settings: Sequence[Settings | None]) -> Judgement:
    """Short where the family is not whole or the claim does not stand in it, undecided where it cannot be told."""
    found = table.columns.found
    since = families_since_base(found, table.families_before)
    facts = family_facts(table.columns, table.evidence)
    families = [one.record.family for one in found]
    broken = [list(_broken(fact, family, since)) for fact, family in zip(facts, families, strict=True)]
    left = np.array([was is not None for was in since.left], np.bool_)
    against = left | np.array([bool(told) for told in broken], np.bool_)
    adjusted = np.array([np.nan if each is None else each.adjusted for each in facts], np.float64)
    # What a claim shows in another family than its own tells nothing.
    adjusted = np.where(left, np.nan, adjusted)
    differs = [each is not None and _differs(each, family) for each, family in zip(facts, families, strict=True)]
    alpha = _level(table, settings)
    short = against | np.array(differs, np.bool_) | (adjusted > alpha)
    known = against | np.isfinite(adjusted)
    return Judgement(short, adjusted, alpha, known=known, facts=(facts, broken, since.left))


def _level(table: Table, settings: Sequence[Settings | None]) -> Floats:
    """The level of each claim's family: that of the policy, or the one that was promised where it is less."""
    promised = [_promised_level(each) for each in table.promises or (None,) * len(settings)]
    return np.fmin(setting(settings, "alpha"), np.array(promised, np.float64))


def _promised_level(promise: Promise | None) -> float:
    hypothesis = None if promise is None else promise.hypothesis
    if promise is None or promise.plan is None or hypothesis is None or hypothesis.family is None:
        return np.nan
    family = (promise.plan.families or {}).get(hypothesis.family)
    return np.nan if family is None or family.alpha is None else family.alpha


def _broken(facts: FamilyFacts | None, family: Family | None, since: FamiliesSinceBase) -> Iterator[str]:
    """What is wrong with the family itself."""
    if facts is None or family is None:
        return
    for before in since.before.get(family.name, ()):
        yield from _lost(before, facts)
    if len(facts.sizes) > 1:
        yield f"its members declare the sizes {' and '.join(map(str, facts.sizes))}"
    if len(facts.procedures) > 1:
        yield f"its members declare the procedures {' and '.join(facts.procedures)}"
    if len(facts.sizes) == 1 and facts.members < facts.sizes[0]:
        yield f"{facts.members} of {facts.sizes[0]} members are in this tree"
    if len(facts.sizes) == 1 and facts.members > facts.sizes[0]:
        declared = "1 is" if facts.sizes[0] == 1 else f"{facts.sizes[0]} are"
        yield f"{facts.members} members are in this tree and {declared} declared"


def _lost(before: Before, facts: FamilyFacts) -> Iterator[str]:
    """What the family had at the base and has no more: results that did not fit must not vanish from it."""
    if before.gone:
        yield f"since the base it has lost {_listed(before.gone)} (gone, or renamed without aliases)"
    if before.left:
        yield f"since the base {_listed(before.left)} {'has' if len(before.left) == 1 else 'have'} left it"
    declared = max(facts.sizes, default=facts.members)
    if before.size is not None and declared < before.size:
        yield f"it had {before.size} members at the base and {'declares' if facts.sizes else 'has'} {declared}"
    procedures = before.procedures, facts.procedures
    if all(len(each) == 1 for each in procedures) and loosened(before.procedures[0], facts.procedures[0]):
        yield f"its procedure was {before.procedures[0]} at the base and is {facts.procedures[0]}"


def _listed(names: Sequence[str]) -> str:
    more = f" and {len(names) - _MOST_NAMED} more" if len(names) > _MOST_NAMED else ""
    return f"{', '.join(names[:_MOST_NAMED])}{more}"


def _differs(facts: FamilyFacts, family: Family | None) -> bool:
    """Whether an adjusted p is reported that does not agree with the one made anew."""
    reported = None if family is None or family.adjusted_p is None else family.adjusted_p.as_rounded()
    if reported is None or not np.isfinite(facts.adjusted):
        return False
    slack = _SAME * facts.adjusted
    return not reported.low - slack <= facts.adjusted <= reported.high + slack


def explain(table: Table, row: int, settings: Settings, judgement: Judgement) -> Said:
    """What is wrong with the family, or where the member stands in it."""
    every, broken, left = judgement.facts
    family = table.record(row).family or _NO_FAMILY
    result = describe_result(table.record(row))
    if left[row] is not None:
        return _explain_left(left[row], table.record(row), result)
    facts: FamilyFacts = every[row]
    if judgement.known is not None and not judgement.known[row]:
        why, advice = _why_unknown(facts.flaw, family)
        return Said(f"The place of {result} in the family {family.name} cannot be told: {why}.", advice)
    if broken[row]:
        return Said(f"The family {family.name} is not whole: {'; '.join(broken[row])}.", _TAKE_ANEW)
    alpha = settings.alpha if judgement.limit is None else float(judgement.limit[row])
    adjusted = decimal(facts.adjusted, alpha)
    members = f"{facts.members} member{'' if facts.members == 1 else 's'}"
    whole = f"{family.procedure}, {members}{_tell_share(family)}"
    place = f"{result} has an adjusted p of {adjusted} in the family {family.name} ({whole})"
    if _differs(facts, family):
        return Said(f"{place}, and {tell_number(family.adjusted_p)} is reported.", _TAKE_ANEW)
    nulls = _tell_true_nulls(facts, alpha)
    wanted = "the policy allows" if alpha == settings.alpha else "the plan promises a level of"
    return Said(
        f"{place}; {wanted} {decimal(alpha, alpha)}.{nulls}",
        "Claim the members that the procedure rejects, or confirm this one in a study of its own.",
    )


def _explain_left(family: str, record: Record, result: str) -> Said:
    now = "in none" if (name := family_name(record)) is None else f"in the family {name}"
    return Said(
        f"At the base {result} was in the family {family}, and now it is {now}; the policy wants every test behind "
        "a claim in its family.",
        _NAME_AGAIN.format(family=family),
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
