"""Who wrote a plan: the author of any version of its file, under any of its names."""

from __future__ import annotations

import os
import subprocess
from pathlib import Path

from support import GIT_ENVIRONMENT, git

from gatecheck.permissions.authors import Authors

ADA, BO, CY = ("Ada Example <ada@example.org>", "Bo Sample <bo@example.org>", "Cy Model <cy@example.org>")


def commit(root: Path, author: str, path: str = "", text: str = "") -> None:
    """Write a file and commit everything."""
    if path:
        (root / path).write_text(text, encoding="utf-8")
    git(root, "add", "-A")
    command = ["git", "commit", "-q", "--allow-empty", "-m", "x", f"--author={author}"]
    subprocess.run(command, cwd=root, env={**os.environ, **GIT_ENVIRONMENT}, check=True)


def authors(root: Path, path: str) -> list[str]:
    """The authors of the file, or why one is not known."""
    told = Authors(root, []).of_file(path)
    return [each.unknown or f"{each.name} <{each.email}>" for each in told]


def test_all_who_wrote_it_are_its_authors(tmp_path: Path) -> None:
    outside = authors(tmp_path, "p.json")
    git(tmp_path, "init", "-q")
    commit(tmp_path, ADA, "p.json", "1")
    commit(tmp_path, BO, "p.json", "2")
    commit(tmp_path, CY, "other.json", "1")
    git(tmp_path, "mv", "p.json", "moved.json")
    commit(tmp_path, CY)

    assert outside == ["judge it in the git repository that holds its history"]
    assert authors(tmp_path, "moved.json") == [ADA, BO, CY]
    assert authors(tmp_path, "other.json") == [CY]
    (tmp_path / "moved.json").write_text("3", encoding="utf-8")
    assert authors(tmp_path, "moved.json") == ["commit it"]


def test_at_the_cut_of_a_shallow_clone_one_is_not_known(tmp_path: Path) -> None:
    full = tmp_path / "full"
    full.mkdir()
    git(full, "init", "-q")
    commit(full, ADA, "p.json", "1")
    commit(full, BO, "p.json", "2")
    git(tmp_path, "clone", "-q", "--depth=1", "-o", "field", full.as_uri(), str(tmp_path / "shallow"))

    assert authors(tmp_path / "shallow", "p.json") == [
        "the history of this clone is cut; run `git fetch --unshallow field`"
    ]
