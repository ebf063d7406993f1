"""Published values of power, sample sizes and non-central tails.

Each group names its source. "Seen": the printed figure was read there. "Computed": the figure was recomputed to 40
digits from the published formula, because the print was not at hand; then the recomputed figure is tested. Programs
that search for a size stop early, so their printed sizes hold to 1e-4 or so; the recomputed size stands beside.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import pytest
from scipy import special
from weigh.held import assert_both_tails

from gatecheck.weigh import sizes_for_power
from gatecheck.weigh.noncentral import lower_tail_chi2, lower_tail_t, upper_tail_chi2, upper_tail_f, upper_tail_t
from gatecheck.weigh.power import (
    cohen_h,
    power_anova,
    power_chi2,
    power_correlation_exact,
    power_correlation_fisher,
    power_f,
    power_log_rank,
    power_one_sample_t,
    power_one_sample_z,
    power_proportions_arcsine,
    power_proportions_pooled,
    power_regression,
    power_t,
    power_two_sample_t,
    power_two_sample_z,
)

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

ALPHA = 0.05
SIZES = [0.1, 0.25, 0.4]


# R, example output of ?power.t.test, ?power.prop.test and ?power.anova.test, tests/Examples/stats-Ex.Rout.save.
# Seen. Two-sided power there leaves out rejections in the wrong direction: one-sided power at half the level.
@pytest.mark.parametrize(
    ("power", "printed", "recomputed"),
    [
        (power_two_sample_t(1, 20, 20, 0.025, one_sided=True), 0.8689528, 0.868952801692),
        (power_proportions_pooled(0.75, 0.5, 50, 0.025, one_sided=True), 0.7401659, 0.740165901331),
        # Group means of variance 1 with divisor k - 1, within-group variance 3: f^2 = (3/4)/3.
        (power_anova(0.5, 4, 5, ALPHA), 0.3535594, 0.353559423723),
    ],
)
def test_powers_of_the_manual_pages(power: NDArray[np.float64], printed: float, recomputed: float) -> None:
    assert float(power) == pytest.approx(recomputed, abs=1e-12)
    assert float(power) == pytest.approx(printed, abs=6e-8)


def test_both_directions_are_counted() -> None:
    """The fork of the first of these figures: with both directions it is 0.868953027724 (computed)."""
    assert float(power_two_sample_t(1, 20, 20, ALPHA, one_sided=False)) == pytest.approx(0.868953027724, abs=1e-12)


# Same source, seen; the wanted power holds at the recomputed size.
@pytest.mark.parametrize(
    ("power_at", "printed", "recomputed", "wanted"),
    [
        (lambda n: power_two_sample_t(1, n, n, 0.025, one_sided=True), 22.0211, 22.0210955701, 0.9),
        (lambda n: power_two_sample_t(1, n, n, 0.05, one_sided=True), 17.84713, 17.8471206265, 0.9),
        (lambda n: power_proportions_pooled(0.75, 0.5, n, 0.025, one_sided=True), 76.70693, 76.7069284518, 0.9),
        (lambda n: power_proportions_pooled(0.501, 0.5, n, 0.0005, one_sided=True), 10451937, 10451936.5955, 0.9),
        (lambda n: power_proportions_pooled(1, 0.9, n, 0.025, one_sided=True), 73.37427, 73.3742730467, 0.8),
        (lambda n: power_anova(0.5, 4, n, 0.05), 11.92613, 11.9261111678, 0.8),
        # Means 120, 130, 140, 150 of variance 125 (divisor 4), 500 within.
        (lambda n: power_anova(0.5, 4, n, 0.05), 15.18834, 15.1883307775, 0.9),
        # The R package pwr, as printed in pingouin's tests/test_power.py and docstrings. Seen.
        (lambda n: power_one_sample_t(0.5, n, 0.05, one_sided=True), 26.13753, 26.137503806, 0.8),
        (lambda n: power_one_sample_t(0.5, n, 0.05, one_sided=False), 33.36713, 33.3671289533, 0.8),
        (lambda n: power_two_sample_t(0.5, n, n, 0.05, one_sided=False), 63.76561, 63.7656101909, 0.8),
        (lambda n: power_chi2(0.3, n, 1, 0.05), 87.20954, 87.2095612147, 0.8),
        (lambda k: power_anova(np.sqrt(0.0727003 / (1 - 0.0727003)), k, 20, 0.05), 10.70313, 10.7031483322, 0.8),
        (lambda w: power_chi2(w, 50, 4, 0.05), 0.4885751, 0.488575190482, 0.8),
        (lambda d: power_one_sample_t(d, 20, 0.05, one_sided=True), 0.5769185, 0.576917001338, 0.8),
        (lambda d: power_two_sample_t(d, 20, 20, 0.05, one_sided=True), 0.8006879, 0.800680336254, 0.8),
        (lambda d: power_two_sample_t(d, 20, 20, 0.05, one_sided=False), 0.9091587, 0.909129032682, 0.8),
        # The pwr vignette: 0.75 against 0.5, known null, one-sided. Seen.
        (lambda n: power_one_sample_z(cohen_h(0.75, 0.5), n, 0.05, one_sided=True), 22.55127, 22.5512646007, 0.8),
        # Lakens, D. (2022). Improving Your Statistical Inferences, chapter 8: powers of 33 % and of a third. Seen.
        (lambda d: power_one_sample_t(d, 20, 0.05, one_sided=False), 0.3577466, 0.357754121595, 0.33),
        (lambda d: power_two_sample_t(d, 30, 30, 0.05, one_sided=False), 0.401303, 0.401313422264, 1 / 3),
    ],
)
def test_size_at_which_the_wanted_power_holds(
    power_at: Callable[[float], NDArray[np.float64]], printed: float, recomputed: float, wanted: float
) -> None:
    assert float(power_at(recomputed)) == pytest.approx(wanted, abs=1e-9)
    assert float(power_at(printed)) == pytest.approx(wanted, abs=1e-4)


# R package pwr, as printed in statsmodels' stats/tests/test_power.py. Seen; compared to 1e-11.
@pytest.mark.parametrize(
    ("power", "printed"),
    [
        (power_one_sample_t(0.2, 20, ALPHA, one_sided=False), 0.1359562887679666),
        (power_one_sample_t(1, 30, ALPHA, one_sided=True), 0.999892010204909),
        (power_one_sample_t(0.05, 20, ALPHA, one_sided=True), 0.0764888785042198),
        (power_one_sample_t(-0.2, 20, ALPHA, one_sided=True), 0.006063932667926375),
        (power_one_sample_t(0.2, 20, ALPHA, one_sided=True), 0.21707518167191),
        (power_two_sample_t(1, 30, 30, ALPHA, one_sided=False), 0.967708258242517),
        (power_two_sample_t(0.1, 20, 20, ALPHA, one_sided=False), 0.06095912465411235),
        (power_two_sample_t(1, 30, 30, ALPHA, one_sided=True), 0.985459690251624),
        (power_two_sample_t(0.01, 30, 30, ALPHA, one_sided=True), 0.0540740302835667),
        (power_two_sample_t(0.1, 20, 30, ALPHA, one_sided=True), 0.09623589080917805),
        (power_two_sample_z(0.3, 80, 80, ALPHA, one_sided=False), 0.475100870572638),
        (power_two_sample_z(-0.01, 80, 80, ALPHA, one_sided=True), 0.0438089705093578),
        (power_chi2(0.1, 5, 4, ALPHA), 0.05246644635810126),
        # Printed wrong in the ninth digit there (0.0494137732920332, 0.235454222377575); the true figures,
        # computed.
        (power_regression(0.01, 5, 199, 0.01), 0.0494137727343),
        (power_regression(0.09, 5, 19, 0.1), 0.235454221904),
        # A commercial program's both-tailed figure in the same file, printed 0.7415600; the digits are computed.
        (power_proportions_pooled(0.001, 0.015, 550, ALPHA, one_sided=False), 0.741559956972),
        # Its one-directional fork, computed.
        (power_proportions_pooled(0.015, 0.001, 550, ALPHA / 2, one_sided=True), 0.741557634768),
    ],
)
def test_powers_of_the_r_package(power: NDArray[np.float64], printed: float) -> None:
    assert float(power) == pytest.approx(printed, abs=1e-11)


# R package pwr, as printed in pingouin's tests and docstrings, seven digits. Seen. Two-sided: both directions.
@pytest.mark.parametrize(
    ("power", "printed"),
    [
        (power_one_sample_t(0.5, 20, ALPHA, one_sided=True), 0.6951493),
        (power_one_sample_t(0.5, 20, ALPHA, one_sided=False), 0.5645044),
        (power_two_sample_t(0.5, 20, 20, ALPHA, one_sided=True), 0.4633743),
        (power_two_sample_t(0.5, 20, 20, ALPHA, one_sided=False), 0.337939),
        (power_two_sample_t(0.5, 20, 18, ALPHA, one_sided=True), 0.4463552),
        (power_two_sample_t(0.5, 20, 18, ALPHA, one_sided=False), 0.3223224),
        (power_anova(np.sqrt(0.0727003 / (1 - 0.0727003)), 4, 20, 0.05), 0.5149793),
        (power_chi2(0.3, 20, 1, 0.05), 0.2686618),
        (power_chi2(0.3, 100, 2, 0.05), 0.7706831),
    ],
)
def test_powers_of_a_second_program(power: NDArray[np.float64], printed: float) -> None:
    assert float(power) == pytest.approx(printed, abs=1e-7)


# Same source, seen: an approximation by Fisher's z with a bias term and the critical t. The exact power differs
# from it in the third digit, and so does that by Fisher's plain z.
@pytest.mark.parametrize(
    ("rho", "one_sided", "printed"), [(0.5, False, 0.6378746), (0.5, True, 0.7509873), (-0.1, True, 0.01941224)]
)
def test_power_of_a_correlation_near_its_approximation(rho: float, one_sided: bool, printed: float) -> None:
    exact = float(power_correlation_exact(rho, 20, ALPHA, one_sided=one_sided))
    plain = float(power_correlation_fisher(rho, 20, ALPHA, one_sided=one_sided))
    assert exact == pytest.approx(printed, abs=0.005)
    assert plain == pytest.approx(printed, abs=0.02)


# Cohen, J. (1992). A power primer. Psychological Bulletin 112, 155-159, Table 2: power 0.8, alpha 0.05. Computed:
# the least whole numbers, where the table rounds to the nearest.
def test_power_primer_of_means() -> None:
    sizes = sizes_for_power.n_two_sample_t([0.2, 0.5, 0.8], 0.8, [[0.05], [0.01], [0.1]], one_sided=False)
    np.testing.assert_array_equal(sizes, [[394, 64, 26], [586, 96, 39], [310, 51, 21]])


def test_power_primer_of_correlations() -> None:
    """Table: 85. The exact distribution needs 84, Fisher's plain z 84.93 (computed)."""
    assert float(sizes_for_power.n_correlation_exact(0.3, 0.8, ALPHA, one_sided=False)) == 84
    assert float(sizes_for_power.n_correlation_fisher(0.3, 0.8, ALPHA, one_sided=False)) == 85
    assert float(power_correlation_fisher(0.3, 84.927811, 0.025, one_sided=True)) == pytest.approx(0.8, abs=1e-8)


def test_power_primer_of_proportions() -> None:
    assert float(
        power_proportions_arcsine(0.5, 62.7910378748, 62.7910378748, 0.025, one_sided=True)
    ) == pytest.approx(0.8)
    assert float(sizes_for_power.n_proportions_arcsine(0.5, 0.8, ALPHA, one_sided=False)) == 63


def test_power_primer_of_chi_squared() -> None:
    sizes = sizes_for_power.n_chi2([0.1, 0.3, 0.5], [[2], [3], [4], [5], [6]], 0.8, ALPHA)
    expected = [[964, 108, 39], [1091, 122, 44], [1194, 133, 48], [1283, 143, 52], [1363, 152, 55]]
    np.testing.assert_array_equal(sizes, expected)


def test_power_primer_of_groups() -> None:
    sizes = sizes_for_power.n_anova(SIZES, [[2], [4], [5], [6]], 0.8, ALPHA)
    np.testing.assert_array_equal(sizes, [[394, 64, 26], [274, 45, 19], [240, 40, 16], [215, 36, 15]])


def test_power_primer_of_regressions() -> None:
    """With non-centrality f2 N; the table used approximations and is up to 4 lower."""
    sizes = sizes_for_power.n_regression([0.02, 0.15, 0.35], [[2], [3], [4], [5], [7], [8]], 0.8, ALPHA)
    expected = [[485, 68, 31], [550, 77, 36], [602, 85, 40], [647, 92, 43], [725, 103, 49], [759, 109, 52]]
    np.testing.assert_array_equal(sizes, expected)


# A rounded table of sizes per group for a power of 0.9, d = 0.1 to 0.8 (homework page). Seen: 2102, 526, 234, 132,
# 85, 59, 44, 34, rounded to the nearest. Computed: the sizes before rounding.
def test_sizes_for_a_power_of_nine_tenths() -> None:
    exact = [2102.44471009, 526.333188576, 234.462742351, 132.310513963, 85.0312841373, 59.3515529872]
    exact += [43.8704059897, 33.8255423239]
    d = np.arange(1, 9) / 10
    np.testing.assert_allclose(power_two_sample_t(d, exact, exact, ALPHA, one_sided=False), 0.9, atol=1e-9)
    np.testing.assert_array_equal(sizes_for_power.n_two_sample_t(d, 0.9, ALPHA, one_sided=False), np.ceil(exact))


# Schoenfeld, D. A. (1983). Sample-size formula for the proportional-hazards regression model. Biometrics 39,
# 499-503. Computed; the first is a worked example with survival 0.37 against 0.75, seen as 20.39 with z of two
# digits.
@pytest.mark.parametrize(
    ("ratio", "events", "wanted"),
    [
        (np.log(0.75) / np.log(0.37), 20.4140759352, 0.8),
        (0.5, 65.3456592589, 0.8),
        (0.5, 87.4792977215, 0.9),
        (0.7, 246.787104547, 0.8),
        (0.7, 330.377913964, 0.9),
        (0.8, 630.52017118, 0.8),
    ],
)
def test_events_of_the_log_rank_test(ratio: float, events: float, wanted: float) -> None:
    assert float(power_log_rank(ratio, events, 0.5, 0.025, one_sided=True)) == pytest.approx(wanted, abs=1e-11)
    assert float(sizes_for_power.events_log_rank(ratio, 0.5, wanted, ALPHA, one_sided=False)) == np.ceil(events)


# Fleiss, J. L. (1981). Statistical Methods for Rates and Proportions, 2nd ed., without continuity correction.
# Computed.
@pytest.mark.parametrize(
    ("p1", "p2", "wanted", "size"),
    [(0.4, 0.25, 0.9, 202.809509512), (0.75, 0.5, 0.9, 76.7069284518), (0.2, 0.1, 0.8, 198.963413284)],
)
def test_sizes_for_proportions(p1: float, p2: float, wanted: float, size: float) -> None:
    assert float(power_proportions_pooled(p1, p2, size, 0.025, one_sided=True)) == pytest.approx(wanted, abs=1e-10)
    assert float(sizes_for_power.n_proportions_pooled(p1, p2, wanted, ALPHA, one_sided=False)) == np.ceil(size)


# Blackwelder, W. C. (1982). "Proving the null hypothesis" in clinical trials. Controlled Clinical Trials 3,
# 345-353. Computed: 141.279835218, 267.939288067, 525.371153072.
def test_sizes_of_non_inferiority() -> None:
    p = np.array([0.9, 0.85, 0.5])
    sizes = sizes_for_power.n_non_inferiority_proportions(p, p, 0.1, [0.8, 0.9, 0.9], 0.025)
    np.testing.assert_array_equal(sizes, [142, 268, 526])


# Lehr, R. (1992). Sixteen S-squared over D-squared. Statistics in Medicine 11, 1099-1102. Computed: 15.6977594687.
def test_sixteen_over_d_squared() -> None:
    assert float(power_two_sample_z(1, 15.6977594687, 15.6977594687, 0.025, one_sided=True)) == pytest.approx(0.8)


# Hoenig, J. M. & Heisey, D. M. (2001). The abuse of power. The American Statistician 55, 19-24. Computed.
def test_observed_power_at_the_level_is_a_half() -> None:
    assert float(power_one_sample_z(1.959964, 1, ALPHA, one_sided=False)) == pytest.approx(0.500044287719, abs=1e-6)


# Benton, D. & Krishnamoorthy, K. (2003). Computing discrete mixtures of continuous distributions. Computational
# Statistics & Data Analysis 43, 249-267. Seen; printed digits good to about 1e-12.
# Boost.Math, test/test_nc_t.hpp (last two). Seen.
@pytest.mark.parametrize(
    ("t", "df", "ncp", "lower"),
    [
        (2.34, 3, 1, 0.801888999613917),
        (-4.33, 126, -2, 1.252846196792878e-2),
        (23, 20, 23, 0.460134400391924),
        (34, 20, 33, 0.532008386378725),
        (39, 12, 38, 0.495868184917805),
        (39, 12, 39, 0.446304024668836),
        (39, 200, 38, 0.666194209961795),
        (5, 2, 4, 0.532020698669953),
        (0, 8, 16, 6.3887544005380872813e-58),
        # The normal distribution at one: tests of SciPy, class TestNct. Seen.
        (0, 5, -1, 0.841344746069),
    ],
)
def test_lower_tails_of_t(t: float, df: float, ncp: float, lower: float) -> None:
    assert float(lower_tail_t(t, df, ncp)) == pytest.approx(lower, rel=1e-11)


# Where a widely used library returns nan, or values 1e7 times too large (SciPy issues 7104, 8344, 12919, 17916,
# 19348). Computed.
@pytest.mark.parametrize(
    ("t", "df", "ncp", "lower"),
    [
        (-5, 8, 8.26915191978, 1.70350661634e-24),
        (-1, 1000, 23, 1.61471461240e-127),
        (-1.9844674545084788, 98, 10, 8.91470275021e-33),
        (-1.962, 1000, 30, 4.93949945138e-224),
        (-1.96, 1_000_000, 8, 1.14042891903e-23),
    ],
)
def test_lower_tails_where_libraries_fail(t: float, df: float, ncp: float, lower: float) -> None:
    assert float(lower_tail_t(t, df, ncp)) == pytest.approx(lower, rel=2e-11)


# Same sources: the wrong-direction half of two-sided power. Computed.
@pytest.mark.parametrize(
    ("n", "d", "lower"),
    [(1000, 0.5, 1.03826341257e-39), (15, 5.0, 6.76535377432e-53), (132, 1.0, 4.38442391198e-24)],
)
def test_wrong_direction_of_power_is_small_and_not_nan(n: float, d: float, lower: float) -> None:
    critical = -special.stdtrit(2 * n - 2, 0.025)
    assert float(lower_tail_t(-critical, 2 * n - 2, d * np.sqrt(n / 2))) == pytest.approx(lower, rel=1e-9)


# Same sources: two-sided power is nan there, and one less so small a remainder. Computed.
@pytest.mark.parametrize(("n", "d", "missing"), [(50, 2.0, 1.01611700893e-15), (1000, 0.5, 1.55648453455e-20)])
def test_power_next_to_one(n: float, d: float, missing: float) -> None:
    critical = -special.stdtrit(2 * n - 2, 0.025)
    assert float(power_two_sample_t(d, n, n, ALPHA, one_sided=False)) == pytest.approx(1.0, abs=1e-15)
    assert float(lower_tail_t(critical, 2 * n - 2, d * np.sqrt(n / 2))) == pytest.approx(missing, rel=1e-10)


# Owen, D. B. (1968). A survey of properties and applications of the noncentral t-distribution. Technometrics 10,
# 445-478: the integral. Computed: lower and upper tail.
@pytest.mark.parametrize(
    ("t", "df", "ncp", "lower", "upper"),
    [
        (1, 1, 0, 0.75, 0.25),
        (12.706, 1, 2, 0.874774513448, 0.125225486552),
        (-2, 3, 0.5, 0.0287270422274, 0.971272957773),
        (2.228, 10, 3, 0.228560549105, 0.771439450895),
        (2.228, 10, -3, 0.999998782774, 1.21722557828e-6),
        (2.0422724563012373, 30, 2.8284271247461903, 0.218603494148, 0.781396505852),
        (2.0243941639119696, 38, 3.1622776601683795, 0.131047198308, 0.868952801692),
        (1.972, 198, 3.5355339059327378, 0.0595707441173, 0.940429255883),
        (50, 4, 0.1, 0.999999409388, 5.90611638509e-7),
        (3, 2.5, 1.5, 0.769260011310, 0.230739988690),
        (2.1028, 17.776, 1.8608, 0.579142123865, 0.420857876135),
        (1.96, 100_000, 4, 0.0206758945390, 0.979324105461),
    ],
)
def test_both_tails_of_t(t: float, df: float, ncp: float, lower: float, upper: float) -> None:
    assert_both_tails((lower_tail_t, upper_tail_t), (t, df, ncp), lower, upper, rel=1e-11)


# One-sided normal tolerance factors: Owen (1968) as above, printed to three digits, and NIST/SEMATECH e-Handbook
# 7.2.6.3 (n = 43). Computed: the upper confidence point of non-central t at z_content sqrt(n), over sqrt(n).
@pytest.mark.parametrize(
    ("n", "content", "confidence", "factor"),
    [
        (43, 0.9, 0.99, 1.87395360585),
        (10, 0.95, 0.95, 2.91096341308),
        (50, 0.95, 0.95, 2.06499341774),
        (10, 0.99, 0.95, 3.98111784527),
        (30, 0.9, 0.95, 1.77732879783),
        (5, 0.95, 0.95, 4.20268074126),
    ],
)
def test_tolerance_factors(n: float, content: float, confidence: float, factor: float) -> None:
    tail = upper_tail_t(factor * np.sqrt(n), n - 1, special.ndtri(content) * np.sqrt(n))
    assert float(tail) == pytest.approx(1 - confidence, abs=1e-10)


# R, tests/d-p-q-r-tests.R. Seen: the upper 2.5 % point of chi-squared on 31 with non-centrality 1, good to 1e-11.
def test_quantile_of_chi_squared() -> None:
    assert_both_tails((lower_tail_chi2, upper_tail_chi2), (49.7766246561514, 31, 1), 0.975, 0.025, rel=1e-11)


# SciPy issue 26188: its upper tail of F is negative without an effect. Computed.
def test_f_without_effect() -> None:
    assert float(upper_tail_f(1.5, 3, 20, 0)) == pytest.approx(0.245052011594, abs=1e-12)


def test_power_of_the_conventions() -> None:
    """Power behind a published 26 % of false findings: 16 per group, one sd (50 digits, computed)."""
    assert float(power_t(np.sqrt(8), 30, ALPHA, one_sided=False)) == pytest.approx(0.781397792466, abs=1e-11)
    assert float(power_f(8, 1, 30, ALPHA)) == pytest.approx(0.781397792466, abs=1e-11)
