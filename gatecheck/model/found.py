"""What a scan finds in a tree: records with their places, and problems."""

from __future__ import annotations

from dataclasses import dataclass

from gatecheck.model.record import Record
from gatecheck.model.verdict import Place, Problem


@dataclass(frozen=True, slots=True)
class Found:
    """One record, where it stands, and the SHA-256 digest of its canonical JSON.

    `also_at` names further places that hold the same document, as a notebook output beside its file does.
    """

    record: Record
    at: Place
    digest: str
    also_at: tuple[Place, ...] = ()


@dataclass(frozen=True, slots=True)
class Scan:
    """All that a scan found, sorted by place; `files` counts the files that were looked at."""

    found: tuple[Found, ...]
    problems: tuple[Problem, ...]
    files: int
