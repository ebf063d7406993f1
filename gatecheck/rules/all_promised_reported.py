"""Rule `all-promised-reported`: every hypothesis that a plan promises is answered by a record, whatever it found.

It judges plans, not records: each hypothesis of the `roles` asked for that no record answers is a finding at the
file of its plan. With `release: open` such a finding is only noted, as the study may still run; with `strict` it
blocks. Safety outcomes are held to it like all others. CONSORT 2025, item 26, asks for the results of each primary
and secondary outcome.

In a git repository a promise is not undone by a later edit of its plan. What counts is what the plan said when
results that name it first appeared, for any of them; where none names it, what it says now. A plan that was taken
away still counts if it was sealed or a result named it, save for what was reported while it was there. With
`release: strict`, a history that is cut (a shallow clone) or lacks contents (a partial one) cannot be judged.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Sequence
from dataclasses import KW_ONLY
from typing import Annotated, Literal

from gatecheck.compare.names import shown
from gatecheck.compare.promises import NotReported, missing_hypotheses
from gatecheck.model.marks import OneOrMore
from gatecheck.model.plan import Hypothesis
from gatecheck.model.promise import PlanInTree
from gatecheck.model.record import Record
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Enforce, Finding, Judged, Place
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import rule_beyond_records

_NAME = "all-promised-reported"
_COMMIT = 12
_ASKS = "every hypothesis that a plan promises is answered by a record"


@struct
class Settings(RuleSettings):
    """Which hypotheses must be answered, and whether that is due."""

    _: KW_ONLY
    roles: Annotated[
        tuple[Literal["primary", "secondary"], ...], OneOrMore(), "roles of the hypotheses that must be answered"
    ] = ("primary",)
    release: Annotated[
        Literal["strict", "open"],
        "strict: what is not reported blocks; open: the study may still run, so it is noted",
    ] = "open"


def judge_plans(
    plans: Sequence[PlanInTree], records: Sequence[Record], settings: Settings | None
) -> tuple[Judged, ...]:
    """Return a row for each plan of which something is not reported, in the order of `plans`.

    Its id is the path of the plan, it claims nothing, and it has a finding for each hypothesis that is missing.
    `settings` is `None` where the rule is off.
    """
    if settings is None:
        return ()
    found = missing_hypotheses(records, plans, settings.roles)
    return tuple(_judged(each, settings) for each in found if each.missing)


def _judged(found: NotReported, settings: Settings) -> Judged:
    plan = found.plan
    reported = f"{found.promised - len(found.missing)} of {found.promised} promised results reported"
    enforce: Enforce = settings.enforce if settings.release == "strict" else "note"
    return Judged(
        kind="plan",
        id=plan.path,
        at=Place(plan.path, plan.line),
        claim=None,
        result=f"plan {plan.plan.id}, {reported}",
        evidence=None,
        findings=tuple(_finding(found, each, enforce) for each in found.missing),
    )


def _finding(found: NotReported, hypothesis: Hypothesis, enforce: Enforce) -> Finding:
    plan = found.plan
    what = shown(hypothesis.text if hypothesis.outcome is None else hypothesis.outcome.variable)
    gone = "" if plan.gone_since is None else f"; its plan was taken away in {plan.gone_since[:_COMMIT]}"
    return Finding(
        _NAME,
        "short",
        enforce,
        message=f"{hypothesis.role.capitalize()} outcome not reported: {what} ({hypothesis.id}){gone}.",
        remedy=(
            f"Report its result, whatever it is, in a record with plan.file {plan.path} and plan.hypothesis "
            f"{hypothesis.id}; without a claim, where nothing is claimed."
        ),
        digest=_digest(found),
    )


def _digest(found: NotReported) -> str:
    """What a permission rests on: what the plan says, and which of its hypotheses are not reported."""
    rests_on = json.dumps([found.plan.digest, [each.id for each in found.missing]])
    return f"sha256:{hashlib.sha256(rests_on.encode('ascii')).hexdigest()}"


RULE = rule_beyond_records(_NAME, _ASKS, Settings, "plans")
