"""The words in which results are told."""

from __future__ import annotations

import math

import pytest

from gatecheck.model.record import Group, Record, Sample
from gatecheck.rules.words import describe_result, plural, tell_odds, tell_sample, tell_wording


@pytest.mark.parametrize(
    ("sample", "told"),
    [
        (None, ""),
        (Sample(), ""),
        (Sample(unit="plot"), ""),
        (Sample(n=20), "20 units"),
        (Sample(unit="series", n=20), "20 series"),
        (Sample(unit="plot", n=18, groups=(Group("drained", 18),)), "18 plots"),
        (Sample(unit="plot", groups=(Group("a", 18), Group("b", 20))), "18 + 20 plots"),
    ],
)
def test_samples_are_told_with_their_unit(sample: Sample | None, told: str) -> None:
    assert tell_sample(sample) == told


@pytest.mark.parametrize(
    ("unit", "many"),
    [
        ("patient", "patients"),
        ("plots", "plots"),
        ("field mouse", "field mice"),
        ("mice", "mice"),
        ("child", "children"),
        ("person", "people"),
        ("class", "classes"),
        ("box", "boxes"),
        ("branch", "branches"),
        ("day", "days"),
        ("survey", "surveys"),
        ("family", "families"),
        (None, "units"),
    ],
)
def test_a_unit_is_told_in_the_plural(unit: str | None, many: str) -> None:
    assert plural(unit) == many


def test_a_record_with_nothing_to_tell_says_so() -> None:
    assert describe_result(Record("record/1", "a")) == "no test and no estimate"


@pytest.mark.parametrize(
    ("log_ratio", "told"),
    [
        (math.log(5.06), "about 5.06 to 1 for an effect over none"),
        (-math.log(18), "about 18 to 1 for no effect over one"),
        (0.0, "about 1 to 1 for an effect over none"),
        (-5000.0, "more than 1e+26 to 1 for no effect over one"),
    ],
)
def test_a_ratio_is_told_as_odds(log_ratio: float, told: str) -> None:
    assert tell_odds(log_ratio) == told


@pytest.mark.parametrize(
    ("risk", "log_ratio", "told"),
    [
        (0.2, 1.4, "as it stands, call it suggestive"),
        (0.21, 1.3, "as it stands, say that the data do not settle it"),
        (0.1, -0.1, "as it stands, the data fit no effect better than the effect weighed: do not claim it"),
    ],
)
def test_the_wording_follows_the_evidence(risk: float, log_ratio: float, told: str) -> None:
    assert tell_wording(risk, log_ratio) == told
