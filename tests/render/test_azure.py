"""Logging commands of Azure Pipelines: exact lines, caps and silence."""

from __future__ import annotations

from pathlib import Path

import pytest
from render.azure_agent import Logged, logged
from render.sample_verdicts import BOTH, BROKEN, BY_NAME, POLICY

from gatecheck.model.verdict import Enforce, Finding, Judged, Outcome, Place, Problem, Verdict
from gatecheck.render import RENDERERS

EXPECTED = Path(__file__).parent / "expected"
render = RENDERERS["azure-annotations"]


def record(name: str, outcome: Outcome, enforce: Enforce = "block", path: str = "a.json") -> Judged:
    finding = Finding("false-positive-risk", outcome, enforce, message="found 7 %")
    return Judged(name, Place(path, 2), "c", "", None, (finding,))


@pytest.mark.parametrize("name", BY_NAME)
def test_whole_text(name: str) -> None:
    assert render(BY_NAME[name]) == (EXPECTED / f"azure-annotations-{name}.txt").read_text(encoding="utf-8")


def test_a_line_is_read_as_an_issue_at_its_place() -> None:
    assert next(logged(render(BOTH))) == Logged(
        "error",
        (("linenumber", "9"), ("sourcepath", "results/broken.json")),
        "Could not be read or judged: the document ends inside a text that begins on this line. To mend: write the "
        "file again from the analysis, or exclude it in the scan section of the policy.",
    )


def test_errors_come_before_warnings_and_what_is_waived_is_silent() -> None:
    verdict = Verdict(
        POLICY, (record("a", "waived"), record("b", "short", "note"), record("c", "undecided")), (BROKEN,)
    )
    assert [(one.level, one.message.partition(":")[0]) for one in logged(render(verdict))] == [
        ("error", "Could not be read or judged"),
        ("error", "c"),
        ("warning", "b"),
    ]


def test_the_tenth_of_a_level_counts_the_rest() -> None:
    shown = list(logged(render(Verdict(POLICY, tuple(record(f"r{n:02}", "short") for n in range(12))))))
    assert len(shown) == 10
    assert shown[9] == Logged(
        "error", (), "3 more in the summary: 3 more of this level are not shown here; all stand in the summary."
    )


def test_a_property_escapes_what_would_end_it() -> None:
    text = render(Verdict(POLICY, (record("a", "short", path="a;type=warning]b.json"),)))
    assert text.startswith(
        "##vso[task.logissue type=error;sourcepath=a%3Btype=warning%5Db.json;linenumber=2]a: False positive risk: "
    )


def test_a_text_that_looks_like_an_escape_is_taken_apart() -> None:
    (one,) = logged(render(Verdict(None, (), (Problem(Place("a%3bb"), "7 % of %0A and %azp25", ""),))))
    assert dict(one.properties)["sourcepath"] == "a% 3bb"
    assert one.message == "Could not be read or judged: 7 % of % 0A and % azp25."


def test_the_whole_tree_is_no_file() -> None:
    assert render(Verdict(None, (), (Problem(Place("."), "too few", ""),))) == (
        "##vso[task.logissue type=error]Could not be read or judged: too few.\n"
    )


def test_a_message_has_at_most_4000_characters() -> None:
    (one,) = logged(render(Verdict(None, (), (Problem(Place("a"), "m" * 9000, ""),))))
    assert len(one.message) == 4000
