"""The counts of events behind an estimate that is a difference of two proportions."""

from __future__ import annotations

import numpy as np

from gatecheck.columns import Columns, Floats, Integers
from gatecheck.model.record import Group, Record
from gatecheck.model.struct import struct

_PAIR = 2
_PERCENTAGE_POINTS = 100.0
#: A difference that is given in all its digits is that of the counts to within this.
_SAME_DIFFERENCE = 1e-9


@struct
class Counts:
    """Counts of shape (k,) of those `rows` of the columns whose estimate is the difference that they make.

    The estimate is `events1 / n1 - events2 / n2`, times `unit`: 1, or 100 for percentage points.
    """

    rows: Integers
    events1: Floats
    n1: Floats
    events2: Floats
    n2: Floats
    unit: Floats

    @property
    def error_without_effect(self) -> Floats:
        """The standard error of the difference where both proportions are the pooled one; nan where that is 0."""
        pooled = (self.events1 + self.events2) / (self.n1 + self.n2)
        error = np.sqrt(pooled * (1 - pooled) * (1 / self.n1 + 1 / self.n2))
        return np.where(error > 0, error, np.nan)


def counts_behind(columns: Columns, rows: Integers) -> Counts:
    """Find which of `rows` report a difference of proportions that the events of their two groups make."""
    found = [(row, counts) for row in rows.tolist() if (counts := _counts(columns, row)) is not None]
    table = np.array([counts for _, counts in found], np.float64).reshape(-1, 5)
    return Counts(np.array([row for row, _ in found], np.intp), *table.T)


def _counts(columns: Columns, row: int) -> tuple[float, float, float, float, float] | None:
    """Events and units of the groups in the order of the difference, and its unit."""
    groups = _groups(columns.found[row].record)
    estimate = columns.estimate
    if not groups or estimate.log_scale[row] or estimate.null[row] != 0:
        return None
    low, high = estimate.value.low[row] - _SAME_DIFFERENCE, estimate.value.high[row] + _SAME_DIFFERENCE
    fitting = [
        (*first, *second, unit)
        for first, second in (groups, groups[::-1])
        for unit in _units(columns.found[row].record)
        if low <= (first[0] / first[1] - second[0] / second[1]) * unit <= high
    ]
    # A difference near 0 may be either; in the wrong unit a margin would be a hundred times too wide.
    return fitting[0] if len({unit for *_, unit in fitting}) == 1 else None


def _units(record: Record) -> tuple[float, ...]:
    given = record.estimate.unit if record.estimate else None
    return (1.0,) if given == "1" else (1.0, _PERCENTAGE_POINTS)


def _groups(record: Record) -> tuple[tuple[float, float], ...]:
    """Events and units of each of two groups that give both; else nothing."""
    groups = record.sample.groups if record.sample else ()
    counted = tuple(each for each in map(_counted, groups) if each is not None)
    return counted if len(groups) == len(counted) == _PAIR else ()


def _counted(group: Group) -> tuple[float, float] | None:
    if group.events is None or not 0 <= group.events <= group.n or not group.n:
        return None
    return float(group.events), float(group.n)
