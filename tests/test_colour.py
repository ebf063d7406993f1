"""Bold type at a terminal: where it is, where it is not, and that nothing else differs."""

from __future__ import annotations

import io
import re
import sys

import pytest
from render.sample_verdicts import BOTH, BY_NAME, DRAINAGE, FALLS_SHORT, STANDS

from gatecheck.commands import edge
from gatecheck.model.found import Found, Scan
from gatecheck.model.record import Record
from gatecheck.model.verdict import Judged, Place, Verdict
from gatecheck.render.layout import strong
from gatecheck.render.listing import explain, survey
from gatecheck.render.terminal import account

MARKED = re.compile("\x1b\\[1m(.*?)\x1b\\[22m")


def in_bold(text: str) -> list[str]:
    """What stands in bold type, line by line, after checking that no other mark is there."""
    assert "\x1b" not in without_marks(text)
    return MARKED.findall(text)


def without_marks(text: str) -> str:
    return MARKED.sub(r"\1", text)


@pytest.mark.parametrize("width", [40, 80, 140])
@pytest.mark.parametrize("name", BY_NAME)
def test_without_its_marks_the_account_is_the_plain_one(name: str, width: int) -> None:
    verdict = BY_NAME[name]
    marked = account(verdict, width, bold=True)
    assert marked != account(verdict, width)
    assert without_marks(marked) == account(verdict, width)
    told = explain(verdict, verdict.judged[0].id, width, bold=True)
    assert without_marks(told) == explain(verdict, verdict.judged[0].id, width)


def test_the_headline_and_the_ids_are_in_bold_type() -> None:
    assert in_bold(account(FALLS_SHORT, 140, bold=True)) == [
        "Falls short of the policy: 1 of 4 claims and 1 result without a claim; 2 stand; 1 is waived.",
        "drainage/earthworm-biomass",
        "weeds/cover",
        "shade/yield",
        "drainage/earthworm-biomass",
        "liming/soil-ph",
        "mulch/moisture",
    ]


def test_the_record_that_fell_short_before_is_in_bold_type_too() -> None:
    assert "yield/2029" in in_bold(account(STANDS, 80, bold=True))


def test_of_an_explanation_the_verdict_is_in_bold_type() -> None:
    told = explain(FALLS_SHORT, DRAINAGE.id, 80, bold=True)
    assert in_bold(told) == ["drainage/earthworm-biomass falls short of the policy."]
    assert in_bold(explain(BOTH, "x", 80, bold=True)) == []


def test_of_a_survey_the_counts_and_the_ids_are_in_bold_type() -> None:
    found = Scan((Found(Record("record/1", "a/colour"), Place("a.json"), {}),), (), 3)
    assert in_bold(survey(found, 80, bold=True)) == [
        "1 record in 3 files; 0 claim something; 0 problems.",
        "a/colour",
    ]
    assert without_marks(survey(found, 80, bold=True)) == survey(found, 80)


def test_no_text_brings_marks_of_its_own() -> None:
    hostile = Judged("a\x1b[31mb", Place("a.json"), "\x1b[1mSure.", "\x1b]0;x\x07", None, ())
    text = account(Verdict(None, (hostile,)), 80, bold=True)
    assert in_bold(text)[1:] == ["a{U+001B}[31mb"]
    assert "{U+001B}]0;x{U+0007}" in text


def test_each_line_is_marked_after_its_indent() -> None:
    assert strong("  one\n    two", bold=True) == "  \x1b[1mone\x1b[22m\n    \x1b[1mtwo\x1b[22m"
    assert strong("  one\n    two", bold=False) == "  one\n    two"


class Stream(io.StringIO):
    """A stream that is a terminal or none."""

    def __init__(self, *, terminal: bool) -> None:
        super().__init__()
        self.terminal = terminal

    def isatty(self) -> bool:
        """Whether it is a terminal."""
        return self.terminal


@pytest.mark.parametrize(
    ("terminal", "environment", "bold"),
    [
        (True, {"TERM": "xterm-256color"}, True),
        (True, {"TERM": "xterm-256color", "NO_COLOR": ""}, True),
        (True, {"TERM": "xterm-256color", "NO_COLOR": "0"}, False),
        (True, {"TERM": "xterm-256color", "NO_COLOR": "1"}, False),
        (True, {"TERM": "dumb"}, False),
        (True, {}, False),
        (True, {"TERM": "xterm", "CI": "true"}, False),
        (False, {"TERM": "xterm"}, False),
    ],
)
def test_where_bold_type_is_used(
    terminal: bool, environment: dict[str, str], bold: bool, monkeypatch: pytest.MonkeyPatch
) -> None:
    for name in ("TERM", "NO_COLOR", "CI"):
        monkeypatch.delenv(name, raising=False)
    for name, value in environment.items():
        monkeypatch.setenv(name, value)
    monkeypatch.setattr(sys, "stdout", Stream(terminal=terminal))

    assert edge.bold() is bold
