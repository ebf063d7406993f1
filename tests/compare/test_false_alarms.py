"""Correct results whose figures look as if they disagreed, as guidelines and programs have them: all stand."""

from __future__ import annotations

from typing import Any

import pytest
from consistent_records import names_short


def two(sizes: tuple[int, int] = (18, 18), **more: Any) -> dict[str, Any]:
    return {"unit": "plot", "groups": [{"name": name, "n": n} for name, n in zip("ab", sizes, strict=True)], **more}


def interval(low: Any, high: Any, **more: Any) -> dict[str, Any]:
    return {"level": 0.95, "low": low, "high": high, **more}


CORRECT: dict[str, dict[str, Any]] = {
    # Statistic, df and p.
    "one-sided": {
        "test": {"name": "t", "statistic": "t", "value": 1.78, "df": 46, "p": "0.041", "sides": 1,
        "tail": "greater"}},
    "adjusted p": {"test": {"name": "t", "statistic": "t", "value": 2.8, "df": 46, "p": 0.04,
    "p_kind": "adjusted"}},
    "Greenhouse and Geisser: df as they were, p corrected": {
        "test": {
            "name": "repeated-measures ANOVA, Greenhouse-Geisser",
            "statistic": "F", "value": "4.10", "df": [3, 57], "p": "0.024",
        }
    },
    "p corrected for continuity, statistic not": {
        "test": {"name": "chi-squared, Yates", "statistic": "chi2", "value": "3.84", "df": 1, "p": "0.074"}
    },
    "p of 1 as a number": {"test": {"name": "t", "statistic": "t", "value": -3.93, "df": 63, "p": 1.0,
    "sides": 1, "tail": "greater"}},
    "a number that lost its zeros": {"test": {"name": "t", "statistic": "t", "value": 2.0, "df": 35, "p": 0.051}},
    "a statistic of 0": {"test": {"name": "z", "statistic": "z", "value": 0, "p": "0.998"}},
    # Estimate, interval and p.
    "a score test beside Wald's interval": {
        "test": {"name": "two-proportion z", "statistic": "z", "value": 1.9868, "p": 0.04695},
        "estimate": {
            "measure": "difference", "value": 0.12, "unit": "1", "standard_error": 0.0598,
            "interval": interval(0.0028, 0.2372),
        },
    },
    "likelihood ratio beside Wald": {
        "test": {"name": "likelihood ratio test", "statistic": "chi2", "value": "12.1", "df": 1, "p": "0.0005"},
        "estimate": {
            "measure": "odds ratio", "value": 3.1, "scale": "log", "standard_error": 0.355, "unit": "1",
            "interval": interval(1.55, 6.22),
        },
    },
    "log-rank beside Cox": {
        "test": {"name": "log-rank", "statistic": "z", "value": 2.9, "p": "0.0037"},
        "estimate": {"measure": "hazard ratio", "value": 1.62, "scale": "log", "interval": interval(1.15, 2.29)},
    },
    "a profile interval": {
        "test": {"name": "Wald test", "statistic": "z", "value": "2.24", "p": "0.025"},
        "estimate": {
            "measure": "odds ratio (profile likelihood interval)", "value": "10.8", "scale": "log",
            "standard_error": "1.06", "interval": interval("1.56", "109"),
        },
    },
    "a bootstrap interval": {
        "test": {"name": "one-sample t", "statistic": "t", "value": "2.08", "df": 20, "p": "0.051"},
        "estimate": {
            "measure": "mean", "value": "1.20", "unit": "g", "standard_error": "0.58",
            "interval": interval("0.28", "2.43"),
        },
        "tags": ["bootstrap intervals"],
    },
    "the interval of a standardised effect includes 0": {
        "test": {"name": "two-sample t", "statistic": "t", "value": "2.04", "df": 34, "p": "0.049"},
        "estimate": {"measure": "Cohen's d", "value": "0.68", "unit": "1", "interval": interval("-0.01", "1.36")},
    },
    "eta squared beside F": {
        "test": {"name": "one-way ANOVA", "statistic": "F", "value": "5.2", "df": [1, 38], "p": "0.028"},
        "estimate": {"measure": "eta squared", "value": "0.12", "interval": interval("0.00", "0.24")},
    },
    "a shift by ranks": {
        "test": {"name": "Wilcoxon rank-sum", "statistic": "z", "value": "2.5", "p": "0.012"},
        "estimate": {"measure": "shift (Hodges-Lehmann)", "value": "3.0", "interval": interval("0.2", "5.8")},
    },
    "an adjusted interval beside a raw p": {
        "test": {"name": "t", "statistic": "t", "value": 2.21, "df": 34, "p": "0.034"},
        "estimate": {
            "measure": "mean difference", "value": 4.2, "standard_error": 1.9,
            "interval": interval(-0.8, 9.2, adjusted=True),
        },
    },
    "a level of 95.2 %": {
        "test": {"name": "z", "statistic": "z", "value": "2.210", "p": "0.0271"},
        "estimate": {
            "measure": "mean difference", "value": "4.20", "standard_error": "1.90",
            "interval": {"level": 0.952, "low": "0.44", "high": "7.96"},
        },
    },
    "a test against a margin": {
        "aim": "noninferiority",
        "test": {"name": "z", "statistic": "z", "value": "3.1", "p": "0.00097", "sides": 1, "tail": "greater"},
        "estimate": {
            "measure": "difference", "value": "0.2", "standard_error": "1.0", "margin": [-2.9, 2.9],
            "interval": {"level": 0.95, "low": "-1.44"},
        },
    },
    "a Spearman correlation as r": {
        "test": {"name": "Spearman correlation", "statistic": "r", "value": "0.40", "df": 30, "p": "0.023"},
        "estimate": {"measure": "Spearman correlation", "value": "0.40", "interval": interval("0.04", "0.67")},
    },
    # Ratios that do not say their scale, and relative changes.
    "a rate ratio with the interval and z of its logarithm": {
        "test": {"name": "Poisson regression", "statistic": "z", "value": "1.57", "p": "0.12"},
        "estimate": {"measure": "incidence rate ratio", "value": "1.30", "interval": interval("0.94", "1.81")},
    },
    "an abbreviated ratio": {
        "test": {"name": "Poisson regression", "statistic": "z", "value": "1.57", "p": "0.12"},
        "estimate": {"measure": "IRR", "value": "1.30", "null": 1, "interval": interval("0.94", "1.81")},
    },
    "an odds ratio with its own standard error": {
        "test": {"name": "logistic regression", "statistic": "z", "value": "3.34", "p": "<0.001"},
        "estimate": {
            "measure": "odds ratio", "value": "2.19", "standard_error": "0.51",
            "interval": interval("1.38", "3.47"),
        },
    },
    "a ratio of means with a linear interval": {
        "test": {"name": "t test", "statistic": "t", "value": "2.00", "df": 40, "p": "0.052"},
        "estimate": {"measure": "ratio of means", "value": "1.30", "interval": interval("1.00", "1.60")},
    },
    "a ratio of means that says it is on the linear scale": {
        "test": {"name": "t test", "statistic": "t", "value": "2.00", "df": 40, "p": "0.052"},
        "estimate": {
            "measure": "ratio of means", "value": "1.30", "scale": "linear", "interval": interval("1.00", "1.60"),
        },
    },
    "a ratio of means with a linear interval below 0": {
        "test": {"name": "t test", "statistic": "t", "value": "0.40", "df": 40, "p": "0.69"},
        "estimate": {"measure": "ratio of means", "value": "1.30", "interval": interval("-0.22", "2.82")},
    },
    "a difference of log ratios": {
        "test": {"name": "z", "statistic": "z", "value": "2.00", "p": "0.046"},
        "estimate": {"measure": "difference of log ratios", "value": "0.40", "interval": interval("0.01", "0.79")},
    },
    "a mean that is a ratio, against 0": {
        "test": {"name": "one-sample t", "statistic": "t", "value": "3.00", "df": 20, "p": "0.007"},
        "estimate": {"measure": "gain ratio", "value": "0.60", "interval": interval("0.18", "1.02")},
    },
    "a ratio below 0": {
        "test": {"name": "one-sample t", "statistic": "t", "value": "-3.00", "df": 20, "p": "0.007"},
        "estimate": {"measure": "rate ratio, centred", "value": "-0.60", "interval": interval("-1.02", "-0.18")},
    },
    "a percent change computed on logarithms": {
        "test": {"name": "t-test on logarithms", "statistic": "t", "value": "1.62", "df": 60, "p": "0.11"},
        "estimate": {
            "measure": "percent change", "value": "16.4", "unit": "%", "interval": interval("-3.5", "40.5"),
        },
    },
    "a relative reduction computed on logarithms": {
        "test": {"name": "Cox regression", "statistic": "z", "value": "-2.00", "p": "0.046"},
        "estimate": {
            "measure": "relative hazard reduction", "value": "0.220", "unit": "1",
            "interval": interval("0.005", "0.389"),
        },
    },
    "a percent change without an interval": {
        "test": {"name": "z", "statistic": "z", "value": "1.62", "p": "0.105"},
        "estimate": {"measure": "percent change", "value": "16.4", "unit": "%", "null": 0, "standard_error": "2.1"},
    },
    "a relative risk reduction beside its counts": {
        "test": {"name": "chi-squared test", "statistic": "chi2", "value": "9.52", "df": 1, "p": "0.002"},
        "estimate": {"measure": "relative risk reduction", "value": "50", "unit": "%", "standard_error": "12"},
        "sample": {"groups": [{"name": "a", "n": 100, "events": 20}, {"name": "b", "n": 100, "events": 40}]},
    },
    "a relative risk increase beside its counts": {
        "test": {"name": "chi-squared test", "statistic": "chi2", "value": "9.52", "df": 1, "p": "0.002"},
        "estimate": {"measure": "relative risk increase", "value": "1.00", "unit": "1"},
        "sample": {"groups": [{"name": "a", "n": 100, "events": 40}, {"name": "b", "n": 100, "events": 20}]},
    },
    "a change in odds beside its counts": {
        "test": {"name": "chi-squared test", "statistic": "chi2", "value": "9.52", "df": 1, "p": "0.002"},
        "estimate": {"measure": "reduction of the odds ratio", "value": "63", "unit": "%"},
        "sample": {"groups": [{"name": "a", "n": 100, "events": 20}, {"name": "b", "n": 100, "events": 40}]},
    },
    "the error of a risk ratio itself beside its counts": {
        "test": {"name": "two-proportion z"},
        "estimate": {"measure": "risk ratio", "value": "0.50", "standard_error": "0.12"},
        "sample": {"groups": [{"name": "a", "n": 100, "events": 20}, {"name": "b", "n": 100, "events": 40}]},
    },
    # Two methods, each said or shown by the counts.
    "chi-squared corrected for continuity beside Wald's interval": {
        "test": {"name": "chi-squared test", "statistic": "chi2", "value": "3.11", "df": 1, "p": "0.078"},
        "estimate": {"measure": "risk difference", "value": "0.25", "interval": interval("0.015", "0.485")},
        "sample": {"groups": [{"name": "a", "n": 32, "events": 22}, {"name": "b", "n": 32, "events": 14}]},
    },
    "its p alone beside Wald's interval": {
        "test": {"name": "chi-squared test", "p": "0.078"},
        "estimate": {"measure": "risk difference", "value": "0.25", "interval": interval("0.015", "0.485")},
        "sample": {"groups": [{"name": "a", "n": 32, "events": 22}, {"name": "b", "n": 32, "events": 14}]},
    },
    "a correction for continuity that is named": {
        "test": {
            "name": "chi-squared test with continuity correction", "statistic": "chi2", "value": "3.11", "df": 1,
            "p": "0.078",
        },
        "estimate": {"measure": "risk difference", "value": "0.25", "interval": interval("0.015", "0.485")},
    },
    "its p alone, and named": {
        "test": {"name": "chi-squared test with continuity correction", "p": "0.078"},
        "estimate": {"measure": "risk difference", "value": "0.25", "interval": interval("0.015", "0.485")},
    },
    "a bootstrap interval beside Welch's t": {
        "test": {"name": "Welch t", "statistic": "t", "value": "2.02", "df": "9.8", "p": "0.072"},
        "estimate": {
            "measure": "mean difference (bootstrap interval)", "value": "3.16",
            "interval": interval("0.22", "6.10"),
        },
    },
    # Df and sizes.
    "an analysis of variance by Welch, its df whole by chance": {
        "test": {"name": "one-way ANOVA (Welch)", "statistic": "F", "value": "1.50", "df": [4, 17], "p": "0.246"},
        "sample": {"n": 52, "groups": [{"name": f"g{n}", "n": n} for n in (10, 10, 5, 9, 18)]},
    },
    "one that does not name Welch and writes its df with a decimal": {
        "test": {"name": "one-way ANOVA", "statistic": "F", "value": "1.50", "df": [4, "17.0"], "p": "0.246"},
        "sample": {"n": 52, "groups": [{"name": f"g{n}", "n": n} for n in (10, 10, 5, 9, 18)]},
    },
    "Welch": {
        "test": {"name": "t test", "statistic": "t", "value": "2.03", "df": "43.7", "p": "0.048"},
        "sample": two((24, 24)),
    },
    "Welch, its df rounded": {
        "test": {"name": "two-sample t", "statistic": "t", "value": "2.00", "df": 28, "p": "0.055"},
        "sample": {
            "unit": "plot", "n": 40,
            "groups": [
                {"name": "a", "n": 20, "mean": "12.0", "sd": "4.0"},
                {"name": "b", "n": 20, "mean": "10.0", "sd": "2.0"},
            ],
        },
    },
    "covariates take df": {
        "test": {"name": "two-sample t", "statistic": "t", "value": 2.21, "df": 32, "p": "0.034"},
        "sample": two(), "covariates": ["age", "site"],
    },
    "a contrast after an analysis of three groups": {
        "test": {"name": "Tukey contrast", "statistic": "t", "value": 2.21, "df": 51, "p": "0.032"},
        "sample": two(n=54),
    },
    "measurements repeated within units": {
        "test": {"name": "ANOVA", "statistic": "F", "value": 4.1, "df": [3, 57], "p": "0.0105"},
        "sample": {"unit": "participant", "n": 20},
    },
    "a mixed model": {
        "test": {"name": "mixed model", "statistic": "t", "value": 2.21, "df": 760, "p": "0.027"},
        "sample": {"unit": "participant", "n": 20},
    },
    "units in pairs": {
        "test": {"name": "paired t", "statistic": "t", "value": 2.21, "df": 17, "p": "0.041"},
        "sample": two(n=18),
    },
    "a t that may be of pairs": {
        "test": {"name": "t test", "statistic": "t", "value": 2.21, "df": 17, "p": "0.041"},
        "sample": two(n=18),
    },
    "clusters and their df": {
        "test": {"name": "two-sample t", "statistic": "t", "value": 2.21, "df": 10, "p": "0.052"},
        "sample": two((240, 260), clusters=12),
    },
    "persons in clusters with a robust error": {
        "test": {"name": "cluster-robust t", "statistic": "t", "value": 2.21, "df": 498, "p": "0.028"},
        "sample": two((240, 260), clusters=12),
    },
    # Groups, counts and proportions.
    "a test of other units than those of the summaries": {
        "test": {"name": "t test of a coefficient", "statistic": "t", "value": 2.9, "df": 30, "p": "0.0069"},
        "sample": {
            "unit": "plot", "n": 34,
            "groups": [
                {"name": "a", "n": 17, "mean": 21.1, "sd": 5.9}, {"name": "b", "n": 17, "mean": 20.8, "sd": 5.5},
            ],
        },
    },
    "standard deviations with divisor n": {
        "test": {"name": "two-sample t", "statistic": "t", "value": "2.147", "df": 34, "p": "0.039"},
        "sample": {
            "unit": "plot",
            "groups": [
                {"name": "a", "n": 18, "mean": "21.10", "sd": "5.900"},
                {"name": "b", "n": 18, "mean": "16.90", "sd": "5.500"},
            ],
        },
    },
    "a weighted percentage": {
        "estimate": {"measure": "weighted percentage", "value": "43.1", "unit": "%", "standard_error": "0.2"},
        "sample": {"unit": "person", "n": 1200, "groups": [{"name": "all", "n": 1200, "events": 480}]},
    },
    "an accuracy over seeds": {
        "estimate": {"measure": "accuracy", "value": "0.91", "standard_error": "0.004", "unit": "1"},
        "sample": {"unit": "seed", "n": 5},
    },
    "an adjusted odds ratio": {
        "test": {"name": "logistic regression", "statistic": "z", "value": "2.10", "p": "0.036"},
        "estimate": {"measure": "adjusted odds ratio", "value": "1.80", "scale": "log"},
        "sample": {
            "unit": "patient",
            "groups": [{"name": "a", "n": 100, "events": 30}, {"name": "b", "n": 100, "events": 18}],
        },
    },
    "a stratified test": {
        "test": {"name": "Mantel-Haenszel chi-squared", "statistic": "chi2", "value": "6.1", "df": 1,
        "p": "0.0135"},
        "sample": {
            "unit": "patient",
            "groups": [{"name": "a", "n": 100, "events": 30}, {"name": "b", "n": 100, "events": 18}],
        },
    },
    "counts of one group alone": {
        "test": {"name": "two-proportion z", "statistic": "z", "value": "2.90", "p": "0.0037"},
        "sample": {"groups": [{"name": "a", "n": 100, "events": 30}, {"name": "b", "n": 100}]},
    },
    "no events at all": {
        "test": {"name": "chi-squared of proportions", "statistic": "chi2", "value": "0.00", "df": 1, "p": "1.000"},
        "estimate": {"measure": "odds ratio", "value": "1.00", "scale": "log", "standard_error": "1.4"},
        "sample": {"groups": [{"name": "a", "n": 100, "events": 0}, {"name": "b", "n": 100, "events": 0}]},
    },
    "no events, and their risks": {
        "test": {"name": "two-proportion z"},
        "estimate": {"measure": "log risk ratio", "value": "0.00", "standard_error": "1.4"},
        "sample": {"groups": [{"name": "a", "n": 100, "events": 0}, {"name": "b", "n": 100, "events": 0}]},
    },
    "counts beside another measure": {
        "test": {"name": "two-proportion z"},
        "estimate": {"measure": "number needed to treat", "value": "8.3", "standard_error": "4.1"},
        "sample": {"groups": [{"name": "a", "n": 100, "events": 30}, {"name": "b", "n": 100, "events": 18}]},
    },
    "an exact test by resampling": {
        "test": {"name": "Fisher's exact test", "p": 0.07, "p_kind": "permutation", "resamples": 99},
        "sample": {"groups": [{"name": "a", "n": 100, "events": 30}, {"name": "b", "n": 100, "events": 18}]},
    },
    "an exact test of very many": {
        "test": {"name": "Fisher's exact test", "p": 0.9, "p_kind": "exact"},
        "sample": {
            "groups": [{"name": "a", "n": 3_000_000, "events": 1_500_000}, {"name": "b", "n": 3_000_000,
            "events": 1_500_100}]
        },
    },
    "a share from a survey": {
        "test": {"name": "survey-weighted test"},
        "estimate": {"measure": "share", "value": "43.1", "unit": "%", "standard_error": "0.2"},
        "sample": {"unit": "person", "n": 1200},
    },
    "a paired test of groups unlike in size": {
        "test": {"name": "paired t", "statistic": "t", "value": "2.21", "df": 17, "p": "0.041"},
        "sample": two((18, 19)),
    },
    "a t of three groups": {
        "test": {"name": "t test", "statistic": "t", "value": "2.21", "df": 17, "p": "0.041"},
        "sample": {"groups": [{"name": name, "n": 12} for name in "abc"]},
    },
    "a proportion at its end": {
        "estimate": {"measure": "accuracy", "value": 1.0, "unit": "1"}, "sample": {"unit": "item", "n": 20},
    },
    "df without a statistic": {"test": {"name": "a test", "df": 5, "p": 0.2}, "sample": {"unit": "plot", "n": 9}},
    "a one-sample t without groups": {
        "test": {"name": "one-sample t", "statistic": "t", "value": "2.21", "df": 34, "p": "0.034"},
        "sample": {"unit": "plot", "n": 35},
    },
    "a t without groups": {
        "test": {"name": "t test", "statistic": "t", "value": "2.21", "df": 34, "p": "0.034"},
        "sample": {"unit": "plot", "n": 36},
    },
    # Values that are possible.
    "an item of one unit": {
        "sample": {"groups": [{"name": "a", "n": 1, "mean": "3", "sd": "0.00", "integer_items": 1}]}
    },
    "a mean below a bound": {"sample": {"groups": [{"name": "a", "n": 20, "mean": "<1", "integer_items": 1}]}},
    "items without a mean": {"sample": {"groups": [{"name": "a", "n": 20, "integer_items": 1}]}},
    "a mean of several items": {
        "sample": {"groups": [{"name": "a", "n": 20, "mean": "3.48", "integer_items": 5}]}
    },
    "a mean in all its digits": {
        "sample": {"groups": [{"name": "a", "n": 17, "mean": 59 / 17, "sd": 0.5144957554275266,
        "integer_items": 1}]}
    },
    "a mean whose zeros were lost": {
        "sample": {"groups": [{"name": "a", "n": 30, "mean": 2, "sd": 0.98, "integer_items": 1}]}
    },
    "a permutation p below a bound": {
        "test": {"name": "permutation", "p": "<0.001", "p_kind": "permutation", "resamples": 9999}
    },
    "a permutation p above one": {
        "test": {"name": "permutation", "p": ">0.5", "p_kind": "permutation", "resamples": 99}
    },
    "a permutation p of all resamples": {
        "test": {"name": "permutation", "p": 1, "p_kind": "permutation", "resamples": 99}
    },
    "a permutation p without its resamples": {"test": {"name": "permutation", "p": 0.013, "p_kind": "permutation"}},
}  # fmt: skip


@pytest.mark.parametrize("name", CORRECT)
def test_a_correct_result_raises_no_alarm(name: str) -> None:
    assert names_short(CORRECT[name]) == [[]]
