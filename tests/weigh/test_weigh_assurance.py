"""The assurance of standing: inverse of the likelihood ratio, and right against simulation."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from gatecheck import weigh
from gatecheck.weigh.assurance import Weighing, assurance, assurance_of_correlation, least_t
from gatecheck.weigh.noncentral import upper_tail_t

NO_P = 0.0


@given(st.floats(1.5, 1e4), st.floats(0.1, 12))
def test_at_the_least_t_the_observed_effect_has_the_wanted_ratio(df: float, target: float) -> None:
    t = least_t(Weighing.OBSERVED_EFFECT, df, 0.0, target, NO_P)

    assert float(weigh.observed_t(t, df, one_sided=False)) == pytest.approx(target, rel=1e-8)


@given(st.floats(3, 1e4), st.floats(1, 8), st.floats(0.1, 6))
def test_at_the_least_t_the_planned_effect_has_the_wanted_ratio(df: float, ncp: float, target: float) -> None:
    t = least_t(Weighing.DESIGN_EFFECT, df, ncp, target, NO_P)

    if np.isfinite(t):
        assert float(weigh.log_lr_t(t, df, ncp, one_sided=False)) == pytest.approx(target, rel=1e-7)
    else:
        assert float(weigh.log_lr_t(1e6, df, ncp, one_sided=False)) < target


def test_the_bound_and_a_limit_of_p_are_p_values() -> None:
    """19 to 1 by the bound needs p = .0034; a stricter limit of p wins."""
    by_bound = least_t(Weighing.BOUND, math.inf, 0.0, math.log(19), NO_P)
    by_p = least_t(Weighing.BOUND, math.inf, 0.0, math.log(19), math.log(0.001))

    assert float(np.exp(weigh.log_p_z(by_bound, one_sided=False))) == pytest.approx(0.0034078, abs=1e-6)
    assert float(np.exp(weigh.log_p_z(by_p, one_sided=False))) == pytest.approx(0.001)


def test_an_effect_that_can_never_give_the_ratio_never_stands() -> None:
    """A ratio for a planned effect of zero is always 1."""
    t = least_t(Weighing.DESIGN_EFFECT, 30, 0.0, 1.0, NO_P)

    assert t == math.inf
    assert float(assurance(t, 30, 0.0)) == 0.0


def test_a_wanted_ratio_of_no_evidence_asks_for_nothing() -> None:
    assert float(least_t(Weighing.OBSERVED_EFFECT, 30, 0.0, -1.0, NO_P)) == 0.0
    assert float(least_t(Weighing.BOUND, 30, 0.0, -1.0, NO_P)) == 0.0


@pytest.mark.parametrize(
    "row", [(3, 30, 0, 1, 0), (0, 0, 0, 1, 0), (0, 30, -1, 1, 0), (0, 30, 0, math.nan, 0), (0, 30, 0, 1, 1)]
)
def test_outside_the_domain_there_is_no_answer(row: tuple[float, ...]) -> None:
    assert math.isnan(float(least_t(*row)))


def test_the_share_of_simulated_studies_that_stand_is_the_assurance() -> None:
    """Two groups of 30 with a true difference of .8 SD, an observed ratio of 19 wanted: 20,000 seeded studies."""
    generator = np.random.default_rng(20310402)
    studies, n, effect = 20_000, 30, 0.8
    first, second = generator.normal(effect, 1, (studies, n)), generator.normal(0, 1, (studies, n))
    pooled = (first.var(axis=1, ddof=1) + second.var(axis=1, ddof=1)) / 2
    t = (first.mean(axis=1) - second.mean(axis=1)) / np.sqrt(pooled * 2 / n)
    stands = (weigh.observed_t(t, 2 * n - 2, one_sided=False) >= math.log(19)) & (t > 0)

    least = least_t(Weighing.OBSERVED_EFFECT, 2 * n - 2, 0.0, math.log(19), NO_P)
    expected = float(assurance(least, 2 * n - 2, effect * math.sqrt(n / 2)))

    assert stands.mean() == pytest.approx(expected, abs=4 * math.sqrt(expected * (1 - expected) / studies))


def test_a_correlations_assurance_is_exact_and_not_that_of_a_noncentral_t() -> None:
    """50 pairs at rho = .4, seeded: the pairs are random too, which a non-central t leaves out."""
    generator = np.random.default_rng(7)
    studies, n, rho = 20_000, 50, 0.4
    x = generator.normal(size=(studies, n))
    y = rho * x + math.sqrt(1 - rho**2) * generator.normal(size=(studies, n))
    x, y = x - x.mean(axis=1, keepdims=True), y - y.mean(axis=1, keepdims=True)
    r = (x * y).sum(axis=1) / np.sqrt((x**2).sum(axis=1) * (y**2).sum(axis=1))
    least = float(least_t(Weighing.OBSERVED_EFFECT, n - 2, 0.0, math.log(19), NO_P))

    expected = float(assurance_of_correlation(least, n, rho))

    assert (weigh.t_from_r(r, n - 2) >= least).mean() == pytest.approx(expected, abs=0.0135)
    assert expected != pytest.approx(
        float(upper_tail_t(least, n - 2, rho / math.sqrt(1 - rho**2) * math.sqrt(n))), abs=1e-4
    )
    assert float(assurance_of_correlation(math.inf, n, rho)) == 0.0
