"""Records of the tree against those of a run."""

from __future__ import annotations

import copy
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st
from support import DRAINAGE, Document, changed

from gatecheck.model.found import Found
from gatecheck.model.numbers import parse_reported
from gatecheck.model.rerun import Compared
from gatecheck.model.verdict import Place
from gatecheck.rerunning.comparing import _reported_alike, compared
from gatecheck.schema.records import read_record

TOLERANCE = 1e-9
ID = "drainage/earthworm-biomass"


def drainage(**changes: Any) -> Document:
    """The drainage record with these values alone changed."""
    return changed(DRAINAGE, **changes)


def found(document: Document) -> Found:
    record, faults = read_record(copy.deepcopy(document))
    assert faults == ()
    assert record is not None
    return Found(record, Place("r.json"), document)


def against(before: list[Document], after: list[Document], tolerance: float = TOLERANCE) -> Compared:
    return compared([found(one) for one in before], [found(one) for one in after], tolerance)


def differences(before: Document, after: Document, tolerance: float = TOLERANCE) -> list[tuple[Any, ...]]:
    """The fields that differ between two records of one id."""
    return [
        (each.field, each.in_tree, each.from_run)
        for record in against([before], [after], tolerance).changed
        for each in record.fields
    ]


def test_each_record_is_in_one_list() -> None:
    result = against(
        [drainage(id=name) for name in ("e", "c", "d", "gone", "another")],
        [
            drainage(id="e"),
            drainage(id="c", test__value=2.21 * (1 + 1e-10)),
            drainage(id="d", test__value=2.4),
            drainage(id="new"),
        ],
    )

    assert (result.equal, result.close) == (("e",), ("c",))
    assert [(one.id, [each.field for each in one.fields]) for one in result.changed] == [("d", ["test.value"])]
    assert (result.not_emitted, result.new) == (("another", "gone"), ("new",))
    assert (result.records, result.same) == (6, False)


def test_what_tells_of_the_run_alone_is_not_compared() -> None:
    before = drainage(
        provenance={"code": "a.py", "commit": "1" * 40, "made_at": "2031-05-01", "software": {"python": "3.11"}}
    )
    after = changed(
        before,
        provenance__commit=...,
        provenance__made_at="2031-06-01",
        provenance__software={"python": "3.12", "numpy": "2"},
    )

    assert against([before], [after]).equal == (ID,)


def test_other_inputs_and_other_code_are_shown() -> None:
    before = drainage(provenance={"code": "a.py", "inputs": [{"path": "d.csv", "sha256": "0" * 64}]})
    after = drainage(provenance={"code": "b.py", "inputs": [{"path": "d.csv", "sha256": "1" * 64}]})

    assert differences(before, after) == [
        ("provenance.code", "a.py", "b.py"),
        ("provenance.inputs[0].sha256", "0" * 64, "1" * 64),
    ]


def test_how_a_document_is_written_makes_no_difference() -> None:
    """Order, null for absent, a default that is written out, one number for a list of one."""
    after = dict(reversed(drainage(test__df=[34], prior=None, importance=False).items()))

    assert against([drainage()], [after]).equal == (ID,)


@pytest.mark.parametrize(
    ("change", "told"),
    [
        ({"test__p": "0.041"}, ("test.p", "0.034", "0.041")),
        ({"test__p": ...}, ("test.p", "0.034", None)),
        ({"claim": "It helps."}, ("claim", "Drainage increases earthworm biomass.", "It helps.")),
        ({"harm": True}, ("harm", "false", "true")),
        ({"sample__n": 37}, ("sample.n", "36", "37")),
        ({"test__alpha": 0.01}, ("test.alpha", "0.05", "0.01")),
        ({"population": "all plots"}, ("population", None, "all plots")),
        ({"test__sides": 1, "test__tail": "greater"}, ("test.sides", "2", "1")),
    ],
)
def test_a_field_that_differs_is_shown_with_both_values(change: Document, told: tuple[Any, ...]) -> None:
    assert told in differences(drainage(), drainage(**change))


def test_weights_of_a_graph_are_compared_by_their_names() -> None:
    before = drainage(family={"name": "f", "procedure": "graphical", "weight": 0.5, "passes_on": {"b": 0.5}})
    after = changed(before, family__passes_on={"b": 0.25, "c": 0.25})

    assert differences(before, after) == [
        ("family.passes_on.b", "0.5", "0.25"),
        ("family.passes_on.c", None, "0.25"),
    ]


def test_the_tolerance_holds_for_every_number_and_no_count() -> None:
    after = drainage(
        test__value=2.21 * 1.0005,
        test__alpha=0.05 * 1.0005,
        sample__n=37,
        estimate__interval__level=0.95 * 1.0005,
    )

    assert differences(drainage(), after, 1e-3) == [("sample.n", "36", "37")]
    assert [each[0] for each in differences(drainage(), after, 1e-4)] == [
        "test.value",
        "test.alpha",
        "estimate.interval.level",
        "sample.n",
    ]


def test_values_that_are_written_alike_are_told_apart() -> None:
    """Fifteen digits would show the same number twice."""
    assert differences(drainage(test__value=1.0), drainage(test__value=1.0000000000000002), 0.0) == [
        ("test.value", "1.0", "1.0000000000000002")
    ]


@pytest.mark.parametrize(
    ("before", "after", "likeness"),
    [
        ("0.034", "0.034", "equal"),
        ("0.034", " 0.034", "equal"),
        (0.034, 0.034, "equal"),
        ("0.034", "0.0341", "close"),  # 0.03405 to 0.03415 lies within 0.0335 to 0.0345
        ("0.034", "0.0346", "different"),
        ("0.034", "0.035", "different"),  # they meet at 0.0345, and no number is rounded to both
        ("0.034", "0.0340", "close"),
        ("0.034", 0.0338, "close"),
        (0.0345, "0.034", "close"),  # an exact half is rounded to either side
        ("0.034", 0.0346, "different"),
        ("<0.001", "<0.001", "equal"),
        ("<0.001", "<0.01", "different"),
        ("<0.001", 0.0004, "close"),
        ("<0.001", 0.001, "different"),
        (0.2, ">0.05", "close"),
        (0.05, ">0.05", "different"),
        ("<0.001", "0.000", "close"),
        ("<0.001", ">0.05", "different"),
        (1e-12, 1e-12 * (1 + 1e-10), "close"),
        (0.04, 0.04 * (1 + 1e-8), "different"),
    ],
)
def test_numbers_as_reported(before: Any, after: Any, likeness: str) -> None:
    result = against([drainage(test__p=before)], [drainage(test__p=after)])

    lists = {"equal": result.equal, "close": result.close, "different": tuple(one.id for one in result.changed)}
    assert {name: ids for name, ids in lists.items() if ids} == {likeness: (ID,)}


@given(
    digits=st.integers(0, 10**6), places=st.integers(0, 8), exact=st.floats(0, 1), bound=st.sampled_from(["", "<"])
)
def test_likeness_does_not_depend_on_the_order(digits: int, places: int, exact: float, bound: str) -> None:
    one = parse_reported(f"{bound}{digits / 10**8:.{places}f}")
    other = parse_reported(f"{exact:.5f}")
    assert one is not None
    assert other is not None

    assert _reported_alike(one, other, TOLERANCE) == _reported_alike(other, one, TOLERANCE)
    assert _reported_alike(one, one, TOLERANCE) == "equal"
