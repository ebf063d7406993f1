"""Published values of equivalence tests, their power and their sizes.

Each group names its source. "Seen": the printed figure was read there. "Computed": the figure was recomputed to 40
digits from the published formula, because the print was not at hand; then the recomputed figure is tested.
"""

from __future__ import annotations

import numpy as np
import pytest

from gatecheck.weigh.equivalence import (
    interval_equivalence,
    log_scale_sd,
    p_equivalence,
    p_equivalence_ratio,
    p_non_inferiority,
    power_equivalence,
    power_equivalence_binomial,
    rejected_binomial,
)
from gatecheck.weigh.sizes_for_power import n_equivalence_crossover, n_equivalence_parallel

RATIOS = np.arange(17, 25) / 20  # 0.85 to 1.20
A = np.array([4, 7, 8, 6, 3, 2.0])
B = np.array([6, 8, 7, 10, 11, 9.0])


def welch(difference: float, sds: tuple[float, float], n: int) -> tuple[float, float, float]:
    """Difference, its standard error and Welch's degrees of freedom, groups of ``n``."""
    first, second = (sd * sd / n for sd in sds)
    return difference, float(np.sqrt(first + second)), (first + second) ** 2 * (n - 1) / (first**2 + second**2)


# Lakens, D. (2022). Improving Your Statistical Inferences, chapter 9: means 4.55 and 4.87, sd 1.05 and 1.11,
# margins -0.5 and 0.5, Welch. Seen (.326, .023; .0482; .90 interval -.4981, -.1419; 4.71e-4); digits computed.
@pytest.mark.parametrize(
    ("n", "degrees", "above_low", "below_high"),
    [
        (15, 27.9139785456, 0.325866803232, 0.0234858150651),
        (200, 396.777266470, 0.0482489266605, 1.15603943266e-13),
    ],
)
def test_two_one_sided_tests(n: int, degrees: float, above_low: float, below_high: float) -> None:
    difference, error, df = welch(4.55 - 4.87, (1.05, 1.11), n)
    assert df == pytest.approx(degrees, rel=1e-11)
    assert float(p_non_inferiority(difference, error, df, -0.5)) == pytest.approx(above_low, rel=1e-10)
    assert float(p_non_inferiority(-difference, error, df, -0.5)) == pytest.approx(below_high, rel=1e-10)
    assert float(p_equivalence(difference, error, df, low=-0.5, high=0.5)) == pytest.approx(above_low, rel=1e-10)


def test_interval_beside_them() -> None:
    lower, upper = interval_equivalence(*welch(4.55 - 4.87, (1.05, 1.11), 200), 0.05)
    assert float(lower) == pytest.approx(-0.498128609715, abs=1e-11)
    assert float(upper) == pytest.approx(-0.141871390285, abs=1e-11)


def test_effect_beyond_a_margin() -> None:
    difference, error, df = welch(0.86, (1.05, 1.11), 200)
    assert float(p_non_inferiority(difference, error, df, 0.5)) == pytest.approx(0.000471494119501, rel=1e-10)


# Same source: sizes per group for a power of 0.9, margins -0.5 and 0.5. Seen as 87.26261 and 108.9187; digits
# computed.
@pytest.mark.parametrize(("effect", "n"), [(0.0, 87.2625970992), (0.1, 108.9187264)])
def test_exact_power_at_a_published_size(effect: float, n: float) -> None:
    power = power_equivalence(effect, np.sqrt(2 / n), 2 * n - 2, low=-0.5, high=0.5, alpha=0.05)
    assert float(power) == pytest.approx(0.9, abs=1e-9)


# R packages equivalence and ETC, clinic data, as printed in statsmodels' stats/tests/test_tost.py. Seen:
# difference, degrees of freedom, 90 % interval, p value within margins of 0.6 (logarithms: 0.8 and 1.25); the
# standard error follows from the lower limit.
@pytest.mark.parametrize(
    ("difference", "df", "lower", "upper", "p", "margin"),
    [
        (0.5626666666666665, 14, 0.1261653305099018, 0.999168002823431, 0.4412034046017588, 0.6),
        (0.1646666666666667, 14, -0.0744336620516462, 0.4037669953849797, 0.003166881489265175, 0.6),
        (0.562666666666666, 24.11000151062728, 0.194916250699966, 0.930417082633366, 0.4317936812594803, 0.6),
        (0.1646666666666667, 26.7484787582315, -0.2666862980722534, 0.596019631405587, 0.04853083976236974, 0.6),
        (0.1646666666666667, 28, -0.2659960620757337, 0.595329395409067, 0.04827315100761467, 0.6),
        (0.562666666666666, 28, 0.1969453064978777, 0.928388026835454, 0.43169347692374, 0.6),
        (0.0431223318225235, 14, -0.02415225319362176, 0.1103969168386687, 0.0001664157928976468, np.log(1.25)),
    ],
)
def test_clinic_data(difference: float, df: float, lower: float, upper: float, p: float, margin: float) -> None:
    one_error = interval_equivalence(0, 1, df, 0.05)[1]
    error = (difference - lower) / one_error
    assert float(interval_equivalence(difference, error, df, 0.05)[1]) == pytest.approx(upper, rel=1e-9)
    assert float(p_equivalence(difference, error, df, low=-margin, high=margin)) == pytest.approx(p, rel=1e-9)
    as_ratio = p_equivalence_ratio(np.exp(difference), error, df, low=np.exp(-margin), high=np.exp(margin))
    assert float(as_ratio) == pytest.approx(p, rel=1e-9)


# R package equivalence, as printed in pingouin's tests/test_equivalence.py. Seen, to seven digits.
@pytest.mark.parametrize(
    ("margin", "paired", "printed"),
    [
        (1, False, 0.965097399809),
        (10, False, 0.000179338937705),  # printed truncated: 0.00017933
        (1, True, 0.929382613412),
        (0.5, True, 0.954854355434),
        (2, True, 0.828610063000),
    ],
)
def test_six_against_six(margin: float, paired: bool, printed: float) -> None:
    spread = np.var(A - B, ddof=1) if paired else np.var(A, ddof=1) + np.var(B, ddof=1)
    p = p_equivalence(np.mean(A - B), np.sqrt(spread / 6), 5 if paired else 10, low=-margin, high=margin)
    assert float(p) == pytest.approx(printed, rel=1e-10)


# SAS/STAT, TTEST procedure, example with the areas under curves of Wellek, S. (2003), p. 212: data seen there,
# result computed; statsmodels' tests print the same p value, 0.003059338540563293 (seen).
def test_areas_under_curves() -> None:
    test = [103.4, 59.92, 68.17, 94.54, 69.48, 72.17, 74.37, 84.44, 96.74, 94.26, 48.52, 95.68]
    reference = [90.11, 77.71, 77.71, 97.51, 58.21, 101.3, 79.84, 96.06, 89.30, 97.22, 61.62, 85.80]
    logs = np.log(test) - np.log(reference)
    ratio, error = np.exp(np.mean(logs)), np.std(logs, ddof=1) / np.sqrt(12)
    assert float(error) == pytest.approx(0.04805826005366752, rel=1e-12)
    limits = np.exp(interval_equivalence(np.log(ratio), error, 11, 0.05))
    np.testing.assert_allclose([ratio, *limits], [0.941198922751, 0.863373519530, 1.02603959022], rtol=1e-11)
    p = float(p_equivalence_ratio(ratio, error, 11, low=0.8, high=1.25))
    assert p == pytest.approx(0.003059338540563293, rel=1e-10)


# Labes, D., Schuetz, H. & Lang, B., PowerTOST README. Seen as 0.800218, 0.822929, 0.8011186; digits computed.
@pytest.mark.parametrize(
    ("ratio", "cv", "of_variance", "df", "low", "power"),
    [
        (0.975, 0.125, 2 / 32, 30, 0.9, 0.800218171482),  # crossover of 32
        (0.9, 0.4, 1 / 30, 86, 0.75, 0.822928983616),  # four-period replicate of 30
        (0.95, 0.35, 1 / 52 + 1 / 49, 99, 0.8, 0.801118648762),  # parallel groups of 52 and 49
    ],
)
def test_power_of_bioequivalence(
    ratio: float, cv: float, of_variance: float, df: float, low: float, power: float
) -> None:
    error = log_scale_sd(cv) * np.sqrt(of_variance)
    found = power_equivalence(np.log(ratio), error, df, low=np.log(low), high=-np.log(low), alpha=0.05)
    assert float(found) == pytest.approx(power, abs=2e-12)


# Hauschke, D., Steinijans, V. & Pigeot, I. (2007). Bioequivalence Studies in Drug Development. Wiley, Table 5.1:
# total size of a crossover, limits 0.80 and 1.25, ratios 0.85 to 1.20. Seen (in the data set ct5.1 of PowerTOST).
@pytest.mark.parametrize(
    ("power", "cv", "totals"),
    [
        (0.8, 0.1, [36, 12, 8, 6, 8, 10, 20, 76]),
        (0.8, 0.3, [292, 80, 40, 32, 38, 68, 156, 642]),
        (0.8, 0.4, [502, 134, 66, 54, 64, 114, 266, 1104]),
        (0.9, 0.1, [48, 14, 8, 8, 8, 14, 26, 104]),
        (0.9, 0.2, [186, 50, 26, 20, 24, 44, 100, 406]),
        (0.9, 0.4, [694, 186, 88, 66, 86, 158, 368, 1528]),
    ],
)
def test_sizes_of_crossovers(power: float, cv: float, totals: list[int]) -> None:
    found = n_equivalence_crossover(RATIOS, cv, power, low=0.8, high=1.25, alpha=0.05)
    np.testing.assert_array_equal(found, totals)


# Julious, S. A. (2004). Sample sizes for clinical trials with Normal data. Statistics in Medicine 23, 1921-1986,
# Table VIII: total size of two parallel groups, power 0.9. Seen.
def test_sizes_of_parallel_groups() -> None:
    found = n_equivalence_parallel(RATIOS, [[0.3], [0.5]], 0.9, low=0.8, high=1.25, alpha=0.05)
    expected = [[806, 216, 102, 78, 100, 184, 426, 1774], [2082, 554, 262, 196, 256, 470, 1102, 4590]]
    np.testing.assert_array_equal(found, expected)


# The manual of a commercial program, as printed in statsmodels' stats/tests/test_proportion.py. Seen.
def test_exact_binomial() -> None:
    assert tuple(map(float, rejected_binomial(500, low=0.5, high=0.7, alpha=0.05))) == (269, 332)
    power = power_equivalence_binomial(np.arange(60, 70) / 100, 500, low=0.5, high=0.7, alpha=0.05)
    expected = [0.9965, 0.9940, 0.9815, 0.9482, 0.8783, 0.7583, 0.5914, 0.4041, 0.2352, 0.1139]
    np.testing.assert_allclose(power, expected, atol=5.1e-5)
    by_size = power_equivalence_binomial(0.5, np.arange(20, 201, 20), low=0.4, high=0.6, alpha=0.05)
    expected = [0.0, 0.0, 0.0, 0.0889, 0.2356, 0.3517, 0.4457, 0.6154, 0.6674, 0.7708]
    np.testing.assert_allclose(by_size, expected, atol=5.1e-5)
