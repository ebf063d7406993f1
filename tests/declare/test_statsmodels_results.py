"""Fits and tables of statsmodels against values of other programs that its own test suite carries."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import pytest
import statsmodels.api as sm
import statsmodels.formula.api as smf
from scipy import stats
from statsmodels.regression.tests.results import lme_r_results
from statsmodels.regression.tests.results.results_regression import Longley
from statsmodels.stats.proportion import proportions_ztest
from statsmodels.stats.tests.test_anova import kidney_table
from statsmodels.stats.weightstats import ttest_ind

from gatecheck.declaring import DeclareError, declare

STUDENTS = sm.datasets.spector.load_pandas().data
DESIGN = sm.add_constant(STUDENTS[["GPA", "TUCE", "PSI"]])
HOUSEHOLDS = sm.datasets.engel.load_pandas().data


def declared(result: object, **fields: Any) -> dict[str, Any]:
    return declare(result, **{"id": "a/fit", "claim": "It differs.", "folder": None, **fields}).document


def test_least_squares_against_certified_values() -> None:
    """Longley: NIST Statistical Reference Datasets; p from R (statsmodels: results_regression.py)."""
    published = Longley()
    data = sm.datasets.longley.load_pandas()
    fit = sm.OLS(data.endog, sm.add_constant(data.exog, prepend=False)).fit()
    for at, name in enumerate(fit.model.exog_names):
        document = declared(fit, coefficient=name, sample={"unit": "year"})
        test, estimate = document["test"], document["estimate"]
        assert (test["statistic"], test["df"], test["sides"]) == ("t", 9, 2)
        assert test["value"] == pytest.approx(published.params[at] / published.bse[at], rel=1e-7)
        assert test["p"] == pytest.approx(published.pvalues[at], rel=1e-4)
        assert estimate["measure"] == f"coefficient of {name}"
        assert estimate["value"] == pytest.approx(published.params[at], rel=1e-7)
        assert estimate["standard_error"] == pytest.approx(published.bse[at], rel=1e-7)
        half = stats.t.ppf(0.975, 9) * published.bse[at]
        assert estimate["interval"]["low"] == pytest.approx(published.params[at] - half, rel=1e-6)
        assert estimate["interval"]["high"] == pytest.approx(published.params[at] + half, rel=1e-6)
        assert document["sample"]["n"] == 16


def test_logit_keeps_the_log_odds() -> None:
    """Spector and Mazzeo, PSI: 2.37868772835 (1.06456430165), Stata 11 (statsmodels: results_discrete.py).

    Greene, Econometric Analysis, gives 2.379 (1.065), t = 2.234 (from memory).
    """
    fit = sm.Logit(STUDENTS["GRADE"], DESIGN).fit(disp=False)
    document = declared(fit, coefficient="PSI", sample={"unit": "student"})
    assert document["test"]["statistic"] == "z"
    assert document["test"]["value"] == pytest.approx(2.37868772835 / 1.06456430165, rel=1e-6)
    assert "df" not in document["test"]
    assert document["estimate"]["value"] == pytest.approx(2.37868772835, rel=1e-7)
    assert document["estimate"]["standard_error"] == pytest.approx(1.06456430165, rel=1e-6)
    assert document["estimate"]["unit"] == "log odds"
    assert "scale" not in document["estimate"]
    assert document["sample"] == {"unit": "student", "n": 32}
    assert f"{document['estimate']['value']:.3f}" == "2.379"
    assert f"{document['test']['value']:.3f}" == "2.234"


def test_fit_on_plain_arrays() -> None:
    fit = sm.Logit(np.asarray(STUDENTS["GRADE"]), np.asarray(DESIGN)).fit(disp=False)
    document = declared(fit, coefficient="x3", sample={"unit": "student"})
    assert document["estimate"]["value"] == pytest.approx(2.37868772835, rel=1e-7)
    assert document["estimate"]["interval"]["low"] == pytest.approx(0.29218, abs=1e-5)


@pytest.mark.parametrize(
    ("family", "unit"),
    [
        (sm.families.Binomial(), "log odds"),
        (sm.families.Binomial(sm.families.links.Probit()), None),
        (sm.families.Gaussian(), None),
    ],
)
def test_unit_of_generalised_linear_models(family: Any, unit: str | None) -> None:
    fit = sm.GLM(STUDENTS["GRADE"], DESIGN, family=family).fit()
    document = declared(fit, coefficient="PSI", claim=None)
    assert document["estimate"].get("unit") == unit
    assert document["sample"]["n"] == 32


def test_mixed_model_does_not_take_rows_for_units() -> None:
    """Coefficient and variance from lmer of R (statsmodels: results/lme_r_results.py, reml_drf_0)."""
    rows = pd.read_csv(Path(lme_r_results.__file__).with_name("lme00.csv"))
    within = [name for name in map(str, rows) if name.startswith("exog_re")]
    fixed = [name for name in map(str, rows) if name.startswith("exog_fe")]
    fit = sm.MixedLM(rows["endog"], rows[fixed], groups=rows["groups"], exog_re=rows[within]).fit(gtol=1e-7)
    document = declared(fit, coefficient=fixed[0], sample={"unit": "group", "n": rows["groups"].nunique()})
    assert document["test"]["name"] == "Wald z test of a coefficient"
    assert document["test"]["value"] == pytest.approx(-0.9887533 / 0.001323559**0.5, rel=1e-4)
    assert document["estimate"]["value"] == pytest.approx(-0.9887533, rel=1e-5)
    assert document["estimate"]["standard_error"] == pytest.approx(0.001323559**0.5, rel=1e-4)
    with pytest.raises(DeclareError, match=r"sample\.n is needed by a claim"):
        declared(fit, coefficient=fixed[0], sample={"unit": "group"})


def test_clustered_errors_do_not_take_rows_for_units_and_keep_their_df() -> None:
    groups = np.arange(len(HOUSEHOLDS)) // 5
    fit = smf.ols("foodexp ~ income", HOUSEHOLDS).fit(cov_type="cluster", cov_kwds={"groups": groups}, use_t=True)
    document = declared(fit, coefficient="income", claim=None)
    assert document["test"]["df"] == 46
    assert document["test"]["sides"] == 2
    assert "sample" not in document


def test_heteroscedasticity_robust_errors_are_judged_by_z() -> None:
    fit = smf.ols("foodexp ~ income", HOUSEHOLDS).fit(cov_type="HC3")
    document = declared(fit, coefficient="income", sample={"unit": "household"})
    assert document["test"]["statistic"] == "z"
    assert document["sample"]["n"] == 235


def test_p_that_underflowed_is_a_bound() -> None:
    x = np.linspace(0, 1, 2000)
    fit = sm.OLS(100 * x + np.sin(1e4 * x), sm.add_constant(x)).fit()
    assert fit.pvalues[1] == 0
    test = declared(fit, coefficient="x1", sample={"unit": "plot"})["test"]
    assert (test["p"], test["sides"]) == ("<1e-300", 2)


def test_coefficient_is_asked_for_by_name() -> None:
    fit = smf.ols("foodexp ~ income", HOUSEHOLDS).fit()
    with pytest.raises(DeclareError) as caught:
        declared(fit)
    assert str(caught.value) == "declare needs coefficient: name the one to declare, of Intercept, income"
    with pytest.raises(DeclareError) as caught:
        declared(fit, coefficient="incme")
    assert str(caught.value) == "the fit has no coefficient 'incme': name one of Intercept, income"


def test_coefficient_without_a_fit_is_refused() -> None:
    with pytest.raises(DeclareError) as caught:
        declared(stats.pearsonr(STUDENTS["GPA"], STUDENTS["TUCE"]), coefficient="GPA")
    assert str(caught.value) == "coefficient names a term of a fit or of a table of terms: leave it out here"


def test_fit_with_several_equations_is_refused() -> None:
    choices = [0, 1, 2, 0, 1, 2, 1, 0] * 4
    fit = sm.MNLogit(choices, DESIGN[["const", "GPA"]]).fit(disp=False)
    with pytest.raises(
        DeclareError, match=r"^the result holds 2 values of statistic of GPA, so it is several tests"
    ):
        declared(fit, coefficient="GPA")


def test_fit_that_did_not_converge_is_refused() -> None:
    fit = smf.ols("foodexp ~ income", HOUSEHOLDS.head(2)).fit()
    message = r"^the result's \S+ of income is (nan|inf), not a finite number"
    with np.errstate(all="ignore"), pytest.raises(DeclareError, match=message):
        declared(fit, coefficient="income")


@pytest.mark.parametrize(
    ("row", "df", "f", "p"),
    [
        ("C(Duration)", [1, 54], 4.358293, 0.0415617),
        ("C(Weight)", [2, 54], 15.80674, 3.944502e-06),
        ("C(Duration):C(Weight)", [2, 54], 0.5920404, 0.5567479),
    ],
)
def test_analysis_of_variance(row: str, df: list[int], f: float, p: float) -> None:
    """Kidney failure data, computed with R (statsmodels: stats/tests/test_anova.py, TestAnovaLM)."""
    fit = smf.ols("np.log(Days + 1) ~ C(Duration) * C(Weight)", data=kidney_table).fit()
    document = declared(sm.stats.anova_lm(fit), coefficient=row, sample={"unit": "patient", "n": 60})
    assert document["test"] == {
        "name": "analysis of variance",
        "statistic": "F",
        "value": pytest.approx(f, rel=1e-5),
        "df": df,
        "p": pytest.approx(p, rel=1e-5),
    }
    assert document["provenance"]["software"].keys() >= {"numpy", "pandas", "python", "scipy", "statsmodels"}


def test_analysis_of_variance_names_its_rows() -> None:
    table = sm.stats.anova_lm(smf.ols("foodexp ~ income", HOUSEHOLDS).fit(), typ=2)
    with pytest.raises(DeclareError) as caught:
        declared(table)
    assert str(caught.value) == "declare needs coefficient: name the one to declare, of income"
    with pytest.raises(DeclareError) as caught:
        declared(table, coefficient="Residual")
    assert str(caught.value) == "the table has no coefficient 'Residual': name one of income"


def test_table_without_terms_is_unknown() -> None:
    with pytest.raises(DeclareError, match=r"^declare does not know results of the type pandas\..*DataFrame: "):
        declared(pd.DataFrame({"p": [0.5]}))


def test_t_test_as_a_tuple() -> None:
    improved = STUDENTS["GRADE"] == 1
    gpa = {"improved": STUDENTS.loc[improved, "GPA"], "not": STUDENTS.loc[~improved, "GPA"]}
    document = declared(
        ttest_ind(*gpa.values(), alternative="larger"),
        estimate={"measure": "mean difference", "value": 0.48, "unit": "grade points"},
        sample={"unit": "student", "groups": gpa},
    )
    known = stats.ttest_ind(*gpa.values(), alternative="greater")
    assert document["test"] == {
        "statistic": "t",
        "value": pytest.approx(known.statistic, rel=1e-12),
        "df": 30,
        "p": pytest.approx(known.pvalue, rel=1e-12),
        "sides": 1,
        "tail": "greater",
    }
    assert document["sample"]["n"] == 32


def test_tuple_of_three_that_is_no_t_test_is_refused_until_named() -> None:
    """A likelihood-ratio comparison also returns (statistic, p, df)."""
    larger = smf.ols("foodexp ~ income + np.log(income)", HOUSEHOLDS).fit()
    compared = larger.compare_lr_test(smf.ols("foodexp ~ 1", HOUSEHOLDS).fit())
    with pytest.raises(DeclareError, match=r"belongs to no tail of t = .*, df = 2: .*correct the statistic"):
        declared(compared, claim=None)
    test = declared(compared, claim=None, test={"statistic": "chi2"})["test"]
    assert test["df"] == 2
    assert test["p"] == compared[1]


def test_z_test_of_proportions_is_asked_for_its_statistic() -> None:
    result = proportions_ztest([8, 3], [14, 18])
    with pytest.raises(DeclareError) as caught:
        declared(result)
    assert str(caught.value) == (
        "a tuple of two numbers may hold any statistic: say which, test={'statistic': 'z'} "
        "(t, z, chi2, F or r, with 'df' where it has them)"
    )
    document = declared(
        result,
        test={"statistic": "z"},
        estimate={"measure": "difference of proportions", "value": 8 / 14 - 3 / 18, "unit": "1"},
        sample={
            "unit": "student",
            "groups": {"PSI": {"n": 14, "events": 8}, "plain": {"n": 18, "events": 3}},
        },
    )
    pooled = 11 / 32
    z = (8 / 14 - 3 / 18) / (pooled * (1 - pooled) * (1 / 14 + 1 / 18)) ** 0.5
    assert document["test"]["value"] == pytest.approx(z, rel=1e-12)
    assert document["test"]["sides"] == 2
    assert document["sample"]["n"] == 32


@pytest.mark.parametrize("result", [(), (1.0,), (1.0, 0.2, 3.0, 4.0)])
def test_tuple_of_another_length_is_unknown(result: tuple[float, ...]) -> None:
    with pytest.raises(
        DeclareError, match=r"^declare does not know results of the type tuple: give plain numbers, "
    ):
        declared(result)
