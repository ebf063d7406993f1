"""Figures as programs print them: nothing but rounding in a statistic of 0, a correction that was not made."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
from consistent_records import names_short
from support import Document, drainage, judge


def _proportions(value: str, p: str, correction: str = "with continuity correction") -> Document:
    """R 4.2's prop.test(c(83, 90), c(86, 93)): X-squared = 8.3539e-30, p-value = 1."""
    groups = [{"name": "one", "n": 86, "events": 83}, {"name": "other", "n": 93, "events": 90}]
    name = f"2-sample test for equality of proportions {correction}"
    test = {"name": name, "statistic": "chi2", "value": value, "df": 1, "p": p}
    return {"test": test, "sample": {"unit": "patient", "groups": groups}}


@pytest.mark.parametrize("value", ["8.3539e-30", "0"])
def test_a_statistic_of_zero_is_printed_with_what_rounding_left(value: str) -> None:
    assert names_short(_proportions(value, "1")) == [[]]


def test_a_statistic_that_is_small_and_not_zero_is_held_against_the_counts() -> None:
    assert names_short(_proportions("0.0002", "0.99")) == [["counts-statistic"]]


@pytest.mark.parametrize(
    ("correction", "short"),
    [
        ("with continuity correction", []),
        ("without continuity correction", ["p"]),
        ("with no continuity correction", ["p"]),
        ("without Yates' correction", ["p"]),
        ("with Yates' correction", []),
    ],
)
def test_a_larger_p_is_explained_by_a_correction_that_was_made(correction: str, short: list[str]) -> None:
    document = _proportions("12.6", "0.01", correction)
    document["sample"] = {"unit": "patient", "n": 397}
    assert names_short(document) == [short]


@pytest.mark.parametrize("slip", [{"low": "-5.0177"}, {"high": "0.0840"}, {"low": "-0.0377"}])
def test_a_limit_that_is_off_by_far_is_found_beside_an_error_of_few_digits(slip: dict[str, Any]) -> None:
    limits = {"level": 0.95, "low": "-0.0177", "high": "-0.0160"}
    estimate = {"measure": "coefficient", "value": "-0.0168", "unit": "1", "standard_error": "0.000434"}
    test = {"name": "Wald z test of a coefficient", "statistic": "z", "value": "-38.7", "p": "<0.001"}

    assert names_short({"test": test, "estimate": {**estimate, "interval": limits}}) == [[]]
    ((*names,),) = names_short({"test": test, "estimate": {**estimate, "interval": {**limits, **slip}}})
    assert "limits" in names


def test_a_value_of_no_effect_in_quotes_is_rounded_too(tmp_path: Path) -> None:
    """Mean less null over 0.7207 / sqrt(50) is at most 2.0094 at -0.2013 and 2.0099 as both are rounded."""
    groups = [{"name": "all", "n": 50, "mean": "0.003484", "sd": "0.7207"}]
    record = drainage(
        test={"name": "one-sample t", "statistic": "t", "value": "2.010", "df": 49, "sides": 2},
        estimate={"measure": "mean", "value": "0.003484", "null": "-0.2013", "unit": "1"},
        sample={"unit": "plot", "n": 50, "groups": groups},
    )

    assert judge(tmp_path, record).rule("numbers-agree")["outcome"] == "met"
