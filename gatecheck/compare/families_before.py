"""The families of the base in a tree: which records have left one, and what became of it.

A family of which every member is still in the tree, and all in one other family, goes on under that name: it was
renamed, and nobody has left it.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Mapping, Sequence

from gatecheck.model.changes import FamilyBefore
from gatecheck.model.found import Found
from gatecheck.model.record import Procedure, Record
from gatecheck.model.struct import struct

#: Procedures each of which rejects all that those after it reject, whatever the p-values.
_MILDEST_FIRST: tuple[Procedure, ...] = (
    "none", "benjamini-hochberg", "hommel", "hochberg", "holm", "bonferroni",
)  # fmt: skip


@struct
class Before:
    """What a family of the tree was at the base: of which size, by which procedures, and with which members.

    Members that are not in it any more stand by their ids there: those `gone` are in the tree no more, those that
    `left` are in another family or in none.
    """

    size: int | None
    procedures: tuple[Procedure, ...]
    gone: tuple[str, ...]
    left: tuple[str, ...]


@struct
class FamiliesSinceBase:
    """What became of the families of the base.

    `left` holds, row by row, the name of the family that the record has left, else `None`. `before` holds by the
    name that a family has now what it was; more than one where several go on under it.
    """

    left: tuple[str | None, ...]
    before: Mapping[str, tuple[Before, ...]]


def families_since_base(found: Sequence[Found], families: Mapping[str, FamilyBefore]) -> FamiliesSinceBase:
    """Compare the families of a tree with those of its base, which are given by name."""
    lost_from = {name: family for family, before in families.items() for name in before.lost}
    former = [_former_family(one.record, lost_from) for one in found]
    movers: dict[str, list[Record]] = defaultdict(list)
    for one, family in zip(found, former, strict=True):
        if family is not None:
            movers[family].append(one.record)
    here = {family_name(one.record) for one in found}
    renamed = {
        family: name
        for family, before in families.items()
        if family not in here and (name := _new_name(before, movers[family])) is not None
    }
    now: dict[str, list[Before]] = defaultdict(list)
    for family, before in families.items():
        now[renamed.get(family, family)].append(_before(before, movers[family], renamed=family in renamed))
    left = (None if family in renamed else family for family in former)
    return FamiliesSinceBase(tuple(left), {name: tuple(each) for name, each in now.items()})


def loosened(before: Procedure, now: Procedure) -> bool:
    """Whether a family may reject more by the procedure `now` than by the one `before`."""
    if before in {now, "none"}:
        return False
    if before not in _MILDEST_FIRST or now not in _MILDEST_FIRST:
        return True
    return _MILDEST_FIRST.index(now) < _MILDEST_FIRST.index(before)


def family_name(record: Record) -> str | None:
    """Return the name of the family that a record is in, `None` where it is in none."""
    return None if record.family is None else record.family.name


def _former_family(record: Record, lost_from: Mapping[str, str]) -> str | None:
    """The family of the base that a record was in and is not in any more."""
    former = next((lost_from[name] for name in _names(record) if name in lost_from), None)
    return None if former == family_name(record) else former


def _names(record: Record) -> tuple[str, ...]:
    return (record.id, *record.aliases)


def _new_name(before: FamilyBefore, movers: Sequence[Record]) -> str | None:
    """The one family in which all members are now, `None` where there is none such."""
    present = {name for record in movers for name in _names(record)}
    names = {family_name(record) for record in movers}
    return names.pop() if len(names) == 1 and present.issuperset(before.lost) else None


def _before(before: FamilyBefore, movers: Sequence[Record], *, renamed: bool) -> Before:
    if renamed:
        return Before(before.size, before.procedures, (), ())
    present = {name for record in movers for name in _names(record)}
    gone = tuple(name for name in before.lost if name not in present)
    return Before(before.size, before.procedures, gone, tuple(name for name in before.lost if name in present))
