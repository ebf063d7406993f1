"""Published values of replication criteria, sceptical priors and pooling.

"Seen": the printed figure was read in the place named. "Computed": recomputed to 40 digits from the published
formula, because the print was not at hand; then the recomputed figure is tested.
"""

from __future__ import annotations

import numpy as np
import pytest
from scipy import special

from gatecheck.weigh import prior_needed
from gatecheck.weigh.pooling import (
    Pooled,
    Spread,
    interval,
    log_p_pooled,
    pool_fixed,
    pool_random,
    prediction_interval,
)
from gatecheck.weigh.replication import (
    Calibration,
    advocacy_limit,
    log_sceptical_level,
    log_sceptical_p,
    replication_probability,
    sceptical_limit,
    sceptical_prior_variance,
)

Z975 = float(-special.ndtri(0.025))


def z_two_sided(p: float) -> float:
    return float(-special.ndtri(p / 2))


def sceptical_p(z_o: float, z_r: float, ratio: float, calibration: Calibration, *, one_sided: bool) -> float:
    return float(np.exp(log_sceptical_p(z_o, z_r, ratio, calibration=calibration, one_sided=one_sided)))


# Reference examples of the ReplicationSuccess package (docs/reference), github.com/crsuzh/ReplicationSuccess commit
# fd8ce9fd; method: Held, L. (2020), JRSS A 183, 431-448; Held, Micheloud & Pawel (2022), AOAS 16, 706-720. Seen:
# the printed figures are .05790852, .02273138, .008786301, .03496702; the further digits are computed.
@pytest.mark.parametrize(
    ("p_o", "p_r", "ratio", "calibration", "one_sided", "value"),
    [
        (0.01, 0.02, 2, Calibration.NOMINAL, True, 0.0579085207123),
        (0.01, 0.02, 2, Calibration.GOLDEN, True, 0.0227313765275),
        (0.02, 0.01, 0.5, Calibration.GOLDEN, True, 0.00878630071868),
        (0.01, 0.01, 2, Calibration.GOLDEN, False, 0.0349670213590),
    ],
)
def test_sceptical_p(
    p_o: float, p_r: float, ratio: float, calibration: Calibration, one_sided: bool, value: float
) -> None:
    said = sceptical_p(z_two_sided(p_o), z_two_sided(p_r), ratio, calibration, one_sided=one_sided)
    assert said == pytest.approx(value, rel=1e-11)


def test_golden_level() -> None:
    """Same source, printed .06167928 for alpha = .025 one-sided: 1 - Phi(z_alpha / sqrt(phi)). Seen."""
    level = float(np.exp(log_sceptical_level(np.log(0.025), 1, calibration=Calibration.GOLDEN)))
    assert level == pytest.approx(0.0616792793522, rel=1e-11)


def test_controlled_level_of_equal_studies() -> None:
    """Micheloud, Balabdaoui & Held (2023): 1 - Phi(z/2) at the upper 2 alpha^2 quantile, .065. From memory."""
    level = float(np.exp(log_sceptical_level(np.log(0.025), 1, calibration=Calibration.CONTROLLED)))
    assert level == pytest.approx(0.065, abs=5e-4)
    assert level == pytest.approx(float(special.ndtr(special.ndtri(2 * 0.025**2) / 2)), rel=1e-12)


# Same reference examples: a result as its own replication (intrinsic credibility, Held 2019, Royal Society Open
# Science 6, 181534): two-sided, printed .04715865, .06854815, .16577627; one-sided, printed .03427407, .04998734,
# .12239707. Seen.
@pytest.mark.parametrize(
    ("p", "two_sided", "one_sided"),
    [
        (0.005, 0.0471586461502, 0.0342740729683),
        (0.01, 0.0685481459365, 0.0499873434217),
        (0.05, 0.165776272896, 0.122397071827),
    ],
)
def test_intrinsic_credibility(p: float, two_sided: float, one_sided: float) -> None:
    z_two, z_one = z_two_sided(p), float(-special.ndtri(p))
    assert sceptical_p(z_two, z_two, 1, Calibration.NOMINAL, one_sided=False) == pytest.approx(two_sided, rel=1e-11)
    assert sceptical_p(z_one, z_one, 1, Calibration.NOMINAL, one_sided=True) == pytest.approx(one_sided, rel=1e-11)


# Same source: the p value at which a result is just intrinsically credible, one-sided, printed .0001348585,
# .0005010211, .0100046269. Seen.
@pytest.mark.parametrize(
    ("alpha", "threshold"), [(0.005, 0.000134858478316), (0.01, 0.000501021101851), (0.05, 0.0100046268581)]
)
def test_threshold_of_intrinsic_credibility(alpha: float, threshold: float) -> None:
    z = float(-special.ndtri(threshold))
    assert sceptical_p(z, z, 1, Calibration.NOMINAL, one_sided=True) == pytest.approx(alpha, rel=1e-10)


# Same reference examples: probability that an identical replication has the same sign, printed .9171119, .9657259,
# .9900108. Seen.
@pytest.mark.parametrize(
    ("p", "probability"), [(0.05, 0.917111863552), (0.01, 0.965725927032), (0.001, 0.990010812771)]
)
def test_probability_of_the_same_sign(p: float, probability: float) -> None:
    said = float(replication_probability(z_two_sided(p), 1, np.log(0.5), predictive=True))
    assert said == pytest.approx(probability, rel=1e-11)


# Goodman, S. N. (1992). A comment on replication, p-values and evidence. Statistics in Medicine 11, 875-879.
# Computed: Phi(z - 1.96) where the effect is as observed, Phi((z - 1.96)/sqrt 2) under a flat prior; .5 at p = .05.
@pytest.mark.parametrize(
    ("p", "as_observed", "flat_prior"),
    [
        (0.1, 0.376338932310, 0.411839096416),
        (0.05, 0.5, 0.5),
        (0.01, 0.731008293706, 0.668393896356),
        (0.001, 0.908333536433, 0.826609118090),
    ],
)
def test_replication_probability(p: float, as_observed: float, flat_prior: float) -> None:
    z, log_alpha = z_two_sided(p), np.log(0.025)
    assert float(replication_probability(z, 1, log_alpha, predictive=False)) == pytest.approx(
        as_observed, rel=1e-11
    )
    assert float(replication_probability(z, 1, log_alpha, predictive=True)) == pytest.approx(flat_prior, rel=1e-11)


def great() -> tuple[float, float]:
    """Log odds ratio and standard error of the GREAT trial (BMJ 305, 548, 1992): 13/163 against 23/148 deaths."""
    cells = np.array([13, 163 - 13, 23, 148 - 23], dtype=np.float64)
    return float(np.log(cells) @ [1, -1, -1, 1]), float(np.sqrt((1 / cells).sum()))


def test_scepticism_limit_of_the_great_trial() -> None:
    """Matthews (2018), Royal Society Open Science 5, 171047; Held (2019), same journal 6, 181534. Computed."""
    estimate, error = great()
    variance = float(sceptical_prior_variance(estimate, error, 0.95))
    limit = float(sceptical_limit(estimate, error, 0.95))
    assert variance == pytest.approx(1.46155646369, rel=1e-10)
    assert np.sqrt(variance) == pytest.approx(1.20894849505, rel=1e-10)
    assert limit == pytest.approx(2.36949550947, rel=1e-10)
    assert limit == pytest.approx(Z975 * np.sqrt(variance), rel=1e-13)


def test_posterior_under_the_critical_sceptical_prior() -> None:
    """Same source: with that prior the posterior interval of the GREAT trial ends just at no effect. Computed."""
    estimate, error = great()
    prior_sd = float(np.sqrt(sceptical_prior_variance(estimate, error, 0.95)))
    _, high = interval(pool_fixed([estimate, 0.0], [error, prior_sd]), 0.95)
    assert float(high[0]) == pytest.approx(0, abs=1e-15)


def test_great_trial_with_the_prior_of_pocock_and_spiegelhalter() -> None:
    """Pocock & Spiegelhalter (1992), BMJ 305, 1015: prior odds ratio .6 to 1.0 (95 %, recalled). Computed."""
    estimate, error = great()
    prior, prior_sd = np.log(0.6) / 2, -np.log(0.6) / (2 * Z975)
    pooled = pool_fixed([estimate, prior], [error, prior_sd])
    low, high = interval(pooled, 0.95)
    assert float(np.exp(pooled.estimate[0])) == pytest.approx(0.732734449332, rel=1e-10)
    assert np.exp([low[0], high[0]]) == pytest.approx([0.575970169217, 0.932165938329], rel=1e-10)


# Matthews, R. A. J. (2018). Beyond "significance": principles and practice of the Analysis of Credibility. Royal
# Society Open Science 5, 171047: (U - L)^2 / (4 sqrt(U L)) of a 95 % interval from L to U. Computed.
@pytest.mark.parametrize(
    ("low", "high", "limit"),
    [
        (0.1, 0.9, 0.533333333333),
        (0.02, 0.5, 0.576),
        (1.0, 3.0, 0.577350269190),
        (0.5, 4.0, 2.16551451738),
    ],
)
def test_scepticism_limit_of_a_difference(low: float, high: float, limit: float) -> None:
    middle, error = (low + high) / 2, (high - low) / (2 * Z975)
    assert float(sceptical_limit(middle, error, 0.95)) == pytest.approx(limit, rel=1e-11)
    assert float(sceptical_limit(-middle, error, 0.95)) == pytest.approx(limit, rel=1e-11)


def test_advocacy_limit_of_a_difference() -> None:
    """Same source: -(U + L)(U - L)^2 / (2 U L) of an interval from -0.5 to 2. Computed."""
    error = 2.5 / (2 * Z975)
    assert float(advocacy_limit(0.75, error, 0.95)) == pytest.approx(4.6875, rel=1e-11)
    assert float(advocacy_limit(-0.75, error, 0.95)) == pytest.approx(-4.6875, rel=1e-11)


# Held, L. (2013). Reverse-Bayes analysis of two common misinterpretations of significance tests. Clinical Trials
# 10, 236-242; Matthews (2001), J. Stat. Plan. Inference 94, 43-58. Computed: prior of an effect that leaves 5 % at
# the minimum Bayes factors exp(-z^2/2) and sqrt(e) z exp(-z^2/2).
@pytest.mark.parametrize(
    ("p", "simple", "local"),
    [
        (0.05, 0.735694548391, 0.899946985552),
        (0.01, 0.407814064065, 0.745197817457),
        (0.001, 0.0780354109339, 0.314687155431),
    ],
)
def test_prior_needed_at_minimum_bayes_factors(p: float, simple: float, local: float) -> None:
    z = z_two_sided(p)
    assert float(prior_needed(z**2 / 2, 0.05)) == pytest.approx(simple, rel=1e-11)
    assert float(prior_needed(z**2 / 2 - 0.5 - np.log(z), 0.05)) == pytest.approx(local, rel=1e-11)


# Nineteen trials (Dorn et al. 2007, response to placebo) in the data set dat.dorn2007 of
# github.com/wviechtb/metadat commit 0cb96ce4: events and number, active and placebo.
DORN = np.array([
    (29, 38, 11, 32), (20, 31, 21, 30), (14, 23, 30, 46), (17, 30, 5, 13), (11, 27, 6, 23), (24, 29, 5, 29),
    (26, 32, 9, 22), (17, 18, 13, 18), (4, 12, 5, 13), (21, 60, 26, 59), (15, 17, 8, 17), (37, 51, 20, 52),
    (13, 33, 17, 33), (19, 20, 3, 20), (29, 50, 30, 46), (13, 16, 5, 16), (25, 33, 8, 26), (37, 57, 17, 50),
    (55, 90, 37, 90),
], dtype=np.float64)  # fmt: skip


def test_pooled_log_risk_ratio_of_nineteen_trials() -> None:
    """Printed .3123 in tests/testthat/test_misc_tes.r of github.com/wviechtb/metafor commit 71ae8f5a. Seen."""
    a, n, c, m = DORN.T
    pooled = pool_fixed(np.log(a / n) - np.log(c / m), np.sqrt(1 / a - 1 / n + 1 / c - 1 / m))
    assert float(pooled.estimate[0]) == pytest.approx(0.312256605187, rel=1e-11)


# Nine laboratories of Kacker (2004), and figures computed with R's metafor, as printed in
# statsmodels/stats/tests/results/results_meta.py (version 0.15.0). Seen. Q is printed as 24.801897741835; computed
# to 40 digits it is 24.80189774174843, so that it and what follows from it agree to eleven digits only.
LABORATORIES = np.array([61.00, 61.40, 62.21, 62.30, 62.34, 62.60, 62.70, 62.84, 65.90])
ERRORS = np.sqrt([0.2025, 1.2100, 0.0900, 0.2025, 0.3844, 0.5625, 0.0676, 0.0225, 1.8225])


@pytest.mark.parametrize(
    ("pooled", "estimate", "error", "low", "high", "tau2"),
    [
        (
            pool_fixed(LABORATORIES, ERRORS),
            62.5833970939982,
            0.107845705498231,
            62.3720233953344,
            62.7947707926621,
            0,
        ),
        (
            pool_random(LABORATORIES, ERRORS, spread=Spread.DERSIMONIAN_LAIRD, hartung_knapp=False),
            62.3901386044504,
            0.245749668040304,
            61.9084781058787,
            62.8717991030221,
            0.288049246973751,
        ),
        (
            pool_random(LABORATORIES, ERRORS, spread=Spread.DERSIMONIAN_LAIRD, hartung_knapp=True),
            62.3901386044504,
            0.29477605699879,
            61.710383798052,
            63.0698934108488,
            0.288049246973751,
        ),
        (
            pool_random(LABORATORIES, ERRORS, spread=Spread.PAULE_MANDEL, hartung_knapp=False),
            62.4076199113286,
            0.338030602684471,
            61.7450921043947,
            63.0701477182625,
            0.705395309224248,
        ),
    ],
    ids=["one effect", "moments", "moments, Hartung-Knapp", "Paule-Mandel"],
)
def test_nine_laboratories(
    pooled: Pooled, estimate: float, error: float, low: float, high: float, tau2: float
) -> None:
    limits = interval(pooled, 0.95)
    assert float(pooled.estimate[0]) == pytest.approx(estimate, rel=1e-13)
    assert float(pooled.standard_error[0]) == pytest.approx(error, rel=1e-9)
    assert [limits[0][0], limits[1][0]] == pytest.approx([low, high], rel=1e-11)
    assert float(pooled.tau2[0]) == pytest.approx(tau2, rel=1e-9)
    assert float(pooled.q[0]) == pytest.approx(24.801897741835, rel=1e-11)
    assert float(np.exp(pooled.log_p_q[0])) == pytest.approx(0.00167935146372742, rel=1e-11)
    assert float(pooled.i2[0]) == pytest.approx(0.67744403741711, rel=1e-11)


def test_seventeen_trials_with_a_prediction_interval() -> None:
    """Seventeen trials (Fine et al. 1993), log odds ratios, by R's meta 4.11-0, printed in the same place. Seen."""
    a = np.array([18, 22, 21, 14, 42, 80, 13, 37, 23, 19, 106, 170, 34, 18, 13, 12, 42])
    n = np.array([19, 34, 72, 22, 70, 183, 26, 61, 36, 45, 246, 386, 59, 45, 14, 26, 74])
    c = np.array([12, 12, 15, 5, 13, 33, 18, 30, 12, 14, 76, 46, 17, 3, 14, 10, 40])
    m = np.array([22, 35, 68, 20, 32, 94, 50, 55, 25, 35, 208, 141, 32, 15, 18, 19, 75])
    estimates = np.log(a / (n - a)) - np.log(c / (m - c))
    errors = np.sqrt(1 / a + 1 / (n - a) + 1 / c + 1 / (m - c))
    pooled = pool_random(estimates, errors, spread=Spread.DERSIMONIAN_LAIRD, hartung_knapp=True)
    assert float(pooled.q[0]) == pytest.approx(16.181374262823, rel=1e-12)
    assert float(pooled.i2[0]) == pytest.approx(0.0112088293538659, rel=1e-10)
    assert float(pooled.tau2[0]) == pytest.approx(0.0016783981912744, rel=1e-10)
    assert float(pooled.estimate[0]) == pytest.approx(0.429520368698268, rel=1e-12)
    assert float(pooled.standard_error[0]) == pytest.approx(0.0915952752397692, rel=1e-12)
    assert np.ravel(interval(pooled, 0.95)) == pytest.approx([0.235347059333852, 0.623693678062684], rel=1e-11)
    assert float(np.exp(log_p_pooled(pooled)[0])) == pytest.approx(0.000246175101510513, rel=1e-10)
    predicted = np.ravel(prediction_interval(pooled, 0.95))
    assert predicted == pytest.approx([0.215650965184522, 0.643389772212014], rel=1e-11)
