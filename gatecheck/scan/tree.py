"""The tree that is scanned: what it lists, and the bytes of its files, in the work tree or in a commit."""

from __future__ import annotations

import os
import posixpath
from collections.abc import Iterator, Sequence
from pathlib import Path
from typing import Literal

from gatecheck import git
from gatecheck.errors import CannotJudge
from gatecheck.git import Entry, safe
from gatecheck.model.struct import struct

#: A longer file is not searched.
LONGEST_SEARCHED = 256 << 20

_FIRST_READ = 1 << 16
_MOST_LINKS = 40
_FLAGS = os.O_RDONLY | sum(getattr(os, name, 0) for name in ("O_NOFOLLOW", "O_NONBLOCK", "O_BINARY"))


@struct
class Unread:
    """Why there are no bytes of a file; `gone` is what the work tree no longer has."""

    why: Literal["gone", "link", "too long", "not in this clone", "refused"]
    says: str = ""


@struct
class Tree:
    """A listed folder; with `commit` its state there, else its work tree."""

    root: Path
    commit: str | None
    entries: tuple[Entry, ...]


def listed(root: Path, revision: str | None) -> Tree:
    """List the files below `root`.

    Raises
    ------
    CannotJudge
        `root` is no folder or cannot be read, git fails, or there is no repository to hold the revision.
    """
    if not root.is_dir():
        what = "is not a folder" if root.exists() else "does not exist"
        raise CannotJudge(f"{safe(str(root))} {what}", "name the folder to judge")
    in_repository = git.toplevel(root) is not None
    if revision is None:
        return Tree(root, None, git.list_files(root) if in_repository else tuple(_walked(root, "")))
    if not in_repository:
        raise CannotJudge(
            f"{safe(str(root))} is in no git repository, so it has no revision {safe(revision)}",
            "leave the revision out, or name a repository",
        )
    commit = git.resolve(root, revision)
    return Tree(root, commit, git.list_tree(root, commit))


def _walked(root: Path, below: str) -> Iterator[Entry]:
    try:
        found = sorted(os.scandir(root / below), key=lambda one: one.name)
    except OSError as error:
        where = safe(str(root / below))
        raise CannotJudge(
            f"the folder {where} cannot be read ({safe(str(error.strerror))})", "mend its permissions"
        ) from error
    for one in found:
        if one.is_symlink():
            yield Entry(below + one.name, "link")
        elif not one.is_dir():
            yield Entry(below + one.name)
        elif one.name != ".git":
            yield from _walked(root, f"{below}{one.name}/")


def contents(tree: Tree, entries: Sequence[Entry]) -> Iterator[tuple[Entry, bytes | Unread]]:
    """Yield the bytes of `entries`, or why there are none."""
    if tree.commit is None:
        yield from _from_work_tree(tree.root, entries)
    else:
        yield from _from_objects(tree.root, entries)


def _from_work_tree(root: Path, entries: Sequence[Entry]) -> Iterator[tuple[Entry, bytes | Unread]]:
    real_root = os.path.realpath(root)
    folders: dict[str, bool] = {}
    left_out = []
    for entry in entries:
        folder, _, _ = entry.path.rpartition("/")
        if folder not in folders:
            # A folder that has become a link leads elsewhere; git, too, takes its files for gone.
            here = f"{real_root}/{folder}".rstrip("/")
            folders[folder] = os.path.realpath(here) == here
        content = _content(f"{real_root}/{entry.path}") if folders[folder] else Unread("gone")
        if isinstance(content, Unread) and content.why == "gone" and not entry.checked_out:
            left_out.append(entry)
        else:
            yield entry, content
    if left_out:
        yield from _from_objects(root, left_out)


def _content(path: str) -> bytes | Unread:
    try:
        handle = os.open(path, _FLAGS)
    except (FileNotFoundError, NotADirectoryError):
        return Unread("gone")
    except OSError as error:
        return Unread("link") if Path(path).is_symlink() else Unread("refused", str(error.strerror))
    try:
        content = os.read(handle, _FIRST_READ)
        return content if len(content) < _FIRST_READ else _whole(handle, content)
    except IsADirectoryError:
        return Unread("gone")
    except OSError as error:
        return Unread("refused", str(error.strerror))
    finally:
        os.close(handle)


def _whole(handle: int, beginning: bytes) -> bytes | Unread:
    size = os.fstat(handle).st_size
    if size > LONGEST_SEARCHED:
        return Unread("too long", str(size))
    chunks = [beginning]
    while chunk := os.read(handle, max(_FIRST_READ, size)):
        chunks.append(chunk)
    return b"".join(chunks)


def _from_objects(root: Path, entries: Sequence[Entry]) -> Iterator[tuple[Entry, bytes | Unread]]:
    blobs = git.read_blobs(root, [entry.object_id or "" for entry in entries], LONGEST_SEARCHED)
    for entry, blob in zip(entries, blobs, strict=True):
        if blob.content is not None:
            yield entry, blob.content
        elif blob.size is not None:
            yield entry, Unread("too long", str(blob.size))
        else:
            yield entry, Unread("not in this clone")


def targets(tree: Tree, links: Sequence[Entry]) -> dict[str, str | None]:
    """Return the path that each link leads to in the end, by its own path; `None` is out of the tree."""
    if tree.commit is None:
        return {link.path: _real_target(tree.root, link.path) for link in links}
    texts = {entry.path: entry for entry in tree.entries if entry.kind == "link"}
    leads_to = {
        entry.path: os.fsdecode(content) if isinstance(content, bytes) else ""
        for entry, content in _from_objects(tree.root, list(texts.values()))
    }
    return {link.path: _followed(leads_to, link.path) for link in links}


def _real_target(root: Path, path: str) -> str | None:
    real_root = os.path.realpath(root)
    target = os.path.realpath(root / path)
    inside = os.path.commonpath([real_root, target]) == real_root
    return os.path.relpath(target, real_root).replace(os.sep, "/") if inside else None


def _followed(leads_to: dict[str, str], path: str) -> str | None:
    for _ in range(_MOST_LINKS):
        if path not in leads_to:
            return path
        path = posixpath.normpath(posixpath.join(posixpath.dirname(path), leads_to[path]))
        if path.startswith(("/", "..")):
            return None
    return path
