"""``log E exp(-mu Y)``, ``Y`` chi-distributed on ``df + 1``, for any number of degrees of freedom.

References
----------
NIST Digital Library of Mathematical Functions, chapter 12 (parabolic cylinder functions; 12.8 the recurrence,
12.9 large argument; sections from memory).
"""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING

import numpy as np
from scipy import special

from gatecheck.weigh.arrays import piecewise
from gatecheck.weigh.t_any_size import chi_exponent

if TYPE_CHECKING:
    from collections.abc import Callable

    from gatecheck.weigh.arrays import BoolArray, FloatArray

# Least degrees of freedom and the number of terms that err by less than 3e-14 from there on.
ORDERS = ((250.0, 4), (120.0, 5), (60.0, 6), (30.0, 8), (20.0, 10), (12.0, 16))
LEAST_EXPANDED = ORDERS[-1][0]
# The downward recursion starts this far above the wanted degrees of freedom, where the expansion holds.
STEPS_ABOVE = 20
STEPS_ORDER = 10
LARGE_MU = 1000.0
LARGE_MU_TERMS = 8


def log_chi_laplace(mu: FloatArray, df: FloatArray) -> FloatArray:
    """Compute ``log E exp(-mu Y)``, ``mu >= 0``, ``Y`` chi-distributed on ``df + 1``; rows known to be legal."""
    few = df < LEAST_EXPANDED
    pieces: list[tuple[BoolArray, Callable[..., FloatArray]]] = [(few, few_df_laplace)]
    above = np.inf
    for least, order in ORDERS:
        pieces.append(((df >= least) & (df < above), partial(_log_laplace_expanded, order=order)))
        above = least
    return piecewise(pieces, mu, df)


def few_df_laplace(mu: FloatArray, df: FloatArray) -> FloatArray:
    """Compute :func:`log_chi_laplace` where the degrees of freedom are too few for the expansion."""
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
    growth, _, even = chi_exponent(mu, df, order)
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
