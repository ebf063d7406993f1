"""An interim look against the boundary that was planned for it, and what unplanned looks really cost."""

from __future__ import annotations

import functools
from collections.abc import Sequence
from dataclasses import replace

from gatecheck.columns import Columns, Floats
from gatecheck.compare.looks_planned import LookPlan, look_plan
from gatecheck.model.looks_seen import LooksSeen
from gatecheck.model.promise import Promise
from gatecheck.model.record import Look, Record
from gatecheck.model.struct import struct

_POCOCK = "pocock"
#: Beyond so many looks nothing is computed: no study that is planned has them.
_MOST_LOOKS = 200
_SAME_SHARE = 0.01


@struct
class LookFacts:
    """What stands behind one look.

    `number` is the look that the record tells or the history shows, whichever is more, and `taken` the number of
    looks at the least. `limit` is the nominal p of the planned boundary at this look, nan where none was planned or
    it cannot be told. `real_error` is the type I error of as many looks without a boundary, `pocock` the nominal p
    that a Pocock boundary over them would have had; nan where looks were planned with a boundary. They hold for
    `information`, that at each look in any unit, empty where it is not told and equal steps are taken for it. Where
    looks stand too close for `exact` figures, the error is at least, and the nominal p at most, what is given.
    """

    plan: LookPlan
    number: int
    taken: int
    limit: float = float("nan")
    real_error: float = float("nan")
    pocock: float = float("nan")
    information: tuple[float, ...] = ()
    exact: bool = True

    @property
    def planned(self) -> bool:
        """Whether the look is to be judged by a boundary, were it only known which."""
        plan = self.plan
        if plan.planned is None and plan.settled == "not known":
            return True
        within = plan.planned is not None and self.number <= plan.planned
        return within and plan.boundary is not None and plan.settled != "late"


def look_facts(
    columns: Columns,
    alpha: Floats | Sequence[float],
    seen: Sequence[LooksSeen | None] = (),
    promises: Sequence[Promise | None] = (),
) -> tuple[LookFacts | None, ...]:
    """The facts of each row at level `alpha`, `None` where there is one look alone.

    `seen` gives what the history shows of each row, and `promises` what stands behind the plan that it names;
    nothing where it was not looked at.
    """
    shown, promised = seen or (None,) * len(columns.found), promises or (None,) * len(columns.found)
    facts: list[LookFacts | None] = []
    for row, (one, history, promise) in enumerate(zip(columns.found, shown, promised, strict=True)):
        several = is_one_of_several(one.record.look, history, promise)
        sides = int(2 - columns.test.one_sided[row])
        plan = look_plan(one.record, history, promise) if several else None
        facts.append(None if plan is None else _facts(one.record, history, plan, (float(alpha[row]), sides)))
    return tuple(facts)


def number_of(look: Look | None, seen: LooksSeen | None) -> int:
    """Return which look this is: as the record tells or as the history shows, whichever is more."""
    return max(1 if look is None else look.number, 0 if seen is None else len(seen.looks))


def is_one_of_several(look: Look | None, seen: LooksSeen | None, promise: Promise | None = None) -> bool:
    """Whether more looks than this one were planned, or taken."""
    hypothesis = None if promise is None else promise.hypothesis
    promised = 1 if hypothesis is None or hypothesis.looks is None else hypothesis.looks.planned
    return number_of(look, seen) > 1 or max(1 if look is None else look.planned or 1, promised) > 1


def equal_steps(looks: int) -> tuple[float, ...]:
    """Return the information at so many looks that are equally spaced."""
    return tuple(float(each) for each in range(1, looks + 1))


def _facts(record: Record, seen: LooksSeen | None, plan: LookPlan, level: tuple[float, int]) -> LookFacts:
    look, number = record.look or Look(1), number_of(record.look, seen)
    if record.look is None and number == 1:
        return LookFacts(_without_number(plan), number, number)
    taken = max(number, look.planned or 1)
    facts = LookFacts(plan, number, taken)
    if taken > _MOST_LOOKS:
        return facts
    if facts.planned:
        return replace(facts, limit=_limit(look, number, plan, level))
    given = _information(look, seen, taken)
    information, exact = _apart(given or equal_steps(taken))
    pocock = float(_nominal(_POCOCK, information, *level)[-1])
    error = real_error(information, *level)
    return replace(facts, real_error=error, pocock=pocock, information=given, exact=exact)


def _without_number(plan: LookPlan) -> LookPlan:
    """A plan of several looks, for a record that does not tell which of them it is."""
    why = f"The record does not tell at which of the {plan.planned} looks that were planned it was taken."
    return replace(plan, settled="not known", why=why, advice="give look.number")


def _information(look: Look, seen: LooksSeen | None, taken: int) -> tuple[float, ...]:
    """The information at each look, as the history shows or the record tells; empty where neither does."""
    if seen is not None and len(seen.looks) == taken:
        return seen.information
    return look.schedule if len(look.schedule) == taken else ()


def _limit(look: Look, number: int, plan: LookPlan, level: tuple[float, int]) -> float:
    planned = plan.planned or 0
    if planned > _MOST_LOOKS or plan.boundary is None:
        return float("nan")
    schedule = look.schedule or tuple(each / planned for each in range(1, planned + 1))
    if len(schedule) != planned or not _on_schedule(look, schedule):
        return float("nan")
    return float(_nominal(plan.boundary, schedule, *level)[number - 1])


def _on_schedule(look: Look, schedule: Sequence[float]) -> bool:
    """Whether the information at this look is what the schedule says, where both are given."""
    share = schedule[look.number - 1] / schedule[-1]
    return look.information is None or abs(look.information - share) < _SAME_SHARE


@functools.cache
def _nominal(kind: str, information: tuple[float, ...], alpha: float, sides: int) -> Floats:
    from gatecheck.weigh import spending  # noqa: PLC0415  # most trees hold no interim look

    shape = spending.BoundaryKind[kind.upper().replace("-", "_")]
    return spending.nominal_p(spending.boundary(shape, information, alpha, sides=sides), sides=sides)


def _apart(information: tuple[float, ...]) -> tuple[tuple[float, ...], bool]:
    """The looks that stand far enough apart to be computed, and whether these are all."""
    from gatecheck.weigh.looks import apart  # noqa: PLC0415  # most trees hold no interim look

    kept = tuple(apart(information).tolist())
    return kept, len(kept) == len(information)


@functools.cache
def real_error(information: tuple[float, ...], alpha: float, sides: int = 2) -> float:
    """Return the type I error of looks at this information, each at level `alpha`; nan beyond 200 of them.

    `information` rises, in any unit; of looks that stand too close to be computed one alone counts, and the error
    is then at least what is given.
    """
    if len(information) > _MOST_LOOKS:
        return float("nan")
    from gatecheck.weigh.looks import error_of_looks_taken  # noqa: PLC0415  # most trees hold no interim look

    return error_of_looks_taken(_apart(information)[0], alpha, sides=sides)
