"""The JSON Schema of a format, made from the same typed model as its reader."""

from __future__ import annotations

import math
from typing import Any

from gatecheck.model.marks import Range
from gatecheck.model.numbers import REPORTED_PATTERN
from gatecheck.schema.shapes import Choice, Flag, Form, Items, Number, Part, Shape, Text, form_of

DIALECT = "https://json-schema.org/draft/2020-12/schema"


def json_schema(model: type, title: str) -> dict[str, Any]:
    """Return the JSON Schema (draft 2020-12) of the documents that read into `model`."""
    return {"$schema": DIALECT, "title": title, **_form(form_of(model))}


def _form(form: Form) -> dict[str, Any]:
    schema: dict[str, Any] = {
        "type": "object",
        "description": form.says,
        "properties": {name: _part(part) for name, part in form.parts.items()},
        "additionalProperties": False,
    }
    return {**schema, "required": list(form.required)} if form.required else schema


def _part(part: Part) -> dict[str, Any]:
    schema = _schema(part.shape)
    if not part.required:
        schema = {"anyOf": [schema, {"type": "null"}]}
    return {"description": part.says, **schema} if part.says else schema


def _schema(shape: Shape) -> dict[str, Any]:
    match shape:
        case Form():
            return _form(shape)
        case Choice():
            return {"enum": list(shape.values)}
        case Flag():
            return {"type": "boolean"}
        case Number():
            return _number(shape)
        case Text():
            return {"type": "string"} | ({"pattern": shape.pattern.regex} if shape.pattern else {})
        case Items():
            return _items(shape)
    member = True if shape.member is None else _schema(shape.member)
    return {"type": "object", "additionalProperties": member}


def _items(items: Items) -> dict[str, Any]:
    schema: dict[str, Any] = {"type": "array", "items": _schema(items.member)}
    if items.least:
        schema["minItems"] = items.least
    if items.most is not None:
        schema["maxItems"] = items.most
    return {"anyOf": [_schema(items.member), schema]} if items.lone else schema


def _number(number: Number) -> dict[str, Any]:
    bare = {"type": "integer" if number.whole else "number", **_limits(number.within)}
    if not number.reported:
        return bare
    return {"anyOf": [bare, {"type": "string", "pattern": REPORTED_PATTERN}]}


def _limits(within: Range) -> dict[str, float]:
    limits = {}
    if math.isfinite(within.low):
        limits["exclusiveMinimum" if within.low_open else "minimum"] = within.low
    if math.isfinite(within.high):
        limits["exclusiveMaximum" if within.high_open else "maximum"] = within.high
    return limits
