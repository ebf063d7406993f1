"""What the account says beside its findings: which priors count, what is weighed apart, what a policy would do."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from gatecheck.figures import risk_at
from gatecheck.model.verdict import Judged, Standing
from gatecheck.pull_request import SinceBase, prior_of
from gatecheck.rules.rule import Table

_MOST_NAMED = 5
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


def notes_on_priors_changed(table: Table, since: SinceBase | None) -> tuple[str, ...]:
    """Name the records whose own prior the request changes, and what that would make of their risk."""
    notes = []
    for row, before in enumerate(() if since is None else since.before):
        proposed = prior_of(table.record(row))
        if before is None or proposed == prior_of(before):
            continue
        prior = float(table.applied[row].evidence.prior) if proposed is None else proposed
        judged, risk = f"{table.evidence.prior[row]:.4g}", risk_at(table, row, prior)
        notes.append(
            f"The prior of {table.record(row).id} is changed here; it is judged at {judged}, which is that of the "
            f"base, and at {prior:.4g} its false positive risk would be {risk}."
        )
    return tuple(notes)


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
