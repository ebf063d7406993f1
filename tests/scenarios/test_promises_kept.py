"""Stories of plans and claims in real repositories, through the real command; all data are invented."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
from support import Answer, Document, changed, commit_all, drainage, weigh

from gatecheck.cli import main

PLAN_FILE = "plans/shop.yaml"
RETENTION: Document = {
    "gatecheck": "plan/1",
    "id": "shop-layout",
    "title": "Does the new layout keep customers?",
    "data": "none",
    "hypotheses": [
        {
            "id": "H1",
            "text": "The new layout keeps more customers.",
            "direction": "increase",
            "outcome": {"variable": "retention", "time_point": "30 days"},
            "sides": 2,
        }
    ],
}
SEEDLINGS: Document = {
    "gatecheck": "plan/1",
    "id": "seedlings",
    "title": "Mulch and seedlings",
    "data": "none",
    "hypotheses": [
        {"id": "H1", "text": "More survive.", "outcome": {"variable": "seedling_survival_90d"}},
        {"id": "H2", "text": "They grow more.", "outcome": {"variable": "biomass_90d"}},
    ],
}
ID = "shop/retention"
DATA = "data/customers.csv"


def write(folder: Path, path: str, document: Document) -> None:
    """Write a document into a file of the repository."""
    file = folder / path
    file.parent.mkdir(parents=True, exist_ok=True)
    file.write_text(json.dumps(document), encoding="utf-8")


def start(folder: Path, plan: Document, **rules: Document) -> str:
    """Begin a repository with a policy and a plan, and return the commit."""
    named = {name.replace("_", "-"): settings for name, settings in rules.items()}
    write(folder, "gatecheck.yaml", {"gatecheck": "policy/1", "rules": named})
    return promise(folder, plan)


def promise(folder: Path, plan: Document) -> str:
    """Write the plan, seal it in place of an earlier seal, and return the commit of both."""
    write(folder, PLAN_FILE, plan)
    (folder / f"{PLAN_FILE}.seal.json").unlink(missing_ok=True)
    assert main(["seal", str(folder / PLAN_FILE)]) == 0
    return commit_all(folder, "plan")


def collect(folder: Path) -> str:
    """Commit the data, and return the commit."""
    (folder / "data").mkdir()
    (folder / DATA).write_text("customer,kept\n1,1\n", encoding="utf-8")
    return commit_all(folder, "data")


def judged(folder: Path, **changes: Any) -> Answer:
    """Commit a record that answers H1 of the plan, and weigh the repository."""
    record = drainage(**{
        "id": ID,
        "claim": "The new layout keeps more customers.",
        "estimate": ...,
        "alternative": ...,
        "sample": {"unit": "customer", "n": 48},
        "test": {"name": "two-sample t", "statistic": "t", "value": 2.9, "df": 46, "p": "0.0057", "sides": 2},
        "outcome": {"variable": "retention", "time_point": "30 days"},
        "plan": {"file": PLAN_FILE, "hypothesis": "H1"},
        "provenance": {"inputs": [{"path": DATA}]},
        **changes,
    })
    write(folder, "results/retention.json", record)
    commit_all(folder, "result")
    return weigh(folder)


def departure(known: str) -> list[Document]:
    """A disclosed change of the time point."""
    return [{
        "field": "outcome.time_point",
        "planned": "30 days",
        "done": "7 days",
        "reason": "the shop closed after ten days",
        "known": known,
    }]  # fmt: skip


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """The folder of a repository."""
    made = tmp_path / "repository"
    made.mkdir()
    return made


ONE_SIDED = {"name": "two-sample t", "statistic": "t", "value": 1.78, "df": 46, "p": "0.041", "sides": 1}


def test_one_sided_after_the_fact(folder: Path) -> None:
    """Registered two-sided, reported with one side: the two-sided p is .082."""
    frozen = start(folder, RETENTION, registered={})
    collect(folder)

    answer = judged(folder, test={**ONE_SIDED, "tail": "greater"})

    assert answer.status == 1
    assert answer.claim(ID)["verdict"] == "falls-short"
    said = answer.rule("registered", ID)
    assert said["outcome"] == "short"
    assert said["message"] == (
        f"The claim differs from H1 of plans/shop.yaml as frozen at {frozen[:12]}, without a deviation that says "
        "so: one side of the test is taken, and both sides were promised (two-sided p = 0.0817)."
    )
    assert said["remedy"] == (
        "Restore what was promised, or disclose each departure under deviations with its reason and time (one "
        "decided after the results makes the claim exploratory)."
    )


def test_one_sided_as_it_was_registered(folder: Path) -> None:
    """The same test, promised with one side, keeps its promise."""
    start(folder, changed(RETENTION, hypotheses=[{**RETENTION["hypotheses"][0], "sides": 1}]), registered={})
    collect(folder)

    answer = judged(folder, test={**ONE_SIDED, "tail": "greater"})

    assert (answer.status, answer.rule("registered", ID)["outcome"]) == (0, "met")


@pytest.mark.parametrize(("release", "status"), [("strict", 1), ("open", 0)])
def test_a_registered_outcome_is_missing_at_release(folder: Path, release: str, status: int) -> None:
    start(folder, SEEDLINGS, all_promised_reported={"release": release})
    collect(folder)

    answer = judged(folder, outcome={"variable": "biomass_90d"}, plan__hypothesis="H2")

    assert answer.status == status
    said = answer.rule("all-promised-reported", PLAN_FILE)
    assert said["message"] == "Primary outcome not reported: seedling_survival_90d (H1)."
    assert said["enforce"] == ("block" if release == "strict" else "note")
    assert answer.claim(PLAN_FILE)["at"]["path"] == PLAN_FILE


def test_a_registered_outcome_that_is_reported_without_a_claim_is_not_missing(folder: Path) -> None:
    start(folder, SEEDLINGS, all_promised_reported={"release": "strict"})
    collect(folder)
    survival = drainage(
        id="survival", claim=..., estimate=..., plan={"file": PLAN_FILE, "hypothesis": "H1"}, outcome=...
    )
    write(folder, "results/survival.json", survival)

    answer = judged(folder, outcome={"variable": "biomass_90d"}, plan__hypothesis="H2")

    assert answer.status == 0
    assert PLAN_FILE not in [each["id"] for each in answer.verdict["others"]]


def switched(folder: Path) -> str:
    """A plan that is amended before the data and changed to 7 days after them; return the amendment."""
    start(folder, changed(RETENTION, hypotheses=[{**RETENTION["hypotheses"][0], "sides": 1}]), registered={})
    amended = promise(folder, RETENTION)
    collect(folder)
    outcome = {"variable": "retention", "time_point": "7 days"}
    promise(folder, changed(RETENTION, hypotheses=[{**RETENTION["hypotheses"][0], "outcome": outcome}]))
    return amended


def test_an_outcome_switched_inside_the_registration(folder: Path) -> None:
    """The last version of the plan matches the result; the one that was there before the data does not."""
    frozen = switched(folder)

    answer = judged(folder, outcome__time_point="7 days")

    assert answer.status == 1
    said = answer.rule("registered", ID)
    assert said["outcome"] == "short"
    assert said["message"] == (
        f"The claim differs from H1 of plans/shop.yaml as frozen at {frozen[:12]}, which was changed later, "
        "without a deviation that says so: the time point of the outcome is 7 days, and 30 days was promised."
    )


def test_a_claim_that_keeps_the_frozen_version_stands_although_the_plan_was_changed(folder: Path) -> None:
    frozen = switched(folder)

    answer = judged(folder)

    assert answer.status == 0
    assert answer.rule("registered", ID)["outcome"] == "met"
    assert len(frozen) == 40


@pytest.mark.parametrize(("known", "status"), [("before-data", 0), ("before-results", 0), ("after-results", 1)])
def test_a_switch_that_is_disclosed_stands_by_when_it_was_decided(folder: Path, known: str, status: int) -> None:
    switched(folder)

    answer = judged(folder, outcome__time_point="7 days", deviations=departure(known))

    assert answer.status == status
    said = answer.rule("registered", ID)
    assert said["outcome"] == ("short" if status else "met")
    if status:
        assert said["message"] == (
            "The departure in outcome.time_point was decided after the results, and the policy calls such a claim "
            "exploratory."
        )


@pytest.mark.parametrize("changes", [{"status": "exploratory"}, {"claim": ...}, {"harm": True}])
def test_what_is_not_claimed_as_planned_needs_no_registration(folder: Path, changes: Document) -> None:
    """Exploratory work and possible harms are reported freely; a claim that says that it was planned is not."""
    start(folder, RETENTION, registered={})
    collect(folder)

    free = judged(folder, plan=..., **changes)
    bound = judged(folder, plan=...)

    assert (free.status, bound.status) == (0, 1)
    assert bound.rule("registered", ID)["message"] == (
        "The claim is confirmatory and names no plan, and the policy wants such claims registered before the data."
    )
