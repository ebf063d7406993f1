"""What a policy says of plans: where they lie, and whose word counts for when they were made."""

from __future__ import annotations

from typing import Annotated

from gatecheck.model.marks import OneOrMore
from gatecheck.model.record import Text
from gatecheck.model.struct import struct


@struct
class PlanSettings:
    """Where plans lie, and whose signatures and time stamps on them count."""

    include: Annotated[tuple[Text, ...], OneOrMore(), "globs of the paths where plans lie"] = ("plans/**",)
    signers: Annotated[
        Text | None, "path of the file of allowed signers (of SSH keys), as it stands on the base"
    ] = None
    authorities: Annotated[
        Text | None, "path of the PEM certificates of time-stamp authorities, as it stands on the base"
    ] = None
