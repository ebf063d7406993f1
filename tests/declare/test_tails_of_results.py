"""The side that a p-value measures, recovered from the statistic, its df and p."""

from __future__ import annotations

from typing import Any

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st
from scipy import stats

from gatecheck.declaring import DeclareError
from gatecheck.declaring.tails import t_quantile, with_sides

SIDES: dict[str, dict[str, Any]] = {
    "two-sided": {"sides": 2},
    "greater": {"sides": 1, "tail": "greater"},
    "less": {"sides": 1, "tail": "less"},
}
# Far enough from 0, where both one-sided p are 0.5, and from 1 for a correlation.
AWAY = st.floats(0.01, 0.99) | st.floats(-0.99, -0.01)


def p_of(distribution: Any, x: float, side: str) -> float:
    both = 2 * distribution.sf(abs(x))
    p = float({"two-sided": both, "greater": distribution.sf(x), "less": distribution.cdf(x)}[side])
    assume(abs(p - 2 / 3) > 1e-5)
    return p


@given(t=AWAY.map(lambda x: 20 * x), df=st.integers(1, 300), side=st.sampled_from(sorted(SIDES)))
def test_sides_of_t(t: float, df: int, side: str) -> None:
    test = {"statistic": "t", "value": t, "df": df, "p": p_of(stats.t(df), t, side)}
    assert with_sides(test) == test | SIDES[side]


@given(z=AWAY.map(lambda x: 8 * x), side=st.sampled_from(sorted(SIDES)))
def test_sides_of_z(z: float, side: str) -> None:
    test = {"statistic": "z", "value": z, "p": p_of(stats.norm, z, side)}
    assert with_sides(test) == test | SIDES[side]


@given(r=AWAY, df=st.integers(1, 100), side=st.sampled_from(sorted(SIDES)))
def test_sides_of_r(r: float, df: int, side: str) -> None:
    t = r * (df / (1 - r * r)) ** 0.5
    test = {"statistic": "r", "value": r, "df": df, "p": p_of(stats.t(df), t, side)}
    assert with_sides(test) == test | SIDES[side]


@given(x=st.floats(0.01, 200), df=st.integers(1, 50), other=st.integers(2, 300))
def test_chi2_and_f_have_one_tail_and_no_sides(x: float, df: int, other: int) -> None:
    chi2 = {"statistic": "chi2", "value": x, "df": df, "p": float(stats.chi2.sf(x, df))}
    f = {"statistic": "F", "value": x, "df": [df, other], "p": float(stats.f.sf(x, df, other))}
    assert with_sides(chi2) == chi2
    assert with_sides(f) == f


def test_p_that_two_sides_share_tells_none() -> None:
    """Where the smaller tail is 1/3, both tails together are as large as the larger one."""
    test = {"statistic": "t", "value": -(3**-0.5), "df": 1, "p": 2 / 3}
    assert with_sides(test) == test


@pytest.mark.parametrize(
    ("test", "shown"),
    [
        ({"statistic": "t", "value": 2.0, "df": 10, "p": 0.05}, "t = 2.0, df = 10"),
        ({"statistic": "z", "value": 2.0, "p": 0.05}, "z = 2.0"),
        ({"statistic": "r", "value": 0.5, "df": 10, "p": 0.05}, "r = 0.5, df = 10"),
        ({"statistic": "chi2", "value": 2.0, "df": 1, "p": 0.05}, "chi2 = 2.0, df = 1"),
        ({"statistic": "F", "value": 2.0, "df": [1, 10], "p": 0.05}, "F = 2.0, df = [1, 10]"),
    ],
)
def test_p_of_no_tail_is_refused(test: dict[str, Any], shown: str) -> None:
    with pytest.raises(DeclareError) as caught:
        with_sides(test)
    assert str(caught.value) == (
        f"p = 0.05 belongs to no tail of {shown}: say how p was made, such as test={{'p_kind': 'permutation'}}, "
        "or correct the statistic or df that were given"
    )


def test_p_that_underflowed_becomes_a_bound() -> None:
    assert with_sides({"statistic": "z", "value": 60.0, "p": 0.0}) == {
        "statistic": "z",
        "value": 60.0,
        "p": "<1e-300",
    }
    assert with_sides({"statistic": "chi2", "value": 5000.0, "df": 1, "p": 0.0})["p"] == "<1e-300"


def test_p_that_underflowed_by_another_route() -> None:
    """One library still gives a tiny number where another gives 0."""
    tail = float(stats.norm.sf(37.5))
    assert 0 < tail < 1e-300
    assert with_sides({"statistic": "z", "value": 37.5, "p": 0.0})["p"] == "<1e-300"


def test_sides_that_were_given_stay() -> None:
    test = {"statistic": "z", "value": -2.0, "p": float(stats.norm.cdf(-2.0)), "sides": 2}
    assert with_sides(test) == test
    assert with_sides({"statistic": "z", "value": 60.0, "p": 0.0, "sides": 2})["p"] == "<1e-300"
    with pytest.raises(DeclareError, match=r"^p = 0\.9 belongs to no tail of z = 2\.0: "):
        with_sides({"statistic": "z", "value": 2.0, "p": 0.9, "sides": 2})


def test_p_of_0_that_did_not_underflow_is_refused() -> None:
    with pytest.raises(DeclareError, match=r"^p = 0\.0 belongs to no tail of z = 9\.0: "):
        with_sides({"statistic": "z", "value": 9.0, "p": 0.0})


@pytest.mark.parametrize(
    "test",
    [
        {"statistic": "z", "value": 2.0, "p": 0.9, "p_kind": "permutation"},
        {"statistic": "z", "value": 2.0, "p": "0.9"},
        {"statistic": "z", "value": "2.0", "p": 0.9},
        {"statistic": "t", "value": 2.0, "p": 0.9},
        {"statistic": "t", "value": 2.0, "df": "many", "p": 0.9},
        {"statistic": "r", "value": 1.0, "df": 3, "p": 0.0},
        {"named_statistic": {"symbol": "U", "value": 3}, "p": 0.9},
    ],
)
def test_what_cannot_be_compared_stays_as_it_is(test: dict[str, Any]) -> None:
    assert with_sides(test) == test


def test_quantile_of_t() -> None:
    """Student's t, 0.975, 10 df: 2.228 (the printed table of every textbook)."""
    assert t_quantile(10, 0.975) == pytest.approx(2.228, abs=5e-4)
