"""What was promised for each record: the plan as it was when data or results first appeared."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from plans.planting import (
    DATA,
    FILE,
    PLAN,
    RESULT,
    SEAL,
    Station,
    clone,
    found_of,
    hypothesis,
    record,
)
from support import Document, changed, drainage, git

from gatecheck.model.promise import Promise
from gatecheck.plans import store
from gatecheck.plans.canonical import whole_digest_of
from gatecheck.plans.promise import promises
from gatecheck.plans.reading import PlanFile, plan_of

OPEN: Document = {"id": "H1", "text": "To be chosen after the pilot.", "deferred": True}


def retention(days: int) -> Document:
    """A registration whose primary outcome is retention after so many days."""
    return hypothesis(outcome={"variable": "retention", "time_point": f"{days} days"})


def time_point(promise: Promise) -> str | None:
    assert promise.hypothesis is not None
    assert promise.hypothesis.outcome is not None
    return promise.hypothesis.outcome.time_point


def test_a_registration_edited_three_times(station: Station) -> None:
    """The last version matches the result; the one that counts came before the data (30 days, and not 7)."""
    station.put(FILE, retention(90))
    station.put(FILE, retention(60))
    before = station.put(FILE, retention(30))
    station.data()
    station.put(FILE, retention(14))
    station.put(FILE, retention(7))
    station.result()

    promise = station.promise()
    assert time_point(promise) == "30 days"
    assert promise.frozen_at == before
    assert promise.changed_later
    assert promise.grade == "self-declared"
    assert promise.missing == ""


def test_dates_of_2001_do_not_move_an_edit_before_the_data(
    station: Station, monkeypatch: pytest.MonkeyPatch
) -> None:
    before = station.plan(retention(30))
    station.data()
    monkeypatch.setenv("GIT_AUTHOR_DATE", "2001-01-01T00:00:00Z")
    monkeypatch.setenv("GIT_COMMITTER_DATE", "2001-01-01T00:00:00Z")
    station.put(FILE, retention(7))

    promise = station.promise()
    assert (time_point(promise), promise.frozen_at) == ("30 days", before)
    assert (promise.grade, promise.changed_later) == ("repository-order", True)


def test_an_edit_in_the_commit_of_the_data_is_too_late(station: Station) -> None:
    before = station.plan(retention(30))
    station.write(DATA, "1\n")
    station.put(FILE, retention(7))

    promise = station.promise()
    assert (time_point(promise), promise.frozen_at) == ("30 days", before)


def test_a_pull_request_is_judged_by_the_plan_of_the_base(station: Station) -> None:
    sealed = station.plan(retention(30))
    git(station.root, "checkout", "-q", "-b", "study")
    station.put(FILE, retention(7))
    station.data()
    station.result()

    promise = station.promise(revision="main")
    assert (time_point(promise), promise.frozen_at, promise.grade) == ("30 days", sealed, "repository-order")
    assert promise.changed_later


def test_a_plan_that_comes_with_its_results(station: Station) -> None:
    git(station.root, "checkout", "-q", "-b", "study")
    station.plan()
    station.data()
    station.result()

    promise = station.promise(revision="main")
    assert (promise.grade, promise.frozen_at, promise.changed_later) == ("self-declared", None, False)
    assert promise.digest == whole_digest_of(PLAN)
    assert promise.because.startswith("the plan is in no commit on the base's first-parent line")
    assert time_point(promise) == "30 days"


def test_a_plan_that_came_after_its_data_counts_in_its_first_version(station: Station) -> None:
    station.data()
    first = station.plan(retention(30))
    station.put(FILE, retention(7))

    promise = station.promise()
    assert (time_point(promise), promise.frozen_at, promise.grade) == ("30 days", first, "none")


def test_the_earlier_name_of_a_result_counts(station: Station) -> None:
    station.put("results/old.json", record(provenance=...))
    plan = station.plan()
    git(station.root, "mv", "results/old.json", RESULT)
    station.commit()

    promise = station.promise(record(provenance=...))
    assert (promise.frozen_at, promise.grade) == (plan, "none")


def test_a_plan_that_only_looks_different_has_not_changed(station: Station) -> None:
    station.plan()
    station.put(FILE, "# a comment\n" + json.dumps(PLAN, sort_keys=True, indent=3))
    station.data()

    promise = station.promise()
    assert promise.digest == whole_digest_of(PLAN)
    assert not promise.changed_later
    assert promise.grade == "repository-order"


@pytest.mark.parametrize("how", ["removed", "edited"])
def test_a_change_in_the_work_tree_is_a_later_change(station: Station, how: str) -> None:
    station.plan()
    station.data()
    if how == "removed":
        (station.root / FILE).unlink()
    else:
        station.write(FILE, retention(7))

    promise = station.promise()
    assert promise.changed_later
    assert time_point(promise) == "30 days"


def test_a_plan_that_is_broken_now_is_a_problem_too(station: Station) -> None:
    station.plan()
    station.data()
    station.write(FILE, "gatecheck: plan/1\n")

    promised = station.promised()
    assert [(str(one.at), one.message) for one in promised.problems] == [
        (f"{FILE}:1", "data is missing"),
        (f"{FILE}:1", "id is missing"),
        (f"{FILE}:1", "title is missing"),
    ]
    (promise,) = promised.promises
    assert promise is not None
    assert (promise.grade, promise.changed_later) == ("repository-order", True)


def test_a_version_that_counts_and_cannot_be_read(station: Station) -> None:
    """That the plan was mended after the data does not mend what was promised."""
    broken = station.put(FILE, changed(PLAN, titel="x"))
    station.data()
    station.put(FILE, PLAN)

    promised = station.promised()
    (promise,) = promised.promises
    assert promise is not None
    assert (promise.hypothesis, promise.grade, promise.missing) == (None, None, "")
    assert (promise.because, promise.advice) == ("the plan cannot be read", "mend the plan")
    (problem,) = promised.problems
    assert problem.message == f"titel is no known key (in the version of {broken[:12]}, which counts)"
    assert problem.advice.endswith("; in a new plan file, as no change of this one reaches that version")


@pytest.mark.parametrize("size", ["too long", "gone"])
def test_a_version_whose_content_is_not_there(station: Station, size: str) -> None:
    content = "#" * (1 << 20) + "\n" + json.dumps(PLAN) if size == "too long" else PLAN
    station.put(FILE, content)
    name = git(station.root, "rev-parse", f"HEAD:{FILE}")
    station.data()
    station.put(FILE, PLAN if size == "too long" else retention(7))
    if size == "gone":
        (station.root / ".git/objects" / name[:2] / name[2:]).unlink()

    promised = station.promised()
    (problem,) = promised.problems
    assert problem.message == (
        f"the file has {(1 << 20) + 1 + len(json.dumps(PLAN))} bytes, and plans and their seals are read up to "
        "1048576"
        if size == "too long"
        else "a version of this file is not in this clone, although it is no partial one"
    )
    if size == "gone":
        assert problem.advice == "run `git fsck`, which names what is lost, and clone anew"
    assert [one.grade for one in promised.promises if one] == [None]


@pytest.mark.parametrize(
    ("file", "missing"),
    [
        (
            "plans/none.yaml",
            "there is no plan plans/none.yaml; name a plan that is there, by its path from the judged folder",
        ),
        (
            "../plans/drainage.yaml",
            "../plans/drainage.yaml lies outside the judged folder; name a plan that is there, by its path from "
            "the judged folder",
        ),
    ],
)
def test_a_plan_that_is_not_there_is_a_fact_and_no_problem(station: Station, file: str, missing: str) -> None:
    station.plan()
    promise = station.promise(record(plan={"file": file, "hypothesis": "H1"}))

    assert (promise.missing, promise.grade, promise.plan) == (missing, "none", None)


@pytest.mark.parametrize(
    ("document", "asked", "missing"),
    [
        (PLAN, "H2", "plans/drainage.yaml has no hypothesis 'H2'; known: H1"),
        (changed(PLAN, hypotheses=[]), "H1", "plans/drainage.yaml holds no hypothesis"),
        (
            changed(PLAN, hypotheses=[PLAN["hypotheses"][0], {"id": "H2", "text": "y"}]),
            None,
            "the record names none of the hypotheses of plans/drainage.yaml ('H1', 'H2')",
        ),
    ],
)
def test_a_hypothesis_that_is_not_there(
    station: Station, document: Document, asked: str | None, missing: str
) -> None:
    station.plan(document)

    promise = station.promise(record(plan={"file": FILE, "hypothesis": asked}))
    assert (promise.missing, promise.hypothesis) == (missing, None)
    assert promise.plan is not None
    assert promise.grade == "repository-order"


def test_a_hypothesis_added_after_the_data_was_not_promised(station: Station) -> None:
    station.plan()
    station.data()
    station.put(FILE, changed(PLAN, hypotheses=[PLAN["hypotheses"][0], {"id": "H2", "text": "y"}]))

    promise = station.promise(record(plan__hypothesis="H2"))
    assert promise.hypothesis is None
    assert promise.missing.startswith("plans/drainage.yaml has no hypothesis 'H2'")


def test_the_only_hypothesis_need_not_be_named(station: Station) -> None:
    station.plan()

    promise = station.promise(record(plan={"file": f"./plans/../{FILE}"}))
    assert promise.hypothesis is not None
    assert (promise.hypothesis.id, promise.asked, promise.file) == ("H1", None, FILE)


def test_records_stand_in_their_order(station: Station) -> None:
    station.plan()

    made = station.promised(drainage(), record(), drainage(id="other"), record(id="second"))
    assert [one is None for one in made.promises] == [True, False, True, False]


@pytest.mark.parametrize("where", ["base", "same commit", "with the result"])
def test_a_deferred_hypothesis_filled_before_the_first_result(station: Station, where: str) -> None:
    filled: Document = {**OPEN, "outcome": {"variable": "retention", "time_point": "30 days"}, "sides": 2}
    again = {**filled, "outcome": {"variable": "retention", "time_point": "7 days"}, "alpha": 0.1}
    sealed = station.plan(changed(PLAN, hypotheses=[OPEN]))
    station.data()
    if where == "with the result":
        station.write(RESULT, record())
    station.put(FILE, changed(PLAN, hypotheses=[filled]))
    if where != "base":
        station.put(FILE, changed(PLAN, hypotheses=[again]))
        station.result()

    promise = station.promise()
    assert (promise.frozen_at, promise.grade) == (sealed, "repository-order")
    assert promise.hypothesis is not None
    if where == "with the result":
        assert promise.hypothesis.outcome is None
        assert promise.changed_later
    else:
        assert time_point(promise) == "30 days"
        assert (promise.hypothesis.sides, promise.hypothesis.text) == (2, "To be chosen after the pilot.")
        assert promise.digest == whole_digest_of(changed(PLAN, hypotheses=[filled]))
        assert promise.changed_later == (where == "same commit")


def test_a_deferred_number_of_units(station: Station) -> None:
    opened: Document = {"deferred": True, "unit": "plot"}
    station.plan(hypothesis(n=opened))
    station.data()
    station.put(FILE, "gatecheck: plan/1\n")
    station.put(FILE, hypothesis(n={**opened, "planned": 44}, sides=1))
    station.put(FILE, hypothesis(n={**opened, "planned": 50}))
    station.result()

    promise = station.promise()
    assert promise.hypothesis is not None
    assert promise.hypothesis.n is not None
    assert (promise.hypothesis.n.planned, promise.hypothesis.n.unit, promise.hypothesis.sides) == (44, "plot", None)
    assert promise.changed_later


def test_a_slot_left_open(station: Station) -> None:
    station.plan(changed(PLAN, hypotheses=[OPEN]))
    station.data()
    station.result()

    promise = station.promise()
    assert promise.hypothesis is not None
    assert (promise.hypothesis.deferred, promise.hypothesis.outcome, promise.changed_later) == (True, None, False)


def test_in_a_shallow_clone_no_version_is_known(station: Station, tmp_path: Path) -> None:
    """To take the last version for the one that counts would pass what S14 must not."""
    station.plan(retention(30))
    station.data()
    station.put(FILE, retention(7))
    shallow = clone(station, tmp_path / "shallow", "--depth=1")

    promise = shallow.promise()
    assert (promise.plan, promise.hypothesis, promise.grade, promise.missing) == (None, None, None, "")
    assert promise.advice == "run `git fetch --unshallow origin`"
    assert shallow.promise(record(plan__file="plans/none.yaml")).missing.startswith("there is no plan ")


def test_a_plan_in_a_submodule_has_no_history_here(station: Station, tmp_path: Path) -> None:
    other = Station(tmp_path / "registry")
    other.root.mkdir()
    other.plan()
    git(station.root, "-c", "protocol.file.allow=always", "submodule", "add", "-q", other.root.as_uri(), "registry")
    station.commit()

    promise = station.promise(record(plan__file=f"registry/{FILE}"))
    assert promise.missing == (
        "registry/plans/drainage.yaml lies in registry, a repository of its own, whose history is not here"
    )
    assert (promise.plan, promise.grade) == (None, "none")
    station.write("registry.yaml", PLAN)
    assert station.promise(record(plan__file="registry.yaml")).grade == "self-declared"


def test_a_symbolic_link_is_a_problem(station: Station) -> None:
    station.put("elsewhere.yaml", PLAN)
    (station.root / "plans").mkdir()
    (station.root / FILE).symlink_to("../elsewhere.yaml")
    station.commit()

    promised = station.promised()
    (problem,) = promised.problems
    assert (str(problem.at), problem.message) == (f"{FILE}:1", "the file is a symbolic link, which is not followed")
    assert [one.grade for one in promised.promises if one] == [None]


def test_a_link_that_became_a_file_after_the_data_was_no_plan_before(station: Station) -> None:
    station.put("elsewhere.yaml", PLAN)
    (station.root / "plans").mkdir()
    (station.root / FILE).symlink_to("../elsewhere.yaml")
    station.data()
    (station.root / FILE).unlink()
    station.plan()

    assert station.promise().grade == "none"


def test_a_plan_taken_away_before_the_data(station: Station) -> None:
    station.plan()
    (station.root / FILE).unlink()
    station.commit()
    station.data()

    assert station.promise().missing.startswith("there is no plan plans/drainage.yaml")


@pytest.mark.parametrize(("state", "grade"), [("none", "self-declared"), ("seen", "none")])
def test_a_folder_without_git(tmp_path: Path, state: str, grade: str) -> None:
    station = Station(tmp_path)
    station.write(FILE, changed(PLAN, data=state))

    (promise,) = promises(tmp_path, [found_of(record())], None, station.settings).promises
    assert promise is not None
    assert (promise.grade, promise.frozen_at) == (grade, None)
    assert time_point(promise) == "30 days"
    (missing,) = promises(tmp_path, [found_of(record(plan__file="p.yaml"))], None, station.settings).promises
    assert missing is not None
    assert missing.missing.startswith("there is no plan p.yaml")


def test_an_output_of_a_notebook_beside_its_file_counts_as_its_results(station: Station) -> None:
    station.put("notebooks/drainage.ipynb", "{}")
    station.plan()
    found = found_of(record(), RESULT, "notebooks/drainage.ipynb")

    (promise,) = promises(station.root, [found], station.history(), station.settings).promises
    assert promise is not None
    assert promise.grade == "none"
    assert promise.because.endswith("added notebooks/drainage.ipynb")


def test_each_content_is_read_once(station: Station, monkeypatch: pytest.MonkeyPatch) -> None:
    station.plan()
    station.data()
    read: list[str] = []

    def noting(path: str, content: bytes) -> PlanFile:
        read.append(path)
        return plan_of(path, content)

    monkeypatch.setattr(store, "plan_of", noting)
    found = [found_of(record(id=f"r{number}"), f"results/{number}.json") for number in range(50)]

    made = promises(station.root, found, station.history(), station.settings)
    assert [one.grade for one in made.promises if one] == ["repository-order"] * 50
    assert read == [FILE]
    assert (station.root / SEAL).exists()
