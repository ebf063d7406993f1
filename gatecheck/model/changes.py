"""What the base of a pull request knows of the families of tests in it."""

from __future__ import annotations

from gatecheck.model.struct import struct


@struct
class FamilyBefore:
    """A family as the base has it: its largest declared size, and its members that the tree has no more."""

    size: int | None
    lost: tuple[str, ...]
