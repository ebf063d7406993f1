"""Fits of statsmodels on the data sets that it brings, as its documentation fits them, as records in all digits."""

from __future__ import annotations

import warnings
from collections.abc import Iterator
from typing import Any

import numpy as np
import statsmodels.api as sm
import statsmodels.formula.api as smf
from statsmodels.stats import proportion, weightstats

from gatecheck import declare


def fitted() -> list[tuple[str, str, dict[str, Any], bool]]:
    """Return kind, source, document and whether all is given, for each coefficient and each test."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        return [*_coefficients(), *_tables(), *_tests()]


def _coefficients() -> Iterator[tuple[str, str, dict[str, Any], bool]]:
    for name, fit in _fits():
        for coefficient in fit.model.exog_names:
            declared = declare(
                fit,
                id=f"statsmodels/{name}/{str(coefficient).replace(' ', '')}",
                coefficient=str(coefficient),
                estimate={"unit": "unit"},
                sample={"unit": "row"},
                folder=None,
            )
            document = declared.document
            yield (
                f"coefficient of {type(fit.model).__name__}",
                f"statsmodels {name}",
                document,
                "n" in document["sample"],
            )


def _fits() -> Iterator[tuple[str, Any]]:
    """The fits of the documentation's pages on OLS, GLM, discrete choice and robust errors."""
    spector = sm.datasets.spector.load_pandas()
    design = sm.add_constant(spector.exog)
    yield "spector-ols", sm.OLS(spector.endog, design).fit()
    yield "spector-logit", sm.Logit(spector.endog, design).fit(disp=0)
    yield "spector-probit", sm.Probit(spector.endog, design).fit(disp=0)
    longley = sm.datasets.longley.load_pandas()
    yield "longley", sm.OLS(longley.endog, sm.add_constant(longley.exog)).fit()
    star = sm.datasets.star98.load_pandas()
    binomial = sm.families.Binomial()
    yield "star98", sm.GLM(star.endog, sm.add_constant(star.exog), family=binomial).fit()
    scotland = sm.datasets.scotland.load_pandas()
    gamma = sm.families.Gamma(sm.families.links.Log())
    yield "scotland", sm.GLM(scotland.endog, sm.add_constant(scotland.exog), family=gamma).fit()
    crime = sm.datasets.statecrime.load_pandas().data
    formula = "murder ~ urban + poverty + hs_grad + single"
    yield "statecrime", smf.ols(formula, crime).fit()
    yield "statecrime-robust", smf.ols(formula, crime).fit(cov_type="HC3", use_t=True)
    rand = sm.datasets.randhie.load_pandas()
    yield "randhie-poisson", sm.Poisson(rand.endog, sm.add_constant(rand.exog)).fit(disp=0)
    stack = sm.datasets.stackloss.load_pandas()
    yield "stackloss", sm.OLS(stack.endog, sm.add_constant(stack.exog)).fit()
    yield "stackloss-robust", sm.RLM(stack.endog, sm.add_constant(stack.exog)).fit()


def _tables() -> Iterator[tuple[str, str, dict[str, Any], bool]]:
    """Analyses of variance of type I and II of two fits."""
    crime = sm.datasets.statecrime.load_pandas().data
    affairs = sm.datasets.fair.load_pandas().data
    for name, fit in (
        ("statecrime", smf.ols("murder ~ urban + poverty + single", crime).fit()),
        ("fair", smf.ols("affairs ~ C(rate_marriage) + C(religious)", affairs).fit()),
    ):
        for kind in (1, 2):
            table = sm.stats.anova_lm(fit, typ=kind)
            for term in (str(each) for each in table.index if each != "Residual"):
                identifier = f"statsmodels/anova-{name}-{kind}/{term}"
                sample = {"unit": "row", "n": int(fit.nobs)}
                document = declare(table, id=identifier, coefficient=term, sample=sample, folder=None).document
                yield (
                    "analysis of variance",
                    f"statsmodels anova_lm {name}",
                    document,
                    document["test"]["df"][0] > 1,
                )


def _tests() -> Iterator[tuple[str, str, dict[str, Any], bool]]:
    """The documented examples of proportions_ztest and ztest, and t tests of a data set."""
    counts, sizes = np.array([5, 12]), np.array([83, 99])
    z, p = proportion.proportions_ztest(counts, sizes)
    low, high = proportion.confint_proportions_2indep(5, 83, 12, 99, method="wald")
    groups = [{"name": name, "n": int(n), "events": int(k)} for name, k, n in zip("ab", counts, sizes, strict=True)]
    estimate = {
        "measure": "difference in proportions", "value": float(5 / 83 - 12 / 99), "unit": "1",
        "interval": {"level": 0.95, "low": float(low), "high": float(high)},
    }  # fmt: skip
    yield _declared("two-proportion z", "proportions_ztest", (z, p), "z", estimate, {"groups": groups})
    z, p = proportion.proportions_ztest(5, 83, 0.05)
    low, high = proportion.proportion_confint(5, 83)
    estimate = {
        "measure": "proportion", "value": 5 / 83, "unit": "1", "null": 0.05,
        "interval": {"level": 0.95, "low": float(low), "high": float(high)},
    }  # fmt: skip
    yield _declared("one-proportion z", "proportions_ztest-one", (z, p), "z", estimate, {"n": 83})
    heart = sm.datasets.heart.load_pandas().data
    old, young = (heart.survival[heart.age > 50], heart.survival[heart.age <= 50])
    for way in ("pooled", "unequal"):
        compared = weightstats.CompareMeans.from_data(old, young)
        low, high = compared.tconfint_diff(usevar=way)
        estimate = {
            "measure": "mean difference", "value": float(old.mean() - young.mean()), "unit": "d",
            "interval": {"level": 0.95, "low": float(low), "high": float(high)},
        }  # fmt: skip
        sample = {"groups": {"old": old.tolist(), "young": young.tolist()}}
        name = "two-sample t" if way == "pooled" else "Welch t"
        yield _declared(name, f"heart-{way}", compared.ttest_ind(usevar=way), "t", estimate, sample)


def _declared(
    name: str, identifier: str, result: Any, statistic: str, estimate: dict[str, Any], sample: dict[str, Any]
) -> tuple[str, str, dict[str, Any], bool]:
    declared = declare(
        tuple(float(each) for each in result),
        id=f"statsmodels/{identifier}",
        test={"name": name, "statistic": statistic, "sides": 2},
        estimate=estimate,
        sample={"unit": "unit", **sample},
        folder=None,
    )
    return name, f"statsmodels {identifier}", declared.document, True
