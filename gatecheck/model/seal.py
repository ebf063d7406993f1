"""The seal of a plan: the digest of what it promised when it was frozen (`seal/1`)."""

from __future__ import annotations

from typing import Annotated, Literal

from gatecheck.model.marks import Pattern
from gatecheck.model.record import Identifier, Text
from gatecheck.model.struct import struct

PlanDigest = Annotated[
    str, Pattern(r"^sha256:[0-9a-f]{64}$", "sha256: and 64 hexadecimal digits, as `gatecheck seal` writes them")
]


@struct
class Seal:
    """The digest of a plan as it was frozen."""

    gatecheck: Annotated[Literal["seal/1"], "kind and version of this document"]
    plan: Annotated[Text, "name of the file of the plan, beside which this file lies"]
    id: Annotated[Identifier, "id of the plan"]
    digest: Annotated[PlanDigest, "SHA-256 digest of the canonical JSON of the plan, without its deferred slots"]
