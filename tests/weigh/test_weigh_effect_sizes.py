"""Effect sizes and their intervals: published examples, the tails that define them, coverage, inverses."""

from __future__ import annotations

from typing import TYPE_CHECKING

import mpmath as mp
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats
from statsmodels.stats.power import ttest_power

from gatecheck.weigh import effect_sizes as sizes
from gatecheck.weigh.noncentral import lower_tail_f, lower_tail_t, upper_tail_f, upper_tail_r, upper_tail_t

if TYPE_CHECKING:
    from numpy.typing import NDArray

counts = st.floats(2, 1e4)
small = st.floats(-5, 5)


@pytest.mark.parametrize("df", [1.5, 2, 3, 10, 37.2, 1e3, 1e7])
def test_hedges_correction_exact(df: float) -> None:
    with mp.workdps(40):
        half = mp.mpf(df) / 2
        exact = mp.gamma(half) / (mp.sqrt(half) * mp.gamma(half - mp.mpf(1) / 2))
    assert float(sizes.hedges_correction(df)) == pytest.approx(float(exact), rel=2e-15)


# Hedges, L. V. (1981), Journal of Educational Statistics 6, 107-128: approximately 1 - 3/(4 df - 1) (from memory).
def test_hedges_correction_near_its_approximation() -> None:
    df = np.arange(10, 200)
    np.testing.assert_allclose(sizes.hedges_correction(df), 1 - 3 / (4 * df - 1), atol=4e-4)


def test_hedges_correction_removes_the_bias() -> None:
    """Mean of 200 000 simulated g within four standard errors of the true effect; that of d is far off."""
    rng = np.random.default_rng(5)
    d = (0.8 + rng.normal(size=200_000) * np.sqrt(2 / 5)) / np.sqrt(rng.chisquare(8, 200_000) / 8)
    error = np.std(d) / np.sqrt(d.size)
    assert abs(np.mean(sizes.g_from_d(d, 8)) - 0.8) < 4 * error
    assert np.mean(d) - 0.8 > 20 * error


@pytest.mark.parametrize(("t", "df"), [(2.0, 10.0), (0.0, 3.0), (-5.0, 100.0), (40.0, 1.5), (1e6, 2.0), (3.0, 1e6)])
@pytest.mark.parametrize("level", [0.5, 0.95, 0.9999])
def test_limits_leave_the_tails_of_t(t: float, df: float, level: float) -> None:
    lower, upper = sizes.interval_ncp_t(t, df, level)
    assert float(upper_tail_t(t, df, lower)) == pytest.approx((1 - level) / 2, rel=1e-9)
    assert float(lower_tail_t(t, df, upper)) == pytest.approx((1 - level) / 2, rel=1e-9)


@pytest.mark.parametrize(
    ("f", "df1", "df2"),
    [(6.0, 2.0, 30.0), (50.0, 3.0, 20.0), (400.0, 10.0, 6.0), (2.0, 50.0, 50.0), (9.0, 1.0, 1e5)],
)
def test_limits_leave_the_tails_of_f(f: float, df1: float, df2: float) -> None:
    lower, upper = sizes.interval_ncp_f(f, df1, df2, 0.9)
    assert float(upper_tail_f(f, df1, df2, lower)) == pytest.approx(0.05, rel=1e-9)
    assert float(lower_tail_f(f, df1, df2, upper)) == pytest.approx(0.05, rel=1e-9)


def test_limits_of_small_f_are_zero() -> None:
    lower, upper = sizes.interval_ncp_f([0.0, 1e-4, 1.0], [3, 3, 3], 20, 0.9)
    np.testing.assert_array_equal(lower, 0.0)
    np.testing.assert_array_equal(upper[:2], 0.0)
    assert float(upper[2]) > 5


@pytest.mark.parametrize(("r", "n"), [(0.5, 20), (0.0, 10), (-0.9, 5), (0.999, 3), (0.3, 1000)])
def test_limits_leave_the_tails_of_r(r: float, n: int) -> None:
    lower, upper = sizes.interval_r_exact(r, n, 0.95)
    assert float(upper_tail_r(r, n, lower)) == pytest.approx(0.025, rel=1e-8)
    assert float(1 - upper_tail_r(r, n, upper)) == pytest.approx(0.025, rel=1e-8)


def test_fisher_interval_of_a_second_library() -> None:
    x = np.array([1.0, 2, 3, 4, 5, 6, 7, 8])
    y = np.array([2.0, 1, 4, 3, 7, 5, 8, 6])
    second = stats.pearsonr(x, y).confidence_interval(0.9)
    lower, upper = sizes.interval_r_fisher(stats.pearsonr(x, y).statistic, 8, 0.9)
    np.testing.assert_allclose([lower, upper], [second.low, second.high], rtol=1e-12)


def test_fisher_interval_nears_the_exact_one() -> None:
    exact, fisher = sizes.interval_r_exact(0.3, 2000, 0.95), sizes.interval_r_fisher(0.3, 2000, 0.95)
    np.testing.assert_allclose(fisher, exact, atol=2e-4)
    assert np.max(np.abs(np.subtract(fisher, exact))) > 1e-6


def test_search_cut_short_errs_to_the_wider_side(monkeypatch: pytest.MonkeyPatch) -> None:
    lower, upper = sizes.interval_ncp_t(3.0, 12, 0.9)
    monkeypatch.setattr(sizes, "MOST_STEPS", 1)
    wider_lower, wider_upper = sizes.interval_ncp_t(3.0, 12, 0.9)
    assert float(wider_lower) < float(lower) < float(upper) < float(wider_upper)


def test_coverage_of_the_interval_of_d() -> None:
    """Of 500 intervals at 90 % each, within four standard errors; two groups of 6 and 9."""
    rng = np.random.default_rng(17)
    first, second = 0.7 + rng.normal(size=(500, 6)), rng.normal(size=(500, 9))
    sd = sizes.pooled_sd(first.std(1, ddof=1), 6, second.std(1, ddof=1), 9)
    d = sizes.d_from_difference(first.mean(1) - second.mean(1), sd)
    lower, upper = sizes.interval_d_two_sample(d, 6, 9, 0.9)
    assert abs(np.mean((lower <= 0.7) & (upper >= 0.7)) - 0.9) < 4 * np.sqrt(0.09 / 500)


def test_coverage_of_the_interval_of_f2() -> None:
    """Of 500 intervals at 90 % each, within four standard errors; three groups of 8, f2 = 0.2."""
    rng = np.random.default_rng(23)
    f = stats.ncf.rvs(2, 21, 0.2 * 24, size=500, random_state=rng)
    lower, upper = sizes.interval_f2(f, 2, 21, 0.9)
    assert abs(np.mean((lower <= 0.2) & (upper >= 0.2)) - 0.9) < 4 * np.sqrt(0.09 / 500)
    from_shares = sizes.interval_eta2(f[:5], 2, 21, 0.9)
    np.testing.assert_allclose(sizes.f2_from_eta2(from_shares[1]), upper[:5], rtol=1e-12)


def test_coverage_of_the_exact_interval_of_r() -> None:
    """Of 500 intervals at 90 % each, within four standard errors; 7 pairs, rho = 0.6."""
    rng = np.random.default_rng(29)
    x = rng.normal(size=(500, 7))
    y = 0.6 * x + 0.8 * rng.normal(size=(500, 7))
    r = ((x - x.mean(1, keepdims=True)) * (y - y.mean(1, keepdims=True))).mean(1) / x.std(1) / y.std(1)
    lower, upper = sizes.interval_r_exact(r, 7, 0.9)
    assert abs(np.mean((lower <= 0.6) & (upper >= 0.6)) - 0.9) < 4 * np.sqrt(0.09 / 500)


def test_interval_ends_at_zero_where_the_test_rejects_just_so() -> None:
    """Duality: where p is exactly 0.05, one limit at 95 % is zero."""
    d = stats.t.isf(0.025, 11) / np.sqrt(12)
    lower, upper = sizes.interval_d_one_sample([d, -d], 12, 0.95)
    assert float(lower[0]) == pytest.approx(0, abs=1e-12)
    assert float(upper[1]) == pytest.approx(0, abs=1e-12)
    power = ttest_power(float(upper[0]), 12, 0.05, alternative="larger")
    assert power > 0.975


@settings(max_examples=50, deadline=None)
@given(small, counts, counts)
def test_conversions_have_inverses(d: float, n1: float, n2: float) -> None:
    for there, back in (
        (sizes.t_from_d(d, n1, n2), lambda t: sizes.d_from_t(t, n1, n2)),
        (sizes.r_from_d(d, n1, n2), lambda r: sizes.d_from_r(r, n1, n2)),
        (sizes.g_from_d(d, n1), lambda g: sizes.d_from_g(g, n1)),
        (sizes.log_odds_ratio_from_d(d), sizes.d_from_log_odds_ratio),
        (sizes.difference_from_d(d, n1), lambda difference: sizes.d_from_difference(difference, n1)),
    ):
        assert float(back(there)) == pytest.approx(d, rel=1e-9, abs=1e-300)


# Borenstein, M. et al. (2009). Introduction to Meta-Analysis, chapter 7: a log odds ratio of 0.9069 is d = 0.5, and
# d = 0.5 is r = 0.2425 in equal groups (from memory; both follow from the formulas).
def test_worked_conversions() -> None:
    assert float(sizes.d_from_log_odds_ratio(0.9069)) == pytest.approx(0.5, abs=5e-5)
    assert float(sizes.r_from_d(0.5, 30, 30)) == pytest.approx(0.2425, abs=5e-5)
    assert float(sizes.eta2_from_f(5, 2, 30)) == pytest.approx(0.25, rel=1e-15)
    assert float(sizes.f2_from_eta2(0.2)) == pytest.approx(0.25, rel=1e-15)
    assert float(sizes.eta2_from_f2(0.25)) == pytest.approx(0.2, rel=1e-15)
    assert float(sizes.pooled_sd(3, 11, 4, 31)) == pytest.approx(np.sqrt((90 + 480) / 40), rel=1e-15)


def test_correlation_with_the_group_is_that_of_t() -> None:
    """Of the sample, r is ``t / sqrt(t^2 + df)``; from d the sd has divisor n: they near each other."""
    t = sizes.t_from_d(0.5, 4000, 6000)
    assert float(sizes.r_from_d(0.5, 4000, 6000)) == pytest.approx(float(t / np.hypot(t, np.sqrt(9998))), rel=2e-4)


@pytest.mark.parametrize(
    "result",
    [
        sizes.pooled_sd([-1, 1, 1], [5, 0, 1], 1, [5, 5, 1]),
        sizes.d_from_difference(1, [0, -1, np.nan]),
        sizes.difference_from_d(1, [0, -1, np.nan]),
        sizes.d_from_t([1, 1, np.inf], [0, 5, 5], [5, 0, 5]),
        sizes.t_from_d([1, 1, np.nan], [0, 5, 5], [5, 0, 5]),
        sizes.hedges_correction([1, 0, -3, np.nan, np.inf]),
        sizes.g_from_d(1, [1, np.inf]),
        sizes.d_from_g(1, [1, np.inf]),
        sizes.r_from_d(1, [0, 5], [5, -1]),
        sizes.d_from_r([1, -1, 0.5], 5, [5, 5, 0]),
        sizes.d_from_log_odds_ratio([np.inf, np.nan]),
        sizes.f2_from_eta2([-0.1, 1]),
        sizes.eta2_from_f2([-0.1, np.inf]),
        sizes.eta2_from_f([-1, 1, 1], [2, 0, 2], [5, 5, 0]),
        sizes.interval_ncp_t([np.inf, 1, 1, 1], [5, 0, 5, 5], [0.9, 0.9, 0, 1])[0],
        sizes.interval_ncp_f([-1, 1, 1, 1], [2, 0, 2, 2], [5, 5, np.inf, 5], [0.9, 0.9, 0.9, 1])[1],
        sizes.interval_d_one_sample(1, [1, 0, np.nan], 0.9)[0],
        sizes.interval_d_two_sample(1, [1, 0], [1, 5], 0.9)[1],
        sizes.interval_f2([-1, 1], 2, 5, [0.9, 1])[0],
        sizes.interval_eta2([-1, 1], 2, 5, [0.9, 1])[0],
        sizes.interval_r_fisher([1, 0.5, 0.5], [9, 3, 9], [0.9, 0.9, 1])[0],
        sizes.interval_r_exact([1, 0.5, 0.5], [9, 2, 9], [0.9, 0.9, 1])[1],
    ],
)
def test_outside_the_domain_is_nan(result: NDArray[np.float64]) -> None:
    assert np.all(np.isnan(result))
