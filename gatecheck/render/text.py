"""The one place that cleans and escapes text from outside before it reaches a format."""

from __future__ import annotations

import json
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
_ELEMENTS = str.maketrans({"&": "&amp;", "<": "&lt;", ">": "&gt;", '"': "&quot;", "'": "&#39;"})
_IN_SCRIPT = str.maketrans({mark: f"\\u{ord(mark):04x}" for mark in "<>&\u2028\u2029"})
_DATA = str.maketrans({"%": "%25", "\r": "%0D", "\n": "%0A"})
_PROPERTY = str.maketrans({"%": "%25", "\r": "%0D", "\n": "%0A", ":": "%3A", ",": "%2C"})
# An agent knows these escapes and no others, so that a percent sign needs one only where it seems to begin one.
_AGENT_ESCAPE = re.compile(r"%(?=3B|0D|0A|5D|AZP25)", re.IGNORECASE)
_LOGGED_PROPERTY = str.maketrans({";": "%3B", "]": "%5D"})
#: Readers of version 13 know no escapes, so that only a mark keeps a text from becoming a directive for all.
_POINT_TEXT = str.maketrans({mark: f"{{U+{ord(mark):04X}}}" for mark in "#\\"})
#: SOURCE: RFC 3986, section 2.3 (from memory).
_UNRESERVED = frozenset(b"ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789-._~")
_IN_URI = _UNRESERVED | frozenset(b"/")
_PLACEHOLDERS = str.maketrans({"{": "{{", "}": "}}"})

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


def html(text: str) -> str:
    """Return `text`, cleaned as by `plain`, as it stands literally in an element or a quoted attribute of HTML."""
    return plain(text).translate(_ELEMENTS)


def script_data(document: str) -> str:
    """Return a JSON document so that it stands within a script element of HTML and reads back to the same."""
    return document.translate(_IN_SCRIPT)


def command_data(text: str) -> str:
    """Return `text` escaped as the message of a workflow command."""
    return text.translate(_DATA)


def command_property(text: str) -> str:
    """Return `text` escaped as a property value of a workflow command."""
    return text.translate(_PROPERTY)


def xml(text: str) -> str:
    """Return `text`, cleaned as by `plain`, as content or a quoted attribute of XML 1.0.

    What XML 1.0 cannot hold, escaped or not, are control characters, surrogates and two noncharacters: of these
    `plain` leaves none.
    """
    return plain(text).translate(_ELEMENTS)


def json_text(text: str) -> str:
    """Return `text`, cleaned as by `plain`, as a quoted text of one line, which JSON and YAML read alike."""
    # YAML knows no pairs of surrogates, by which JSON could escape what is not ASCII.
    return json.dumps(plain(text), ensure_ascii=False)


def point_text(text: str) -> str:
    """Return `text`, cleaned as by `plain`, as the description or a remark of a test point (TAP)."""
    return plain(text).translate(_POINT_TEXT)


def log_message(text: str) -> str:
    """Return `text`, cleaned as by `plain`, as the message of a logging command of Azure Pipelines."""
    return _AGENT_ESCAPE.sub("% ", plain(text))


def log_property(text: str) -> str:
    """Return `text`, cleaned as by `plain`, as a property value of a logging command of Azure Pipelines."""
    return log_message(text).translate(_LOGGED_PROPERTY)


def sarif_message(text: str) -> str:
    """Return `text`, cleaned as by `plain`, as a message of SARIF without a placeholder and without a link.

    Braces are doubled, as the standard wants (from memory); no two brackets meet that would make a link.
    """
    return plain(text).translate(_PLACEHOLDERS).replace("](", "] (")


def uri(path: str) -> str:
    """Return `path` as a relative URI; `path` may hold bytes that are no UTF-8, as the file system gives them."""
    try:
        raw = path.encode("utf-8", "surrogateescape")
    except UnicodeEncodeError:
        raw = path.encode("utf-8", "surrogatepass")
    # A slash at the start would make it absolute.
    return "".join(
        chr(byte) if byte in (_IN_URI if at else _UNRESERVED) else f"%{byte:02X}" for at, byte in enumerate(raw)
    )


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
