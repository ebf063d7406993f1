"""Stories of plans that change after their results, through the real command; all data are invented."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from support import Answer, Document, changed, commit_all, drainage, git, weigh

from gatecheck.cli import main

FILE = "plans/mulch.json"
PLAN: Document = {
    "gatecheck": "plan/1",
    "id": "mulch",
    "title": "Mulch and seedlings",
    "data": "none",
    "hypotheses": [
        {"id": "H1", "text": "More survive.", "outcome": {"variable": "survival"}},
        {"id": "H2", "text": "They grow more.", "outcome": {"variable": "biomass"}},
    ],
}
ONE = changed(PLAN, hypotheses=PLAN["hypotheses"][:1])
ID = "mulch/survival"
STRICT: Document = {"all-promised-reported": {"release": "strict"}}
REGISTERED: Document = {"registered": {}}
MISSING = "Primary outcome not reported: biomass (H2)"


def write(folder: Path, path: str, document: Document) -> None:
    """Write a document into a file of the repository."""
    file = folder / path
    file.parent.mkdir(parents=True, exist_ok=True)
    file.write_text(json.dumps(document), encoding="utf-8")


def start(folder: Path, rules: Document) -> None:
    """Begin a repository with a policy."""
    write(folder, "gatecheck.yaml", {"gatecheck": "policy/1", "rules": rules})
    commit_all(folder, "policy")


def promise(folder: Path, plan: Document = PLAN) -> str:
    """Commit the plan and its seal."""
    write(folder, FILE, plan)
    assert main(["seal", str(folder / FILE)]) == 0
    return commit_all(folder, "plan")


def survival(name: str = ID, hypothesis: str = "H1", **changes: object) -> Document:
    """A result that answers a hypothesis."""
    outcome = {"variable": {"H1": "survival", "H2": "biomass"}[hypothesis]}
    answers = drainage(id=name, estimate=..., plan={"file": FILE, "hypothesis": hypothesis}, outcome=outcome)
    return changed(answers, **changes)


def missing(answer: Answer) -> list[str]:
    """What the verdict says of plans."""
    return [rule["message"] for row in answer.verdict["others"] for rule in row["rules"]]


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """The folder of a repository."""
    made = tmp_path / "station"
    made.mkdir()
    return made


def test_a_plan_that_came_after_its_result_under_another_path(folder: Path) -> None:
    """The result was there first; then the plan was sealed, and the result moved to a file of its own."""
    start(folder, REGISTERED)
    write(folder, "results/pilot.json", survival(plan=...))
    first = commit_all(folder, "result")
    sealed = promise(folder)
    git(folder, "rm", "-q", "results/pilot.json")
    write(folder, "results/survival.json", survival())
    commit_all(folder, "move")

    answer = weigh(folder)

    assert answer.status == 1
    assert answer.rule("registered", ID)["message"] == (
        f"The evidence that {FILE} came before the data is none (the plan was first committed in {sealed[:12]}, "
        f"after {first[:12]} added results/pilot.json), and the policy wants repository-order or better."
    )


def test_a_plan_that_came_first_and_a_result_that_moved_since(folder: Path) -> None:
    start(folder, REGISTERED)
    promise(folder)
    write(folder, "results/pilot.json", survival())
    commit_all(folder, "result")
    git(folder, "rm", "-q", "results/pilot.json")
    write(folder, "results/survival.json", survival())
    commit_all(folder, "move")

    answer = weigh(folder)

    assert (answer.status, answer.rule("registered", ID)["outcome"]) == (0, "met")


def test_a_promise_that_is_dropped_after_the_data_is_still_missing(folder: Path) -> None:
    """Also where a second result comes after the drop, and where the first one is taken away."""
    start(folder, STRICT)
    promise(folder)
    write(folder, "results/survival.json", survival())
    commit_all(folder, "result")
    kept = weigh(folder)
    write(folder, FILE, ONE)
    commit_all(folder, "drop")
    dropped = weigh(folder)
    write(folder, "results/z.json", survival("z/again", status="exploratory"))
    commit_all(folder, "again")
    again = weigh(folder)
    git(folder, "rm", "-q", "results/survival.json")
    commit_all(folder, "away")

    for answer in (kept, dropped, again, weigh(folder)):
        assert (answer.status, missing(answer)) == (1, [f"{MISSING}."])


def test_a_sealed_plan_that_is_deleted_is_still_promised(folder: Path) -> None:
    start(folder, STRICT)
    promise(folder)
    write(folder, "results/survival.json", survival())
    base = commit_all(folder, "result")
    git(folder, "rm", "-q", FILE, f"{FILE}.seal.json")
    gone = commit_all(folder, "away")

    answer, request = weigh(folder), weigh(folder, "--base", base)

    assert (answer.status, missing(answer)) == (1, [f"{MISSING}; its plan was taken away in {gone[:12]}."])
    assert (request.status, missing(request)) == (1, [f"{MISSING}."])
    assert [plan["path"] for plan in answer.verdict["plans"]] == [FILE]


def test_a_study_that_is_put_away_whole_is_not_missing(folder: Path) -> None:
    start(folder, STRICT)
    promise(folder)
    write(folder, "results/survival.json", survival())
    write(folder, "results/biomass.json", survival("mulch/biomass", "H2", claim=...))
    commit_all(folder, "results")
    git(folder, "rm", "-q", "-r", "plans", "results")
    write(folder, "results/next.json", drainage())
    commit_all(folder, "the next study")

    answer = weigh(folder)

    assert (answer.status, missing(answer)) == (0, [])


def test_a_plan_amended_before_its_data_promises_what_it_then_says(folder: Path) -> None:
    start(folder, STRICT)
    promise(folder)
    write(folder, FILE, ONE)
    commit_all(folder, "amend")
    write(folder, "results/survival.json", survival())
    commit_all(folder, "result")

    answer = weigh(folder)

    assert (answer.status, missing(answer)) == (0, [])


@pytest.mark.parametrize(("rules", "status"), [(STRICT, 3), ({"all-promised-reported": {}}, 0)])
def test_a_shallow_clone_does_not_show_what_was_promised(
    folder: Path, tmp_path: Path, rules: Document, status: int
) -> None:
    """At release that stops the gate; while the study may run it is as open as the rest."""
    start(folder, rules)
    promise(folder, ONE)
    write(folder, "results/survival.json", survival())
    head = commit_all(folder, "result")
    clone = tmp_path / "clone"
    git(tmp_path, "clone", "-q", "--depth=1", "-o", "field", folder.as_uri(), str(clone))

    answer = weigh(clone)

    assert answer.status == status
    told = [(each["message"], each["advice"]) for each in answer.verdict["problems"]]
    assert told == (
        [
            (
                f"what plans promised earlier is not known, as the history in this clone is cut at {head[:12]}",
                "run `git fetch --unshallow field`",
            )
        ]
        if status
        else []
    )
    assert weigh(folder).status == 0
