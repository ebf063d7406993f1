"""Log likelihood ratio of Student's t: exact expansions for many degrees of freedom, series below.

With ``q = t^2 + df`` and ``mu = ncp t / sqrt(q)`` the ratio of the non-central to the central density is

- one-sided: ``exp(-ncp^2/2) E exp(mu Y)``, ``Y`` chi-distributed on ``df + 1`` degrees of freedom;
- two-sided (density of ``|t|``): ``exp(-ncp^2/2) 1F1((df+1)/2; 1/2; mu^2/2)``.

The expectation is a parabolic cylinder function. Its logarithm has a uniform expansion in ``1/(df + 1/2)``
whose leading part holds all that is large, so that no density is formed and nothing under- or overflows.

References
----------
NIST Digital Library of Mathematical Functions, chapters 12 (parabolic cylinder functions; 12.10 the
expansion) and 13 (confluent hypergeometric functions; 13.7 large argument).
"""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING

import numpy as np
from scipy import special

from gatecheck.weigh.arrays import piecewise, polynomial, rowwise
from gatecheck.weigh.polynomials import parabolic_cylinder_terms
from gatecheck.weigh.z import log_lr_z_rows

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray

# Least degrees of freedom and the number of terms that err by less than 3e-14 from there on.
ORDERS = ((250.0, 4), (120.0, 5), (60.0, 6), (30.0, 8), (20.0, 10), (12.0, 16))
LEAST_EXPANDED = ORDERS[-1][0]
LARGE_X = 100.0
LARGE_TERMS = 20
SMALL_AX = 0.1
SMALL_TERMS = 14
# The downward recursion starts this far above the wanted degrees of freedom, where the expansion holds.
STEPS_ABOVE = 20
STEPS_ORDER = 10
LARGE_MU = 1000.0
LARGE_MU_TERMS = 8
# Squares of larger numbers overflow; beyond it the larger part alone decides.
SAFE_TO_SQUARE = 1e150


def log_lr_t(t: ArrayLike, df: ArrayLike, ncp: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Natural log of the likelihood ratio, ``ncp`` against zero, of Student's t as observed.

    Parameters
    ----------
    t : array_like
        The statistic; for one-sided rows signed so that the promised direction is positive.
    df : array_like
        Degrees of freedom, above zero, not necessarily whole; infinity means the normal distribution.
    ncp : array_like
        Non-centrality under the alternative, signed in the same way (two groups of n and a standardised
        difference d: ``d sqrt(n/2)``).
    one_sided : array_like of bool
        Whether the direction was fixed beforehand; otherwise the densities of ``|t|`` are compared.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan where an input is not finite or ``df`` is not positive.
    """
    return rowwise(log_lr_t_rows, _legal, t, df, ncp, one_sided)


def observed_t(t: ArrayLike, df: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Log likelihood ratio at the effect as observed: ``ncp = |t|``, or ``max(t, 0)`` where one-sided."""
    return rowwise(_observed_rows, _legal_observed, t, df, one_sided)


def t_from_r(r: ArrayLike, df: ArrayLike) -> FloatArray:
    """Turn a correlation into t: ``r sqrt(df / (1 - r^2))``, ``df`` = pairs - 2; nan unless ``|r| < 1``."""
    return rowwise(
        lambda r, df: r * np.sqrt(df / ((1 - r) * (1 + r))),
        lambda r, df: (np.abs(r) < 1) & _positive(df),
        r,
        df,
    )


def r_from_t(t: ArrayLike, df: ArrayLike) -> FloatArray:
    """Turn t into a correlation: ``t / sqrt(t^2 + df)``."""
    return rowwise(lambda t, df: t / np.hypot(t, np.sqrt(df)), lambda t, df: np.isfinite(t) & _positive(df), t, df)


def log_lr_t_rows(t: FloatArray, df: FloatArray, ncp: FloatArray, one_sided: BoolArray) -> FloatArray:
    """Compute rows known to be legal."""
    few = df < LEAST_EXPANDED
    pieces: list[tuple[BoolArray, Callable[..., FloatArray]]] = [
        (few & ~one_sided, _few_df_two_sided),
        (few & one_sided, _few_df_one_sided),
        (np.isinf(df), lambda t, _, ncp, one_sided: log_lr_z_rows(t, ncp, one_sided)),
    ]
    above = np.inf
    for least, order in ORDERS:
        pieces.append(((df >= least) & (df < above), _expansion(order)))
        above = least
    return piecewise(pieces, t, df, ncp, one_sided)


def _expansion(order: int) -> Callable[..., FloatArray]:
    def rows(t: FloatArray, df: FloatArray, ncp: FloatArray, one_sided: BoolArray) -> FloatArray:
        size_t, size_ncp = np.abs(t), np.abs(ncp)
        root_q = _root_q(size_t, df)
        half = size_ncp / root_q
        size_t *= half
        growth, exponent, even = _chi_exponent(size_t, df, order)
        half *= half
        half *= df
        half *= 0.5
        towards = np.subtract(even, half, out=half)
        towards += growth
        if not one_sided.any():
            return _folded(towards, exponent)
        away = even - growth
        away -= 0.5 * size_ncp * size_ncp
        directed = np.where((t < 0) ^ (ncp < 0), away, towards)
        return directed if one_sided.all() else np.where(one_sided, directed, _folded(towards, exponent))

    return rows


def _folded(towards: FloatArray, exponent: FloatArray) -> FloatArray:
    """Mean of the ratio and its mirror, ``exp(-2 exponent)`` times it; ``exponent`` is overwritten."""
    exponent *= -2
    np.expm1(exponent, out=exponent)
    exponent *= 0.5
    np.log1p(exponent, out=exponent)
    exponent += towards
    return exponent


def _root_q(size_t: FloatArray, df: FloatArray) -> FloatArray:
    """Root of ``t^2 + df`` without overflow."""
    root = np.minimum(size_t, SAFE_TO_SQUARE)
    root *= root
    root += df
    np.sqrt(root, out=root)
    return np.maximum(root, size_t, out=root)


def _chi_exponent(mu: FloatArray, df: FloatArray, order: int) -> tuple[FloatArray, FloatArray, FloatArray]:
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


def _few_df_two_sided(t: FloatArray, df: FloatArray, ncp: FloatArray, _: BoolArray) -> FloatArray:
    size_t, size_ncp = np.abs(t), np.abs(ncp)
    root_q = _root_q(size_t, df)
    mu = size_ncp * (size_t / root_q)
    x = mu * mu / 2
    a = (df + 1) / 2
    large, small = x > LARGE_X, a * x < SMALL_AX
    return piecewise(
        [(large, _large_argument), (small, _small_argument), (~large & ~small, _middle_argument)],
        a,
        mu,
        size_ncp,
        size_ncp / root_q,
    )


def _large_argument(a: FloatArray, mu: FloatArray, _ncp: FloatArray, ncp_over_root_q: FloatArray) -> FloatArray:
    log_x = 2 * np.log(mu) - np.log(2.0)
    inverse = np.exp(-log_x)
    total, term = np.ones_like(a), np.ones_like(a)
    for s in range(LARGE_TERMS):
        term *= (0.5 - a + s) * (1 - a + s) / (s + 1) * inverse
        total += term
    lead = -(a - 0.5) * ncp_over_root_q * ncp_over_root_q
    scale: FloatArray = special.gammaln(0.5) - special.gammaln(a)
    log_lr: FloatArray = lead + scale + (a - 0.5) * log_x + np.log(total)
    return log_lr


def _small_argument(a: FloatArray, mu: FloatArray, ncp: FloatArray, _: FloatArray) -> FloatArray:
    x = mu * mu / 2
    total, term = np.zeros_like(a), np.ones_like(a)
    for s in range(SMALL_TERMS):
        term *= (a + s) * x / ((0.5 + s) * (s + 1))
        total += term
    return -0.5 * ncp * ncp + np.log1p(total)


def _middle_argument(a: FloatArray, mu: FloatArray, ncp: FloatArray, _: FloatArray) -> FloatArray:
    log_lr: FloatArray = -0.5 * ncp * ncp + np.log(special.hyp1f1(a, 0.5, mu * mu / 2))
    return log_lr


def _few_df_one_sided(t: FloatArray, df: FloatArray, ncp: FloatArray, one_sided: BoolArray) -> FloatArray:
    """Against the direction by downward recursion, along it from the two-sided ratio: the mean of the two."""
    size_t, size_ncp = np.abs(t), np.abs(ncp)
    mu = size_ncp * (size_t / _root_q(size_t, df))
    away = _few_df_laplace(mu, df) - 0.5 * size_ncp * size_ncp
    both = _few_df_two_sided(t, df, ncp, one_sided)
    towards = both + np.log1p(-np.expm1(away - both))
    return np.where(np.sign(t) * np.sign(ncp) < 0, away, towards)


def log_chi_laplace(mu: FloatArray, df: FloatArray) -> FloatArray:
    """Compute ``log E exp(-mu Y)``, ``mu >= 0``, ``Y`` chi-distributed on ``df + 1``; rows known to be legal."""
    few = df < LEAST_EXPANDED
    pieces: list[tuple[BoolArray, Callable[..., FloatArray]]] = [(few, _few_df_laplace)]
    above = np.inf
    for least, order in ORDERS:
        pieces.append(((df >= least) & (df < above), partial(_log_laplace_expanded, order=order)))
        above = least
    return piecewise(pieces, mu, df)


def _few_df_laplace(mu: FloatArray, df: FloatArray) -> FloatArray:
    return piecewise([(mu > LARGE_MU, _log_laplace_large), (mu <= LARGE_MU, _log_laplace)], mu, df)


def _log_laplace(mu: FloatArray, df: FloatArray) -> FloatArray:
    """Compute the same for few degrees of freedom by a recursion of positive terms."""
    top = df + STEPS_ABOVE
    start = _log_laplace_expanded(mu, top)
    upper = np.exp(_log_laplace_expanded(mu, top + 1) - start)
    current = np.ones_like(mu)
    ratio = np.sqrt(2.0) * np.exp(special.gammaln((top + 1) / 2) - special.gammaln(top / 2))
    for step in range(STEPS_ABOVE):
        v = top - step
        upper, current = current, upper + mu / v * ratio * current
        ratio = (v - 1) / ratio
    return start + np.log(current)


def _log_laplace_expanded(mu: FloatArray, df: FloatArray, order: int = STEPS_ORDER) -> FloatArray:
    growth, _, even = _chi_exponent(mu, df, order)
    return even - growth


def _log_laplace_large(mu: FloatArray, df: FloatArray) -> FloatArray:
    """Compute the same by the expansion of Laplace's integral for large ``mu``."""
    inverse = 0.5 / mu / mu
    total, term = np.ones_like(mu), np.ones_like(mu)
    for s in range(LARGE_MU_TERMS):
        term *= -(df + 1 + 2 * s) * (df + 2 + 2 * s) / (s + 1) * inverse
        total += term
    scale: FloatArray = special.gammaln(df + 1) - special.gammaln((df + 1) / 2)
    logarithm: FloatArray = scale - (df - 1) / 2 * np.log(2.0) - (df + 1) * np.log(mu) + np.log(total)
    return logarithm


def _observed_rows(t: FloatArray, df: FloatArray, one_sided: BoolArray) -> FloatArray:
    ncp = np.abs(t)
    ncp[one_sided & (t < 0)] = 0.0
    return log_lr_t_rows(t, df, ncp, one_sided)


def _positive(df: FloatArray) -> BoolArray:
    return np.isfinite(df) & (df > 0)


def _legal(t: FloatArray, df: FloatArray, ncp: FloatArray, _: BoolArray) -> BoolArray:
    return np.isfinite(t) & (df > 0) & np.isfinite(ncp)


def _legal_observed(t: FloatArray, df: FloatArray, _: BoolArray) -> BoolArray:
    return np.isfinite(t) & (df > 0)
