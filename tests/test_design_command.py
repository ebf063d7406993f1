"""The command `design`: how large a study must be for a true effect to meet the policy."""

from __future__ import annotations

import json
import math
from itertools import pairwise
from pathlib import Path
from typing import Any, get_args

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy import special, stats
from statsmodels.stats import power
from support import POLICY, Document, changed

from gatecheck import weigh
from gatecheck.arguments import TESTS
from gatecheck.cli import main
from gatecheck.design import design
from gatecheck.errors import CannotJudge, WrongUsage
from gatecheck.model.design import Design, DesignQuestion, PlannedTest
from gatecheck.policies import read_own_policy
from gatecheck.render import design as told
from gatecheck.weigh.assurance import Weighing, assurance, least_value
from gatecheck.weigh.default_prior import log_bf_t
from gatecheck.weigh.planned import one_sample_t, two_sample_t


def answer(policy: Document = POLICY, **question: Any) -> Design:
    """The answer under a policy to a question about two samples."""
    read, _ = read_own_policy(policy)
    assert read is not None
    return design(DesignQuestion(**{"test": "two-sample-t", "effect": 0.5, **question}), read)


def size(found: Design, level: float = 0.8) -> int:
    """The number of units for that assurance."""
    (least,) = (each.least for each in found.levels if each.wanted == level)
    assert least is not None
    return least.size.n


@pytest.mark.parametrize(
    ("question", "n"),
    # The least whole number at and above each recomputed size. Two-sample t, h, 2 to 6 groups (f = .1, .25, .4),
    # chi-squared on 2 to 6 df (w = .1, .3, .5): Cohen, J. (1992). A power primer. Psychological Bulletin 112(1),
    # 155-159, Table 2 (computed; the print rounds some of them down: 393, 107, 121, ...). One sample, chi-squared
    # on 1 df: the R package pwr, as printed in pingouin's tests/test_power.py (seen: 33.36713, 26.13753, 87.20954);
    # one proportion of 3/4 against 1/2: the pwr vignette (seen: 22.55127); correlation: the exact distribution
    # (from memory).
    [
        ({"test": "two-sample-t", "effect": 0.2}, 394),
        ({"test": "two-sample-t", "effect": 0.5}, 64),
        ({"test": "two-sample-t", "effect": -0.8}, 26),
        ({"test": "one-sample-t", "effect": 0.5}, 34),
        ({"test": "paired-t", "effect": 0.5}, 34),
        ({"test": "paired-t", "effect": 0.5, "sides": 1}, 27),
        ({"test": "two-proportions", "effect": 0.5}, 63),
        ({"test": "one-proportion", "effect": math.pi / 6, "sides": 1}, 23),
        ({"test": "correlation", "effect": 0.3}, 84),
        ({"test": "one-way-F", "effect": 0.1, "groups": 2}, 394),
        ({"test": "one-way-F", "effect": 0.25, "groups": 2}, 64),
        ({"test": "one-way-F", "effect": 0.1, "groups": 4}, 274),
        ({"test": "one-way-F", "effect": 0.25, "groups": 5}, 40),
        ({"test": "one-way-F", "effect": 0.4, "groups": 6}, 15),
        ({"test": "chi-squared", "effect": 0.3, "df": 1}, 88),
        ({"test": "chi-squared", "effect": 0.1, "df": 2}, 964),
        ({"test": "chi-squared", "effect": 0.3, "df": 3}, 122),
        ({"test": "chi-squared", "effect": 0.5, "df": 6}, 55),
        # Schoenfeld, D. A. (1983). Biometrics 39, 499-503: survival .37 against .75 takes 20.39 events with rounded
        # normal quantiles, 20.41 with exact ones (computed).
        ({"test": "log-rank", "effect": math.log(0.75) / math.log(0.37), "sides": 1}, 17),
        ({"test": "log-rank", "effect": math.log(0.37) / math.log(0.75)}, 21),
    ],
)
def test_the_bare_design_has_the_handbooks_size(question: dict[str, Any], n: int) -> None:
    found = answer(**question)

    assert found.bare is not None
    assert found.bare.size.n == n


@pytest.mark.parametrize("ratio", [0.25, 0.5, 2.0, 3.0])
def test_a_bare_design_of_unequal_groups_has_the_size_of_another_program(ratio: float) -> None:
    """Against statsmodels, whose second group is no whole number; that of the design is rounded up."""
    found = answer(effect=0.5, ratio=ratio)
    other = power.TTestIndPower()

    assert found.bare is not None
    n1, second = found.bare.size.n, found.bare.size.second
    assert second == math.ceil(ratio * n1)
    assert found.bare.size.total == n1 + second
    assert other.power(0.5, n1, 0.05, ratio=second / n1) >= 0.8
    assert other.power(0.5, n1 - 1, 0.05, ratio=math.ceil(ratio * (n1 - 1)) / (n1 - 1)) < 0.8


@pytest.mark.parametrize(
    ("question", "events"),
    # Four over (1 + R)^2 / R times as many as with equal groups, by the formula of Schoenfeld (1983).
    [({"ratio": 1.0}, 247), ({"ratio": 2.0}, 278), ({"ratio": 0.5}, 278)],
)
def test_unequal_groups_take_more_events(question: dict[str, Any], events: int) -> None:
    found = answer(test="log-rank", effect=0.7, **question)

    quantiles = (float(special.ndtri(0.975)) + float(special.ndtri(0.8))) ** 2
    ratio = question["ratio"]
    assert found.bare is not None
    assert found.bare.size.n == events
    assert found.bare.size.n == math.ceil(quantiles * (1 + ratio) ** 2 / ratio / math.log(0.7) ** 2)
    assert found.bare.size.second is None


@pytest.mark.parametrize("alternative", ["observed-effect", "design-effect", "bound", "default-prior"])
def test_the_size_told_has_the_assurance_and_one_unit_less_does_not(alternative: str) -> None:
    found = answer(changed(POLICY, evidence__alternative=alternative))
    weighing = Weighing[alternative.upper().replace("-", "_")]

    def standing(n: int) -> float:
        each = np.array([float(n)])
        planned = two_sample_t(0.5, each, each, one_sided=False, scale=math.sqrt(2) / 2)
        return float(assurance(planned, least_value(planned, [(weighing, math.log(19))], 0.0))[0])

    n = size(found)
    assert standing(n) >= 0.8 > standing(n - 1)
    assert found.wanted is not None
    assert found.wanted.assurance == pytest.approx(standing(n), rel=1e-9)
    assert found.alternative == alternative


def test_a_bare_design_leaves_the_risk_of_a_just_significant_result() -> None:
    """64 a group: p = .05 leaves 22 % at prior .5 against the effect observed, and the claim stands with 54 %."""
    found = answer()

    assert found.bare is not None
    ratio = weigh.observed_t(weigh.t_from_log_p(math.log(0.05), 126, one_sided=False), 126, one_sided=False)
    assert found.bare.risk == pytest.approx(float(weigh.false_positive_risk(ratio, 0.5)))
    assert 0.5 < found.bare.assurance < 0.6
    assert found.bare.long_run == pytest.approx(0.05 / 0.85)  # alpha over alpha plus power, at even prior odds


@pytest.mark.parametrize("alternative", ["design-effect", "bound", "default-prior"])
def test_the_bare_risk_is_weighed_as_the_policy_weighs(alternative: str) -> None:
    found = answer(changed(POLICY, evidence__alternative=alternative))

    assert found.bare is not None
    if alternative == "bound":
        assert found.bare.risk == pytest.approx(0.289350, abs=1e-6)
        return
    t = weigh.t_from_log_p(math.log(0.05), 126, one_sided=False)
    if alternative == "default-prior":
        ratio = log_bf_t(t, 126, 32, math.sqrt(2) / 2)
    else:
        ratio = weigh.log_lr_t(t, 126, 0.5 * math.sqrt(32), one_sided=False)
    assert found.bare.risk == pytest.approx(float(weigh.false_positive_risk(ratio, 0.5)))


def test_a_lower_prior_a_family_and_looks_take_more_units() -> None:
    plain = size(answer())

    assert size(answer(prior=0.1)) > plain
    assert size(answer(family=100)) > plain
    assert size(answer(family=100, looks=5, boundary="pocock")) > size(answer(family=100))


def ratios(found: Design) -> dict[str, float]:
    """The likelihood ratios wanted, by alternative."""
    return {need.alternative: math.exp(need.log_likelihood_ratio) for need in found.needs}


def test_the_strictest_rule_of_the_policy_counts() -> None:
    """A prior needed of .2 at most for a risk of 5 % wants 76 to 1, the risk at prior .5 only 19."""
    strict = changed(
        POLICY, rules={"false-positive-risk": {"limit": 0.05}, "prior-needed": {"risk": 0.05, "limit": 0.2}}
    )

    assert ratios(answer()) == pytest.approx({"observed-effect": 19})
    assert ratios(answer(strict)) == pytest.approx({"observed-effect": 76})
    assert ratios(answer(changed(strict, rules={"prior-needed": {"risk": 0.05, "limit": 0.2}}))) == (
        pytest.approx({"observed-effect": 76})
    )


def test_a_rule_that_only_notes_does_not_count() -> None:
    noted = {
        "false-positive-risk": {"limit": 0.05},
        "prior-needed": {"risk": 0.05, "limit": 0.2, "enforce": "note"},
    }

    assert ratios(answer(changed(POLICY, rules=noted))) == pytest.approx({"observed-effect": 19})


def test_a_robust_claim_needs_the_strictest_of_all_combinations() -> None:
    """The lowest prior, .1, wants 171 to 1 for a risk of 5 %; the bound asks for the smallest p."""
    robust = {"alternatives": ["design-effect", "bound"], "priors": [0.5, 0.1], "limit": 0.05}
    policy = changed(POLICY, rules={"false-positive-risk": {"limit": 0.05}, "robust": robust})

    found = answer(policy)
    bound = answer(changed(POLICY, evidence__alternative="bound", evidence__prior=0.1))

    assert ratios(found) == pytest.approx({"observed-effect": 19, "design-effect": 171, "bound": 171})
    assert size(found) >= size(bound) > size(answer())
    alone = answer(changed(POLICY, rules={"robust": robust}))
    assert ratios(alone) == pytest.approx({"design-effect": 171, "bound": 171})
    assert alone.alternative == "observed-effect"


def test_of_a_list_the_first_alternative_that_the_test_allows_counts() -> None:
    policy = changed(POLICY, evidence__alternative=["default-prior", "design-effect"])

    assert answer(policy).alternative == "default-prior"
    assert answer(policy, test="one-way-F", groups=2).alternative == "default-prior"
    assert answer(policy, test="one-way-F", groups=3).alternative == "design-effect"
    assert answer(policy, test="one-proportion", sides=1).alternative == "design-effect"


def test_the_levels_of_the_policy_are_those_of_family_and_looks() -> None:
    """A family of 4 at a level of .02 wants p = .005; two Pocock looks at .05 want p = .0294 each (Pocock 1977)."""
    policy = changed(POLICY, rules={"false-positive-risk": {"limit": 0.05}, "family": {"alpha": 0.02}})

    assert math.exp(answer(policy, family=4).log_p_limit) == pytest.approx(0.005)
    assert math.exp(answer(family=4).log_p_limit) == pytest.approx(0.0125)
    assert math.exp(answer(looks=2, boundary="pocock").log_p_limit) == pytest.approx(0.0294, abs=5e-5)
    assert answer().log_p_limit == 0.0


@settings(max_examples=20, deadline=None)
@given(
    st.sampled_from(["two-sample-t", "correlation", "one-proportion", "log-rank"]),
    st.floats(0.15, 0.9),
    st.floats(0.02, 0.9),
)
def test_the_curve_rises_with_size_and_falls_with_the_family(test: Any, effect: float, prior: float) -> None:
    plain, behind = (answer(test=test, effect=effect, prior=prior, family=k) for k in (1, 1000))

    for found in (plain, behind):
        points = found.curve
        assert [point.n for point in points] == sorted({point.n for point in points})
        assert all(a.assurance <= b.assurance for a, b in pairwise(points))
    assert all(size(plain, level) <= size(behind, level) for level in (0.5, 0.8, 0.9, 0.95))
    sizes = [size(plain, level) for level in (0.5, 0.8, 0.9, 0.95)]
    assert sizes == sorted(sizes)


def test_one_direction_takes_fewer_units_and_three_groups_are_no_fewer_than_two() -> None:
    assert size(answer(sides=1)) < size(answer())
    assert size(answer(test="one-way-F", effect=0.25, groups=2)) in {size(answer()), size(answer()) - 1}


def test_a_small_study_that_stands_where_a_larger_does_not_is_not_told() -> None:
    """At a prior of .99 nothing speaks against a claim of a few units; against one of some more the plan does."""
    policy = changed(POLICY, evidence__alternative="design-effect", evidence__prior=0.99)

    found = answer(policy, effect=0.2, assurance=0.97)

    assert found.wanted is not None
    n = found.wanted.size.n
    larger = np.arange(float(n), 8.0 * n)
    planned = two_sample_t(0.2, larger, larger, one_sided=False, scale=1.0)
    target = found.needs[0].log_likelihood_ratio
    stands = assurance(planned, least_value(planned, [(Weighing.DESIGN_EFFECT, target)], 0.0))
    assert target < 0
    assert stands.min() >= 0.97
    assert size(found, 0.5) == 2


def test_any_result_meets_a_policy_that_wants_no_evidence() -> None:
    found = answer(changed(POLICY, evidence__prior=0.99), effect=2.0)

    assert found.levels[0].least is not None
    assert (found.levels[0].least.value, found.levels[0].least.p) == (0.0, 1.0)
    assert " 50 %            2                4          0          1" in told(found, 80)


def test_an_effect_too_small_for_any_study_is_told() -> None:
    found = answer(effect=1e-6)

    assert found.wanted is None
    assert found.bare is None
    text = told(found, 80)
    assert text.startswith("More than 100,000,000 units per group for a claim")
    assert text.count("above 100,000,000") == 4
    assert "A design with 80 % power" not in text
    assert "Assurance by size" not in text
    assert "A result meets" not in text


def test_ratios_beyond_any_double_are_told() -> None:
    text = told(answer(changed(POLICY, rules={"false-positive-risk": {"limit": 1e-300}}), prior=1e-300), 80)

    assert "a likelihood ratio of 1e+600 is wanted" in " ".join(text.split())


@pytest.mark.parametrize(
    ("policy", "question", "message"),
    [
        (changed(POLICY, rules={}), {}, "the policy sets no limit on evidence that blocks"),
        (
            changed(POLICY, rules={"false-positive-risk": {"limit": 0.05, "enforce": "note"}}),
            {},
            "the policy sets no limit on evidence that blocks",
        ),
        (
            changed(POLICY, evidence__alternative="default-prior"),
            {"test": "one-way-F", "groups": 4},
            r"weighs by default-prior, which one-way-F \(4 groups\) does not allow",
        ),
        (
            changed(POLICY, evidence__alternative="default-prior"),
            {"test": "chi-squared", "df": 2},
            r"which chi-squared \(2 df\) does not allow",
        ),
        (
            changed(POLICY, evidence__alternative="default-prior"),
            {"test": "two-proportions", "sides": 1},
            r"which two-proportions \(one-sided\) does not allow",
        ),
        (
            changed(POLICY, evidence__alternative=["default-prior", "bound"]),
            {"test": "log-rank"},
            "rests on the number of units, which a design by events does not know",
        ),
        (
            changed(POLICY, rules={"robust": {"alternatives": ["default-prior"], "priors": [0.5], "limit": 0.05}}),
            {"test": "chi-squared", "df": 2},
            r"robust of the policy lists default-prior, which chi-squared \(2 df\) does not allow",
        ),
    ],
)
def test_what_has_no_answer_says_why(policy: Document, question: dict[str, Any], message: str) -> None:
    with pytest.raises(CannotJudge, match=message):
        answer(policy, **question)


EFFECTS: dict[PlannedTest, str] = {
    "two-sample-t": "give d, in standard deviations, other than 0 and at most 1000 in size",
    "one-sample-t": "give d, in standard deviations, other than 0 and at most 1000 in size",
    "paired-t": "give d, in standard deviations, other than 0 and at most 1000 in size",
    "one-proportion": "give h = 2 asin sqrt p1 - 2 asin sqrt p2, other than 0 and at most pi in size",
    "two-proportions": "give h = 2 asin sqrt p1 - 2 asin sqrt p2, other than 0 and at most pi in size",
    "correlation": "give r, other than 0 and at most 0.9999 in size",
    "one-way-F": "give f, above 0 and at most 1000",
    "chi-squared": "give w, above 0 and at most 1000",
    "log-rank": "give the hazard ratio, from 0.001 to 1000 and other than 1",
}


@pytest.mark.parametrize(
    ("test", "effect"),
    [
        *((test, effect) for test in EFFECTS for effect in (math.nan, math.inf, 0.0)),
        ("two-sample-t", 1001.0),
        ("two-proportions", -3.2),
        ("correlation", 1.0),
        ("correlation", -1.0),
        ("one-way-F", -0.5),
        ("chi-squared", -0.5),
        ("log-rank", 1.0),
        ("log-rank", -0.7),
    ],
)
def test_an_impossible_effect_says_what_to_give(test: PlannedTest, effect: float) -> None:
    own: dict[str, Any] = {"one-way-F": {"groups": 3}, "chi-squared": {"df": 3}}.get(test, {})

    with pytest.raises(WrongUsage) as wrong:
        answer(test=test, effect=effect, **own)

    assert str(wrong.value) == f"--effect {effect:g} is no effect of {test}: {EFFECTS[test]}."


@pytest.mark.parametrize("effect", [-0.3, 0.9999, 1e-300, -0.9999])
def test_what_is_an_effect_has_an_answer(effect: float) -> None:
    found = answer(test="correlation", effect=effect)

    assert (found.wanted is None) == (abs(effect) < 1e-9)
    for largest in (math.pi, 1000.0):
        test: PlannedTest = "one-proportion" if largest < 4 else "one-sample-t"
        assert size(answer(test=test, effect=largest), 0.95) <= 3


@pytest.mark.parametrize(
    ("question", "message"),
    [
        (
            {"groups": 3},
            "--groups does not go with two-sample-t: leave it out, or plan a test that takes it (one-way-F).",
        ),
        (
            {"df": 3},
            "--df does not go with two-sample-t: leave it out, or plan a test that takes it (chi-squared).",
        ),
        (
            {"test": "one-sample-t", "ratio": 2.0},
            "--ratio does not go with one-sample-t: leave it out, or plan a test that takes it (two-sample-t, "
            "two-proportions, log-rank).",
        ),
        (
            {"test": "one-way-F", "groups": 2, "sides": 1},
            "--sides 1 does not go with one-way-F: leave it out, or plan a test that takes it (two-sample-t, "
            "one-sample-t, paired-t, one-proportion, two-proportions, correlation, log-rank).",
        ),
        ({"test": "one-way-F"}, "one-way-F compares two groups or more: give their number with --groups."),
        (
            {"test": "one-way-F", "groups": 1},
            "one-way-F compares two groups or more: give their number with --groups.",
        ),
        (
            {"test": "chi-squared"},
            "chi-squared needs its degrees of freedom: give --df, which is (rows - 1) x (columns - 1) of a table.",
        ),
        (
            {"family": 1000, "looks": 5, "boundary": "haybittle-peto"},
            "A boundary haybittle-peto over 5 looks cannot keep the level 5e-05: choose another --boundary, or a "
            "smaller --family.",
        ),
    ],
)
def test_options_that_do_not_go_together_say_what_to_do(question: dict[str, Any], message: str) -> None:
    with pytest.raises(WrongUsage) as wrong:
        answer(**question)

    assert str(wrong.value) == message


TOLD: tuple[tuple[dict[str, Any], str], ...] = (
    ({"test": "two-sample-t", "ratio": 0.01}, "units in the first group and"),
    ({"test": "paired-t"}, "pairs for a claim on a true effect of 0.5 (paired-t)"),
    ({"test": "two-proportions"}, "units per group for a claim"),
    ({"test": "correlation", "looks": 3}, "(correlation), at one of 3 looks (obrien-fleming), to stand"),
    (
        {"test": "correlation", "looks": 26},
        "(correlation), if it goes on to the last of 26 looks (obrien-fleming), to stand",
    ),
    ({"test": "one-way-F", "groups": 1000}, "(one-way-F, 1000 groups)"),
    ({"test": "chi-squared", "df": 1, "family": 6}, "(chi-squared, 1 df), as one of a family of 6 to stand"),
    ({"test": "log-rank", "sides": 1, "ratio": 100.0}, "(log-rank, one-sided, ratio 100)"),
    ({"test": "one-proportion", "effect": 0.0007, "assurance": 0.123456789}, "with 12.3456789 % probability"),
)


BY_P_ALONE = changed(POLICY, evidence__prior=0.9, rules={"false-positive-risk": {"limit": 0.5}})


def stood(n: int, limits: NDArray[np.float64], effect: float) -> float:
    """The share of simulated studies of two groups of `n` that cross a limit of p at one of equal looks."""
    rng = np.random.default_rng(41)
    x, y = rng.normal(effect, 1, (20_000, n)), rng.normal(0, 1, (20_000, n))
    crossed = np.zeros(20_000, np.bool_)
    for look, limit in enumerate(limits, start=1):
        each = n * look // limits.size
        t = stats.ttest_ind(x[:, :each], y[:, :each], axis=1)
        crossed |= (t.pvalue <= limit) & (t.statistic > 0)
    return float(crossed.mean())


def test_the_assurance_is_that_of_all_looks() -> None:
    """Pocock's nominal p of five looks is .0158 (Pocock 1977); where p alone binds, the last look would take 87."""
    found = answer(BY_P_ALONE, looks=5, boundary="pocock")

    assert size(found) in {78, 79}
    assert found.wanted is not None
    assert stood(size(found), np.full(5, math.exp(found.log_p_limit)), 0.5) == pytest.approx(
        found.wanted.assurance, abs=0.012
    )


def test_looks_on_too_few_units_for_the_test_add_nothing() -> None:
    """Two units in all, five looks: only the last has the two that a t takes."""
    found = answer(BY_P_ALONE, test="one-sample-t", effect=40.0, looks=5)

    assert found.wanted is not None
    assert found.wanted.size.n == 2
    planned = one_sample_t(40.0, np.array([2.0]), one_sided=False, scale=1.0)
    alone = assurance(planned, least_value(planned, [], found.log_p_limit))
    assert found.wanted.assurance == pytest.approx(float(alone[0]), abs=1e-6)


@pytest.mark.parametrize("question", [{"looks": 26}, {"test": "one-way-F", "groups": 3, "looks": 3}], ids=str)
def test_where_the_last_look_alone_is_counted_the_account_says_so(question: dict[str, Any]) -> None:
    found = answer(BY_P_ALONE, **question)

    words = " ".join(told(found, 80).split())
    assert f"if it goes on to the last of {question['looks']} looks" in words
    assert "over all looks the probability is no smaller, if the study goes on where its claim" in words


def test_the_account_says_what_a_look_before_the_last_does() -> None:
    words = " ".join(told(answer(BY_P_ALONE, looks=5), 80).split())

    assert "at the last look are wanted)" in words
    assert (
        "A look ends the study where the claim stands at it, and not where it is within its boundary alone."
        in words
    )


def test_an_assurance_close_to_one_keeps_its_column() -> None:
    table = told(answer(BY_P_ALONE, looks=5, assurance=0.999999), 80).split("\n\n")[2]

    assert "99.9999 %" in table
    assert "  99.9999" in table.splitlines()[-1][20:]
    assert len({len(line) for line in table.splitlines()}) == 1


@pytest.mark.parametrize("width", [80, 140])
@pytest.mark.parametrize(("question", "words"), TOLD, ids=str)
@pytest.mark.parametrize("alternative", [["default-prior", "bound"], ["observed-effect"]])
def test_the_account_keeps_to_its_width(
    question: dict[str, Any], words: str, width: int, alternative: list[str]
) -> None:
    policy = changed(POLICY, evidence__alternative=alternative, name="a policy of many words " * 5)

    found = answer(policy, **question)
    text = told(found, width)

    assert max(map(len, text.splitlines())) <= width
    assert words in " ".join(text.split())
    curve = text.split("100 %\n")[1].split("\n\n", maxsplit=1)[0].splitlines()
    assert [line.count("o") for line in curve] == [1] * len(found.curve)


def table(text: str) -> list[list[str]]:
    """The rows of the table, split into cells."""
    lines = text.split("Least size for each assurance\n\n")[1].split("\n\n", maxsplit=1)[0].splitlines()
    return [line.replace(" %", "%").split() for line in lines]


def test_the_table_shows_where_the_policy_is_met() -> None:
    """F and p are rounded so that what is shown meets the policy too."""
    found = answer(test="one-way-F", effect=0.25, groups=3)
    text = told(found, 80)

    head, *rows = table(text)
    assert head == ["wanted", "per", "group", "in", "all", "F", "from", "p", "up", "to", "stands"]
    for level, (wanted, n, total, f, p, stands) in zip(found.levels, rows, strict=True):
        least = level.least
        assert least is not None
        assert wanted == f"{level.wanted * 100:g}%"
        assert (int(n), int(total)) == (least.size.n, 3 * least.size.n)
        assert least.value <= float(f) < least.value * 1.001
        assert least.p * 0.999 < float(p) <= least.p
        assert float(stands.removesuffix("%")) >= level.wanted * 100
    assert "A result meets the policy from that F on.\n" in text


def test_the_table_of_unequal_groups_shows_both() -> None:
    head, first, *_ = table(told(answer(ratio=2.0, sides=1), 80))

    assert head == ["wanted", "first", "group", "second", "t", "from", "p", "up", "to", "stands"]
    assert int(first[2]) == 2 * int(first[1])


@pytest.mark.parametrize(
    ("question", "note"),
    [
        ({"test": "paired-t"}, "Pairs are counted, and d is that of the differences: the test is the one-sample t"),
        ({"test": "log-rank"}, "Events are counted, of both groups together, and not units"),
        ({"test": "two-proportions"}, "where the effect is h = 2 asin sqrt p1 - 2 asin sqrt p2."),
        ({"test": "chi-squared", "df": 2}, "The distribution of chi-squared is that of large samples."),
        ({"sides": 1}, "from that t on in the direction tested, which is that of the true effect; p is one-sided."),
        (
            {},
            "A result meets the policy from that t on, and only results in the direction of the true effect are",
        ),
    ],
)
def test_what_the_sizes_rest_on_is_said(question: dict[str, Any], note: str) -> None:
    words = " ".join(told(answer(**question), 80).split())

    assert note in words
    assert "All of it takes the true effect to be as large as planned." in words
    assert "a record that gives the events of both groups" not in words


def test_a_default_prior_of_counts_is_another_one() -> None:
    policy = changed(POLICY, evidence__alternative="default-prior")

    words = " ".join(told(answer(policy, test="two-proportions"), 80).split())

    assert "a record that gives the events of both groups is averaged over its two proportions instead" in words


def test_what_is_wanted_is_told_of_every_alternative_and_of_p() -> None:
    robust = {"alternatives": ["design-effect"], "priors": [0.5, 0.1], "limit": 0.05}
    policy = changed(POLICY, rules={"false-positive-risk": {"limit": 0.05}, "robust": robust})

    words = " ".join(told(answer(policy, family=6), 80).split())

    assert (
        "at prior 0.5 (a likelihood ratio of 19, one of 171 against the effect that the study was designed to find "
        "and a p of at most 0.008333 are wanted)."
    ) in words


def test_the_command_tells_size_curve_and_what_a_bare_design_leaves(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / "gatecheck.yaml").write_text(json.dumps(POLICY), encoding="utf-8")

    status = main(["design", "--test", "two-sample-t", "--effect", "0.5", str(tmp_path)])

    text = capsys.readouterr().out
    words = " ".join(text.split())
    assert status == 0
    assert words.startswith(
        "102 units per group for a claim on a true effect of 0.5 (two-sample-t) to stand with 80 % probability "
        "under the policy field-station reporting policy, weighed against the effect as observed at prior 0.5 (a "
        "likelihood ratio of 19 is wanted)."
    )
    assert "A design with 80 % power at 0.05 alone would take 64 units per group." in words
    assert max(map(len, text.splitlines())) <= 80


def test_the_command_takes_what_belongs_to_a_test(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    status = main([
        "design",
        "--test",
        "two-sample-t",
        "--effect",
        "-0.5",
        "--ratio",
        "2",
        "--sides",
        "1",
        str(tmp_path),
    ])

    words = " ".join(capsys.readouterr().out.split())
    assert status == 0
    assert words.startswith(
        "65 units in the first group and 130 in the second for a claim on a true effect of -0.5"
    )

    assert main(["design", "--test", "one-way-F", "--effect", "0.25", "--groups", "3", str(tmp_path)]) == 0
    assert capsys.readouterr().out.startswith(
        "81 units per group for a claim on a true effect of 0.25 (one-way-F, 3"
    )
    assert main(["design", "--test", "chi-squared", "--effect", "0.3", "--df", "3", str(tmp_path)]) == 0
    assert "(chi-squared, 3 df)" in capsys.readouterr().out


def test_the_command_names_family_and_looks(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    arguments = ["--test", "correlation", "--effect", "0.3", "--family", "6", "--looks", "3", "--prior", "0.2"]

    assert main(["design", *arguments, str(tmp_path)]) == 0

    words = " ".join(capsys.readouterr().out.split())
    assert "(correlation), as one of a family of 6, at one of 3 looks (obrien-fleming), to stand" in words
    assert "at prior 0.2 (a likelihood ratio of 76 and a p of at most" in words


@pytest.mark.parametrize(
    ("arguments", "complaint"),
    [
        (["--test", "anova", "--effect", "1"], "argument --test: invalid choice: 'anova'"),
        (["--test", "correlation"], "the following arguments are required: --effect"),
        (["--test", "correlation", "--effect", "x"], "argument --effect: invalid float value: 'x'"),
        (
            ["--test", "correlation", "--effect", "0.3", "--prior", "1"],
            "argument --prior: 1 is no probability above 0 and below 1",
        ),
        (
            ["--test", "correlation", "--effect", "0.3", "--looks", "0"],
            "argument --looks: 0 is no whole number from 1 to 200",
        ),
        (
            ["--test", "correlation", "--effect", "0.3", "--family", "1001"],
            "argument --family: 1001 is no whole number from 1 to 1000",
        ),
        (
            ["--test", "log-rank", "--effect", "0.3", "--ratio", "0"],
            "argument --ratio: 0 is no ratio from 0.01 to 100",
        ),
        (["--test", "log-rank", "--effect", "0.3", "--ratio", "nan"], "nan is no ratio from 0.01 to 100"),
        (["--test", "one-way-F", "--effect", "0.3", "--groups", "2.5"], "2.5 is no whole number from 1 to 1000"),
        (["--test", "one-way-F", "--effect", "0.3", "--assurance", "most"], "most is no probability above 0"),
        (["--test", "log-rank", "--effect", "0.3", "--sides", "3"], "argument --sides: invalid choice: 3"),
    ],
)
def test_what_the_command_does_not_know_exits_with_2(
    capsys: pytest.CaptureFixture[str], arguments: list[str], complaint: str
) -> None:
    with pytest.raises(SystemExit, match="2"):
        main(["design", *arguments])

    told_wrong = capsys.readouterr().err
    assert told_wrong.startswith("usage: gatecheck design")
    assert complaint in told_wrong


def test_the_command_takes_every_test_that_there_is() -> None:
    """The arguments repeat their names, since to read them from the model would cost start-up time."""
    assert get_args(PlannedTest) == TESTS
    assert set(EFFECTS) == set(TESTS)


def test_what_does_not_go_together_exits_with_2(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["design", "--test", "correlation", "--effect", "1.2", str(tmp_path)]) == 2
    assert capsys.readouterr().err == (
        "gatecheck: --effect 1.2 is no effect of correlation: give r, other than 0 and at most 0.9999 in size.\n"
    )


def test_a_policy_that_cannot_be_read_gives_no_design(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "gatecheck.yaml").write_text("- 1", encoding="utf-8")

    assert main(["design", "--test", "correlation", "--effect", "0.3", str(tmp_path)]) == 3
    assert "the policy cannot be read" in capsys.readouterr().err
