"""Rule `registered`: what stands against a confirmatory claim, what is undecided, and what is only told."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st
from promising import FROZEN_AT, HYPOTHESIS, deviation, kept, planned, promise, table
from support import Document

from gatecheck.compare.promises import differences
from gatecheck.model.promise import GRADES, Grade, Promise
from gatecheck.model.record import Record
from gatecheck.model.verdict import Finding
from gatecheck.rules.engine import judge_all
from gatecheck.rules.registered import RULE, Settings

H1 = f"H1 of plans/drainage.yaml as frozen at {FROZEN_AT[:12]}"
REMEDY = (
    "Restore what was promised, or disclose each departure under deviations with its reason and time (one decided "
    "after the results makes the claim exploratory)."
)
ASK_LATER = "set status: exploratory, and register the next study before its data."
#: Changes of the record that differ from its plan in one field each.
CHANGES: tuple[tuple[str, Document], ...] = (
    ("sides", {"test__sides": 1}),
    ("population", {"population": "drained plots"}),
    ("outcome", {"outcome__time_point": "7 days"}),
    ("n", {"sample__n": 20}),
    ("covariates", {"covariates": []}),
    ("looks", {"look": ...}),
)


def findings(record: Record, promised: Promise | None, settings: Settings | None = None) -> tuple[Finding, ...]:
    """What the rule says of one record, in full."""
    judged = table([record], [promised], RULE.name, settings or Settings())
    return judge_all([RULE], judged, explain=frozenset({0}))[0]


def finding(record: Record, promised: Promise | None, settings: Settings | None = None) -> Finding:
    """The one thing that the rule says of a record."""
    (one,) = findings(record, promised, settings)
    return one


def told(record: Record) -> str:
    """How the only difference of a record from its promise is told."""
    (one,) = differences(record, promise())
    return one.told


def sentences(one: Finding) -> int:
    """How many sentences the finding has."""
    return sum(text.count(". ") + text.endswith(".") for text in (one.message, one.remedy))


def test_a_claim_that_keeps_its_promise() -> None:
    one = finding(kept(), promise())

    assert (one.outcome, one.remedy) == ("met", "")
    assert one.message == (
        f"The claim keeps to {H1}; that the plan came first is repository-order (its commit comes before the data)."
    )


@pytest.mark.parametrize("changes", [{"status": "exploratory"}, {"status": "descriptive"}, {"claim": ...}])
def test_what_is_not_claimed_as_planned_is_none_of_its_business(changes: Document) -> None:
    assert findings(kept(**changes, plan=...), None) == ()


def test_a_confirmatory_claim_names_its_plan() -> None:
    one = finding(kept(plan=...), None)

    assert one.outcome == "short"
    assert one.message == (
        "The claim is confirmatory and names no plan, and the policy wants such claims registered before the data."
    )
    assert one.remedy == "Name the plan and its hypothesis under plan, or set status: exploratory."


@pytest.mark.parametrize(
    ("promised", "why"),
    [
        (Promise("plans/a.yaml", "H1", missing="there is no file plans/a.yaml."), "there is no file plans/a.yaml"),
        (Promise("plans/a.yaml", "H9", planned(), grade="signed"), "plans/a.yaml does not hold H9"),
        (Promise("plans/a.yaml", None, planned(), grade="signed"), "plans/a.yaml does not hold it"),
    ],
)
def test_a_hypothesis_that_is_not_there(promised: Promise, why: str) -> None:
    one = finding(kept(), promised)

    assert one.outcome == "short"
    assert one.message == f"The hypothesis that the claim is to answer is not there: {why}."
    assert one.remedy == "Name a hypothesis that the plan holds, or set status: exploratory."


def test_a_deferred_hypothesis_that_was_never_filled_promised_nothing() -> None:
    bare: Document = {name: ... for name in HYPOTHESIS if name not in {"id", "text", "role", "family"}}

    one = finding(kept(), promise(planned(**bare, deferred=True)))

    assert one.outcome == "short"
    assert one.message == f"{H1} was deferred and never filled, so that nothing was promised."
    assert one.remedy == f"S{ASK_LATER[1:]}"


@pytest.mark.parametrize("least", GRADES)
@pytest.mark.parametrize("grade", GRADES)
def test_evidence_that_the_plan_came_first_is_good_enough(grade: Grade, least: Grade) -> None:
    one = finding(kept(), promise(grade=grade), Settings(grade=least))

    short = GRADES.index(grade) < GRADES.index(least)
    assert one.outcome == ("short" if short else "met")
    if short:
        assert one.message == (
            f"The evidence that plans/drainage.yaml came before the data is {grade} (its commit comes before the "
            f"data), and the policy wants {least} or better."
        )
        assert one.remedy == f"S{ASK_LATER[1:]}"


def test_what_would_raise_the_grade_is_told() -> None:
    one = finding(kept(), promise(grade="none", because="", advice="commit the plan first."))

    assert one.message.startswith("The evidence that plans/drainage.yaml came before the data is none, and")
    assert one.remedy == "Commit the plan first."


def test_a_grade_that_is_not_known_is_undecided() -> None:
    unknown = promise(grade=None, because="the history is cut.", advice="fetch all of it")

    one = finding(kept(), unknown)

    assert one.outcome == "undecided"
    assert one.message == "Whether plans/drainage.yaml came before the data cannot be told: the history is cut."
    assert one.remedy == "Fetch all of it."


@pytest.mark.parametrize("least", GRADES)
def test_a_grade_that_is_not_known_does_where_what_is_known_is_enough(least: Grade) -> None:
    unknown = promise(grade=None, because="no signers are given.", at_least="repository-order")

    one = finding(kept(), unknown, Settings(grade=least))

    enough = GRADES.index("repository-order") >= GRADES.index(least)
    assert one.outcome == ("met" if enough else "undecided")
    assert (
        "that the plan came first is repository-order or better (no signers are given)." in one.message
    ) is enough


def test_a_difference_is_short_although_the_grade_is_not_known() -> None:
    one = finding(kept(population="drained plots"), promise(grade=None, because="the history is cut"))

    assert one.outcome == "short"
    assert "the population is drained plots" in one.message
    assert "history" not in one.message


@pytest.mark.parametrize("promised", [None, Promise("plans/drainage.yaml", "H1")])
def test_a_plan_that_was_not_looked_at_is_undecided(promised: Promise | None) -> None:
    one = finding(kept(), promised)

    why = "its history is not known" if promised else "the plan was not looked at"
    assert one.outcome == "undecided"
    assert one.message == f"Whether plans/drainage.yaml came before the data cannot be told: {why}."
    assert one.remedy == "Judge a clone that holds the whole history."


def test_a_table_without_promises_leaves_all_undecided() -> None:
    judged = judge_all([RULE], table([kept(), kept(id="b", plan=...)], (), RULE.name, Settings()))

    assert [one.outcome for row in judged for one in row] == ["undecided", "short"]


def test_undeclared_differences_are_told_with_the_frozen_version() -> None:
    record = kept(outcome__time_point="7 days", test__sides=1, sample__n=20, population=..., role="secondary")

    one = finding(record, promise(changed_later=True))

    assert one.outcome == "short"
    assert one.message == (
        f"The claim differs from {H1}, which was changed later, without a deviation that says so: the time point "
        "of the outcome is 7 days, and 90 days was promised; one side of the test is taken, and both sides were "
        "promised (two-sided p = 0.0339); the number of units is 20 analysed and 4 left out, and 40 was promised; "
        "the population is not told, and all plots as assigned was promised; the role of the outcome is secondary, "
        "and primary was promised."
    )
    assert one.remedy == REMEDY
    assert sentences(one) == 2


def test_a_plan_that_was_never_committed_is_named_without_a_commit() -> None:
    one = finding(kept(population="x"), promise(frozen_at=None, grade="self-declared"))

    assert one.message.startswith("The claim differs from H1 of plans/drainage.yaml, without a deviation")
    assert "; the evidence that plans/drainage.yaml came before the data is self-declared" in one.message
    assert one.remedy == f"{REMEDY.removesuffix('.')}; {ASK_LATER}"


@given(change=st.sampled_from(CHANGES), known=st.sampled_from(["before-data", "before-results"]))
def test_disclosing_a_difference_in_time_removes_the_shortfall(change: tuple[str, Document], known: str) -> None:
    field, changes = change

    undeclared = finding(kept(**changes), promise())
    disclosed = finding(kept(**changes, deviations=[deviation(field, known)]), promise())

    assert (undeclared.outcome, disclosed.outcome) == ("short", "met")
    assert disclosed.message == (
        f"The claim keeps to {H1}; that the plan came first is repository-order (its commit comes before the "
        f"data). It discloses: {told(kept(**changes))} (decided {known}: a flood)."
    )


@given(change=st.sampled_from(CHANGES))
def test_a_departure_after_the_results_makes_a_claim_exploratory(change: tuple[str, Document]) -> None:
    field, changes = change
    late = kept(**changes, deviations=[deviation(field, "after-results")])

    one = finding(late, promise())
    left = finding(late, promise(), Settings(after_results="keep"))

    assert one.outcome == "short"
    assert one.message == (
        f"The departure in {field} was decided after the results, and the policy calls such a claim exploratory."
    )
    assert one.remedy == "Set status: exploratory, or confirm the claim in a study of its own."
    assert left.outcome == "met"
    assert left.message.endswith(f"It discloses: {told(kept(**changes))} (decided after-results: a flood).")


def test_a_late_departure_in_what_is_not_compared_counts_too() -> None:
    fields = ["transformation", "transformation", "missing data"]
    record = kept(deviations=[deviation(each, "after-results") for each in fields])

    assert finding(record, promise()).message.startswith("The departure in transformation, missing data was")


def test_where_late_departures_are_kept_the_remedy_names_no_cost() -> None:
    one = finding(kept(population="x"), promise(), Settings(after_results="keep"))

    assert one.remedy == (
        "Restore what was promised, or disclose each departure under deviations with its reason and time."
    )


def test_a_deviation_where_nothing_differs_is_told() -> None:
    record = kept(deviations=[deviation("alpha"), deviation("missing data", "before-results")])

    one = finding(record, promise())

    assert one.outcome == "met"
    assert one.message.endswith(
        ". It discloses: missing data (decided before-results: a flood). In alpha a deviation is disclosed and "
        "nothing differs."
    )
    assert sentences(one) == 3


def noted(record: Record, promised: Promise | None, settings: Settings | None = None) -> Finding:
    """What the rule says of a record where nobody asked for an explanation."""
    ((one,),) = judge_all([RULE], table([record], [promised], RULE.name, settings or Settings()))
    return one


@pytest.mark.parametrize("known", ["before-data", "before-results"])
def test_what_a_claim_discloses_is_noted_without_being_asked_for(known: str) -> None:
    record = kept(population="drained plots", deviations=[deviation("population", known)])

    one = noted(record, promise())

    assert (one.outcome, one.remedy) == ("met", "")
    assert one.message == finding(record, promise()).message
    assert one.message.endswith(
        "It discloses: the population is drained plots, and all plots as assigned was promised (decided "
        f"{known}: a flood)."
    )


def test_a_claim_that_discloses_nothing_is_not_noted() -> None:
    assert (noted(kept(), promise()).outcome, noted(kept(), promise()).message) == ("met", "")


def test_a_departure_in_what_is_not_compared_is_noted_by_its_field() -> None:
    one = noted(kept(deviations=[deviation("missing data", "before-results")]), promise())

    assert one.message.endswith("It discloses: missing data (decided before-results: a flood).")


def test_one_deviation_in_two_fields_is_told_once_with_both() -> None:
    record = kept(outcome__metric="x", outcome__time_point="7 days", deviations=[deviation("outcome")])

    assert noted(record, promise()).message.endswith(
        "It discloses: the metric of the outcome is x, and change from baseline was promised; the time point of "
        "the outcome is 7 days, and 90 days was promised (decided before-data: a flood)."
    )


def test_what_is_disclosed_in_time_is_told_beside_what_is_not() -> None:
    changes: Document = {"population": "x", "deviations": [deviation("population")]}

    short = noted(kept(**changes, test__sides=1), promise())
    unknown = noted(kept(**changes), promise(grade=None))

    disclosed = (
        " The claim discloses: the population is x, and all plots as assigned was promised (decided before-data: "
        "a flood)."
    )
    assert (short.outcome, unknown.outcome) == ("short", "undecided")
    assert short.message.endswith(f"both sides were promised (two-sided p = 0.0339).{disclosed}")
    assert unknown.message.endswith(f"its commit comes before the data.{disclosed}")
    assert sentences(short) == 3


def test_a_deviation_that_states_other_values_excuses_nothing() -> None:
    reverse = {**deviation("sides"), "planned": "1", "done": "2"}

    one = noted(kept(test__sides=1, deviations=[reverse]), promise())

    assert one.outcome == "short"
    assert one.message == (
        f"The claim differs from {H1}, without a deviation that says so: one side of the test is taken, and both "
        "sides were promised (two-sided p = 0.0339), while its deviation says that 1 was planned and 2 was done."
    )


def test_every_difference_is_told() -> None:
    record = kept(
        outcome=...,
        test__name="sign test",
        test__alpha=...,
        population=...,
        covariates=[],
        role="secondary",
        look=...,
    )

    one = noted(record, promise())

    assert one.message.count(" was promised") == len(differences(record, promise())) == 7


def test_a_possible_harm_is_reported_without_a_registration() -> None:
    for promised, changes in ((None, {"plan": ...}), (promise(), {"population": "x"})):
        one = finding(kept(harm=True, **changes), promised)

        assert one.outcome == "does-not-apply"
        assert one.message == "A safety outcome: nobody needs a registration to report a possible harm."
