"""Numbers as shown: the digits, and that rounding never crosses a limit."""

from __future__ import annotations

import math
import re
from decimal import Decimal

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from gatecheck.model.shown import decimal, percent

PROBABILITIES = st.floats(0, 1)
NUMBERS = st.floats(allow_nan=False, allow_infinity=False)


@pytest.mark.parametrize(
    ("value", "limit", "shown"),
    [
        (0.165, None, "17 %"),
        (0.0075, None, "0.75 %"),
        (0.95, None, "95 %"),
        (0.05, None, "5 %"),
        (0.1, None, "10 %"),
        (0.0504, 0.05, "5.04 %"),
        (0.04996, 0.05, "4.996 %"),
        (0.05, 0.05, "5 %"),
        (0.0125, None, "1.3 %"),
        (0.0125, 0.0125, "1.25 %"),
        (0.996, None, "99.6 %"),
        (0.0, None, "0 %"),
        (-0.0, None, "0 %"),
        (1.0, None, "100 %"),
        (2.5e-7, None, "<0.001 %"),
        (2.5e-7, 0.05, "<0.001 %"),
        (2.5e-7, 2e-7, "0.000025 %"),
        (2.5e-7, 0.0, "0.000025 %"),
        (3e-12, 0.0, "3e-10 %"),
        (0.9999999, None, ">99.999 %"),
        (0.9999999, 0.05, ">99.999 %"),
        (0.9999999, 0.99999995, "99.99999 %"),
        (1.234, None, "123 %"),
        (0.05, math.nan, "5 %"),
        (math.nan, None, "unknown"),
        (math.inf, None, "infinite"),
        (-math.inf, 0.05, "minus infinite"),
    ],
)
def test_percent(value: float, limit: float | None, shown: str) -> None:
    assert percent(value, limit) == shown


@pytest.mark.parametrize(
    ("value", "limit", "shown"),
    [
        (0.034, None, "0.034"),
        (0.0341234, None, "0.0341"),
        (0.00004, None, "<0.0001"),
        (0.0001, None, "0.0001"),
        (0.05003, 0.05, "0.05003"),
        (0.049996, 0.05, "0.049996"),
        (0.99996, None, ">0.9999"),
        (0.9996, None, "0.9996"),
        (2.2149, None, "2.21"),
        (1234.5678, None, "1235"),
        (-0.5, None, "-0.5"),
        (1.0004, None, "1.0004"),
        (1e300, None, "1e+300"),
        (-1e-12, None, "-1e-12"),
        (math.nan, 0.05, "unknown"),
        (math.inf, None, "infinite"),
    ],
)
def test_decimal(value: float, limit: float | None, shown: str) -> None:
    assert decimal(value, limit) == shown


def side(shown: str, limit: str) -> int:
    """Compare two shown numbers as a reader does: a bound lies beyond its own number."""
    parts = re.fullmatch(r"([<>]?)(\S+?)( %)?", shown)
    assert parts is not None
    number, bar = Decimal(parts[2]), Decimal(limit.removesuffix(" %"))
    if parts[1] == "<":
        assert bar >= number, "the reader cannot tell the side of a bound below its number"
        return -1
    if parts[1] == ">":
        assert bar <= number, "the reader cannot tell the side of a bound above its number"
        return 1
    return (number > bar) - (number < bar)


def true_side(value: float, limit: float) -> int:
    return (value > limit) - (value < limit)


@given(PROBABILITIES, PROBABILITIES)
@example(0.0504, 0.05)
@example(5e-324, 0.0)
@example(1 - 2**-53, 1.0)
@example(0.05 + 2**-56, 0.05)
def test_a_risk_shown_is_on_the_side_of_the_limit_shown(value: float, limit: float) -> None:
    limit_shown = percent(limit, limit)
    if limit_shown[0] not in "<>":
        assert side(percent(value, limit), limit_shown) == true_side(value, limit)


@given(st.floats(0.0001, 0.9999), st.floats(-1e-4, 1e-4))
def test_a_risk_close_to_its_limit_is_shown_on_its_side(limit: float, step: float) -> None:
    value = limit + step
    assert side(percent(value, limit), percent(limit, limit)) == true_side(value, limit)


@given(NUMBERS, NUMBERS)
def test_a_number_shown_is_on_the_side_of_the_limit_shown(value: float, limit: float) -> None:
    limit_shown = decimal(limit, limit)
    if limit_shown[0] not in "<>":
        assert side(decimal(value, limit), limit_shown) == true_side(value, limit)


@given(PROBABILITIES)
def test_only_certainty_is_shown_as_certainty(value: float) -> None:
    assert (percent(value) == "0 %") == (value == 0)
    assert (percent(value) == "100 %") == (value == 1)
    assert (decimal(value) == "0") == (value == 0)
    assert (decimal(value) == "1") == (value == 1)


@given(st.floats(1e-5, 0.99999))
def test_two_digits_of_a_percentage_are_within_half_a_unit(value: float) -> None:
    shown = float(percent(value).removesuffix(" %").lstrip("<>"))
    assert shown == pytest.approx(100 * value, rel=0.051)
