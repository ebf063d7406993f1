"""Which looks were planned for a result, with which boundary, and whether that was settled before the first one.

A plan settles it where its frozen version came before the first look that the history shows, and a record where
its first look told the same as it tells now. Where the plan says nothing of looks, or came too late, what the first
look told stands; so it does where the record discloses a departure that was decided before the results.
"""

from __future__ import annotations

from dataclasses import replace
from typing import Literal

from gatecheck.compare.promises import differences
from gatecheck.model.looks_seen import LooksSeen
from gatecheck.model.promise import GRADES, Promise
from gatecheck.model.record import Boundary, Look, Record
from gatecheck.model.struct import struct

Settled = Literal["in time", "late", "not known"]

_LOOKS = {"looks", "looks.boundary"}
_DISCLOSED_IN_TIME = {"amendment", "flagged"}
_SHOW_EARLIER = (
    "name under plan the registration that sets the boundary, or judge a history in which the earlier looks were "
    "not squashed"
)


@struct
class LookPlan:
    """The number of looks planned and their boundary, `None` where nothing tells them.

    `by` says in a clause what sets the boundary. It is `settled` in time if that was before the first look; where
    this is not known, `why` says so in a sentence, and `advice` what would tell it. `late` says in a clause what
    is wrong with a boundary that was not settled in time.
    """

    planned: int | None
    boundary: Boundary | None
    by: str
    settled: Settled = "in time"
    late: str = ""
    why: str = ""
    advice: str = ""


def look_plan(record: Record, seen: LooksSeen | None, promise: Promise | None) -> LookPlan:
    """Return what was planned for the looks at `record`, by its promise or by what its first look told.

    `seen` is what the history shows, `None` where there is none, and `promise` what stands behind the plan that the
    record names, `None` where it names none.
    """
    own = _told(record, seen)
    if promise is None or (promise.hypothesis is None and promise.missing):
        return own
    if promise.hypothesis is None:
        return _not_known(LookPlan(None, None, own.by), f"What {promise.file} promised", promise)
    looks = promise.hypothesis.looks
    told_in_time = own.boundary is not None and own.settled == "in time"
    if looks is None or (told_in_time and _is_amended(record, promise)):
        return own
    plan = _promised(LookPlan(looks.planned, looks.boundary, f"{promise.file} sets"), promise, seen)
    if plan.settled != "in time" and told_in_time:
        return own
    if plan.boundary is None and told_in_time:
        return replace(plan, boundary=own.boundary, by=own.by)
    return plan


def _told(record: Record, seen: LooksSeen | None) -> LookPlan:
    """What the record tells, held against what its first look told."""
    look = record.look or Look(1)
    told = LookPlan(look.planned, look.boundary, "the record tells")
    if seen is None or told.boundary is None:
        return told
    first = seen.looks[0].record.look if seen.looks else look
    if first is None or (first.planned, first.boundary) != (look.planned, look.boundary):
        return replace(told, settled="late", late="with a boundary that its first look did not tell")
    if first.number > 1:
        why = (
            f"The first result that the history shows is by its own word from look {first.number}, so whether its "
            "boundary was planned before look 1 is not known."
        )
        return replace(told, settled="not known", why=why, advice=_SHOW_EARLIER)
    return replace(told, by="its first look told")


def _promised(plan: LookPlan, promise: Promise, seen: LooksSeen | None) -> LookPlan:
    """What a plan sets, held against the commits: it must not have come after the first look."""
    first = seen.looks[0].commit if seen is not None and seen.looks else None
    if seen is None or first is None:
        return plan  # nothing shows what came first, and the record's own word would do as well
    frozen, ancestry = promise.frozen_at, seen.ancestry
    if frozen is not None and ancestry is not None:
        if ancestry.leads_to(frozen, first):
            return plan
        if ancestry.stood_before(first, frozen):
            late = f"with a boundary that {promise.file} set only after the first look"
            return replace(plan, settled="late", late=late)
    if GRADES.index(promise.grade or promise.at_least) >= GRADES.index("repository-order"):
        return plan
    return _not_known(plan, f"Whether {promise.file} set its looks before the first one", promise)


def _not_known(plan: LookPlan, what: str, promise: Promise) -> LookPlan:
    because = f" ({promise.because.strip().removesuffix('.')})" if promise.because else ""
    advice = promise.advice or "judge a clone that holds the whole history"
    return replace(plan, settled="not known", why=f"{what} is not known{because}.", advice=advice)


def _is_amended(record: Record, promise: Promise) -> bool:
    """Whether all that differs in the looks is disclosed as decided before the results."""
    found = [each.standing for each in differences(record, promise) if each.field in _LOOKS]
    return bool(found) and _DISCLOSED_IN_TIME.issuperset(found)
