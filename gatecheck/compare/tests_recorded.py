"""The tests that code calls against the records of a tree: which have no record, and how many stand behind a claim.

A test is recorded where its result goes to `declare`. The others are set against the records that name the file, by
`provenance.code` or as an output of the notebook, and that no declaration accounts for: each stands for one test.
First come records whose test has the same name, then those whose test is none that is known by another name. So a
test is missing only where no record is left that could be its own.
"""

from __future__ import annotations

import functools
import posixpath
from collections import Counter, defaultdict
from collections.abc import Callable, Iterable, Mapping, Sequence

from gatecheck.compare.names import same_test
from gatecheck.model.code import CalledTest, CodeFile, CodeRead
from gatecheck.model.found import Found
from gatecheck.model.record import Record
from gatecheck.model.struct import struct

#: Records by the thousand name the same few tests.
_same_names = functools.lru_cache(maxsize=10_000)(same_test)


@struct
class Missing:
    """A called test for which no record was found, and how often; 0 where it is not known whether it is made."""

    test: CalledTest
    times: int


@struct
class FileTests:
    """The tests of one file: how many it is known to make, and which have no record.

    With `more` it may make more; `missing` are known to be made, `unsure` are not.
    """

    code: CodeFile
    made: int
    more: bool
    missing: tuple[Missing, ...]
    unsure: tuple[Missing, ...]

    @property
    def without_record(self) -> int:
        """How many tests that are known to be made have no record."""
        return sum(each.times for each in self.missing)


@struct
class Behind:
    """How many tests stand behind one claim.

    `members` counts the records of its family, or the claim alone where it names none; `unrecorded` the tests of
    the files that made it for which no record was found. `declared` is the size of the family as the claim has it.
    """

    paths: tuple[str, ...]
    members: int
    unrecorded: int
    declared: int

    @property
    def tests(self) -> int:
        """The tests behind the claim, at least."""
        return self.members + self.unrecorded


def recorded_tests(found: Sequence[Found], code: CodeRead) -> tuple[FileTests, ...]:
    """Set the tests of each file against the records, in the order of the files."""
    of_file = _records_of_files(found, code.files)
    return tuple(_file_tests(each, of_file[each.path], code.names) for each in code.files)


def behind_claims(found: Sequence[Found], code: CodeRead) -> tuple[Behind | None, ...]:
    """How many tests stand behind each row; `None` where nothing is claimed or its code was not read."""
    of_file = {each.code.path: each for each in recorded_tests(found, code)}
    paths = _paths_of_records(found, list(of_file))
    members = Counter(one.record.family.name for one in found if one.record.family is not None)
    return tuple(
        _behind(one.record, members, [of_file[path] for path in paths[row]])
        if one.record.claim is not None and paths[row]
        else None
        for row, one in enumerate(found)
    )


def _behind(record: Record, families: Mapping[str, int], files: Sequence[FileTests]) -> Behind:
    family = record.family
    members = 1 if family is None else families[family.name]
    declared = members if family is None or family.size is None else family.size
    unrecorded = sum(each.without_record for each in files)
    return Behind(tuple(each.code.path for each in files), members, unrecorded, declared)


def _records_of_files(found: Sequence[Found], files: Sequence[CodeFile]) -> Mapping[str, list[Record]]:
    of_file: dict[str, list[Record]] = defaultdict(list)
    for one, paths in zip(found, _paths_of_records(found, [each.path for each in files]), strict=True):
        for path in paths:
            of_file[path].append(one.record)
    return of_file


def _paths_of_records(found: Sequence[Found], paths: Sequence[str]) -> list[list[str]]:
    """The files that each record names; a path that names none in full may name the end of one, or end in one.

    A folder may be judged that is not the top of its repository, and code may tell its path from its own folder.
    """
    by_name: dict[str, list[str]] = defaultdict(list)
    for path in paths:
        by_name[posixpath.basename(path)].append(path)
    whole = set(paths)
    return [sorted({path for named in _named(one) for path in _meant(named, whole, by_name)}) for one in found]


def _named(one: Found) -> Iterable[str]:
    provenance = one.record.provenance
    if provenance is not None and provenance.code is not None:
        yield posixpath.normpath(provenance.code.replace("\\", "/"))
    yield from (place.path for place in (one.at, *one.also_at))


def _meant(named: str, whole: set[str], by_name: Mapping[str, list[str]]) -> Iterable[str]:
    if named in whole:
        return (named,)
    alike = by_name.get(posixpath.basename(named), ())
    return (path for path in alike if path.endswith(f"/{named}") or named.endswith(f"/{path}"))


def _file_tests(code: CodeFile, records: Sequence[Record], names: frozenset[str]) -> FileTests:
    undeclared = [each for each in code.tests if not each.declared]
    left = [max(each.known, 1) for each in undeclared]
    if undeclared:
        waiting = _not_accounted_for(code.tests, records)
        _pair(undeclared, left, waiting, _same)
        _pair(undeclared, left, waiting, lambda test, record: _may_be(test, record, names))
    open_tests = [(test, count) for test, count in zip(undeclared, left, strict=True) if count]
    return FileTests(
        code,
        sum(each.known for each in code.tests),
        any(each.more for each in code.tests),
        tuple(Missing(test, count) for test, count in open_tests if test.known),
        tuple(Missing(test, 0) for test, _ in open_tests if not test.known),
    )


def _not_accounted_for(tests: Sequence[CalledTest], records: Sequence[Record]) -> list[Record]:
    """The records that are not those of declared tests: known by their ids, else as many as there are tests."""
    declared = [each for each in tests if each.declared]
    ids = {parts for each in declared for parts in each.ids}
    left = [record for record in records if not any(_has_texts(record.id, parts) for parts in ids)]
    without_id = [each for each in declared if not each.ids]
    counts = [each.known for each in without_id]
    _pair(without_id, counts, left, _same)
    _pair(without_id, counts, left, _may_be_any)
    return left


def _has_texts(identifier: str, parts: tuple[str, ...]) -> bool:
    """Whether an id is these texts with something between them."""
    first, *others = parts
    if not others:
        return identifier == first
    *between, last = others
    at = len(first)
    if not identifier.startswith(first) or not identifier.endswith(last):
        return False
    for text in between:
        at = identifier.find(text, at)
        if at < 0:
            return False
        at += len(text)
    return at <= len(identifier) - len(last)


def _pair(
    tests: Sequence[CalledTest],
    left: list[int],
    waiting: list[Record],
    fits: Callable[[CalledTest, Record], bool],
) -> None:
    """Give each test so many of the `waiting` records as there are `left` of it, and take these from both."""
    for record in list(waiting):
        at = next((at for at, test in enumerate(tests) if left[at] and fits(test, record)), None)
        if at is not None:
            left[at] -= 1
            waiting.remove(record)


def _same(test: CalledTest, record: Record) -> bool:
    name = None if record.test is None else record.test.name
    return None not in {name, test.test} and _same_names(name or "", test.test or "")


def _may_be_any(test: CalledTest, _: Record) -> bool:
    """Whether a call may make any test, as a fit may."""
    return test.test is None


def _may_be(test: CalledTest, record: Record, names: frozenset[str]) -> bool:
    """Whether a record names no test, or none that is known: it may then be that of any."""
    name = None if record.test is None else record.test.name
    return None in {name, test.test} or not any(_same_names(name or "", each) for each in names)
