"""reStructuredText: comments, literal blocks, code, Python sessions and addresses are no prose.

A marker is a comment, a block of its own below the paragraph: `.. gatecheck: ID FIELD`.
"""

from __future__ import annotations

import re
from collections.abc import Iterator

from gatecheck.prose.markers import marker_in
from gatecheck.prose.source import Hidden, stretches

_OPENING = re.compile(
    r"``|`_|https?://|(?P<literal>::[ \t]*\r?\n)|^(?P<indent>[ \t]*)\.\.(?=[ \t\r\n]|\Z)(?P<says>[^\n]*)"
    r"|^(?P<session>[ \t]*>>>[ \t][^\n]*(?:\n[ \t]*\S[^\n]*)*)",
    re.MULTILINE,
)
_CODE = re.compile(r"\s*(?:code|code-block|sourcecode|parsed-literal|literalinclude|raw|doctest)::")
#: Explicit markup that is no comment: directives, targets, footnotes, citations, substitutions.
_MARKUP = re.compile(r"\s*(?:[\w.:+-]+::|_|\[|\||__)")
_ADDRESS = re.compile(r"[^\s<>)\]\"'`]*")
_LINE = re.compile(r"([ \t]*)([^\n]*)(?:\n|\Z)")
_LONGEST_SPAN = 10_000


def hidden(text: str) -> Iterator[Hidden]:
    """Return comments, literal blocks, Python sessions, inline literals and addresses, in order."""
    return stretches(_OPENING, _opened, text)


def _opened(text: str, found: re.Match[str]) -> Hidden | None:
    start, after = found.span()
    if found["says"] is not None:
        return _explicit(text, found)
    if found["literal"]:
        line = text.rfind("\n", 0, start) + 1
        end = _block_end(text, after, _indent(text, line))
        return Hidden(after, end) if end > after else None
    if found["session"]:
        return Hidden(start, after)
    if found[0] == "``":
        closing = text.find("``", after, after + _LONGEST_SPAN)
        return Hidden(start, closing + 2) if closing >= 0 else None
    address = _ADDRESS.match(text, after) if found[0][0] == "h" else None
    return Hidden(start, address.end()) if address else None


def _explicit(text: str, found: re.Match[str]) -> Hidden | None:
    """A comment, or a directive whose content is code; the text of other directives is prose."""
    says = found["says"]
    comment = _MARKUP.match(says) is None
    if not comment and not _CODE.match(says):
        return None
    end = _block_end(text, _next_line(text, found.end()), len(found["indent"]))
    marker = marker_in(says) if comment else None
    # What stands indented below a marker belongs to its comment all the same.
    return Hidden(found.start(), max(found.end(), end), marker)


def _next_line(text: str, at: int) -> int:
    end = text.find("\n", at)
    return len(text) if end < 0 else end + 1


def _indent(text: str, line: int) -> int:
    at = line
    while text[at : at + 1] in {" ", "\t"}:
        at += 1
    return at - line


def _block_end(text: str, at: int, indent: int) -> int:
    """The end of the lines from `at` on that are blank or stand further in than `indent`."""
    end = at
    while at < len(text) and (line := _LINE.match(text, at)):
        if line[2].strip():
            if len(line[1]) <= indent:
                break
            end = line.end()
        at = line.end()
    return end
