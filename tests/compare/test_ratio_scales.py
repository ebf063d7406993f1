"""Ratios that do not say their scale: on which scales they are read, and what is caught on all of them."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from consistent_records import KINDS, compared, names_short, rounded

from gatecheck.compare.interval_numbers import numbers_on_one_scale
from gatecheck.compare.ratio_scales import fits_as_error_of_ratio, readings
from gatecheck.model.found import Found
from gatecheck.model.verdict import Place
from gatecheck.schema.records import read_record


def ratio(measure: str, value: Any, low: Any = None, high: Any = None, **more: Any) -> dict[str, Any]:
    limits = {key: end for key, end in (("low", low), ("high", high)) if end is not None}
    interval = {"interval": {"level": 0.95, **limits}} if limits else {}
    return {"measure": measure, "value": value, **interval, **more}


def wald(p: Any, **estimate: Any) -> dict[str, Any]:
    return {"test": {"name": "Wald", "p": p}, "estimate": estimate}


def found_with(estimate: dict[str, Any]) -> Found:
    document = {"gatecheck": "record/1", "id": "a/result", "estimate": estimate}
    record, faults = read_record(document)
    assert record is not None, faults
    return Found(record, Place("a.json"), document)


def read_as(estimate: dict[str, Any]) -> list[tuple[str, float]]:
    """Scale and value of no effect of each reading; -1 stands for none given."""
    found: list[tuple[str, float]] = []
    for each in readings(found_with(estimate)):
        assert each.record.estimate is not None
        null = each.record.estimate.null
        found.append((each.record.estimate.scale, -1.0 if null is None else null.value))
    return found


DECLARED, LOG, LINEAR = ("linear", -1.0), ("log", 1.0), ("linear", 1.0)


@pytest.mark.parametrize(
    ("estimate", "expected"),
    [
        # The interval is symmetric on one scale alone, on both, on neither, or there is none.
        (ratio("hazard ratio", "0.78", "0.60", "1.01"), [LOG]),
        (ratio("ratio of means", "0.78", "0.60", "1.01"), [LOG]),
        (ratio("odds ratio", "1.30", "1.00", "1.60"), [LINEAR]),
        (ratio("ratio of means", "1.300", "1.27", "1.33"), [LOG, LINEAR]),
        (ratio("hazard ratio", "1.300", "1.27", "1.33"), [LOG]),
        (ratio("odds ratio", "10.8", "1.56", "109"), [LOG]),
        (ratio("ratio of means", "10.8", "1.56", "109"), [LOG, LINEAR]),
        (ratio("odds ratio", "1.30"), [LOG, LINEAR]),
        (ratio("odds ratio", "1.30", low="1.1"), [LOG, LINEAR]),
        (ratio("odds ratio", "1.30", "0.00", "9.10"), [LOG]),
        # With a standard error that may be that of the ratio; a ratio that may round to 0 has none.
        (ratio("odds ratio", "2.19", "1.38", "3.47", standard_error="0.51"), [LOG, LOG]),
        (ratio("odds ratio", "0.0", low="0.0", standard_error="0.51"), [("linear", -1.0)]),
        (ratio("odds ratio", "<0.05", "0.01", "0.10", standard_error="0.51"), [LOG]),
        (ratio("odds ratio", ">9", "2.0", ">30", standard_error="0.51"), [LOG, LOG]),
        (ratio("odds ratio", "0.01", standard_error="0.51", null=2), [("log", 2.0), ("log", 2.0), ("linear", 2.0)]),
        # What the record says stands.
        (ratio("odds ratio", "2.19", "1.38", "3.47", scale="log"), [("log", -1.0)]),
        (ratio("odds ratio", "2.19", "1.38", "3.47", scale="linear"), [LINEAR]),
        (ratio("odds ratio", "2.19", "1.38", "3.47", null=0), [("linear", 0.0)]),
        (ratio("odds ratio", "-0.25", "-0.51", "0.01"), [DECLARED]),
        (ratio("log odds ratio", "0.25", "0.01", "0.51"), [DECLARED]),
        (ratio("difference of log ratios", "0.25", "0.01", "0.51"), [DECLARED]),
        (ratio("mean concentration", "0.25", "0.01", "0.51"), [DECLARED]),
        # A ratio that need not compare anything may be against 0; an abbreviation tells by its interval.
        (ratio("root to shoot ratio", "0.78", "0.60", "1.01"), [DECLARED, LOG]),
        (ratio("HR", "0.78", "0.60", "1.01"), [LOG]),
        (ratio("HR", "3.20", "0.50", "5.90"), [DECLARED, LINEAR]),
        # Relative changes: upwards, and downwards where that leaves a ratio.
        (ratio("percent change", "16.4", "-3.5", "40.5"), [DECLARED, LOG, LOG]),
        (ratio("percent change", "116", "40", "240"), [DECLARED, LOG]),
        (ratio("vaccine efficacy", "0.95", "0.90", "0.98"), [DECLARED, LOG, LOG]),
        (ratio("relative change", "0.10", null="0.05"), [("linear", 0.05), ("log", 1.05), ("log", 0.95)]),
        (ratio("change in percentage points", "16.4", "-3.5", "40.5"), [DECLARED]),
    ],
)
def test_a_ratio_is_read_on_the_scales_that_its_record_allows(
    estimate: dict[str, Any], expected: list[tuple[str, float]]
) -> None:
    assert read_as(estimate) == expected


@pytest.mark.parametrize(
    ("record", "short"),
    [
        (wald("0.03", **ratio("hazard ratio", "0.78", "0.60", "1.01")), ["sides"]),
        (wald(0.03, **ratio("hazard ratio", 0.78, 0.6, 1.01)), ["sides"]),
        (wald("0.03", **ratio("HR", "0.78", "0.60", "1.01")), ["sides"]),
        (wald("0.03", **ratio("hazard ratio", "0.78", "0.60", "1.01", null=1)), ["sides"]),
        (wald("0.06", **ratio("hazard ratio", "0.78", "0.60", "1.01")), []),
        (wald("0.30", **ratio("rate ratio", "1.40", "1.05", "1.87")), ["sides", "p-estimate"]),
        # On no scale: a limit that was mistaken, and an estimate outside its interval.
        (wald("<0.001", **ratio("ratio of means", "1.30", "1.00", "1.60")), ["p-estimate"]),
        (wald("0.03", **ratio("odds ratio", "3.10", "1.20", "2.40")), ["inside"]),
        # The measure need not be a ratio of groups: then it is caught only if it fits against 0 neither.
        (wald("0.007", **ratio("gain ratio", "0.60", "0.18", "1.02")), []),
        (wald("0.700", **ratio("gain ratio", "0.60", "0.18", "1.02")), ["sides", "p-estimate"]),
        (wald("0.700", **ratio("percent change", "16.4", "10.5", "22.3", unit="%")), ["sides", "p-estimate"]),
    ],
)
def test_what_fits_on_no_scale_is_caught(record: dict[str, Any], short: list[str]) -> None:
    assert names_short(record) == [short]


def test_each_ratio_is_read_by_itself_and_other_records_are_left_alone() -> None:
    records = [
        wald("0.06", **ratio("hazard ratio", "0.78", "0.60", "1.01")),
        wald("0.700", **ratio("mean difference", "0.60", "0.18", "1.02")),
        wald("0.03", **ratio("hazard ratio", "0.78", "0.60", "1.01")),
        {"test": {"name": "rank test", "p": 0.03}},
        wald("0.052", **ratio("ratio of means", "1.300", "1.00", "1.60")),
    ]

    assert names_short(*records) == [names_short(record)[0] for record in records]
    assert names_short(*records) == [[], ["sides", "p-estimate"], ["sides"], [], []]


def test_a_comparison_that_no_reading_has_is_not_made() -> None:
    """The correlation of a ratio is compared as declared; on the log scale there is none."""
    record = {
        "test": {"name": "Pearson correlation", "statistic": "r", "value": "0.35", "df": 30, "p": "0.05"},
        "estimate": ratio("correlation of the odds ratio", "0.45", "0.30", "0.675"),
    }

    (row,) = [{each.name for each in compared(record) if each.checked[0]}]

    assert row.isdisjoint({"correlation", "fisher"})


@pytest.mark.parametrize("kind", ["odds_ratio", "hazard_ratio"])
@pytest.mark.parametrize("places", [2, 3, None])
def test_no_computed_ratio_raises_an_alarm_without_its_scale(kind: str, places: int | None) -> None:
    generator = np.random.default_rng(20310402)
    made = [KINDS[kind](generator) for _ in range(150)]
    for document in made:
        document.get("estimate", {}).pop("scale", None)
    told = made if places is None else [rounded(document, places, as_text=True) for document in made]

    short = [(document, names) for document, names in zip(told, names_short(*told), strict=True) if names]

    assert short == []


def test_a_wrong_p_beside_a_ratio_without_its_scale_is_mostly_caught() -> None:
    """A tenth or ten times p, of 150 hazard ratios with p alone or with z."""
    generator = np.random.default_rng(20310403)
    made = [rounded(KINDS["hazard_ratio"](generator), 3, as_text=True) for _ in range(150)]
    changed = []
    for document in made:
        p = float(document["test"]["p"])
        document["estimate"].pop("scale")
        document["test"]["p"] = f"{p / 10 if p > 0.1 else p * 10:.4f}"
        changed.append(document)

    caught = sum(map(bool, names_short(*changed)))

    assert caught > 135


def test_the_error_of_a_bound_is_not_told() -> None:
    bound = ratio("odds ratio", "<0.05", standard_error="0.51", scale="log")

    assert not fits_as_error_of_ratio(found_with(bound), numbers_on_one_scale)
