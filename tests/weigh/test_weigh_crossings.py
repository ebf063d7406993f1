"""Where rising functions reach zero."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from gatecheck.weigh.crossings import least_reached

positive = st.floats(1e-6, 1e9)


@given(st.lists(positive, min_size=1, max_size=8), st.sampled_from([0.5, 1.0, 2.0, 3.0]))
def test_powers_reach_zero_at_their_roots_and_not_before(roots: list[float], power: float) -> None:
    root = np.array(roots)

    found = least_reached(lambda x: (x / root) ** power - 1, np.full_like(root, 1e12))

    np.testing.assert_allclose(found, root, rtol=1e-11)
    assert np.all((found / root) ** power - 1 >= 0)


@given(positive)
def test_a_step_is_found_by_halving(edge: float) -> None:
    found = least_reached(lambda x: np.where(x >= edge, 1.0, -1e-9), np.array([1e12]))

    assert edge <= float(found[0]) <= edge * (1 + 1e-11)


def test_each_row_is_its_own() -> None:
    """One serves from the start, one never does, one is not a number, one is reached at the very end."""
    shift = np.array([1.0, -1e9, np.nan, -100.0])

    found = least_reached(lambda x: x + shift, np.array([50.0, 50.0, 50.0, 100.0]))

    assert found.tolist() == pytest.approx([0.0, np.inf, np.inf, 100.0])


def test_what_is_minus_infinite_at_zero_is_found() -> None:
    found = least_reached(np.log, np.array([1e6]))

    assert float(found[0]) == pytest.approx(1.0, rel=1e-11)


def test_no_rows_have_no_crossings() -> None:
    assert least_reached(lambda x: x - 1, np.empty(0)).size == 0
