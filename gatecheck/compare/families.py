"""The families of a tree: members, declared size and procedure, and p-values adjusted anew from all raw ones."""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Sequence
from typing import Literal

import numpy as np

from gatecheck.columns import Columns, Floats
from gatecheck.evidence import Evidence
from gatecheck.model.record import Family, Procedure
from gatecheck.model.struct import struct

#: The procedures that give each member a share of the alpha of its own.
BY_SHARES: frozenset[Procedure] = frozenset({"weighted-holm", "graphical"})
#: The procedures that reject all members up to one p-value.
_WITH_ONE_CUT: frozenset[Procedure] = frozenset({
    "none", "bonferroni", "holm", "hochberg", "hommel", "benjamini-hochberg", "benjamini-yekutieli",
})  # fmt: skip
#: A family that lacks more members than this is not adjusted; it is not whole, whatever its p-values.
_MOST_ABSENT = 1000
#: The time of a graph grows with the cube of its size: a second or so at this one.
LARGEST_GRAPH = 500
#: Shares are written in a few decimals: a third, three times, sums to 0.99 (common practice, no source).
_SLACK = 0.01
#: A share below this is none: no p-value that is reported lies below it.
_LEAST_SHARE = 1e-12
#: From so many members on, the standard error of the estimated share of true nulls is at most 0.1: it is at most
#: the root of n / 4 over n (1 - threshold). Where to start telling it is common practice, no source.
LEAST_FOR_TRUE_NULLS = 100
_THRESHOLD = 0.5
_LAST_DIGITS = 1e-12

Kind = Literal["too-large", "no-share", "empty-share", "sum", "no-member", "itself", "passes-too-much"]


@struct
class ShareFlaw:
    """Why the shares of a family do not make a procedure: the kind, and the member in which the flaw lies.

    `other` is what that member names in `passes_on`, and `total` what shares sum to, where the kind is about these.
    """

    kind: Kind
    member: str = ""
    other: str = ""
    total: float = math.nan


@struct
class TrueNulls:
    """How many members of a large family seem to have no effect.

    `share` is the estimated share of them (Storey 2002). `raw` holds the raw p of all members in rising order, and
    `adjusted` the adjusted ones in the same order, so also rising.
    """

    share: float
    raw: Floats
    adjusted: Floats

    def rejected(self, alpha: float) -> int:
        """The number of members rejected at level `alpha` of the family."""
        return int(np.searchsorted(self.adjusted, alpha, side="right"))

    def false_ones(self, alpha: float) -> float:
        """How many of those rejected are expected to be false: the true nulls up to the largest p rejected."""
        rejected = self.rejected(alpha)
        below = self.share * self.raw.size * float(self.raw[rejected - 1]) if rejected else 0.0
        return min(below, float(rejected))


@struct
class FamilyFacts:
    """A family as its members in the tree declare it, from the side of one member.

    `members` counts those in the tree; `sizes` and `procedures` hold what they declare, without repeats and in
    order. `adjusted` is the member's p adjusted anew, nan where a raw p, the order of a fixed sequence or a share
    is missing (`flaw` tells which share), or the members do not agree on size and procedure. A planned member that
    is not in the tree counts as one that showed nothing. `true_nulls` is there for a family large and whole.
    """

    members: int
    sizes: tuple[int, ...]
    procedures: tuple[Procedure, ...]
    adjusted: float
    flaw: ShareFlaw | None
    true_nulls: TrueNulls | None


@struct
class _Declared:
    """The members of one family in the tree: their ids, what each declares of the family, and raw p."""

    ids: Sequence[str]
    families: Sequence[Family]
    p: Floats

    @property
    def procedure(self) -> Procedure:
        return self.families[0].procedure

    @property
    def unknown(self) -> Floats:
        return np.full(len(self.ids), np.nan)


def family_facts(columns: Columns, evidence: Evidence) -> tuple[FamilyFacts | None, ...]:
    """The facts of each row, `None` where it belongs to no family."""
    facts: list[FamilyFacts | None] = [None] * len(columns.found)
    rows: dict[str, list[int]] = defaultdict(list)
    families = [one.record.family for one in columns.found]
    raw = _raw_p(columns, evidence)
    for row, family in enumerate(families):
        if family is not None:
            rows[family.name].append(row)
    for members in rows.values():
        declared = _Declared(
            [columns.found[row].record.id for row in members],
            [family for row in members if (family := families[row]) is not None],
            raw[members],
        )
        for row, fact in zip(members, _facts(declared), strict=True):
            facts[row] = fact
    return tuple(facts)


def _raw_p(columns: Columns, evidence: Evidence) -> Floats:
    """The raw p-values; as the record gives them, for a logarithm and back misses the last digit."""
    p, given = np.exp(evidence.statistics.log_p), columns.test.p.value
    return np.where(np.abs(p - given) <= _LAST_DIGITS * given, given, p)


def _facts(declared: _Declared) -> list[FamilyFacts]:
    members = len(declared.ids)
    sizes = tuple(sorted({family.size for family in declared.families if family.size is not None}))
    procedures = tuple(sorted({family.procedure for family in declared.families}))
    agreed = len(sizes) <= 1 and len(procedures) == 1
    absent = max(0, (sizes[0] if sizes else members) - members)
    flaw = _flaw(declared) if agreed and declared.procedure in BY_SHARES else None
    adjusted = _adjusted(declared, absent) if agreed and flaw is None else declared.unknown
    nulls = _true_nulls(declared, adjusted) if agreed and not absent else None
    return [FamilyFacts(members, sizes, procedures, float(each), flaw, nulls) for each in adjusted]


def _adjusted(declared: _Declared, absent: int) -> Floats:
    if declared.procedure in BY_SHARES:
        # The share of an absent member is not known.
        return declared.unknown if absent else _adjusted_by_shares(declared)
    return declared.unknown if absent > _MOST_ABSENT else _adjusted_alike(declared, absent)


def _adjusted_alike(declared: _Declared, absent: int) -> Floats:
    from gatecheck.weigh import families  # noqa: PLC0415  # most trees hold no family

    procedure = families.Procedure[declared.procedure.upper().replace("-", "_")]
    order = _order(declared.families, fixed=procedure == families.Procedure.FIXED_SEQUENCE)
    if order is None:
        return declared.unknown
    whole = np.concatenate([declared.p[order], np.ones(absent)])
    adjusted = declared.unknown
    adjusted[order] = families.adjusted_p(procedure, whole)[: len(order)]
    return adjusted


def _order(declared: Sequence[Family], *, fixed: bool) -> list[int] | None:
    """The order of testing; `None` where a fixed sequence does not give every member its own place."""
    rows = list(range(len(declared)))
    if not fixed:
        return rows
    positions = [family.position for family in declared]
    if None in positions or len(set(positions)) < len(positions):
        return None
    return sorted(rows, key=lambda row: positions[row] or 0)


def _adjusted_by_shares(declared: _Declared) -> Floats:
    shares = np.array([family.weight for family in declared.families], np.float64)
    if declared.procedure == "graphical":
        from gatecheck.weigh.graphs import graph_adjusted_p  # noqa: PLC0415  # most trees hold no graph

        links = _links(declared)
        links /= np.maximum(links.sum(axis=1, keepdims=True), 1.0)
        return graph_adjusted_p(declared.p, shares / max(float(shares.sum()), 1.0), links)
    from gatecheck.weigh.families import weighted_holm  # noqa: PLC0415  # most trees hold no family

    return weighted_holm(declared.p, shares)


def _links(declared: _Declared) -> Floats:
    """The parts that members pass on, of shape (n, n): from the member of the row to that of the column."""
    place = {name: row for row, name in enumerate(declared.ids)}
    links = np.zeros((len(place), len(place)))
    for row, family in enumerate(declared.families):
        for name, part in (family.passes_on or {}).items():
            links[row, place[name]] = part
    return links


def _flaw(declared: _Declared) -> ShareFlaw | None:
    """The first flaw of the shares, in the order of the members."""
    if declared.procedure == "weighted-holm":
        return _flaw_of_shares(declared, least=_LEAST_SHARE, least_sum=1 - _SLACK)
    if len(declared.ids) > LARGEST_GRAPH:
        return ShareFlaw("too-large")
    return _flaw_of_shares(declared, least=0.0, least_sum=0.0) or _flaw_of_links(declared)


def _flaw_of_shares(declared: _Declared, *, least: float, least_sum: float) -> ShareFlaw | None:
    total = 0.0
    for name, family in zip(declared.ids, declared.families, strict=True):
        if family.weight is None:
            return ShareFlaw("no-share", name)
        if family.weight < least:
            return ShareFlaw("empty-share", name)
        total += family.weight
    return None if least_sum <= total <= 1 + _SLACK else ShareFlaw("sum", total=total)


def _flaw_of_links(declared: _Declared) -> ShareFlaw | None:
    known = set(declared.ids)
    for name, family in zip(declared.ids, declared.families, strict=True):
        parts = family.passes_on or {}
        strangers = sorted(parts.keys() - known)
        if strangers:
            return ShareFlaw("no-member", name, strangers[0])
        if name in parts:
            return ShareFlaw("itself", name)
        if sum(parts.values()) > 1 + _SLACK:
            return ShareFlaw("passes-too-much", name, total=sum(parts.values()))
    return None


def _true_nulls(declared: _Declared, adjusted: Floats) -> TrueNulls | None:
    if len(declared.ids) < LEAST_FOR_TRUE_NULLS or declared.procedure not in _WITH_ONE_CUT:
        return None
    if not np.isfinite(adjusted).all():
        return None
    from gatecheck.weigh.families import share_of_true_nulls  # noqa: PLC0415  # few families are large

    order = np.argsort(declared.p, kind="stable")
    share = float(share_of_true_nulls(declared.p, _THRESHOLD))
    return TrueNulls(share, declared.p[order], adjusted[order])
