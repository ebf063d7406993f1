"""What plans have promised through time, and which of them are gone."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from plans.planting import DATA, FILE, PLAN, SEAL, Station, clone, found_of, record
from support import Document, changed, drainage, git

from gatecheck.model.promise import PlanInTree
from gatecheck.plans.ever import Ever, promised_ever
from gatecheck.plans.promise import promises
from gatecheck.plans.reading import plans_in_tree

FIRST: Document = {"id": "H1", "text": "One.", "outcome": {"variable": "v1"}}
SECOND: Document = {"id": "H2", "text": "Two.", "outcome": {"variable": "v2"}}
BOTH = changed(PLAN, hypotheses=[FIRST, SECOND])
ONE = changed(PLAN, hypotheses=[FIRST])


def ever(station: Station, *records: Document, include: tuple[str, ...] = ("plans/**",)) -> Ever:
    """What the plans promised, where the tree holds these records."""
    history, settings = station.history(), changed_settings(station, include)
    here, problems = plans_in_tree(station.root, include)
    assert problems == ()
    made = promises(station.root, [found_of(one) for one in records], history, settings).promises
    return promised_ever(station.root, history, settings, here, [one for one in made if one is not None])


def changed_settings(station: Station, include: tuple[str, ...]) -> Any:
    """The settings of the station with other paths of plans."""
    return type(station.settings)(include=include)


def told(*plans: PlanInTree) -> list[tuple[str, list[str]]]:
    """The path of each plan with the ids of its hypotheses."""
    return [(one.path, [each.id for each in one.plan.hypotheses]) for one in plans]


def answer(name: str = "a", hypothesis: str | None = "H1", **changes: Any) -> Document:
    """A record that answers a hypothesis and names no data."""
    plan = {"file": FILE} | ({} if hypothesis is None else {"hypothesis": hypothesis})
    return changed(drainage(id=name, plan=plan), **changes)


def test_a_promise_to_one_result_stays_beside_what_is_promised_to_another(station: Station) -> None:
    """The second record came after the hypothesis was dropped: neither of the two undoes the other."""
    station.plan(BOTH)
    station.data()
    first = record(id="a")
    station.put("results/a.json", first)
    station.put(FILE, ONE)
    second = answer("z", status="exploratory")
    station.put("results/z.json", second)

    assert told(*ever(station, first, second).plans) == [(FILE, ["H1", "H2"])]
    assert told(*ever(station, second, first).plans) == [(FILE, ["H1", "H2"])]


def test_a_result_that_is_gone_had_its_promise_too(station: Station) -> None:
    station.plan(BOTH)
    station.put("results/a.json", answer("a"))
    station.put(FILE, ONE)
    git(station.root, "rm", "-q", "results/a.json")
    station.put("results/z.json", answer("z"))

    assert told(*ever(station).plans) == [(FILE, ["H1", "H2"])]


def test_what_is_amended_before_any_result_counts_as_it_was_amended(station: Station) -> None:
    station.plan(BOTH)
    station.put(FILE, ONE)
    before = ever(station)
    station.put("results/z.json", answer("z"))

    assert told(*before.plans) == [(FILE, ["H1"])]
    assert told(*ever(station, answer("z")).plans) == [(FILE, ["H1"])]
    assert before.unknown == ()


def test_the_version_that_a_result_answers_goes_first(station: Station) -> None:
    """Two results of one plan, amended between them: each answers what stood before it."""
    station.plan(BOTH)
    station.put("results/a.json", answer("a"))
    station.put(FILE, changed(BOTH, hypotheses=[FIRST, changed(SECOND, outcome__variable="v3")]))
    later = answer("b", "H2")
    station.put("results/b.json", later)

    (plan,) = ever(station, answer("a"), later).plans

    variables = [each.outcome.variable for each in plan.plan.hypotheses if each.outcome is not None]
    assert variables == ["v1", "v3"]


def test_the_results_of_another_plan_are_not_those_of_this_one(station: Station) -> None:
    """Each of two plans was amended; a result froze the first version of one of them."""
    station.plan(BOTH)
    station.put("plans/other.yaml", changed(BOTH, id="other"))
    station.put("results/a.json", answer("a", plan__file="plans/other.yaml"))
    station.put(FILE, ONE)
    station.put("plans/other.yaml", changed(ONE, id="other"))

    assert told(*ever(station).plans) == [
        (FILE, ["H1"]),
        ("plans/other.yaml", ["H1", "H2"]),
    ]


def test_a_sealed_plan_that_is_taken_away_still_promises(station: Station) -> None:
    station.plan(BOTH)
    git(station.root, "rm", "-q", FILE, SEAL)
    gone = station.commit("away")

    (plan,) = ever(station).plans

    assert told(plan) == [(FILE, ["H1", "H2"])]
    assert plan.gone_since == gone
    assert told(*ever(station, include=("other/**",)).plans) == []


def test_one_that_is_missing_in_the_work_tree_alone_too(station: Station) -> None:
    station.plan(BOTH)
    (station.root / FILE).unlink()

    (plan,) = ever(station).plans

    assert (plan.path, plan.gone_since) == (FILE, None)


def test_a_draft_that_is_taken_away_promised_nothing(station: Station) -> None:
    station.plan(BOTH, sealed=False)
    git(station.root, "rm", "-q", FILE)
    station.put("plans/notes.json", {"a": 1})
    git(station.root, "rm", "-q", "plans/notes.json")
    station.commit("away")

    assert ever(station).plans == ()


def test_a_draft_that_a_result_named_was_none(station: Station) -> None:
    station.plan(BOTH, sealed=False)
    station.put("results/a.json", answer("a"))
    git(station.root, "rm", "-q", FILE, "results/a.json")
    station.commit("away")

    assert told(*ever(station).plans) == [(FILE, ["H2"])]


def test_a_study_may_be_put_away_whole(station: Station) -> None:
    """All that was promised was reported while the plan was there."""
    station.plan(BOTH)
    station.put("results/a.json", [answer("a"), answer("b", "H2", claim=...)])
    git(station.root, "rm", "-q", "-r", "plans", "results")
    station.commit("away")

    assert ever(station).plans == ()


def test_a_record_need_not_name_the_only_hypothesis(station: Station) -> None:
    station.plan(ONE)
    station.put("results/a.json", answer("a", None))
    git(station.root, "rm", "-q", "-r", "plans", "results")
    station.commit("away")

    assert ever(station).plans == ()


def test_a_plan_that_is_moved_is_the_same_one(station: Station) -> None:
    """As it was, or with a change on the way: its id is that of a plan that is there."""
    station.plan(BOTH)
    git(station.root, "mv", FILE, "plans/moved.yaml")
    moved = station.commit("move")
    assert told(*ever(station).plans) == [("plans/moved.yaml", ["H1", "H2"])]

    git(station.root, "rm", "-q", "plans/moved.yaml")
    station.put("plans/again.yaml", changed(BOTH, title="Other words"))
    assert told(*ever(station).plans) == [("plans/again.yaml", ["H1", "H2"])]

    git(station.root, "rm", "-q", "plans/again.yaml")
    station.commit("away")
    assert [path for path, _ in told(*ever(station).plans)] == []
    assert len(moved) == 40


def test_a_plan_that_came_after_its_first_result(station: Station) -> None:
    """It promised nothing to that result, and counts as it first was."""
    station.put("results/a.json", answer("a"))
    station.plan(BOTH)
    station.put(FILE, ONE)

    assert told(*ever(station).plans) == [(FILE, ["H1", "H2"])]


def test_a_result_that_names_a_plan_which_never_was(station: Station) -> None:
    station.put("results/a.json", answer("a"))
    station.write(FILE, BOTH)

    assert told(*ever(station).plans) == [(FILE, ["H1", "H2"])]


def test_outside_of_a_repository_a_plan_is_what_it_says(station: Station) -> None:
    station.write(FILE, BOTH)
    here, _ = plans_in_tree(station.root, ["plans/**"])

    found = promised_ever(station.root, None, station.settings, here, [])

    assert (told(*found.plans), found.unknown) == ([(FILE, ["H1", "H2"])], ())


def test_where_the_history_is_cut_it_is_not_known(station: Station, tmp_path: Path) -> None:
    station.plan(BOTH)
    station.put(FILE, ONE)
    head = station.put(DATA, "1\n")
    shallow = clone(station, tmp_path / "shallow", "--depth=1", "-o", "field")

    found = ever(shallow)

    assert told(*found.plans) == [(FILE, ["H1"])]
    (unknown,) = found.unknown
    assert unknown.at.is_whole_tree
    assert unknown.message == (
        f"what plans promised earlier is not known, as the history in this clone is cut at {head[:12]}"
    )
    assert unknown.advice == "run `git fetch --unshallow field`"


def test_where_contents_are_not_here_it_is_not_known(station: Station, tmp_path: Path) -> None:
    station.plan(BOTH)
    station.put(FILE, ONE)
    git(station.root, "config", "uploadpack.allowFilter", "true")
    partial = clone(station, tmp_path / "partial", "--filter=blob:none", "-o", "field")

    (unknown,) = ever(partial).unknown

    assert unknown.message == (
        "what plans promised earlier is not known, as an earlier file is not in this clone, a partial one"
    )
    assert unknown.advice == "run `git fetch --refetch --no-filter field`, or clone without --filter"
