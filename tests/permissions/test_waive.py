"""Waivers: what they waive, and what is said of those that do not apply."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest
from permissions.permitting import RULE, SHORT, circumstances, found, waiver
from support import drainage

from gatecheck.model.verdict import Finding, Judged, Place
from gatecheck.permissions.authors import Changer
from gatecheck.permissions.waivers import Subject, waive

MET = Finding("numbers-agree", "met", "block")
WHAT = "The waiver of false-positive-risk on drainage/earthworm-biomass"


def note(finding: Finding, day: str = "2031-05-15", *changers: Changer, **changes: Any) -> str:
    """What is said of a waiver that leaves the finding as it is."""
    done = waive([(finding,)], [found()], [waiver(**changes)], circumstances(day, *changers))
    assert done.findings == ((finding,),)
    (told,) = done.notes
    return told


def test_a_waiver_changes_the_outcome_and_adds_to_the_message_alone() -> None:
    done = waive([(MET, SHORT)], [found()], [waiver()], circumstances())

    message = (
        "The risk is 17 %; the policy allows 5 %. Waived until 2031-05-31 by Bo Sample <bo@example.org>: "
        "A second season is under way."
    )
    assert done.findings == ((MET, replace(SHORT, outcome="waived", message=message)),)
    assert done.notes == ()
    assert not done.findings[0][1].blocks


def test_a_waiver_is_for_its_record_alone() -> None:
    other = found(drainage(id="other"))

    done = waive([(SHORT,), (SHORT,)], [other, found()], [waiver()], circumstances())

    assert [row[0].outcome for row in done.findings] == ["short", "waived"]


@pytest.mark.parametrize("day", ["2031-05-01", "2031-05-31"])
def test_the_first_and_the_last_day_count(day: str) -> None:
    done = waive([(SHORT,)], [found()], [waiver()], circumstances(day))

    assert done.findings[0][0].outcome == "waived"


@pytest.mark.parametrize(
    ("day", "why"), [("2031-04-30", "it begins on 2031-05-01"), ("2031-06-01", "it expired on 2031-05-31")]
)
def test_before_and_after_it_does_not_apply(day: str, why: str) -> None:
    assert note(SHORT, day) == f"{WHAT} does not apply: {why}."


def test_the_digest_may_stand_without_its_prefix() -> None:
    bare = waiver(digest=SHORT.digest.removeprefix("sha256:"))

    assert waive([(SHORT,)], [found()], [bare], circumstances()).findings[0][0].outcome == "waived"


def test_other_numbers_end_it() -> None:
    assert note(SHORT, digest=found(drainage(test__value=2.3)).permission_digest()) == (
        f"{WHAT} does not apply: the record has changed since in what the rule reads."
    )


@pytest.mark.parametrize("nobody", [None, "", "  ", "<>"])
def test_somebody_must_grant_it(nobody: str | None) -> None:
    assert note(SHORT, granted_by=nobody) == (f"{WHAT} does not apply: it says nobody in granted_by who grants it.")


@pytest.mark.parametrize(
    "granted_by",
    [
        "Ada Example",
        "ada@example.org",
        "ADA  example",
        " Ada@Example.ORG ",
        "Ada Example <other@example.org>",
        "Somebody <ada@example.org>",
        "AdaExample",
        "\uff21da Example",  # a full-width letter
    ],
)
def test_the_author_of_the_change_grants_nothing(granted_by: str) -> None:
    told = note(SHORT, granted_by=granted_by)

    assert told == f"{WHAT} does not apply: it was granted by the author of the record's change."


def test_an_author_without_a_name_is_nobody_else() -> None:
    changer = Changer("", "ada@example.org")

    done = waive([(SHORT,)], [found()], [waiver(granted_by="Bo")], circumstances("2031-05-15", changer))

    assert done.findings[0][0].outcome == "waived"


def test_without_an_author_it_does_not_apply() -> None:
    assert note(SHORT, "2031-05-15", Changer("Bo", "b"), Changer(unknown="commit it")) == (
        f"{WHAT} does not apply: who changed the record is not known here: commit it."
    )


def test_what_cannot_be_decided_is_not_waived() -> None:
    undecided = replace(SHORT, outcome="undecided")

    assert note(undecided) == (
        f"{WHAT} does not apply: the rule cannot be decided there, and only what was judged can be waived."
    )


@pytest.mark.parametrize(
    ("finding", "why"),
    [
        (replace(SHORT, outcome="met"), "the record meets the rule"),
        (replace(SHORT, outcome="does-not-apply"), "the rule does not apply to the record"),
        (replace(SHORT, enforce="note"), "the policy only notes what the rule finds there"),
        (replace(SHORT, enforce="note", outcome="undecided"), "the policy only notes what the rule finds there"),
        (MET, "the policy does not ask the rule of the record"),
    ],
)
def test_one_that_nothing_needs_is_told(finding: Finding, why: str) -> None:
    assert note(finding) == f"{WHAT} is not needed: {why}."


@pytest.mark.parametrize(
    ("changes", "told"),
    [
        (
            {"record": "drainage/earthworms"},
            "The waiver of false-positive-risk on drainage/earthworms does not apply: there is no record of that "
            "id, and no plan at that path falls short; the nearest is drainage/earthworm-biomass.",
        ),
        (
            {"record": "zzz"},
            "The waiver of false-positive-risk on zzz does not apply: there is no record of that id, and no plan "
            "at that path falls short.",
        ),
        (
            {"rule": "false-positive-rate"},
            "The waiver of false-positive-rate on drainage/earthworm-biomass does not apply: there is no rule of "
            "that name; the nearest is false-positive-risk.",
        ),
        (
            {"rule": "R33"},
            "The waiver of R33 on drainage/earthworm-biomass does not apply: there is no rule of that name.",
        ),
    ],
)
def test_names_that_nothing_has_are_told_with_the_nearest(changes: dict[str, Any], told: str) -> None:
    assert note(SHORT, **changes) == told


def test_none_of_several_authors_may_grant_it() -> None:
    """Two branches may both have brought the same numbers."""
    told = note(SHORT, "2031-05-15", Changer("Cy", "c"), Changer("Bo Sample", "other"))

    assert told == f"{WHAT} does not apply: it was granted by the author of the record's change."


def test_the_author_is_asked_for_only_where_all_else_holds() -> None:
    """Git is asked once for each waiver that would apply, and not for the others."""
    asked: list[tuple[str, str]] = []

    def changers(one: Subject, rule: str) -> tuple[Changer, ...]:
        asked.append((one.at.path, rule))
        return (Changer("Ada", "a"),)

    at = replace(circumstances(), changers=changers)
    several = [waiver(rule="numbers-agree"), waiver(until="2031-05-02"), waiver()]

    waive([(MET, SHORT)], [found()], several, at)

    assert asked == [("results/drainage.json", RULE)]
    assert RULE in at.rules


def test_one_waiver_covers_all_that_a_plan_does_not_report() -> None:
    first, second = (replace(SHORT, message=f"{name} is not reported.") for name in ("H1", "H2"))
    plan = Judged("plans/p.json", Place("plans/p.json"), None, "a plan", None, (first, second), kind="plan")
    granted = waiver(record="plans/p.json")

    done = waive([(MET,), plan.findings], [found(), plan], [granted], circumstances())
    own = waive([plan.findings], [plan], [waiver(record=plan.id, granted_by="Ada Example")], circumstances())
    other = waive([plan.findings], [plan], [waiver(record=plan.id, digest="0" * 64)], circumstances())

    assert [one.outcome for one in done.findings[1]] == ["waived", "waived"]
    assert (done.findings[0], done.notes) == ((MET,), ())
    what = "The waiver of false-positive-risk on plans/p.json does not apply"
    assert own.notes == (f"{what}: it was granted by the author of the plan's change.",)
    assert other.notes == (f"{what}: the plan has changed since in what the rule reads.",)
