"""Families of tests: laws, second routes, closed testing by brute force, and simulated error rates."""

from __future__ import annotations

from itertools import combinations
from math import inf, nan, sqrt
from typing import TYPE_CHECKING

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats
from statsmodels.stats.multitest import multipletests

from gatecheck.weigh.families import (
    Procedure,
    adjusted_p,
    log_adjusted_p,
    rejects,
    share_of_true_nulls,
    weighted_bonferroni,
    weighted_holm,
)
from gatecheck.weigh.graphs import graph_adjusted_p

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

    from numpy.typing import NDArray

    Array = NDArray[np.float64]

ALL = list(Procedure)
ORDERLESS = [procedure for procedure in ALL if procedure != Procedure.FIXED_SEQUENCE]
FALSE_DISCOVERY = (Procedure.BENJAMINI_HOCHBERG, Procedure.BENJAMINI_YEKUTIELI)
COARSE = 1e-320
P = st.one_of(st.floats(0, 1), st.sampled_from([0.0, 0.01, 0.02, 0.05, 1.0]), st.floats(0, 1e-3))
FAMILIES = st.lists(P, min_size=1, max_size=12)
SMALL_FAMILIES = st.lists(P, min_size=1, max_size=6)


def not_above(lower: Array, upper: Array) -> bool:
    """Whether no value exceeds the other by more than rounding, which is coarse near the smallest double."""
    return bool((lower <= upper * (1 + 1e-14) + COARSE).all())


@given(FAMILIES)
def test_from_the_strictest_to_the_mildest(p: list[float]) -> None:
    raw, bonferroni, holm, hochberg, hommel, bh, by, sequence = (adjusted_p(procedure, p) for procedure in ALL)

    assert raw.tolist() == p
    assert not_above(holm, bonferroni)
    assert not_above(hochberg, holm)
    assert not_above(hommel, hochberg)
    assert not_above(bh, hommel)
    assert not_above(bh, by)
    assert not_above(raw, bh)
    assert not_above(raw, sequence)


@pytest.mark.parametrize("procedure", ORDERLESS)
@given(p=FAMILIES, seed=st.integers(0, 2**32 - 1))
@settings(max_examples=40)
def test_order_plays_no_part(procedure: Procedure, p: list[float], seed: int) -> None:
    order = np.random.default_rng(seed).permutation(len(p))

    np.testing.assert_array_equal(adjusted_p(procedure, np.array(p)[order]), adjusted_p(procedure, p)[order])


@pytest.mark.parametrize("procedure", ALL)
@given(p=FAMILIES, where=st.integers(0, 11), larger=st.floats(0, 1))
@settings(max_examples=40)
def test_a_larger_p_value_helps_none(procedure: Procedure, p: list[float], where: int, larger: float) -> None:
    place = where % len(p)
    raised = [max(value, larger) if i == place else value for i, value in enumerate(p)]

    assert not_above(adjusted_p(procedure, p), adjusted_p(procedure, raised))


@pytest.mark.parametrize("procedure", [procedure for procedure in ALL if procedure not in FALSE_DISCOVERY])
@given(p=FAMILIES, one_more=P)
@settings(max_examples=40)
def test_one_more_member_helps_none(procedure: Procedure, p: list[float], one_more: float) -> None:
    assert not_above(adjusted_p(procedure, p), adjusted_p(procedure, [*p, one_more])[:-1])


@pytest.mark.parametrize("procedure", ALL)
@given(p=FAMILIES)
@settings(max_examples=40)
def test_one_more_member_without_any_effect_helps_none(procedure: Procedure, p: list[float]) -> None:
    """The share of false rejections may fall by a further true one; by a p value of 1 it never does."""
    assert not_above(adjusted_p(procedure, p), adjusted_p(procedure, [*p, 1.0])[:-1])


def test_one_more_rejection_can_help_the_share_of_false_ones() -> None:
    """Of three with one clear rejection .04 is the second; of two without it, it was the first."""
    assert adjusted_p(Procedure.BENJAMINI_HOCHBERG, [0.04, 0.9]) == pytest.approx([0.08, 0.9], rel=1e-14)
    assert adjusted_p(Procedure.BENJAMINI_HOCHBERG, [0.04, 0.9, 0.001])[0] == pytest.approx(0.06, rel=1e-14)


@pytest.mark.parametrize("procedure", ORDERLESS)
@given(p=FAMILIES)
@settings(max_examples=40)
def test_adjusting_keeps_the_order_and_the_ties(procedure: Procedure, p: list[float]) -> None:
    adjusted = adjusted_p(procedure, p)

    assert (np.diff(adjusted[np.argsort(p, kind="stable")]) >= 0).all()
    for value in set(p):
        assert np.unique(adjusted[np.array(p) == value]).size == 1
    assert ((adjusted >= 0) & (adjusted <= 1)).all()


@pytest.mark.parametrize("procedure", ALL)
@given(p=FAMILIES)
@settings(max_examples=40)
def test_logarithms_give_the_same(procedure: Procedure, p: list[float]) -> None:
    with np.errstate(divide="ignore"):
        in_logs = np.exp(log_adjusted_p(procedure, np.log(p)))

    np.testing.assert_allclose(in_logs, adjusted_p(procedure, p), rtol=1e-12, atol=COARSE)


def test_p_values_below_any_double() -> None:
    """Adjusting adds logarithms of small factors, also where the p values themselves underflow."""
    log_p = [-2000.0, -1000.0, -3000.0]

    bonferroni, holm = (log_adjusted_p(kind, log_p) for kind in (Procedure.BONFERRONI, Procedure.HOLM))
    assert bonferroni == pytest.approx([-2000 + np.log(3), -1000 + np.log(3), -3000 + np.log(3)], rel=1e-15)
    assert holm == pytest.approx([-2000 + np.log(2), -1000, -3000 + np.log(3)], rel=1e-15)
    assert log_adjusted_p(Procedure.BENJAMINI_HOCHBERG, log_p) == pytest.approx(
        [-2000 + np.log(3 / 2), -1000, -3000 + np.log(3)], rel=1e-15
    )
    assert log_adjusted_p(Procedure.HOLM, [-inf, 0.0]).tolist() == [-inf, 0.0]
    assert adjusted_p(Procedure.HOLM, [5e-324, 1.0]).tolist() == [1e-323, 1.0]


@pytest.mark.parametrize(
    ("procedure", "name"),
    [
        (Procedure.BONFERRONI, "bonferroni"),
        (Procedure.HOLM, "holm"),
        (Procedure.HOCHBERG, "simes-hochberg"),
        (Procedure.HOMMEL, "hommel"),
        (Procedure.BENJAMINI_HOCHBERG, "fdr_bh"),
        (Procedure.BENJAMINI_YEKUTIELI, "fdr_by"),
    ],
)
@pytest.mark.parametrize("size", [1, 2, 3, 10, 57])
def test_against_statsmodels(procedure: Procedure, name: str, size: int) -> None:
    rng = np.random.default_rng(size)
    for _ in range(4):
        p = rng.uniform(size=size) ** 2
        rejected, adjusted, *_ = multipletests(p, alpha=0.1, method=name)
        np.testing.assert_allclose(adjusted_p(procedure, p), adjusted, rtol=1e-13)
        assert rejects(procedure, p, 0.1).tolist() == rejected.tolist()


def test_against_scipy() -> None:
    p = np.random.default_rng(5).uniform(size=200) ** 3

    expected = stats.false_discovery_control(p, method="bh")
    np.testing.assert_allclose(adjusted_p(Procedure.BENJAMINI_HOCHBERG, p), expected, rtol=1e-13)
    expected = stats.false_discovery_control(p, method="by")
    np.testing.assert_allclose(adjusted_p(Procedure.BENJAMINI_YEKUTIELI, p), expected, rtol=1e-13)


def sets_with(member: int, size: int) -> Iterator[list[int]]:
    others = [other for other in range(size) if other != member]
    for count in range(size):
        for chosen in combinations(others, count):
            yield [member, *chosen]


def closed(p: Array, of_set: Callable[[list[int]], float]) -> list[float]:
    """Adjusted p values of the closed test: the largest p value of all sets that hold the member."""
    return [max(of_set(chosen) for chosen in sets_with(member, p.size)) for member in range(p.size)]


@given(SMALL_FAMILIES)
@settings(max_examples=60, deadline=None)
def test_closed_testing_by_brute_force(p: list[float]) -> None:
    raw = np.array(p)

    def smallest(chosen: list[int]) -> float:
        return float(min(1.0, len(chosen) * raw[chosen].min()))

    def simes(chosen: list[int]) -> float:
        ranked = np.sort(raw[chosen])
        return float(min(1.0, (len(chosen) * ranked / np.arange(1, len(chosen) + 1)).min()))

    np.testing.assert_allclose(adjusted_p(Procedure.HOLM, raw), closed(raw, smallest), rtol=1e-14, atol=COARSE)
    np.testing.assert_allclose(adjusted_p(Procedure.HOMMEL, raw), closed(raw, simes), rtol=1e-14, atol=COARSE)


@given(SMALL_FAMILIES, st.lists(st.floats(0.01, 1), min_size=6, max_size=6))
@settings(max_examples=60, deadline=None)
def test_weights_by_brute_force(p: list[float], all_weights: list[float]) -> None:
    raw, weights = np.array(p), np.array(all_weights[: len(p)])

    def smallest(chosen: list[int]) -> float:
        return float(min(1.0, (raw[chosen] / weights[chosen]).min() * weights[chosen].sum()))

    np.testing.assert_allclose(weighted_holm(raw, weights), closed(raw, smallest), rtol=1e-12, atol=COARSE)
    everyone = np.minimum(raw / weights * weights.sum(), 1)
    np.testing.assert_allclose(weighted_bonferroni(raw, weights), everyone, rtol=1e-12, atol=COARSE)


@given(FAMILIES, st.floats(1e-3, 1e3))
def test_equal_weights_are_none(p: list[float], weight: float) -> None:
    weights = np.full(len(p), weight)

    np.testing.assert_allclose(
        weighted_bonferroni(p, weights), adjusted_p(Procedure.BONFERRONI, p), rtol=1e-13, atol=COARSE
    )
    np.testing.assert_allclose(weighted_holm(p, weights), adjusted_p(Procedure.HOLM, p), rtol=1e-13, atol=COARSE)


def test_weights_worked_by_hand() -> None:
    """Ratios .01/.25 = .04 and .02/.75 = .0267: the second goes first, at its share, and hands on everything."""
    np.testing.assert_allclose(weighted_bonferroni([0.01, 0.02], [1, 3]), [0.04, 0.08 / 3], rtol=1e-15)
    np.testing.assert_allclose(weighted_holm([0.01, 0.02], [1, 3]), [0.08 / 3, 0.08 / 3], rtol=1e-15)
    np.testing.assert_allclose(weighted_holm([0.03, 0.02], [1, 3]), [0.03, 0.08 / 3], rtol=1e-15)


def test_a_level_that_is_just_reached_rejects() -> None:
    """Of five, .01 is .05 by Bonferroni, to the last digit."""
    p = [0.01, 0.5, 0.5, 0.5, 0.5]

    for procedure in (Procedure.BONFERRONI, Procedure.HOLM, Procedure.BENJAMINI_HOCHBERG):
        assert rejects(procedure, p, 0.05).tolist() == [True, False, False, False, False]


def test_fixed_sequence_ends_at_the_first_failure() -> None:
    p = [0.01, 0.04, 0.2, 0.001]

    assert adjusted_p(Procedure.FIXED_SEQUENCE, p).tolist() == [0.01, 0.04, 0.2, 0.2]
    assert rejects(Procedure.FIXED_SEQUENCE, p, 0.05).tolist() == [True, True, False, False]


def correlated_p(rng: np.random.Generator, effects: Array, correlation: float) -> Array:
    """One-sided p values of normal statistics with one common factor."""
    common, own = rng.normal(), rng.normal(size=effects.size)
    return np.asarray(stats.norm.sf(effects + sqrt(correlation) * common + sqrt(1 - correlation) * own))


@pytest.mark.parametrize("correlation", [0.0, 0.5])
@pytest.mark.parametrize("procedure", [Procedure.HOLM, Procedure.HOCHBERG, Procedure.HOMMEL])
def test_simulated_chance_of_any_false_rejection(procedure: Procedure, correlation: float) -> None:
    rng, runs = np.random.default_rng(11), 2000
    effects = np.array([3.0, 3.0, 0.0, 0.0, 0.0, 0.0])
    false = sum(
        bool(rejects(procedure, correlated_p(rng, effects, correlation), 0.1)[2:].any()) for _ in range(runs)
    )

    assert false / runs <= 0.1 + 3 * sqrt(0.1 * 0.9 / runs)
    assert false / runs >= 0.03


@pytest.mark.parametrize(
    ("procedure", "expected"),
    [
        # With independent p values it is exactly the level times the share of members without an effect.
        (Procedure.BENJAMINI_HOCHBERG, 0.2 * 15 / 20),
        (Procedure.BENJAMINI_YEKUTIELI, 0.2 * 15 / 20 / float((1 / np.arange(1, 21)).sum())),
    ],
)
def test_simulated_share_of_false_rejections(procedure: Procedure, expected: float) -> None:
    rng, runs = np.random.default_rng(12), 3000
    effects = np.repeat([2.5, 0.0], [5, 15])
    shares = np.empty(runs)
    for run in range(runs):
        rejected = rejects(procedure, correlated_p(rng, effects, 0.0), 0.2)
        shares[run] = rejected[5:].sum() / max(rejected.sum(), 1)

    assert abs(shares.mean() - expected) <= 4 * shares.std() / sqrt(runs)


def test_simulated_share_of_true_nulls() -> None:
    rng = np.random.default_rng(13)
    p = correlated_p(rng, np.repeat([4.0, 0.0], [2000, 6000]), 0.0)
    error = sqrt(0.75 * 0.25 / 6000) / 0.5

    assert abs(float(share_of_true_nulls(p, 0.5)) - 0.75) <= 4 * error


def test_share_of_true_nulls_by_threshold() -> None:
    p = [0.01, 0.02, 0.5, 0.9]

    found = share_of_true_nulls(p, [0.0, 0.25, 0.5, 0.6, 0.95, 1.0, -0.1, nan])

    np.testing.assert_allclose(found[:5], [1.0, 0.5 / 0.75, 1.0, 0.25 / 0.4, 0.0], rtol=1e-15)
    assert np.isnan(found[5:]).all()
    assert np.isnan(share_of_true_nulls([], 0.5))
    assert np.isnan(share_of_true_nulls([0.5, nan], [0.5, 0.1])).tolist() == [True, True]


BAD_FAMILIES: list[list[float]] = [[0.5, nan], [0.5, -0.1], [0.5, 1.1], [inf, 0.5], [-inf, 0.5]]


@pytest.mark.parametrize("p", BAD_FAMILIES)
def test_an_incomplete_family_is_undecided(p: list[float]) -> None:
    for procedure in ALL:
        assert np.isnan(adjusted_p(procedure, p)).tolist() == [True, True]
        assert rejects(procedure, p, 0.05).tolist() == [False, False]
    assert np.isnan(weighted_bonferroni(p, [1, 1])).all()
    assert np.isnan(weighted_holm(p, [1, 1])).all()
    assert np.isnan(graph_adjusted_p(p, [0.5, 0.5], [[0, 1], [1, 0]])).all()


@pytest.mark.parametrize("log_p", [[-1.0, nan], [-1.0, 0.1], [inf, -1.0]])
def test_logarithms_that_no_p_value_has(log_p: list[float]) -> None:
    for procedure in ALL:
        assert np.isnan(log_adjusted_p(procedure, log_p)).tolist() == [True, True]


@pytest.mark.parametrize(
    "weights", [[1, 0], [1, -1], [-1, -1], [1, nan], [1, inf], [1e308, 1e308], [1, 1e-301], [1], [[1, 1]]]
)
def test_weights_outside_the_domain(weights: list[float]) -> None:
    assert np.isnan(weighted_bonferroni([0.1, 0.2], weights)).tolist() == [True, True]
    assert np.isnan(weighted_holm([0.1, 0.2], weights)).tolist() == [True, True]


def test_an_empty_family_and_more_than_one() -> None:
    for procedure in ALL:
        assert adjusted_p(procedure, []).shape == (0,)
        assert np.isnan(adjusted_p(procedure, [[0.1, 0.2]])).tolist() == [[True, True]]
    assert graph_adjusted_p([], [], np.empty((0, 0))).shape == (0,)


def test_a_family_of_thousands() -> None:
    p = np.random.default_rng(9).uniform(size=3000) ** 4

    hommel, hochberg, bh = (
        adjusted_p(kind, p) for kind in (Procedure.HOMMEL, Procedure.HOCHBERG, Procedure.BENJAMINI_HOCHBERG)
    )
    assert not_above(hommel, hochberg)
    assert not_above(bh, hommel)
    np.testing.assert_allclose(hommel, multipletests(p, method="hommel")[1], rtol=1e-12)


def complete(size: int) -> Array:
    """Each member hands on to all others alike."""
    return (np.ones((size, size)) - np.eye(size)) / max(size - 1, 1)


@given(FAMILIES)
@settings(max_examples=60, deadline=None)
def test_graphs_of_known_procedures(p: list[float]) -> None:
    size = len(p)
    equal, first = np.full(size, 1 / size), np.eye(size)[0]

    holm = graph_adjusted_p(p, equal, complete(size))
    np.testing.assert_allclose(holm, adjusted_p(Procedure.HOLM, p), rtol=1e-12, atol=COARSE)
    bonferroni = graph_adjusted_p(p, equal, np.zeros((size, size)))
    np.testing.assert_allclose(bonferroni, adjusted_p(Procedure.BONFERRONI, p), rtol=1e-12, atol=COARSE)
    sequence = graph_adjusted_p(p, first, np.eye(size, k=1))
    np.testing.assert_allclose(sequence, adjusted_p(Procedure.FIXED_SEQUENCE, p), rtol=1e-12, atol=COARSE)


@given(SMALL_FAMILIES, st.lists(st.floats(0.01, 1), min_size=6, max_size=6))
@settings(max_examples=40, deadline=None)
def test_weighted_holm_is_a_graph(p: list[float], all_weights: list[float]) -> None:
    """Each member hands on to the others in proportion to their weights."""
    weights = np.array(all_weights[: len(p)]) / sum(all_weights[: len(p)])
    links = np.tile(weights, (len(p), 1)) * (1 - np.eye(len(p)))
    links /= np.maximum(links.sum(axis=1, keepdims=True), 1e-300)

    np.testing.assert_allclose(
        graph_adjusted_p(p, weights, links), weighted_holm(p, weights), rtol=1e-10, atol=COARSE
    )


def weights_of_set(chosen: list[int], weights: Array, links: Array) -> Array:
    """Weights after all others have handed on theirs, one at a time, written out element by element."""
    weights, links = weights.copy(), links.copy()
    left = list(range(weights.size))
    for gone in [member for member in left if member not in chosen]:
        left.remove(gone)
        before = links.copy()
        for to in left:
            weights[to] += weights[gone] * before[gone, to]
            for from_ in left:
                loop = before[from_, gone] * before[gone, from_]
                direct = before[from_, to] + before[from_, gone] * before[gone, to]
                links[from_, to] = direct / (1 - loop) if from_ != to and loop < 1 - 1e-9 else 0.0
    return weights


@pytest.mark.parametrize("seed", range(12))
def test_graphs_by_closed_testing(seed: int) -> None:
    """Each set of members is tested by weighted Bonferroni with the weights that the graph leaves to it."""
    rng = np.random.default_rng(seed)
    size = 2 + seed % 4
    links = rng.uniform(size=(size, size)) * (rng.uniform(size=(size, size)) < 0.7)
    np.fill_diagonal(links, 0)
    links /= np.maximum(links.sum(axis=1, keepdims=True), 1e-300)
    weights = rng.uniform(size=size) * (rng.uniform(size=size) < 0.7)
    weights /= max(weights.sum(), 1e-300) * rng.uniform(1, 1.2)
    p = rng.uniform(size=size) ** 3

    def bonferroni(chosen: list[int]) -> float:
        shares = weights_of_set(chosen, weights, links)
        return float(min([1.0, *(p[i] / shares[i] for i in chosen if shares[i] > 0)]))

    np.testing.assert_allclose(graph_adjusted_p(p, weights, links), closed(p, bonferroni), rtol=1e-10)


def test_graph_worked_by_hand() -> None:
    """Two primary members share the level and hand on half to each other, half to their own secondary member.

    First goes .01 at half: .02. The other primary then has .75, 0.03 / .75 = .04, the secondary of the first .25.
    Then the first's secondary has what both leave, 1/2, and so has the other: .04 at half, .08.
    """
    links: list[list[float]] = [[0, 0.5, 0.5, 0], [0.5, 0, 0, 0.5], [0, 1, 0, 0], [1, 0, 0, 0]]

    adjusted = graph_adjusted_p([0.01, 0.03, 0.04, 0.9], [0.5, 0.5, 0, 0], links)

    np.testing.assert_allclose(adjusted, [0.02, 0.04, 0.08, 0.9], rtol=1e-14)


def test_members_that_no_weight_reaches() -> None:
    assert graph_adjusted_p([0.0, 0.0], [1, 0], [[0, 0], [1, 0]]).tolist() == [0.0, 1.0]
    assert graph_adjusted_p([0.0, 0.0], [0, 0], [[0, 1], [1, 0]]).tolist() == [1.0, 1.0]
    assert graph_adjusted_p([1.0, 0.3], [5e-324, 0.5], [[0, 1], [1, 0]]).tolist() == [1.0, 0.6]


@pytest.mark.parametrize(
    ("weights", "links"),
    [
        ([0.5, 0.6], [[0, 1], [1, 0]]),
        ([-0.5, 0.5], [[0, 1], [1, 0]]),
        ([nan, 0.5], [[0, 1], [1, 0]]),
        ([1.0], [[0, 1], [1, 0]]),
        ([0.5, 0.5], [[0, 1.1], [1, 0]]),
        ([0.5, 0.5], [[0.5, 0.5], [1, 0]]),
        ([0.5, 0.5], [[0, -1], [1, 0]]),
        ([0.5, 0.5], [[0, nan], [1, 0]]),
        ([0.5, 0.5], [[0, 1]]),
    ],
)
def test_graphs_outside_the_domain(weights: list[float], links: list[list[float]]) -> None:
    assert np.isnan(graph_adjusted_p([0.1, 0.2], weights, links)).tolist() == [True, True]


def test_a_graph_of_many_parts() -> None:
    """Tenths that miss 1 by rounding are shares all the same, and arguments stay as they were."""
    weights, links = np.full(10, 0.1), np.full((10, 10), 1 / 9) - np.eye(10) / 9
    before = weights.copy(), links.copy()
    p = np.random.default_rng(2).uniform(size=10) / 20

    np.testing.assert_allclose(graph_adjusted_p(p, weights, links), adjusted_p(Procedure.HOLM, p), rtol=1e-12)
    np.testing.assert_array_equal(weights, before[0])
    np.testing.assert_array_equal(links, before[1])
