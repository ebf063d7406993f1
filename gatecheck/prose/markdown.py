"""Markdown, also of notebooks, Quarto and R Markdown: code, comments and addresses are no prose.

A marker is an HTML comment: `<!-- gatecheck: ID FIELD -->`.
"""

from __future__ import annotations

import re
from collections.abc import Iterator

from gatecheck.prose.markers import marker_in
from gatecheck.prose.source import Hidden, stretches

_OPENING = re.compile(r"`+|~{3,}|<!--|\]\(|https?://|\n[ \t]*\n(?: {4}|\t)")
_BEFORE_FENCE = re.compile(r"[ \t>]*")
_FENCE = 3
_DESTINATION = re.compile(r"[^\s)]*")
_ADDRESS = re.compile(r"[^\s<>)\]\"']*")
_INDENTED = re.compile(r"(?:(?: {4}|\t)[^\n]*(?:\n|\Z)|[ \t]*\n)+")
_BLANK_LINE = re.compile(r"\n[ \t]*\n")
_LIST_ITEM = re.compile(r"[ \t]+\S|[ \t]*(?:[-*+]|\d{1,9}[.)])[ \t]")
#: A span of inline code is looked for no further, in characters.
_LONGEST_SPAN = 10_000


def hidden(text: str) -> Iterator[Hidden]:
    """Return code blocks, inline code, comments, and the addresses of links, in order."""
    return stretches(_OPENING, _opened, text)


def _opened(text: str, found: re.Match[str]) -> Hidden | None:
    opening, start = found[0], found.start()
    if opening == "<!--":
        closing = text.find("-->", start + 2)  # `<!-->` is a whole comment
        if closing < 0:  # it hides all that follows
            return Hidden(start, len(text), marker_in(text[found.end() :]))
        return Hidden(start, closing + 3, marker_in(text[found.end() : closing]))
    if opening[0] == "\n":
        return _indented(text, start)
    if opening[0] in "`~" and len(opening) >= _FENCE and _opens_line(text, start):
        return _fenced(text, found)
    if opening[0] == "`":
        return _inline(text, found)
    rest = {"]": _DESTINATION, "h": _ADDRESS}.get(opening[0])
    end = found.end() if rest is None else _end(rest, text, found.end())
    return None if rest is None else Hidden(start, end)


def _end(pattern: re.Pattern[str], text: str, at: int) -> int:
    found = pattern.match(text, at)
    return found.end() if found else at


def _opens_line(text: str, start: int) -> bool:
    line = text.rfind("\n", max(0, start - _LONGEST_SPAN), start) + 1
    return _BEFORE_FENCE.fullmatch(text, line, start) is not None


def _fenced(text: str, found: re.Match[str]) -> Hidden:
    """A block up to the fence that closes it, or to the end."""
    closing = re.compile(rf"^[ \t>]*{found[0][0]}{{{len(found[0])},}}[ \t\r]*$", re.MULTILINE)
    last = closing.search(text, found.end())
    return Hidden(found.start(), last.end() if last else len(text))


def _inline(text: str, found: re.Match[str]) -> Hidden | None:
    """A span up to the next run of as many backticks in the paragraph; backticks without one are text."""
    most = found.end() + _LONGEST_SPAN
    blank = _BLANK_LINE.search(text, found.end(), most)
    runs = re.compile("`+").finditer(text, found.end(), blank.start() if blank else most)
    last = next((run for run in runs if len(run[0]) == len(found[0])), None)
    return Hidden(found.start(), last.end()) if last else None


def _indented(text: str, start: int) -> Hidden | None:
    """Indented code; after an item of a list, or what is itself indented, it is the text of the item."""
    line = text.rfind("\n", 0, start) + 1
    blank = _BLANK_LINE.match(text, start)
    if blank is None or _LIST_ITEM.match(text, line, max(line, start)):
        return None
    return Hidden(start, _end(_INDENTED, text, blank.end()))
