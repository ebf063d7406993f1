"""Consistent records with one figure changed beyond its rounding, and how many of these faults are found.

Every kind of record is rounded to three places as a text, and one figure at a time is changed by a third of itself
or more, or by a shift of its point; of counts, by one or more. Figures that no other of the record determines are
left out.
"""

from __future__ import annotations

import copy
from collections import Counter
from collections.abc import Iterator
from typing import Any

import numpy as np
from consistent_records import KINDS, Document, names_short, rounded

from gatecheck.schema.records import read_record

RECORDS = 60
PLACES = 3
#: The figures of each kind that others of the record determine.
DETERMINED: dict[str, tuple[str, ...]] = {
    "two_samples": ("value", "df", "p", "estimate", "standard_error", "low", "high", "n", "mean", "sd", "group n"),
    "standardised": ("value", "df", "p", "estimate", "n", "mean", "sd", "group n"),
    "paired": ("value", "df", "p", "estimate", "standard_error", "low", "high"),
    "one_sample": ("value", "df", "p", "estimate", "standard_error", "low", "high", "n", "sd"),
    "analysis_of_variance": ("value", "df", "p", "mean", "sd", "group n"),
    "correlation": ("value", "df", "p", "estimate", "low", "high", "n"),
    "regression": ("value", "p", "estimate", "standard_error", "low", "high"),
    "contingency": ("value", "p", "events", "group n"),
    "proportions": ("value", "p", "estimate", "standard_error", "low", "high", "events", "group n"),
    "odds_ratio": ("value", "p", "estimate", "standard_error", "low", "high"),
    "hazard_ratio": ("p", "estimate", "low", "high"),
    "whole_items": ("mean", "sd"),
    "permutation": ("p", "resamples"),
    "adjusted": ("value", "p", "adjusted_p"),
    "mixed_model": ("value", "p", "estimate", "standard_error", "low", "high"),
    "proportion": ("estimate", "events"),
}
_PLACE = {
    "value": ("test", "value"), "df": ("test", "df"), "p": ("test", "p"), "resamples": ("test", "resamples"),
    "estimate": ("estimate", "value"), "standard_error": ("estimate", "standard_error"),
    "low": ("estimate", "interval", "low"), "high": ("estimate", "interval", "high"), "n": ("sample", "n"),
    "mean": ("sample", "groups", 0, "mean"), "sd": ("sample", "groups", 0, "sd"),
    "group n": ("sample", "groups", 0, "n"), "events": ("sample", "groups", 0, "events"),
    "adjusted_p": ("family", "adjusted_p"),
}  # fmt: skip


def faults(document: Document, figure: str, generator: np.random.Generator) -> Iterator[Document]:
    """The document with one figure changed beyond its rounding, if it has it and stays legal."""
    *outer, last = _PLACE[figure]
    made = copy.deepcopy(document)
    place: Any = made
    for step in outer:
        if isinstance(place, dict) and step not in place:
            return
        place = place[step]
    if isinstance(place, dict) and last not in place:
        return
    changed = _changed(place[last], figure, generator)
    if changed is None:
        return
    place[last] = changed
    if read_record({"gatecheck": "record/1", "id": "a/result", **made})[0] is not None:
        yield made


def _changed(value: Any, figure: str, generator: np.random.Generator) -> Any:
    if isinstance(value, list):
        return [value[0], _changed(value[1], figure, generator)]
    if isinstance(value, int):
        return value + int(generator.integers(1, 6))
    number = float(value)
    factor = float(generator.choice([0.1, 0.65, 1.35, 1.5, 10]))
    if abs(number) < 0.05 or (figure in {"p", "adjusted_p"} and number * factor > 1):
        return None
    return f"{number * factor:.{PLACES}f}"


def recall(
    records: int = RECORDS, seed: int = 20310402
) -> tuple[Counter[tuple[str, str]], Counter[tuple[str, str]]]:
    """How many faults were seeded and how many were found, by kind and figure."""
    generator = np.random.default_rng(seed)
    seeded: Counter[tuple[str, str]] = Counter()
    found: Counter[tuple[str, str]] = Counter()
    for kind, figures in DETERMINED.items():
        sound = [rounded(KINDS[kind](generator), PLACES, as_text=True) for _ in range(records)]
        for figure in figures:
            changed = [each for record in sound for each in faults(record, figure, generator)]
            seeded[kind, figure] = len(changed)
            found[kind, figure] = sum(map(bool, names_short(*changed))) if changed else 0
    return seeded, found
