"""The report of code quality for GitLab: its schema, severities and fingerprints."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import jsonschema
import pytest
from render.sample_verdicts import BOTH, BROKEN, BY_NAME, POLICY, STANDS

from gatecheck.model.verdict import Enforce, Finding, Judged, Outcome, Place, Problem, Verdict
from gatecheck.render import RENDERERS

EXPECTED = Path(__file__).parent / "expected"
#: SOURCE: GitLab, validator of a report (app/validators/json_schemas/codeclimate.json) and documentation of the
#: format (doc/ci/testing/code_quality.md), in our words. A reader stops at the first element that is not valid.
WANTED = {
    "type": "array",
    "items": {
        "type": "object",
        "required": ["description", "check_name", "fingerprint", "severity", "location"],
        "properties": {
            "description": {"type": "string", "minLength": 1},
            "check_name": {"type": "string", "minLength": 1},
            "fingerprint": {"type": "string", "pattern": "^[0-9a-f]{64}$"},
            "severity": {"enum": ["info", "minor", "major", "critical", "blocker"]},
            "location": {
                "type": "object",
                "required": ["path", "lines"],
                "properties": {
                    "path": {"type": "string", "minLength": 1},
                    "lines": {
                        "type": "object",
                        "required": ["begin"],
                        "properties": {"begin": {"type": "integer", "minimum": 1}},
                    },
                },
            },
        },
    },
}


def report_of(verdict: Verdict) -> list[dict[str, Any]]:
    text = RENDERERS["code-quality"](verdict)
    # A mark of the order of bytes would keep the report from being read.
    assert text.isascii()
    read: list[dict[str, Any]] = json.loads(text)
    jsonschema.validate(read, WANTED)
    return read


def record(*findings: Finding, counts_now: bool = True) -> Judged:
    return Judged("a", Place("a.json", 2), "c", "", None, findings, (), counts_now)


@pytest.mark.parametrize("name", BY_NAME)
def test_whole_text(name: str) -> None:
    expected = (EXPECTED / f"code-quality-{name}.json").read_text(encoding="utf-8")
    assert RENDERERS["code-quality"](BY_NAME[name]) == expected
    jsonschema.validate(json.loads(expected), WANTED)


def test_the_worst_comes_first() -> None:
    assert [(one["severity"], one["check_name"]) for one in report_of(BOTH)] == [
        ("blocker", "readable"),
        ("critical", "false-positive-risk"),
        ("critical", "prior-needed"),
        ("major", "false-positive-risk"),
        ("minor", "reported-in-full"),
    ]


@pytest.mark.parametrize(
    ("outcome", "enforce", "counts_now", "severity"),
    [
        ("short", "block", True, "critical"),
        ("undecided", "block", True, "major"),
        ("short", "block", False, "minor"),
        ("undecided", "note", True, "minor"),
        ("waived", "block", True, "info"),
    ],
)
def test_severities(outcome: Outcome, enforce: Enforce, counts_now: bool, severity: str) -> None:
    one = record(Finding("numbers-agree", outcome, enforce), counts_now=counts_now)
    assert [each["severity"] for each in report_of(Verdict(POLICY, (one,)))] == [severity]


def test_what_is_met_is_not_reported() -> None:
    assert report_of(Verdict(POLICY, (record(Finding("numbers-agree", "met", "block")),))) == []


def test_equal_problems_are_told_apart() -> None:
    """Entries with one fingerprint become one (SOURCE: GitLab, doc/ci/testing/code_quality.md)."""
    again = Problem(Place(BROKEN.at.path, 40), BROKEN.message, BROKEN.advice)
    shown = report_of(Verdict(POLICY, (), (BROKEN, again)))
    assert len({one["fingerprint"] for one in shown}) == 2
    assert [one["location"]["lines"]["begin"] for one in shown] == [9, 40]


def test_a_problem_of_the_whole_tree_has_a_file() -> None:
    (one,) = report_of(Verdict(None, (), (Problem(Place("."), "too few records", "add some"),)))
    assert one["location"] == {"path": "gatecheck.yaml", "lines": {"begin": 1}}
    assert one["description"].startswith("The whole tree: ")


def test_a_description_is_cut() -> None:
    (one,) = report_of(Verdict(None, (), (Problem(Place("a"), "m" * 9000, ""),)))
    assert len(one["description"]) == 2000
    assert one["description"].endswith("m...")


def test_what_does_not_count_says_so() -> None:
    assert [one["description"] for one in report_of(STANDS)] == [
        "yield/2029: False positive risk: found 21 %. It is unchanged, and does not count now.",
        "shade/yield: False positive risk: found 15 %; the policy allows at most 5 %; "
        "waived by the field board until 2031-09-01.",
    ]
