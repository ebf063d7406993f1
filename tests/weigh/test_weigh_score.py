"""The score test of two proportions: against direct maximisation of the likelihood, by hand, and laws."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import optimize, special, stats

from gatecheck.weigh.score import score_interval, score_z

Counts = tuple[int, int, int, int]
CRITICAL = float(stats.norm.isf(0.05))


def by_maximising(counts: Counts, difference: float) -> float:
    """The same distance, the second proportion being where the likelihood under the difference is greatest."""
    x1, n1, x2, n2 = counts

    def minus_log_likelihood(q: float) -> float:
        p = q + difference
        first = special.xlogy(x1, p) + special.xlogy(n1 - x1, 1 - p)
        return -float(first + special.xlogy(x2, q) + special.xlogy(n2 - x2, 1 - q))

    ends = max(0.0, -difference), min(1.0, 1 - difference)
    found = optimize.minimize_scalar(
        minus_log_likelihood, bounds=ends, method="bounded", options={"xatol": 1e-12, "maxiter": 2000}
    )
    q = min([float(found.x), *ends], key=minus_log_likelihood)
    p = q + difference
    variance = (p * (1 - p) / n1 + q * (1 - q) / n2) * (n1 + n2) / (n1 + n2 - 1)
    return (x1 / n1 - x2 / n2 - difference) / math.sqrt(variance)


@pytest.mark.parametrize(
    ("counts", "difference"),
    [
        ((31, 112, 153, 187), -0.597),
        ((87, 170, 34, 128), -0.55),
        ((22, 600, 50, 600), -0.07),
        ((0, 20, 0, 20), 0.1),
        ((0, 20, 0, 30), -0.1),
        ((20, 20, 17, 25), 0.4),
        ((5, 9, 0, 4), 0.2),
        ((3, 40, 9, 41), 0.05),
    ],
)
def test_the_proportions_are_those_that_fit_best(counts: Counts, difference: float) -> None:
    found = float(score_z(*counts, difference))
    assert found == pytest.approx(by_maximising(counts, difference), rel=2e-6)


def test_without_a_difference_it_is_the_pooled_test() -> None:
    """By hand: 30 of 100 against 20 of 100, pooled share a quarter, (N - 1)/N of chi-squared."""
    expected = 0.1 / math.sqrt(0.25 * 0.75 * 0.02 * 200 / 199)
    assert float(score_z(30, 100, 20, 100, 0)) == pytest.approx(expected, rel=1e-13)
    assert expected**2 == pytest.approx(stats.chi2_contingency([[30, 70], [20, 80]], correction=False)[0] * 0.995)


@settings(max_examples=40, deadline=None)
@given(st.data())
def test_laws_of_the_interval(data: st.DataObject) -> None:
    """It holds the observed difference, its ends are just not rejected, and it turns with the groups."""
    n1, n2 = data.draw(st.integers(1, 500)), data.draw(st.integers(1, 500))
    counts = (data.draw(st.integers(0, n1)), n1, data.draw(st.integers(0, n2)), n2)
    low, high = map(float, score_interval(*counts, CRITICAL))
    observed = counts[0] / n1 - counts[2] / n2
    assert -1 <= low <= observed <= high <= 1
    exchanged = tuple(map(float, score_interval(*counts[2:], *counts[:2], CRITICAL)))
    assert exchanged == pytest.approx((-high, -low), abs=1e-12)
    complement = tuple(map(float, score_interval(n1 - counts[0], n1, n2 - counts[2], n2, CRITICAL)))
    assert complement == pytest.approx((-high, -low), abs=1e-12)
    for end in (low, high):
        if abs(end) < 1 - 1e-6:
            assert abs(float(score_z(*counts, end))) == pytest.approx(CRITICAL, rel=1e-6)


def test_the_distance_falls_with_the_difference() -> None:
    z = score_z(12, 40, 20, 50, np.linspace(-0.999, 0.999, 400))
    assert (np.diff(z) < 0).all()


def test_it_covers() -> None:
    """In 20 000 studies the interval of 90 % holds the difference in 88 to 92 %, also with rare events."""
    rng = np.random.default_rng(11)
    for p1, p2, n in ((0.02, 0.05, 80), (0.3, 0.35, 40), (0.9, 0.8, 25)):
        x1, x2 = rng.binomial(n, p1, 20_000), rng.binomial(n, p2, 20_000)
        assert abs(np.mean(np.abs(score_z(x1, n, x2, n, p1 - p2)) <= CRITICAL) - 0.9) < 0.02


def test_no_event_at_all() -> None:
    """By hand at d: one share is d and the other 0, so that z^2 = d^2 n / (d (1 - d)) (N - 1)/N."""
    low, high = map(float, score_interval(0, 20, 0, 20, CRITICAL))
    bound = CRITICAL**2 / (CRITICAL**2 + 20 * 39 / 40)
    assert (low, high) == pytest.approx((-bound, bound), rel=1e-12)
    assert float(score_z(0, 20, 0, 20, 0)) == 0


def test_the_ends_of_the_range() -> None:
    z = score_z(0, 20, 20, 20, [-1, -1.5, 1.0, 3.0, -np.inf])
    np.testing.assert_array_equal(z, [0, np.inf, -np.inf, -np.inf, np.inf])
    low, high = map(float, score_interval(20, 20, 0, 20, CRITICAL))
    assert high == 1
    assert 0.8 < low < 1


@pytest.mark.parametrize(
    "row", [(-1, 5, 1, 5), (6, 5, 1, 5), (1, 0, 1, 5), (1, 5, 6, 5), (1, 5, -1, 5), (1, 5, 1, np.inf)]
)
def test_outside_the_domain(row: tuple[float, float, float, float]) -> None:
    assert np.isnan(score_z(*row, 0.1))
    assert np.isnan(score_interval(*row, CRITICAL)).all()


def test_outside_the_domain_of_the_last_column() -> None:
    assert np.isnan(score_z(1, 5, 2, 5, np.nan))
    assert np.isnan(score_interval(1, 5, 2, 5, [0.0, -1.0, np.inf, np.nan])).all()
