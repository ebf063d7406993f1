"""The reader of JSON."""

from __future__ import annotations

import json
import re
from itertools import accumulate, tee
from typing import Any

from gatecheck.model.verdict import Place, Problem
from gatecheck.scan.readers.document import (
    DEEPEST,
    LONGEST_TEXT,
    Broken,
    Document,
    conflict,
    decoded,
    no_number,
    real,
    too_deep,
    twice,
    whole,
)
from gatecheck.scan.readers.positions import Positions

_BRACKET = re.compile(r'"[^"\\]*(?:\\.[^"\\]*)*"|[\[\]{}]', re.DOTALL)

_STEPS = {"[": 1, "{": 1, "]": -1, "}": -1}


def read(path: str, content: bytes) -> tuple[Document | Problem, ...]:
    """Read the one document of a JSON file."""
    try:
        text = decoded(content)
        value = parsed(text)
    except Broken as broken:
        return (broken.problem(path),)
    positions = Positions(text)
    small = len(content) < LONGEST_TEXT
    return (Document(value, Place(path, positions.line(())), positions.line, small=small),)


def parsed(text: str) -> Any:
    """Return the value of a JSON text, with `Refused` in place of what JSON cannot hold.

    Raises
    ------
    Broken
        It is no JSON, or nests too deep to be parsed.
    """
    try:
        return _DECODER.decode(text)
    except json.JSONDecodeError as error:
        broken = Broken(error.lineno, f"is no JSON: {error.msg}", _advice(error))
        raise conflict(text) or broken from None
    except RecursionError:
        raise too_deep(_first_too_deep(text)) from None


def _object(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    members = dict(pairs)
    if len(members) < len(pairs):
        seen = set()
        for key, _ in pairs:
            if key in seen:
                members[key] = twice()
            seen.add(key)
    return members


_DECODER = json.JSONDecoder(object_pairs_hook=_object, parse_constant=no_number, parse_int=whole, parse_float=real)


def _advice(error: json.JSONDecodeError) -> str:
    if error.msg == "Extra data":
        return "put one document into the file, or one on each line of a .jsonl file"
    if error.pos >= len(error.doc.rstrip()):
        return "the text ends too early: write the file again, whole"
    return "mend the JSON there, or write the file again with a JSON library"


def _first_too_deep(text: str) -> int:
    brackets, same = tee(_BRACKET.finditer(text))
    depths = accumulate(_STEPS.get(bracket[0], 0) for bracket in same)
    deep = (bracket.start() for bracket, depth in zip(brackets, depths, strict=True) if depth > DEEPEST)
    return text.count("\n", 0, next(deep, 0)) + 1
