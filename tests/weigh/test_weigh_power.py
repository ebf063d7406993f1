"""Non-central tails and power: against sums at high precision, other libraries where they are right, and laws."""

from __future__ import annotations

from typing import TYPE_CHECKING

import mpmath as mp
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats
from statsmodels.stats import power as other
from weigh.held import assert_both_tails

from gatecheck.weigh import sizes_for_power
from gatecheck.weigh.noncentral import (
    lower_tail_chi2,
    lower_tail_f,
    lower_tail_t,
    upper_tail_chi2,
    upper_tail_f,
    upper_tail_r,
    upper_tail_t,
)
from gatecheck.weigh.power import (
    cohen_h,
    power_anova,
    power_chi2,
    power_correlation_exact,
    power_correlation_fisher,
    power_f,
    power_log_rank,
    power_one_sample_t,
    power_one_sample_z,
    power_paired_t,
    power_proportions_arcsine,
    power_proportions_pooled,
    power_regression,
    power_t,
    power_two_sample_t,
    power_two_sample_z,
    power_z,
)

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

DIGITS = 90
alphas = st.floats(1e-6, 0.5)
effects = st.floats(-3, 3)


def poisson_terms(half_ncp: mp.mpf) -> int:
    """Number of terms after which the rest of a Poisson mixture is below 1e-40 of a likely tail."""
    return int(half_ncp + 14 * mp.sqrt(half_ncp) + 60)


def exact_upper_t(t: float, df: float, ncp: float) -> mp.mpf:
    """Poisson mixture of incomplete beta functions, for ``t >= 0`` (Guenther 1978; from memory)."""
    with mp.workdps(DIGITS):
        half, x = mp.mpf(ncp) ** 2 / 2, mp.mpf(df) / (mp.mpf(df) + mp.mpf(t) ** 2)
        total = mp.mpf(0)
        for j in range(poisson_terms(half)):
            even = half**j / mp.factorial(j)
            odd = mp.mpf(ncp) * half**j / (mp.sqrt(2) * mp.gamma(j + mp.mpf(3) / 2))
            total += even * mp.betainc(mp.mpf(df) / 2, j + mp.mpf(1) / 2, 0, x, regularized=True)
            total += odd * mp.betainc(mp.mpf(df) / 2, j + 1, 0, x, regularized=True)
        return mp.exp(-half) * total / 2


def exact_chi2(x: float, df: float, ncp: float) -> tuple[mp.mpf, mp.mpf]:
    """Lower and upper tail, each a Poisson mixture of central ones."""
    with mp.workdps(40):
        half = mp.mpf(ncp) / 2
        weights = [mp.exp(-half) * half**j / mp.factorial(j) for j in range(poisson_terms(half))]
        a, y = mp.mpf(df) / 2, mp.mpf(x) / 2
        lower = mp.fsum(w * mp.gammainc(a + j, 0, y, regularized=True) for j, w in enumerate(weights))
        upper = mp.fsum(w * mp.gammainc(a + j, y, mp.inf, regularized=True) for j, w in enumerate(weights))
        return lower, upper


def exact_f(f: float, df1: float, df2: float, ncp: float) -> tuple[mp.mpf, mp.mpf]:
    """Lower and upper tail, each a Poisson mixture of central ones."""
    with mp.workdps(40):
        half, a, b = mp.mpf(ncp) / 2, mp.mpf(df1) / 2, mp.mpf(df2) / 2
        x = a * mp.mpf(f) / (a * mp.mpf(f) + b)
        weights = [mp.exp(-half) * half**j / mp.factorial(j) for j in range(poisson_terms(half))]
        lower = mp.fsum(w * mp.betainc(a + j, b, 0, x, regularized=True) for j, w in enumerate(weights))
        upper = mp.fsum(w * mp.betainc(b, a + j, 0, 1 - x, regularized=True) for j, w in enumerate(weights))
        return lower, upper


@pytest.mark.parametrize(
    ("t", "df", "ncp"),
    [
        (0.0, 7, 0.4),
        (1.0, 1, 3.0),
        (2.9, 1, 3.0),
        (12.7, 0.5, 2.0),
        (9.0, 0.5, 10.0),
        (5.0, 8, -8.269),
        (2.0, 98, -10.0),
        (2.0, 98, 10.0),
        (9.0, 12, 8.0),
        (2.0, 11.7, 2.9),
        (1.96, 1e5, 4.0),
        (3.5, 1e7, 3.0),
        (500.0, 3, 2.0),
        (30.0, 400, 2.0),
        (1e-5, 20, -3.0),
    ],
)
def test_tails_of_t_to_twelve_digits(t: float, df: float, ncp: float) -> None:
    upper, lower = exact_upper_t(t, df, ncp), 1 - exact_upper_t(t, df, ncp)
    assert_both_tails((lower_tail_t, upper_tail_t), (t, df, ncp), float(lower), float(upper), rel=1e-12)
    assert_both_tails((lower_tail_t, upper_tail_t), (-t, df, -ncp), float(upper), float(lower), rel=1e-12)


@pytest.mark.parametrize(
    ("x", "df", "ncp"),
    [
        (3.84, 1, 7.85),
        (12.2, 0.56, 11.7),
        (0.01, 1, 50),
        (100, 2, 3),
        (5, 0.7, 0),
        (9.5, 4, 0.05),
        (150, 80, 50),
        (0.3, 30, 4),
    ],
)
def test_tails_of_chi_squared_to_twelve_digits(x: float, df: float, ncp: float) -> None:
    lower, upper = map(float, exact_chi2(x, df, ncp))
    assert_both_tails((lower_tail_chi2, upper_tail_chi2), (x, df, ncp), lower, upper, rel=1e-12)


@pytest.mark.parametrize(
    ("f", "df1", "df2", "ncp"),
    [
        (1.5, 3, 20, 0),
        (2.87, 3, 36, 11),
        (0.02, 2, 10, 40),
        (60, 4, 12, 5),
        (1.2, 1.5, 0.8, 3),
        (1.05, 90, 70, 20),
        (4, 1, 1e4, 60),
    ],
)
def test_tails_of_f_to_twelve_digits(f: float, df1: float, df2: float, ncp: float) -> None:
    lower, upper = map(float, exact_f(f, df1, df2, ncp))
    assert_both_tails((lower_tail_f, upper_tail_f), (f, df1, df2, ncp), lower, upper, rel=1e-12)


@pytest.mark.parametrize(("r", "n", "rho"), [(0.444, 20, 0.5), (0.9, 5, -0.3), (-0.6, 12, 0.4), (0.1, 200, 0.3)])
def test_tail_of_a_correlation_by_regression(r: float, n: int, rho: float) -> None:
    """Given one variable, t of the correlation is non-central; its effect then varies as chi on ``n - 1``."""
    nodes, weights = np.polynomial.legendre.leggauss(200)
    ends = np.sqrt(stats.chi2.ppf(1e-18, n - 1)), np.sqrt(stats.chi2.isf(1e-18, n - 1))
    size = (ends[1] - ends[0]) / 2 * (nodes + 1) + ends[0]
    t, slope = r * np.sqrt((n - 2) / (1 - r * r)), rho / np.sqrt(1 - rho * rho)
    mixed = stats.chi.pdf(size, n - 1) * upper_tail_t(t, n - 2, slope * size)
    assert float(upper_tail_r(r, n, rho)) == pytest.approx((weights @ mixed) * (ends[1] - ends[0]) / 2, rel=1e-10)


def test_tails_against_a_library_in_its_good_range() -> None:
    ncp = np.linspace(0, 6, 13)
    np.testing.assert_allclose(upper_tail_t(2.1, 17, ncp[1:]), stats.nct.sf(2.1, 17, ncp[1:]), rtol=1e-11)
    np.testing.assert_allclose(upper_tail_t(2.1, np.inf, ncp), stats.norm.sf(2.1 - ncp), rtol=1e-12)
    np.testing.assert_allclose(upper_tail_chi2(6.1, 3, ncp[1:]), stats.ncx2.sf(6.1, 3, ncp[1:]), rtol=1e-11)
    np.testing.assert_allclose(lower_tail_f(2.1, 3, 17, ncp[1:]), stats.ncf.cdf(2.1, 3, 17, ncp[1:]), rtol=1e-9)


@settings(max_examples=25, deadline=None)
@given(st.floats(-200, 200), st.floats(0.2, 1e6), st.floats(-40, 40))
def test_tails_of_t_make_one(t: float, df: float, ncp: float) -> None:
    both = upper_tail_t(t, df, ncp) + lower_tail_t(t, df, ncp)
    assert float(both) == pytest.approx(1, abs=1e-12)


@settings(max_examples=20, deadline=None)
@given(st.floats(0, 1e4), st.floats(0.2, 1e4), st.floats(0.2, 1e4), st.floats(0, 1e3))
def test_tails_of_f_and_chi_squared_make_one(x: float, df1: float, df2: float, ncp: float) -> None:
    assert float(upper_tail_f(x, df1, df2, ncp) + lower_tail_f(x, df1, df2, ncp)) == pytest.approx(1, abs=1e-12)
    assert float(upper_tail_chi2(x, df1, ncp) + lower_tail_chi2(x, df1, ncp)) == pytest.approx(1, abs=1e-12)


def test_rows_do_not_depend_on_their_neighbours() -> None:
    t, df, ncp = np.array([-3.0, 0.5, 40.0]), np.array([2.0, 30.0, np.inf]), np.array([1.0, np.nan, 39.0])
    together = upper_tail_t(t, df, ncp)
    alone = np.array([float(upper_tail_t(*row)) for row in zip(t, df, ncp, strict=True)])
    np.testing.assert_array_equal(together, alone)
    assert np.isnan(together[1])


@pytest.mark.parametrize("one_sided", [True, False])
def test_power_against_a_second_library(one_sided: bool) -> None:
    d, n = np.array([0.1, 0.3, 0.5, 0.8]), np.array([15.0, 40.0, 60.0])[:, None]
    side = "larger" if one_sided else "two-sided"
    np.testing.assert_allclose(
        power_two_sample_t(d, n, 2 * n, 0.03, one_sided=one_sided),
        other.TTestIndPower().power(d, n, 0.03, ratio=2, alternative=side),
        rtol=1e-11,
    )
    np.testing.assert_allclose(
        power_one_sample_t(d, n, 0.03, one_sided=one_sided),
        other.TTestPower().power(d, n, 0.03, alternative=side),
        rtol=1e-11,
    )
    np.testing.assert_allclose(
        power_two_sample_z(d, n, n, 0.03, one_sided=one_sided),
        other.NormalIndPower().power(d, n, 0.03, alternative=side),
        rtol=1e-11,
    )


def test_power_of_groups_and_counts_against_a_second_library() -> None:
    f, k = np.array([0.1, 0.25, 0.4]), np.array([2, 3, 6])[:, None]
    second = other.FTestAnovaPower().power(f, k * 15, 0.05, k_groups=k)
    np.testing.assert_allclose(power_anova(f, k, 15, 0.05), second, rtol=1e-9)
    second = other.GofChisquarePower().power(f, 90, 0.05, n_bins=k)
    np.testing.assert_allclose(power_chi2(f, 90, k - 1, 0.05), second, rtol=1e-10)


def test_arcsine_difference_is_that_of_the_second_library() -> None:
    h = cohen_h([0.5, 0.9, 0.0], [0.25, 0.95, 1.0])
    np.testing.assert_allclose(h, [np.pi / 6, -0.1924743, -np.pi], rtol=1e-6)
    power = power_proportions_arcsine(h, 50, 70, 0.05, one_sided=False)
    np.testing.assert_allclose(power, power_two_sample_z(h, 50, 70, 0.05, one_sided=False), rtol=0)


def test_pairs_gain_by_their_correlation() -> None:
    power = power_paired_t(0.4, 30, [0.5, 0.0, -1.0, 0.875], 0.05, one_sided=False)
    of_differences = 0.4 / np.sqrt([1.0, 2.0, 4.0, 0.25])
    np.testing.assert_allclose(power, power_one_sample_t(of_differences, 30, 0.05, one_sided=False), rtol=1e-14)


def test_power_by_simulation() -> None:
    """Exact powers lie within four standard errors of simulated ones (4000 studies each, seeded)."""
    rng = np.random.default_rng(20)
    x = rng.normal(size=(4000, 15))
    y = 0.5 * x + np.sqrt(0.75) * rng.normal(size=(4000, 15))
    r = ((x - x.mean(1, keepdims=True)) * (y - y.mean(1, keepdims=True))).mean(1) / x.std(1) / y.std(1)
    found = np.mean(np.abs(r) * np.sqrt(13 / (1 - r * r)) > stats.t.isf(0.025, 13))
    exact = float(power_correlation_exact(0.5, 15, 0.05, one_sided=False))
    assert abs(found - exact) < 4 * np.sqrt(exact * (1 - exact) / 4000)
    p_values = stats.ttest_ind(x, 0.6 + rng.normal(size=(4000, 15)), axis=1, equal_var=True).pvalue
    exact = float(power_two_sample_t(0.6, 15, 15, 0.05, one_sided=False))
    assert abs(np.mean(p_values < 0.05) - exact) < 4 * np.sqrt(exact * (1 - exact) / 4000)


@settings(max_examples=12, deadline=None)
@given(alphas, st.booleans())
def test_power_without_effect_is_the_level(alpha: float, one_sided: bool) -> None:
    powers = [
        power_t(0, 5.5, alpha, one_sided=one_sided),
        power_z(0, alpha, one_sided=one_sided),
        power_correlation_exact(0, 9, alpha, one_sided=one_sided),
        power_correlation_fisher(0, 9, alpha, one_sided=one_sided),
        power_log_rank(1, 50, 0.3, alpha, one_sided=one_sided),
        power_proportions_pooled(0.3, 0.3, 40, alpha, one_sided=one_sided),
        power_f(0, 3, 11, alpha),
        power_chi2(0, 20, 2, alpha),
        power_regression(0, 2, 10, alpha),
    ]
    np.testing.assert_allclose([float(power) for power in powers], alpha, rtol=1e-10)


@settings(max_examples=12, deadline=None)
@given(st.floats(0.05, 2), st.floats(3, 300), st.floats(1e-4, 0.3), st.booleans())
def test_power_grows_with_effect_size_and_level(d: float, n: float, alpha: float, one_sided: bool) -> None:
    steps = np.array([1.0, 1.1, 1.5])
    for grown in (
        power_two_sample_t(d * steps, n, n, alpha, one_sided=one_sided),
        power_two_sample_t(d, n * steps, n, alpha, one_sided=one_sided),
        power_two_sample_t(d, n, n, alpha * steps, one_sided=one_sided),
        power_correlation_exact(np.tanh(d) * steps / 1.5, n, alpha, one_sided=one_sided),
        power_correlation_exact(np.tanh(d), n * steps, alpha, one_sided=one_sided),
        power_anova(d, 3, n * steps, alpha),
    ):
        assert np.all(np.diff(grown) >= -1e-14)


@settings(max_examples=12, deadline=None)
@given(effects, st.floats(1, 50), alphas)
def test_two_sided_power_has_no_direction_and_is_that_of_f(d: float, df: float, alpha: float) -> None:
    power = float(power_t(d, df, alpha, one_sided=False))
    assert float(power_t(-d, df, alpha, one_sided=False)) == power
    assert float(power_f(d * d, 1, df, alpha)) == pytest.approx(power, rel=1e-10)


def test_certain_differences_of_proportions() -> None:
    power = power_proportions_pooled(
        [1, 0, 1, 1], [0, 1, 1, 0], [30, 30, 30, 2], 0.05, one_sided=[True, True, False, True]
    )
    np.testing.assert_array_equal(power, [1, 0, 0, 1])


SEARCHES: list[tuple[str, Callable[..., NDArray[np.float64]], Callable[..., NDArray[np.float64]]]] = [
    (
        "one-sample t",
        lambda power, alpha, one: sizes_for_power.n_one_sample_t(0.4, power, alpha, one_sided=one),
        lambda n, alpha, one: power_one_sample_t(0.4, n, alpha, one_sided=one),
    ),
    (
        "two-sample t",
        lambda power, alpha, one: sizes_for_power.n_two_sample_t(0.4, power, alpha, one_sided=one),
        lambda n, alpha, one: power_two_sample_t(0.4, n, n, alpha, one_sided=one),
    ),
    (
        "one-sample z",
        lambda power, alpha, one: sizes_for_power.n_one_sample_z(0.4, power, alpha, one_sided=one),
        lambda n, alpha, one: power_one_sample_z(0.4, n, alpha, one_sided=one),
    ),
    (
        "arcsine",
        lambda power, alpha, one: sizes_for_power.n_proportions_arcsine(0.3, power, alpha, one_sided=one),
        lambda n, alpha, one: power_proportions_arcsine(0.3, n, n, alpha, one_sided=one),
    ),
    (
        "pooled",
        lambda power, alpha, one: sizes_for_power.n_proportions_pooled(0.6, 0.4, power, alpha, one_sided=one),
        lambda n, alpha, one: power_proportions_pooled(0.6, 0.4, n, alpha, one_sided=one),
    ),
    (
        "exact correlation",
        lambda power, alpha, one: sizes_for_power.n_correlation_exact(0.4, power, alpha, one_sided=one),
        lambda n, alpha, one: power_correlation_exact(0.4, n, alpha, one_sided=one),
    ),
    (
        "Fisher's z",
        lambda power, alpha, one: sizes_for_power.n_correlation_fisher(0.4, power, alpha, one_sided=one),
        lambda n, alpha, one: power_correlation_fisher(0.4, n, alpha, one_sided=one),
    ),
    (
        "log-rank",
        lambda power, alpha, one: sizes_for_power.events_log_rank(0.6, 0.4, power, alpha, one_sided=one),
        lambda n, alpha, one: power_log_rank(0.6, n, 0.4, alpha, one_sided=one),
    ),
    (
        "groups",
        lambda power, alpha, _: sizes_for_power.n_anova(0.3, 4, power, alpha),
        lambda n, alpha, _: power_anova(0.3, 4, n, alpha),
    ),
    (
        "counts",
        lambda power, alpha, _: sizes_for_power.n_chi2(0.3, 4, power, alpha),
        lambda n, alpha, _: power_chi2(0.3, n, 4, alpha),
    ),
    (
        "regression",
        lambda power, alpha, _: sizes_for_power.n_regression(0.1, 4, power, alpha),
        lambda n, alpha, _: power_regression(0.1, 4, n - 5, alpha),
    ),
]


@pytest.mark.parametrize(("size", "power_at"), [row[1:] for row in SEARCHES], ids=[row[0] for row in SEARCHES])
def test_size_meets_the_power_and_one_less_does_not(
    size: Callable[..., NDArray[np.float64]], power_at: Callable[..., NDArray[np.float64]]
) -> None:
    wanted, alpha = np.array([0.5, 0.8, 0.95])[:, None, None], np.array([0.005, 0.05])[:, None]
    one_sided = np.array([True, False])
    n = size(wanted, alpha, one_sided)
    assert n.shape == np.broadcast_shapes(n.shape, (3, 2, 1))
    assert np.all(n == np.floor(n))
    assert np.all(power_at(n, alpha, one_sided) >= wanted)
    assert np.all(power_at(n - 1, alpha, one_sided) < wanted)


def test_size_is_the_fewest_possible_where_any_serves() -> None:
    assert float(sizes_for_power.n_one_sample_t(500, 0.5, 0.1, one_sided=True)) == 2
    assert float(sizes_for_power.n_one_sample_z(9, 0.5, 0.1, one_sided=True)) == 1


def test_size_is_nan_where_none_serves() -> None:
    sizes = sizes_for_power.n_two_sample_t(
        [0, -0.5, 0.5, 0.5, np.nan, 0.5], [0.8, 0.8, 0, 1, 0.8, 0.8], 0.05, one_sided=True
    )
    np.testing.assert_array_equal(np.isnan(sizes), [True, True, True, True, True, False])
    assert np.isnan(sizes_for_power.n_non_inferiority_proportions(0.7, 0.9, 0.1, 0.8, 0.025))


@pytest.mark.parametrize(
    "power",
    [
        power_t(1, 0, 0.05, one_sided=False),
        power_t(np.inf, 5, 0.05, one_sided=True),
        power_z(1, [0, 1, -0.1, np.nan], one_sided=False),
        power_one_sample_t(1, [1, 0, -3, np.nan], 0.05, one_sided=True),
        power_one_sample_z(1, 0, 0.05, one_sided=True),
        power_two_sample_t(1, [0, 1], [5, 1], 0.05, one_sided=False),
        power_paired_t(0.5, 20, [1.0, -1.1, np.nan], 0.05, one_sided=False),
        power_proportions_pooled([-0.1, 0.5, 0.5], [0.5, 1.1, 0.6], [9, 9, 0], 0.05, one_sided=False),
        power_correlation_exact([1, 0.5, 0.5], [9, 2, np.inf], 0.05, one_sided=True),
        power_correlation_fisher([1, -1, 0.5], [9, 9, 3], 0.05, one_sided=True),
        power_chi2([-0.1, 0.1, 0.1], [9, 0, 9], [1, 1, 0], 0.05),
        power_f([-1, 1, 1], [2, 0, 2], [9, 9, np.inf], 0.05),
        power_anova([-0.1, 0.1, 0.1], [3, 1, 3], [9, 9, 1], 0.05),
        power_regression([-0.1, 0.1], [3, 0], [9, 9], 0.05),
        power_log_rank([0, -1, 0.5, 0.5], [9, 9, -1, 9], [0.5, 0.5, 0.5, 1], 0.05, one_sided=False),
        cohen_h([-0.1, 0.5], [0.5, 1.1]),
        upper_tail_r([1, 0.5, 0.5], [9, 2.9, 9], [0.5, 0.5, -1]),
        upper_tail_chi2([-1, np.inf, 1], 3, [1, 1, np.nan]),
    ],
)
def test_outside_the_domain_is_nan(power: NDArray[np.float64]) -> None:
    assert np.all(np.isnan(power))


def test_extreme_input_warns_of_nothing() -> None:
    huge = np.array([1e-300, 1e-10, 1e10, 1e155, 1e308])
    for power in (
        power_two_sample_t(huge, huge, huge, 0.05, one_sided=False),
        power_anova(huge, 3, huge, 0.05),
        power_chi2(huge, huge, 3, 1e-200),
        power_log_rank(huge, huge, 0.5, 0.05, one_sided=False),
    ):
        known = power[~np.isnan(power)]
        assert np.all((known >= 0) & (known <= 1 + 1e-12))
