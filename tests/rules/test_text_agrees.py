"""Rule `text-agrees`: rows for lines of prose that do not agree with the records."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
from support import Document, commit_all, drainage, write_tree

from gatecheck.beyond import counting_new
from gatecheck.columns import columns_of
from gatecheck.compare.own_numbers import own_numbers
from gatecheck.evidence import weigh_columns
from gatecheck.model.verdict import Figures, Judged, Place, PolicyUsed, Problem, Verdict
from gatecheck.policies import read_own_policy
from gatecheck.policy import Applied, EvidenceSettings
from gatecheck.render.annotations import commands
from gatecheck.render.terminal import account
from gatecheck.rules.engine import judge_all
from gatecheck.rules.rule import Table
from gatecheck.rules.text_agrees import RULE, Settings, judge_prose, settings_in
from gatecheck.scan import scan

ID = "drainage/earthworm-biomass"
VALUE = f"<!-- gatecheck: {ID} estimate.value -->"
CLAIM = f"<!-- gatecheck: {ID} claim -->"


def judge(
    folder: Path, text: str, *records: Document, settings: Settings | None = None, path: str = "a.md"
) -> tuple[tuple[Judged, ...], tuple[Problem, ...]]:
    """Judge one file of prose beside records."""
    write_tree(folder, *(records or (drainage(),)))
    (folder / path).write_text(text, encoding="utf-8")
    return judge_prose(folder, scan(folder, ["*.json"], []).found, settings or Settings())


def only(rows: tuple[tuple[Judged, ...], tuple[Problem, ...]]) -> Judged:
    """The only row, where nothing is broken."""
    (row,), problems = rows
    assert problems == ()
    return row


def test_a_number_that_is_not_the_record_s_blocks_at_its_line(tmp_path: Path) -> None:
    row = only(judge(tmp_path, f"# Results\n\nBiomass rose by 3.8 g {VALUE} in spring. It did."))

    assert (row.id, row.at, row.claim, row.standing) == ("a.md:3", Place("a.md", 3), None, "falls-short")
    assert row.result == "the text “Biomass rose by 3.8 g in spring.”"
    (finding,) = row.findings
    assert (finding.rule, finding.outcome, finding.enforce) == ("text-agrees", "short", "block")
    assert finding.message == (
        f"The text says 3.8 for estimate.value of {ID}, and the record says 4.2; the policy wants the record's "
        "number within the digits shown."
    )
    assert finding.remedy == "Write 4.2; `gatecheck refresh --write` does so for every link."


def test_text_that_agrees_has_no_row(tmp_path: Path) -> None:
    text = f"Biomass rose by 4 g {VALUE}, t(34) = 2.21, p = .034. {CLAIM}"

    assert judge(tmp_path, text) == ((), ())


def test_every_format_for_people_shows_the_row(tmp_path: Path) -> None:
    rows, problems = judge(tmp_path, f"Biomass rose by 3.8 g {VALUE}.\n\n3 <!-- gatecheck: x y -->")
    verdict = Verdict(PolicyUsed("a policy", "sha256:0", "tree"), rows, problems)

    assert verdict.exit == 3
    assert "a.md:1" in account(verdict, 200)
    assert "::error file=a.md,line=1,title=a.md%3A1%3A" in commands(verdict)
    assert "::error file=a.md,line=3," in commands(verdict)


def test_a_number_that_cannot_be_written_is_told_so(tmp_path: Path) -> None:
    row = only(judge(tmp_path, f"p < .001 <!-- gatecheck: {ID} test.p --> of it"))

    assert row.findings[0].message.startswith(
        f"The text says < .001 for test.p of {ID}, and the record says 0.034;"
    )
    assert row.findings[0].remedy == "Write 0.034 by hand: it cannot be written in the digits that are shown."


def test_percent_and_figures_of_the_evidence(tmp_path: Path) -> None:
    write_tree(tmp_path, drainage())
    (tmp_path / "a.md").write_text(f"The risk is 12 % <!-- gatecheck: {ID} risk -->.", encoding="utf-8")
    found = scan(tmp_path, ["*.json"], []).found
    judged = Judged(ID, Place("r.json"), None, "", _figures(0.171234), ())

    row = only(judge_prose(tmp_path, found, Settings(), None, [judged]))

    assert row.findings[0].message.startswith(f"The text says 12 % for risk of {ID}, and the record says 0.1712;")
    assert row.findings[0].remedy.startswith("Write 17 %;")


def _figures(risk: float) -> Figures:
    return Figures("observed-effect", 1.6, 0.5, "policy", risk, None, "")


@pytest.mark.parametrize(
    ("unlinked", "enforce", "expected"),
    [("note", "block", "note"), ("block", "block", "block"), ("block", "note", "note"), ("note", "note", "note")],
)
def test_a_statistic_that_no_record_has_is_listed_or_blocks(
    tmp_path: Path, unlinked: Any, enforce: Any, expected: str
) -> None:
    settings = Settings(enforce, unlinked=unlinked)

    row = only(judge(tmp_path, "It rose, t(12) = 3.3,\np = .01.", settings=settings))

    assert row.findings[0].enforce == expected
    assert row.findings[0].message == (
        "No record has t(12) = 3.3, p = .01, which the text says; the policy wants statistics that records stand "
        "behind."
    )
    assert row.findings[0].remedy == (
        "Emit a record of this result, correct the text, or leave out files that quote the results of others."
    )


def test_statistics_without_a_link_may_be_left_alone(tmp_path: Path) -> None:
    text = "t(12) = 3.3 and 12/48 (26 %)"

    assert judge(tmp_path, text, settings=Settings(unlinked="off")) == ((), ())


def test_the_nearest_record_and_both_values_are_told(tmp_path: Path) -> None:
    row = only(judge(tmp_path, "It rose, t(34) = 2.21, p = .043."))

    assert row.standing == "stands"
    assert row.findings[0].message == (
        f"The text says t(34) = 2.21, p = .043, and no record has all of it: the nearest, {ID}, has p 0.034 (not "
        ".043); the policy wants the record's figures."
    )
    assert row.findings[0].remedy == "Write the figures of the record, or link the record that is meant."


def test_the_statistics_of_a_linked_sentence_block(tmp_path: Path) -> None:
    row = only(judge(tmp_path, f"It rose, t(34) = 2.21, p = .043. {CLAIM}"))

    assert row.standing == "falls-short"
    assert row.findings[0].message == (
        f"The text says t(34) = 2.21, p = .043, and {ID}, to which it is linked, has p 0.034 (not .043); the "
        "policy wants the record's figures."
    )


@pytest.mark.parametrize(("shown", "true"), [("26", "25.0"), ("25.1", "25.00"), ("25.04", "25.000")])
def test_a_percentage_is_that_of_its_counts(tmp_path: Path, shown: str, true: str) -> None:
    row = only(judge(tmp_path, f"In 12 of 48 plots ({shown} %) it did."))

    assert row.findings[0].message == (
        f"The text says {shown} % for 12 of 48, which is {true} %; the policy wants figures that fit together."
    )
    assert row.findings[0].remedy == "Correct the percentage or the counts."


def test_a_claim_quoted_as_confirmed_from_an_exploratory_record_is_said(tmp_path: Path) -> None:
    row = only(judge(tmp_path, f"We confirmed that biomass rises. {CLAIM}", drainage(status="exploratory")))

    assert row.standing == "falls-short"
    assert row.findings[0].message == (
        f"The text calls the result of {ID} “confirmed”, and its record is exploratory; the policy wants this said "
        "of confirmatory results alone."
    )
    assert row.findings[0].remedy == "Say that the result is exploratory, or link the record that confirms it."


def test_a_sentence_cannot_be_the_claim_of_a_record_that_claims_nothing(tmp_path: Path) -> None:
    row = only(judge(tmp_path, f"Biomass rises. {CLAIM}", drainage(claim=...)))

    assert row.findings[0].message == (
        f"The sentence is linked to the claim of {ID}, and that record claims nothing."
    )
    assert row.findings[0].remedy == (
        "Link the record that claims it, or link the numbers of the sentence instead."
    )


def test_all_of_one_line_is_one_row(tmp_path: Path) -> None:
    rows, _ = judge(tmp_path, f"It was 3.8 {VALUE}, t(12) = 3.3.\nIt was 3.9 {VALUE}.\n", path="b.qmd")

    assert [(row.id, [each.enforce for each in row.findings]) for row in rows] == [
        ("b.qmd:1", ["block", "note"]),
        ("b.qmd:2", ["block"]),
    ]


def test_a_cell_of_a_notebook_is_named_with_its_line(tmp_path: Path) -> None:
    cells = [
        {"cell_type": "code", "source": "1"},
        {"cell_type": "markdown", "source": ["# A\n", f"It was 3.8 {VALUE}."]},
    ]
    text = json.dumps({"cells": cells, "metadata": {}, "nbformat": 4, "nbformat_minor": 5}, indent=1)

    row = only(judge(tmp_path, text, path="n.ipynb"))

    assert (row.id, row.result) == ("n.ipynb:11", "cell 2, the text “It was 3.8 .”")
    assert "3.8" in text.splitlines()[row.at.line - 1]


def test_only_the_prose_that_the_policy_names_is_read(tmp_path: Path) -> None:
    text = f"It was 3.8 {VALUE}."
    settings = Settings(include=("**/*.md",), exclude=("a.*",))

    assert judge(tmp_path, text, settings=settings) == ((), ())
    assert judge(tmp_path, text, settings=settings, path="a.rst") == ((), ())
    assert len(judge(tmp_path, text, settings=settings, path="b.md")[0]) == 1


def test_what_is_not_named_is_not_read(tmp_path: Path) -> None:
    write_tree(tmp_path, drainage())
    (tmp_path / "a.md").write_bytes(b"\xff")

    assert judge_prose(tmp_path, (), None) == ((), ())
    assert [one.message for one in judge_prose(tmp_path, (), Settings())[1]] == [
        "the text is not UTF-8: byte 0xFF at offset 0"
    ]


def test_the_prose_of_a_commit_and_what_is_new_since(tmp_path: Path) -> None:
    write_tree(tmp_path, drainage())
    (tmp_path / "a.md").write_text(f"It was 3.8 {VALUE}.\n", encoding="utf-8")
    base = commit_all(tmp_path, "base")
    (tmp_path / "a.md").write_text(f"New.\n\nIt was 3.8 {VALUE}.\nIt was 3.9 {VALUE}.\n", encoding="utf-8")
    found = scan(tmp_path, ["*.json"], []).found

    before, _ = judge_prose(tmp_path, found, Settings(), base)
    rows, _ = judge_prose(tmp_path, found, Settings())

    assert [row.id for row in before] == ["a.md:1"]
    assert [(row.id, row.counts_now) for row in counting_new(rows, before)] == [("a.md:3", False), ("a.md:4", True)]


@pytest.mark.parametrize(
    ("rules", "unlinked"),
    [
        ({"text-agrees": {"unlinked": "block"}}, "block"),
        ({"text-agrees": None}, "note"),
        ({"text-agrees": {"enforce": "off"}}, None),
        ({"text-agrees": {"enforce": "off", "unlinked": 3}}, None),
        ({}, None),
    ],
)
def test_the_rule_is_off_unless_it_is_named(rules: Document, unlinked: str | None) -> None:
    policy, faults = read_own_policy({"gatecheck": "policy/1", "rules": rules})
    assert policy is not None, faults

    settings = settings_in(policy)

    assert (None if settings is None else settings.unlinked) == unlinked


def test_a_setting_that_is_unknown_is_a_fault() -> None:
    policy, faults = read_own_policy({"gatecheck": "policy/1", "rules": {"text-agrees": {"unlinked": "warn"}}})

    assert policy is None
    assert [(each.field, each.message) for each in faults] == [("rules.text-agrees.unlinked", "is 'warn'")]


def test_no_record_is_held_to_it_by_itself(tmp_path: Path) -> None:
    found = scan(write_tree(tmp_path, drainage()), ["*.json"], []).found
    columns = columns_of(found)
    evidence = weigh_columns(columns, [EvidenceSettings()])
    applied = (Applied({RULE.name: Settings()}, EvidenceSettings()),)
    table = Table(columns, evidence, own_numbers(columns, evidence), applied)

    assert judge_all([RULE], table) == [()]
    judgement = RULE.judge(table, [Settings()])
    assert not judgement.short.any()
    assert RULE.explain(table, 0, Settings(), judgement).message == (
        "This rule judges prose: prose says what the records say."
    )
