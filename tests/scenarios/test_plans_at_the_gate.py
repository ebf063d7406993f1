"""What a plan gives to the judgement of its results, and which version of it counts, in real repositories."""

from __future__ import annotations

import json
import math
from pathlib import Path

import pytest
from support import Document, changed, commit_all, drainage, git, weigh

from gatecheck.cli import main

ID = "drainage/earthworm-biomass"
PLAN: Document = {
    "gatecheck": "plan/1",
    "id": "drainage",
    "title": "Drainage and soil life",
    "data": "none",
    "hypotheses": [
        {
            "id": "H1",
            "text": "Drainage increases earthworm biomass.",
            "prior": {"probability": 0.2, "basis": "1 of 5 earlier interventions held up"},
            "alternative": {"effect": 1.0, "scale": "standardised"},
        },
        {"id": "H2", "text": "Drainage lowers soil pH."},
    ],
}
POLICY: Document = {"gatecheck": "policy/1", "rules": {"false-positive-risk": {"limit": 0.05}}}
RECORD = drainage(plan={"file": "plans/drainage.json", "hypothesis": "H1"}, alternative=...)


def write(folder: Path, path: str, document: Document) -> None:
    file = folder / path
    file.parent.mkdir(parents=True, exist_ok=True)
    file.write_text(json.dumps(document), encoding="utf-8")


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """A repository with a policy and a sealed plan."""
    folder = tmp_path / "repository"
    write(folder, "plans/drainage.json", PLAN)
    write(folder, "gatecheck.yaml", POLICY)
    assert main(["seal", str(folder / "plans/drainage.json")]) == 0
    commit_all(folder, "plan")
    return folder


def test_the_prior_of_the_plan_counts_where_the_record_sets_none(folder: Path) -> None:
    """LR 5.06 at prior .2 leaves 44 %, as the plan has it; the policy's prior of .5 would leave 17 %."""
    write(folder, "results/a.json", RECORD)

    answer = weigh(folder)

    evidence = answer.claim()["evidence"]
    assert (evidence["prior"], evidence["prior_from"]) == (0.2, "plan")
    assert evidence["false_positive_risk"] == pytest.approx(0.4415, abs=5e-4)
    assert "at prior 0.2, which the plan sets" in answer.rule("false-positive-risk")["message"]
    assert answer.verdict["notes"] == []


def test_a_plan_that_raises_the_prior_is_named(folder: Path) -> None:
    hopeful = {"probability": 0.8, "basis": "it has to work"}
    write(folder, "plans/drainage.json", changed(PLAN, hypotheses=[{**PLAN["hypotheses"][0], "prior": hopeful}]))
    commit_all(folder, "hope")
    write(folder, "results/a.json", RECORD)

    assert weigh(folder).verdict["notes"] == [f"Weighed at a prior that its plan sets above the policy's: {ID}."]


def test_the_effect_of_the_plan_counts_where_the_record_gives_none(folder: Path) -> None:
    """LR 3.82 against the one standard deviation that was registered."""
    write(folder, "gatecheck.yaml", changed(POLICY, evidence={"alternative": "design-effect"}))
    write(folder, "results/a.json", RECORD)

    evidence = weigh(folder).claim()["evidence"]

    assert evidence["alternative"] == "design-effect"
    assert math.exp(evidence["log_likelihood_ratio"]) == pytest.approx(3.82, abs=5e-3)


def test_the_record_s_own_prior_and_effect_go_before_those_of_the_plan(folder: Path) -> None:
    own = {"probability": 0.1, "basis": "a base rate"}
    write(folder, "results/a.json", changed(RECORD, prior=own))

    evidence = weigh(folder).claim()["evidence"]

    assert (evidence["prior"], evidence["prior_from"]) == (0.1, "record")


def test_a_prior_that_the_plan_raises_after_the_results_does_not_count(folder: Path) -> None:
    write(folder, "results/a.json", RECORD)
    commit_all(folder, "result")
    write(folder, "plans/drainage.json", changed(PLAN, hypotheses=[{**PLAN["hypotheses"][0], "prior": None}]))
    hopeful = {"probability": 0.95, "basis": "we have seen it"}
    write(folder, "plans/drainage.json", changed(PLAN, hypotheses=[{**PLAN["hypotheses"][0], "prior": hopeful}]))
    commit_all(folder, "hope")

    assert weigh(folder).claim()["evidence"]["prior"] == 0.2


def test_a_request_does_not_hide_a_promise_by_striking_it_from_the_plan(folder: Path) -> None:
    """H2 of the base is missing, although the plan of the request no longer has it."""
    strict = {"release": "strict"}
    write(folder, "gatecheck.yaml", changed(POLICY, rules={"all-promised-reported": strict}))
    base = commit_all(folder, "strict policy")
    only_first = [{**PLAN["hypotheses"][0], "role": "primary"}]
    write(folder, "plans/drainage.json", changed(PLAN, hypotheses=only_first))
    write(folder, "results/a.json", RECORD)
    commit_all(folder, "a result, and a promise less")

    answer = weigh(folder, "--base", base)

    assert answer.status == 1
    (row,) = [one for one in answer.verdict["others"] if one["id"] == "plans/drainage.json"]
    assert row["rules"][0]["message"] == "Primary outcome not reported: Drainage lowers soil pH. (H2)."


def test_a_plan_that_is_new_in_a_request_counts_too(folder: Path) -> None:
    write(folder, "gatecheck.yaml", changed(POLICY, rules={"all-promised-reported": {"release": "strict"}}))
    git(folder, "rm", "-q", "-r", "--cached", "plans")
    commit_all(folder, "strict policy")
    write(folder, "plans/new.json", changed(PLAN, id="new"))
    write(folder, "results/a.json", RECORD)

    answer = weigh(folder, "--base", "HEAD")

    assert {one["id"] for one in answer.verdict["others"]} == {"plans/drainage.json", "plans/new.json"}


def test_a_plan_that_cannot_be_read_stops_the_gate(folder: Path) -> None:
    write(folder, "gatecheck.yaml", changed(POLICY, rules={"all-promised-reported": {}}))
    write(folder, "plans/other.json", changed(PLAN, data="some"))
    write(folder, "results/a.json", RECORD)

    answer = weigh(folder)

    assert answer.status == 3
    assert [problem["at"] for problem in answer.verdict["problems"]] == [{"path": "plans/other.json", "line": 1}]


def test_a_verdict_names_the_plans_that_counted_with_their_digests(folder: Path) -> None:
    seal = json.loads((folder / "plans/drainage.json.seal.json").read_text(encoding="utf-8"))
    write(folder, "results/a.json", RECORD)

    assert weigh(folder).verdict["plans"] == [{"path": "plans/drainage.json", "digest": seal["digest"]}]


def test_a_plan_that_lies_elsewhere_counts_for_its_records_alone(folder: Path) -> None:
    """The policy asks for all promises of the plans in `promised/`, and of no others."""
    policy = changed(
        POLICY, rules={"all-promised-reported": {"release": "strict"}}, plans={"include": "promised/**"}
    )
    write(folder, "gatecheck.yaml", policy)
    write(folder, "results/a.json", RECORD)

    answer = weigh(folder)

    assert (answer.status, answer.verdict["others"]) == (0, [])
    assert [plan["path"] for plan in answer.verdict["plans"]] == ["plans/drainage.json"]
