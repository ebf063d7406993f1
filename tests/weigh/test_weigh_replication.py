"""Replication criteria and sceptical priors: laws, simulation-free second routes, and extreme input."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from mpmath import mp, mpf
from numpy.typing import NDArray
from scipy import integrate, special

from gatecheck.weigh.pooling import interval, pool_fixed
from gatecheck.weigh.replication import (
    Calibration,
    advocacy_limit,
    log_p_difference,
    log_p_same_direction,
    log_sceptical_level,
    log_sceptical_p,
    prediction_limits,
    replication_probability,
    sceptical_limit,
    sceptical_prior_variance,
)

Z975 = float(-special.ndtri(0.025))
estimates = st.floats(-8, 8)
errors = st.floats(0.05, 5)
ratios = st.floats(1e-3, 1e3)


def log_sceptical(
    z_o: float, z_r: float, ratio: float, calibration: Calibration, *, one_sided: bool = True
) -> float:
    return float(log_sceptical_p(z_o, z_r, ratio, calibration=calibration, one_sided=one_sided))


@pytest.mark.parametrize(
    ("original", "replication", "p"),
    [(0.5, 1.96, 0.0249978951), (-0.5, 1.96, 0.9750021049), (-3, -1.96, 0.0249978951)],
)
def test_the_same_direction(original: float, replication: float, p: float) -> None:
    assert float(np.exp(log_p_same_direction(original, 2 * replication, 2.0))) == pytest.approx(p, rel=1e-8)


@given(estimates, errors, estimates, errors)
def test_either_estimate_lies_in_the_prediction_interval_of_the_other(
    original: float, se_o: float, replication: float, se_r: float
) -> None:
    """The criterion is the same from both sides and agrees with the limits."""
    log_p = float(log_p_difference(original, se_o, replication, se_r))
    assert log_p == pytest.approx(float(log_p_difference(replication, se_r, original, se_o)), rel=1e-12)
    if abs(log_p - np.log(0.05)) > 1e-9:
        for mine, my_se, other, other_se in (
            (original, se_o, replication, se_r),
            (replication, se_r, original, se_o),
        ):
            low, high = prediction_limits(mine, my_se, other_se, 0.95)
            assert (low < other < high) == (log_p > np.log(0.05))


def test_the_confidence_interval_of_the_replication() -> None:
    """With the original taken as exact: 0.2 + 1.96 x 0.1 holds .39 and not .40."""
    log_p = log_p_difference([0.39, 0.40], 0.0, 0.2, 0.1)
    assert (log_p > np.log(0.05)).tolist() == [True, False]


@given(st.floats(2.0, 30), errors, st.floats(0.5, 0.95))
def test_the_critical_sceptical_prior_moves_the_posterior_to_no_effect(z: float, se: float, level: float) -> None:
    """Data and prior pooled have an interval that ends at zero; a narrower prior takes it beyond."""
    estimate = z * se
    prior_sd = float(np.sqrt(sceptical_prior_variance(estimate, se, level)))
    if z - float(-special.ndtri((1 - level) / 2)) > 1e-6:
        ends = [interval(pool_fixed([estimate, 0], [se, prior_sd * k]), level)[0][0] / se for k in (1, 0.5)]
        assert float(ends[0]) == pytest.approx(0, abs=1e-6)
        assert ends[1] < 0


@given(st.floats(0.02, 1.9), errors)
def test_the_advocacy_prior_makes_the_posterior_just_credible(z: float, se: float) -> None:
    """A prior whose 95 % interval reaches from no effect to the limit, pooled with the data."""
    limit = float(advocacy_limit(z * se, se, 0.95))
    low, _ = interval(pool_fixed([z * se, limit / 2], [se, limit / (2 * Z975)]), 0.95)
    assert float(low[0] / se) == pytest.approx(0, abs=1e-9)


@pytest.mark.parametrize("estimate", [1.9, -1.9, 0.0])
def test_a_result_that_is_not_significant_needs_no_sceptic(estimate: float) -> None:
    assert np.isnan(sceptical_prior_variance(estimate, 1.0, 0.95))
    assert np.isnan(sceptical_limit(estimate, 1.0, 0.95))


@pytest.mark.parametrize("estimate", [2.0, -2.0, 0.0])
def test_a_significant_result_or_none_at_all_needs_no_advocate(estimate: float) -> None:
    assert np.isnan(advocacy_limit(estimate, 1.0, 0.95))


@given(st.floats(0.1, 20), st.floats(0.1, 20), ratios)
def test_the_nominal_value_solves_its_equation(z_o: float, z_r: float, ratio: float) -> None:
    """(z_o^2/s^2 - 1)(z_r^2/s^2 - 1) = ratio, and it is at least both p values."""
    log_p = log_sceptical(z_o, z_r, ratio, Calibration.NOMINAL)
    s = float(-special.ndtri_exp(log_p))
    assert ratio * s**4 == pytest.approx((z_o**2 - s**2) * (z_r**2 - s**2), rel=1e-7, abs=1e-9 * min(z_o, z_r) ** 4)
    assert log_p >= float(special.log_ndtr(-min(z_o, z_r))) - 1e-12


@given(st.floats(2, 6), ratios)
def test_success_by_the_nominal_value_means_that_the_sceptic_is_refuted(z_o: float, ratio: float) -> None:
    """At the nominal value the replication is just significant against the sufficiently sceptical prior.

    The replication's estimate under that prior has variance ``tau^2 + se_r^2`` around zero (Held 2020).
    """
    z_r = 2.5
    s = float(-special.ndtri_exp(log_sceptical(z_o, z_r, ratio, Calibration.NOMINAL)))
    tau2 = sceptical_prior_variance(z_o, 1.0, 1 - 2 * special.ndtr(-s))
    assert float(z_r / np.sqrt(ratio) / np.sqrt(tau2 + 1 / ratio)) == pytest.approx(s, rel=1e-6)


@given(st.floats(0.2, 8), ratios)
def test_golden_needs_an_estimate_as_large_of_a_borderline_original(alpha_z: float, ratio: float) -> None:
    """Original just significant, replication's estimate equal, its standard error very small: just success."""
    log_alpha = float(special.log_ndtr(-alpha_z))
    equal = log_sceptical(alpha_z, alpha_z * np.sqrt(ratio), ratio, Calibration.GOLDEN)
    smaller = log_sceptical(alpha_z, 0.99 * alpha_z * np.sqrt(ratio), ratio, Calibration.GOLDEN)
    assert equal >= smaller or smaller > log_alpha
    assert smaller > log_alpha


def test_golden_limit_is_reached_by_a_large_replication() -> None:
    log_p = log_sceptical(2.0, 2.0 * 1e4, 1e8, Calibration.GOLDEN)
    assert log_p == pytest.approx(float(special.log_ndtr(-2.0)), rel=1e-6)


@settings(max_examples=30, deadline=None)
@given(st.floats(0.05, 12), st.floats(1e-4, 1e4))
def test_controlled_against_integration(s: float, ratio: float) -> None:
    """P(both above zero, sceptical z at least s): over the original's z, by adaptive quadrature, scaled."""
    peak = s * np.sqrt(1 + np.sqrt(ratio))

    def integrand(z: float) -> float:
        over = np.sqrt(1 + ratio / ((z / s - 1) * (z / s + 1))) * s
        return float(np.exp((peak - z) * (peak + z) / 2 + special.log_ndtr(-over) + peak**2 / 2))

    parts = [s + (peak - s) * k for k in (0, 0.5, 1, 1.5, 2)] + [peak + 3, peak + 12]
    total = sum(
        integrate.quad(integrand, a, b, epsabs=0, epsrel=1e-10, limit=400)[0]
        for a, b in zip(sorted(parts)[:-1], sorted(parts)[1:], strict=True)
        if b > a
    )
    expected = (np.log(total / np.sqrt(2 * np.pi)) - peak**2) / 2
    z_o = s * 2.0
    z_r = s * np.sqrt(1 + ratio / 3)
    assert log_sceptical(z_o, z_r, ratio, Calibration.CONTROLLED) == pytest.approx(expected, rel=1e-8, abs=1e-8)


@pytest.mark.parametrize("z", [1e-300, 1e-8, 0.01, 1, 8, 40, 300, 1e5, 1e100])
def test_controlled_of_equal_studies_in_closed_form(z: float) -> None:
    """For equal standard errors 1/s^2 is a sum of two Levy variables: P = (1 - Phi(2 s))/2."""
    log_p = log_sceptical(z * np.sqrt(2), z * np.sqrt(2), 1.0, Calibration.CONTROLLED)
    assert log_p == pytest.approx(float(special.log_ndtr(-2 * z) - np.log(2)) / 2, rel=1e-12)


@pytest.mark.parametrize("log_alpha", [-0.7, -3.0, -1e3, -1e300])
@pytest.mark.parametrize("ratio", [1e-300, 1e-10, 1e10, 1e300])
def test_controlled_level_for_studies_of_very_different_size(log_alpha: float, ratio: float) -> None:
    """Never stricter than two significant studies, which it becomes as the ratio goes to zero."""
    level = float(log_sceptical_level(log_alpha, ratio, calibration=Calibration.CONTROLLED))
    assert log_alpha * (1 + 1e-14) <= level <= -np.log(2)
    if ratio == 1e-300:
        assert level == pytest.approx(log_alpha, rel=1e-13)


@pytest.mark.parametrize(("z", "ratio"), [(0.3, 1e-100), (2.0, 1e-20), (20.0, 1e6), (2.0, 1e20)])
def test_controlled_for_studies_of_very_different_size(z: float, ratio: float) -> None:
    """The same integral in 20 digits."""
    s, c = mpf(z), mpf(ratio)
    with mp.workdps(20):
        root = mp.sqrt(c)
        end = min(max(-mp.log(root), 0) + 160, mp.acosh(1 + 90 / (s * s * root)))

        def part(v: mpf) -> mpf:
            kappa = root * mp.cosh(v)
            weight = (kappa + c) / (2 * mp.sqrt(1 + 2 * kappa + c) * (1 + kappa))
            return weight * mp.exp(-s * s * root * (mp.cosh(v) - 1))

        total = mp.quad(part, mp.linspace(0, end, 16))
        expected = float((mp.log(total / mp.pi) - s * s * (1 + root)) / 2)
    z_o, z_r = z * 2.0, z * np.sqrt(1 + ratio / 3)
    assert log_sceptical(z_o, z_r, ratio, Calibration.CONTROLLED) == pytest.approx(expected, rel=1e-10)


def test_controlled_keeps_the_type_i_error() -> None:
    """Half a million pairs without effect, seeded: successes at .2 in one direction, within 4.5 errors of .04."""
    rng = np.random.default_rng(20)
    z_o, z_r = rng.normal(size=(2, 500_000))
    for ratio in (0.3, 4.0):
        level = log_sceptical_level(np.log(0.2), ratio, calibration=Calibration.CONTROLLED)
        log_p = log_sceptical_p(z_o, z_r, ratio, calibration=Calibration.NOMINAL, one_sided=True)
        share = float(((log_p <= level) & (z_o > 0)).mean())
        assert share == pytest.approx(0.04, abs=4.5 * np.sqrt(0.04 * 0.96 / z_o.size))


@settings(max_examples=20, deadline=None)
@given(st.sampled_from(Calibration), st.floats(-300, -0.75), ratios, st.floats(0.3, 30))
def test_levels_and_values_say_the_same(calibration: Calibration, log_alpha: float, ratio: float, z: float) -> None:
    """Nominal value at most the level just where the calibrated value is at most alpha."""
    level = float(log_sceptical_level(log_alpha, ratio, calibration=calibration))
    s = float(-special.ndtri_exp(level))
    z_o, z_r = s * 2.0, s * np.sqrt(1 + ratio / 3)
    assert log_sceptical(z_o, z_r, ratio, Calibration.NOMINAL) == pytest.approx(level, rel=1e-9)
    assert log_sceptical(z_o, z_r, ratio, calibration) == pytest.approx(log_alpha, rel=1e-9)
    nominal, calibrated = (log_sceptical(z, z, ratio, each) for each in (Calibration.NOMINAL, calibration))
    if abs(nominal - level) > 1e-9:
        assert (nominal < level) == (calibrated < log_alpha)


@pytest.mark.parametrize("calibration", list(Calibration))
def test_directions_and_sides(calibration: Calibration) -> None:
    """Both signs turned change nothing; one turned mirrors the one-sided value and not the two-sided one."""
    one = log_sceptical(2.5, 1.5, 2, calibration)
    both = log_sceptical(2.5, 1.5, 2, calibration, one_sided=False)
    assert log_sceptical(-2.5, -1.5, 2, calibration) == one
    assert np.exp(log_sceptical(2.5, -1.5, 2, calibration)) == pytest.approx(1 - np.exp(one), rel=1e-14)
    assert log_sceptical(-2.5, 1.5, 2, calibration, one_sided=False) == both == pytest.approx(one + np.log(2))


@pytest.mark.parametrize("calibration", list(Calibration))
@pytest.mark.parametrize(("z_o", "z_r"), [(0.0, 3.0), (3.0, 0.0), (0.0, 0.0)])
def test_no_effect_at_all_in_one_study(calibration: Calibration, z_o: float, z_r: float) -> None:
    assert log_sceptical(z_o, z_r, 2, calibration) == pytest.approx(np.log(0.5), rel=1e-14)
    assert log_sceptical(z_o, z_r, 2, calibration, one_sided=False) == pytest.approx(0.0, abs=1e-14)


@pytest.mark.parametrize(
    ("z_o", "z_r", "ratio"), [(200, 150, 0.5), (38.5, 1e3, 40), (1e3, 5, 1e-6), (3, 1e6, 1e12)]
)
def test_the_nominal_value_far_out_to_forty_digits(z_o: float, z_r: float, ratio: float) -> None:
    with mp.workdps(40):
        a, b, c = mpf(z_o) ** 2, mpf(z_r) ** 2, mpf(ratio)
        squared = 2 * a * b / (a + b + mp.sqrt((a + b) ** 2 - 4 * (1 - c) * a * b))
        expected = float(mp.log(mp.erfc(mp.sqrt(squared / 2)) / 2))
    assert log_sceptical(z_o, z_r, ratio, Calibration.NOMINAL) == pytest.approx(expected, rel=1e-13)


def test_replication_probability_by_hand() -> None:
    """Four times as many units double z: 2 x 1.96 - 1.96, over sqrt(5) where the original is uncertain too."""
    as_observed, flat_prior = (
        float(replication_probability(-Z975, 4, np.log(0.025), predictive=predictive))
        for predictive in (False, True)
    )
    assert as_observed == pytest.approx(0.975, rel=1e-12)
    assert flat_prior == pytest.approx(float(special.ndtr(Z975 / np.sqrt(5))), rel=1e-12)


SOUND: dict[Callable[..., NDArray[np.float64]], list[float]] = {
    log_p_same_direction: [1.0, 2.0, 1.0],
    log_p_difference: [1.0, 1.0, 2.0, 1.0],
    lambda *x: prediction_limits(*x)[0]: [1.0, 1.0, 1.0, 0.95],
    lambda *x: replication_probability(*x, predictive=True): [2.0, 1.0, -3.0],
    sceptical_prior_variance: [3.0, 1.0, 0.95],
    sceptical_limit: [3.0, 1.0, 0.95],
    advocacy_limit: [1.0, 1.0, 0.95],
    lambda *x: log_sceptical_p(*x, calibration=Calibration.CONTROLLED, one_sided=False): [2.0, 3.0, 1.0],
    lambda *x: log_sceptical_level(*x, calibration=Calibration.CONTROLLED): [-3.0, 1.0],
}


@pytest.mark.parametrize("function", list(SOUND))
def test_rows_outside_the_domain_are_nan_and_spoil_no_other(function: Callable[..., NDArray[np.float64]]) -> None:
    sound = SOUND[function]
    alone = float(function(*sound))
    assert np.isfinite(alone)
    for place in range(len(sound)):
        for bad in (np.nan, np.inf, -np.inf):
            columns = [np.array([value, value, value]) for value in sound]
            columns[place][1] = bad
            result = function(*columns)
            assert result[[0, 2]].tolist() == [alone, alone]
            assert np.isnan(result[1])


@pytest.mark.parametrize(
    "result",
    [
        log_p_same_direction(0.0, 1.0, 1.0),
        log_p_same_direction(1.0, 1.0, 0.0),
        log_p_difference(1.0, -1.0, 1.0, 1.0),
        log_p_difference(1.0, 1.0, 1.0, 0.0),
        prediction_limits(1.0, 0.0, 1.0, 0.95)[0],
        prediction_limits(1.0, 1.0, 1.0, 1.5)[1],
        replication_probability(2.0, 0.0, -3.0, predictive=True),
        replication_probability(2.0, 1.0, 0.0, predictive=True),
        sceptical_prior_variance(3.0, -1.0, 0.95),
        sceptical_prior_variance(3.0, 1.0, 0.0),
        sceptical_limit(3.0, 0.0, 0.95),
        advocacy_limit(1.0, 1.0, -0.1),
        log_sceptical_p(2.0, 2.0, 0.0, calibration=Calibration.NOMINAL, one_sided=True),
        log_sceptical_level(np.log(0.5), 1.0, calibration=Calibration.GOLDEN),
    ],
)
def test_what_lies_on_the_wrong_side_of_a_bound_is_nan(result: NDArray[np.float64]) -> None:
    assert result.shape == ()
    assert np.isnan(result)
