"""Rule `all-tests-recorded`: tests that code calls without a record, and claims behind which they stand."""

from __future__ import annotations

from typing import Any

import pytest
from promising import kept, model, promise, table
from support import changed, drainage

from gatecheck.columns import columns_of
from gatecheck.compare.tests_recorded import Behind
from gatecheck.model.code import CalledTest, CodeFile, CodeRead, NotRead
from gatecheck.model.found import Found
from gatecheck.model.promise import Promise
from gatecheck.model.record import Record
from gatecheck.model.verdict import Finding, Judged, Place
from gatecheck.rules.all_tests_recorded import RULE, Settings, judge_code
from gatecheck.rules.engine import judge_all
from gatecheck.rules.rule import Table

CODE = "analysis/soil.py"
BEHIND = Behind((CODE,), 1, 3, 1)


def call(name: str, line: int, **changes: Any) -> CalledTest:
    """A called t test, made once unless told otherwise."""
    given = {"cell": None, "known": 1, "more": False, "declared": False, "ids": ()} | changes
    return CalledTest(name, "t", line, **given)


def judged(*tests: CalledTest, settings: Settings | None = None, **values: Any) -> Judged:
    """The row of one file."""
    code = CodeRead((CodeFile(CODE, tests, **values),), frozenset({"t"}))
    (row,) = judge_code(code, [], Settings() if settings is None else settings)
    return row


def recorded(identifier: str) -> Found:
    """A record of a t test that names the file."""
    document = changed(drainage(id=identifier), provenance={"code": CODE})
    return Found(model(Record, document), Place("r.json"), document)


def test_tests_without_a_record_are_a_finding_at_the_first_of_them() -> None:
    tests = (
        call("stats.pearsonr", 30),
        call("stats.ttest_ind", 12),
        call("stats.pearsonr", 41),
        call("declared", 50, declared=True),
    )

    row = judged(*tests, line=12, checks=2)

    assert (row.id, row.at, row.claim, row.standing) == (CODE, Place(CODE, 12), None, "falls-short")
    assert row.result == "code, 1 of 4 hypothesis tests recorded, 2 checks of assumptions apart"
    (finding,) = row.findings
    assert (finding.rule, finding.outcome, finding.enforce) == ("all-tests-recorded", "short", "block")
    assert (finding.observed, finding.limit) == (3, 0)
    assert finding.message == (
        "No record was found for 3 of 4 hypothesis tests in this file: stats.ttest_ind (line 12), stats.pearsonr "
        "(lines 30, 41)."
    )
    assert finding.remedy == (
        "Record each, without a claim where nothing is claimed, or leave the file out (exclude of "
        "all-tests-recorded); until then they count in the family of each claim from this file."
    )


def test_loops_and_cells_are_told() -> None:
    row = judged(call("a", 2, cell=3), call("b", 5, cell=4, known=3, more=True), call("b", 1, cell=7), checks=1)

    assert row.result == "code, 0 of at least 5 hypothesis tests recorded, 1 check of assumptions apart"
    assert row.findings[0].message == (
        "No record was found for 5 of at least 5 hypothesis tests in this file: a (cell 3, line 2), b (cell 4, "
        "line 5, 3 times; cell 7, line 1)."
    )


def test_a_long_list_is_cut() -> None:
    many = [call(f"test_{number}", number) for number in range(1, 9)]
    often = [call("again", number) for number in range(20, 32)]

    assert (
        judged(*many)
        .findings[0]
        .message.endswith(
            ": test_1 (line 1), test_2 (line 2), test_3 (line 3), test_4 (line 4), test_5 (line 5) and 3 more."
        )
    )
    assert judged(*often).findings[0].message.endswith(": again (lines 20, 21, 22, 23, 24, 25, 26, 27 and 4 more).")


@pytest.mark.parametrize(("unknown", "standing"), [("note", "stands"), ("block", "undecided")])
def test_tests_whose_number_is_not_known_follow_their_own_setting(unknown: Any, standing: str) -> None:
    row = judged(call("stats.kruskal", 9, known=0, more=True), settings=Settings(unknown=unknown))

    assert (row.standing, row.result) == (standing, "code, 0 of at least 0 hypothesis tests recorded")
    assert [(each.outcome, each.message, each.remedy) for each in row.findings] == [
        (
            "undecided",
            "No record was found for stats.kruskal (line 9), and the code does not tell whether it is called.",
            "Declare results where they are made, or leave the file out (exclude of all-tests-recorded).",
        )
    ]
    two = judged(call("a", 9, known=0, more=True), call("b", 10, known=0, more=True)).findings[0]
    assert two.message.endswith("and the code does not tell whether they are called.")


def test_code_that_was_not_read_is_told_and_blocks_only_where_the_policy_says_so() -> None:
    why = "the code is not Python as this version knows it"
    row = judged(not_read=(NotRead(why, 3), NotRead(why, 2, 5)), line=3)

    assert (row.standing, row.result, row.at) == ("stands", "code, not read", Place(CODE, 3))
    assert row.findings == (
        Finding(
            "all-tests-recorded",
            "undecided",
            "note",
            message=f"Tests in this file were not counted: {why} (line 3), {why} (cell 5, line 2).",
            remedy="Mend it, or leave the file out (exclude of all-tests-recorded).",
        ),
    )
    assert judged(not_read=(NotRead(why),), settings=Settings(unknown="block")).standing == "undecided"


def test_a_policy_may_only_note() -> None:
    assert judged(call("a", 1), settings=Settings("note")).standing == "stands"


def test_code_whose_tests_are_recorded_has_no_row() -> None:
    code = CodeRead((CodeFile(CODE, (call("a", 1), call("b", 2, declared=True, ids=(("b",),)))),), frozenset({"t"}))

    assert judge_code(code, [recorded("x")], Settings()) == ()
    assert judge_code(code, [], None) == ()


def judge(record: Record, behind: Behind | None, made: Promise | None = None) -> tuple[Finding, ...]:
    """What is said of one record, told in full."""
    plain = table([record], [made], RULE.name, Settings())
    given = Table(
        columns_of(plain.columns.found),
        plain.evidence,
        plain.own_numbers,
        plain.applied,
        promises=plain.promises,
        tests_behind=(behind,),
    )
    return judge_all([RULE], given, explain=frozenset({0}))[0]


def test_unrecorded_tests_stand_behind_a_claim_without_a_family() -> None:
    (finding,) = judge(kept(family=...), BEHIND)

    assert (finding.outcome, finding.observed, finding.limit) == ("short", 4, 1)
    assert finding.message == (
        "No record was found for 3 hypothesis tests in analysis/soil.py, so at least 4 tests stand behind this "
        "claim, which names no family."
    )
    assert finding.remedy == (
        "Record the 3, without a claim where nothing is claimed, or report the claim in a family of 4 with all its "
        "members."
    )


@pytest.mark.parametrize(
    ("members", "unrecorded", "declared", "outcome"),
    [(6, 0, 6, "met"), (2, 3, 6, "met"), (4, 3, 6, "short"), (1, 1, 1, "short"), (3, 0, 2, "met")],
)
def test_a_family_must_be_as_large_as_the_tests_behind_it(
    members: int, unrecorded: int, declared: int, outcome: str
) -> None:
    (finding,) = judge(kept(), Behind((CODE,), members, unrecorded, declared))

    assert finding.outcome == outcome
    if outcome == "short":
        assert f"which declares a family of {declared}." in finding.message
    elif unrecorded == 0:
        assert finding.message == "Every hypothesis test that analysis/soil.py is known to make has a record."


def test_a_claim_whose_code_was_not_read_is_not_concerned() -> None:
    assert judge(kept(), None) == ()
    assert judge_all([RULE], table([kept()], [None], RULE.name, Settings())) == [()]


@pytest.mark.parametrize(
    ("grade", "at_least", "hypothesis", "outcome"),
    [
        ("repository-order", "none", True, "does-not-apply"),
        (None, "signed", True, "does-not-apply"),
        ("self-declared", "none", True, "short"),
        ("signed", "none", False, "short"),
    ],
)
def test_a_plan_from_before_the_data_says_what_was_to_be_tested(
    grade: Any, at_least: Any, hypothesis: bool, outcome: str
) -> None:
    made = promise(grade=grade, at_least=at_least, **({} if hypothesis else {"hypothesis": None}))

    (finding,) = judge(kept(family=...), BEHIND, made)
    assert finding.outcome == outcome


def test_no_penalty_is_put_on_a_safety_outcome() -> None:
    (finding,) = judge(kept(harm=True), BEHIND)

    assert (finding.outcome, finding.message) == (
        "does-not-apply",
        "A safety outcome: no penalty for several tests is put on reporting a possible harm.",
    )
