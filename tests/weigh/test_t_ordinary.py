"""Statistics of ordinary size: shortened polynomials, and the same bits however the rows are laid out."""

from __future__ import annotations

import numpy as np
import pytest

from gatecheck import weigh
from gatecheck.weigh import t as t_module
from gatecheck.weigh.arrays import polynomial
from gatecheck.weigh.polynomials import parabolic_cylinder_terms
from gatecheck.weigh.t_ordinary import LARGEST, economised


@pytest.mark.parametrize("tolerance", [1e-3, 1e-6, 1e-10])
@pytest.mark.parametrize("order", [6, 16])
def test_a_shortened_polynomial_differs_by_no_more_than_it_may(order: int, tolerance: float) -> None:
    reach = 0.12
    y = np.linspace(0, reach, 1001)
    for term in parabolic_cylinder_terms(order):
        size = max(map(abs, term))
        short = economised(term, reach, tolerance * size)
        # Beside what was left out, the rounding of the sums compared.
        assert np.abs(polynomial(short, y) - polynomial(term, y)).max() <= (tolerance + 1e-15) * size
        assert len(short) <= len(term)
    assert len(short) < len(term)


def test_the_highest_power_is_replaced_by_the_smallest_polynomial_of_its_degree() -> None:
    """On [0, 1] ``x^2`` less ``(8x^2 - 8x + 1)/8`` is ``x - 1/8``, which is never off by more than 1/8."""
    assert economised((0.0, 0.0, 1.0), 1.0, 0.13) == (-0.125, 1.0)
    assert economised((0.0, 0.0, 1.0), 1.0, 0.12) == (0.0, 0.0, 1.0)
    # A straight line remains one, whatever may be left out.
    assert economised((0.0, 1.0), 1.0, 10.0) == (0.0, 1.0)


@pytest.mark.parametrize("one_sided", [False, True])
@pytest.mark.parametrize("df", [12.0, 19.0, 25.0, 45.0, 60.0, 300.0, 1e7])
def test_nothing_jumps_where_statistics_cease_to_be_ordinary(df: float, *, one_sided: bool) -> None:
    beyond = np.nextafter(LARGEST, 9)
    others = np.array([0.3, 2.83, 8.0, -5.0])
    for edge, above in (((LARGEST, others), (beyond, others)), ((others, LARGEST), (others, beyond))):
        inside = weigh.log_lr_t(edge[0], df, edge[1], one_sided=one_sided)
        outside = weigh.log_lr_t(above[0], df, above[1], one_sided=one_sided)
        np.testing.assert_allclose(outside, inside, rtol=1e-13, atol=1e-13)


@pytest.mark.parametrize("share", [0.0, 0.1, 0.5, 1.0])
def test_the_share_of_uncommon_rows_changes_no_bit(share: float) -> None:
    """Whether a formula runs over all rows or over those picked out, and in which span they lie."""
    rng = np.random.default_rng(11)
    n = t_module.SPAN + 3 * t_module.LONG_CHUNK // 2
    t, side = rng.uniform(-9, 9, n), rng.random(n) < 0.3
    df = np.where(rng.random(n) < share, rng.uniform(1, 60, n), rng.uniform(60, 500, n))
    df[5], t[7] = -1.0, np.inf
    alone = np.concatenate([np.arange(40), np.arange(n - 40, n)])
    two_sided = weigh.observed_t(t, df, one_sided=False)
    mixed = weigh.observed_t(t, df, one_sided=side)
    for rows in (alone, alone[::-1], alone[df[alone] < 60]):
        np.testing.assert_array_equal(weigh.observed_t(t[rows], df[rows], one_sided=False), two_sided[rows])
        np.testing.assert_array_equal(weigh.observed_t(t[rows], df[rows], one_sided=side[rows]), mixed[rows])
    np.testing.assert_array_equal(mixed[~side], two_sided[~side])
    np.testing.assert_array_equal(np.flatnonzero(np.isnan(two_sided)), [5, 7])


def test_more_degrees_of_freedom_than_can_be_multiplied() -> None:
    df = np.array([1e99, 1e101, 1e200, 1e308, np.inf])
    for one_sided in (False, True):
        result = weigh.log_lr_t(2.5, df, -1.5, one_sided=one_sided)
        np.testing.assert_allclose(result, weigh.log_lr_z(2.5, -1.5, one_sided=one_sided), rtol=1e-14)


def test_whole_numbers_and_broadcast_columns() -> None:
    table = weigh.observed_t([[2], [3]], [10, 20, 300], one_sided=[True, False, True])
    assert table.shape == (2, 3)
    for i, t in enumerate((2.0, 3.0)):
        for j, (df, side) in enumerate(((10.0, True), (20.0, False), (300.0, True))):
            assert table[i, j] == weigh.observed_t(t, df, one_sided=side)
