"""The commits of a revision, oldest first, and which files each of them changed; from one process of git."""

from __future__ import annotations

import functools
from collections.abc import Collection, Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path

from gatecheck import git
from gatecheck.errors import CannotJudge
from gatecheck.model.looks_seen import Ancestry, day_of
from gatecheck.model.struct import struct

_FORMAT = "%H%x00%P%x00%ct%x00%an%x00%ae"
#: None of the settings of a repository or of its user may change what is told, and no program of theirs is run.
_PLAIN = (
    "-m",
    "-z",
    "--raw",
    "--root",
    "--no-abbrev",
    "--no-renames",
    "--no-color",
    "--no-ext-diff",
    "--no-textconv",
    "--no-show-signature",
    "--no-mailmap",
    "--ignore-submodules=none",
    "--encoding=UTF-8",
    "--topo-order",
    "--relative",
)
_FILE = "100"  # how the mode of one begins
_LONGEST_COMMIT = 1 << 24


@struct
class Change:
    """One file that a commit adds, changes or removes.

    `path` is relative to the judged folder. `before` and `after` are the full ids of its content, `None` where
    there is no file; a link and a submodule are no files.
    """

    path: str
    before: str | None
    after: str | None


@struct
class Commit:
    """One commit, and what it changes below the judged folder against its first parent.

    `time` is the committer's, in seconds since 1970; it and the author are free text to git, and no evidence.
    """

    id: str
    parents: tuple[str, ...]
    time: int
    author_name: str
    author_email: str
    changes: tuple[Change, ...]

    @property
    def day(self) -> str:
        """The committer's date in UTC, such as 2031-04-02."""
        return day_of(self.time)


@dataclass(frozen=True)  # without slots, for what is worked out once
class History:
    """The commits of a revision, each after its parents.

    `cut_at` names those whose parents this clone lacks, as a shallow one does; it is empty where the history is
    whole. What such a commit changes is not known: it seems to add every file.
    """

    commits: tuple[Commit, ...]
    cut_at: tuple[str, ...]

    def first_with(self, paths: Collection[str]) -> int | None:
        """Return the index of the first commit after which any of the files `paths` is there."""
        made = (index for path in paths for index, content in self.versions(path) if content is not None)
        return min(made, default=None)

    def versions(self, path: str) -> tuple[tuple[int, str | None], ...]:
        """Return the index of each commit that changes `path` and the content after it, oldest first."""
        return tuple(self._versions.get(path, ()))

    def last_change(self, path: str) -> int | None:
        """Return the index of the last commit that adds, changes or removes the file `path`."""
        versions = self._versions.get(path)
        return versions[-1][0] if versions else None

    @functools.cached_property
    def ancestry(self) -> Ancestry:
        """Which of the commits lead to which."""
        return Ancestry({commit.id: commit.parents for commit in self.commits})

    @functools.cached_property
    def _versions(self) -> Mapping[str, list[tuple[int, str | None]]]:
        versions: dict[str, list[tuple[int, str | None]]] = {}
        for index, commit in enumerate(self.commits):
            for change in commit.changes:
                versions.setdefault(change.path, []).append((index, change.after))
        return versions


def has_history(root: Path) -> bool:
    """Whether the folder `root` lies in a git repository, be it one without a commit.

    Raises
    ------
    CannotJudge
        Git fails, as it does on a repository of another owner, or a repository is there and no git.
    """
    return git.toplevel(root) is not None


def history_of(root: Path, revision: str = "HEAD", *, first_parent: bool = True) -> History:
    """Return the commits from the first one to `revision`, with their changes below the folder `root`.

    With `first_parent` they are the line that leads from each commit to its first parent, which for a branch
    that others are merged into is what it held through time; else they are all commits that lead to it. A
    branch without a commit has an empty history. Grafts and replaced commits are passed over, and nothing is
    fetched.

    Raises
    ------
    CannotJudge
        There is no repository, git fails, it does not know the revision, or it lacks the folders of a commit.
    """
    if not has_history(root):
        raise CannotJudge(
            f"{git.safe(str(root))} is in no git repository, so it has no history",
            "run in the clone of a repository",
        )
    if revision == "HEAD" and git.is_unborn(root):
        return History((), ())
    line = ("--first-parent",) if first_parent else ()
    told = git.pieces(root, "log", *_PLAIN, *line, f"--format={_FORMAT}", git.resolve(root, revision), "--")
    commits = tuple(_commits(told))[::-1]
    return History(commits, _cut(root, commits))


def line_of(history: History, base: str | None = None) -> frozenset[str]:
    """Return the ids of the commits on the line of first parents, from the last commit of `history` on.

    With `base`, into which the last commit goes as a pull request, the line of what it merges belongs to it too:
    a runner checks out the merge of the two.
    """
    parents = history.ancestry.parents
    line: set[str] = set()
    tip = history.commits[-1].id if history.commits else ""
    for start in (tip, *parents.get(tip, ())[1:2]) if base is not None else (tip,):
        name = start
        while name in parents and name not in line:
            line.add(name)
            name = next(iter(parents[name]), "")
    return frozenset(line)


def _commits(told: Iterator[str]) -> Iterator[Commit]:
    """Take apart what git tells of each commit: five fields, then a head and a path for each change."""
    piece, last = next(told, None), None
    while piece is not None:
        name, parents, time, author, email = piece, *(next(told, "") for _ in range(4))
        changes = []
        while (piece := next(told, None)) is not None and (head := piece.lstrip("\n"))[:1] == ":":
            changes.append(_change(head, next(told, "")))
        if name != last:  # older versions of git tell a merge once for each parent, the first one first
            yield Commit(name, tuple(parents.split()), _seconds(time), author, email, tuple(changes))
        last = name


def _change(head: str, path: str) -> Change:
    mode_before, mode_after, before, after, _ = head[1:].split(" ")
    return Change(path, before if mode_before[:3] == _FILE else None, after if mode_after[:3] == _FILE else None)


def _seconds(time: str) -> int:
    return int(time) if time.lstrip("-").isdecimal() else 0


def _cut(root: Path, commits: tuple[Commit, ...]) -> tuple[str, ...]:
    """Return the commits that git tells without parents, and that by their own content have some."""
    first = [commit.id for commit in commits if not commit.parents]
    contents = git.read_blobs(root, first, _LONGEST_COMMIT)
    return tuple(
        name
        for name, blob in zip(first, contents, strict=True)
        if blob.content is None or b"\nparent " in blob.content.partition(b"\n\n")[0]
    )
