"""Documented, correct results as records: what the examples of scipy, statsmodels and R compute or print."""

from __future__ import annotations

from collections.abc import Iterable
from decimal import ROUND_HALF_EVEN, Decimal
from typing import Any

from support import Document

from gatecheck.model.struct import struct

#: A p below this is told as a bound, by the number of places in which p is printed.
_BOUNDS = {3: ("<0.001", 0.001), 4: ("<0.0001", 0.0001)}
#: Counts, and what was chosen and not computed.
_EXACT = {"n", "events", "level", "size", "resamples", "sides", "null"}
_ALPHA = 0.05


@struct
class Case:
    """One documented result: its record, what kind of result it is, and where it comes from.

    `in_full` is true where the documentation gives all that is asked of a result.
    """

    kind: str
    source: str
    document: Document
    in_full: bool = False

    @property
    def id(self) -> str:
        """The id of the record."""
        return str(self.document["id"])


def record(identifier: str, **parts: Any) -> Document:
    """A record with a claim of plain form: what its p allows to say, and no more."""
    document = {"gatecheck": "record/1", "id": identifier, "status": "exploratory", **parts}
    return {**document, "claim": _claim(document)}


def _claim(document: Document) -> str:
    about = document["id"].split("/")[-1].replace("-", " ")
    p = Decimal(str(document.get("test", {}).get("p", 1)).lstrip("<> "))
    if p >= Decimal(str(_ALPHA)):
        return f"Whether {about} makes a difference is left open by these data."
    ways = (
        f"The outcome differs by {about}.",
        f"The outcome is associated with {about}.",
        f"These data suggest a difference by {about}.",
    )
    return ways[len(document["id"]) % len(ways)]


def as_printed(part: Any, digits: int, places: int) -> Any:
    """Figures as programs print them: `digits` significant ones, a p in `places` decimals or as a bound."""

    def told(key: str, value: Any) -> Any:
        if isinstance(value, dict):
            return {name: told(name, each) for name, each in value.items()}
        if isinstance(value, list):
            return [told(key, each) for each in value]
        if not isinstance(value, float) or key in _EXACT:
            return value
        if key == "p":
            bound, least = _BOUNDS[places]
            return bound if value < least else f"{value:.{places}f}"
        return significant(value, digits)

    return told("", part)


def significant(value: float, digits: int) -> str:
    """A number in so many significant digits, with its zeros, and no fewer than its whole part has."""
    if value == 0 or not 1e-4 <= abs(value) < 10.0**digits:
        return f"{value:.{digits - 1}e}" if 0 < abs(value) < 1 else f"{value:.0f}"
    text = f"{value:#.{digits}g}"
    return text.rstrip(".")


def rounded_text(text: str, places: int) -> str:
    """A printed number rounded again to so many places; one with fewer stays as it is."""
    number = Decimal(text)
    if -int(number.as_tuple().exponent) <= places:
        return text
    return str(number.quantize(Decimal(1).scaleb(-places), ROUND_HALF_EVEN))


def by_id(cases: Iterable[Case]) -> dict[str, Case]:
    """The cases by their ids, which are unique."""
    listed = list(cases)
    found = {each.id: each for each in listed}
    assert len(found) == len(listed)
    return found
