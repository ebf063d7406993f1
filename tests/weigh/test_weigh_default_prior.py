"""Default Bayes factors: identities, limits, hostile input."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra import numpy as hnp
from scipy import special

from gatecheck import weigh
from gatecheck.weigh.default_prior import log_bf_r, log_bf_t, log_bf_unit_information

if TYPE_CHECKING:
    from numpy.typing import NDArray

columns = hnp.arrays(np.float64, (5, 5), elements=st.floats(allow_nan=True, allow_infinity=True))
sizes = st.floats(0, 50)
dfs = st.floats(1, 1e6)
scales = st.floats(0.1, 5)


@settings(max_examples=40)
@given(t=sizes, df=dfs, scale=scales)
def test_the_two_directions_average_to_the_whole(t: float, df: float, scale: float) -> None:
    n = df / 4 + 1
    along, against = log_bf_t([t, -t], df, n, scale, one_sided=True)
    both = float(log_bf_t(t, df, n, scale))
    assert np.logaddexp(along, against) - np.log(2) == pytest.approx(both, abs=1e-12, rel=1e-13)
    assert against <= both + 1e-13
    assert both - 1e-13 <= along <= both + np.log(2) + 1e-13


@given(t=st.floats(-30, 30), df=dfs, scale=scales)
def test_two_sided_the_sign_does_not_matter(t: float, df: float, scale: float) -> None:
    assert float(log_bf_t(t, df, 12, scale)) == float(log_bf_t(-t, df, 12, scale))


@pytest.mark.parametrize("one_sided", [False, True])
@pytest.mark.parametrize("c", [0.05, 0.7, 3.0, 200.0])
def test_without_a_difference_the_factor_is_closed(c: float, one_sided: bool) -> None:
    """At t = 0 the mean of exp(-ncp^2/2) over a Cauchy of scale c: exp(c^2/2) erfc(c / sqrt 2)."""
    expected = np.log(special.erfcx(c / np.sqrt(2)))
    result = log_bf_t([0.0, -0.0], [1.0, 400.0], c * c, 1.0, one_sided=one_sided)
    np.testing.assert_allclose(result, expected, rtol=1e-13, atol=1e-15)


def mean_over_half_cauchy(t: float, df: float, c: float, sign: int) -> float:
    """Average the point likelihood ratio numerically, the effect being the tangent of a uniform angle."""
    nodes, weights = np.polynomial.legendre.leggauss(400)
    effect = c * np.tan(np.pi / 4 * (nodes + 1))
    log_lr = weigh.log_lr_t(t, df, sign * effect, one_sided=True)
    return float(np.log(weights @ np.exp(log_lr) / 2))


@pytest.mark.parametrize("t", [0.3, 2.2, 5.0, 12.0])
@pytest.mark.parametrize(("df", "c"), [(1.5, 0.5), (11.0, 1.3), (30.0, 2.0), (300.0, 6.0), (np.inf, 4.0)])
def test_it_is_the_mean_of_point_likelihood_ratios(t: float, df: float, c: float) -> None:
    towards, away = mean_over_half_cauchy(t, df, c, 1), mean_over_half_cauchy(t, df, c, -1)
    assert float(log_bf_t(t, df, c * c, 1, one_sided=True)) == pytest.approx(towards, rel=1e-9, abs=1e-9)
    assert float(log_bf_t(-t, df, c * c, 1, one_sided=True)) == pytest.approx(away, rel=1e-9, abs=1e-9)
    both = np.logaddexp(towards, away) - np.log(2)
    assert float(log_bf_t(t, df, c * c, 1)) == pytest.approx(both, rel=1e-9, abs=1e-9)


def test_only_the_product_of_scale_and_root_n_counts() -> None:
    np.testing.assert_allclose(log_bf_t(2.5, 20, [4.0, 1.0], [1.0, 2.0]), log_bf_t(2.5, 20, 4.0, 1.0), rtol=1e-15)


@pytest.mark.parametrize("one_sided", [False, True])
def test_many_degrees_of_freedom_tend_to_the_normal(one_sided: bool) -> None:
    normal = log_bf_t([2.5, -2.5], np.inf, 30, 0.7, one_sided=one_sided)
    gap = np.abs(log_bf_t([2.5, -2.5], 1e8, 30, 0.7, one_sided=one_sided) - normal)
    assert gap.max() < 1e-6
    assert gap.max() > 0


def test_a_wrong_direction_keeps_its_digits() -> None:
    """The stronger the effect the wrong way, the less is left, but never nothing.

    Near zero the ratio falls like exp(-ncp s), s = |t| / sqrt(1 + t^2/df), of which the half Cauchy of scale c
    has the mean 2 / (pi c s).
    """
    df, c = 5e6, 10.0
    size = 10.0 ** np.arange(1, 5)
    against = log_bf_t(-size, df, c * c, 1, one_sided=True)
    np.testing.assert_allclose(against, np.log(2 / (np.pi * c * size / np.sqrt(1 + size * size / df))), atol=0.011)
    assert (np.diff(against) < 0).all()


def test_rows_of_a_batch_do_not_depend_on_each_other() -> None:
    rng = np.random.default_rng(3)
    t, df = 10 ** rng.uniform(-2, 3, 40_000) * rng.choice([-1, 1], 40_000), 10 ** rng.uniform(0, 6, 40_000)
    side = rng.random(40_000) < 0.02
    batch = log_bf_t(t, df, df + 1, 0.7071, one_sided=side)
    some = np.concatenate([np.flatnonzero(side)[:60], np.arange(60)])
    alone = [float(log_bf_t(t[i], df[i], df[i] + 1, 0.7071, one_sided=side[i])) for i in some]
    np.testing.assert_allclose(batch[some], alone, rtol=1e-14, atol=1e-15)
    assert np.isfinite(batch).all()


def test_rows_of_correlations_do_not_depend_on_each_other() -> None:
    rng = np.random.default_rng(4)
    r, n, side = rng.uniform(-1, 1, 3000), 10 ** rng.uniform(0.5, 7, 3000), rng.random(3000) < 0.5
    batch = log_bf_r(r, n, 1.0, one_sided=side)
    alone = [float(log_bf_r(r[i], n[i], 1.0, one_sided=side[i])) for i in range(60)]
    np.testing.assert_allclose(batch[:60], alone, rtol=1e-14, atol=1e-15)
    np.testing.assert_array_equal(batch[~side], log_bf_r(r, n, 1.0)[~side])


def test_the_callers_arrays_stay_as_they_were() -> None:
    t, df, side = np.array([-2.5, 3.0]), np.array([8.0, 90.0]), np.array([True, False])
    before = [column.copy() for column in (t, df, side)]
    log_bf_t(t, df, df, 1.0, one_sided=side)
    weigh.log_lr_t(t, df, t, one_sided=side)
    weigh.observed_t(t, df, one_sided=side)
    for column, copy in zip((t, df, side), before, strict=True):
        np.testing.assert_array_equal(column, copy)
        assert column.flags.writeable


@given(columns)
def test_any_doubles_give_an_answer_or_nan(table: NDArray[np.float64]) -> None:
    a, b, c, d, e = table
    of_r = log_bf_r(a, b, c, one_sided=e > 0)
    for result in (log_bf_t(a, b, c, d, one_sided=e > 0), of_r, log_bf_unit_information(a, b)):
        assert result.shape == (5,)
        assert not np.isposinf(result).any()


@pytest.mark.parametrize(
    "row",
    [
        (np.nan, 5, 5, 1),
        (np.inf, 5, 5, 1),
        (1e200, 5, 5, 1),
        (2, 0, 5, 1),
        (2, -1, 5, 1),
        (2, np.nan, 5, 1),
        (2, 5, 0, 1),
        (2, 5, np.inf, 1),
        (2, 5, 5, 0),
        (2, 5, 5, np.inf),
        (2, 5, 1e-300, 1e-300),
        (2, 1e-300, 5, 1),
    ],
)
def test_outside_the_domain_of_t(row: tuple[float, ...]) -> None:
    both = log_bf_t(*np.array([row, (2, 5, 5, 1)]).T)
    assert np.isnan(both[0])
    assert np.isfinite(both[1])


@pytest.mark.parametrize(
    "row", [(1, 9, 1), (-1, 9, 1), (np.nan, 9, 1), (0.2, 2.9, 1), (0.2, np.inf, 1), (0.2, 2e20, 1), (0.2, 9, 0.09),
            (0.2, 9, 2.1)]
)  # fmt: skip
@pytest.mark.parametrize("one_sided", [False, True])
def test_outside_the_domain_of_r(row: tuple[float, ...], one_sided: bool) -> None:
    both = log_bf_r(*np.array([row, (0.2, 9, 1)]).T, one_sided=one_sided)
    assert np.isnan(both[0])
    assert np.isfinite(both[1])


@settings(max_examples=40)
@given(n=st.integers(3, 10**6), kappa=st.floats(0.1, 2), r=st.floats(0, 0.99))
def test_a_stronger_correlation_is_more_evidence(n: int, kappa: float, r: float) -> None:
    weaker, stronger, mirrored = log_bf_r([r, r + 0.005, -r], n, kappa)
    assert weaker < stronger
    assert weaker == mirrored


@settings(max_examples=40)
@given(n=st.integers(3, 10**7), kappa=st.floats(0.1, 2), r=st.floats(-0.99, 0.98))
def test_a_correlation_further_in_its_direction_is_more_evidence(n: int, kappa: float, r: float) -> None:
    weaker, stronger = log_bf_r([r, r + 0.005], n, kappa, one_sided=True)
    assert weaker < stronger


@settings(max_examples=60)
@given(n=st.integers(3, 10**7), kappa=st.floats(0.1, 2), r=st.floats(0, 1, exclude_max=True))
def test_the_two_directions_of_a_correlation_average_to_the_whole(n: int, kappa: float, r: float) -> None:
    along, against = log_bf_r([r, -r], n, kappa, one_sided=True)
    both = float(log_bf_r(r, n, kappa))
    assert np.logaddexp(along, against) - np.log(2) == pytest.approx(both, abs=1e-12, rel=1e-13)
    slack = 2e-13 * max(1, abs(both))
    assert against <= both + slack
    assert both - slack <= along <= both + np.log(2) + slack


@pytest.mark.parametrize("n", [3.0, 3.5, 10.0, 1e3, 1e5, 1e7, 1e20])
@pytest.mark.parametrize("kappa", [0.1, 1.0, 2.0])
def test_every_correlation_has_a_factor_of_each_direction(n: float, kappa: float) -> None:
    """From the smallest double to the last below 1, and the nearer to 1 the more evidence."""
    size = np.array([0.0, 5e-324, 1e-160, 1e-20, 1e-9, 1e-4, 0.1, 0.7, 0.99, 1 - 1e-9, 1 - 2.0**-53])
    along, against = log_bf_r(size, n, kappa, one_sided=True), log_bf_r(-size, n, kappa, one_sided=True)
    assert np.isfinite(along).all()
    assert np.isfinite(against).all()
    # Neighbours that differ by less than the last digit of 1 may stand in any order of that digit.
    assert (np.diff(along) >= -2e-13 * np.maximum(1, np.abs(along[1:]))).all()
    assert (np.diff(against) <= 2e-13 * np.maximum(1, np.abs(against[1:]))).all()


def mean_over_half_prior(r: float, n: float, kappa: float) -> float:
    """Average the density of r, as Fisher's integral of (cosh w - r rho)^(1-n), over the positive correlations."""
    nodes, weights = np.polynomial.legendre.leggauss(300)
    rho, w = (nodes + 1) / 2, 12 * (nodes + 1)
    density = ((np.cosh(w) - r * rho[:, None]) ** (1 - n)) @ weights / (np.cosh(w) ** (1 - n) @ weights)
    prior = (1 - rho**2) ** (1 / kappa - 1)
    return float(np.log((weights * prior * (1 - rho**2) ** ((n - 1) / 2)) @ density / (weights @ prior)))


@pytest.mark.parametrize("r", [-0.8, -0.2, 0.0, 0.4, 0.7])
@pytest.mark.parametrize(("n", "kappa"), [(9, 1.0), (12.0, 0.5), (30.0, 1.0), (25.0, 1 / 3)])
def test_the_half_factor_is_the_mean_of_densities(r: float, n: float, kappa: float) -> None:
    expected = mean_over_half_prior(r, n, kappa)
    assert float(log_bf_r(r, n, kappa, one_sided=True)) == pytest.approx(expected, rel=1e-9, abs=1e-9)


@pytest.mark.parametrize("one_sided", [False, True])
@pytest.mark.parametrize("kappa", [0.1, 0.5, 1.0, 2.0])
def test_no_correlation_has_a_closed_factor(kappa: float, one_sided: bool) -> None:
    """At r = 0 a ratio of beta functions: the mean of (1 - rho^2)^((n-1)/2) over the prior."""
    n, b = np.array([3.0, 10.0, 500.0]), 1 / kappa
    expected = special.betaln(0.5, b + (n - 1) / 2) - special.betaln(0.5, b)
    np.testing.assert_allclose(log_bf_r(0, n, kappa, one_sided=one_sided), expected, rtol=1e-12)


def test_unit_information() -> None:
    """By hand: z = 3 from 100 observations gives exp(4.5)/10."""
    assert float(np.exp(log_bf_unit_information(4.5, 100))) == pytest.approx(9.00171313005, rel=1e-11)
    assert np.isnan(log_bf_unit_information([-0.1, 1, 1, np.inf], [5, 0.5, np.inf, 5])).all()


def test_unit_information_is_near_the_default_in_large_samples() -> None:
    """Both fall like one over root n; at z = 0 their ratio tends to ``sqrt(2/pi) / scale``."""
    n = 1e8
    ratio = float(np.exp(log_bf_t(0, n - 1, n, 0.5) - log_bf_unit_information(0, n)))
    assert ratio == pytest.approx(np.sqrt(2 / np.pi) / 0.5, rel=1e-6)
