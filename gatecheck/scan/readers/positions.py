"""Lines of the fields of a JSON text, worked out only when someone asks."""

from __future__ import annotations

import bisect
import contextlib
import json
import re
from dataclasses import dataclass, field

from gatecheck.schema.read import Path

# Takes every number as its digits, so that it stumbles over none.
_DECODER = json.JSONDecoder(parse_int=str, parse_float=str, parse_constant=str)
_FILLER = " \t\n\r,:"


@dataclass(slots=True)
class _Member:
    """Where a member of an object or array stands: its name (in an array its value), and its value."""

    start: int
    value: int


@dataclass(slots=True)
class Positions:
    """The positions in a JSON text that has been parsed without error."""

    text: str
    _members: dict[int, dict[str | int, _Member]] = field(default_factory=dict)
    _ends: list[int] | None = None

    def line(self, path: Path) -> int:
        """Return the 1-based line of the field at `path`, or of the nearest that exists around it."""
        first = self._filled(0)
        if not path:  # which is asked of every text, and needs no list of all ends of lines
            return self.text.count("\n", 0, first) + 1
        at = _Member(first, first)
        # What nests too deep for the parser is refused; until then the line is that of what stands around it.
        with contextlib.suppress(KeyError, RecursionError):
            for step in path:
                at = self._inside(at.value)[step]
        return self._line_of(at.start)

    def _line_of(self, offset: int) -> int:
        # A text on one line has no ends of lines, and must not be searched for them again and again.
        if self._ends is None:
            self._ends = [found.start() for found in re.finditer("\n", self.text)]
        return bisect.bisect_left(self._ends, offset) + 1

    def _filled(self, offset: int) -> int:
        """Return the offset of the next thing from `offset` on."""
        while self.text[offset] in _FILLER:
            offset += 1
        return offset

    def _inside(self, start: int) -> dict[str | int, _Member]:
        """Return the members of what starts at `start`; of a key that stands twice, the later."""
        if start not in self._members:
            reads = {"{": self._of_object, "[": self._of_array}.get(self.text[start])
            self._members[start] = reads(start + 1) if reads else {}
        return self._members[start]

    def _of_object(self, offset: int) -> dict[str | int, _Member]:
        members: dict[str | int, _Member] = {}
        offset = self._filled(offset)
        while self.text[offset] != "}":
            key, end = _DECODER.raw_decode(self.text, offset)
            value = self._filled(end)
            members[key] = _Member(offset, value)
            offset = self._filled(_DECODER.raw_decode(self.text, value)[1])
        return members

    def _of_array(self, offset: int) -> dict[str | int, _Member]:
        members: dict[str | int, _Member] = {}
        offset = self._filled(offset)
        while self.text[offset] != "]":
            members[len(members)] = _Member(offset, offset)
            offset = self._filled(_DECODER.raw_decode(self.text, offset)[1])
        return members
