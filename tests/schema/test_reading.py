"""The reader of documents: every fault at once, each with its field, what is wrong and what to do."""

from __future__ import annotations

from typing import Any

import pytest
from support import drainage

from gatecheck.model.marks import Range
from gatecheck.policy import Match
from gatecheck.schema.read import field_name, read, shown
from gatecheck.schema.records import read_record
from gatecheck.schema.shapes import form_of

Faults = list[tuple[str, str, str]]


def faults_of(document: Any) -> Faults:
    """Every fault of a record, as field, message and advice."""
    record, faults = read_record(document)
    assert (record is None) == bool(faults)
    return [(fault.field, fault.message, fault.advice) for fault in faults]


def test_a_record_in_order_has_no_fault() -> None:
    record, faults = read_record(drainage())

    assert faults == ()
    assert record is not None
    assert record.test is not None
    assert record.test.p is not None
    assert (record.test.p.low, record.test.p.high) == (0.0335, 0.0345)
    assert record.sample is not None
    assert [group.n for group in record.sample.groups] == [18, 18]


def test_all_faults_are_told_at_once() -> None:
    document = drainage(id="two words", test__statistc="t", test__sides=3, sample__n="36", prior={"basis": "x"})

    assert faults_of(document) == [
        ("id", "is 'two words'", "give 1 to 200 characters without spaces"),
        (
            "test.statistc",
            "is no known key",
            "the nearest known one is statistic (known: alpha, df, name, named_statistic, p, p_kind, resamples, "
            "sides, statistic, tail, value)",
        ),
        ("test.sides", "is 3", "known: 1, 2"),
        ("sample.n", "is the text '36', where only a number is meant", "write 36 without quotes"),
        ("prior.probability", "is missing", "give it: between 0 and 1, both excluded"),
    ]


@pytest.mark.parametrize(
    ("changes", "fault"),
    [
        ({"claim": ""}, ("claim", "is ''", "give some text")),
        ({"claim": 3}, ("claim", "is 3, not a text", "put it in quotes")),
        (
            {"claim": "half \ud800 pair"},
            ("claim", "holds half of a surrogate pair", "write the text in valid Unicode"),
        ),
        ({"harm": "yes"}, ("harm", "is 'yes'", "write true or false, without quotes")),
        ({"harm": 1}, ("harm", "is 1", "write true or false, without quotes")),
        ({"status": True}, ("status", "is true", "known: confirmatory, descriptive, exploratory")),
        (
            {"status": "confirmatry"},
            (
                "status",
                "is 'confirmatry'",
                "the nearest known one is confirmatory (known: confirmatory, descriptive, exploratory)",
            ),
        ),
        ({"test": []}, ("test", "is a list, not an object", "write an object: The test behind a result.")),
        ({"tags": "a"}, ("tags", "is 'a', not a list", "write a list in square brackets")),
        ({"tags": ["a", {}]}, ("tags[1]", "is an object, not a text", "put it in quotes")),
        ({"test__df": []}, ("test.df", "has 0 members", "give 1 to 2")),
        ({"estimate__margin": [1]}, ("estimate.margin", "has 1 members", "give 2")),
        ({"test__p": 1.5}, ("test.p", "is 1.5, outside its range", "give a number from 0 to 1")),
        ({"test__p": "1.5"}, ("test.p", "is '1.5', outside its range", "give a number from 0 to 1")),
        (
            {"test__p": "n.s."},
            (
                "test.p",
                "is the text 'n.s.', which is no number",
                'write the number as it was printed, such as "2.21" or "<0.001"',
            ),
        ),
        ({"test__df": 0}, ("test.df[0]", "is 0, outside its range", "give a number above 0")),
        ({"test__alpha": 1}, ("test.alpha", "is 1, outside its range", "give a number from above 0 to below 1")),
        (
            {"test__alpha": "five"},
            ("test.alpha", "is the text 'five', where only a number is meant", "give a number"),
        ),
        ({"sample__n": 36.5}, ("sample.n", "is 36.5, not a whole number", "give a whole number")),
        ({"sample__n": 0}, ("sample.n", "is 0, outside its range", "give a number 1 or more")),
        (
            {"sample__n": True},
            ("sample.n", "is true, not a finite number", "give a number or leave it out"),
        ),
        (
            {"sample__n": 10**400},
            (
                "sample.n",
                "is a number of very many digits, not a finite number",
                "give a number or leave it out",
            ),
        ),
        (
            {"provenance": {"software": []}},
            ("provenance.software", "is a list, not an object", "write keys with their values"),
        ),
        (
            {"gatecheck": "record/9"},
            ("gatecheck", "is 'record/9'", "the nearest known one is record/1 (known: record/1)"),
        ),
    ],
)
def test_each_fault_says_what_to_do(changes: dict[str, Any], fault: tuple[str, str, str]) -> None:
    assert faults_of(drainage(**changes)) == [fault]


@pytest.mark.parametrize(
    ("changes", "fault"),
    [
        ({"test__sides": 1}, ("test.tail", "is missing where sides is 1", "say greater or less")),
        (
            {"test__tail": "less"},
            ("test.tail", "is given where sides is not 1", "leave it out, or set sides to 1"),
        ),
        (
            {"test__statistic": ...},
            (
                "test.statistic",
                "is missing beside `value`",
                "say t, z, chi2, F or r; another test's statistic goes into `named_statistic`",
            ),
        ),
        (
            {"test__statistic": "F"},
            ("test.df", "has 1 numbers for the statistic F", "give [numerator df, denominator df]"),
        ),
        (
            {"test__df": [2, 30]},
            ("test.df", "has 2 numbers for the statistic t", "give one number"),
        ),
        (
            {"test__statistic": "chi2", "test__value": -1},
            ("test.value", "is -1, below 0", "chi2 cannot be negative"),
        ),
        (
            {"test__statistic": "r", "test__value": 1},
            ("test.value", "is 1", "a correlation with a test lies between -1 and 1"),
        ),
        ({"test__value": "<2"}, ("test.value", "is the bound <2", "give the statistic itself")),
        (
            {"test__resamples": 999},
            ("test.resamples", "is given where p_kind is not permutation", "set p_kind: permutation"),
        ),
        (
            {"estimate__interval": {"level": 0.95}},
            ("estimate.interval", "has neither limit", "give low, high or both"),
        ),
        (
            {"estimate__interval__low": 9},
            ("estimate.interval", "runs from 9 to 8.06", "give the lower limit as low"),
        ),
        (
            {"estimate__margin": [1, -1]},
            ("estimate.margin", "is not [low, high] with low below high", "order its two numbers"),
        ),
        (
            {"estimate__scale": "log", "estimate__value": -4.2, "estimate__null": 1},
            (
                "estimate.value",
                "is -4.2 on a log scale",
                "a ratio is above 0; give it as a ratio, not its log",
            ),
        ),
    ],
)
def test_fields_that_contradict_each_other(changes: dict[str, Any], fault: tuple[str, str, str]) -> None:
    assert faults_of(drainage(**changes)) == [fault]


def test_many_unknown_keys_are_told_without_the_nearest_word_to_each() -> None:
    faults = faults_of(drainage(**{f"claim{number}": 1 for number in range(30)}))

    assert [advice.startswith("the nearest known one is claim (known: aim,") for _, _, advice in faults] == (
        [True] * 20 + [False] * 10
    )
    assert faults[-1][2].startswith("known: aim, aliases, alternative, claim,")


def test_a_bare_record_and_open_intervals_are_in_order() -> None:
    assert faults_of({"gatecheck": "record/1", "id": "a"}) == []
    assert faults_of(drainage(estimate__interval={"level": 0.9, "high": 8})) == []
    assert faults_of(drainage(test__df="34.0", estimate=..., look={"number": 1})) == []
    assert faults_of(drainage(test__df=None, estimate__standard_error="0.0", sample__n=36.0)) == []


@pytest.mark.parametrize(
    ("value", "picture"),
    [
        (None, "null"),
        (False, "false"),
        (True, "true"),
        ({}, "an object"),
        ([], "a list"),
        (10**50, "a number of very many digits"),
        ("tab\tbell\x07é", r"'tab\tbell\x07\xe9'"),
        ("x" * 50, "'" + "x" * 39 + "…"),
    ],
)
def test_a_value_from_outside_is_shown_short_and_harmless(value: object, picture: str) -> None:
    assert shown(value) == picture


def test_a_field_is_named_as_a_person_writes_it() -> None:
    assert field_name(("sample", "groups", 0, "n")) == "sample.groups[0].n"


def test_a_range_says_what_it_admits() -> None:
    assert [str(Range(0)), str(Range(0, low_open=True)), str(Range(0, 1, high_open=True))] == [
        "0 or more",
        "above 0",
        "from 0 to below 1",
    ]


def test_a_model_with_a_type_that_no_format_uses_is_refused() -> None:
    class Odd:
        """A model with a field of a type that documents cannot hold."""

    import dataclasses  # noqa: PLC0415  # for this test alone

    model = dataclasses.make_dataclass("Holder", [("field", Odd)])

    with pytest.raises(TypeError, match=r"no format uses the type .*Odd"):
        form_of(model)
    assert read(dataclasses.make_dataclass("Open", [("rules", dict[str, Any])]), {"rules": 3})[1][0].message == (
        "is 3, not an object"
    )


def test_a_list_without_an_upper_end_says_how_many_it_needs() -> None:
    _, faults = read(Match, {"id": []})

    assert [(fault.field, fault.message, fault.advice) for fault in faults] == [
        ("id", "has 0 members", "give 1 or more")
    ]
