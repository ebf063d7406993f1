"""Text and records on whole trees: a text that differs falls short at its line, one that rounds stands."""

from __future__ import annotations

from pathlib import Path

import pytest
from support import POLICY, Document, changed, commit_all, drainage, weigh, write_tree

from gatecheck.cli import main

ID = "yield/spring"
VALUE = f"<!-- gatecheck: {ID} estimate.value -->"
INTERVAL = {"level": 0.95, "low": 1.1, "high": 5.4}


def spring(value: float) -> Document:
    """A record of the yield that stands by itself."""
    test = {"name": "two-sample t", "statistic": "t", "value": 3.01, "df": 80, "p": "0.0035", "sides": 2}
    estimate = {"measure": "mean difference", "value": value, "unit": "g", "interval": INTERVAL}
    return drainage(id=ID, claim="Yield rises in spring.", test=test, estimate=estimate, sample__groups=[])


def policy(**settings: object) -> Document:
    """A policy that asks for nothing but text that agrees."""
    return changed(POLICY, rules={"numbers-agree": {"enforce": "off"}, "text-agrees": settings})


def tree(folder: Path, text: str, value: float, **settings: object) -> Path:
    """Write a record, a text and a policy."""
    write_tree(folder, spring(value), policy=policy(**settings))
    (folder / "report.md").write_text(f"# Report\n\n{text}\n", encoding="utf-8")
    return folder


def rows(folder: Path, *arguments: str) -> tuple[int, list[tuple[str, int, str]]]:
    """The status, and the rows of prose with their lines and verdicts."""
    answer = weigh(folder, *arguments)
    told = [each for each in answer.verdict["others"] if each["at"]["path"].startswith("report")]
    return answer.status, [(each["id"], each["at"]["line"], each["verdict"]) for each in told]


@pytest.mark.parametrize(
    ("value", "status", "expected"),
    [(3.3, 1, [("report.md:3", 3, "falls-short")]), (3.8, 0, []), (3.78, 0, [])],
)
def test_a_text_of_3_8_stands_by_what_the_record_has(
    tmp_path: Path, value: float, status: int, expected: list[tuple[str, int, str]]
) -> None:
    folder = tree(tmp_path, f"Yield rose by 3.8 g {VALUE} (95 % CI 1.1 to 5.4).", value)

    assert rows(folder) == (status, expected)


def test_a_text_of_3_3_stands_by_a_record_of_3_28(tmp_path: Path) -> None:
    assert rows(tree(tmp_path, f"Yield rose by 3.3 g {VALUE} (95 % CI 1.1 to 5.4).", 3.28)) == (0, [])


@pytest.mark.parametrize(("unlinked", "status", "verdict"), [("block", 1, "falls-short"), ("note", 0, "stands")])
def test_without_a_link_the_policy_says_whether_it_blocks(
    tmp_path: Path, unlinked: str, status: int, verdict: str
) -> None:
    folder = tree(tmp_path, "Yield rose by 3.8 g (95 % CI 1.1 to 5.4).", 3.3, unlinked=unlinked)

    assert rows(folder) == (status, [("report.md:3", 3, verdict)])


@pytest.mark.parametrize(
    ("text", "status"),
    [
        ("It rose, <i>t</i>(80)&nbsp;=&nbsp;3.51.", 1),
        ("It rose, t₈₀ = 3.51.", 1),
        ("It rose (p-value: 0.017).", 1),
        ("It rose in 12 (45.5%) of 22.", 1),
        ("It rose, F1,80 = 6.30.", 1),
        ("It rose, t(80) = 3.01, p < 10^{-4}.", 1),
        ("It rose, <i>t</i>(80)&nbsp;=&nbsp;3.01 (p-value: 0.0035).", 0),
        ("It rose, t₈₀ = 3.01.", 0),
        ("Smith et al. (2031) reported t(20) = 3.10, p = .006.", 0),
        ("The significance threshold was p = 0.05.", 0),
        ("The pressure was P = 0.9 bar.", 0),
        ("Take 3/4 (75 %) cup of sugar.", 0),
    ],
)
def test_statistics_in_other_writings_are_held_against_the_record(tmp_path: Path, text: str, status: int) -> None:
    assert rows(tree(tmp_path, text, 3.3, unlinked="block"))[0] == status


def test_the_line_is_annotated(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    folder = tree(tmp_path, f"Yield rose by 3.8 g {VALUE}.", 3.3)

    assert main(["weigh", str(folder), "--write", "annotations=-"]) == 1

    assert capsys.readouterr().out.startswith("::error file=report.md,line=3,title=report.md%3A3%3A")


def test_a_link_to_no_record_cannot_be_judged(tmp_path: Path) -> None:
    folder = tree(tmp_path, "3 <!-- gatecheck: yield/sprig estimate.value -->", 3.3)

    answer = weigh(folder)

    assert answer.status == 3
    (problem,) = answer.verdict["problems"]
    assert problem["at"] == {"path": "report.md", "line": 3}
    assert problem["message"] == "the link to yield/sprig leads to no record"
    assert problem["advice"] == f"the nearest known one is {ID}"


def test_a_policy_that_does_not_name_the_rule_reads_no_prose(tmp_path: Path) -> None:
    folder = tree(tmp_path, f"Yield rose by 3.8 g {VALUE}.", 3.3)
    write_tree(folder, policy=changed(POLICY, rules={"numbers-agree": {"enforce": "off"}}))
    (folder / "bad.md").write_bytes(b"\xff")

    assert rows(folder) == (0, [])


def test_a_link_to_the_risk_is_held_against_what_the_gate_computes(tmp_path: Path) -> None:
    folder = tree(tmp_path, f"The risk is 99 % <!-- gatecheck: {ID} risk -->.", 3.3)

    status, told = rows(folder)

    assert (status, told) == (1, [("report.md:3", 3, "falls-short")])
    assert main(["refresh", str(folder), "--write"]) == 0
    assert rows(folder) == (0, [])


def test_only_what_is_new_counts_where_only_changes_do(tmp_path: Path) -> None:
    folder = tree(tmp_path, f"Yield rose by 3.8 g {VALUE}.", 3.3)
    commit_all(folder, "base")
    (folder / "new.md").write_text("Nothing linked.", encoding="utf-8")

    assert rows(folder, "--base", "HEAD", "--only-changed")[0] == 0
    assert rows(folder, "--base", "HEAD")[0] == 1
    (folder / "report2.md").write_text(f"It was 3.9 g {VALUE}.", encoding="utf-8")
    assert rows(folder, "--base", "HEAD", "--only-changed")[0] == 1
