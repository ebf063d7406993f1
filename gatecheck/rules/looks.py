"""Rule `looks`: an interim look was planned with a boundary, and the result is beyond it.

A claim at an interim look was planned with a boundary, and its p is within that boundary's nominal p at this look,
computed exactly by recursive numerical integration. `boundary` is `pocock`, `obrien-fleming`, `haybittle-peto`,
`spending-obrien-fleming` or `spending-pocock`; looks are equally spaced unless `look.schedule` gives the
information at each. `alpha` is the record's `test.alpha`, else that of the policy (0.05). Safety outcomes are
exempt.

What was planned is what the named plan promises under `looks`, where its frozen version came before the first look,
whether or not the record repeats it; else what the record tells (`look: {number, planned, boundary}`), if its first
look in the history, by its own word look 1, told the same. A boundary that came later is none. Where the order
cannot be told, as after a squash that left the last look alone, the claim is undecided.

Looks without a boundary fall short, with what they really cost: five equally spaced ones at 0.05, two-sided, have a
type I error of 0.142 (Armitage, McPherson and Rowe, Journal of the Royal Statistical Society A 132 (1969) 235-244).
Sides count, and so does the number of units at each look where it is told.

In a git repository the looks are also counted in the history: a result with other numbers from more units than the
one before it is a look, a rerun is none, and other numbers from as many or fewer units are listed as other data or
code. Every commit that leads to `HEAD` counts, side branches too, and so do earlier ids under `aliases`; the
greater of the looks told and the looks seen decides. A record of another id that answered the same hypothesis of
the same plan, and that the tree no longer has, may have been an earlier look: where it would be one, the claim is
undecided. So it is where the history is cut (a shallow or partial clone), and the fetch that mends it is named. In
a folder without git only what the record and its plan tell counts.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import KW_ONLY
from typing import Annotated

import numpy as np

from gatecheck.columns import Booleans, Floats
from gatecheck.compare.looks import LookFacts, is_one_of_several, look_facts
from gatecheck.model.looks_seen import LooksSeen, Seen, uneven_spacing
from gatecheck.model.promise import Promise
from gatecheck.model.record import OpenProbability
from gatecheck.model.shown import decimal
from gatecheck.model.struct import struct
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Exemption, Judgement, Rule, Said, Table, setting
from gatecheck.rules.words import tell_result

_MOST_NAMED = 5
_SHORT = 12


@struct
class Settings(RuleSettings):
    """The error of all looks together."""

    _: KW_ONLY
    alpha: Annotated[OpenProbability, "type I error of all looks, where the record gives no test.alpha"] = 0.05


def concerns(table: Table, _: Sequence[Settings | None]) -> Booleans:
    """Claims at a look that is not the only one, or whose history does not say whether it is."""
    rows = zip(table.columns.found, _seen(table), _promises(table), strict=True)
    several = [
        is_one_of_several(one.record.look, seen, promise) or not _is_known(seen) for one, seen, promise in rows
    ]
    return table.columns.claims & np.array(several, np.bool_)


def judge(table: Table, settings: Sequence[Settings | None]) -> Judgement:
    """Short where no boundary was planned or p is above it; undecided where either cannot be told.

    Undecided, too, is what would be met if only the history were whole.
    """
    alpha = _alpha(table, settings)
    seen = _seen(table)
    facts = look_facts(table.columns, alpha, seen, _promises(table))
    unplanned = np.array([each is not None and not each.planned for each in facts], np.bool_)
    planned = np.array([each is not None and each.planned for each in facts], np.bool_)
    limit = np.array([np.nan if each is None else each.limit for each in facts], np.float64)
    p = np.exp(table.evidence.statistics.log_p)
    short = unplanned | (planned & (p > limit))
    told = ~planned | (np.isfinite(p) & np.isfinite(limit))
    settled = np.array([each is None or each.plan.settled != "not known" for each in facts], np.bool_)
    known = short | (told & settled & np.array([_is_known(each) for each in seen], np.bool_))
    return Judgement(short, p, limit, known=known, facts=(facts, alpha))


def _seen(table: Table) -> tuple[LooksSeen | None, ...]:
    return table.looks_seen or (None,) * len(table.columns.found)


def _promises(table: Table) -> tuple[Promise | None, ...]:
    return table.promises or (None,) * len(table.columns.found)


def _is_known(seen: LooksSeen | None) -> bool:
    return seen is None or seen.known


def _alpha(table: Table, settings: Sequence[Settings | None]) -> Floats:
    own = [one.record.test.alpha if one.record.test else None for one in table.columns.found]
    given = np.array([np.nan if each is None else each for each in own], np.float64)
    return np.where(np.isfinite(given), given, setting(settings, "alpha"))


def explain(table: Table, row: int, _: Settings, judgement: Judgement) -> Said:
    """What the looks cost, or where the boundary lies."""
    every, alpha = judgement.facts
    facts: LookFacts | None = every[row]
    seen = _seen(table)[row] or LooksSeen(())
    if facts is None or (not seen.known and not judgement.short[row]):
        return _undecided(seen.why, seen.advice)
    if not facts.planned:
        return _explain_unplanned(table, row, facts, float(alpha[row]))
    if facts.plan.why and not judgement.short[row]:
        return _undecided(facts.plan.why, facts.plan.advice)
    if not np.isfinite(facts.limit):
        return Said(
            f"The boundary at look {facts.number} of {facts.plan.planned} cannot be told: the schedule of "
            "information and the look do not fit together.",
            "Give look.schedule with the information at each planned look, rising to 1.",
        )
    return _explain_planned(table, row, facts, judgement)


def _undecided(why: str, advice: str) -> Said:
    return Said(why, f"{advice[:1].upper()}{advice[1:]}.")


def _explain_planned(table: Table, row: int, facts: LookFacts, judgement: Judgement) -> Said:
    plan, side = facts.plan, "is above" if judgement.short[row] else "is within"
    return Said(
        f"{tell_result(table.columns, table.evidence, row)} at look {facts.number} of {plan.planned} {side} the "
        f"nominal {decimal(facts.limit)} of the {plan.boundary} boundary that {plan.by}."
        f"{_tell_counted(table, row)}",
        "Go on to the next look, or report the estimate without a claim.",
    )


def _tell_counted(table: Table, row: int) -> str:
    """Say by what the looks were counted, where the history was asked."""
    if not table.looks_seen:
        return ""
    seen = _seen(table)[row]
    if seen is None:
        return " The folder is in no git repository, so only the look that the record tells counts."
    return f" The history shows {tell_looks(seen)}."


def _explain_unplanned(table: Table, row: int, facts: LookFacts, alpha: float) -> Said:
    look, seen = table.record(row).look, _seen(table)[row]
    result = tell_result(table.columns, table.evidence, row)
    by_history = seen is not None and len(seen.looks) > (0 if look is None else look.number)
    where = f", as the history shows ({tell_looks(seen)})" if by_history and seen is not None else ""
    plan = facts.plan
    without = plan.late or "without a boundary that was planned"
    if plan.planned and plan.boundary and facts.number > plan.planned:
        without = f"beyond the {plan.planned} that were planned"
    looks = _tell_unadjusted(facts, alpha, one_sided=bool(table.columns.test.one_sided[row]))
    least, most = ("", "") if facts.exact else ("at least ", "at most ")
    return Said(
        f"{result} was found at look {facts.number}{where}, {without}: {looks} have a real type I error of "
        f"{least}{decimal(facts.real_error)}; the policy wants looks planned with their boundary.",
        f"For orientation: a Pocock boundary over {facts.taken} looks would have been "
        f"{most}{decimal(facts.pocock)} at each; one chosen after the fact does not help, so confirm the result in "
        "a study with its looks planned.",
    )


def _tell_unadjusted(facts: LookFacts, alpha: float, *, one_sided: bool) -> str:
    spacing = uneven_spacing(facts.information) if facts.information else ""
    information = f", with information as {spacing}," if spacing else ""
    return f"{facts.taken} unadjusted {'one-sided ' if one_sided else ''}looks at {alpha:g}{information}"


def tell_looks(seen: LooksSeen) -> str:
    """The looks that a history shows, with their commits and dates."""
    looks = seen.looks
    named = [_tell_look(one) for one in looks[:_MOST_NAMED]]
    more = f" and {len(looks) - _MOST_NAMED} more" if len(looks) > _MOST_NAMED else ""
    count = "one look" if len(looks) == 1 else f"{len(looks)} looks"
    least = "" if seen.known else "at least "
    return f"{least}{count}: {', '.join(named)}{more}"


def _tell_look(one: Seen) -> str:
    if one.commit is None:
        return "the judged tree"
    aside = "" if one.on_line else ", off the main line"
    return f"{one.commit[:_SHORT]} of {one.day}{aside}"


RULE = Rule(
    name="looks",
    asks="an interim look was planned with a boundary, and the result is beyond it",
    settings=Settings,
    judge=judge,
    explain=explain,
    exempt=(
        Exemption(
            lambda table, _: table.columns.harm,
            "A safety outcome: no penalty for several looks is put on reporting a possible harm.",
        ),
    ),
    concerns=concerns,
    reads=("plan", "deviations"),
)
