"""Rule `practical-size`: significant is not the same as large enough to matter."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
from support import POLICY, Document, changed, drainage, judge, write_tree

from gatecheck.cli import main

RULE = "practical-size"
POLICY_ON = changed(POLICY, rules={RULE: {}})
#: 2.4 million users an arm, 10.00 % against 10.10 %: z = 3.64, interval .05 to .15, smallest effect .30 points.
LIFT: Document = {
    "claim": "A worthwhile lift in conversion.",
    "importance": True,
    "test": {"name": "two-proportion z", "statistic": "z", "value": 3.64, "p": "0.00027"},
    "estimate": {
        "measure": "difference",
        "value": "0.10",
        "unit": "points",
        "interval": {"level": 0.95, "low": "0.05", "high": "0.15"},
        "smallest_effect": "0.30",
    },
    "sample": {"unit": "user", "n": 4_800_000},
    "alternative": ...,
}


def lift(**changes: Any) -> Document:
    """The lift with other values."""
    return changed(drainage(**LIFT), **changes)


def test_a_trivial_effect_in_a_huge_sample_falls_short_of_importance(tmp_path: Path) -> None:
    answer = judge(tmp_path, lift(), policy=POLICY_ON)

    said = answer.rule(RULE)
    assert (answer.status, said["outcome"], said["limit"]) == (1, "short", 0.3)
    assert said["observed"] == pytest.approx(0.15)
    assert "is below the smallest effect of interest, 0.30" in said["message"]
    assert said["remedy"] == "The wording that the data allow: a difference smaller than we care about."


def test_the_claim_that_there_is_a_difference_stands(tmp_path: Path) -> None:
    """It says nothing of importance, so it is not held to the smallest effect unless the policy says so."""
    plain = lift(importance=..., claim="Conversion differs.")
    strict = changed(POLICY_ON, rules={RULE: {"claims": "all"}})
    (tmp_path / "a").mkdir()
    (tmp_path / "b").mkdir()

    assert judge(tmp_path / "a", plain, policy=POLICY_ON).status == 0
    assert judge(tmp_path / "b", plain, policy=strict).rule(RULE)["outcome"] == "short"


@pytest.mark.parametrize(
    ("changes", "outcome"),
    [
        ({"estimate__smallest_effect": "0.15"}, "met"),
        ({"estimate__smallest_effect": "0.12"}, "met"),
        ({"estimate__smallest_effect": "-0.30"}, "short"),
        ({"estimate__smallest_effect": ...}, "undecided"),
        ({"estimate__interval": ...}, "undecided"),
        ({"estimate": ...}, "undecided"),
    ],
)
def test_an_interval_that_reaches_it_stands_and_one_that_is_missing_is_undecided(
    tmp_path: Path, changes: Document, outcome: str
) -> None:
    answer = judge(tmp_path, lift(**changes), policy=POLICY_ON)

    assert answer.rule(RULE)["outcome"] == outcome
    assert answer.status == {"met": 0, "short": 1, "undecided": 3}[outcome]


@pytest.mark.parametrize(("smallest", "outcome"), [(1.5, "short"), (1.25, "met"), (0.6, "short")])
def test_a_ratio_is_measured_from_one_on_the_log_scale(tmp_path: Path, smallest: float, outcome: str) -> None:
    """Odds ratio 1.2 (1.1 to 1.31): wholly below 1.5, and as far from 1 as 0.6 is not."""
    estimate = {
        "measure": "odds ratio",
        "value": 1.2,
        "scale": "log",
        "interval": {"level": 0.95, "low": 1.1, "high": 1.31},
        "smallest_effect": smallest,
    }

    answer = judge(tmp_path, lift(test={"name": "Wald", "p": 0.00005}, estimate=estimate), policy=POLICY_ON)

    assert answer.rule(RULE)["outcome"] == outcome


def test_a_size_that_is_met_is_explained_too(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    write_tree(tmp_path, lift(estimate__smallest_effect="0.12"), policy=POLICY_ON)

    assert main(["explain", "drainage/earthworm-biomass", str(tmp_path)]) == 0

    assert "reaches the smallest effect of interest, 0.12." in " ".join(capsys.readouterr().out.split())


@pytest.mark.parametrize(
    ("changes", "message", "remedy"),
    [
        ({"smallest_effect": ...}, "the smallest effect of interest", "estimate.smallest_effect"),
        ({"interval": ...}, "an interval with two limits", "estimate.interval, or estimate.standard_error"),
        (
            {"smallest_effect": ..., "interval": ...},
            "the smallest effect of interest and an interval with two limits",
            "estimate.smallest_effect and estimate.interval, or estimate.standard_error",
        ),
    ],
)
def test_only_what_is_missing_is_asked_for(tmp_path: Path, changes: Document, message: str, remedy: str) -> None:
    record = lift(**{f"estimate__{name}": value for name, value in changes.items()})
    said = judge(tmp_path, record, policy=POLICY_ON).rule(RULE)

    assert said["outcome"] == "undecided"
    assert said["message"].endswith(f" does not give {message}.")
    assert said["remedy"] == f"Give {remedy}."


@pytest.mark.parametrize(
    ("scale", "value", "error", "smallest", "outcome", "told"),
    [
        # .10 with 1.96 standard errors of .0275: .0461 to .154. Odds ratio 1.2 with .0445: 1.10 to 1.31.
        ("linear", "0.10", 0.0275, 0.30, "short", "95 % interval by its standard error 0.0461 to 0.154"),
        ("linear", "0.10", 0.0275, 0.15, "met", ""),
        ("log", "1.20", 0.0445, 1.5, "short", "95 % interval by its standard error 1.1 to 1.31"),
        ("log", "1.20", 0.0445, 1.3, "met", ""),
    ],
)
def test_without_an_interval_the_standard_error_gives_one(  # one argument a column
    tmp_path: Path, scale: str, value: str, error: float, smallest: float, outcome: str, told: str
) -> None:
    measure = "odds ratio" if scale == "log" else "difference"
    estimate = {
        "measure": measure,
        "scale": scale,
        "value": value,
        "standard_error": error,
        "smallest_effect": smallest,
    }
    record = lift(test={"name": "Wald", "p": 0.0001}, estimate=estimate)
    said = judge(tmp_path, record, policy=POLICY_ON).rule(RULE)

    assert said["outcome"] == outcome
    assert told in said["message"]
