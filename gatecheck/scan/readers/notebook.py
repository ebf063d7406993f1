"""The reader of notebooks: the records among the outputs of their cells, as different kernels write them.

The layout is that of notebook format 4 (https://github.com/jupyter/nbformat, nbformat.v4.schema.json). Older
formats have no media types among their outputs, and so no records.
"""

from __future__ import annotations

import functools
from collections.abc import Iterator
from typing import Any

from gatecheck.model.struct import struct
from gatecheck.model.verdict import Place, Problem
from gatecheck.scan.readers.document import MEDIA_TYPE, Broken, Document, Refused, decoded
from gatecheck.scan.readers.json_text import parsed
from gatecheck.scan.readers.positions import Positions
from gatecheck.schema.read import Path, shown

_FORMAT = 4
_NAME = "gatecheck"
_QUOTED = f'"{MEDIA_TYPE}"'


@struct
class _Entry:
    """A value under a media type of ours: its path in the notebook, and its place."""

    value: Any
    path: Path
    place: Place


def read(path: str, content: bytes) -> tuple[Document | Problem, ...]:
    """Read the records of a notebook; each is one output, or a list in one."""
    try:
        text = decoded(content)
        notebook = parsed(text)
    except Broken as broken:
        return (broken.problem(path),)
    version = notebook.get("nbformat") if isinstance(notebook, dict) else None
    if isinstance(version, int) and (version > _FORMAT or (version < _FORMAT and "cells" not in notebook)):
        return _other_format(path, version)
    positions = Positions(text)
    entries = tuple(_entries(path, notebook, positions))
    documents = tuple(_document(entry, positions) for entry in entries)
    return documents + _misplaced(path, notebook, positions, {entry.path for entry in entries}, text)


def _other_format(path: str, version: int) -> tuple[Problem, ...]:
    if version < _FORMAT:
        return ()
    message = f"the file is a notebook of format {shown(version)}, where format {_FORMAT} is read"
    return (Problem(Place(path), message, "save it in format 4, or update gatecheck"),)


def _entries(path: str, notebook: Any, positions: Positions) -> Iterator[_Entry]:
    for cell_at, cell in enumerate(_list(notebook, "cells")):
        for output_at, output in enumerate(_list(cell, "outputs")):
            data = output.get("data") if isinstance(output, dict) else None
            for media_type, value in _ours(data):
                at: Path = ("cells", cell_at, "outputs", output_at, "data", media_type)
                place = Place(path, positions.line(at), cell_at + 1, output_at + 1)
                yield _Entry(value, at, place)


def _ours(data: Any) -> list[tuple[str, Any]]:
    return [(key, value) for key, value in data.items() if _NAME in key] if isinstance(data, dict) else []


def _list(holder: Any, key: str) -> list[Any]:
    found = holder.get(key) if isinstance(holder, dict) else None
    return found if isinstance(found, list) else []


def _document(entry: _Entry, positions: Positions) -> Document | Problem:
    if entry.path[-1] != MEDIA_TYPE:
        message = f"the media type {shown(entry.path[-1])} is not known"
        return Problem(entry.place, message, f"emit records as {MEDIA_TYPE}")
    if isinstance(entry.value, Refused):
        return Problem(entry.place, f"the output of a record {entry.value.message}", entry.value.advice)
    text = _as_text(entry.value)
    if text is None:
        locate = functools.partial(_line_below, positions, entry.path)
        return Document(entry.value, entry.place, locate, output=True)
    try:
        value = parsed(_json_of(text))
    except Broken as broken:
        message = f"the text under {MEDIA_TYPE} {broken.message}"
        return Problem(entry.place, message, "emit the record again, as an object or as JSON text")
    return Document(value, entry.place, functools.partial(_line_of, entry.place), output=True)


def _line_below(positions: Positions, above: Path, path: Path) -> int:
    return positions.line((*above, *path))


def _line_of(place: Place, _: Path) -> int:
    return place.line


def _as_text(value: Any) -> str | None:
    if isinstance(value, str):
        return value
    lines = value if isinstance(value, list) else []
    return "".join(lines) if lines and all(isinstance(line, str) for line in lines) else None


def _json_of(text: str) -> str:
    """Return the JSON text in `text`, or in its base64, which kernels write for what they take for bytes."""
    import base64  # noqa: PLC0415  # needed for notebooks of some kernels alone

    bare = text.strip()
    if bare.startswith(("{", "[")):
        return text
    try:
        return decoded(base64.b64decode("".join(bare.split()), validate=True))
    except ValueError:
        raise Broken(1, "is neither JSON nor base64 of JSON", "") from None


def _misplaced(
    path: str, notebook: Any, positions: Positions, read_already: set[Path], text: str
) -> tuple[Problem, ...]:
    """Return the records that stand where no output does, and so would be missed."""
    if text.count(_QUOTED) <= len(read_already):
        return ()
    advice = "let the kernel write it, as the data of a cell's output"
    message = f"{MEDIA_TYPE} stands where no output of a cell does"
    lost = sorted(positions.line(at) for at in _keys(notebook) if at not in read_already)
    return tuple(Problem(Place(path, line), message, advice) for line in lost)


def _keys(notebook: Any) -> Iterator[Path]:
    """Yield the path of every key that is the media type, save in metadata, which may name it."""
    waiting: list[tuple[Path, Any]] = [((), notebook)]
    while waiting:
        path, value = waiting.pop()
        if isinstance(value, dict) and path[-1:] != ("metadata",):
            waiting.extend(((*path, key), inner) for key, inner in value.items() if key != MEDIA_TYPE)
            if MEDIA_TYPE in value:
                yield (*path, MEDIA_TYPE)
        elif isinstance(value, list):
            waiting.extend(((*path, index), inner) for index, inner in enumerate(value))
