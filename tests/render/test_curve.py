"""The risk against the prior, as a table and a curve."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from support import DRAINAGE, drainage, write_tree

from gatecheck.gate import Request, check
from gatecheck.model.verdict import Sensitivity
from gatecheck.render.curve import risk_against_prior


def test_a_curve_shows_risk_and_limit_for_every_prior() -> None:
    lines = risk_against_prior(
        Sensitivity((0.1, 0.5, 0.9), ("observed-effect", "bound"), ((0.6, 0.15, 0.02), (0.7, 0.2, 0.03)), 0.05)
    )

    assert lines == [
        "   prior  observed-effect            bound",
        "     0.1             60 %             70 %",
        "     0.5             15 %             20 %",
        "     0.9              2 %              3 %",
        "",
        "  observed-effect: o the risk, | the limit of 5 %",
        "   prior  0 %                                 100 %",
        "     0.1    |                     o",
        "     0.5    |   o",
        "     0.9   o|",
    ]  # fmt: skip


def test_without_a_limit_the_curve_stands_alone() -> None:
    lines = risk_against_prior(Sensitivity((0.5,), ("bound",), ((1.0,),), None))

    assert lines[-3] == "  bound: o the risk"
    assert lines[-1] == "     0.5  " + " " * 40 + "o"


@pytest.mark.parametrize(("changes", "names"), [
    ({}, ("observed-effect", "design-effect", "default-prior", "bound")),
    ({"alternative": ...}, ("observed-effect", "default-prior", "bound")),
    ({"test": {"name": "U", "p": 0.03}, "estimate": ...}, ("bound",)),
])  # fmt: skip
def test_the_gate_weighs_every_alternative_that_a_record_allows(
    tmp_path: Path, changes: dict[str, object], names: tuple[str, ...]
) -> None:
    """At the prior of the policy the grid gives the risk of the verdict."""
    write_tree(tmp_path, drainage(**changes))

    (one,) = check(Request(tmp_path, explain=frozenset([DRAINAGE["id"]]))).judged

    assert one.sensitivity is not None
    assert one.sensitivity.alternatives == names
    assert one.evidence is not None
    assert one.sensitivity.risks[0][one.sensitivity.priors.index(0.5)] == one.evidence.false_positive_risk
    assert one.sensitivity.limit == 0.05
    assert json.dumps(one.sensitivity.risks)


@pytest.mark.parametrize("changes", [{"aim": "equivalence"}, {"test": ..., "estimate": ...}])
def test_what_cannot_be_weighed_has_no_grid(tmp_path: Path, changes: dict[str, object]) -> None:
    write_tree(tmp_path, drainage(**changes))

    (one,) = check(Request(tmp_path, explain=frozenset([DRAINAGE["id"]]))).judged

    assert one.sensitivity is None
