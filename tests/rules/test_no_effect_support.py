"""Rule `no-effect-support`: absence of evidence is no evidence of absence."""

from __future__ import annotations

import json
import math
from pathlib import Path
from typing import Any

import pytest
from scipy import stats
from support import Document, drainage, judge, write_tree

from gatecheck.cli import main
from gatecheck.weigh.default_prior import log_bf_r, log_bf_t
from gatecheck.weigh.proportions import log_bf_proportions
from gatecheck.weigh.score import score_interval
from gatecheck.weigh.sizes_for_power import n_equivalence_parallel

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
        "policy wants it inside for a claim of equivalence. The data fit no effect 3.06 times better than an "
        "effect under the default prior of its test; if there is no effect, the tests had a power below 0.001 % to "
        "show it."
    )
    assert said["remedy"] == (
        "As it stands, call it inconclusive: neither a difference nor its absence was shown; 191 plots per group "
        "would give a power of 80 %."
    )
    assert answer.rule("false-positive-risk")["outcome"] == "does-not-apply"
    assert answer.claim()["evidence"] is None


def test_without_a_margin_the_message_is_another(tmp_path: Path) -> None:
    answer = judge(tmp_path, flat(estimate={"measure": "d", "value": 0.12, "unit": "1", "standard_error": 0.3162}))

    assert answer.status == 1
    assert answer.rule(RULE)["message"].startswith(
        "The claim is one of equivalence and gives no margin (t(38) = 0.3795"
    )
    assert "; 90 % interval by its standard error -0.413 to 0.653);" in answer.rule(RULE)["message"]
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


def test_the_size_for_a_ratio_is_that_of_its_logarithm(tmp_path: Path) -> None:
    """12 + 12 with a standard error of the log of 0.15: by its coefficient of variation in parallel groups."""
    record = flat(
        test={"name": "t", "statistic": "t", "value": math.log(0.96) / 0.15, "df": 22},
        estimate={
            "measure": "ratio of means",
            "value": 0.96,
            "scale": "log",
            "standard_error": 0.15,
            "margin": [0.8, 1.25],
        },
        sample={"unit": "volunteer", "groups": [{"name": "a", "n": 12}, {"name": "b", "n": 12}]},
    )

    said = judge(tmp_path, record).rule(RULE)

    cv = math.sqrt(math.expm1(6 * 0.15**2))
    total = float(n_equivalence_parallel(1.0, cv, 0.8, low=0.8, high=1.25, alpha=0.05))
    ends = [0.96 * math.exp(sign * stats.t.ppf(0.95, 22) * 0.15) for sign in (-1, 1)]
    assert said["message"].startswith(f"The 90 % interval {ends[0]:.3g} to {ends[1]:.3g} (p = ")
    assert "The data fit no effect" in said["message"]
    assert said["remedy"].endswith(f"; {total / 2:.0f} volunteers per group would give a power of 80 %.")


def test_a_claim_of_a_difference_is_none_of_its_business(tmp_path: Path) -> None:
    rules = [each["rule"] for each in judge(tmp_path, drainage()).claim()["rules"]]

    assert RULE not in rules


def told(folder: Path, capsys: pytest.CaptureFixture[str], record: Document) -> str:
    """What `explain` tells of a record, in one line."""
    main(["explain", record["id"], str(write_tree(folder, record))])
    return " ".join(capsys.readouterr().out.split())


def test_explain_tells_the_support_of_a_claim_that_stands(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """250 + 250: the study could show it (power by simulation and by the normal approximation about .95)."""
    error = math.sqrt(2 / 250)
    record = flat(
        test={"name": "two-sample t", "statistic": "t", "value": 0.2 / 3, "df": 498},
        estimate={
            "measure": "d",
            "value": 0.2 / 3 * error,
            "unit": "1",
            "standard_error": error,
            "margin": [-0.3, 0.3],
        },
        sample={"unit": "plot", "groups": [{"name": "a", "n": 250}, {"name": "b", "n": 250}]},
    )

    text = told(tmp_path, capsys, record)

    factor = math.exp(-float(log_bf_t(0.2 / 3, 498, 125, math.sqrt(2) / 2)))
    approximate = 2 * stats.norm.cdf(0.3 / error - stats.t.ppf(0.95, 498)) - 1
    assert f"The data fit no effect {factor:.3g} times better than an effect under the default prior" in text
    assert f"the tests had a power of {100 * approximate:.2g} % to show it" in text
    assert "lies within the margin -0.3 to 0.3" in text
    assert "p <0.0001" not in text
    assert "To mend" not in text


def test_a_tiny_p_is_told_as_a_bound(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    estimate = {"measure": "d", "value": 0.01, "unit": "1", "standard_error": 0.02, "margin": [-0.3, 0.3]}
    record = flat(test={"name": "z", "statistic": "z", "value": 0.5}, estimate=estimate)

    text = told(tmp_path, capsys, record)

    assert "(p <0.0001 by the one-sided tests)" in text
    assert "the tests had a power above 99.999 % to show it" in text


def test_the_size_told_gives_the_power_and_one_less_does_not(tmp_path: Path) -> None:
    """By the noncentral t, where one side alone is tested."""
    record = flat(
        aim="noninferiority",
        test={"name": "t", "statistic": "t", "value": 0.3795, "df": 38, "sides": 1, "tail": "greater"},
    )
    record["estimate"] = {**record["estimate"], "value": -0.12}

    said = judge(tmp_path, record).rule(RULE)

    def power(n: int) -> float:
        critical = stats.t.ppf(0.95, 2 * n - 2)
        return float(stats.nct.sf(critical, 2 * n - 2, 0.3 / (0.3162 * math.sqrt(20 / n))))

    n = next(n for n in range(2, 1000) if power(n) >= 0.8)
    assert said["remedy"].endswith(f"; {n} plots per group would give a power of 80 %.")
    assert f"the tests had a power of {100 * power(20):.2g} % to show it." in said["message"]
    assert "default prior" not in said["message"]


@pytest.mark.parametrize(
    ("sample", "design", "expected"),
    [
        # Pairs: the statistic has one df less than pairs, and their number is told as it is.
        ({"unit": "pair", "n": 39}, {}, "373 pairs would"),
        ({"unit": "plot", "groups": [{"name": "a", "n": 39}, {"name": "b", "n": 39}]}, {}, "373 plots would"),
        # Unequal groups are told as a whole.
        ({"unit": "plot", "groups": [{"name": "a", "n": 10}, {"name": "b", "n": 30}]}, {}, "382 plots would"),
        # Without a number of units only the ratio can be told.
        ({"unit": "plot"}, {}, "a sample 9.56 times as large would"),
        ({"unit": "plot"}, {"test": {"name": "z", "statistic": "z", "value": 0.3795}}, "9.51 times as large would"),
    ],
)
def test_the_size_is_told_as_the_sample_was_counted(
    tmp_path: Path, sample: Document, design: Document, expected: str
) -> None:
    """By the normal ((1.645 + 1.282) .3162/.3)^2 = 9.51 times as many, and by t one or two units more."""
    remedy = judge(tmp_path, flat(sample=sample, **design)).rule(RULE)["remedy"]

    assert expected in remedy


def test_a_study_with_the_power_is_not_told_to_be_larger(tmp_path: Path) -> None:
    """It had the power, and the estimate lies near the margin."""
    estimate = {"measure": "d", "value": 0.2, "unit": "1", "standard_error": 0.09, "margin": [-0.3, 0.3]}

    said = judge(tmp_path, flat(estimate=estimate)).rule(RULE)

    assert said["outcome"] == "short"
    assert "power of 9" in said["message"]
    assert said["remedy"] == "As it stands, call it inconclusive: neither a difference nor its absence was shown."


@pytest.mark.parametrize("value", [-0.9, 0.9])
def test_an_interval_beyond_the_margin_is_not_inconclusive(tmp_path: Path, value: float) -> None:
    estimate = {"measure": "d", "value": value, "unit": "1", "standard_error": 0.1, "margin": [-0.3, 0.3]}

    said = judge(tmp_path, flat(estimate=estimate, test={"name": "z", "statistic": "z", "value": 9.0})).rule(RULE)

    assert said["remedy"] == "As it stands, do not claim it: the whole interval lies beyond the margin."
    factor = math.exp(81 / 2) / math.sqrt(40)
    assert f"fit an effect under the default prior of its test {factor:.3g} times better" in said["message"]


def test_no_effect_beyond_the_margin_has_no_power_to_show(tmp_path: Path) -> None:
    """Superiority by a margin: with no effect it must not be shown."""
    estimate = {"measure": "d", "value": 0.3, "unit": "1", "standard_error": 0.1, "margin": [0.2, 0.9]}

    said = judge(tmp_path, flat(estimate=estimate)).rule(RULE)

    assert said["outcome"] == "short"
    assert "power" not in said["message"] + said["remedy"]


@pytest.mark.parametrize(
    ("test", "estimate", "expected"),
    [
        # The data may favour an effect, and still lie within the margin.
        (
            {"name": "z", "statistic": "z", "value": 10.0},
            {"value": 0.1, "standard_error": 0.01},
            f"fit an effect under the default prior of its test {math.exp(50) / 20:.3g} times better",
        ),
        (
            {"name": "z", "statistic": "z", "value": 20.0},
            {"value": 0.2, "standard_error": 0.01},
            "an effect under the default prior of its test more than 1e+26 times better than no effect",
        ),
        # t of a correlation and the root of chi-squared or F on one df are held against the estimate too.
        (
            {"name": "Pearson", "statistic": "r", "value": 0.05, "df": 398},
            {"value": 0.05, "standard_error": 0.05},
            f"fit no effect {math.exp(-float(log_bf_r(0.05, 400, 1))):.3g} times better",
        ),
        (
            {"name": "F", "statistic": "F", "value": 0.25, "df": [1, 398]},
            {"value": 0.05, "standard_error": 0.1},
            "fit no effect 17.6 times better",
        ),
        (
            {"name": "chi-squared", "statistic": "chi2", "value": 5.991465, "df": 1},
            {"value": 0.2447746, "standard_error": 0.1},
            "about equally",
        ),
        # Of several effects at once there is no such factor, and none against a margin.
        (
            {"name": "F", "statistic": "F", "value": 0.25, "df": [2, 398]},
            {"value": 0.05, "standard_error": 0.1},
            "",
        ),
        ({"name": "t", "statistic": "t", "value": 2.5, "df": 398}, {"value": 0.05, "standard_error": 0.1}, ""),
        (
            {"name": "t", "statistic": "t", "value": 0.5, "df": 398, "sides": 1, "tail": "greater"},
            {"value": 0.05, "standard_error": 0.1},
            "",
        ),
    ],
)
def test_the_factor_is_told_where_the_test_is_one_against_no_effect(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], test: Document, estimate: Document, expected: str
) -> None:
    record = flat(
        test=test,
        estimate={"measure": "effect", "unit": "1", "margin": [-0.3, 0.3], **estimate},
        sample={"unit": "plot", "n": 400},
    )

    text = told(tmp_path, capsys, record)

    assert expected in text if expected else "default prior" not in text


def proportions(events: tuple[int, int], n: tuple[int, int], **estimate: Any) -> Document:
    """Two proportions with their counts, and neither standard error nor interval."""
    groups = [{"name": name, "n": each, "events": x} for name, each, x in zip("ab", n, events, strict=True)]
    given = {"measure": "difference of proportions", "unit": "1", "margin": [-0.05, 0.05], **estimate}
    return flat(
        test={"name": "two-proportion z", "p": 0.5}, estimate=given, sample={"unit": "patient", "groups": groups}
    )


@pytest.mark.parametrize(
    ("events", "estimate", "outcome", "scale"),
    [
        ((20, 22), {"value": 0.0033333333333333335}, "met", 1),
        ((22, 20), {"value": "-0.003"}, "met", 1),
        ((22, 20), {"value": 0.3333333333333333, "unit": "percentage point", "margin": [-5, 5]}, "met", 100),
        (
            (22, 20),
            {"value": 0.3333333333333333, "unit": "percentage point", "margin": [-0.05, 0.05]},
            "short",
            100,
        ),
        ((22, 50), {"value": -0.04666666666666667}, "short", 1),
    ],
)
def test_a_difference_of_proportions_is_tested_by_score_on_its_counts(
    tmp_path: Path, events: tuple[int, int], estimate: Document, outcome: str, scale: float
) -> None:
    said = judge(tmp_path, proportions(events, (600, 600), **estimate)).rule(RULE)

    ordered = events if (events[0] < events[1]) == (float(estimate["value"]) < 0) else events[::-1]
    low, high = map(float, score_interval(ordered[0], 600, ordered[1], 600, stats.norm.isf(0.05)))
    assert said["outcome"] == outcome
    text = json.dumps(said)
    if outcome == "short":
        assert f"The 90 % interval {low * scale:.3g} to {high * scale:.3g} (p = " in text
        factor = math.exp(abs(float(log_bf_proportions(events[0], 600, events[1], 600))))
        assert f"{factor:.3g} times better than" in text
    margin = 0.05 if scale == 1 else estimate["margin"][1] / 100
    assert (said["observed"] <= 0.05) == (outcome == "met")
    assert (low > -margin and high < margin) == (outcome == "met")


def test_no_event_at_all_is_no_certainty(tmp_path: Path) -> None:
    """0 of 20 against 0 of 20: the interval is wide though no standard error could be told."""
    said = judge(tmp_path, proportions((0, 0), (20, 20), value=0)).rule(RULE)

    assert said["message"].startswith("The 90 % interval -0.122 to 0.122 (p = 0.")
    assert said["outcome"] == "short"
    assert "power" not in said["message"] + said["remedy"]


@pytest.mark.parametrize(
    ("events", "n", "estimate"),
    [
        # Near zero without a unit: a proportion, or percentage points.
        ((20, 20), (600, 600), {"value": 0, "unit": None}),
        # No difference that these counts make.
        ((20, 22), (600, 600), {"value": 0.03}),
        ((20, 22), (600, 600), {"value": 0.91, "scale": "log", "margin": [0.8, 1.25]}),
        ((20, 22), (600, 600), {"value": -0.0033333333333333335, "null": -0.001}),
        # A count that cannot be one.
        ((20, 22), (600, 0), {"value": -0.003}),
    ],
)
def test_counts_that_are_not_behind_the_estimate_are_left_alone(
    tmp_path: Path, events: tuple[int, int], n: tuple[int, int], estimate: Document
) -> None:
    answer = judge(tmp_path, proportions(events, n, **{k: v for k, v in estimate.items() if v is not None} | (
        {"unit": "difference"} if estimate.get("unit", "1") is None else {}
    )))  # fmt: skip

    assert answer.rule(RULE)["outcome"] == "undecided"
    assert "the events and n of both groups do" in answer.rule(RULE)["remedy"]


def test_groups_without_events_leave_it_undecided(tmp_path: Path) -> None:
    record = proportions((20, 22), (600, 600), value=-0.0033333333333333335)
    del record["sample"]["groups"][1]["events"]

    assert judge(tmp_path, record).rule(RULE)["outcome"] == "undecided"


def test_an_open_interval_serves_noninferiority(tmp_path: Path) -> None:
    """The side that the aim leaves open asks for no end of the interval."""
    record = flat(
        aim="noninferiority",
        test={"name": "z", "p": 0.01, "sides": 1, "tail": "greater"},
        estimate={
            "measure": "d",
            "value": 0.1,
            "unit": "1",
            "interval": {"level": 0.95, "low": -0.1},
            "margin": [-0.3, 0.3],
        },
    )

    assert judge(tmp_path, record).rule(RULE)["outcome"] == "met"
