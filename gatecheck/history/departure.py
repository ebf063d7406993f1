"""Where a pull request departs from its base, and which files it changes since then."""

from __future__ import annotations

import os
import posixpath
from collections.abc import Iterator, Mapping
from pathlib import Path, PurePosixPath
from typing import Literal

from gatecheck import git
from gatecheck.fetching import history_advice, is_shallow
from gatecheck.model.struct import struct

How = Literal["new", "changed", "removed"]

_HOW: Mapping[str, How] = {"A": "new", "D": "removed"}
_NO_SUCH_COMMIT = 1
_SHORT = 12


@struct
class Departure:
    """The commit since which a request's changes are told: the last one that it shares with its base.

    `base` is the commit of the base. `commit` is the same where the base has gained nothing since then, and where
    it is not known what the two share. `told` says which of the two it is where that is no matter of course.
    """

    base: str
    commit: str
    told: str = ""


@struct
class ChangedFiles:
    """The files of a work tree that differ from those of a commit.

    `how` has them by their paths from `top`, the top of the repository; `root` is the judged folder.
    """

    root: Path
    top: Path
    how: Mapping[str, How]

    def at(self, path: str) -> How | None:
        """How the file at `path`, from the judged folder or else from the top, changed; `None` where it did not.

        What leads to it is followed: a folder that is a link, or a submodule.
        """
        return next((self.how[place] for place in self._places(path) if place in self.how), None)

    def _places(self, path: str) -> Iterator[str]:
        if not self.how or "\0" in path:
            return
        top = os.path.realpath(self.top)
        for start in (os.path.realpath(self.root), top):
            named = posixpath.normpath(posixpath.join(start, path))
            for each in (named, os.path.realpath(named)):
                place = PurePosixPath(os.path.relpath(each, top))
                yield from map(str, (place, *place.parents))


def departure(root: Path, base: str) -> Departure:
    """Return where what is checked out at `root` departs from the revision `base`.

    Raises
    ------
    CannotJudge
        Git fails, or does not know the base.
    """
    tip = git.resolve(root, base)
    shared = None if git.is_unborn(root) else _shared(root, tip)
    if shared == tip:
        return Departure(tip, tip)
    if shared is not None:
        told = (
            f"The base has gone on since {shared[:_SHORT]}, from which this request departs: what the request "
            f"changes is told against that commit, and what is trusted is that of the base, {tip[:_SHORT]}."
        )
        return Departure(tip, shared, told)
    why, mends = (
        ("is not in this shallow clone", f"; {history_advice(root)} to tell them apart")
        if is_shallow(root)
        else ("is not there, as the two share no commit", "")
    )
    told = (
        f"The commit from which this request departs {why}, so that its changes are told against the base, "
        f"{tip[:_SHORT]}, and what the base has gained meanwhile may appear as withdrawn{mends}."
    )
    return Departure(tip, tip, told)


def changed_files(root: Path, commit: str) -> ChangedFiles:
    """Return which files of the work tree around `root`, tracked or not ignored, differ from those of `commit`.

    Raises
    ------
    CannotJudge
        There is no repository, git fails, or it does not know the commit.
    """
    top = git.toplevel(root) or root
    how: dict[str, How] = dict(_differing(top, git.resolve(top, commit)))
    for entry in git.list_files(top):
        if entry.object_id is None:
            how[entry.path] = "changed" if entry.path in how else "new"
    return ChangedFiles(root, top, how)


def gained(root: Path, since: Departure) -> frozenset[str]:
    """Return the files, by their paths from `root`, that the base has added since a request departed from it.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    before, after = ({entry.path for entry in git.list_tree(root, commit)} for commit in (since.commit, since.base))
    return frozenset(after - before)


def _shared(root: Path, tip: str) -> str | None:
    """The last commit that the checked-out one shares with `tip`; `None` where none is known."""
    head = git.resolve(root, "HEAD")
    status, shared, error = git.run(root, "merge-base", head, tip)
    if status != _NO_SUCH_COMMIT:
        return git.checked(root, "merge-base", status, shared, error).decode().strip()
    # A shallow clone hides the parents of its last commit, whose raw text still names what it was merged into.
    raw = git.checked(root, "cat-file", *git.run(root, "cat-file", "commit", head)).partition(b"\n\n")[0]
    return tip if f"parent {tip}".encode() in raw.split(b"\n") else None


def _differing(top: Path, commit: str) -> Iterator[tuple[str, How]]:
    plain = ("-z", "--name-status", "--no-renames", "--no-ext-diff", "--no-textconv", "--ignore-submodules=dirty")
    told = git.checked(top, "diff", *git.run(top, "diff", *plain, commit, "--"))
    pieces = iter(os.fsdecode(told).split("\0")[:-1])
    for letter, path in zip(pieces, pieces, strict=True):
        yield path, _HOW.get(letter, "changed")
