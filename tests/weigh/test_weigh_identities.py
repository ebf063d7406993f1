"""Laws that the likelihood ratios obey whatever the method of computing them."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from gatecheck import weigh

LOG_TWO = np.log(2.0)
sizes = st.floats(1e-6, 1e4)
degrees = st.one_of(st.floats(1, 30), st.floats(1, 1e7))
signs = st.sampled_from([-1.0, 1.0])


def relative(a: float, b: float) -> float:
    return float(abs(a - b) / max(1.0, abs(a), abs(b)))


@given(t=sizes, df=degrees, ncp=sizes)
def test_f_on_one_degree_of_freedom_is_the_square_of_t(t: float, df: float, ncp: float) -> None:
    of_f = float(weigh.log_lr_f(t * t, 1, df, ncp * ncp))
    of_t = float(weigh.log_lr_t(t, df, ncp, one_sided=False))
    # Squaring and taking the root change the arguments by rounding; ncp * t measures what that moves.
    assert abs(of_f - of_t) <= 1e-13 * max(1.0, abs(of_t), ncp * ncp)
    assert relative(float(weigh.observed_f(t * t, 1, df)), float(weigh.observed_t(t, df, one_sided=False))) < 1e-13


@given(z=st.floats(1e-6, 1e3), ncp=st.floats(1e-6, 1e3))
def test_chi_squared_on_one_degree_of_freedom_is_the_square_of_z(z: float, ncp: float) -> None:
    of_chi2 = float(weigh.log_lr_chi2(z * z, 1, ncp * ncp))
    of_z = float(weigh.log_lr_z(z, ncp, one_sided=False))
    assert abs(of_chi2 - of_z) <= 1e-13 * max(1.0, abs(of_z), ncp * ncp)


@given(t=st.floats(0, 12), ncp=st.floats(-12, 12), one_sided=st.booleans())
def test_t_on_ten_million_degrees_of_freedom_is_almost_z(t: float, ncp: float, *, one_sided: bool) -> None:
    df = 1e7
    gap = abs(
        float(weigh.log_lr_t(t, df, ncp, one_sided=one_sided)) - float(weigh.log_lr_z(t, ncp, one_sided=one_sided))
    )
    assert gap <= (1 + max(t, abs(ncp)) ** 4) / df


@pytest.mark.parametrize("df2", [1e9, np.inf])
def test_f_with_many_error_degrees_of_freedom_is_chi_squared_over_its_own(df2: float) -> None:
    x = np.array([0.5, 3.0, 9.0, 20.0])
    np.testing.assert_allclose(
        weigh.log_lr_f(x / 3, 3, df2, 8.0),
        weigh.log_lr_chi2(x, 3, 8.0),
        rtol=0 if np.isinf(df2) else 1e-6,
        atol=1e-6,
    )
    np.testing.assert_allclose(weigh.log_p_f(x / 3, 3, df2), weigh.log_p_chi2(x, 3), atol=1e-6)


def test_infinite_degrees_of_freedom_are_the_normal_distribution() -> None:
    t, ncp = np.array([0.3, -1.7, 4.0]), np.array([2.0, 1.0, -3.0])
    for one_sided in (False, True):
        np.testing.assert_array_equal(
            weigh.log_lr_t(t, np.inf, ncp, one_sided=one_sided), weigh.log_lr_z(t, ncp, one_sided=one_sided)
        )
        np.testing.assert_allclose(
            weigh.log_p_t(t, np.inf, one_sided=one_sided), weigh.log_p_z(t, one_sided=one_sided), rtol=1e-14
        )


@given(t=st.floats(0, 1e3), df=degrees, ncp=st.floats(0, 1e3))
@example(t=0.0, df=30.0, ncp=0.0)
def test_two_sided_is_the_mean_of_the_two_directions(t: float, df: float, ncp: float) -> None:
    towards = float(weigh.log_lr_t(t, df, ncp, one_sided=True))
    away = float(weigh.log_lr_t(-t, df, ncp, one_sided=True))
    mean = float(np.logaddexp(towards, away)) - LOG_TWO
    assert abs(mean - float(weigh.log_lr_t(t, df, ncp, one_sided=False))) <= 1e-13 * max(1.0, ncp * ncp)


@given(t=sizes, df=degrees, ncp=sizes, sign_t=signs, sign_ncp=signs)
def test_signs_do_not_matter_where_no_side_was_chosen(
    t: float, df: float, ncp: float, sign_t: float, sign_ncp: float
) -> None:
    plain = float(weigh.log_lr_t(t, df, ncp, one_sided=False))
    assert float(weigh.log_lr_t(sign_t * t, df, sign_ncp * ncp, one_sided=False)) == plain
    directed = float(weigh.log_lr_t(sign_t * t, df, sign_ncp * ncp, one_sided=True))
    assert float(weigh.log_lr_t(-sign_t * t, df, -sign_ncp * ncp, one_sided=True)) == directed


@given(df=degrees, ncp=st.floats(-1e3, 1e3))
def test_a_statistic_of_zero_speaks_against_any_effect(df: float, ncp: float) -> None:
    """At t = 0 the ratio is exp(-ncp^2/2) on both conventions."""
    for one_sided in (False, True):
        log_lr = float(weigh.log_lr_t(0.0, df, ncp, one_sided=one_sided))
        assert abs(log_lr + ncp * ncp / 2) <= 1e-15 * ncp * ncp


def test_no_non_centrality_is_no_evidence() -> None:
    values = np.array([1e-6, 0.3, 4.0, 900.0])
    for df in (1.0, 11.0, 12.0, 30.0, 1e6):
        for one_sided in (False, True):
            np.testing.assert_array_equal(weigh.log_lr_t(values, df, 0.0, one_sided=one_sided), 0.0)
        np.testing.assert_array_equal(weigh.log_lr_chi2(values, df, 0.0), 0.0)
        np.testing.assert_array_equal(weigh.log_lr_f(values, 3.0, df, 0.0), 0.0)
    np.testing.assert_array_equal(weigh.log_lr_z(values, 0.0, one_sided=False), 0.0)


@given(df=degrees, t=st.floats(0.01, 50), growth=st.floats(1.001, 3), one_sided=st.booleans())
def test_a_larger_t_is_stronger_evidence_for_a_given_effect(
    df: float, t: float, growth: float, *, one_sided: bool
) -> None:
    smaller, larger = weigh.log_lr_t([t, t * growth], df, 2.5, one_sided=one_sided)
    assert larger > smaller


@given(df1=st.floats(0.5, 300), df2=degrees, f=st.floats(0.01, 50), growth=st.floats(1.001, 3))
def test_a_larger_chi_squared_or_f_is_stronger_evidence_for_a_given_effect(
    df1: float, df2: float, f: float, growth: float
) -> None:
    smaller, larger = weigh.log_lr_f([f, f * growth], df1, df2, 6.0)
    assert larger > smaller
    smaller, larger = weigh.log_lr_chi2([f * df1, f * df1 * growth], df1, 6.0)
    assert larger > smaller


@pytest.mark.parametrize("switch", [12.0, 20.0, 30.0, 60.0, 120.0, 250.0])
def test_nothing_jumps_where_the_method_for_t_changes(switch: float) -> None:
    t = np.array([1e-3, 0.5, 2.0, 4.0, 10.0, 40.0])
    for ncp in (2.83, 0.3, 12.0):
        for one_sided in (False, True):
            before = weigh.log_lr_t(t, np.nextafter(switch, 0), ncp, one_sided=one_sided)
            np.testing.assert_allclose(
                weigh.log_lr_t(t, switch, ncp, one_sided=one_sided), before, rtol=1e-13, atol=1e-13
            )


@given(r=st.floats(-0.999999, 0.999999), df=st.floats(1, 1e6))
def test_correlation_and_t_are_inverse(r: float, df: float) -> None:
    assert abs(float(weigh.r_from_t(weigh.t_from_r(r, df), df)) - r) <= 1e-15


def test_known_correlation() -> None:
    """A correlation of -.1331909 on 41: t = -.8605 (R, tests/Examples/stats-Ex.Rout.save, cor.test; seen)."""
    assert float(weigh.t_from_r(-0.133190890463, 41)) == pytest.approx(-0.860504567943, abs=1e-11)


def test_observed_effect_is_the_non_centrality_of_the_statistic() -> None:
    np.testing.assert_array_equal(
        weigh.observed_t([2.5, -2.5], 30, one_sided=[False, False]),
        weigh.log_lr_t(2.5, 30, [2.5, 2.5], one_sided=False),
    )
    assert float(weigh.observed_t(2.5, 30, one_sided=True)) == float(weigh.log_lr_t(2.5, 30, 2.5, one_sided=True))
    assert float(weigh.observed_t(-2.5, 30, one_sided=True)) == 0.0
    assert float(weigh.observed_z(-2.5, one_sided=True)) == 0.0
    assert float(weigh.observed_z(2.5, one_sided=True)) == 2.5**2 / 2
    assert float(weigh.observed_chi2(9.0, 4)) == float(weigh.log_lr_chi2(9.0, 4, 9.0))
    assert float(weigh.observed_f(3.0, 4, 50)) == float(weigh.log_lr_f(3.0, 4, 50, 12.0))
