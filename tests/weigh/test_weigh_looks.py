"""Repeated looks: second routes, laws, simulation, and what is outside the domain."""

from __future__ import annotations

from math import inf, nan, sqrt
from typing import TYPE_CHECKING

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import integrate, stats

from gatecheck.weigh import looks, roots
from gatecheck.weigh.looks import (
    apart,
    drift_needed,
    error_of_looks_taken,
    error_of_unplanned_looks,
    exit_probabilities,
    exit_probabilities_by_side,
    power_of_looks,
    type_one_error,
)
from gatecheck.weigh.spending import (
    BoundaryKind,
    boundary,
    nominal_p,
    spending_boundary,
    spent_obrien_fleming,
    spent_pocock,
)

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    Array = NDArray[np.float64]

KINDS = list(BoundaryKind)
UNEVEN = np.array([0.1, 0.35, 0.4, 0.8, 1.0])
#: Steps between looks; the sum is the information.
STEPS = st.lists(st.floats(0.02, 1), min_size=1, max_size=6)


def second_look(first: float, second: float, information: list[float], drift: float, sides: int) -> float:
    """Probability to pass the first look and leave at the second, by adaptive quadrature over the first z."""
    (early, late), step = information, sqrt(information[1] - information[0])

    def leaves(z: float) -> float:
        mean = z * sqrt(early) + drift * (late - early)
        upper = stats.norm.sf((second * sqrt(late) - mean) / step)
        lower = stats.norm.cdf((-second * sqrt(late) - mean) / step) if sides == 2 else 0.0
        return float(stats.norm.pdf(z - drift * sqrt(early)) * (upper + lower))

    low, turn = (-first if sides == 2 else -12.0), min(second * sqrt(late / early), first)
    ways = [(low, -turn), (-turn, turn), (turn, first)] if sides == 2 else [(low, turn), (turn, first)]
    return sum(integrate.quad(leaves, *way, epsabs=0, epsrel=1e-12, limit=400)[0] for way in ways)


@pytest.mark.parametrize("sides", [1, 2])
@pytest.mark.parametrize(
    ("first", "second", "information", "drift"),
    [
        (1.96, 1.96, [0.5, 1.0], 0.0),
        (2.8, 1.977, [0.5, 1.0], 2.8),
        (2.5, 2.2, [0.1, 1.0], -1.0),
        (2.2, 2.3, [0.9, 1.0], 3.0),
        (2.0, 2.0, [0.998, 1.0], 0.0),
        (4.0, 0.5, [3.0, 50.0], 0.1),
        (7.1, 7.2, [0.5, 1.0], 0.0),
    ],
)
def test_two_looks_against_adaptive_quadrature(
    sides: int, first: float, second: float, information: list[float], drift: float
) -> None:
    found = exit_probabilities([first, second], information, drift, sides=sides)
    mean = drift * sqrt(information[0])
    at_first = stats.norm.sf(first - mean) + (stats.norm.cdf(-first - mean) if sides == 2 else 0.0)

    assert float(found[0]) == pytest.approx(at_first, rel=1e-13)
    expected = second_look(first, second, information, drift, sides)
    assert float(found[1]) == pytest.approx(expected, rel=1e-10, abs=1e-15)


@pytest.mark.parametrize("drift", [0.0, 2.0])
def test_four_looks_against_the_multivariate_normal(drift: float) -> None:
    information, bounds = np.array([0.2, 0.3, 0.7, 1.0]), np.array([2.5, 2.4, 2.2, 2.1])
    covariance = np.sqrt(np.minimum.outer(information, information) / np.maximum.outer(information, information))
    normal = stats.multivariate_normal(mean=drift * np.sqrt(information), cov=covariance, seed=1)
    never = float(normal.cdf(bounds, lower_limit=-bounds))

    assert float(exit_probabilities(bounds, information, drift).sum()) == pytest.approx(1 - never, abs=2e-5)


@pytest.mark.parametrize(
    "information",
    [
        [1, 2, 3, 4, 5, 6, 7, 8, 9, 10],
        [0.01, 0.5, 0.501, 0.502, 1.0],
        [0.001, 0.3, 0.302, 0.9, 0.99, 1.0],
        [0.97, 0.98, 0.99, 1.0],
    ],
)
@pytest.mark.parametrize(("limit", "drift"), [(1.96, 0.0), (2.5, 1.5), (5.0, 4.0)])
def test_more_nodes_change_nothing(
    monkeypatch: pytest.MonkeyPatch, information: list[float], limit: float, drift: float
) -> None:
    bounds = np.full(len(information), limit)
    usual = exit_probabilities(bounds, information, drift / sqrt(information[-1]))
    monkeypatch.setattr(looks, "LEAST_NODES", 160)
    monkeypatch.setattr(looks, "NODES_PER_STEP", 9.0)

    finer = exit_probabilities(bounds, information, drift / sqrt(information[-1]))

    np.testing.assert_allclose(usual, finer, rtol=0, atol=1e-13)


def test_too_few_nodes_are_no_answer(monkeypatch: pytest.MonkeyPatch) -> None:
    for name in ("LEAST_NODES", "NODES_TOGETHER"):
        monkeypatch.setattr(looks, name, 2)
    monkeypatch.setattr(looks, "NODES_PER_STEP", 0.0)
    monkeypatch.setattr(looks, "NODES_AT_LEAST_BESIDE", 0)

    with pytest.raises(ArithmeticError, match=r"the probabilities of the looks add up to 0\.53\d+ instead of 1"):
        exit_probabilities([3.0, 3.0, 3.0], [1, 2, 3])


@pytest.mark.parametrize("sides", [1, 2])
@pytest.mark.parametrize("information", [[20, 40, 60, 80, 100], [20, 22, 24, 26, 100], [0.1, 0.9, 1.0], [7.0]])
@pytest.mark.parametrize("alpha", [0.05, 0.001])
def test_unadjusted_looks_as_taken_against_the_multivariate_normal(
    information: list[float], alpha: float, sides: int
) -> None:
    """The source is scipy.stats.multivariate_normal, which integrates by random numbers, good to 1e-5."""
    levels, limits = np.array(information), np.full(len(information), -stats.norm.ppf(alpha / sides))
    covariance = np.sqrt(np.minimum.outer(levels, levels) / np.maximum.outer(levels, levels))
    normal = stats.multivariate_normal(cov=covariance, seed=1)
    never = float(normal.cdf(limits, lower_limit=-limits if sides == 2 else np.full(limits.size, -inf)))

    assert error_of_looks_taken(information, alpha, sides=sides) == pytest.approx(1 - never, abs=2e-5)


def test_unadjusted_looks_by_equal_steps_are_those_of_the_table() -> None:
    """Both routes at five looks: two-sided by half of alpha a side."""
    found = error_of_looks_taken([1, 2, 3, 4, 5], 0.05)

    assert found == pytest.approx(float(error_of_unplanned_looks(5, 0.05)), rel=1e-13)


@pytest.mark.parametrize(
    ("information", "alpha", "sides"),
    [([1, 2], 0.0, 2), ([1, 2], 1.0, 1), ([1, 2], nan, 2), ([1, 2], 0.05, 3), ([2, 1], 0.05, 2), ([], 0.05, 2)],
)
def test_unadjusted_looks_outside_the_domain(information: list[float], alpha: float, sides: int) -> None:
    assert np.isnan(error_of_looks_taken(information, alpha, sides=sides))


@given(st.lists(st.floats(1, 1e5), min_size=1, max_size=40, unique=True).map(sorted))
@settings(max_examples=60, deadline=None)
def test_looks_kept_apart_can_be_computed(levels: list[float]) -> None:
    kept = apart(levels)

    assert kept[-1] == levels[-1]
    assert set(kept.tolist()) <= set(levels)
    left_out = np.array([each for each in levels if each not in kept.tolist()])
    after = np.array([kept[kept > each].min() for each in left_out])
    assert (after - left_out < looks.LEAST_STEP * levels[-1]).all()
    assert 0.05 - 1e-12 <= error_of_looks_taken(kept, 0.05) < 1


def test_no_looks_are_none_apart() -> None:
    assert apart([]).size == 0


def simulated_exits(bounds: Array, information: Array, drift: float, seed: int, paths: int) -> Array:
    """Share of random paths that leave upward or downward first at each look."""
    steps = np.diff(information, prepend=0.0)
    normal = np.random.default_rng(seed).normal(size=(paths, steps.size))
    score = np.cumsum(drift * steps + np.sqrt(steps) * normal, axis=1)
    crossed = np.abs(score / np.sqrt(information)) >= bounds
    first = np.where(crossed.any(axis=1), crossed.argmax(axis=1), -1)
    return np.array([(first == look).mean() for look in range(steps.size)])


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("drift", [0.0, 2.5])
def test_simulated_studies(kind: BoundaryKind, drift: float) -> None:
    """Four standard errors each: by chance one of fifty shares is farther in 0.3 % of runs; the seed is fixed."""
    paths = 100_000
    bounds = boundary(kind, UNEVEN, 0.05)
    exact = exit_probabilities(bounds, UNEVEN, drift)

    simulated = simulated_exits(bounds, UNEVEN, drift, seed=7, paths=paths)

    assert (np.abs(simulated - exact) <= 4 * np.sqrt(exact * (1 - exact) / paths) + 1 / paths).all()


def test_simulated_unplanned_looks() -> None:
    paths = 100_000
    error = float(error_of_unplanned_looks(7, 0.05))
    simulated = simulated_exits(np.full(7, 1.959963984540054), np.arange(1.0, 8), 0.0, seed=3, paths=paths).sum()

    assert abs(simulated - error) <= 4 * sqrt(error * (1 - error) / paths)


@given(st.sampled_from(KINDS), STEPS, st.floats(1e-6, 0.4), st.sampled_from([1, 2]))
@settings(max_examples=40, deadline=None)
def test_boundaries_spend_alpha_exactly(kind: BoundaryKind, steps: list[float], alpha: float, sides: int) -> None:
    information = np.cumsum(steps)
    bounds = boundary(kind, information, alpha, sides=sides)

    if np.isnan(bounds).any():
        assert kind == BoundaryKind.HAYBITTLE_PETO
        interim = information[:-1]
        assert type_one_error([3.0] * interim.size, interim, sides=sides) >= alpha * (1 - 1e-12)
    else:
        assert type_one_error(bounds, information, sides=sides) == pytest.approx(alpha, abs=1e-13, rel=1e-10)


@given(st.sampled_from(KINDS), STEPS, st.floats(1e-3, 1e3))
@settings(max_examples=30, deadline=None)
def test_the_unit_of_information_plays_no_part(kind: BoundaryKind, steps: list[float], unit: float) -> None:
    information = np.cumsum(steps)
    bounds = boundary(kind, information, 0.05)

    np.testing.assert_allclose(boundary(kind, unit * information, 0.05), bounds, rtol=1e-9)
    exits = exit_probabilities(bounds, information, 1.5)
    np.testing.assert_allclose(
        exit_probabilities(bounds, unit * information, 1.5 / sqrt(unit)), exits, rtol=1e-9, atol=1e-15
    )


@given(STEPS, st.floats(-5, 5), st.floats(0, 4))
@settings(max_examples=40, deadline=None)
def test_laws_of_exits(steps: list[float], drift: float, limit: float) -> None:
    information, bounds = np.cumsum(steps), np.full(len(steps), limit)
    upper, lower = exit_probabilities_by_side(bounds, information, drift)
    mirrored = exit_probabilities_by_side(bounds, information, -drift)
    one_sided = exit_probabilities(bounds, information, drift, sides=1)

    np.testing.assert_allclose([lower, upper], mirrored, rtol=1e-9, atol=1e-14)
    assert (np.concatenate([upper, lower, one_sided]) >= 0).all()
    assert float((upper + lower).sum()) <= 1 + 1e-12
    assert float(upper.sum()) <= float(one_sided.sum()) + 1e-13
    assert power_of_looks(bounds, information, drift) == pytest.approx(float(upper.sum()), rel=1e-15)


def test_a_look_that_cannot_stop_is_no_look() -> None:
    without = exit_probabilities([2.2, 2.1], [1, 3], 1.0)

    np.testing.assert_allclose(exit_probabilities([2.2, inf, 2.1], [1, 2, 3], 1.0)[[0, 2]], without, rtol=1e-12)
    assert exit_probabilities([2.2, inf, 2.1], [1, 2, 3], 1.0)[1] == 0


def test_a_look_that_always_stops_is_the_last() -> None:
    assert exit_probabilities([0.0, 2.0], [1, 2]).tolist() == [1.0, 0.0]
    assert exit_probabilities([-inf, 2.0], [1, 2], sides=1).tolist() == [1.0, 0.0]
    assert exit_probabilities([2.0, 2.0], [1, 2], 7000.0).tolist() == [1.0, 0.0]


@pytest.mark.parametrize("unit", [1e-300, 1e300])
def test_any_unit_of_information_will_do(unit: float) -> None:
    usual = exit_probabilities([2.5, 2.1], [1, 2], 1.0)
    found = exit_probabilities([2.5, 2.1], [unit, 2 * unit], 1.0 / sqrt(unit))

    np.testing.assert_allclose(found, usual, rtol=1e-12)


def test_more_looks_cost_more() -> None:
    errors = error_of_unplanned_looks(np.arange(1, 41)[:, None], [0.05, 0.01, 0.001])

    assert errors.shape == (40, 3)
    np.testing.assert_allclose(errors[0], [0.05, 0.01, 0.001], rtol=1e-14)
    assert (np.diff(errors, axis=0) > 0).all()
    assert (errors <= np.arange(1, 41)[:, None] * np.array([0.05, 0.01, 0.001]) + 1e-15).all()
    np.testing.assert_allclose(errors[16, 1], error_of_unplanned_looks(17, 0.01), rtol=1e-14)


def test_pocock_is_the_inverse_of_unplanned_looks() -> None:
    nominal = nominal_p(boundary(BoundaryKind.POCOCK, np.arange(1, 8), 0.05))

    np.testing.assert_allclose(error_of_unplanned_looks(7, nominal), 0.05, rtol=1e-12)


@pytest.mark.parametrize("sides", [1, 2])
@pytest.mark.parametrize("kind", KINDS)
def test_one_look_is_an_ordinary_test(kind: BoundaryKind, sides: int) -> None:
    found = boundary(kind, [17.0], 0.05, sides=sides)

    assert float(found[0]) == pytest.approx(float(stats.norm.isf(0.05 / sides)), rel=1e-14)
    assert float(nominal_p(found, sides=sides)[0]) == pytest.approx(0.05, rel=1e-13)


def test_shapes_of_boundaries() -> None:
    """Early looks ask for most with O'Brien-Fleming; Pocock asks for the same at each."""
    pocock, fleming, peto, spending, _ = (boundary(kind, UNEVEN, 0.05) for kind in KINDS)

    assert np.ptp(pocock) == 0
    np.testing.assert_allclose(fleming * np.sqrt(UNEVEN), fleming[-1], rtol=1e-14)
    assert peto[:-1].tolist() == [3.0] * 4
    assert (np.diff(spending) < 0).all()
    assert fleming[0] > peto[0] > pocock[0]
    assert fleming[-1] < pocock[-1]


def test_spending_reaches_what_the_function_says() -> None:
    """The share of the information decides, not the number of the look."""
    for kind, function in (
        (BoundaryKind.SPENDING_OBRIEN_FLEMING, spent_obrien_fleming),
        (BoundaryKind.SPENDING_POCOCK, spent_pocock),
    ):
        spent = np.cumsum(exit_probabilities(boundary(kind, 60 * UNEVEN, 0.05), UNEVEN))
        np.testing.assert_allclose(spent, 2 * function(0.025, UNEVEN), rtol=1e-11, atol=1e-17)


def test_looks_with_nothing_to_spend_never_stop() -> None:
    assert spending_boundary([0.0, 0.0], [1, 2]).tolist() == [inf, inf]
    bounds = spending_boundary([0.0, 0.01, 0.01, 0.05], [1, 2, 3, 4])
    assert np.isinf(bounds).tolist() == [True, False, True, False]
    np.testing.assert_allclose(
        np.cumsum(exit_probabilities(bounds, [1, 2, 3, 4])), [0, 0.01, 0.01, 0.05], rtol=1e-12
    )


# 2 - 2 Phi(z_{alpha/2} / sqrt t) at 40 digits.
@pytest.mark.parametrize(
    ("alpha", "fraction", "spent"),
    [
        (0.05, 0.2, 1.1726446842521166e-5),
        (0.025, 0.2, 5.3887126290587489e-7),
        (0.01, 0.25, 2.5819272972327564e-7),
        (0.005, 0.5, 7.1949523632081671e-5),
        (0.05, 1.0, 0.05),
    ],
)
def test_small_spent_error_keeps_its_digits(alpha: float, fraction: float, spent: float) -> None:
    assert float(spent_obrien_fleming(alpha, fraction)) == pytest.approx(spent, rel=1e-13)


def test_haybittle_peto_that_has_nothing_left() -> None:
    """Ten looks at z = 3 cost some 1.5 %: nothing is left of 1 %, and of 0.25 % not after the first."""
    assert np.isnan(boundary(BoundaryKind.HAYBITTLE_PETO, np.arange(1, 12), 0.01)).all()
    assert np.isnan(boundary(BoundaryKind.HAYBITTLE_PETO, [1, 2], 0.0025)).all()
    assert np.isfinite(boundary(BoundaryKind.HAYBITTLE_PETO, [1, 2], 0.0028)).all()


@given(STEPS, st.floats(0.06, 0.999), st.sampled_from([1, 2]))
@settings(max_examples=30, deadline=None)
def test_the_drift_needed_gives_the_power(steps: list[float], wanted: float, sides: int) -> None:
    information = np.cumsum(steps)
    bounds = boundary(BoundaryKind.POCOCK, information, 0.05, sides=sides)

    drift = drift_needed(bounds, information, wanted, sides=sides)

    assert power_of_looks(bounds, information, drift, sides=sides) == pytest.approx(wanted, abs=1e-12)


def test_drift_needed_of_one_look() -> None:
    exact = float(stats.norm.isf(0.025) + stats.norm.ppf(0.8))

    assert drift_needed([1.959963984540054], [4.0], 0.8, sides=1) == pytest.approx(exact / 2, rel=1e-14)
    assert drift_needed([0.0], [1.0], 0.5, sides=1) == pytest.approx(0.0, abs=1e-15)


@pytest.mark.parametrize(
    ("bounds", "information", "wanted"),
    [
        ([2.0, 2.0], [1, 2], 0.01),
        ([2.0, 2.0], [1, 2], 1.0),
        ([2.0, 2.0], [1, 2], nan),
        ([inf, inf], [1, 2], 0.0),
        ([2e4, 2e4], [1, 2], 0.5),
        ([2.0, nan], [1, 2], 0.5),
        ([2.0, 2.0], [2, 1], 0.5),
    ],
)
def test_drift_that_no_study_has(bounds: list[float], information: list[float], wanted: float) -> None:
    assert np.isnan(drift_needed(bounds, information, wanted))


NO_INFORMATION: list[list[float]] = [
    [0, 1],
    [-1, 1],
    [2, 1],
    [1, 1],
    [1, nan],
    [1, inf],
    [0.9999, 1],
    [nan, 1],
    [-2, -1],
    [1e308, 1e-308],
    [1e308, -1e308],
]


@pytest.mark.parametrize("information", NO_INFORMATION)
def test_levels_of_information_that_no_study_has(information: list[float]) -> None:
    assert np.isnan(exit_probabilities([2, 2], information)).tolist() == [True, True]
    assert np.isnan(type_one_error([2, 2], information))
    for kind in KINDS:
        assert np.isnan(boundary(kind, information, 0.05)).tolist() == [True, True]
    assert np.isnan(spending_boundary([0.01, 0.05], information)).tolist() == [True, True]


@pytest.mark.parametrize(
    ("bounds", "information", "drift", "sides"),
    [
        ([2, -1], [1, 2], 0.0, 2),
        ([2, nan], [1, 2], 0.0, 2),
        ([2, 2], [1, 2, 3], 0.0, 2),
        ([2, 2], [1, 2], nan, 2),
        ([2, 2], [1, 2], inf, 2),
        ([2, 2], [1, 2], 1e300, 2),
        ([2, 2], [1e200, 1e300], 1e300, 2),
        ([2, 2], [1, 2], 0.0, 3),
        ([2, 2], [[1, 2]], 0.0, 2),
    ],
)
def test_looks_outside_the_domain(bounds: list[float], information: list[float], drift: float, sides: int) -> None:
    assert np.isnan(exit_probabilities(bounds, information, drift, sides=sides)).tolist() == [True, True]


def test_no_looks_and_too_many() -> None:
    assert exit_probabilities([], []).tolist() == []
    assert np.isnan([type_one_error([], []), power_of_looks([], [], 1.0), drift_needed([], [], 0.8)]).all()
    assert boundary(BoundaryKind.POCOCK, [], 0.05).tolist() == []
    assert spending_boundary([], []).tolist() == []
    assert np.isnan(exit_probabilities(np.full(1001, 2.0), np.arange(1.0, 1002))).all()


@pytest.mark.parametrize(
    ("alpha", "sides"), [(0.0, 2), (-0.1, 2), (1.0, 2), (0.5, 1), (nan, 2), (1e-16, 2), (0.05, 0)]
)
def test_levels_that_no_boundary_has(alpha: float, sides: int) -> None:
    for kind in KINDS:
        assert np.isnan(boundary(kind, [1, 2], alpha, sides=sides)).all()


@pytest.mark.parametrize("spent", [[0.02, 0.01], [-0.01, 0.05], [0.5, 1.0], [0.01], [nan, 0.05], [0.01, nan]])
def test_spent_error_that_no_study_has(spent: list[float]) -> None:
    assert np.isnan(spending_boundary(spent, [1, 2])).tolist() == [True, True]


def test_rows_outside_the_domain_do_not_spoil_others() -> None:
    looks_made = np.array([0, 1, 2.5, 1001, nan, inf, 2, 2, 2, 2])
    alpha = np.array([0.05, 0.05, 0.05, 0.05, 0.05, 0.05, 0, 1, nan, 0.05])

    found = error_of_unplanned_looks(looks_made, alpha)

    assert np.isnan(found).tolist() == [True, False, True, True, True, True, True, True, True, False]
    assert found[[1, 9]] == pytest.approx([0.05, 0.08311780335451792], rel=1e-14)
    fractions, levels = np.array([0, 0.5, 1.1, 0.5, 0.5]), np.array([0.05, 0.05, 0.05, 1.0, nan])
    for function in (spent_obrien_fleming, spent_pocock):
        assert np.isnan(function(levels, fractions)).tolist() == [True, False, True, True, True]
    assert np.isnan(nominal_p([nan, 2.0, inf])).tolist() == [True, False, False]


def test_very_small_alpha_keeps_its_digits() -> None:
    bounds = boundary(BoundaryKind.POCOCK, [0.5, 1.0], 1e-12)
    limit = float(bounds[0])
    exact = 2 * float(stats.norm.sf(limit)) + second_look(limit, limit, [0.5, 1.0], 0.0, 2)

    assert exact == pytest.approx(1e-12, rel=1e-9)


@pytest.mark.parametrize(
    ("function", "low", "high", "zero"),
    [
        (lambda x: x - 3, 0.0, 10.0, 3.0),
        (lambda x: x**3 - 2, 0.0, 4.0, 2 ** (1 / 3)),
        (lambda x: np.expm1(-x + 7), 0.0, 700.0, 7.0),
        (lambda x: -1.0 if x < 1.25 else 1.0, 0.0, 100.0, 1.25),
        (lambda x: x, 0.0, 1.0, 0.0),
        (lambda x: x - 1, 0.0, 1.0, 1.0),
        (lambda x: (x - 0.3) ** 9, -1.0, 1.0, 0.3),
    ],
)
def test_crossings(function: Callable[[float], float], low: float, high: float, zero: float) -> None:
    tolerance = 1e-14 if function(0.3) != 0 else 1e-2
    assert roots.crossing(function, low, high) == pytest.approx(zero, rel=tolerance, abs=1e-15)


def test_a_crossing_is_found_in_few_steps() -> None:
    trials: list[float] = []

    def function(x: float) -> float:
        trials.append(x)
        return float(stats.norm.logsf(x) - np.log(0.001))

    assert roots.crossing(function, 0.0, 38.0) == pytest.approx(float(stats.norm.isf(0.001)), rel=1e-14)
    assert len(trials) <= 16


def test_a_jump_at_zero_is_closed_in_on_and_then_left() -> None:
    """Near zero there is always a smaller number: the search ends after so many halvings."""
    found = roots.crossing(lambda x: -1.0 if x <= 0 else 1.0, -1.0, 2.0)

    assert abs(found) < 1e-50
