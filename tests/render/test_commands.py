"""Workflow commands: exact lines, caps and silence."""

from __future__ import annotations

from pathlib import Path

import pytest
from render.sample_verdicts import BROKEN, BY_NAME, OLD, POLICY

from gatecheck.model.verdict import Enforce, Finding, Judged, Outcome, Place, Problem, Verdict
from gatecheck.render import RENDERERS

EXPECTED = Path(__file__).parent / "expected"
render = RENDERERS["annotations"]


def record(name: str, *findings: Finding, claim: str = "c", counts_now: bool = True) -> Judged:
    return Judged(name, Place(f"{name}.json", 2), claim, "", None, findings, (), counts_now)


def finding(outcome: Outcome, enforce: Enforce = "block", message: str = "found 7 %") -> Finding:
    return Finding("false-positive-risk", outcome, enforce, message=message)


@pytest.mark.parametrize("name", BY_NAME)
def test_whole_text(name: str) -> None:
    assert render(BY_NAME[name]) == (EXPECTED / f"annotations-{name}.txt").read_text(encoding="utf-8")


def test_problems_come_first_then_short_then_undecided() -> None:
    mixed = record("a", finding("undecided"), Finding("numbers-agree", "short", "block"))
    verdict = Verdict(POLICY, (mixed, record("b", finding("short"))), (BROKEN,))
    assert [line.split("title=")[1].split("::")[0] for line in render(verdict).splitlines()] == [
        "Could not be read or judged",
        "a%3A Numbers agree",
        "b%3A False positive risk",
        "a%3A False positive risk",
    ]


def test_what_does_not_count_or_is_undecided_and_only_noted_is_silent() -> None:
    silent = record("a", finding("short", "note"), finding("waived"), counts_now=False)
    assert not render(Verdict(POLICY, (OLD, silent, record("b", finding("undecided", "note")))))


def test_the_tenth_of_a_level_counts_the_rest() -> None:
    verdict = Verdict(
        POLICY,
        tuple(record(f"r{n:02}", finding("short")) for n in range(12))
        + tuple(record(f"w{n:02}", finding("short", "note")) for n in range(10)),
    )
    lines = render(verdict).splitlines()
    errors = [line for line in lines if line.startswith("::error ")]
    warnings = [line for line in lines if line.startswith("::warning ")]
    assert (len(errors), len(warnings)) == (10, 10)
    assert errors[8].startswith("::error file=r08.json,")
    assert errors[9] == (
        "::error title=3 more in the summary::3 more of this level are not shown here; all stand in the summary."
    )
    assert warnings[9].startswith("::warning file=w09.json,")


@pytest.mark.parametrize("character", ["a", "%", "\U0001f331"])
def test_a_line_stays_below_what_a_runner_cuts(character: str) -> None:
    long = character * 9000
    one = Judged(long, Place(long, 2), "c", "", None, (finding("short", message=long),))
    problem = Problem(Place(long, 1), long, "do")
    for line in render(Verdict(POLICY, (one,), (problem,))).splitlines():
        assert 3900 < len(line) < 4096
        assert line.endswith("...")


def test_a_message_has_at_most_4000_characters() -> None:
    one = Judged("a", Place("a", 2), "c", "", None, (finding("short", message="m" * 9000),))
    (line,) = render(Verdict(POLICY, (one,))).splitlines()
    assert len(line.split("::", 2)[2]) == 4000
