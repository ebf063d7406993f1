"""One comparison of figures that determine each other, and which figure is the odd one out among several."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence

import numpy as np

from gatecheck.columns import Booleans, Floats, Integers, Interval
from gatecheck.model.struct import struct


@struct
class Agreement:
    """One comparison of shape (n,): where it could be made, where the figures agree, and what would fit.

    `low` and `high` bound the figure that the others imply. `figures` are those compared, in words, and `harmless`
    the explanations that a reviewer should rule out. `borne_out` are the figures that are right where the
    comparison agrees; one that sees only gross faults bears none out.
    """

    name: str
    figures: tuple[str, ...]
    checked: Booleans
    agrees: Booleans
    low: Floats
    high: Floats
    harmless: tuple[str, ...] = ()
    borne_out: tuple[str, ...] = ()

    @property
    def disagrees(self) -> Booleans:
        """Where it was made and the figures do not fit together."""
        return self.checked & ~self.agrees


def odd_one_out(agreements: Sequence[Agreement], row: int) -> str | None:
    """The one figure whose change would make all others of a row agree; `None` where that cannot be told.

    It has a part in every disagreement, and every other figure that has is borne out by a comparison that agrees.
    """
    short = [set(each.figures) for each in agreements if each.disagrees[row]]
    agreeing = [each for each in agreements if each.borne_out and each.checked[row] and each.agrees[row]]
    borne_out = [each.borne_out for each in agreeing]
    suspects = set.intersection(*short).difference(*borne_out) if short and borne_out else set()
    return suspects.pop() if len(suspects) == 1 else None


def overlap(one: Interval, other: Interval) -> Booleans:
    """Where two intervals have a number in common."""
    fits: Booleans = (one.low <= other.high) & (other.low <= one.high)
    return fits


def minus(one: Interval, other: Interval) -> Interval:
    """The interval of the difference."""
    return Interval(one.value - other.value, one.low - other.high, one.high - other.low)


def in_size(numbers: Interval) -> Interval:
    """The interval of the absolute value."""
    low, high = np.abs(numbers.low), np.abs(numbers.high)
    crosses = (numbers.low <= 0) & (numbers.high >= 0)
    return Interval(np.abs(numbers.value), np.where(crosses, 0.0, np.minimum(low, high)), np.maximum(low, high))


def over_ends(function: Callable[..., Floats], *numbers: Interval) -> Interval:
    """A function that rises with each of its numbers, over the values and over the ends of their intervals."""
    return Interval(
        function(*(each.value for each in numbers)),
        function(*(each.low for each in numbers)),
        function(*(each.high for each in numbers)),
    )


def where(choose: Booleans, one: Interval, other: Interval | None = None) -> Interval:
    """One interval where `choose` holds, else the other; nan where there is none."""
    if other is None:
        return Interval(*(np.where(choose, end, np.nan) for end in (one.value, one.low, one.high)))
    pairs = ((one.value, other.value), (one.low, other.low), (one.high, other.high))
    return Interval(*(np.where(choose, a, b) for a, b in pairs))


def widened(numbers: Interval, share: Floats | float) -> Interval:
    """The interval with its ends, which are not negative, moved outwards by a share of each."""
    return Interval(numbers.value, numbers.low * (1 - share), numbers.high * (1 + share))


def on_rows(values: Floats, rows: Integers, of: int, rest: float = np.nan) -> Floats:
    """The values of some rows as a column of all `of` rows."""
    column = np.full(of, rest)
    column[rows] = values
    return column


def on_all(found: Agreement, rows: Integers, of: int) -> Agreement:
    """A comparison of some rows as one of all `of` rows."""
    checked, agrees = np.zeros(of, np.bool_), np.ones(of, np.bool_)
    checked[rows], agrees[rows] = found.checked, found.agrees
    ends = on_rows(found.low, rows, of), on_rows(found.high, rows, of)
    return Agreement(found.name, found.figures, checked, agrees, *ends, found.harmless, found.borne_out)


def with_rows(found: Agreement, rows: Sequence[int], other: Agreement | None, places: Sequence[int]) -> Agreement:
    """A comparison whose `rows` are those of another one at `places`; not made there where there is no other."""
    to, at = np.array(rows, np.intp), np.array(places, np.intp)
    checked, agrees, low, high = found.checked.copy(), found.agrees.copy(), found.low.copy(), found.high.copy()
    if other is None:
        checked[to] = False
    else:
        checked[to], agrees[to] = other.checked[at], other.agrees[at]
        low[to], high[to] = other.low[at], other.high[at]
    return Agreement(found.name, found.figures, checked, agrees, low, high, found.harmless, found.borne_out)


@struct
class Compared:
    """One comparison of one row: whether the figures agree, and what would fit."""

    agrees: bool
    low: float
    high: float


@struct
class Kind:
    """What all comparisons of one name have in common."""

    name: str
    figures: tuple[str, ...]
    harmless: tuple[str, ...] = ()
    borne_out: tuple[str, ...] = ()


def gathered(kind: Kind, found: Mapping[int, Compared], of: int) -> Agreement:
    """Comparisons of single rows as one of all `of` rows."""
    rows = np.array(list(found), np.intp)
    checked, agrees = np.zeros(of, np.bool_), np.ones(of, np.bool_)
    checked[rows] = True
    agrees[rows] = [each.agrees for each in found.values()]
    low = on_rows(np.array([each.low for each in found.values()]), rows, of)
    high = on_rows(np.array([each.high for each in found.values()]), rows, of)
    return Agreement(kind.name, kind.figures, checked, agrees, low, high, kind.harmless, kind.borne_out)
