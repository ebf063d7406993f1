"""What a verdict tells, one entry for each problem and each finding that is not met, worst first.

The formats for machines are made of these: all show the same entries, and cut the same ones where room is short.
"""

from __future__ import annotations

import hashlib
import json
from collections import Counter
from collections.abc import Iterable, Sequence
from typing import Literal

from gatecheck.model.struct import struct
from gatecheck.model.verdict import Finding, Judged, Place, Problem, Verdict
from gatecheck.render import order, words

State = Literal["short", "undecided", "unchanged", "waived", "stands"]
Kind = Literal["problem", "short", "undecided", "unchanged", "noted", "waived"]

#: Worst first. What is `unchanged` is short or undecided, but does not count now.
STATES: tuple[State, ...] = ("short", "undecided", "unchanged", "waived", "stands")
KINDS: tuple[Kind, ...] = ("problem", "short", "undecided", "unchanged", "noted", "waived")
#: What the formats that know nothing but rules call the one that a problem falls short of.
READABLE = "readable"

LONGEST_TEXT = 2000
_BEHIND: dict[Kind, str] = {
    "unchanged": " It is unchanged, and does not count now.",
    "noted": " The policy only notes it.",
}


@struct
class Entry:
    """One problem (`record` is empty and `rule` is `READABLE`) or one finding on a record."""

    kind: Kind
    at: Place
    also_at: tuple[Place, ...]
    record: str
    rule: str
    said: str

    @property
    def text(self) -> str:
        """What is said, behind the record that it is said of."""
        return self.said if self.kind == "problem" else f"{self.record}: {self.said}"


def entries(verdict: Verdict) -> list[Entry]:
    """Return all entries, worst first, then by place, id and rule."""
    found = [_of_problem(one) for one in order.problems_by_place(verdict.problems)]
    for one in order.by_place(verdict.judged):
        found += [_of_finding(one, kind, finding) for kind, finding in told_of(one)]
    return sorted(found, key=lambda entry: KINDS.index(entry.kind))


def worst_first(judged: Iterable[Judged]) -> list[Judged]:
    """Return the records by their state, the worst first, then by place and id."""
    return sorted(order.by_place(judged), key=lambda one: STATES.index(state_of(one)))


def state_of(one: Judged) -> State:
    """Return the state of a record: its standing, and whether that counts now."""
    if order.is_blocked(one):
        return _blocked_state(one, undecided=one.standing == "undecided")
    return "waived" if one.standing == "waived" else "stands"


def told_of(one: Judged) -> list[tuple[Kind, Finding]]:
    """Return the findings on a record that are not met, worst first."""
    told: list[tuple[Kind, Finding]] = [
        (_blocked_state(one, undecided=finding.outcome == "undecided"), finding)
        for finding in order.blocking_findings(one)
    ]
    told += [("noted", finding) for finding in order.noted_findings(one) if finding.outcome != "met"]
    return told + [("waived", finding) for finding in order.waived_findings(one)]


def said_of(kind: Kind, finding: Finding) -> str:
    """Return what is said of a finding: its rule, its message, what would mend it, and why it does not count."""
    return words.with_remedy(words.found(finding), finding.remedy) + _BEHIND.get(kind, "")


def said_of_problem(problem: Problem) -> str:
    """Return what a problem is, and what to do."""
    whole = "The whole tree: " if problem.at.is_whole_tree else ""
    return f"{whole}Could not be read or judged: {words.problem(problem)}"


def identities(found: Sequence[Entry]) -> list[str]:
    """Return a name for each entry, 64 hexadecimal digits, that is the same on every run.

    It rests on the id of the record and the rule, and for a problem on its file and what is said: neither on a
    line, nor on the numbers. Entries that are the same in these are told apart by counting.
    """
    seen: Counter[str] = Counter()
    names = []
    for entry in found:
        parts = [entry.at.path, entry.said] if entry.kind == "problem" else [entry.record, entry.rule]
        key = json.dumps([entry.kind == "problem", *parts])
        seen[key] += 1
        names.append(hashlib.sha256(f"{seen[key]} {key}".encode("ascii")).hexdigest())
    return names


def left_out(number: int, one: str, many: str | None = None) -> str:
    """Return how many were left out, where there was no room for all."""
    return f"Left out for length: {words.count(number, one, many)}. The JSON verdict holds them all."


def _blocked_state(one: Judged, *, undecided: bool) -> Literal["short", "undecided", "unchanged"]:
    if not one.counts_now:
        return "unchanged"
    return "undecided" if undecided else "short"


def _of_problem(problem: Problem) -> Entry:
    return Entry("problem", problem.at, (), "", READABLE, said_of_problem(problem))


def _of_finding(one: Judged, kind: Kind, finding: Finding) -> Entry:
    also_at = tuple(sorted(one.also_at, key=order.place_key))
    return Entry(kind, one.at, also_at, one.id, finding.rule, said_of(kind, finding))
