"""Records of the tree against those of the run, field by field as they are read."""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Iterator, Mapping, Sequence
from typing import Any, Literal

from gatecheck.model.found import Found
from gatecheck.model.numbers import Reported
from gatecheck.model.record import Record
from gatecheck.model.rerun import ChangedRecord, Compared, FieldDifference
from gatecheck.schema.read import Path, field_name

Likeness = Literal["equal", "close", "different"]

#: They tell when and under what a record was made: another run may give others.
_OF_THE_RUN = {("provenance", name) for name in ("commit", "made_at", "software")}


def compared(in_tree: Sequence[Found], from_run: Sequence[Found], tolerance: float) -> Compared:
    """Return how the records compare, by id; numbers may differ by the relative `tolerance`."""
    before = {one.record.id: one.record for one in in_tree}
    after = {one.record.id: one.record for one in from_run}
    by_likeness: dict[Likeness, list[str]] = {"equal": [], "close": []}
    changed = []
    for name in sorted(before.keys() & after.keys()):
        likeness, fields = _of_record(_fields(before[name]), _fields(after[name]), tolerance)
        if fields:
            changed.append(ChangedRecord(name, fields))
        else:
            by_likeness[likeness].append(name)
    return Compared(
        equal=tuple(by_likeness["equal"]),
        close=tuple(by_likeness["close"]),
        changed=tuple(changed),
        not_emitted=tuple(sorted(before.keys() - after.keys())),
        new=tuple(sorted(after.keys() - before.keys())),
    )


def _fields(record: Record) -> dict[Path, Any]:
    return {path: value for path, value in _leaves(record, ()) if path[:2] not in _OF_THE_RUN}


def _leaves(value: Any, path: Path) -> Iterator[tuple[Path, Any]]:
    """Yield every single value with its path; what is absent has none."""
    if isinstance(value, Mapping):
        members = list(value.items())
    elif isinstance(value, tuple):
        members = list(enumerate(value))
    elif dataclasses.is_dataclass(value) and not isinstance(value, Reported):
        members = [(field.name, getattr(value, field.name)) for field in dataclasses.fields(value)]
    else:
        members = []
        if value is not None:
            yield path, value
    for name, member in members:
        yield from _leaves(member, (*path, name))


def _of_record(
    before: dict[Path, Any], after: dict[Path, Any], tolerance: float
) -> tuple[Likeness, tuple[FieldDifference, ...]]:
    paths = dict.fromkeys([*before, *after])
    likeness = {path: _alike(before.get(path), after.get(path), tolerance) for path in paths}
    different = tuple(
        FieldDifference(field_name(path), *_shown(before.get(path), after.get(path)))
        for path in paths
        if likeness[path] == "different"
    )
    return ("close" if "close" in likeness.values() else "equal"), different


def _alike(before: Any, after: Any, tolerance: float) -> Likeness:
    if isinstance(before, Reported) and isinstance(after, Reported):
        return _reported_alike(before, after, tolerance)
    if before == after:
        return "equal"
    # A whole number is a count, or one of a few choices.
    numbers = isinstance(before, float) and isinstance(after, float)
    return "close" if numbers and math.isclose(before, after, rel_tol=tolerance) else "different"


def _reported_alike(before: Reported, after: Reported, tolerance: float) -> Likeness:
    if (before.low, before.value, before.high) == (after.low, after.value, after.high):
        return "equal"
    if before.relation != "=" and after.relation != "=":
        return "different"
    if before.relation == after.relation and math.isclose(before.value, after.value, rel_tol=tolerance):
        return "close"
    return "close" if _overlap(before, after) else "different"


def _overlap(one: Reported, other: Reported) -> bool:
    """Whether one number can be behind both; two rounded ones that only meet at an end have none in common."""
    for exact, wide in ((one, other), (other, one)):
        if exact.low == exact.high:
            at_end = exact.value in {wide.low, wide.high}
            # An exact half is rounded to either side, while a bound excludes its end.
            return wide.low <= exact.value <= wide.high and not (at_end and wide.relation != "=")
    return max(one.low, other.low) < min(one.high, other.high)


def _shown(before: Any, after: Any) -> tuple[str | None, str | None]:
    """Both values, numbers with as many digits as tell them apart."""
    first, second = _value(before), _value(after)
    if first == second:
        return repr(before.value), repr(after.value)
    return first, second


def _value(value: Any) -> str | None:
    if isinstance(value, Reported):
        return value.shown
    if isinstance(value, bool):
        return "true" if value else "false"
    return None if value is None else str(value)
