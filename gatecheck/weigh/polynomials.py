"""Exact polynomials of two uniform asymptotic expansions, computed in integers at first use.

Both come from putting ``exp(integral of g)`` into a differential equation and ordering by a large parameter.
All denominators before the last integration are powers of two, so whole numbers suffice and each coefficient
is rounded once.
"""

from __future__ import annotations

from fractions import Fraction
from functools import cache

# A polynomial is the list of its integer coefficients, lowest power first.
Integers = list[int]
Coefficients = tuple[float, ...]


@cache
def parabolic_cylinder_terms(order: int) -> tuple[Coefficients, ...]:
    """Coefficients of ``P_1 .. P_order``, the terms of the logarithm of ``u'' = (x^2/4 + A) u`` in ``1/A``.

    With ``w = x / sqrt(x^2 + 4A)``::

        g_0 = -w/2,  g_{k+1} = -(1-w^2)/4 [ (1-w^2) g_k' - w g_k + sum_i g_i g_{k-i} ]
        P_k(w) = integral from 0 to w of g_k(s) / (1-s^2)

    Returns
    -------
    tuple of tuples
        For odd ``k`` the coefficients in ``w^2`` of ``P_k / w``, for even ``k`` those of ``P_k / w^2``.
        ``P_1 = w/8 - 5 w^3/48`` gives ``(1/8, -5/48)``.

    References
    ----------
    NIST Digital Library of Mathematical Functions, section 12.10: the expansion of the function itself.
    """
    # scaled[k] = 2^(3k+1) g_k has integer coefficients.
    scaled: list[Integers] = [[0, -1]]
    terms = []
    for k in range(1, order + 1):
        last = scaled[-1]
        bracket = _sum(
            _twice(_times_one_minus_square(_derivative(last))),
            _negated(_twice([0, *last])),
            _convolution(scaled),
        )
        scaled.append(_negated(_times_one_minus_square(bracket)))
        power = 2 ** (3 * k + 1)
        integral = [0.0] + [-c / (power * (j + 1)) for j, c in enumerate(bracket)]
        terms.append(tuple(integral[2 - k % 2 :: 2]))
    return tuple(terms)


@cache
def debye_terms(order: int) -> tuple[Coefficients, ...]:
    """Coefficients of ``Q_1 .. Q_order``, Debye's expansion of ``log I_v`` in ``1/v``, zero at ``z = 0``.

    With ``p = 1 / sqrt(1 + (z/v)^2)``::

        g_0 = -(1-p^2)/2,  g_{k+1} = -(p/2) [ -p (1-p^2) g_k' + sum_i g_i g_{k-i} ]
        Q_k(p) = -integral from 1 to p of g_k(s) / (s (1-s^2))

    Returns
    -------
    tuple of tuples
        For each ``k`` the constant of ``Q_k``, then the coefficients in ``p^2`` of the rest over ``p^k``.
        ``Q_1 = 1/12 + (3p - 5p^3)/24`` gives ``(1/12, 1/8, -5/24)``.

    References
    ----------
    NIST Digital Library of Mathematical Functions, section 10.41(ii): the expansion of the function itself.
    """
    # scaled[k] = 2^(2k+1) g_k has integer coefficients.
    scaled: list[Integers] = [[-1, 0, 1]]
    terms = []
    for k in range(1, order + 1):
        moved = _times_one_minus_square([0, *_derivative(scaled[-1])])
        bracket = _sum(_negated(_twice(moved)), _convolution(scaled))
        scaled.append(_negated([0, *bracket]))
        quotient = _over_one_minus_square(_negated(bracket))
        power = 2 ** (2 * k + 1)
        integral = [0.0] + [-c / (power * (j + 1)) for j, c in enumerate(quotient)]
        terms.append((float(_integral_to_one(quotient) / power), *integral[k::2]))
    return tuple(terms)


def _integral_to_one(p: Integers) -> Fraction:
    """Exact, for the terms alternate and nearly cancel."""
    return sum((Fraction(c, j + 1) for j, c in enumerate(p)), Fraction())


def _derivative(p: Integers) -> Integers:
    return [j * c for j, c in enumerate(p)][1:]


def _negated(p: Integers) -> Integers:
    return [-c for c in p]


def _twice(p: Integers) -> Integers:
    return [2 * c for c in p]


def _sum(*summands: Integers) -> Integers:
    total = [0] * max(len(p) for p in summands)
    for p in summands:
        for j, c in enumerate(p):
            total[j] += c
    return total


def _times_one_minus_square(p: Integers) -> Integers:
    return _sum(p, [0, 0, *_negated(p)])


def _over_one_minus_square(p: Integers) -> Integers:
    quotient = list(p[:-2])
    for j in range(2, len(quotient)):
        quotient[j] += quotient[j - 2]
    return quotient


def _convolution(polynomials: list[Integers]) -> Integers:
    """Sum over i of the product of the i-th from the front and the i-th from the back."""
    products = [_product(a, b) for a, b in zip(polynomials, reversed(polynomials), strict=True)]
    return _sum(*products)


def _product(a: Integers, b: Integers) -> Integers:
    product = [0] * (len(a) + len(b) - 1)
    for i, left in enumerate(a):
        if left:
            for j, right in enumerate(b):
                product[i + j] += left * right
    return product
