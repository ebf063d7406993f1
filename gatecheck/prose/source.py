"""What a reader makes of a file of prose: passages, in which some stretches are hidden or no prose."""

from __future__ import annotations

import bisect
import functools
import itertools
import re
from collections.abc import Callable, Iterator
from dataclasses import dataclass

from gatecheck.model.struct import struct

_INK = re.compile(r"\S")


@struct
class Hidden:
    """A stretch of a passage that is no prose: code, a comment, an address; from `start` up to `end`.

    `marker` is the content of a comment that is a marker of ours, without its key word.
    """

    start: int
    end: int
    marker: str | None = None


#: Yields what is hidden in a text, in order and without overlap; every format of prose has one.
Dialect = Callable[[str], Iterator[Hidden]]


def stretches(
    opening: re.Pattern[str], opened: Callable[[str, re.Match[str]], Hidden | None], text: str
) -> Iterator[Hidden]:
    """Yield what `opened` makes of each match of `opening` in `text`, going on where a stretch ends."""
    at = 0
    while found := opening.search(text, at):
        at = found.end()
        one = opened(text, found)
        if one is not None:
            at = one.end
            yield one


@dataclass(eq=False, repr=False)
class SourceFile:
    """A file of prose: its path relative to the judged folder, and its text without a byte order mark."""

    path: str
    text: str

    @functools.cached_property
    def _lines_end(self) -> list[int]:
        return list(itertools.accumulate([len(line) + 1 for line in self.text.split("\n")]))

    def line(self, offset: int) -> int:
        """Return the 1-based line of an offset in the text."""
        return bisect.bisect_right(self._lines_end, offset) + 1


def _same(offset: int) -> int:
    return offset


@dataclass(eq=False, repr=False)
class Passage:
    """A stretch of prose as its author wrote it.

    `in_file` gives the offset in the text of the file of one in `body`. `cell` is the 1-based number of the cell of
    a notebook that the passage is.
    """

    file: SourceFile
    body: str
    dialect: Dialect
    in_file: Callable[[int], int] = _same
    cell: int | None = None

    def line(self, offset: int) -> int:
        """Return the 1-based line in the file of an offset in `body`."""
        return self.file.line(self.in_file(offset))

    @functools.cached_property
    def hidden(self) -> tuple[Hidden, ...]:
        """What is no prose, in order."""
        return tuple(self.dialect(self.body))

    @functools.cached_property
    def visible(self) -> str:
        """The passage with blanks in place of what is hidden; every offset and line stays what it is."""
        pieces, end = [], 0
        for one in self.hidden:
            pieces += [self.body[end : one.start], _INK.sub(" ", self.body[one.start : one.end])]
            end = one.end
        return "".join([*pieces, self.body[end:]])
