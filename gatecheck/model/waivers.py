"""Waivers: permission to merge although a rule falls short (`waivers/1`)."""

from __future__ import annotations

from typing import Annotated, Literal

from gatecheck.model.marks import Pattern
from gatecheck.model.record import Identifier, Text
from gatecheck.model.struct import struct

Date = Annotated[str, Pattern(r"^[0-9]{4}-[0-9]{2}-[0-9]{2}$", "a date such as 2031-04-02")]
Digest = Annotated[str, Pattern(r"^(sha256:)?[0-9a-f]{64}$", "a SHA-256 digest in hexadecimal digits")]


@struct
class Waiver:
    """One permission: for one rule on one record with the numbers that it had."""

    record: Annotated[Identifier, "id of the record"]
    rule: Annotated[Text, "name of the rule"]
    reason: Annotated[Text, "why the claim may be merged all the same"]
    granted_on: Annotated[Date, "first day"]
    until: Annotated[Date, "last day"]
    digest: Annotated[Digest, "digest of what the permission rests on, as `gatecheck explain` prints it"]
    granted_by: Annotated[
        str | None, "who grants it, by name or e-mail: not the author of the result; without it, it does not apply"
    ] = None


@struct
class Waivers:
    """Permissions to merge although a rule falls short."""

    gatecheck: Annotated[Literal["waivers/1"], "kind and version of this document"]
    waivers: Annotated[tuple[Waiver, ...], "the permissions"] = ()
