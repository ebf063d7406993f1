"""Records that answer one hypothesis on data of their own: a claim on them is judged on all of them."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats
from support import POLICY, Document, changed, command, drainage, judge, write_tree

from gatecheck.columns import columns_of
from gatecheck.model.found import Found
from gatecheck.model.record import Record
from gatecheck.model.verdict import Place
from gatecheck.schema.records import read_record
from gatecheck.together import Together, pool_columns
from gatecheck.weigh import log_p_t, z_from_log_p

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


#: Of two equal shares, each by an error on 34 df: Meier's factor 1 + 4 (2 / 4) / 34 on the variance, and
#: Satterthwaite's df, 1 / (2 (1 / 4) / 34) = 68.
MEIER = math.sqrt(1 + 2 / 34)
TWICE = 4.2 / 1.9 * math.sqrt(2) / MEIER


def log_lr(t: float, df: float, ncp: float) -> float:
    """Of t against a non-centrality of either sign, by scipy's densities."""
    either = stats.nct.pdf(t, df, ncp) + stats.nct.pdf(t, df, -ncp)
    return math.log(either / 2 / stats.t.pdf(t, df))


def test_two_results_that_fall_short_alone_stand_together(tmp_path: Path) -> None:
    """A t of 2.2105 twice: pooled t(68) = 3.038, and a risk of 2.5 % at even prior odds; alone it is 16 %."""
    answer = judge(tmp_path, drainage(), again())

    evidence = answer.claim()["evidence"]
    assert answer.status == 0
    assert evidence["log_likelihood_ratio"] == pytest.approx(log_lr(TWICE, 68, TWICE))
    assert evidence["false_positive_risk"] == pytest.approx(0.0250, abs=1e-4)
    assert "Weighed on 2 records of one hypothesis, pooled with random effects (spread: p = 1)." in evidence["note"]
    assert evidence["note"].endswith("Each counts by the inverse of its squared standard error.")


def of_few(value: float, n: int, error: float = 1.0, **changes: Any) -> Document:
    """A difference of two groups of `n`, in a record whose figures agree."""
    groups = [{"name": name, "n": n} for name in ("drained", "undrained")]
    few: Document = {
        "estimate": {"measure": "mean difference", "unit": "g/m2", "value": value, "standard_error": error},
        "test": {"name": "two-sample t", "statistic": "t", "value": value / error, "df": 2 * n - 2, "sides": 2},
        "sample": {"unit": "plot", "groups": groups},
    }
    return changed(drainage(**few), **changes)


def of_few_again(number: int, value: float, n: int, error: float = 1.0, **changes: Any) -> Document:
    return of_few(value, n, error, id=f"{AGAIN}-{number}", replicates=FIRST, **changes)


@pytest.mark.parametrize(
    ("n", "t", "df", "alone", "pooled"), [(2, 2.0, 4, 0.347, 0.1521), (3, 2.3, 8, 0.237, 0.0547)]
)
def test_two_small_samples_give_a_t_and_no_z(
    n: int, t: float, df: int, alone: float, pooled: float, tmp_path: Path
) -> None:
    """As z both would stand at 5 %; the t of both together has the degrees of freedom of both."""
    single = judge(tmp_path, of_few(t, n))
    answer = judge(tmp_path, of_few(t, n), of_few_again(1, t, n))

    evidence = answer.claim()["evidence"]
    both = t * math.sqrt(2)
    assert evidence["log_likelihood_ratio"] == pytest.approx(log_lr(both, df, both), rel=1e-9)
    assert evidence["false_positive_risk"] == pytest.approx(pooled, abs=1e-4)
    assert single.claim()["evidence"]["false_positive_risk"] == pytest.approx(alone, abs=1e-3)
    assert answer.status == 1
    p = 2 * stats.t.sf(both, df)
    assert answer.rule("false-positive-risk")["message"].startswith(
        f"Together with {AGAIN}-1, this result (t({df}) = {both:.3g}, p = {p:.4g}, pooled) leaves "
    )
    assert evidence["note"].endswith(
        "Each counts by its size, as standard errors on fewer than 30 degrees of freedom are too uncertain to "
        "choose the weights."
    )


def test_every_account_says_with_what_a_claim_is_pooled(tmp_path: Path) -> None:
    """Two of t(18) = 3 stand together: t(36) = 4.243; the list of what stands, the summary, the page, `explain`."""
    tree = write_tree(tmp_path, of_few(3.0, 10), of_few_again(1, 3.0, 10))
    said = f"pooled with {AGAIN}-1 by random effects to t(36) = 4.24, p = 0.000147"

    def plain(*arguments: str) -> str:
        return " ".join(command(*arguments, str(tree)).stdout.replace("\\", "").split())

    assert f"(prior 0.5, against the effect as observed; {said}" in plain("weigh")
    assert f"(prior 0.5, against the effect as observed; {said}" in plain("weigh", "--write", "summary=-")
    assert f"set by the policy; {said}" in plain("explain", FIRST)
    assert said in plain("weigh", "--write", "page=-")


def test_the_summary_says_at_the_risk_of_what_falls_short_that_it_is_pooled(tmp_path: Path) -> None:
    tree = write_tree(tmp_path, of_few(2.3, 3), of_few_again(1, 2.3, 3))

    told = command("weigh", "--write", "summary=-", str(tree)).stdout.replace("\\", "")

    assert f"| 5.5 %, at prior 0.5; pooled with {AGAIN}-1 by random effects to t(8) = 3.25, p = 0.01165 |" in told


def test_records_with_spread_are_pooled_on_one_degree_of_freedom_less_than_there_are(tmp_path: Path) -> None:
    """.5 +- .2, .1 +- .15 and .9 +- .25 of large samples: z = 2.03, by Hartung and Knapp t(2) = 2.03, p = .18."""
    large = {"sample__groups": [{"name": name, "n": 10**6} for name in ("drained", "undrained")]}
    three = [
        of_few(0.5, 10**6, 0.2, **large),
        of_few_again(1, 0.1, 10**6, 0.15, **large),
        of_few_again(2, 0.9, 10**6, 0.25, **large),
    ]

    pooled, fixed = together(*three), together(*three, how="fixed")

    assert pooled.df.tolist() == [2.0] * 3
    assert pooled.t == pytest.approx([2.033] * 3, abs=1e-3)
    assert math.exp(pooled.log_p[0]) == pytest.approx(0.18, abs=5e-3)
    assert fixed.df[0] > 10**6
    assert "to t(2) = 2.03, p = 0.179" in command("explain", FIRST, str(write_tree(tmp_path, *three))).stdout


def test_two_records_with_spread_keep_the_degrees_of_freedom_of_their_errors() -> None:
    pooled = together(of_few(3.0, 3), of_few_again(1, -1.0, 3))

    assert pooled.share[0] < 0.6
    assert pooled.df[0] == pytest.approx(8)


def test_few_degrees_of_freedom_are_weighed_by_the_sizes_of_the_groups() -> None:
    """2 + 2 and 4 + 12 plots: sizes 1 and 3; (3 + 3 * 1) / 4 over the root of (1 * 1 + 9 * .25) / 16."""
    groups = [{"name": "drained", "n": 4}, {"name": "undrained", "n": 12}]
    other = of_few_again(1, 1.0, 8, 0.5)
    other["sample"]["groups"] = groups

    pooled = together(of_few(3.0, 2), other, how="fixed")

    own = (1 / 16, 9 / 64)
    assert pooled.t == pytest.approx([1.5 / math.sqrt(sum(own))] * 2)
    assert pooled.df == pytest.approx([sum(own) ** 2 / (own[0] ** 2 / 2 + own[1] ** 2 / 14)] * 2)
    assert pooled.by_size.all()


def test_degrees_of_freedom_stand_for_sizes_that_are_not_given() -> None:
    """2 and 6 df: weights 1 and 3."""
    pooled = together(of_few(3.0, 2, sample=...), of_few_again(1, 1.0, 4, 0.5, sample=...), how="fixed")

    assert pooled.t == pytest.approx([1.5 / math.sqrt(1 / 16 + 9 / 64)] * 2)


def test_a_z_without_size_is_not_weighed_together_with_a_small_sample(tmp_path: Path) -> None:
    z = {"name": "Wald z", "statistic": "z", "value": 2.0, "sides": 2}

    answer = judge(tmp_path, of_few(2.0, 2, sample=...), of_few_again(1, 2.0, 2, sample=..., test=z))

    assert "a record gives no sample.n to weigh it by" in answer.claim()["evidence"]["note"]


@pytest.mark.parametrize(
    ("test", "df"),
    [
        ({"name": "one-way F", "statistic": "F", "value": 4.0, "df": [1, 4], "sides": 2}, 8),
        ({"name": "permutation", "p": "0.1", "p_kind": "exact", "sides": 2}, 8),
        ({"name": "Wald z", "statistic": "z", "value": 2.0, "sides": 2}, math.inf),
    ],
)
def test_the_degrees_of_freedom_of_an_error(test: Document, df: float) -> None:
    """Those of the numerator's one df, of the units less the groups without a statistic, and none of a z."""
    pooled = together(of_few(2.0, 3, test=test), of_few_again(1, 2.0, 3, test=test), how="fixed")

    assert pooled.df.tolist() == [df, df]
    assert pooled.t == pytest.approx([2 * math.sqrt(2)] * 2)


def test_a_result_that_stands_alone_falls_short_with_the_one_that_contradicts_it(tmp_path: Path) -> None:
    """Estimates 9 and -2 with the error 1.9: Q = 16.76, tau2 + 1.9^2 = 11^2 / 2, so t = 3.5 / 5.51."""
    strong = drainage(estimate__value=9.0, estimate__interval=..., test__value=4.7368, test__p="<0.001")
    opposite = again(estimate__value=-2.0, estimate__interval=..., test__value=-1.0526, test__p="0.300")

    alone, both = judge(tmp_path, strong), judge(tmp_path, strong, opposite)

    assert (alone.status, both.status) == (0, 1)
    said = both.rule("false-positive-risk")
    assert said["message"].startswith(
        f"Together with {AGAIN}, this result (t(68) = 0.635, p = 0.5274, pooled) leaves a false positive risk of "
    )
    assert "would do" not in said["remedy"]


def test_a_common_effect_is_pooled_by_the_squares_of_the_errors() -> None:
    """Weights 1/1.9^2 and 1/3.8^2: (4.2 * 4 + 1 * 1) / 5 over 1.9 * sqrt(4 / 5), and Meier's factor."""
    other = again(estimate__value=1.0, estimate__standard_error=3.8, estimate__interval=..., test__value=0.2632)

    pooled = together(drainage(), other, how="fixed")

    assert pooled.members == ((0, 1), (0, 1))
    factor = math.sqrt(1 + 4 * 2 * (0.8 * 0.2) / 34)
    assert pooled.t == pytest.approx([3.56 / (1.9 * math.sqrt(0.8) * factor)] * 2, rel=1e-12)
    assert pooled.df == pytest.approx([34 / (0.8**2 + 0.2**2)] * 2)
    assert pooled.share == pytest.approx([1 / factor] * 2)


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

    assert pooled.t == pytest.approx([4.2 / 1.8994 * math.sqrt(2) / MEIER] * 2, rel=1e-4)


def test_one_side_is_signed_toward_what_was_tested(tmp_path: Path) -> None:
    """The pooled z of two results that point up is no evidence for a claim that tests downward."""
    down = {"test__sides": 1, "test__tail": "less", "test__p": "0.983"}

    answer = judge(tmp_path, drainage(**down), again(**down))

    assert answer.claim()["evidence"]["log_likelihood_ratio"] <= 0
    assert "points away from the direction tested" in answer.rule("false-positive-risk")["remedy"]


def test_the_default_prior_of_a_pooled_result_is_worth_one_of_all_its_units(tmp_path: Path) -> None:
    """Half of z^2 less half the log of 72 units: Schwarz' approximation at the z that has the p of the t."""
    policy = changed(POLICY, evidence={"alternative": "default-prior", "prior": 0.5})

    answer = judge(tmp_path, drainage(), again(), policy=policy)

    z = float(z_from_log_p(log_p_t(TWICE, 68, one_sided=False), one_sided=False))
    assert z < TWICE
    assert answer.claim()["evidence"]["log_likelihood_ratio"] == pytest.approx(z**2 / 2 - math.log(72) / 2)


@pytest.mark.parametrize(
    ("planned", "expected"),
    [
        # Both for 4 g/m2: |4| / 1.9 * sqrt(2) standard errors of the pooled estimate.
        ({"effect": 4.0, "scale": "raw"}, 4 / 1.9 * math.sqrt(2) / MEIER),
        # Both for one standard deviation: sqrt(9) each, so sqrt(18).
        ({"effect": 1.0, "scale": "standardised"}, math.sqrt(18) / MEIER),
    ],
)
def test_the_planned_effect_against_the_pooled_result(planned: Document, expected: float, tmp_path: Path) -> None:
    policy = changed(POLICY, evidence={"alternative": "design-effect", "prior": 0.5})

    answer = judge(tmp_path, drainage(alternative=planned), again(alternative=planned), policy=policy)

    told = answer.claim()["evidence"]["log_likelihood_ratio"]
    assert told == pytest.approx(log_lr(TWICE, 68, expected), rel=1e-9)


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

    assert one.t.tolist() == pytest.approx([float(other.t[0])] * len(documents), rel=1e-9, abs=1e-12)
    assert one.df.tolist() == pytest.approx([float(other.df[0])] * len(documents), rel=1e-9)
    assert one.stated.all()
