"""The reader of YAML: its events become values by the core schema of YAML 1.2, and nothing is constructed.

In the core schema `1e-5` is a number, `no` and `on` are texts, `012` is twelve, and a date is a text
(YAML 1.2.2, section 10.3.2, https://yaml.org/spec/1.2.2/#1032-tag-resolution).
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Any

import yaml

from gatecheck.model.verdict import Place, Problem
from gatecheck.scan.readers.document import (
    DEEPEST,
    Broken,
    Document,
    Refused,
    conflict,
    decoded,
    no_number,
    real,
    too_deep,
    twice,
    whole,
)
from gatecheck.schema.read import Path, shown

#: Aliases may stand for this many values in a document, all told.
MOST_ALIASED = 100_000

_CORE = "tag:yaml.org,2002:"
_TEXT_TAGS = {"!", _CORE + "str"}
_CONTAINER_TAGS = {None, "!", _CORE + "map", _CORE + "seq"}
_WORDS: dict[str, Any] = {
    **dict.fromkeys(("", "~", "null", "Null", "NULL")),
    **dict.fromkeys(("true", "True", "TRUE"), True),
    **dict.fromkeys(("false", "False", "FALSE"), False),
}
_TYPES: dict[str, tuple[type, ...]] = {
    _CORE + "null": (type(None),),
    _CORE + "bool": (bool,),
    _CORE + "int": (int, Refused),
    _CORE + "float": (int, float, Refused),
}
_INTEGER = re.compile(r"[-+]?[0-9]+")
_OTHER_BASE = re.compile(r"0o[0-7]+|0x[0-9a-fA-F]+")
_FLOAT = re.compile(r"[-+]?(\.[0-9]+|[0-9]+(\.[0-9]*)?)([eE][-+]?[0-9]+)?")
_NOT_FINITE = re.compile(r"[-+]?\.(inf|Inf|INF)|\.(nan|NaN|NAN)")
_NO_KEY = object()


def read(path: str, content: bytes) -> tuple[Document | Problem, ...]:
    """Read the documents of a YAML stream, up to the place where it is broken."""
    documents: list[Document | Problem] = []
    try:
        documents.extend(_documents(path, decoded(content)))
    except Broken as broken:
        documents.append(broken.problem(path))
    return tuple(documents)


def _documents(path: str, text: str) -> Iterator[Document]:
    builder = _Builder()
    for event in _events(text):
        match event:
            case yaml.DocumentStartEvent():
                builder = _Builder()
            case yaml.DocumentEndEvent():
                yield Document(builder.root, Place(path, builder.first), builder.line)
            case yaml.StreamStartEvent() | yaml.StreamEndEvent():
                pass
            case _:
                builder.take(event)


def _events(text: str) -> Iterator[Any]:
    content = text.encode()
    try:
        yield from yaml.parse(content, Loader=yaml.CSafeLoader)
    except yaml.reader.ReaderError as error:
        line = content.count(b"\n", 0, error.position) + 1
        raise Broken(line, f"is no YAML: {error.reason}", "take the character out") from None
    except yaml.MarkedYAMLError as error:
        line = error.problem_mark.line + 1 if error.problem_mark else 1
        broken = Broken(line, f"is no YAML: {error.problem}", "mend the YAML there")
        raise conflict(text) or broken from None


@dataclass(slots=True)
class _Frame:
    """A mapping or sequence that is still open."""

    value: Any
    line: int
    anchor: str | None
    tag: str | None
    nodes: int = 1
    key: Any = _NO_KEY
    key_line: int = 0


@dataclass(slots=True)
class _Builder:
    """Builds one document from its events."""

    root: Any = None
    first: int = 1
    _open: list[_Frame] = field(default_factory=list)
    _kept: list[Any] = field(default_factory=list)  # so that no container is freed, and its identity used again
    _anchors: dict[str, tuple[Any, int]] = field(default_factory=dict)
    _aliased: int = 0
    _lines: dict[tuple[int, str | int], int] = field(default_factory=dict)

    def line(self, path: Path) -> int:
        """Return the 1-based line of the field at `path`, or of the nearest that exists around it."""
        line, value = self.first, self.root
        for step in path:
            if (id(value), step) not in self._lines:
                break
            line, value = self._lines[id(value), step], value[step]
        return line

    def take(self, event: Any) -> None:
        """Add what `event` says to the document."""
        line = event.start_mark.line + 1
        match event:
            case yaml.ScalarEvent():
                self._add(_scalar(event), line, event.anchor)
            case yaml.AliasEvent():
                self._add_alias(event.anchor, line)
            case yaml.MappingStartEvent():
                self._enter(_Frame({}, line, event.anchor, event.tag))
            case yaml.SequenceStartEvent():
                self._enter(_Frame([], line, event.anchor, event.tag))
            case _:
                self._leave(self._open.pop())

    def _enter(self, frame: _Frame) -> None:
        self._open.append(frame)
        self._kept.append(frame.value)
        if len(self._open) > DEEPEST:
            raise too_deep(frame.line)

    def _leave(self, frame: _Frame) -> None:
        value = frame.value if frame.tag in _CONTAINER_TAGS else _foreign(frame.tag)
        self._add(value, frame.line, frame.anchor, frame.nodes)

    def _add_alias(self, anchor: str | None, line: int) -> None:
        if any(frame.anchor == anchor for frame in self._open):
            value, nodes = (
                Refused(f"holds itself through the anchor {shown(anchor)}", "write the value out"),
                1,
            )
        else:
            unknown = Refused(f"is an alias of {shown(anchor)}, which is no anchor above", "write the value out")
            value, nodes = self._anchors.get(anchor or "", (unknown, 1))
        self._aliased += nodes
        if self._aliased > MOST_ALIASED:
            message = f"has aliases that stand for more than {MOST_ALIASED} values"
            raise Broken(line, message, "write the values out, without aliases")
        self._add(value, line, None, nodes)

    def _add(self, value: Any, line: int, anchor: str | None, nodes: int = 1) -> None:
        if anchor is not None:
            self._anchors[anchor] = value, nodes
        if not self._open:
            self.root, self.first = value, line
            return
        frame = self._open[-1]
        frame.nodes += nodes
        if isinstance(frame.value, list):
            self._lines[id(frame.value), len(frame.value)] = line
            frame.value.append(value)
        elif frame.key is _NO_KEY:
            frame.key, frame.key_line = value, line
        else:
            self._add_member(frame, value)

    def _add_member(self, frame: _Frame, value: Any) -> None:
        key = frame.key
        if not isinstance(key, str):
            key, value = shown(key), Refused("is a key that is no text", "put it in quotes")
        if key in frame.value:
            value = twice()
        frame.value[key] = value
        self._lines[id(frame.value), key] = frame.key_line
        frame.key = _NO_KEY


def _scalar(event: Any) -> Any:
    if event.tag in _TEXT_TAGS or (event.tag is None and not event.implicit[0]):
        return event.value
    value = _plain(event.value)
    if event.tag is None:
        return value
    if event.tag not in _TYPES:
        return _foreign(event.tag)
    # Of the types asked for, bool is also an int to Python, but not in YAML.
    if type(value) in _TYPES[event.tag]:
        return value
    return Refused(f"is {shown(value)}, which its tag does not admit", "leave the tag out")


def _plain(text: str) -> Any:
    if text in _WORDS:
        return _WORDS[text]
    if _INTEGER.fullmatch(text):
        return whole(text)
    if _OTHER_BASE.fullmatch(text):
        return whole(text[2:], 8 if text[1] == "o" else 16)
    if _FLOAT.fullmatch(text):
        return real(text)
    return no_number(text) if _NOT_FINITE.fullmatch(text) else text


def _foreign(tag: str | None) -> Refused:
    return Refused(f"has the tag {shown(tag)}, which is not read", "leave the tag out")
