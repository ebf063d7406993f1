"""What came first: the plan, or what it governs. Only the order of commits counts; their dates are free text."""

from __future__ import annotations

import functools
from collections.abc import Collection

from gatecheck.history.walk import History
from gatecheck.model.struct import struct


@struct
class Version:
    """One content of a file: the commit that made it, the path then, and the id of the content.

    `blob` is `None` where the commit took the file away.
    """

    index: int
    commit: str
    path: str
    blob: str | None


#: The index of a commit, and the path in it at which something was first.
First = tuple[int, str]


@struct
class Governed:
    """What a plan governs: the paths of data and of results, and where the result was first, in whatever file."""

    data: frozenset[str]
    results: frozenset[str]
    first: First | None = None

    @property
    def paths(self) -> frozenset[str]:
        """The paths of both."""
        return self.data | self.results


@struct
class Frozen:
    """The version of a plan that counts.

    `end` is the index of the first commit with something governed, or the number of commits where none has
    anything; `version` is the last one made before it, or where there was none, the first one made since.
    `before` says which, and `end` itself is not before.
    """

    end: int
    version: Version | None
    before: bool


class Line:
    """The commits of a base, with what became of its files; a file that was renamed as it was is the same file."""

    def __init__(self, history: History) -> None:
        self.history = history
        #: Every version of the file now at a path, oldest first, also those under its earlier names.
        self.versions_of = functools.cache(self._versions_of)
        self._taken_away = functools.cache(self._taken_away_in)

    def id_of(self, index: int) -> str:
        """Return the short id of a commit."""
        return self.history.commits[index].id[:12]

    def names_of(self, paths: Collection[str]) -> frozenset[str]:
        """Return `paths` and the earlier names of the files there."""
        return frozenset(paths) | {one.path for path in paths for one in self.versions_of(path)}

    def first_with(self, governed: Governed) -> int:
        """Return the index of the first commit with something governed, or the number of commits if none has."""
        by_path = self.history.first_with(self.names_of(governed.paths))
        known = [one for one in (by_path, governed.first and governed.first[0]) if one is not None]
        return min(known, default=len(self.history.commits))

    def has_any(self, paths: Collection[str]) -> bool:
        """Whether a commit has one of `paths`, by any of its names."""
        return self.history.first_with(self.names_of(paths)) is not None

    def first_of(self, governed: Governed, index: int) -> str:
        """Return which governed file, by any of its names, the commit with that index adds, for a message."""
        names = self.names_of(governed.paths)
        added = [one.path for name in names for one in self._under(name) if one.index == index and one.blob]
        if governed.first is not None and governed.first[0] == index:
            added.append(governed.first[1])
        return min(added)

    def frozen(self, path: str, governed: Governed) -> Frozen:
        """Return which version of the plan now at `path` counts for what it governs."""
        end, versions = self.first_with(governed), self.versions_of(path)
        stood = in_force(versions, end)
        if stood is not None:
            return Frozen(end, stood, before=True)
        since = (one for one in versions if one.index >= end and one.blob is not None)
        return Frozen(end, next(since, None), before=False)

    def _versions_of(self, path: str) -> tuple[Version, ...]:
        made = self._under(path)
        seen, name = {path}, self._renamed_from(made)
        while name is not None and name not in seen:
            seen.add(name)
            made = (*(one for one in self._under(name) if one.index < made[0].index), *made)
            name = self._renamed_from(made)
        return made

    def _under(self, path: str) -> tuple[Version, ...]:
        made = self.history.versions(path)
        return tuple(Version(index, self.history.commits[index].id, path, blob) for index, blob in made)

    def _renamed_from(self, made: tuple[Version, ...]) -> str | None:
        """Return the path from which the commit of the first version moved the file without a change."""
        return self._taken_away(made[0].index).get(made[0].blob or "") if made else None

    def _taken_away_in(self, index: int) -> dict[str, str]:
        """The paths that a commit takes away, by their contents; of several with the same, the first."""
        gone = [one for one in self.history.commits[index].changes if one.after is None]
        return {one.before: one.path for one in sorted(gone, key=lambda one: one.path, reverse=True) if one.before}


def in_force(versions: tuple[Version, ...], end: int) -> Version | None:
    """Return the version that stood before the commit with the index `end`; `None` where no file was there."""
    made = [one for one in versions if one.index < end]
    return made[-1] if made and made[-1].blob is not None else None
