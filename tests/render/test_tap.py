"""The Test Anything Protocol: whole texts, read back by a parser that is not ours, and what a harness concludes."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
from render.sample_verdicts import BOTH, BROKEN, BY_NAME, FALLS_SHORT, OLD, POLICY, SLOPE
from tap.parser import Parser

from gatecheck.model.verdict import Finding, Judged, Place, Problem, Verdict
from gatecheck.render import RENDERERS

EXPECTED = Path(__file__).parent / "expected"
render = RENDERERS["tap"]


def points_of(verdict: Verdict) -> list[Any]:
    return [line for line in Parser().parse_text(render(verdict)) if line.category == "test"]


def fails(verdict: Verdict) -> bool:
    """Whether a harness takes the document for a failure."""
    return any(not point.ok and not point.todo for point in points_of(verdict))


@pytest.mark.parametrize("name", BY_NAME)
def test_whole_text(name: str) -> None:
    assert render(BY_NAME[name]) == (EXPECTED / f"tap-{name}.txt").read_text(encoding="utf-8")


@pytest.mark.parametrize("name", BY_NAME)
def test_a_harness_fails_where_the_gate_does(name: str) -> None:
    verdict = BY_NAME[name]
    assert fails(verdict) == (verdict.exit != 0)


def test_the_form_of_a_document() -> None:
    """SOURCE: Test Anything Protocol, version 14: first the version, and one plan before or after all points."""
    lines = render(BOTH).splitlines()
    assert lines[:2] == ["TAP version 14", "1..5"]
    assert [line for line in lines if line.startswith("1..")] == ["1..5"]
    assert [point.number for point in points_of(BOTH)] == [1, 2, 3, 4, 5]


def test_problems_come_first_then_the_records_worst_first() -> None:
    assert [(point.ok, point.description) for point in points_of(BOTH)] == [
        (False, "- results/broken.json, line 9: could not be read or judged"),
        (False, "- drainage/earthworm-biomass"),
        (False, "- rows/mildew"),
        (True, "- liming/soil-ph"),
        (True, "- slope/covariate"),
    ]


def test_the_details_hold_the_findings() -> None:
    point = points_of(FALLS_SHORT)[1]
    assert point.yaml_block == {
        "state": "short",
        "record": "weeds/cover",
        "result": "t(20) = 2.3, p = 0.20",
        "at": {"file": "results/weeds.json", "line": 2},
        "findings": [
            {
                "rule": "numbers-agree",
                "state": "short",
                "message": "found that t and df give p = 0.032, not 0.20.",
            }
        ],
    }


def test_what_stands_has_details_only_where_something_is_noted() -> None:
    noted = Judged(
        "a", Place("a"), "c", "r", None, (Finding("fresh", "short", "note", message="old", remedy="run"),)
    )
    first, second = points_of(Verdict(POLICY, (noted, SLOPE)))
    assert (first.ok, first.yaml_block["findings"]) == (
        True,
        [{"rule": "fresh", "state": "noted", "message": "old.", "remedy": "run"}],
    )
    assert (second.ok, second.yaml_block) == (True, None)


def test_what_does_not_count_is_to_be_done_and_what_is_waived_is_skipped() -> None:
    waived = Judged("w", Place("w"), "c", "", None, (Finding("fresh", "waived", "block"),))
    unchanged, skipped = points_of(Verdict(POLICY, (waived, OLD)))
    assert (unchanged.ok, unchanged.todo, unchanged.directive.reason) == (
        False,
        True,
        "unchanged, and does not count now",
    )
    assert (skipped.ok, skipped.skip, skipped.directive.reason) == (True, True, "short of the policy, and waived")


def test_a_document_without_points_says_so() -> None:
    assert render(Verdict(POLICY)) == (
        "TAP version 14\n1..0 # SKIP no record was found\n"
        "# Nothing falls short: 0 results are reported and nothing is claimed.\n"
    )


@pytest.mark.parametrize("hostile", ["a # SKIP", "a \\# TODO later", "a\n1..0\nBail out!", "a #SKIP"])
def test_an_id_is_no_directive(hostile: str) -> None:
    short = Judged(hostile, Place("a"), "c", "", None, (Finding("fresh", "short", "block"),))
    verdict = Verdict(POLICY, (short,))
    (point,) = points_of(verdict)
    assert (point.ok, point.skip, point.todo) == (False, False, False)
    assert point.yaml_block["record"] == hostile.replace("\n", " ")
    assert not {"#", "\\"} & set(point.description)


def test_texts_are_cut() -> None:
    (point,) = points_of(Verdict(None, (), (Problem(BROKEN.at, "m" * 9000, "r" * 9000),)))
    (finding,) = point.yaml_block["findings"]
    assert (len(finding["message"]), len(finding["remedy"])) == (2000, 2000)
