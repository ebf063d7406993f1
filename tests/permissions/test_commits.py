"""What permissions ask of git: the day on which a tree is judged, and who changed a file last."""

from __future__ import annotations

import os
import subprocess
from datetime import date
from pathlib import Path

import pytest
from support import GIT_ENVIRONMENT, git

from gatecheck.permissions.commits import Changer, changer_of, day_of, judged_commit

TODAY = date(2040, 1, 1)
NOON = "T12:00:00+00:00"


def told(changer: Changer) -> tuple[str, str, str]:
    """The changer as texts."""
    return changer.name, changer.email, changer.unknown


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


def test_who_changed_a_file_last(tmp_path: Path) -> None:
    commit(tmp_path, "2031-05-01", a="1", b="1")
    commit(tmp_path, "2031-05-02", "Bo Sample <bo@example.org>", b="2")

    assert told(changer_of(tmp_path, "a.json")) == ("Ada Example", "ada@example.org", "")
    assert told(changer_of(tmp_path, "b.json")) == ("Bo Sample", "bo@example.org", "")


def test_a_merge_changes_nothing_by_itself(tmp_path: Path) -> None:
    """Whoever merges a request is not the author of what it brings in."""
    commit(tmp_path, "2031-05-01", a="1", b="1")
    git(tmp_path, "checkout", "-q", "-b", "request")
    commit(tmp_path, "2031-05-02", "Bo Sample <bo@example.org>", a="2")
    git(tmp_path, "checkout", "-q", "main")
    commit(tmp_path, "2031-05-03", "Cy Model <cy@example.org>", b="2")
    git(tmp_path, "merge", "-q", "--no-ff", "-m", "merge", "request")

    assert told(changer_of(tmp_path, "a.json")) == ("Bo Sample", "bo@example.org", "")
    assert told(changer_of(tmp_path, "b.json")) == ("Cy Model", "cy@example.org", "")


def test_a_conflict_is_solved_by_whoever_merges(tmp_path: Path) -> None:
    commit(tmp_path, "2031-05-01", a="1")
    git(tmp_path, "checkout", "-q", "-b", "request")
    commit(tmp_path, "2031-05-02", "Bo Sample <bo@example.org>", a="2")
    git(tmp_path, "checkout", "-q", "main")
    commit(tmp_path, "2031-05-03", "Cy Model <cy@example.org>", a="3")
    git(tmp_path, "merge", "-q", "-s", "ours", "--no-commit", "request")
    commit(tmp_path, "2031-05-04", "Di Instance <di@example.org>", a="4")

    assert told(changer_of(tmp_path, "a.json")) == ("Di Instance", "di@example.org", "")


def test_paths_are_relative_to_the_judged_folder_and_taken_as_they_are(tmp_path: Path) -> None:
    inner = tmp_path / "in ner"
    inner.mkdir()
    commit(tmp_path, "2031-05-01", a="1")
    (inner / "[a]*.json").write_text("1", encoding="utf-8")
    commit(tmp_path, "2031-05-02", "Bo Sample <bo@example.org>", a="2")

    assert told(changer_of(inner, "[a]*.json")) == ("Bo Sample", "bo@example.org", "")
    assert changer_of(inner, "a.json").unknown == "git tracks no file of that name"


def test_the_persons_settings_change_no_name(tmp_path: Path) -> None:
    commit(tmp_path, "2031-05-01", a="1")
    (tmp_path / ".mailmap").write_text("Another <another@example.org> <ada@example.org>\n", encoding="utf-8")
    commit(tmp_path, "2031-05-02", "Bo Sample <bo@example.org>", b="2")
    git(tmp_path, "config", "log.mailmap", "true")
    git(tmp_path, "config", "log.follow", "true")

    assert told(changer_of(tmp_path, "a.json")) == ("Ada Example", "ada@example.org", "")


def test_what_is_not_known_says_what_is_missing(tmp_path: Path) -> None:
    outside = changer_of(tmp_path, "a.json").unknown
    git(tmp_path, "init", "-q")
    unborn = changer_of(tmp_path, "a.json").unknown
    commit(tmp_path, "2031-05-01", a="1", b="1")
    (tmp_path / "a.json").write_text("2", encoding="utf-8")
    (tmp_path / "c.json").write_text("2", encoding="utf-8")

    assert outside == "judge it in the git repository that holds its history"
    assert unborn == "commit it"
    assert [changer_of(tmp_path, f"{name}.json").unknown for name in "abc"] == ["commit it", "", "commit it"]


def test_at_the_cut_of_a_shallow_clone_nobody_is_known(tmp_path: Path) -> None:
    """There, one commit seems to have added every file."""
    full, shallow = tmp_path / "full", tmp_path / "shallow"
    full.mkdir()
    commit(full, "2031-05-01", a="1")
    commit(full, "2031-05-02", "Bo Sample <bo@example.org>", b="1")
    commit(full, "2031-05-03", "Cy Model <cy@example.org>", c="1")
    git(tmp_path, "clone", "-q", "--depth=2", full.as_uri(), str(shallow))

    assert told(changer_of(shallow, "c.json")) == ("Cy Model", "cy@example.org", "")
    assert changer_of(shallow, "a.json").unknown == (
        "the history of this clone is cut, so fetch it whole (`git fetch --unshallow`)"
    )
    git(shallow, "fetch", "-q", "--unshallow")
    assert told(changer_of(shallow, "a.json")) == ("Ada Example", "ada@example.org", "")


@pytest.mark.parametrize(
    ("author", "name", "email", "unknown"),
    [
        ("author Ada <a@example.org> 5 +0000", "Ada", "a@example.org", ""),
        ("author <a@example.org> 5 +0000", "", "a@example.org", ""),
        ("author nobody", "", "", "its last commit names no author"),
    ],
)
def test_odd_authors(tmp_path: Path, author: str, name: str, email: str, unknown: str) -> None:
    commit(tmp_path, "2031-05-01", a="1")
    tree = git(tmp_path, "rev-parse", "HEAD^{tree}")
    # A signature holds whatever its maker likes, on lines that begin with a blank.
    signed = "gpgsig x\n author Forged <forged@example.org> 5 +0000\n"
    hand_made(
        tmp_path, f"tree {tree}\n{signed}{author}\ncommitter Ada <a@example.org> 5 +0000\n\nauthor C <c@d> 1\n"
    )

    assert told(changer_of(tmp_path, "a.json")) == (name, email, unknown)
