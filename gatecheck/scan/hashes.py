"""The digests of the files that records name as what they were made from."""

from __future__ import annotations

import hashlib
import os
import posixpath
import re
import stat
from collections.abc import Collection, Iterator, Mapping
from pathlib import Path

from gatecheck import git
from gatecheck.model.freshness import FileHash
from gatecheck.scan.candidates import is_pointer
from gatecheck.scan.tree import LONGEST_SEARCHED

_CHUNK = 1 << 20
_TEXT_IS_SEEN_IN = 8000  # as git decides whether it converts line ends
_FLAGS = os.O_RDONLY | sum(getattr(os, name, 0) for name in ("O_NONBLOCK", "O_BINARY"))
# Documented in docs/spec.md of https://github.com/git-lfs/git-lfs.
_LFS_OID = re.compile(rb"^oid sha256:([0-9a-f]{64})$", re.MULTILINE)
_LONGEST_POINTER = 1024


def sha256_of(root: Path, expected: Mapping[str, Collection[str]]) -> Mapping[str, FileHash]:
    """Return the SHA-256 digest of each file in the work tree, by the path that a record gives it.

    A path is relative to the folder `root`, else to the top of its repository. The file is read in chunks. Where
    its digest is none of those `expected` of it and it is a text, the digests of the same text with the other line
    ends are given too, for a checkout may convert them. Of the pointer that Git LFS keeps in place of a file the
    digest in it counts, and of a file that a sparse checkout leaves out its content in the repository. What lies
    outside of the repository, or leads there, is not read.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    top = git.toplevel(root)
    bases = [root] if top is None else [root, top]
    hashes = {path: _in_work_tree(bases, path, digests) for path, digests in expected.items()}
    missing = [path for path, found in hashes.items() if found.why == "missing"]
    if missing and top is not None:
        hashes.update(_left_out(root, top, missing))
    return hashes


def _in_work_tree(bases: list[Path], path: str, expected: Collection[str]) -> FileHash:
    if "\0" in path or posixpath.isabs(path):
        return FileHash(why="missing" if "\0" in path else "outside")
    target = next((base / path for base in bases if os.path.lexists(base / path)), bases[0] / path)
    real, around = os.path.realpath(target), os.path.realpath(bases[-1])
    if os.path.commonpath([real, around]) != around:
        return FileHash(why="outside")
    return _hashed(real, expected)


def _hashed(path: str, expected: Collection[str]) -> FileHash:
    try:
        handle = os.open(path, _FLAGS)
    except (FileNotFoundError, NotADirectoryError):
        return FileHash(why="missing")
    except OSError:
        return FileHash(why="refused")
    if not stat.S_ISREG(os.fstat(handle).st_mode):
        os.close(handle)
        return FileHash(why="no file")
    with os.fdopen(handle, "rb") as file:
        beginning = file.read(_LONGEST_POINTER)
        if is_pointer(beginning):
            return _of_pointer(beginning)
        file.seek(0)
        digest = hashlib.file_digest(file, "sha256").hexdigest()
        if digest in expected:
            return FileHash(digest)
        file.seek(0)
        return FileHash(digest, _with_other_line_ends(iter(lambda: file.read(_CHUNK), b"")) - {digest})


def _of_pointer(content: bytes) -> FileHash:
    oid = _LFS_OID.search(content)
    return FileHash(oid[1].decode()) if oid else FileHash(why="refused")


def _with_other_line_ends(chunks: Iterator[bytes]) -> frozenset[str]:
    """The digests of a text with LF and with CRLF; none where it is no text."""
    lf, crlf = hashlib.sha256(), hashlib.sha256()
    held = b""
    for number, chunk in enumerate(chunks):
        if number == 0 and b"\0" in chunk[:_TEXT_IS_SEEN_IN]:
            return frozenset()
        # A pair of CR and LF may be cut in two between chunks.
        whole = held + chunk
        held = b"\r" if whole.endswith(b"\r") else b""
        text = whole.removesuffix(held).replace(b"\r\n", b"\n")
        lf.update(text)
        crlf.update(text.replace(b"\n", b"\r\n"))
    lf.update(held)
    crlf.update(held)
    return frozenset([lf.hexdigest(), crlf.hexdigest()])


def _left_out(root: Path, top: Path, missing: Collection[str]) -> Iterator[tuple[str, FileHash]]:
    """What the repository holds of the files that a sparse checkout leaves out of the work tree."""
    entries = {entry.path: entry for entry in git.list_files(top) if not entry.checked_out}
    below = os.path.relpath(os.path.realpath(root), os.path.realpath(top)).replace(os.sep, "/")
    named = {
        path: entries[place]
        for path in missing
        for place in (posixpath.normpath(path), posixpath.normpath(posixpath.join(below, path)))
        if place in entries
    }
    blobs = git.read_blobs(top, [entry.object_id or "" for entry in named.values()], LONGEST_SEARCHED)
    for path, blob in zip(named, blobs, strict=True):
        yield path, _of_blob(blob)


def _of_blob(blob: git.Blob) -> FileHash:
    if blob.content is None:
        return FileHash(why="not in this clone" if blob.size is None else "too long")
    if is_pointer(blob.content):
        return _of_pointer(blob.content)
    digest = hashlib.sha256(blob.content).hexdigest()
    return FileHash(digest, _with_other_line_ends(iter([blob.content])) - {digest})
