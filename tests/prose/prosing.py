"""What the tests of prose share: passages of each format, and records that prose may speak of."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from support import drainage

from gatecheck.model.record import Record
from gatecheck.model.verdict import Figures, Judged, Place
from gatecheck.prose import latex, markdown, restructured
from gatecheck.prose.agree import Fact, Facts, held_against
from gatecheck.prose.fields import Subject, subjects
from gatecheck.prose.source import Dialect, Passage, SourceFile
from gatecheck.schema.records import read_record

DIALECTS: Mapping[str, Dialect] = {
    "a.md": markdown.hidden,
    "a.tex": latex.hidden,
    "a.rst": restructured.hidden,
}
ID = "drainage/earthworm-biomass"


def passage(text: str, path: str = "a.md") -> Passage:
    """A whole file of prose."""
    return Passage(SourceFile(path, text), text, DIALECTS[path])


def record(**changes: Any) -> Record:
    """The drainage record with other values: t(34) = 2.21, p = 0.034, estimate 4.2 (0.34 to 8.06)."""
    read, faults = read_record(drainage(**changes))
    assert read is not None, faults
    return read


def known(*records: Record) -> Mapping[str, Subject]:
    """The records by id; without one, the drainage record."""
    return subjects(records or (record(),), ())


def judged(identifier: str = ID, risk: float | None = 0.1234, needed: float | None = 0.81) -> Judged:
    """A record with the figures of its evidence."""
    figures = Figures("observed-effect", 1.6, 0.5, "policy", risk, needed, "")
    return Judged(identifier, Place("r.json"), None, "", figures, ())


def held(text: str, *records: Record, path: str = "a.md", unlinked: bool = True) -> Facts:
    """A text held against records."""
    return held_against([passage(text, path)], known(*records), unlinked=unlinked)


def only(facts: Facts) -> Fact:
    """The only thing that a text says differently, where nothing is broken."""
    assert facts.problems == ()
    (one,) = facts.facts
    return one
