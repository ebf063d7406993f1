"""Which of the results that a record ever had are looks at growing data."""

from __future__ import annotations

from collections.abc import Collection, Iterator, Sequence
from dataclasses import dataclass, field

from gatecheck.history.records import Version
from gatecheck.model.looks_seen import Change, LooksSeen, Seen
from gatecheck.model.numbers import Reported, exact
from gatecheck.model.record import Estimate, Record, Sample, Test
from gatecheck.model.struct import struct

_WITH_RESIDUAL_DF = {"t", "r", "F"}
_Numbers = tuple[Reported | None, ...]
_P = 1  # the place of p among them


@struct
class Told:
    """One distinct result: the versions that hold it, and what the first of them is beside the earlier ones."""

    versions: tuple[Version, ...]
    size: float | None
    change: Change
    on_line: bool


@dataclass(slots=True, eq=False)
class _Result:
    size: float | None
    numbers: _Numbers
    versions: list[Version] = field(default_factory=list)
    on_line_at: int | None = None


def looks_seen(versions: Sequence[Version], line: Collection[str] | None = None) -> LooksSeen:
    """Return the distinct results among the `versions` of one record, and which of them are looks.

    The versions stand oldest first, by ancestry and not by date. `line` holds the ids of the commits on the line
    of first parents (absent: all are). A result that only other commits hold is off that line, and counts as well.
    """
    told = [each for each in distinct(versions, line) if each.change != "rerun"]
    results = tuple(_seen(each) for each in told)
    unsized = sum(each.change == "unsized" for each in told)
    if not unsized:
        return LooksSeen(results)
    several = f"{unsized} results of this record" if unsized > 1 else "a result of this record"
    why = f"How many looks were taken is not known: the history holds {several} without the number of units."
    return LooksSeen(
        results, known=False, why=why, advice="give sample.n, and give other results an id of their own"
    )


def distinct(versions: Sequence[Version], line: Collection[str] | None = None) -> tuple[Told, ...]:
    """Return the distinct results among the `versions` of one record, oldest first.

    The first result, and one with other numbers from more units than the one before it, is a look; off the line
    any number of units that was not seen yet counts as more. One with other numbers from as many units as an
    earlier one, or with the same numbers from a number of units that is told otherwise, comes from other data or
    other code. One that agrees with an earlier one as far as both go is its rerun; where all but p does, as after a
    change of sides, it is told otherwise.
    """
    results: dict[tuple[object, ...], _Result] = {}
    for version, size in zip(versions, _sizes([one.record for one in versions]), strict=True):
        numbers = _numbers(version.record)
        key = (size, *[None if one is None else (one.value, one.relation) for one in numbers])
        result = results.get(key)
        if result is None:
            results[key] = result = _Result(size, numbers)
        result.versions.append(version)
        if result.on_line_at is None and (line is None or version.commit is None or version.commit.id in line):
            result.on_line_at = version.index
    # What the line held comes first: what a side branch held is new only where the line never had it.
    in_order = sorted(results.values(), key=lambda one: (one.on_line_at is None, one.on_line_at or 0))
    changes = {id(result): change for result, change in zip(in_order, _changes(in_order), strict=True)}
    return tuple(
        Told(tuple(one.versions), one.size, changes[id(one)], one.on_line_at is not None)
        for one in results.values()
    )


def _changes(results: Sequence[_Result]) -> Iterator[Change]:
    last_of_size: dict[float | None, _Result] = {}
    previous: _Result | None = None
    for result in results:
        yield "look" if previous is None else _change(result, previous, last_of_size.get(result.size))
        last_of_size[result.size] = previous = result


def _change(result: _Result, previous: _Result, same_size: _Result | None) -> Change:
    if same_size is not None and _agree(result.numbers, same_size.numbers):
        return "rerun"
    if result.size is None or previous.size is None:
        return "unsized"
    if same_size is not None and _agree(_beside_p(result.numbers), _beside_p(same_size.numbers)):
        return "retold"
    if same_size is not None or _same(result.numbers, previous.numbers):
        return "other"
    return "look" if result.on_line_at is None or result.size > previous.size else "smaller"


def _sizes(records: Sequence[Record]) -> list[float | None]:
    """Return the number of units of each, or of each its degrees of freedom where only these are always given."""
    units = [_units(record.sample) for record in records]
    degrees = [_degrees(record.test) for record in records]
    return degrees if None in units and None not in degrees else units


def _units(sample: Sample | None) -> float | None:
    if sample is None:
        return None
    if sample.n is not None:
        return float(sample.n)
    return float(sum(group.n for group in sample.groups)) if sample.groups else None


def _degrees(test: Test | None) -> float | None:
    known = test is not None and test.df is not None and test.statistic in _WITH_RESIDUAL_DF
    return test.df[-1].value if known and test is not None and test.df else None


def _numbers(record: Record) -> _Numbers:
    """The numbers of a result, in one order; what is not given is `None`."""
    test = record.test or Test()
    own = test.named_statistic
    groups = record.sample.groups if record.sample else ()
    return (
        test.value,
        test.p,
        own.value if own else None,
        *_of_estimate(record.estimate),
        *(one for group in groups for one in (group.mean, group.sd, _count(group.events))),
    )


def _of_estimate(estimate: Estimate | None) -> _Numbers:
    if estimate is None:
        return (None,) * 4
    interval = estimate.interval
    ends = (interval.low, interval.high) if interval else (None, None)
    return (estimate.value, estimate.standard_error, *ends)


def _count(events: int | None) -> Reported | None:
    return None if events is None else exact(float(events))


def _agree(some: _Numbers, others: _Numbers) -> bool:
    """Whether all numbers that both give can be the same, as they are rounded, and there is one."""
    pairs = [
        (one, other) for one, other in zip(some, others, strict=False) if one is not None and other is not None
    ]
    return bool(pairs) and all(one.value == other.value or _overlap(one, other) for one, other in pairs)


def _beside_p(numbers: _Numbers) -> _Numbers:
    return (*numbers[:_P], *numbers[_P + 1 :])


def _overlap(one: Reported, other: Reported) -> bool:
    one, other = one.as_rounded(), other.as_rounded()
    return one.low < other.high and other.low < one.high


def _same(some: _Numbers, others: _Numbers) -> bool:
    return [one and one.value for one in some] == [other and other.value for other in others]


def _seen(told: Told) -> Seen:
    first = told.versions[0]
    commit, time = (first.commit.id, first.commit.time) if first.commit else (None, None)
    return Seen(commit, time, first.record, told.size, told.change, told.on_line)
