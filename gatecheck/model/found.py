"""What a scan finds in a tree: records with their places, and problems."""

from __future__ import annotations

import json
from typing import Any

from gatecheck.model.record import Record
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Place, Problem

#: The fields of a record whose content a permission to merge rests on.
NUMBERS = ("test", "estimate", "sample", "alternative", "prior", "family", "look", "screen", "compares", "design")


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
        return _digest(self.document)

    def permission_digest(self, also: tuple[str, ...] = ()) -> str:
        """The digest of what a permission rests on: `sha256:` and 64 hexadecimal digits.

        It covers the fields `NUMBERS` of the document and those in `also` as they are written there, the status,
        the aim, importance and harm as they are read, and whether anything is claimed. Unless `also` names them,
        another wording of the claim, other tags or another provenance leave it as it is; a number written in
        another way changes it.
        """
        rests_on = {name: self.document.get(name) for name in (*NUMBERS, *also)}
        record = self.record
        kind = [record.status, record.aim, record.importance, record.harm, record.claim is not None]
        return f"sha256:{_digest([rests_on, kind])}"


def _digest(document: Any) -> str:
    import hashlib  # noqa: PLC0415  # costs start-up time, and most records need no digest

    canonical = json.dumps(document, sort_keys=True, separators=(",", ":"), ensure_ascii=True)
    return hashlib.sha256(canonical.encode()).hexdigest()


@struct
class Scan:
    """All that a scan found, sorted by place; `files` counts the files that were looked at."""

    found: tuple[Found, ...]
    problems: tuple[Problem, ...]
    files: int
