"""Read a file of permissions as it counts: at the base of a pull request, else in the tree."""

from __future__ import annotations

from pathlib import Path
from typing import Generic, TypeVar

from gatecheck import git
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Place, Problem
from gatecheck.scan.one_file import OneFile
from gatecheck.scan.own_file import read_own
from gatecheck.schema.read import Fault, read

M = TypeVar("M")


@struct
class Read(Generic[M]):
    """What a file of permissions says: `None` where there is none or it has problems; and notes for the account."""

    value: M | None
    file: OneFile | None
    problems: tuple[Problem, ...] = ()
    notes: tuple[str, ...] = ()


def read_permissions(root: Path, path: str, model: type[M], base: str | None) -> Read[M]:
    """Read the file at `path`, relative to `root`, into `model`; with `base` as it stands at that revision.

    Raises
    ------
    CannotJudge
        Git fails or does not know the base, or the file is there and cannot be read.
    """
    if base is None:
        return _read(read_own(root, path), model, ())
    revision = git.resolve(root, base)
    file = read_own(root, path, revision)
    return _read(file, model, _notes_on_base(path, revision, file, read_own(root, path)))


def _read(file: OneFile | None, model: type[M], notes: tuple[str, ...]) -> Read[M]:
    if file is None or file.document is None:
        return Read(None, file, () if file is None else file.problems, notes)
    value, faults = read(model, file.document.value)
    return Read(value, file, tuple(problem(file, fault) for fault in faults), notes)


def problem(file: OneFile, fault: Fault) -> Problem:
    """Return a fault of the document in `file` with its place."""
    line = 1 if file.document is None else file.document.locate(fault.path)
    field = f"{fault.field} " if fault.path else "the file "
    return Problem(Place(file.path, line), f"{field}{fault.message}", fault.advice)


def _notes_on_base(path: str, revision: str, at_base: OneFile | None, here: OneFile | None) -> tuple[str, ...]:
    if (here and here.digest) == (at_base and at_base.digest):
        return ()
    what = "new" if at_base is None else "removed" if here is None else "changed"
    return (f"{path} is {what} here; what counts is the base, {revision[:12]}.",)
