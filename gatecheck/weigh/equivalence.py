"""Two one-sided tests: whether an effect lies within margins, or is not worse than one.

The p value of equivalence is the larger of the two one-sided ones, and equivalence at ``alpha`` is the interval at
``1 - 2 alpha`` lying within the margins. Infinite degrees of freedom mean a normal estimate; ratios are tested
through their logarithms.

References
----------
Schuirmann, D. J. (1987). A comparison of the two one-sided tests procedure and the power approach. Journal of
Pharmacokinetics and Biopharmaceutics 15, 657-680 (from memory).
Hauschke, D., Steinijans, V. & Pigeot, I. (2007). Bioequivalence Studies in Drug Development. Wiley (power).
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy import special

from gatecheck.weigh.arrays import piecewise, rowwise
from gatecheck.weigh.noncentral import upper_tail_t
from gatecheck.weigh.quantiles import t_from_log_p
from gatecheck.weigh.tails import log_density_of_log_chi2, log_p_t

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray

# Nodes of the tanh-sinh rule on 0 to 1, with what each leaves of 1 and its weight.
STEP = 0.04
STEPS = np.arange(-3.6, 3.6 + STEP / 2, STEP)
SHARES = special.expit(np.pi * np.sinh(STEPS))
WEIGHTS = STEP * np.pi * np.cosh(STEPS) * SHARES * special.expit(-np.pi * np.sinh(STEPS))
# So little probability lies beyond the range of the estimated standard deviation that is integrated.
NEGLIGIBLE = 1e-20
HALF = 0.5
# So many degrees of freedom are as good as infinitely many, to 1e-10; with more the integral would lose digits.
KNOWN_DF = 1e10


def p_non_inferiority(
    estimate: ArrayLike, standard_error: ArrayLike, df: ArrayLike, margin: ArrayLike
) -> FloatArray:
    """One-sided p value of the null hypothesis that the effect is at most ``margin``.

    Parameters
    ----------
    estimate, standard_error : array_like
        Effect, larger is better, and its standard error (above zero), in the unit of the margin.
    df : array_like
        Degrees of freedom of the standard error, above zero; infinity means a normal estimate.
    margin : array_like
        Largest effect still inferior: below zero for non-inferiority, zero or above for superiority by a margin.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain.
    """
    return np.exp(log_p_t(_standardised(estimate, standard_error, margin), df, one_sided=True))


def p_equivalence(
    estimate: ArrayLike, standard_error: ArrayLike, df: ArrayLike, *, low: ArrayLike, high: ArrayLike
) -> FloatArray:
    """P value of the null hypothesis that the effect lies at or beyond ``low`` or ``high``; nan unless low < high.

    Other arguments as of :func:`p_non_inferiority`.
    """
    beyond_low = log_p_t(_standardised(estimate, standard_error, low), df, one_sided=True)
    beyond_high = log_p_t(-_standardised(estimate, standard_error, high), df, one_sided=True)
    return np.where(np.less(low, high), np.exp(np.maximum(beyond_low, beyond_high)), np.nan)


def p_equivalence_ratio(
    ratio: ArrayLike, standard_error_of_log: ArrayLike, df: ArrayLike, *, low: ArrayLike, high: ArrayLike
) -> FloatArray:
    """P value of equivalence of a ratio, tested on the log scale; ratio and margins above zero, else nan."""
    return p_equivalence(_log(ratio), standard_error_of_log, df, low=_log(low), high=_log(high))


def interval_equivalence(
    estimate: ArrayLike, standard_error: ArrayLike, df: ArrayLike, alpha: ArrayLike
) -> tuple[FloatArray, FloatArray]:
    """Interval at ``1 - 2 alpha`` that lies within the margins where equivalence is shown at ``alpha``.

    ``alpha`` lies strictly between 0 and 0.5; other arguments as of :func:`p_non_inferiority`.
    """
    critical = _critical(alpha, df)

    def limit(sign: float) -> FloatArray:
        return rowwise(
            lambda estimate, error, critical: estimate + sign * critical * error,
            lambda estimate, error, critical: np.isfinite(estimate) & (error > 0) & np.isfinite(critical),
            estimate,
            standard_error,
            critical,
        )

    return limit(-1.0), limit(1.0)


def difference_of_proportions(
    events1: ArrayLike, n1: ArrayLike, events2: ArrayLike, n2: ArrayLike
) -> tuple[FloatArray, FloatArray]:
    """Difference of two proportions and its standard error from each group's own variance.

    Events lie between 0 and the number of units. To be tested with infinite degrees of freedom; where both
    proportions are 0 or 1 the standard error is zero and no test stands.
    """
    columns = (events1, n1, events2, n2)
    difference = rowwise(lambda x1, n1, x2, n2: x1 / n1 - x2 / n2, _legal_counts, *columns)
    return difference, rowwise(_proportions_error, _legal_counts, *columns)


def log_scale_sd(cv: ArrayLike) -> FloatArray:
    """Turn a coefficient of variation (at least 0) of a log-normal variable into the sd of its logarithm."""
    return rowwise(lambda cv: np.sqrt(np.log1p(cv * cv)), lambda cv: cv >= 0, cv)


def power_non_inferiority(
    effect: ArrayLike, standard_error: ArrayLike, df: ArrayLike, margin: ArrayLike, alpha: ArrayLike
) -> FloatArray:
    """Power of the test of :func:`p_non_inferiority` where ``effect`` and ``standard_error`` are the true ones."""
    return upper_tail_t(_critical(alpha, df), df, _standardised(effect, standard_error, margin))


def power_equivalence(
    effect: ArrayLike,
    standard_error: ArrayLike,
    df: ArrayLike,
    *,
    low: ArrayLike,
    high: ArrayLike,
    alpha: ArrayLike,
) -> FloatArray:
    """Exact power of the two one-sided tests.

    The probability that both tests reject, given the estimated standard deviation, is integrated over the chi
    distribution of the latter: the same number as by Owen's Q functions.

    Parameters
    ----------
    effect, standard_error : array_like
        True effect, and true standard error (above zero) of its estimate.
    df : array_like
        Degrees of freedom of the estimated standard error, above zero; infinity means that it is known.
    low, high : array_like
        Margins, ``low < high``; where one is infinite the other test stands alone.
    alpha : array_like
        Level of each of the two tests, strictly between 0 and 0.5.

    Returns
    -------
    ndarray of float64
        Broadcast shape, right to about 1e-13 (from 1e6 degrees of freedom on to 1e-10); nan outside the domain.
    """
    to_low = _standardised(effect, standard_error, low)
    to_high = _standardised(effect, standard_error, high)
    return rowwise(_power_rows, _legal_power, to_low, to_high, df, _critical(alpha, df))


def p_equivalence_binomial(events: ArrayLike, n: ArrayLike, *, low: ArrayLike, high: ArrayLike) -> FloatArray:
    """Exact p value of the null hypothesis that a proportion lies at or beyond ``low`` or ``high``.

    ``events`` of ``n`` units, ``0 <= low < high <= 1``; nan outside the domain.
    """
    return rowwise(_binomial_rows, _legal_binomial, events, n, low, high)


def power_equivalence_binomial(
    p: ArrayLike, n: ArrayLike, *, low: ArrayLike, high: ArrayLike, alpha: ArrayLike
) -> FloatArray:
    """Exact power of the test of :func:`p_equivalence_binomial` at the true proportion ``p``, ``n`` whole."""
    return rowwise(_binomial_power_rows, _legal_binomial_power, p, n, low, high, alpha)


def rejected_binomial(
    n: ArrayLike, *, low: ArrayLike, high: ArrayLike, alpha: ArrayLike
) -> tuple[FloatArray, FloatArray]:
    """Fewest and most events of ``n`` with which a proportion is shown to lie between ``low`` and ``high``.

    No number serves where the fewest exceed the most.
    """

    def legal(n: FloatArray, low: FloatArray, high: FloatArray, alpha: FloatArray) -> BoolArray:
        return _legal_binomial_power(low, n, low, high, alpha)

    fewest = rowwise(lambda n, low, _, alpha: _fewest_above(n, low, alpha), legal, n, low, high, alpha)
    most = rowwise(lambda n, _, high, alpha: n - _fewest_above(n, 1 - high, alpha), legal, n, low, high, alpha)
    return fewest, most


def _power_rows(to_low: FloatArray, to_high: FloatArray, df: FloatArray, critical: FloatArray) -> FloatArray:
    known = df >= KNOWN_DF
    return piecewise([(known, _power_known), (~known, _power_estimated)], to_low, to_high, df, critical)


def _power_known(to_low: FloatArray, to_high: FloatArray, _: FloatArray, critical: FloatArray) -> FloatArray:
    return _both_reject(to_low, to_high, critical)


def _power_estimated(to_low: FloatArray, to_high: FloatArray, df: FloatArray, critical: FloatArray) -> FloatArray:
    # From the largest estimate on, the two rejection regions no longer meet.
    largest = (to_low - to_high) / (2 * critical)
    bottom = np.sqrt(special.gammaincinv(df / 2, NEGLIGIBLE) / (df / 2))
    top = np.sqrt(special.gammainccinv(df / 2, NEGLIGIBLE) / (df / 2))
    top = np.maximum(np.minimum(largest, top), bottom)
    # Here rejection turns from likely to unlikely, perhaps steeply: the rule is dense at the ends of a panel.
    turn = np.clip(np.minimum(to_low, -to_high) / critical, bottom, top)
    first = _panel(bottom, turn, to_low, to_high, df, critical)
    return first + _panel(turn, top, to_low, to_high, df, critical)


def _panel(  # noqa: PLR0917  # the ends, and the columns of a row
    start: FloatArray,
    end: FloatArray,
    to_low: FloatArray,
    to_high: FloatArray,
    df: FloatArray,
    critical: FloatArray,
) -> FloatArray:
    total = np.zeros_like(df)
    for share, weight in zip(SHARES, WEIGHTS, strict=True):
        s = start + (end - start) * share
        # chi-squared/2 = df s^2 / 2, so that the density of s is that of its logarithm times 2/s.
        density = np.exp(log_density_of_log_chi2(np.log(df / 2 * s * s), df / 2)) * 2 / s
        total += np.where(s > 0, weight * density * _both_reject(to_low, to_high, critical * s), 0.0)
    return (end - start) * total


def _both_reject(to_low: FloatArray, to_high: FloatArray, critical: FloatArray) -> FloatArray:
    """Probability that the normal estimate lies ``critical`` or more inside both margins."""
    return np.maximum(special.ndtr(to_low - critical) - special.ndtr(to_high + critical), 0.0)


def _binomial_rows(events: FloatArray, n: FloatArray, low: FloatArray, high: FloatArray) -> FloatArray:
    return np.maximum(_at_least(events, n, low), _at_least(n - events, n, 1 - high))


def _binomial_power_rows(
    p: FloatArray, n: FloatArray, low: FloatArray, high: FloatArray, alpha: FloatArray
) -> FloatArray:
    fewest, most = _fewest_above(n, low, alpha), n - _fewest_above(n, 1 - high, alpha)
    return np.where(fewest <= most, _at_least(fewest, n, p) - _at_least(most + 1, n, p), 0.0)


def _fewest_above(n: FloatArray, p: FloatArray, alpha: FloatArray) -> FloatArray:
    """Least number of events that is so improbable under ``p`` (or more of them); ``n + 1`` if none is."""
    low, high = np.full_like(n, -1.0), n + 1
    while np.any(high - low > 1):
        middle = np.floor((low + high) / 2)
        rare = _at_least(middle, n, p) <= alpha
        low, high = np.where(rare, low, middle), np.where(rare, middle, high)
    return high


def _at_least(events: FloatArray, n: FloatArray, p: FloatArray) -> FloatArray:
    inner = np.clip(events, 1.0, n)
    tail = special.betainc(inner, n - inner + 1, p)
    return np.where(events <= 0, 1.0, np.where(events > n, 0.0, tail))


def _standardised(estimate: ArrayLike, standard_error: ArrayLike, margin: ArrayLike) -> FloatArray:
    return rowwise(
        lambda estimate, error, margin: (estimate - margin) / error,
        lambda _, error, __: error > 0,
        estimate,
        standard_error,
        margin,
    )


def _critical(alpha: ArrayLike, df: ArrayLike) -> FloatArray:
    log_alpha = rowwise(np.log, lambda alpha: (alpha > 0) & (alpha < HALF), alpha)
    return t_from_log_p(log_alpha, df, one_sided=True)


def _proportions_error(x1: FloatArray, n1: FloatArray, x2: FloatArray, n2: FloatArray) -> FloatArray:
    return np.sqrt(x1 / n1 * (1 - x1 / n1) / n1 + x2 / n2 * (1 - x2 / n2) / n2)


def _log(column: ArrayLike) -> FloatArray:
    return rowwise(np.log, lambda ratio: ratio > 0, column)


def _legal_counts(x1: FloatArray, n1: FloatArray, x2: FloatArray, n2: FloatArray) -> BoolArray:
    return (x1 >= 0) & (x1 <= n1) & (n1 > 0) & (x2 >= 0) & (x2 <= n2) & (n2 > 0)


def _legal_power(to_low: FloatArray, to_high: FloatArray, _: FloatArray, critical: FloatArray) -> BoolArray:
    bounded = np.isfinite(to_low) | np.isfinite(to_high)
    return bounded & (to_low > to_high) & np.isfinite(critical)


def _legal_binomial(events: FloatArray, n: FloatArray, low: FloatArray, high: FloatArray) -> BoolArray:
    return (events >= 0) & (events <= n) & (n > 0) & np.isfinite(n) & (low >= 0) & (low < high) & (high <= 1)


def _legal_binomial_power(
    p: FloatArray, n: FloatArray, low: FloatArray, high: FloatArray, alpha: FloatArray
) -> BoolArray:
    return _legal_binomial(np.zeros_like(n), n, low, high) & (p >= 0) & (p <= 1) & (alpha > 0) & (alpha < 1)
