"""Read one named file that may be long because the gate itself wrote it: accepted shortfalls, a verdict."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import Any

from gatecheck import git
from gatecheck.errors import CannotJudge
from gatecheck.git import Entry
from gatecheck.model.verdict import Place, Problem
from gatecheck.scan.one_file import OneFile, file_of
from gatecheck.scan.readers.document import Document, Refused
from gatecheck.scan.tree import Tree, contents
from gatecheck.schema.read import Fault
from gatecheck.schema.read import Path as Field


def read_own(root: Path, path: str, revision: str | None = None) -> OneFile | None:
    """Read the file at `path`, relative to `root`, which may hold any number of values; `None` where there is none.

    Raises
    ------
    CannotJudge
        Git fails, or the file is there and cannot be read; a symbolic link is not followed.
    """
    content = _content(root, path) if revision is None else git.read_file_at(root, revision, path)
    if content is None:
        return None
    return file_of(path, content, _flaws)


def _flaws(document: Document) -> Iterator[Problem]:
    yield from (_problem(document, fault) for fault in _refused(document.value))


def _problem(document: Document, fault: Fault) -> Problem:
    field = f"{fault.field} " if fault.path else "the file "
    return Problem(Place(document.place.path, document.locate(fault.path)), f"{field}{fault.message}", fault.advice)


def _content(root: Path, path: str) -> bytes | None:
    entry = Entry(path)
    ((_, content),) = contents(Tree(root, None, (entry,)), [entry])
    if isinstance(content, bytes):
        return content
    if content.why == "gone" and not (root / path).is_dir():
        return None
    why = content.says or ("it is a symbolic link" if content.why == "link" else "it is no file")
    raise CannotJudge(f"{git.safe(path)} cannot be read ({git.safe(why)})", "make it a file that can be read")


def _refused(value: Any) -> Iterator[Fault]:
    """What the format of the file cannot hold, such as a key that stands twice, in the order of the file."""
    waiting: list[tuple[Field, Any]] = [((), value)]
    while waiting:
        path, one = waiting.pop()
        if isinstance(one, Refused):
            yield Fault(path, one.message, one.advice)
        elif isinstance(one, dict):
            waiting += [((*path, key), inner) for key, inner in reversed(one.items())]
        elif isinstance(one, list):
            waiting += [((*path, index), one[index]) for index in reversed(range(len(one)))]
