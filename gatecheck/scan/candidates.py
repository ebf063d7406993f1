"""What the bytes of a file say before anything is parsed: whether a record may be in it at all."""

from __future__ import annotations

import re

from gatecheck.scan.readers.document import is_wide

_WORD = b"gatecheck"
_KEY = re.compile(rb"gatecheck[\"']?\s*:|vnd\.gatecheck")
_DECLARATION = re.compile(rb"gatecheck[\"']?\s*:\s*[\"']?(record|plan|policy|waivers|accepted|seal|verdict)/")
_OUTPUT = re.compile(rb"vnd\.gatecheck")
_POINTER = b"version https://git-lfs.github.com/spec/v1"


def may_declare(content: bytes) -> bool:
    """Whether `content` has the declaring key or media type somewhere, so that parsing it is worth while."""
    if _WORD in content:
        return _KEY.search(content) is not None
    return is_wide(content) and _KEY.search(_narrow(content)) is not None


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
