"""What a record gives of its estimate, for the drawing."""

from __future__ import annotations

from typing import Any

import pytest
from support import drainage

from gatecheck.interval_figures import interval_of
from gatecheck.model.interval_shown import IntervalShown
from gatecheck.model.record import Record
from gatecheck.schema.records import read_record


def record_of(**changes: Any) -> Record:
    record, faults = read_record(drainage(**changes))
    assert faults == ()
    assert record is not None
    return record


def test_an_estimate_as_it_is_reported() -> None:
    shown = interval_of(record_of(estimate__smallest_effect="2", estimate__margin=[-1, 1]))
    assert shown == IntervalShown(
        "mean difference", "g/m2", 4.2, 0.34, 8.06, 0.95, 0.0, False, smallest=2.0, margin_low=-1.0, margin_high=1.0
    )


def test_no_estimate_has_no_interval() -> None:
    assert interval_of(record_of(estimate=...)) is None


def test_an_estimate_without_interval_and_unit() -> None:
    shown = interval_of(record_of(estimate={"measure": "mean difference", "value": "4.2", "unit": "1"}))
    assert shown == IntervalShown("mean difference", "", 4.2, None, None, None, 0.0, False)
    assert interval_of(record_of(estimate={"measure": "gain", "value": 1, "null": 3})) == IntervalShown(
        "gain", "", 1.0, None, None, None, 3.0, False
    )


#: A lower limit that rounds to 0 stands for a ratio above it.
RATIO = {"measure": "odds ratio", "value": 2.5, "scale": "log", "interval": {"level": 0.9, "low": "0.0", "high": 9}}


def test_a_ratio_compares_with_1_and_a_limit_of_0_is_none() -> None:
    shown = interval_of(record_of(estimate={**RATIO, "smallest_effect": -1}))
    assert shown == IntervalShown("odds ratio", "", 2.5, None, 9.0, 0.9, 1.0, True)


@pytest.mark.parametrize("rounded", [{"value": "0.0"}, {"null": "0.0"}])
def test_a_ratio_that_rounds_to_0_has_no_place_on_a_log_scale(rounded: dict[str, str]) -> None:
    assert interval_of(record_of(estimate={**RATIO, **rounded})) is None
