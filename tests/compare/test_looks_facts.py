"""What looks without a boundary cost."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy import special, stats

from gatecheck.compare.looks import equal_steps, real_error


@pytest.mark.parametrize(
    ("looks", "error"), [(1, 0.05), (2, 0.0831), (3, 0.107), (4, 0.126), (5, 0.142), (10, 0.193)]
)
def test_the_type_i_error_of_looks_at_one_level(looks: int, error: float) -> None:
    """The values of `tests/published/test_published_looks.py`, from Armitage and others (1969), rounded."""
    assert real_error(equal_steps(looks), 0.05) == pytest.approx(error, abs=6e-4)


@pytest.mark.parametrize("sides", [1, 2])
@pytest.mark.parametrize("alpha", [0.05, 0.025])
@pytest.mark.parametrize("units", [(20, 40, 60, 80, 100), (20, 22, 24, 26, 100), (40, 60), (1, 50, 51)])
def test_the_error_by_sides_and_units_against_the_multivariate_normal(
    units: tuple[float, ...], alpha: float, sides: int
) -> None:
    """The source is scipy.stats.multivariate_normal, which integrates by random numbers, good to 1e-5."""
    n = np.array(units, np.float64)
    z = np.full(n.size, -special.ndtri(alpha / sides))
    covariance = np.sqrt(np.minimum.outer(n, n) / np.maximum.outer(n, n))
    normal = stats.multivariate_normal(cov=covariance, seed=3)
    crossed = 1 - normal.cdf(z, lower_limit=-z if sides == 2 else np.full(n.size, -np.inf))

    assert real_error(units, alpha, sides) == pytest.approx(float(crossed), abs=2e-5)


def test_looks_that_stand_too_close_are_one() -> None:
    """Of 1000, 1001 and 5000 units the second is kept; the error of all three is more than what is computed."""
    assert real_error((1000.0, 1001.0, 5000.0), 0.05) == real_error((1001.0, 5000.0), 0.05)


def test_beyond_all_plans_nothing_is_computed() -> None:
    assert math.isnan(real_error(equal_steps(201), 0.05))
    assert 0.3 < real_error(equal_steps(200), 0.05) < 0.5
