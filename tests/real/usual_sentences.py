"""The sentence that people write on a result, made from a record: its figures rounded again, each by its name."""

from __future__ import annotations

import re
from decimal import Decimal

from real.material import Case, rounded_text
from support import Document

from gatecheck.model.struct import struct

_SYMBOLS = {"t": "t", "z": "z", "F": "F", "chi2": "χ²", "r": "r"}
_LEAST_P = Decimal("0.001")
_MOST_DIGITS = 6
#: Ways to write an interval; each with its level, its lower and its upper limit.
_INTERVALS = (
    "{level} % CI {lower limit} to {upper limit}",
    "{level}% CI [{lower limit}, {upper limit}]",
    "{level} % confidence interval {lower limit}, {upper limit}",
    "{level} % CI: {lower limit} to {upper limit}",
)


@struct
class Sentence:
    """A sentence on one record: its parts in order, and which of them are figures, by name.

    `statistics` is how many statistics a reader of the sentence sees in it: tests, p alone, intervals, shares.
    """

    case: Case
    parts: tuple[tuple[str, str], ...]
    statistics: tuple[str, ...]

    @property
    def text(self) -> str:
        """The sentence itself."""
        return "".join(text for _, text in self.parts)


def sentence(case: Case) -> Sentence:
    """The sentence on one record."""
    told = [each for each in (_test(case.document), _interval(case), *_shares(case.document)) if each]
    if len(case.id) % 2:
        told.reverse()
    parts: list[tuple[str, str]] = [("", "In all, ")]
    for number, (_, figures) in enumerate(told):
        parts += [("", ", " if number else ""), *figures]
    return Sentence(case, (*parts, ("", ".")), tuple(kind for kind, _ in told))


def _test(document: Document) -> tuple[str, list[tuple[str, str]]] | None:
    test = document.get("test", {})
    value, p = _shown(test.get("value"), 2), _shown_p(test.get("p"))
    symbol = _SYMBOLS.get(test.get("statistic", ""))
    if symbol is None or value is None:
        return ("p alone", p) if p and p[0][1].endswith("= ") else None
    df = test.get("df", [])
    degrees = [_shown(each, 1) for each in (df if isinstance(df, list) else [df])]
    parts = [("", f"{symbol}(" if degrees else symbol)]
    for number, each in enumerate(degrees):
        parts += [("", ", " if number else ""), ("df", str(each))]
    n = document["sample"].get("n")
    if symbol == "χ²" and n:
        parts += [("", ", N = "), ("N", str(n))]
    parts += [("", ") = " if degrees else " = "), ("statistic", value)]
    return str(test["statistic"]), [*parts, *([("", ", "), *p] if p else [])]


def _shown_p(p: object) -> list[tuple[str, str]]:
    if p is None:
        return []
    bare = Decimal(str(p).lstrip("<"))
    if bare <= _LEAST_P:
        return [("", "p < "), ("bound on p", ".001")]
    return [("", "p = "), ("p", rounded_text(f"{bare:f}", 3).removeprefix("0"))]


def _shown(number: object, places: int) -> str | None:
    """A figure in so many places, and in two significant digits where it is small; `None` for one out of hand."""
    if number is None:
        return None
    value = Decimal(str(number))
    if value == 0:
        return str(number) if "e" not in str(number).lower() else None
    if not -3 <= value.adjusted() < _MOST_DIGITS or "e" in str(number).lower():
        return None
    return rounded_text(f"{value:f}", max(places, 1 - value.adjusted()))


def _interval(case: Case) -> tuple[str, list[tuple[str, str]]] | None:
    interval = case.document.get("estimate", {}).get("interval", {})
    low, high = (_shown(interval.get(name), 2) for name in ("low", "high"))
    if low is None or high is None:
        return None
    pattern = _INTERVALS[len(case.id) % len(_INTERVALS)]
    shown = {"level": f"{100 * interval['level']:g}", "lower limit": low, "upper limit": high}
    value = _shown(case.document["estimate"]["value"], 2)
    if value is not None and len(case.id) % 2:
        pattern, shown["estimate"] = f"{{estimate}} ({pattern})", value
    pieces = re.split(r"{(estimate|level|lower limit|upper limit)}", pattern)
    return "interval", [
        (piece if at % 2 else "", shown[piece] if at % 2 else piece) for at, piece in enumerate(pieces) if piece
    ]


def _shares(document: Document) -> list[tuple[str, list[tuple[str, str]]]]:
    groups = [each for each in document["sample"].get("groups", []) if "events" in each]
    return [("share", _share(each["events"], each["n"])) for each in groups]


def _share(part: int, whole: int) -> list[tuple[str, str]]:
    percent = rounded_text(str(Decimal(100 * part) / whole), 1)
    return [("part", str(part)), ("", " of "), ("whole", str(whole)), ("", " ("), ("percent", percent), ("", " %)")]
