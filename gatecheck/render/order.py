"""Which parts of a verdict are shown, and in what order: the same in every format."""

from __future__ import annotations

from collections.abc import Iterable

from gatecheck.model.verdict import Change, Finding, Judged, Place, Problem, Verdict

_OUTCOMES = ("short", "undecided", "waived", "met", "does-not-apply")
_CHANGES = ("strengthened", "new", "changed", "withdrawn")
_WITHOUT = -1

PlaceKey = tuple[str, int, int, int]


def place_key(place: Place) -> PlaceKey:
    """Return what places sort by; a file comes before its own cells."""
    cell = _WITHOUT if place.cell is None else place.cell
    output = _WITHOUT if place.output is None else place.output
    return place.path, place.line, cell, output


def by_place(judged: Iterable[Judged]) -> list[Judged]:
    """Return the records by place, then id."""
    return sorted(judged, key=lambda one: (place_key(one.at), one.id, one.result, one.claim or ""))


def problems_by_place(problems: Iterable[Problem]) -> list[Problem]:
    """Return the problems by place, then text."""
    return sorted(problems, key=lambda one: (place_key(one.at), one.message, one.advice))


def changes(verdict: Verdict) -> list[Change]:
    """Return what changed in claims since the base: what claims more first, then by id."""
    return sorted(verdict.changes, key=lambda one: (_CHANGES.index(one.kind), one.id, place_key(one.at), one.told))


def by_rule(findings: Iterable[Finding]) -> list[Finding]:
    """Return the findings by rule."""
    return sorted(findings, key=lambda one: (one.rule, outcome_rank(one), one.message, one.remedy))


def outcome_rank(finding: Finding) -> int:
    """Return 0 for the worst outcome, and more for better ones."""
    return _OUTCOMES.index(finding.outcome)


def blocking_findings(one: Judged) -> list[Finding]:
    """Return the findings that keep the record from standing, worst first."""
    return sorted(by_rule(finding for finding in one.findings if finding.blocks), key=outcome_rank)


def noted_findings(one: Judged) -> list[Finding]:
    """Return what is told and has no effect, worst first.

    These are the findings that the policy only notes although they are short or undecided, and those that are met
    and say something all the same.
    """
    return sorted(by_rule(finding for finding in one.findings if _is_noted(finding)), key=outcome_rank)


def _is_noted(finding: Finding) -> bool:
    if finding.outcome == "met":
        return finding.message != ""
    return finding.enforce == "note" and finding.outcome in {"short", "undecided"}


def waived_findings(one: Judged) -> list[Finding]:
    """Return the findings that a waiver covers."""
    return by_rule(finding for finding in one.findings if finding.outcome == "waived")


def is_blocked(one: Judged) -> bool:
    """Whether the record falls short or is undecided."""
    return one.standing in {"falls-short", "undecided"}


def blocked(verdict: Verdict, *, counting: bool = True) -> list[Judged]:
    """Return the records, claimed or not, that are kept from standing: those that fall short come first."""
    held = (one for one in verdict.judged if is_blocked(one) and one.counts_now is counting)
    return sorted(by_place(held), key=lambda one: one.standing == "undecided")


def standing(verdict: Verdict) -> list[Judged]:
    """Return the claims that stand."""
    return by_place(one for one in verdict.claims if one.standing == "stands")


def with_waiver(verdict: Verdict) -> list[Judged]:
    """Return the records that pass by a waiver."""
    return by_place(one for one in verdict.judged if one.standing == "waived")


def others_standing(verdict: Verdict) -> list[Judged]:
    """Return the plans, lines of prose and files of code that block nothing."""
    return by_place(one for one in verdict.others if one.standing == "stands")


def without_claim(verdict: Verdict) -> list[Judged]:
    """Return the records that claim nothing and are not blocked or waived."""
    return by_place(one for one in verdict.reported if one.standing == "stands")
