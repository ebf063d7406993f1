"""A clean copy of the tree: what git tracks, and what it does not ignore, without the records that stand there."""

from __future__ import annotations

import json
import os
import shutil
from collections.abc import Iterable, Iterator, Sequence
from pathlib import Path
from typing import Any

from gatecheck import git
from gatecheck.errors import CannotJudge
from gatecheck.git import Entry, safe
from gatecheck.model.found import Scan
from gatecheck.model.struct import struct
from gatecheck.scan.candidates import is_pointer
from gatecheck.scan.tree import Tree, contents, listed, targets
from gatecheck.scan.unread import as_text

_NOTEBOOK = ".ipynb"
#: The specification of Git LFS allows a pointer less (https://github.com/git-lfs/git-lfs, docs/spec.md).
_LONGEST_POINTER = 1024
_MOST_NAMED = 3


@struct
class Copy:
    """The folder in the copy that stands for the judged one, and what the copy lacks, in sentences."""

    folder: Path
    notes: tuple[str, ...]


def copied(root: Path, into: Path) -> Copy:
    """Copy the repository around `root`, or `root` where there is none, to the empty folder `into`.

    Changes that are not committed are copied as they stand. The copy is a repository of its own, without commits,
    so that analysis code finds the same root.

    Raises
    ------
    CannotJudge
        `root` is no folder, git fails, or the copy cannot be written.
    """
    real_root = Path(os.path.realpath(root))
    repository = git.toplevel(root) if root.is_dir() else None
    top = Path(os.path.realpath(repository or root))
    tree = listed(top, None)
    try:
        notes = tuple(_copy(tree, into))
        folder = into / real_root.relative_to(top)
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        why = safe(str(error.strerror))
        raise CannotJudge(
            f"the tree cannot be copied to {safe(str(into))} ({why})", "see that there is room to write"
        ) from error
    if repository is not None:
        git.checked(into, "init", *git.run(into, "init", "--quiet", "--template="))
    return Copy(folder, notes)


@struct
class _Sorted:
    """The entries of a tree by how they are copied; `absent` are files that a sparse checkout leaves out."""

    files: list[Entry]
    links: list[Entry]
    repositories: list[Entry]
    absent: list[Entry]


def _copy(tree: Tree, into: Path) -> Iterator[str]:
    """Copy the files, then the links, and yield what is told of those that are not there as they should be."""
    found = _sorted(tree)
    refused = [one for one in found.files if not _copied_file(tree.root / one.path, into / one.path)]
    for entry, content in contents(tree, found.absent):
        if isinstance(content, bytes):
            _written(into / entry.path, content)
        else:
            refused.append(entry)
    outside = _left_out_links(tree, found.links, into)
    pointers = [one for one in found.files if _is_pointer(into / one.path)]
    yield from _told("Not copied, as repositories inside this one are not", found.repositories)
    yield from _told("Not copied, as symbolic links out of the tree are not", outside)
    yield from _told("Not copied, as they cannot be read", refused)
    yield from _told("Copied as pointers of Git LFS, without the content that these stand for", pointers)


def _sorted(tree: Tree) -> _Sorted:
    found = _Sorted([], [], [], [])
    for entry in tree.entries:
        source = tree.root / entry.path
        if os.path.realpath(source.parent) != str(source.parent):
            continue  # behind a folder that has become a link, git takes it for gone
        if source.is_symlink():
            found.links.append(entry)
        elif entry.kind == "submodule":
            found.repositories.append(entry)
        elif source.exists():
            found.files.append(entry)
        elif not entry.checked_out:
            found.absent.append(entry)
    return found


def _copied_file(source: Path, target: Path) -> bool:
    """Copy a file with its permissions, as far as it can be read."""
    target.parent.mkdir(parents=True, exist_ok=True)
    if not source.is_file() or not os.access(source, os.R_OK):
        return False
    shutil.copy(source, target)
    return True


def _written(target: Path, content: bytes) -> None:
    target.parent.mkdir(parents=True, exist_ok=True)
    target.write_bytes(content)


def _left_out_links(tree: Tree, links: Sequence[Entry], into: Path) -> list[Entry]:
    """Make the links anew, each to what it leads to in the end, and return those that lead out of the tree.

    What is written through a link in the copy stays in the copy.
    """
    outside = []
    for entry, target in zip(links, targets(tree, links).values(), strict=True):
        if target is None:
            outside.append(entry)
            continue
        link = into / entry.path
        link.parent.mkdir(parents=True, exist_ok=True)
        link.symlink_to(os.path.relpath(into / target, link.parent))
    return outside


def _is_pointer(file: Path) -> bool:
    return file.is_file() and file.stat().st_size <= _LONGEST_POINTER and is_pointer(file.read_bytes())


def _told(what: str, entries: Sequence[Entry]) -> Iterator[str]:
    if entries:
        named = ", ".join(safe(as_text(entry.path)) for entry in entries[:_MOST_NAMED])
        more = f" and {len(entries) - _MOST_NAMED} more" if len(entries) > _MOST_NAMED else ""
        yield f"{what}: {named}{more}."


def without_records(folder: Path, in_tree: Scan, notebooks: Iterable[str]) -> None:
    """Take the records of `in_tree` out of the copy at `folder`, so that only those from a run are in it.

    A file of records is removed, even if it holds anything else; a notebook keeps its cells and loses all
    outputs, and so do `notebooks` (other paths among them are passed over).
    """
    places = {place.path for found in in_tree.found for place in (found.at, *found.also_at)}
    for path in sorted({*places, *notebooks}):
        if path.lower().endswith(_NOTEBOOK):
            _strip(folder / path)
        elif path in places:
            (folder / path).unlink(missing_ok=True)


def _strip(file: Path) -> None:
    """Take the outputs out of a notebook; one that cannot be read is left for its run to tell."""
    try:
        notebook: Any = json.loads(file.read_bytes())
    except (OSError, ValueError, RecursionError):
        return
    for cell in _list(notebook, "cells"):
        if isinstance(cell, dict) and "outputs" in cell:
            cell["outputs"] = []
            cell["execution_count"] = None
    file.write_text(json.dumps(notebook, indent=1), encoding="utf-8")


def _list(holder: Any, key: str) -> list[Any]:
    found = holder.get(key) if isinstance(holder, dict) else None
    return found if isinstance(found, list) else []
