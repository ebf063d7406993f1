"""The estimate of a record with its interval, as it is drawn."""

from __future__ import annotations

from gatecheck.model.interval_shown import IntervalShown
from gatecheck.model.numbers import Reported
from gatecheck.model.record import Estimate, Record


def interval_of(record: Record) -> IntervalShown | None:
    """Return what `record` gives of its estimate; `None` without one, or where no log scale can hold it.

    On a log scale a limit of the interval that is not above 0 is unbounded, and other numbers that are not are left
    out: no point of that scale stands for them.
    """
    estimate = record.estimate
    if estimate is None:
        return None
    log_scale = estimate.scale == "log"
    value, null = _number(estimate.value, log_scale), _null(estimate, log_scale)
    if value is None or null is None:
        return None
    interval, margin = estimate.interval, estimate.margin or (None, None)
    return IntervalShown(
        measure=estimate.measure,
        unit="" if estimate.unit is None or estimate.unit == "1" else estimate.unit,
        value=value,
        low=None if interval is None else _number(interval.low, log_scale),
        high=None if interval is None else _number(interval.high, log_scale),
        level=None if interval is None else interval.level,
        null=null,
        log_scale=log_scale,
        smallest=_number(estimate.smallest_effect, log_scale),
        margin_low=_number(margin[0], log_scale),
        margin_high=_number(margin[1], log_scale),
    )


def _null(estimate: Estimate, log_scale: bool) -> float | None:
    if estimate.null is None:
        return 1.0 if log_scale else 0.0
    return _number(estimate.null, log_scale)


def _number(number: Reported | None, log_scale: bool) -> float | None:
    return None if number is None or (log_scale and number.value <= 0) else number.value
