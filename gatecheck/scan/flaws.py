"""What no field of a record may be, found before the record is read: refused values, and excess."""

from __future__ import annotations

import re
from typing import Any

from gatecheck.scan.readers.document import DEEPEST, LONGEST_TEXT, Refused
from gatecheck.schema.read import Fault, Path

MOST_VALUES = 10_000

_SURROGATE = re.compile("[\ud800-\udfff]")


def flaws_of(record: Any) -> tuple[list[Fault], bool]:
    """Return the flaws of `record`, and whether it can still be read for the faults of its fields."""
    flaws: list[Fault] = []
    waiting: list[tuple[Path, Any]] = [((), record)]
    seen = 0
    while waiting:
        path, value = waiting.pop()
        seen += 1
        if seen > MOST_VALUES:
            advice = "keep tables of data apart from the record"
            return [Fault((), f"has more than {MOST_VALUES} values", advice)], False
        if len(path) > DEEPEST:
            advice = "write the record flat, as its format is"
            return [Fault(path[:1], f"is nested more than {DEEPEST} deep", advice)], False
        fault = _flaw(path, value)
        if fault is not None:
            flaws.append(fault)
        waiting.extend(_members(path, value))
    flaws.reverse()
    return flaws, not any(fault.message.startswith(_TOO_LONG) for fault in flaws)


_TOO_LONG = "is a text of"


def _members(path: Path, value: Any) -> list[tuple[Path, Any]]:
    if isinstance(value, dict):
        return [((*path, key), inner) for key, inner in value.items()]
    if isinstance(value, list):
        return [((*path, index), inner) for index, inner in enumerate(value)]
    return []


def _flaw(path: Path, value: Any) -> Fault | None:
    if isinstance(value, Refused):
        return Fault(path, value.message, value.advice)
    return _flaw_of_text(path, value) or _flaw_of_text(path, path[-1] if path else None)


def _flaw_of_text(path: Path, text: Any) -> Fault | None:
    if not isinstance(text, str):
        return None
    if len(text) > LONGEST_TEXT:
        return Fault(path, f"{_TOO_LONG} {len(text)} characters", f"keep it to {LONGEST_TEXT}")
    if not text.isascii() and _SURROGATE.search(text):
        return Fault(path, "holds half of a surrogate pair", "write the text in valid Unicode")
    return None
