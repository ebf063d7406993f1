"""Rule `all-promised-reported`: rows for plans of which something is not reported."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from promising import FILE, HYPOTHESIS, PLAN, kept, model, promise, table
from support import Document, changed

from gatecheck.model.plan import Plan
from gatecheck.model.promise import PlanInTree
from gatecheck.model.record import Record
from gatecheck.model.verdict import Place, PolicyUsed, Verdict
from gatecheck.render.terminal import account
from gatecheck.rules.all_promised_reported import RULE, Settings, judge_plans
from gatecheck.rules.engine import judge_all

SURVIVAL = {"id": "H2", "text": "More seedlings survive.", "outcome": {"variable": "seedling_survival_90d"}}
TEXT_ONLY = {"id": "H3", "text": "Drainage changes pH.", "role": "secondary"}
STRICT = Settings(release="strict")


def plan(*hypotheses: Document) -> PlanInTree:
    """A plan at line 4 of its file."""
    return PlanInTree(FILE, 4, model(Plan, changed(PLAN, hypotheses=list(hypotheses))))


def test_a_primary_outcome_that_is_not_reported_blocks_at_release() -> None:
    (row,) = judge_plans([plan(HYPOTHESIS, SURVIVAL, TEXT_ONLY)], [kept()], STRICT)

    assert (row.id, row.at, row.claim, row.standing) == (FILE, Place(FILE, 4), None, "falls-short")
    assert row.result == "plan drainage, 1 of 2 promised results reported"
    (finding,) = row.findings
    assert (finding.rule, finding.outcome, finding.enforce) == ("all-promised-reported", "short", "block")
    assert finding.message == "Primary outcome not reported: seedling_survival_90d (H2)."
    assert finding.remedy == (
        "Report its result, whatever it is, in a record with plan.file plans/drainage.yaml and plan.hypothesis H2; "
        "without a claim, where nothing is claimed."
    )
    verdict = Verdict(PolicyUsed("a policy", "sha256:0", "tree"), (row,))
    assert verdict.exit == 1
    assert "Primary outcome not reported: seedling_survival_90d (H2)." in account(verdict, 200)


def test_a_permission_rests_on_the_plan_and_on_what_is_missing() -> None:
    """It is the same for all that one plan does not report, and ends with another plan or another gap."""

    def digests(found: PlanInTree, *records: Record) -> set[str]:
        return {each.digest for row in judge_plans([found], records, STRICT) for each in row.findings}

    both = plan(HYPOTHESIS, SURVIVAL)
    (of_both,) = digests(both)
    others = [digests(both, kept()), digests(replace(both, digest="sha256:1")), digests(replace(both, line=9))]

    assert of_both.startswith("sha256:")
    assert [len(each) for each in others] == [1, 1, 1]
    assert [of_both in each for each in others] == [False, False, True]


def test_a_plan_that_was_taken_away_says_since_when() -> None:
    gone = replace(plan(SURVIVAL), gone_since="a1b2c3d4e5f60718293a4b5c6d7e8f9001122334")

    (row,) = judge_plans([gone], [], STRICT)

    assert row.findings[0].message == (
        "Primary outcome not reported: seedling_survival_90d (H2); its plan was taken away in a1b2c3d4e5f6."
    )


def test_while_the_study_may_still_run_it_is_noted() -> None:
    (row,) = judge_plans([plan(HYPOTHESIS, SURVIVAL)], [], Settings())

    assert row.standing == "stands"
    assert [each.enforce for each in row.findings] == ["note", "note"]
    assert [each.message for each in row.findings] == [
        "Primary outcome not reported: earthworm_biomass (H1).",
        "Primary outcome not reported: seedling_survival_90d (H2).",
    ]


def test_secondary_outcomes_are_asked_for_where_the_policy_says_so() -> None:
    settings = Settings(roles=("primary", "secondary"), release="strict")

    (row,) = judge_plans([plan(HYPOTHESIS, TEXT_ONLY)], [kept()], settings)

    assert [each.message for each in row.findings] == ["Secondary outcome not reported: Drainage changes pH. (H3)."]


def test_a_strict_policy_may_still_only_note() -> None:
    (row,) = judge_plans([plan(SURVIVAL)], [], Settings("note", release="strict"))

    assert row.findings[0].enforce == "note"


@pytest.mark.parametrize("settings", [None, STRICT])
def test_a_plan_of_which_all_is_reported_or_asked_has_no_row(settings: Settings | None) -> None:
    hypotheses = [HYPOTHESIS] if settings else [HYPOTHESIS, SURVIVAL]

    assert judge_plans([plan(*hypotheses)], [kept(harm=True)], settings) == ()


def test_no_record_is_held_to_it_by_itself() -> None:
    judged = table([kept(), kept(id="b")], [promise(), None], RULE.name, STRICT)

    assert judge_all([RULE], judged) == [(), ()]
    judgement = RULE.judge(judged, [STRICT, STRICT])
    assert not np.any(judgement.short)
    assert RULE.explain(judged, 0, STRICT, judgement).message == (
        "This rule judges plans: every hypothesis that a plan promises is answered by a record."
    )
