"""The reader of JSON lines: one document on each line."""

from __future__ import annotations

import functools
from collections.abc import Iterator
from dataclasses import replace

from gatecheck.model.verdict import Place, Problem
from gatecheck.scan.readers.document import Broken, Document, conflict, decoded, is_wide
from gatecheck.scan.readers.json_text import parsed
from gatecheck.schema.read import Path


def read(path: str, content: bytes) -> tuple[Document | Problem, ...]:
    """Read every line that is not blank; a broken one hides no other."""
    merging = conflict(content.decode("latin-1"))  # any bytes will do to find the markers
    if merging is not None:
        return (merging.problem(path),)
    if is_wide(content):
        return (_line(path, 1, content),)
    return tuple(_lines(path, content))


def _lines(path: str, content: bytes) -> Iterator[Document | Problem]:
    for number, line in enumerate(content.split(b"\n"), start=1):
        if line.strip():
            yield _line(path, number, line)


def _line(path: str, number: int, line: bytes) -> Document | Problem:
    try:
        value = parsed(decoded(line))
    except Broken as broken:
        return replace(broken.problem(path), at=Place(path, number))
    return Document(value, Place(path, number), functools.partial(_same_line, number))


def _same_line(number: int, _: Path) -> int:
    return number
