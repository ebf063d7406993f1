"""What `declare` makes of plain numbers, of values laid over a result, and of what is missing or wrong."""

from __future__ import annotations

import math
import statistics
from datetime import UTC, datetime
from decimal import Decimal
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from gatecheck.declaring import DeclareError, declare
from gatecheck.declaring.values import in_contract_order, merged, plain
from gatecheck.model.record import Record
from gatecheck.schema.records import read_record
from gatecheck.schema.shapes import form_of

NUMBERS: dict[str, Any] = {
    "test": {"name": "two-sample t", "p": "0.034", "statistic": "t", "df": 34, "value": 2.21, "sides": 2},
    "estimate": {"value": 4.2, "measure": "mean difference", "unit": "g/m2", "standard_error": 1.9},
    "sample": {"n": 36, "unit": "plot"},
}
DRAINED, UNDRAINED = [21.1, 18.4, 25.0, 22.2, 19.3], [16.9, 17.7, 14.2, 18.8, 15.0]


def declared(result: object = None, **fields: Any) -> dict[str, Any]:
    return declare(result, **{"id": "drainage/worms", "folder": None, **fields}).document


def refused(result: object = None, **fields: Any) -> str:
    with pytest.raises(DeclareError) as caught:
        declared(result, **fields)
    return str(caught.value)


def test_plain_numbers_in_the_order_of_the_contract() -> None:
    document = declared(
        **NUMBERS,
        claim="Drained plots hold more earthworms.",
        deviations=(),
        tags=("soil",),
        role="primary",
        prior={"basis": "4 of 16 held up", "probability": 0.25},
    )
    assert list(document) == [
        "gatecheck", "id", "claim", "status", "role", "tags", "test", "estimate", "sample", "prior", "deviations",
        "provenance",
    ]  # fmt: skip
    assert list(document["test"]) == ["name", "statistic", "value", "df", "p", "sides"]
    assert list(document["estimate"]) == ["measure", "value", "unit", "standard_error"]
    assert document["status"] == "exploratory"
    assert document["tags"] == ["soil"]
    record, faults = read_record(document)
    assert faults == ()
    assert record is not None
    assert record.test is not None
    assert record.test.p is not None
    assert record.test.p.text == "0.034"


def test_every_field_of_the_contract_is_passed_on() -> None:
    fields: dict[str, Any] = {
        "status": "confirmatory",
        "aim": "superiority",
        "harm": True,
        "aliases": ["worms"],
        "alternative": {"effect": 1.0, "scale": "standardised"},
        "family": {"name": "growth", "size": 6, "procedure": "holm"},
        "look": {"number": 1, "planned": 1},
        "plan": {"file": "plans/drainage.yaml", "hypothesis": "H1"},
        "deviations": [{"field": "n", "planned": "40", "done": "36", "reason": "flood", "known": "before-results"}],
    }
    document = declared(**NUMBERS, **fields)
    assert {name: document[name] for name in fields} == fields


def test_a_claim_needs_more_than_a_report() -> None:
    assert declared()["status"] == "exploratory"
    assert refused(claim="It differs.") == (
        "the record 'drainage/worms' was not written:\n"
        "  test is needed by a claim: give a result, or "
        "test={'statistic': 't', 'value': ..., 'df': ..., 'p': ...}\n"
        "  sample.unit is needed by a claim: say what was counted, sample={'unit': 'plot'}\n"
        "  sample.n is needed by a claim: the result does not tell it: give sample={'n': ...} or "
        "sample={'groups': {'drained': values}}"
    )


def test_a_claim_needs_p_and_an_estimate() -> None:
    test = {"statistic": "t", "value": 2.21, "df": 34}
    assert refused(claim="It differs.", test=test, sample=NUMBERS["sample"]) == (
        "the record 'drainage/worms' was not written:\n"
        "  test.p is needed by a claim: give test={'p': ...}\n"
        "  estimate is needed by a claim: give "
        "estimate={'measure': 'mean difference', 'value': ..., 'unit': 'cm', 'interval': {...}}"
    )


@pytest.mark.parametrize(
    "test",
    [
        {"statistic": "chi2", "value": 5.4, "df": 1, "p": 0.02},
        {"statistic": "F", "value": 5.4, "df": [1, 30], "p": 0.027},
        {"named_statistic": {"symbol": "U", "value": 35}, "p": 0.02},
        {"name": "Fisher's exact test", "p": 0.02, "p_kind": "exact"},
    ],
)
def test_omnibus_rank_and_exact_tests_may_stand_without_estimate(test: dict[str, Any]) -> None:
    assert "estimate" not in declared(claim="It differs.", test=test, sample=NUMBERS["sample"])


def test_p_of_0_is_refused() -> None:
    assert refused(test={"named_statistic": {"symbol": "U", "value": 35}, "p": 0}) == (
        "the record 'drainage/worms' was not written:\n"
        "  test.p is 0, which no test gives: give the bound that was printed, such as test={'p': '<0.001'}"
    )


def test_all_faults_of_the_contract_at_once() -> None:
    message = refused(
        status="confirmed",
        test={"p": math.nan, "statistc": "t"},
        estimate={"measure": "mean", "value": Decimal(3)},
        sample=3,
        alternative={"effect": {1}, "scale": "raw"},
    )
    header, *lines = message.splitlines()
    assert header == "the record 'drainage/worms' was not written:"
    begins = (
        "  status is 'confirmed': ",
        "  test.statistc is no known key: the nearest known one is statistic ",
        "  test.p is nan, not a finite number: ",
        "  estimate.value is 3, not a finite number: ",
        "  sample is 3, not an object: ",
        "  alternative.effect is {1}, not a finite number: ",
    )
    assert len(lines) == len(begins)
    for line, begin in zip(lines, begins, strict=True):
        assert line.startswith(begin)


@pytest.mark.parametrize("field", ["test", "estimate", "prior"])
def test_objects_of_another_kind_are_refused(field: str) -> None:
    assert f"\n  {field} is 'strong', not an object: " in refused(**{field: "strong"})


def test_text_in_place_of_a_list_is_refused() -> None:
    """Taken for a list it would become its letters."""
    assert "\n  tags is 'soil', not a list: " in refused(tags="soil")
    assert "\n  tags is 3, not a list: " in refused(tags=3)
    assert "\n  deviations is an object, not a list: " in refused(deviations={"field": "n"})
    assert "tags" not in declared(tags=None)
    assert declared(tags=(word for word in ("soil", "field")))["tags"] == ["soil", "field"]


def test_unknown_argument_names_the_nearest() -> None:
    message = refused(stats="exploratory")
    assert message.startswith("declare takes no stats: the nearest known one is status (known: aim, aliases, ")


def test_id_is_asked_for() -> None:
    with pytest.raises(DeclareError) as caught:
        declare(folder=None)  # type: ignore[call-arg]  # the very fault under test
    assert str(caught.value).startswith("the record None was not written:\n  id is missing: give it: stable name ")


@pytest.mark.parametrize(("result", "kind"), [(3, "int"), ("t = 2", "str"), (object(), "object"), ([1, 2], "list")])
def test_unknown_result_names_its_type(result: object, kind: str) -> None:
    assert refused(result) == (
        f"declare does not know results of the type {kind}: give plain numbers, "
        "test={'statistic': 't', 'value': ..., 'df': ..., 'p': ...} and "
        "estimate={'measure': ..., 'value': ..., 'unit': ...}"
    )


def test_what_is_given_lies_over_the_result() -> None:
    document = declared(
        stats.ttest_ind(DRAINED, UNDRAINED),
        test={"name": "two-sample t", "p": "<0.05", "sides": 2},
        estimate={"unit": "g/m2", "standard_error": None, "interval": {"level": np.float64(0.9)}},
    )
    known = stats.ttest_ind(DRAINED, UNDRAINED).confidence_interval(0.95)
    assert document["test"]["name"] == "two-sample t"
    assert document["test"]["p"] == "<0.05"
    assert "standard_error" not in document["estimate"]
    assert document["estimate"]["interval"] == {"level": 0.9, "low": known.low, "high": known.high}
    assert document["estimate"]["value"] == pytest.approx(4.68)


def test_rounded_p_of_a_claim_needs_its_sides() -> None:
    """Only the exact p tells the side."""
    message = refused(
        stats.ttest_ind(DRAINED, UNDRAINED),
        claim="It differs.",
        test={"p": "<0.05"},
        sample={"unit": "plot", "n": 10},
    )
    assert message.splitlines()[1].startswith("  test.sides is needed by a claim")


@pytest.mark.parametrize("kind", [list, tuple, np.array, pd.Series])
def test_groups_from_raw_values(kind: Any) -> None:
    groups = {"drained": kind(DRAINED), "undrained": kind(UNDRAINED)}
    sample = declared(sample={"unit": "plot", "groups": groups})["sample"]
    assert sample["n"] == 10
    assert [group["name"] for group in sample["groups"]] == ["drained", "undrained"]
    assert [group["n"] for group in sample["groups"]] == [5, 5]
    assert sample["groups"][0]["mean"] == pytest.approx(21.2)
    assert sample["groups"][0]["sd"] == pytest.approx(math.sqrt(26.9 / 4), rel=1e-12)


@settings(deadline=None)  # each example asks git
@given(st.lists(st.floats(-1e6, 1e6), min_size=2, max_size=30))
def test_moments_of_groups(values: list[float]) -> None:
    """Against the exact fractions of the standard library."""
    (group,) = declared(sample={"groups": {"all": values}})["sample"]["groups"]
    assert group["mean"] == pytest.approx(statistics.mean(values), rel=1e-12, abs=1e-9)
    assert group["sd"] == pytest.approx(statistics.stdev(values), rel=1e-9, abs=1e-7)


def test_group_of_one_has_no_spread() -> None:
    (group,) = declared(sample={"groups": {"lone": [3]}})["sample"]["groups"]
    assert group == {"name": "lone", "n": 1, "mean": 3}


def test_groups_by_their_summaries() -> None:
    groups = {"drained": {"n": 18, "mean": 21.1, "sd": 5.9}, "undrained": {"n": 18, "mean": 16.9, "sd": 5.5}}
    sample = declared(sample={"groups": groups})["sample"]
    assert sample["groups"][1] == {"name": "undrained", "n": 18, "mean": 16.9, "sd": 5.5}
    assert sample["n"] == 36


def test_groups_as_the_contract_lists_them() -> None:
    groups = [{"name": "drained", "n": 18}, {"name": "undrained", "n": 17}]
    assert declared(sample={"groups": groups})["sample"] == {"n": 35, "groups": groups}
    assert declared(sample={"n": 30, "groups": groups})["sample"]["n"] == 30


def test_groups_of_unknown_size_tell_no_n() -> None:
    message = refused(sample={"groups": [{"name": "drained", "n": 18}, {"name": "undrained"}]})
    (line,) = message.splitlines()[1:]
    assert line.startswith("  sample.groups[1].n is missing: ")
    assert "sample.groups[0] is 3, not an object" in refused(sample={"groups": [3]})


@pytest.mark.parametrize("values", [[], [1.0, math.nan], [1, "2"], [True, False], 3, "values", [[1, 2]]])
def test_values_that_are_no_numbers_are_refused(values: object) -> None:
    assert refused(sample={"groups": {"drained": values}}) == (
        "sample.groups['drained'] is no list of finite numbers: give the values analysed, "
        "or {'n': ..., 'mean': ..., 'sd': ...}"
    )


def test_time_is_recorded_only_when_asked_for() -> None:
    assert "made_at" not in declared()["provenance"]
    before = datetime.now(UTC).replace(microsecond=0)
    made = datetime.fromisoformat(declared(made_at=True)["provenance"]["made_at"])
    assert before <= made <= datetime.now(UTC)
    fixed = datetime.fromisoformat("2031-04-02T11:14:00+02:00")
    assert declared(made_at=fixed)["provenance"]["made_at"] == "2031-04-02T09:14:00Z"
    message = "made_at has no time zone: give one, such as datetime.now(UTC)"
    assert refused(made_at=fixed.replace(tzinfo=None)) == message
    assert refused(made_at="2031-04-02") == "made_at is '2031-04-02': give True for now, or a datetime"


def test_plain_values() -> None:
    value = {"a": np.float64(0.1), "b": np.arange(2), "c": (None, Path("x") / "y"), "d": None, "e": np.bool_(1)}
    assert plain(value) == {"a": 0.1, "b": [0, 1], "c": [None, "x/y"], "e": True}
    assert type(plain(value)["a"]) is float


def test_laid_over() -> None:
    assert merged({"a": {"b": 1, "c": 2}, "d": 3}, {"a": {"c": 4}, "d": None}) == {"a": {"b": 1, "c": 4}, "d": None}
    assert merged({"a": {"b": 1}}, {"a": None, "e": {"f": 1}}) == {"a": None, "e": {"f": 1}}
    assert merged({"a": {"b": 1}}, {"a": 5}) == {"a": 5}
    assert merged({"a": 1}, None) == {"a": 1}
    assert merged({"a": 1}, "all") == "all"


def test_order_is_that_of_the_contract_at_every_depth() -> None:
    mixed = {"zebra": 1, "sample": {"groups": [{"n": 3, "name": "a"}, 7]}, "id": "x", "deviations": 5}
    ordered = in_contract_order(mixed, form_of(Record))
    assert list(ordered) == ["id", "sample", "deviations", "zebra"]
    assert list(ordered["sample"]["groups"][0]) == ["name", "n"]
    assert ordered == mixed
