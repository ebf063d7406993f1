"""The records of a pull request against those of its base: claimed anew, otherwise, more strongly or no more.

A record is the same one where its id is, or where it names the earlier id among its aliases.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Mapping, Sequence

from gatecheck.model.changes import FamilyBefore
from gatecheck.model.found import Found
from gatecheck.model.record import Record
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Change, ChangeKind
from gatecheck.rules.words import describe_result

_STATUSES = ("descriptive", "exploratory", "confirmatory")
_ROLES = ("other", "secondary", "primary")
_WEAK_AIMS = {"estimation"}


@struct
class SinceBase:
    """A tree against its base.

    `changes` are those of claims, sorted by kind and id; `unchanged` the ids of records whose documents are the
    same; `before` holds, row by row, the record at the base; `families` those of the base by name, and `base` its
    records.
    """

    changes: tuple[Change, ...]
    unchanged: frozenset[str]
    before: tuple[Record | None, ...]
    families: Mapping[str, FamilyBefore]
    base: tuple[Found, ...]


def since_base(found: Sequence[Found], base: Sequence[Found]) -> SinceBase:
    """Compare the records of a tree with those of its base."""
    at_base = {one.record.id: one for one in base}
    pairs = [_earlier(one.record, at_base) for one in found]
    kept = {earlier.record.id for earlier in pairs if earlier is not None}
    gone = [one for one in base if one.record.id not in kept]
    changes = [_change(one, earlier) for one, earlier in zip(found, pairs, strict=True)]
    changes += [_gone(one) for one in gone if one.record.claim]
    return SinceBase(
        tuple(sorted((each for each in changes if each is not None), key=lambda each: (each.kind, each.id))),
        frozenset(
            one.record.id
            for one, earlier in zip(found, pairs, strict=True)
            if earlier is not None and earlier.digest == one.digest
        ),
        tuple(None if earlier is None else earlier.record for earlier in pairs),
        _families(base, {id(was): one for one, was in zip(found, pairs, strict=True) if was is not None}),
        tuple(base),
    )


def _families(base: Sequence[Found], now: Mapping[int, Found]) -> dict[str, FamilyBefore]:
    """The families of the base; `now` has the record of the tree by the identity of that of the base."""
    members: dict[str, list[Found]] = defaultdict(list)
    for one in base:
        if one.record.family is not None:
            members[one.record.family.name].append(one)
    return {name: _family(name, those, now) for name, those in members.items()}


def _family(name: str, members: Sequence[Found], now: Mapping[int, Found]) -> FamilyBefore:
    sizes = [one.record.family.size for one in members if one.record.family and one.record.family.size]
    lost = [one.record.id for one in members if not _in_family(now.get(id(one)), name)]
    return FamilyBefore(max(sizes, default=None), tuple(sorted(lost)))


def _in_family(one: Found | None, name: str) -> bool:
    return one is not None and one.record.family is not None and one.record.family.name == name


def _gone(one: Found) -> Change:
    return Change(one.record.id, "withdrawn", one.at, "The record is gone.")


def _earlier(record: Record, at_base: Mapping[str, Found]) -> Found | None:
    return next((at_base[name] for name in (record.id, *record.aliases) if name in at_base), None)


def _change(one: Found, earlier: Found | None) -> Change | None:
    record = one.record
    if earlier is None:
        return Change(record.id, "new", one.at, f"New: {describe_result(record)}.") if record.claim else None
    before = earlier.record
    if before.claim and not record.claim:
        return Change(record.id, "withdrawn", one.at, "The record no longer claims anything.")
    if not record.claim or one.digest == earlier.digest:
        return None
    stronger = _stronger(before, record)
    told = [*stronger, *_otherwise(before, record)] or ["what stands around its numbers changed"]
    sentence = "; ".join(told)
    kind: ChangeKind = "strengthened" if stronger else "changed"
    return Change(record.id, kind, one.at, f"{sentence[0].upper()}{sentence[1:]}.")


def _stronger(before: Record, record: Record) -> list[str]:
    """In what the record now claims more than before."""
    told = [] if before.claim else ["it claims what it only reported before"]
    if _STATUSES.index(record.status) > _STATUSES.index(before.status):
        told.append(f"{before.status} before, {record.status} now")
    if _ROLES.index(record.role) > _ROLES.index(before.role):
        told.append(f"its role was {before.role} and is {record.role}")
    if record.importance and not before.importance:
        told.append("it now says that the effect is large enough to matter")
    if before.design == "observational" and record.design != "observational":
        told.append(f"its design was observational and is {record.design or 'not told'}")
    if before.aim in _WEAK_AIMS and record.aim not in _WEAK_AIMS:
        told.append(f"its aim was {before.aim} and is {record.aim}")
    return told


def _otherwise(before: Record, record: Record) -> list[str]:
    """What else changed: the result, the prior, the words, the id."""
    told = []
    if describe_result(before) != describe_result(record):
        told.append(f"the result was {describe_result(before)} and is {describe_result(record)}")
    if prior_of(before) != prior_of(record):
        told.append(f"its own prior was {_prior(before)} and is {_prior(record)}")
    if before.claim and before.claim != record.claim:
        told.append("the claim is worded otherwise")
    if _family_of(before) != _family_of(record):
        told.append(f"its family was {_family_of(before)} and is {_family_of(record)}")
    if before.id != record.id:
        told.append(f"its id was {before.id}")
    return told


def _family_of(record: Record) -> str:
    if record.family is None:
        return "none"
    size = "" if record.family.size is None else f" of {record.family.size} tests"
    return f"{record.family.name}{size}, {record.family.procedure}"


def prior_of(record: Record) -> float | None:
    """The prior that the record sets itself."""
    return None if record.prior is None else record.prior.probability


def _prior(record: Record) -> str:
    prior = prior_of(record)
    return "not set" if prior is None else f"{prior:.4g}"
