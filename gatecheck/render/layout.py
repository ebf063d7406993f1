"""Paragraphs of plain text at a given width: the only way by which text reaches a terminal or a log."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable

from gatecheck.model.verdict import Problem
from gatecheck.render import words
from gatecheck.render.text import plain

NARROWEST = 40
_INDENT = "  "
_LABEL_WIDTH = 9
BLANK_LINE = "\n\n"
#: Between records that hold blank lines themselves, so that it is seen where one ends.
TWO_BLANK_LINES = "\n\n\n"
#: SOURCE: ECMA-48, select graphic rendition, parameters 1 and 22 (from memory).
_BOLD, _NOT_BOLD = "\x1b[1m", "\x1b[22m"
_HARD_SPACE = "\u00a0"
#: Not broken across lines: a number stays with its unit, a name with its value, a formula in one piece.
_WHOLE = (" %", " = ", "-e p ln p")


def paragraph(text: str, width: int, first: str = "", later: str | None = None) -> str:
    """Return `text`, cleaned and wrapped; `first` and `later` stand before its first and its other lines.

    Words are never broken, so a longer one makes a longer line. Cleaning comes before wrapping, and wrapping only
    takes apart: it cannot put a command together.
    """
    cleaned = plain(text)
    for whole in _WHOLE:
        cleaned = cleaned.replace(whole, whole.replace(" ", _HARD_SPACE))
    lines = textwrap.wrap(
        cleaned,
        width=max(width, NARROWEST),
        initial_indent=first,
        subsequent_indent=first if later is None else later,
        break_long_words=False,
        break_on_hyphens=False,
    )
    return "\n".join(lines).replace(_HARD_SPACE, " ")


def item(text: str, width: int) -> str:
    """Return one entry of a list of short entries."""
    return paragraph(text, width, _INDENT, _INDENT * 2)


def entry(name: str, texts: Iterable[str], width: int, *, bold: bool) -> str:
    """Return a name with the paragraphs that are told of it below."""
    below = (paragraph(text, width, _INDENT * 2, _INDENT * 3) for text in texts)
    return "\n".join([strong(item(name, width), bold=bold), *below])


def strong(lines: str, *, bold: bool) -> str:
    """Return finished lines in bold type where a terminal shows it, and else as they are.

    It comes after cleaning and wrapping, so it changes neither, and no text can bring such a mark along.
    """
    if not bold:
        return lines
    return "\n".join(_in_bold(line) for line in lines.split("\n"))


def _in_bold(line: str) -> str:
    words = line.lstrip(" ")
    return f"{line[: len(line) - len(words)]}{_BOLD}{words}{_NOT_BOLD}"


def labelled(label: str, text: str, width: int) -> str:
    """Return a paragraph beside its label."""
    first = f"{_INDENT}{label:<{_LABEL_WIDTH}}"
    return paragraph(text, width, first, " " * len(first))


def problem(found: Problem, width: int) -> str:
    """Return a problem with its place and what to do about it."""
    return "\n".join(
        [
            item(words.where(found.at), width),
            labelled("Found", words.sentence(found.message), width),
            labelled("To mend", words.sentence(found.advice), width),
        ],
    )


def finding(found: str, remedy: str, width: int) -> str:
    """Return what a rule found and, where it says so, what would mend it."""
    why = labelled("Why", found, width)
    return f"{why}\n{labelled('To mend', words.sentence(remedy), width)}" if remedy else why


def section(title: str, entries: list[str], gap: str = "\n") -> str:
    """Return the entries under their title, or nothing where there are none."""
    return f"{title}\n\n{gap.join(entries)}" if entries else ""


def page(parts: list[str]) -> str:
    """Return the parts that are not empty, a blank line between them."""
    return BLANK_LINE.join(part for part in parts if part) + "\n"
