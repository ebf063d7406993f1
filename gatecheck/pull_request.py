"""The records of a pull request against those of its base: claimed anew, otherwise, more strongly or no more.

A record is the same one where its id is, or where it names the earlier id among its aliases.
"""

from __future__ import annotations

from collections import Counter, defaultdict
from collections.abc import Callable, Iterable, Mapping, Sequence

from gatecheck.model.changes import FamilyBefore
from gatecheck.model.found import Found
from gatecheck.model.record import Record
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Change, ChangeKind
from gatecheck.rules.words import describe_result

_STATUSES = ("descriptive", "exploratory", "confirmatory")
_ROLES = ("other", "secondary", "primary")
_WEAK_AIMS = {"estimation"}
#: The fields of a member on which the adjusted p of the others rests, and those of a record on which rests what is
#: weighed together with it.
_IN_FAMILY = ("family", "test")
_TOGETHER = (
    "test", "estimate", "sample", "alternative", "status", "aim", "look", "population", "plan", "replicates",
    "aliases", "provenance",
)  # fmt: skip
Pair = tuple[Found, Found | None]


@struct
class Base:
    """What a request is set against.

    `departed` are the records where it departs from its base, against which its changes are told; `tip` those of
    the base as it is now, whose word is trusted. `has_changed` tells whether the file of that path, from the judged
    folder or else the top of the repository, is another in the tree.
    """

    departed: Sequence[Found]
    tip: Sequence[Found]
    has_changed: Callable[[str], bool]


@struct
class SinceBase:
    """A tree against its base.

    `changes` are those of claims, sorted by kind and id; `unchanged` the ids of records whose documents are the
    same, and `moved` tells, by the id of such a claim, what it rests on and what is another. Row by row, `before`
    holds the record where the request departs, and `trusted` the one whose prior counts. `families` are those
    before by name, and `base` the records before.
    """

    changes: tuple[Change, ...]
    unchanged: frozenset[str]
    moved: Mapping[str, str]
    before: tuple[Record | None, ...]
    trusted: tuple[Record | None, ...]
    families: Mapping[str, FamilyBefore]
    base: tuple[Found, ...]


def since_base(found: Sequence[Found], base: Base) -> SinceBase:
    """Compare the records of a tree with those of its base."""
    by_name = {one.record.id: one for one in base.departed}
    pairs = [(one, _earlier(one.record, by_name)) for one in found]
    kept = {earlier.record.id for _, earlier in pairs if earlier is not None}
    gone = [one for one in base.departed if one.record.id not in kept]
    changes = [_change(one, earlier) for one, earlier in pairs]
    changes += [_gone(one) for one in gone if one.record.claim]
    families = _families(base.departed, {id(was): one for one, was in pairs if was is not None})
    told = (each for each in changes if each is not None)
    return SinceBase(
        changes=tuple(sorted(told, key=lambda each: (each.kind, each.id))),
        unchanged=frozenset(one.record.id for one, was in pairs if _is_same(one, was)),
        moved=_moved(pairs, gone, families, base.has_changed),
        before=tuple(None if earlier is None else earlier.record for _, earlier in pairs),
        trusted=_trusted(pairs, gone, base.tip),
        families=families,
        base=tuple(base.departed),
    )


def _is_same(one: Found, was: Found | None) -> bool:
    return was is not None and was.digest == one.digest


def _trusted(pairs: Sequence[Pair], gone: Sequence[Found], tip: Sequence[Found]) -> tuple[Record | None, ...]:
    """Of each row the record whose prior counts: that of the base, be it that the request gave it another id."""
    at_tip = {one.record.id: one for one in tip}
    renamed = _renamed(pairs, gone)
    rows = (_earlier(one.record, at_tip) or was or renamed.get(one.record.id) for one, was in pairs)
    return tuple(None if each is None else each.record for each in rows)


def _renamed(pairs: Sequence[Pair], gone: Sequence[Found]) -> dict[str, Found]:
    """For new records, by id, one that is gone and has the same result, or was all that stood in the same file."""
    by_result = {describe_result(one.record): one for one in gone if one.record.test is not None}
    now = Counter(one.at.path for one, _ in pairs)
    before = Counter(one.at.path for one in (*gone, *(was for _, was in pairs if was is not None)))
    by_path = {one.at.path: one for one in gone if now[one.at.path] == before[one.at.path] == 1}
    earlier = {
        one.record.id: by_result.get(describe_result(one.record)) or by_path.get(one.at.path)
        for one, was in pairs
        if was is None
    }
    return {name: was for name, was in earlier.items() if was is not None}


def _moved(
    pairs: Sequence[Pair],
    gone: Sequence[Found],
    families: Mapping[str, FamilyBefore],
    has_changed: Callable[[str], bool],
) -> dict[str, str]:
    """By the ids of unchanged claims, what each rests on that is another now: a file, a family, another record."""
    changed = [one.record.family for one, was in pairs if _differ(one, was, _IN_FAMILY)]
    in_family = {name for name, family in families.items() if family.lost}
    in_family |= {family.name for family in changed if family is not None}
    others = _other_records(pairs, gone)
    moved = {}
    for one, was in pairs:
        record = one.record
        if record.claim is None or not _is_same(one, was):
            continue
        told = [path for path in _files_of(record) if has_changed(path)]
        if record.family is not None and record.family.name in in_family:
            told.append(f"the family {record.family.name}")
        told += others.get(record.id, [])
        if told:
            moved[record.id] = told[0]
    return moved


def _files_of(record: Record) -> Iterable[str]:
    """The files that a record names as what it was made from, and as its plan."""
    if record.provenance is not None:
        yield from (each.path for each in record.provenance.inputs)
        yield from [] if record.provenance.code is None else [record.provenance.code]
    yield from [] if record.plan is None else [record.plan.file]


def _differ(one: Found, was: Found | None, fields: Sequence[str]) -> bool:
    return was is None or any(one.document.get(name) != was.document.get(name) for name in fields)


def _other_records(pairs: Sequence[Pair], gone: Sequence[Found]) -> dict[str, list[str]]:
    """By id, the records that differ, are new or gone, and answer the same hypothesis or are those it compares."""
    changed = [one for one, was in pairs if _differ(one, was, _TOGETHER)]
    changed += gone
    group = _Groups()
    for found in (*(one for one, _ in pairs), *(was for _, was in pairs if was is not None), *gone):
        for name in _answers(found.record):
            group.join(("id", found.record.id), name)
    by_group: dict[Name, list[str]] = defaultdict(list)
    for one in changed:
        by_group[group.of(("id", one.record.id))].append(one.record.id)
    names = {name: one.record.id for one in changed for name in (one.record.id, *one.record.aliases)}
    return {
        one.record.id: [
            *by_group.get(group.of(("id", one.record.id)), []),
            *(names[each] for each in one.record.compares or () if each in names),
        ]
        for one, _ in pairs
    }


Name = tuple[str, ...]


class _Groups:
    """Names that stand for one thing, joined two by two."""

    def __init__(self) -> None:
        self._leads: dict[Name, Name] = {}

    def of(self, name: Name) -> Name:
        """The name that stands for the group of `name`."""
        while name in self._leads:
            name = self._leads[name]
        return name

    def join(self, first: Name, second: Name) -> None:
        """Make one group of those of `first` and `second`."""
        low, high = sorted((self.of(first), self.of(second)))
        if low != high:
            self._leads[high] = low


def _answers(record: Record) -> Iterable[Name]:
    """What the record is said to be about: earlier ids, the record that it repeats, the hypothesis of its plan."""
    yield from (("id", each) for each in record.aliases)
    if record.replicates is not None:
        yield ("id", record.replicates)
    if record.plan is not None and record.plan.hypothesis is not None:
        yield ("plan", record.plan.file, record.plan.hypothesis)


def _families(base: Sequence[Found], now: Mapping[int, Found]) -> dict[str, FamilyBefore]:
    """The families of the base; `now` has the record of the tree by the identity of that of the base."""
    members: dict[str, list[Found]] = defaultdict(list)
    for one in base:
        if one.record.family is not None:
            members[one.record.family.name].append(one)
    return {name: _family(name, those, now) for name, those in members.items()}


def _family(name: str, members: Sequence[Found], now: Mapping[int, Found]) -> FamilyBefore:
    declared = [one.record.family for one in members if one.record.family is not None]
    sizes = [family.size for family in declared if family.size is not None]
    lost = [one.record.id for one in members if not _in_family(now.get(id(one)), name)]
    procedures = tuple(sorted({family.procedure for family in declared}))
    return FamilyBefore(max(sizes, default=None), tuple(sorted(lost)), procedures)


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
