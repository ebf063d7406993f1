"""False positive risk, prior needed, and the conventions behind a published 26 % and 76 %.

"Exact" figures were computed at 50 digits from the closed forms beside them; the published ones are of
Colquhoun, D. (2014), An investigation of the false discovery rate and the misinterpretation of p-values,
Royal Society Open Science 1, 140216 (from memory): for p close to 0.05, a real effect of one standard deviation
and 16 per group, 26 % of the findings are false at a prior of 0.5 and 76 % at 0.1.
"""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from gatecheck import weigh

P_VALUES = np.array([0.05, 0.047, 0.01, 0.005, 0.001])
DF = 30
DESIGN_NCP = np.sqrt(8.0)  # one standard deviation, 16 per group

log_ratios = st.floats(-600, 600)
open_probabilities = st.floats(1e-12, 1 - 1e-12)


def t_of_p() -> np.ndarray:
    return weigh.t_from_log_p(np.log(P_VALUES), DF, one_sided=False)


def test_t_of_each_p_value() -> None:
    np.testing.assert_allclose(t_of_p(), [2.04227246, 2.07157239, 2.74999565, 3.02979822, 3.64595864], atol=6e-9)


@pytest.mark.parametrize(
    ("convention", "ratios", "even", "tenth"),
    [
        (
            "observed",
            [3.638262, 3.838489, 15.36818, 29.19203, 133.2970],
            [0.215598, 0.206676, 0.061094, 0.033121, 0.007446],
            [0.712123, 0.701017, 0.369334, 0.235651, 0.063248],
        ),
        (
            "design",
            [2.756510, 2.971076, 15.34809, 28.57217, 99.59411],
            [0.266205, 0.251821, 0.061169, 0.033816, 0.009941],
            [0.765533, 0.751812, 0.369639, 0.239539, 0.082877],
        ),
        (
            "normal",
            [3.414540, 3.596356, 13.79495, 25.70209, 112.2396],
            [0.226524, 0.217564, 0.067591, 0.037450, 0.008831],
            [0.724956, 0.714492, 0.394824, 0.259350, 0.074233],
        ),
    ],
)
def test_risk_by_convention(convention: str, ratios: list[float], even: list[float], tenth: list[float]) -> None:
    log_lr = {
        "observed": lambda: weigh.observed_t(t_of_p(), DF, one_sided=False),
        "design": lambda: weigh.log_lr_t(t_of_p(), DF, DESIGN_NCP, one_sided=False),
        "normal": lambda: weigh.observed_z(weigh.z_from_log_p(np.log(P_VALUES), one_sided=False), one_sided=False),
    }[convention]()
    np.testing.assert_allclose(np.exp(log_lr), ratios, rtol=4e-7)
    np.testing.assert_allclose(weigh.false_positive_risk(log_lr, 0.5), even, atol=5.1e-7)
    np.testing.assert_allclose(weigh.false_positive_risk(log_lr, 0.1), tenth, atol=5.1e-7)


def test_prior_needed_for_a_risk_of_five_per_cent() -> None:
    of_t = weigh.prior_needed(weigh.observed_t(t_of_p(), DF, one_sided=False), 0.05)
    np.testing.assert_allclose(of_t, [0.839287, 0.831929, 0.552837, 0.394256, 0.124756], atol=5.1e-7)
    z = weigh.z_from_log_p(np.log(P_VALUES), one_sided=False)
    of_z = weigh.prior_needed(weigh.observed_z(z, one_sided=False), 0.05)
    np.testing.assert_allclose(of_z, [0.847664, 0.840844, 0.579357, 0.425036, 0.144773], atol=5.1e-7)


def test_a_one_sided_ratio_fed_with_a_two_sided_p_value_would_halve_the_odds() -> None:
    log_lr = weigh.observed_t(2.0422724563012373, DF, one_sided=True)
    assert float(weigh.false_positive_risk(log_lr, 0.5)) == pytest.approx(0.120864, abs=6e-7)


def test_far_tail_is_folded_in() -> None:
    """Dropping it would give .215662 for .215598 at p = .05."""
    log_lr = weigh.observed_t(2.0422724563012373, DF, one_sided=True) - np.log(2)
    assert float(weigh.false_positive_risk(log_lr, 0.5)) == pytest.approx(0.215662, abs=6e-7)


@pytest.mark.parametrize(("prior", "exact"), [(0.5, 0.254019), (0.1, 0.753976)])
def test_simulated_false_findings_near_the_threshold_match_the_design_convention(
    prior: float, exact: float
) -> None:
    """Two groups of 16, an effect of one standard deviation with probability ``prior``, .045 <= p <= .05."""
    rng = np.random.default_rng(20_16_32)
    n = 4_000_000
    real = rng.random(n) < prior
    # The difference of means in standard errors and the pooled variance are independent: no raw data needed.
    t = (rng.standard_normal(n) + DESIGN_NCP * real) / np.sqrt(rng.chisquare(DF, n) / DF)
    low, high = weigh.t_from_log_p(np.log([0.05, 0.045]), DF, one_sided=False)
    chosen = (np.abs(t) >= low) & (np.abs(t) <= high)
    count = int(chosen.sum())
    share = float((~real[chosen]).mean())
    risk = weigh.false_positive_risk(weigh.log_lr_t(t[chosen], DF, DESIGN_NCP, one_sided=False), prior)
    standard_error = np.sqrt(exact * (1 - exact) / count)
    assert count > 20_000
    assert abs(share - exact) < 4 * standard_error
    assert abs(share - float(risk.mean())) < 4 * standard_error
    assert float(risk.mean()) == pytest.approx(exact, abs=2e-4)


@given(log_lr=log_ratios, prior=open_probabilities)
def test_risk_is_bayes_rule(log_lr: float, prior: float) -> None:
    expected = 1 / (1 + np.exp(log_lr) * prior / (1 - prior))
    assert float(weigh.false_positive_risk(log_lr, prior)) == pytest.approx(expected, rel=1e-11)


@given(log_lr=log_ratios, risk=open_probabilities)
def test_the_prior_needed_gives_the_risk(log_lr: float, risk: float) -> None:
    prior = float(weigh.prior_needed(log_lr, risk))
    if 1e-300 < prior < 1 - 1e-6:
        assert float(weigh.false_positive_risk(log_lr, prior)) == pytest.approx(risk, rel=1e-8)
    assert 0 <= prior <= 1


@given(prior=open_probabilities, risk=open_probabilities)
def test_the_ratio_needed_gives_the_risk(prior: float, risk: float) -> None:
    needed = weigh.log_lr_needed(prior, risk)
    assert float(weigh.false_positive_risk(needed, prior)) == pytest.approx(risk, rel=1e-9)


def test_ratio_needed_by_hand() -> None:
    """A risk of 5 % at even odds asks for 19, at a prior of 0.1 for 171."""
    np.testing.assert_allclose(np.exp(weigh.log_lr_needed([0.5, 0.1], 0.05)), [19.0, 171.0], rtol=1e-13)


def test_risks_far_below_the_smallest_double_keep_their_logarithm() -> None:
    np.testing.assert_allclose(weigh.log_false_positive_risk([5000.0, -5000.0, 0.0], 0.5), [-5000, 0, -np.log(2)])
    assert float(weigh.false_positive_risk(690.0, 0.5)) == pytest.approx(np.exp(-690.0), rel=1e-12)
    assert float(weigh.prior_needed(690.0, 0.5)) == pytest.approx(np.exp(-690.0), rel=1e-12)


def test_certainty_stays_certain() -> None:
    np.testing.assert_array_equal(weigh.false_positive_risk(3.0, [0.0, 1.0]), [1.0, 0.0])
    np.testing.assert_array_equal(weigh.prior_needed(3.0, [0.0, 1.0]), [1.0, 0.0])
    np.testing.assert_array_equal(weigh.log_lr_needed([0.0, 1.0, 0.5], [0.5, 0.5, 0.0]), [np.inf, -np.inf, np.inf])
    assert np.isnan(weigh.log_lr_needed(0.0, 1.0))
    np.testing.assert_array_equal(weigh.false_positive_risk([np.inf, -np.inf], 0.5), [0.0, 1.0])


@given(log_lr=st.floats(-15, 30), gain=st.floats(1e-3, 10), prior=st.floats(0.01, 0.99))
def test_risk_falls_with_evidence_and_with_the_prior(log_lr: float, gain: float, prior: float) -> None:
    weaker, stronger = weigh.false_positive_risk([log_lr, log_lr + gain], prior)
    assert stronger < weaker
    doubtful, hopeful = weigh.false_positive_risk(log_lr, [prior / 2, prior])
    assert hopeful < doubtful
    much, little = weigh.prior_needed([log_lr, log_lr + gain], 0.05)
    assert little < much


def test_bound_on_the_ratio() -> None:
    """-e p ln p: 1 from p = 1/e on, and finite for a p value of exp(-1e5)."""
    np.testing.assert_array_equal(weigh.log_lr_bound([-1.0, -0.5, 0.0]), 0.0)
    assert float(weigh.log_lr_bound(-1e5)) == pytest.approx(1e5 - 1 - np.log(1e5), rel=1e-15)
    risk = weigh.false_positive_risk(weigh.log_lr_bound(np.log([0.05, 0.01, 0.001])), 0.5)
    np.testing.assert_allclose(risk, [0.289350, 0.111254, 0.018431], atol=6e-7)


@given(log_lr=st.floats(1e-6, 1e6))
def test_the_p_value_of_a_bound_has_that_bound(log_lr: float) -> None:
    log_p = float(weigh.log_p_for_bound(log_lr))
    assert log_p < -1
    assert float(weigh.log_lr_bound(log_p)) == pytest.approx(log_lr, rel=1e-9)


def test_p_value_of_a_bound_at_its_edges() -> None:
    """1/(-e p ln p) = 19 at p = .00341; a bound of 1 or less belongs to no single p value."""
    assert np.exp(float(weigh.log_p_for_bound(np.log(19.0)))) == pytest.approx(0.00340780390, abs=1e-11)
    assert float(weigh.log_p_for_bound(1e-40)) == -1.0
    assert np.isnan(weigh.log_p_for_bound([0.0, -1.0, np.nan, np.inf])).all()


@given(z=st.floats(0.0, 30.0))
def test_the_observed_effect_of_z_is_nearly_the_best_that_any_effect_can_do(z: float) -> None:
    """At ncp = z the folded ratio falls at most half a unit of log ratio short of its maximum over ncp."""
    grid = weigh.log_lr_z(z, np.linspace(0, 31, 3101), one_sided=False)
    observed = float(weigh.observed_z(z, one_sided=False))
    assert observed <= grid.max() + 1e-4
    assert observed >= grid.max() - 0.3
