"""What an adapter is given beside a result, and what it derives from the result."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any


@dataclass(frozen=True, slots=True)
class Given:
    """What the caller says beside the result; groups are already worked out into the contract's list."""

    test: Mapping[str, Any] = field(default_factory=dict)
    sample: Mapping[str, Any] = field(default_factory=dict)
    coefficient: str | None = None


@dataclass(frozen=True, slots=True)
class Derived:
    """What a result says, in the contract's words.

    `n` is given only where the result is certain of the number of units. `paired` is true where the groups
    are the same units measured again, and `None` where the result cannot tell. `directed` is true for a test
    that may be one-sided. `null_unknown` is true for a test against a value that the result does not keep and
    that is not 0.
    """

    test: dict[str, Any] = field(default_factory=dict)
    estimate: dict[str, Any] = field(default_factory=dict)
    n: int | None = None
    paired: bool | None = False
    directed: bool = False
    null_unknown: bool = False


def interval_at_95(low: float, high: float) -> dict[str, Any]:
    """Return the 0.95 interval from `low` to `high` in the contract's words, without its infinite ends."""
    limits = {"low": low, "high": high}
    finite = {end: limit for end, limit in limits.items() if abs(limit) != float("inf")}
    return {"interval": {"level": 0.95, **finite}} if finite else {}
