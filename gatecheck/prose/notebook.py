"""Notebooks: the cells of prose of notebook formats 3 and 4, with the offsets of their text in the file.

The layout is that of https://github.com/jupyter/nbformat (nbformat.v4.schema.json; version 3 keeps its cells in
worksheets). The file is parsed once, cell by cell where it stands, so that the place of each is known.
"""

from __future__ import annotations

import bisect
import functools
import json
import re
from collections.abc import Callable, Iterator
from typing import Any

from gatecheck.model.struct import struct
from gatecheck.prose.markdown import hidden
from gatecheck.prose.source import Passage, SourceFile


def _nothing(_: str) -> None:
    """What a number stands for here, however long it is."""


_DECODER = json.JSONDecoder(parse_int=_nothing, parse_float=_nothing, parse_constant=_nothing)
_FILLED = re.compile(r"[^ \t\n\r,:]")
_HOLDERS = ("worksheets", "cells")
_OF_PROSE = ("markdown", "heading")
#: What a JSON string writes with more than one character; a pair of surrogates is one.
_ESCAPE = re.compile(r"\\u[dD][89abAB]..\\u[dD][c-fC-F]..|\\u....|\\.", re.DOTALL)


@struct
class _Piece:
    """One JSON string of a source: its offset there, and that of its content in the file.

    `escaped` gives the characters of the content that are written as an escape, and `longer` by how much the
    content is longer in the file up to and with each of them.
    """

    offset: int
    start: int
    escaped: tuple[int, ...]
    longer: tuple[int, ...]


def passages(file: SourceFile) -> Iterator[Passage]:
    """Yield the cells of prose of a notebook.

    Raises
    ------
    ValueError, RecursionError
        The text is no JSON, or nests too deep.
    """
    found: list[tuple[Any, int]] = []
    start = _filled(file.text, 0)
    if file.text[start] == "{":
        _gather(file.text, start, found)
    else:
        _DECODER.raw_decode(file.text, start)
    for number, (cell, at) in enumerate(found, start=1):
        source = _source(cell)
        if source:
            yield Passage(file, source, hidden, functools.partial(_in_file, _pieces_of(file.text, at)), number)


def _source(cell: Any) -> str:
    if not isinstance(cell, dict) or cell.get("cell_type") not in _OF_PROSE:
        return ""
    return "".join(_strings(cell.get("source")))


def _strings(source: Any) -> list[str]:
    listed = source if isinstance(source, list) else [source]
    return [each for each in listed if isinstance(each, str)]


def _filled(text: str, at: int) -> int:
    """The offset of the next thing from `at` on."""
    found = _FILLED.search(text, at)
    if found is None:
        raise ValueError("the text ends too early")
    return found.start()


def _gather(text: str, at: int, found: list[tuple[Any, int]]) -> int:
    """Add the cells in the object at `at` with their offsets, and return where the object ends."""
    at = _filled(text, at + 1)
    while text[at] != "}":
        key, end = _DECODER.raw_decode(text, at)
        value = _filled(text, end)
        if key in _HOLDERS and text[value] == "[":
            end = _gather_listed(text, value, key, found)
        else:
            end = _DECODER.raw_decode(text, value)[1]
        at = _filled(text, end)
    return at + 1


def _gather_listed(text: str, at: int, key: str, found: list[tuple[Any, int]]) -> int:
    at = _filled(text, at + 1)
    while text[at] != "]":
        if key == "worksheets" and text[at] == "{":
            end = _gather(text, at, found)
        else:
            value, end = _DECODER.raw_decode(text, at)
            found.append((value, at))
        at = _filled(text, end)
    return at + 1


def _pieces_of(text: str, at: int) -> Callable[[], tuple[_Piece, ...]]:
    """The strings of the source of the cell at `at`, worked out once, when someone asks."""
    return functools.cache(functools.partial(_pieces, text, at))


def _pieces(text: str, at: int) -> tuple[_Piece, ...]:
    pieces: list[_Piece] = []
    at = _filled(text, at + 1)
    while text[at] != "}":
        key, end = _DECODER.raw_decode(text, at)
        value = _filled(text, end)
        end = _DECODER.raw_decode(text, value)[1]
        if key == "source":  # of a key that stands twice the later one counts
            pieces = list(_strings_at(text, value, end))
        at = _filled(text, end)
    return tuple(pieces)


def _strings_at(text: str, at: int, end: int) -> Iterator[_Piece]:
    offset = 0
    at += text[at] == "["
    while (at := _filled(text, at)) < end and text[at] != "]":
        value, stop = _DECODER.raw_decode(text, at)
        if text[at] == '"':
            yield _piece(text, offset, at + 1, stop - 1)
            offset += len(value)
        at = stop


def _piece(text: str, offset: int, start: int, end: int) -> _Piece:
    escaped, longer, more = [], [], 0
    for found in _ESCAPE.finditer(text, start, end):
        escaped.append(found.start() - start - more)
        more += len(found[0]) - 1
        longer.append(more)
    return _Piece(offset, start, tuple(escaped), tuple(longer))


def _in_file(pieces: Callable[[], tuple[_Piece, ...]], offset: int) -> int:
    """The offset in the file of the character at `offset` in a source."""
    listed = pieces()
    piece = listed[bisect.bisect_right(listed, offset, key=lambda one: one.offset) - 1]
    inside = offset - piece.offset
    before = bisect.bisect_left(piece.escaped, inside)
    return piece.start + inside + (piece.longer[before - 1] if before else 0)
