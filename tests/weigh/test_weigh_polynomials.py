"""The expansions' polynomials against known coefficients and their differential equations."""

from __future__ import annotations

from fractions import Fraction

import mpmath as mp
import numpy as np
import pytest

from gatecheck.weigh.arrays import polynomial
from gatecheck.weigh.polynomials import debye_terms, parabolic_cylinder_terms


def test_first_terms_of_the_parabolic_cylinder_expansion() -> None:
    """By hand from the recursion; divided by w (odd) or w^2 (even), in powers of w^2."""
    first, second, third = parabolic_cylinder_terms(3)
    assert first == (1 / 8, -5 / 48)
    assert second == (9 / 64, -3 / 16, 5 / 64)
    assert third == (-19 / 256, 259 / 768, -2949 / 5120, 221 / 512, -1105 / 9216)


def test_first_terms_of_debyes_expansion() -> None:
    """The logarithm of 1 + u_1/v + u_2/v^2, u_1 = (3p - 5p^3)/24, u_2 = (81p^2 - 462p^4 + 385p^6)/1152.

    NIST Digital Library of Mathematical Functions, 10.41.10 (from memory).
    """
    first, second = debye_terms(2)
    assert first == pytest.approx((1 / 12, 3 / 24, -5 / 24), rel=1e-15)
    u_1 = {1: Fraction(3, 24), 3: Fraction(-5, 24)}
    u_2 = {2: Fraction(81, 1152), 4: Fraction(-462, 1152), 6: Fraction(385, 1152)}
    for i, a in u_1.items():
        for j, b in u_1.items():
            u_2[i + j] -= a * b / 2
    assert second == pytest.approx((0.0, *(float(u_2[power]) for power in (2, 4, 6))), rel=1e-15, abs=1e-18)


@pytest.mark.parametrize("order", [4, 10, 16])
def test_parabolic_cylinder_terms_sum_to_the_function(order: int) -> None:
    """At A = 200 against mpmath's U(A, -x) / U(A, 0), with the error that the first term left out predicts."""
    a, x = 200.0, 30.0
    r = x / (2 * np.sqrt(a))
    c = np.hypot(1, r)
    w = r / c
    terms = parabolic_cylinder_terms(order)
    total = sum(
        (w if k % 2 else w * w) * float(polynomial(term, np.array([w * w]))[0]) / a**k
        for k, term in enumerate(terms, start=1)
    )
    with mp.workdps(30):
        exact = mp.log(mp.pcfu(a, -x) / mp.pcfu(a, 0))
        leading = (
            mp.mpf(a) * (mp.asinh(mp.mpf(x) / (2 * mp.sqrt(a))) + mp.mpf(r) * c) - mp.log1p(mp.mpf(r) ** 2) / 4
        )
        assert abs(float(exact - leading) - total) < max(2e-13, 10 * a ** -(order + 1))


def test_debye_terms_vanish_at_the_start() -> None:
    """Each Q_k is zero at p = 1, where the Bessel function is its own leading term."""
    for k, (start, *rest) in enumerate(debye_terms(8), start=1):
        at_one = start + sum(rest)
        assert abs(at_one) <= 1e-15 * max(map(abs, rest)) * len(rest), k


def test_polynomial_by_horner() -> None:
    np.testing.assert_allclose(polynomial((1.0, -2.0, 3.0), np.array([0.0, 2.0, -1.0])), [1.0, 9.0, 6.0])
    np.testing.assert_array_equal(polynomial((4.0,), np.array([7.0])), [4.0])
