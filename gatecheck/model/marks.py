"""What a field of a format admits, said once in its type, for the reader and the JSON Schema alike."""

from __future__ import annotations

import math

from gatecheck.model.struct import struct


@struct
class Range:
    """The numbers that a field admits, from `low` to `high`; an end that is `open` is itself excluded."""

    low: float = -math.inf
    high: float = math.inf
    low_open: bool = False
    high_open: bool = False

    def admits(self, value: float) -> bool:
        """Whether `value` lies in the range."""
        above = value > self.low if self.low_open else value >= self.low
        below = value < self.high if self.high_open else value <= self.high
        return above and below

    def __str__(self) -> str:
        if math.isinf(self.high):
            return f"above {self.low:g}" if self.low_open else f"{self.low:g} or more"
        first = f"above {self.low:g}" if self.low_open else f"{self.low:g}"
        last = f"below {self.high:g}" if self.high_open else f"{self.high:g}"
        return f"from {first} to {last}"


@struct
class Pattern:
    """The texts that a field admits: a regular expression for the whole text, and the same in words."""

    regex: str
    words: str


@struct
class OneOrMore:
    """A list of `least` to `most` members that may also be written as its only member."""

    most: int | None = None
    least: int = 1


@struct
class Length:
    """A list of exactly `size` members."""

    size: int
