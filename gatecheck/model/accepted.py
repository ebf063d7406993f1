"""Shortfalls that a team accepts when it adopts the gate (`accepted/1`)."""

from __future__ import annotations

from typing import Annotated, Literal

from gatecheck.model.record import Identifier, Text
from gatecheck.model.struct import struct
from gatecheck.model.waivers import Digest


@struct
class AcceptedShortfall:
    """One shortfall that was there on adoption: of one rule on one record with the numbers that it had."""

    record: Annotated[Identifier, "id of the record"]
    rule: Annotated[Text, "name of the rule"]
    digest: Annotated[Digest, "digest of what the permission rests on"]


@struct
class Accepted:
    """The shortfalls that were there when the gate was adopted, and that do not block."""

    gatecheck: Annotated[Literal["accepted/1"], "kind and version of this document"]
    accepted: Annotated[tuple[AcceptedShortfall, ...], "the shortfalls"] = ()


@struct
class Adoption:
    """A list of accepted shortfalls to write: `entries`, of which `added` are new; `dropped` are taken off it."""

    entries: tuple[AcceptedShortfall, ...]
    added: int
    dropped: int
