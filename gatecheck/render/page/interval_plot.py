"""An estimate with its interval beside no effect and the smallest effect of interest, as a small vector drawing.

Its coordinates are whole numbers of half a pixel or so, as a page may hold thousands.
"""

from __future__ import annotations

import math
from collections.abc import Sequence

from gatecheck.model.interval_shown import IntervalShown
from gatecheck.render.page.drawing import NOTHING, Drawing, filled

_NEAR, _FAR = 28, 572
_TOP, _LINE, _AXIS, _LABELS = 8, 44, 80, 114
_PADDING = 0.06
_MOST_TICKS = 5
_STEPS = (1, 2, 5)
_FEW_TICKS = 2
#: Numbers whose logarithm is larger cannot be told apart from infinite or none.
_LARGEST = 600.0
#: Digits in which a tick is the number that was meant, whatever the last bit of its sum.
_DIGITS = 12


class _Scale:
    """Where numbers stand between the ends of one plot."""

    def __init__(self, shown: IntervalShown) -> None:
        self.log = shown.log_scale
        ends = band(shown) or ()
        at = [self.at(each) for each in (shown.value, shown.null, shown.low, shown.high, *ends) if each is not None]
        padding = _PADDING * (max(at) - min(at)) or _PADDING * max(abs(at[0]), 1.0)
        self.low, self.high = min(at) - padding, max(at) + padding

    @property
    def can_be_drawn(self) -> bool:
        """Whether arithmetic on its ends keeps its digits."""
        ends = [self.low, self.high] if self.log else [math.log(self.high - self.low)]
        return all(abs(end) < _LARGEST for end in ends)

    def at(self, number: float) -> float:
        """The number on the scale on which it is drawn."""
        if not self.log:
            return number
        return math.log(number) if number > 0 else -math.inf

    def x(self, number: float) -> int:
        """The number in the units of the drawing."""
        return round(_NEAR + (self.at(number) - self.low) / (self.high - self.low) * (_FAR - _NEAR))

    def ticks(self) -> list[float]:
        """A few round numbers between the ends."""
        if not self.log:
            return _round_numbers(self.low, self.high)
        low, high = math.exp(self.low), math.exp(self.high)
        powers = range(math.floor(math.log10(low)), math.ceil(math.log10(high)) + 1)
        tens = [10.0**power for power in powers if low <= 10.0**power <= high]
        if len(tens) > _MOST_TICKS:
            return tens[:: -(-len(tens) // _MOST_TICKS)]
        finer = [step * 10.0**power for power in powers for step in _STEPS if low <= step * 10.0**power <= high]
        found = finer if len(finer) <= _MOST_TICKS else tens
        return found if len(found) >= _FEW_TICKS else _round_numbers(low, high)


def _round_numbers(low: float, high: float) -> list[float]:
    rough = (high - low) / _MOST_TICKS
    power = 10.0 ** math.floor(math.log10(rough))
    step = next((each * power for each in _STEPS if each * power >= rough), 10 * power)
    return [count * step for count in range(math.ceil(low / step), math.floor(high / step) + 1)]


def band(shown: IntervalShown) -> tuple[float, float] | None:
    """Return the effects too small to matter: the margin, or what is nearer to no effect than the smallest effect.

    `None` where the record gives neither.
    """
    if shown.margin_low is not None and shown.margin_high is not None:
        return shown.margin_low, shown.margin_high
    if shown.smallest is None:
        return None
    if shown.log_scale:
        return shown.smallest, shown.null * (shown.null / shown.smallest)
    return shown.smallest, shown.null - (shown.smallest - shown.null)


#: The band, no effect, the interval, and the ring of the estimate.
INTERVAL = (
    f'<rect x="{{0}}" y="{_TOP}" width="{{1}}" height="{_AXIS - _TOP}"/>'
    f'<path class="n" d="M{{2}},{_TOP}V{_AXIS}"/><path class="c" d="{{3}}"/><circle cx="{{4}}" cy="{_LINE}" r="9"/>'
)
#: A tick of the axis, and its number.
TICK = f"M{{0}},{_AXIS}v8"
LABEL = '<tspan x="{0}">{1}</tspan>'
#: The interval, then all ticks, then all numbers.
VIEW = (
    f'<svg viewBox="0 0 600 124">{{0}}<path class="g" d="M{_NEAR},{_AXIS}H{_FAR}{{1}}"/>'
    f'<text class="m" y="{_LABELS}">{{2}}</text></svg>'
)


def interval_drawing(shown: IntervalShown | None) -> list[Drawing] | None:
    """Return what fills `INTERVAL`, then what fills a `TICK` and a `LABEL` each, all of them within `VIEW`.

    The estimate is a ring on its interval, no effect an upright line, and what is too small to matter is shaded.
    `None` where nothing is given, or the numbers are too large or too close for a drawing.
    """
    if shown is None or not (scale := _Scale(shown)).can_be_drawn:
        return None
    main = [*_shaded(shown, scale), scale.x(shown.null), _line(shown, scale), scale.x(shown.value)]
    ticks: list[Drawing] = [[scale.x(each), f"{each:.{_DIGITS}g}"] for each in scale.ticks()]
    return [main, *ticks]


def interval_plot(drawing: Sequence[Drawing]) -> str:
    """Return the drawing as it stands in the page."""
    main, *ticks = drawing
    return filled(
        VIEW, [filled(INTERVAL, main), *("".join(filled(each, tick) for tick in ticks) for each in (TICK, LABEL))]
    )


def _shaded(shown: IntervalShown, scale: _Scale) -> Drawing:
    ends = band(shown)
    if ends is None:
        return [0, 0]
    left, right = sorted(map(scale.x, ends))
    return [left, right - left]


def _line(shown: IntervalShown, scale: _Scale) -> str:
    """The interval with a stroke at each of its limits; where it has none it runs on to the edge."""
    if shown.level is None:
        return NOTHING
    low = _NEAR if shown.low is None else scale.x(shown.low)
    high = _FAR if shown.high is None else scale.x(shown.high)
    limits = ((low, shown.low), (high, shown.high))
    strokes = "".join(f"M{x},{_LINE - 10}v20" for x, limit in limits if limit is not None)
    return f"M{low},{_LINE}H{high}{strokes}"
