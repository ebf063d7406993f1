"""Deviations: which field each covers, and when what it states is not what was planned and done."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st
from promising import HYPOTHESIS, deviation, kept, planned, promise
from support import Document

from gatecheck.compare.promised_deviations import contradicts, covers, field_of
from gatecheck.compare.promised_gaps import NOT_TOLD, Gap
from gatecheck.compare.promises import Difference, differences, missing_hypotheses
from gatecheck.model.plan import Plan
from gatecheck.model.promise import PlanInTree
from gatecheck.model.record import Deviation


def departure(field: str, was_planned: str, was_done: str) -> Deviation:
    """A deviation that states these values."""
    return Deviation(field, was_planned, was_done, "a flood", "before-data")


def gap(field: str, was_planned: str, was_done: str, unit: str | None = None) -> Gap:
    """A difference in that field."""
    return Gap(field, was_planned, was_done, "they differ", unit)


SIDES = gap("sides", "2", "1")
UNITS = gap("n", "40", "34 analysed and 4 left out", "plot")
ALPHA = gap("alpha", "0.05", "0.1")
TIME = gap("outcome.time_point", "90 days", "30 days")
TEST = gap("test", "two-sample t or Welch t", "Mann-Whitney")
PROCEDURE = gap("family.procedure", "holm", "none")
DIRECTION = gap("direction", "increase", "less")
COVARIATES = gap("covariates", "block, slope", "age")
MARGIN = gap("margin", "-1.5 to 1.5", "-2 to 2")

#: What a deviation may state of a difference.
AGREES = (
    (SIDES, "2", "1"),
    (SIDES, "a two-sided test", "one-sided, as a single tail was of interest"),
    (SIDES, "both sides", "1"),
    (SIDES, "as the plan has it", "otherwise"),
    (SIDES, "section 4 of version 2", "see there"),
    (UNITS, "40 plots", "34 plots"),
    (UNITS, "40", "38"),
    (UNITS, "n = 40", "34 of 40"),
    (UNITS, "20 per group", "17 per group"),
    (UNITS, "protocol v3", "H2"),
    (ALPHA, "5 %", "10 percent"),
    (ALPHA, "0,05", ".1"),
    (ALPHA, "5e-2", "1.2.3"),
    (TIME, "90 d", "30d"),
    (TIME, "three months (12 weeks)", "4 weeks"),
    (TEST, "Student's t-test", "Wilcoxon rank-sum"),
    (TEST, "t test", "a rank test"),
    (PROCEDURE, "Holm", "no adjustment"),
    (DIRECTION, "greater", "decrease"),
    (COVARIATES, "Slope and block", "age"),
    (COVARIATES, "slope,block", "AGE"),
    (MARGIN, "−1.5 to 1.5", "±2"),
    (gap("n", "1200", "1000"), "1,200", "1,000 customers"),
    (gap("n.unit", "plot", "worm"), "plots", "worms"),
    (gap("alpha", "0.05", NOT_TOLD), "0.05", "0.05"),
    (gap("family.position", "1", "2"), "second", "first"),
)
#: What contradicts the plan or the record.
CONTRADICTS = (
    (SIDES, "1", "2"),
    (SIDES, "one-sided", "two-sided"),
    (SIDES, "2", "2"),
    (SIDES, "2", "both tails"),
    (UNITS, "34", "40"),
    (UNITS, "60 plots", "34"),
    (UNITS, "40", "36 units"),
    (UNITS, "planned were 4 more than before, 34", "34"),
    (ALPHA, "0.01", "0.1"),
    (ALPHA, "10 %", "0.1"),
    (ALPHA, "alpha = 0.05", "alpha of 0.2"),
    (TIME, "30 days", "90 days"),
    (TIME, "60 days", "30 days"),
    (TIME, "measured after 30 d", "30 d"),
    (TEST, "Mann-Whitney U test", "Welch"),
    (PROCEDURE, "hochberg", "none"),
    (PROCEDURE, "Holm", "Holm"),
    (DIRECTION, "increase", "greater"),
    (DIRECTION, "decrease", "decrease"),
    (COVARIATES, "age", "slope, block"),
    (MARGIN, "-1 to 1", "-2 to 2"),
    (gap("n", "1200", "1000"), "1,000", "1,200"),
    (gap("n.unit", "plot", "worm"), "worms", "plots"),
    (gap("alpha", "0.05", NOT_TOLD), "0.01", "0.05"),
    (gap("role", "primary", "secondary"), "secondary", "secondary"),
)


@pytest.mark.parametrize(("difference", "was_planned", "was_done"), AGREES)
def test_what_agrees_or_cannot_be_compared(difference: Gap, was_planned: str, was_done: str) -> None:
    assert not contradicts(departure(difference.field, was_planned, was_done), difference)


@pytest.mark.parametrize(("difference", "was_planned", "was_done"), CONTRADICTS)
def test_what_contradicts_the_plan_or_the_record(difference: Gap, was_planned: str, was_done: str) -> None:
    assert contradicts(departure(difference.field, was_planned, was_done), difference)


def test_a_deviation_in_the_whole_may_state_the_number_of_another_part() -> None:
    place = gap("family.position", "1", "2")

    assert not contradicts(departure("family", "6", "2 tests"), place)
    assert contradicts(departure("family.position", "6", "2"), place)
    assert contradicts(departure("outcome", "60 days", "30 days"), TIME)


@given(text=st.text())
def test_no_text_stops_the_comparison(text: str) -> None:
    for difference in (SIDES, UNITS, ALPHA, TIME, TEST, PROCEDURE, DIRECTION, COVARIATES, MARGIN):
        stated = departure(difference.field, difference.planned, text)
        assert contradicts(stated, difference) in {True, False}


@pytest.mark.parametrize("number", ["1e999", "9" * 400, "1,2,3,4", "1.2.3.4", "٣"])
def test_odd_numbers_are_compared_or_passed_over(number: str) -> None:
    assert contradicts(departure("alpha", number, "0.1"), ALPHA) is ("," not in number and number.count(".") < 2)


def test_fields_are_named_as_a_plan_or_a_record_has_them() -> None:
    assert field_of(departure("Sample.N", "a", "b")) == "n"
    assert covers(departure("outcome", "a", "b"), "outcome.metric")
    assert not covers(departure("outcome.metric", "a", "b"), "outcome")
    assert not covers(departure("n", "a", "b"), "note")


def only(*deviations: Document) -> Difference:
    """The difference of a record with one side and these deviations."""
    (one,) = differences(kept(test__sides=1, deviations=list(deviations)), promise())
    return one


def test_only_what_agrees_excuses() -> None:
    wrong = {**deviation("sides", "after-results"), "planned": "1", "done": "2"}
    right = {**deviation("sides"), "planned": "2", "done": "1"}

    alone, both = only(wrong), only(wrong, right)

    assert (alone.standing, alone.disclosed) == ("undeclared", None)
    assert alone.told.endswith(", while its deviation says that 1 was planned and 2 was done")
    assert both.standing == "amendment"
    assert "deviation says" not in both.told


@pytest.mark.parametrize(("was_done", "missing"), [("litter mass", 0), ("earthworm_biomass", 1)])
def test_a_switched_variable_answers_only_where_the_deviation_says_so(was_done: str, missing: int) -> None:
    stated = {**deviation("outcome.variable"), "planned": "earthworm biomass", "done": was_done}
    record = kept(outcome__variable="litter mass", deviations=[stated])
    plan: Plan = planned()

    (one,) = missing_hypotheses([record], [PlanInTree("plans/drainage.yaml", 1, plan)], ["primary"])

    assert len(one.missing) == missing
    assert HYPOTHESIS["outcome"]["variable"] == "earthworm_biomass"
