"""Phrases looked for in a text: plain words in a row, matched word by word and never by a free expression.

A pattern is a row of elements with blanks between them: `a|b` is one of these words, `?` behind it makes it
optional, `..3` stands for up to three words of the same sentence, `#` for a number and `$` for the end of a clause.
The marks `.|!|?|;|:` stand for themselves, and before the first word of a text stands a full stop, so that a
pattern can ask for the head of a sentence. Words are compared without case; a compound with a hyphen, such as
"same-day", is a word of its own. The time taken grows with the length of the text and no faster.
"""

from __future__ import annotations

import bisect
import itertools
import re
from collections import defaultdict
from collections.abc import Iterable, Sequence

from gatecheck.model.struct import struct

_TOKEN = re.compile(
    r"[0-9]+(?:[.,][0-9]+)*|\.[0-9]+"
    r"|[^\W_]+(?:[\u00ad\u200b'’ʼ\-‐‑]+[^\W_]+)*"
    r"|[.!?;:](?=\W|$)|[,()\[\]{}–—|]|[<>=≤≥]"
)
_INVISIBLE = dict.fromkeys(map(ord, "\u00ad\u200b"))
_ALIKE = str.maketrans({"’": "'", "ʼ": "'", "‐": "-", "‑": "-"})
_SENTENCE_ENDS = frozenset(".!?;:")
_CLAUSE_ENDS = frozenset(",()[]{}–—|") | _SENTENCE_ENDS


@struct
class Tokens:
    """A text as words and marks in order, with where each stands in it, and the `different` ones."""

    text: str
    words: tuple[str, ...]
    spans: tuple[tuple[int, int], ...]
    different: frozenset[str]

    def quote(self, start: int, end: int) -> str:
        """The text from token `start` up to `end`."""
        return self.text[self.spans[start][0] : self.spans[end - 1][1]]


def tokens_of(text: str) -> Tokens:
    """Take a text apart; typographic apostrophes and hyphens are plain ones, and soft hyphens are none."""
    found = list(_TOKEN.finditer(text))
    words = (".", *(one[0].translate(_INVISIBLE).translate(_ALIKE).casefold() for one in found))
    return Tokens(text, words, ((0, 0), *(one.span() for one in found)), frozenset(words))


@struct
class _Element:
    """One element of a pattern: a set of words, a gap of up to `gap` words, a number or the end of a clause."""

    words: frozenset[str]
    optional: bool = False
    gap: int = 0
    number: bool = False
    clause_end: bool = False


Pattern = tuple[_Element, ...]


def pattern_of(text: str) -> Pattern:
    """Read a pattern.

    Raises
    ------
    ValueError
        It does not begin with a word that must be there.
    """
    pattern = tuple(_element(each) for each in text.split())
    if not pattern or not pattern[0].words or pattern[0].optional:
        raise ValueError(f"the pattern {text!r} does not begin with a word")
    return pattern


def _element(text: str) -> _Element:
    if text.startswith(".."):
        return _Element(frozenset(), gap=int(text[2:]))
    options = frozenset(text.removesuffix("?").split("|"))
    return _Element(options - {"#", "$"}, text.endswith("?"), number="#" in options, clause_end="$" in options)


@struct
class Index:
    """Patterns by the words with which they begin."""

    by_word: dict[str, list[Pattern]]

    def spans(self, tokens: Tokens) -> list[tuple[int, int]]:
        """The tokens, from the first up to the last, that each match takes, in order; the shortest of each."""
        found: list[tuple[int, int]] = []
        if tokens.different.isdisjoint(self.by_word):
            return found
        for start, word in enumerate(tokens.words):
            for pattern in self.by_word.get(word, ()):
                end = _match_end(pattern, tokens.words, start)
                if end is not None:
                    found.append((start, end))
        return found


def index_of(patterns: Iterable[str]) -> Index:
    """Read patterns and put them in order of the words with which they begin."""
    by_word: dict[str, list[Pattern]] = defaultdict(list)
    for text in patterns:
        pattern = pattern_of(text)
        for word in pattern[0].words:
            by_word[word].append(pattern)
    return Index(dict(by_word))


def _match_end(pattern: Pattern, words: Sequence[str], start: int) -> int | None:
    """The least end of a match that begins at `start`, from all places that each element can lead to."""
    places = {start}
    for element in pattern:
        places = {after for place in places for after in _after(element, words, place)}
        if not places:
            return None
    return min(places)


def _after(element: _Element, words: Sequence[str], place: int) -> list[int]:
    if element.gap:
        return _across(words, place, element.gap)
    after = [place] if element.optional else []
    word = words[place] if place < len(words) else ""
    if word in element.words or (element.number and word.removeprefix(".")[:1].isdecimal()):
        after.append(place + 1)
    if element.clause_end and (not word or word in _CLAUSE_ENDS):
        after.append(place)
    return after


def _across(words: Sequence[str], place: int, most: int) -> list[int]:
    """The places that a gap can lead to: marks within a sentence do not count as words."""
    places, passed = [place], 0
    while place < len(words) and words[place] not in _SENTENCE_ENDS:
        passed += words[place] not in _CLAUSE_ENDS
        if passed > most:
            break
        place += 1
        places.append(place)
    return places


@struct
class Spans:
    """Spans in the order of their starts, in which one is sought that overlaps another."""

    starts: list[int]
    ends: list[int]

    def overlap(self, start: int, end: int) -> bool:
        """Whether one of the spans has a token in common with `start` up to `end`."""
        before = bisect.bisect_left(self.starts, end)
        return before > 0 and self.ends[before - 1] > start

    def cover(self, start: int, end: int) -> bool:
        """Whether one of the spans has all tokens from `start` up to `end`."""
        before = bisect.bisect_right(self.starts, start)
        return before > 0 and self.ends[before - 1] >= end


def spans_of(found: Iterable[tuple[int, int]]) -> Spans:
    """Spans in order; `ends` holds the greatest end so far, so that one look tells whether any reaches beyond."""
    ordered = sorted(found)
    ends: list[int] = []
    for _, end in ordered:
        ends.append(max(end, ends[-1] if ends else 0))
    return Spans([start for start, _ in ordered], ends)


def words_before(words: Sequence[str], start: int, most: int, stop: frozenset[str]) -> list[str]:
    """Up to `most` words of the same sentence before `start`, the nearest first, up to one of `stop`."""
    before = (words[place] for place in range(start - 1, -1, -1))
    ends = _SENTENCE_ENDS | stop
    same = itertools.takewhile(lambda word: word not in ends, before)
    return list(itertools.islice((word for word in same if word not in _CLAUSE_ENDS), most))
