"""One figure of a documented result changed beyond rounding, as by a slip: a digit, two places, the point."""

from __future__ import annotations

import copy
import itertools
from collections.abc import Iterator, Sequence
from decimal import Decimal
from typing import Any

import numpy as np
from real.material import Case
from real.usual_sentences import Sentence

from gatecheck.model.struct import struct
from gatecheck.schema.records import read_record

#: A figure is changed beyond rounding where it moves by a fifth of itself and by ten units of its last place.
LEAST_SHARE, LEAST_UNITS = 0.2, 10
#: The same of a count, which has no rounding.
LEAST_COUNT = 3
#: The figures of which a sign may be lost or added.
SIGNED = {"statistic", "estimate", "lower limit", "upper limit", "group mean"}
#: Where each figure of a record stands; the figures of the first two groups by themselves.
PLACES: dict[str, tuple[tuple[str | int, ...], ...]] = {
    "statistic": (("test", "value"),),
    "df": (("test", "df"), ("test", "df", 0), ("test", "df", 1)),
    "p": (("test", "p"),),
    "estimate": (("estimate", "value"),),
    "standard error": (("estimate", "standard_error"),),
    "lower limit": (("estimate", "interval", "low"),),
    "upper limit": (("estimate", "interval", "high"),),
    "n": (("sample", "n"),),
    "group mean": tuple(("sample", "groups", at, "mean") for at in range(2)),
    "group sd": tuple(("sample", "groups", at, "sd") for at in range(2)),
    "group n": tuple(("sample", "groups", at, "n") for at in range(2)),
    "events": tuple(("sample", "groups", at, "events") for at in range(2)),
}


@struct
class Mutation:
    """A case with one figure changed: which, from what, to what, and the document that results."""

    case: Case
    figure: str
    before: Any
    after: Any
    document: dict[str, Any]


def mutations_of(cases: Sequence[Case], seed: int, each: int = 1) -> Iterator[Mutation]:
    """Yield up to `each` mutations of every figure of every case; a record stays one that can be read."""
    generator = np.random.default_rng(seed)
    places = [(figure, path) for figure, paths in PLACES.items() for path in paths]
    for case, (figure, path) in itertools.product(cases, places):
        before = _at(case.document, path)
        for after in _changes(before, figure, generator, each):
            made = _with(case.document, path, after)
            if read_record(made)[0] is not None:
                yield Mutation(case, figure, before, after, made)


def mutated_sentences(told: Sequence[Sentence], seed: int) -> Iterator[tuple[str, Sentence, str]]:
    """Yield the name of a figure, the sentence, and its text with that figure changed, for each of its figures."""
    generator = np.random.default_rng(seed)
    for one in told:
        for number, (figure, shown) in enumerate(one.parts):
            if figure in {"", "bound on p"}:  # a wider bound is true as well
                continue
            for after in _changes(int(shown) if figure in {"N", "part", "whole"} else shown, figure, generator, 1):
                parts = [str(after) if at == number else text for at, (_, text) in enumerate(one.parts)]
                yield figure, one, "".join(parts)


def _at(document: Any, path: tuple[str | int, ...]) -> Any:
    for step in path:
        inside = isinstance(step, int) and isinstance(document, list) and step < len(document)
        if not inside and not (isinstance(document, dict) and step in document):
            return None
        document = document[step]
    return document


def _with(document: dict[str, Any], path: tuple[str | int, ...], value: Any) -> dict[str, Any]:
    made = copy.deepcopy(document)
    *outer, last = path
    place: Any = made
    for step in outer:
        place = place[step]
    place[last] = value
    return made


def _changes(value: Any, figure: str, generator: np.random.Generator, most: int) -> list[Any]:
    """Up to `most` other figures, chosen among all changes of a hand that are large enough."""
    if isinstance(value, bool) or value is None or not isinstance(value, int | str):
        return []
    slips = [*_slips(str(value)), *(_other_sign(str(value)) if figure in SIGNED else ())]
    found = sorted({each for each in slips if _is_far(str(value), each, counts=isinstance(value, int))})
    if figure == "p":
        found = [each for each in found if 0 < Decimal(each.lstrip("<")) <= 1]
    chosen = generator.permutation(len(found))[:most]
    return [int(found[at]) if isinstance(value, int) else found[at] for at in chosen]


def _slips(text: str) -> Iterator[str]:
    """Another digit, two neighbouring digits the wrong way round, a moved point."""
    mantissa, mark, exponent = text.partition("e")
    for at, sign in enumerate(mantissa):
        if sign.isdigit():
            yield from (f"{mantissa[:at]}{digit}{mantissa[at + 1 :]}{mark}{exponent}" for digit in "123456789")
        if mantissa[at : at + 2].isdigit() and len(mantissa[at : at + 2]) == 2:
            yield f"{mantissa[:at]}{mantissa[at + 1]}{sign}{mantissa[at + 2 :]}{mark}{exponent}"
        if sign == "." and at + 2 < len(mantissa) and mantissa[:at].lstrip("-<0"):
            yield f"{mantissa[:at]}{mantissa[at + 1]}.{mantissa[at + 2 :]}{mark}{exponent}"
        if sign == "." and at > 1 and mantissa[at - 1].isdigit():
            yield f"{mantissa[: at - 1]}.{mantissa[at - 1]}{mantissa[at + 1 :]}{mark}{exponent}"


def _other_sign(text: str) -> tuple[str]:
    return (text[1:] if text.startswith("-") else f"-{text}",)


def _is_far(before: str, after: str, *, counts: bool) -> bool:
    one, other = (Decimal(each.lstrip("<")) for each in (before, after))
    if counts:
        return abs(one - other) >= LEAST_COUNT and other > 0 and after == str(int(after))
    unit = max(Decimal(1).scaleb(int(each.as_tuple().exponent)) for each in (one, other))
    return abs(one - other) >= max(Decimal(str(LEAST_SHARE)) * abs(one), LEAST_UNITS * unit)
