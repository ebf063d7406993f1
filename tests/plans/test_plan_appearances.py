"""Where a result was first recorded, under whatever path, and what that says of the plan that it names."""

from __future__ import annotations

import json
from pathlib import Path

from plans.planting import DATA, FILE, PLAN, RESULT, Station, clone, found_of, record
from support import changed, drainage, git

from gatecheck.plans.appearances import appearances
from gatecheck.plans.promise import promises

OLD = "results/old.json"
ALONE = record(provenance=...)


def firsts(station: Station, *documents: dict[str, object], exclude: tuple[str, ...] = ()) -> list[object]:
    """Where each record was first."""
    found = [found_of(each) for each in documents]
    return list(appearances(station.root, station.history(), found, ["**"], exclude).firsts)


def test_a_record_that_was_in_another_file_before_the_plan(station: Station) -> None:
    """It moved to a file of its own once the plan was sealed: the same id, the same result."""
    first = station.put(OLD, drainage())
    sealed = station.plan()
    git(station.root, "rm", "-q", OLD)
    station.result(ALONE)

    promise = station.promise(ALONE)

    assert promise.grade == "none"
    assert promise.because == f"the plan was first committed in {sealed[:12]}, after {first[:12]} added {OLD}"
    assert firsts(station, ALONE, drainage()) == [(1, OLD), None]


def test_its_numbers_need_not_be_the_same(station: Station) -> None:
    """What was first is the first result under the id, not the first of these numbers."""
    station.put(OLD, [drainage(id="another"), drainage(test__value=2.0, test__p="0.054")])
    station.plan()
    station.put(OLD, [drainage(id="another")])
    station.result(ALONE)

    assert station.promise(ALONE).grade == "none"


def test_an_earlier_id_that_the_record_names(station: Station) -> None:
    station.put(OLD, drainage(id="worms/first"))
    station.plan()
    git(station.root, "rm", "-q", OLD)
    renamed = changed(ALONE, aliases=["worms/first"])
    station.result(renamed)

    assert station.promise(renamed).grade == "none"
    assert station.promise(changed(ALONE, id="another")).grade == "repository-order"


def test_a_file_that_names_it_and_cannot_be_read(station: Station) -> None:
    """That it cannot be read does not show that it held nothing."""
    first = station.put(OLD, json.dumps(drainage())[:-9])
    station.plan()
    git(station.root, "rm", "-q", OLD)
    station.result(ALONE)

    assert f"after {first[:12]} added {OLD}" in station.promise(ALONE).because
    assert station.promise(changed(ALONE, id="another")).grade == "repository-order"


def test_an_example_that_the_policy_leaves_out_is_no_result(station: Station) -> None:
    station.put("examples/drainage.json", drainage())
    station.plan()
    station.result(ALONE)

    assert firsts(station, ALONE, exclude=("examples/**",)) == [(3, RESULT)]
    found = [found_of(ALONE)]
    (promise,) = promises(
        station.root, found, station.history(), station.settings, exclude=("examples/**",)
    ).promises
    assert promise is not None
    assert promise.grade == "repository-order"


def test_a_deferred_slot_is_filled_before_the_first_result_in_any_file(station: Station) -> None:
    opened = changed(PLAN, hypotheses=[{"id": "H1", "text": "To be chosen after the pilot.", "deferred": True}])
    station.plan(opened)
    station.put(OLD, drainage())
    station.put(
        FILE, changed(opened, hypotheses=[{**opened["hypotheses"][0], "sides": 1, "direction": "increase"}])
    )
    git(station.root, "rm", "-q", OLD)
    station.result(ALONE)

    promise = station.promise(ALONE)

    assert promise.hypothesis is not None
    assert promise.hypothesis.sides is None


def test_a_plan_that_no_data_is_held_against_says_so(station: Station) -> None:
    """Data that the record does not name may have been there before the plan."""
    station.data()
    sealed = station.plan()
    result = station.result(ALONE)

    because = station.promise(ALONE).because

    assert because == (
        f"sealed in {sealed[:12]} on the base's first-parent line, before {result[:12]} first added {RESULT} (none "
        "of its data are in that history, so when they came is not shown); holds unless someone with the right to "
        "push rewrote that branch"
    )


def test_a_plan_whose_data_are_in_the_history_does_not(station: Station) -> None:
    station.plan()
    station.data()
    station.result()

    assert "none of its data" not in station.promise().because
    assert f"first added {DATA};" in station.promise().because


def test_in_a_partial_clone_the_first_appearance_is_not_known(station: Station, tmp_path: Path) -> None:
    station.put(OLD, drainage(test__p="0.0339"))
    station.plan()
    git(station.root, "rm", "-q", OLD)
    station.result(ALONE)
    git(station.root, "config", "uploadpack.allowFilter", "true")
    partial = clone(station, tmp_path / "partial", "--filter=blob:none")

    promise = partial.promise(ALONE)

    assert (promise.grade, promise.at_least) == (None, "self-declared")
    assert promise.because == (
        "an earlier file is not in this clone, a partial one, so whether it holds the result is not known"
    )
    assert promise.advice == "run `git fetch --refetch --no-filter origin`, or clone without --filter"
