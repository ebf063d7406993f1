"""Reading the prose of a tree: which files, and what is said of those that cannot be read."""

from __future__ import annotations

import json
import os
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st
from scan.scanning import Git, Write

from gatecheck.model.verdict import Place, Problem
from gatecheck.prose import reading
from gatecheck.prose.reading import READERS, Prose, read_file, read_prose
from gatecheck.scan.readers.document import Broken

ALL = ["**/*"]


def said(prose: Prose) -> list[tuple[str, str]]:
    """The problems: place and message."""
    return [(str(one.at), one.message) for one in prose.problems]


def test_files_are_read_by_their_suffix_in_the_order_of_their_paths(root: Path, write: Write) -> None:
    for path in ("z.md", "a.tex", "docs/b.RST", "c.qmd", "d.Rmd", "e.txt", "f.py"):
        write(path, f"text of {path}")
    write("n.ipynb", {"cells": [{"cell_type": "markdown", "source": "text of n"}]})

    prose = read_prose(root, ALL, ["z*"])

    assert prose.problems == ()
    assert [(one.file.path, one.body) for one in prose.passages] == [
        ("a.tex", "text of a.tex"),
        ("c.qmd", "text of c.qmd"),
        ("d.Rmd", "text of d.Rmd"),
        ("docs/b.RST", "text of docs/b.RST"),
        ("n.ipynb", "text of n"),
    ]


def test_only_what_is_included_is_read(root: Path, write: Write) -> None:
    write("a.md", "a")
    write("docs/b.md", "b")

    assert [one.body for one in read_prose(root, ["docs/**"], []).passages] == ["b"]


def test_a_mark_of_byte_order_and_line_ends_are_no_trouble(root: Path, write: Write) -> None:
    write("a.md", b"\xef\xbb\xbfone\r\ntwo\r\n")

    (one,) = read_prose(root, ALL, []).passages

    assert (one.body, one.line(one.body.index("two"))) == ("one\r\ntwo\r\n", 2)


def test_the_prose_of_a_commit(root: Path, write: Write, git: Git) -> None:
    write("a.md", "before")
    git("add", ".")
    git("commit", "-q", "-m", "one")
    write("a.md", "after")

    assert [one.body for one in read_prose(root, ALL, []).passages] == ["after"]
    assert [one.body for one in read_prose(root, ALL, [], "HEAD").passages] == ["before"]


def test_what_cannot_be_read_is_told(root: Path, write: Write, monkeypatch: pytest.MonkeyPatch) -> None:
    write("a.md", b"one\ntw\xe9")
    write("b.ipynb", '{"cells": [\n tru]}')
    write("c.ipynb", "[" * 50_000)
    write("d.md", "version https://git-lfs.github.com/spec/v1\noid sha256:0\n")
    write("e.md", "text".encode("utf-16"))
    write("f.md", "x" * 70_000)
    (root / "g.md").symlink_to(root.parent)
    (root / "h.md").symlink_to("i.md")
    write("i.md", "fine")
    write("j.ipynb", "{")
    monkeypatch.setattr("gatecheck.scan.tree.LONGEST_SEARCHED", 66_000)
    monkeypatch.setattr(reading, "LONGEST_SEARCHED", 66_000)

    prose = read_prose(root, ALL, [])

    assert [one.body for one in prose.passages] == ["fine"]
    assert said(prose) == [
        ("a.md:2", "the text is not UTF-8: byte 0xE9 at offset 6"),
        ("b.ipynb:2", "the text is no notebook that can be read"),
        ("c.ipynb:1", "the text is no notebook that can be read"),
        ("d.md:1", "the file is a Git LFS pointer, so its text is not here"),
        ("e.md:1", "the text is UTF-16 or UTF-32, not UTF-8"),
        ("f.md:1", "the file has 0.1 MiB; prose is read up to 0 MiB"),
        ("g.md:1", "a symbolic link out of the tree is not followed"),
        ("j.ipynb:1", "the text is no notebook that can be read"),
    ]
    assert prose.problems[1].advice == "write it again, or leave it out of the prose that is looked at"


def test_a_link_in_the_tree_of_a_commit(root: Path, write: Write, git: Git) -> None:
    write("a.md", "fine")
    (root / "b.md").symlink_to("a.md")
    (root / "c.md").symlink_to("none.md")
    git("add", ".")
    git("commit", "-q", "-m", "one")

    assert (
        said(read_prose(root, ALL, [], "HEAD"))
        == said(read_prose(root, ALL, []))
        == [("c.md:1", "a symbolic link to none.md, which is not read itself, is not followed")]
    )


@pytest.mark.skipif(os.name != "posix" or not hasattr(os, "mkfifo"), reason="needs a file that cannot be opened")
def test_a_file_that_is_refused_and_one_that_is_gone(
    root: Path, write: Write, git: Git, monkeypatch: pytest.MonkeyPatch
) -> None:
    write("a.md", "a")
    write("b.md", "b")
    git("add", ".")
    (root / "b.md").unlink()
    opened = os.open

    def refusing(path: str, *rest: int) -> int:
        if str(path).endswith("a.md"):
            raise PermissionError(13, "Permission denied")
        return opened(path, *rest)

    monkeypatch.setattr("gatecheck.scan.tree.os.open", refusing)

    assert read_prose(root, ALL, []).problems == (
        Problem(Place("a.md"), "the file cannot be opened (Permission denied)", "mend its permissions"),
    )


def test_a_file_in_the_middle_of_a_merge(root: Path, write: Write, git: Git) -> None:
    write("a.md", "one\n")
    git("add", ".")
    git("commit", "-q", "-m", "one")
    git("checkout", "-q", "-b", "other")
    write("a.md", "two\n")
    git("commit", "-q", "-a", "-m", "two")
    git("checkout", "-q", "main")
    write("a.md", "three\n")
    git("commit", "-q", "-a", "-m", "three")
    with pytest.raises(Exception, match="exit status 1"):
        git("merge", "-q", "other")

    assert said(read_prose(root, ALL, [])) == [("a.md:1", "the file is in the middle of a merge")]


def test_content_that_a_partial_clone_lacks(root: Path, write: Write, git: Git, tmp_path: Path) -> None:
    write("a.md", "one\n")
    git("add", ".")
    git("commit", "-q", "-m", "one")
    git("config", "uploadpack.allowFilter", "true")
    clone = tmp_path / "clone"
    git("clone", "-q", "--no-checkout", "--filter=blob:none", root.as_uri(), str(clone))

    prose = read_prose(clone, ALL, [], "HEAD")

    assert said(prose) == [("a.md:1", "the content of this file is not in this clone")]


@given(st.sampled_from(sorted(READERS)), st.binary(max_size=200) | st.text(max_size=200).map(str.encode))
def test_any_bytes_are_passages_or_broken(suffix: str, content: bytes) -> None:
    lines = []
    try:
        lines = [one.line(max(0, len(one.body) - 1)) for one in read_file(f"a{suffix}", content)]
    except Broken as broken:
        lines = [broken.line]

    assert all(1 <= line <= content.count(b"\n") + 1 for line in lines)


def test_a_notebook_that_is_a_file_of_bytes() -> None:
    (one,) = read_file(
        "n.ipynb", json.dumps({"cells": [{"cell_type": "markdown", "source": ["a\n", "b"]}]}).encode()
    )

    assert (one.body, one.cell) == ("a\nb", 1)
