"""Risk over the long run of many results called positive: by tail areas, not by the one result at hand.

These figures describe a procedure: of all results with ``p <= alpha``, so many are false. They say nothing about
one result with its own p value, whose risk is :func:`gatecheck.weigh.risk.false_positive_risk` and is larger when
p lies just below alpha. ``alpha`` and ``power`` have to be of the same test: both of the two-sided one, or both of
the one-sided one; a two-sided alpha beside one-sided power counts false findings of both directions and true
ones of one.

References
----------
Altman, D. G. (1991). Practical Statistics for Medical Research. Chapman & Hall, section 14.4 (predictive values:
power is the sensitivity, 1 - alpha the specificity, the base rate the prevalence).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from gatecheck.weigh.arrays import rowwise

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray


@dataclass(frozen=True, slots=True, eq=False)
class ScreenCounts:
    """Expected numbers of a screen, each an array of the broadcast shape."""

    true_positives: FloatArray
    false_positives: FloatArray
    false_negatives: FloatArray
    true_negatives: FloatArray


def long_run_false_positive_risk(alpha: ArrayLike, power: ArrayLike, base_rate: ArrayLike) -> FloatArray:
    """Share of false findings among all results with ``p <= alpha``.

    Parameters
    ----------
    alpha : array_like
        Probability that a test of no effect rejects, 0 to 1; two-sided if ``power`` is, one-sided if it is.
    power : array_like
        Probability that a test of a real effect rejects, 0 to 1.
    base_rate : array_like
        Share of real effects among all that are tested, 0 to 1.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain, and where nothing is ever called positive.
    """
    return rowwise(_risk_rows, _legal, alpha, power, base_rate)


def positive_predictive_value(alpha: ArrayLike, power: ArrayLike, base_rate: ArrayLike) -> FloatArray:
    """Share of real effects among all results with ``p <= alpha``; arguments as of the long-run risk."""
    return rowwise(_positive_value_rows, _legal, alpha, power, base_rate)


def negative_predictive_value(alpha: ArrayLike, power: ArrayLike, base_rate: ArrayLike) -> FloatArray:
    """Share of no effects among all results with ``p > alpha``; arguments as of the long-run risk."""
    return rowwise(_negative_value_rows, _legal, alpha, power, base_rate)


def expected_screen(n: ArrayLike, alpha: ArrayLike, power: ArrayLike, base_rate: ArrayLike) -> ScreenCounts:
    """Numbers to expect of ``n >= 0`` tests; other arguments as of :func:`long_run_false_positive_risk`."""

    def count(kernel: Callable[..., FloatArray]) -> FloatArray:
        return rowwise(
            kernel, lambda n, *probabilities: (n >= 0) & _legal(*probabilities), n, alpha, power, base_rate
        )

    return ScreenCounts(
        true_positives=count(lambda n, _, power, rate: n * rate * power),
        false_positives=count(lambda n, alpha, _, rate: n * (1 - rate) * alpha),
        false_negatives=count(lambda n, _, power, rate: n * rate * (1 - power)),
        true_negatives=count(lambda n, alpha, _, rate: n * (1 - rate) * (1 - alpha)),
    )


def _risk_rows(alpha: FloatArray, power: FloatArray, base_rate: FloatArray) -> FloatArray:
    false = alpha * (1 - base_rate)
    return false / (false + power * base_rate)


def _positive_value_rows(alpha: FloatArray, power: FloatArray, base_rate: FloatArray) -> FloatArray:
    true = power * base_rate
    return true / (true + alpha * (1 - base_rate))


def _negative_value_rows(alpha: FloatArray, power: FloatArray, base_rate: FloatArray) -> FloatArray:
    right = (1 - alpha) * (1 - base_rate)
    return right / (right + (1 - power) * base_rate)


def _legal(alpha: FloatArray, power: FloatArray, base_rate: FloatArray) -> BoolArray:
    return _is_probability(alpha) & _is_probability(power) & _is_probability(base_rate)


def _is_probability(p: FloatArray) -> BoolArray:
    return (p >= 0) & (p <= 1)
