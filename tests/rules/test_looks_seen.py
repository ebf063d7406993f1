"""Rule `looks` where the history was asked: what it shows counts as much as what the record tells."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from promising import FILE, deviation, planned, promise
from support import POLICY, Document, changed, drainage, write_tree

from gatecheck.columns import columns_of
from gatecheck.evidence import weigh_columns
from gatecheck.model.looks_seen import Ancestry, Change, LooksSeen, Seen
from gatecheck.model.promise import Promise
from gatecheck.model.record import Look, Record
from gatecheck.model.verdict import Finding
from gatecheck.policies import read_own_policy
from gatecheck.rules import rule_named
from gatecheck.rules.engine import judge_all
from gatecheck.rules.rule import Table
from gatecheck.scan import scan

DAY = 86_400
WHOLE_PLAN: Document = {"number": 5, "planned": 5, "boundary": "obrien-fleming"}
WHY = "How many looks were taken is not known (history cut at 0123456789ab)."


def record_of(folder: Path, p: float, look: Document | None, **changes: object) -> Record:
    """Write one claim below `folder`, and return it as it is read."""
    made = drainage(test={"name": "z", "statistic": "z", "p": p}, estimate=..., look=look or ..., **changes)
    folder.mkdir(exist_ok=True)
    write_tree(folder, made, policy=None)
    (found,) = scan(folder, ["**"], []).found
    return found.record


def seen(record: Record, *looks: Look | None) -> LooksSeen:
    """What a history shows: a result for each of `looks`, the last of them in the judged tree."""
    results = [
        Seen(
            None if number == len(looks) else f"{number:x}" * 40,
            None if number == len(looks) else number * DAY,
            replace(record, look=look),
            20.0 * number,
            "look",
        )
        for number, look in enumerate(looks, 1)
    ]
    return LooksSeen(tuple(results))


def cut(shown: LooksSeen) -> LooksSeen:
    """The same where the history is cut."""
    return replace(shown, known=False, why=WHY, advice="run it")


def judged(folder: Path, *shown: LooksSeen | None, promised: Promise | None = None) -> Finding | None:
    """What the rule says of the record below `folder`, in full, if it concerns it."""
    policy, _ = read_own_policy(changed(POLICY, rules={"looks": {}}))
    assert policy is not None
    found = scan(folder, ["**"], []).found
    applied = tuple(policy.for_record(one.record, one.at.path) for one in found)
    columns = columns_of(found)
    evidence = weigh_columns(columns, [each.evidence for each in applied])
    table = Table(columns, evidence, (), applied, promises=(promised,), looks_seen=tuple(shown))
    ((*findings,),) = judge_all([rule_named("looks")], table, explain=frozenset([0]))
    return findings[0] if findings else None


def test_looks_that_the_record_does_not_tell_make_it_fall_short(tmp_path: Path) -> None:
    """Five looks at .05 have a type I error of .142 (Armitage, McPherson and Rowe 1969); Pocock: .0158."""
    record = record_of(tmp_path, 0.031, None)

    finding = judged(tmp_path, seen(record, *[None] * 5))

    assert finding is not None
    assert finding.outcome == "short"
    assert finding.message == (
        "p = 0.031 (z, 18 + 18 plots) was found at look 5, as the history shows (5 looks: 111111111111 of "
        "1970-01-02, 222222222222 of 1970-01-03, 333333333333 of 1970-01-04, 444444444444 of 1970-01-05, the "
        "judged tree), without a boundary that was planned: 5 unadjusted looks at 0.05 have a real type I error of "
        "0.142; the policy wants looks planned with their boundary."
    )
    assert finding.remedy.startswith(
        "For orientation: a Pocock boundary over 5 looks would have been 0.0158 at each"
    )


def test_many_looks_are_counted_and_not_all_named(tmp_path: Path) -> None:
    record = record_of(tmp_path, 0.031, None)
    shown = seen(record, *[None] * 8)
    shown = replace(shown, results=(replace(shown.results[0], on_line=False), *shown.results[1:]))

    finding = judged(tmp_path, shown)

    assert finding is not None
    assert "8 looks: 111111111111 of 1970-01-02, off the main line, 2222" in finding.message
    assert "555555555555 of 1970-01-06 and 3 more)" in finding.message


def test_other_results_than_looks_do_not_count(tmp_path: Path) -> None:
    record = record_of(tmp_path, 0.031, None)
    changes: tuple[Change, ...] = ("look", "other", "smaller")
    results = tuple(Seen("a" * 40, 0, record, 20.0, change) for change in changes)

    assert judged(tmp_path, LooksSeen(results)) is None


@pytest.mark.parametrize(("p", "outcome"), [(0.031, "met"), (0.0415, "short")])
def test_as_many_looks_as_planned_are_judged_by_the_boundary(tmp_path: Path, p: float, outcome: str) -> None:
    """O'Brien-Fleming's nominal p at the last of five looks is .0413 (Jennison and Turnbull 2000, recomputed)."""
    record = record_of(tmp_path, p, WHOLE_PLAN)
    looks = [Look(number, 5, boundary="obrien-fleming") for number in range(1, 6)]

    finding = judged(tmp_path, seen(record, *looks))

    assert finding is not None
    assert finding.outcome == outcome
    assert finding.limit == pytest.approx(0.0413, abs=6e-5)
    assert "at look 5 of 5 is " in finding.message
    assert "The history shows 5 looks: 111111111111 of 1970-01-02, " in finding.message


@pytest.mark.parametrize(("number", "shown", "judged_at"), [(2, 3, 3), (4, 3, 4), (3, 3, 3)])
def test_the_greater_number_counts(tmp_path: Path, number: int, shown: int, judged_at: int) -> None:
    """O'Brien-Fleming's nominal p rises from look to look: .0000051, .0013, .0084, .0226, .0413 (recomputed)."""
    record = record_of(tmp_path, 0.001, {**WHOLE_PLAN, "number": number})
    looks = [Look(1, 5, boundary="obrien-fleming")] * shown

    finding = judged(tmp_path, seen(record, *looks))

    assert finding is not None
    limits = {3: 0.00843, 4: 0.02256}
    assert finding.outcome == "met"
    assert finding.limit == pytest.approx(limits[judged_at], abs=6e-5)
    assert f"at look {judged_at} of 5 is within" in finding.message


def test_more_looks_than_planned_fall_short(tmp_path: Path) -> None:
    plan = {"number": 2, "planned": 2, "boundary": "pocock"}
    record = record_of(tmp_path, 0.001, plan)

    finding = judged(tmp_path, seen(record, *[Look(1, 2, boundary="pocock")] * 3))

    assert finding is not None
    assert finding.outcome == "short"
    assert "was found at look 3, as the history shows (3 looks:" in finding.message
    assert "beyond the 2 that were planned: 3 unadjusted looks at 0.05 have a real type I error of 0.107" in (
        finding.message
    )


@pytest.mark.parametrize(
    "first", [None, Look(1), Look(1, 4, boundary="obrien-fleming"), Look(1, 5, boundary="pocock")]
)
def test_a_boundary_that_the_first_look_did_not_tell_is_chosen_after_the_fact(
    tmp_path: Path, first: Look | None
) -> None:
    record = record_of(tmp_path, 0.031, WHOLE_PLAN)

    finding = judged(tmp_path, seen(record, first, *[record.look] * 4))

    assert finding is not None
    assert finding.outcome == "short"
    assert "with a boundary that its first look did not tell: 5 unadjusted looks" in finding.message


PLANNED: Document = {"file": FILE, "hypothesis": "H1"}
FIVE = {"planned": 5, "boundary": "obrien-fleming"}


def registered(looks: Document | None = FIVE, **values: object) -> Promise:
    """What a plan promises that was committed before the data, unless `values` say otherwise."""
    return promise(planned(looks=looks), **values)


@pytest.mark.parametrize("look", [WHOLE_PLAN, {"number": 5}, None])
def test_a_registration_sets_the_boundary_whether_or_not_the_record_repeats_it(
    tmp_path: Path, look: Document | None
) -> None:
    record = record_of(tmp_path, 0.031, look, plan=PLANNED)

    finding = judged(tmp_path, seen(record, None, *[record.look] * 4), promised=registered())

    assert finding is not None
    assert finding.outcome == "met"
    assert "is within the nominal 0.0413 of the obrien-fleming boundary that plans/drainage.yaml sets." in (
        finding.message
    )


@pytest.mark.parametrize("promised", [
    registered(None),
    Promise(FILE, "H9", planned(), missing="plans/drainage.yaml has no hypothesis 'H9'"),
    None,
])  # fmt: skip
def test_a_plan_that_promises_no_looks_makes_no_late_boundary_a_planned_one(
    tmp_path: Path, promised: Promise | None
) -> None:
    record = record_of(tmp_path, 0.031, WHOLE_PLAN, plan=PLANNED)

    finding = judged(tmp_path, seen(record, None, *[record.look] * 4), promised=promised)

    assert finding is not None
    assert finding.outcome == "short"
    assert "with a boundary that its first look did not tell: 5 unadjusted looks" in finding.message


def test_a_promise_goes_before_what_the_record_tells(tmp_path: Path) -> None:
    """Pocock's nominal p over five looks is .0158, O'Brien-Fleming's at the last .0413 (recomputed)."""
    record = record_of(tmp_path, 0.031, WHOLE_PLAN, plan=PLANNED)
    shown = seen(record, *[Look(1, 5, boundary="obrien-fleming")] * 5)

    finding = judged(tmp_path, shown, promised=registered({"planned": 5, "boundary": "pocock"}))

    assert finding is not None
    assert finding.outcome == "short"
    assert "is above the nominal 0.0158 of the pocock boundary that plans/drainage.yaml sets." in finding.message


@pytest.mark.parametrize(("known", "outcome"), [
    ("before-data", "met"), ("before-results", "met"), ("after-results", "short"),
])  # fmt: skip
def test_an_amendment_that_the_first_look_told_holds(tmp_path: Path, known: str, outcome: str) -> None:
    record = record_of(tmp_path, 0.031, WHOLE_PLAN, plan=PLANNED, deviations=[deviation("looks.boundary", known)])
    shown = seen(record, *[Look(1, 5, boundary="obrien-fleming")] * 5)

    finding = judged(tmp_path, shown, promised=registered({"planned": 5, "boundary": "pocock"}))

    assert finding is not None
    assert finding.outcome == outcome


def test_a_plan_may_leave_the_boundary_to_the_first_look(tmp_path: Path) -> None:
    record = record_of(tmp_path, 0.031, WHOLE_PLAN, plan=PLANNED)

    finding = judged(
        tmp_path, seen(record, *[Look(1, 5, boundary="obrien-fleming")] * 5), promised=registered({"planned": 5})
    )

    assert finding is not None
    assert finding.outcome == "met"
    assert "of the obrien-fleming boundary that its first look told." in finding.message


def test_a_plan_without_a_boundary_plans_none(tmp_path: Path) -> None:
    record = record_of(tmp_path, 0.031, None, plan=PLANNED)

    finding = judged(tmp_path, seen(record, *[None] * 5), promised=registered({"planned": 5}))

    assert finding is not None
    assert finding.outcome == "short"
    assert "without a boundary that was planned: 5 unadjusted looks" in finding.message


def test_more_looks_than_the_plan_promises_fall_short(tmp_path: Path) -> None:
    record = record_of(tmp_path, 0.001, None, plan=PLANNED)

    finding = judged(tmp_path, seen(record, *[None] * 5), promised=registered({**FIVE, "planned": 3}))

    assert finding is not None
    assert finding.outcome == "short"
    assert "beyond the 3 that were planned" in finding.message


FIRST, SECOND, THIRD = ("1" * 40, "2" * 40, "3" * 40)
LINE = Ancestry({FIRST: (), SECOND: (FIRST,), THIRD: (SECOND,), "f" * 40: (FIRST, SECOND)})
SELF_DECLARED: dict[str, Any] = {"grade": "self-declared", "because": "they came together.", "advice": "seal it"}


@pytest.mark.parametrize(("frozen", "outcome"), [
    (FIRST, "met"),  # with the first look, whose own word would do as well
    (SECOND, "short"),
    ("f" * 40, "short"),  # it merges the second look, and the first stood there before
])  # fmt: skip
def test_a_plan_that_came_after_the_first_look_sets_no_boundary(tmp_path: Path, frozen: str, outcome: str) -> None:
    record = record_of(tmp_path, 0.031, None, plan=PLANNED)
    shown = replace(seen(record, *[None] * 5), ancestry=LINE)

    finding = judged(tmp_path, shown, promised=registered(frozen_at=frozen, **SELF_DECLARED))

    assert finding is not None
    assert finding.outcome == outcome
    late = "with a boundary that plans/drainage.yaml set only after the first look: 5 unadjusted looks"
    assert (late in finding.message) == (outcome == "short")


@pytest.mark.parametrize("frozen", [None, "9" * 40])
def test_where_the_order_of_plan_and_first_look_is_not_shown_its_grade_decides(
    tmp_path: Path, frozen: str | None
) -> None:
    record = record_of(tmp_path, 0.031, None, plan=PLANNED)
    shown = replace(seen(record, *[None] * 5), ancestry=LINE)

    sealed = judged(tmp_path, shown, promised=registered(frozen_at=frozen))
    at_least = registered(frozen_at=frozen, grade=None, at_least="repository-order")
    unsealed = judged(tmp_path, shown, promised=registered(frozen_at=frozen, **SELF_DECLARED))

    assert sealed is not None
    assert sealed.outcome == "met"
    assert getattr(judged(tmp_path, shown, promised=at_least), "outcome", "") == "met"
    assert unsealed is not None
    assert (unsealed.outcome, unsealed.message, unsealed.remedy) == (
        "undecided",
        "Whether plans/drainage.yaml set its looks before the first one is not known (they came together).",
        "Seal it.",
    )


def test_what_the_first_look_told_holds_beside_a_plan_that_came_late(tmp_path: Path) -> None:
    record = record_of(tmp_path, 0.031, WHOLE_PLAN, plan=PLANNED)
    shown = replace(seen(record, *[Look(1, 5, boundary="obrien-fleming")] * 5), ancestry=LINE)
    late = registered({"planned": 5, "boundary": "pocock"}, frozen_at=SECOND, **SELF_DECLARED)

    finding = judged(tmp_path, shown, promised=late)

    assert finding is not None
    assert finding.outcome == "met"
    assert "boundary that its first look told." in finding.message


@pytest.mark.parametrize("look", [WHOLE_PLAN, None])
def test_a_promise_that_is_not_known_decides_nothing(tmp_path: Path, look: Document | None) -> None:
    record = record_of(tmp_path, 0.0000001, look, plan=PLANNED)
    shown = seen(record, *[record.look and Look(1, 5, boundary="obrien-fleming")] * 5)

    finding = judged(tmp_path, shown, promised=Promise(FILE, "H1"))

    assert finding is not None
    assert (finding.outcome, finding.message, finding.remedy) == (
        "undecided",
        "What plans/drainage.yaml promised is not known.",
        "Judge a clone that holds the whole history.",
    )


@pytest.mark.parametrize("history", [True, False])
def test_a_record_that_does_not_tell_its_look_is_not_judged_as_the_first(tmp_path: Path, history: bool) -> None:
    record = record_of(tmp_path, 0.0000001, None, plan=PLANNED)

    finding = judged(tmp_path, *[seen(record, None)] if history else [None], promised=registered())

    assert finding is not None
    assert (finding.outcome, finding.message, finding.remedy) == (
        "undecided",
        "The record does not tell at which of the 5 looks that were planned it was taken.",
        "Give look.number.",
    )


@pytest.mark.parametrize(("p", "outcome"), [(0.031, "undecided"), (0.2, "short")])
def test_a_last_look_alone_does_not_show_that_its_boundary_was_planned(
    tmp_path: Path, p: float, outcome: str
) -> None:
    """As a squash leaves it; above the limit of O'Brien-Fleming, .0413, it falls short whenever that was set."""
    record = record_of(tmp_path, p, WHOLE_PLAN)

    finding = judged(tmp_path, seen(record, record.look))

    assert finding is not None
    assert finding.outcome == outcome
    if outcome == "undecided":
        assert finding.message == (
            "The first result that the history shows is by its own word from look 5, so whether its boundary was "
            "planned before look 1 is not known."
        )
        assert finding.remedy.startswith(
            "Name under plan the registration that sets the boundary, or judge a history"
        )


def test_a_registration_shows_it_in_place_of_the_history(tmp_path: Path) -> None:
    record = record_of(tmp_path, 0.031, WHOLE_PLAN, plan=PLANNED)

    finding = judged(tmp_path, seen(record, record.look), promised=registered())

    assert finding is not None
    assert finding.outcome == "met"


ONE_SIDED: Document = {"sides": 1, "tail": "greater"}
UNEVEN = ", with information as 20 : 22 : 24 : 26 : 100,"


@pytest.mark.parametrize(
    ("test", "sizes", "looks", "error"),
    # Recomputed by scipy.stats.multivariate_normal in tests/compare/test_looks_facts.py.
    [
        ({}, (20, 22, 24, 26, 100), f"looks at 0.05{UNEVEN}", "0.121"),
        (ONE_SIDED, (20, 40, 60, 80, 100), "one-sided looks at 0.05", "0.13"),
        ({**ONE_SIDED, "alpha": 0.025}, (20, 40, 60, 80, 100), "one-sided looks at 0.025", "0.0709"),
        ({}, (20, 40, None, 80, 100), "looks at 0.05", "0.142"),
    ],
)
def test_the_cost_of_looks_is_by_sides_and_units(
    tmp_path: Path, test: Document, sizes: tuple[float | None, ...], looks: str, error: str
) -> None:
    record = record_of(tmp_path, 0.015, None)
    write_tree(
        tmp_path, drainage(test={"name": "z", "statistic": "z", "p": 0.015, **test}, estimate=...), policy=None
    )
    results = tuple(replace(one, size=n) for one, n in zip(seen(record, *[None] * 5).results, sizes, strict=True))

    finding = judged(tmp_path, LooksSeen(results))

    assert finding is not None
    assert f": 5 unadjusted {looks} have a real type I error of {error};" in finding.message


def test_looks_that_stand_too_close_give_the_least_error(tmp_path: Path) -> None:
    """Two looks at 4999 and 5000 of 10000 units count as one: .0831 or more, and Pocock's level .0294 or less."""
    record = record_of(tmp_path, 0.015, None)
    results = tuple(
        replace(one, size=n) for one, n in zip(seen(record, *[None] * 3).results, (4999, 5000, 10000), strict=True)
    )

    finding = judged(tmp_path, LooksSeen(results))

    assert finding is not None
    told = "3 unadjusted looks at 0.05, with information as 4999 : 5000 : 10000, have a real type I error of"
    assert f"{told} at least 0.0831;" in finding.message
    assert "a Pocock boundary over 3 looks would have been at most 0.0294 at each" in finding.remedy


def test_a_safety_outcome_pays_no_penalty_for_looks(tmp_path: Path) -> None:
    record = record_of(tmp_path, 0.031, None, harm=True)

    finding = judged(tmp_path, cut(seen(record, *[None] * 5)))

    assert finding is not None
    assert (finding.outcome, finding.message) == (
        "does-not-apply",
        "A safety outcome: no penalty for several looks is put on reporting a possible harm.",
    )


@pytest.mark.parametrize("look", [None, {"number": 1}, {"number": 1, "planned": 1}, WHOLE_PLAN])
def test_a_history_that_is_not_known_never_passes(tmp_path: Path, look: Document | None) -> None:
    record = record_of(tmp_path, 0.0001, look)

    finding = judged(tmp_path, cut(seen(record, record.look)))

    assert finding is not None
    assert (finding.outcome, finding.message, finding.remedy) == ("undecided", WHY, "Run it.")


def test_looks_that_are_known_suffice_to_fall_short(tmp_path: Path) -> None:
    record = record_of(tmp_path, 0.0001, None)

    finding = judged(tmp_path, cut(seen(record, None, None)))

    assert finding is not None
    assert finding.outcome == "short"
    assert "as the history shows (at least 2 looks: 1" in finding.message


def test_a_p_above_the_boundary_falls_short_whatever_the_history(tmp_path: Path) -> None:
    record = record_of(tmp_path, 0.2, WHOLE_PLAN)

    finding = judged(tmp_path, cut(seen(record, record.look)))

    assert finding is not None
    assert finding.outcome == "short"
    assert "The history shows at least one look: the judged tree." in finding.message


def test_one_look_is_none_of_its_business(tmp_path: Path) -> None:
    record = record_of(tmp_path, 0.0001, None)

    assert judged(tmp_path, seen(record, None)) is None
    assert judged(tmp_path, LooksSeen(())) is None


def test_without_a_repository_only_what_the_record_tells_counts(tmp_path: Path) -> None:
    record_of(tmp_path, 0.031, WHOLE_PLAN)

    finding = judged(tmp_path, None)

    assert finding is not None
    assert finding.outcome == "met"
    assert finding.message.endswith(
        "The folder is in no git repository, so only the look that the record tells counts."
    )


def test_where_the_history_was_not_asked_nothing_is_said_of_it(tmp_path: Path) -> None:
    record_of(tmp_path, 0.031, WHOLE_PLAN)

    finding = judged(tmp_path)

    assert finding is not None
    assert finding.message.endswith(
        "is within the nominal 0.0413 of the obrien-fleming boundary that the record tells."
    )


def test_a_boundary_without_a_look_in_the_history_is_not_late(tmp_path: Path) -> None:
    record = record_of(tmp_path, 0.000001, {**WHOLE_PLAN, "number": 1})

    finding = judged(tmp_path, replace(seen(record, record.look), results=()))

    assert finding is not None
    assert finding.outcome == "met"
