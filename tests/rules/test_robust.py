"""Rule `robust`: a claim that stands under every alternative and prior that the policy lists."""

from __future__ import annotations

from pathlib import Path

import pytest
from support import POLICY, changed, drainage, judge

RULE = "robust"
SETTINGS = {"alternatives": ["observed-effect", "design-effect", "bound"], "priors": [0.5, 0.2], "limit": 0.05}
POLICY_ON = changed(POLICY, rules={RULE: SETTINGS})


def test_the_worst_combination_decides(tmp_path: Path) -> None:
    """T(34) = 2.21: 24 % by the bound at prior .5, and 56 % at prior .2; above 5 % in all six combinations."""
    answer = judge(tmp_path, drainage(), policy=POLICY_ON)

    said = answer.rule(RULE)
    assert (answer.status, said["outcome"], said["limit"]) == (1, "short", 0.05)
    assert said["observed"] == pytest.approx(0.5553, abs=5e-4)
    assert said["message"] == (
        "p = 0.034 (t(34) = 2.21, 18 + 18 plots) leaves a risk of 56 % under bound at prior 0.2, and is above the "
        "limit in 6 of 6 combinations; the policy wants at most 5 % under each."
    )


def test_a_strong_result_stands_under_all(tmp_path: Path) -> None:
    planned = {"effect": 1.5, "scale": "standardised"}
    record = drainage(test__value=6.0, test__p="<0.001", estimate=..., alternative=planned)

    assert judge(tmp_path, record, policy=POLICY_ON).rule(RULE)["outcome"] == "met"


def test_an_alternative_that_the_record_does_not_allow_is_undecided(tmp_path: Path) -> None:
    answer = judge(tmp_path, drainage(alternative=...), policy=POLICY_ON)

    said = answer.rule(RULE)
    assert (answer.status, said["outcome"]) == (3, "undecided")
    assert said["message"] == (
        "p = 0.034 (t(34) = 2.21, 18 + 18 plots) cannot be weighed under design-effect, which the policy lists."
    )


def test_one_alternative_and_one_prior_may_stand_alone(tmp_path: Path) -> None:
    policy = changed(POLICY, rules={RULE: {"alternatives": "bound", "priors": 0.5, "limit": 0.3}})

    assert judge(tmp_path, drainage(), policy=policy).rule(RULE)["outcome"] == "met"
