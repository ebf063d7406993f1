"""An interim look against the boundary that was planned for it, and what unplanned looks really cost."""

from __future__ import annotations

import functools
from collections.abc import Sequence

import numpy as np

from gatecheck.columns import Columns, Floats
from gatecheck.model.record import Look
from gatecheck.model.struct import struct

_POCOCK = "pocock"
#: Beyond so many looks nothing is computed: no study that is planned has them.
_MOST_LOOKS = 200


@struct
class LookFacts:
    """What stands behind one look.

    `limit` is the nominal p of the planned boundary at this look, nan where none was planned or it cannot be told.
    `real_error` is the type I error of as many looks without a boundary, `pocock` the nominal p that a Pocock
    boundary over them would have had; nan where looks were planned with a boundary.
    """

    planned: bool
    limit: float
    real_error: float
    pocock: float


def look_facts(columns: Columns, alpha: Floats) -> tuple[LookFacts | None, ...]:
    """The facts of each row at level `alpha`, `None` where no look is recorded or the first is the only one."""
    looks = [one.record.look for one in columns.found]
    return tuple(
        None
        if look is None or is_single(look)
        else _facts(look, float(alpha[row]), int(2 - columns.test.one_sided[row]))
        for row, look in enumerate(looks)
    )


def is_single(look: Look) -> bool:
    """Whether the look is the only one that was planned and taken."""
    return look.number == 1 and (look.planned or 1) == 1


def _facts(look: Look, alpha: float, sides: int) -> LookFacts:
    planned = look.planned is not None and look.number <= look.planned and look.boundary is not None
    taken = max(look.number, look.planned or 1)
    if taken > _MOST_LOOKS:
        return LookFacts(planned, np.nan, np.nan, np.nan)
    if planned and look.planned is not None and look.boundary is not None:
        schedule = look.schedule or tuple(each / look.planned for each in range(1, look.planned + 1))
        return LookFacts(True, _limit(look, schedule, alpha, sides), np.nan, np.nan)
    even = tuple(float(each) for each in range(1, taken + 1))
    return LookFacts(False, np.nan, _real_error(taken, alpha), float(_nominal(_POCOCK, even, alpha, sides)[-1]))


def _limit(look: Look, schedule: Sequence[float], alpha: float, sides: int) -> float:
    if len(schedule) != look.planned or look.boundary is None or not _on_schedule(look, schedule):
        return float("nan")
    return float(_nominal(look.boundary, tuple(schedule), alpha, sides)[look.number - 1])


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
def _real_error(looks: int, alpha: float) -> float:
    from gatecheck.weigh.looks import error_of_unplanned_looks  # noqa: PLC0415  # most trees hold no interim look

    return float(error_of_unplanned_looks(looks, alpha))
