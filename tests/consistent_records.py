"""Records of real computations on simulated data, by kind, as programs report them: nothing in them disagrees."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

import numpy as np
from scipy import stats

from gatecheck.columns import columns_of
from gatecheck.compare.agreement import Agreement
from gatecheck.compare.own_numbers import own_numbers
from gatecheck.evidence import weigh_columns
from gatecheck.model.found import Found
from gatecheck.model.verdict import Place
from gatecheck.policy import EvidenceSettings
from gatecheck.schema.records import read_record

Document = dict[str, Any]
Generator = np.random.Generator
LEVELS = (0.9, 0.95, 0.99)
WHOLE = {"n", "events", "integer_items", "resamples", "level", "size", "df", "clusters"}


def compared(*documents: Document) -> tuple[Agreement, ...]:
    """The comparisons within each of some records, which are read as from files."""
    found = []
    for document in documents:
        record, faults = read_record({"gatecheck": "record/1", "id": "a/result", **document})
        assert record is not None, faults
        found.append(Found(record, Place("a.json"), document))
    columns = columns_of(found)
    return own_numbers(columns, weigh_columns(columns, [EvidenceSettings()] * len(found)))


def names_short(*documents: Document) -> list[list[str]]:
    """The names of the comparisons that disagree, for each of some records."""
    agreements = compared(*documents)
    return [[each.name for each in agreements if each.disagrees[row]] for row in range(len(documents))]


def _groups(*samples: np.ndarray[Any, Any]) -> list[Document]:
    return [
        {"name": f"group {number}", "n": each.size, "mean": float(each.mean()), "sd": float(each.std(ddof=1))}
        for number, each in enumerate(samples)
    ]


def _sides(generator: Generator) -> tuple[Document, Any]:
    way = str(generator.choice(["two-sided", "two-sided", "greater", "less"]))
    return ({"sides": 2} if way == "two-sided" else {"sides": 1, "tail": way}), way


def _t_document(result: Any, name: str, sides: Document, level: float) -> Document:
    limits = result.confidence_interval(level)
    ends = {key: float(end) for key, end in (("low", limits.low), ("high", limits.high)) if np.isfinite(end)}
    return {
        "test": {
            "name": name, "statistic": "t", "value": float(result.statistic), "df": float(result.df),
            "p": float(result.pvalue), **sides,
        },
        "estimate": {
            "measure": "mean difference", "value": float(result._estimate), "unit": "g",
            "standard_error": float(result._standard_error), "interval": {"level": level, **ends},
        },
    }  # fmt: skip


def two_samples(generator: Generator) -> Document:
    """Student's or Welch's t of two groups, by either name or one that leaves it open."""
    first = generator.normal(10 + generator.normal(), generator.uniform(0.5, 3), generator.integers(3, 60))
    second = generator.normal(10, generator.uniform(0.5, 3), generator.integers(3, 60))
    pooled = bool(generator.integers(0, 2))
    name = str(generator.choice(["two-sample t", "t test"] if pooled else ["Welch t", "t test"]))
    sides, way = _sides(generator)
    result = stats.ttest_ind(first, second, equal_var=pooled, alternative=way)
    document = _t_document(result, name, sides, float(generator.choice(LEVELS)))
    return {**document, "sample": {"unit": "plot", "n": first.size + second.size, "groups": _groups(first, second)}}


def standardised(generator: Generator) -> Document:
    """A t of two groups beside Cohen's d or Hedges' g."""
    document = two_samples(generator)
    one, other = document["sample"]["groups"]
    df = one["n"] + other["n"] - 2
    pooled = np.sqrt(((one["n"] - 1) * one["sd"] ** 2 + (other["n"] - 1) * other["sd"] ** 2) / df)
    effect = (one["mean"] - other["mean"]) / pooled
    small = bool(generator.integers(0, 2))
    value = float(effect * (1 - 3 / (4 * df - 1)) if small else effect)
    return {**document, "estimate": {"measure": "Hedges' g" if small else "Cohen's d", "value": value, "unit": "1"}}


def paired(generator: Generator) -> Document:
    """A paired t, with the summaries of both measurements or of the differences."""
    n = int(generator.integers(4, 40))
    before = generator.normal(20, 3, n)
    after = before + generator.normal(generator.normal(), 1.5, n)
    sides, way = _sides(generator)
    result = stats.ttest_rel(after, before, alternative=way)
    document = _t_document(result, "paired t", sides, float(generator.choice(LEVELS)))
    groups = _groups(after, before) if generator.integers(0, 2) else _groups(after - before)
    return {**document, "sample": {"unit": "patient", "n": n, "groups": groups}}


def one_sample(generator: Generator) -> Document:
    """A t of one sample against a value that is not 0."""
    values = generator.normal(5.5, 2, generator.integers(3, 50))
    result = stats.ttest_1samp(values, 5.0)
    document = _t_document(result, "one-sample t", {}, 0.95)
    return {
        **document,
        "estimate": {**document["estimate"], "measure": "mean", "null": 5},
        "sample": {"unit": "plot", "n": values.size, "groups": _groups(values)},
    }


def analysis_of_variance(generator: Generator) -> Document:
    """A one-way analysis of variance."""
    samples = [
        generator.normal(generator.normal(), 1 + generator.random(), generator.integers(3, 30))
        for _ in range(generator.integers(2, 6))
    ]
    result = stats.f_oneway(*samples)
    n = sum(each.size for each in samples)
    return {
        "test": {
            "name": "one-way analysis of variance", "statistic": "F", "value": float(result.statistic),
            "df": [len(samples) - 1, n - len(samples)], "p": float(result.pvalue),
        },
        "sample": {"unit": "plot", "n": n, "groups": _groups(*samples)},
    }  # fmt: skip


def correlation(generator: Generator) -> Document:
    """Pearson's r with the interval by Fisher's transformation."""
    n = int(generator.integers(5, 200))
    one = generator.normal(size=n)
    result = stats.pearsonr(one, one * generator.normal(0, 0.7) + generator.normal(size=n))
    level = float(generator.choice(LEVELS))
    limits = result.confidence_interval(level)
    return {
        "test": {
            "name": "Pearson correlation", "statistic": "r", "value": float(result.statistic), "df": n - 2,
            "p": float(result.pvalue),
        },
        "estimate": {
            "measure": "Pearson correlation", "value": float(result.statistic), "unit": "1",
            "interval": {"level": level, "low": float(limits.low), "high": float(limits.high)},
        },
        "sample": {"unit": "student", "n": n},
    }  # fmt: skip


def regression(generator: Generator) -> Document:
    """The coefficient of a group in a linear model with covariates, beside the plain summaries of the groups."""
    n, terms = int(generator.integers(12, 80)), int(generator.integers(1, 4))
    group = (np.arange(n) % 2).astype(float)
    others = generator.normal(size=(n, terms))
    outcome = generator.normal() * group + others.sum(axis=1) + generator.normal(size=n)
    design = np.column_stack([np.ones(n), group, others])
    inverse = np.linalg.inv(design.T @ design)
    coefficients = inverse @ design.T @ outcome
    df = n - 2 - terms
    residual = outcome - design @ coefficients
    error = float(np.sqrt(residual @ residual / df * inverse[1, 1]))
    value, t = float(coefficients[1]), float(coefficients[1] / error)
    half = float(stats.t.ppf(0.975, df)) * error
    document = {
        "test": {
            "name": str(generator.choice(["t test of a coefficient", "ANCOVA", "linear regression"])),
            "statistic": "t", "value": t, "df": df, "p": float(2 * stats.t.sf(abs(t), df)),
        },
        "estimate": {
            "measure": "adjusted mean difference", "value": value, "unit": "g", "standard_error": error,
            "interval": {"level": 0.95, "low": value - half, "high": value + half},
        },
        "sample": {"unit": "plot", "n": n, "groups": _groups(outcome[group == 1], outcome[group == 0])},
    }  # fmt: skip
    return {**document, "covariates": [f"x{k}" for k in range(terms)]} if generator.integers(0, 2) else document


def _counts(generator: Generator) -> tuple[int, int, int, int]:
    n1, n2 = (int(each) for each in generator.integers(8, 400, 2))
    share = generator.uniform(0.1, 0.8)
    a = int(np.clip(generator.binomial(n1, share), 1, n1 - 1))
    c = int(generator.binomial(n2, np.clip(share + generator.normal(0, 0.1), 0.05, 0.95)))
    return a, n1, c, n2


def _with_counts(a: int, n1: int, c: int, n2: int) -> Document:
    groups = [{"name": "one", "n": n1, "events": a}, {"name": "other", "n": n2, "events": c}]
    return {"unit": "user", "n": n1 + n2, "groups": groups}


def contingency(generator: Generator) -> Document:
    """Chi-squared of a table of two groups: Pearson's, with continuity correction, or the likelihood ratio."""
    a, n1, c, n2 = _counts(generator)
    way = int(generator.integers(0, 3))
    result = stats.chi2_contingency(
        [[a, n1 - a], [c, n2 - c]], correction=way == 1, lambda_="log-likelihood" if way == 2 else None
    )
    return {
        "test": {
            "name": "chi-squared test of a contingency table", "statistic": "chi2",
            "value": float(result.statistic), "df": 1, "p": float(result.pvalue),
        },
        "sample": _with_counts(a, n1, c, n2),
    }  # fmt: skip


def proportions(generator: Generator) -> Document:
    """A z of two proportions, pooled or apart, beside the unpooled interval of the difference."""
    a, n1, c, n2 = _counts(generator)
    if not (0 < a < n1 and 0 < c < n2):
        return contingency(generator)
    p1, p2, pooled = a / n1, c / n2, (a + c) / (n1 + n2)
    apart = float(np.sqrt(p1 * (1 - p1) / n1 + p2 * (1 - p2) / n2))
    together = float(np.sqrt(pooled * (1 - pooled) * (1 / n1 + 1 / n2)))
    difference = p1 - p2
    # The errors of very unlike groups differ by more than two methods of the same data should.
    z = difference / (together if abs(together / apart - 1) < 0.08 and generator.integers(0, 2) else apart)
    in_points = 100 if generator.integers(0, 2) else 1
    half = float(stats.norm.ppf(0.975)) * apart
    return {
        "test": {
            "name": "two-proportion z", "statistic": "z", "value": z, "p": float(2 * stats.norm.sf(abs(z))),
        },
        "estimate": {
            "measure": "risk difference", "value": in_points * difference,
            "unit": "points" if in_points == 100 else "1", "standard_error": in_points * apart,
            "interval": {
                "level": 0.95, "low": in_points * (difference - half), "high": in_points * (difference + half),
            },
        },
        "sample": _with_counts(a, n1, c, n2),
    }  # fmt: skip


def odds_ratio(generator: Generator) -> Document:
    """An odds ratio with Wald's z and interval on the log scale, crude or by an exact test."""
    a, n1, c, n2 = _counts(generator)
    cells = np.array([a, n1 - a, c, n2 - c])
    if (cells == 0).any():
        return contingency(generator)
    log, error = float(np.log(a * (n2 - c) / ((n1 - a) * c))), float(np.sqrt((1 / cells).sum()))
    z, half = log / error, float(stats.norm.ppf(0.975)) * error
    estimate = {
        "measure": "odds ratio", "value": float(np.exp(log)), "unit": "1", "scale": "log", "standard_error": error,
        "interval": {"level": 0.95, "low": float(np.exp(log - half)), "high": float(np.exp(log + half))},
    }  # fmt: skip
    test: Document = {
        "name": "Wald test of an odds ratio", "statistic": "z", "value": z, "p": float(2 * stats.norm.sf(abs(z))),
    }  # fmt: skip
    if generator.integers(0, 3) == 0:
        exact: Any = stats.fisher_exact(np.array([[a, n1 - a], [c, n2 - c]]))
        test = {"name": "Fisher's exact test", "p": float(exact.pvalue), "p_kind": "exact"}
    return {"test": test, "estimate": estimate, "sample": _with_counts(a, n1, c, n2)}


def hazard_ratio(generator: Generator) -> Document:
    """A ratio from a model, with z or with p alone, and sometimes events that no plain formula uses."""
    error = generator.uniform(0.05, 0.6)
    log = float(generator.normal(0, 2 * error))
    z, half = log / error, float(stats.norm.ppf(0.975)) * error
    test: Document = {"name": "Cox regression", "p": float(2 * stats.norm.sf(abs(z)))}
    if generator.integers(0, 2):
        test |= {"statistic": "z", "value": z}
    return {
        "test": test,
        "estimate": {
            "measure": "hazard ratio", "value": float(np.exp(log)), "unit": "1", "scale": "log",
            "interval": {"level": 0.95, "low": float(np.exp(log - half)), "high": float(np.exp(log + half))},
        },
        "sample": _with_counts(*_counts(generator)),
    }  # fmt: skip


def whole_items(generator: Generator) -> Document:
    """Means and standard deviations of scores that average whole-number items."""
    groups = []
    for name in ("one", "other"):
        n, items = int(generator.integers(4, 40)), int(generator.integers(1, 4))
        scores = generator.integers(1, 8, (n, items)).mean(axis=1)
        sd = float(scores.std(ddof=int(generator.integers(0, 2))))
        groups.append({"name": name, "n": n, "mean": float(scores.mean()), "sd": sd, "integer_items": items})
    return {"sample": {"unit": "student", "groups": groups}}


def permutation(generator: Generator) -> Document:
    """A p of random or of all permutations."""
    resamples = int(generator.choice([99, 199, 499, 999, 1000, 5000]))
    hits = int(generator.integers(1, resamples + 1))
    p = (hits + 1) / (resamples + 1) if generator.integers(0, 2) and hits < resamples else hits / resamples
    return {"test": {"name": "permutation test", "p": p, "p_kind": "permutation", "resamples": resamples}}


def adjusted(generator: Generator) -> Document:
    """A raw z with its p adjusted over a family, larger than the few spellings of it that are told together."""
    size = int(generator.integers(4, 30))
    z = generator.normal(1, 1.5, size)
    raw = 2 * stats.norm.sf(np.abs(z))
    procedure = str(generator.choice(["bonferroni", "holm", "benjamini-hochberg"]))
    order = np.argsort(raw)
    if procedure == "bonferroni":
        corrected = np.minimum(1, raw * size)
    elif procedure == "holm":
        steps = np.minimum(1, np.maximum.accumulate(raw[order] * (size - np.arange(size))))
        corrected = steps[np.argsort(order)]
    else:
        corrected = stats.false_discovery_control(raw)
    return {
        "test": {"name": "z", "statistic": "z", "value": float(z[0]), "p": float(raw[0])},
        "family": {
            "name": f"growth {generator.integers(2**31)}",
            "size": size,
            "procedure": procedure,
            "adjusted_p": float(corrected[0]),
        },
    }


def mixed_model(generator: Generator) -> Document:
    """A mixed model: df of Satterthwaite or of all measurements, units within units, summaries of all of them."""
    df = float(generator.uniform(5, 300))
    error, t = float(generator.uniform(0.2, 2)), float(generator.normal(0, 2))
    half = float(stats.t.ppf(0.975, df)) * error
    units = int(generator.integers(6, 20))
    name = "linear mixed model"
    return {
        "test": {
            "name": name, "statistic": "t", "value": t, "df": df, "p": float(2 * stats.t.sf(abs(t), df)),
        },
        "estimate": {
            "measure": "mean difference", "value": t * error, "unit": "ms", "standard_error": error,
            "interval": {"level": 0.95, "low": t * error - half, "high": t * error + half},
        },
        "sample": {
            "unit": "participant", "n": units,
            "groups": [{"name": each, "n": units, "mean": 4.1, "sd": 1.2} for each in ("one", "other")],
        },
    }  # fmt: skip


def skewed_interval(generator: Generator) -> Document:
    """A bootstrap interval of a mean beside the t of one sample."""
    values = generator.exponential(2.0, generator.integers(12, 60)) - 1.2
    means = generator.choice(values, (400, values.size)).mean(axis=1)
    result = stats.ttest_1samp(values, 0.0)
    low, high = np.quantile(means, [0.025, 0.975])
    return {
        "test": {
            "name": "one-sample t", "statistic": "t", "value": float(result.statistic), "df": values.size - 1,
            "p": float(result.pvalue),
        },
        "estimate": {
            "measure": "mean (bootstrap interval)", "value": float(values.mean()), "unit": "g",
            "standard_error": float(values.std(ddof=1) / np.sqrt(values.size)),
            "interval": {"level": 0.95, "low": float(low), "high": float(high)},
        },
        "sample": {"unit": "plot", "n": values.size, "groups": _groups(values)},
    }  # fmt: skip


def proportion(generator: Generator) -> Document:
    """A single proportion by the exact binomial test, with its error."""
    n = int(generator.integers(10, 2000))
    k = int(generator.integers(1, n))
    result = stats.binomtest(k, n, 0.5)
    limits = result.proportion_ci(0.95, method="exact" if generator.integers(0, 2) else "wilson")
    share = k / n
    return {
        "test": {"name": "exact binomial test", "p": float(result.pvalue), "p_kind": "exact"},
        "estimate": {
            "measure": "accuracy", "value": share, "unit": "1", "null": 0.5,
            "standard_error": float(np.sqrt(share * (1 - share) / n)),
            "interval": {"level": 0.95, "low": float(limits.low), "high": float(limits.high)},
        },
        "sample": {"unit": "item", "n": n, "groups": [{"name": "model", "n": n, "events": k}]},
    }  # fmt: skip


KINDS: Mapping[str, Callable[[Generator], Document]] = {
    made.__name__: made
    for made in (
        two_samples, standardised, paired, one_sample, analysis_of_variance, correlation, regression, contingency,
        proportions, odds_ratio, hazard_ratio, whole_items, permutation, adjusted, mixed_model, skewed_interval,
        proportion,
    )
}  # fmt: skip


def rounded(document: Document, places: int, *, as_text: bool) -> Document:
    """The document with every figure that is no count rounded to so many places, p to three or more."""

    def told(key: str, value: Any) -> Any:
        if isinstance(value, dict):
            return {name: told(name, each) for name, each in value.items()}
        if isinstance(value, list):
            return [told(key, each) for each in value]
        if not isinstance(value, float) or key in WHOLE:
            return value
        if key in {"p", "adjusted_p"}:
            text = f"{value:.{max(places, 3)}f}" if value >= 0.0005 else f"{value:.2e}"
            return text if as_text else float(text)
        if key in {"standard_error", "sd"} and 0 < value < 10.0**-places:
            return f"{value:.2e}" if as_text else float(f"{value:.2e}")
        return f"{value:.{places}f}" if as_text else round(value, places)

    return dict(told("", document))
