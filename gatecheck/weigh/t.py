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

from typing import TYPE_CHECKING

import numpy as np
from scipy import special

from gatecheck.weigh.arrays import piecewise, polynomial, rowwise
from gatecheck.weigh.polynomials import parabolic_cylinder_terms
from gatecheck.weigh.z import log_lr_z_rows

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray

# Least degrees of freedom and the number of terms that reach double precision from there on.
ORDERS = ((500.0, 4), (200.0, 5), (100.0, 6), (40.0, 8), (20.0, 10), (12.0, 16))
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
        growth, exponent, even = _chi_exponent(size_ncp * (size_t / root_q), df, order)
        half = size_ncp / root_q
        towards = growth + even - 0.5 * df * half * half
        two_sided = towards + np.log1p(np.expm1(-2 * exponent) / 2)
        if not one_sided.any():
            return two_sided
        away = -growth + even - 0.5 * size_ncp * size_ncp
        directed = np.where(np.sign(t) * np.sign(ncp) < 0, away, towards)
        return np.where(one_sided, directed, two_sided)

    return rows


def _root_q(size_t: FloatArray, df: FloatArray) -> FloatArray:
    """Root of ``t^2 + df`` without overflow."""
    small = np.minimum(size_t, SAFE_TO_SQUARE)
    return np.maximum(np.sqrt(small * small + df), size_t)


def _chi_exponent(mu: FloatArray, df: FloatArray, order: int) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Split ``log E exp(mu Y)`` and its mirror, ``mu >= 0``, ``Y`` chi-distributed on ``df + 1``.

    Returns
    -------
    growth, exponent, even : ndarray
        ``log E exp(mu Y) = growth + even + mu^2/2`` and ``log E exp(-mu Y) = -growth + even``; ``exponent``
        is half the difference of the two, computed without it.
    """
    a = df + 0.5
    r = mu / (2 * np.sqrt(a))
    small = np.minimum(r, SAFE_TO_SQUARE)
    c = np.maximum(np.sqrt(1 + small * small), r)
    angle = np.arcsinh(r)
    odd, even = _corrections(r / c, a, order)
    even -= np.log1p(r * (r / (1 + c))) / 2
    return a * (angle + r / (r + c)) + odd, a * (angle + r * c) + odd, even


def _corrections(w: FloatArray, a: FloatArray, order: int) -> tuple[FloatArray, FloatArray]:
    """Sums of the odd and of the even terms ``P_k(w) / a^k``."""
    terms = parabolic_cylinder_terms(order)
    y = w * w
    inverse = 1 / a
    step = inverse * inverse
    sums = []
    for first in (order - 1 + order % 2, order - order % 2):
        total = polynomial(terms[first - 1], y)
        for k in range(first - 2, 0, -2):
            total *= step
            total += polynomial(terms[k - 1], y)
        sums.append(total)
    return sums[0] * (w * inverse), sums[1] * (y * step)


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
    away = -0.5 * size_ncp * size_ncp + piecewise(
        [(mu > LARGE_MU, _log_laplace_large), (mu <= LARGE_MU, _log_laplace)], mu, df
    )
    both = _few_df_two_sided(t, df, ncp, one_sided)
    towards = both + np.log1p(-np.expm1(away - both))
    return np.where(np.sign(t) * np.sign(ncp) < 0, away, towards)


def _log_laplace(mu: FloatArray, df: FloatArray) -> FloatArray:
    """Compute ``log E exp(-mu Y)``, ``Y`` chi-distributed on ``df + 1``, by a recursion of positive terms."""
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


def _log_laplace_expanded(mu: FloatArray, df: FloatArray) -> FloatArray:
    growth, _, even = _chi_exponent(mu, df, STEPS_ORDER)
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
    return log_lr_t_rows(t, df, np.where(one_sided, np.maximum(t, 0.0), np.abs(t)), one_sided)


def _positive(df: FloatArray) -> BoolArray:
    return np.isfinite(df) & (df > 0)


def _legal(t: FloatArray, df: FloatArray, ncp: FloatArray, _: BoolArray) -> BoolArray:
    return np.isfinite(t) & (df > 0) & np.isfinite(ncp)


def _legal_observed(t: FloatArray, df: FloatArray, _: BoolArray) -> BoolArray:
    return np.isfinite(t) & (df > 0)
