"""A single proportion against its counts, and its standard error against the number of independent units.

An error that is smaller than that of as many independent units counts something else: runs of the same units, or
measurements of one unit. Then it tells nothing of other units.
"""

from __future__ import annotations

import math

import numpy as np

from gatecheck.columns import Columns, T, Z
from gatecheck.compare.agreement import Agreement, Compared, Kind, gathered
from gatecheck.compare.design_names import MODELLED, says, test_name
from gatecheck.model.numbers import Reported, exact
from gatecheck.model.record import Estimate, Sample
from gatecheck.model.struct import struct

_VALUE = Kind(
    "proportion",
    ("the events of the group", "the estimate"),
    ("it is weighted or from a model", "it is of other units than those counted"),
)
_ERROR = Kind(
    "proportion-error",
    ("the number of units", "the precision of the estimate"),
    ("the units are a large share of a small population", "the error is that of a paired comparison"),
)
#: Sampling by strata or from a small population makes an error smaller than that of independent units, yet hardly
#: by more than this (common practice, no source).
_LEAST_OF_INDEPENDENT = 0.75
_SAME = 1e-6
_WHOLE = 100.0
_MULTIPLE = 1.959964
_IN_PERCENT = r"^\s*(%|percent|per cent|points?|pp|percentage points?|% points?)\s*$"
_PROPORTION = (
    r"accuracy|proportion|percentage|share|prevalence|sensitivity|specificity|conversion"
    r"|(pass|success|error|response|hit|failure|survival) rate"
)
_NO_PROPORTION = (
    r"difference|ratio\b|change|log|mean|increase|lift|explained|balanced|weighted|adjusted|kappa|versus|\bvs\b"
)
#: Units whose score is itself a share of many others.
_OF_MANY = r"seed|run|fold|replic|repeat|session|site|cluster|batch|school|class|clinic|hospital|region"


@struct
class Proportion:
    """A single proportion that a record estimates: its share of 1, its n, and the unit of the estimate."""

    share: float
    n: float
    unit: float


def proportion_numbers(columns: Columns) -> tuple[Agreement, ...]:
    """Every comparison of single proportions, of all rows; none where no record estimates one."""
    values: dict[int, Compared] = {}
    errors: dict[int, Compared] = {}
    for row, one in enumerate(columns.found):
        estimate, sample = one.record.estimate, one.record.sample
        if estimate is None or sample is None or not _is_proportion(estimate, sample):
            continue
        if says(MODELLED, test_name(columns, row)):
            continue
        value, error = _value(columns, row, sample), _error(columns, row, estimate, sample)
        if value is not None:
            values[row] = value
        if error is not None:
            errors[row] = error
    of = len(columns.found)
    return tuple(gathered(kind, found, of) for kind, found in ((_VALUE, values), (_ERROR, errors)) if found)


def _is_proportion(estimate: Estimate, sample: Sample) -> bool:
    measure = estimate.measure
    named = says(_PROPORTION, measure) and not says(_NO_PROPORTION, measure)
    return named and len(sample.groups) <= 1 and estimate.scale == "linear"


def proportion_of(estimate: Estimate, sample: Sample) -> Proportion:
    """The proportion that a record estimates; an n of 0 where it gives none."""
    n = sample.groups[0].n if sample.n is None and sample.groups else sample.n
    unit = _WHOLE if estimate.unit is not None and says(_IN_PERCENT, estimate.unit) else 1.0
    return Proportion(estimate.value.value / unit, float(n or 0), unit)


def _value(columns: Columns, row: int, sample: Sample) -> Compared | None:
    """The proportion against its events."""
    events = sample.groups[0].events if sample.groups else None
    if events is None or not sample.groups[0].n:
        return None
    share = events / sample.groups[0].n
    forms = [share * unit for unit in (1.0, _WHOLE)]
    null, given = columns.estimate.null[row], columns.estimate.value
    fits = any(given.low[row] <= form - null + _SAME and given.high[row] >= form - null - _SAME for form in forms)
    return Compared(fits, forms[0], forms[1])


def _error(columns: Columns, row: int, estimate: Estimate, sample: Sample) -> Compared | None:
    """The standard error, reported or implied, against that of as many independent units."""
    found, error = proportion_of(estimate, sample), implied_error(columns, row)
    unknown = not found.n or not 0 < found.share < 1 or np.isnan(error.value)
    if unknown or columns.estimate.adjusted[row] or says(_OF_MANY, sample.unit or ""):
        return None
    given, null = columns.estimate.value, columns.estimate.null[row]
    ends = (given.low[row] + null, given.high[row] + null, null)
    shares = [found.share, *(float(each) / found.unit for each in ends)]
    independent = [found.unit * math.sqrt(max(share * (1 - share), 0) / found.n) for share in shares]
    # No effect at 0 or 1 is no proportion that a test could be of.
    least = min(independent if 0 < null < found.unit else independent[:-1])
    return Compared(error.high >= _LEAST_OF_INDEPENDENT * least, independent[0], independent[0])


def implied_error(columns: Columns, row: int) -> Reported:
    """The standard error that a row reports, or that its statistic or its interval implies; nan where neither."""
    estimate, test = columns.estimate, columns.test
    error = estimate.standard_error
    if np.isfinite(error.value[row]):
        return Reported(float(error.value[row]), float(error.low[row]), float(error.high[row]))
    size, statistic = abs(float(estimate.value.value[row])), abs(float(test.value.value[row]))
    if test.statistic[row] in {T, Z} and statistic > 0 and size > 0:
        return exact(size / statistic)
    half = float(estimate.high.value[row] - estimate.low.value[row]) / 2 / _MULTIPLE
    return exact(half if half > 0 else math.nan)
