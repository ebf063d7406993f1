"""What is said of each kind of disagreement: the figure that would fit, the odd one out, and what to rule out."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
from support import DRAINAGE, Document, drainage, judge, write_tree

from gatecheck.cli import main

SAMPLE = DRAINAGE["sample"]
PROPORTIONS = {
    "unit": "user",
    "n": 200,
    "groups": [{"name": "new", "n": 100, "events": 30}, {"name": "old", "n": 100, "events": 18}],
}

FIFTH_AND_TWO = {
    "unit": "user",
    "n": 200,
    "groups": [{"name": "new", "n": 100, "events": 20}, {"name": "old", "n": 100, "events": 40}],
}


def said(folder: Path, record: Document) -> dict[str, Any]:
    return judge(folder, record).rule("numbers-agree")


def bare(**fields: Any) -> Document:
    return drainage(**{"test": ..., "estimate": ..., "sample": ..., "alternative": ..., **fields})


def groups(*each: tuple[int, Any, Any], **more: Any) -> Document:
    named = [
        {"name": name, "n": n, "mean": mean, "sd": sd} for name, (n, mean, sd) in zip("abc", each, strict=False)
    ]
    return {"unit": "plot", "groups": named, **more}


def items(**more: Any) -> Document:
    return {"unit": "student", "groups": [{"name": "first", "n": 20, "integer_items": 1, **more}]}


TOLD = [
    (
        bare(
            test={"name": "Student t", "statistic": "t", "value": "2.90", "df": 34, "p": "0.0065"},
            sample=groups((18, 21.1, 5.9), (18, 16.9, 5.5)),
        ),
        "the summaries of the groups give t = 2.14 to 2.28 in size, and 2.90 is reported; the other figures fit "
        "together, so the odd one out is the means, standard deviations and sizes of the groups; the policy",
        "Take statistic and summaries from the same units, and name the test. Rule out first that the test is",
    ),
    (
        bare(
            test={"name": "one-way ANOVA", "statistic": "F", "value": "9.00", "df": [2, 27], "p": "0.001"},
            sample=groups((10, "5.0", "1.0"), (10, "5.5", "1.2"), (10, "6.0", "1.1")),
        ),
        "the summaries of the groups give F = 1.45 to 2.84 in size, and 9.00 is reported",
        "Take statistic and summaries",
    ),
    (
        bare(
            test={"name": "Welch t", "statistic": "t", "value": "2.209", "df": 30, "p": "0.035"},
            sample=groups((18, "21.10", "5.90"), (18, "16.90", "5.50")),
        ),
        "the summaries of the groups give Welch's test 33.8",
        "Check that the summaries are of the units tested.",
    ),
    (
        drainage(estimate={"measure": "difference", "value": 5.2, "unit": "g"}, sample=SAMPLE),
        "the means of the groups differ by 4.1 to 4.3, and 5.2 is reported",
        "Take estimate and means from the same units, and give covariates if there are any.",
    ),
    (
        drainage(estimate={"measure": "Hedges' g", "value": 1.1, "unit": "1"}, sample=SAMPLE),
        "the summaries of the groups give a standardised difference of 0.713 to 0.761, and 1.1 is reported",
        "Say in estimate.measure by which standard deviation it is standardised.",
    ),
    (
        drainage(
            test={"name": "two-sample t"},
            estimate={"measure": "difference", "value": 4.2, "standard_error": 2.4},
            sample=SAMPLE,
        ),
        "the summaries of the groups give a standard error of 1.88 to 1.92, and 2.4 is reported",
        "Take both from the same units.",
    ),
    (
        bare(test={"name": "paired t"}, sample={**groups((18, 21.1, 5.9), (18, 16.9, 5.5)), "n": 18}),
        None,
        "",
    ),
    (
        bare(
            test={"name": "Mann-Whitney", "p": 0.03}, sample={**groups((18, 21.1, 5.9), (20, 16.9, 5.5)), "n": 36}
        ),
        "the groups of 18 + 20 hold 38 plots, and n says 36; the policy",
        "Give the units analysed in each group, and list those left out in sample.excluded with the reason.",
    ),
    (
        bare(
            test={"name": "Pearson correlation", "statistic": "r", "value": "0.35", "df": 30, "p": "0.05"},
            sample={"unit": "student", "n": 30},
        ),
        "the df of r(30) = 0.35 imply 32 students analysed, and n says 30; the df of r(30) = 0.35 need more "
        "independent units than the 30 students that there are, which allow 29 at most",
        "List those left out",
    ),
    (
        bare(
            test={"name": "pooled t", "statistic": "t", "value": "2.03", "df": 45, "p": "0.048"},
            sample={"unit": "plot", "groups": [{"name": "a", "n": 24}, {"name": "b", "n": 24}]},
        ),
        "the df of t(45) = 2.03 imply 47 plots analysed, and n says 48 (24 + 24): 1 is missing without a reason",
        "List those left out in sample.excluded with the reason",
    ),
    (
        bare(
            test={"name": "z test", "statistic": "z", "value": 12, "p": "<0.001"},
            estimate={"measure": "accuracy", "value": 56, "unit": "%", "null": 50},
            sample={"unit": "item", "n": 120},
        ),
        "a standard error of 0.5 would take 9,856 independent items, and there are 120: theirs is 4.5, 1.3 of "
        "which lie "
        "between the estimate and 50 (p = 0.19, exact binomial 0.24, 95 % interval 47.1 to 64.9)",
        "Take the error over items",
    ),
    (
        bare(
            test={"name": "two-sample t", "statistic": "t", "value": "2.21", "df": 498, "p": "0.0275"},
            sample={"unit": "pupil", "clusters": 12, "n": 500},
        ),
        "the df of t(498) = 2.21 need more independent units than the 12 clusters that there are, which allow 11",
        "Analyse the units that were assigned or sampled, or name the model that has units within them.",
    ),
    (
        bare(
            test={
                "name": "chi-squared of a contingency table",
                "statistic": "chi2",
                "value": "3.95",
                "df": 2,
                "p": 0.139,
            },
            sample=PROPORTIONS,
        ),
        "chi2(2) = 3.95 has not the df of events in 2 groups, 1",
        "Check the df, or name the test if it is not one of these counts.",
    ),
    (
        bare(
            test={"name": "two-proportion z", "statistic": "z", "value": "2.90", "p": "0.0037"}, sample=PROPORTIONS
        ),
        "30 of 100 and 18 of 100 give z = 1.82 (continuity), 1.99 (pooled), 2.00 (likelihood ratio) or 2.01 "
        "(unpooled), and 2.90 is none of these nor another form in use; the",
        "Check the counts, and name the test.",
    ),
    (
        bare(
            test={"name": "two-proportion z"},
            estimate={"measure": "odds ratio", "value": "2.95", "scale": "log", "standard_error": "0.12"},
            sample=PROPORTIONS,
        ),
        "30 of 100 and 18 of 100 give 0.512 or 1.95 as odds ratio, by the order of the groups, and 2.95 is "
        "reported; 30 of 100 and 18 of 100 give "
        "a standard error of 0.34, and 0.12 is reported",
        "Check the counts and the estimate; check the counts and the scale of the standard error (ratios: of "
        "the log",
    ),
    (
        bare(
            test={"name": "two-proportion z"},
            estimate={"measure": "log risk ratio", "value": "0.91", "standard_error": "0.55"},
            sample=PROPORTIONS,
        ),
        "give -0.511 or 0.511 as log risk ratio, by the order of the groups, and 0.91 is reported; 30 of 100 "
        "and 18 of 100 give a standard error "
        "of 0.262, and 0.55 is reported",
        "Check the counts and the estimate",
    ),
    (
        bare(
            test={"name": "two-proportion z"},
            estimate={"measure": "risk difference", "value": "22", "standard_error": "2.5", "unit": "points"},
            sample=PROPORTIONS,
        ),
        "give -0.12 or 0.12 as risk difference, by the order of the groups, and 22 is reported; 30 of 100 and "
        "18 of 100 give a standard error of",
        "Check the counts and the estimate",
    ),
    (
        bare(test={"name": "Fisher's exact test", "p": "0.50", "p_kind": "exact"}, sample=PROPORTIONS),
        "30 of 100 and 18 of 100 give an exact p of 0.0679, and 0.50 is reported",
        "Check the counts, and name the test.",
    ),
    (
        bare(
            test={"name": "Fisher's exact test", "p": "0.90", "p_kind": "exact", "sides": 1, "tail": "greater"},
            sample=PROPORTIONS,
        ),
        "give an exact p of 0.034 to 0.985, and 0.90 is reported",
        "Check the counts, and name the test.",
    ),
    (
        bare(sample={"unit": "user", "groups": [{"name": "new", "n": 10, "events": 12}]}),
        "more units have the event than there are (12 of 10)",
        "Count units with the event, not episodes.",
    ),
    (
        bare(
            estimate={"measure": "accuracy", "value": "0.66", "unit": "1"},
            sample={"unit": "item", "groups": [{"name": "model", "n": 120, "events": 67}]},
        ),
        "67 of 120 are 55.83 %, and 0.66 is reported",
        "Take the proportion from its counts.",
    ),
    (
        bare(
            estimate={
                "measure": "accuracy",
                "value": "56.0",
                "unit": "%",
                "interval": {"level": 0.95, "low": "55.0", "high": "57.0"},
            },
            sample={"unit": "item", "n": 120},
        ),
        "a standard error of 0.51 would take 9,465 independent items, and there are 120: theirs is 4.5, 12 of "
        "which lie "
        "between the estimate and 0 (p = 4.4e-35, 95 % interval 47.1 to 64.9)",
        "Take the error over items; runs or measurements of the same items are not more of them.",
    ),
    (
        bare(sample=items(mean="3.48")),
        "no whole-number items have the mean 3.48 of first (n 20); the nearest are 3.45 to 3.5",
        "Check mean, n and integer_items. Rule out first that the mean was cut off, not rounded, items are missing",
    ),
    (
        bare(sample=items(mean="0.50", sd="0.52")),
        "no whole-number items with this mean have the standard deviation 0.52 of first (n 20); the nearest are "
        "0.51299",
        "Check standard deviation, mean, n and integer_items.",
    ),
    (
        bare(test={"name": "permutation", "p": "0.0235", "p_kind": "permutation", "resamples": 999}),
        "no count of 999 resamples gives p = 0.0235; the nearest p is 0.024",
        "Check p and test.resamples.",
    ),
    (
        bare(test={"name": "permutation", "p": 0, "p_kind": "permutation", "resamples": 999}),
        "a permutation p of 999 resamples is at least 0.001, and 0 is reported",
        "Count the data themselves as one arrangement: (hits + 1) / (resamples + 1).",
    ),
    (
        bare(test={"name": "permutation", "p": "<0.001", "p_kind": "permutation", "resamples": 99}),
        "a permutation p of 99 resamples is at least 0.01, and <0.001 is reported",
        "Count the data themselves",
    ),
    (
        bare(test={"name": "permutation", "p": 0, "p_kind": "permutation"}),
        "a permutation p is above 0, and 0 is reported",
        "Count the data themselves",
    ),
    (
        bare(
            test={"name": "z", "statistic": "z", "value": "2.65", "p": "0.008"},
            family={"name": "growth", "size": 4, "procedure": "benjamini-yekutieli", "adjusted_p": "0.30"},
        ),
        "by benjamini-yekutieli in a family of 4 the raw result gives an adjusted p of 0.00793 to 0.0682, and "
        "0.30 is",
        "Adjust the raw p of all members of the family anew.",
    ),
    (
        bare(
            test={"name": "rank test", "p": "0.008"},
            family={"name": "growth", "procedure": "fixed-sequence", "adjusted_p": "0.001"},
        ),
        "by fixed-sequence in a family the raw result gives an adjusted p of 0.0075 to 1, and 0.001 is reported",
        "Adjust the raw p",
    ),
    (
        bare(
            test={"name": "z", "statistic": "z", "value": "2.65", "p": "0.008"},
            family={"name": "growth", "size": 4, "procedure": "fixed-sequence", "adjusted_p": "0.001"},
        ),
        "by fixed-sequence in a family of 4 the raw result gives an adjusted p of 0.00793 to 1, and 0.001 is "
        "reported",
        "Adjust the raw p",
    ),
    (
        bare(
            test={
                "name": "t",
                "statistic": "t",
                "value": "2.21",
                "df": 34,
                "p": "0.017",
                "sides": 1,
                "tail": "greater",
            },
            estimate={
                "measure": "difference",
                "value": "4.20",
                "standard_error": "1.90",
                "interval": {"level": 0.95, "low": "-2.10"},
            },
        ),
        "the one limit of the interval -2.10 to unbounded does not lie at a distance of 3.11 to 3.88 from the "
        "estimate "
        "4.20, where its standard error puts it",
        "Take limit, level and standard error from the same run.",
    ),
    (
        bare(
            estimate={
                "measure": "difference",
                "value": "4.200",
                "standard_error": "1.900",
                "interval": {"level": 0.95, "low": "0.476", "high": "17.924"},
            },
        ),
        "the limits of the interval 0.476 to 17.924 lie at unlike distances from the estimate 4.200, and its "
        "standard "
        "error puts a limit at a distance of 3.72 or more",
        "Take both limits from the run that gave the estimate.",
    ),
    (
        bare(
            test={"name": "Cox regression", "statistic": "z", "value": "2.20", "p": "0.028"},
            estimate={
                "measure": "hazard ratio",
                "value": "2.15",
                "scale": "log",
                "interval": {"level": 0.95, "low": "1.052", "high": "2.408"},
            },
        ),
        "statistic and interval 1.052 to 2.408 fit an estimate of 1.59 on the log scale, and 2.15 is reported; the "
        "other figures fit together, so the odd one out is the estimate",
        "Take estimate and interval from the same run and on the same scale.",
    ),
    (
        bare(
            test={"name": "Wald", "p": "0.40"},
            estimate={"measure": "difference", "value": "4.20", "standard_error": "1.90"},
        ),
        "estimate and precision give p = 0.015 to 0.12, and 0.40 is reported",
        "Check the scale and the level, and say what is adjusted (p_kind, interval.adjusted).",
    ),
    (
        bare(
            test={"name": "F test", "statistic": "F", "value": "9.00", "df": [1, 34], "p": "0.005"},
            estimate={"measure": "difference", "value": "4.20", "standard_error": "1.90"},
        ),
        "estimate and standard error give F = 4.89 in size, and 9.00 is reported",
        "Take estimate and statistic from the same test",
    ),
    (
        bare(
            test={
                "name": "t",
                "statistic": "t",
                "value": "2.21",
                "df": 34,
                "p": "0.017",
                "sides": 1,
                "tail": "greater",
            },
            estimate={"measure": "difference", "value": "-4.20", "standard_error": "1.90"},
        ),
        "the estimate is -4.20, but the test toward greater has t = 2.21: the signs differ; the policy",
        "Give estimate and statistic the sign of the same difference.",
    ),
    (
        bare(
            test={
                "name": "t",
                "statistic": "t",
                "value": "-2.21",
                "df": 34,
                "p": "0.017",
                "sides": 1,
                "tail": "less",
            },
            estimate={"measure": "difference", "value": "9.20", "standard_error": "1.90"},
        ),
        "estimate and standard error give t = 4.84 in size, and -2.21 is reported",
        "Take estimate and statistic from the same test",
    ),
    (
        bare(
            test={"name": "chi-squared test", "statistic": "chi2", "value": "9.64", "df": 1, "p": "0.002"},
            sample=FIFTH_AND_TWO,
        ),
        "20 of 100 and 40 of 100 give chi2 = 8.60 (continuity), 9.52 (Pearson), 9.66 (likelihood ratio) or 10.00 "
        "(unpooled), and 9.64 is none of these nor another form in use",
        "Check the counts, and name the test.",
    ),
    (
        bare(
            test={"name": "chi-squared test", "statistic": "chi2", "value": "9.52", "df": 1, "p": "0.002"},
            estimate={"measure": "relative risk reduction", "value": "40", "unit": "%"},
            sample=FIFTH_AND_TWO,
        ),
        "20 of 100 and 40 of 100 give -100 or 50 as relative risk reduction, by the order of the groups, and 40 is",
        "Check the counts and the estimate.",
    ),
    (
        bare(
            test={"name": "logistic regression", "statistic": "z", "value": "3.34", "p": "<0.001"},
            estimate={
                "measure": "odds ratio",
                "value": "2.19",
                "scale": "log",
                "standard_error": "0.51",
                "interval": {"level": 0.95, "low": "1.38", "high": "3.47"},
            },
        ),
        "which is 0.904 standard errors of 0.51; estimate and standard error on the log scale give z = 1.54",
        "Give the standard error of the logarithm: 0.51 is that of the ratio itself (0.51 / 2.19 = 0.23 fits).",
    ),
    (
        bare(
            test={"name": "logistic regression", "statistic": "z", "value": "3.34", "p": "<0.001"},
            estimate={"measure": "odds ratio", "value": "2.19", "scale": "log", "standard_error": "0.91"},
        ),
        "estimate and standard error on the log scale give z = 0.861 in size, and 3.34 is reported",
        "Take estimate and statistic from the same test",
    ),
    (
        bare(
            test={"name": "two-sample t", "statistic": "t", "value": "2.21", "df": 34, "p": "0.034"},
            sample=groups((18, "21.1", "1.39"), (18, "16.9", "1.30")),
        ),
        "the summaries of the groups give t = 9.11 to 9.62 in size, and 2.21 is reported",
        "Give the standard deviations: these look like standard errors, which times √18 are 5.9 and 5.5.",
    ),
    (
        bare(
            test={"name": "two-sample t", "statistic": "t", "value": "2.23", "df": 36, "p": "0.032"},
            sample=groups((18, "21.1", "1.39"), (20, "16.9", "1.25")),
        ),
        "the summaries of the groups give t =",
        "these look like standard errors, which times the root of n are 5.9 and 5.6.",
    ),
    (
        bare(
            test={"name": "two-sample t", "statistic": "t", "value": "2.21", "df": 118, "p": "0.029"},
            sample={"unit": "pupil", "clusters": 6, **groups((60, "21.1", "5.9"), (60, "18.8", "5.5"))}
            | {"n": 120},
        ),
        "than the 6 clusters that there are, which allow 5 at most; the policy",
        "Analyse the units that were assigned or sampled",
    ),
    (
        bare(
            test={"name": "Wald", "p": "0.03"},
            estimate={
                "measure": "hazard ratio",
                "value": "0.78",
                "interval": {"level": 0.95, "low": "0.60", "high": "1.01"},
            },
        ),
        "the interval 0.60 to 1.01 includes 1, which goes with p = 0.061 on the log scale, and 0.03 is reported",
        "; say in estimate.scale on which scale the ratio is. Rule out first",
    ),
    (
        bare(
            test={"name": "Cox regression", "statistic": "z", "value": "2.20", "p": "0.028"},
            estimate={
                "measure": "hazard ratio",
                "value": "2.15",
                "interval": {"level": 0.95, "low": "1.052", "high": "2.408"},
            },
        ),
        "statistic and interval 1.052 to 2.408 fit an estimate of 1.59 on the log scale, and 2.15 is reported",
        "Take estimate and interval from the same run and on the same scale; say in estimate.scale",
    ),
    (
        bare(
            test={"name": "Pearson correlation", "statistic": "r", "value": "0.35", "df": 30, "p": "0.05"},
            estimate={
                "measure": "Pearson correlation",
                "value": "0.45",
                "interval": {"level": 0.95, "low": "0.30", "high": "0.58"},
            },
        ),
        "the correlation 0.45 is not the one tested, r(30) = 0.35; the interval 0.30 to 0.58 is not that of a "
        "correlation with so many df, 0.12 to 0.69",
        "Take the estimate from the test; check limits, level and df.",
    ),
]


@pytest.mark.parametrize(("record", "told", "remedy"), TOLD)
def test_a_disagreement_is_told_with_what_would_fit(
    tmp_path: Path, record: Document, told: str | None, remedy: str
) -> None:
    found = said(tmp_path, record)

    assert found["outcome"] == ("met" if told is None else "short")
    assert (told or "") in found["message"]
    assert remedy in found.get("remedy", "")
    assert (found["message"] + " " + found.get("remedy", "")).count(". ") <= 2


@pytest.mark.parametrize(
    ("record", "told"),
    [
        (drainage(), "compared: statistic, df, sides and p, estimate and interval, interval and standard error"),
        (
            drainage(test__p="0.040", test__p_kind="adjusted"),
            "; p is adjusted and the interval is not, so these two are not compared.",
        ),
        (
            drainage(
                estimate__interval={"level": 0.95, "low": -0.8, "high": 9.2, "adjusted": True},
            ),
            "; the interval is adjusted and p is not, so these two are not compared.",
        ),
        (
            bare(
                test={"name": "Wald", "p": "0.061"},
                estimate={
                    "measure": "hazard ratio",
                    "value": "0.78",
                    "interval": {"level": 0.95, "low": "0.60", "high": "1.01"},
                },
            ),
            "; estimate.scale does not say the scale of the ratio, so it was read on those that it may be on.",
        ),
        (
            bare(estimate={"measure": "percent change", "value": "16.4", "unit": "%"}),
            "no two of its figures determine each other.",
        ),
        (bare(test={"name": "rank test", "p": 0.03}), "no two of its figures determine each other."),
    ],
)
def test_what_is_compared_and_what_is_not_is_explained(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], record: Document, told: str
) -> None:
    folder = write_tree(tmp_path, record)

    main(["explain", record["id"], str(folder)])

    assert told in " ".join(capsys.readouterr().out.split())
