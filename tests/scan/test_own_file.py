"""A named file of any length that the gate itself wrote."""

from __future__ import annotations

import hashlib
import json
from pathlib import Path

import pytest
from scan.scanning import Git, Write

from gatecheck.errors import CannotJudge
from gatecheck.scan.own_file import read_own


def problems(root: Path, path: str) -> list[tuple[str, str]]:
    """Place and message of what is wrong with the file."""
    file = read_own(root, path)
    assert file is not None
    assert file.document is None
    return [(str(one.at), one.message) for one in file.problems]


def test_more_values_than_a_record_may_have(root: Path, write: Write) -> None:
    long = {"list": list(range(20_000)), "text": "x" * 20_000}
    write("a.json", long)

    file = read_own(root, "a.json")

    assert file is not None
    assert file.document is not None
    assert file.document.value == long
    assert file.digest == f"sha256:{hashlib.sha256(json.dumps(long, indent=1).encode()).hexdigest()}"
    assert read_own(root, "b.json") is None


def test_what_is_refused_is_told_in_the_order_of_the_file(root: Path, write: Write) -> None:
    write("a.json", '{"a": [\n1,\nNaN,\n{"b": 1, "b": 2}],\n"a2": 1e999}')
    write("b.json", "NaN")

    assert [place for place, _ in problems(root, "a.json")] == ["a.json:3", "a.json:4", "a.json:5"]
    assert problems(root, "a.json")[1] == ("a.json:4", "a[2].b is given twice")
    assert problems(root, "b.json")[0][1].startswith("the file ")


def test_files_that_are_no_document(root: Path, write: Write) -> None:
    write("a.json", "{")
    write("a.toml", "a = 1")
    write("a.yaml", "a: 1\n---\na: 2\n")

    assert problems(root, "a.json")[0][0] == "a.json:1"
    assert problems(root, "a.toml") == [("a.toml:1", "the file has a suffix that no reader knows")]
    assert problems(root, "a.yaml") == [("a.yaml:1", "the file holds 2 documents")]


def test_what_is_there_and_cannot_be_read(root: Path, write: Write) -> None:
    (root / "folder.json").mkdir()
    write("a.json", {})
    (root / "link.json").symlink_to("a.json")

    with pytest.raises(CannotJudge, match=r"folder\.json cannot be read \(it is no file\)"):
        read_own(root, "folder.json")
    with pytest.raises(CannotJudge, match=r"link\.json cannot be read \(it is a symbolic link\)"):
        read_own(root, "link.json")


def test_at_a_revision(git: Git, root: Path, write: Write) -> None:
    write("a.json", {"a": 1})
    git("add", "-A")
    git("commit", "-q", "-m", "x")
    write("a.json", {"a": 2})

    then, now = read_own(root, "a.json", "HEAD"), read_own(root, "a.json")

    assert then is not None
    assert now is not None
    assert then.document is not None
    assert now.document is not None
    assert (then.document.value, now.document.value) == ({"a": 1}, {"a": 2})
    assert read_own(root, "b.json", "HEAD") is None
