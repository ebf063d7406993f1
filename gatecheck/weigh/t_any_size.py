"""The uniform expansion of ``log E exp(mu Y)``, ``Y`` chi-distributed, for ``mu`` of any size.

The expectation is a parabolic cylinder function. The leading part of its logarithm holds all that is large, so
that no density is formed and nothing under- or overflows.

References
----------
NIST Digital Library of Mathematical Functions, 12.10.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from gatecheck.weigh.arrays import polynomial
from gatecheck.weigh.polynomials import parabolic_cylinder_terms

if TYPE_CHECKING:
    from collections.abc import Sequence

    from gatecheck.weigh.arrays import FloatArray

# Squares of larger numbers overflow; beyond it the larger part alone decides.
SAFE_TO_SQUARE = 1e150


def chi_exponent(mu: FloatArray, df: FloatArray, order: int) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Split ``log E exp(mu Y)`` and its mirror, ``mu >= 0``, ``Y`` chi-distributed on ``df + 1``.

    Work goes on in place: arrays made anew cost as much as the arithmetic.

    Returns
    -------
    growth, exponent, even : ndarray
        ``log E exp(mu Y) = growth + even + mu^2/2`` and ``log E exp(-mu Y) = -growth + even``; ``exponent``
        is half the difference of the two, computed without it.
    """
    a = df + 0.5
    r = np.sqrt(a)
    r += r
    np.divide(mu, r, out=r)
    c = np.minimum(r, SAFE_TO_SQUARE)
    c *= c
    c += 1
    np.sqrt(c, out=c)
    np.maximum(c, r, out=c)
    odd, even = _corrections(r / c, a, order)
    # What c exceeds 1 by: r + excess is what the angle, asinh r, is log1p of.
    excess = c + 1
    np.divide(r, excess, out=excess)
    excess *= r
    angle = r + excess
    np.log1p(angle, out=angle)
    np.log1p(excess, out=excess)
    excess *= 0.5
    even -= excess
    growth = np.add(r, c, out=excess)
    np.divide(r, growth, out=growth)
    growth += angle
    growth *= a
    growth += odd
    c *= r
    c += angle
    c *= a
    c += odd
    return growth, c, even


def _corrections(w: FloatArray, a: FloatArray, order: int) -> tuple[FloatArray, FloatArray]:
    """Sums of the odd and of the even terms ``P_k(w) / a^k``; ``w`` is overwritten."""
    terms = parabolic_cylinder_terms(order)
    y = w * w
    inverse = 1 / a
    step = inverse * inverse
    odd, even = (
        _horner([terms[k - 1] for k in range(first, 0, -2)], y, step)
        for first in (order - 1 + order % 2, order - order % 2)
    )
    w *= inverse
    odd *= w
    y *= step
    even *= y
    return odd, even


def _horner(terms: list[Sequence[float]], y: FloatArray, step: FloatArray) -> FloatArray:
    """Sum of polynomials in ``y`` times falling powers of ``step``."""
    total = polynomial(terms[0], y)
    term = np.empty_like(total)
    for coefficients in terms[1:]:
        total *= step
        total += polynomial(coefficients, y, out=term)
    return total
