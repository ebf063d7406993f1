"""The test of one record: its p with the sides that were promised, and the direction of its effect."""

from __future__ import annotations

import math

import numpy as np

from gatecheck import weigh
from gatecheck.model.numbers import Reported
from gatecheck.model.record import Record, Test

_KINDS = {"t": weigh.Statistic.T, "r": weigh.Statistic.T, "z": weigh.Statistic.Z}
_SIGNED = frozenset(_KINDS)


def p_with_sides(test: Test, sides: int, toward: int) -> float | None:
    """Return the p that the statistic gives with so many sides, `None` where it cannot be told.

    One side is that of `toward`: 1 for greater, -1 for less, and 0 where it is not known.
    """
    kind = _KINDS.get(test.statistic or "")
    value = None if kind is None else _value(test, kind)
    unsigned = toward == 0 or test.value is None
    if kind is None or value is None or (sides == 1 and unsigned):
        return None
    signed = value * toward if sides == 1 else value
    with np.errstate(all="ignore"):
        p = math.exp(float(weigh.log_p(kind, signed, _df(test), _df(test), sides == 1)))
    return p if math.isfinite(p) else None


def _value(test: Test, kind: weigh.Statistic) -> float | None:
    """The statistic, a correlation as its t; recovered from a raw p, as one-sided toward its tail."""
    with np.errstate(all="ignore"):
        if test.value is not None:
            given = test.value.value
            value = float(weigh.t_from_r(given, _df(test))) if test.statistic == "r" else given
        elif test.p is not None and test.p_kind == "raw" and test.p.relation == "=" and test.p.value > 0:
            log_p = math.log(test.p.value)
            value = float(weigh.value_from_log_p(kind, log_p, _df(test), _df(test), test.sides == 1))
        else:
            return None
    return value if math.isfinite(value) else None


def _df(test: Test) -> float:
    return test.df[0].value if test.df else math.nan


def effect_sign(record: Record) -> int:
    """Return 1 or -1 for an effect above or below none, 0 where the record does not tell it within its rounding."""
    estimate, test = record.estimate, record.test or Test()
    if estimate is not None:
        no_effect = 1.0 if estimate.scale == "log" else 0.0
        return _side(estimate.value, no_effect if estimate.null is None else estimate.null.value)
    if test.value is not None and test.statistic in _SIGNED:
        return _side(test.value, 0.0)
    return 0


def _side(number: Reported, no_effect: float) -> int:
    return int(number.low > no_effect) - int(number.high < no_effect)
