"""What a result was made from, against what is in the tree now."""

from __future__ import annotations

from typing import Literal

from gatecheck.model.struct import struct

Unhashed = Literal["missing", "outside", "no file", "refused", "too long", "not in this clone"]
InputState = Literal["same", "changed", "missing", "unknown"]


@struct
class FileHash:
    """The SHA-256 digest of a file in 64 hexadecimal digits, or why there is none.

    `also` holds the digests of the same text with other line ends, which a checkout may have given it.
    """

    sha256: str = ""
    also: frozenset[str] = frozenset()
    why: Unhashed | None = None


@struct
class InputFact:
    """One input of a record: the digest that the record gives, the one found, and how they compare.

    Where the state is `unknown`, `why` says so in words that follow the path.
    """

    path: str
    state: InputState
    recorded: str = ""
    found: str = ""
    why: str = ""


@struct
class Freshness:
    """What stands behind one record: its inputs, and whether its code changed in a later commit.

    `code_is_newer` is `None` where that is not known, as where no code is named or nothing is committed.
    """

    inputs: tuple[InputFact, ...] = ()
    code: str | None = None
    code_is_newer: bool | None = None
