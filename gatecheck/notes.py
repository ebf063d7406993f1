"""What the account says beside its findings: which priors count, what is weighed apart, what a policy would do."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence

from gatecheck.figures import risk_at
from gatecheck.model.promise import PlanInTree, Promise
from gatecheck.model.verdict import Judged, Standing
from gatecheck.pull_request import SinceBase, prior_of
from gatecheck.rules.rule import Table

_MOST_NAMED = 5
_SHORT = 12
_DOES: Mapping[Standing | None, str] = {
    None: "not judged",
    "stands": "stands",
    "falls-short": "falls short",
    "waived": "is waived",
    "undecided": "is undecided",
}
_WOULD: Mapping[Standing | None, str] = {
    None: "would not be judged",
    "stands": "would stand",
    "falls-short": "would fall short",
    "waived": "would be waived",
    "undecided": "would be undecided",
}


def note_on_proposed(judged: Sequence[Judged], other: Sequence[Judged]) -> str:
    """What the policy that a request proposes would say (`other`), where it differs from that of the base."""
    here, there = _standings(judged), _standings(other)
    differing = [
        f"{name} {_WOULD[there.get(name)]} ({_DOES[here.get(name)]} under the base)"
        for name in dict.fromkeys((*here, *there))
        if here.get(name) != there.get(name)
    ]
    told = _named(differing, "; ") if differing else "every record would be judged alike"
    return f"Under the policy proposed here: {told}."


def _standings(judged: Sequence[Judged]) -> dict[str, Standing]:
    return {one.id: one.standing for one in judged}


def notes_on_priors_changed(table: Table, since: SinceBase) -> tuple[str, ...]:
    """Name the records whose own prior is not that of the base, and what that would make of their risk."""
    notes = []
    for row, trusted in enumerate(since.trusted):
        record, before = table.record(row), since.before[row]
        proposed = prior_of(record)
        if trusted is None or proposed == prior_of(trusted):
            continue
        prior = float(table.applied[row].evidence.prior) if proposed is None else proposed
        named = record.id if record.id == trusted.id else f"{record.id} (at the base {trusted.id})"
        by_base = before is not None and proposed == prior_of(before)
        where = "at the base since this request departed" if by_base else "here"
        notes.append(f"The prior of {named} is changed {where}; {_at_both(table, row, prior)}.")
    return tuple(notes)


def notes_on_priors_of_plans(table: Table, proposed: Sequence[float | None]) -> tuple[str, ...]:
    """Name the records whose plan has a prior that the request adds or changes; `None` in the other rows."""
    columns = table.columns
    return tuple(
        f"The prior that the plan of {table.record(row).id} sets is new or changed here; "
        f"{_at_both(table, row, prior)}."
        for row, prior in enumerate(proposed)
        if prior is not None
        and (columns.prior_from_plan[row] or math.isnan(columns.own_prior[row]))
        and prior != table.evidence.prior[row]
    )


def _at_both(table: Table, row: int, prior: float) -> str:
    return (
        f"it is judged at {table.evidence.prior[row]:.4g}, which is that of the base, and at {prior:.4g} its false "
        f"positive risk would be {risk_at(table, row, prior)}"
    )


def notes_on_plans(
    promises: Sequence[Promise | None],
    plans: Sequence[PlanInTree],
    how: Callable[[str], str | None],
    base: str,
) -> tuple[str, ...]:
    """Name the plans that the request adds beside results, changes or removes, and the version of them that counts.

    `how` tells how the request changes the file of that path; `base` is the commit of its base.
    """
    frozen: dict[str, set[str]] = {one.path: set() for one in plans}
    for one in promises:
        if one is not None:
            frozen.setdefault(one.file, set()).update([one.frozen_at] if one.frozen_at else [])
    named = {one.file for one in promises if one is not None}
    notes = []
    for path in sorted(frozen):
        what = how(path)
        if what is not None and what != "new":
            commits = " and ".join(each[:_SHORT] for each in sorted(frozen[path])) or base[:_SHORT]
            notes.append(f"The plan {path} is {what} here; what counts is the plan of the base, as of {commits}.")
        elif what == "new" and path in named:
            notes.append(f"The plan {path} is new here, beside results that name it: the base does not have it.")
    return tuple(notes)


def notes_on_moved(moved: Mapping[str, str]) -> tuple[str, ...]:
    """Name the claims, by id, that count although their records did not change, and what changed instead."""
    if not moved:
        return ()
    told = [f"{name} ({what})" for name, what in moved.items()]
    return (f"Counted although the record is unchanged, since what it rests on is not: {_named(told)}.",)


def notes_on_priors(table: Table) -> tuple[str, ...]:
    """Name the claims that are helped by a prior above the policy's, of their own or of their plan."""
    by_record, by_plan = [], []
    for row, one in enumerate(table.columns.found):
        policy = table.applied[row].evidence.prior
        if not table.columns.claims[row]:
            continue
        if table.columns.prior_from_plan[row] and table.columns.own_prior[row] > policy:
            by_plan.append(one.record.id)
        elif _own_prior(table, row) > policy:
            by_record.append(one.record.id)
    said = {"the record itself sets": by_record, "its plan sets": by_plan}
    return tuple(
        f"Weighed at a prior that {who} above the policy's: {_named(ids)}." for who, ids in said.items() if ids
    )


def _own_prior(table: Table, row: int) -> float:
    """The greatest prior that the record itself sets, for one result or a whole screen; 0 where it sets none."""
    screen = table.record(row).screen
    of_screen = 0.0 if screen is None or screen.prior is None else screen.prior
    own = 0.0 if table.columns.prior_from_plan[row] else float(table.columns.own_prior[row])
    return max(of_screen, own) if own > 0 else of_screen


def notes_on_apart(table: Table) -> tuple[str, ...]:
    """Name the claims whose hypothesis other records answer too, without being weighed together with them."""
    apart: dict[str, list[str]] = {}
    for row, why in enumerate(table.evidence.together.apart):
        if why and table.columns.claims[row]:
            apart.setdefault(why, []).append(table.record(row).id)
    return tuple(
        f"Not weighed together with the other records of its hypothesis, since {why}: {_named(ids)}."
        for why, ids in apart.items()
    )


def _named(ids: Sequence[str], between: str = ", ") -> str:
    more = f" and {len(ids) - _MOST_NAMED} more" if len(ids) > _MOST_NAMED else ""
    return f"{between.join(ids[:_MOST_NAMED])}{more}"
