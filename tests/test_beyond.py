"""Rows of the verdict for what is no record."""

from __future__ import annotations

from gatecheck.beyond import merged
from gatecheck.model.verdict import Finding, Judged, Place


def row(line: int, rule: str, *, counts: bool) -> Judged:
    finding = Finding(rule, "short", "block")
    return Judged(f"a.md:{line}", Place("a.md", line), None, "", None, (finding,), counts_now=counts)


def test_one_line_that_falls_short_in_two_ways_is_one_row() -> None:
    rows = merged([
        row(9, "text-agrees", counts=False),
        row(3, "wording", counts=False),
        row(9, "wording", counts=True),
    ])

    assert [(one.id, [each.rule for each in one.findings], one.counts_now) for one in rows] == [
        ("a.md:3", ["wording"], False),
        ("a.md:9", ["text-agrees", "wording"], True),
    ]
