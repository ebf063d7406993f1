"""Two one-sided tests and their power: against a direct integral, simulation, other libraries, and laws."""

from __future__ import annotations

from typing import TYPE_CHECKING

import mpmath as mp
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats
from statsmodels.stats.proportion import binom_tost
from statsmodels.stats.weightstats import ttost_ind

from gatecheck.weigh.equivalence import (
    difference_of_proportions,
    interval_equivalence,
    log_scale_sd,
    p_equivalence,
    p_equivalence_binomial,
    p_equivalence_ratio,
    p_non_inferiority,
    power_equivalence,
    power_equivalence_binomial,
    power_non_inferiority,
    rejected_binomial,
)
from gatecheck.weigh.power import power_t
from gatecheck.weigh.sizes_for_power import (
    n_equivalence_at_error,
    n_equivalence_crossover,
    n_equivalence_parallel,
)

if TYPE_CHECKING:
    from numpy.typing import NDArray

alphas = st.floats(0.001, 0.4)
estimates = st.floats(-3, 3)
degrees = st.floats(1, 500)


def exact_power(effect: float, df: float, low: float, high: float, alpha: float) -> float:
    """Integrate over the estimated standard deviation (standard error 1) at 20 digits, in panels of its spread."""
    with mp.workdps(20):
        v = mp.mpf(df)
        critical = mp.findroot(
            lambda t: mp.betainc(v / 2, 0.5, 0, v / (v + t * t), regularized=True) / 2 - alpha,
            float(stats.t.isf(alpha, df)),
        )
        scale = mp.log(2) + v / 2 * mp.log(v / 2) - mp.loggamma(v / 2)
        top = min((mp.mpf(high) - low) / (2 * critical), 1 + 14 / mp.sqrt(v))
        bottom = max(mp.mpf(0), 1 - 10 / mp.sqrt(2 * v))
        turn = min(effect - mp.mpf(low), high - mp.mpf(effect)) / critical
        ends = sorted({*mp.linspace(bottom, top, 9), min(max(turn, bottom), top)})

        def rows(s: mp.mpf) -> mp.mpf:
            reach = mp.ncdf(effect - low - critical * s) - mp.ncdf(effect - high + critical * s)
            return mp.exp(scale + (v - 1) * mp.log(s) - v / 2 * s * s) * reach if s > 0 else mp.mpf(0)

        return float(mp.quad(rows, ends))


@pytest.mark.parametrize(
    ("effect", "df", "low", "high", "alpha"),
    [
        (0.2, 3.7, -4, 4.4, 0.05),
        (0.0, 1.0, -7, 7, 0.05),
        (2.0, 1000.0, -5, 5, 0.05),
        (0.0, 20.0, -1.8, 1.8, 0.05),
        (0.3, 1.3, -2, 2, 0.05),
        (30.0, 2.0, -50, 50, 0.001),
        (60.0, 3.0, -100, 100, 1e-4),
        (6.0, 12.0, -5, 5, 0.1),
    ],
)
def test_power_to_eleven_digits(effect: float, df: float, low: float, high: float, alpha: float) -> None:
    found = float(power_equivalence(effect, 1, df, low=low, high=high, alpha=alpha))
    assert found == pytest.approx(exact_power(effect, df, low, high, alpha), rel=1e-11)


def test_power_by_simulation() -> None:
    """Within four standard errors of 20 000 simulated studies, and the level is kept at the margin."""
    rng = np.random.default_rng(3)
    error = 0.3
    for effect in (0.0, 0.4, 1.0):
        estimate = effect + error * rng.normal(size=20_000)
        estimated = error * np.sqrt(rng.chisquare(11, 20_000) / 11)
        found = np.mean(p_equivalence(estimate, estimated, 11, low=-1, high=1) <= 0.05)
        power = float(power_equivalence(effect, error, 11, low=-1, high=1, alpha=0.05))
        assert abs(found - power) < 4 * np.sqrt(power * (1 - power) / 20_000)
    assert 0.04 < power <= 0.05


def test_known_variance_has_a_closed_form() -> None:
    power = power_equivalence([0, 1, 0], [1, 1, 4], np.inf, low=-3, high=3, alpha=0.05)
    z = stats.norm.isf(0.05)
    expected = stats.norm.cdf([3 - z, 4 - z]) - stats.norm.cdf([-3 + z, -2 + z])
    np.testing.assert_allclose(power, np.append(expected, 0.0), rtol=1e-13)
    close = power_equivalence([0, 1, 0], [1, 1, 4], 1e9, low=-3, high=3, alpha=0.05)
    np.testing.assert_allclose(close, power, atol=1e-8)
    endless = power_equivalence([0, 1, 0], [1, 1, 4], [[1e11], [1e300]], low=-3, high=3, alpha=0.05)
    np.testing.assert_allclose(endless, [power, power], atol=1e-10)


def test_wide_margins_leave_one_test() -> None:
    power = power_equivalence(0.5, 0.4, 9, low=-0.5, high=1e4, alpha=0.05)
    assert float(power) == pytest.approx(float(power_non_inferiority(0.5, 0.4, 9, -0.5, 0.05)), rel=1e-11)
    assert float(power) == pytest.approx(float(power_t(2.5, 9, 0.05, one_sided=True)), rel=1e-11)


@pytest.mark.parametrize("df", [1.0, 9.0, 400.0, np.inf])
def test_a_side_that_is_open_leaves_one_test(df: float) -> None:
    expected = float(power_t(2.5, df, 0.05, one_sided=True))
    power = power_equivalence([0.5, -0.5], 0.4, df, low=[-0.5, -np.inf], high=[np.inf, 0.5], alpha=0.05)
    np.testing.assert_allclose(power, expected, rtol=1e-11)
    assert np.isnan(power_equivalence(0, 1, df, low=-np.inf, high=np.inf, alpha=0.05))


@pytest.mark.parametrize(("low", "high"), [(-0.3, 0.3), (-0.2, 0.5), (-0.3, np.inf), (-np.inf, 0.25)])
@pytest.mark.parametrize("groups", [1, 2])
def test_the_size_at_an_error_meets_the_power_and_one_less_does_not(low: float, high: float, groups: int) -> None:
    n = float(n_equivalence_at_error(0.3162, 40 - groups, 40, groups, 0.8, low=low, high=high, alpha=0.05))
    total = groups * np.array([n, n - 1])
    power = power_equivalence(0, 0.3162 * np.sqrt(40 / total), total - groups, low=low, high=high, alpha=0.05)
    assert n == round(n)
    assert power[0] >= 0.8 > power[1]


def test_the_size_at_an_error_of_two_groups_is_that_of_their_standard_deviation() -> None:
    """By the normal 2 (1.645 + 1.282)^2 / 0.3^2 = 190.3 of each group."""
    n = n_equivalence_at_error([np.sqrt(0.1), np.sqrt(2 / 7)], [38, 12], [40, 14], 2, 0.8, low=-0.3, high=0.3,
                               alpha=0.05)  # fmt: skip
    np.testing.assert_array_equal(n, 191)


def test_no_size_shows_what_lies_at_the_margin() -> None:
    n = n_equivalence_at_error([0.1, 0.1, np.nan, 0.1], 38, [40, 40, 40, np.nan], 2, 0.8, low=[0, 0.1, -1, -1],
                               high=1, alpha=0.05)  # fmt: skip
    assert np.isnan(n).all()


def test_against_a_second_library() -> None:
    rng = np.random.default_rng(8)
    first, second = rng.normal(size=14), rng.normal(0.2, 1, size=11)
    p, low, high = ttost_ind(first, second, -0.9, 0.8, usevar="pooled")
    pooled = (13 * np.var(first, ddof=1) + 10 * np.var(second, ddof=1)) / 23
    estimate, error = np.mean(first) - np.mean(second), np.sqrt(pooled * (1 / 14 + 1 / 11))
    assert float(p_equivalence(estimate, error, 23, low=-0.9, high=0.8)) == pytest.approx(p, rel=1e-11)
    assert float(p_non_inferiority(estimate, error, 23, -0.9)) == pytest.approx(low[1], rel=1e-11)
    assert float(p_non_inferiority(-estimate, error, 23, -0.8)) == pytest.approx(high[1], rel=1e-11)
    exact = [binom_tost(x, 60, 0.3, 0.6)[0] for x in (20, 26, 30)]
    np.testing.assert_allclose(p_equivalence_binomial([20, 26, 30], 60, low=0.3, high=0.6), exact, rtol=1e-10)


def test_proportions() -> None:
    """The unpooled normal test, by hand: 41/50 less 45/55."""
    difference, error = difference_of_proportions(41, 50, 45, 55)
    assert float(difference) == pytest.approx(0.82 - 45 / 55, rel=1e-12)
    assert float(error) == pytest.approx(np.sqrt(0.82 * 0.18 / 50 + 45 * 10 / 55**3), rel=1e-13)
    p = float(p_equivalence(difference, error, np.inf, low=-0.2, high=0.2))
    assert p == pytest.approx(stats.norm.sf((0.2 - abs(float(difference))) / float(error)), rel=1e-12)
    _, nothing = difference_of_proportions(0, 50, 55, 55)
    assert np.isnan(p_equivalence(-1, nothing, np.inf, low=-0.2, high=0.2))


@settings(max_examples=30, deadline=None)
@given(estimates, st.floats(0.05, 2), degrees, alphas)
def test_equivalence_is_the_interval_within_the_margins(
    estimate: float, error: float, df: float, alpha: float
) -> None:
    lower, upper = map(float, interval_equivalence(estimate, error, df, alpha))
    p = float(p_equivalence(estimate, error, df, low=lower, high=upper))
    assert p == pytest.approx(alpha, rel=1e-9)
    assert float(p_equivalence(estimate, error, df, low=lower - 0.01, high=upper + 0.01)) < alpha
    assert float(p_equivalence(estimate, error, df, low=lower + 1e-3 * error, high=upper)) > alpha


@settings(max_examples=30, deadline=None)
@given(estimates, st.floats(0.05, 2), degrees)
def test_mirror_image_and_ratio(estimate: float, error: float, df: float) -> None:
    p = float(p_equivalence(estimate, error, df, low=-1, high=1.5))
    assert float(p_equivalence(-estimate, error, df, low=-1.5, high=1)) == p
    ratio = p_equivalence_ratio(np.exp(estimate), error, df, low=np.exp(-1), high=np.exp(1.5))
    assert float(ratio) == pytest.approx(p, rel=1e-9, abs=1e-300)


@settings(max_examples=6, deadline=None)
@given(st.floats(-0.9, 0.9), st.floats(0.05, 1), degrees, alphas)
def test_power_is_monotone(effect: float, error: float, df: float, alpha: float) -> None:
    def power(of: float, with_error: float, at: float) -> float:
        return float(power_equivalence(of, with_error, df, low=-1, high=1, alpha=at))

    start = power(effect, error, alpha)
    slack = 1e-13
    assert power(effect * 0.8, error, alpha) >= start - slack
    assert power(effect, error * 0.8, alpha) >= start - slack
    assert power(effect, error, alpha * 1.2) >= start - slack
    assert power(1.0, error, alpha) <= alpha + slack
    assert power(-effect, error, alpha) == pytest.approx(start, rel=1e-11, abs=1e-15)


def test_totals_meet_the_power_and_two_less_do_not() -> None:
    ratios, cv = np.array([0.93, 1.0, 1.08]), 0.27

    def power(n: NDArray[np.float64], variance: float) -> NDArray[np.float64]:
        error = log_scale_sd(cv) * np.sqrt(variance / n)
        return power_equivalence(np.log(ratios), error, n - 2, low=np.log(0.8), high=np.log(1.25), alpha=0.05)

    for search, variance in ((n_equivalence_crossover, 2.0), (n_equivalence_parallel, 4.0)):
        n = search(ratios, cv, 0.85, low=0.8, high=1.25, alpha=0.05)
        assert np.all(n % 2 == 0)
        assert np.all(power(n, variance) >= 0.85)
        assert np.all(power(n - 2, variance) < 0.85)


def test_ratio_at_the_margin_is_never_shown_equivalent() -> None:
    assert np.isnan(n_equivalence_crossover(0.8, 0.2, 0.8, low=0.8, high=1.25, alpha=0.05))


def test_binomial_level_and_rejection() -> None:
    fewest, most = rejected_binomial([90, 5], low=0.2, high=0.5, alpha=0.05)
    assert float(fewest[1]) > float(most[1])
    p = p_equivalence_binomial([fewest[0] - 1, fewest[0], most[0], most[0] + 1], 90, low=0.2, high=0.5)
    np.testing.assert_array_equal(p <= 0.05, [False, True, True, False])
    kept = power_equivalence_binomial([0.2, 0.5], 90, low=0.2, high=0.5, alpha=0.05)
    assert np.all((kept > 0.01) & (kept <= 0.05))
    direct = stats.binom.cdf(most[0], 90, 0.34) - stats.binom.cdf(fewest[0] - 1, 90, 0.34)
    assert float(power_equivalence_binomial(0.34, 90, low=0.2, high=0.5, alpha=0.05)) == pytest.approx(
        direct, rel=1e-11
    )
    np.testing.assert_array_equal(power_equivalence_binomial(0.34, [5, 2], low=0.2, high=0.5, alpha=0.05), [0, 0])


@pytest.mark.parametrize(
    "result",
    [
        p_non_inferiority([0, 0, np.nan], [0, -1, 1], 5, -1),
        p_non_inferiority(0, 1, [0, -1, np.nan], -1),
        p_equivalence(0, 1, 5, low=[1, 2, np.nan], high=[1, 1, 1]),
        p_equivalence_ratio([0, -1, 1], 1, 5, low=[0.5, 0.5, 0], high=2),
        interval_equivalence([0, 0, np.inf], [0, 1, 1], 5, [0.05, 0.5, 0.05])[0],
        difference_of_proportions([-1, 6, 1], [5, 5, 0], 1, 5)[0],
        difference_of_proportions(1, 5, [-1, 6, 1], [5, 5, 0])[1],
        log_scale_sd([-0.1, np.nan]),
        power_equivalence(
            0, [0, 1, 1, 1], [5, 0, 5, 5], low=[-1, -1, 1, -1], high=1, alpha=[0.05, 0.05, 0.05, 0.5]
        ),
        power_non_inferiority(0, [0, 1], 5, -1, [0.05, 0]),
        p_equivalence_binomial([-1, 6, 2, 2], 5, low=[0.1, 0.1, 0.5, -0.1], high=0.5),
        power_equivalence_binomial([-0.1, 1.1, 0.3], 5, low=0.1, high=0.5, alpha=[0.05, 0.05, 0]),
        rejected_binomial([0, 5], low=0.1, high=[0.5, 1.1], alpha=0.05)[0],
    ],
)
def test_outside_the_domain_is_nan(result: NDArray[np.float64]) -> None:
    assert np.all(np.isnan(result))


def test_extreme_input_warns_of_nothing() -> None:
    error = np.array([1e-300, 1e-8, 1.0, 1e8, 1e300])[:, None]
    df = np.array([0.3, 1.0, 1e3, 1e12, np.inf])
    power = power_equivalence(0.1, error, df, low=-1, high=1, alpha=0.05)
    known = power[~np.isnan(power)]
    assert known.size >= 20
    assert np.all((known >= 0) & (known <= 1 + 1e-9))
