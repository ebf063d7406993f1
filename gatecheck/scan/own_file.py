"""Read one named file that may be long because the gate itself wrote it: accepted shortfalls, a verdict."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import Any

from gatecheck import git
from gatecheck.errors import CannotJudge
from gatecheck.git import Entry
from gatecheck.model.verdict import Place, Problem
from gatecheck.scan.one_file import OneFile
from gatecheck.scan.readers import READERS, suffix_of
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
    import hashlib  # noqa: PLC0415  # costs start-up time, and most trees have no such file

    digest = f"sha256:{hashlib.sha256(content).hexdigest()}"
    reader = READERS.get(suffix_of(path))
    if reader is None:
        problem = Problem(Place(path), "the file has a suffix that no reader knows", "name it .json, .yaml or .yml")
        return OneFile(path, digest, None, (problem,))
    outcomes = reader(path, content)
    problems = tuple(one for one in outcomes if isinstance(one, Problem))
    documents = [one for one in outcomes if isinstance(one, Document)]
    if len(documents) != 1 and not problems:
        problems = (Problem(Place(path), f"the file holds {len(documents)} documents", "write one document"),)
    problems = problems or tuple(_problem(documents[0], fault) for fault in _refused(documents[0].value))
    return OneFile(path, digest, None if problems else documents[0], problems)


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
