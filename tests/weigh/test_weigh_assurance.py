"""The assurance of standing: inverse of the likelihood ratio, equal where tests are, and right by simulation."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from gatecheck import weigh
from gatecheck.weigh import planned as tests
from gatecheck.weigh.assurance import Weighing, assurance, least_value, log_lr, log_p_of
from gatecheck.weigh.noncentral import upper_tail_t
from gatecheck.weigh.power import (
    power_anova,
    power_chi2,
    power_correlation_exact,
    power_log_rank,
    power_one_sample_t,
    power_proportions_arcsine,
    power_two_sample_t,
    power_two_sample_z,
)

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

NO_P = 0.0
SCALE = math.sqrt(2) / 2
N = np.array([4.0, 11.0, 60.0, 3000.0])


def every_test(one_sided: bool) -> dict[str, tests.Planned]:
    """Each test at several sizes."""
    return {
        "one-sample": tests.one_sample_t(0.4, N, one_sided=one_sided, scale=SCALE),
        "two-sample": tests.two_sample_t(0.4, N, 3 * N, one_sided=one_sided, scale=SCALE),
        "correlation": tests.correlation(0.3, N + 1, one_sided=one_sided),
        "one-proportion": tests.one_proportion(0.4, N, one_sided=one_sided),
        "two-proportions": tests.two_proportions(0.4, N, 2 * N, one_sided=one_sided),
        "F of 2": tests.one_way_f(0.2, 2, N, scale=SCALE),
        "F of 5": tests.one_way_f(0.2, 5, N, scale=SCALE),
        "chi-squared on 1": tests.chi_squared(0.3, 1, N),
        "chi-squared on 4": tests.chi_squared(0.3, 4, N),
        "log-rank": tests.log_rank(0.4, 2.0, N, one_sided=one_sided),
    }


EVERY = [(name, side) for side in (False, True) for name in every_test(side)]


@pytest.mark.parametrize(("name", "one_sided"), EVERY)
@pytest.mark.parametrize("weighing", Weighing)
def test_at_the_least_value_the_ratio_is_the_wanted_one(name: str, one_sided: bool, weighing: Weighing) -> None:
    planned = every_test(one_sided)[name]
    target = math.log(19)

    least = least_value(planned, [(weighing, target)], NO_P)

    known = np.isfinite(least)
    reached = log_lr(planned, weighing, np.where(known, least, 1.0))
    np.testing.assert_allclose(reached[known], target, rtol=1e-8)
    if weighing == Weighing.OBSERVED_EFFECT:
        assert known.all()
    # Several effects, one-sided approximations and events without their units have no default prior.
    if weighing == Weighing.DEFAULT_PRIOR and np.isnan(reached).any():
        assert not known.any()
        assert name in {"F of 5", "chi-squared on 4", "log-rank", "one-proportion", "two-proportions"}


@pytest.mark.parametrize(
    ("planned", "power"),
    # The probability of p <= .05 is the power by functions of their own, which count both directions.
    [
        (tests.one_sample_t(0.4, N, one_sided=True, scale=SCALE), power_one_sample_t(0.4, N, 0.05, one_sided=True)),
        (
            tests.two_sample_t(0.4, N, 3 * N, one_sided=True, scale=SCALE),
            power_two_sample_t(0.4, N, 3 * N, 0.05, one_sided=True),
        ),
        (tests.correlation(0.3, N, one_sided=True), power_correlation_exact(0.3, N, 0.05, one_sided=True)),
        (
            tests.two_proportions(0.4, N, 2 * N, one_sided=True),
            power_proportions_arcsine(0.4, N, 2 * N, 0.05, one_sided=True),
        ),
        (tests.one_proportion(0.4, N, one_sided=True), power_two_sample_z(0.4, 2 * N, 2 * N, 0.05, one_sided=True)),
        (tests.one_way_f(0.2, 5, N, scale=SCALE), power_anova(0.2, 5, N, 0.05)),
        (tests.chi_squared(0.3, 4, N), power_chi2(0.3, N, 4, 0.05)),
        (
            tests.log_rank(math.log(1.5), 2.0, N, one_sided=True),
            power_log_rank(1 / 1.5, N, 1 / 3, 0.05, one_sided=True),
        ),
    ],
)
def test_for_a_p_alone_the_assurance_is_the_power(planned: tests.Planned, power: Floats) -> None:
    least = least_value(planned, [], math.log(0.05))

    np.testing.assert_allclose(np.exp(log_p_of(planned, least)), 0.05, rtol=1e-9)
    np.testing.assert_allclose(assurance(planned, least), power, rtol=1e-9)


@settings(max_examples=25, deadline=None)
@given(st.floats(0.05, 2), st.integers(3, 5000), st.floats(0.5, 8), st.sampled_from([0, 1, 2, 3]))
def test_two_groups_compared_by_f_are_two_groups_compared_by_t(
    d: float, n: int, target: float, weighing: int
) -> None:
    """F = t^2 and f = d/2; F also counts the direction that t leaves out."""
    sizes = np.array([float(n)])
    by_t = tests.two_sample_t(d, sizes, sizes, one_sided=False, scale=SCALE)
    by_f = tests.one_way_f(d / 2, 2, sizes, scale=SCALE)
    wanted = [(Weighing(weighing), target)]

    t, f = least_value(by_t, wanted, NO_P), least_value(by_f, wanted, NO_P)

    np.testing.assert_allclose(f, t**2, rtol=1e-8)
    finite = np.where(np.isfinite(t), t, 0.0)
    other = np.where(np.isfinite(t), upper_tail_t(finite, by_t.df1, -by_t.ncp), 0.0)
    np.testing.assert_allclose(assurance(by_f, f), assurance(by_t, t) + other, rtol=1e-8, atol=1e-12)


def test_equal_groups_are_a_ratio_of_one_and_direction_doubles_p() -> None:
    t = tests.two_sample_t(0.5, N, N, one_sided=False, scale=SCALE)
    directed = tests.two_sample_t(0.5, N, N, one_sided=True, scale=SCALE)

    both, one = least_value(t, [], math.log(0.05)), least_value(directed, [], math.log(0.025))
    np.testing.assert_allclose(both, one, rtol=1e-12)


@pytest.mark.parametrize(
    "weighing", [Weighing.OBSERVED_EFFECT, Weighing.DEFAULT_PRIOR, Weighing.DESIGN_EFFECT, Weighing.BOUND]
)
@pytest.mark.parametrize("one_sided", [False, True])
def test_the_stricter_of_all_that_is_wanted_counts(weighing: Weighing, one_sided: bool) -> None:
    planned = tests.one_sample_t(0.6, N, one_sided=one_sided, scale=SCALE)
    single = least_value(planned, [(weighing, 3.0)], NO_P)
    p_only = least_value(planned, [], math.log(0.004))
    by_bound = least_value(planned, [(Weighing.BOUND, 3.1)], NO_P)

    together = least_value(planned, [(weighing, 3.0), (Weighing.BOUND, 3.1)], math.log(0.004))

    np.testing.assert_array_equal(together, np.maximum(np.maximum(single, p_only), by_bound))


def test_the_bound_is_a_p_value() -> None:
    """19 to 1 by the bound needs p = .0034 (computed from -e p ln p = 1/19)."""
    planned = tests.one_proportion(0.4, N, one_sided=False)

    least = least_value(planned, [(Weighing.BOUND, math.log(19))], NO_P)

    np.testing.assert_allclose(np.exp(log_p_of(planned, least)), 0.0034078, atol=1e-6)


def test_an_effect_that_can_never_give_the_ratio_never_stands() -> None:
    """Two groups of 2 with a planned effect of a hundredth: no t makes it 19 times as probable as none."""
    two = np.array([2.0])
    planned = tests.two_sample_t(0.01, two, two, one_sided=False, scale=SCALE)

    least = least_value(planned, [(Weighing.DESIGN_EFFECT, math.log(19))], NO_P)

    assert float(least[0]) == math.inf
    assert float(assurance(planned, least)[0]) == 0.0


@pytest.mark.parametrize("one_sided", [False, True])
def test_a_wanted_ratio_of_no_evidence_asks_for_nothing(one_sided: bool) -> None:
    planned = tests.one_sample_t(0.4, N, one_sided=one_sided, scale=SCALE)

    for weighing in (Weighing.OBSERVED_EFFECT, Weighing.BOUND):
        assert np.all(least_value(planned, [(weighing, -1.0)], NO_P) == 0.0)


def test_the_assurance_of_a_correlation_is_exact_and_not_that_of_a_noncentral_t() -> None:
    """50 pairs at rho = .4, 20,000 seeded studies: the pairs are random too, which a non-central t leaves out."""
    generator = np.random.default_rng(7)
    studies, n, rho = 20_000, 50, 0.4
    x = generator.normal(size=(studies, n))
    y = rho * x + math.sqrt(1 - rho**2) * generator.normal(size=(studies, n))
    x, y = x - x.mean(axis=1, keepdims=True), y - y.mean(axis=1, keepdims=True)
    r = (x * y).sum(axis=1) / np.sqrt((x**2).sum(axis=1) * (y**2).sum(axis=1))
    planned = tests.correlation(rho, np.array([float(n)]), one_sided=False)

    least = least_value(planned, [(Weighing.OBSERVED_EFFECT, math.log(19))], NO_P)
    expected = float(assurance(planned, least)[0])

    assert (weigh.t_from_r(r, n - 2) >= least).mean() == pytest.approx(expected, abs=0.0135)
    assert expected != pytest.approx(float(upper_tail_t(least, n - 2, planned.ncp)[0]), abs=1e-4)


@pytest.mark.parametrize(
    "build",
    [
        lambda n: tests.two_sample_t(0.3, n, n, one_sided=False, scale=SCALE),
        lambda n: tests.correlation(0.2, n + 2, one_sided=True),
        lambda n: tests.one_way_f(0.2, 4, n, scale=SCALE),
        lambda n: tests.chi_squared(0.2, 3, n),
        lambda n: tests.log_rank(0.3, 1.0, n, one_sided=False),
    ],
)
@pytest.mark.parametrize("weighing", [Weighing.OBSERVED_EFFECT, Weighing.DESIGN_EFFECT, Weighing.BOUND])
def test_the_probability_of_standing_rises_with_the_size(
    build: Callable[[Floats], tests.Planned], weighing: Weighing
) -> None:
    """But for the smallest: with a degree of freedom more, the same ratio takes so much smaller a p."""
    planned = build(np.unique(np.round(np.geomspace(2, 1e8, 60))))

    probability = assurance(planned, least_value(planned, [(weighing, math.log(19))], NO_P))

    assert np.all(np.diff(probability)[probability[:-1] >= 0.05] >= -1e-12)
    assert probability[0] < 0.05
    assert probability[-1] == pytest.approx(1.0)
