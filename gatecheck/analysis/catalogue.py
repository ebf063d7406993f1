"""What the common libraries call their hypothesis tests, their fits, and their checks of assumptions.

The lists are data, one file a library, each with a word on where its names come from. What is in none of them is no
test: adjusted p-values (`multipletests`, `p.adjust`) and power are not, and nor is an estimate.
"""

from __future__ import annotations

import functools
import json
from collections.abc import Iterator
from pathlib import Path
from typing import Any, Literal

from gatecheck.model.struct import struct

Language = Literal["python", "r"]
#: A test makes one; a table makes one, or shows those of the one fit that it is given; a model is fitted; a look
#: shows the tests of a fit; a check is of an assumption.
Kind = Literal["test", "table", "model", "look", "check"]

_FOLDER = Path(__file__).parent / "libraries"
_KINDS: tuple[tuple[str, Kind], ...] = (
    ("models", "model"), ("looks", "look"), ("checks", "check"), ("tables", "table"),
)  # fmt: skip


@struct
class Known:
    """One known function: `test` is the trade's name of what it tests, `several` whether it makes several at once.

    A test that is `of_a_distribution`, where it is given the name of one, checks an assumption.
    """

    kind: Kind
    test: str | None = None
    several: bool = False
    of_a_distribution: bool = False


@struct
class Library:
    """One library: the prefix of its names, whether they are there without being asked for, and its functions.

    `methods` are those of its models that make a test of what the model holds, `frame_methods` those that it gives
    to tables of data where it is loaded.
    """

    prefix: str
    attached: bool
    functions: dict[str, Known]
    methods: frozenset[str]
    frame_methods: frozenset[str]


@functools.cache
def libraries(language: Language) -> tuple[Library, ...]:
    """Return the libraries of a language."""
    return tuple(_library(each) for each in _documents() if each["language"] == language)


@functools.cache
def names_of_tests() -> frozenset[str]:
    """Return the trade's names of all tests that are known."""
    return frozenset(name for each in _documents() for name in each.get("tests", ()))


@functools.cache
def functions(language: Language) -> frozenset[str]:
    """Return the names of all functions that are known, in any library of a language."""
    return frozenset(name for library in libraries(language) for name in library.functions)


@functools.cache
def methods_that_test(language: Language) -> frozenset[str]:
    """Return the names of all methods that make a test of what a model holds."""
    return frozenset().union(*(library.methods for library in libraries(language)))


@functools.cache
def looks(language: Language) -> frozenset[str]:
    """Return the names of all that shows the tests of a fit."""
    found = (
        name for library in libraries(language) for name, known in library.functions.items() if known.kind == "look"
    )
    return frozenset(found)


@functools.cache
def _documents() -> tuple[dict[str, Any], ...]:
    return tuple(_listed())


def _listed() -> Iterator[dict[str, Any]]:
    for file in sorted(_FOLDER.glob("*.json")):
        document = json.loads(file.read_text(encoding="utf-8"))
        yield from document if isinstance(document, list) else (document,)


def _library(document: dict[str, Any]) -> Library:
    several, of_a_distribution = document.get("several", ()), document.get("fits_of_a_distribution", ())
    found = {
        name: Known("test", test, name in several, name in of_a_distribution)
        for test, names in document.get("tests", {}).items()
        for name in names
    }
    for key, kind in _KINDS:
        for name in document.get(key, ()):
            one = found.get(name)
            found[name] = Known(kind) if one is None else Known(kind, one.test, one.several)
    methods, frame_methods = (frozenset(document.get(key, ())) for key in ("methods", "frame_methods"))
    return Library(document["prefix"], document.get("attached", False), found, methods, frame_methods)
