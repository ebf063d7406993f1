"""Results of scipy.stats, known by the name of their class, so that nothing is imported for them."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from typing import Any

from gatecheck.declaring.derived import Derived, Given, interval_at_95
from gatecheck.declaring.errors import DeclareError
from gatecheck.declaring.sample import group_sizes
from gatecheck.declaring.tails import t_quantile
from gatecheck.declaring.values import degrees, is_number, number, plain

Adapter = Callable[[Any, Given], Derived]
_WHOLE = 1e-6
_DIGITS = 12


def scipy_adapter(result: object) -> Adapter | None:
    """Return the adapter for a result of scipy.stats, or `None` for another object."""
    kind = type(result)
    if kind.__module__.partition(".")[0] != "scipy":
        return None
    if kind.__name__ in _RANK_TESTS:
        return _rank_test
    known = _ADAPTERS.get(kind.__name__)
    other = _other if hasattr(result, "statistic") and hasattr(result, "pvalue") else None
    return known or other


def _t_test(result: Any, _: Given) -> Derived:
    t = number(result.statistic, "t")
    df = getattr(result, "df", None)
    test = {"name": "t test", "statistic": "t", "value": t, "df": None if df is None else degrees(df)}
    return Derived(test | _p(result), _mean(result, t), directed=True)


def _mean(result: Any, t: float) -> dict[str, Any]:
    """Return the estimate that a t test keeps beside its statistic; the test from summaries keeps none."""
    kept, error = getattr(result, "_estimate", None), getattr(result, "_standard_error", None)
    if kept is None or error is None:
        return {}
    value, standard_error = number(kept, "estimate"), number(error, "standard error")
    null = _cleared(value - t * standard_error, max(abs(value), abs(t * standard_error)))
    limits = result.confidence_interval(0.95)
    return {
        "measure": "mean" if null else "mean difference",
        "value": value,
        "null": null or None,
        "standard_error": standard_error,
        **interval_at_95(float(limits.low), float(limits.high)),
    }


def _cleared(difference: float, scale: float) -> float:
    """Return a difference of two numbers of size `scale` without the digits that the subtraction lost."""
    return round(difference, _DIGITS - math.ceil(math.log10(scale))) if scale else 0.0


def _pearson(result: Any, _: Given) -> Derived:
    r = number(result.statistic, "r")
    kept = getattr(result, "_n", None)
    n = None if kept is None else int(number(kept, "n"))
    limits = result.confidence_interval(0.95)
    # A one-sided interval ends at the end of the scale, which is no limit.
    low, high = (float(limit) if abs(limit) < 1 else math.inf for limit in (limits.low, limits.high))
    test = {"name": "Pearson correlation", "statistic": "r", "value": r, "df": None if n is None else n - 2}
    estimate = {"measure": "Pearson correlation", "value": r, "unit": "1", **interval_at_95(low, high)}
    return Derived(test | _p(result), estimate, n=n, directed=True)


def _linregress(result: Any, _: Given) -> Derived:
    slope, error, r = (number(getattr(result, name), name) for name in ("slope", "stderr", "rvalue"))
    if error == 0:
        raise DeclareError("the result's standard error is 0: a perfect fit has no test to declare")
    t = slope / error
    df = _df_of_slope(t, r)
    test = {"name": "t test of a slope", "statistic": "t", "value": t, "df": df}
    estimate = {"measure": "slope", "value": slope, "standard_error": error}
    if df is None:
        return Derived(test | _p(result), estimate, directed=True)
    half = t_quantile(df, 0.975) * error
    estimate |= interval_at_95(slope - half, slope + half)
    return Derived(test | _p(result), estimate, n=df + 2, directed=True)


def _df_of_slope(t: float, r: float) -> int | None:
    """Return the df for which the slope's t and the correlation r are one test: t^2 (1 - r^2) / r^2."""
    if r == 0:
        return None
    df = t * t * (1 - r * r) / (r * r)
    return round(df) if round(df) > 0 and abs(df - round(df)) < _WHOLE * df else None


def _contingency(result: Any, _: Given) -> Derived:
    n = round(math.fsum(_cells(plain(result.expected_freq))))
    test = {
        "name": "chi-squared test of a contingency table",
        **_chi2(result),
        "df": degrees(result.dof),
    }
    return Derived(test | _p(result), n=n)


def _cells(table: Any) -> Iterator[float]:
    """The cells of a table of any number of ways."""
    if not isinstance(table, list):
        yield table
        return
    for part in table:
        yield from _cells(part)


def _goodness_of_fit(result: Any, _: Given) -> Derived:
    return Derived({"name": "chi-squared test of frequencies", **_chi2(result), **_p(result)})


def _chi2(result: Any) -> dict[str, Any]:
    return {"statistic": "chi2", "value": number(result.statistic, "chi2")}


def _one_way(result: Any, given: Given) -> Derived:
    sizes = group_sizes(given.sample)
    df = [len(sizes) - 1, sum(sizes) - len(sizes)] if sizes else None
    test = {"name": "one-way analysis of variance", "statistic": "F", "value": number(result.statistic, "F")}
    return Derived(test | {"df": df} | _p(result))


#: Name of the test, symbol of its statistic, whether it is paired, whether it may be one-sided.
_RANK_TESTS = {
    "MannwhitneyuResult": ("Mann-Whitney", "U", False, True),
    "WilcoxonResult": ("Wilcoxon signed-rank", "W", True, True),
    "KruskalResult": ("Kruskal-Wallis", "H", False, False),
    "FriedmanchisquareResult": ("Friedman", "Q", True, False),
}


def _rank_test(result: Any, _: Given) -> Derived:
    name, symbol, paired, directed = _RANK_TESTS[type(result).__name__]
    return Derived({"name": name} | _named(result, symbol) | _p(result), paired=paired, directed=directed)


def _binomial(result: Any, _: Given) -> Derived:
    limits = result.proportion_ci(0.95)
    sides: dict[str, dict[str, Any]] = {
        "two-sided": {"sides": 2},
        "greater": {"sides": 1, "tail": "greater"},
        "less": {"sides": 1, "tail": "less"},
    }
    k = {"symbol": "k", "value": int(result.k)}
    test = {"name": "exact binomial test", "named_statistic": k, **_p(result), "p_kind": "exact"}
    estimate = {"measure": "proportion", "value": number(result.statistic, "proportion"), "unit": "1"}
    # A one-sided interval ends at the end of the scale, which is no limit.
    low = float(limits.low) if limits.low > 0 else math.inf
    high = float(limits.high) if limits.high < 1 else math.inf
    estimate |= interval_at_95(low, high)
    return Derived(test | sides[result.alternative], estimate, n=int(result.n), directed=True, null_unknown=True)


def _permutation(result: Any, _: Given) -> Derived:
    resamples = len(result.null_distribution)
    test = {"name": "permutation test", **_named(result, "T"), **_p(result), "p_kind": "permutation"}
    return Derived(test | {"resamples": resamples}, paired=None, directed=True)


def _significance(result: Any, given: Given) -> Derived:
    """Read the class that scipy shares between several tests; the caller's name of the test tells which."""
    name = str(given.test.get("name", "")).lower()
    for word, symbol in (("spearman", "rho"), ("kendall", "tau")):
        if word in name:
            value = number(result.statistic, symbol)
            estimate = {"measure": f"{word.title()} rank correlation", "value": value, "unit": "1"}
            return Derived(_named(result, symbol) | _p(result), estimate, paired=True, directed=True)
    if "fisher" in name:
        return _fisher(result)
    if _chooses(given):
        return _other(result, given)
    raise DeclareError(
        "scipy returns a SignificanceResult from spearmanr, kendalltau, fisher_exact and others: say which, "
        "test={'name': 'Spearman rank correlation'}, 'Kendall rank correlation' or \"Fisher's exact test\"; "
        "for another give test={'name': ..., 'named_statistic': {'symbol': ...}}"
    )


def _fisher(result: Any) -> Derived:
    ratio = plain(result.statistic)
    test = {**_p(result), "p_kind": "exact"}
    # An empty cell makes the odds ratio 0 or infinite: then p stands, and there is no estimate.
    if not is_number(ratio) or ratio <= 0:
        return Derived(test, directed=True)
    estimate = {"measure": "odds ratio", "value": ratio, "unit": "1", "null": 1, "scale": "log"}
    return Derived(_named(result, "odds ratio") | test, estimate, directed=True)


def _other(result: Any, given: Given) -> Derived:
    if not _chooses(given):
        kind = type(result).__name__
        raise DeclareError(
            f"declare does not know which statistic a {kind} holds: give "
            "test={'name': ..., 'statistic': 'z'} (t, z, chi2, F or r), or "
            "test={'name': ..., 'named_statistic': {'symbol': ...}} for another"
        )
    if given.test.get("statistic"):
        test = {"value": number(result.statistic, str(given.test["statistic"]))}
        return Derived(test | _p(result), paired=None, directed=True)
    return Derived(_named(result, "") | _p(result), paired=None, directed=True)


def _chooses(given: Given) -> bool:
    return bool(given.test.get("statistic") or given.test.get("named_statistic"))


def _named(result: Any, symbol: str) -> dict[str, Any]:
    return {"named_statistic": {"symbol": symbol, "value": number(result.statistic, symbol or "statistic")}}


def _p(result: Any) -> dict[str, Any]:
    return {"p": number(result.pvalue, "p")}


_ADAPTERS: dict[str, Adapter] = {
    "TtestResult": _t_test,
    "Ttest_indResult": _t_test,
    "PearsonRResult": _pearson,
    "LinregressResult": _linregress,
    "Chi2ContingencyResult": _contingency,
    "Power_divergenceResult": _goodness_of_fit,
    "F_onewayResult": _one_way,
    "BinomTestResult": _binomial,
    "PermutationTestResult": _permutation,
    "SignificanceResult": _significance,
}
