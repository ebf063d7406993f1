"""Rule `looks`: an interim look was planned with a boundary, and the result is beyond it.

Each look at 0.05 without a boundary adds to the type I error: five of them make it 0.142 (Armitage, McPherson and
Rowe, Journal of the Royal Statistical Society A 132 (1969) 235-244). A boundary chosen after the fact is no help.
Looks are taken as equally spaced unless `look.schedule` gives the information at each. Setting: `alpha`, the type I
error of all looks together, where the record gives no `test.alpha`.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import KW_ONLY
from typing import Annotated

import numpy as np

from gatecheck.columns import Booleans, Floats
from gatecheck.compare.looks import LookFacts, is_single, look_facts
from gatecheck.model.record import Look, OpenProbability
from gatecheck.model.shown import decimal
from gatecheck.model.struct import struct
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Judgement, Rule, Said, Table, setting
from gatecheck.rules.words import tell_result


@struct
class Settings(RuleSettings):
    """The error of all looks together."""

    _: KW_ONLY
    alpha: Annotated[OpenProbability, "type I error of all looks, where the record gives no test.alpha"] = 0.05


def concerns(table: Table, _: Sequence[Settings | None]) -> Booleans:
    """Claims at a look that is not the only one."""
    looked = [one.record.look is not None and not is_single(one.record.look) for one in table.columns.found]
    return table.columns.claims & np.array(looked, np.bool_)


def judge(table: Table, settings: Sequence[Settings | None]) -> Judgement:
    """Short where no boundary was planned or p is above it; undecided where either cannot be told."""
    alpha = _alpha(table, settings)
    facts = look_facts(table.columns, alpha)
    planned = np.array([each is not None and each.planned for each in facts], np.bool_)
    limit = np.array([np.nan if each is None else each.limit for each in facts], np.float64)
    p = np.exp(table.evidence.statistics.log_p)
    known = ~planned | (np.isfinite(p) & np.isfinite(limit))
    return Judgement(~planned | (p > limit), p, limit, known=known, facts=(facts, alpha))


def _alpha(table: Table, settings: Sequence[Settings | None]) -> Floats:
    own = [one.record.test.alpha if one.record.test else None for one in table.columns.found]
    given = np.array([np.nan if each is None else each for each in own], np.float64)
    return np.where(np.isfinite(given), given, setting(settings, "alpha"))


def explain(table: Table, row: int, _: Settings, judgement: Judgement) -> Said:
    """What the looks cost, or where the boundary lies."""
    every, alpha = judgement.facts
    facts: LookFacts = every[row]
    look = table.record(row).look or Look(1)
    if not facts.planned:
        return _explain_unplanned(table, row, facts, look, float(alpha[row]))
    if not np.isfinite(facts.limit):
        return Said(
            f"The boundary at look {look.number} of {look.planned} cannot be told: the schedule of information and "
            "the look do not fit together.",
            "Give look.schedule with the information at each planned look, rising to 1.",
        )
    side = "is above" if judgement.short[row] else "is within"
    return Said(
        f"{tell_result(table.columns, table.evidence, row)} at look {look.number} of {look.planned} {side} the "
        f"nominal {decimal(facts.limit)} of the {look.boundary} boundary that the plan sets.",
        "Go on to the next look, or report the estimate without a claim.",
    )


def _explain_unplanned(table: Table, row: int, facts: LookFacts, look: Look, alpha: float) -> Said:
    taken = max(look.number, look.planned or 1)
    result = tell_result(table.columns, table.evidence, row)
    real = decimal(facts.real_error)
    return Said(
        f"{result} was found at look {look.number}, without a boundary that was planned: {taken} unadjusted looks "
        f"at {alpha:g} have a real type I error of {real}; the policy wants looks planned with their boundary.",
        f"For orientation: a Pocock boundary over {taken} looks would have been {decimal(facts.pocock)} at each; "
        "one chosen after the fact does not help, so confirm the result in a study with its looks planned.",
    )


RULE = Rule(
    name="looks",
    asks="an interim look was planned with a boundary, and the result is beyond it",
    settings=Settings,
    judge=judge,
    explain=explain,
    concerns=concerns,
)
