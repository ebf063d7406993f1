"""Which paths a list of globs names."""

from __future__ import annotations

import functools
import re
from collections.abc import Sequence

_PIECE = re.compile(r"\*+|\?|\[[!^]?\]?[^\]]*\]|[^*?\[]+|\[", re.DOTALL)


def matches(globs: Sequence[str], path: str) -> bool:
    """Whether any of `globs` names the whole of `path`, a POSIX path relative to the judged folder.

    `**` as a whole segment stands for any number of folders, at the end for all that lies below; `*` and `?`
    stay within one segment, and so does `[...]` (`[!...]` for any other letter). No glob names no path.
    """
    return _compiled(tuple(globs)).fullmatch(path) is not None


def name_inside(globs: Sequence[str], folder: str) -> bool:
    """Whether one of `globs` says by its leading segments that it means paths inside `folder`.

    The segments before the first `**` are compared with those of `folder`. A glob that begins with `**` means
    every folder and none in particular, so it does not count.
    """
    return any(_names_inside(tuple(glob.split("/")), tuple(folder.split("/"))) for glob in globs)


def _names_inside(segments: tuple[str, ...], folder: tuple[str, ...]) -> bool:
    fixed = segments.index("**") if "**" in segments else len(segments)
    long_enough = fixed < len(segments) or fixed > len(folder)
    pairs = zip(segments[:fixed], folder, strict=False)
    return fixed > 0 and long_enough and all(matches((segment,), name) for segment, name in pairs)


@functools.cache
def _compiled(globs: tuple[str, ...]) -> re.Pattern[str]:
    any_of_them = "|".join(_regex(glob) for glob in globs) if globs else "(?!)"
    return re.compile(any_of_them, re.DOTALL)


def _regex(glob: str) -> str:
    segments = re.sub(r"\*\*(/\*\*)+", "**", glob).split("/")
    folders = ["(?:.*/)?" if segment == "**" else _segment(segment) + "/" for segment in segments[:-1]]
    return "".join(folders) + (".+" if segments[-1] == "**" else _segment(segments[-1]))


def _segment(segment: str) -> str:
    return "".join(_piece(match[0]) for match in _PIECE.finditer(segment))


def _piece(piece: str) -> str:
    if piece[0] == "*":
        return "[^/]*"
    if piece == "?":
        return "[^/]"
    if piece[0] != "[" or piece == "[":
        return re.escape(piece)
    return _letters(piece)


def _letters(piece: str) -> str:
    other = piece[1] in "!^"
    inner = re.escape(piece[1 + other : -1]).replace(r"\-", "-").replace("--", r"\-")
    try:
        return re.compile(f"(?!/)[{'^' * other}{inner}]").pattern
    except re.error:  # such as the range z-a, which names no letter
        return re.escape(piece)
