"""What many records say word for word: it stands in the page once, and each record points to it by its number.

A page on a hundred claims that fall short of one rule would otherwise say the same half sentences a hundred times.
"""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Iterable, Iterator, Sequence
from itertools import groupby, takewhile

from gatecheck.model.struct import struct
from gatecheck.render.page.wording import cleaned, literal, with_units

#: Fewer records say what they have in common each for itself, as each is then read alone.
MANY = 10
#: Shorter words take no less room than the way to them.
_LONG = 40
_SOME = 2
#: What is said with more numbers than these tells a figure of each record, and stays with it.
_MOST_FORMS = 5

#: Before the next part of a sentence: a bracket with what it holds, one of its own within included, or a stop.
_BREAK = re.compile(r"( ?\((?:[^()]|\([^()]*+\))*+\))|(?=[;:.,] )")
_NUMBER = re.compile(r"\d[\d.,]*")
_STOPS = " ;:.,"


def parts(text: str) -> list[str]:
    """Return the parts of a text, each with the stop that leads to it; joined they are the text."""
    return [each for each in _BREAK.split(text) if each]


@struct
class Text:
    """A cleaned text; a note may tell all of it, or else only what follows on its first words.

    Without those the rest of a sentence would hang in the air.
    """

    words: str
    whole: bool = False


class Notes:
    """The remarks on figures that some records share, then the words that many share, numbered from 1 on."""

    def __init__(self, told: Sequence[Sequence[Text]], remarks: Iterable[str]) -> None:
        """Number what is shared; `told` holds the texts of each record."""
        self._often = _often([_each(part for text in texts for part in parts(text.words)) for texts in told])
        runs = _said_by_many([
            _each(run for text in texts for run, fits in self._runs(text) if fits) for texts in told
        ])
        some = sorted(note for note, times in Counter(remarks).items() if times >= _SOME)
        self.entries = list(dict.fromkeys([*map(cleaned, some), *map(_bare, runs)]))
        self._numbers = {entry: number for number, entry in enumerate(self.entries, 1)}

    def mark(self, text: str) -> str:
        """Return the way to a cleaned text that stands once for all, else nothing."""
        number = self._numbers.get(text)
        return "" if number is None else f' <a href="#n{number}">[{number}]</a>'

    def told(self, text: Text) -> str:
        """Return a text for the page, in which what many records say is left to its number."""
        found = ""
        for run, fits in self._runs(text):
            mark = self.mark(_bare(run)) if fits else ""
            found += f"{mark if found else f'see{mark}'}{'.' * run.endswith('.')}" if mark else literal(run)
        return with_units(found)

    def _runs(self, text: Text) -> Iterator[tuple[str, bool]]:
        """What many records say, in parts that follow each other, and the rest likewise; whether it fits a note."""
        rest = parts(text.words)
        if not (text.whole and self._often.issuperset(rest)):
            first = self._first(rest)
            yield "".join(rest[:first]), False
            rest = rest[first:]
        for often, group in groupby(rest, self._often.__contains__):
            run = "".join(group)
            yield run, often and len(_bare(run)) >= _LONG

    def _first(self, found: Sequence[str]) -> int:
        """How many parts a text begins with: one, or all up to its first stop where many begin alike."""
        if not self._often.issuperset(found[:1]):
            return 1
        return 1 + sum(1 for _ in takewhile(lambda part: part.startswith(","), found[1:]))


def _often(by_record: Sequence[Sequence[str]]) -> frozenset[str]:
    """The parts that many records say; not those that differ from record to record by a number."""
    said = _said_by_many(by_record)
    forms = Counter(_NUMBER.sub("0", part) for part in set().union(*by_record))
    return frozenset(part for part in said if forms[_NUMBER.sub("0", part)] <= _MOST_FORMS)


def _each(found: Iterable[str]) -> list[str]:
    """What a record says, each once."""
    return list(dict.fromkeys(found))


def _said_by_many(by_record: Sequence[Sequence[str]]) -> list[str]:
    """What many records hold, in the order in which it is first met."""
    counted = Counter(each for held in by_record for each in held)
    return [each for each, times in counted.items() if times >= MANY]


def _bare(run: str) -> str:
    return run.strip(_STOPS)
