"""An original and its replication: published criteria, and how sceptical one may be of a result.

Each criterion is the natural log of a p value, to be held against the log of a level, or a limit in the units of
the estimate (on the log scale for ratios). ``variance_ratio`` is the squared standard error of the original over
that of the replication: about the sample size of the replication over that of the original.

References
----------
Open Science Collaboration (2015). Estimating the reproducibility of psychological science. Science 349, aac4716.
Patil, P., Peng, R. D. & Leek, J. T. (2016). Perspectives on Psychological Science 11, 539-544 (the prediction
interval; from memory).
Matthews, R. A. J. (2018). Beyond "significance". Royal Society Open Science 5, 171047 (limits).
Held, L. (2020). A new standard for the analysis and design of replication studies. Journal of the Royal
Statistical Society A 183, 431-448 (the sceptical p value, nominal).
Held, L., Micheloud, C. & Pawel, S. (2022). Annals of Applied Statistics 16, 706-720 (golden).
Micheloud, C., Balabdaoui, F. & Held, L. (2023). Statistica Neerlandica 77, 573-591 (controlled; from memory).
Goodman, S. N. (1992). A comment on replication, p-values and evidence. Statistics in Medicine 11, 875-879.
"""

from __future__ import annotations

from enum import Enum
from functools import partial
from typing import TYPE_CHECKING

import numpy as np
from scipy import special

from gatecheck.weigh.arrays import rowwise
from gatecheck.weigh.quantiles import t_quantile_two_sided, z_from_log_p_rows
from gatecheck.weigh.tails import LOG_TWO, log_p_z_rows

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray

ROOT_GOLDEN = float(np.sqrt((1 + np.sqrt(5.0)) / 2))
LOG_PI = float(np.log(np.pi))
NODES = 256
# The integrand falls below rounding where its exponent is this large, or, by its algebraic part, this far out.
NEGLIGIBLE = 40.0
LEAST_RATE = 1e-300
NEWTON_STEPS = 12


class Calibration(Enum):
    """On which scale a sceptical p value stands: the same name is used for three numbers.

    Nominal: the p value at which the sceptical prior just fails. Golden: an original that is just significant
    succeeds only if the replication's estimate is at least as large. Controlled: with no effect in either study
    the one-sided value is at most a with probability a squared, as for two significant studies.
    """

    NOMINAL = "nominal"
    GOLDEN = "golden"
    CONTROLLED = "controlled"


def log_p_same_direction(original: ArrayLike, replication: ArrayLike, replication_se: ArrayLike) -> FloatArray:
    """Natural log of the one-sided p value of the replication in the direction of the original.

    The criterion "same direction and significant at alpha, two-sided" is a p value of at most ``alpha / 2``.

    Parameters
    ----------
    original, replication : array_like
        Estimates as differences from no effect.
    replication_se : array_like
        Standard error of the replication, above zero.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain, and where the original is exactly zero and has no direction.
    """
    return rowwise(
        lambda o, r, se: special.log_ndtr(-np.sign(o) * (r / se)),
        lambda o, r, se: _finite(o, r) & _above_zero(se) & (o != 0),
        original,
        replication,
        replication_se,
    )


def log_p_difference(
    original: ArrayLike, original_se: ArrayLike, replication: ArrayLike, replication_se: ArrayLike
) -> FloatArray:
    """Natural log of the two-sided p value of the difference between the two estimates.

    Above ``log(alpha)`` just where either estimate lies in the other's prediction interval at ``1 - alpha``: the
    criterion is the same from both sides. With ``original_se`` zero, just where the replication's confidence
    interval holds the original's estimate. Standard errors: the original's not negative, the replication's above
    zero; nan outside the domain.
    """
    return rowwise(
        _difference_rows,
        lambda o, se_o, r, se_r: _finite(o, r) & np.isfinite(se_o) & (se_o >= 0) & _above_zero(se_r),
        original,
        original_se,
        replication,
        replication_se,
    )


def prediction_limits(
    estimate: ArrayLike, standard_error: ArrayLike, other_se: ArrayLike, level: ArrayLike
) -> tuple[FloatArray, FloatArray]:
    """Limits between which the estimate of the other study lies at ``level`` if both have the same true effect."""
    given = (estimate, standard_error, other_se)
    z = t_quantile_two_sided(level, np.inf)
    low, high = (
        rowwise(
            lambda estimate, se, other, z: estimate + np.hypot(se, other) * z,
            lambda estimate, se, other, z: _finite(estimate, z) & _above_zero(se) & _above_zero(other),
            *given,
            end,
        )
        for end in (-z, z)
    )
    return low, high


def replication_probability(
    z_original: ArrayLike, variance_ratio: ArrayLike, log_alpha: ArrayLike, *, predictive: bool
) -> FloatArray:
    """Probability that the replication's one-sided p value in the original's direction is at most ``alpha``.

    Parameters
    ----------
    z_original : array_like
        Estimate over standard error of the original.
    variance_ratio : array_like
        Squared standard error of the original over the replication's, above zero.
    log_alpha : array_like
        Natural log of the one-sided level, below zero; of one half: the same sign.
    predictive : bool
        Whether the original's uncertainty counts (flat prior), or the effect is taken to be as observed.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain.
    """
    return rowwise(
        lambda z, ratio, log_alpha: special.ndtr(
            (np.abs(z) * np.sqrt(ratio) - _z_of(log_alpha)) / np.sqrt(1 + ratio * predictive)
        ),
        lambda z, ratio, log_alpha: np.isfinite(z) & _above_zero(ratio) & np.isfinite(log_alpha) & (log_alpha < 0),
        z_original,
        variance_ratio,
        log_alpha,
    )


def sceptical_prior_variance(estimate: ArrayLike, standard_error: ArrayLike, level: ArrayLike) -> FloatArray:
    """Variance of the normal prior around no effect that makes a significant result just not credible.

    With it the posterior interval at ``level`` ends at no effect: ``se^2 / (z^2/z_level^2 - 1)``. A smaller one is
    sufficiently sceptical. nan where the interval of the data already holds no effect, and outside the domain.
    """
    return _of_interval(
        lambda z, se, bound: se**2 / ((z / bound - 1) * (z / bound + 1)),
        lambda z, bound: np.abs(z) > bound,
        (estimate, standard_error, level),
    )


def sceptical_limit(estimate: ArrayLike, standard_error: ArrayLike, level: ArrayLike) -> FloatArray:
    """Half width of the critical sceptical prior interval: ``(U - L)^2 / (4 sqrt(U L))``; exp of it for ratios.

    Whoever holds effects beyond it to be plausible finds the significant result credible. nan as in
    :func:`sceptical_prior_variance`.
    """
    return _of_interval(
        lambda z, se, bound: se * bound / np.sqrt((np.abs(z) / bound - 1) * (np.abs(z) / bound + 1)),
        lambda z, bound: np.abs(z) > bound,
        (estimate, standard_error, level),
    )


def advocacy_limit(estimate: ArrayLike, standard_error: ArrayLike, level: ArrayLike) -> FloatArray:
    """Far end of the prior interval from no effect that makes a non-significant result just credible.

    ``-(U + L) (U - L)^2 / (2 U L)``, in the direction of the estimate: an advocate must beforehand hold all
    effects up to it to be plausible. nan where the result is significant or exactly zero.
    """
    return _of_interval(
        lambda z, se, bound: 4 * se * z / ((1 - z / bound) * (1 + z / bound)),
        lambda z, bound: (z != 0) & (np.abs(z) < bound),
        (estimate, standard_error, level),
    )


def log_sceptical_p(
    z_original: ArrayLike,
    z_replication: ArrayLike,
    variance_ratio: ArrayLike,
    *,
    calibration: Calibration,
    one_sided: ArrayLike,
) -> FloatArray:
    """Natural log of the sceptical p value of a replication, on the scale of ``calibration``.

    Parameters
    ----------
    z_original, z_replication : array_like
        Estimates over standard errors.
    variance_ratio : array_like
        Squared standard error of the original over the replication's, above zero.
    calibration : Calibration
        Values of every scale are held against the same level.
    one_sided : array_like of bool
        Whether an opposite direction counts against success (then the value is above one half).

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain.
    """
    return rowwise(
        partial(_sceptical_rows, calibration),
        lambda z_o, z_r, ratio, _: _finite(z_o, z_r) & _above_zero(ratio),
        z_original,
        z_replication,
        variance_ratio,
        one_sided,
    )


def log_sceptical_level(log_alpha: ArrayLike, variance_ratio: ArrayLike, *, calibration: Calibration) -> FloatArray:
    """Natural log of the level for the nominal one-sided sceptical p value that means ``alpha`` on another scale.

    ``log_alpha`` is the natural log of a one-sided level below one half; nan outside the domain.
    """
    return rowwise(
        partial(_level_rows, calibration),
        lambda log_alpha, ratio: np.isfinite(log_alpha) & (log_alpha < -LOG_TWO) & _above_zero(ratio),
        log_alpha,
        variance_ratio,
    )


def _difference_rows(o: FloatArray, se_o: FloatArray, r: FloatArray, se_r: FloatArray) -> FloatArray:
    z = (r - o) / np.hypot(se_o, se_r)
    return log_p_z_rows(z, np.zeros(z.shape, dtype=np.bool_))


def _of_interval(
    kernel: Callable[..., FloatArray],
    applies: Callable[[FloatArray, FloatArray], BoolArray],
    given: tuple[ArrayLike, ArrayLike, ArrayLike],
) -> FloatArray:
    """Apply ``kernel`` to z, standard error and half width in standard errors."""
    estimate, standard_error, level = given
    return rowwise(
        lambda estimate, se, bound: kernel(estimate / se, se, bound),
        lambda estimate, se, bound: (
            np.isfinite(estimate) & _above_zero(se) & _above_zero(bound) & applies(estimate / se, bound)
        ),
        estimate,
        standard_error,
        t_quantile_two_sided(level, np.inf),
    )


def _sceptical_rows(
    calibration: Calibration, z_o: FloatArray, z_r: FloatArray, ratio: FloatArray, one_sided: BoolArray
) -> FloatArray:
    upper = _log_upper(calibration, _sceptical_z(z_o, z_r, ratio), ratio)
    against = np.log1p(-np.exp(upper))
    directed = np.where(np.sign(z_o) * np.sign(z_r) < 0, against, upper)
    return np.where(one_sided, directed, LOG_TWO + upper)


def _sceptical_z(z_o: FloatArray, z_r: FloatArray, ratio: FloatArray) -> FloatArray:
    """Positive root of ``(z_o^2/s^2 - 1)(z_r^2/s^2 - 1) = ratio`` in a form that never cancels or overflows."""
    small, large = np.sort(np.abs([z_o, z_r]), axis=0)
    share = np.where(large > 0, small / np.where(large > 0, large, 1.0), 0.0)
    squared = share * share
    root = np.hypot(1 - squared, 2 * np.sqrt(ratio) * share)
    z: FloatArray = small * np.sqrt(2 / (1 + squared + root))
    return z


def _log_upper(calibration: Calibration, z: FloatArray, ratio: FloatArray) -> FloatArray:
    if calibration is Calibration.CONTROLLED:
        return _log_controlled(z, ratio)[0]
    factor = ROOT_GOLDEN if calibration is Calibration.GOLDEN else 1.0
    upper: FloatArray = special.log_ndtr(-factor * z)
    return upper


def _log_controlled(z: FloatArray, ratio: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Half the log of P(both estimates above zero, sceptical z at least ``z``), no effect, and minus its slope.

    With ``x = z_o^2/z^2 - 1`` and ``y = z_r^2/z^2 - 1`` success is ``x y >= ratio``. In polar coordinates the
    radius integrates out; ``x/y = e^(2v)`` on the boundary makes the rest an integral over ``v`` of a function
    that falls doubly exponentially, for which equal steps are as good as exact.
    """
    root = np.sqrt(ratio)
    rate = z * z * root
    excess = NEGLIGIBLE / np.maximum(rate, LEAST_RATE)
    reach = np.log1p(excess + np.sqrt(excess) * np.sqrt(excess + 2))
    middle = np.maximum(-np.log(root), 0.0)
    start = np.maximum(np.minimum(reach, middle) - NEGLIGIBLE, 0.0)
    step = (np.minimum(reach, middle + 2 * NEGLIGIBLE) - start) / NODES
    total, slope = np.zeros_like(z), np.zeros_like(z)
    for node in range(NODES + 1):
        v = start + node * step
        kappa = root * np.cosh(v)
        part = (kappa + ratio) / (2 * np.sqrt(1 + 2 * kappa + ratio) * (1 + kappa))
        part *= np.exp(-2 * rate * np.sinh(v / 2) ** 2) * (0.5 if node == 0 else 1.0)
        total += part
        slope += part * (1 + kappa)
    log_joint = np.log(step) + np.log(total) - LOG_PI - z * z * (1 + root)
    return np.minimum(log_joint / 2, -LOG_TWO), z * slope / total


def _level_rows(calibration: Calibration, log_alpha: FloatArray, ratio: FloatArray) -> FloatArray:
    z = _z_of(log_alpha)
    if calibration is Calibration.GOLDEN:
        z /= ROOT_GOLDEN
    if calibration is Calibration.CONTROLLED:
        z = _controlled_z(log_alpha, ratio)
    level: FloatArray = special.log_ndtr(-z)
    return level


def _controlled_z(log_alpha: FloatArray, ratio: FloatArray) -> FloatArray:
    """Newton's method on a concave log, from above: the probability is at most ``exp(-z^2 (1 + root)) / 4``."""
    z: FloatArray = np.sqrt(2 * (-log_alpha - LOG_TWO) / (1 + np.sqrt(ratio)))
    for _ in range(NEWTON_STEPS):
        reached, fall = _log_controlled(z, ratio)
        z -= np.maximum(log_alpha - reached, 0.0) / fall
    return z


def _z_of(log_alpha: FloatArray) -> FloatArray:
    return z_from_log_p_rows(log_alpha, np.ones(log_alpha.shape, dtype=np.bool_))


def _finite(first: FloatArray, second: FloatArray) -> BoolArray:
    return np.isfinite(first) & np.isfinite(second)


def _above_zero(values: FloatArray) -> BoolArray:
    return np.isfinite(values) & (values > 0)
