"""Records that answer one hypothesis on data of their own: a claim on them is judged on all of them."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st
from support import POLICY, Document, changed, command, drainage, judge, write_tree

from gatecheck.columns import columns_of
from gatecheck.model.found import Found
from gatecheck.model.record import Record
from gatecheck.model.verdict import Place
from gatecheck.schema.records import read_record
from gatecheck.together import Together, pool_columns

FIRST = "drainage/earthworm-biomass"
AGAIN = "drainage/earthworm-biomass-2032"


def again(**changes: Any) -> Document:
    """The same hypothesis on the plots of another year."""
    return changed(drainage(id=AGAIN, replicates=FIRST, claim=...), **changes)


def record_of(document: Document) -> Record:
    record, faults = read_record(document)
    assert record is not None, faults
    return record


def together(*documents: Document, how: Any = "random") -> Together:
    found = [Found(record_of(each), Place(f"r{row}.json"), each) for row, each in enumerate(documents)]
    return pool_columns(columns_of(found), [how] * len(found))


def test_two_results_that_fall_short_alone_stand_together(tmp_path: Path) -> None:
    """A z of 2.2105 twice: pooled 3.126, LR about exp(3.126^2 / 2) / 2 = 66, a risk of 1.5 % at even prior odds."""
    answer = judge(tmp_path, drainage(), again())

    evidence = answer.claim()["evidence"]
    z = 4.2 / 1.9 * math.sqrt(2)
    assert answer.status == 0
    assert evidence["log_likelihood_ratio"] == pytest.approx(
        z**2 / 2 - math.log(2) + math.log1p(math.exp(-2 * z**2))
    )
    assert evidence["false_positive_risk"] == pytest.approx(0.0149, abs=1e-4)
    assert "Weighed on 2 records of one hypothesis, pooled with random effects (spread: p = 1)." in evidence["note"]


def test_a_result_that_stands_alone_falls_short_with_the_one_that_contradicts_it(tmp_path: Path) -> None:
    """Estimates 9 and -2 with the error 1.9: Q = 16.76, tau2 + 1.9^2 = 11^2 / 2, so z = 3.5 / 5.5."""
    strong = drainage(estimate__value=9.0, estimate__interval=..., test__value=4.7368, test__p="<0.001")
    opposite = again(estimate__value=-2.0, estimate__interval=..., test__value=-1.0526, test__p="0.300")

    alone, both = judge(tmp_path, strong), judge(tmp_path, strong, opposite)

    assert (alone.status, both.status) == (0, 1)
    said = both.rule("false-positive-risk")
    assert said["message"].startswith(
        f"Together with {AGAIN}, this result (z = 0.636, p = 0.5245, pooled) leaves a false positive risk of "
    )
    assert "would do" not in said["remedy"]


def test_a_common_effect_is_pooled_by_the_squares_of_the_errors() -> None:
    """Weights 1/1.9^2 and 1/3.8^2: (4.2 * 4 + 1 * 1) / 5 over 1.9 * sqrt(4 / 5)."""
    other = again(estimate__value=1.0, estimate__standard_error=3.8, estimate__interval=..., test__value=0.2632)

    pooled = together(drainage(), other, how="fixed")

    assert pooled.members == ((0, 1), (0, 1))
    assert pooled.z == pytest.approx([3.56 / (1.9 * math.sqrt(0.8))] * 2, rel=1e-12)
    assert pooled.share == pytest.approx([1, 1])


def test_apart_by_policy() -> None:
    pooled = together(drainage(), again(), how="apart")

    assert (pooled.members, pooled.pooled.tolist(), pooled.apart) == (((0,), (1,)), [False, False], ("", ""))


WITH_PLAN = {"plan": {"file": "plans/drainage.yaml", "hypothesis": "H1"}}


def inputs(letter: str) -> Document:
    return {"inputs": [{"path": f"data/{letter}.csv", "sha256": letter * 64}]}


def test_an_equal_hypothesis_of_a_plan_counts_against_a_claim_and_never_for_it(tmp_path: Path) -> None:
    """Other hashes may still be extracts of one study: what rests on them does not make a claim stronger."""
    first = drainage(**WITH_PLAN, provenance=inputs("a"))
    same = again(**WITH_PLAN, provenance=inputs("b"), replicates=...)
    weaker = changed(same, estimate__value=0.5, estimate__interval=..., test__value=0.263, test__p="0.794")

    helps, hurts = judge(tmp_path, first, same), judge(tmp_path, first, weaker)

    assert helps.claim()["evidence"]["false_positive_risk"] == pytest.approx(0.165, abs=1e-3)
    assert helps.claim()["evidence"]["note"].endswith(
        "Pooling would make the claim stronger, and no record says that its data are its own (replicates)."
    )
    assert hurts.claim()["evidence"]["false_positive_risk"] > 0.3
    assert "Weighed on 2 records" in hurts.claim()["evidence"]["note"]


@pytest.mark.parametrize(
    ("first", "other", "why"),
    [
        ({}, {"replicates": ..., "aliases": [FIRST]}, "they do not say that their data are their own"),
        ({"provenance": inputs("a")}, {"provenance": inputs("a")}, "they are made from the same data"),
        ({"look": {"number": 1, "planned": 2}}, {"look": {"number": 2, "planned": 2}}, "looks at one study hold"),
        ({}, {"estimate__unit": "kg/ha"}, "their estimates have other measures, units, populations or groups"),
        ({"population": "all plots"}, {"population": "plots without floods"}, "their estimates have other"),
        ({}, {"estimate": ...}, "their estimates have other"),
        (
            {"estimate__standard_error": ..., "estimate__interval": ...},
            {"estimate__standard_error": ..., "estimate__interval": ...},
            "an estimate or its standard error is not given",
        ),
    ],
)
def test_why_records_of_one_hypothesis_are_weighed_apart(
    first: Document, other: Document, why: str, tmp_path: Path
) -> None:
    answer = judge(tmp_path, drainage(**first), again(**other))

    assert why in answer.claim()["evidence"]["note"]
    assert answer.claim()["evidence"]["false_positive_risk"] == pytest.approx(0.165, abs=1e-3)
    assert any(
        note.startswith(f"Not weighed together with the other records of its hypothesis, since {why}")
        and note.endswith(f": {FIRST}.")
        for note in answer.verdict["notes"]
    )


def test_groups_in_another_order_are_not_pooled() -> None:
    """The sign of one of the two estimates would be the other way."""
    turned = again()
    turned["sample"]["groups"].reverse()

    assert together(drainage(), turned).apart[0].startswith("their estimates have other")


def test_an_exploratory_record_is_not_pooled_into_a_confirmatory_claim() -> None:
    picked = drainage(status="exploratory")

    pooled = together(picked, again())

    assert pooled.members == ((0, 1), (1,))
    assert pooled.apart == ("", "")


def test_a_claim_of_no_effect_is_not_pooled() -> None:
    margin = {"aim": "equivalence", "estimate__margin": [-5, 5]}

    assert together(drainage(**margin), again(**margin)).pooled.tolist() == [False, False]
    assert together(drainage(), again(**margin)).pooled.tolist() == [False, False]


def test_the_standard_error_may_come_from_a_symmetric_interval() -> None:
    """8.06 - 0.34 over twice t(34; 0.975) = 2.0322 is 1.8994."""
    told = {"estimate__standard_error": ...}

    pooled = together(drainage(**told), again(**told), how="fixed")

    assert pooled.z == pytest.approx([4.2 / 1.8994 * math.sqrt(2)] * 2, rel=1e-4)


def test_one_side_is_signed_toward_what_was_tested(tmp_path: Path) -> None:
    """The pooled z of two results that point up is no evidence for a claim that tests downward."""
    down = {"test__sides": 1, "test__tail": "less", "test__p": "0.983"}

    answer = judge(tmp_path, drainage(**down), again(**down))

    assert answer.claim()["evidence"]["log_likelihood_ratio"] <= 0
    assert "points away from the direction tested" in answer.rule("false-positive-risk")["remedy"]


def test_the_default_prior_of_a_pooled_result_is_worth_one_of_all_its_units(tmp_path: Path) -> None:
    """Half of z^2 less half the log of 72 units: Schwarz' approximation with an intercept-free count."""
    policy = changed(POLICY, evidence={"alternative": "default-prior", "prior": 0.5})

    answer = judge(tmp_path, drainage(), again(), policy=policy)

    z = 4.2 / 1.9 * math.sqrt(2)
    assert answer.claim()["evidence"]["log_likelihood_ratio"] == pytest.approx(z**2 / 2 - math.log(72) / 2)


@pytest.mark.parametrize(
    ("planned", "expected"),
    [
        # Both for 4 g/m2: |4| / 1.9 * sqrt(2) standard errors of the pooled estimate.
        ({"effect": 4.0, "scale": "raw"}, 4 / 1.9 * math.sqrt(2)),
        # Both for one standard deviation: sqrt(9) each, so sqrt(18).
        ({"effect": 1.0, "scale": "standardised"}, math.sqrt(18)),
    ],
)
def test_the_planned_effect_against_the_pooled_result(planned: Document, expected: float, tmp_path: Path) -> None:
    policy = changed(POLICY, evidence={"alternative": "design-effect", "prior": 0.5})

    answer = judge(tmp_path, drainage(alternative=planned), again(alternative=planned), policy=policy)

    z = 4.2 / 1.9 * math.sqrt(2)
    folded = math.log(math.exp(-((z - expected) ** 2) / 2) + math.exp(-((z + expected) ** 2) / 2)) + z**2 / 2
    assert answer.claim()["evidence"]["log_likelihood_ratio"] == pytest.approx(folded - math.log(2), rel=1e-9)


def test_records_planned_for_other_effects_have_no_common_planned_effect(tmp_path: Path) -> None:
    policy = changed(POLICY, evidence={"alternative": ["design-effect", "bound"], "prior": 0.5})

    answer = judge(tmp_path, drainage(), again(alternative__effect=0.5), policy=policy)

    assert answer.claim()["evidence"]["alternative"] == "bound"


def test_explain_tells_on_what_a_claim_is_judged(tmp_path: Path) -> None:
    told = command("explain", FIRST, str(write_tree(tmp_path, drainage(), again()))).stdout

    assert "Weighed on 2 records of one hypothesis, pooled with random" in " ".join(told.split())


@given(
    st.lists(st.tuples(st.floats(-9, 9), st.floats(0.1, 9)), min_size=2, max_size=5),
    st.permutations(range(5)),
    st.sampled_from(["random", "fixed"]),
)
def test_the_order_of_records_changes_nothing(
    results: list[tuple[float, float]], order: list[int], how: str
) -> None:
    documents = [drainage(id="first", estimate__value=results[0][0], estimate__standard_error=results[0][1])]
    documents += [
        again(id=f"again-{number}", replicates="first", estimate__value=value, estimate__standard_error=error)
        for number, (value, error) in enumerate(results[1:])
    ]
    shuffled = [documents[place] for place in order if place < len(documents)]

    one, other = together(*documents, how=how), together(*shuffled, how=how)

    assert one.z.tolist() == pytest.approx([float(other.z[0])] * len(documents), rel=1e-9, abs=1e-12)
    assert one.stated.all()
