"""Bayes factor of two proportions: by hand, by symmetry, by total probability, and at the edges."""

from __future__ import annotations

from fractions import Fraction
from math import comb, factorial, log

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import special

from gatecheck.weigh.proportions import log_bf_proportions

counts = st.integers(0, 60)


def by_fractions(k: int, n: int, k2: int, n2: int) -> Fraction:
    """Whole-number beta functions, exactly."""

    def beta(x: int, y: int) -> Fraction:
        return Fraction(factorial(x - 1) * factorial(y - 1), factorial(x + y - 1))

    apart = beta(k + 1, n - k + 1) * beta(k2 + 1, n2 - k2 + 1)
    return apart / beta(k + k2 + 1, n + n2 - k - k2 + 1)


@given(k=counts, failures=counts, k2=counts, failures2=counts)
def test_uniform_priors_against_exact_fractions(k: int, failures: int, k2: int, failures2: int) -> None:
    exact = by_fractions(k, k + failures, k2, k2 + failures2)
    expected = log(exact.numerator) - log(exact.denominator)
    result = float(log_bf_proportions(k, k + failures, k2, k2 + failures2))
    assert result == pytest.approx(expected, rel=1e-12, abs=1e-12)


def test_by_hand() -> None:
    """One success of one against none of one: (1/2)(1/2) over B(2, 2) = 1/6, which is 3/2."""
    assert float(np.exp(log_bf_proportions(1, 1, 0, 1))) == pytest.approx(1.5, rel=1e-14)
    assert float(log_bf_proportions(0, 0, 3, 7)) == pytest.approx(0.0, abs=1e-14)


@settings(max_examples=30)
@given(n=st.integers(1, 12), n2=st.integers(1, 12), a=st.floats(0.1, 20), b=st.floats(0.1, 20))
def test_under_no_effect_the_mean_factor_is_one(n: int, n2: int, a: float, b: float) -> None:
    """The sum over all results of their probability under no effect times the factor is that under the other."""
    k, k2 = (grid.ravel().astype(float) for grid in np.mgrid[: n + 1, : n2 + 1])
    ways = np.array([comb(n, int(i)) * comb(n2, int(j)) for i, j in zip(k, k2, strict=True)], dtype=float)
    no_effect = ways * np.exp(special.betaln(a + k + k2, b + n + n2 - k - k2) - special.betaln(a, b))
    factor = np.exp(log_bf_proportions(k, n, k2, n2, prior_successes=a, prior_failures=b))
    assert float(no_effect @ factor) == pytest.approx(1.0, rel=1e-10)


@given(k=counts, failures=counts, k2=counts, failures2=counts, a=st.floats(0.2, 30), b=st.floats(0.2, 30))
def test_neither_the_order_of_groups_nor_the_name_of_success_matters(
    k: int, failures: int, k2: int, failures2: int, a: float, b: float
) -> None:
    n, n2 = k + failures, k2 + failures2
    first = float(log_bf_proportions(k, n, k2, n2, prior_successes=a, prior_failures=b))
    swapped = float(log_bf_proportions(k2, n2, k, n, prior_successes=a, prior_failures=b))
    renamed = float(log_bf_proportions(failures, n, failures2, n2, prior_successes=b, prior_failures=a))
    assert swapped == pytest.approx(first, abs=1e-11)
    assert renamed == pytest.approx(first, abs=1e-11)


def test_counts_beyond_what_logs_of_beta_functions_can_tell_apart() -> None:
    """Equal shares p of n in each of two groups: the factor tends to sqrt(4 pi p (1-p) / n), by Laplace."""
    n = 1e12
    share = 0.3
    result = float(log_bf_proportions(share * n, n, share * n, n))
    assert result == pytest.approx(np.log(4 * np.pi * share * (1 - share) / n) / 2, abs=1e-10)


@pytest.mark.parametrize(
    "row",
    [
        (-1, 5, 2, 5, 1, 1),
        (6, 5, 2, 5, 1, 1),
        (2, 5, -1, 5, 1, 1),
        (2, 5, 6, 5, 1, 1),
        (np.nan, 5, 2, 5, 1, 1),
        (2, np.inf, 2, 5, 1, 1),
        (2, 5, 2, np.inf, 1, 1),
        (2, 5, 2, 5, 0, 1),
        (2, 5, 2, 5, 1, 0),
        (2, 5, 2, 5, np.inf, 1),
        (2, 5, 2, 5, 1, np.nan),
    ],
)
def test_outside_the_domain(row: tuple[float, ...]) -> None:
    k, n, k2, n2, a, b = np.array([row, (2, 5, 3, 5, 1, 1)]).T
    both = log_bf_proportions(k, n, k2, n2, prior_successes=a, prior_failures=b)
    assert np.isnan(both[0])
    assert np.isfinite(both[1])
