"""Numbers as reported: the interval that a text stands for."""

from __future__ import annotations

import math
from decimal import Decimal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from gatecheck.model.numbers import Reported, exact, parse_reported


@pytest.mark.parametrize(
    ("text", "value", "low", "high"),
    [
        ("2.21", 2.21, 2.205, 2.215),
        ("0.05", 0.05, 0.045, 0.055),
        ("0.050", 0.05, 0.0495, 0.0505),
        (".034", 0.034, 0.0335, 0.0345),
        ("36", 36, 35.5, 36.5),
        ("-1.5", -1.5, -1.55, -1.45),
        ("1.2e-5", 1.2e-5, 1.15e-5, 1.25e-5),
        ("1e3", 1000, 500, 1500),
    ],
)
def test_a_text_stands_for_half_a_unit_of_its_last_digit(text: str, value: float, low: float, high: float) -> None:
    """Trailing zeros count: "0.050" is narrower than "0.05" (common practice, no source)."""
    assert parse_reported(text) == Reported(value, low, high, "=", text)


def test_a_bound_is_open_on_its_side() -> None:
    assert parse_reported("<0.001") == Reported(0.001, -math.inf, 0.001, "<", "<0.001")
    assert parse_reported("> 0.05") == Reported(0.05, 0.05, math.inf, ">", "> 0.05")


@pytest.mark.parametrize("text", ["", "ns", "1.2.3", "NaN", "inf", "1e999", "0x10", "1,5", "1" * 61, "<", "٣"])
def test_what_is_no_finite_number_is_none(text: str) -> None:
    assert parse_reported(text) is None


def test_an_exact_number_may_be_read_as_rounded_to_its_digits() -> None:
    """Whole numbers stay exact: a 2 says nothing of how many digits it lost."""
    assert exact(1.9).as_rounded() == parse_reported("1.9")
    assert exact(2.0).as_rounded() == exact(2.0)
    assert exact(5e-324).as_rounded().value == 5e-324
    already = Reported(1.9, 1.85, 1.95, "=", "1.9")
    assert already.as_rounded() is already


def test_a_number_is_shown_as_its_author_wrote_it() -> None:
    assert (exact(0.1).shown, Reported(0.05, 0.0495, 0.0505, "=", "0.050").shown) == ("0.1", "0.050")


@given(st.decimals(allow_nan=False, allow_infinity=False, min_value=-(10**12), max_value=10**12, places=6))
def test_a_number_lies_in_the_interval_that_it_stands_for(number: Decimal) -> None:
    reported = parse_reported(str(number))

    assert reported is not None
    assert reported.low <= float(number) <= reported.high
