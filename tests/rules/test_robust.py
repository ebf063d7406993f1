"""Rule `robust`: a claim that stands under every alternative and prior that the policy lists."""

from __future__ import annotations

from pathlib import Path

import pytest
from support import POLICY, Document, changed, drainage, judge

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
    record = drainage(test__value=6.0, test__p="<0.001", estimate=..., alternative=...)
    answer = judge(tmp_path, record, policy=POLICY_ON)

    said = answer.rule(RULE)
    assert (answer.status, said["outcome"]) == (3, "undecided")
    assert said["message"] == (
        "p <0.001 (t(34) = 6, 18 + 18 plots) cannot be weighed under design-effect, which the policy lists: the "
        "record does not say which effect the study was designed to find."
    )
    assert said["remedy"] == "Give alternative: {effect, scale}, as it was planned before the data."


def test_what_one_alternative_leaves_too_much_no_other_can_save(tmp_path: Path) -> None:
    """The worst of the risks that are known is above the limit, whatever the missing one is."""
    answer = judge(tmp_path, drainage(alternative=...), policy=POLICY_ON)

    said = answer.rule(RULE)
    assert (answer.status, said["outcome"]) == (1, "short")
    assert said["observed"] == pytest.approx(0.5553, abs=5e-4)
    assert said["message"] == (
        "p = 0.034 (t(34) = 2.21, 18 + 18 plots) leaves a risk of 56 % under bound at prior 0.2, and is above the "
        "limit in 4 of 4 combinations, though design-effect cannot be weighed; the policy wants at most 5 % under "
        "each."
    )


CHI2 = {"name": "chi-squared", "statistic": "chi2", "value": 30.0, "df": 3, "p": "<0.001"}
OTHER = "Name another alternative for such tests in the policy, under `for` with a match."


@pytest.mark.parametrize(
    ("test", "sample", "why", "advice"),
    [
        (CHI2, {"n": 200}, "chi-squared with 3 df has no default prior, whatever the record gives", OTHER),
        (
            {"name": "F", "statistic": "F", "value": 30.0, "df": [3, 196], "p": "<0.001"},
            {"n": 200},
            "F with 3 df has no default prior, whatever the record gives",
            OTHER,
        ),
        (
            {"name": "Mann-Whitney", "p": "1e-9"},
            {"n": 200},
            "a test without a likelihood ratio of its own has no default prior, whatever the record gives",
            OTHER,
        ),
        (
            {"name": "Wald", "statistic": "z", "value": 6.0, "sides": 1, "tail": "greater", "p": "<0.001"},
            {"n": 200},
            "this test has no default prior in one direction, whatever the record gives",
            OTHER,
        ),
        (
            {"name": "t", "statistic": "t", "value": 9.0, "df": 198, "p": "<0.001"},
            ...,
            "the default prior needs the number of units",
            "Give sample.n, and where there are groups their n.",
        ),
    ],
)
def test_what_no_record_can_give_is_told_as_such(
    tmp_path: Path, test: Document, sample: Document, why: str, advice: str
) -> None:
    settings = {"alternatives": ["default-prior", "bound"], "priors": [0.5], "limit": 0.05}
    record = drainage(test=test, sample=sample, estimate=..., alternative=...)
    answer = judge(tmp_path, record, policy=changed(POLICY, rules={RULE: settings}))

    said = answer.rule(RULE)
    assert said["outcome"] == "undecided"
    assert said["message"].endswith(f" cannot be weighed under default-prior, which the policy lists: {why}.")
    assert said["remedy"] == advice


def test_one_alternative_and_one_prior_may_stand_alone(tmp_path: Path) -> None:
    policy = changed(POLICY, rules={RULE: {"alternatives": "bound", "priors": 0.5, "limit": 0.3}})

    assert judge(tmp_path, drainage(), policy=policy).rule(RULE)["outcome"] == "met"
