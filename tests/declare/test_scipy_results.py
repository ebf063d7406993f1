"""Tests of means, slopes, correlations and frequencies of scipy.stats against values of R 4.2.2 on its own data.

Source of the data and of the tests: R help pages t.test (sleep, Student 1908), chisq.test (Agresti 2007),
cor.test (Hollander and Wolfe 1973), PlantGrowth (Dobson 1983), cars (Ezekiel 1930).
The expected numbers were printed by R 4.2.2 with 15 digits.
"""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from scipy import stats

from gatecheck.declaring import DeclareError, declare

FIRST_DRUG = [0.7, -1.6, -0.2, -1.2, -0.1, 3.4, 3.7, 0.8, 0.0, 2.0]
SECOND_DRUG = [1.9, 0.8, 1.1, 0.1, -0.1, 4.4, 5.5, 1.6, 4.6, 3.4]
SLEEP = {"first": FIRST_DRUG, "second": SECOND_DRUG}
LIGHTNESS = [44.4, 45.9, 41.9, 53.3, 44.7, 44.1, 50.7, 45.2, 60.1]
PANEL_SCORE = [2.6, 3.1, 2.5, 5.0, 3.6, 4.0, 5.2, 2.8, 3.8]
SPEED = [
    4.0, 4.0, 7.0, 7.0, 8.0, 9.0, 10.0, 10.0, 10.0, 11.0, 11.0, 12.0, 12.0, 12.0, 12.0, 13.0, 13.0,
    13.0, 13.0, 14.0, 14.0, 14.0, 14.0, 15.0, 15.0, 15.0, 16.0, 16.0, 17.0, 17.0, 17.0, 18.0, 18.0,
    18.0, 18.0, 19.0, 19.0, 19.0, 20.0, 20.0, 20.0, 20.0, 20.0, 22.0, 23.0, 24.0, 24.0, 24.0, 24.0,
    25.0,
]  # fmt: skip
DISTANCE = [
    2.0, 10.0, 4.0, 22.0, 16.0, 10.0, 18.0, 26.0, 34.0, 17.0, 28.0, 14.0, 20.0, 24.0, 28.0, 26.0, 34.0,
    34.0, 46.0, 26.0, 36.0, 60.0, 80.0, 20.0, 26.0, 54.0, 32.0, 40.0, 32.0, 40.0, 50.0, 42.0, 56.0,
    76.0, 84.0, 36.0, 46.0, 68.0, 32.0, 48.0, 52.0, 56.0, 64.0, 66.0, 54.0, 70.0, 92.0, 93.0, 120.0,
    85.0,
]  # fmt: skip
PLANTS = {
    "control": [4.17, 5.58, 5.18, 6.11, 4.50, 4.61, 5.17, 4.53, 5.33, 5.14],
    "treatment 1": [4.81, 4.17, 4.41, 3.59, 5.87, 3.83, 6.03, 4.89, 4.32, 4.69],
    "treatment 2": [6.31, 5.12, 5.54, 5.50, 5.37, 5.29, 4.92, 6.15, 5.80, 5.26],
}


def declared(result: object, **fields: Any) -> dict[str, Any]:
    return declare(result, **{"id": "a/result", "claim": "It differs.", "folder": None, **fields}).document


def near(value: float) -> Any:
    return pytest.approx(value, rel=1e-10)


def test_welch_t() -> None:
    document = declared(
        stats.ttest_ind(FIRST_DRUG, SECOND_DRUG, equal_var=False),
        estimate={"unit": "h"},
        sample={"unit": "patient", "groups": SLEEP},
    )
    assert document["test"] == {
        "name": "t test",
        "statistic": "t",
        "value": near(-1.86081346748685),
        "df": near(17.7764735161785),
        "p": near(0.0793941401873582),
        "sides": 2,
    }
    assert document["estimate"] == {
        "measure": "mean difference",
        "value": near(-1.58),
        "unit": "h",
        "standard_error": near(0.849091017238762),
        "interval": {"level": 0.95, "low": near(-3.36548323071171), "high": near(0.20548323071171)},
    }
    assert document["sample"] == {
        "unit": "patient",
        "n": 20,
        "groups": [
            {"name": "first", "n": 10, "mean": near(0.75), "sd": near(1.78900965775916)},
            {"name": "second", "n": 10, "mean": near(2.33), "sd": near(2.00224873579683)},
        ],
    }


def test_student_t() -> None:
    document = declared(stats.ttest_ind(FIRST_DRUG, SECOND_DRUG), sample={"unit": "patient", "groups": SLEEP})
    assert document["test"]["df"] == 18
    assert isinstance(document["test"]["df"], int)
    assert document["test"]["p"] == near(0.0791867142159382)


def test_paired_t_counts_each_pair_once() -> None:
    document = declared(stats.ttest_rel(FIRST_DRUG, SECOND_DRUG), sample={"unit": "patient", "groups": SLEEP})
    assert document["test"]["value"] == near(-4.06212768338204)
    assert document["test"]["p"] == near(0.00283289019738427)
    interval = document["estimate"]["interval"]
    assert interval == {"level": 0.95, "low": near(-2.45988576327698), "high": near(-0.700114236723018)}
    assert document["sample"]["n"] == 10


def test_one_sample_t_recovers_the_value_tested_and_the_open_interval() -> None:
    document = declared(
        stats.ttest_1samp(FIRST_DRUG + SECOND_DRUG, 1, alternative="greater"),
        sample={"unit": "patient", "groups": {"all": FIRST_DRUG + SECOND_DRUG}},
    )
    assert document["test"]["value"] == near(1.19675395938043)
    assert document["test"]["p"] == near(0.123061209020113)
    assert (document["test"]["sides"], document["test"]["tail"]) == (1, "greater")
    assert document["estimate"]["measure"] == "mean"
    assert document["estimate"]["value"] == near(1.54)
    assert document["estimate"]["null"] == 1
    assert document["estimate"]["interval"] == {"level": 0.95, "low": near(0.759779712527593)}
    assert document["sample"]["n"] == 20


def test_t_of_no_difference_has_no_tail_to_tell() -> None:
    result = stats.ttest_1samp([-1.0, 1.0, -2.0, 2.0], 0.0, alternative="less")
    assert result.statistic == 0
    with pytest.raises(DeclareError, match=r"test\.sides is needed by a claim"):
        declared(result, sample={"unit": "plot", "n": 4})
    assert declared(result, claim=None)["estimate"] == {
        "measure": "mean difference",
        "value": 0,
        "standard_error": near(math.sqrt(10 / 3 / 4)),
        "interval": {"level": 0.95, "high": pytest.approx(2.1483, abs=1e-4)},
    }


def test_t_from_summaries_is_told_its_df() -> None:
    result = stats.ttest_ind_from_stats(0.75, 1.78900965775916, 10, 2.33, 2.00224873579683, 10)
    sample = {"unit": "patient", "n": 20}
    estimate = {"measure": "mean difference", "value": -1.58, "unit": "h"}
    with pytest.raises(DeclareError) as caught:
        declared(result, sample=sample, estimate=estimate)
    assert str(caught.value) == (
        "the record 'a/result' was not written:\n"
        "  test.df is needed by a claim: the result does not tell it: give test={'df': ...}\n"
        "  test.sides is needed by a claim: the result does not tell it: "
        "give test={'sides': 2}, or {'sides': 1, 'tail': 'greater'}"
    )
    test = declared(result, sample=sample, estimate=estimate, test={"df": 18})["test"]
    assert test["p"] == near(0.0791867142159382)
    assert test["sides"] == 2


def test_permutation_p_of_a_t_test_is_asked_for_its_kind() -> None:
    """Its p is no tail of t, and passing it as one would be wrong."""
    method = stats.PermutationMethod(n_resamples=99, rng=np.random.default_rng(1))
    result = stats.ttest_ind(FIRST_DRUG, SECOND_DRUG, method=method)
    sample = {"unit": "patient", "groups": SLEEP}
    with pytest.raises(DeclareError) as caught:
        declared(result, sample=sample)
    assert str(caught.value) == (
        f"p = {result.pvalue} belongs to no tail of t = {result.statistic}, df = 18: say how p was "
        "made, such as test={'p_kind': 'permutation'}, or correct the statistic or df that were given"
    )
    test = declared(result, sample=sample, test={"p_kind": "permutation", "resamples": 99, "sides": 2})["test"]
    assert (test["p_kind"], test["resamples"], test["p"]) == ("permutation", 99, result.pvalue)


def test_pearson() -> None:
    document = declared(stats.pearsonr(LIGHTNESS, PANEL_SCORE), sample={"unit": "lot"})
    assert document["test"] == {
        "name": "Pearson correlation",
        "statistic": "r",
        "value": near(0.571181557563829),
        "df": 7,
        "p": near(0.108173054349494),
        "sides": 2,
    }
    assert document["estimate"]["unit"] == "1"
    assert document["estimate"]["interval"] == {
        "level": 0.95,
        "low": near(-0.149742633036757),
        "high": near(0.895579461838739),
    }
    assert document["sample"] == {"unit": "lot", "n": 9}


def test_one_sided_pearson() -> None:
    document = declared(stats.pearsonr(LIGHTNESS, PANEL_SCORE, alternative="greater"), sample={"unit": "lot"})
    assert document["test"]["p"] == near(0.0540865271747469)
    assert document["test"]["tail"] == "greater"
    assert document["estimate"]["interval"] == {"level": 0.95, "low": near(-0.0222302275045116)}


def test_pearson_of_three_pairs_has_no_interval() -> None:
    document = declared(stats.pearsonr([1, 2, 3], [1, 2, 4]), sample={"unit": "lot"})
    assert "interval" not in document["estimate"]
    assert document["test"]["df"] == 1


def test_slope() -> None:
    document = declared(stats.linregress(SPEED, DISTANCE), sample={"unit": "car"})
    assert document["test"] == {
        "name": "t test of a slope",
        "statistic": "t",
        "value": near(9.46398999029837),
        "df": 48,
        "p": near(1.48983649629509e-12),
        "sides": 2,
    }
    assert document["estimate"] == {
        "measure": "slope",
        "value": near(3.93240875912409),
        "standard_error": near(0.415512776657122),
        "interval": {"level": 0.95, "low": near(3.09696432814032), "high": near(4.76785319010785)},
    }
    assert document["sample"] == {"unit": "car", "n": 50}


def test_flat_slope_does_not_tell_its_df() -> None:
    result = stats.linregress([0, 1, 2, 3], [1, 0, 0, 1])
    assert result.rvalue == 0
    with pytest.raises(DeclareError, match=r"test\.df is needed by a claim"):
        declared(result, sample={"unit": "plot", "n": 4})
    assert "interval" not in declared(result, claim=None)["estimate"]


def test_perfect_slope_is_no_test() -> None:
    message = r"^the result's standard error is 0: a perfect fit has no test to declare$"
    with pytest.raises(DeclareError, match=message):
        declared(stats.linregress([0, 1, 2], [0, 2, 4]))


def test_a_table_of_more_than_two_ways_has_all_its_cells_counted() -> None:
    document = declared(stats.chi2_contingency([[[5, 6], [7, 8]], [[9, 4], [3, 8]]]), sample={"unit": "respondent"})

    assert (document["sample"]["n"], document["test"]["df"]) == (50, 4)


def test_contingency_table() -> None:
    document = declared(stats.chi2_contingency([[762, 327, 468], [484, 239, 477]]), sample={"unit": "respondent"})
    assert document["test"] == {
        "name": "chi-squared test of a contingency table",
        "statistic": "chi2",
        "value": near(30.0701490957547),
        "df": 2,
        "p": near(2.95358918321176e-07),
    }
    assert document["sample"]["n"] == 2757


def test_goodness_of_fit_is_told_its_df() -> None:
    result = stats.chisquare([89, 37, 30, 28, 2], np.array([40, 20, 20, 15, 5]) * 1.86)
    sample = {"unit": "person", "n": 186}
    with pytest.raises(DeclareError, match=r"test\.df is needed by a claim: .* give test=\{'df': \.\.\.\}$"):
        declared(result, sample=sample)
    test = declared(result, sample=sample, test={"df": 4})["test"]
    assert test["value"] == near(9.99014336917563)
    assert test["p"] == near(0.0405940433447812)
    with pytest.raises(DeclareError, match=r"belongs to no tail of chi2 = .*, df = 5: "):
        declared(result, sample=sample, test={"df": 5})


def test_one_way_takes_its_df_from_the_groups() -> None:
    result = stats.f_oneway(*PLANTS.values())
    test = declared(result, sample={"unit": "plant", "groups": PLANTS})["test"]
    assert test["df"] == [2, 27]
    assert test["value"] == near(4.84608786238014)
    assert test["p"] == near(0.0159099583256229)
    with pytest.raises(DeclareError, match=r"give test=\{'df': \[\.\.\., \.\.\.\]\}$"):
        declared(result, sample={"unit": "plant", "n": 30})


def test_constant_input_is_no_result() -> None:
    nan = stats.ttest_rel([1.0, 2.0, 3.0], [math.nan, 2.0, 3.0])
    with pytest.raises(DeclareError) as caught:
        declared(nan)
    assert str(caught.value) == (
        "the result's t is nan, not a finite number: look for constant input, missing values or a model "
        "that did not converge"
    )


def test_several_tests_in_one_result_are_refused() -> None:
    result = stats.ttest_ind(np.ones((3, 2)) * [[1], [2], [3]], np.ones((3, 2)) * [[4], [5], [7]])
    message = r"^the result holds 2 values of t, so it is several tests: declare each of them by itself$"
    with pytest.raises(DeclareError, match=message):
        declared(result)


class _FutureResult:
    """A t test of a release that keeps neither the estimate nor its error under today's names."""

    __module__ = "scipy.stats"
    statistic, pvalue, df = -1.8608134674868526, 0.07918671421593822, 18.0


class _FuturePearson:
    """A correlation of a release that does not keep n under today's name."""

    __module__ = "scipy.stats"
    statistic, pvalue = 0.5711815575638292, 0.10817305434949447

    def confidence_interval(self, level: float) -> Any:
        assert level == 0.95
        return stats.pearsonr(LIGHTNESS, PANEL_SCORE).confidence_interval(level)


def test_what_a_release_no_longer_keeps_is_asked_for() -> None:
    _FutureResult.__name__ = "TtestResult"
    with pytest.raises(DeclareError, match=r"estimate is needed by a claim"):
        declared(_FutureResult(), sample={"unit": "patient", "groups": SLEEP})
    _FuturePearson.__name__ = "PearsonRResult"
    with pytest.raises(DeclareError, match=r"test\.df is needed by a claim"):
        declared(_FuturePearson(), sample={"unit": "lot", "n": 9})
