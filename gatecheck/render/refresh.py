"""Linked numbers before and after they are written from the records, for people."""

from __future__ import annotations

import difflib
import re
from collections.abc import Iterator

from gatecheck.model.struct import struct
from gatecheck.model.verdict import Problem
from gatecheck.render.layout import BLANK_LINE, page, paragraph, problem, section
from gatecheck.render.order import problems_by_place
from gatecheck.render.text import plain
from gatecheck.render.words import count

_WORD = re.compile(r"\S+")
_OTHER_BLANK = re.compile(r"[^\S\t ]")
_CONTEXT = 1


@struct
class TextChange:
    """A text before and after; `name` says which it is, such as its path."""

    name: str
    before: str
    after: str


@struct
class Refreshed:
    """What came of it: the changes, the number of numbers in them, what stays as it is, and what is broken."""

    changes: tuple[TextChange, ...]
    numbers: int
    kept: tuple[Problem, ...]
    problems: tuple[Problem, ...]
    written: bool


def refreshed(done: Refreshed, width: int) -> str:
    """Return the unified diff, then what is left to do, as plain text of `width` columns."""
    diff = "".join(f"{_safe(line)}\n" for change in done.changes for line in _lines(change))
    kept = [problem(one, width) for one in problems_by_place(done.kept)]
    broken = [problem(one, width) for one in problems_by_place(done.problems)]
    account = page([
        section("Left as it is", kept, BLANK_LINE),
        section("Could not be read or linked", broken, BLANK_LINE),
        paragraph(_closing(done), width),
    ])
    return f"{diff}\n{account}" if diff else account


def _closing(done: Refreshed) -> str:
    if not done.numbers:
        return (
            "Every other linked number is that of its record."
            if done.kept
            else "No linked number is to be changed."
        )
    numbers = count(done.numbers, "linked number")
    if done.written:
        return f"{numbers} written from the records."
    return f"{numbers} to be changed; `gatecheck refresh --write` writes what is shown above."


def _lines(change: TextChange) -> Iterator[str]:
    before, after = change.before.split("\n"), change.after.split("\n")
    names = change.name, f"{change.name} (from the records)"
    return difflib.unified_diff(before, after, *names, n=_CONTEXT, lineterm="")


def _safe(line: str) -> str:
    """The line with its blanks, and with marks for what is not safe to print."""
    return _WORD.sub(lambda word: plain(word[0]), _OTHER_BLANK.sub(" ", line)).rstrip()
