"""Rule `reported-in-full`: what guidelines ask of every inferential result, and what they do not ask."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
from support import POLICY, Document, changed, drainage, judge, write_tree

from gatecheck.cli import main

RULE: Document = {"reported-in-full": {}}
IN_FULL = changed(POLICY, rules=RULE)


@pytest.mark.parametrize(
    ("changes", "lacks", "advice"),
    [
        ({"test__name": ...}, "the name of the test", "test.name"),
        ({"test__p": ...}, "a p-value", "test.p"),
        ({"test__p": "<0.05"}, "an exact p-value", 'the exact test.p ("<0.001" may stand for less than that)'),
        (
            {"test__p": ">0.05", "test__value": 1.5, "estimate__value": 2.85, "estimate__interval": None},
            "an exact p-value and the interval of the estimate",
            'the exact test.p ("<0.001" may stand for less than that) and estimate.interval',
        ),
        (
            {"test__p": "0.000", "test__value": 6.3, "estimate__standard_error": ..., "estimate__interval": None},
            "a p-value above 0",
            'all digits of test.p, or "<0.001"',
        ),
        ({"test__df": ...}, "the statistic with its df", "test.statistic, value and df"),
        ({"test__value": ...}, "the statistic with its df", "test.statistic, value and df"),
        ({"sample__unit": ...}, "n with its unit", "sample.n or groups, and sample.unit"),
        ({"sample": ...}, "n with its unit", "sample.n or groups, and sample.unit"),
        ({"estimate": ...}, "an estimate", "estimate with measure, value, interval and unit"),
        ({"estimate__interval": ...}, "the interval of the estimate", "estimate.interval"),
        ({"estimate__unit": ...}, "the unit of the estimate", 'estimate.unit ("1" for a number without unit)'),
        ({"estimate__unit": ""}, "the unit of the estimate", 'estimate.unit ("1" for a number without unit)'),
    ],
)
def test_what_is_missing_is_named_with_its_field(
    tmp_path: Path, changes: dict[str, Any], lacks: str, advice: str
) -> None:
    answer = judge(tmp_path, drainage(**changes), policy=IN_FULL)

    said = answer.rule("reported-in-full")
    assert (answer.status, said["outcome"]) == (1, "short")
    assert f" lacks {lacks}" in said["message"]
    assert said["message"].endswith("; the policy wants every result reported in full.")
    assert advice in said["remedy"]


@pytest.mark.parametrize(
    "changes",
    [
        {},
        {"test__p": "<0.001", "test__value": 5.2, "estimate__value": 9.88, "estimate__interval__high": 13.74},
        {"sample__n": ...},
        {"estimate__scale": "log", "estimate__unit": ..., "estimate__null": 1},
        {
            "test": {
                "name": "one-way analysis of variance",
                "statistic": "F",
                "value": 4.76,
                "df": [2, 45],
                "p": 0.0133,
            },
            "estimate": ...,
        },
        {"test": {"name": "chi-squared", "statistic": "chi2", "value": 7.81, "df": 3, "p": 0.05}, "estimate": ...},
        {"test": {"name": "Fisher's exact", "p": 0.03, "p_kind": "exact"}, "estimate__standard_error": ...},
        {
            "test": {"name": "Mann-Whitney U", "p": 0.03, "named_statistic": {"symbol": "U", "value": 93}},
            "estimate__standard_error": ...,
        },
        {"test": {"name": "z", "statistic": "z", "value": 2.21, "p": "0.027"}},
        {"test": ..., "aim": "estimation"},
        {"test": ..., "status": "descriptive"},
    ],
)
def test_what_guidelines_do_not_ask_is_not_asked(tmp_path: Path, changes: dict[str, Any]) -> None:
    """Omnibus tests have no single estimate, exact tests no df, a ratio no unit, an estimate alone no test."""
    if changes.get("estimate__scale") == "log" or "test__p" in changes:
        changes = {**changes, "estimate__standard_error": ...}

    answer = judge(tmp_path, drainage(**changes), policy=IN_FULL)

    assert answer.rule("reported-in-full")["outcome"] == "met", answer.rule("reported-in-full")["message"]


def test_a_result_without_a_claim_is_held_to_it_too(tmp_path: Path) -> None:
    """It asserts nothing, so evidence does not bind it, but what is reported is reported in full."""
    policy = changed(POLICY, rules={"false-positive-risk": {"limit": 0.05}, **RULE})

    answer = judge(tmp_path, drainage(claim=..., test__name=...), policy=policy)

    assert answer.status == 1
    assert [each["rule"] for each in answer.claim()["rules"]] == ["numbers-agree", "reported-in-full"]
    assert answer.verdict["counts"]["reported-falling-short"] == 1


def test_what_is_met_is_explained_too(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    write_tree(tmp_path, drainage(), policy=IN_FULL)

    assert main(["explain", "drainage/earthworm-biomass", str(tmp_path)]) == 0

    assert "nothing that guidelines ask for is missing." in " ".join(capsys.readouterr().out.split())


@pytest.mark.parametrize(
    ("screen", "lacks", "advice"),
    [
        ({"tests": 10_000, "hits": 139, "alpha": 0.01}, "", ""),
        ({"hits": 139, "alpha": 0.01}, "the numbers of tests and hits", "screen.tests and screen.hits"),
        ({"tests": 10_000, "alpha": 0.01}, "the numbers of tests and hits", "screen.tests and screen.hits"),
        ({"tests": 10_000, "hits": 139}, "the level of each test", "screen.alpha"),
    ],
)
@pytest.mark.parametrize("test", [None, {"name": "robust z"}])
def test_a_whole_screen_gives_its_counts_and_its_level(
    tmp_path: Path, screen: Document, lacks: str, advice: str, test: Document | None
) -> None:
    """It has no single test, estimate or sample; a record without a claim is held to this alone."""
    record = {"gatecheck": "record/1", "id": "compounds", "screen": screen, "test": test}

    said = judge(tmp_path, record, policy=IN_FULL).rule("reported-in-full", "compounds")

    assert said["outcome"] == ("short" if lacks else "met")
    if lacks:
        assert f" lacks {lacks}; the policy wants" in said["message"]
        assert said["remedy"] == f"Give {advice}."


def test_a_screen_beside_a_single_result_is_no_whole_screen(tmp_path: Path) -> None:
    screen = {"tests": 10_000, "hits": 139, "alpha": 0.01}

    said = judge(tmp_path, drainage(screen=screen, estimate=...), policy=IN_FULL).rule("reported-in-full")

    assert " lacks an estimate; the policy wants" in said["message"]
