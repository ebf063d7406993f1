"""The Markdown summary: whole texts, what the table says, and the budget in bytes."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from render.sample_verdicts import BROKEN, BY_NAME, DRAINAGE, POLICY

from gatecheck.model.verdict import Finding, Judged, Place, Problem, Verdict
from gatecheck.render import RENDERERS
from gatecheck.render.summary import BUDGET, summary

EXPECTED = Path(__file__).parent / "expected"


@pytest.mark.parametrize("name", BY_NAME)
def test_whole_text(name: str) -> None:
    expected = (EXPECTED / f"summary-{name}.md").read_text(encoding="utf-8")
    assert RENDERERS["summary"](BY_NAME[name]) == expected


def test_the_table_says_what_the_policy_allows() -> None:
    """A limit that does not apply is not named; a rule without a limit points to its paragraph."""
    findings = (
        Finding("false-positive-risk", "short", "block", 0.0504, 0.05),
        Finding("prior-needed", "does-not-apply", "block", None, 0.5),
        Finding("numbers-agree", "undecided", "block"),
        Finding("reported-in-full", "short", "note"),
    )
    assert DRAINAGE.evidence is not None
    one = Judged("a", Place("a.json"), "It grows.", "t = 2", DRAINAGE.evidence, findings)
    assert (
        "| It grows. (a) | t = 2 | 17 %, at prior 0.5 | 79 % | risk up to 5 %; numbers agree: see below |\n"
    ) in summary(Verdict(POLICY, (one,)))


def many(count: int, text: str = "It grows.") -> Verdict:
    finding = Finding("false-positive-risk", "short", "block", 0.2, 0.05, "found 20 %; at most 5 %", "more plots")
    stands = Finding("false-positive-risk", "met", "block", 0.01, 0.05)
    short = [Judged(f"s/{n:05}", Place("s.json", n + 1), text, "t = 2", None, (finding,)) for n in range(count)]
    good = [Judged(f"g/{n:05}", Place("g.json", n + 1), text, "t = 9", None, (stands,)) for n in range(count)]
    problems = [Problem(Place("p.json", n + 1), f"broken {text}", "write it again") for n in range(count)]
    return Verdict(POLICY, (*good, *short), tuple(problems))


def entries(text: str) -> dict[str, int]:
    return {
        "problems": len(re.findall(r"^- p\.json, line", text, re.MULTILINE)),
        "rows": len(re.findall(r"^\| .* \(s/\d+\) \|", text, re.MULTILINE)),
        "paragraphs": len(re.findall(r"^### s/\d+$", text, re.MULTILINE)),
        "standing": len(re.findall(r"^- g/\d+: ", text, re.MULTILINE)),
    }


@pytest.mark.parametrize("budget", [4096, 9000, 15_000, 20_000])
def test_the_budget_holds_in_bytes_and_the_last_line_counts_what_is_left_out(budget: int) -> None:
    verdict = many(60, "Das Gras wächst 草 | x.")
    text = summary(verdict, budget)
    shown = entries(text)
    assert budget - 600 < len(text.encode()) <= budget
    assert shown["rows"] == shown["paragraphs"]
    left = 180 - shown["problems"] - shown["rows"] - shown["standing"]
    assert left > 0
    assert text.endswith(f"\nLeft out for length: {left} entries. The JSON verdict holds them all.\n")
    assert text.count("<details>") == text.count("</details>")


def test_the_worst_stand_where_room_is_short() -> None:
    """No claim that stands is shown while one that falls short is left out, and none of those before a problem."""
    for budget in range(4096, 30_000, 1500):
        shown = entries(summary(many(60), budget))
        assert shown["rows"] == 0 or shown["problems"] == 60
        assert shown["standing"] == 0 or shown["rows"] == 60


def test_one_entry_left_out_is_an_entry() -> None:
    verdict = Verdict(POLICY, (), (BROKEN, Problem(Place("z.json"), "z" * 1900, "y")))
    assert summary(verdict, 2500).endswith("\nLeft out for length: 1 entry. The JSON verdict holds them all.\n")


def test_a_text_without_end_is_cut_and_hides_nothing() -> None:
    verdict = Verdict(POLICY, (), (Problem(Place("a.json"), "|" * 2_000_000, "a"), BROKEN))
    text = summary(verdict)
    assert "results/broken.json" in text
    assert "Left out" not in text
    assert len(text.encode()) < 30_000


def test_the_budget_leaves_a_margin_below_one_mebibyte() -> None:
    """A page above 1,048,576 bytes is dropped whole (SOURCE: the runner's CreateStepSummaryCommand)."""
    verdict = many(4000)
    size = len(summary(verdict).encode())
    assert BUDGET - 1000 < size <= BUDGET < 1_048_576


def test_a_long_policy_name_does_not_eat_the_page() -> None:
    text = summary(Verdict(type(POLICY)("n" * 100_000, POLICY.digest, "tree")))
    assert len(text) < 2000
