"""Figures that follow from others: tables of several groups, df, shares, differences of records, families."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from compare.deriving import alarms, judged, said_of
from scipy import stats
from statsmodels.stats.multitest import multipletests
from support import Document

from gatecheck.compare.many_proportions import forms_of

CHI2: Document = {"name": "chi-squared test", "statistic": "chi2", "value": "9.52", "df": 2}
ONE_WAY: Document = {"name": "one-way ANOVA", "statistic": "F", "value": "5.20", "df": [2, 57]}
REGRESSION: Document = {"name": "linear regression", "statistic": "F", "value": "5.20", "df": [3, 56]}
T34: Document = {"name": "two-sample t", "statistic": "t", "value": "2.21", "df": 34, "p": "0.034"}


def counted(*events: int, n: int = 100) -> Document:
    """A sample of groups of `n` units with so many events."""
    return {"unit": "plot", "groups": [{"name": f"g{k}", "n": n, "events": each} for k, each in enumerate(events)]}


def sized(*sizes: int, **more: object) -> Document:
    return {"unit": "plot", "groups": [{"name": f"g{k}", "n": n} for k, n in enumerate(sizes)], **more}


@pytest.mark.parametrize(
    ("value", "sample", "told"),
    [
        (
            "19.52",
            counted(20, 30, 40),
            "20 of 100, 30 of 100 and 40 of 100 give chi2 = 9.52 (Pearson) or 9.66 (likelihood ratio), and 19.52",
        ),
        ("30.3", counted(20, 30, 40, 20, 30, 40, 30), "20 of 100, 30 of 100, 40 of 100 and 1 more give chi2"),
    ],
)
def test_a_chi_squared_that_the_counts_of_several_groups_do_not_give(
    tmp_path: Path, value: str, sample: Document, told: str
) -> None:
    df = len(sample["groups"]) - 1

    outcome, message, _ = said_of(tmp_path, test={**CHI2, "value": value, "df": df}, sample=sample)

    assert outcome == "short"
    assert told in message


def test_every_power_divergence_fits_its_counts(tmp_path: Path) -> None:
    """By scipy, from random tables of three to six groups."""
    rng, records = np.random.default_rng(20310405), {}
    powers = {
        "Pearson": 1.0,
        "likelihood-ratio": 0.0,
        "Freeman-Tukey": -0.5,
        "modified": -1.0,
        "Neyman": -2.0,
        "own": 2 / 3,
    }
    for number in range(10):
        events = rng.integers(5, 60, int(rng.integers(3, 7)))
        for kind, power in {**powers, "Neyman": -2.0}.items():
            found = stats.chi2_contingency(np.stack([events, 90 - events]), lambda_=power)
            test = {**CHI2, "value": f"{found.statistic:.2f}", "df": len(events) - 1}
            records[f"{number}/{kind}"] = {"test": test, "sample": counted(*map(int, events), n=90)}

    assert len(records) == 60
    assert alarms(tmp_path, records) == {}


def test_other_forms_of_chi_squared_are_near_pearsons() -> None:
    """Of 20, 30 and 40 of 100, Pearson's by hand: 2 · 10² / 30 + 2 · 10² / 70, in 300 units."""
    table = np.array([[20.0, 30.0, 40.0], [80.0, 70.0, 60.0]])
    likelihood_ratio = stats.chi2_contingency(table, lambda_="log-likelihood").statistic

    forms = forms_of(table)

    assert forms[:3] == pytest.approx([200 / 30 + 200 / 70, likelihood_ratio, (200 / 30 + 200 / 70) * 299 / 300])
    assert all(9.0 < form < 11.0 for form in forms)


@pytest.mark.parametrize(
    ("test", "sample"),
    [
        (CHI2, counted(20, 30, 40)),
        ({**CHI2, "name": "stratified chi-squared", "value": "19.52"}, counted(20, 30, 40)),
        ({**CHI2, "name": "chi-squared for trend", "value": "9.4", "df": 1}, counted(20, 30, 40)),
        ({**CHI2, "value": "19.52"}, {**counted(20, 30, 40), "clusters": 12}),
        (
            {**CHI2, "value": "19.52"},
            {**counted(20, 30), "groups": [*counted(20, 30)["groups"], {"name": "c", "n": 9}]},
        ),
        ({**CHI2, "value": "19.52"}, counted(0, 0, 0)),
    ],
)
def test_tables_that_are_not_compared_raise_no_alarm(tmp_path: Path, test: Document, sample: Document) -> None:
    assert said_of(tmp_path, test=test, sample=sample)[0] == "met"


@pytest.mark.parametrize(
    ("test", "sample", "told"),
    [
        (
            {**ONE_WAY, "df": [3, 57]},
            sized(20, 20, 20, n=60),
            "a one-way analysis of variance of 3 groups has 2 df between them, and F(3, 57) = 5.20 is reported",
        ),
        ({**ONE_WAY, "df": [3, 56]}, sized(20, 20, 20, n=60), "has 2 df between them, and F(3, 56)"),
        ({**ONE_WAY, "df": [3, 57]}, sized(20, 20, 20), "has 2 df between them"),
        (
            {**REGRESSION, "df": [3, 70]},
            {"unit": "plot", "n": 60},
            "the 60 plots that there are, which allow 57",
        ),
        ({**REGRESSION, "df": [3, 58]}, {"unit": "plot", "n": 60}, "which allow 57 at most"),
        ({**ONE_WAY, "name": "ANOVA", "df": [3, 180]}, {"unit": "plot", "n": 60}, "which allow 177 at most"),
        (
            {**REGRESSION, "df": [3, 13]},
            {"unit": "plot", "n": 60, "clusters": 12},
            "the 12 clusters that",
        ),
    ],
)
def test_df_that_groups_or_units_do_not_allow(tmp_path: Path, test: Document, sample: Document, told: str) -> None:
    outcome, message, _ = said_of(tmp_path, test=test, sample=sample)

    assert outcome == "short"
    assert told in message


@pytest.mark.parametrize(
    ("test", "sample"),
    [
        (ONE_WAY, sized(20, 20, 20, n=60)),
        # More groups than those named; a contrast; measured again and again; Welch's; df not told.
        ({**ONE_WAY, "df": [3, 76]}, sized(20, 20, 20)),
        ({**ONE_WAY, "name": "one-way ANOVA, planned comparison", "df": [1, 57]}, sized(20, 20, 20, n=60)),
        ({**ONE_WAY, "name": "one-way repeated measures ANOVA", "df": [3, 57]}, sized(20, 20, 20)),
        ({**ONE_WAY, "name": "one-way ANOVA (Welch)", "df": [2, "38.0"]}, sized(20, 20, 20, n=60)),
        ({"name": "one-way ANOVA", "statistic": "F", "value": "5.20"}, sized(20, 20, 20, n=60)),
        ({**ONE_WAY, "df": [3, 57]}, {"unit": "plot", "n": 61, "groups": [{"name": "a", "n": 61}]}),
        (REGRESSION, {"unit": "plot", "n": 60}),
        ({**REGRESSION, "df": [3, 57]}, {"unit": "plot", "n": 60}),
        ({**ONE_WAY, "name": "ANOVA", "df": [3, 177]}, {"unit": "plot", "n": 60}),
    ],
)
def test_df_that_may_be_right_raise_no_alarm(tmp_path: Path, test: Document, sample: Document) -> None:
    assert said_of(tmp_path, test=test, sample=sample)[:2] == ("met", "")


def share(measure: str, value: object, unit: str | None = "%", **more: object) -> Document:
    return {"measure": measure, "value": value, **({} if unit is None else {"unit": unit}), **more}


@pytest.mark.parametrize(
    ("estimate", "told"),
    [
        (
            share("percentage", "37"),
            "no count of 18 plots is a share of 37 %; the nearest shares are 33.33 to",
        ),
        (share("percentage", 37), "is a share of 37 %; the nearest shares are 33.33 to 38.89 %"),
        (share("Percentage", "37", None), "the nearest shares are 33.33 to 38.89;"),
        (share("proportion", "0.37", "1"), "a share of 0.37; the nearest shares are 0.3333 to 0.3889;"),
        (share("observed prevalence", "0.37", None), "the nearest shares are 0.3333 to 0.3889;"),
        (share("percentage of plots with mould", "37"), "no count of 18 plots is a share of 37 %"),
        (share("percentage", 39, interval={"level": 0.95, "low": "17.3", "high": "64.3"}), "a share of 39 %"),
    ],
)
def test_a_share_that_no_count_gives(tmp_path: Path, estimate: Document, told: str) -> None:
    outcome, message, remedy = said_of(tmp_path, estimate=estimate, sample={"unit": "plot", "n": 18})

    assert outcome == "short"
    assert told in message
    assert remedy.startswith("Check the share and n, and give the events of the group.")


@pytest.mark.parametrize(
    ("estimate", "more"),
    [
        (share("percentage", "39"), {}),
        (share("percentage", "38.9"), {}),
        (share("percentage", "0"), {}),
        (share("percentage", "<37"), {}),
        # Not a share of so many units: of ground, of something else, a mean, of a model, weighted, of parts of n.
        (share("percentage cover", "37"), {}),
        (share("percentage of seeds", "37"), {}),
        (share("mean percentage", "37"), {}),
        (share("percentage", "37", "days"), {}),
        (share("weighted percentage", "37"), {}),
        (share("percentage", "37"), {"covariates": ["age"]}),
        (share("percentage", "37"), {"test": {"name": "one-sample t", "statistic": "t", "value": "1.2", "df": 17}}),
        (share("percentage", "37"), {"test": {"name": "t test"}}),
        (share("percentage", "37"), {"test": {"name": "weighted"}}),
        (share("percentage", "37"), {"sample": {"unit": "plot", "n": 18, "clusters": 3}}),
        (share("percentage", "37"), {"sample": sized(9, 9)}),
        (share("percentage", "37"), {"sample": {"groups": [{"name": "a", "n": 18, "mean": "37.0", "sd": "4.1"}]}}),
        (share("percentage", "37"), {"sample": sized(17, n=18)}),
        (share("percentage", "37"), {"sample": {"unit": "plot"}}),
    ],
)
def test_shares_that_may_be_right_raise_no_alarm(tmp_path: Path, estimate: Document, more: Document) -> None:
    assert said_of(tmp_path, **{"estimate": estimate, "sample": {"unit": "plot", "n": 18}, **more})[:2] == (
        "met",
        "",
    )


def effect(value: str, error: str, measure: str = "mean difference", **more: object) -> Document:
    return {"estimate": {"measure": measure, "value": value, "standard_error": error, "unit": "g", **more}}


WET, DRY = effect("0.60", "0.25"), effect("0.35", "0.25")


def test_a_difference_that_is_not_that_of_the_two_records(tmp_path: Path) -> None:
    own = {"compares": ["wet", "dry"], **effect("1.03", "0.355", "difference of effects")}

    said = judged(tmp_path, {"wet": WET, "dry": DRY, "both": own}).rule("numbers-agree", "both")

    assert said["outcome"] == "short"
    assert "wet and dry differ by 0.25, and 1.03 is reported as their difference; the policy" in said["message"]
    assert said["remedy"].startswith("Take the difference and the two effects from the same model.")


def test_a_ratio_of_ratios_is_told_as_a_factor(tmp_path: Path) -> None:
    wet, dry = (effect(value, "0.10", "odds ratio", scale="log", unit="1") for value in ("3.00", "1.50"))
    own = {"compares": ["wet", "dry"], **effect("4.00", "0.14", "ratio of odds ratios", scale="log", unit="1")}

    message = judged(tmp_path, {"wet": wet, "dry": dry, "both": own}).rule("numbers-agree", "both")["message"]

    assert "wet and dry differ by a factor of 2, and 4.00 is reported as their difference" in message


@pytest.mark.parametrize(
    "own",
    [
        effect("0.25", "0.355", "difference of effects"),
        effect("-0.25", "0.355", "difference of effects"),
        # Another model of the same data is near; the coefficient of an interaction may be a part of the difference.
        effect("0.30", "0.355", "difference in differences"),
        effect("1.03", "0.355", "interaction coefficient"),
        effect("1.03", "0.355", "difference of effects", unit="kg"),
        {**effect("1.03", "0.355", "difference of effects"), "covariates": ["slope"]},
        {**effect("1.03", "0.355", "difference of effects"), "test": {"name": "linear mixed model"}},
        {"test": {"name": "interaction"}},
    ],
)
def test_differences_that_may_be_right_raise_no_alarm(tmp_path: Path, own: Document) -> None:
    records = {"wet": WET, "dry": DRY, "both": {"compares": ["wet", "dry"], **own}}

    assert alarms(tmp_path, records) == {}


def test_effects_that_cross_no_difference_within_rounding(tmp_path: Path) -> None:
    records = {
        "wet": effect("0.6", "0.2"), "dry": effect("0.6", "0.2"),
        "both": {"compares": ["wet", "dry"], **effect("0.9", "0.3", "difference of effects")},
    }  # fmt: skip

    assert list(alarms(tmp_path, records)) == ["both"]


def test_ratios_that_are_endlessly_apart_are_told(tmp_path: Path) -> None:
    wet, dry = (effect(value, "0.10", "odds ratio", scale="log", unit="1") for value in ("1e300", "1e-300"))
    own = {"compares": ["wet", "dry"], **effect("4.00", "0.14", "ratio of odds ratios", scale="log", unit="1")}

    found = alarms(tmp_path, {"wet": wet, "dry": dry, "both": own})

    assert "differ by a factor of 1.01e+304" in found["both"]


def member(p: str, adjusted: str, procedure: str = "holm", size: int = 4) -> Document:
    family = {"name": procedure, "size": size, "procedure": procedure, "adjusted_p": adjusted}
    return {"test": {"name": "z", "statistic": "z", "p": p}, "family": family}


def test_an_adjusted_p_that_the_whole_family_does_not_give(tmp_path: Path) -> None:
    """Holm's steps: 4 · 0.008, 3 · 0.012, 2 · 0.04, 0.2; without one member the family only bounds its p."""
    given = zip(("0.008", "0.012", "0.040", "0.200"), ("0.032", "0.024", "0.080", "0.200"), strict=True)
    records = {f"m{place}": member(p, adjusted) for place, (p, adjusted) in enumerate(given)}

    found = alarms(tmp_path, records)

    assert list(found) == ["m1"]
    assert (
        "by holm in a family of 4 the raw result gives an adjusted p of 0.0345 to 0.0375, and 0.024 is"
        in found["m1"]
    )
    del records["m3"]
    (tmp_path / "r003.json").unlink()
    assert alarms(tmp_path, records) == {}


def test_families_adjusted_by_another_program_agree(tmp_path: Path) -> None:
    """By statsmodels, from p-values in all digits, both rounded to three places."""
    rng, records = np.random.default_rng(20310406), {}
    methods = {
        "bonferroni": "bonferroni", "holm": "holm", "hochberg": "simes-hochberg", "hommel": "hommel",
        "benjamini-hochberg": "fdr_bh", "benjamini-yekutieli": "fdr_by",
    }  # fmt: skip
    for procedure, method in methods.items():
        raw = rng.uniform(0.001, 0.2, 7)
        for place, (p, adjusted) in enumerate(zip(raw, multipletests(raw, method=method)[1], strict=True)):
            records[f"{procedure}/{place}"] = member(f"{p:.3f}", f"{adjusted:.3f}", procedure, 7)

    assert len(records) == 42
    assert alarms(tmp_path, records) == {}


@pytest.mark.parametrize(
    ("low", "high", "told"),
    [
        ("-0.34", "8.06", "the limits of the interval -0.34 to 8.06 lie at unlike distances from the estimate 4.2"),
        ("0.34", "8.26", "the limits of the interval 0.34 to 8.26 lie at unlike distances"),
        ("0.34", "8.60", "the limits of the interval 0.34 to 8.60 lie at unlike distances"),
        (
            "-0.34",
            "8.40",
            "the interval -0.34 to 8.40 includes 0, which goes with p = 0.069, and 0.034",
        ),
    ],
)
def test_limits_that_the_error_of_a_t_does_not_give(tmp_path: Path, low: str, high: str, told: str) -> None:
    estimate = {**effect("4.2", "1.90")["estimate"], "interval": {"level": 0.95, "low": low, "high": high}}

    outcome, message, _ = said_of(tmp_path, test=T34, estimate=estimate)

    assert outcome == "short"
    assert told in message


@pytest.mark.parametrize(
    ("test", "low", "high", "measure"),
    [
        (T34, "0.34", "8.06", "mean difference"),
        (T34, "0.48", "7.92", "mean difference"),
        # Resampled intervals are skewed and rather too narrow; what says that it is one is let be.
        (T34, "0.34", "7.85", "mean difference"),
        (T34, "0.34", "8.26", "mean difference (bootstrap interval)"),
        ({**T34, "name": "linear mixed model"}, "0.34", "8.26", "mean difference"),
        ({**T34, "name": "some test"}, "0.34", "8.26", "mean difference"),
    ],
)
def test_limits_that_may_be_right_raise_no_alarm(
    tmp_path: Path, test: Document, low: str, high: str, measure: str
) -> None:
    estimate = {**effect("4.2", "1.90", measure)["estimate"], "interval": {"level": 0.95, "low": low, "high": high}}

    assert said_of(tmp_path, test=test, estimate=estimate)[:2] == ("met", "")
