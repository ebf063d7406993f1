"""What the records of a page have in common and stands in it once."""

from __future__ import annotations

from collections.abc import Sequence

from gatecheck.model.verdict import Judged
from gatecheck.render.page.findings import findings_of, texts_of
from gatecheck.render.page.notes import Notes
from gatecheck.render.page.risk_plot import Axes
from gatecheck.render.page.rows import common, own, rows_of


class Shared:
    """Axes, notes and rows that records share; then, in the order of the records, what each tells of its own."""

    def __init__(self, judged: Sequence[Judged]) -> None:
        self.axes = Axes(judged)
        self.findings = [findings_of(one) for one in judged]
        remarks = [one.evidence.note for one in judged if one.evidence and one.evidence.note]
        self.notes = Notes([texts_of(groups) for groups in self.findings], remarks)
        rows = [rows_of(one, self.notes) for one in judged]
        self.common = common(rows)
        self.rows = [own(each, self.common) for each in rows]
