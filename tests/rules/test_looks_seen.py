"""Rule `looks` where the history was asked: what it shows counts as much as what the record tells."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest
from support import POLICY, Document, changed, drainage, write_tree

from gatecheck.columns import columns_of
from gatecheck.evidence import weigh_columns
from gatecheck.model.looks_seen import Change, LooksSeen, Seen
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


def judged(folder: Path, *shown: LooksSeen | None) -> Finding | None:
    """What the rule says of the record below `folder`, in full, if it concerns it."""
    policy, _ = read_own_policy(changed(POLICY, rules={"looks": {}}))
    assert policy is not None
    found = scan(folder, ["**"], []).found
    applied = tuple(policy.for_record(one.record, one.at.path) for one in found)
    columns = columns_of(found)
    evidence = weigh_columns(columns, [each.evidence for each in applied])
    table = Table(columns, evidence, (), applied, looks_seen=tuple(shown))
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


def test_a_registration_may_tell_the_boundary_in_place_of_the_first_look(tmp_path: Path) -> None:
    record = record_of(tmp_path, 0.031, WHOLE_PLAN, plan={"file": "plan.yaml", "hypothesis": "H1"})

    finding = judged(tmp_path, seen(record, None, *[record.look] * 4))

    assert finding is not None
    assert finding.outcome == "met"


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
        "is within the nominal 0.0413 of the obrien-fleming boundary that the plan sets."
    )


def test_a_boundary_without_a_look_in_the_history_is_not_late(tmp_path: Path) -> None:
    record = record_of(tmp_path, 0.031, WHOLE_PLAN)

    finding = judged(tmp_path, replace(seen(record, record.look), results=()))

    assert finding is not None
    assert finding.outcome == "met"
