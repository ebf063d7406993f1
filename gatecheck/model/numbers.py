"""Numbers as they are reported: a value and the interval that it may stand for."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from decimal import Decimal
from typing import Literal

Relation = Literal["=", "<", ">"]

#: A number in a string: an optional bound, then digits with or without a point and an exponent.
REPORTED_PATTERN = r"^\s*[<>]?\s*[+-]?([0-9]+\.?[0-9]*|\.[0-9]+)([eE][+-]?[0-9]{1,4})?\s*$"
_REPORTED = re.compile(REPORTED_PATTERN)
_LONGEST = 60


@dataclass(frozen=True, slots=True)
class Reported:
    """A number as a record gives it.

    A JSON number is exact: `low == value == high`. A string is rounded: `"2.21"` may be anything in
    [2.205, 2.215). `"<0.001"` is a bound: `relation` is `<`, `value` is the bound itself, and `low` is -inf.
    `text` is the string as it stood, `None` for an exact number.
    """

    value: float
    low: float
    high: float
    relation: Relation = "="
    text: str | None = None

    @property
    def shown(self) -> str:
        """The number as its author wrote it."""
        return self.text if self.text is not None else f"{self.value:.15g}"

    def as_rounded(self) -> Reported:
        """Read an exact number as if it were rounded to the digits in which it is written.

        Many writers round before they write a JSON number, so a disagreement that this reading dissolves
        is no disagreement between results.
        """
        if self.text is not None or self.value.is_integer():
            return self
        rounded = parse_reported(repr(self.value))
        return self if rounded is None else rounded


def exact(value: float) -> Reported:
    """Return `value` as a number that stands for itself alone."""
    return Reported(value, value, value)


def parse_reported(text: str) -> Reported | None:
    """Return the number that `text` reports, or `None` where it is not a finite number.

    The interval is half a unit of the last digit shown to either side, so trailing zeros count:
    `"0.050"` is narrower than `"0.05"` (common practice, no source).
    """
    if len(text) > _LONGEST or not _REPORTED.match(text):
        return None
    bare = text.strip()
    relation: Relation = "="
    if bare[0] in "<>":
        relation = "<" if bare[0] == "<" else ">"
        bare = bare[1:].strip()
    number = Decimal(bare)
    half = Decimal((0, (5,), int(number.as_tuple().exponent) - 1))
    value = float(number)
    if not math.isfinite(value):
        return None
    if relation == "<":
        return Reported(value, -math.inf, value, "<", text)
    if relation == ">":
        return Reported(value, value, math.inf, ">", text)
    return Reported(value, float(number - half), float(number + half), "=", text)
