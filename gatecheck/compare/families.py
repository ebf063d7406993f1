"""The families of a tree: members, declared size and procedure, and p-values adjusted anew from all raw ones."""

from __future__ import annotations

from collections import defaultdict

import numpy as np

from gatecheck.columns import Columns, Floats
from gatecheck.evidence import Evidence
from gatecheck.model.record import Family
from gatecheck.model.struct import struct

#: A family that lacks more members than this is not adjusted; it is not whole, whatever its p-values.
_MOST_ABSENT = 1000


@struct
class FamilyFacts:
    """A family as its members in the tree declare it, from the side of one member.

    `members` counts those in the tree; `sizes` and `procedures` hold what they declare, without repeats and in
    order. `adjusted` is the member's p adjusted anew, nan where a raw p or the order of a fixed sequence is
    missing, or the members do not agree on size and procedure. A planned member that is not in the tree counts
    as one that showed nothing.
    """

    members: int
    sizes: tuple[int, ...]
    procedures: tuple[str, ...]
    adjusted: float


def family_facts(columns: Columns, evidence: Evidence) -> tuple[FamilyFacts | None, ...]:
    """The facts of each row, `None` where it belongs to no family."""
    facts: list[FamilyFacts | None] = [None] * len(columns.found)
    rows: dict[str, list[int]] = defaultdict(list)
    families = [one.record.family for one in columns.found]
    for row, family in enumerate(families):
        if family is not None:
            rows[family.name].append(row)
    for members in rows.values():
        declared = [family for row in members if (family := families[row]) is not None]
        for row, fact in zip(members, _facts(declared, evidence.statistics.log_p[members]), strict=True):
            facts[row] = fact
    return tuple(facts)


def _facts(declared: list[Family], log_p: Floats) -> list[FamilyFacts]:
    sizes = tuple(sorted({family.size for family in declared if family.size is not None}))
    procedures = tuple(sorted({family.procedure for family in declared}))
    agreed = len(sizes) <= 1 and len(procedures) == 1
    adjusted = _adjusted(declared, log_p, sizes) if agreed else np.full(len(declared), np.nan)
    return [FamilyFacts(len(declared), sizes, procedures, float(each)) for each in adjusted]


def _adjusted(declared: list[Family], log_p: Floats, sizes: tuple[int, ...]) -> Floats:
    from gatecheck.weigh import families  # noqa: PLC0415  # most trees hold no family

    procedure = families.Procedure[declared[0].procedure.upper().replace("-", "_")]
    order = _order(declared, fixed=procedure == families.Procedure.FIXED_SEQUENCE)
    if order is None:
        return np.full(len(declared), np.nan)
    absent = max(0, (sizes[0] if sizes else 0) - len(declared))
    if absent > _MOST_ABSENT:
        return np.full(len(declared), np.nan)
    whole = np.concatenate([np.exp(log_p[order]), np.ones(absent)])
    adjusted = np.empty(len(declared))
    adjusted[order] = families.adjusted_p(procedure, whole)[: len(declared)]
    return adjusted


def _order(declared: list[Family], *, fixed: bool) -> list[int] | None:
    """The order of testing; `None` where a fixed sequence does not give every member its own place."""
    rows = list(range(len(declared)))
    if not fixed:
        return rows
    positions = [family.position for family in declared]
    if None in positions or len(set(positions)) < len(positions):
        return None
    return sorted(rows, key=lambda row: positions[row] or 0)
