"""Inputs at and beyond the edges: no exception, no warning, no neighbour spoilt."""

from __future__ import annotations

import subprocess
import sys
from typing import TYPE_CHECKING, Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra import numpy as hnp

from gatecheck import weigh
from gatecheck.weigh import Statistic

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

anything = st.floats(allow_nan=True, allow_infinity=True)
columns = hnp.arrays(np.float64, (7, 5), elements=anything)


def draw_table(seed: int, n: int) -> tuple[NDArray[Any], ...]:
    """Rows of all kinds: kind, value, df1, df2, ncp, one-sided."""
    rng = np.random.default_rng(seed)
    kind = rng.integers(0, 4, n).astype(np.float64)
    value = rng.uniform(0, 8, n) * np.where(kind < 2, rng.choice([-1, 1], n), 1)
    df1 = np.where(kind == Statistic.T, 10 ** rng.uniform(0, 4, n), rng.uniform(1, 60, n))
    return kind, value, df1, 10 ** rng.uniform(0, 4, n), rng.uniform(0, 9, n), rng.integers(0, 2, n) > 0


@pytest.mark.parametrize(
    ("t", "df", "ncp", "expected"),
    [
        # Where library densities raise, overflow or return nan; the values are those of the 50-digit tables.
        (5.0, 1000.0, -2.83, 9.331207421660579),
        (1e4, 1.0, 1e4, 8.936131724620910),
        (1e-6, 1e7, 1e-6, -4.999999999995e-13),
        (0.0, 3.0, 0.0, 0.0),
        (0.0, 1e6, 0.0, 0.0),
    ],
)
def test_arguments_that_defeat_library_densities(t: float, df: float, ncp: float, expected: float) -> None:
    result = float(weigh.log_lr_t(t, df, ncp, one_sided=False))
    assert result == pytest.approx(expected, rel=1e-12, abs=1e-25)


@given(columns)
def test_any_doubles_give_an_answer_or_nan_and_never_an_exception(table: NDArray[np.float64]) -> None:
    a, b, c, d, e, f, g = table
    side = a > 0
    for result in (
        weigh.log_lr_t(a, b, c, one_sided=side),
        weigh.log_lr_z(a, c, one_sided=side),
        weigh.log_lr_chi2(a, b, c),
        weigh.log_lr_f(a, b, c, d),
        weigh.log_p_t(a, b, one_sided=side),
        weigh.log_p_chi2(a, b),
        weigh.log_p_f(a, b, c),
        weigh.t_from_log_p(a, b, one_sided=side),
        weigh.z_from_log_p(a, one_sided=side),
        weigh.chi2_from_log_p(a, b),
        weigh.f_from_log_p(a, b, c),
        weigh.t_from_r(a, b),
        weigh.r_from_t(a, b),
        weigh.t_quantile_two_sided(a, b),
        weigh.false_positive_risk(a, b),
        weigh.log_false_positive_risk(a, b),
        weigh.prior_needed(a, b),
        weigh.log_lr_needed(a, b),
        weigh.log_lr_bound(a),
        weigh.n_to_stand(a, b, c, d, e, f, g, one_sided=side),
    ):
        assert result.shape == (5,)


finite = st.floats(-1e100, 1e100)
size = st.floats(1e-100, 1e100)


@given(t=finite, df=st.floats(1e-3, 1e15), ncp=finite, one_sided=st.booleans())
def test_t_is_finite_on_finite_input(t: float, df: float, ncp: float, *, one_sided: bool) -> None:
    assert np.isfinite(weigh.log_lr_t(t, df, ncp, one_sided=one_sided))
    assert np.isfinite(weigh.observed_t(t, df, one_sided=one_sided))
    assert np.isfinite(weigh.log_p_t(t, df, one_sided=one_sided))


@given(x=st.one_of(st.just(0.0), size), df=st.floats(1e-3, 1e9), ncp=st.one_of(st.just(0.0), size))
def test_chi_squared_is_finite_on_finite_input(x: float, df: float, ncp: float) -> None:
    assert np.isfinite(weigh.log_lr_chi2(x, df, ncp))
    assert np.isfinite(weigh.log_p_chi2(x, df))


@given(
    f=st.one_of(st.just(0.0), size),
    df1=st.floats(1e-3, 1e6),
    df2=st.floats(1e-3, 1e9),
    ncp=st.one_of(st.just(0.0), size),
)
def test_f_is_finite_on_finite_input(f: float, df1: float, df2: float, ncp: float) -> None:
    assert np.isfinite(weigh.log_lr_f(f, df1, df2, ncp))
    assert np.isfinite(weigh.log_p_f(f, df1, df2))


@pytest.mark.parametrize("t", [1e160, 1e300])
def test_a_t_whose_square_overflows(t: float) -> None:
    """For t without bound the ratio at a fixed ncp tends to a limit; at ncp = t it tends to another."""
    near = weigh.log_lr_t(1e100, [3.0, 30.0], 2.0, one_sided=True)
    np.testing.assert_allclose(weigh.log_lr_t(t, [3.0, 30.0], 2.0, one_sided=True), near, rtol=1e-13)
    assert np.isfinite(weigh.observed_t(t, [3.0, 30.0], one_sided=False)).all()
    assert np.isfinite(weigh.log_p_t(t, [3.0, 30.0], one_sided=False)).all()


@pytest.mark.parametrize(
    "result",
    [
        weigh.log_lr_t([2.0, np.nan, 2.0, 2.0, 2.0, np.inf], [30, 30, 0, -1, np.nan, 30], 2.0, one_sided=False),
        weigh.log_lr_chi2([2.0, -1.0, 2.0, 2.0, 2.0, np.inf], [3, 3, 0, 3, np.nan, 3], [1, 1, 1, -1, 1, 1]),
        weigh.log_lr_f(
            [2.0, -1.0, 2.0, 2.0, 2.0, 2.0], [3, 3, 0, 3, 3, 3], [9, 9, 9, -1, np.nan, 9], [1, 1, 1, 1, 1, -1]
        ),
        weigh.t_from_log_p([-2.0, 0.1, np.nan, -np.inf, -2.0, -2.0], [3, 3, 3, 3, 0, np.nan], one_sided=True),
        weigh.false_positive_risk([1.0, np.nan, 1, 1, 1, 1], [0.5, 0.5, -0.1, 1.1, np.nan, np.inf]),
        weigh.t_from_r([0.5, 1.0, -1.0, 1.5, np.nan, 0.5], [9, 9, 9, 9, 9, -1]),
        weigh.t_quantile_two_sided([0.95, 1.0, 1.1, np.nan, 0.95, 0.95], [9, 9, 9, 9, 0, np.nan]),
        weigh.log_lr_bound([-2.0, 0.1, np.nan, -np.inf, np.inf, 2.0]),
    ],
)
def test_only_the_rows_outside_the_domain_are_nan(result: NDArray[np.float64]) -> None:
    np.testing.assert_array_equal(np.isnan(result), [False, True, True, True, True, True])


def test_a_row_means_the_same_in_any_company_and_order() -> None:
    """Bit for bit, over more rows than one block holds, with some rows outside the domain."""
    n = 140_000
    kind, value, df1, df2, ncp, side = draw_table(5, n)
    value[::97] = np.nan
    order = np.random.default_rng(6).permutation(n)
    alone = slice(70_000, 70_003)
    whole = weigh.at_noncentrality(kind, value, df1, df2, ncp, side)
    shuffled = weigh.at_noncentrality(*(column[order] for column in (kind, value, df1, df2, ncp, side)))
    few = weigh.at_noncentrality(*(column[alone] for column in (kind, value, df1, df2, ncp, side)))
    np.testing.assert_array_equal(shuffled, whole[order])
    np.testing.assert_array_equal(few, whole[alone])
    assert np.isnan(whole).sum() == len(value[::97])


def test_mixed_columns_are_the_functions_of_each_kind() -> None:
    kind, value, df1, df2, ncp, side = draw_table(7, 400)
    log_p = -np.linspace(0.1, 60, 400)
    expected: dict[Statistic, tuple[Callable[[NDArray[np.bool_]], NDArray[np.float64]], ...]] = {
        Statistic.T: (
            lambda r: weigh.observed_t(value[r], df1[r], one_sided=side[r]),
            lambda r: weigh.log_lr_t(value[r], df1[r], ncp[r], one_sided=side[r]),
            lambda r: weigh.log_p_t(value[r], df1[r], one_sided=side[r]),
            lambda r: weigh.t_from_log_p(log_p[r], df1[r], one_sided=side[r]),
        ),
        Statistic.Z: (
            lambda r: weigh.observed_z(value[r], one_sided=side[r]),
            lambda r: weigh.log_lr_z(value[r], ncp[r], one_sided=side[r]),
            lambda r: weigh.log_p_z(value[r], one_sided=side[r]),
            lambda r: weigh.z_from_log_p(log_p[r], one_sided=side[r]),
        ),
        Statistic.CHI2: (
            lambda r: weigh.observed_chi2(value[r], df1[r]),
            lambda r: weigh.log_lr_chi2(value[r], df1[r], ncp[r]),
            lambda r: weigh.log_p_chi2(value[r], df1[r]),
            lambda r: weigh.chi2_from_log_p(log_p[r], df1[r]),
        ),
        Statistic.F: (
            lambda r: weigh.observed_f(value[r], df1[r], df2[r]),
            lambda r: weigh.log_lr_f(value[r], df1[r], df2[r], ncp[r]),
            lambda r: weigh.log_p_f(value[r], df1[r], df2[r]),
            lambda r: weigh.f_from_log_p(log_p[r], df1[r], df2[r]),
        ),
    }
    mixed = (
        weigh.observed_effect(kind, value, df1, df2, side),
        weigh.at_noncentrality(kind, value, df1, df2, ncp, side),
        weigh.log_p(kind, value, df1, df2, side),
        weigh.value_from_log_p(kind, log_p, df1, df2, side),
    )
    for statistic, functions in expected.items():
        rows = kind == statistic
        for result, function in zip(mixed, functions, strict=True):
            np.testing.assert_array_equal(result[rows], function(rows))


def test_a_missing_second_degree_of_freedom_matters_to_f_alone() -> None:
    result = weigh.observed_effect([0, 1, 2, 3, 9, np.nan], 2.0, 5.0, np.nan, one_sided=False)
    np.testing.assert_array_equal(np.isnan(result), [False, False, False, True, True, True])


def test_shapes_broadcast_and_a_scalar_gives_one_number() -> None:
    assert weigh.log_lr_t(2.0, 30, 2.0, one_sided=False).shape == ()
    assert weigh.log_lr_t([[2.0], [3.0]], [10, 20, 30], 2.0, one_sided=[True, False, True]).shape == (2, 3)
    assert weigh.observed_effect(Statistic.Z, 2.0, np.nan, np.nan, one_sided=False).shape == ()
    assert weigh.log_lr_z([], 2.0, one_sided=False).shape == (0,)


def test_inputs_are_left_as_they_were() -> None:
    kind, value, df1, df2, ncp, side = draw_table(8, 300)
    before = [column.copy() for column in (kind, value, df1, df2, ncp)]
    weigh.at_noncentrality(kind, value, df1, df2, ncp, side)
    weigh.value_from_log_p(kind, -np.abs(value), df1, df2, side)
    for column, copy in zip((kind, value, df1, df2, ncp), before, strict=True):
        np.testing.assert_array_equal(column, copy)


def test_the_package_loads_no_statistics_library() -> None:
    program = (
        "import sys, gatecheck.weigh; heavy = {'scipy.stats', 'scipy.optimize', 'mpmath'};"
        "print(sorted(heavy & set(sys.modules)))"
    )
    result = subprocess.run([sys.executable, "-c", program], capture_output=True, text=True, check=True)
    assert result.stdout.strip() == "[]"
