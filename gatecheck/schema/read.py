"""Read a parsed document into its typed model: a value, and every fault that stands in the way."""

from __future__ import annotations

import functools
import math
import re
from collections.abc import Callable, Iterable, Mapping
from typing import Any, TypeVar

from gatecheck.model.marks import Range
from gatecheck.model.numbers import Reported, exact, parse_reported
from gatecheck.model.struct import struct
from gatecheck.schema.shapes import Choice, Flag, Form, Items, Number, Shape, Table, Text, form_of

Path = tuple[str | int, ...]
_SHOWN = 40
_FEW_FAULTS = 20
_MISSING = object()
_KEY = Text()
M = TypeVar("M")


@struct
class Fault:
    """One thing wrong with a document: the field, what is wrong, and what to do."""

    path: Path
    message: str
    advice: str

    @property
    def field(self) -> str:
        """The field as a person writes it, such as `sample.groups[0].n`."""
        return field_name(self.path)


def field_name(path: Path) -> str:
    """Return `path` as a person writes it, such as `sample.groups[0].n`."""
    name = "".join(f"[{step}]" if isinstance(step, int) else f".{step}" for step in path)
    return name.removeprefix(".")


def read(model: type[M], document: Any) -> tuple[M | None, tuple[Fault, ...]]:
    """Read `document`, made of dicts, lists, texts, numbers, booleans and None, into `model`.

    Returns the value and no fault, or no value and all the faults at once.
    """
    reader = _Reader([])
    value = reader.form(form_of(model), document, ())
    return (None, tuple(reader.faults)) if reader.faults else (value, ())


@struct
class _Reader:
    """Walks a document beside its shape and gathers faults; after a fault nothing is built."""

    faults: list[Fault]

    def fault(self, path: Path, message: str, advice: str) -> Any:
        self.faults.append(Fault(path, message, advice))
        return _MISSING

    def value(self, shape: Shape, found: Any, path: Path) -> Any:
        return _READ[type(shape)](self, shape, found, path)

    def form(self, form: Form, found: Any, path: Path) -> Any:
        if not isinstance(found, Mapping):
            return self.fault(path, f"is {shown(found)}, not an object", f"write an object: {form.says}")
        parts = form.parts
        if not found.keys() <= parts.keys():
            self.unknown_keys(path, [key for key in found if key not in parts], parts)
        values = {}
        for key, raw in found.items():
            part = parts.get(key)
            if part is not None and raw is not None:
                values[part.name] = self.value(part.shape, raw, (*path, key))
        for name in form.required:
            if found.get(name) is None:
                self.fault((*path, name), "is missing", f"give it: {form.parts[name].says}")
        return _MISSING if self.faults else form.makes(**values)

    def unknown_keys(self, path: Path, keys: Iterable[Any], known: Iterable[str]) -> None:
        for key in map(str, keys):
            # To look for the nearest word takes time, which a document of unknown keys alone must not multiply.
            few = len(self.faults) < _FEW_FAULTS
            advice = nearest_advice(key, known) if few else f"known: {', '.join(sorted(known))}"
            self.fault((*path, key), "is no known key", advice)

    def items(self, items: Items, found: Any, path: Path) -> Any:
        if items.lone and not isinstance(found, list):
            found = [found]
        if not isinstance(found, list):
            return self.fault(path, f"is {shown(found)}, not a list", "write a list in square brackets")
        if len(found) < items.least or len(found) > (items.most or len(found)):
            return self.fault(path, f"has {len(found)} members", f"give {_wanted(items)}")
        return tuple(self.value(items.member, each, (*path, index)) for index, each in enumerate(found))

    def table(self, table: Table, found: Any, path: Path) -> Any:
        if not isinstance(found, Mapping):
            return self.fault(path, f"is {shown(found)}, not an object", "write keys with their values")
        if table.member is None:
            return dict(found)
        return {
            self.text(_KEY, key, (*path, key)): self.value(table.member, each, (*path, key))
            for key, each in found.items()
        }

    def number(self, number: Number, found: Any, path: Path) -> Any:
        if isinstance(found, str) and number.reported:
            return self.reported(number.within, found, path)
        if isinstance(found, str):
            bare = found.strip()
            advice = f"write {bare} without quotes" if parse_reported(bare) else "give a number"
            return self.fault(path, f"is the text {shown(found)}, where only a number is meant", advice)
        value = _finite(found)
        if value is None:
            return self.fault(path, f"is {shown(found)}, not a finite number", "give a number or leave it out")
        if number.whole and not value.is_integer():
            return self.fault(path, f"is {shown(found)}, not a whole number", "give a whole number")
        if not number.within.admits(value):
            return self.fault(path, f"is {shown(found)}, outside its range", f"give a number {number.within}")
        if number.whole:
            return int(value)
        return exact(value) if number.reported else value

    def reported(self, within: Range, found: str, path: Path) -> Any:
        number = parse_reported(found)
        if number is None:
            advice = 'write the number as it was printed, such as "2.21" or "<0.001"'
            return self.fault(path, f"is the text {shown(found)}, which is no number", advice)
        if not within.admits(number.value) and not _rounded_to_an_end(within, number):
            return self.fault(path, f"is {shown(found)}, outside its range", f"give a number {within}")
        return number

    def text(self, text: Text, found: Any, path: Path) -> Any:
        if not isinstance(found, str):
            return self.fault(path, f"is {shown(found)}, not a text", "put it in quotes")
        if not found.isascii() and any("\ud800" <= letter <= "\udfff" for letter in found):
            return self.fault(path, "holds half of a surrogate pair", "write the text in valid Unicode")
        if text.pattern is not None and not _pattern(text.pattern.regex).search(found):
            return self.fault(path, f"is {shown(found)}", f"give {text.pattern.words}")
        return found

    def flag(self, _: Flag, found: Any, path: Path) -> Any:
        if isinstance(found, bool):
            return found
        return self.fault(path, f"is {shown(found)}", "write true or false, without quotes")

    def choice(self, choice: Choice, found: Any, path: Path) -> Any:
        if not isinstance(found, bool):
            for value in choice.values:
                if found == value:
                    return value
        words = [str(value) for value in choice.values]
        return self.fault(path, f"is {shown(found)}", nearest_advice(str(found), words))


#: Which method reads which shape.
_READ: dict[type, Callable[[_Reader, Any, Any, Path], Any]] = {
    Form: _Reader.form,
    Items: _Reader.items,
    Table: _Reader.table,
    Number: _Reader.number,
    Text: _Reader.text,
    Choice: _Reader.choice,
    Flag: _Reader.flag,
}


def _wanted(items: Items) -> str:
    if items.most is None:
        return f"{items.least} or more"
    return f"{items.least}" if items.least == items.most else f"{items.least} to {items.most}"


def _rounded_to_an_end(within: Range, number: Reported) -> bool:
    """Whether a rounded figure reaches into a range that excludes its end ("0.0" may stand for 0.04)."""
    return number.relation == "=" and within.low_open and number.value == within.low < number.high


@functools.cache
def _pattern(regex: str) -> re.Pattern[str]:
    return re.compile(regex)


def _finite(found: Any) -> float | None:
    if isinstance(found, bool) or not isinstance(found, int | float):
        return None
    try:
        value = float(found)
    except OverflowError:
        return None
    return value if math.isfinite(value) else None


def shown(found: Any) -> str:
    """Return a short, harmless picture of a value from outside, for a message."""
    if found is None:
        return "null"
    if isinstance(found, bool):
        return "true" if found else "false"
    if isinstance(found, Mapping):
        return "an object"
    if isinstance(found, list):
        return "a list"
    if isinstance(found, int) and found.bit_length() > _SHOWN * 3:
        return "a number of very many digits"
    text = ascii(found) if isinstance(found, str) else str(found)
    return text if len(text) <= _SHOWN else text[:_SHOWN] + "…"


def nearest_advice(word: str, known: Iterable[str]) -> str:
    """Return advice that names the known word nearest to `word`, or all of them where none is near."""
    import difflib  # noqa: PLC0415  # needed for a fault alone, and costs start-up time

    known = sorted(known)
    near = difflib.get_close_matches(word, known, n=1, cutoff=0.6)
    listed = ", ".join(known)
    return f"the nearest known one is {near[0]} (known: {listed})" if near else f"known: {listed}"
