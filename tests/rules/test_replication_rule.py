"""Rule `replication`: a claim whose result was tested again on data of its own held up there."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import pytest
from scipy import stats
from support import POLICY, Document, changed, drainage, judge

RULE = "replication"
FIRST = "drainage/earthworm-biomass"
AGAIN = "drainage/earthworm-biomass-2032"
POLICY_ON = changed(POLICY, rules={RULE: {}})


def again(value: float, **changes: Any) -> Document:
    """The same hypothesis tested again, with another estimate and half the error."""
    made = drainage(
        id=AGAIN,
        replicates=FIRST,
        estimate__value=value,
        estimate__standard_error=0.95,
        estimate__interval=...,
        test__value=value / 0.95,
        test__p=...,
    )
    return changed(made, **changes)


def test_a_result_that_held_up_meets_the_rule(tmp_path: Path) -> None:
    answer = judge(tmp_path, drainage(), again(2.0), policy=POLICY_ON)

    said = answer.rule(RULE)
    assert (answer.status, said["outcome"], said["limit"]) == (0, "met", 0.025)
    assert said["observed"] == pytest.approx(stats.norm.sf(2.0 / 0.95), rel=1e-12)


def test_a_result_that_did_not_hold_up_falls_short_in_both_records(tmp_path: Path) -> None:
    answer = judge(tmp_path, drainage(), again(0.5, test__p="0.602"), policy=POLICY_ON)

    assert answer.status == 1
    assert answer.rule(RULE, AGAIN)["outcome"] == "short"
    said = answer.rule(RULE)
    assert said["message"] == (
        "drainage/earthworm-biomass (t(34) = 2.21, p = 0.034, mean difference 4.2 g/m2 (95 % interval 0.34 to "
        "8.06)) was tested again in drainage/earthworm-biomass-2032 (t(34) = 0.5263, p = 0.602, mean difference "
        "0.5 g/m2), which fails by direction-and-p (one-sided p 0.299 that way, p of the difference 0.0815, "
        "sceptical p 0.27); the policy asks for direction-and-p at 0.025, one-sided."
    )
    assert said["remedy"] == (
        "Claim what both results together support, or test it once more, large enough for the smaller effect."
    )


@pytest.mark.parametrize(
    ("criteria", "value", "outcome"),
    [
        # The prediction interval of 4.2 with errors 1.9 and 0.95 is 4.2 +- 1.96 * 2.1243: from 0.036.
        ("interval", 0.05, "met"),
        ("interval", 0.03, "short"),
        (["direction-and-p", "interval"], 0.05, "short"),
        # The golden level asks more of a repetition of a weak original than significance alone.
        ("sceptical", 1.9, "short"),
        ("sceptical", 4.2, "met"),
        ("direction-and-p", 1.9, "met"),
    ],
)
def test_the_criteria_of_the_policy_decide(
    criteria: str | list[str], value: float, outcome: str, tmp_path: Path
) -> None:
    policy = changed(POLICY, rules={RULE: {"criteria": criteria}})

    assert judge(tmp_path, drainage(), again(value), policy=policy).rule(RULE)["outcome"] == outcome


def test_the_sceptical_p_solves_the_published_equation(tmp_path: Path) -> None:
    """Solve (z_o^2 / s^2 - 1)(z_r^2 / s^2 - 1) = c; p is the upper tail of s times the root of the golden ratio.

    Held, Journal of the Royal Statistical Society A 183 (2020) 431-448; Held, Micheloud and Pawel, Annals of
    Applied Statistics 16 (2022) 706-720 (from memory).
    """
    policy = changed(POLICY, rules={RULE: {"criteria": "sceptical"}})
    said = judge(tmp_path, drainage(), again(1.9), policy=policy).rule(RULE)

    shown = float(said["message"].split("sceptical p ")[1].split(")")[0])
    golden = (1 + math.sqrt(5)) / 2
    s2 = stats.norm.isf(shown) ** 2 / golden
    assert (2.2105**2 / s2 - 1) * (2.0**2 / s2 - 1) == pytest.approx(4, rel=0.15)


def test_several_repetitions_are_taken_together(tmp_path: Path) -> None:
    """1.2 and 1.6 with the error 0.95 each are short alone and 1.4 with 0.672 together."""
    two = [again(1.2), again(1.6, id=f"{AGAIN}-b")]

    alone, both = (
        judge(tmp_path, drainage(), two[0], policy=POLICY_ON),
        judge(tmp_path, drainage(), *two, policy=POLICY_ON),
    )

    assert (alone.rule(RULE)["outcome"], both.rule(RULE)["outcome"]) == ("short", "met")
    assert both.rule(RULE)["observed"] == pytest.approx(stats.norm.sf(1.4 / 0.95 * math.sqrt(2)), rel=1e-12)


def test_the_original_may_be_named_by_an_earlier_id(tmp_path: Path) -> None:
    renamed = drainage(id="biomass", aliases=[FIRST])

    answer = judge(tmp_path, renamed, again(2.0), policy=POLICY_ON)

    assert answer.rule(RULE, "biomass")["outcome"] == "met"


def test_results_that_cannot_be_compared_are_undecided(tmp_path: Path) -> None:
    answer = judge(tmp_path, drainage(), again(2.0, estimate__unit="kg/ha"), policy=POLICY_ON)

    said = answer.rule(RULE)
    assert (answer.status, said["outcome"]) == (3, "undecided")
    assert said["message"].endswith(
        "and the two cannot be compared: their estimates have other measures, units, populations or groups."
    )


@pytest.mark.parametrize("named", ["unknown", AGAIN])
def test_a_repetition_of_nothing_that_is_here_concerns_nobody(named: str, tmp_path: Path) -> None:
    answer = judge(tmp_path, drainage(), again(2.0, replicates=named), policy=POLICY_ON)

    assert [claim["rules"] for claim in answer.verdict["claims"]] == [
        [rule for rule in claim["rules"] if rule["rule"] != RULE] for claim in answer.verdict["claims"]
    ]


def test_a_safety_outcome_need_not_be_repeated(tmp_path: Path) -> None:
    answer = judge(tmp_path, drainage(harm=True), again(0.1, harm=True), policy=POLICY_ON)

    assert (answer.status, answer.rule(RULE)["outcome"]) == (0, "does-not-apply")
