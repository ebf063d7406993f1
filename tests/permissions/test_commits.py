"""What commit a tree is judged at, and on what day."""

from __future__ import annotations

import os
import subprocess
from datetime import date
from pathlib import Path

import pytest
from support import GIT_ENVIRONMENT, git

from gatecheck.errors import CannotJudge
from gatecheck.permissions.commits import day_of, judged_commit

TODAY = date(2040, 1, 1)
NOON = "T12:00:00+00:00"


def commit(root: Path, day: str, author: str = "Ada Example <ada@example.org>", **files: str) -> str:
    """Write files (`a` is `a.json`), commit everything on that day, and return the commit."""
    if not (root / ".git").exists():
        git(root, "init", "-q")
    for name, text in files.items():
        (root / f"{name}.json").write_text(text, encoding="utf-8")
    git(root, "add", "-A")
    moment = day if "T" in day else day + NOON
    environment = {**os.environ, **GIT_ENVIRONMENT, "GIT_COMMITTER_DATE": moment}
    command = [
        "git",
        "commit",
        "-q",
        "--allow-empty",
        "-m",
        "x",
        f"--author={author}",
        "--date=2001-01-01T00:00:00Z",
    ]
    subprocess.run(command, cwd=root, env=environment, check=True)
    return git(root, "rev-parse", "HEAD")


def hand_made(root: Path, content: str) -> str:
    """Make a commit of that content, however odd, and stand at it."""
    made = subprocess.run(
        ["git", "hash-object", "-w", "-t", "commit", "--literally", "--stdin"],
        cwd=root,
        input=content.encode(),
        capture_output=True,
        check=True,
    )
    name = made.stdout.decode().strip()
    git(root, "update-ref", "HEAD", name)
    return name


def test_the_day_is_the_committers_of_the_judged_commit(tmp_path: Path) -> None:
    """Not the author's, which is 2001 here, and in UTC, so that every clone says the same."""
    commit(tmp_path, "2031-05-01T23:30:00-05:00", a="1")

    assert day_of(tmp_path, None, TODAY) == date(2031, 5, 2)


def test_the_base_counts_where_it_is_later(tmp_path: Path) -> None:
    """A request whose commits are dated back does not make a waiver live longer."""
    commit(tmp_path, "2031-05-01", a="1")
    git(tmp_path, "branch", "later")
    commit(tmp_path, "2031-06-01", a="2")

    assert day_of(tmp_path, "later", TODAY) == date(2031, 6, 1)
    git(tmp_path, "checkout", "-q", "later")
    commit(tmp_path, "2001-06-01", b="3")
    assert day_of(tmp_path, "HEAD~1", TODAY) == date(2031, 5, 1)


def test_what_is_not_committed_is_judged_today(tmp_path: Path) -> None:
    without = day_of(tmp_path, None, TODAY)
    git(tmp_path, "init", "-q")
    unborn = day_of(tmp_path, None, TODAY)
    head = commit(tmp_path, "2031-05-01", a="1")
    (tmp_path / "left-over.txt").write_text("of a build", encoding="utf-8")
    untracked, commit_then = day_of(tmp_path, None, TODAY), judged_commit(tmp_path)
    (tmp_path / "a.json").write_text("2", encoding="utf-8")

    assert (without, unborn) == (TODAY, TODAY)
    assert (untracked, commit_then) == (date(2031, 5, 1), head)
    assert day_of(tmp_path, None, TODAY) == TODAY
    assert judged_commit(tmp_path) is None


def test_changes_elsewhere_in_the_repository_make_no_difference_to_a_folder_in_it(tmp_path: Path) -> None:
    (tmp_path / "inner").mkdir()
    (tmp_path / "inner" / "a.json").write_text("1", encoding="utf-8")
    head = commit(tmp_path, "2031-05-01", b="1")
    (tmp_path / "b.json").write_text("2", encoding="utf-8")

    assert (judged_commit(tmp_path / "inner"), judged_commit(tmp_path)) == (head, None)


def test_a_commit_without_a_date_is_judged_today(tmp_path: Path) -> None:
    commit(tmp_path, "2031-05-01", a="1")
    tree = git(tmp_path, "rev-parse", "HEAD^{tree}")
    hand_made(tmp_path, f"tree {tree}\nauthor Ada <a@example.org> 5 +0000\ncommitter Ada <a@example.org>\n\nx\n")

    assert day_of(tmp_path, None, TODAY) == TODAY


def test_a_head_that_names_nothing_stops_the_gate(tmp_path: Path) -> None:
    """Git takes it for a branch without commits, and lists the files of the index."""
    commit(tmp_path, "2031-05-01", a="1")
    (tmp_path / ".git/HEAD").write_text("ref: refs/heads/ma\x01in\n", encoding="ascii")

    with pytest.raises(CannotJudge, match="HEAD of this repository names neither a branch nor a commit"):
        judged_commit(tmp_path)
