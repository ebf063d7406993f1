"""The digests of inputs: what a file is here, whatever a checkout has made of it."""

from __future__ import annotations

import hashlib
import os
from pathlib import Path

import pytest
from scan.scanning import Git, Write

from gatecheck.model.freshness import FileHash
from gatecheck.scan import hashes
from gatecheck.scan.hashes import sha256_of

LF = b"plot,yield\n1,4.2\n2,3.9\n"
CRLF = LF.replace(b"\n", b"\r\n")


def sha(content: bytes) -> str:
    """The SHA-256 digest."""
    return hashlib.sha256(content).hexdigest()


def one(root: Path, path: str, *expected: str) -> FileHash:
    """The digest of one file."""
    found = sha256_of(root, {path: expected})
    assert list(found) == [path]
    return found[path]


def pointer(content: bytes) -> bytes:
    """What Git LFS keeps in place of a file."""
    spec = "version https://git-lfs.github.com/spec/v1"
    return f"{spec}\noid sha256:{sha(content)}\nsize {len(content)}\n".encode()


def test_no_inputs_have_no_digests(root: Path) -> None:
    assert sha256_of(root, {}) == {}


def test_the_digest_of_the_bytes(root: Path, write: Write) -> None:
    write("data/plots.csv", LF)

    found = one(root, "data/plots.csv", sha(LF))

    assert (found.sha256, found.also, found.why) == (sha(LF), frozenset(), None)


@pytest.mark.parametrize(("here", "there"), [(LF, CRLF), (CRLF, LF)])
def test_a_text_may_have_the_other_line_ends(root: Path, write: Write, here: bytes, there: bytes) -> None:
    """A checkout may convert them, and the record may come from another machine."""
    write("plots.csv", here)

    found = one(root, "plots.csv", sha(there))

    assert (found.sha256, sha(there) in found.also) == (sha(here), True)


def test_what_git_converts_on_checkout_stays_the_same(git: Git, root: Path, write: Write) -> None:
    """With core.autocrlf a file stands in the work tree with other bytes than in the commit."""
    write("plots.csv", LF)
    git("add", "-A")
    git("commit", "-q", "-m", "x")
    git("config", "core.autocrlf", "true")
    (root / "plots.csv").unlink()
    git("checkout", "-q", "--", "plots.csv")

    found = one(root, "plots.csv", sha(LF))

    assert (root / "plots.csv").read_bytes() == CRLF
    assert sha(LF) in found.also


def test_bytes_that_are_no_text_have_one_digest(root: Path, write: Write) -> None:
    write("plots.bin", b"\0" + CRLF)

    assert one(root, "plots.bin", sha(b"\0" + LF)).also == frozenset()


@pytest.mark.parametrize("size", [1, 2, 3, 7, 1 << 20])
def test_chunks_may_cut_a_line_end_in_two(
    root: Path, write: Write, size: int, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A lone CR is no line end, in the middle and at the end of a file too."""
    mixed = b"a\r\nb\rc\n\r\n\r\r\nd\r"
    monkeypatch.setattr(hashes, "_CHUNK", size)
    write("a.csv", mixed)

    found = one(root, "a.csv")

    lf = mixed.replace(b"\r\n", b"\n")
    assert found.also == {sha(lf), sha(lf.replace(b"\n", b"\r\n"))} - {sha(mixed)}


def test_an_empty_file_has_the_digest_of_nothing(root: Path, write: Write) -> None:
    """SHA-256 of the empty string (FIPS 180-4 test data)."""
    write("a.csv", b"")

    assert one(root, "a.csv").sha256 == "e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855"


def test_a_pointer_of_git_lfs_tells_the_digest(root: Path, write: Write) -> None:
    write("big.parquet", pointer(b"big"))
    write("broken.parquet", pointer(b"big")[:60])

    assert one(root, "big.parquet", sha(b"big")).sha256 == sha(b"big")
    assert one(root, "broken.parquet", sha(b"big")).why == "refused"


def test_paths_may_be_relative_to_the_top_of_the_repository(git: Git, root: Path, write: Write) -> None:
    assert git("status", "--porcelain") == ""
    write("data/a.csv", b"top")
    write("study/b.csv", b"below")
    write("study/data/c.csv", b"first")
    write("data/c.csv", b"second")

    found = sha256_of(root / "study", dict.fromkeys(["data/a.csv", "b.csv", "../data/a.csv", "data/c.csv"], ()))

    assert [each.sha256 for each in found.values()] == [sha(b"top"), sha(b"below"), sha(b"top"), sha(b"first")]


@pytest.mark.parametrize("path", ["../outside.csv", "{tmp}/outside.csv", "leads-out.csv", "folder-out/outside.csv"])
def test_what_lies_outside_is_not_read(root: Path, path: str) -> None:
    (root.parent / "outside.csv").write_bytes(b"secret")
    (root / "leads-out.csv").symlink_to(root.parent / "outside.csv")
    (root / "folder-out").symlink_to(root.parent)

    found = one(root, path.format(tmp=root.parent), sha(b"secret"))

    assert (found.sha256, found.why) == ("", "outside")


def test_a_link_inside_is_followed(root: Path, write: Write) -> None:
    write("data/plots.csv", LF)
    (root / "plots.csv").symlink_to("data/plots.csv")
    (root / "nowhere.csv").symlink_to("data/none.csv")

    assert one(root, "plots.csv", sha(LF)).sha256 == sha(LF)
    assert one(root, "nowhere.csv").why == "missing"


@pytest.mark.parametrize("path", ["none.csv", "plots.csv/none.csv", "a\0b", "no/such/folder.csv"])
def test_a_file_that_is_not_there(root: Path, write: Write, path: str) -> None:
    write("plots.csv", LF)

    assert one(root, path).why == "missing"


def test_what_is_no_file_is_not_read(root: Path, write: Write) -> None:
    """A pipe would keep whoever opens it waiting."""
    write("data/plots.csv", LF)
    os.mkfifo(root / "pipe.csv")

    assert [one(root, path).why for path in ("data", ".", "pipe.csv")] == ["no file"] * 3


def test_a_name_that_no_system_takes_is_refused(root: Path) -> None:
    assert one(root, "a" * 5000).why == "refused"


def test_a_sparse_checkout_leaves_files_to_the_repository(
    git: Git, root: Path, write: Write, monkeypatch: pytest.MonkeyPatch
) -> None:
    write("study/results.json", "{}")
    write("data/plots.csv", CRLF)
    write("data/big.csv", pointer(b"big"))
    write("data/long.csv", b"x" * 200)
    git("add", "-A")
    git("commit", "-q", "-m", "x")
    git("sparse-checkout", "set", "--no-cone", "/study/")
    monkeypatch.setattr(hashes, "LONGEST_SEARCHED", 190)

    paths = ["data/plots.csv", "../data/plots.csv", "data/big.csv", "data/long.csv", "data/none.csv"]
    found = sha256_of(root / "study", dict.fromkeys(paths, ()))

    assert not (root / "data").exists()
    assert [(each.sha256, each.why) for each in found.values()] == [
        (sha(CRLF), None),
        (sha(CRLF), None),
        (sha(b"big"), None),
        ("", "too long"),
        ("", "missing"),
    ]
    assert found["data/plots.csv"].also == {sha(LF)}


def test_a_clone_may_lack_the_content_of_a_file_that_is_left_out(git: Git, root: Path, write: Write) -> None:
    """As a partial clone does; here the object is taken away."""
    write("study/results.json", "{}")
    write("data/plots.csv", LF)
    git("add", "-A")
    git("commit", "-q", "-m", "x")
    content = git("rev-parse", "HEAD:data/plots.csv")
    git("sparse-checkout", "set", "--no-cone", "/study/")
    (root / ".git" / "objects" / content[:2] / content[2:]).unlink()

    assert one(root, "data/plots.csv").why == "not in this clone"
