"""A record against its promise: kept, changed in one field, disclosed, and what nobody reported."""

from __future__ import annotations

from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st
from promising import FILE, HYPOTHESIS, KEPT, PLAN, deviation, kept, model, planned, promise
from scipy import stats
from support import Document, changed

from gatecheck.compare.promised_fields import FIELDS
from gatecheck.compare.promised_hypotheses import promises_something
from gatecheck.compare.promises import Difference, differences, missing_hypotheses, unused_deviations
from gatecheck.model.plan import Plan
from gatecheck.model.promise import PlanInTree, Promise
from gatecheck.model.record import Record, Role

#: A change of one field of the record that kept its promise, and the field in which it then differs.
CHANGES: tuple[tuple[Document, str], ...] = (
    ({"outcome": ...}, "outcome"),
    ({"outcome__variable": "litter mass"}, "outcome.variable"),
    ({"outcome__metric": "final value"}, "outcome.metric"),
    ({"outcome__metric": ...}, "outcome.metric"),
    ({"outcome__aggregation": "median"}, "outcome.aggregation"),
    ({"outcome__time_point": "9.0 days"}, "outcome.time_point"),
    ({"test__name": "Mann-Whitney U"}, "test"),
    ({"test__name": "paired t test"}, "test"),
    ({"test__name": ...}, "test"),
    ({"test__sides": 1}, "sides"),
    ({"estimate__value": -4.2}, "direction"),
    ({"estimate": ..., "test__value": -2.21}, "direction"),
    ({"test__alpha": 0.1}, "alpha"),
    ({"test__alpha": ...}, "alpha"),
    ({"sample__n": 30}, "n"),
    ({"sample__n": 50}, "n"),
    ({"sample__excluded": []}, "n"),
    ({"sample__n": ..., "sample__groups": []}, "n"),
    ({"sample__unit": "pit"}, "n.unit"),
    ({"sample__unit": ...}, "n.unit"),
    ({"population": "plots that were drained"}, "population"),
    ({"population": ...}, "population"),
    ({"sample__excluded": [{"n": 4, "reason": "low yield"}]}, "exclusions"),
    ({"covariates": ["block"]}, "covariates"),
    ({"covariates": ["block", "slope", "age"]}, "covariates"),
    ({"covariates": []}, "covariates"),
    ({"covariates": ...}, "covariates"),
    ({"alternative__effect": 0.5}, "alternative"),
    ({"alternative__scale": "raw"}, "alternative"),
    ({"estimate__smallest_effect": 1}, "smallest_effect"),
    ({"estimate__margin": [-1.5, "1.6"]}, "margin"),
    ({"prior__probability": 0.3}, "prior"),
    ({"family": ...}, "family"),
    ({"family__name": "yield"}, "family"),
    ({"family__size": 1}, "family.size"),
    ({"family__size": 3}, "family.size"),
    ({"family__size": ...}, "family.size"),
    ({"family__procedure": "none"}, "family.procedure"),
    ({"family__position": 2}, "family.position"),
    ({"look": ...}, "looks"),
    ({"look__number": 4}, "looks"),
    ({"look__planned": 5}, "looks"),
    ({"look__planned": 2, "look__number": 2, "sample__n": 40, "sample__excluded": []}, "looks"),
    ({"look__boundary": "pocock"}, "looks.boundary"),
    ({"look__boundary": ...}, "looks.boundary"),
    ({"role": "secondary"}, "role"),
    ({"aim": "superiority"}, "aim"),
)
#: What a record may do or leave out, and still keep its promise.
KEEPS: tuple[Document, ...] = (
    {},
    {"test__name": "Welch's two-sample t-test"},
    {"test__name": "t test"},
    {"test__name": "two-sided t-test"},
    {"test__sides": ...},
    {"estimate__value": "0.0"},
    {"estimate__value": "-0", "estimate__interval": ...},
    {"estimate__margin": ["-2", "2"]},
    {"estimate__margin": ...},
    {"estimate__smallest_effect": ...},
    {"estimate": ...},
    {"estimate": ..., "test": {"name": "Welch t", "p": 0.03, "alpha": 0.05}},
    {"estimate": ..., "test": {"name": "Welch t", "statistic": "F", "value": 3, "df": [1, 34], "alpha": 0.05}},
    {"sample__n": ...},
    {"sample__n": 40},
    {"sample__n": 40, "sample__excluded": []},
    {"sample__unit": "Plots"},
    {"sample__excluded": [{"n": 3, "reason": "flooded"}, {"n": 1, "reason": "marker-lost"}]},
    {"sample__n": 40, "sample__excluded": [{"n": 0, "reason": "low yield"}]},
    {"look__number": 2, "sample__n": 24},
    {"look__planned": ...},
    {"prior__probability": 0.1},
    {"prior": ...},
    {"alternative": ...},
    {"family__position": ...},
    {"role": "other"},
    {"status": "exploratory"},
)


def found(record: Record, plan: Plan | None = None) -> list[str]:
    """The fields in which a record differs from its promise."""
    return [each.field for each in differences(record, promise(plan))]


def only(record: Record, plan: Plan | None = None) -> Difference:
    """The only difference of a record from its promise."""
    (one,) = differences(record, promise(plan))
    return one


@pytest.mark.parametrize("changes", KEEPS, ids=str)
def test_a_promise_that_is_kept(changes: Document) -> None:
    assert found(kept(**changes)) == []


@pytest.mark.parametrize(("changes", "field"), CHANGES, ids=str)
def test_one_changed_field_is_one_difference(changes: Document, field: str) -> None:
    one = only(kept(**changes))

    assert one.field == field
    assert (one.standing, one.disclosed) == ("undeclared", None)
    assert one.field in FIELDS
    assert one.planned
    assert one.done


@given(change=st.sampled_from(CHANGES), known=st.sampled_from(["before-data", "before-results", "after-results"]))
def test_a_disclosed_difference_stands_by_when_it_was_decided(change: tuple[Document, str], known: str) -> None:
    changes, field = change
    standings = {"before-data": "amendment", "before-results": "flagged", "after-results": "after-results"}

    record = kept(**changes, deviations=[deviation(field, known)])

    one = only(record)
    assert one.standing == standings[known]
    assert one.disclosed is record.deviations[0]
    assert unused_deviations(record, (one,)) == ()


@given(change=st.sampled_from(CHANGES), other=st.sampled_from(sorted(FIELDS)))
def test_a_deviation_in_another_field_discloses_nothing(change: tuple[Document, str], other: str) -> None:
    changes, field = change
    record = kept(**changes, deviations=[deviation(other)])

    one = only(record)

    covers = field == other or field.startswith(f"{other}.")
    assert one.standing == ("amendment" if covers else "undeclared")
    assert len(unused_deviations(record, (one,))) == int(not covers)


@given(kept_fields=st.sets(st.sampled_from(sorted(set(HYPOTHESIS) - {"id", "text"}))))
def test_what_the_plan_leaves_out_is_not_compared(kept_fields: set[str]) -> None:
    """The record that keeps the whole plan keeps each part that does not speak of sample and test."""
    left_out: Document = {name: ... for name in HYPOTHESIS if name not in kept_fields | {"id", "text"}}
    tolerated = {"exclusions", "looks"} if "n" in kept_fields or "population" in kept_fields else set()
    tolerated |= {"covariates"} if "test" in kept_fields else set()
    tolerated |= {"looks"} if "exclusions" in kept_fields else set()

    fields = set(found(kept(), planned(**left_out)))

    assert fields <= tolerated
    assert fields == {name for name in tolerated if name in left_out}


def test_a_plan_that_speaks_of_its_sample_and_test_promises_no_exclusions_looks_and_covariates() -> None:
    plan = planned(exclusions=..., looks=..., covariates=...)

    assert found(kept(), plan) == ["exclusions", "covariates", "looks"]
    assert [each.planned for each in differences(kept(), promise(plan))] == ["none", "none", "1"]


@pytest.mark.parametrize("name", ["estimate.margin", "margin", " Margin "])
def test_a_field_may_be_named_as_the_record_names_it(name: str) -> None:
    record = kept(estimate__margin=[-2, 2], deviations=[deviation(name)])

    assert only(record).standing == "amendment"


def test_a_deviation_in_the_whole_covers_its_parts_and_none_in_a_part_the_whole() -> None:
    parts = kept(outcome__metric="x", outcome__time_point="y", deviations=[deviation("outcome")])
    whole = kept(outcome=..., deviations=[deviation("outcome.time_point")])

    assert [each.standing for each in differences(parts, promise())] == ["amendment", "amendment"]
    assert only(whole).standing == "undeclared"


def test_of_several_deviations_the_one_decided_latest_counts() -> None:
    known = ("before-results", "after-results", "before-data")
    record = kept(population="x", deviations=[deviation("population", each) for each in known])

    assert only(record).standing == "after-results"


def test_a_deviation_in_what_is_not_compared_is_not_unused() -> None:
    record = kept(deviations=[deviation("missing data"), deviation("alpha")])

    assert [each.field for each in unused_deviations(record, ())] == ["alpha"]


def told(record: Record, plan: Plan | None = None) -> str:
    """How the only difference is told."""
    return only(record, plan).told


def test_one_side_of_a_two_sided_promise_is_told_with_the_two_sided_p() -> None:
    """t(46) = 1.78, one-sided p = .041: the two-sided p is .082 (twice scipy's upper tail)."""
    test = {
        "name": "two-sample t",
        "statistic": "t",
        "value": 1.78,
        "df": 46,
        "p": "0.041",
        "sides": 1,
        "alpha": 0.05,
    }

    said = told(kept(test=test))

    assert 2 * stats.t.sf(1.78, 46) == pytest.approx(0.0817, abs=5e-5)
    assert said == "one side of the test is taken, and both sides were promised (two-sided p = 0.0817)"


@pytest.mark.parametrize(
    ("test", "p"),
    [
        ({"statistic": "t", "df": 46, "p": 0.041}, 0.082),
        ({"statistic": "z", "value": 1.5}, 2 * stats.norm.sf(1.5)),
        ({"statistic": "z", "value": -1.5, "tail": "greater"}, 2 * stats.norm.sf(1.5)),
        ({"statistic": "r", "value": 0.3, "df": 30}, 2 * stats.t.sf(0.3 * (30 / 0.91) ** 0.5, 30)),
    ],
)
def test_the_two_sided_p_is_that_of_the_statistic(test: Document, p: float) -> None:
    tested = {"name": "Welch t", "sides": 1, "alpha": 0.05, **test}

    said = told(kept(estimate=..., test=tested), planned(direction="either"))

    assert float(said.rpartition(" = ")[2].removesuffix(")")) == pytest.approx(p, abs=5e-4)


@pytest.mark.parametrize(
    "test",
    [
        {"p": 0.04},
        {"statistic": "t", "p": 0.04},
        {"statistic": "t", "df": 46, "p": "<0.05"},
        {"statistic": "t", "df": 46, "p": 0.04, "p_kind": "adjusted"},
        {"statistic": "t", "df": 46, "p": 0},
        {"statistic": "t", "df": 46},
        {"statistic": "t", "value": 2},
        {"statistic": "r", "value": 1, "df": 30},
    ],
)
def test_a_p_that_cannot_be_told_is_not_told(test: Document) -> None:
    said = told(kept(test={"name": "Welch t", "sides": 1, "alpha": 0.05, **test}))

    assert said == "one side of the test is taken, and both sides were promised"


@pytest.mark.parametrize(
    ("direction", "test", "honest"),
    [
        ("increase", {"value": 2.21}, f" (one-sided p = {stats.t.sf(2.21, 34):.3g})"),
        ("decrease", {"value": -2.21}, f" (one-sided p = {stats.t.sf(2.21, 34):.3g})"),
        ("either", {"value": 2.21}, ""),
        ("increase", {"p": 0.034}, ""),
    ],
)
def test_both_sides_of_a_one_sided_promise(direction: str, test: Document, honest: str) -> None:
    """Only a statistic with its sign gives the p of the side that was promised."""
    record = kept(estimate=..., test={"name": "Welch t", "statistic": "t", "df": 34, "alpha": 0.05, **test})

    assert told(record, planned(direction=direction, sides=1)) == (
        f"both sides of the test are taken, and one side was promised{honest}"
    )


@pytest.mark.parametrize("statistic", [{"statistic": "chi2", "df": 1}, {"statistic": "F", "df": [1, 34]}])
def test_a_test_without_sides_keeps_any(statistic: Document) -> None:
    tested = {"name": "Welch t", "value": 4.9, "sides": 1, "alpha": 0.05, **statistic}
    record = kept(estimate=..., test=tested)

    assert found(record) == []


def test_the_side_tested_against_a_promised_direction() -> None:
    record = kept(test__sides=1, test__tail="less")
    plan = planned(sides=1)

    p = stats.t.sf(2.21, 34)
    assert told(record, plan) == (f"the side tested is less, and an increase was promised (one-sided p = {p:.3g})")
    other_way = kept(test__sides=1, test__tail="less", test__value=-2.21)
    assert told(other_way, plan).endswith(f" was promised (one-sided p = {1 - p:.3g})")
    without_value = kept(test__sides=1, test__tail="less", test__value=..., test__p="0.98")
    assert told(without_value, plan) == "the side tested is less, and an increase was promised"
    assert found(kept(test__sides=1, test__tail="less"), planned(sides=1, direction="decrease")) == ["direction"]
    assert found(kept(test__sides=1, test__tail="greater"), plan) == []


@pytest.mark.parametrize(
    ("changes", "direction", "figure"),
    [
        ({"estimate__value": "-4.2"}, "increase", "a decrease (mean difference -4.2 g/m2)"),
        ({"estimate__null": 5}, "increase", "a decrease (mean difference 4.2 g/m2)"),
        ({}, "decrease", "an increase (mean difference 4.2 g/m2)"),
        (
            {"estimate": {"measure": "odds ratio", "value": 0.8, "scale": "log"}},
            "increase",
            "a decrease (odds ratio 0.8)",
        ),
        ({"estimate": ..., "test__value": "-2.21"}, "increase", "a decrease (t = -2.21)"),
    ],
)
def test_an_effect_against_its_direction_is_told_with_its_figure(
    changes: Document, direction: str, figure: str
) -> None:
    said = told(kept(**changes), planned(direction=direction))

    assert said == f"the effect found is {figure}, and a{'n'[: direction == 'increase']} {direction} was promised"


@pytest.mark.parametrize("aim", ["equivalence", "noninferiority", "estimation"])
def test_a_claim_of_no_effect_has_no_direction(aim: str) -> None:
    assert found(kept(estimate__value=-4.2, aim=aim), planned(aim=aim)) == []


@pytest.mark.parametrize(
    ("changes", "said"),
    [
        ({"outcome__time_point": "7 days"}, "the time point of the outcome is 7 days, and 90 days was promised"),
        (
            {"outcome": ...},
            "the outcome is not told, and earthworm_biomass, change from baseline, mean, 90 days was promised",
        ),
        ({"test__name": "sign test"}, "the test is sign test, and two-sample t or Welch t was promised"),
        ({"sample__n": 34}, "the number of units is 34 analysed and 4 left out, and 40 was promised"),
        ({"sample__n": 34, "sample__excluded": []}, "the number of units is 34, and 40 was promised"),
        (
            {"sample__excluded": [{"n": 1, "reason": "flooded"}, {"n": 3, "reason": "low yield"}]},
            "units are left out by no rule that was promised: low yield (3)",
        ),
        ({"covariates": ["age"]}, "the set of covariates is age, and block, slope was promised"),
        (
            {"alternative": {"effect": 0.5, "scale": "raw"}},
            "the effect designed for is 0.5 (raw), and 1 (standardised) was promised",
        ),
        ({"estimate__margin": [-2, "1.50"]}, "the margin is -2 to 1.50, and -1.5 to 1.50 was promised"),
        ({"prior__probability": 0.9}, "the prior is 0.9, and 0.25 was promised"),
        ({"look__planned": 5}, "the number of looks is 5, and 3 was promised"),
    ],
)
def test_both_values_are_told(changes: Document, said: str) -> None:
    assert told(kept(**changes)) == said


def test_long_texts_are_told_in_part() -> None:
    said = told(kept(population="a very long\nname of a population " * 9))

    assert said.startswith("the population is a very long name of a population a very long name of a po")
    assert len(said) < 140


def test_data_that_had_been_seen_leave_no_confirmatory_claim() -> None:
    seen = planned(changed(PLAN, data="seen"))

    assert told(kept(), seen) == "the claim is confirmatory, and the data had been seen when the plan was made"
    assert found(kept(status="exploratory"), seen) == []


@pytest.mark.parametrize("families", [..., {}, {"yield": {"procedure": "holm"}}])
def test_a_family_that_the_plan_does_not_describe_is_compared_by_name(families: Any) -> None:
    plan = planned(changed(PLAN, families=families))

    assert found(kept(family__procedure="none"), plan) == []


def test_a_place_in_the_family_is_compared_where_the_plan_orders_the_hypothesis() -> None:
    plan = planned(changed(PLAN, families={"growth": {"procedure": "fixed-sequence"}}))

    assert found(kept(family__position=7, family__size=1), plan) == []


def test_one_planned_look_need_not_be_told() -> None:
    plan = planned(looks={"planned": 1})

    assert found(kept(look=...), plan) == []
    assert found(kept(look={"number": 1}), plan) == []
    assert found(kept(look={"number": 2}), plan) == ["looks"]


@pytest.mark.parametrize("n", [{"deferred": True}, {"deferred": True, "unit": "plot"}])
def test_a_deferred_number_of_units_that_was_never_filled_promises_none(n: Document) -> None:
    assert found(kept(sample__n=3), planned(n=n)) == []


def test_a_deferred_number_of_units_that_was_filled_is_promised() -> None:
    assert found(kept(sample__n=3), planned(n={"deferred": True, "planned": 40})) == ["n"]


def test_a_deferred_hypothesis_promises_what_it_was_filled_with() -> None:
    bare: Document = {name: ... for name in HYPOTHESIS if name not in {"id", "text", "role", "family"}}
    open_still = planned(**bare, deferred=True)
    filled = planned(**{**bare, "sides": 1}, deferred=True)

    assert not promises_something(open_still.hypotheses[0])
    assert found(kept(role="secondary"), open_still) == []
    assert promises_something(filled.hypotheses[0])
    assert found(kept(role="secondary"), filled) == ["sides", "role"]
    assert promises_something(planned(**{**bare, "direction": "increase"}, deferred=True).hypotheses[0])


def test_without_a_promise_nothing_differs() -> None:
    plan = planned()

    assert differences(kept(aim="estimation"), Promise(FILE, "H1", plan)) == ()
    assert differences(kept(aim="estimation"), Promise(FILE, "H1", None, plan.hypotheses[0])) == ()
    assert differences(kept(aim="estimation"), Promise(FILE, None)) == ()


@pytest.mark.parametrize(
    ("one", "other", "same"),
    [
        ("Student's t-test", "two sample t", True),
        ("independent-samples T test", "Student’s t", True),
        ("Welch Two Sample t-test", "unequal variances t-test", True),
        ("Welch t", "Student's t", False),
        ("t test", "Welch t", True),
        ("paired t", "two-sample t", False),
        ("χ² test", "Pearson's chi-square test", True),
        ("chi-squared test of a contingency table", "chi-square test", True),
        ("chi-squared test of independence", "chi-squared goodness-of-fit test", False),
        ("Wilcoxon rank-sum test", "Mann–Whitney U test", True),
        ("Wilcoxon signed-rank test", "Mann-Whitney", False),
        ("Wilcoxon", "Mann-Whitney", True),
        ("one-way analysis of variance", "ANOVA", True),
        ("ANCOVA", "ANOVA", False),
        ("OLS", "linear regression", True),
        ("log-rank test", "Mantel-Cox", True),
        ("a test of our own", "A test, of our own!", True),
        ("test", "tests", False),
    ],
)
def test_names_of_tests(one: str, other: str, same: bool) -> None:
    plan = planned(test=[one])

    assert found(kept(test__name=other), plan) == ([] if same else ["test"])
    assert found(kept(test__name=one), planned(test=other)) == ([] if same else ["test"])


@pytest.mark.parametrize(
    ("one", "other", "same"),
    [
        ("yield below 5 kg", "Yield below 5kg.", True),
        ("yield < 5", "yield > 5", False),
        ("change of -5", "change of 5", False),
        ("1.5 m", "15 m", False),
        ("4–6 weeks", "4-6 weeks", True),
        ("--", "—", False),
    ],
)
def test_texts_are_the_same_but_for_case_and_separators(one: str, other: str, same: bool) -> None:
    assert found(kept(population=other), planned(population=one)) == ([] if same else ["population"])


PRIMARY: tuple[Role, ...] = ("primary",)
SECOND = {"id": "H2", "text": "Drainage lowers litter mass.", "outcome": {"variable": "litter mass"}}
THIRD = {"id": "H3", "text": "Drainage changes pH.", "role": "secondary"}


def tree(*hypotheses: Document, path: str = FILE) -> PlanInTree:
    """A plan in the tree with these hypotheses."""
    return PlanInTree(path, 1, model(Plan, changed(PLAN, hypotheses=list(hypotheses))))


@pytest.mark.parametrize(("roles", "missing"), [(("primary",), ["H2"]), (("primary", "secondary"), ["H2", "H3"])])
def test_what_no_record_answers(roles: Any, missing: list[str]) -> None:
    (one,) = missing_hypotheses([kept()], [tree(HYPOTHESIS, SECOND, THIRD)], roles)

    assert [each.id for each in one.missing] == missing
    assert one.promised == len(missing) + 1


@pytest.mark.parametrize(
    "changes",
    [
        {"claim": ..., "status": "exploratory"},
        {"plan__hypothesis": ...},
        {"plan__file": "./plans//drainage.yaml"},
        {"outcome": ...},
        {"outcome__variable": "Earthworm biomass"},
        {"outcome__variable": "litter mass", "deviations": [deviation("outcome", "after-results")]},
    ],
)
def test_any_record_that_names_a_hypothesis_answers_it(changes: Document) -> None:
    (one,) = missing_hypotheses([kept(**changes)], [tree(HYPOTHESIS)], PRIMARY)

    assert one.missing == ()


@pytest.mark.parametrize(
    "changes",
    [
        {"plan": ...},
        {"plan__file": "plans/other.yaml"},
        {"plan__hypothesis": "H2"},
        {"outcome__variable": "litter mass"},
        {"outcome__variable": "litter mass", "deviations": [deviation("outcome.time_point")]},
    ],
)
def test_what_answers_another_hypothesis_or_measures_something_else_is_no_answer(changes: Document) -> None:
    (one,) = missing_hypotheses([kept(**changes)], [tree(HYPOTHESIS)], PRIMARY)

    assert [each.id for each in one.missing] == ["H1"]


def test_a_record_that_names_none_of_several_hypotheses_answers_none() -> None:
    (one,) = missing_hypotheses([kept(plan__hypothesis=...)], [tree(HYPOTHESIS, SECOND)], PRIMARY)

    assert [each.id for each in one.missing] == ["H1", "H2"]


def test_a_deferred_hypothesis_is_not_missed_and_plans_are_apart() -> None:
    deferred = {"id": "H4", "text": "Something later.", "deferred": True}
    plans = [tree(HYPOTHESIS, deferred), tree(HYPOTHESIS, path="plans/other.yaml"), tree()]

    first, second, third = missing_hypotheses([model(Record, KEPT)], plans, PRIMARY)

    assert (first.missing, first.promised) == ((), 1)
    assert [each.id for each in second.missing] == ["H1"]
    assert (third.missing, third.promised) == ((), 0)
