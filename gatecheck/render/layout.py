"""Paragraphs of plain text at a given width: the only way by which text reaches a terminal or a log."""

from __future__ import annotations

import textwrap

from gatecheck.model.verdict import Problem
from gatecheck.render import words
from gatecheck.render.text import plain

NARROWEST = 40
_INDENT = "  "
_LABEL_WIDTH = 9
BLANK_LINE = "\n\n"
_HARD_SPACE = "\u00a0"


def paragraph(text: str, width: int, first: str = "", later: str | None = None) -> str:
    """Return `text`, cleaned and wrapped; `first` and `later` stand before its first and its other lines.

    Words are never broken, so a longer one makes a longer line. Cleaning comes before wrapping, and wrapping only
    takes apart: it cannot put a command together.
    """
    lines = textwrap.wrap(
        # A number stays with its unit.
        plain(text).replace(" %", f"{_HARD_SPACE}%"),
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
