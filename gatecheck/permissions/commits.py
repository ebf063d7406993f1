"""What permissions ask of git: the day on which a tree is judged, and who changed a file last."""

from __future__ import annotations

import re
from datetime import UTC, date, datetime
from pathlib import Path

from gatecheck import git
from gatecheck.model.struct import struct

_AUTHOR = re.compile(r"^author (.*?) ?<([^<>\n]*)> ", re.MULTILINE)
_COMMITTED = re.compile(r"^committer .*> ([0-9]{1,11}) [+-][0-9]+$", re.MULTILINE)
_HEAD, _UNBORN = "# branch.oid ", "(initial)"
_PARENT = re.compile(r"^parent ", re.MULTILINE)


@struct
class Changer:
    """Who changed a file last, as the commit says; without a name and an e-mail, `unknown` says why."""

    name: str = ""
    email: str = ""
    unknown: str = ""


def judged_commit(root: Path) -> str | None:
    """Return the id of the commit that the work tree at `root` stands at.

    `None` where there is no repository or no commit, or where tracked files differ from it. Files that git does
    not track make no difference: builds leave some behind.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    if git.toplevel(root) is None:
        return None
    asked = ("status", "--porcelain=v2", "--branch", "-z", "--no-renames", "--untracked-files=no", "--", ".")
    told = git.checked(root, "status", *git.run(root, *asked)).decode("utf-8", "replace").split("\0")
    head = next(line.removeprefix(_HEAD) for line in told if line.startswith(_HEAD))
    changed = any(line and not line.startswith("#") for line in told)
    return None if changed or head == _UNBORN else head


def day_of(root: Path, base: str | None, today: date) -> date:
    """Return the day on which the tree at `root` is judged, so that a commit is judged alike for ever.

    It is the committer's date (UTC) of the judged commit, or that of the revision `base` where it is later. Where
    no commit says what is judged, or a commit has no date that can be read, it is `today`.

    Raises
    ------
    CannotJudge
        Git fails, or does not know the base.
    """
    judged = judged_commit(root)
    if judged is None:
        return today
    commits = [judged] if base is None else [judged, git.resolve(root, base)]
    days = [_day(_header(root, commit)) for commit in commits]
    return max((day for day in days if day is not None), default=today)


def changer_of(root: Path, path: str) -> Changer:
    """Return who changed the file at `path`, relative to `root`, in the last commit that did.

    A merge that takes the file as one side has it is passed over. The name is free text to git, and no evidence.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    if git.toplevel(root) is None:
        return Changer(unknown="judge it in the git repository that holds its history")
    if git.is_unborn(root) or _status(root, "all", f":(literal){path}"):
        return Changer(unknown="commit it")
    answer = git.run(root, "rev-list", "-1", "HEAD", "--", f":(literal){path}")
    commit = git.checked(root, "rev-list", *answer).decode().strip()
    if not commit:
        return Changer(unknown="git tracks no file of that name")
    header = _header(root, commit)
    if _is_cut(root, commit, header):
        return Changer(unknown="the history of this clone is cut, so fetch it whole (`git fetch --unshallow`)")
    author = _AUTHOR.search(header)
    return Changer(author[1], author[2]) if author else Changer(unknown="its last commit names no author")


def _status(root: Path, untracked: str, pathspec: str) -> bool:
    """Whether anything below that path differs from the last commit."""
    told = git.run(
        root, "status", "--porcelain", "-z", "--no-renames", f"--untracked-files={untracked}", "--", pathspec
    )
    return bool(git.checked(root, "status", *told))


def _header(root: Path, commit: str) -> str:
    content = git.checked(root, "cat-file", *git.run(root, "cat-file", "commit", commit))
    return content.partition(b"\n\n")[0].decode("utf-8", "replace") + "\n"


def _is_cut(root: Path, commit: str, header: str) -> bool:
    """Whether the commit has parents that this clone lacks: it then seems to add every file."""
    known = git.checked(root, "rev-list", *git.run(root, "rev-list", "--no-walk", "--parents", commit)).split()
    return len(known) - 1 < len(_PARENT.findall(header))


def _day(header: str) -> date | None:
    committed = _COMMITTED.search(header)
    return datetime.fromtimestamp(int(committed[1]), UTC).date() if committed else None
