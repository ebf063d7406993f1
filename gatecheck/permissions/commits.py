"""What commit a tree is judged at, and on what day."""

from __future__ import annotations

import re
from datetime import UTC, date, datetime
from pathlib import Path

from gatecheck import git
from gatecheck.errors import CannotJudge

_COMMITTED = re.compile(r"^committer .*> ([0-9]{1,11}) [+-][0-9]+$", re.MULTILINE)
_HEAD, _UNBORN = "# branch.oid ", "(initial)"


def judged_commit(root: Path) -> str | None:
    """Return the id of the commit that the work tree at `root` stands at.

    `None` where there is no repository or no commit, or where tracked files differ from it. Files that git does
    not track make no difference: builds leave some behind.

    Raises
    ------
    CannotJudge
        Git fails, or HEAD names nothing that a repository can be at.
    """
    if git.toplevel(root) is None:
        return None
    asked = ("status", "--porcelain=v2", "--branch", "-z", "--no-renames", "--untracked-files=no", "--", ".")
    told = git.checked(root, "status", *git.run(root, *asked)).decode("utf-8", "replace").split("\0")
    head = next(line.removeprefix(_HEAD) for line in told if line.startswith(_HEAD))
    changed = any(line and not line.startswith("#") for line in told)
    if head == _UNBORN and not git.is_unborn(root):
        raise CannotJudge("HEAD of this repository names neither a branch nor a commit", git.MEND_HEAD)
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


def _header(root: Path, commit: str) -> str:
    content = git.checked(root, "cat-file", *git.run(root, "cat-file", "commit", commit))
    return content.partition(b"\n\n")[0].decode("utf-8", "replace") + "\n"


def _day(header: str) -> date | None:
    committed = _COMMITTED.search(header)
    return datetime.fromtimestamp(int(committed[1]), UTC).date() if committed else None
