"""What a rule is: its needs, an outcome for all rows at once, and a message for one row."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import field
from typing import Any

import numpy as np

from gatecheck.columns import Booleans, Columns, Floats
from gatecheck.compare.own_numbers import Agreement
from gatecheck.evidence import Evidence
from gatecheck.model.changes import FamilyBefore
from gatecheck.model.promise import Promise
from gatecheck.model.record import Record
from gatecheck.model.struct import struct
from gatecheck.policy import Applied, RuleSettings


@struct
class Table:
    """All that rules see: columns, evidence, facts and what the policy asks of each row.

    Facts that a rule needs and that were not looked at are empty; else they stand row by row.
    """

    columns: Columns
    evidence: Evidence
    own_numbers: tuple[Agreement, ...]
    applied: tuple[Applied, ...]
    promises: tuple[Promise | None, ...] = ()
    looks_seen: tuple[Any, ...] = ()
    inputs: tuple[Any, ...] = ()
    tests_behind: tuple[Any, ...] = ()
    families_before: Mapping[str, FamilyBefore] = field(default_factory=dict)

    def record(self, row: int) -> Record:
        """The record of that row."""
        return self.columns.found[row].record


@struct
class Judgement:
    """A rule's outcome for all rows: where it falls short, and what was observed against which limit.

    `would_do` is the least number of units per group that would mend a row, for the rules that can tell it.
    Where `known` is false the row is undecided, and the rule explains why. Where `noted` is true, what the rule
    says of the row is told although it is met. `facts` is what the rule worked out for all rows and needs again to
    explain one.
    """

    short: Booleans
    observed: Floats | None = None
    limit: Floats | None = None
    would_do: Floats | None = None
    known: Booleans | None = None
    noted: Booleans | None = None
    facts: Any = None


@struct
class Said:
    """What is said of one row: what was found and is wanted, and what would mend it."""

    message: str
    remedy: str = ""


def every_row(table: Table, _: Sequence[Any]) -> Booleans:
    """A rule that concerns every result."""
    return np.ones(len(table.columns.found), np.bool_)


def every_claim(table: Table, _: Sequence[Any]) -> Booleans:
    """A rule that concerns claims alone."""
    return table.columns.claims


@struct
class Exemption:
    """Rows to which a rule does not apply, and why."""

    rows: Callable[[Table, Sequence[Any]], Booleans]
    because: str


@struct
class Need:
    """A column without which a rule cannot judge a row, and what is said where it is missing."""

    column: Callable[[Table], Floats]
    missing: Callable[[Table, int], Said]


@struct
class Rule:
    """One rule of a reporting policy.

    `settings` is the type of its settings; its functions get the settings of all rows, with `None` where the
    rule is off. It says nothing of a row that it does not `concern`. A permission to pass over it ends when the
    record's numbers change, or one of the fields that it `reads` besides.
    """

    name: str
    asks: str
    settings: type[RuleSettings]
    judge: Callable[[Table, Sequence[Any]], Judgement]
    explain: Callable[[Table, int, Any, Judgement], Said]
    needs: tuple[Need, ...] = ()
    exempt: tuple[Exemption, ...] = ()
    concerns: Callable[[Table, Sequence[Any]], Booleans] = every_row
    reads: tuple[str, ...] = ()


def rule_beyond_records(name: str, asks: str, settings: type[RuleSettings], judges: str) -> Rule:
    """Return the rule of that name, which `judges` something else than records: it concerns none of them."""

    def no_row(table: Table, _: Sequence[Any]) -> Booleans:
        return np.zeros(len(table.columns.found), np.bool_)

    return Rule(
        name=name,
        asks=asks,
        settings=settings,
        judge=lambda table, each: Judgement(no_row(table, each)),
        explain=lambda *_: Said(f"This rule judges {judges}: {asks}."),
        concerns=no_row,
    )


def setting(settings: Sequence[Any], name: str) -> Floats:
    """One number of the settings as a column; nan where the rule is off."""
    return np.array([np.nan if each is None else getattr(each, name) for each in settings], np.float64)
