"""What a reader makes of bytes: a document with its place, or a problem; and what all readers share."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from gatecheck.model.struct import struct
from gatecheck.model.verdict import Place, Problem
from gatecheck.schema.read import Path, shown

#: Deeper nesting than this is refused.
DEEPEST = 64
#: A longer text in a record is refused.
LONGEST_TEXT = 10_000
#: The media type of a record among the outputs of a notebook.
MEDIA_TYPE = "application/vnd.gatecheck.record+json"

_LONGEST_WHOLE = 400
_OURS = re.compile(r"^<{7} ", re.MULTILINE)
_THEIRS = re.compile(r"^>{7} ", re.MULTILINE)
_SAVE = "save the file as UTF-8"
_UNKNOWN = "leave the field out where it is unknown"


@struct
class Document:
    """One parsed document.

    `locate` gives the 1-based line of the field at a path, or of the nearest that exists around it. `output`
    is true for what stands in a notebook under the media type of records, and so must be one. `small` is true
    where the whole file is too small to hold a text or a list beyond measure.
    """

    value: Any
    place: Place
    locate: Callable[[Path], int]
    output: bool = False
    small: bool = False


@struct
class Refused:
    """Stands in a document for a value that its format cannot hold, in the words of a fault."""

    message: str
    advice: str


@dataclass(eq=False)
class Broken(Exception):  # noqa: N818  # it is what the text is
    """A text that is no document: the line, what is wrong after the words "the text", what to do."""

    line: int
    message: str
    advice: str

    def problem(self, path: str) -> Problem:
        """Return this as the problem of the file at `path`."""
        return Problem(Place(path, self.line), f"the text {self.message}", self.advice)


def is_wide(content: bytes) -> bool:
    """Whether `content` is written in units wider than a byte, as UTF-16 is."""
    return content[:2] in {b"\xff\xfe", b"\xfe\xff"} or b"\0" in content[:4]


def decoded(content: bytes) -> str:
    """Return `content` as text.

    Raises
    ------
    Broken
        It is not UTF-8.
    """
    if is_wide(content):
        raise Broken(1, "is UTF-16 or UTF-32, not UTF-8", _SAVE)
    try:
        return content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = content.count(b"\n", 0, error.start) + 1
        byte = f"byte 0x{content[error.start]:02X} at offset {error.start}"
        raise Broken(line, f"is not UTF-8: {byte}", _SAVE) from None


def conflict(text: str) -> Broken | None:
    """Return where `text` holds an unresolved merge, if it does."""
    ours = _OURS.search(text)
    if ours is None or _THEIRS.search(text, ours.end()) is None:
        return None
    line = text.count("\n", 0, ours.start()) + 1
    return Broken(line, "holds the conflict markers of a merge", "resolve the merge, and take the markers out")


def too_deep(line: int) -> Broken:
    """Return that a text nests too deep."""
    return Broken(line, f"is nested more than {DEEPEST} deep", "write the document flat, as its format is")


def whole(digits: str, base: int = 10) -> int | Refused:
    """Return the number that `digits` write in `base`; one beyond all use is refused."""
    if len(digits) > _LONGEST_WHOLE:
        return Refused(f"is a number of {len(digits)} digits", "give a number that a double can hold")
    return int(digits, base)


def real(digits: str) -> float | Refused:
    """Return the number that `digits` write; one too large for a double is refused."""
    number = float(digits)
    if number in {float("inf"), float("-inf")}:
        return Refused(f"is {shown(digits)[1:-1]}, too large for a double", "give a number that a double can hold")
    return number


def no_number(word: str) -> Refused:
    """Return the refusal of the constant `word`, such as NaN."""
    return Refused(f"is {word}, which is no number in JSON or in a record", _UNKNOWN)


def twice() -> Refused:
    """Return the refusal of a key that an object has already."""
    return Refused("is given twice", "keep one of the two")
