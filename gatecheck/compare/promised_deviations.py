"""Deviations: which field each discloses, and whether what it states is what was planned and what was done.

What was planned and done is told in free text, of which three things are compared: numbers, sides written in words
among them; the words of a list that a field chooses from, such as procedures; and whole texts, where what is told
as planned is what was done, or the other way round. All other words contradict nothing.
"""

from __future__ import annotations

import re
from typing import get_args

from gatecheck.compare.names import same_test, same_unit, same_words, words_of
from gatecheck.compare.promised_gaps import NOT_TOLD, Gap
from gatecheck.model.plan import Direction
from gatecheck.model.record import Aim, Boundary, Deviation, Procedure, Role

#: Fields as a record has them, and parts of fields, with the field of a plan that they are.
_OTHER_NAMES = {
    "alternative.effect": "alternative",
    "alternative.scale": "alternative",
    "estimate.margin": "margin",
    "estimate.smallest_effect": "smallest_effect",
    "family.name": "family",
    "look": "looks",
    "look.boundary": "looks.boundary",
    "look.number": "looks",
    "look.planned": "looks",
    "looks.planned": "looks",
    "n.planned": "n",
    "prior.probability": "prior",
    "sample.excluded": "exclusions",
    "sample.n": "n",
    "sample.unit": "n.unit",
    "test.alpha": "alpha",
    "test.name": "test",
    "test.sides": "sides",
    "test.tail": "direction",
    "unit": "n.unit",
}
#: The words from which a field chooses.
_CHOICES = {
    "aim": get_args(Aim),
    "direction": get_args(Direction),
    "family.procedure": get_args(Procedure),
    "looks.boundary": get_args(Boundary),
    "role": get_args(Role),
}
_DIRECTIONS = {"greater": "increase", "less": "decrease"}
_LISTS = {"covariates", "exclusions"}
_SIDES_IN_WORDS = re.compile(r"\b(?:(one|single)|(?:two|both))(?=[\s-]*(?:sided|tailed|sides?|tails?)\b)")
#: A number that begins no later than its word, as `90 d` and `90d` do and `v2` does not.
_NUMBER = re.compile(
    r"(?<![\w.,])([-+]?(?:\d{1,3}(?:,\d{3})+(?:\.\d+)?|\d+(?:[.,]\d+)?|\.\d+)(?:e[-+]?\d+)?)(?![.,]?\d)"
    r"(\s*(?:%|per ?cent\b))?"
)
_THOUSANDS = re.compile(r",(?=\d{3}(?!\d))")
#: What may stand around a number that is all that a text says.
_BESIDE_NUMBERS = {"n", "of", "to", "and", "sided", "tailed", "side", "sides", "tail", "tails", "units", "tests"}
_DIGITS = 9


def field_of(deviation: Deviation) -> str:
    """Return the field that a deviation names, as a plan names it."""
    name = deviation.field.strip().casefold().replace(" ", "_").replace("-", "_")
    return _OTHER_NAMES.get(name, name)


def covers(deviation: Deviation, field: str) -> bool:
    """Whether a deviation discloses something of that field: it names it, or what it is a part of."""
    named = field_of(deviation)
    return field == named or field.startswith(f"{named}.")


def contradicts(deviation: Deviation, gap: Gap) -> bool:
    """Whether a deviation states as planned what the plan, or as done what the record, has otherwise.

    `deviation` must cover the field of `gap`. Nothing that it states contradicts what a record does not tell.
    """
    exact = field_of(deviation) == gap.field
    return _is_other(gap, deviation.planned, gap.planned, gap.done, exact=exact) or _is_other(
        gap, deviation.done, gap.done, gap.planned, exact=exact
    )


def _is_other(gap: Gap, stated: str, own: str, other: str, *, exact: bool) -> bool:
    """Whether `stated` is another value than `own`; `other` is that of the opposite side."""
    if own == NOT_TOLD or _same(gap.field, stated, own):
        return False
    if _same(gap.field, stated, other):
        return True
    return _is_other_number(gap, stated, own, other, exact=exact) or _is_another_choice(gap.field, stated)


def _same(field: str, one: str, other: str) -> bool:
    if field == "test":
        return any(same_test(one, each) for each in other.split(" or "))
    if field == "n.unit":
        return same_unit(one, other)
    if field in _LISTS:
        return set(map(words_of, one.split(","))) == set(map(words_of, other.split(",")))
    if field == "direction":
        one, other = (_DIRECTIONS.get(each.strip().casefold(), each) for each in (one, other))
    return same_words(one, other)


def _is_another_choice(field: str, stated: str) -> bool:
    """Whether the text is a word that the field chooses from, though not the one that it has."""
    choices = _CHOICES.get(field, ())
    return any(_same(field, stated, each) for each in choices)


def _is_other_number(gap: Gap, stated: str, own: str, other: str, *, exact: bool) -> bool:
    """Whether the numbers of the text are not those of `own`.

    In free text only the number of the opposite side is sure to be a value of the field; where the text says
    nothing but numbers, or the same words around other numbers, any is. A deviation in the whole may speak of the
    number of another part.
    """
    said, mine = set(_numbers(stated)), _numbers(own)
    if gap.field == "n":
        # Those analysed and those left out are told together as well as apart.
        mine.append(sum(mine))
    around, around_own = _words_around(stated), _words_around(own)
    if not said or said & set(mine) or not (exact or around_own):
        return False
    return bool(said & set(_numbers(other))) or around == around_own or (exact and _are_beside(around, gap))


def _are_beside(words: set[str], gap: Gap) -> bool:
    """Whether these words may stand beside the number of a field without making it another one."""
    more = words - _BESIDE_NUMBERS - set(re.findall(r"[a-z]+", gap.field))
    return not more or (gap.unit is not None and same_unit(" ".join(more), gap.unit))


def _numbers(text: str) -> list[float]:
    """The numbers of a text, as far as they are compared; a percentage is a number and a share."""
    numbers = []
    for digits, percent in _NUMBER.findall(_plain(text)):
        number = digits if digits.startswith("0") else _THOUSANDS.sub("", digits)
        value = float(number.replace(",", "."))
        numbers += [_rounded(value)] + ([_rounded(value / 100)] if percent else [])
    return numbers


def _rounded(value: float) -> float:
    return float(f"{value:.{_DIGITS}g}")


def _words_around(text: str) -> set[str]:
    """The words of a text without its numbers."""
    return set(re.findall(r"\w+", _NUMBER.sub(" ", _plain(text))))


def _plain(text: str) -> str:
    """The text in small letters, with sides in figures."""
    folded = text.casefold().replace("−", "-")
    return _SIDES_IN_WORDS.sub(lambda found: "1" if found[1] else "2", folded)
