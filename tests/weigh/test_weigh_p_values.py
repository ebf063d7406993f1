"""P values and the statistics that belong to them: inverse to each other, and equal to a second library."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from gatecheck import weigh

if TYPE_CHECKING:
    from numpy.typing import NDArray

LOG_P = -np.concatenate([10.0 ** np.linspace(-12, 4, 161), [0.0, np.log(2.0)]])
T_DF = [1.0, 1.5, 3.0, 12.0, 57.3, 1e3, 1e5, 1e7, np.inf]


def assert_returns(values: NDArray[np.float64], back: NDArray[np.float64], bound: float) -> None:
    """The log p of the statistic is the log p that it came from, where the statistic is within a double's range."""
    within = np.isfinite(values)
    assert within.sum() >= 130
    gap = np.abs(back - LOG_P)[within] / np.maximum(1, np.abs(LOG_P[within]))
    assert gap.max() <= bound


@pytest.mark.parametrize("df", T_DF)
@pytest.mark.parametrize("one_sided", [False, True])
def test_t_and_its_p_value_are_inverse(df: float, *, one_sided: bool) -> None:
    t = weigh.t_from_log_p(LOG_P, df, one_sided=one_sided)
    inside = LOG_P < 0 if one_sided else slice(None)
    assert not np.isnan(t[inside]).any()
    assert one_sided or (t >= 0).all()
    if one_sided:
        t = t.copy()
        t[LOG_P == 0] = -1e300 if np.isfinite(df) else -1e3
    back = weigh.log_p_t(np.where(np.isfinite(t), t, 1.0), df, one_sided=one_sided)
    assert_returns(t, back, 1e-13)


@pytest.mark.parametrize("df", [0.5, 1.0, 2.0, 10.0, 100.0, 1e4, 1e6])
def test_chi_squared_and_its_p_value_are_inverse(df: float) -> None:
    x = weigh.chi2_from_log_p(LOG_P, df)
    assert_returns(x, weigh.log_p_chi2(x, df), 1e-12)


@pytest.mark.parametrize("df1", [0.6, 1.0, 3.0, 10.0, 1000.0])
@pytest.mark.parametrize("df2", [1.0, 3.0, 57.3, 1e3, 1e6, np.inf])
def test_f_and_its_p_value_are_inverse(df1: float, df2: float) -> None:
    f = weigh.f_from_log_p(LOG_P, df1, df2)
    assert_returns(f, weigh.log_p_f(np.where(np.isfinite(f), f, 1.0), df1, df2), 1e-10)


@given(t=st.floats(1e-6, 1e4), df=st.floats(1, 1e7), one_sided=st.booleans())
def test_the_t_of_the_p_value_of_t(t: float, df: float, *, one_sided: bool) -> None:
    back = float(weigh.t_from_log_p(weigh.log_p_t(t, df, one_sided=one_sided), df, one_sided=one_sided))
    assert back == pytest.approx(t, rel=1e-9)


def test_ordinary_p_values_are_those_of_a_second_library() -> None:
    rng = np.random.default_rng(11)
    value, df1, df2 = rng.uniform(0.01, 9, 400), rng.uniform(1, 40, 400), rng.uniform(2, 500, 400)
    np.testing.assert_allclose(
        np.exp(weigh.log_p_t(value, df2, one_sided=True)), stats.t.sf(value, df2), rtol=1e-11
    )
    np.testing.assert_allclose(
        np.exp(weigh.log_p_t(-value, df2, one_sided=True)), stats.t.sf(-value, df2), rtol=1e-12
    )
    np.testing.assert_allclose(
        np.exp(weigh.log_p_t(-value, df2, one_sided=False)), 2 * stats.t.sf(value, df2), rtol=1e-11
    )
    np.testing.assert_allclose(np.exp(weigh.log_p_z(value, one_sided=False)), 2 * stats.norm.sf(value), rtol=1e-12)
    np.testing.assert_allclose(np.exp(weigh.log_p_chi2(value, df1)), stats.chi2.sf(value, df1), rtol=1e-11)
    np.testing.assert_allclose(np.exp(weigh.log_p_f(value, df1, df2)), stats.f.sf(value, df1, df2), rtol=1e-10)


@pytest.mark.parametrize("df", [1.0, 3.7, 30.0, 1e6])
def test_nothing_jumps_where_the_method_changes(df: float) -> None:
    """At p = 1e-17 and at p = 1/2."""
    for log_p in (np.log(1e-17), np.log(0.5)):
        around = log_p + np.array([-1e-9, 1e-9])
        for back in (
            weigh.log_p_t(weigh.t_from_log_p(around, df, one_sided=False), df, one_sided=False),
            weigh.log_p_chi2(weigh.chi2_from_log_p(around, df), df),
            weigh.log_p_f(weigh.f_from_log_p(around, 3.0, df), 3.0, df),
        ):
            np.testing.assert_allclose(back[1] - back[0], 2e-9, rtol=1e-3)


def test_p_values_near_one_keep_their_digits() -> None:
    """P(|T| >= t) = 1 - 2 t f(0) for tiny t; f(0) = 1/pi on one degree of freedom."""
    assert float(weigh.log_p_t(1e-12, 1, one_sided=False)) == pytest.approx(-2e-12 / np.pi, rel=1e-11)
    assert float(weigh.log_p_chi2(1e-12, 2)) == pytest.approx(-5e-13, rel=1e-12)
    assert float(weigh.log_p_f(1e-12, 2, 50)) == pytest.approx(-1e-12, rel=1e-11)


@given(log_p=st.floats(-5000, -1e-6), step=st.floats(0.01, 10), df=st.floats(1, 1e6))
def test_a_smaller_p_value_is_a_larger_statistic(log_p: float, step: float, df: float) -> None:
    log_ps = np.array([log_p, log_p - step])
    for larger in (
        weigh.z_from_log_p(log_ps, one_sided=True),
        weigh.chi2_from_log_p(log_ps, df),
        weigh.t_from_log_p(log_ps, df + 20, one_sided=True),
        weigh.f_from_log_p(log_ps, 4, df + 20),
    ):
        assert larger[1] > larger[0]


def test_a_t_beyond_the_largest_double_is_infinite() -> None:
    assert np.isposinf(weigh.t_from_log_p(-1e4, 1, one_sided=False))


def test_quantiles_of_intervals() -> None:
    """Student's t tables: 2.042272 on 30 degrees of freedom at 95 %, 12.706205 on one; 1.959964 for the normal."""
    np.testing.assert_allclose(
        weigh.t_quantile_two_sided(0.95, [1, 30, np.inf]),
        [12.706204736174698, 2.0422724563012373, 1.95996398454005],
        rtol=1e-12,
    )
    assert float(weigh.t_quantile_two_sided(0.0, 5)) == 0.0
