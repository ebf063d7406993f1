"""Rule `no-effect-support`: absence of evidence is no evidence of absence."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import pytest
from scipy import stats
from support import Document, drainage, judge

RULE = "no-effect-support"
#: 20 + 20 plots, standardised difference .12, p = .71: TOST p = .29 and a 90 % interval of -.41 to .65.
FLAT: Document = {
    "aim": "equivalence",
    "test": {"name": "two-sample t", "statistic": "t", "value": 0.3795, "df": 38, "p": "0.71"},
    "estimate": {
        "measure": "standardised difference",
        "value": 0.12,
        "unit": "1",
        "standard_error": 0.3162,
        "margin": [-0.30, 0.30],
    },
    "sample": {"unit": "plot", "groups": [{"name": "a", "n": 20}, {"name": "b", "n": 20}]},
    "alternative": ...,
}


def flat(**changes: Any) -> Document:
    """The flat result with other values."""
    return drainage(**{**FLAT, **changes})


def test_equivalence_from_a_large_p_alone_falls_short(tmp_path: Path) -> None:
    """P = .71 is no evidence of no effect: the interval crosses the margin, so it is inconclusive."""
    answer = judge(tmp_path, flat())

    said = answer.rule(RULE)
    assert (answer.status, said["outcome"]) == (1, "short")
    assert said["observed"] == pytest.approx(0.286, abs=5e-4)
    assert said["message"] == (
        "The 90 % interval -0.413 to 0.653 (p = 0.286 by the one-sided tests) leaves the margin -0.3 to 0.3; the "
        "policy wants it inside for a claim of equivalence."
    )
    assert said["remedy"] == "As it stands, call it inconclusive: neither a difference nor its absence was shown."
    assert answer.rule("false-positive-risk")["outcome"] == "does-not-apply"
    assert answer.claim()["evidence"] is None


def test_without_a_margin_the_message_is_another(tmp_path: Path) -> None:
    answer = judge(tmp_path, flat(estimate={"measure": "d", "value": 0.12, "unit": "1", "standard_error": 0.3162}))

    assert answer.status == 1
    assert answer.rule(RULE)["message"].startswith(
        "The claim is one of equivalence and gives no margin (t(38) = 0.3795"
    )
    assert answer.rule(RULE)["remedy"].startswith("Give estimate.margin as it was set before the data")


@pytest.mark.parametrize(
    ("estimate", "outcome"),
    [
        ({"value": 0.02, "standard_error": 0.1, "margin": [-0.3, 0.3]}, "met"),
        # A 95 % interval is rescaled to 90 % where it is symmetric: 0.11 +- 0.2, and +- 0.166 inside 0.28.
        ({"value": 0.11, "interval": {"level": 0.95, "low": -0.09, "high": 0.31}, "margin": [-0.28, 0.28]}, "met"),
        # One that is not symmetric stands as it is, and is wide enough at 90 % or more.
        ({"value": 0.05, "interval": {"level": 0.9, "low": -0.2, "high": 0.29}, "margin": [-0.3, 0.3]}, "met"),
        ({"value": 0.05, "interval": {"level": 0.95, "low": -0.2, "high": 0.35}, "margin": [-0.3, 0.3]}, "short"),
        (
            {"value": 0.05, "interval": {"level": 0.8, "low": -0.2, "high": 0.29}, "margin": [-0.3, 0.3]},
            "undecided",
        ),
        ({"value": 0.05, "margin": [-0.3, 0.3]}, "undecided"),
    ],
)
def test_the_interval_of_level_one_minus_two_alpha_decides(
    tmp_path: Path, estimate: Document, outcome: str
) -> None:
    record = flat(test={"name": "z", "p": 0.5}, estimate={"measure": "difference", "unit": "1", **estimate})

    answer = judge(tmp_path, record)

    assert answer.rule(RULE)["outcome"] == outcome
    assert answer.status == {"met": 0, "short": 1, "undecided": 3}[outcome]


@pytest.mark.parametrize(
    ("tail", "value", "outcome"),
    [("greater", 0.1, "met"), ("greater", -0.2, "short"), ("less", -0.1, "met"), ("less", 0.2, "short")],
)
def test_noninferiority_looks_at_the_side_that_is_worse(
    tmp_path: Path, tail: str, value: float, outcome: str
) -> None:
    """The other end of the margin does not matter: far better is not inferior."""
    record = flat(
        aim="noninferiority",
        test={"name": "z", "p": 0.01, "sides": 1, "tail": tail},
        estimate={"measure": "d", "value": value * 10 if outcome == "met" else value, "unit": "1",
                  "standard_error": 0.1, "margin": [-0.3, 0.3]},
    )  # fmt: skip

    assert judge(tmp_path, record).rule(RULE)["outcome"] == outcome


def test_a_ratio_is_set_against_its_margin_on_the_log_scale(tmp_path: Path) -> None:
    """Bioequivalence within 0.80 to 1.25: ratio 0.96 with a standard error of its log of 0.06 (t, 22 df)."""
    record = flat(
        test={"name": "t", "statistic": "t", "value": -0.68, "df": 22, "p": 0.504},
        estimate={
            "measure": "ratio of means",
            "value": 0.96,
            "scale": "log",
            "standard_error": 0.06,
            "margin": [0.8, 1.25],
        },
    )

    said = judge(tmp_path, record).rule(RULE)

    low = 0.96 * math.exp(-stats.t.ppf(0.95, 22) * 0.06)
    assert said["outcome"] == "met"
    assert low > 0.8
    expected = max(
        stats.t.sf((math.log(0.96) - math.log(0.8)) / 0.06, 22),
        stats.t.sf((math.log(1.25) - math.log(0.96)) / 0.06, 22),
    )
    assert said["observed"] == pytest.approx(expected, rel=1e-9)


def test_a_claim_of_a_difference_is_none_of_its_business(tmp_path: Path) -> None:
    rules = [each["rule"] for each in judge(tmp_path, drainage()).claim()["rules"]]

    assert RULE not in rules
