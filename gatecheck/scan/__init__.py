"""Scan: find the records in a tree by what they declare themselves to be, and name all that cannot be read.

Only a file whose suffix has a reader, and which the globs name, is looked at; only one whose bytes hold the
declaring key is parsed. What is parsed and turns out to be something else is passed over in silence.
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Iterator, Sequence
from pathlib import Path

from gatecheck.git import Entry
from gatecheck.globs import matches
from gatecheck.model.found import Found, Scan
from gatecheck.model.progress import Progress
from gatecheck.model.verdict import Problem
from gatecheck.scan.candidates import is_pointer, looks_declared, may_declare, may_hold
from gatecheck.scan.documents import judged
from gatecheck.scan.readers import READERS, suffix_of
from gatecheck.scan.readers.document import Document
from gatecheck.scan.tree import Tree, Unread, contents, listed
from gatecheck.scan.twins import position, settled
from gatecheck.scan.unread import as_text, of_files, of_folders, of_links, of_long, of_pointer, of_unmerged

File = tuple[Entry, bytes | Unread]
#: A longer file that declares something is not parsed, in bytes.
LONGEST_PARSED = 32 << 20


def scan(
    root: Path,
    include: Sequence[str],
    exclude: Sequence[str],
    revision: str | None = None,
    progress: Progress | None = None,
) -> Scan:
    """Find the records below `root`.

    In a git repository the tracked files and the untracked ones that are not ignored are read; a folder in no
    repository is walked. With `revision` the files are those of that commit.

    Parameters
    ----------
    root
        The folder to judge; all places are relative to it.
    include, exclude
        Globs of paths relative to `root`: a file is read if one of the first names it and none of the second.
    revision
        The commit to read in place of the work tree.
    progress
        Told after each file how many of them were read.

    Raises
    ------
    CannotJudge
        `root` is no folder, git fails, or the revision is not known.
    """
    tree = listed(root, revision)
    wanted = _wanted(tree, include, exclude)
    outcomes: list[Found | Problem] = []
    unread_files: list[tuple[Entry, Unread]] = []
    read: set[str] = set()
    files = _files(wanted)
    for entry, content in _told(contents(tree, files), len(files), progress):
        if isinstance(content, Unread):
            unread_files.append((entry, content))
        else:
            read.add(entry.path)
            outcomes.extend(_of_file(entry, content, include))
    links = [entry for entry in wanted if entry.kind == "link"]
    links += [entry for entry, unread in unread_files if unread.why == "link"]
    found, clashes = settled(one for one in outcomes if isinstance(one, Found))
    problems = (
        *(one for one in outcomes if isinstance(one, Problem)),
        *clashes,
        *of_files(unread_files),
        *of_links(tree, links, read),
        *of_folders(tree, include, exclude),
    )
    in_order = sorted(dict.fromkeys(problems), key=lambda one: (position(one.at), one.message))
    return Scan(found, tuple(in_order), len(read))


def scan_for(root: Path, ids: Collection[str], include: Sequence[str], exclude: Sequence[str]) -> tuple[Found, ...]:
    """Find the records in the work tree below `root` that have one of `ids` as their id or among their aliases.

    Only what may hold one of the ids is parsed; other records from there may stand among them, sorted by place. One
    that has an id among its aliases may share its own id with a record at an earlier place, which `scan` would
    find in its stead.

    Raises
    ------
    CannotJudge
        As `scan` does.
    """
    tree = listed(root, None)
    holds = may_hold(ids)
    outcomes = (
        one
        for entry, content in contents(tree, _files(_wanted(tree, include, exclude)))
        if isinstance(content, bytes) and holds(content) and may_declare(content)
        for one in _of_candidate(entry, content)
    )
    return settled(one for one in outcomes if isinstance(one, Found))[0]


def _wanted(tree: Tree, include: Sequence[str], exclude: Sequence[str]) -> list[Entry]:
    entries = [entry for entry in tree.entries if suffix_of(entry.path) in READERS]
    return [entry for entry in entries if matches(include, entry.path) and not matches(exclude, entry.path)]


def _files(entries: Sequence[Entry]) -> list[Entry]:
    return [entry for entry in entries if entry.kind in {"file", "unmerged"}]


def _told(read: Iterable[File], files: int, progress: Progress | None) -> Iterable[File]:
    """What is `read`, which tells `progress` where there is any as it goes."""
    return read if progress is None else _counted(read, files, progress)


def _counted(read: Iterable[File], files: int, progress: Progress) -> Iterator[File]:
    for number, file in enumerate(read, start=1):
        progress("Reading {:,} of {:,} files", number, files)
        yield file


def _of_file(entry: Entry, content: bytes, include: Sequence[str]) -> Iterable[Found | Problem]:
    if may_declare(content):
        return _of_candidate(entry, content)
    return of_pointer(as_text(entry.path), include) if is_pointer(content) else ()


def _of_candidate(entry: Entry, content: bytes) -> Iterator[Found | Problem]:
    path, suffix = as_text(entry.path), suffix_of(entry.path)
    ours = looks_declared(suffix, content)
    if entry.kind == "unmerged" or len(content) > LONGEST_PARSED:
        if ours:
            yield (of_unmerged(path) if entry.kind == "unmerged" else of_long(path, len(content), LONGEST_PARSED))
        return
    for one in READERS[suffix](path, content):
        if isinstance(one, Document):
            yield from judged(one)
        elif ours:
            yield one
