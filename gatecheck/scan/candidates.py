"""What the bytes of a file say before anything is parsed: whether a record may be in it at all."""

from __future__ import annotations

import re
from collections.abc import Callable, Collection

from gatecheck.scan.readers.document import is_wide

_WORD = b"gatecheck"
_KEY = re.compile(rb"gatecheck[\"']?\s*:|vnd\.gatecheck")
_DECLARATION = re.compile(rb"gatecheck[\"']?\s*:\s*[\"']?(record|plan|policy|waivers|accepted|seal|verdict)/")
_OUTPUT = re.compile(rb"vnd\.gatecheck")
_POINTER = b"version https://git-lfs.github.com/spec/v1"
#: Searching for more ids than this costs more than to parse.
_MOST_SEARCHED = 16
#: Letters that a text hardly writes as they are: they are escaped, doubled, or ends of lines.
_WRITTEN_OTHERWISE = re.compile(r"[\s\"'\\]")
#: The escapes by which JSON and YAML can write a letter of ASCII, or YAML pass over the end of a line.
_ESCAPED_ASCII = re.compile(rb"\\(?:[/xU\r\n\x80-\xff]|u00[2-7])")
#: An output of a notebook that is no object may be base64, or JSON text cut into lines.
_ENCODED_OUTPUT = re.compile(rb"vnd\.gatecheck[^\"]*\"\s*:\s*[^\s{]")


def may_declare(content: bytes) -> bool:
    """Whether `content` has the declaring key or media type somewhere, so that parsing it is worth while."""
    if _WORD in content:
        return _KEY.search(content) is not None
    return is_wide(content) and _KEY.search(_narrow(content)) is not None


def may_hold(ids: Collection[str] | None) -> Callable[[bytes], bool]:
    """Return the test whether a content may hold one of `ids` (`None`: any); it may err on that side alone."""
    if ids is None or len(ids) > _MOST_SEARCHED or any(map(_WRITTEN_OTHERWISE.search, ids)):
        return lambda _: True
    names = [name.encode("utf-8", "surrogatepass") for name in ids]
    ascii_alone = all(map(str.isascii, ids))

    def holds(content: bytes) -> bool:
        if any(name in content for name in names):
            return True
        if b"\\" in content and (not ascii_alone or _ESCAPED_ASCII.search(content)):
            return True
        return _ENCODED_OUTPUT.search(content) is not None

    return holds


def looks_declared(suffix: str, content: bytes) -> bool:
    """Whether a file that cannot be parsed looks like one of ours: only then is that a problem."""
    wanted = _OUTPUT if suffix == ".ipynb" else _DECLARATION
    return wanted.search(_narrow(content)) is not None


def is_pointer(content: bytes) -> bool:
    """Whether `content` is the pointer that Git LFS keeps in place of a file.

    Its first line is fixed (https://github.com/git-lfs/git-lfs, docs/spec.md).
    """
    return content.startswith(_POINTER)


def _narrow(content: bytes) -> bytes:
    return content.replace(b"\0", b"")
