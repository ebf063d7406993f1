"""Who made a record or a plan say what a permission rests on."""

from __future__ import annotations

import functools
from collections.abc import Collection, Sequence
from pathlib import Path

from gatecheck import git
from gatecheck.fetching import contents_advice, history_advice
from gatecheck.history.records import Recorded, versions_with_aliases
from gatecheck.history.walk import Commit, History, history_of
from gatecheck.model.found import Found
from gatecheck.model.struct import struct
from gatecheck.plans.order import Line

_NO_REPOSITORY = "judge it in the git repository that holds its history"


@struct
class Changer:
    """Who changed something, as the commit says; without a name and an e-mail, `unknown` says why."""

    name: str = ""
    email: str = ""
    unknown: str = ""


class Authors:
    """Answers for the records of one tree; their history is read once, where it is first asked for.

    Parameters
    ----------
    root
        The judged folder.
    ids
        The records that will be asked for.
    """

    def __init__(self, root: Path, ids: Collection[str]) -> None:
        self._root = root
        self._ids = frozenset(ids)

    def of(self, one: Found, reads: tuple[str, ...]) -> tuple[Changer, ...]:
        """Return the authors of the commits that brought a record to its present permission digest.

        Commits that leave it as it is are passed over: these are the last ones before which the record did not
        have it; several, where branches that were merged both brought it. A name is free text to git, and no
        evidence. `reads` are the fields of that digest beside the numbers.

        Raises
        ------
        CannotJudge
            Git fails.
        """
        unknown = self._not_committed(one.at.path) or self._not_here()
        if unknown:
            return (Changer(unknown=unknown),)
        history, recorded = self._history, self._recorded
        digest = one.permission_digest(reads)
        names = recorded.lineage((one.record.id, *one.record.aliases))
        alike = {
            (each.index, each.path)
            for each in recorded.versions(names)
            if each.found.permission_digest(reads) == digest
        }
        held = _held(history, alike, {each.path for each in recorded.versions(names)}, recorded)
        if not held[-1]:
            return (Changer(unknown="the last commit does not hold it as it is here"),)
        return tuple(self._author(history, each) for each in _first_with(history, held))

    def of_file(self, path: str) -> tuple[Changer, ...]:
        """Return the authors of all versions of the file at `path`, under its earlier names too.

        Raises
        ------
        CannotJudge
            Git fails.
        """
        unknown = self._not_committed(path)
        if unknown:
            return (Changer(unknown=unknown),)
        made = Line(self._history).versions_of(path)
        commits = [self._history.commits[each.index] for each in made if each.blob is not None]
        return tuple(self._author(self._history, each) for each in commits)

    def _not_committed(self, path: str) -> str:
        if git.toplevel(self._root) is None:
            return _NO_REPOSITORY
        pathspec = f":(literal){path}"
        asked = ("status", "--porcelain", "-z", "--no-renames", "--untracked-files=all", "--", pathspec)
        if git.is_unborn(self._root) or git.checked(self._root, "status", *git.run(self._root, *asked)):
            return "commit it"
        return ""

    def _not_here(self) -> str:
        if not self._recorded.missing:
            return ""
        clone, advice = contents_advice(self._root)
        return f"an earlier file is not in {clone}; {advice}"

    @functools.cached_property
    def _history(self) -> History:
        return history_of(self._root, first_parent=False)

    @functools.cached_property
    def _recorded(self) -> Recorded:
        return versions_with_aliases(self._root, self._history, self._ids, ("**",), ())

    def _author(self, history: History, commit: Commit) -> Changer:
        if commit.id in history.cut_at:
            return Changer(unknown=f"the history of this clone is cut; {history_advice(self._root)}")
        if not commit.author_name and not commit.author_email:
            return Changer(unknown=f"commit {commit.id[:12]} names no author")
        return Changer(commit.author_name, commit.author_email)


def _held(
    history: History, alike: Collection[tuple[int, str]], paths: Collection[str], recorded: Recorded
) -> Sequence[bool]:
    """Whether after each commit a file holds the record as it is now; `alike` are the changes that put it so.

    What cannot be read is no change: whoever mends a broken file has not brought the numbers in it.
    """
    broken = {(gap.commit.id, gap.path) for gap in recorded.gaps}
    where: dict[str, frozenset[str]] = {}
    for index, commit in enumerate(history.commits):
        before = where.get(commit.parents[0], frozenset()) if commit.parents else frozenset()
        written = {each.path for each in commit.changes if each.path in paths} - {
            path for name, path in broken if name == commit.id
        }
        where[commit.id] = (before - written) | {path for path in written if (index, path) in alike}
    return [bool(where[commit.id]) for commit in history.commits]


def _first_with(history: History, held: Sequence[bool]) -> tuple[Commit, ...]:
    """The commits that hold it and none of whose parents does, back from the last commit; in their order."""
    index_of = {commit.id: index for index, commit in enumerate(history.commits)}
    waiting, seen, first = [len(history.commits) - 1], set(), []
    while waiting:
        index = waiting.pop()
        if index in seen:
            continue
        seen.add(index)
        parents = [index_of[name] for name in history.commits[index].parents if name in index_of]
        before = [parent for parent in parents if held[parent]]
        waiting += before
        if not before:
            first.append(index)
    return tuple(history.commits[index] for index in sorted(first))
