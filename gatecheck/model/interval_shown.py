"""An estimate with its interval, as it is drawn beside the smallest effect of interest."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class IntervalShown:
    """Numbers on the scale of the estimate as it is reported; `None` where the record does not give one.

    `smallest` is the smallest effect of interest, `margin_low` and `margin_high` the margin of a claim of no
    effect.
    """

    measure: str
    unit: str
    value: float
    low: float | None
    high: float | None
    level: float | None
    null: float
    log_scale: bool
    smallest: float | None = None
    margin_low: float | None = None
    margin_high: float | None = None
