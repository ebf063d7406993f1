"""Fits and tables of statsmodels, known by what they offer, so that nothing is imported for them."""

from __future__ import annotations

from typing import Any

from gatecheck.declaring.derived import Derived, Given, interval_at_95
from gatecheck.declaring.errors import DeclareError
from gatecheck.declaring.values import degrees, number


def is_fit(result: object) -> bool:
    """Whether `result` is a fitted model with coefficients."""
    return all(hasattr(result, name) for name in ("params", "conf_int", "model"))


def is_anova_table(result: object) -> bool:
    """Whether `result` is an analysis-of-variance table with one row a term."""
    return type(result).__name__ == "DataFrame" and "PR(>F)" in getattr(result, "columns", ())


def of_fit(fit: Any, given: Given) -> Derived:
    """Return what a fit says of the coefficient that the caller names."""
    names = [str(name) for name in fit.model.exog_names]
    at = names.index(_chosen(given.coefficient, names, "the fit"))
    name = names[at]
    use_t = bool(getattr(fit, "use_t", False))
    test = {
        "name": "t test of a coefficient" if use_t else "Wald z test of a coefficient",
        "statistic": "t" if use_t else "z",
        "value": _at(fit.tvalues, at, f"statistic of {name}"),
        "df": _df(fit) if use_t else None,
        "p": _at(fit.pvalues, at, f"p of {name}"),
        "sides": 2,
    }
    limits = _array(fit.conf_int(0.05))[at]
    estimate = {
        "measure": f"coefficient of {name}",
        "value": _at(fit.params, at, f"coefficient of {name}"),
        "unit": "log odds" if _is_logistic(fit.model) else None,
        "standard_error": _at(fit.bse, at, f"standard error of {name}"),
        **interval_at_95(*(number(limit, f"interval of {name}") for limit in limits)),
    }
    return Derived(test, estimate, n=_units(fit))


def of_anova_table(table: Any, given: Given) -> Derived:
    """Return what the row that the caller names says; its denominator is the row of residuals."""
    terms = [str(term) for term in table.index if str(term) != "Residual"]
    term = _chosen(given.coefficient, terms, "the table")
    value, p = (number(table.loc[term, name], f"{name} of {term}") for name in ("F", "PR(>F)"))
    df = [degrees(table.loc[row, "df"]) for row in (term, "Residual")]
    return Derived({"name": "analysis of variance", "statistic": "F", "value": value, "df": df, "p": p})


def _chosen(coefficient: str | None, names: list[str], holder: str) -> str:
    listed = ", ".join(names)
    if coefficient is None:
        raise DeclareError(f"declare needs coefficient: name the one to declare, of {listed}")
    if coefficient not in names:
        raise DeclareError(f"{holder} has no coefficient {coefficient!r}: name one of {listed}")
    return coefficient


def _array(table: Any) -> Any:
    return table.to_numpy() if hasattr(table, "to_numpy") else table


def _at(values: Any, at: int, name: str) -> float:
    return number(_array(values)[at], name)


def _df(fit: Any) -> float:
    """Return the df that the fit's own p-values use: robust errors may have a df of their own."""
    return degrees(getattr(fit, "df_resid_inference", fit.df_resid))


def _is_logistic(model: Any) -> bool:
    if type(model).__name__ == "Logit":
        return True
    family = getattr(model, "family", None)
    link = getattr(family, "link", None)
    return type(family).__name__ == "Binomial" and type(link).__name__ == "Logit"


def _units(fit: Any) -> int | None:
    """Return the number of rows, unless the model takes rows for parts of larger units."""
    kind = str(getattr(fit, "cov_type", ""))
    return int(fit.nobs) if kind == "nonrobust" or kind.startswith("HC") else None
