"""Text from outside as it stands literally in the page; one without end is cut."""

from __future__ import annotations

from gatecheck.render.text import cut, html, plain

_LONGEST = 4000


def cleaned(text: str) -> str:
    """Return the text as one line that is safe to print, cut where it has no end."""
    return cut(plain(text), _LONGEST)


def literal(piece: str) -> str:
    """Return a piece of a cleaned text as it stands in an element or an attribute, with the blanks at its ends."""
    bare = piece.strip(" ")
    return piece.replace(bare, html(bare), 1) if bare else piece


def with_units(escaped: str) -> str:
    """Return escaped text in which a number stays with its unit."""
    return escaped.replace(" %", "\u00a0%")


def said(text: str) -> str:
    """Return text as it stands literally in the page."""
    return with_units(html(cleaned(text)))
