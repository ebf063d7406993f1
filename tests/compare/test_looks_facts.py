"""What looks without a boundary cost."""

from __future__ import annotations

import math

import pytest

from gatecheck.compare.looks import real_error


@pytest.mark.parametrize(
    ("looks", "error"), [(1, 0.05), (2, 0.0831), (3, 0.107), (4, 0.126), (5, 0.142), (10, 0.193)]
)
def test_the_type_i_error_of_looks_at_one_level(looks: int, error: float) -> None:
    """The values of `tests/published/test_published_looks.py`, from Armitage and others (1969), rounded."""
    assert real_error(looks, 0.05) == pytest.approx(error, abs=6e-4)


def test_beyond_all_plans_nothing_is_computed() -> None:
    assert math.isnan(real_error(201, 0.05))
    assert 0.3 < real_error(200, 0.05) < 0.5
