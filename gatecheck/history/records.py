"""Every value that a record ever had: its versions, read from the objects of all commits by one process of git."""

from __future__ import annotations

import functools
import posixpath
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace
from pathlib import Path

from gatecheck import git
from gatecheck.globs import matches
from gatecheck.history.walk import Commit, History
from gatecheck.model.found import Found
from gatecheck.model.record import Record
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Place, Problem
from gatecheck.scan import LONGEST_PARSED
from gatecheck.scan.candidates import looks_declared, may_declare, may_hold
from gatecheck.scan.documents import judged
from gatecheck.scan.readers import READERS, suffix_of
from gatecheck.scan.readers.document import Document
from gatecheck.scan.twins import position
from gatecheck.scan.unread import as_text

#: The path of a plan, in its shortest form, and the hypothesis in it that a record names.
Hypothesis = tuple[str, str | None]


def hypothesis_of(record: Record) -> Hypothesis | None:
    """Return the hypothesis that a record says it answers; `None` where it names no plan."""
    return None if record.plan is None else (posixpath.normpath(record.plan.file), record.plan.hypothesis)


@struct
class Version:
    """A record as one commit leaves it, or with `commit` `None` as the judged tree holds it.

    `index` is the place of the commit in the history; that of the tree comes behind all of them. `path` is the
    path as git knows it.
    """

    index: int
    commit: Commit | None
    found: Found
    path: str

    @property
    def record(self) -> Record:
        """The record as it was."""
        return self.found.record

    @property
    def place(self) -> Place:
        """Where it stood."""
        return self.found.at

    @property
    def digest(self) -> str:
        """The SHA-256 digest of its canonical JSON."""
        return self.found.digest


@struct
class Gap:
    """A text in the history that declares a record and cannot be read: the commit, the path, and what is wrong."""

    commit: Commit
    path: str
    message: str
    content: bytes


@struct
class Recorded:
    """The versions of each record by its id, oldest first, and what of the history could not be read.

    `missing` counts the contents that this clone does not have, as a partial one does not.
    """

    by_id: Mapping[str, tuple[Version, ...]]
    gaps: tuple[Gap, ...]
    missing: int

    def lineage(self, names: Iterable[str]) -> frozenset[str]:
        """Return the ids `names` and all earlier ones, by the aliases of the newest version under each."""
        known: set[str] = set()
        waiting = list(names)
        while waiting:
            name = waiting.pop()
            if name not in known:
                known.add(name)
                waiting.extend(alias for one in self.by_id.get(name, ())[-1:] for alias in one.record.aliases)
        return frozenset(known)

    def versions(self, ids: frozenset[str]) -> tuple[Version, ...]:
        """Return the versions under any of `ids`, oldest first."""
        found = (one for name in sorted(ids) for one in self.by_id.get(name, ()))
        return tuple(sorted(found, key=lambda one: one.index))


@dataclass(slots=True)
class _Reading:
    """What has been read so far."""

    ids: frozenset[str] | None
    hypotheses: frozenset[Hypothesis]
    found: list[Version] = field(default_factory=list)
    gaps: list[Gap] = field(default_factory=list)
    missing: int = 0

    def wants(self, record: Record) -> bool:
        """Whether that record was asked for."""
        return self.ids is None or record.id in self.ids or hypothesis_of(record) in self.hypotheses


def versions_with_aliases(
    root: Path,
    history: History,
    ids: frozenset[str],
    include: Sequence[str],
    exclude: Sequence[str],
    *,
    hypotheses: frozenset[Hypothesis] = frozenset(),
) -> Recorded:
    """Return the versions of the records `ids` and of those that answer `hypotheses`, and of their earlier ids.

    See `record_versions`.
    """
    while True:
        recorded = record_versions(root, history, ids, include, exclude, hypotheses=hypotheses)
        all_of_them = recorded.lineage(ids | recorded.by_id.keys())
        if all_of_them == ids:
            return recorded
        ids = all_of_them


def record_versions(
    root: Path,
    history: History,
    ids: frozenset[str] | None = None,
    include: Sequence[str] = ("**",),
    exclude: Sequence[str] = (),
    *,
    hypotheses: frozenset[Hypothesis] = frozenset(),
) -> Recorded:
    """Return what the records `ids`, or all that there ever were, held after each commit that changed them.

    Those that answer one of `hypotheses` are among them, whatever their id. A file is read if a reader knows its
    suffix and the globs name its path. A text that cannot be read is told as a gap, where it may hold one of the
    records.

    Raises
    ------
    CannotJudge
        Git ends before it has answered.
    """
    uses = _uses(history, include, exclude)
    reading = _Reading(ids, hypotheses)
    holds = _may_hold(ids, hypotheses)
    contents = git.read_blobs(root, [blob for blob, _ in uses], LONGEST_PARSED)
    for ((_, suffix), at), blob in zip(uses.items(), contents, strict=True):
        if blob.size is None:
            reading.missing += 1
        elif blob.content is None:
            index, path = at[0]
            reading.gaps.append(Gap(history.commits[index], as_text(path), "the file is too long", b""))
        elif holds(blob.content) and may_declare(blob.content):
            _read(reading, history, suffix, blob.content, at)
    reading.found.sort(key=lambda one: (one.index, position(one.place)))
    by_id: dict[str, list[Version]] = {}
    for version in reading.found:
        by_id.setdefault(version.record.id, []).append(version)
    return Recorded({name: tuple(each) for name, each in by_id.items()}, tuple(reading.gaps), reading.missing)


def _may_hold(ids: frozenset[str] | None, hypotheses: frozenset[Hypothesis]) -> Callable[[bytes], bool]:
    """The test whether a content may hold one of the records asked for; it may err on that side alone."""
    holds_id = may_hold(ids)
    if not hypotheses:
        return holds_id
    # However a plan is named, the last part of its path stands there.
    holds_plan = may_hold({posixpath.basename(file) for file, _ in hypotheses})
    holds_name = may_hold({name or "" for _, name in hypotheses})
    return lambda content: holds_id(content) or (holds_plan(content) and holds_name(content))


_Uses = dict[tuple[str, str], list[tuple[int, str]]]


def _uses(history: History, include: Sequence[str], exclude: Sequence[str]) -> _Uses:
    """The commits and paths that put each content in place, by its id and the suffix that it is read by."""

    @functools.cache
    def suffix_if_wanted(path: str) -> str | None:
        suffix = suffix_of(path)
        wanted = suffix in READERS and matches(include, path) and not matches(exclude, path)
        return suffix if wanted else None

    uses: _Uses = {}
    for index, commit in enumerate(history.commits):
        for change in commit.changes:
            suffix = suffix_if_wanted(change.path)
            if suffix is not None and change.after is not None:
                uses.setdefault((change.after, suffix), []).append((index, change.path))
    return uses


def _read(reading: _Reading, history: History, suffix: str, content: bytes, at: list[tuple[int, str]]) -> None:
    index, path = at[0]
    told = as_text(path)
    for one in _outcomes(suffix, told, content):
        if isinstance(one, Found):
            if reading.wants(one.record):
                reading.found.append(Version(index, history.commits[index], one, path))
                reading.found.extend(_version_elsewhere(history, one, *use) for use in at[1:])
        elif looks_declared(suffix, content):
            reading.gaps.append(Gap(history.commits[index], told, one.message, content))


def _outcomes(suffix: str, path: str, content: bytes) -> Iterator[Found | Problem]:
    for one in READERS[suffix](path, content):
        if isinstance(one, Document):
            yield from judged(one)
        else:
            yield one


def _version_elsewhere(history: History, found: Found, index: int, path: str) -> Version:
    here = replace(found, at=replace(found.at, path=as_text(path)))
    return Version(index, history.commits[index], here, path)
