"""Claims that two effects differ: the difference of two records, and whether the claim's own record tests it.

That one effect is significant and another is not says nothing of the difference between them (Gelman and Stern, The
American Statistician 60 (2006) 328-331; Nieuwenhuis, Forstmann and Wagenmakers, Nature Neuroscience 14 (2011)
1105-1107; from memory).
"""

from __future__ import annotations

import re

import numpy as np

from gatecheck import weigh
from gatecheck.columns import Columns, Floats
from gatecheck.model.record import Estimate, Record
from gatecheck.model.struct import struct
from gatecheck.standard_errors import standard_error
from gatecheck.together import rows_by_name

#: Of the interval that is told.
LEVEL = 0.95
#: An estimate of the difference in another model agrees with it to so many standard errors, and its own standard
#: error to within this factor (common practice, no source).
_NEAR = 0.25
_SAME_ERROR = 1.25
_TESTS_A_DIFFERENCE = re.compile(
    r"\binteraction|\beffect[ -]modification|\b(?:difference|ratio)s? (?:of|in|between)(?: the)?(?: two)? "
    r"(?:differences|effects|slopes|(?:odds |risk |hazard |rate )?ratios)|\bdifference[ -]in[ -]differences?",
    re.IGNORECASE,
)


@struct
class Interaction:
    """Two records that a third one compares, and the difference of the first from the second.

    On a log scale `difference`, `low` and `high` are natural logs of ratios; the interval has level `LEVEL`, the
    standard error is that of independent units, and `p` is two-sided by the normal distribution. Where they cannot
    be compared, all are nan and `apart` says why.
    """

    rows: tuple[int, ...]
    difference: float
    error: float
    low: float
    high: float
    p: float
    log_scale: bool
    apart: str = ""


@struct
class Interactions:
    """For each row the records that it compares, else `None`, and whether the row itself tests that difference."""

    compared: tuple[Interaction | None, ...]
    tested: tuple[bool, ...]


def interactions(columns: Columns) -> Interactions:
    """The differences that records assert (`compares`), computed from the two records that they name.

    A row tests the difference itself where the name of its test or its measure says so, or where its estimate and
    standard error are those of the difference.
    """
    records = [one.record for one in columns.found]
    row_of = rows_by_name(records)
    errors = standard_error(columns)
    compared = tuple(_compared(columns, record, row_of, errors) for record in records)
    tested = tuple(
        _is_named_so(record) or (fact is not None and _agrees(columns, errors, row, fact))
        for row, (record, fact) in enumerate(zip(records, compared, strict=True))
    )
    return Interactions(compared, tested)


def _compared(columns: Columns, record: Record, row_of: dict[str, int], errors: Floats) -> Interaction | None:
    if record.compares is None:
        return None
    rows = [row_of[name] for name in record.compares if name in row_of]
    apart = _why_apart(columns, record.compares, row_of, errors)
    if apart:
        return Interaction(tuple(rows), np.nan, np.nan, np.nan, np.nan, np.nan, log_scale=False, apart=apart)
    first, second = columns.estimate.value.value[rows]
    error = float(np.hypot(*errors[rows]))
    half = float(weigh.t_quantile_two_sided(LEVEL, np.inf)) * error
    difference = float(first - second)
    p = float(np.exp(weigh.log_p_z(difference / error, one_sided=False)))
    log_scale = bool(columns.estimate.log_scale[rows[0]])
    return Interaction(tuple(rows), difference, error, difference - half, difference + half, p, log_scale)


def _why_apart(columns: Columns, names: tuple[str, ...], row_of: dict[str, int], errors: Floats) -> str:
    missing = [name for name in names if name not in row_of]
    if missing:
        return f"there is no record {missing[0]}"
    rows = [row_of[name] for name in names]
    if rows[0] == rows[1]:
        return "it names one record twice"
    if len({_quantity(columns.found[row].record.estimate) for row in rows}) > 1:
        return "their estimates have other measures, units or scales"
    if not np.isfinite(columns.estimate.value.value[rows] + errors[rows]).all():
        return "an estimate or its standard error is not given"
    return ""


def _quantity(estimate: Estimate | None) -> tuple[object, ...]:
    if estimate is None:
        return ()
    return (estimate.measure, estimate.unit, estimate.scale, None if estimate.null is None else estimate.null.value)


def _is_named_so(record: Record) -> bool:
    names = [record.test.name if record.test else None, record.estimate.measure if record.estimate else None]
    return any(name is not None and _TESTS_A_DIFFERENCE.search(name) for name in names)


def _agrees(columns: Columns, errors: Floats, row: int, fact: Interaction) -> bool:
    """Whether the estimate of a row is the difference, in either direction."""
    own, error = abs(float(columns.estimate.value.value[row])), float(errors[row])
    near = abs(own - abs(fact.difference)) <= _NEAR * fact.error
    return near and 1 / _SAME_ERROR <= error / fact.error <= _SAME_ERROR
