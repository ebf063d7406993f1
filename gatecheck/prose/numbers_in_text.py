"""Numbers as prose shows them: read with the digits that they show, held against a record, and written anew.

A record's number agrees with a shown one if it may round to it: half a unit of the last digit shown to either side,
ends included, since halves are rounded up by some writers and to even by others (common practice, no source).
"""

from __future__ import annotations

import functools
import re
from collections.abc import Iterator
from dataclasses import dataclass
from decimal import ROUND_HALF_UP, Context, Decimal
from typing import Literal

from gatecheck.model.numbers import Reported

Relation = Literal["=", "<", "≤", ">", "≥"]

_SUPERSCRIPTS = str.maketrans("⁰¹²³⁴⁵⁶⁷⁸⁹⁻⁺", "0123456789-+")
_TO_SUPERSCRIPTS = str.maketrans("0123456789-+", "⁰¹²³⁴⁵⁶⁷⁸⁹⁻⁺")
_MINUS = "−"
#: What separates thousands; a comma with any other number of digits behind it is a decimal mark.
_THOUSANDS = r"(?:,|\{,\}|\\,|[\u2009\u202f\u00a0])"
_DIGITS = (
    rf"(?:\d{{1,3}}(?:{_THOUSANDS}\d{{3}})+(?!\d)(?:\.\d{{1,30}})?|\d{{1,40}},(?:\d{{1,2}}|\d{{4,30}})(?!\d|[.,]\d)"
    r"|\d{1,40}(?:\.\d{1,30})?|\.\d{1,30})(?!\d)"
)
_DECIMAL_COMMA = re.compile(r"\d+,(?:\d{1,2}|\d{4,})")
_TEN = (
    r"[eE](?P<plain>[+-]?\d{1,3})(?![\d.])"
    r"|(?<![\d.,]10)(?<=10)(?:\^\{?(?P<alone_raised>[\-−]\d{1,3})[}^]?|<sup>(?P<alone_sup>[\-−]\d{1,3})</sup>"
    r"|(?P<alone_small>⁻[⁰¹²³⁴-⁹]{1,3}))"
    r"|[\s~$]{0,2}(?:×|\\times|\\cdot|·|&times;|x)[\s~$]{0,2}10"
    r"(?:\^\{?(?P<raised>[+\-−]?\d{1,3})[}^]?|<sup>(?P<sup>[+\-−]?\d{1,3})</sup>|(?P<small>[⁻⁺]?[⁰¹²³⁴-⁹]{1,3}))"
)
_NUMBER = re.compile(
    rf"(?<![^\W_])(?<![.^])(?<![^\W_]_)(?P<sign>(?<![\w)\-−–])[+\-−])?(?P<digits>{_DIGITS})(?P<ten>{_TEN})?"
    r"(?P<percent>(?:[\s~]|\\,)?\\?%|[ ~](?:percent|per cent)\b)?"
)
_RELATION = re.compile(
    r"(?:(?P<below><|&lt;|\\lt)|(?P<most>≤|\\leq?(?:slant)?)|(?P<above>>|&gt;|\\gt)|(?P<least>≥|\\geq?(?:slant)?))"
    r"[\s$~{}*_]{0,4}\Z"
)
_RELATIONS: dict[str | None, Relation] = {"below": "<", "most": "≤", "above": ">", "least": "≥"}
_LONGEST_RELATION = 16
#: As many digits as the largest double has with the decimals that a text may show.
_WIDE = Context(prec=400)


@dataclass(eq=False, repr=False)
class Shown:
    """A number in a text, as it was found there; what it says is worked out when someone asks."""

    found: re.Match[str]

    @property
    def start(self) -> int:
        """Where it begins."""
        return self.found.start()

    @property
    def end(self) -> int:
        """Where it ends, without a percent sign."""
        return self.found.end("ten") if self.found["ten"] else self.found.end("digits")

    @property
    def text(self) -> str:
        """The number as it is written, without a percent sign."""
        return self.found.string[self.start : self.end]

    @property
    def percent(self) -> bool:
        """Whether a percent sign follows."""
        return self.found["percent"] is not None

    @property
    def told(self) -> str:
        """The number as people read it: with its relation, where that is that of a bound, and its percent sign."""
        bound = "" if self.relation == "=" else f"{self.relation} "
        return f"{bound}{self.text}{' %' if self.percent else ''}"

    @functools.cached_property
    def value(self) -> Decimal:
        """The number that is written; a percent sign leaves it as it is."""
        return self._digits.scaleb(_power(self.found))

    @functools.cached_property
    def unit(self) -> Decimal:
        """What its last digit stands for."""
        return Decimal(1).scaleb(int(self._digits.as_tuple().exponent) + _power(self.found))

    @functools.cached_property
    def relation(self) -> Relation:
        """What stands before it: a number is equal to what it tells, or a bound."""
        least = max(0, self.start - _LONGEST_RELATION)
        before = _RELATION.search(self.found.string, least, self.start)
        return _RELATIONS[before.lastgroup] if before else "="

    @property
    def _digits(self) -> Decimal:
        digits = "1" if _power_alone(self.found) else _bare(self.found["digits"])
        return Decimal(("-" if self.found["sign"] in {"-", _MINUS} else "") + digits)


def numbers(text: str, start: int, end: int) -> Iterator[Shown]:
    """Yield the numbers in `text` from `start` to `end`; digits within words such as `H2` or `m2` are none."""
    return map(Shown, _NUMBER.finditer(text, start, end))


def number_at(text: str, start: int) -> Shown | None:
    """Return the number that begins at `start`, if one does."""
    found = _NUMBER.match(text, start)
    return Shown(found) if found else None


def _bare(digits: str) -> str:
    if _DECIMAL_COMMA.fullmatch(digits):
        return digits.replace(",", ".")
    return re.sub(r"[^\d.]", "", digits)


def _power(found: re.Match[str]) -> int:
    raised = _power_alone(found) or found["plain"] or found["raised"] or found["sup"] or found["small"]
    return int(raised.translate(_SUPERSCRIPTS).replace(_MINUS, "-")) if raised else 0


def _power_alone(found: re.Match[str]) -> str | None:
    """The power of a number that is a power of ten and nothing else, such as `10^-4`."""
    return found["alone_raised"] or found["alone_sup"] or found["alone_small"]


def agrees(shown: Shown, reported: Reported, *, in_percent: bool = False) -> bool:
    """Whether the record's number may be what is shown.

    `in_percent` is true where the record itself gives percent; else a number with a percent sign is a hundredth.
    """
    scale = _scale(shown, in_percent=in_percent)
    value, half = shown.value.scaleb(scale), shown.unit.scaleb(scale) / 2
    low, high = _interval(reported)
    if shown.relation == "=":
        return reported.relation == "=" and low <= value + half and high >= value - half
    if shown.relation in {"<", "≤"}:
        return reported.relation != ">" and (low < value or (low == value and shown.relation == "≤"))
    return reported.relation != "<" and (high > value or (high == value and shown.relation == "≥"))


def rewritten(shown: Shown, reported: Reported, *, in_percent: bool = False) -> str | None:
    """Return the record's number in the digits and the writing of the shown one, or `None` where that cannot be.

    It cannot where either is a bound, where the record has fewer digits than are shown, where a number that is not
    zero would be shown as zero, and where a power of ten is all that is shown.
    """
    if shown.relation != "=" or reported.relation != "=" or _power_alone(shown.found):
        return None
    scale = _scale(shown, in_percent=in_percent)
    low, high = _interval(reported)
    value = _exact(reported).scaleb(-scale)
    if shown.found["ten"]:
        return _with_power(shown.found, value) if high - low <= shown.unit.scaleb(scale) else None
    rounded = value.quantize(shown.unit, ROUND_HALF_UP, _WIDE)
    if high - low > shown.unit.scaleb(scale) or (value and not rounded):
        return None
    return _sign(shown.found, rounded) + _digits(shown.found["digits"], rounded.copy_abs())


def _scale(shown: Shown, *, in_percent: bool) -> int:
    return -2 if shown.percent and not in_percent else 0


def _exact(reported: Reported) -> Decimal:
    # The shortest text that reads back as this double is the number that its author wrote.
    return Decimal((reported.text or repr(reported.value)).strip().lstrip("<> "))


@functools.lru_cache(maxsize=4096)
def _interval(reported: Reported) -> tuple[Decimal, Decimal]:
    """What a record's number may stand for: an exact one for itself, a bound for all beyond it."""
    value = _exact(reported)
    if reported.relation != "=":
        # Less than 0.001 is as far below any greater bound, and not below a smaller one.
        return (value.next_minus(), value) if reported.relation == "<" else (value, value.next_plus())
    if reported.text is None:
        return value, value
    half = Decimal(1).scaleb(int(value.as_tuple().exponent)) / 2
    return value - half, value + half


def _sign(found: re.Match[str], value: Decimal) -> str:
    if value < 0:
        return found["sign"] if found["sign"] in {"-", _MINUS} else "-"
    return "+" if found["sign"] == "+" else ""


def _digits(written: str, value: Decimal) -> str:
    """`value` as `written` was: with its separator of thousands, and with or without a zero before the point."""
    if _DECIMAL_COMMA.fullmatch(written):
        return f"{value:f}".replace(".", ",")
    separator = re.search(_THOUSANDS, written)
    text = f"{value:,f}".replace(",", separator[0]) if separator else f"{value:f}"
    return text.removeprefix("0") if written.startswith(".") else text


def _with_power(found: re.Match[str], value: Decimal) -> str | None:
    """`value` times a power of ten, with as many decimals before the power as there were."""
    if not value:
        return None
    _, point, decimals = found["digits"].partition(".")
    places = len(decimals) if point else 0
    mantissa, _, power = f"{value:.{places}e}".partition("e")
    name = next(name for name in ("plain", "raised", "sup", "small") if found[name])
    return _sign(found, value) + mantissa.lstrip("-") + _raised(found, name, int(power))


def _raised(found: re.Match[str], name: str, power: int) -> str:
    """The written power of ten with another power in it."""
    text = str(power)
    if name == "small":
        text = text.translate(_TO_SUPERSCRIPTS)
    elif _MINUS in found[name]:
        text = text.replace("-", _MINUS)
    start, end = (at - found.start("ten") for at in found.span(name))
    return found["ten"][:start] + text + found["ten"][end:]
