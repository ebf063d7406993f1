"""Numbers as prose shows them: what is read, what agrees with a record, and how they are written anew."""

from __future__ import annotations

from decimal import Decimal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from gatecheck.model.numbers import Reported, exact, parse_reported
from gatecheck.prose.numbers_in_text import Shown, agrees, number_at, numbers, rewritten


def only(text: str) -> Shown:
    """The only number in a text."""
    (one,) = numbers(text, 0, len(text))
    return one


def reported(number: float | str) -> Reported:
    """A number of a record: exact, or a text as reported."""
    if not isinstance(number, str):
        return exact(number)
    read = parse_reported(number)
    assert read is not None
    return read


@pytest.mark.parametrize(
    ("text", "value", "unit"),
    [
        ("3.3", "3.3", "0.1"),
        (".034", "0.034", "0.001"),
        ("36", "36", "1"),
        ("−2.10", "-2.10", "0.01"),
        ("-2.1", "-2.1", "0.1"),
        ("+2.1", "2.1", "0.1"),
        ("1,234,567", "1234567", "1"),
        ("1,234.5", "1234.5", "0.1"),
        ("1\u202f234", "1234", "1"),
        (r"1{,}234", "1234", "1"),
        (r"1\,234", "1234", "1"),
        ("3,3", "3.3", "0.1"),
        ("0,0345", "0.0345", "0.0001"),
        ("2.1e-5", "0.000021", "0.000001"),
        ("2.1 × 10^-5", "0.000021", "0.000001"),
        ("2.1 × 10^−5^", "0.000021", "0.000001"),
        (r"2.1 \times 10^{-5}", "0.000021", "0.000001"),
        ("2.1×10⁻⁵", "0.000021", "0.000001"),
        ("2.1 &times; 10<sup>-5</sup>", "0.000021", "0.000001"),
        ("3 x 10^3", "3000", "1000"),
        ("10^-4", "0.0001", "0.0001"),
        ("10^{-4}", "0.0001", "0.0001"),
        ("10^−4^", "0.0001", "0.0001"),
        ("10⁻⁴", "0.0001", "0.0001"),
        ("10<sup>-4</sup>", "0.0001", "0.0001"),
    ],
)
def test_a_number_is_read_with_its_digits(text: str, value: str, unit: str) -> None:
    one = only(text)

    assert (one.text, one.value, one.unit) == (text, Decimal(value), Decimal(unit))
    assert (one.relation, one.percent) == ("=", False)


@pytest.mark.parametrize(
    ("text", "found"),
    [
        ("H2, m2, x_1, CO2, x^2, 10^2 and v1.2.3", ["10"]),
        ("0.3–8.1, 3-5 and 5--6", ["0.3", "8.1", "3", "5", "5", "6"]),
        ("t(34)=-2.1, p=.034", ["34", "-2.1", ".034"]),
        ("$2.21$ **3.3** _4.4_ [0.3,8.1]", ["2.21", "3.3", "4.4", "0.3", "8.1"]),
        ("3.3g of 5mg", ["3.3", "5"]),
        ("9" * 50, []),
        ("110^-4 and 2.10^-4", ["110", "4", "2.10", "4"]),
    ],
)
def test_digits_within_words_are_no_numbers(text: str, found: list[str]) -> None:
    assert [one.text for one in numbers(text, 0, len(text))] == found


@pytest.mark.parametrize(
    ("text", "relation"),
    [
        ("p < .001", "<"),
        ("p &lt; 0.001", "<"),
        (r"$p \lt 0.001$", "<"),
        ("p $<$ 0.001", "<"),
        ("p ≤ .05", "≤"),
        (r"p \leq .05", "≤"),
        ("p > .05", ">"),
        (r"p \geq .05", "≥"),
        ("p ≥ .05", "≥"),
        ("p = .05", "="),
    ],
)
def test_a_bound_is_read_as_one(text: str, relation: str) -> None:
    assert only(text).relation == relation


@pytest.mark.parametrize("text", ["25 %", "25%", r"25\%", r"25\,\%", "25~\\%", "25 percent", "25 per cent"])
def test_a_percent_sign_belongs_to_its_number(text: str) -> None:
    one = only(text)

    assert (one.text, one.percent, one.told) == ("25", True, "25 %")


def test_a_number_is_told_with_its_bound() -> None:
    assert only("p < .001").told == "< .001"
    assert number_at("p < .001", 4) is not None
    assert number_at("p < .001", 3) is None


@pytest.mark.parametrize(
    ("text", "number", "fits"),
    [
        ("3.3", 3.28, True),
        ("3.8", 3.3, False),
        ("3.3", 3.25, True),  # rounded up
        ("3.2", 3.25, True),  # rounded to even
        ("3.3", 3.35, True),
        ("3.3", 3.3501, False),
        ("3.3", "3.28", True),
        ("3.28", "3.3", True),  # the record shows fewer digits
        ("3.2", "3.3", True),  # 3.25 may have been shown as either
        ("3.1", "3.3", False),
        ("36", 36.0, True),
        ("36", 35.0, False),
        ("25 %", 0.25, True),
        ("25 %", 0.26, False),
        ("25 %", "0.3", True),
        ("−2.1", -2.1, True),
        ("2.1", -2.1, False),
        ("p < .001", 0.0004, True),
        ("p < 10^-4", 0.00004, True),
        ("p < 10^-4", 0.0004, False),
        ("p < .001", 0.001, False),
        ("p < .001", "<0.001", True),
        ("p < .001", "<0.01", False),
        ("p < .001", "0.001", True),  # may be 0.0005
        ("p < .05", ">0.05", False),
        ("p ≤ .05", 0.05, True),
        ("p > .05", 0.3, True),
        ("p > .05", 0.05, False),
        ("p ≥ .05", 0.05, True),
        ("p > .05", "<0.001", False),
        ("p > .05", ">0.05", True),
        ("p = .001", "<0.001", False),
        ("2.1 × 10⁻⁵", 2.14e-5, True),
        ("2.1 × 10⁻⁵", 2.2e-5, False),
    ],
)
def test_a_number_agrees_within_the_digits_shown(text: str, number: float | str, fits: bool) -> None:
    assert agrees(only(text), reported(number)) is fits


def test_percent_may_be_the_unit_of_the_record() -> None:
    assert agrees(only("25 %"), exact(25.0), in_percent=True)
    assert not agrees(only("25 %"), exact(0.25), in_percent=True)


@pytest.mark.parametrize(
    ("text", "number", "anew"),
    [
        ("3.8", 3.28, "3.3"),
        ("3.8", 3.25, "3.3"),
        (".034", 0.041, ".041"),
        (".034", 1.2, "1.200"),
        ("1,234", 45678.0, "45,678"),
        ("1,234", 999.0, "999"),
        ("1\u202f234", 45678.0, "45\u202f678"),
        (r"1{,}234", 9999.0, r"9{,}999"),
        ("3,8", 3.28, "3,3"),
        ("−2.1", -3.3, "−3.3"),
        ("-2.1", -3.3, "-3.3"),
        ("2.1", -3.3, "-3.3"),
        ("−2.1", 3.3, "3.3"),
        ("+2.1", 3.3, "+3.3"),
        ("12 %", 0.345, "35"),
        ("2.1e-5", 3.14e-7, "3.1e-7"),
        ("2.1 × 10⁻⁵", 3.14e-7, "3.1 × 10⁻⁷"),
        ("2.1 × 10^−5", 3.14e-7, "3.1 × 10^−7"),
        (r"$-2\times10^{-5}$", -3.14e-12, r"-3\times10^{-12}"),
        ("2.1 × 10<sup>5</sup>", 3.14e6, "3.1 × 10<sup>6</sup>"),
        ("0.3", "1.28", "1.3"),
        # What cannot be written in the digits shown.
        ("0.03", 0.0004, None),
        ("0.03", 0.0, "0.00"),
        ("3.30", "3.4", None),
        ("3.30 × 10^5", "3.4e5", None),
        ("3.3 × 10^5", 0.0, None),
        ("p < .001", 0.002, None),
        ("10^-4", 0.002, None),
        ("p = .03", "<0.001", None),
        ("0.1", 1e300, "1" + "0" * 300 + ".0"),
    ],
)
def test_the_record_is_written_as_the_number_was(text: str, number: float | str, anew: str | None) -> None:
    assert rewritten(only(text), reported(number)) == anew


@given(st.floats(-1e9, 1e9), st.integers(0, 6), st.floats(-1e9, 1e9))
def test_what_is_written_anew_agrees_and_keeps_its_digits(before: float, digits: int, number: float) -> None:
    shown = only(f"{before:.{digits}f}")

    anew = rewritten(shown, exact(number))

    if anew is None:
        assert 0 < abs(number) < 10.0**-digits
    else:
        again = only(anew)
        assert agrees(again, exact(number))
        assert again.unit == shown.unit
