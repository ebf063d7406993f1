"""What the base of a pull request knows of the families of tests in it."""

from __future__ import annotations

from gatecheck.model.record import Procedure
from gatecheck.model.struct import struct


@struct
class FamilyBefore:
    """A family as the base has it: its largest declared size, and its members that are not in it in the tree.

    `procedures` holds those that its members declare there, without repeats and in order.
    """

    size: int | None
    lost: tuple[str, ...]
    procedures: tuple[Procedure, ...] = ()
