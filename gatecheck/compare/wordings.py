"""What claims say in words that need more than a p-value: phrases from a list, with the exceptions to each.

The lists are data, one file a language in the folder `phrases`. Which words need what is common practice in
reporting guidelines (SAMPL; CONSORT 2025; the statement on p-values of the American Statistical Association, 2016);
the lists themselves are ours.
"""

from __future__ import annotations

import functools
import json
from collections.abc import Sequence
from pathlib import Path
from typing import Any, Literal

from gatecheck.compare.phrasing import Index, Tokens, index_of, spans_of, tokens_of, words_before
from gatecheck.model.struct import struct

Language = Literal["en"]
Kind = Literal[
    "no-effect",
    "safe",
    "not-worse",
    "difference",
    "observed-power",
    "p-as-probability",
    "hedge",
    "causal",
    "statistical-significance",
    "importance",
    "significant",
    "strength",
]
_PHRASES = Path(__file__).parent / "phrases"
#: So many words before a phrase are read for what takes it back ("does not prove") or softens it ("may reduce").
_BEFORE = 6
#: No text is read further, in characters.
_LONGEST_READ = 20_000


@struct
class Phrase:
    """A kind of words with what it needs, in words; `at_least` is the likelihood ratio that strong words need."""

    kind: Kind
    needs: str
    at_least: float | None


@struct
class Wording:
    """Words found in a text; `suggestive` where they are softened, as in "may reduce"."""

    phrase: Phrase
    quote: str
    suggestive: bool


@struct
class _Entry:
    phrase: Phrase
    patterns: Index
    unless: Index


@struct
class _Lists:
    """The lists of one language.

    `open` are words that leave a question open, such as "whether"; `listed` are negations of which several stand in
    a row without taking each other back, as in "no gain and no harm".
    """

    entries: tuple[_Entry, ...]
    negations: frozenset[str]
    listed: frozenset[str]
    undone_by: frozenset[str]
    open: frozenset[str]
    suggestive: frozenset[str]
    starts_anew: frozenset[str]


def wordings(texts: Sequence[str | None], languages: Sequence[Sequence[Language]]) -> list[tuple[Wording, ...]]:
    """The words that each text has from the lists of its languages, in the order of the lists, without repeats.

    A text that is `None` has none.
    """
    return [
        () if text is None else tuple(each for name in names for each in _found(text, name))
        for text, names in zip(texts, languages, strict=True)
    ]


def phrase_of(kind: Kind, language: Language) -> Phrase:
    """The first phrase of that kind in the list of a language."""
    return next(each.phrase for each in _lists(language).entries if each.phrase.kind == kind)


def _found(text: str, language: Language) -> list[Wording]:
    lists, tokens = _lists(language), tokens_of(text[:_LONGEST_READ])
    found: dict[tuple[Phrase, str], Wording] = {}
    taken: list[tuple[int, int]] = []
    for entry in lists.entries:
        earlier = spans_of(taken)
        for start, end in _spans(entry, tokens):
            words = words_before(tokens.words, start, _BEFORE, lists.starts_anew)
            before = _Before(words, tokens.words[start], lists)
            if earlier.cover(start, end) or before.takes_back:
                continue
            taken.append((start, end))
            wording = Wording(entry.phrase, tokens.quote(start, end), before.softens)
            key = (entry.phrase, " ".join(tokens.words[start:end]))
            # What is said once without softening it is said.
            if key not in found or not before.softens:
                found[key] = wording
    return list(found.values())


def _spans(entry: _Entry, tokens: Tokens) -> list[tuple[int, int]]:
    """The matches of one entry that no exception overlaps, each token in one of them at most."""
    found = entry.patterns.spans(tokens)
    excepted = spans_of(entry.unless.spans(tokens)) if found else spans_of(())
    kept: list[tuple[int, int]] = []
    for start, end in sorted(found, key=lambda span: (span[0], -span[1])):
        if not excepted.overlap(start, end) and (not kept or start >= kept[-1][1]):
            kept.append((start, end))
    return kept


@struct
class _Before:
    """The words before a phrase, the nearest first, and the word with which it begins."""

    words: list[str]
    first: str
    lists: _Lists

    @property
    def takes_back(self) -> bool:
        """Whether the phrase is denied or left open: "does not prove", "whether it reduces"."""
        negations = self.lists.negations
        if self.first in self.lists.listed:
            negations -= self.lists.listed
        following = ["", *self.words]
        return any(
            word in self.lists.open
            or ((word in negations or word.endswith("n't")) and after not in self.lists.undone_by)
            for word, after in zip(self.words, following, strict=False)
        )

    @property
    def softens(self) -> bool:
        """Whether the phrase is put as a suggestion: "may reduce"."""
        return not self.lists.suggestive.isdisjoint(self.words)


@functools.cache
def _lists(language: Language) -> _Lists:
    data: dict[str, Any] = json.loads((_PHRASES / f"{language}.json").read_text(encoding="utf-8"))
    return _Lists(
        tuple(
            _Entry(
                Phrase(one["kind"], one["needs"], one.get("at_least")),
                index_of(one["patterns"]),
                index_of(one.get("unless", ())),
            )
            for one in data["phrases"]
        ),
        *(
            frozenset(data[name])
            for name in ("negations", "listed", "undone_by", "open", "suggestive", "starts_anew")
        ),
    )
