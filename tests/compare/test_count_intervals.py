"""Intervals of odds ratios, risk ratios and risk differences against the counts that they are of."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
import pytest
from compare.deriving import alarms, said_of
from scipy import stats
from statsmodels.stats.proportion import confint_proportions_2indep
from support import Document

from gatecheck.compare.count_intervals import Measure, compare_interval, compare_limits
from gatecheck.compare.two_proportions import Table
from gatecheck.model.numbers import Reported, exact
from gatecheck.model.record import Estimate, Interval

TABLE = Table(20.0, 100.0, 40.0, 100.0)
COUNTS: Document = {
    "unit": "patient",
    "groups": [{"name": "a", "n": 100, "events": 20}, {"name": "b", "n": 100, "events": 40}],
}
PEARSON: Document = {"name": "Pearson chi-squared", "statistic": "chi2", "value": "9.52", "df": 1}


def ratio(measure: str, value: str, low: str | None = None, high: str | None = None, **more: object) -> Document:
    ends = {name: end for name, end in (("low", low), ("high", high)) if end is not None}
    interval = {"interval": {"level": 0.95, **ends}} if ends else {}
    return {"measure": measure, "value": value, **interval, **more}


@pytest.mark.parametrize(
    ("estimate", "told"),
    [
        # The log odds ratio is 0.981 with error 0.323: 1.42 to 5.02. The risks differ by 0.2 with error 0.0632.
        (
            ratio("odds ratio", "2.67", "1.92", "3.71", scale="log"),
            "20 of 100 and 40 of 100 give a 95 % interval near 1.42 to 5.02 by every usual method, and 1.92",
        ),
        (ratio("odds ratio", "0.38", "0.20", "0.50", scale="log"), "near 0.199 to 0.706 by every usual method"),
        (ratio("odds ratio", "2.67", "1.42", "9.02", scale="log"), "near 1.42 to 5.02"),
        (ratio("odds ratio", "2.67", high="9.02", scale="log"), "near 1.42 to 5.02"),
        (ratio("log odds ratio", "0.98", "0.65", "1.31"), "near 0.348 to 1.61 by every usual method"),
        (ratio("risk ratio", "2.00", "1.60", "2.50", scale="log"), "near 1.26 to 3.17 by every usual method"),
        (ratio("risk difference", "0.20", "0.15", "0.25"), "near 0.076 to 0.324 by every usual method"),
        (ratio("risk difference", "-20", "-25", "-15", unit="percentage points"), "near -32.4 to -7.6 by every"),
    ],
)
@pytest.mark.parametrize("test", [{}, {"test": PEARSON}])
def test_an_interval_that_no_method_gives(tmp_path: Path, estimate: Document, test: Document, told: str) -> None:
    outcome, message, remedy = said_of(tmp_path, estimate=estimate, sample=COUNTS, **test)

    assert outcome == "short"
    assert told in message
    assert "Take the interval from these counts, and check its level" in remedy or "; take the interval" in remedy


@pytest.mark.parametrize(
    "estimate",
    [
        ratio("odds ratio", "2.67", "1.42", "5.02", scale="log"),
        ratio("odds ratio", "0.38", "0.20", "0.70", scale="log"),
        ratio("odds ratio", "2.67", "1.42", "5.02"),
        # By the error of the ratio itself, 0.859; exact; one side alone.
        ratio("odds ratio", "2.67", "0.98", "4.35", scale="linear"),
        ratio("odds ratio", "2.67", "1.37", "5.31", scale="log"),
        ratio("odds ratio", "2.67", "1.57", scale="log"),
        ratio("risk ratio", "2.00", "1.26", "3.17", scale="log"),
        ratio("risk difference", "0.20", "0.08", "0.32"),
        # Not the interval of these counts: adjusted, resampled, of a mean, a reduction, another estimate.
        ratio("adjusted odds ratio", "2.67", "1.92", "3.71", scale="log"),
        ratio("odds ratio (bootstrap)", "2.67", "1.92", "3.71", scale="log"),
        ratio("mean difference", "0.20", "0.15", "0.25"),
        ratio("relative risk reduction", "50", "40", "60", unit="%"),
        ratio("risk difference", "2.00", "1.60", "2.50", scale="log"),
        {**ratio("odds ratio", "2.67", scale="log"), "interval": {"level": 0.95, "low": "1.92", "adjusted": True}},
    ],
)
def test_intervals_that_may_be_of_the_counts_raise_no_alarm(tmp_path: Path, estimate: Document) -> None:
    outcome, message, _ = said_of(tmp_path, estimate=estimate, sample=COUNTS)

    assert "by every usual method" not in message
    assert outcome == "met" or "risk difference, by the order" in message


def test_a_ratio_without_a_test_is_that_of_its_counts(tmp_path: Path) -> None:
    outcome, message, _ = said_of(tmp_path, estimate=ratio("odds ratio", "3.50", scale="log"), sample=COUNTS)

    assert outcome == "short"
    assert "20 of 100 and 40 of 100 give 0.375 or 2.67 as odds ratio" in message
    # With a test whose name says nothing it may be that of a model.
    named = {"test": {"name": "Wald", "statistic": "z", "value": "3.9"}}
    assert said_of(tmp_path, estimate=ratio("odds ratio", "3.50", scale="log"), sample=COUNTS, **named)[0] == "met"


METHODS: tuple[tuple[Measure, str, tuple[str, ...]], ...] = (
    ("odds", "odds-ratio", ("logit", "logit-adjusted", "logit-smoothed")),
    ("risks", "ratio", ("log", "log-adjusted", "score")),
    ("difference", "diff", ("wald", "newcomb", "agresti-caffo")),
)


@pytest.mark.parametrize(("measure", "compare", "methods"), METHODS)
def test_the_intervals_of_other_programs_fit(measure: Measure, compare: str, methods: tuple[str, ...]) -> None:
    """Random counts of groups of 6 to 400 at three levels, by statsmodels."""
    rng, seen = np.random.default_rng(20310404), 0
    for _ in range(60):
        n1, n2 = (int(n) for n in np.exp(rng.uniform(np.log(6), np.log(400), 2)))
        events1, events2 = (
            int(rng.binomial(n1, rng.uniform(0.1, 0.9))),
            int(rng.binomial(n2, rng.uniform(0.1, 0.9))),
        )
        level = float(rng.choice([0.9, 0.95, 0.99]))
        if not (0 < events1 < n1 and 0 < events2 < n2):
            continue
        for method in methods:
            ends = confint_proportions_2indep(
                events1, n1, events2, n2, method=method, compare=compare, alpha=1 - level
            )
            low, high = (float(end) if measure == "difference" else math.log(end) for end in ends)
            table = Table(float(events1), float(n1), float(events2), float(n2))
            found = compare_limits(measure, table, level, exact(low), exact(high))
            seen += 1
            assert found is not None
            assert found.agrees, (events1, n1, events2, n2, method)
    assert seen > 150


def test_the_exact_interval_of_an_odds_ratio_fits_and_is_needed() -> None:
    """By scipy; with few events it is beyond all that are computed from errors."""
    result = stats.contingency.odds_ratio([[1, 99], [12, 88]]).confidence_interval(0.95)
    low, high = exact(math.log(result.low)), exact(math.log(result.high))

    found = compare_limits("odds", Table(1.0, 100.0, 12.0, 100.0), 0.95, low, high)
    assert found is not None
    assert found.agrees
    beyond = compare_limits("odds", Table(1.0, 100.0, 12.0, 100.0), 0.95, exact(low.value - 2), high)
    assert beyond is not None
    assert not beyond.agrees


def test_one_exact_table_of_a_million_is_not_summed() -> None:
    table = Table(50_000.0, 1e6, 60_000.0, 1e6)

    found = compare_limits("odds", table, 0.95, exact(-0.5), exact(0.0))
    assert found is not None
    assert (round(found.low, 3), round(found.high, 3), found.agrees) == (-0.205, -0.181, False)


@pytest.mark.parametrize(
    ("measure", "table"),
    [("odds", Table(0.0, 10.0, 4.0, 10.0)), ("risks", Table(0.0, 10.0, 4.0, 10.0))],
)
def test_no_events_leave_a_ratio_without_an_interval(measure: Measure, table: Table) -> None:
    assert compare_limits(measure, table, 0.95, exact(-1.0), exact(1.0)) is None
    halves = Reported(0.09, 0.07, 0.11)
    estimate = Estimate(measure, halves, scale="log", interval=Interval(0.95, exact(0.5), exact(0.6)))
    assert compare_interval(measure, table, estimate, as_logarithm=False) is None


def test_figures_beyond_all_bounds_are_judged(tmp_path: Path) -> None:
    """A level that is 1 but for the last digit of a double, and a limit whose exponential is none."""
    endless = ratio("odds ratio", "2.67", "1.92", "3.71", scale="log")
    endless["interval"]["level"] = 0.99999999999999994
    far = ratio("log odds ratio", "0.98", "0.35", "1e300")

    found = alarms(
        tmp_path, {"endless": {"estimate": endless, "sample": COUNTS}, "far": {"estimate": far, "sample": COUNTS}}
    )

    assert list(found) == ["far"]
    assert "near 0.348 to 1.61 by every usual method, and 0.35 to 1e300 is reported" in found["far"]


def test_a_difference_without_events_has_one() -> None:
    found = compare_limits("difference", Table(0.0, 10.0, 0.0, 10.0), 0.95, exact(-0.27), exact(0.27))

    assert found is not None
    assert found.agrees
    alone = compare_limits("difference", Table(0.0, 10.0, 0.0, 10.0), 0.4, None, exact(0.9))
    assert alone is not None
    assert (alone.agrees, alone.low, alone.high) == (False, 0.0, 0.0)


def test_every_unit_has_the_event(tmp_path: Path) -> None:
    """The score interval of a risk ratio is there where no unit is without the event."""
    found = compare_limits("risks", Table(15.0, 15.0, 304.0, 350.0), 0.95, exact(-0.1), exact(0.187))

    assert found is not None
    assert found.agrees
    groups = [{"name": "a", "n": 10, "events": 10}, {"name": "b", "n": 10, "events": 10}]
    record = {"estimate": ratio("risk ratio", "1.00", "0.83", "1.20", scale="log"), "sample": {"groups": groups}}
    assert alarms(tmp_path, {"all": record}) == {}
    far = compare_limits("risks", Table(10.0, 10.0, 10.0, 10.0), 0.95, exact(-3.0), exact(3.0))
    assert far is not None
    assert not far.agrees
