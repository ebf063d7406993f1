"""A parsed document becomes records and problems, by what it declares itself to be."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import replace
from typing import Any, Literal

from gatecheck.model.found import Found
from gatecheck.model.verdict import Place, Problem
from gatecheck.scan.flaws import flaws_of
from gatecheck.scan.readers.document import MEDIA_TYPE, Document, Refused
from gatecheck.schema.read import Fault, Path, field_name, nearest_advice, shown
from gatecheck.schema.records import read_record

Declared = Literal["record", "other", "unknown", "nothing"]

_KEY = "gatecheck"
_VERSIONS = {kind: f"{kind}/1" for kind in ("record", "plan", "policy", "waivers", "accepted", "seal", "verdict")}
_TAME = re.compile(r"[A-Za-z0-9._/+-]{1,80}")
_LONGEST_FIELD = 100
_STORE = "store each record as its own document, as an element of a list that is the document, or as a .jsonl line"


def judged(document: Document) -> Iterator[Found | Problem]:
    """Yield the record in `document`, or each of a list of records, or what is wrong with them.

    A document of another kind, or one that declares nothing, yields nothing; but a record inside such a
    document would be missed, which is a problem.
    """
    if isinstance(document.value, list) and any(_declared(each) != "nothing" for each in document.value):
        for index, each in enumerate(document.value):
            yield from _one(document, each, (index,), among_others=True)
    else:
        yield from _one(document, document.value, ())


def _declared(value: Any) -> Declared:
    declaration = value.get(_KEY) if isinstance(value, dict) else None
    if not isinstance(declaration, str | Refused):
        return "nothing"
    if declaration == _VERSIONS["record"]:
        return "record"
    return "other" if declaration in _VERSIONS.values() else "unknown"


def _one(document: Document, value: Any, path: Path, *, among_others: bool = False) -> Iterator[Found | Problem]:
    place = replace(document.place, line=document.locate(path)) if path else document.place
    declared = _declared(value)
    if declared == "record":
        yield from _record(document, value, path, place)
    elif declared == "unknown":
        yield _unknown(document, value[_KEY], path)
    elif document.output:
        message = f"what stands under {MEDIA_TYPE} does not declare itself a record"
        yield Problem(place, message, 'give it the key "gatecheck" with the value "record/1"')
    elif declared == "nothing" and among_others:
        message = f"element {path[0]} of this list does not declare what it is, and others do"
        yield Problem(place, message, 'add "gatecheck": "record/1" to it, or take it out')
    else:
        yield from _nested(document, value, path)


def _unknown(document: Document, declaration: str | Refused, path: Path) -> Problem:
    place = replace(document.place, line=document.locate((*path, _KEY)))
    if isinstance(declaration, Refused):
        return Problem(place, f"the key {_KEY} {declaration.message}", declaration.advice)
    kind = declaration.partition("/")[0]
    if kind in _VERSIONS:
        message = (
            f"the document is declared as {shown(declaration)}; this version of gatecheck reads {_VERSIONS[kind]}"
        )
        return Problem(place, message, f"write it as {_VERSIONS[kind]}, or update gatecheck")
    message = f"the document is declared as {shown(declaration)}, which is no known kind of document"
    return Problem(place, message, nearest_advice(kind, _VERSIONS))


def _nested(document: Document, value: Any, path: Path) -> Iterator[Problem]:
    inner = sorted(_records_inside(value, path), key=document.locate)
    if inner:
        count = "a record" if len(inner) == 1 else f"{len(inner)} records"
        message = f"the document holds {count} inside it (at {_field(inner[0])}), where none is looked for"
        yield Problem(replace(document.place, line=document.locate(inner[0])), message, _STORE)


def _records_inside(value: Any, path: Path) -> Iterator[Path]:
    waiting = [(path, value)]
    while waiting:
        path, value = waiting.pop()
        if isinstance(value, dict):
            declaration = value.get(_KEY)
            if isinstance(declaration, str) and declaration.startswith("record/"):
                yield path
                continue
            waiting.extend(((*path, key), inner) for key, inner in value.items())
        elif isinstance(value, list):
            waiting.extend(((*path, index), inner) for index, inner in enumerate(value))


def _record(document: Document, value: Any, path: Path, place: Place) -> Iterator[Found | Problem]:
    record, faults = read_record(value) if document.small else (None, ())
    if record is not None:
        # What else a record may not be is a fault of some field too, or takes more room than there is.
        yield Found(record, place, value)
        return
    flaws, readable = flaws_of(value)
    flawed = [flaw.path for flaw in flaws]
    record, faults = read_record(value) if readable else (None, ())
    # A refused value is no value of any type, which its own sentence says better than the fault it leads to.
    faults = (*flaws, *(fault for fault in faults if not any(fault.path[: len(at)] == at for at in flawed)))
    if record is not None and not faults:
        yield Found(record, place, value)
    for fault in faults:
        yield _fault(document, value, path, fault)


def _fault(document: Document, value: dict[str, Any], path: Path, fault: Fault) -> Problem:
    identifier = value.get("id")
    name = named(identifier) if isinstance(identifier, str) else "a record"
    place = replace(document.place, line=document.locate((*path, *fault.path)))
    field = f"{_field(fault.path)} " if fault.path else ""
    return Problem(place, f"{name}: {field}{fault.message}", fault.advice)


def _field(path: Path) -> str:
    whole = field_name(tuple(step if isinstance(step, int) else named(step) for step in path))
    return whole if len(whole) <= _LONGEST_FIELD else whole[:_LONGEST_FIELD] + "…"


def named(name: str) -> str:
    """Return a name from a file as it may stand in a message: quoted and cut, unless it is plain."""
    return name if _TAME.fullmatch(name) else shown(name)
