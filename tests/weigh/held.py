"""What tests of published and of computed values share: how a figure is held against the one expected."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from numpy.typing import NDArray

Array = NDArray[np.float64]
#: Bounds and constants are recomputed to twelve digits.
COMPUTED = 2e-11


def assert_both_tails(
    tails: tuple[Callable[..., Array], Callable[..., Array]],
    arguments: tuple[float, ...],
    lower: float,
    upper: float,
    rel: float,
) -> None:
    """Assert what the functions of the lower and the upper tail give, each to so many of its own digits."""
    below, above = (float(tail(*arguments)) for tail in tails)
    assert below == pytest.approx(lower, rel=rel)
    assert above == pytest.approx(upper, rel=rel)


def assert_computed(values: Array | list[float] | float, computed: Array | list[float] | float) -> None:
    """Assert the figures that were recomputed from the published formula."""
    np.testing.assert_allclose(values, computed, rtol=0, atol=COMPUTED)


def assert_printed(values: Array | list[float] | float, printed: list[float] | float, digits: int) -> None:
    """Assert that rounding to so many decimals gives the printed figure, give or take a rounding edge."""
    np.testing.assert_allclose(values, printed, rtol=0, atol=0.5001 * 10.0**-digits)
