"""Read plans: from the work tree, from a revision or from the bytes of one version; every fault is told."""

from __future__ import annotations

import posixpath
import re
from collections.abc import Iterator, Sequence
from pathlib import Path
from typing import Any, TypeVar

from gatecheck import git
from gatecheck.errors import CannotJudge
from gatecheck.git import Entry
from gatecheck.globs import matches
from gatecheck.model.plan import Plan
from gatecheck.model.promise import PlanInTree
from gatecheck.model.seal import Seal
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Place, Problem
from gatecheck.plans.canonical import whole_digest_of
from gatecheck.plans.checks import faults_between
from gatecheck.scan.candidates import is_pointer
from gatecheck.scan.flaws import flaws_of
from gatecheck.scan.readers import READERS, suffix_of
from gatecheck.scan.readers.document import Document
from gatecheck.scan.tree import Tree, Unread, contents, listed
from gatecheck.scan.unread import as_text, of_links
from gatecheck.schema.read import Fault, read

#: A longer file is not read as a plan, in bytes.
LONGEST = 1 << 20

_SUFFIXES = frozenset({".json", ".yaml", ".yml"})
_DECLARATION = re.compile(rb"gatecheck[\"']?\s*:\s*[\"']?plan/")
_LINK = "commit the file itself in its place"
M = TypeVar("M")


@struct
class PlanFile:
    """A file that was read as a plan: the plan and its parsed document, or what is wrong with it.

    `line` is the 1-based line where the document begins.
    """

    path: str
    plan: Plan | None
    document: Any
    problems: tuple[Problem, ...] = ()
    line: int = 1


def read_plan(root: Path, path: str, revision: str | None = None) -> PlanFile | None:
    """Read the plan at `path`, relative to `root`, in the work tree or at `revision`; `None` where there is none.

    A symbolic link is not followed, and nothing outside `root` is read.

    Raises
    ------
    CannotJudge
        Git fails, or does not know the revision.
    """
    inside = tidy(path)
    if inside is None:
        return None
    content = bytes_of(root, inside, revision)
    if isinstance(content, Problem):
        return PlanFile(inside, None, None, (content,))
    return None if content is None else plan_of(inside, content)


def plan_of(path: str, content: bytes) -> PlanFile:
    """Read the bytes of the file `path` as a plan."""
    shown_path = as_text(path)
    plan, document, problems = _read_as(Plan, shown_path, content, "the plan")
    if plan is not None and document is not None:
        problems = tuple(_problem(document, fault, "the plan") for fault in faults_between(plan))
    if problems or document is None:
        return PlanFile(shown_path, None, None, problems)
    return PlanFile(shown_path, plan, document.value, (), document.place.line)


def seal_of(path: str, content: bytes) -> tuple[Seal | None, tuple[Problem, ...]]:
    """Read the bytes of the file `path` as a seal."""
    seal, _, problems = _read_as(Seal, as_text(path), content, "the seal")
    return seal, problems


def plans_in_tree(
    root: Path, include: Sequence[str], revision: str | None = None
) -> tuple[tuple[PlanInTree, ...], tuple[Problem, ...]]:
    """Return the documents below `root` that `include` names and that declare themselves plans, sorted by path.

    Also returns the problems of those that cannot be read, and of files that may be plans and cannot be opened.

    Raises
    ------
    CannotJudge
        `root` is no folder, git fails, or the revision is not known.
    """
    tree = listed(root, revision)
    named = [one for one in tree.entries if may_be_plan(one.path) and matches(include, one.path)]
    links, seen = [one for one in named if one.kind == "link"], set()
    files: list[PlanFile] = []
    problems: list[Problem] = []
    for entry, content in contents(tree, [one for one in named if one.kind in {"file", "unmerged"}]):
        if isinstance(content, bytes):
            seen.add(entry.path)
            files.extend(_declared(entry.path, content))
        elif content.why == "link":
            links.append(entry)
        elif content.why != "gone":
            problems.append(_unread(entry.path, content))
    problems += [*of_links(tree, links, seen), *(problem for file in files for problem in file.problems)]
    plans = (
        PlanInTree(one.path, one.line, one.plan, whole_digest_of(one.document))
        for one in files
        if one.plan is not None
    )
    return tuple(sorted(plans, key=lambda one: one.path)), tuple(sorted(problems))


def may_be_plan(path: str) -> bool:
    """Whether a file of that name may be a plan."""
    return suffix_of(path) in _SUFFIXES


def _declared(path: str, content: bytes) -> Iterator[PlanFile]:
    if _DECLARATION.search(content.replace(b"\0", b"")) or is_pointer(content):
        yield plan_of(path, content)


def tidy(path: str) -> str | None:
    """Return `path` in its shortest form, or `None` where it leads out of the folder that it is relative to."""
    short = posixpath.normpath(path)
    outside = "\0" in path or short == ".." or short.startswith(("/", "../"))
    return None if outside else short


def bytes_of(root: Path, path: str, revision: str | None = None) -> bytes | Problem | None:
    """Return the bytes of the file `path`, a tidy path, `None` where there is none, or why it cannot be read.

    Raises
    ------
    CannotJudge
        Git fails, or does not know the revision.
    """
    if revision is not None:
        commit = git.resolve(root, revision)
        try:
            return git.read_file_at(root, commit, path)
        except CannotJudge as stop:
            return Problem(Place(as_text(path)), stop.message, stop.advice)
    try:
        ((_, content),) = contents(Tree(root, None, ()), [Entry(path)])
    except OSError:  # a name that no file can have, such as one of 300 letters
        return None
    if isinstance(content, bytes):
        return content
    return None if content.why == "gone" else _unread(path, content)


def too_long(path: str, size: int) -> Problem:
    """Return the problem of a file of `size` bytes that is to be read as a plan or a seal."""
    message = f"the file has {size} bytes, and plans and their seals are read up to {LONGEST}"
    return Problem(Place(as_text(path)), message, "keep data and figures apart from the plan")


def _read_as(
    model: type[M], path: str, content: bytes, what: str
) -> tuple[M | None, Document | None, tuple[Problem, ...]]:
    """Read the one document in `content` into `model`: the value and the document, or all that is wrong."""
    document, problems = _document(path, content, what)
    if document is None:
        return None, None, problems
    value, faults = _read_whole(model, document.value)
    return value, document, tuple(_problem(document, fault, what) for fault in faults)


def _read_whole(model: type[M], document: Any) -> tuple[M | None, tuple[Fault, ...]]:
    flaws, readable = flaws_of(document)
    flawed = [flaw.path for flaw in flaws]
    value, faults = read(model, document) if readable else (None, ())
    # A refused value is no value of any type, which its own sentence says better than the fault it leads to.
    faults = (*flaws, *(fault for fault in faults if not any(fault.path[: len(at)] == at for at in flawed)))
    return (None if faults else value), faults


def _document(path: str, content: bytes, what: str) -> tuple[Document | None, tuple[Problem, ...]]:
    if suffix_of(path) not in _SUFFIXES:
        message = f"{what} has a suffix that no reader of plans knows"
        return None, (Problem(Place(path), message, "name it .yaml, .yml or .json"),)
    if is_pointer(content):
        return None, (Problem(Place(path), f"{what} is a Git LFS pointer", "keep it in git itself"),)
    if len(content) > LONGEST:
        return None, (too_long(path, len(content)),)
    outcomes = READERS[suffix_of(path)](path, content)
    problems = tuple(one for one in outcomes if isinstance(one, Problem))
    documents = [one for one in outcomes if isinstance(one, Document)]
    if problems or len(documents) == 1:
        return (None, problems) if problems else (documents[0], ())
    return None, (Problem(Place(path), f"{what} holds {len(documents)} documents", "write one document"),)


def _problem(document: Document, fault: Fault, what: str) -> Problem:
    where = Place(document.place.path, document.locate(fault.path))
    return Problem(where, f"{git.safe(fault.field) if fault.path else what} {fault.message}", fault.advice)


def _unread(path: str, unread: Unread) -> Problem:
    where = Place(as_text(path))
    match unread.why:
        case "link":
            return Problem(where, "the file is a symbolic link, which is not followed", _LINK)
        case "refused":
            message = f"the file cannot be opened ({git.safe(unread.says)})"
            return Problem(where, message, "mend its permissions")
        case "too long":
            return too_long(path, int(unread.says))
    return Problem(where, "the content of the file is not in this clone", "clone without --filter")
