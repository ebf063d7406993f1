"""The one place that cleans and escapes text from outside before it reaches a format."""

from __future__ import annotations

import re
import unicodedata
from bisect import bisect_right
from collections.abc import Callable
from itertools import accumulate

_BREAKS = frozenset("\t\n\v\f\r\x85\u2028\u2029")
#: Invisible, yet several scripts cannot be written without them.
_JOINERS = frozenset("\u200c\u200d")
_UNSAFE_CATEGORIES = frozenset({"Cc", "Cf", "Cs"})
_FIRST_NONCHARACTER, _LAST_NONCHARACTER = 0xFDD0, 0xFDEF
_PLANE_END = 0xFFFE

# Build runners read "::name" at the start of a line, and "##[name]" or "##word[name]" anywhere in it.
_COMMAND = re.compile(r":(?=:)|##(?=\w*\[)")

_ZERO_WIDTH = "\u200b"
# Mentions, cross-references, addresses and emoji names are found in the rendered text, where no escape is left;
# only a character without width in between keeps them plain text.
_LINKED = re.compile(r"(?<=[@#])(?=\w)|(?<=:)(?=//|[\w+-]+:)|(?<=www)(?=\.)", re.IGNORECASE)
_BLOCK_OPENING = re.compile(r"^(\d*)(?=[-+=]|[.)](?:\s|$))")
_MARKUP = str.maketrans(
    {
        "&": "&amp;",
        "<": "&lt;",
        ">": "&gt;",
        "|": "&#124;",
        _ZERO_WIDTH: "&#8203;",
        **{mark: f"\\{mark}" for mark in "\\`*_[]!~#$"},
    },
)
_DATA = str.maketrans({"%": "%25", "\r": "%0D", "\n": "%0A"})
_PROPERTY = str.maketrans({"%": "%25", "\r": "%0D", "\n": "%0A", ":": "%3A", ",": "%2C"})

_CUT = "..."


def plain(text: str) -> str:
    """Return `text` as one line that is safe to print, in a build log too.

    Line breaks and runs of blanks become one space. Control characters, invisible formatting such as a change of
    the writing direction, lone surrogates and noncharacters become marks such as ``{U+001B}``. A space breaks
    whatever a build runner could take for a command, wherever it stands. Doing it twice changes nothing.
    """
    if not text.isprintable():
        text = "".join(map(_visible, text))
    return _COMMAND.sub(r"\g<0> ", " ".join(text.split()))


def markdown(text: str) -> str:
    """Return `text`, cleaned as by `plain`, as Markdown source that renders literally, in a table cell too."""
    escaped = _LINKED.sub(_ZERO_WIDTH, plain(text)).translate(_MARKUP)
    return _BLOCK_OPENING.sub(r"\1\\", escaped)


def command_data(text: str) -> str:
    """Return `text` escaped as the message of a workflow command."""
    return text.translate(_DATA)


def command_property(text: str) -> str:
    """Return `text` escaped as a property value of a workflow command."""
    return text.translate(_PROPERTY)


def cut(text: str, most: int) -> str:
    """Return `text`, or its beginning and three dots where it is longer than `most` characters."""
    return text if len(text) <= most else text[: most - len(_CUT)] + _CUT


def fitted(text: str, most: int, escape: Callable[[str], str]) -> str:
    """Return `text` escaped, cut so that the escaped text has at most `most` characters.

    `escape` must work character by character, and leave a dot as it is.
    """
    escaped = escape(text)
    if len(escaped) <= most:
        return escaped
    lengths = list(accumulate(len(escape(character)) for character in text))
    return escape(text[: bisect_right(lengths, most - len(_CUT))]) + _CUT


def _visible(character: str) -> str:
    if character in _BREAKS:
        return " "
    if character in _JOINERS:
        return character
    code = ord(character)
    unsafe = unicodedata.category(character) in _UNSAFE_CATEGORIES or _is_noncharacter(code)
    return f"{{U+{code:04X}}}" if unsafe else character


def _is_noncharacter(code: int) -> bool:
    return _FIRST_NONCHARACTER <= code <= _LAST_NONCHARACTER or code & _PLANE_END == _PLANE_END
