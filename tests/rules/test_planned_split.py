"""The sizes of the groups against the planned split."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
from scipy import stats
from support import POLICY, Document, changed, drainage, judge

from gatecheck.compare.splits import exact_binomial

RULE = "planned-split"


def split(sizes: list[int], planned: Any, **more: Any) -> Document:
    groups = [{"name": f"group {number}", "n": n} for number, n in enumerate(sizes)]
    sample = {"unit": "user", "groups": groups, "planned_split": planned}
    return drainage(
        test={"name": "z", "statistic": "z", "value": 3.9, "p": "<0.001"}, estimate=..., sample=sample, **more
    )


@pytest.mark.parametrize(
    ("sizes", "planned", "p", "outcome"),
    [
        ([50_000, 51_200], [1, 1], 0.0001618, "short"),
        ([50_310, 49_690], [1, 1], 0.0499, "met"),
        ([33_500, 66_500], [1, 2], 0.2636, "met"),
        ([30, 8], [1, 1], 0.000469, "short"),
        ([18, 18], [0.5, 0.5], 1.0, "met"),
        ([100, 100, 160], [1, 1, 1], 4.5e-5, "short"),
        ([0, 3], [1, 1], 0.25, "met"),
    ],
)
def test_a_split_is_held_to_the_plan(
    tmp_path: Path, sizes: list[int], planned: list[float], p: float, outcome: str
) -> None:
    answer = judge(tmp_path, split(sizes, planned))

    said = answer.rule(RULE)
    assert said["outcome"] == outcome
    assert said["observed"] == pytest.approx(p, rel=0.01)
    assert said["limit"] == 0.001


def test_what_is_said(tmp_path: Path) -> None:
    said = judge(tmp_path, split([50_000, 51_200], [1, 1])).rule(RULE)

    assert said["message"] == (
        "The groups hold 50,000 + 51,200 users, and the planned split 1:1 gives 50,600 + 50,600 (p = 0.000162); "
        "the policy wants a p of 0.001 or more."
    )
    assert said["remedy"] == (
        "Find what sorted the units (assignment, logging, a filter after assignment) before any effect is told; a "
        "split that was planned otherwise stands in sample.planned_split."
    )


@pytest.mark.parametrize("sizes", [[10, 10, 10], [], [0, 0], [20]])
def test_groups_that_are_not_those_of_the_plan_are_undecided(tmp_path: Path, sizes: list[int]) -> None:
    answer = judge(tmp_path, split(sizes, [1, 1]))

    said = answer.rule(RULE)
    assert (answer.status, said["outcome"]) == (3, "undecided")
    assert said["message"] == (
        "The split 1:1 was planned, and the record does not give the sizes of so many groups."
    )


def test_it_concerns_claims_with_a_planned_split_alone(tmp_path: Path) -> None:
    (tmp_path / "a").mkdir()
    (tmp_path / "b").mkdir()
    reported = judge(tmp_path / "a", split([50_000, 51_200], [1, 1], claim=...))
    unplanned = judge(tmp_path / "b", drainage())

    assert RULE not in {each["rule"] for each in reported.claim()["rules"]}
    assert RULE not in {each["rule"] for each in unplanned.claim()["rules"]}


def test_the_limit_is_a_setting(tmp_path: Path) -> None:
    policy = changed(POLICY, rules={RULE: {"limit": 0.05}})

    assert judge(tmp_path, split([50_310, 49_690], [1, 1]), policy=policy).rule(RULE)["outcome"] == "short"


@pytest.mark.parametrize(
    ("first", "n", "share"), [(30, 38, 0.5), (67, 120, 0.5), (3, 40, 0.25), (0, 5, 0.5), (5, 5, 0.4)]
)
def test_the_exact_p_is_that_of_scipy(first: int, n: int, share: float) -> None:
    assert exact_binomial(first, n, share) == pytest.approx(stats.binomtest(first, n, share).pvalue, rel=1e-9)
