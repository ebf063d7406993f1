"""Rank, exact and other tests of scipy.stats against values that R 4.2.2 computes on data of R's help pages.

Source of the data and of the tests: R help pages t.test (sleep, Student 1908), wilcox.test and kruskal.test
(Hollander and Wolfe 1973), fisher.test (tea tasting, Fisher 1935), binom.test (Conover 1971), cor.test
(Hollander and Wolfe 1973). The expected numbers were printed by R 4.2.2 with 15 digits.
"""

from __future__ import annotations

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
DEPRESSION_FIRST = [1.83, 0.50, 1.62, 2.48, 1.68, 1.88, 1.55, 3.06, 1.30]
DEPRESSION_SECOND = [0.878, 0.647, 0.598, 2.05, 1.06, 1.29, 1.06, 3.14, 1.29]


def declared(result: object, **fields: Any) -> dict[str, Any]:
    return declare(result, **{"id": "a/result", "claim": "It differs.", "folder": None, **fields}).document


def near(value: float) -> Any:
    return pytest.approx(value, rel=1e-10)


@pytest.mark.parametrize(
    ("result", "name", "symbol", "value"),
    [
        (stats.spearmanr(LIGHTNESS, PANEL_SCORE), "Spearman rank correlation", "rho", 0.6),
        (stats.kendalltau(LIGHTNESS, PANEL_SCORE), "Kendall", "tau", 0.444444444444445),
    ],
)
def test_rank_correlations(result: object, name: str, symbol: str, value: float) -> None:
    document = declared(result, test={"name": name, "sides": 2}, sample={"unit": "lot", "n": 9})
    assert document["test"]["named_statistic"] == {"symbol": symbol, "value": near(value)}
    assert document["estimate"]["value"] == near(value)
    assert document["estimate"]["unit"] == "1"


def test_kendall_p() -> None:
    result = stats.kendalltau(LIGHTNESS, PANEL_SCORE, alternative="greater")
    assert declared(result, claim=None, test={"name": "Kendall"})["test"]["p"] == near(0.0597194664902998)


def test_mann_whitney() -> None:
    x = [0.80, 0.83, 1.89, 1.04, 1.45, 1.38, 1.91, 1.64, 0.73, 1.46]
    y = [1.15, 0.88, 0.90, 0.74, 1.21]
    document = declared(
        stats.mannwhitneyu(x, y, alternative="greater"),
        test={"sides": 1, "tail": "greater", "p_kind": "exact"},
        sample={"unit": "membrane", "groups": {"at term": x, "earlier": y}},
    )
    assert document["test"] == {
        "name": "Mann-Whitney",
        "p": near(0.127206127206127),
        "p_kind": "exact",
        "sides": 1,
        "tail": "greater",
        "named_statistic": {"symbol": "U", "value": 35},
    }
    assert document["sample"]["n"] == 15


def test_mann_whitney_asks_for_its_sides() -> None:
    with pytest.raises(DeclareError) as caught:
        declared(stats.mannwhitneyu(FIRST_DRUG, SECOND_DRUG), sample={"unit": "patient", "groups": SLEEP})
    assert str(caught.value) == (
        "the record 'a/result' was not written:\n"
        "  test.sides is needed by a claim: the result does not tell it: "
        "give test={'sides': 2}, or {'sides': 1, 'tail': 'greater'}"
    )


def test_wilcoxon_counts_each_pair_once() -> None:
    document = declared(
        stats.wilcoxon(DEPRESSION_FIRST, DEPRESSION_SECOND, alternative="greater"),
        test={"sides": 1, "tail": "greater"},
        sample={"unit": "patient", "groups": {"first": DEPRESSION_FIRST, "second": DEPRESSION_SECOND}},
    )
    assert document["test"]["named_statistic"] == {"symbol": "W", "value": 40}
    assert document["test"]["p"] == near(0.01953125)
    assert document["sample"]["n"] == 9


def test_kruskal_wallis_has_no_direction() -> None:
    x, y, z = [2.9, 3.0, 2.5, 2.6, 3.2], [3.8, 2.7, 4.0, 2.4], [2.8, 3.4, 3.7, 2.2, 2.0]
    document = declared(stats.kruskal(x, y, z), sample={"unit": "subject", "n": 14})
    assert document["test"]["named_statistic"] == {"symbol": "H", "value": near(0.771428571428572)}
    assert document["test"]["p"] == near(0.679964773578894)


def test_friedman_counts_each_unit_once() -> None:
    """By hand: ranks 1 2 3, 1 2 3, 2 1 3 sum to 4, 5, 9, and Q = 12 (16 + 25 + 81) / 36 - 36 = 14/3."""
    columns = [1.0, 1.0, 2.0], [2.0, 2.0, 1.0], [3.0, 3.0, 3.0]
    groups = dict(zip("abc", columns, strict=True))
    document = declared(stats.friedmanchisquare(*columns), sample={"unit": "player", "groups": groups})
    assert document["test"]["named_statistic"] == {"symbol": "Q", "value": near(14 / 3)}
    assert document["sample"]["n"] == 3


def test_fisher_exact() -> None:
    result = stats.fisher_exact(np.array([[3, 1], [1, 3]]), alternative="greater")
    document = declared(
        result,
        test={"name": "Fisher's exact test", "sides": 1, "tail": "greater"},
        sample={"unit": "cup", "n": 8},
    )
    assert document["test"]["p"] == near(0.242857142857143)
    assert document["test"]["p_kind"] == "exact"
    assert document["estimate"] == {
        "measure": "odds ratio",
        "value": 9,
        "unit": "1",
        "null": 1,
        "scale": "log",
    }


@pytest.mark.parametrize("table", [[[0, 5], [5, 5]], [[5, 0], [5, 5]]])
def test_fisher_exact_with_an_empty_cell_has_no_estimate(table: list[list[int]]) -> None:
    document = declared(stats.fisher_exact(np.array(table)), claim=None, test={"name": "Fisher's exact test"})
    assert "estimate" not in document
    assert document["test"]["p"] == near(0.1008991008991009)


def test_shared_class_is_asked_which_test_it_is() -> None:
    with pytest.raises(DeclareError) as caught:
        declared(stats.spearmanr(LIGHTNESS, PANEL_SCORE))
    assert str(caught.value) == (
        "scipy returns a SignificanceResult from spearmanr, kendalltau, fisher_exact and others: say which, "
        "test={'name': 'Spearman rank correlation'}, 'Kendall rank correlation' or \"Fisher's exact test\"; "
        "for another give test={'name': ..., 'named_statistic': {'symbol': ...}}"
    )
    result = stats.pointbiserialr([False] * 10 + [True] * 10, FIRST_DRUG + SECOND_DRUG)
    test = declared(result, claim=None, test={"statistic": "r", "df": 18})["test"]
    assert test["p"] == near(0.0791867142159382)
    assert test["sides"] == 2


def test_binomial() -> None:
    result = stats.binomtest(682, 925, 0.75)
    document = declared(result, estimate={"null": 0.75}, sample={"unit": "plant"})
    assert document["test"] == {
        "name": "exact binomial test",
        "p": near(0.382491559574852),
        "p_kind": "exact",
        "sides": 2,
        "named_statistic": {"symbol": "k", "value": 682},
    }
    assert document["estimate"] == {
        "measure": "proportion",
        "value": near(0.737297297297297),
        "unit": "1",
        "null": 0.75,
        "interval": {"level": 0.95, "low": near(0.707668264079039), "high": near(0.765406558241525)},
    }
    assert document["sample"]["n"] == 925


def test_binomial_asks_for_the_proportion_tested_even_without_a_claim() -> None:
    """The contract takes an absent `null` for 0, which no binomial test tests."""
    with pytest.raises(DeclareError) as caught:
        declared(stats.binomtest(682, 925, 0.75), claim=None)
    assert str(caught.value) == (
        "the record 'a/result' was not written:\n"
        "  estimate.null is not kept by the result: give estimate={'null': 0.5}, as tested"
    )


@pytest.mark.parametrize(("alternative", "end"), [("greater", "low"), ("less", "high")])
def test_one_sided_binomial(alternative: Any, end: str) -> None:
    result = stats.binomtest(3, 10, 0.5, alternative=alternative)
    document = declared(result, claim=None, estimate={"null": 0.5})
    assert document["test"]["tail"] == alternative
    assert set(document["estimate"]["interval"]) == {"level", end}


def test_permutation_test() -> None:
    result = stats.permutation_test(
        (FIRST_DRUG, SECOND_DRUG),
        lambda x, y, axis: np.mean(x, axis=axis) - np.mean(y, axis=axis),
        n_resamples=199,
        rng=np.random.default_rng(7),
    )
    with pytest.raises(DeclareError) as caught:
        declared(result, sample={"unit": "patient", "groups": SLEEP})
    assert [line.split()[0] for line in str(caught.value).splitlines()[1:]] == [
        "test.sides",
        "sample.n",
        "estimate",
    ]
    document = declared(
        result,
        test={"sides": 2},
        estimate={"measure": "mean difference", "value": result.statistic, "unit": "h"},
        sample={"unit": "patient", "n": 20, "groups": SLEEP},
    )
    assert document["test"]["p"] == result.pvalue
    assert document["test"]["p_kind"] == "permutation"
    assert document["test"]["resamples"] == 199
    assert document["test"]["named_statistic"] == {"symbol": "T", "value": near(-1.58)}


def test_another_test_is_asked_for_its_statistic() -> None:
    result = stats.ks_2samp(FIRST_DRUG, SECOND_DRUG)
    with pytest.raises(DeclareError) as caught:
        declared(result)
    assert str(caught.value) == (
        "declare does not know which statistic a KstestResult holds: give "
        "test={'name': ..., 'statistic': 'z'} (t, z, chi2, F or r), or "
        "test={'name': ..., 'named_statistic': {'symbol': ...}} for another"
    )
    test = declared(result, claim=None, test={"name": "Kolmogorov-Smirnov", "named_statistic": {"symbol": "D"}})[
        "test"
    ]
    assert test["named_statistic"] == {"symbol": "D", "value": result.statistic}


def test_another_test_with_a_statistic_of_the_contract() -> None:
    result = stats.logrank(FIRST_DRUG, SECOND_DRUG)
    test = declared(result, claim=None, test={"name": "log-rank", "statistic": "z"})["test"]
    assert test["value"] == result.statistic
    assert test["sides"] == 2


def test_result_without_a_p_is_unknown() -> None:
    with pytest.raises(DeclareError, match=r"^declare does not know results of the type scipy\.stats\."):
        declared(stats.theilslopes(FIRST_DRUG, SECOND_DRUG))
