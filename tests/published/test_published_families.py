"""Adjusted p values against published ones. COMPUTED ones come from the published formulas at 40 digits."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import pytest
from scipy import special

from gatecheck.weigh.families import Procedure, adjusted_p, rejects, share_of_true_nulls

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Array = NDArray[np.float64]

BONFERRONI, HOLM, HOCHBERG, HOMMEL = Procedure.BONFERRONI, Procedure.HOLM, Procedure.HOCHBERG, Procedure.HOMMEL
BH, BY = Procedure.BENJAMINI_HOCHBERG, Procedure.BENJAMINI_YEKUTIELI

# Benjamini, Y. & Hochberg, Y. (1995). Controlling the false discovery rate. JRSS B 57(1), 289-300, section 4 (15
# comparisons, thrombolysis in acute myocardial infarction, Neuhaus et al. 1992).
THROMBOLYSIS = [0.0001, 0.0004, 0.0019, 0.0095, 0.0201, 0.0278, 0.0298, 0.0344, 0.0459, 0.3240, 0.4262, 0.5719]
THROMBOLYSIS += [0.6528, 0.7590, 1.000]


# Same source, SEEN as reproduced in the docstring of scipy.stats.false_discovery_control, github.com/scipy/scipy
# commit 3dbf660a.
@pytest.mark.parametrize(("procedure", "rejected"), [(BONFERRONI, 3), (BH, 4)])
def test_number_rejected_in_the_example_of_benjamini_and_hochberg(procedure: Procedure, rejected: int) -> None:
    assert rejects(procedure, THROMBOLYSIS, 0.05).tolist() == [True] * rejected + [False] * (15 - rejected)


# Benjamini, Y., Krieger, A. M. & Yekutieli, D. (2006). Adaptive linear step-up procedures. Biometrika 93,
# 491-507, worked example. SEEN in statsmodels test_multi.py: levels .047619 and .0649, 8 rejections. Two runs of
# the plain procedure.
def test_two_stages_of_benjamini_krieger_and_yekutieli() -> None:
    first_level = 0.05 / 1.05
    left = 15 - int(rejects(BH, THROMBOLYSIS, first_level).sum())
    second_level = first_level * 15 / left

    assert [first_level, second_level] == pytest.approx([0.047619047619, 0.0649350649351], rel=1e-11)
    assert rejects(BH, THROMBOLYSIS, second_level).sum() == 8


# The same p values. COMPUTED from the formulas of Holm (1979) Scand. J. Statist. 6, 65-70; Hommel (1988)
# Biometrika 75, 383-386; Benjamini & Yekutieli (2001) Ann. Statist. 29, 1165-1188.
@pytest.mark.parametrize(
    ("procedure", "adjusted"),
    [
        (BONFERRONI, [0.0015, 0.006, 0.0285, 0.1425, 0.3015, 0.417, 0.447, 0.516, 0.6885, 1, 1, 1, 1, 1, 1]),
        (HOLM, [0.0015, 0.0056, 0.0247, 0.114, 0.2211, 0.278, 0.278, 0.278, 0.3213, 1, 1, 1, 1, 1, 1]),
        (HOMMEL, [0.0015, 0.0056, 0.0247, 0.095, 0.1608, 0.1946, 0.2086, 0.2408, 0.3213, 1, 1, 1, 1, 1, 1]),
        (
            BY,
            [0.00497734348984, 0.00995468697969, 0.0315231754357, 0.118211907884, 0.200089208292,
             0.211892622853, 0.211892622853, 0.214025770063, 0.253844517982, 1, 1, 1, 1, 1, 1],
        ),
    ],
)  # fmt: skip
def test_thrombolysis_example(procedure: Procedure, adjusted: list[float]) -> None:
    np.testing.assert_allclose(adjusted_p(procedure, THROMBOLYSIS), adjusted, rtol=5e-12)


# Docstring of scipy.stats.false_discovery_control, SEEN.
def test_small_example_of_benjamini_and_hochberg() -> None:
    np.testing.assert_allclose(adjusted_p(BH, [0.5, 0.6, 0.1, 0.001]), [0.6, 0.6, 0.2, 0.004], rtol=1e-15)


TEN = [0.838541367553, 0.642193923795, 0.680845947633, 0.967833824309, 0.71626938238, 0.177096952723]
TEN += [5.23656777208e-05, 0.0202732688798, 0.00028140506198, 0.0149877310796]
SIX = [0.002, 0.004, 0.006, 0.008, 0.01, 0.012]
THIRD = [0.001, 0.002, 0.003, 0.004, 0.005, 0.05, 0.06, 0.07, 0.08, 0.09]
FORTY = [0.00116, 0.00924, 0.01075, 0.01437, 0.01784, 0.01918, 0.02751, 0.02871, 0.03054, 0.03246, 0.04259]
FORTY += [0.06879, 0.0691, 0.08081, 0.08593, 0.08993, 0.09386, 0.09412, 0.09718, 0.09758, 0.09781, 0.09788]
FORTY += [0.13282, 0.20191, 0.21757, 0.24031, 0.26061, 0.26762, 0.29474, 0.32901, 0.41386, 0.51479, 0.52461]
FORTY += [0.53389, 0.56276, 0.62967, 0.72178, 0.73403, 0.87182, 0.95384]


# statsmodels/stats/tests/test_multi.py (arrays printed from the R package multtest and from R p.adjust),
# github.com/statsmodels/statsmodels. SEEN; Hommel of the third example COMPUTED by closure over all subsets.
@pytest.mark.parametrize(
    ("procedure", "p", "adjusted", "tolerance"),
    [
        (HOLM, TEN, [0.000523656777208, 0.00253264555782, 0.1199018486368, 0.1419128821586, *[1] * 6], 1e-9),
        (
            HOCHBERG, TEN,
            [0.000523656777208, 0.00253264555782, 0.1199018486368, 0.1419128821586, *[0.967833824309] * 6], 1e-9,
        ),
        (
            BH, TEN,
            [0.000523656777208, 0.0014070253099, 0.0499591035986667, 0.0506831721995, 0.354193905446,
             0.895336727975, 0.895336727975, 0.895336727975, 0.931712630614445, 0.967833824309], 1e-9,
        ),
        (
            BY, TEN,
            [0.00153377407641756, 0.00412113246522694, 0.146328628437206, 0.148449402382742, *[1] * 6], 1e-9,
        ),
        (BONFERRONI, SIX, [0.012, 0.024, 0.036, 0.048, 0.06, 0.072], 1e-12),
        (HOLM, SIX, [0.012, 0.02, 0.024, 0.024, 0.024, 0.024], 1e-12),
        (HOCHBERG, SIX, [0.012] * 6, 1e-12),
        (BH, SIX, [0.012] * 6, 1e-12),
        (BY, SIX, [0.0294] * 6, 1e-12),
        (BONFERRONI, THIRD, [0.01, 0.02, 0.03, 0.04, 0.05, 0.5, 0.6, 0.7, 0.8, 0.9], 1e-12),
        (HOLM, THIRD, [0.01, 0.018, 0.024, 0.028, 0.03, *[0.25] * 5], 1e-12),
        (HOCHBERG, THIRD, [0.01, 0.018, 0.024, 0.028, 0.03, *[0.09] * 5], 1e-12),
        (HOMMEL, THIRD, [0.01, 0.014, 0.018, 0.024, 0.03, *[0.09] * 5], 1e-12),
        (
            BH, THIRD,
            [*[0.01] * 5, 0.08333333333333, 0.08571428571429, 0.0875, 0.08888888888889, 0.09], 1e-12,
        ),
        (
            HOMMEL, FORTY,
            [0.0464, 0.25872, 0.29025, 0.349571428571, 0.41032, 0.44114, 0.57771, 0.60291, 0.618954, 0.6492,
             0.7402725, 0.86749, 0.86749, 0.88891, 0.897147777778, 0.8993, *[0.9175375] * 6, *[0.95384] * 18],
            1e-12,
        ),
    ],
)  # fmt: skip
def test_examples_of_multtest(
    procedure: Procedure, p: list[float], adjusted: list[float], tolerance: float
) -> None:
    np.testing.assert_allclose(np.sort(adjusted_p(procedure, p)), adjusted, rtol=0, atol=tolerance)


def normal_deviates_of_r(seed: int, count: int) -> Array:
    """Draw what R draws after ``set.seed(seed)``: Mersenne twister, two uniforms for each inverted normal."""
    state = seed
    words = []
    for step in range(50 + 625):
        state = (69069 * state + 1) % 2**32
        if step > 50:
            words.append(state)
    source = np.random.MT19937()
    source.state = {"bit_generator": "MT19937", "state": {"key": np.array(words, dtype=np.uint32), "pos": 624}}
    uniform = source.random_raw((count, 2)) * 2.3283064365386963e-10
    deviates: Array = special.ndtri((np.floor(2**27 * uniform[:, 0]) + uniform[:, 1]) / 2**27)
    return deviates


# R, ?p.adjust: set.seed(123); x <- rnorm(50, mean = c(rep(0, 25), rep(3, 25))); p <- 2*pnorm(sort(-abs(x))).
# Printed output in tests/Examples/stats-Ex.Rout.save, github.com/wch/r-source commit 0c26529e, SEEN at positions
# 1, 2, 11, 13, 21, 22, 50 (1.18e-05, .00103, ... to five places); here with the digits COMPUTED at 40 digits.
EXAMPLE_OF_R = 2 * special.ndtr(np.sort(-np.abs(normal_deviates_of_r(123, 50) + np.repeat([0.0, 3.0], 25))))
SHOWN = np.array([1, 2, 11, 13, 21, 22, 50]) - 1


@pytest.mark.parametrize(
    ("procedure", "adjusted"),
    [
        (
            HOLM,
            [1.17702675399e-5, 0.00102977921795, 0.0244597726136, 0.125492325679, 0.634505044165, 1.0, 1.0],
        ),
        (
            HOMMEL,
            [1.17702675399e-5, 0.00100876331555, 0.0244597726136, 0.108980177564, 0.571054539749,
             0.943789021784, 0.943789021784],
        ),
        (
            BONFERRONI,
            [1.17702675399e-5, 0.00105079512036, 0.030574715767, 0.165121481157, 1.0, 1.0, 1.0],
        ),
        (
            BH,
            [1.17702675399e-5, 0.000429473645673, 0.00277951961519, 0.0126369349147, 0.0503575431877,
             0.111880372796, 0.943789021784],
        ),
        (
            BY,
            [5.29568505491e-5, 0.00193229011929, 0.0125056294906, 0.0568561650282, 0.226568927135,
             0.50337277054, 1.0],
        ),
    ],
)  # fmt: skip
def test_example_of_p_adjust(procedure: Procedure, adjusted: list[float]) -> None:
    np.testing.assert_allclose(adjusted_p(procedure, EXAMPLE_OF_R)[SHOWN], adjusted, rtol=2e-11)


# Same example, COMPUTED.
def test_numbers_below_five_per_cent_in_the_example_of_p_adjust() -> None:
    procedures = [Procedure.NONE, BONFERRONI, HOLM, HOCHBERG, HOMMEL, BH, BY]

    assert [int((adjusted_p(p, EXAMPLE_OF_R) < 0.05).sum()) for p in procedures] == [22, 11, 11, 11, 11, 20, 12]


FIVE = [0.52, 0.12, 0.0001, 0.03, 0.14]


# pingouin tests/test_multicomp.py (checked against R p.adjust), github.com/raphaelvallat/pingouin commit
# 14994d6e, SEEN; Hochberg and Hommel COMPUTED.
@pytest.mark.parametrize(
    ("procedure", "p", "adjusted"),
    [
        (BY, FIVE, [1, 0.399583333, 0.001141667, 0.17125, 0.399583333]),
        (HOLM, FIVE, [0.52, 0.36, 0.0005, 0.12, 0.36]),
        (HOLM, [0.52, 0.12, 0.10, 0.30, 0.14], [0.6, 0.5, 0.5, 0.6, 0.5]),
        (HOCHBERG, FIVE, [0.52, 0.28, 0.0005, 0.12, 0.28]),
        (HOMMEL, FIVE, [0.52, 0.24, 0.0005, 0.12, 0.28]),
    ],
)
def test_five_p_values(procedure: Procedure, p: list[float], adjusted: list[float]) -> None:
    np.testing.assert_allclose(adjusted_p(procedure, p), adjusted, rtol=0, atol=5e-10)


# stdlib padjust documentation, https://stdlib.io/docs/api/latest/@stdlib/stats/padjust, SEEN (.138 and .799 are
# printed there for .1375 and .7995).
def test_examples_of_padjust() -> None:
    p = [0.319, 0.201, 0.4, 0.374, 0.113]
    uneven = adjusted_p(BONFERRONI, [0.1496, 0.0275, 0.3053, 0.1599, 0.2061])

    np.testing.assert_allclose(adjusted_p(HOLM, p), [0.957, 0.804, 0.957, 0.957, 0.565], rtol=1e-14)
    np.testing.assert_allclose(adjusted_p(BH, p), [0.4] * 5, rtol=1e-14)
    np.testing.assert_allclose(uneven, [0.748, 0.1375, 1.0, 0.7995, 1.0], rtol=1e-14)


# Same source: five p values of ten comparisons. The five others count as 1.
def test_comparisons_that_were_not_reported() -> None:
    p = [0.319, 0.201, 0.4, 0.374, 0.113]

    np.testing.assert_allclose(adjusted_p(BH, p + [1.0] * 5)[:5], [0.8] * 5, rtol=1e-14)


# Storey, J. D. & Tibshirani, R. (2003). Statistical significance for genomewide studies. PNAS 100(16), 9440-9445:
# 1072 of 3170 genes have p >= .5, which gives .6763 (COMPUTED from the data file of github.com/StoreyLab/qvalue
# commit e8614232). Only these counts enter the estimate, so any p values with them do.
def test_share_of_true_nulls_among_genes() -> None:
    p = np.concatenate([np.linspace(0.5, 1, 1072), np.linspace(0, 0.49, 3170 - 1072)])

    assert float(share_of_true_nulls(p, 0.5)) == pytest.approx(0.676340694006, rel=1e-11)
