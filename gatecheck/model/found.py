"""What a scan finds in a tree: records with their places, and problems."""

from __future__ import annotations

import json
from typing import Any

from gatecheck.model.record import Record
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Place, Problem


@struct
class Found:
    """One record, where it stands, and the document that it was read from.

    `also_at` names further places that hold the same document, as a notebook output beside its file does.
    """

    record: Record
    at: Place
    document: Any
    also_at: tuple[Place, ...] = ()

    @property
    def digest(self) -> str:
        """The SHA-256 digest of the document's canonical JSON."""
        import hashlib  # noqa: PLC0415  # costs start-up time, and most records need no digest

        canonical = json.dumps(self.document, sort_keys=True, separators=(",", ":"), ensure_ascii=True)
        return hashlib.sha256(canonical.encode()).hexdigest()


@struct
class Scan:
    """All that a scan found, sorted by place; `files` counts the files that were looked at."""

    found: tuple[Found, ...]
    problems: tuple[Problem, ...]
    files: int
