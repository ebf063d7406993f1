"""Where sentences and paragraphs begin and end in prose, whatever its format."""

from __future__ import annotations

import re

#: A sentence reaches no further to either side, in characters.
_FARTHEST = 2000
_BLANK_LINE = re.compile(r"\n[ \t\r]*\n")
#: Between sentences: a blank line, the head of an item, heading or cell of a table, or a mark of its end.
_BOUNDARY = re.compile(
    r"\n[ \t\r]*\n|(?:\A|(?<=\n))#{1,6}[ \t][^\n]*\n"
    r"|\n[ \t]*(?=[-*+#|>]+[ \t]|\d{1,3}[.)][ \t]|\\(?:item|begin|end|(?:sub){0,2}section|paragraph)\b)"
    r"|(?P<mark>[.!?][\"'”’)\]*_]{0,3}[ \t\r\n]+)(?=[\"'“‘(\[*_$\\]{0,3}[^\W\d_a-z])"
)
#: A full stop behind these ends no sentence (common abbreviations).
_ABBREVIATION = re.compile(
    r"\b(?:al|vs|e\.g|i\.e|cf|Fig|Figs|Eq|Eqs|Tab|Dr|Prof|no|approx|resp|ca|St|Suppl|[A-Z])\.\Z"
)
_LONGEST_ABBREVIATION = 8
_LEADING = re.compile(r"\s*(?:(?:[-*+>|]|#{1,6}|\d{1,3}[.)])[ \t]+)*\s*")


def paragraph_start(text: str, before: int) -> int:
    """Return where the paragraph begins that ends above or at `before`; blanks below it do not count."""
    end = _inked(text, before)
    at = max(0, end - _FARTHEST)
    for found in _BLANK_LINE.finditer(text, at, end):
        at = found.end()
    return at


def sentence_before(text: str, before: int) -> tuple[int, int]:
    """Return start and end of the sentence that ends above or at `before`; blanks below it do not count."""
    end = _inked(text, before)
    return _start(text, max(0, end - 1)), end


def sentence_at(text: str, offset: int) -> tuple[int, int]:
    """Return start and end of the sentence around `offset`."""
    most = min(len(text), offset + _FARTHEST)
    end = most
    for found in _BOUNDARY.finditer(text, offset, most):
        if _is_boundary(text, found):
            end = found.start() + len((found["mark"] or "").rstrip())
            break
    return _start(text, offset), max(offset, _inked(text, end))


def _start(text: str, offset: int) -> int:
    least = max(0, offset - _FARTHEST)
    # What stands behind the offset is looked at too, for a mark says by the next letter that it ends a sentence.
    start = least
    for found in _BOUNDARY.finditer(text, least, offset + 1):
        if found.end() <= offset and _is_boundary(text, found):
            start = found.end()
    leading = _LEADING.match(text, start, offset)
    return leading.end() if leading else start


def _is_boundary(text: str, found: re.Match[str]) -> bool:
    if not found["mark"]:
        return True
    end = found.start() + 1
    return _ABBREVIATION.search(text, max(0, end - _LONGEST_ABBREVIATION), end) is None


def _inked(text: str, before: int) -> int:
    """The end of the last thing above `before`."""
    least = max(0, before - _FARTHEST)
    return least + len(text[least:before].rstrip())
