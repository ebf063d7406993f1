"""The shape of a format: what a typed model admits, worked out once from its type hints."""

from __future__ import annotations

import dataclasses
import types
from collections.abc import Mapping
from typing import Annotated, Any, Literal, TypeVar, Union, get_args, get_origin, get_type_hints

from gatecheck.model.marks import Length, OneOrMore, Pattern, Range
from gatecheck.model.numbers import Reported
from gatecheck.model.struct import struct

M = TypeVar("M")


@struct
class Choice:
    """One of a few words or numbers."""

    values: tuple[str | int, ...]


@struct
class Flag:
    """True or false."""


@struct
class Number:
    """A finite number; `whole` admits integers alone, `reported` also admits a string as reported."""

    within: Range
    whole: bool = False
    reported: bool = False


@struct
class Text:
    """A text that matches a pattern."""

    pattern: Pattern | None = None


@struct
class Items:
    """A list of one shape; `lone` admits the only member in place of the list."""

    member: Shape
    least: int = 0
    most: int | None = None
    lone: bool = False


@struct
class Table:
    """Free keys, each with a value of one shape (`None`: any value, read later by whoever knows it)."""

    member: Shape | None


@struct
class Part:
    """One field of a `Form`."""

    name: str
    shape: Shape
    required: bool
    says: str


@struct
class Form:
    """An object with known keys, read into the dataclass `makes`."""

    makes: type
    says: str
    parts: Mapping[str, Part]
    required: tuple[str, ...]


Shape = Choice | Flag | Number | Text | Items | Table | Form


_FORMS: dict[type, Form] = {}


def form_of(model: type) -> Form:
    """Return the shape of the dataclass `model`.

    Raises
    ------
    TypeError
        A field has a type that formats do not use.
    """
    if model not in _FORMS:
        _FORMS[model] = _form(model)
    return _FORMS[model]


def _form(model: Any) -> Form:
    hints = get_type_hints(model, include_extras=True)
    parts = {field.name.rstrip("_"): _part(field, hints[field.name]) for field in dataclasses.fields(model)}
    required = tuple(name for name, part in parts.items() if part.required)
    return Form(model, (model.__doc__ or "").split("\n")[0], parts, required)


def _part(field: dataclasses.Field[Any], hint: Any) -> Part:
    required = field.default is dataclasses.MISSING and field.default_factory is dataclasses.MISSING
    kind, marks = _bare(hint)
    says = next((mark for mark in reversed(marks) if isinstance(mark, str)), "")
    return Part(field.name, _shape(kind, marks), required, says)


def _bare(hint: Any) -> tuple[Any, tuple[Any, ...]]:
    """Strip `Annotated` and `| None` from a hint; return the bare type and every mark met, inner first."""
    if get_origin(hint) is Annotated:
        inner, *marks = get_args(hint)
        kind, before = _bare(inner)
        return kind, (*before, *marks)
    if get_origin(hint) in {Union, types.UnionType}:
        (inner,) = (option for option in get_args(hint) if option is not types.NoneType)
        return _bare(inner)
    return hint, ()


def _mark(marks: tuple[Any, ...], kind: type[M]) -> M | None:
    return next((mark for mark in reversed(marks) if isinstance(mark, kind)), None)


def _shape(kind: Any, marks: tuple[Any, ...]) -> Shape:
    origin = get_origin(kind)
    if origin is Literal:
        return Choice(get_args(kind))
    if origin is tuple:
        return _items(get_args(kind)[0], marks)
    if origin is dict:
        member = get_args(kind)[1]
        return Table(None if member is Any else _shape(*_bare(member)))
    if kind is not Reported and isinstance(kind, type) and dataclasses.is_dataclass(kind):
        return form_of(kind)
    return _scalar(kind, marks)


def _items(member: Any, marks: tuple[Any, ...]) -> Items:
    shape = _shape(*_bare(member))
    lone, length = _mark(marks, OneOrMore), _mark(marks, Length)
    if lone is not None:
        return Items(shape, least=lone.least, most=lone.most, lone=True)
    if length is not None:
        return Items(shape, least=length.size, most=length.size)
    return Items(shape)


def _scalar(kind: Any, marks: tuple[Any, ...]) -> Shape:
    within = _mark(marks, Range) or Range()
    scalars: dict[Any, Shape] = {
        bool: Flag(),
        str: Text(_mark(marks, Pattern)),
        int: Number(within, whole=True),
        float: Number(within),
        Reported: Number(within, reported=True),
    }
    if kind not in scalars:
        raise TypeError(f"no format uses the type {kind!r}")
    return scalars[kind]
