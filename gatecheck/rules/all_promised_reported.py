"""Rule `all-promised-reported`: every hypothesis that a plan promises is answered by a record, whatever it found.

It judges plans, not records: each hypothesis of the `roles` asked for that no record answers is a finding at the
file of its plan. With `release: open` such a finding is only noted, as the study may still run; with `strict` it
blocks. Safety outcomes are held to it like all others. CONSORT 2025, item 26, asks for the results of each primary
and secondary outcome.
"""

from __future__ import annotations

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
        findings=tuple(_finding(plan, each, enforce) for each in found.missing),
    )


def _finding(plan: PlanInTree, hypothesis: Hypothesis, enforce: Enforce) -> Finding:
    what = shown(hypothesis.text if hypothesis.outcome is None else hypothesis.outcome.variable)
    return Finding(
        _NAME,
        "short",
        enforce,
        message=f"{hypothesis.role.capitalize()} outcome not reported: {what} ({hypothesis.id}).",
        remedy=(
            f"Report its result, whatever it is, in a record with plan.file {plan.path} and plan.hypothesis "
            f"{hypothesis.id}; without a claim, where nothing is claimed."
        ),
    )


RULE = rule_beyond_records(_NAME, _ASKS, Settings, "plans")
