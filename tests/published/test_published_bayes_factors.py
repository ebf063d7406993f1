"""Published default Bayes factors, evidence bounds and evidence thresholds.

Each group names its source. "Seen": the printed figure was read there. "Computed": the figure was recomputed to 40
digits from the published formula, because the print was not at hand; then the recomputed figure is tested.
"""

from __future__ import annotations

import numpy as np
import pytest

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
from gatecheck.weigh.default_prior import log_bf_r, log_bf_t

Z_OF_P = {
    0.1: 1.64485362695,
    0.05: 1.95996398454,
    0.01: 2.57582930355,
    0.005: 2.80703376834,
    0.001: 3.29052673149,
    0.0001: 3.89059188641,
}


def of_two_groups(n1: int, n2: int) -> float:
    return n1 * n2 / (n1 + n2)


# Vallat, R., pingouin 0.7.0, docstring of bayesfactor_ttest, github.com/raphaelvallat/pingouin commit 14994d6e:
# 26.743 and 17.185 (seen); the exact root of a half as scale gives 26.744 (computed).
@pytest.mark.parametrize(
    ("df", "n", "scale", "factor", "printed"),
    [
        (38, of_two_groups(20, 20), 0.707, 26.7426592317, 26.743),
        (38, of_two_groups(20, 20), np.sqrt(0.5), 26.7435462071, 26.744),
        (19, 20, 0.707, 17.1847489516, 17.185),
    ],
)
def test_factor_of_t_by_its_two_designs(df: float, n: float, scale: float, factor: float, printed: float) -> None:
    result = float(np.exp(log_bf_t(3.5, df, n, scale)))
    assert result == pytest.approx(factor, rel=1e-11)
    assert round(result, 3) == printed


# Rouder, J. N., Speckman, P. L., Sun, D., Morey, R. D. & Iverson, G. (2009). Bayesian t tests for accepting and
# rejecting the null hypothesis. Psychonomic Bulletin & Review 16(2), 225-237, eq. (1) and the Grider & Malmberg
# example; Wagenmakers, E.-J., Wetzels, R., Borsboom, D. & van der Maas, H. L. J. (2011). Why psychologists must
# change the way they analyze their data: the case of psi. JPSP 100(3), 426-432. Neither seen: one over the
# factor, computed.
@pytest.mark.parametrize(
    ("t", "n", "against"),
    [
        (2.24, 80, 1.02429933485),
        (2.03, 80, 1.55744684407),
        (2.51, 100, 0.614077887147),
        (2.39, 150, 0.953756756155),
        (2.03, 99, 1.70509546658),
        (2.23, 100, 1.14388242613),
        (1.74, 150, 3.48501236652),
        (1.92, 100, 2.10654708213),
        (2.96, 50, 0.172038729830),
    ],
)
def test_evidence_for_no_effect_at_unit_scale(t: float, n: int, against: float) -> None:
    assert float(np.exp(-log_bf_t(t, n - 1, n, 1))) == pytest.approx(against, rel=1e-11)


# Student's sleep data, hours of extra sleep on two drugs, as in R's datasets (from memory).
FIRST_DRUG = np.array([0.7, -1.6, -0.2, -1.2, -0.1, 3.4, 3.7, 0.8, 0.0, 2.0])
SECOND_DRUG = np.array([1.9, 0.8, 1.1, 0.1, -0.1, 4.4, 5.5, 1.6, 4.6, 3.4])


@pytest.mark.parametrize(("scale", "factor"), [(np.sqrt(0.5), 17.2588802678), (1.0, 18.4152097603)])
def test_sleep_data(scale: float, factor: float) -> None:
    """Morey & Rouder, BayesFactor help page ttest.tstat, commit 04b83d90: "about 15" (seen); computed."""
    gain = FIRST_DRUG - SECOND_DRUG
    t = gain.mean() / (gain.std(ddof=1) / np.sqrt(10))
    assert round(float(t), 7) == -4.0621277
    assert float(np.exp(log_bf_t(t, 9, 10, scale))) == pytest.approx(factor, rel=1e-11)


# JASP statistics application, t-test module unit tests (Kitchen Rolls, Eye Movements, Stereograms),
# github.com/jasp-stats/jaspTTests commit 8fcdf4e8: 1/7.74885083455644, 0.0853917198054242, 4.56741526195086
# (seen, good to 1e-6; the last from a t rounded to three places); recomputed.
@pytest.mark.parametrize(
    ("t", "groups", "factor", "printed", "tolerance"),
    [
        (-0.753605326123022, (48, 54), 1 / 7.74885083461, 1 / 7.74885083455644, 1e-6),
        (-2.84527462006, (24, 25), 0.0853917196867, 0.0853917198054242, 1e-6),
        (2.319, (43, 35), 4.56748735408, 4.56741526195086, 1e-4),
    ],
)
def test_factor_of_one_direction(
    t: float, groups: tuple[int, int], factor: float, printed: float, tolerance: float
) -> None:
    result = float(np.exp(log_bf_t(t, sum(groups) - 2, of_two_groups(*groups), 0.707, one_sided=True)))
    assert result == pytest.approx(factor, rel=3e-11)
    assert result == pytest.approx(printed, rel=tolerance)


def test_regression_on_one_predictor() -> None:
    """BayesFactor help page linearReg.R2stat, as above: "over 400,000" (seen) for N = 30, R^2 = .6813; computed."""
    t = weigh.t_from_r(np.sqrt(0.6813), 28)
    assert float(np.exp(log_bf_t(t, 28, 30, np.sqrt(2) / 4))) == pytest.approx(417696.026286, rel=1e-11)


@pytest.mark.parametrize(("n", "factor", "printed"), [(20, 8.22144097406, 8.221), (10, 1.27830839404, 1.278)])
def test_correlation_as_regression(n: int, factor: float, printed: float) -> None:
    """Wetzels-Wagenmakers factor of r = .6: docstring and tests of pingouin, as above (seen)."""
    result = float(np.exp(log_bf_t(weigh.t_from_r(0.6, n - 2), n - 2, n, 1)))
    assert result == pytest.approx(factor, rel=1e-11)
    assert round(result, 3) == printed


def test_exact_correlation() -> None:
    """R = .6, n = 20, uniform prior: 10.634 in the docstring of pingouin's bayesfactor_pearson, as above (seen).

    Formula: Ly, A., Verhagen, J. & Wagenmakers, E.-J. (2016), J. Math. Psychol. 72, 19-32, eq. (25).
    """
    result = float(np.exp(log_bf_r(0.6, 20, 1)))
    assert result == pytest.approx(10.6336163341, rel=1e-11)
    assert round(result, 3) == 10.634


def test_exact_correlation_with_a_narrower_prior() -> None:
    """Sepal length and width of the iris data, kappa = 1/3: BayesFactor help page correlationBF; computed."""
    assert float(np.exp(log_bf_r(-0.11756978, 150, 1 / 3))) == pytest.approx(0.509017511648, rel=1e-7)


# Goodman, S. N. (1999). Toward evidence-based medical statistics. 2: The Bayes factor. Annals of Internal Medicine
# 130(12), 1005-1013, Table 2, not seen: exp(-z^2/2). Computed.
@pytest.mark.parametrize(
    ("z", "factor"),
    [
        (1.96, 0.146489723462),
        (2.17, 0.0949457123185),
        (2.58, 0.0358575906764),
        (3.28, 0.00461150966243),
        (1.95996398454, 0.146500064486),
        (3.29052673149, 0.00445475557301),
    ],
)
def test_minimum_bayes_factor(z: float, factor: float) -> None:
    assert float(np.exp(-log_lr_normal_bound(z))) == pytest.approx(factor, rel=1e-11)


# Berger, J. O. & Sellke, T. (1987). Testing a point null hypothesis: the irreconcilability of P values and
# evidence. JASA 82(397), 112-122; abstract seen, tables not. Computed: lower bounds of the posterior of no effect
# at even odds.
@pytest.mark.parametrize(
    ("p", "posterior"),
    [(0.1, 0.205417597762), (0.05, 0.127780249669), (0.01, 0.0349774365084), (0.001, 0.00443499873767)],
)
def test_bound_over_all_priors(p: float, posterior: float) -> None:
    risk = weigh.false_positive_risk(log_lr_normal_bound(Z_OF_P[p]), 0.5)
    assert float(risk) == pytest.approx(posterior, rel=1e-10)


@pytest.mark.parametrize(("p", "posterior"), [(0.1, 0.339798147503), (0.001, 0.00883083273982)])
def test_bound_over_two_opposite_effects(p: float, posterior: float) -> None:
    risk = weigh.false_positive_risk(log_lr_folded_bound(Z_OF_P[p]), 0.5)
    assert float(risk) == pytest.approx(posterior, rel=1e-10)


@pytest.mark.parametrize(("p", "posterior"), [(0.05, 0.321300136309), (0.01, 0.133394060033)])
def test_bound_over_normal_priors(p: float, posterior: float) -> None:
    risk = weigh.false_positive_risk(log_lr_local_normal_bound(Z_OF_P[p]), 0.5)
    assert float(risk) == pytest.approx(posterior, rel=1e-10)


# Held, L. & Ott, M. (2018). On p-values and Bayes factors. Annual Review of Statistics and Its Application 5,
# 393-419; not seen. Computed: sqrt(e) z exp(-z^2/2), also the chi-squared bound on one degree of freedom.
@pytest.mark.parametrize(
    ("p", "factor"),
    [
        (0.1, 0.701089077931),
        (0.05, 0.473405334961),
        (0.01, 0.153927008668),
        (0.001, 0.0241677680436),
        (0.0001, 0.00331336393415),
    ],
)
def test_minimum_bayes_factor_over_normal_priors(p: float, factor: float) -> None:
    z = weigh.z_from_log_p(np.log(p), one_sided=False)
    assert float(np.exp(-log_lr_local_normal_bound(z))) == pytest.approx(factor, rel=1e-11)


# Benjamin, D. J. et al. (2018). Redefine statistical significance. Nature Human Behaviour 2, 6-10, text, Fig. 1
# and 2 (full text seen); the figures to twelve places computed. At p = .05 and .005 the point bound of half the
# mass on each of plus and minus z (3.4, 25.7) and the bound 1/(-e p ln p) (2.4, where .05 gives 2.456, and 13.9).
@pytest.mark.parametrize(
    ("p", "of_points", "printed", "local"),
    [(0.05, 3.41453989285, 3.4, 2.45602348660), (0.005, 25.7020884430, 25.7, 13.8866517696)],
)
def test_bounds_at_the_two_levels(p: float, of_points: float, printed: float, local: float) -> None:
    z = Z_OF_P[p]
    at_z = float(np.exp(weigh.log_lr_z(z, z, one_sided=False)))
    assert at_z == pytest.approx(of_points, rel=1e-10)
    assert round(at_z, 1) == printed
    assert float(np.exp(weigh.log_lr_bound(np.log(p)))) == pytest.approx(local, rel=1e-11)
    # The best pair of effects is a little nearer to zero than z, and gives a little more.
    gain = float(log_lr_folded_bound(z)) - np.log(at_z)
    assert 0 < gain < 1e-3


# Same source, Fig. 1, computed: half the mass on each of plus and minus w, w = z of p = .005 (the most powerful
# Bayesian test) or the effect that has 75 % or 80 % power at .05.
@pytest.mark.parametrize(
    ("p", "w", "factor"),
    [
        (0.05, None, 2.38413235534),
        (0.05, 2.63444690647, 2.71869331391),
        (0.05, 2.80158178701, 2.39513350373),
        (0.005, 2.63444690647, 25.3221466048),
        (0.005, 2.80158178701, 25.7017065745),
    ],
)
def test_curves_of_the_figure(p: float, w: float | None, factor: float) -> None:
    effect = umpbt_z(log_umpbt_threshold(0.005, one_sided=False)) if w is None else w
    assert float(np.exp(weigh.log_lr_z(Z_OF_P[p], effect, one_sided=False))) == pytest.approx(factor, rel=1e-10)


# Same source, eq. (2), computed: the share of false positives among the significant, by prior odds, level and
# power.
@pytest.mark.parametrize(
    ("odds", "alpha", "shares"),
    [
        (1 / 40, 0.05, (0.909090909091, 0.8, 0.714285714286, 0.666666666667)),
        (1 / 10, 0.05, (0.714285714286, 0.5, 0.384615384615, 0.333333333333)),
        (1 / 10, 0.005, (0.2, 0.0909090909091, 0.0588235294118, 0.0476190476190)),
        (1 / 5, 0.05, (0.555555555556, 0.333333333333, 0.238095238095, 0.2)),
        (1 / 5, 0.005, (0.111111111111, 0.0476190476190, 0.0303030303030, 0.0243902439024)),
    ],
)
def test_false_positive_rate(odds: float, alpha: float, shares: tuple[float, ...]) -> None:
    """Printed: "greater than 33 %" and "to 5 %" at odds of 1 to 10 and full power (seen)."""
    power = np.array([0.2, 0.5, 0.8, 1.0])
    rates = weigh.false_positive_risk(np.log(power / alpha), odds / (1 + odds))
    np.testing.assert_allclose(rates, shares, rtol=1e-11)


# Johnson, V. E. (2013). Revised standards for statistical evidence. PNAS 110(48), 19313-19317; abstract seen:
# 25-50 to 1 at .005 and 100-200 to 1 at .001, over common tests. Computed for z: one-sided, and two-sided as two
# one-sided tests. Johnson, V. E. (2019). Evidence from marginally significant t statistics. The American
# Statistician 73(sup1), 129-134; abstract seen: about 7 two-sided and 4 one-sided at .05.
@pytest.mark.parametrize(
    ("alpha", "one_sided", "two_sided"),
    [
        (0.05, 3.86813209235, 6.82593556193),
        (0.005, 27.5898596302, 51.4041695238),
        (0.001, 118.482806005, 224.479207357),
    ],
)
def test_evidence_thresholds_of_common_levels(alpha: float, one_sided: float, two_sided: float) -> None:
    thresholds = np.exp(log_umpbt_threshold(alpha, one_sided=[True, False]))
    np.testing.assert_allclose(thresholds, [one_sided, two_sided], rtol=1e-11)


# Johnson, V. E. (2013). Uniformly most powerful Bayesian tests. Annals of Statistics 41(4), 1716-1741; not seen.
# Computed: critical value sqrt(2 ln gamma) of the one-sided z test and its size.
@pytest.mark.parametrize(
    ("gamma", "z", "alpha"),
    [
        (3, 1.48230380737, 0.0691297378497),
        (5, 1.79412257799, 0.0363968030318),
        (10, 2.14596602629, 0.0159378446534),
        (25, 2.53727248236, 0.00558599801451),
        (50, 2.79714962254, 0.00257778259890),
        (100, 3.03485425877, 0.00120325972941),
        (200, 3.25524726144, 0.000566468415503),
    ],
)
def test_sizes_of_evidence_thresholds(gamma: float, z: float, alpha: float) -> None:
    critical = umpbt_z(np.log(gamma))
    assert float(critical) == pytest.approx(z, rel=1e-11)
    assert float(np.exp(weigh.log_p_z(critical, one_sided=True))) == pytest.approx(alpha, rel=1e-11)
    assert float(np.exp(log_umpbt_threshold(alpha, one_sided=True))) == pytest.approx(gamma, rel=1e-10)


@pytest.mark.parametrize("df", [1.0, 9.0, 48.0, 1e4])
def test_critical_t_is_where_its_bound_reaches_the_threshold(df: float) -> None:
    """Rejection beyond ``t^2 = df (gamma^(2/(df+1)) - 1)``: Johnson (2013), Annals of Statistics, from memory."""
    gamma = 25.0
    t = umpbt_t(np.log(gamma), df)
    assert float(t) == pytest.approx(np.sqrt(df * (gamma ** (2 / (df + 1)) - 1)), rel=1e-10)
    assert float(np.exp(log_lr_t_bound(t, df))) == pytest.approx(gamma, rel=1e-12)
