"""The report of tests in two dialects: the published schema, what its readers take from it, and the budget."""

from __future__ import annotations

import hashlib
import re
from collections.abc import Callable
from pathlib import Path
from xml.etree import ElementTree as ET

import pytest
import xmlschema
from render.junit_schema import SCHEMA, SCHEMA_FILE
from render.sample_verdicts import BOTH, BROKEN, BY_NAME, CANNOT_JUDGE, FALLS_SHORT, POLICY, ROWS, STANDS

from gatecheck.model.verdict import Finding, Judged, Place, Problem, Verdict
from gatecheck.render import RENDERERS
from gatecheck.render.junit import BUDGET, junit, junit_strict

EXPECTED = Path(__file__).parent / "expected"
DIALECTS = ["junit", "junit-strict"]


def suite_of(text: str) -> ET.Element:
    return ET.fromstring(text.encode())[0]  # noqa: S314  # our own text


def cases_of(text: str) -> list[ET.Element]:
    return suite_of(text).findall("testcase")


def record(name: str, *findings: Finding, counts_now: bool = True) -> Judged:
    return Judged(name, Place(f"{name}.json", 2), "c", "t = 2", None, findings, (), counts_now)


SHORT = Finding("fresh", "short", "block", message="old")


@pytest.mark.parametrize("dialect", DIALECTS)
@pytest.mark.parametrize("name", BY_NAME)
def test_whole_text(name: str, dialect: str) -> None:
    expected = (EXPECTED / f"{dialect}-{name}.xml").read_text(encoding="utf-8")
    assert RENDERERS[dialect](BY_NAME[name]) == expected


def test_the_schema_is_the_published_one() -> None:
    """Byte by byte the one of the plug-in, by its digest."""
    assert hashlib.sha256(SCHEMA_FILE.read_bytes()).hexdigest() == (
        "a1a816f58d1bf95ebabf371994df0b9246dee66ea9572fbec4f9296f1b2c0ff6"
    )


@pytest.mark.parametrize("name", BY_NAME)
def test_the_strict_dialect_is_valid(name: str) -> None:
    SCHEMA.validate(junit_strict(BY_NAME[name]))
    assert SCHEMA.is_valid(junit_strict(Verdict(None, (), (), ("a & b < c",))))


def test_the_default_dialect_is_valid_but_for_the_place() -> None:
    """GitLab shows the file of a test case; the schema knows no such attribute."""
    text = junit(BOTH)
    with pytest.raises(xmlschema.XMLSchemaValidationError, match="'file'"):
        SCHEMA.validate(text)
    SCHEMA.validate(re.sub(r' file="[^"]*" line="[^"]*"', "", text))


def test_the_strict_dialect_has_what_stricter_schemas_want() -> None:
    """Host, time without zone, id, package and properties are required (SOURCE: windyroad, JUnit-Schema)."""
    suite = suite_of(junit_strict(FALLS_SHORT))
    wanted = {"hostname": "localhost", "timestamp": "1970-01-01T00:00:00", "id": "0", "package": "gatecheck"}
    assert wanted.items() <= suite.attrib.items()
    assert [child.tag for child in suite if child.tag != "testcase"] == ["properties", "system-out", "system-err"]
    assert all(not case[0].attrib for case in cases_of(junit_strict(STANDS)) if len(case))


@pytest.mark.parametrize("dialect", DIALECTS)
def test_what_is_short_is_a_failure_what_is_not_known_an_error_and_the_worst_come_first(dialect: str) -> None:
    cases = cases_of(RENDERERS[dialect](BOTH))
    assert [(case.attrib["name"], case[0].tag if len(case) else "passed") for case in cases] == [
        ("line 9: could not be read or judged", "error"),
        ("drainage/earthworm-biomass", "failure"),
        ("rows/mildew", "error"),
        ("liming/soil-ph", "passed"),
        ("slope/covariate", "passed"),
    ]
    suite = suite_of(RENDERERS[dialect](BOTH)).attrib
    assert (suite["tests"], suite["failures"], suite["errors"], suite["skipped"]) == ("5", "1", "2", "0")


@pytest.mark.parametrize("dialect", DIALECTS)
def test_what_is_waived_or_does_not_count_is_skipped_with_its_reason(dialect: str) -> None:
    old, shade = (case[0] for case in cases_of(RENDERERS[dialect](STANDS))[:2])
    assert (old.tag, shade.tag) == ("skipped", "skipped")
    assert (old.text or "").startswith(
        "False positive risk: found 21 %. It is unchanged, and does not count now.\n"
        "Result: t(12) = 2.2, p = 0.048.\n"
    )
    assert "waived by the field board until 2031-09-01." in (shade.text or "")


def test_attributes_tell_the_worst_finding_and_its_rule() -> None:
    failure = cases_of(junit(FALLS_SHORT))[0][0]
    assert failure.attrib["type"] == "false-positive-risk"
    assert failure.attrib["message"].startswith("False positive risk: found a risk of 17 %")


@pytest.mark.parametrize(
    ("path", "shown"),
    [
        ("results/soil/drainage.json", "results.soil.drainage"),
        ("drainage.record.json", "drainage.record"),
        (".hidden", ".hidden"),
        ("folder.d/file", "folder.d.file"),
        (".", "gatecheck"),
        ("", "gatecheck"),
    ],
)
def test_a_class_is_the_path_with_dots(path: str, shown: str) -> None:
    (case,) = cases_of(junit(Verdict(None, (), (Problem(Place(path, 3), "m", ""),))))
    assert case.attrib["classname"] == shown


def test_cases_with_one_name_are_numbered() -> None:
    """Of cases with one name the first alone counts (SOURCE: GitLab, doc/ci/testing/unit_test_reports.md)."""
    cases = cases_of(junit(Verdict(None, (ROWS, ROWS), (BROKEN, BROKEN, BROKEN))))
    assert [case.attrib["name"] for case in cases] == [
        "line 9: could not be read or judged",
        "line 9: could not be read or judged (2)",
        "line 9: could not be read or judged (3)",
        "rows/mildew",
        "rows/mildew (2)",
    ]


def test_the_output_holds_what_is_noted_and_which_policy_was_used() -> None:
    assert (suite_of(junit(FALLS_SHORT)).findtext("system-out") or "").split("\n") == [
        "drainage/earthworm-biomass: Reported in full: found no list of units left out. To mend: give it. "
        "The policy only notes it.",
        "Falls short of the policy: 1 of 4 claims and 1 result without a claim; 2 stand; 1 is waived.",
        "the policy changed in this branch, and the one of the base revision was applied",
        "Policy: field-station reporting policy (from the base revision; sha256:1a2b3c4d5e6f).",
    ]
    properties = suite_of(junit(CANNOT_JUDGE)).findall("properties/property")
    assert [(one.attrib["name"], one.attrib["value"]) for one in properties] == [
        ("verdict", "cannot-judge"),
        ("version", ""),
    ]


@pytest.mark.parametrize("write", [junit, junit_strict])
@pytest.mark.parametrize("budget", [0, 3000, 9500])
def test_the_worst_stand_in_the_budget_and_the_rest_is_counted(
    budget: int, write: Callable[[Verdict, int], str]
) -> None:
    noted = Finding("robust", "short", "note", message="n")
    judged = [record(f"s{n:02}", SHORT) for n in range(40)] + [record(f"g{n:02}", noted) for n in range(40)]
    text = write(Verdict(POLICY, tuple(judged)), budget)
    kept = [case.attrib["name"] for case in cases_of(text)]
    notes = re.findall(r"g\d\d: Robust: n\. The policy only notes it\.\n", text)
    assert kept == [f"{state}{n:02}" for state in "sg" for n in range(40)][: len(kept)]
    assert not notes or len(kept) == 80
    assert suite_of(text).attrib["tests"] == f"{len(kept)}"
    spent = len("".join(re.findall(r"<testcase(?s:.)*?(?:</testcase>|/>)\n", text)).encode()) + len("".join(notes))
    assert budget - 300 < spent <= budget
    left = 120 - len(kept) - len(notes)
    assert text.count(f"\nLeft out for length: {left} entries. The JSON verdict holds them all.</system-out>") == 1


def test_the_budget_leaves_a_margin_below_what_is_taken() -> None:
    """Reports of 30 MB and more are refused (SOURCE: GitLab, doc/ci/testing/unit_test_reports.md)."""
    assert BUDGET + 1_000_000 < 30_000_000
