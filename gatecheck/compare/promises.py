"""A record against its promise: where they differ, which differences are disclosed, and what is not reported.

A disclosed difference is an amendment where it was decided before the data, is flagged where it was decided before
the results, and costs the claim its confirmatory status where it was decided after them; one that is not disclosed
is undeclared (on how departures are disclosed, with the time of each: Willroth and Atherton, doi
10.1177/25152459231213802). A deviation that states other values than the plan and the record discloses nothing; see
`gatecheck/compare/promised_deviations.py`. Which fields are compared, and what a silent plan or record means,
stands in `gatecheck/compare/promised_fields.py`.
"""

from __future__ import annotations

import posixpath
from collections.abc import Collection, Sequence
from typing import Literal

from gatecheck.compare.names import same_words, shown
from gatecheck.compare.promised_deviations import contradicts, covers, field_of
from gatecheck.compare.promised_fields import FIELDS, gaps
from gatecheck.compare.promised_gaps import Gap, Pair
from gatecheck.compare.promised_hypotheses import promises_something
from gatecheck.model.plan import Hypothesis
from gatecheck.model.promise import PlanInTree, Promise
from gatecheck.model.record import Deviation, Known, Record, Role
from gatecheck.model.struct import struct

Standing = Literal["undeclared", "amendment", "flagged", "after-results"]

_STANDINGS: dict[Known, Standing] = {
    "before-data": "amendment",
    "before-results": "flagged",
    "after-results": "after-results",
}
_LATEST_LAST: tuple[Known, ...] = ("before-data", "before-results", "after-results")


@struct
class Difference:
    """One field in which a record is not as promised.

    `told` says in a clause what was done and what was promised, with the figure that the promise gives where there
    is one, and what a deviation says against it. `disclosed` is the deviation that discloses it, the one decided
    latest where several do.
    """

    field: str
    planned: str
    done: str
    told: str
    disclosed: Deviation | None
    standing: Standing


@struct
class NotReported:
    """The hypotheses of a plan, of the roles asked for, that no record answers; `promised` counts all of them."""

    plan: PlanInTree
    promised: int
    missing: tuple[Hypothesis, ...]


def differences(record: Record, promise: Promise) -> tuple[Difference, ...]:
    """Return every field in which `record` is not as promised; none where nothing was promised."""
    plan, hypothesis = promise.plan, promise.hypothesis
    if plan is None or hypothesis is None or not promises_something(hypothesis):
        return ()
    return tuple(_difference(gap, record.deviations) for gap in gaps(Pair(record, plan, hypothesis)))


def _difference(gap: Gap, deviations: Sequence[Deviation]) -> Difference:
    covering = [each for each in deviations if covers(each, gap.field)]
    disclosing = [each for each in covering if not contradicts(each, gap)]
    disclosed = max(disclosing, key=lambda each: _LATEST_LAST.index(each.known), default=None)
    standing: Standing = "undeclared" if disclosed is None else _STANDINGS[disclosed.known]
    told = gap.told if disclosed is not None or not covering else f"{gap.told}, while {_otherwise(covering[0])}"
    return Difference(gap.field, gap.planned, gap.done, told, disclosed, standing)


def _otherwise(deviation: Deviation) -> str:
    planned, done = shown(deviation.planned), shown(deviation.done)
    return f"its deviation says that {planned} was planned and {done} was done"


def unused_deviations(record: Record, found: Sequence[Difference]) -> tuple[Deviation, ...]:
    """Return the deviations that name a field which is compared and in which nothing differs."""
    return tuple(
        each
        for each in record.deviations
        if field_of(each) in FIELDS and not any(covers(each, one.field) for one in found)
    )


def missing_hypotheses(
    records: Sequence[Record], plans: Sequence[PlanInTree], roles: Collection[Role]
) -> tuple[NotReported, ...]:
    """Return for each plan which of its hypotheses of these roles no record answers.

    A record answers the hypothesis that it names, or the only one of the plan that it names, whatever it found and
    whether or not it claims anything, unless it tells another variable than the one promised and discloses no such
    change. A hypothesis that was deferred and not filled is not missed.
    """
    return tuple(_not_reported(records, plan, roles) for plan in plans)


def _not_reported(records: Sequence[Record], plan: PlanInTree, roles: Collection[Role]) -> NotReported:
    asked = [each for each in plan.plan.hypotheses if each.role in roles and promises_something(each)]
    named = [one for one in records if one.plan is not None and _path(one.plan.file) == _path(plan.path)]
    alone = len(plan.plan.hypotheses) == 1
    missing = (each for each in asked if not any(_answers(record, each, alone=alone) for record in named))
    return NotReported(plan, len(asked), tuple(missing))


def _path(path: str) -> str:
    return posixpath.normpath(path)


def _answers(record: Record, hypothesis: Hypothesis, *, alone: bool) -> bool:
    """Whether a record of that plan answers the hypothesis; one that is `alone` in its plan needs no name."""
    asked = record.plan.hypothesis if record.plan is not None else None
    if asked != hypothesis.id and not (alone and asked is None):
        return False
    planned, done = hypothesis.outcome, record.outcome
    if planned is None or done is None or same_words(planned.variable, done.variable):
        return True
    gap = Gap("outcome.variable", planned.variable, done.variable, "")
    return any(covers(each, gap.field) and not contradicts(each, gap) for each in record.deviations)
