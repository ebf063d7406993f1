"""What a claim must say beyond the contract, so that it can be judged."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from gatecheck.declaring.derived import Derived
from gatecheck.schema.read import Fault, Path

_WITH_DF = {"t", "chi2", "F", "r"}
_OMNIBUS = {"chi2", "F"}


def unmet_needs(document: Mapping[str, Any], derived: Derived) -> Iterator[Fault]:
    """Yield what a document of the contract's shape lacks; without a claim it may leave out more."""
    test = document.get("test", {})
    if test.get("p") == 0:
        advice = "give the bound that was printed, such as test={'p': '<0.001'}"
        yield Fault(("test", "p"), "is 0, which no test gives", advice)
    estimate = document.get("estimate", {})
    if derived.null_unknown and estimate and "null" not in estimate:
        yield Fault(("estimate", "null"), "is not kept by the result", "give estimate={'null': 0.5}, as tested")
    if document.get("claim") is None or _is_whole_screen(document):
        return
    yield from _of_test(test, derived)
    yield from _of_sample(document.get("sample", {}))
    if "estimate" not in document and not _without_estimate(test):
        advice = "give estimate={'measure': 'mean difference', 'value': ..., 'unit': 'cm', 'interval': {...}}"
        yield _needed(("estimate",), advice)


def _is_whole_screen(document: Mapping[str, Any]) -> bool:
    """Whether a screen stands alone: what it needs is in its own fields, and the rule `screen` asks for it."""
    return "screen" in document and not document.get("test")


def _of_test(test: Mapping[str, Any], derived: Derived) -> Iterator[Fault]:
    if not test:
        advice = "give a result, or test={'statistic': 't', 'value': ..., 'df': ..., 'p': ...}"
        yield _needed(("test",), advice)
    elif "p" not in test:
        yield _needed(("test", "p"), "give test={'p': ...}")
    statistic = test.get("statistic")
    if derived.test and "df" not in test and statistic in _WITH_DF:
        shown = "[..., ...]" if statistic == "F" else "..."
        yield _needed(("test", "df"), f"the result does not tell it: give test={{'df': {shown}}}")
    if derived.directed and "sides" not in test and statistic not in _OMNIBUS:
        advice = "the result does not tell it: give test={'sides': 2}, or {'sides': 1, 'tail': 'greater'}"
        yield _needed(("test", "sides"), advice)


def _of_sample(sample: Mapping[str, Any]) -> Iterator[Fault]:
    if "unit" not in sample:
        yield _needed(("sample", "unit"), "say what was counted, sample={'unit': 'plot'}")
    if "n" not in sample:
        advice = "the result does not tell it: give sample={'n': ...} or sample={'groups': {'drained': values}}"
        yield _needed(("sample", "n"), advice)


def _without_estimate(test: Mapping[str, Any]) -> bool:
    """Whether a test may stand without an estimate: one of many differences at once, of ranks, or exact."""
    exact_or_ranks = test.get("p_kind") == "exact" or (
        "named_statistic" in test and test.get("p_kind") != "permutation"
    )
    return not test or test.get("statistic") in _OMNIBUS or exact_or_ranks


def _needed(path: Path, advice: str) -> Fault:
    return Fault(path, "is needed by a claim", advice)
