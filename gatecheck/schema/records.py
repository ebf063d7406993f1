"""Read a result record: its shape first, then what its fields demand of each other."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from gatecheck.model.numbers import Reported
from gatecheck.model.record import Estimate, Record, Test
from gatecheck.schema.read import Fault, Path, read

_DF_COUNT = {"t": 1, "chi2": 1, "F": 2, "r": 1}


def read_record(document: Any) -> tuple[Record | None, tuple[Fault, ...]]:
    """Read `document` into a record, or return all its faults."""
    record, faults = read(Record, document)
    if record is None:
        return None, faults
    between = tuple(_between_fields(record))
    return (None, between) if between else (record, ())


def _between_fields(record: Record) -> Iterator[Fault]:
    if record.test is not None:
        yield from _of_test(record.test)
        yield from _of_p(record.test)
    if record.estimate is not None:
        yield from _of_estimate(record.estimate)


def _of_test(test: Test) -> Iterator[Fault]:
    one_sided = test.sides == 1
    if one_sided and test.tail is None and test.statistic in {"t", "z", "r"}:
        yield Fault(("test", "tail"), "is missing where sides is 1", "say greater or less")
    if test.tail is not None and not one_sided:
        yield Fault(("test", "tail"), "is given where sides is not 1", "leave it out, or set sides to 1")
    if test.value is not None and test.statistic is None:
        advice = "say t, z, chi2, F or r; another test's statistic goes into `named_statistic`"
        yield Fault(("test", "statistic"), "is missing beside `value`", advice)
    wanted = _DF_COUNT.get(test.statistic or "")
    if wanted is not None and test.df is not None and len(test.df) != wanted:
        advice = "give one number" if wanted == 1 else "give [numerator df, denominator df]"
        yield Fault(("test", "df"), f"has {len(test.df)} numbers for the statistic {test.statistic}", advice)
    if test.value is not None:
        yield from _of_value(test.statistic, test.value)


def _of_value(statistic: str | None, value: Reported) -> Iterator[Fault]:
    if statistic in {"chi2", "F"} and value.high < 0:
        yield Fault(("test", "value"), f"is {value.shown}, below 0", f"{statistic} cannot be negative")
    if statistic == "r" and (value.low >= 1 or value.high <= -1):
        yield Fault(("test", "value"), f"is {value.shown}", "a correlation with a test lies between -1 and 1")
    if value.relation != "=":
        yield Fault(("test", "value"), f"is the bound {value.shown}", "give the statistic itself")


def _of_p(test: Test) -> Iterator[Fault]:
    if test.resamples is not None and test.p_kind != "permutation":
        yield Fault(("test", "resamples"), "is given where p_kind is not permutation", "set p_kind: permutation")


def _of_estimate(estimate: Estimate) -> Iterator[Fault]:
    interval = estimate.interval
    low = interval.low if interval else None
    high = interval.high if interval else None
    if interval is not None and low is None and high is None:
        yield Fault(("estimate", "interval"), "has neither limit", "give low, high or both")
    if low is not None and high is not None and low.low > high.high:
        yield Fault(
            ("estimate", "interval"), f"runs from {low.shown} to {high.shown}", "give the lower limit as low"
        )
    if estimate.margin is not None and estimate.margin[0].low >= estimate.margin[1].high:
        yield Fault(("estimate", "margin"), "is not [low, high] with low below high", "order its two numbers")
    if estimate.scale == "log":
        yield from _not_positive(estimate, low, high)


def _not_positive(estimate: Estimate, low: Reported | None, high: Reported | None) -> Iterator[Fault]:
    numbers: dict[Path, Reported | None] = {
        ("estimate", "value"): estimate.value,
        ("estimate", "null"): estimate.null,
        ("estimate", "interval", "low"): low,
        ("estimate", "interval", "high"): high,
    }
    for path, number in numbers.items():
        if number is not None and number.high <= 0:
            yield Fault(
                path,
                f"is {number.shown} on a log scale",
                "a ratio is above 0; give it as a ratio, not its log",
            )
