"""The sample size at which the observed effect would stand: least, and whole."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from gatecheck import weigh
from gatecheck.weigh import Statistic

if TYPE_CHECKING:
    from numpy.typing import NDArray

TARGET = float(weigh.log_lr_needed(0.5, 0.05))


def evidence(  # one argument a column
    n: NDArray[np.float64] | float,
    kind: int,
    value: float,
    df1: float,
    df2: float,
    n_total: float,
    groups: float,
    one_sided: bool,
) -> NDArray[np.float64]:
    """Log likelihood ratio with ``n`` per group, written out kind by kind."""
    n = np.asarray(n, dtype=np.float64)
    k = n * groups / n_total
    new_units = n * groups - n_total
    if kind == Statistic.T:
        return weigh.observed_t(value * np.sqrt(k), df1 + new_units, one_sided=one_sided)
    if kind == Statistic.Z:
        return weigh.observed_z(value * np.sqrt(k), one_sided=one_sided)
    if kind == Statistic.CHI2:
        return weigh.observed_chi2(value * k, df1)
    return weigh.observed_f(value * k, df1, df2 + new_units)


def test_two_groups_of_eighteen() -> None:
    """With t = 2.21 on 34 degrees of freedom: 29 per group for a risk of 5 % at even odds."""
    n = float(weigh.n_to_stand(Statistic.T, 2.21, 34, np.nan, 36, 2, TARGET, one_sided=False))
    assert n == 29.0
    assert float(evidence(29, 0, 2.21, 34, 0, 36, 2, one_sided=False)) >= TARGET
    assert float(evidence(28, 0, 2.21, 34, 0, 36, 2, one_sided=False)) < TARGET


@settings(max_examples=60)
@given(
    kind=st.sampled_from(list(Statistic)),
    value=st.floats(0.3, 12),
    per_group=st.integers(4, 60),
    groups=st.integers(1, 5),
    target=st.floats(0.05, 12),
    one_sided=st.booleans(),
)
def test_the_number_serves_and_no_smaller_one_does(  # one argument a column
    kind: Statistic, value: float, per_group: int, groups: int, target: float, one_sided: bool
) -> None:
    total = per_group * groups
    df1 = total - groups if kind == Statistic.T else 3
    df2 = total - groups
    n = float(weigh.n_to_stand(kind, value, df1, df2, total, groups, target, one_sided=one_sided))
    assert n == np.floor(n)
    fewest = 1 if kind in {Statistic.Z, Statistic.CHI2} else int(np.ceil(1 / groups)) + 1
    arguments = (kind, value, df1, df2, total, groups, one_sided)
    assert float(evidence(n, *arguments)) >= target
    smaller = np.arange(max(fewest, n - 500), n)
    assert (evidence(smaller, *arguments) < target).all()


def test_a_stronger_demand_never_asks_for_fewer() -> None:
    n = weigh.n_to_stand(Statistic.F, 3.1, 3, 56, 60, 4, np.linspace(0.1, 60, 300), one_sided=False)
    assert (np.diff(n) >= 0).all()
    assert n[-1] > n[0]


def test_rows_of_all_kinds_at_once() -> None:
    n = weigh.n_to_stand(
        [0, 1, 2, 3],
        [2.21, 2.0, 4.0, 3.0],
        [34, 0, 2, 3],
        [0, 0, 0, 40],
        36,
        [2, 2, 2, 4],
        TARGET,
        one_sided=[0, 1, 0, 0],
    )
    np.testing.assert_array_equal(n, [29, 27, 46, 14])


def test_what_no_number_can_mend_is_nan() -> None:
    n = weigh.n_to_stand(
        [0, 0, 0, 1, 2, 0, 0, 0, 0, 7],
        [-2.0, 0.0, 1e-6, np.nan, 4.0, 2.0, 2.0, 2.0, 2.0, 2.0],
        [34, 34, 34, 0, 2, 34, 34, 34, np.nan, 34],
        np.nan,
        [36, 36, 36, 36, 36, 0, np.nan, -36, 36, 36],
        [2, 2, 2, 2, 0, 2, 2, -2, 2, 2],
        TARGET,
        one_sided=[True, *[False] * 9],
    )
    assert np.isnan(n).all()


def test_no_evidence_needed_is_met_by_the_smallest_study() -> None:
    assert float(weigh.n_to_stand(Statistic.Z, 1.0, 0, 0, 40, 2, -5.0, one_sided=False)) == 1.0
    assert float(weigh.n_to_stand(Statistic.T, 1.0, 38, 0, 40, 2, -5.0, one_sided=False)) == 2.0
