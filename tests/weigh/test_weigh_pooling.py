"""Pooling: small cases by hand, a second library, laws, and rows that must not spoil their neighbours."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import product

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from hypothesis.extra import numpy as arrays
from numpy.typing import NDArray
from scipy import optimize, special
from statsmodels.stats.meta_analysis import combine_effects

from gatecheck.weigh.pooling import (
    Spread,
    interval,
    log_p_pooled,
    pool_estimated,
    pool_fixed,
    pool_random,
    prediction_interval,
)
from gatecheck.weigh.quantiles import t_quantile_two_sided

FloatArray = NDArray[np.float64]
EVERY_WAY = list(product(Spread, (False, True)))

studies = st.integers(2, 8).flatmap(
    lambda k: st.tuples(
        arrays.arrays(np.float64, k, elements=st.floats(-5, 5)),
        arrays.arrays(np.float64, k, elements=st.floats(0.05, 3)),
    )
)


def test_two_studies_by_hand() -> None:
    """1 and 3, both with standard error 1: mean 2, Q = 2 on 1, half of it excess; tau2 = 1 by both estimators."""
    fixed = pool_fixed([1.0, 3.0], 1.0)
    assert (fixed.estimate[0], fixed.standard_error[0], fixed.q[0], fixed.i2[0], fixed.tau2[0]) == (
        2.0,
        pytest.approx(np.sqrt(0.5)),
        2.0,
        0.5,
        0.0,
    )
    assert float(np.exp(fixed.log_p_q[0])) == pytest.approx(0.15729920705028516, rel=1e-14)
    for spread in Spread:
        pooled = pool_random([1.0, 3.0], 1.0, spread=spread, hartung_knapp=False)
        assert float(pooled.tau2[0]) == pytest.approx(1.0, rel=1e-15)
        assert (pooled.estimate[0], pooled.standard_error[0], pooled.df[0]) == (2.0, pytest.approx(1.0), np.inf)


def test_hartung_knapp_by_hand() -> None:
    """At tau2 = 1 the weighted squares are 1 on 1 degree of freedom: standard error 1, t = 2, Cauchy tails."""
    pooled = pool_random([1.0, 3.0], 1.0, spread=Spread.PAULE_MANDEL, hartung_knapp=True)
    assert [float(pooled.standard_error[0]), float(pooled.df[0])] == pytest.approx([1.0, 1.0], rel=1e-15)
    assert float(np.exp(log_p_pooled(pooled)[0])) == pytest.approx(1 - 2 / np.pi * np.arctan(2), rel=1e-13)
    assert float(np.exp(log_p_pooled(pooled, 1.0)[0])) == pytest.approx(0.5, rel=1e-13)
    low, high = interval(pooled, 0.5)
    assert [low[0], high[0]] == pytest.approx([1.0, 3.0], rel=1e-13)


def test_one_study_stands_for_itself() -> None:
    for pooled in (
        pool_fixed([0.4], [0.2]),
        *(pool_random([0.4], [0.2], spread=spread, hartung_knapp=False) for spread in Spread),
    ):
        figures = (pooled.studies, pooled.q, pooled.log_p_q, pooled.i2, pooled.tau2)
        assert [float(figure[0]) for figure in figures] == [1, 0, 0, 0, 0]
        assert (float(pooled.estimate[0]), float(pooled.standard_error[0])) == pytest.approx((0.4, 0.2), rel=1e-15)
        assert float(np.exp(log_p_pooled(pooled)[0])) == pytest.approx(0.04550026389635842, rel=1e-13)


def test_one_study_has_no_residual_and_predicts_nothing() -> None:
    pooled = pool_random([0.4], [0.2], spread=Spread.PAULE_MANDEL, hartung_knapp=True)
    assert np.isnan(pooled.standard_error[0])
    assert np.isnan(interval(pooled, 0.95)).all()
    assert np.isnan(prediction_interval(pool_fixed([0.4, 0.5], [0.2, 0.2]), 0.95)).all()


def test_studies_that_agree_exactly() -> None:
    """No spread at all: tau2 is zero by both estimators, and Hartung-Knapp's interval has no width and no p."""
    for spread in Spread:
        pooled = pool_random([2.0, 2.0, 2.0], [1.0, 2.0, 4.0], spread=spread, hartung_knapp=True)
        assert (float(pooled.q[0]), float(pooled.i2[0]), float(pooled.tau2[0])) == (0, 0, 0)
        assert (float(pooled.estimate[0]), float(pooled.standard_error[0])) == (2.0, 0.0)
        assert np.isnan(log_p_pooled(pooled)[0])


@settings(max_examples=80, deadline=None)
@given(studies)
def test_against_a_second_library(given_studies: tuple[FloatArray, FloatArray]) -> None:
    """One effect, and one step by moments, as statsmodels has them (it wants Q above zero, and tau2 too)."""
    y, errors = given_studies
    assume(np.ptp(y) > 1e-3)
    with np.errstate(invalid="ignore"):
        theirs = combine_effects(y, errors**2, method_re="chi2")
    fixed = pool_fixed(y, errors)
    assert float(fixed.estimate[0]) == pytest.approx(theirs.mean_effect_fe, rel=1e-9, abs=1e-12)
    assert float(fixed.standard_error[0]) == pytest.approx(theirs.sd_eff_w_fe, rel=1e-12)
    assert float(fixed.q[0]) == pytest.approx(theirs.q, rel=1e-7, abs=1e-12)
    if theirs.tau2 > 0:
        pooled = pool_random(y, errors, spread=Spread.DERSIMONIAN_LAIRD, hartung_knapp=True)
        assert float(pooled.tau2[0]) == pytest.approx(theirs.tau2, rel=1e-6, abs=1e-10)
        assert float(pooled.estimate[0]) == pytest.approx(theirs.mean_effect_re, rel=1e-7, abs=1e-9)
        assert float(pooled.standard_error[0]) == pytest.approx(theirs.sd_eff_w_re_hksj, rel=1e-7, abs=1e-10)


@settings(max_examples=80, deadline=None)
@given(studies)
def test_paule_mandel_against_a_root_finder(given_studies: tuple[FloatArray, FloatArray]) -> None:
    y, errors = given_studies

    def excess(tau2: float) -> float:
        weights = 1 / (errors**2 + tau2)
        return float(weights @ (y - weights @ y / weights.sum()) ** 2 - (y.size - 1))

    root = optimize.brentq(excess, 0, 1e3, xtol=1e-14) if excess(0.0) > 0 else 0.0
    pooled = pool_random(y, errors, spread=Spread.PAULE_MANDEL, hartung_knapp=False)
    assert float(pooled.tau2[0]) == pytest.approx(root, rel=1e-8, abs=1e-11)


def test_paule_mandel_far_from_where_it_starts() -> None:
    """Standard errors a million times smaller than the spread, and very unequal."""
    y = np.array([0.0, 1.0, 5.0, -3.0])
    errors = np.array([1e-6, 1e-3, 1e-5, 1.0])
    tau2 = pool_random(y, errors, spread=Spread.PAULE_MANDEL, hartung_knapp=False).tau2[0]
    weights = 1 / (errors**2 + tau2)
    assert float(weights @ (y - weights @ y / weights.sum()) ** 2) == pytest.approx(3.0, rel=1e-12)


def test_groups_in_any_order_are_pooled_as_if_alone() -> None:
    """Forty poolings at once, shuffled, and each as if it stood alone."""
    rng = np.random.default_rng(7)
    groups = rng.integers(0, 40, 300)
    y, errors = rng.normal(size=300), rng.uniform(0.2, 2, 300)
    for spread, hartung_knapp in EVERY_WAY:
        together = pool_random(y, errors, groups, spread=spread, hartung_knapp=hartung_knapp)
        for group in range(40):
            rows = groups == group
            alone = pool_random(y[rows], errors[rows], spread=spread, hartung_knapp=hartung_knapp)
            assert [field[group] for field in together] == pytest.approx(
                [field[0] for field in alone], rel=1e-9, abs=1e-12, nan_ok=True
            )


@settings(max_examples=50, deadline=None)
@given(studies, st.sampled_from([1e-120, 1e-3, 1e6, 1e120]))
def test_units_do_not_matter(given_studies: tuple[FloatArray, FloatArray], unit: float) -> None:
    y, errors = given_studies
    for spread, hartung_knapp in EVERY_WAY:
        one = pool_random(y, errors, spread=spread, hartung_knapp=hartung_knapp)
        other = pool_random(y * unit, errors * unit, spread=spread, hartung_knapp=hartung_knapp)
        assert float(other.estimate[0] / unit) == pytest.approx(float(one.estimate[0]), rel=1e-9, abs=1e-9)
        assert float(other.standard_error[0] / unit) == pytest.approx(
            float(one.standard_error[0]), rel=1e-6, abs=1e-9
        )
        assert float(other.q[0]) == pytest.approx(float(one.q[0]), rel=1e-9, abs=1e-9)


@settings(max_examples=50, deadline=None)
@given(studies)
def test_the_spread_widens(given_studies: tuple[FloatArray, FloatArray]) -> None:
    """Effects that differ leave less certainty than one common effect; a new study still less."""
    y, errors = given_studies
    fixed = pool_fixed(y, errors)
    for spread in Spread:
        pooled = pool_random(y, errors, spread=spread, hartung_knapp=False)
        assert pooled.standard_error[0] >= fixed.standard_error[0] * (1 - 1e-12)
        assert y.min() - 1e-9 <= pooled.estimate[0] <= y.max() + 1e-9
        if y.size > 2:
            low, high = interval(pooled, 0.9)
            new_low, new_high = prediction_interval(pooled, 0.9)
            assert new_low[0] <= low[0] <= high[0] <= new_high[0]


@pytest.mark.parametrize(
    ("estimate", "error"),
    [(np.nan, 1.0), (np.inf, 1.0), (0.0, np.nan), (0.0, np.inf), (0.0, 0.0), (0.0, -1.0)],
)
def test_a_row_that_is_no_estimate_spoils_its_own_group_only(estimate: float, error: float) -> None:
    """Group 0 has the bad row among others, group 1 has it alone, group 2 has no rows, group 3 is sound."""
    y, errors = [1.0, estimate, estimate, 1.0, 3.0], [1.0, error, error, 1.0, 1.0]
    groups = [0, 0, 1, 3, 3]
    every = [pool_fixed(y, errors, groups)]
    every += [pool_random(y, errors, groups, spread=spread, hartung_knapp=also) for spread, also in EVERY_WAY]
    for pooled in every:
        assert pooled.studies.tolist() == [2, 1, 0, 2]
        for field in pooled[1:]:
            assert np.isnan(field[:3]).all()
            assert np.isfinite(field[3]) or field[3] == np.inf
        assert np.isnan(log_p_pooled(pooled)[:3]).all()
        assert float(pooled.estimate[3]) == 2.0


@pytest.mark.parametrize("groups", [[0.0, 1.0], [-1, 0], [True, False], ["a", "b"]])
def test_group_numbers_must_be_whole(groups: list[float]) -> None:
    with pytest.raises(ValueError, match=r"^groups must be whole numbers, 0 or above: give each row the number"):
        pool_fixed([1.0, 2.0], [1.0, 1.0], groups)


def test_nothing_to_pool() -> None:
    pooled = pool_random([], [], spread=Spread.PAULE_MANDEL, hartung_knapp=True)
    assert [field.shape for field in pooled] == [(0,)] * 8


SIMULATED = 40_000
COMMON = 1.0


@dataclass(frozen=True)
class Simulated:
    """Poolings of two groups of each size without a difference in the mean: estimated errors, of a fixed seed."""

    sizes: tuple[int, ...]
    deviations: tuple[float, ...]
    spread: float = 0.0

    def columns(self) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray, NDArray[np.int64]]:
        """Estimates, their true and their estimated errors, degrees of freedom, and the group of each."""
        rng = np.random.default_rng([20_261_201, *self.sizes])
        n, shape = np.array(self.sizes, np.float64), (SIMULATED, len(self.sizes))
        errors, df = (
            np.broadcast_to(np.array(self.deviations) * np.sqrt(2 / n), shape),
            np.broadcast_to(2 * n - 2, shape),
        )
        estimates = rng.normal(size=shape) * np.hypot(errors, self.spread)
        estimated = errors * np.sqrt(rng.chisquare(df) / df)
        groups = np.repeat(np.arange(SIMULATED), len(self.sizes))
        return estimates.ravel(), errors.ravel(), estimated.ravel(), df.ravel(), groups

    def rejected(self, *, random: bool) -> tuple[float, float]:
        """The share that is significant at 5 %, with its standard error."""
        estimates, _, estimated, df, groups = self.columns()
        pooled = pool_estimated(estimates, estimated, df, df + 2, groups, random=random)
        share = float((np.exp(log_p_pooled(pooled)) <= 0.05).mean())
        return share, (share * (1 - share) / SIMULATED) ** 0.5

    def rejected_under_one_effect(self) -> tuple[float, float]:
        """The same for one common effect, with the normal estimates integrated out: they and the errors are apart.

        The pooled estimate is linear in the estimates, so that of 1 among zeros is the share of a study.
        """
        _, errors, estimated, df, groups = self.columns()
        variance, k = np.zeros(SIMULATED), len(self.sizes)
        for study in range(k):
            one = np.tile(np.arange(k) == study, SIMULATED).astype(np.float64)
            pooled = pool_estimated(one, estimated, df, df + 2, groups, random=False)
            variance += (pooled.estimate * errors[study::k]) ** 2
        critical = t_quantile_two_sided(0.95, pooled.df) * pooled.standard_error
        probability = 2 * special.ndtr(-critical / np.sqrt(variance))
        return float(probability.mean()), float(probability.std() / SIMULATED**0.5)


@pytest.mark.parametrize("count", [2, 3])
@pytest.mark.parametrize("n", [2, 3, 5, 10])
def test_small_samples_keep_the_type_one_error(n: int, count: int) -> None:
    """Two or three studies without effect are significant at 5 % in at most 5 %, within one standard error.

    Taken as normal 28 % of two studies of 2 per group were, 16 % of 3, 10 % of 5 and 7.3 % of 10.
    """
    studied = Simulated((n,) * count, (COMMON,) * count)
    fixed, fixed_error = studied.rejected_under_one_effect()
    random, random_error = studied.rejected(random=True)
    assert fixed_error < 0.0004
    assert 0.03 < fixed <= 0.05 + fixed_error
    assert random <= 0.05 + random_error


@pytest.mark.parametrize("count", [2, 3])
@pytest.mark.parametrize("n", [16, 20, 40])
def test_weights_from_estimated_errors_hardly_touch_the_type_one_error(n: int, count: int) -> None:
    """Meier's factor is the first term of a series: what is left at 30 degrees of freedom is a thousandth."""
    fixed, _ = Simulated((n,) * count, (COMMON,) * count).rejected_under_one_effect()
    assert 0.0485 < fixed < 0.0515


def test_the_two_ways_to_simulate_agree() -> None:
    studied = Simulated((3, 20), (3.0, 1.0))
    counted, error = studied.rejected(random=False)
    assert counted == pytest.approx(studied.rejected_under_one_effect()[0], abs=3 * error)


@pytest.mark.parametrize(
    ("sizes", "deviations"), [((3, 3), (1, 3)), ((3, 20), (1, 3)), ((3, 20), (3, 1)), ((2, 2, 20), (1, 1, 1))]
)
def test_units_that_vary_otherwise_do_little_harm(sizes: tuple[int, ...], deviations: tuple[float, ...]) -> None:
    """Weights that suppose alike what is not cost precision; the errors of the rows' own keep near 5 %."""
    assert 0.04 < Simulated(sizes, deviations).rejected_under_one_effect()[0] < 0.055


def test_three_studies_with_spread_keep_the_type_one_error_better_than_for_one_effect() -> None:
    """Effects about 0 that differ by half a deviation, 50 per group: near 5 % on 2 df, and 46 % for one effect."""
    studied = Simulated((50,) * 3, (COMMON,) * 3, spread=0.5)
    assert studied.rejected(random=True)[0] < 0.08
    assert studied.rejected(random=False)[0] > 0.4


def test_two_small_studies_by_hand() -> None:
    """Sizes 1 and 3 weigh 2 and 4: 3.5; errors 1 and 2 give sqrt(1/16 + 9/4) on Satterthwaite's df."""
    pooled = pool_estimated([2.0, 4.0], [1.0, 2.0], [2.0, 6.0], [1.0, 3.0], random=False)
    own = np.array([1 / 16, 9 / 4])
    assert (pooled.estimate[0], pooled.standard_error[0]) == pytest.approx((3.5, own.sum() ** 0.5))
    assert pooled.df[0] == pytest.approx(own.sum() ** 2 / (own**2 / [2, 6]).sum())


@settings(max_examples=60, deadline=None)
@given(studies)
def test_known_standard_errors_give_the_normal_result(given_studies: tuple[FloatArray, FloatArray]) -> None:
    """The limit of many degrees of freedom: the weighted mean of one effect with its z."""
    y, errors = given_studies
    known, fixed = pool_estimated(y, errors, np.inf, np.nan, random=False), pool_fixed(y, errors)
    assert known.df[0] == np.inf
    assert [known.estimate[0], known.standard_error[0]] == pytest.approx(
        [fixed.estimate[0], fixed.standard_error[0]], rel=1e-12, abs=1e-12
    )
    many = pool_estimated(y, errors, 1e9, np.nan, random=False)
    assert float(log_p_pooled(many)[0]) == pytest.approx(float(log_p_pooled(fixed)[0]), rel=1e-4, abs=1e-9)


@settings(max_examples=60, deadline=None)
@given(studies, st.sampled_from([4.0, 60.0]))
def test_spread_is_taken_as_by_hartung_and_knapp(given_studies: tuple[FloatArray, FloatArray], df: float) -> None:
    """Never on more than one degree of freedom less than there are studies, nor narrower than their interval."""
    y, errors = given_studies
    assume(y.size > 2)
    pooled = pool_estimated(y, errors[0], df, 1.0, random=True)
    theirs = pool_random(y, errors[0], spread=Spread.PAULE_MANDEL, hartung_knapp=True)
    if pooled.tau2[0] > 0:
        assert pooled.df[0] <= theirs.df[0]
        assert pooled.standard_error[0] >= theirs.standard_error[0] * (1 - 1e-9)
    else:
        assert pooled.df[0] == pytest.approx(df * y.size)


def test_a_row_that_is_no_estimate_spoils_its_own_group_of_small_studies_only() -> None:
    pooled = pool_estimated(
        [1.0, np.nan, 1.0, 3.0], [1.0, 1.0, 1.0, 1.0], [2.0, 2.0, 2.0, 2.0], 1.0, [0, 0, 2, 2], random=True
    )
    for field in pooled[1:]:
        assert np.isnan(field[:2]).all()
        assert np.isfinite(field[2])
    assert (pooled.estimate[2], pooled.df[2]) == (2.0, pytest.approx(4.0))
