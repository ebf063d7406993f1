"""Stories of figures that cannot all be right, through the real command; all data are invented."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
from support import POLICY, Document, command, drainage, write_tree

OPEN = {**POLICY, "rules": {"numbers-agree": {}}}


def gate(folder: Path, record: Document) -> tuple[int, dict[str, dict[str, Any]]]:
    """Exit status of the command on a tree of one record, and what each rule says."""
    tree = folder / "tree"
    tree.mkdir(exist_ok=True)
    write_tree(tree, record, policy=OPEN)
    report = folder / "verdict.json"
    done = command("weigh", str(tree), "--write", f"json={report}")
    (claim,) = json.loads(report.read_text(encoding="utf-8"))["claims"]
    return done.returncode, {each["rule"]: each for each in claim["rules"]}


def two_groups(df: Any, name: str = "two-sample t", **sample: Any) -> Document:
    groups = [{"name": "drained", "n": 24}, {"name": "undrained", "n": 24}]
    return drainage(
        test={"name": name, "statistic": "t", "value": "2.03", "df": df, "p": "0.048"},
        estimate=...,
        sample={"unit": "plot", "groups": groups, **sample},
    )


def test_two_plots_are_missing_without_a_reason(tmp_path: Path) -> None:
    """With df 44 or 46 p is 0.048 alike, so that p cannot see it."""
    status, rules = gate(tmp_path, two_groups(44))

    assert status == 1
    assert rules["numbers-agree"]["message"] == (
        "the df of t(44) = 2.03 imply 46 plots analysed, and n says 48 (24 + 24): 2 are missing without a reason; "
        "the policy wants figures that fit together."
    )
    assert "List those left out in sample.excluded with the reason" in rules["numbers-agree"]["remedy"]


@pytest.mark.parametrize(
    "record",
    [
        two_groups(46),
        two_groups(44, excluded=[{"n": 2, "reason": "flooded"}]),
        two_groups("43.7", name="Welch t"),
        two_groups("43.7", name="t test"),
        two_groups(44, name="Welch t"),
    ],
)
def test_plots_that_are_accounted_for_stand(tmp_path: Path, record: Document) -> None:
    status, rules = gate(tmp_path, record)

    assert (status, rules["numbers-agree"]["outcome"]) == (0, "met")


@pytest.mark.parametrize(
    ("value", "low", "high", "p", "scale", "told"),
    [
        (2.4, 0.3, 4.5, 0.20, "linear", "the interval 0.3 to 4.5 excludes 0, which goes with p = 0.025"),
        (0.78, 0.60, 1.01, 0.03, "log", "the interval 0.6 to 1.01 includes 1, which goes with p = 0.061"),
    ],
)
def test_an_interval_that_does_not_match_p(
    tmp_path: Path, value: float, low: float, high: float, p: float, scale: str, told: str
) -> None:
    record = drainage(
        test={"name": "Wald", "p": p},
        estimate={
            "measure": "ratio" if scale == "log" else "difference",
            "value": value,
            "unit": "1",
            "scale": scale,
            "interval": {"level": 0.95, "low": low, "high": high},
        },
        sample={"unit": "plot", "n": 60},
    )

    status, rules = gate(tmp_path, record)

    assert (status, rules["numbers-agree"]["outcome"]) == (1, "short")
    assert told in rules["numbers-agree"]["message"]
    assert rules["numbers-agree"]["remedy"].startswith("Check the scale and the level, and say what is adjusted")


def test_seeds_are_no_items(tmp_path: Path) -> None:
    """Twelve standard deviations between seeds are 1.3 standard errors over items."""
    record = drainage(
        claim="The model beats 50 %.",
        test={"name": "z test", "statistic": "z", "value": 12, "p": "<0.001"},
        estimate={"measure": "accuracy", "value": 56, "unit": "%", "null": 50, "standard_error": 0.5},
        sample={"unit": "item", "n": 120},
    )

    status, rules = gate(tmp_path, record)

    assert status == 1
    assert rules["numbers-agree"]["message"] == (
        "a standard error of 0.5 would take 9,856 independent items, and there are 120: theirs is 4.5, 1.3 of "
        "which lie between the estimate and 50 (p = 0.19, exact binomial 0.24, 95 % interval 47.1 to 64.9); the "
        "policy "
        "wants figures that fit together."
    )


@pytest.mark.parametrize(("sizes", "status"), [((50_000, 51_200), 1), ((50_310, 49_690), 0)])
def test_a_split_that_chance_does_not_give(tmp_path: Path, sizes: tuple[int, int], status: int) -> None:
    record = drainage(
        test={"name": "z", "statistic": "z", "value": "4.10", "p": "0.00004"},
        estimate=...,
        sample={
            "unit": "user",
            "planned_split": [1, 1],
            "groups": [{"name": "new", "n": sizes[0]}, {"name": "old", "n": sizes[1]}],
        },
    )

    found, rules = gate(tmp_path, record)

    assert (found, rules["planned-split"]["outcome"]) == (status, "short" if status else "met")


def test_a_holm_adjusted_p_beside_its_raw_statistic_stands(tmp_path: Path) -> None:
    """The family of five makes 0.04 of 0.008; a family of two could not."""
    test = {"name": "z", "statistic": "z", "value": "2.652", "p": "0.04", "p_kind": "adjusted"}
    family = {"name": "growth", "size": 5, "procedure": "holm"}

    five = gate(tmp_path, drainage(test=test, estimate=..., sample=..., family=family))[1]
    two = gate(tmp_path, drainage(test=test, estimate=..., sample=..., family={**family, "size": 2}))[1]

    assert five["numbers-agree"]["outcome"] == "met"
    assert (
        "by holm in a family of 2 the raw result gives an adjusted p of 0.00799 to 0.016"
        in two["numbers-agree"]["message"]
    )


RATIO = {"unit": "1", "interval": {"level": 0.95, "low": "0.60", "high": "1.01"}}


def counted(*events: tuple[int, int]) -> Document:
    return {"unit": "patient", "groups": [{"name": f"arm {n}", "events": e, "n": n} for e, n in events]}


def test_a_hazard_ratio_that_does_not_say_its_scale_is_caught(tmp_path: Path) -> None:
    """The interval includes 1 and p is below .05; the interval is symmetric on the log scale."""
    estimate = {"measure": "hazard ratio", "value": "0.78", **RATIO}
    told = drainage(test={"name": "Wald", "p": "0.03"}, estimate=estimate, sample=...)
    right = drainage(test={"name": "Wald", "p": "0.061"}, estimate=estimate, sample=...)

    status, rules = gate(tmp_path, told)

    assert (status, gate(tmp_path, right)[0]) == (1, 0)
    assert rules["numbers-agree"]["message"] == (
        "the interval 0.60 to 1.01 includes 1, which goes with p = 0.061 on the log scale, and 0.03 is reported; "
        "the policy wants figures that fit together."
    )
    assert "; say in estimate.scale on which scale the ratio is. Rule out" in rules["numbers-agree"]["remedy"]


@pytest.mark.parametrize(
    ("test", "estimate", "sample"),
    [
        pytest.param(
            {"name": "Poisson regression", "statistic": "z", "value": "1.57", "p": "0.12"},
            {
                "measure": "incidence rate ratio",
                "value": "1.30",
                "interval": {"level": 0.95, "low": "0.94", "high": "1.81"},
            },
            {"unit": "person", "n": 210},
            id="a rate ratio on the log scale that does not say so",
        ),
        pytest.param(
            {"name": "chi-squared test", "statistic": "chi2", "value": "9.52", "df": 1, "p": "0.002"},
            {"measure": "relative risk reduction", "value": "50", "unit": "%"},
            counted((20, 100), (40, 100)),
            id="a relative risk reduction",
        ),
        pytest.param(
            {"name": "one-way ANOVA (Welch)", "statistic": "F", "value": "1.50", "df": [4, "17.0"], "p": "0.246"},
            None,
            {"unit": "plot", "n": 52, "groups": [{"name": f"g{n}", "n": n} for n in (10, 11, 5, 9, 17)]},
            id="an analysis of variance by Welch",
        ),
        pytest.param(
            {"name": "chi-squared test", "statistic": "chi2", "value": "3.11", "df": 1, "p": "0.078"},
            {
                "measure": "risk difference",
                "value": "0.25",
                "unit": "1",
                "interval": {"level": 0.95, "low": "0.015", "high": "0.485"},
            },
            counted((22, 32), (14, 32)),
            id="a correction for continuity beside an interval without",
        ),
        pytest.param(
            {"name": "Welch t", "statistic": "t", "value": "2.02", "df": "9.8", "p": "0.072"},
            {
                "measure": "mean difference (bootstrap interval)",
                "value": "3.16",
                "unit": "g",
                "interval": {"level": 0.95, "low": "0.22", "high": "6.10"},
            },
            {"unit": "plot"},
            id="a bootstrap interval beside Welch's t",
        ),
    ],
)
def test_right_output_of_another_form_stands(
    tmp_path: Path, test: Document, estimate: Document | None, sample: Document
) -> None:
    record = drainage(test=test, estimate=... if estimate is None else estimate, sample=sample, alternative=...)

    status, rules = gate(tmp_path, record)

    assert (status, rules["numbers-agree"]["outcome"]) == (0, "met")


@pytest.mark.parametrize(
    ("test", "estimate", "told"),
    [
        (
            {"name": "chi-squared test", "statistic": "chi2", "value": "9.52", "df": 1, "p": "0.002"},
            {"measure": "relative risk reduction", "value": "40", "unit": "%"},
            "20 of 100 and 40 of 100 give -100 or 50 as relative risk reduction",
        ),
        (
            {"name": "chi-squared test", "statistic": "chi2", "value": "7.90", "df": 1, "p": "0.005"},
            {
                "measure": "risk difference",
                "value": "-0.20",
                "unit": "1",
                "interval": {"level": 0.95, "low": "-0.45", "high": "0.05"},
            },
            "the interval -0.45 to 0.05 includes 0, which goes with p = 0.12, and 0.005 is reported",
        ),
    ],
)
def test_wrong_figures_of_the_same_forms_fall_short(
    tmp_path: Path, test: Document, estimate: Document, told: str
) -> None:
    sample = counted((20, 100), (40, 100))

    status, rules = gate(tmp_path, drainage(test=test, estimate=estimate, sample=sample, alternative=...))

    assert status == 1
    assert told in rules["numbers-agree"]["message"]
