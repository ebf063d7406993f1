"""Fields of a record by the names that links use.

A dotted path such as `estimate.value` or `sample.groups[0].mean` names a number of the record; `risk` and
`prior-needed` name figures of the evidence in it.
"""

from __future__ import annotations

import dataclasses
import re
from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from gatecheck.model.numbers import Reported, exact
from gatecheck.model.record import Record
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Figures, Judged

#: Figures of the evidence in a record, by their names in links.
EVIDENCE = ("risk", "prior-needed")
_STEP = re.compile(r"([a-z_]+)((?:\[\d{1,4}\])*)")
_INDEX = re.compile(r"\d+")
_PERCENT_UNITS = {"%", "percent", "per cent", "percentage points", "percentage point", "pp"}


@struct
class Subject:
    """A record that prose may speak of, with the figures of its evidence where they are known."""

    record: Record
    figures: Figures | None = None


def subjects(records: Sequence[Record], judged: Sequence[Judged]) -> Mapping[str, Subject]:
    """Return the records by id and by earlier ids, with the figures that were computed for them."""
    figures = {one.id: one.evidence for one in judged}
    by_id = {record.id: Subject(record, figures.get(record.id)) for record in records}
    earlier = {alias: by_id[record.id] for record in records for alias in record.aliases}
    return {**earlier, **by_id}


def number_of(subject: Subject, field: str) -> Reported | None:
    """Return the number in `field`, or `None` where the record has none there."""
    if field in EVIDENCE:
        return _figure(subject.figures, field)
    value: Any = subject.record
    for step in field.split("."):
        value = _inside(value, step)
    return _as_number(value)


def fields_of(subject: Subject) -> Iterator[str]:
    """Yield the fields that hold a number."""
    yield from _below(subject.record, "")
    yield from (name for name in EVIDENCE if _figure(subject.figures, name) is not None)


def is_in_percent(subject: Subject, field: str) -> bool:
    """Whether the number in `field` is itself given in percent, so that a percent sign behind it is its unit."""
    estimate = subject.record.estimate
    in_its_unit = field.startswith("estimate.") and field != "estimate.interval.level"
    return in_its_unit and estimate is not None and (estimate.unit or "").strip().lower() in _PERCENT_UNITS


def _figure(figures: Figures | None, name: str) -> Reported | None:
    if figures is None:
        return None
    value = figures.false_positive_risk if name == "risk" else figures.prior_needed
    return None if value is None else exact(value)


def _inside(value: Any, step: str) -> Any:
    found = _STEP.fullmatch(step)
    if found is None or not dataclasses.is_dataclass(value) or found[1] not in value.__dataclass_fields__:
        return None
    inner = getattr(value, found[1])
    for index in map(int, _INDEX.findall(found[2])):
        inner = inner[index] if isinstance(inner, tuple) and index < len(inner) else None
    return inner


def _as_number(value: Any) -> Reported | None:
    if isinstance(value, tuple) and len(value) == 1:
        return _as_number(value[0])
    if isinstance(value, bool) or not isinstance(value, int | float | Reported):
        return None
    return value if isinstance(value, Reported) else exact(float(value))


def _below(value: Any, name: str) -> Iterator[str]:
    if _as_number(value) is not None:
        yield name
    elif isinstance(value, tuple):
        for index, each in enumerate(value):
            yield from _below(each, f"{name}[{index}]")
    elif dataclasses.is_dataclass(value):
        for field in dataclasses.fields(value):
            yield from _below(getattr(value, field.name), f"{name}.{field.name}".removeprefix("."))
