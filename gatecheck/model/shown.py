"""Numbers as people read them: few digits, yet never on the wrong side of a limit."""

from __future__ import annotations

import math
from decimal import ROUND_HALF_UP, Decimal

from gatecheck.model.struct import struct

#: From 10 to this power on, and below 10 to minus the other, a number is written with an exponent.
_LARGE = 16
_SMALL = -7


@struct
class _Style:
    """How a kind of number is written: its power of ten, its digits, and where it becomes a bound."""

    power: int
    digits: int
    least: Decimal
    most: Decimal

    @property
    def whole(self) -> Decimal:
        return Decimal(1).scaleb(self.power)


_PERCENT = _Style(power=2, digits=2, least=Decimal("0.001"), most=Decimal("99.999"))
_DECIMAL = _Style(power=0, digits=3, least=Decimal("0.0001"), most=Decimal("0.9999"))


def percent(value: float, limit: float | None = None) -> str:
    """Return a probability in percent, with two significant digits or as many as honesty needs.

    A limit is itself written as ``percent(limit, limit)``, which keeps all its digits.

    Parameters
    ----------
    value : float
        A probability; what is not finite is given in a word.
    limit : float, optional
        What the reader will compare the number with. Digits are added until the number shown is below, at or
        above the limit as the true one is. The same holds for 0 % and 100 % always.

    Returns
    -------
    str
        Such as ``"17 %"``, ``"5.04 %"``, ``"<0.001 %"``.
    """
    if not math.isfinite(value):
        return _not_finite(value)
    return f"{_shown(value, limit, _PERCENT)} %"


def decimal(value: float, limit: float | None = None) -> str:
    """Return a number with three significant digits or as many as honesty needs; whole digits all stay.

    Parameters
    ----------
    value : float
        A p-value, a statistic or a size; what is not finite is given in a word.
    limit : float, optional
        What the reader will compare the number with; see `percent`. Between 0 and 1, neither 0 nor 1 is shown.

    Returns
    -------
    str
        Such as ``"0.034"``, ``"2.21"``, ``"<0.0001"``, ``"1234"``.
    """
    return _shown(value, limit, _DECIMAL) if math.isfinite(value) else _not_finite(value)


def _not_finite(value: float) -> str:
    if math.isnan(value):
        return "unknown"
    return "infinite" if value > 0 else "minus infinite"


def _shown(value: float, limit: float | None, style: _Style) -> str:
    true = _exact(value, style)
    bars = [] if limit is None or math.isnan(limit) else [_exact(limit, style)]
    if 0 < true < style.least and all(bar >= style.least for bar in bars):
        return f"<{style.least}"
    if style.most < true < style.whole and all(bar <= style.most for bar in bars):
        return f">{style.most}"
    return _digits(_nearest(true, [Decimal(0), style.whole, *bars], style.digits))


def _exact(value: float, style: _Style) -> Decimal:
    # The shortest text that reads back as this double is the number that its author wrote.
    return Decimal(repr(float(value))).scaleb(style.power)


def _nearest(true: Decimal, bars: list[Decimal], digits: int) -> Decimal:
    shown = _rounded(true, digits)
    while any(shown.compare(bar) != true.compare(bar) for bar in bars):
        digits += 1
        shown = _rounded(true, digits)
    return shown


def _rounded(true: Decimal, digits: int) -> Decimal:
    if not true:
        return Decimal(0)
    last = true.adjusted() - digits + 1
    kept = last if true.adjusted() >= _LARGE else min(0, last)
    return true.quantize(Decimal(1).scaleb(kept), ROUND_HALF_UP)


def _digits(number: Decimal) -> str:
    bare = number.normalize()
    return f"{bare:f}" if _SMALL <= bare.adjusted() < _LARGE or not bare else f"{bare:e}"
