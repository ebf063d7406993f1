"""The tests that code calls against the records of a tree."""

from __future__ import annotations

from typing import Any

import pytest
from promising import model
from support import changed, drainage

from gatecheck.compare.tests_recorded import FileTests, behind_claims, recorded_tests
from gatecheck.model.code import CalledTest, CodeFile, CodeRead
from gatecheck.model.found import Found
from gatecheck.model.record import Record
from gatecheck.model.verdict import Place

CODE = "analysis/soil.py"
NAMES = frozenset({"t", "Pearson correlation", "Mann-Whitney"})


def call(test: str | None = "t", line: int = 3, **changes: Any) -> CalledTest:
    """A called test, made once unless told otherwise."""
    given: dict[str, Any] = {"known": 1, "more": False, "declared": False, "ids": ()} | changes
    return CalledTest("stats.test", test, line, None, **given)


def read(*tests: CalledTest, path: str = CODE) -> CodeRead:
    """The code of one file with these tests."""
    return CodeRead((CodeFile(path, tests),), NAMES)


def found(identifier: str, code: str | None = CODE, at: str = "results/a.json", **changes: Any) -> Found:
    """A record that names the code that made it."""
    document = drainage(id=identifier, **changes)
    document = changed(document, provenance={"code": code}) if code else document
    return Found(model(Record, document), Place(at), document)


def file_tests(tests: list[CalledTest], records: list[Found]) -> FileTests:
    """The tests of one file against these records."""
    (one,) = recorded_tests(records, read(*tests))
    return one


def missing(tests: list[CalledTest], *records: Found) -> list[tuple[int, int]]:
    """The lines of what has no record, and how often."""
    return [(each.test.line, each.times) for each in file_tests(tests, list(records)).missing]


def test_without_records_every_known_test_is_missing() -> None:
    one = file_tests([call(), call(line=5, known=3), call(line=7, known=0, more=True), call(declared=True)], [])

    assert [(each.test.line, each.times) for each in one.missing] == [(3, 1), (5, 3)]
    assert [(each.test.line, each.times) for each in one.unsure] == [(7, 0)]
    assert (one.made, one.more, one.without_record) == (5, True, 4)


@pytest.mark.parametrize(
    ("name", "test", "fits"),
    [
        ("Welch t-test", "t", True),
        ("Pearson correlation", "t", False),
        ("comparison of means", "t", True),
        (None, "t", True),
        ("Pearson correlation", None, True),
        ("Mann-Whitney U", "Mann-Whitney", True),
    ],
)
def test_a_record_that_names_the_file_stands_for_one_test(name: str | None, test: str | None, fits: bool) -> None:
    record = found("a", test__name=... if name is None else name)

    assert missing([call(test)], record) == ([] if fits else [(3, 1)])
    assert missing([call(test, known=2)], record) == [(3, 1 if fits else 2)]


def test_a_record_without_a_test_may_be_that_of_any() -> None:
    assert missing([call()], found("a", test=...)) == []


def test_a_record_goes_first_to_the_test_of_its_name() -> None:
    tests = [call("Pearson correlation", 1), call("t", 2)]

    assert missing(tests, found("a", test__name="two-sample t")) == [(1, 1)]
    assert missing(tests, found("a", test__name="something")) == [(2, 1)]


@pytest.mark.parametrize(
    ("code", "at", "named"),
    [
        (CODE, "r.json", True),
        ("./analysis/soil.py", "r.json", True),
        ("analysis\\soil.py", "r.json", True),
        ("soil.py", "r.json", True),
        ("station/analysis/soil.py", "r.json", True),
        ("other/soil.py", "r.json", False),
        ("analysis/topsoil.py", "r.json", False),
        (None, "r.json", False),
        (None, CODE, True),
    ],
)
def test_what_names_the_file(code: str | None, at: str, named: bool) -> None:
    assert missing([call()], found("a", code, at)) == ([] if named else [(3, 1)])


def test_a_path_in_full_names_no_other_file() -> None:
    code = CodeRead((CodeFile("a/soil.py", (call(),)), CodeFile("soil.py", (call(),))), NAMES)

    assert [one.without_record for one in recorded_tests([found("x", "soil.py")], code)] == [1, 0]


def test_records_of_declared_tests_stand_for_no_other() -> None:
    by_id = call(declared=True, ids=(("soil/a",), ("soil/", "/b", "")))
    other = call(line=9)

    assert missing([by_id, other], found("soil/a"), found("soil/x/b2")) == [(9, 1)]
    assert missing([by_id, other], found("soil/a"), found("soil/ab")) == []
    assert missing([by_id, other], found("other/x/b2"), found("soil/x")) == []
    ends = call(declared=True, ids=(("soil/", "/b"),))
    assert missing([ends, other], found("soil/x/b")) == [(9, 1)]
    assert missing([ends, other], found("soil/b")) == []
    assert missing([ends, other], found("soil/x")) == []


def test_declared_tests_without_an_id_account_for_as_many_records_as_they_are() -> None:
    loop = call(declared=True, known=2)

    assert missing([loop, call(line=9)], found("a"), found("b")) == [(9, 1)]
    assert missing([loop, call(line=9)], found("a"), found("b"), found("c")) == []
    assert missing([call(None, declared=True), call(line=9)], found("a", test__name="regression")) == [(9, 1)]
    assert missing([call(declared=True), call("Mann-Whitney", 9)], found("a", test__name="rank-sum")) == []


def test_a_call_of_unknown_number_needs_one_record() -> None:
    one = file_tests([call(known=0, more=True)], [found("a")])

    assert (one.unsure, one.missing) == ((), ())
    assert missing([call(more=True)], found("a")) == []
    assert missing([call(declared=True)], found("a")) == []


def test_how_many_tests_stand_behind_a_claim() -> None:
    family = {"name": "growth", "size": 4}
    records = [
        found("alone"),
        found("member", family=family),
        found("other", None, family=family),
        found("unsized", family={"name": "small"}),
        found("nothing-claimed", claim=...),
        found("elsewhere", "b.py"),
    ]
    code = read(call(line=1, known=9), call("Mann-Whitney", 2, known=0, more=True))

    behind = behind_claims(records, code)

    told = [each and (each.paths, each.members, each.unrecorded, each.declared, each.tests) for each in behind]
    assert told == [
        ((CODE,), 1, 5, 1, 6),
        ((CODE,), 2, 5, 4, 7),
        None,
        ((CODE,), 1, 5, 1, 6),
        None,
        None,
    ]
