"""Links: markers in prose that tie the number or the sentence before them to a record.

`ID FIELD` ties a number to a field of the record ID, such as `estimate.value`; `ID claim` ties the sentence. The
marker stands behind its number in the same paragraph, or behind its sentence. Where several stand together, those
of numbers tie the last numbers before them, in order.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

from gatecheck.model.struct import struct
from gatecheck.prose.markers import KEY
from gatecheck.prose.numbers_in_text import Shown, numbers
from gatecheck.prose.reading import read_prose
from gatecheck.prose.sentences import paragraph_start, sentence_at, sentence_before
from gatecheck.prose.source import Hidden, Passage

#: The field of a link that ties a sentence.
CLAIM = "claim"
_WORDS = 2


@struct
class Link:
    """A marker with what it ties: `record` and `field` are empty where it is not `ID FIELD`.

    `number` is the number that it ties, or `None` where none stands before it or it ties a sentence; `start` and
    `end` are those of the sentence around that number, or of the sentence that is tied.
    """

    passage: Passage
    at: int
    says: str
    record: str
    field: str
    number: Shown | None
    start: int
    end: int

    @property
    def line(self) -> int:
        """The 1-based line of the marker in the file."""
        return self.passage.line(self.at)


@dataclass(frozen=True, slots=True, order=True)
class LinkedSentence:
    """A sentence that is tied to a record, by a link of its own or of a number in it; `text` is in one line."""

    path: str
    line: int
    record_id: str
    text: str


def linked_sentences(
    root: Path, include: Sequence[str], exclude: Sequence[str], revision: str | None = None
) -> tuple[LinkedSentence, ...]:
    """Return the sentences in the prose below `root` that are tied to records, by path and line, without repeats.

    `line` is that where the sentence begins. What cannot be read is passed over: `read_prose` tells it.

    Raises
    ------
    CannotJudge
        `root` is no folder, git fails, or the revision is not known.
    """
    passages = read_prose(root, include, exclude, revision).passages
    return tuple(sorted({_told(link) for each in passages for link in links_in(each) if link.record}))


def _told(link: Link) -> LinkedSentence:
    passage = link.passage
    text = " ".join(passage.visible[link.start : link.end].split())
    return LinkedSentence(passage.file.path, passage.line(link.start), link.record, text)


def links_in(passage: Passage) -> tuple[Link, ...]:
    """Return the links of a passage in order."""
    if KEY not in passage.body:
        return ()
    found: list[Link] = []
    after = 0
    for run in _runs(passage):
        first = run[0].start
        tied = _tied_numbers(passage, after, first, sum(map(_ties_number, run)))
        found += [_link(passage, one, next(tied) if _ties_number(one) else None, first) for one in run]
        after = run[-1].end
    return tuple(found)


def _runs(passage: Passage) -> Iterator[list[Hidden]]:
    """Yield markers in groups, in each of which nothing but blanks stands between them."""
    run: list[Hidden] = []
    for one in passage.hidden:
        if one.marker is None:
            continue
        if run and passage.visible[run[-1].end : one.start].strip():
            yield run
            run = []
        run.append(one)
    if run:
        yield run


def _ties_number(marker: Hidden) -> bool:
    says = (marker.marker or "").split()
    return len(says) == _WORDS and says[1] != CLAIM


def _tied_numbers(passage: Passage, after: int, before: int, wanted: int) -> Iterator[Shown | None]:
    """The last numbers between two offsets in one paragraph, as many as are wanted; `None` for what is missing."""
    start = max(after, paragraph_start(passage.visible, before))
    last = list(numbers(passage.visible, start, before))[-wanted:] if wanted else []
    return iter([*[None] * (wanted - len(last)), *last])


def _link(passage: Passage, marker: Hidden, number: Shown | None, first: int) -> Link:
    says = (marker.marker or "").split()
    record, field = says if len(says) == _WORDS else ("", "")
    text = passage.visible
    start, end = sentence_before(text, first) if number is None else sentence_at(text, number.start)
    return Link(passage, marker.start, " ".join(says), record, field, number, start, end)
