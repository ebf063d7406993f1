"""Read one named file, such as the policy, in the work tree or at a revision."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator
from pathlib import Path

from gatecheck import git
from gatecheck.errors import CannotJudge
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Place, Problem
from gatecheck.scan.flaws import flaws_of
from gatecheck.scan.readers import READERS, suffix_of
from gatecheck.scan.readers.document import Document


@struct
class OneFile:
    """A file that was read: its SHA-256 digest, and the one document in it or what is wrong with it."""

    path: str
    digest: str
    document: Document | None
    problems: tuple[Problem, ...]


def read_one(root: Path, path: str, revision: str | None = None) -> OneFile | None:
    """Read the file at `path`, relative to `root`; `None` where there is none.

    Raises
    ------
    CannotJudge
        Git fails, or the file is there and cannot be read.
    """
    content = _content(root, path) if revision is None else git.read_file_at(root, revision, path)
    if content is None:
        return None
    return file_of(path, content, _flaws)


def file_of(path: str, content: bytes, flaws: Callable[[Document], Iterable[Problem]]) -> OneFile:
    """Return the one document in `content`, or what is wrong with it; `flaws` tells what it may not hold."""
    import hashlib  # noqa: PLC0415  # costs start-up time, and a tree without a policy does not need it

    digest = f"sha256:{hashlib.sha256(content).hexdigest()}"
    reader = READERS.get(suffix_of(path))
    if reader is None:
        problem = Problem(Place(path), "the file has a suffix that no reader knows", "name it .yaml, .yml or .json")
        return OneFile(path, digest, None, (problem,))
    outcomes = reader(path, content)
    problems = tuple(one for one in outcomes if isinstance(one, Problem))
    documents = [one for one in outcomes if isinstance(one, Document)]
    if len(documents) != 1 and not problems:
        problems = (Problem(Place(path), f"the file holds {len(documents)} documents", "write one document"),)
    problems = problems or tuple(flaws(documents[0]))
    return OneFile(path, digest, None if problems else documents[0], problems)


def _flaws(document: Document) -> Iterator[Problem]:
    """What no field may be, such as a key that stands twice, told before the document is read."""
    for flaw in flaws_of(document.value)[0]:
        where = Place(document.place.path, document.locate(flaw.path))
        yield Problem(
            where, f"{flaw.field} {flaw.message}" if flaw.path else f"the file {flaw.message}", flaw.advice
        )


def _content(root: Path, path: str) -> bytes | None:
    try:
        return (root / path).read_bytes()
    except (FileNotFoundError, NotADirectoryError):
        return None
    except OSError as error:
        raise CannotJudge(
            f"{git.safe(path)} cannot be read ({error.strerror})", "make it a file that can be read"
        ) from None
