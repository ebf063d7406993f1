"""Student's t of ordinary size: the expansion for many degrees of freedom in the fewest passes over memory.

With ``A = df + 1/2`` and ``w = mu / sqrt(mu^2 + 4A)`` the even and the odd part of ``log E exp(mu Y)``, ``Y``
chi-distributed on ``df + 1``, are ``A w^2/(1-w^2) + log(1-w^2)/4`` and ``A (artanh w + w/(1-w^2))``, each with the
terms of its own parity in ``1/A``. Where neither the statistic nor the non-centrality exceeds eight ``w`` is so far
below 1 that nothing cancels, and that the terms are short polynomials in ``w^2``: the exact ones, less what
Lanczos's economisation shows to be beyond the last digit of a double.

References
----------
NIST Digital Library of Mathematical Functions, 12.10 (the expansion).
Lanczos, C. (1956). Applied Analysis, chapter VII (economisation of power series; from memory).
"""

from __future__ import annotations

from functools import cache
from typing import TYPE_CHECKING, Any

import numpy as np

from gatecheck.weigh.polynomials import parabolic_cylinder_terms

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from gatecheck.weigh.arrays import FloatArray
    from gatecheck.weigh.polynomials import Coefficients

    # Of double or of single precision.
    Floats = NDArray[np.floating[Any]]
    Terms = tuple[tuple[Floats, ...], ...]

# A larger statistic or non-centrality is left to the formulas that hold for any.
LARGEST = 8.0
# The product of two such numbers of degrees of freedom is still a number.
MOST_DF = 1e100
# The sums are written for polynomials, not for constants.
FEWEST = 2
# So many arrays hold what is not yet part of the result, and so many more are the caller's.
ARRAYS = 11
CALLERS = 2
# Columns that begin at a multiple of so many numbers, 64 bytes, are read and written a seventh faster.
LANE = 8
# What a shortened polynomial may miss, relative to the part that leads.
TOLERANCE = 5e-16
# What single precision misses of a number.
SINGLE = 2.0**-24


def scratch_for(rows: int) -> FloatArray:
    """Return what :func:`halves` may overwrite for so many rows, and the last two rows of its caller."""
    arrays, width = ARRAYS + CALLERS, -(-rows // LANE) * LANE
    room = np.empty(arrays * width + LANE)
    first = -(room.__array_interface__["data"][0] // room.itemsize) % LANE
    return room[first : first + arrays * width].reshape(arrays, width)


def halves(
    half_product: FloatArray,
    square: FloatArray,
    df: FloatArray,
    order: tuple[float, int],
    scratch: FloatArray,
) -> tuple[FloatArray, FloatArray]:
    """Split ``log E exp(mu Y)``, ``mu = ncp t / sqrt(t^2 + df)``, ``Y`` chi-distributed on ``df + 1``.

    Work goes on in place: arrays made anew cost as much as the arithmetic.

    Parameters
    ----------
    half_product : ndarray
        ``|ncp t| / 2``, at most ``LARGEST^2 / 2``.
    square : ndarray
        ``t^2``, at most ``LARGEST^2``.
    df : ndarray
        Degrees of freedom, up to ``MOST_DF``. Rows out of bounds come out wrong, and spoil no other.
    order : float, int
        From so many degrees of freedom on so many terms are enough.
    scratch : ndarray
        Of :func:`scratch_for`; the results lie in it.

    Returns
    -------
    even, odd : ndarray
        ``log E exp(mu Y) = even + odd`` and ``log E exp(-mu Y) = even - odd``.
    """
    a, q, share, root, w, *others = scratch[:ARRAYS, : df.size]
    np.add(df, 0.5, out=a)
    np.add(square, df, out=q)
    # Both parts lead with it: the odd one times root, the even one times half_product, which is mu^2 / 4.
    np.divide(half_product, q, out=share)
    q *= a
    np.multiply(half_product, half_product, out=root)
    root += q
    np.sqrt(root, out=root)
    np.divide(half_product, root, out=w)
    y = np.multiply(w, w, out=q)
    even, odd = _corrections(y, a, order, others)
    odd *= w
    odd += np.arctanh(w, out=w)
    odd *= a
    root *= share
    odd += root
    share *= half_product
    even += share
    np.negative(y, out=y)
    np.log1p(y, out=y)
    y *= 0.25
    even += y
    return even, odd


def _corrections(
    y: FloatArray, a: FloatArray, order: tuple[float, int], scratch: list[FloatArray]
) -> tuple[FloatArray, FloatArray]:
    """Sums of the terms of even order, and of those of odd order over ``A w``.

    Terms of higher orders are so small that single precision holds what counts of them, in half the time.
    """
    even, odd, step, spare, *room = scratch
    short_y, short_step = (row.view(np.float32)[: y.size] for row in room)
    short_total, short_spare = (row.view(np.float32)[y.size :] for row in room)
    np.multiply(a, a, out=step)
    np.divide(1.0, step, out=step)
    np.copyto(short_y, y)
    np.copyto(short_step, step)
    for (terms, higher), total in zip(_economised_terms(*order), (odd, even), strict=True):
        if higher:
            _in_powers(higher, short_y, short_step, short_total, short_spare)
            np.copyto(total, short_total)
        _in_powers(terms, y, step, total, spare, onto=bool(higher))
    even *= y
    return even, odd


def _in_powers(  # two series, two variables, and where to work
    terms: Terms, y: Floats, step: Floats, total: Floats, spare: Floats, *, onto: bool = False
) -> None:
    """Set ``total`` to the sum of polynomials in ``y`` times rising powers of ``step`` from the first on.

    ``onto`` says that it holds the sum of terms of higher powers, over as many powers as there are terms.
    """
    if not onto:
        _polynomial(terms[-1], y, total)
        total *= step
        terms = terms[:-1]
    for coefficients in terms[::-1]:
        total += _polynomial(coefficients, y, spare)
        total *= step


def _polynomial(coefficients: tuple[Floats, ...], y: Floats, out: Floats) -> Floats:
    total = np.multiply(y, coefficients[-1], out=out)
    for coefficient in coefficients[-2:0:-1]:
        total += coefficient
        total *= y
    total += coefficients[0]
    return total


@cache
def _economised_terms(least: float, order: int) -> tuple[tuple[Terms, Terms], tuple[Terms, Terms]]:
    """Coefficients in ``w^2`` of the terms of odd and of even order, from ``least`` degrees of freedom on.

    Each is an array without dimensions: a number would be made into one at every use. Of each parity the terms for
    double precision come first, then those for single precision.
    """
    a, largest_square = least + 0.5, LARGEST * LARGEST
    product = largest_square * largest_square
    reach = product / (product + 4 * a * (largest_square + least))
    terms = [
        economised(term, reach, TOLERANCE * a ** (k + 1))
        for k, term in enumerate(parabolic_cylinder_terms(order), start=1)
    ]
    errors = [SINGLE * sum(abs(c) * reach**j for j, c in enumerate(term)) / a**k for k, term in enumerate(terms, 2)]
    exact = 1 + max(k for k, error in enumerate(errors) if error > TOLERANCE)
    return _in_both_precisions(terms, exact, 0), _in_both_precisions(terms, exact, 1)


def _in_both_precisions(terms: list[Coefficients], exact: int, parity: int) -> tuple[Terms, Terms]:
    """Every second term: of the first ``exact`` ones those in double precision, then the others in single."""
    double = [term for k, term in enumerate(terms) if k < exact and k % 2 == parity]
    single = [term for k, term in enumerate(terms) if k >= exact and k % 2 == parity]
    return _arrays(double, np.float64), _arrays(single, np.float32)


def _arrays(terms: list[Coefficients], precision: type[np.floating[Any]]) -> Terms:
    return tuple(tuple(np.array(c, precision) for c in term) for term in terms)


def economised(coefficients: Coefficients, reach: float, tolerance: float) -> Coefficients:
    """Shorten a polynomial on ``[0, reach]`` as far as that changes it by no more than ``tolerance`` in all.

    The highest power is replaced by what a Chebyshev polynomial, the smallest of its degree, leaves of it.
    """
    kept = list(coefficients)
    left = tolerance
    while len(kept) > FEWEST:
        degree = len(kept) - 1
        size = kept[-1] * reach**degree / 2.0 ** (2 * degree - 1)
        left -= abs(size)
        if left < 0:
            break
        for j, c in enumerate(_chebyshev(degree)[:-1]):
            kept[j] -= size * c / reach**j
        kept.pop()
    return tuple(kept)


@cache
def _chebyshev(degree: int) -> tuple[int, ...]:
    """Coefficients in ``x`` of the Chebyshev polynomial of ``2x - 1``: ``T_n = 2 (2x-1) T_(n-1) - T_(n-2)``."""
    if degree == 0:
        return (1,)
    if degree == 1:
        return (-1, 2)
    total = [0] * (degree + 1)
    for j, c in enumerate(_chebyshev(degree - 1)):
        total[j] -= 2 * c
        total[j + 1] += 4 * c
    for j, c in enumerate(_chebyshev(degree - 2)):
        total[j] -= c
    return tuple(total)
