"""Linked numbers written anew from the records: what each passage becomes, and which numbers stay as they are."""

from __future__ import annotations

import json
from collections.abc import Mapping, Sequence

from gatecheck.model.struct import struct
from gatecheck.prose.agree import NumberDiffers, numbers_that_differ
from gatecheck.prose.fields import Subject
from gatecheck.prose.source import Passage, SourceFile


@struct
class Kept:
    """A linked number that differs and stays, since the record's cannot be written in its digits."""

    line: int
    what: NumberDiffers


@struct
class Renewed:
    """A passage with its linked numbers from the records."""

    passage: Passage
    body: str


@struct
class RenewedFile:
    """A file with its new text, the passages that differ, and the numbers that stay as they are."""

    file: SourceFile
    text: str
    edits: int
    passages: tuple[Renewed, ...]
    kept: tuple[Kept, ...]


@struct
class _Edit:
    """Another text for a stretch of the file."""

    start: int
    end: int
    anew: str


def renewed(passages: Sequence[Passage], known: Mapping[str, Subject]) -> tuple[RenewedFile, ...]:
    """Return the files in which a linked number differs from the records `known` by id, in their order."""
    of_file: dict[int, list[Passage]] = {}
    for passage in passages:
        of_file.setdefault(id(passage.file), []).append(passage)
    files = (_renewed(each, known) for each in of_file.values())
    return tuple(one for one in files if one.passages or one.kept)


def _renewed(passages: Sequence[Passage], known: Mapping[str, Subject]) -> RenewedFile:
    file = passages[0].file
    edits: list[_Edit] = []
    anew: list[Renewed] = []
    kept: list[Kept] = []
    for passage in passages:
        inside: list[_Edit] = []
        for what in numbers_that_differ(passage, known):
            edit = _edit(passage, what)
            if edit is None:
                kept.append(Kept(passage.line(what.number.start), what))
            else:
                edits.append(edit)
                inside.append(_Edit(what.number.start, what.number.end, what.anew or ""))
        if inside:
            anew.append(Renewed(passage, _edited(passage.body, inside)))
    return RenewedFile(file, _edited(file.text, edits), len(edits), tuple(anew), tuple(kept))


def _edit(passage: Passage, what: NumberDiffers) -> _Edit | None:
    """The edit of the file, where the number stands there in one piece."""
    if what.anew is None:
        return None
    start = passage.in_file(what.number.start)
    for old, new in _writings(passage, what.number.text, what.anew):
        if passage.file.text.startswith(old, start):
            return _Edit(start, start + len(old), new)
    return None


def _writings(passage: Passage, old: str, new: str) -> list[tuple[str, str]]:
    """How the two may be written in the file; in a notebook as parts of a JSON string."""
    if passage.cell is None:
        return [(old, new)]
    return [
        (json.dumps(old, ensure_ascii=ascii_alone)[1:-1], json.dumps(new, ensure_ascii=ascii_alone)[1:-1])
        for ascii_alone in (False, True)
    ]


def _edited(text: str, edits: Sequence[_Edit]) -> str:
    pieces, end = [], 0
    for one in edits:
        pieces += [text[end : one.start], one.anew]
        end = one.end
    return "".join([*pieces, text[end:]])
