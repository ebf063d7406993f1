"""Risk over many results, which is not the risk of one."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from gatecheck.weigh.long_run import (
    expected_screen,
    long_run_false_positive_risk,
    negative_predictive_value,
    positive_predictive_value,
)
from gatecheck.weigh.power import power_t
from gatecheck.weigh.quantiles import t_from_log_p
from gatecheck.weigh.risk import false_positive_risk
from gatecheck.weigh.t import log_lr_t

probabilities = st.floats(1e-6, 1 - 1e-6)


def test_a_screen_of_ten_thousand() -> None:
    """Arithmetic of the trade, no source: 1 in 200 active, alpha 0.01, power 0.8."""
    counts = expected_screen(10_000, 0.01, 0.8, 0.005)
    assert float(counts.true_positives) == pytest.approx(40, rel=1e-14)
    assert float(counts.false_positives) == pytest.approx(99.5, rel=1e-14)
    assert float(counts.false_negatives) == pytest.approx(10, rel=1e-13)
    assert float(counts.true_negatives) == pytest.approx(9850.5, rel=1e-14)
    assert float(long_run_false_positive_risk(0.01, 0.8, 0.005)) == pytest.approx(99.5 / 139.5, rel=1e-14)


# Altman, D. G. (1991). Practical Statistics for Medical Research, section 14.4: 231 of 258 abnormal livers and 54
# of 86 normal ones told right by a scan. Seen: .90, .63; predictive values from the same counts, computed.
def test_predictive_values_of_a_scan() -> None:
    alpha, power, base_rate = 32 / 86, 231 / 258, 258 / 344
    assert float(positive_predictive_value(alpha, power, base_rate)) == pytest.approx(231 / 263, rel=1e-14)
    assert float(negative_predictive_value(alpha, power, base_rate)) == pytest.approx(54 / 81, rel=1e-14)


# Same source: an antibody test at cutoffs 2, 3, 4, 5, 6, with 95, 22, 7, 4 and 2 of 297 healthy donors above them.
# Seen: positive predictive values .26, .59, .81, .87, .91 at a prevalence of 0.1, negative ones 1, .997, .99, .98,
# .96 there and .9997, .999, .998, .996 at 0.01; digits computed. The sensitivities follow from the positive values.
def test_predictive_values_of_an_antibody_test() -> None:
    specificity = np.array([0.680134680135, 0.925925925926, 0.976430976431, 0.986531986532, 0.993265993266, 1.0])
    positive = np.array([0.2578125, 0.594470046083, 0.808873720137, 0.870967741935, 0.914438502674])
    odds = positive / (1 - positive)
    sensitivity = odds * 9 * (1 - specificity[:5])
    found = positive_predictive_value(1 - specificity[:5], sensitivity, 0.1)
    np.testing.assert_allclose(found, positive, rtol=1e-11)
    negative = [1.0, 0.997280145059, 0.98849595228, 0.979933110368, 0.962087240114]
    np.testing.assert_allclose(
        negative_predictive_value(1 - specificity[:5], sensitivity, 0.1), negative, rtol=1e-9
    )
    rare = [0.999752127572, 0.998943124437, 0.998141839579, 0.99643035351]
    np.testing.assert_allclose(
        negative_predictive_value(1 - specificity[1:5], sensitivity[1:], 0.01), rare, rtol=1e-9
    )


@pytest.mark.parametrize(("base_rate", "share"), [(0.5, 0.0601397), (0.1, 0.365438)])
def test_share_of_false_findings_at_a_twentieth(base_rate: float, share: float) -> None:
    """Of 1e7 simulated tests (16 per group, one standard deviation) .06010 and .36503 were false; exact beside."""
    power = power_t(np.sqrt(8), 30, 0.05, one_sided=False)
    assert float(long_run_false_positive_risk(0.05, power, base_rate)) == pytest.approx(share, abs=6e-7)


def test_share_of_false_findings_by_simulation() -> None:
    """Within four standard errors; one result with p at the level carries more than four times the risk."""
    rng = np.random.default_rng(11)
    real = rng.random(200_000) < 0.5
    t = (rng.normal(size=real.size) + np.sqrt(8) * real) / np.sqrt(rng.chisquare(30, real.size) / 30)
    found = np.abs(t) >= t_from_log_p(np.log(0.05), 30, one_sided=False)
    risk = float(long_run_false_positive_risk(0.05, power_t(np.sqrt(8), 30, 0.05, one_sided=False), 0.5))
    assert abs(np.mean(~real[found]) - risk) < 4 * np.sqrt(risk * (1 - risk) / found.sum())
    single = log_lr_t(t_from_log_p(np.log(0.05), 30, one_sided=False), 30, np.sqrt(8), one_sided=False)
    assert float(false_positive_risk(single, 0.5)) > 4 * risk


@given(probabilities, probabilities, probabilities)
def test_predictive_value_and_risk_make_one(alpha: float, power: float, base_rate: float) -> None:
    total = long_run_false_positive_risk(alpha, power, base_rate) + positive_predictive_value(
        alpha, power, base_rate
    )
    assert float(total) == pytest.approx(1, abs=1e-14)


@given(probabilities, probabilities, probabilities, st.floats(0, 1e12))
def test_screen_adds_up(alpha: float, power: float, base_rate: float, n: float) -> None:
    counts = expected_screen(n, alpha, power, base_rate)
    parts = counts.true_positives + counts.false_positives + counts.false_negatives + counts.true_negatives
    assert float(parts) == pytest.approx(n, rel=1e-13)


def test_risk_falls_with_power_and_base_rate_and_grows_with_the_level() -> None:
    grid = np.linspace(0.01, 0.99, 50)
    assert np.all(np.diff(long_run_false_positive_risk(0.05, grid, 0.2)) < 0)
    assert np.all(np.diff(long_run_false_positive_risk(0.05, 0.8, grid)) < 0)
    assert np.all(np.diff(long_run_false_positive_risk(grid, 0.8, 0.2)) > 0)


def test_ends_and_illegal_rows() -> None:
    alpha = [0.05, 0.05, 0, 0, -0.1, 0.05, 0.05, np.nan]
    power = [0.8, 0.8, 0.8, 0, 0.8, 1.1, 0.8, 0.8]
    risk = long_run_false_positive_risk(alpha, power, [0, 1, 0.5, 0.5, 0.5, 0.5, -1, 0.5])
    np.testing.assert_array_equal(risk, [1, 0, 0, np.nan, np.nan, np.nan, np.nan, np.nan])
    assert np.isnan(expected_screen(-1, 0.05, 0.8, 0.1).true_positives)
