"""No computed result raises an alarm however it is rounded, and a figure that is changed is found."""

from __future__ import annotations

import numpy as np
import pytest
from consistent_records import KINDS, names_short, rounded
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from seeded_faults import recall

from gatecheck.schema.records import read_record


@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(st.integers(0, 2**32 - 1), st.integers(1, 5))
def test_a_computed_result_agrees_exact_and_rounded(seed: int, places: int) -> None:
    """Each example is one result of every kind, in all digits, as text and as numbers: some 3,000 records."""
    generator = np.random.default_rng(seed)
    made = [make(generator) for make in KINDS.values()]
    records = [*made, *(rounded(each, places, as_text=text) for each in made for text in (True, False))]
    # Rounding may make an error 0, which no record holds.
    legal = [each for each in records if read_record({"gatecheck": "record/1", "id": "a/result", **each})[0]]

    assert len(legal) >= len(made)
    assert [(record, short) for record, short in zip(legal, names_short(*legal), strict=True) if short] == []


@pytest.mark.parametrize(
    ("kind", "least"), [("two_samples", 0.97), ("analysis_of_variance", 0.97), ("proportions", 0.95)]
)
def test_a_changed_figure_is_found(kind: str, least: float) -> None:
    seeded, found = recall(records=20)

    many = sum(count for (each, _), count in seeded.items() if each == kind)
    assert many >= 100
    assert sum(count for (each, _), count in found.items() if each == kind) >= least * many


def test_nine_of_ten_faults_of_all_kinds_are_found() -> None:
    seeded, found = recall(records=20)

    assert found.total() >= 0.93 * seeded.total()
