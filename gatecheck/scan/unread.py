"""What a scan could not read, said where silence would hide a record."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Literal

from gatecheck.git import Entry, safe
from gatecheck.globs import matches, name_inside
from gatecheck.model.verdict import Place, Problem
from gatecheck.scan.readers import READERS, suffix_of
from gatecheck.scan.tree import LONGEST_SEARCHED, Tree, Unread, targets

_ALL = {"**", "**/*"}
_MIB = 1 << 20
_OUT_OF_SCOPE = "leave it out of `scan.include`"


def as_text(path: str) -> str:
    """Return `path` for a place: bytes of the name that are not UTF-8 are written as escapes."""
    return path.encode("utf-8", "surrogateescape").decode("utf-8", "backslashreplace")


def of_files(unread: Sequence[tuple[Entry, Unread]]) -> Iterator[Problem]:
    """Yield a problem for each file that is there and has not been read; links have their own."""
    for entry, reason in unread:
        if reason.why == "too long":
            limit = f"a file is searched for records up to {LONGEST_SEARCHED // _MIB} MiB"
            yield _of_long(as_text(entry.path), int(reason.says), limit)
        elif reason.why == "refused":
            message = f"the file cannot be opened ({safe(reason.says)})"
            yield Problem(Place(as_text(entry.path)), message, "mend its permissions, or exclude it")
    missing = sorted(as_text(entry.path) for entry, reason in unread if reason.why == "not in this clone")
    if missing:
        files = "this file is" if len(missing) == 1 else f"this file and {len(missing) - 1} more are"
        message = f"the content of {files} not in this clone, which is a partial one"
        yield Problem(Place(missing[0]), message, "clone without --filter, or narrow `scan.include`")


def of_long(path: str, size: int, most: int) -> Problem:
    """Return the problem of a file that declares something and is longer than `most` bytes."""
    return _of_long(path, size, f"files of records are read up to {most // _MIB} MiB")


def _of_long(path: str, size: int, limit: str) -> Problem:
    message = f"the file has {size / _MIB:.1f} MiB; {limit}"
    return Problem(Place(path), message, "split it, or exclude it if it holds no records")


def of_unmerged(path: str) -> Problem:
    """Return the problem of a file with records whose merge has not been resolved."""
    return Problem(Place(path), "the file is in the middle of a merge", f"resolve it, then `git add {safe(path)}`")


def of_pointer(path: str, include: Sequence[str]) -> Iterator[Problem]:
    """Yield a problem for a Git LFS pointer that stands for a file of records.

    The pointer does not say what the file declares. It is taken for one of records where a glob other than
    the catch-all names it, or its name contains `.record.`; or any large file in LFS would block a scan.
    """
    if matches([glob for glob in include if glob not in _ALL], path) or ".record." in path.lower():
        message = "the file is a Git LFS pointer, so its content is not here"
        yield Problem(Place(path), message, "run `git lfs pull`; with actions/checkout, set `lfs: true`")


def of_links(tree: Tree, links: Sequence[Entry], read: set[str]) -> Iterator[Problem]:
    """Yield a problem for each symbolic link that does not lead to a file that has been read by itself."""
    for path, target in targets(tree, links).items() if links else ():
        if target is None:
            message = "a symbolic link out of the tree is not followed"
        elif target not in read:
            message = f"a symbolic link to {safe(target)}, which is not read itself, is not followed"
        else:
            continue
        yield Problem(Place(as_text(path)), message, "put a copy of the file in its place, or exclude the link")


def of_folders(tree: Tree, include: Sequence[str], exclude: Sequence[str]) -> Iterator[Problem]:
    """Yield a problem for each submodule, and each link without a reader, that a glob names paths inside of.

    Their files are not read. With globs that begin with `**`, which name no folder in particular, nothing is
    said: a vendored repository is then no more than one that nobody asked to judge.
    """
    for entry in tree.entries:
        kind = _kind_of_folder(tree, entry)
        if kind is None or not name_inside(include, entry.path) or matches(exclude, f"{entry.path}/any"):
            continue
        if kind == "submodule":
            message = "the files of a submodule, or of a repository inside this one, are not read"
            advice = f"judge them in their own repository, and {_OUT_OF_SCOPE}"
        else:
            message = "a symbolic link to a folder is not followed"
            advice = f"name the folder that it leads to, and {_OUT_OF_SCOPE}"
        yield Problem(Place(as_text(entry.path)), message, advice)


def _kind_of_folder(tree: Tree, entry: Entry) -> Literal["submodule", "link"] | None:
    if entry.kind == "submodule":
        return entry.kind
    # Git does not say which of the files that it does not track are links.
    untracked = entry.kind == "file" and entry.object_id is None
    if (entry.kind != "link" and not untracked) or suffix_of(entry.path) in READERS:
        return None
    return "link" if entry.kind == "link" or (tree.root / entry.path).is_symlink() else None
