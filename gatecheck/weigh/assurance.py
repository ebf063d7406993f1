"""How probable it is that a true effect gives a result strong enough: the assurance of standing.

A two-sided result meets a wanted likelihood ratio, and a wanted p-value, just where its statistic is at least some
value in size; the assurance is the probability, under the true effect, of at least that value in its direction.
"""

from __future__ import annotations

from enum import IntEnum
from typing import TYPE_CHECKING

import numpy as np

from gatecheck.weigh.arrays import rowwise
from gatecheck.weigh.noncentral import upper_tail_r, upper_tail_t
from gatecheck.weigh.quantiles import t_from_log_p
from gatecheck.weigh.risk import log_p_for_bound
from gatecheck.weigh.t import log_lr_t, r_from_t

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray

MOST_T = 1e6
# From 1e6 down to 1e-12.
HALVINGS = 60


class Weighing(IntEnum):
    """Against what the result will be weighed."""

    OBSERVED_EFFECT = 0
    DESIGN_EFFECT = 1
    BOUND = 2


def least_t(
    weighing: ArrayLike, df: ArrayLike, ncp: ArrayLike, target_log_lr: ArrayLike, log_p_limit: ArrayLike
) -> FloatArray:
    """Least size of t at which a two-sided result has the wanted evidence and the wanted p-value.

    Parameters
    ----------
    weighing : array_like of int
        Values of :class:`Weighing`.
    df : array_like
        Degrees of freedom, above zero; infinity means the normal distribution.
    ncp : array_like
        Non-centrality of the planned effect, at least zero; used where weighed against it.
    target_log_lr : array_like
        Natural log of the likelihood ratio to reach.
    log_p_limit : array_like
        Natural log of the p-value to stay within, at most zero; zero asks for nothing.

    Returns
    -------
    ndarray of float64
        Broadcast shape; infinite where no t up to 1e6 serves, nan outside the domain.
    """
    return rowwise(_least_rows, _legal, weighing, df, ncp, target_log_lr, log_p_limit)


def assurance(least: ArrayLike, df: ArrayLike, ncp: ArrayLike) -> FloatArray:
    """Probability that t is at least ``least`` under non-centrality ``ncp``; zero where that is infinite."""
    return _or_never(least, upper_tail_t(np.where(np.isinf(least), 0.0, least), df, ncp))


def assurance_of_correlation(least: ArrayLike, n: ArrayLike, rho: ArrayLike) -> FloatArray:
    """Probability that the t of a correlation of ``n`` pairs is at least ``least`` under a true ``rho``."""
    finite = np.where(np.isinf(least), 0.0, least)
    return _or_never(least, upper_tail_r(r_from_t(finite, np.asarray(n) - 2), n, rho))


def _or_never(least: ArrayLike, probability: FloatArray) -> FloatArray:
    return np.where(np.isinf(least), 0.0, probability)


def _least_rows(
    weighing: FloatArray, df: FloatArray, ncp: FloatArray, target: FloatArray, log_p_limit: FloatArray
) -> FloatArray:
    by_bound = t_from_log_p(np.where(target > 0, log_p_for_bound(target), 0.0), df, one_sided=False)
    by_p = t_from_log_p(log_p_limit, df, one_sided=False)
    by_ratio = _bisect(weighing == Weighing.DESIGN_EFFECT, df, ncp, target)
    return np.maximum(np.where(weighing == Weighing.BOUND, by_bound, by_ratio), by_p)


def _bisect(by_design: BoolArray, df: FloatArray, ncp: FloatArray, target: FloatArray) -> FloatArray:
    """Least t by halving: the folded ratio rises with the size of t, at a fixed effect and at the one observed."""

    def reaches(t: FloatArray) -> BoolArray:
        return log_lr_t(t, df, np.where(by_design, ncp, t), one_sided=False) >= target

    low, high = np.zeros_like(target), np.full_like(target, MOST_T)
    possible, at_once = reaches(high), reaches(low)
    for _ in range(HALVINGS):
        middle = (low + high) / 2
        served = reaches(middle)
        low, high = np.where(served, low, middle), np.where(served, middle, high)
    return np.where(at_once, 0.0, np.where(possible, high, np.inf))


def _legal(
    weighing: FloatArray, df: FloatArray, ncp: FloatArray, target: FloatArray, log_p_limit: FloatArray
) -> BoolArray:
    kind = (weighing >= 0) & (weighing <= Weighing.BOUND)
    return kind & (df > 0) & (ncp >= 0) & np.isfinite(ncp) & np.isfinite(target) & (log_p_limit <= 0)
