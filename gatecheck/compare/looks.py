"""An interim look against the boundary that was planned for it, and what unplanned looks really cost."""

from __future__ import annotations

import functools
from collections.abc import Sequence

import numpy as np

from gatecheck.columns import Columns, Floats
from gatecheck.model.looks_seen import LooksSeen
from gatecheck.model.record import Look, Record
from gatecheck.model.struct import struct

_POCOCK = "pocock"
#: Beyond so many looks nothing is computed: no study that is planned has them.
_MOST_LOOKS = 200


@struct
class LookFacts:
    """What stands behind one look.

    `number` is the look that the record tells or the history shows, whichever is more, and `taken` the number of
    looks at the least. The boundary is `late` where the first look in the history did not tell it. `limit` is the
    nominal p of the planned boundary at this look, nan where none was planned or it cannot be told. `real_error`
    is the type I error of as many looks without a boundary, `pocock` the nominal p that a Pocock boundary over
    them would have had; nan where looks were planned with a boundary.
    """

    planned: bool
    late: bool
    number: int
    taken: int
    limit: float
    real_error: float
    pocock: float


def look_facts(
    columns: Columns, alpha: Floats, seen: Sequence[LooksSeen | None] = ()
) -> tuple[LookFacts | None, ...]:
    """The facts of each row at level `alpha`, `None` where there is one look alone.

    `seen` gives what the history shows of each row; nothing where it was not looked at.
    """
    shown = seen or (None,) * len(columns.found)
    facts: list[LookFacts | None] = []
    for row, (one, history) in enumerate(zip(columns.found, shown, strict=True)):
        several = is_one_of_several(one.record.look, history)
        sides = int(2 - columns.test.one_sided[row])
        facts.append(_facts(one.record, history, float(alpha[row]), sides) if several else None)
    return tuple(facts)


def number_of(look: Look | None, seen: LooksSeen | None) -> int:
    """Return which look this is: as the record tells or as the history shows, whichever is more."""
    return max(1 if look is None else look.number, 0 if seen is None else len(seen.looks))


def is_one_of_several(look: Look | None, seen: LooksSeen | None) -> bool:
    """Whether more looks than this one were planned, or taken."""
    return number_of(look, seen) > 1 or (look is not None and (look.planned or 1) > 1)


def _facts(record: Record, seen: LooksSeen | None, alpha: float, sides: int) -> LookFacts:
    look, number = record.look or Look(1), number_of(record.look, seen)
    taken = max(number, look.planned or 1)
    late = look.boundary is not None and _told_late(record, seen)
    planned = look.planned is not None and number <= look.planned and look.boundary is not None and not late
    if taken > _MOST_LOOKS:
        return LookFacts(planned, late, number, taken, np.nan, np.nan, np.nan)
    if planned and look.planned is not None:
        schedule = look.schedule or tuple(each / look.planned for each in range(1, look.planned + 1))
        limit = _limit(look, number, schedule, alpha, sides)
        return LookFacts(planned, late, number, taken, limit, np.nan, np.nan)
    even = tuple(float(each) for each in range(1, taken + 1))
    pocock = float(_nominal(_POCOCK, even, alpha, sides)[-1])
    return LookFacts(planned, late, number, taken, np.nan, real_error(taken, alpha), pocock)


def _told_late(record: Record, seen: LooksSeen | None) -> bool:
    """Whether an earlier look told no boundary or another one, and no registration is named that may tell it."""
    if record.plan is not None or seen is None:
        return False
    first = seen.looks[0].record.look if seen.looks else record.look
    now = record.look
    return first is None or (now is not None and (first.boundary, first.planned) != (now.boundary, now.planned))


def _limit(look: Look, number: int, schedule: Sequence[float], alpha: float, sides: int) -> float:
    if len(schedule) != look.planned or look.boundary is None or not _on_schedule(look, schedule):
        return float("nan")
    return float(_nominal(look.boundary, tuple(schedule), alpha, sides)[number - 1])


def _on_schedule(look: Look, schedule: Sequence[float]) -> bool:
    """Whether the information at this look is what the schedule says, where both are given."""
    share = schedule[look.number - 1] / schedule[-1]
    return look.information is None or abs(look.information - share) < _SAME_SHARE


_SAME_SHARE = 0.01


@functools.cache
def _nominal(kind: str, information: tuple[float, ...], alpha: float, sides: int) -> Floats:
    from gatecheck.weigh import spending  # noqa: PLC0415  # most trees hold no interim look

    shape = spending.BoundaryKind[kind.upper().replace("-", "_")]
    return spending.nominal_p(spending.boundary(shape, information, alpha, sides=sides), sides=sides)


@functools.cache
def real_error(looks: int, alpha: float) -> float:
    """Return the type I error of so many equally spaced looks at level `alpha`; nan beyond 200 of them."""
    if looks > _MOST_LOOKS:
        return float("nan")
    from gatecheck.weigh.looks import error_of_unplanned_looks  # noqa: PLC0415  # most trees hold no interim look

    return float(error_of_unplanned_looks(looks, alpha))
