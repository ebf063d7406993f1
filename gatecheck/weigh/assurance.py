"""How probable it is that a true effect gives a result strong enough: the assurance of standing.

A result meets a wanted likelihood ratio, and a wanted p-value, just where its statistic is at least some value; the
assurance is the probability, under the true effect, of at least that value. Of t and z only results in the
direction of the true effect count; F and chi-squared have no direction.
"""

from __future__ import annotations

from enum import IntEnum
from typing import TYPE_CHECKING

import numpy as np
from scipy import special

from gatecheck.weigh.crossings import least_reached
from gatecheck.weigh.default_prior import log_bf_r, log_bf_t, log_bf_unit_information
from gatecheck.weigh.mixed import Statistic, at_noncentrality, log_p, observed_effect, value_from_log_p
from gatecheck.weigh.noncentral import upper_tail_chi2, upper_tail_f, upper_tail_r, upper_tail_t
from gatecheck.weigh.planned import About
from gatecheck.weigh.quantiles import z_from_log_p
from gatecheck.weigh.risk import log_lr_bound, log_p_for_bound
from gatecheck.weigh.t import r_from_t

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable

    from gatecheck.weigh.arrays import FloatArray
    from gatecheck.weigh.planned import Planned

# Beyond this t, and the F and chi-squared that are its square, nothing is looked for.
MOST_T = 1e6
UNIFORM = 1.0


class Weighing(IntEnum):
    """Against what the result will be weighed."""

    OBSERVED_EFFECT = 0
    DESIGN_EFFECT = 1
    DEFAULT_PRIOR = 2
    BOUND = 3


def log_lr(planned: Planned, weighing: Weighing, value: FloatArray) -> FloatArray:
    """Natural log of the likelihood ratio of results of that ``value`` (not negative), one a row.

    Not a number where the test has no such alternative.
    """
    if weighing == Weighing.OBSERVED_EFFECT:
        return observed_effect(planned.kind, value, planned.df1, planned.df2, planned.one_sided)
    if weighing == Weighing.DESIGN_EFFECT:
        return at_noncentrality(planned.kind, value, planned.df1, planned.df2, planned.ncp, planned.one_sided)
    if weighing == Weighing.DEFAULT_PRIOR:
        return _log_bf_default(planned, value)
    return log_lr_bound(log_p_of(planned, value))


def log_p_of(planned: Planned, value: FloatArray) -> FloatArray:
    """Natural log of the p-values of results of that ``value``, one a row."""
    return log_p(planned.kind, value, planned.df1, planned.df2, planned.one_sided)


def least_value(planned: Planned, wanted: Iterable[tuple[Weighing, float]], log_p_limit: float) -> FloatArray:
    """Least value of the statistic at which a result has all the evidence that is wanted, and the p-value.

    Parameters
    ----------
    planned : Planned
        The test at its sizes.
    wanted : iterable of (Weighing, float)
        Under each of these the natural log of the likelihood ratio to reach.
    log_p_limit : float
        Natural log of the p-value to stay within, at most zero; zero asks for nothing.

    Returns
    -------
    ndarray of float64, shape (n,)
        Not negative; infinite where no value serves up to a t of 1e6 or its square.
    """
    least = _value_within(planned, log_p_limit)
    for weighing, target in wanted:
        if weighing == Weighing.BOUND:
            limit = float(log_p_for_bound(target)) if target > 0 else 0.0
            least = np.maximum(least, _value_within(planned, limit))
        else:
            least = np.maximum(least, _least_by_ratio(planned, weighing, target))
    return least


def _value_within(planned: Planned, log_p_limit: float) -> FloatArray:
    """Least value, not negative, whose p-value is within the limit; any is within that of 1."""
    return np.zeros_like(planned.ncp) if log_p_limit == 0 else np.maximum(value_at(planned, log_p_limit), 0.0)


def value_at(planned: Planned, log_p_value: float) -> FloatArray:
    """The statistics whose p-value is that, one a row."""
    return value_from_log_p(planned.kind, log_p_value, planned.df1, planned.df2, planned.one_sided)


def as_z(planned: Planned, value: FloatArray) -> FloatArray:
    """The z with the p-values of these values, not negative; infinite where they are."""
    finite = np.isfinite(value)
    z = z_from_log_p(log_p_of(planned, np.where(finite, value, 0.0)), one_sided=planned.one_sided)
    return np.where(finite, np.maximum(z, 0.0), np.inf)


def assurance(planned: Planned, least: FloatArray) -> FloatArray:
    """Probability that the statistic is at least ``least`` under the true effect; zero where that is infinite."""
    finite = np.where(np.isinf(least), 0.0, least)
    if planned.kind == Statistic.CHI2:
        probability = upper_tail_chi2(finite, planned.df1, planned.ncp)
    elif planned.kind == Statistic.F:
        probability = upper_tail_f(finite, planned.df1, planned.df2, planned.ncp)
    elif planned.kind == Statistic.Z:
        probability = special.ndtr(planned.ncp - finite)
    elif planned.about == About.CORRELATION:
        # The pairs are random too, which a non-central t leaves out.
        pairs = planned.df1 + 2
        rho = planned.ncp / np.hypot(planned.ncp, np.sqrt(pairs))
        probability = upper_tail_r(r_from_t(finite, planned.df1), pairs, rho)
    else:
        probability = upper_tail_t(finite, planned.df1, planned.ncp)
    return np.where(np.isinf(least), 0.0, probability)


def _log_bf_default(planned: Planned, value: FloatArray) -> FloatArray:
    if planned.about == About.MEANS:
        by_f = planned.kind == Statistic.F
        t, df = (np.sqrt(value), planned.df2) if by_f else (value, planned.df1)
        return log_bf_t(t, df, planned.n, planned.scale, one_sided=planned.one_sided)
    if planned.about == About.CORRELATION:
        r = r_from_t(value, planned.df1)
        return log_bf_r(r, planned.df1 + 2, UNIFORM, one_sided=planned.one_sided)
    if planned.about == About.SEVERAL_EFFECTS or planned.one_sided:
        return np.full_like(value, np.nan)
    return log_bf_unit_information(value / 2 if planned.kind == Statistic.CHI2 else value**2 / 2, planned.n)


def _least_by_ratio(planned: Planned, weighing: Weighing, target: float) -> FloatArray:
    """Least value by search: the ratio rises with the size of the statistic under every alternative.

    It is looked for along the log likelihood ratio of the best estimate, in which all of them are nearly straight.
    """
    along, back = _straightened(planned)
    most = np.full_like(planned.ncp, MOST_T if planned.kind in {Statistic.T, Statistic.Z} else MOST_T**2)
    least = least_reached(lambda point: log_lr(planned, weighing, back(point)) - target, along(most))
    return np.where(np.isinf(least), np.inf, back(np.where(np.isinf(least), 0.0, least)))


def _straightened(
    planned: Planned,
) -> tuple[Callable[[FloatArray], FloatArray], Callable[[FloatArray], FloatArray]]:
    """From values to the log likelihood ratio of the best estimate, and back."""
    df1, df2 = planned.df1, planned.df2
    if planned.kind == Statistic.Z:
        return lambda value: value**2 / 2, lambda point: np.sqrt(2 * point)
    if planned.kind == Statistic.CHI2:
        return lambda value: value / 2, lambda point: 2 * point
    if planned.kind == Statistic.F:
        half = (df1 + df2) / 2
        return lambda f: half * np.log1p(df1 * f / df2), lambda point: df2 / df1 * np.expm1(point / half)
    half = (df1 + 1) / 2
    return lambda t: half * np.log1p(t * t / df1), lambda point: np.sqrt(df1 * np.expm1(point / half))
