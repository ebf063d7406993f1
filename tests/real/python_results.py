"""What the examples in scipy's own docstrings compute, as records: the examples are run as they are installed."""

from __future__ import annotations

import contextlib
import doctest
import functools
import io
import warnings
from collections.abc import Callable, Iterator
from typing import Any
from unittest import mock

import numpy as np
from real.material import Case, as_printed, record
from real.model_results import fitted
from scipy import stats
from support import Document

from gatecheck import declare
from gatecheck.declaring import DeclareError

SEED = 20261201
#: How results are printed: significant digits, and places of p.
STYLES = {"short": (3, 3), "long": (4, 4)}
#: The tests whose docstrings are run, with the name of the test as people write it.
_TESTS = {
    "ttest_ind": "t test", "ttest_rel": "paired t", "ttest_1samp": "one-sample t", "ttest_ind_from_stats": "t test",
    "pearsonr": "Pearson correlation", "spearmanr": "Spearman rank correlation",
    "kendalltau": "Kendall rank correlation", "f_oneway": "one-way analysis of variance",
    "kruskal": "Kruskal-Wallis",
    "mannwhitneyu": "Mann-Whitney", "wilcoxon": "Wilcoxon signed-rank", "friedmanchisquare": "Friedman",
    "chi2_contingency": "chi-squared test of a contingency table", "chisquare": "chi-squared test of frequencies",
    "power_divergence": "chi-squared test of frequencies", "fisher_exact": "Fisher's exact test",
    "binomtest": "exact binomial test", "linregress": "t test of a slope",
}  # fmt: skip
_EXACT = {"fisher_exact", "binomtest"}
#: Docstrings that simulate call one test by the hundred.
_MOST_CALLS = 12
#: Tables of more ways are no test of two variables.
_TWO_WAYS = 2


@functools.cache
def computed_in_python() -> tuple[Case, ...]:
    """Return a case for each documented result and style of printing, of scipy's examples and statsmodels' fits."""
    calls = [each for name in _TESTS for each in _calls(name)]
    results = [*_of_scipy(calls), *fitted()]
    return tuple(
        Case(kind, source, record(f"{style}/{document['id']}", **_parts(document, digits, places)), in_full)
        for style, (digits, places) in STYLES.items()
        for kind, source, document, in_full in results
    )


def _parts(document: Document, digits: int, places: int) -> Document:
    kept = {name: document[name] for name in ("test", "estimate", "sample") if name in document}
    return dict(as_printed(kept, digits, places))


def _seeded(seed: int) -> mock._patch[Any]:
    """Give the examples that draw random numbers the same ones each time."""
    generator: Callable[..., Any] = np.random.default_rng

    def drawn(seed: Any = seed) -> Any:
        return generator(seed)

    return mock.patch.object(np.random, "default_rng", drawn)


def _calls(name: str, seed: int = SEED) -> list[tuple[str, tuple[Any, ...], dict[str, Any], Any]]:
    """Run the examples of one docstring, and return the calls of that test with what they returned.

    What draws a picture is left out, as matplotlib is no part of the tests.
    """
    calls: list[tuple[str, tuple[Any, ...], dict[str, Any], Any]] = []
    real: Callable[..., Any] = getattr(stats, name)

    def noted(*arguments: Any, **options: Any) -> Any:
        result = real(*arguments, **options)
        calls.append((name, arguments, options, result))
        return result

    around: dict[str, Any] = {}
    silent = contextlib.redirect_stdout(io.StringIO())
    with mock.patch.object(stats, name, noted), _seeded(seed), warnings.catch_warnings(), silent:
        warnings.simplefilter("ignore")
        for example in doctest.DocTestParser().get_examples(real.__doc__ or ""):
            with contextlib.suppress(NameError, ModuleNotFoundError):
                exec(compile(example.source, name, "single"), around)  # noqa: S102  # scipy's own examples
    return [call for call in calls if not (name == "chi2_contingency" and np.ndim(call[1][0]) > _TWO_WAYS)][
        :_MOST_CALLS
    ]


def _of_scipy(calls: list[tuple[str, tuple[Any, ...], dict[str, Any], Any]]) -> Iterator[tuple[Any, ...]]:
    for number, (name, arguments, options, result) in enumerate(calls):
        given = _given(name, arguments, options)
        identifier = f"scipy/{name}-{number}"
        with contextlib.suppress(DeclareError), warnings.catch_warnings():
            warnings.simplefilter("ignore")
            document = declare(result, id=identifier, folder=None, **given).document
            counted = not document["sample"].keys().isdisjoint({"n", "groups"})
            yield name, f"scipy.stats.{name}", document, name in _IN_FULL and counted


#: Of these the result tells test, estimate, interval and sample.
_IN_FULL = {"ttest_ind", "ttest_rel", "ttest_1samp", "pearsonr", "linregress", "binomtest"}


def _given(name: str, arguments: tuple[Any, ...], options: dict[str, Any]) -> dict[str, Any]:
    """What the caller of `declare` knows beside the result."""
    test: Document = {"name": _TESTS[name], **_sides(options)}
    if name == "ttest_ind" and not options.get("equal_var", True):
        test["name"] = "Welch t"
    if name in _EXACT:
        test["p_kind"] = "exact"
    if "method" in options or "permutations" in options:
        test["p_kind"] = "permutation"
    sample: Document = {"unit": "unit"}
    samples = [np.asarray(each) for each in arguments if np.ndim(each) == 1]
    if name in {"ttest_ind", "f_oneway", "ttest_1samp"} and not options.get("trim"):
        sample["groups"] = {f"group {at}": each.tolist() for at, each in enumerate(samples, 1)}
    elif name in {"ttest_rel", "pearsonr", "linregress", "spearmanr", "kendalltau", "wilcoxon"}:
        sample["n"] = len(samples[0]) if samples else None
    elif name in {"mannwhitneyu", "kruskal"}:
        sample["n"] = sum(map(len, samples))
    given: dict[str, Any] = {"test": test, "sample": sample}
    return given | ({"estimate": {"unit": "unit"}} if name in _IN_FULL - {"pearsonr", "binomtest"} else {})


def _sides(options: dict[str, Any]) -> Document:
    way = options.get("alternative", "two-sided")
    return {"sides": 2} if way == "two-sided" else {"sides": 1, "tail": way}
