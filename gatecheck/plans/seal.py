"""Freeze a plan: its digest is written beside it, and a seal is never overwritten."""

from __future__ import annotations

import json
import os
from dataclasses import replace
from pathlib import Path

from gatecheck.errors import CannotJudge
from gatecheck.git import safe
from gatecheck.model.seal import Seal
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Problem
from gatecheck.plans.canonical import digest_of
from gatecheck.plans.reading import bytes_of, read_plan, seal_of
from gatecheck.scan.unread import as_text

_SEAL = ".seal.json"
_STAMP = ".tsr"


@struct
class Sealed:
    """What sealing did: the digest, and whether the seal is new; or what is wrong with the plan."""

    digest: str = ""
    is_new: bool = False
    problems: tuple[Problem, ...] = ()


def seal_path(plan: str) -> str:
    """Return the path of the seal of the plan at the path `plan`: beside it, by its whole name."""
    return plan + _SEAL


def stamp_path(plan: str) -> str:
    """Return the path of the time-stamp token on the seal of the plan at the path `plan`."""
    return plan + _STAMP


def fits(seal: Seal, path: str, identifier: str, digest: str) -> bool:
    """Whether `seal` is that of the plan in the file `path`, with that id and digest."""
    return (seal.plan, seal.id, seal.digest) == (path.rpartition("/")[2], identifier, digest)


def seal_plan(path: Path) -> Sealed:
    """Seal the plan in the file `path`, where it is not sealed yet.

    Raises
    ------
    CannotJudge
        There is no plan, its seal cannot be read or written, or it is that of another version of the plan.
    """
    plan = read_plan(path.parent, path.name)
    if plan is None:
        raise CannotJudge(f"there is no plan {safe(str(path))}", "name a plan that is there")
    beside = seal_path(str(path))
    if plan.plan is None:
        named = as_text(str(path))
        return Sealed(problems=tuple(replace(one, at=replace(one.at, path=named)) for one in plan.problems))
    seal = Seal("seal/1", path.name, plan.plan.id, digest_of(plan.document))
    found = bytes_of(path.parent, seal_path(path.name))
    if found is None:
        _write(Path(beside), seal)
    else:
        _compare(beside, found, seal)
    return Sealed(seal.digest, is_new=found is None)


def text_of(seal: Seal) -> str:
    """Return the file of `seal`."""
    fields = {"gatecheck": seal.gatecheck, "plan": seal.plan, "id": seal.id, "digest": seal.digest}
    return json.dumps(fields, indent=2, ensure_ascii=True) + "\n"


def _write(path: Path, seal: Seal) -> None:
    try:
        with path.open("xb") as file:
            file.write(text_of(seal).encode("ascii"))
    except OSError as error:
        reason = os.strerror(error.errno or 0)
        raise CannotJudge(f"{safe(str(path))} cannot be written ({reason})", "make the folder writable") from None


def _compare(path: str, found: bytes | Problem, wanted: Seal) -> None:
    shown = safe(path)
    there, problems = (None, (found,)) if isinstance(found, Problem) else seal_of(path, found)
    if there is None:
        what = f"{problems[0].message}, at {safe(str(problems[0].at))}"
        raise CannotJudge(f"{shown} is there and cannot be read: {what}", "restore it from the history")
    if there.digest != wanted.digest:
        raise CannotJudge(
            f"the plan has changed since it was sealed: {shown} holds {there.digest}, and what the plan says now "
            f"has {wanted.digest}",
            "restore the plan and disclose the change under deviations of the record, or write a new plan file",
        )
    if (there.plan, there.id) != (wanted.plan, wanted.id):
        names = f"{safe(there.plan)} ({safe(there.id)})"
        raise CannotJudge(f"{shown} is the seal of the plan {names}", "restore it from the history")
