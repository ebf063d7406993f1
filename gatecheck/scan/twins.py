"""Records that share an id: copies of one document become one, anything else is a clash."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

from gatecheck.git import safe
from gatecheck.model.found import Found
from gatecheck.model.verdict import Place, Problem
from gatecheck.scan.documents import named


def settled(found: Iterable[Found]) -> tuple[tuple[Found, ...], tuple[Problem, ...]]:
    """Return the records, one for each id, and the clashes; a copy of the first adds its place to it."""
    first: dict[str, Found] = {}
    problems: list[Problem] = []
    for one in sorted(found, key=lambda each: position(each.at)):
        name = one.record.id
        known = first.setdefault(name, one)
        if known is one:
            continue
        if known.digest == one.digest:
            first[name] = replace(known, also_at=(*known.also_at, one.at))
        else:
            problems.append(_clash(one, known))
    problems.extend(_alias_clashes(first))
    return tuple(first.values()), tuple(problems)


def position(place: Place) -> tuple[str, int, int, int]:
    """Return what places are sorted by: path, line, cell, output."""
    return place.path, place.line, place.cell or 0, place.output or 0


def _clash(one: Found, known: Found) -> Problem:
    message = f"{named(one.record.id)}: this id already stands at {_where(known)}, with other content"
    return Problem(one.at, message, "give each result its own id, or remove the older of the two")


def _alias_clashes(first: dict[str, Found]) -> Iterable[Problem]:
    for one in first.values():
        for alias in one.record.aliases:
            if alias in first and alias != one.record.id:
                where = _where(first[alias])
                message = f"{named(one.record.id)}: its alias {named(alias)} is the id of the record at {where}"
                yield Problem(one.at, message, "take the alias out, or remove the record under the earlier id")


def _where(found: Found) -> str:
    return safe(str(found.at))
