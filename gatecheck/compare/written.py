"""Numbers as they were written: the digits that they stand for, also where a writer loses trailing zeros.

`2.0` in a document may be 2.04 rounded to one digit, for a number loses its trailing zeros when it is written. So a
whole number that is no text is taken as rounded like the numbers beside it.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from decimal import Decimal

import numpy as np

from gatecheck.columns import Columns, Interval
from gatecheck.model.numbers import Reported
from gatecheck.model.record import Estimate, Record

#: Numbers of more digits than this were not rounded by their author (common practice, no source).
_MOST_DIGITS = 6
#: A whole statistic was rounded to one place at least, a p of 1 to two (common practice, no source).
_USUAL_PLACES = 1
_PLACES_OF_P = 2
_ERROR = 1


def places(number: Reported) -> int | None:
    """The decimal places to which a number is written; `None` for a whole number that is no text."""
    if number.text is None and number.value.is_integer():
        return None
    return max(0, -int(_written(number).as_tuple().exponent))


def _written(number: Reported) -> Decimal:
    return Decimal(repr(number.value) if number.text is None else number.text.strip().lstrip("<> "))


def rounded_alike(numbers: Sequence[Reported]) -> list[Reported]:
    """The numbers as rounded; a whole one that is no text like the one beside it with fewest places.

    If all are whole, they are taken as rounded to whole numbers. Beside numbers in all their digits a whole one
    stands for itself.
    """
    to = _places_beside(numbers)
    return [
        number.as_rounded() if to is None or not _is_whole(number) else _rounded(number, to) for number in numbers
    ]


def _places_beside(numbers: Sequence[Reported], if_none: int = 0) -> int | None:
    """The places to which a whole number beside these may be rounded; `None` where they are in all their digits."""
    told = [each for each in map(places, numbers) if each is not None]
    in_full = any(len(_written(number).as_tuple().digits) > _MOST_DIGITS for number in numbers)
    return None if in_full else min(told, default=if_none)


def _rounded(number: Reported, to: int) -> Reported:
    half = 0.5 * 10.0**-to
    return Reported(number.value, number.value - half, number.value + half)


def with_lost_zeros(columns: Columns) -> Columns:
    """Return `columns` with the intervals of whole numbers that may have lost their trailing zeros."""
    rows = [row for row, one in enumerate(columns.found) if any(map(_is_whole, _figures(one.record)))]
    if not rows:
        return columns
    value, p, estimate = _copied(columns.test.value), _copied(columns.test.p), columns.estimate
    ends = tuple(map(_copied, (estimate.value, estimate.standard_error, estimate.low, estimate.high)))
    for row in rows:
        record = columns.found[row].record
        _widen_test(value, p, row, record)
        if record.estimate is not None:
            _widen_estimate(ends, columns, row, record.estimate)
    return replace(
        columns,
        test=replace(columns.test, value=value, p=p),
        estimate=replace(estimate, value=ends[0], standard_error=ends[1], low=ends[2], high=ends[3]),
    )


def _is_whole(number: Reported | None) -> bool:
    return number is not None and number.text is None and number.value.is_integer()


def _figures(record: Record) -> tuple[Reported | None, ...]:
    own = () if record.test is None else (record.test.value, record.test.p)
    return own if record.estimate is None else (*own, *_of_estimate(record.estimate))


def _of_estimate(estimate: Estimate) -> tuple[Reported | None, ...]:
    interval = estimate.interval
    limits = (None, None) if interval is None else (interval.low, interval.high)
    return estimate.value, estimate.standard_error, *limits


def _copied(numbers: Interval) -> Interval:
    return Interval(numbers.value, numbers.low.copy(), numbers.high.copy())


def _widen_test(value: Interval, p: Interval, row: int, record: Record) -> None:
    """Widen a whole statistic like the figures beside it, and a p of 1 that was rounded up to it."""
    to = _places_beside([number for number in _figures(record) if number is not None], _USUAL_PLACES)
    if to is None or record.test is None:
        return
    if record.test.value is not None and _is_whole(record.test.value):
        rounded = _rounded(record.test.value, min(to, _USUAL_PLACES))
        value.low[row], value.high[row] = rounded.low, rounded.high
    if _is_whole(record.test.p) and p.value[row] == 1:
        p.low[row] = 1 - 0.5 * 10.0**-_PLACES_OF_P


def _widen_estimate(ends: Sequence[Interval], columns: Columns, row: int, estimate: Estimate) -> None:
    """Widen whole figures of the estimate, on the scale and from the value of no effect that the columns have."""
    null, log_scale = float(columns.estimate.null[row]), bool(columns.estimate.log_scale[row])
    figures = _of_estimate(estimate)
    if _places_beside([number for number in figures if number is not None]) is None:
        return
    located = [number for place, number in enumerate(figures) if number is not None and place != _ERROR]
    # An error is often given in more places; what stands alone beside it may have had one.
    to = _places_beside(located, 1 if len(located) == 1 and not _is_whole(estimate.standard_error) else 0)
    for place, (interval, number) in enumerate(zip(ends, figures, strict=True)):
        if number is None or to is None or not _is_whole(number):
            continue
        rounded = _rounded(number, to)
        low, high = rounded.low, rounded.high
        if place == _ERROR:
            low = max(low, 0.0)
        elif log_scale:
            low, high = (float(np.log(max(end, 0.0)) - np.log(null)) for end in (low, high))
        else:
            low, high = low - null, high - null
        interval.low[row], interval.high[row] = low, high
