"""Evidence bounds: their order, their attainment, their edges."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from gatecheck import weigh
from gatecheck.weigh.bounds import (
    log_lr_folded_bound,
    log_lr_local_normal_bound,
    log_lr_normal_bound,
    log_lr_t_bound,
    log_umpbt_threshold,
    umpbt_t,
    umpbt_z,
)

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray


@given(st.floats(-1e3, 1e3))
def test_the_wider_the_class_the_larger_the_bound(z: float) -> None:
    local, folded, free = log_lr_local_normal_bound(z), log_lr_folded_bound(z), log_lr_normal_bound(z)
    assert 0 <= local <= folded * (1 + 1e-14) + 1e-300
    assert folded <= free


@given(z=st.floats(-40, 40), effect=st.floats(0, 45))
def test_no_pair_of_opposite_effects_beats_the_folded_bound(z: float, effect: float) -> None:
    reached = float(weigh.log_lr_z(z, effect, one_sided=False))
    assert reached <= float(log_lr_folded_bound(z)) * (1 + 1e-14) + 1e-14


@given(st.floats(1.001, 40))
def test_some_pair_of_opposite_effects_reaches_the_folded_bound(z: float) -> None:
    effects = np.linspace(0, z, 4001)
    best = weigh.log_lr_z(z, effects, one_sided=False).max()
    assert best == pytest.approx(float(log_lr_folded_bound(z)), abs=1e-4)


def test_folded_bound_of_the_customary_z() -> None:
    """The largest value of exp(-d^2/2) cosh(1.96 d), computed to 50 digits; at d = 1.96 it is 3.414780."""
    assert float(np.exp(log_lr_folded_bound(1.96))) == pytest.approx(3.4147860869134, rel=1e-12)


@given(z=st.floats(0, 30), variance=st.floats(0, 1e4))
def test_no_normal_prior_beats_the_local_bound(z: float, variance: float) -> None:
    reached = z * z / 2 * variance / (1 + variance) - np.log1p(variance) / 2
    bound = float(log_lr_local_normal_bound(z))
    assert reached <= bound + 1e-12
    best = max(z * z - 1, 0.0)
    assert bound == pytest.approx(z * z / 2 * best / (1 + best) - np.log1p(best) / 2, abs=1e-12, rel=1e-12)


@settings(max_examples=50)
@given(t=st.floats(-1e3, 1e3), df=st.floats(0.5, 1e6))
def test_the_profile_bound_of_t_exceeds_any_alternative(t: float, df: float) -> None:
    bound = float(log_lr_t_bound(t, df))
    reached = weigh.log_lr_t(t, df, np.linspace(-2, 2, 9) * t, one_sided=True)
    assert (reached <= bound * (1 + 1e-12) + 1e-12).all()


def test_the_profile_bound_of_t_at_its_ends() -> None:
    np.testing.assert_allclose(log_lr_t_bound([3.0, -3.0, 0.0], [np.inf, np.inf, 7.0]), [4.5, 4.5, 0.0], rtol=1e-15)
    # Beyond what can be squared: (df+1) log(|t| / sqrt(df)).
    assert float(log_lr_t_bound(1e200, 3)) == pytest.approx(4 * (200 * np.log(10) - np.log(3) / 2), rel=1e-14)
    assert np.isnan(log_lr_t_bound([np.nan, np.inf, 1, 1], [5, 5, 0, np.nan])).all()


@pytest.mark.parametrize("bound", [log_lr_normal_bound, log_lr_local_normal_bound, log_lr_folded_bound])
def test_what_cannot_be_squared_has_no_bound(bound: Callable[..., NDArray[np.float64]]) -> None:
    z = np.array([np.nan, np.inf, -np.inf, 1e151, 0.0])
    result = bound(z)
    assert np.isnan(result[:4]).all()
    assert result[4] == 0.0


@given(alpha=st.floats(1e-300, 0.499), side=st.booleans())
def test_the_critical_value_has_the_size_asked_for(alpha: float, side: bool) -> None:
    critical = umpbt_z(log_umpbt_threshold(alpha, one_sided=side))
    assert float(weigh.log_p_z(critical, one_sided=side)) == pytest.approx(np.log(alpha), rel=1e-11, abs=1e-11)


def test_two_sided_is_one_sided_at_half_the_size() -> None:
    alpha = np.array([0.5, 0.05, 1e-7])
    np.testing.assert_allclose(
        log_umpbt_threshold(alpha, one_sided=False), log_umpbt_threshold(alpha / 2, one_sided=True), rtol=1e-13
    )


def test_sizes_and_thresholds_outside_the_domain() -> None:
    assert np.isnan(log_umpbt_threshold([0, -1, 0.51, 2, np.nan], one_sided=True)).all()
    np.testing.assert_allclose(log_umpbt_threshold([0.5, 1.0], one_sided=[True, False]), [0, 0], atol=1e-30)
    assert np.isnan(umpbt_z([-1, np.nan, np.inf])).all()
    assert np.isnan(umpbt_t([-1, np.nan, 3, 3], [5, 5, 0, np.nan])).all()
    assert np.isposinf(umpbt_t(1e5, 1))


def test_the_alternative_for_t_tends_to_that_for_z() -> None:
    size = np.log(25)
    np.testing.assert_allclose(umpbt_t(size, [1e9, np.inf]), umpbt_z(size), rtol=1e-8)
    assert float(umpbt_t(size, np.inf)) == float(umpbt_z(size))
    assert float(umpbt_t(size, 10)) > float(umpbt_z(size))
