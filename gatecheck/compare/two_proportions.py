"""Two proportions: every form of their chi-squared in use, and the logarithms of odds and risk ratios.

The forms are those of textbooks (from memory). What counts of 0 leave undefined is nan.
"""

from __future__ import annotations

import math

from gatecheck.model.struct import struct


@struct
class Table:
    """Events and units of two groups."""

    events1: float
    n1: float
    events2: float
    n2: float

    @property
    def cells(self) -> tuple[float, float, float, float]:
        """Events and others of the first group, then of the second."""
        return self.events1, self.n1 - self.events1, self.events2, self.n2 - self.events2


def squares(table: Table) -> dict[str, float]:
    """Chi-squared of two proportions, or the square of z, by the name of each form in use."""
    n1, n2 = table.n1, table.n2
    p1, p2 = table.events1 / n1, table.events2 / n2
    pooled = (table.events1 + table.events2) / (n1 + n2)
    harmonic = 1 / n1 + 1 / n2
    together, apart = pooled * (1 - pooled) * harmonic, p1 * (1 - p1) / n1 + p2 * (1 - p2) / n2
    difference = abs(p1 - p2)
    corrected = max(0.0, difference - min(harmonic / 2, difference))
    pearson = _over(difference**2, together)
    return {
        "Pearson": pearson,
        "continuity": _over(corrected**2, together),
        "unpooled": _over(difference**2, apart),
        "unpooled, continuity": _over(corrected**2, apart),
        "N - 1": pearson * (n1 + n2 - 1) / (n1 + n2),
        "likelihood ratio": _likelihood_ratio(table),
        "odds ratio": _over(log_odds(table) ** 2, variance_of_odds(table)),
        "risk ratio": _over(log_risks(table) ** 2, variance_of_risks(table)),
    }


def _over(square: float, variance: float) -> float:
    return square / variance if variance > 0 else math.nan


def _likelihood_ratio(table: Table) -> float:
    total = table.n1 + table.n2
    rows, events = (table.n1, table.n1, table.n2, table.n2), table.events1 + table.events2
    margins = (events, total - events, events, total - events)
    parts = zip(table.cells, rows, margins, strict=True)
    return 2 * sum(cell * math.log(cell * total / (row * margin)) for cell, row, margin in parts if cell > 0)


def log_odds(table: Table) -> float:
    """The logarithm of the odds ratio of the first group to the second."""
    a, b, c, d = table.cells
    return math.log(a * d / (b * c)) if min(table.cells) > 0 else math.nan


def variance_of_odds(table: Table) -> float:
    """The variance of the logarithm of the odds ratio."""
    return sum(1 / cell for cell in table.cells) if min(table.cells) > 0 else math.nan


def log_risks(table: Table) -> float:
    """The logarithm of the risk ratio of the first group to the second."""
    if min(table.events1, table.events2) <= 0:
        return math.nan
    return math.log(table.events1 / table.n1) - math.log(table.events2 / table.n2)


def variance_of_risks(table: Table) -> float:
    """The variance of the logarithm of the risk ratio."""
    if min(table.events1, table.events2) <= 0:
        return math.nan
    return 1 / table.events1 - 1 / table.n1 + 1 / table.events2 - 1 / table.n2
