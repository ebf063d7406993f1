"""Ratios and relative changes whose scale a record does not say, read on each scale that they may be of.

An odds, risk, rate or hazard ratio is commonly reported beside figures of its logarithm, and a relative change
beside those of the ratio that it makes; a record may leave that out. A reading is the record as it would be if it
said so. Figures that disagree in one reading and fit in another that the record allows are no fault.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import replace

import numpy as np

from gatecheck.columns import Columns, columns_of
from gatecheck.compare.agreement import Agreement, with_rows
from gatecheck.compare.design_names import says
from gatecheck.compare.interval_shapes import SAME_MULTIPLE
from gatecheck.compare.written import rounded_alike, with_lost_zeros
from gatecheck.model.found import Found
from gatecheck.model.numbers import Reported, exact
from gatecheck.model.record import Estimate

_ABBREVIATED = r"^\W*a?(?:or|rr|hr|irr|gmr)\W*$"
_RATIO = r"\bratios?\b|\bfold\b|relative (?:risk|rate|hazard|odds)|" + _ABBREVIATED
#: Ratios of events, which come with an interval of their logarithm wherever that may be.
_OF_EVENTS = (
    r"\b(?:odds|risks?|rates?|hazards?|prevalence|incidence)[- ]ratios?\b|relative (?:risk|rate|hazard|odds)"
    r"|\bratio of (?:the )?(?:odds|risks|rates|hazards|proportions)\b|^\W*(?:a?or|a(?:rr|hr|irr))\W*$"
)
#: Ratios by which groups are compared; without an effect they are 1, also where a record leaves that out.
_COMPARING = rf"{_OF_EVENTS}|\bmeans?[- ]ratios?\b|\bratio of (?:the )?(?:geometric means|means|medians)\b"
_OF_ANOTHER_KIND = r"\blog|\bln\b|difference|coefficient|slope|change|reduction|increase|decrease"
_CHANGED = r"(?:change|reduction|increase|decrease|difference|lift)\b"
_IN_PERCENT = r"%|per ?cent"
_RELATIVE_CHANGE = (
    rf"(?:relative|fractional|proportional|%|per ?cent(?:age)?)(?! points?)[a-z -]*{_CHANGED}"
    rf"|{_CHANGED}[a-z ,-]*\(?(?:{_IN_PERCENT}\b)|\befficacy|\beffectiveness"
)
_PERCENT = 100.0

Compare = Callable[[Columns], tuple[Agreement, ...]]


def compared_as_read(found: tuple[Agreement, ...], columns: Columns, compare: Compare) -> tuple[Agreement, ...]:
    """Return the comparisons `found`, those of ratios as the first of their readings has them that fits.

    Where none fits, the first reading stands. `compare` makes the same comparisons of other columns.
    """
    read = {row: readings(one) for row, one in enumerate(columns.found)}
    trying = [row for row, each in read.items() if each[0] is not columns.found[row] or len(each) > 1]
    place = 0
    while trying:
        compared = compare(with_lost_zeros(columns_of([read[row][place] for row in trying])))
        fits = ~np.logical_or.reduce([each.disagrees for each in compared])
        taken = [at for at in range(len(trying)) if place == 0 or fits[at]]
        by_name = {each.name: each for each in compared}
        found = tuple(
            with_rows(each, [trying[at] for at in taken], by_name.get(each.name), taken) for each in found
        )
        place += 1
        trying = [row for at, row in enumerate(trying) if not fits[at] and len(read[row]) > place]
    return found


def readings(one: Found) -> tuple[Found, ...]:
    """Every reading of a record that it allows; the first is the one to tell of where none fits.

    It is the record alone where it says on which scale its figures are, or estimates no ratio.
    """
    estimate = one.record.estimate
    if estimate is None or estimate.scale == "log":
        return (one,)
    if says(_RELATIVE_CHANGE, estimate.measure):
        return (one, *_found(one, _as_changed_ratios(estimate)))
    if not says(_RATIO, estimate.measure) or says(_OF_ANOTHER_KIND, estimate.measure):
        return (one,)
    if estimate.value.value <= 0 or (estimate.null is not None and estimate.null.value <= 0):
        return (one,)
    read = _found(one, _as_ratios(estimate, linear="scale" in one.document["estimate"]))
    named = says(_COMPARING, estimate.measure) or (says(_ABBREVIATED, estimate.measure) and _on_log_alone(read))
    return read if named else (one, *read)


def _found(one: Found, estimates: Sequence[Estimate]) -> tuple[Found, ...]:
    return tuple(Found(replace(one.record, estimate=each), one.at, one.document) for each in estimates)


def _on_log_alone(read: Sequence[Found]) -> bool:
    return all(each.record.estimate is not None and each.record.estimate.scale == "log" for each in read)


def _as_ratios(estimate: Estimate, *, linear: bool) -> tuple[Estimate, ...]:
    """A ratio on the scale on which its interval is symmetric; on both where that does not tell which it is.

    On the logarithmic one the standard error is that of the logarithm, or of the ratio itself.
    """
    on_linear = replace(estimate, null=estimate.null or exact(1.0))
    if linear or not _is_positive(estimate):
        return (on_linear,)
    on_log = replace(on_linear, scale="log")
    error_of_ratio = _with_error_of_ratio(on_log)
    logarithms = (on_log,) if error_of_ratio is None else (on_log, error_of_ratio)
    of_log, of_ratio = _is_symmetric(on_log), _is_symmetric(on_linear)
    if of_ratio and not of_log:
        return (on_linear,)
    alone = of_log != of_ratio or (says(_OF_EVENTS, estimate.measure) and None not in _alike(estimate))
    return logarithms if alone else (*logarithms, on_linear)


def _with_error_of_ratio(estimate: Estimate) -> Estimate | None:
    """A ratio whose standard error is that of the ratio itself, with the one of its logarithm instead."""
    error, value = estimate.standard_error, estimate.value.as_rounded()
    if error is None or value.low <= 0:
        return None
    error = error.as_rounded()
    ends = error.value / value.value, error.low / value.high, error.high / value.low
    return replace(estimate, standard_error=_number(*ends))


def fits_as_error_of_ratio(one: Found, compare: Compare) -> bool:
    """Whether all figures of a ratio fit where its standard error is that of the ratio itself."""
    estimate = None if one.record.estimate is None else _with_error_of_ratio(one.record.estimate)
    if estimate is None:
        return False
    with np.errstate(all="ignore"):
        compared = compare(with_lost_zeros(columns_of(_found(one, [estimate]))))
    return not any(each.disagrees[0] for each in compared)


def _as_changed_ratios(estimate: Estimate) -> tuple[Estimate, ...]:
    """The ratio that a relative change makes: upwards, and downwards where a reduction is told as positive."""
    in_percent = says(_IN_PERCENT, f"{estimate.measure} {estimate.unit}")
    made = [_changed(estimate, toward / (_PERCENT if in_percent else 1.0)) for toward in (1.0, -1.0)]
    return tuple(each for each in made if each.value.value > 0 and _is_positive(each))


def _changed(estimate: Estimate, by: float) -> Estimate:
    """The ratio that a change makes, `by` a positive or negative share of 1; its error is not known."""
    value, *limits = _alike(estimate)
    low, high = (None if each is None else _ratio(each, by) for each in (limits if by > 0 else reversed(limits)))
    interval = estimate.interval
    return replace(
        estimate,
        value=_ratio(value, by),
        null=exact(1.0 if estimate.null is None else 1 + by * estimate.null.value),
        scale="log",
        standard_error=None,
        interval=None if interval is None else replace(interval, low=low, high=high),
    )


def _ratio(change: Reported, by: float) -> Reported:
    low, high = sorted((1 + by * change.low, 1 + by * change.high))
    return _number(1 + by * change.value, low, high)


def _number(value: float, low: float, high: float) -> Reported:
    """A number between two ends; one without a text would be taken as rounded to the digits that it has."""
    return Reported(value, low, high, text=repr(value))


def _alike(estimate: Estimate) -> tuple[Reported, Reported | None, Reported | None]:
    """The value and the limits of its interval, rounded alike."""
    interval = estimate.interval
    limits = (None, None) if interval is None else (interval.low, interval.high)
    value, *rounded = rounded_alike([estimate.value, *(each for each in limits if each is not None)])
    ends = iter(rounded)
    low, high = (None if each is None else next(ends) for each in limits)
    return value, low, high


def _is_positive(estimate: Estimate) -> bool:
    low = None if estimate.interval is None else estimate.interval.low
    return low is None or low.value >= 0


def _is_symmetric(estimate: Estimate) -> bool:
    """Whether the interval is symmetric about the estimate on its scale, within rounding."""
    value, low, high = _alike(estimate)
    if low is None or high is None or min(low.low, value.low) <= 0:
        return False
    scale = math.log if estimate.scale == "log" else float
    least_up, most_up = scale(high.low) - scale(value.high), scale(high.high) - scale(value.low)
    least_down, most_down = scale(value.low) - scale(low.high), scale(value.high) - scale(low.low)
    slack = SAME_MULTIPLE * (scale(high.value) - scale(low.value))
    return least_up <= most_down + slack and least_down <= most_up + slack
