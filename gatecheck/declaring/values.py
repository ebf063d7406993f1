"""Values of analysis code as values of a document: plain numbers, merged objects, the contract's order."""

from __future__ import annotations

import math
from collections.abc import Mapping
from pathlib import PurePath
from typing import Any

from gatecheck.declaring.errors import DeclareError
from gatecheck.schema.shapes import Form, Items, Shape


def plain(value: Any) -> Any:
    """Return `value` without `None` members, with arrays as lists, numpy scalars as numbers, paths as texts.

    What has no such form stays as it is, for the reader of records to complain about under its field.
    """
    if isinstance(value, Mapping):
        return {key: plain(member) for key, member in value.items() if member is not None}
    if hasattr(value, "tolist"):
        return plain(value.tolist())
    if isinstance(value, list | tuple):
        return [plain(member) for member in value]
    return value.as_posix() if isinstance(value, PurePath) else value


def merged(derived: Mapping[str, Any], given: Any) -> Any:
    """Return `derived` with what is `given` laid over it, member by member; a given `None` removes."""
    if not isinstance(given, Mapping):
        return dict(derived) if given is None else given
    both = dict(derived)
    for key, member in given.items():
        below = derived.get(key)
        both[key] = merged(below, member) if isinstance(below, Mapping) and member is not None else member
    return both


def in_contract_order(document: Any, shape: Shape) -> Any:
    """Return `document` with its keys in the order of the contract, unknown keys last."""
    if isinstance(shape, Form) and isinstance(document, Mapping):
        known = [name for name in shape.parts if name in document]
        ordered = {name: in_contract_order(document[name], shape.parts[name].shape) for name in known}
        return ordered | {key: member for key, member in document.items() if key not in ordered}
    if isinstance(shape, Items) and isinstance(document, list):
        return [in_contract_order(member, shape.member) for member in document]
    return document


def number(value: Any, name: str) -> float:
    """Return a number of a result as a finite Python number.

    Raises
    ------
    DeclareError
        `value` holds several numbers, or is not finite.
    """
    bare = plain(value)
    if isinstance(bare, list):
        raise DeclareError(
            f"the result holds {len(bare)} values of {name}, so it is several tests: declare each of them by itself"
        )
    if not is_number(bare):
        raise DeclareError(
            f"the result's {name} is {bare}, not a finite number: look for constant input, missing values "
            "or a model that did not converge"
        )
    return float(bare)


def degrees(value: Any) -> float:
    """Return degrees of freedom, as a whole number where they are one."""
    df = number(value, "df")
    return int(df) if df.is_integer() else df


def is_number(value: Any) -> bool:
    """Whether `value` is a finite number of Python, and no truth value."""
    return isinstance(value, int | float) and not isinstance(value, bool) and math.isfinite(value)
