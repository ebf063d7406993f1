"""How much evidence a statistic can give at the very most, over classes of alternatives, in logarithms.

Also the alternatives of the uniformly most powerful Bayesian tests, which ask for a fixed amount of evidence.

References
----------
Edwards, W., Lindman, H. & Savage, L. J. (1963). Bayesian statistical inference for psychological research.
Psychological Review 70(3), 193-242 (the bounds; from memory).
Berger, J. O. & Sellke, T. (1987). Testing a point null hypothesis: the irreconcilability of P values and evidence.
Journal of the American Statistical Association 82(397), 112-122 (two-point and normal priors; abstract seen).
Johnson, V. E. (2013). Uniformly most powerful Bayesian tests. Annals of Statistics 41(4), 1716-1741 (not seen).
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from gatecheck.weigh.arrays import rowwise
from gatecheck.weigh.quantiles import z_from_log_p_rows
from gatecheck.weigh.z import log_lr_z_rows

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray

# Enough from the start chosen, however close the statistic is to 1.
NEWTON_STEPS = 12
# Squares of larger numbers overflow.
SAFE_TO_SQUARE = 1e150


def log_lr_normal_bound(z: ArrayLike) -> FloatArray:
    """Natural log of the largest likelihood ratio of a normal statistic over all alternatives: ``z^2/2``.

    Its inverse ``exp(-z^2/2)`` is the minimum Bayes factor. nan where ``z`` is not finite or its square overflows.
    """
    return rowwise(lambda z: z * z / 2, _can_be_squared, z)


def log_lr_local_normal_bound(z: ArrayLike) -> FloatArray:
    """Natural log of the largest Bayes factor over normal priors centred on no effect.

    ``(z^2-1)/2 - log|z|`` from ``|z| = 1`` on, where the prior adds ``z^2 - 1`` to the variance; 0 below, where it
    adds nothing. nan where ``z`` is not finite or its square overflows.
    """
    return rowwise(_local_normal_rows, _can_be_squared, z)


def log_lr_folded_bound(z: ArrayLike) -> FloatArray:
    """Natural log of the largest likelihood ratio of ``|z|`` over two opposite effects, each as likely.

    The maximum over ``d`` of ``-d^2/2 + log cosh(d z)``; 0 up to ``|z| = 1``. nan where ``z`` is not finite or its
    square overflows.
    """
    return rowwise(_folded_rows, _can_be_squared, z)


def log_lr_t_bound(t: ArrayLike, df: ArrayLike) -> FloatArray:
    """Natural log of the largest likelihood ratio of the data behind Student's t, the variance profiled out.

    Parameters
    ----------
    t : array_like
        The statistic.
    df : array_like
        Degrees of freedom, above zero; infinity means the normal distribution.

    Returns
    -------
    ndarray of float64
        ``(df+1)/2 log(1 + t^2/df)`` in the broadcast shape; nan outside the domain.
    """
    return rowwise(_t_rows, lambda t, df: np.isfinite(t) & (df > 0), t, df)


def log_umpbt_threshold(alpha: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Natural log of the evidence that the uniformly most powerful Bayesian test of size ``alpha`` asks for.

    Parameters
    ----------
    alpha : array_like
        Size of the test: above zero, at most 1/2 one-sided and 1 two-sided.
    one_sided : array_like of bool
        Whether the direction was fixed beforehand; otherwise it is two one-sided tests of half the size.

    Returns
    -------
    ndarray of float64
        ``z^2/2`` at the critical value, in the broadcast shape; nan outside the domain.
    """
    return rowwise(_threshold_rows, _is_size, alpha, one_sided)


def umpbt_z(log_threshold: ArrayLike) -> FloatArray:
    """Mean of a normal statistic under the alternative that passes an evidence threshold most often.

    ``sqrt(2 log_threshold)``: also the critical value, which :func:`log_umpbt_threshold` turns back. nan where the
    log threshold is negative or not finite.
    """
    return rowwise(lambda size: np.sqrt(2 * size), _is_threshold, log_threshold)


def umpbt_t(log_threshold: ArrayLike, df: ArrayLike) -> FloatArray:
    """Non-centrality of Student's t under the (approximate) alternative that passes a threshold most often.

    ``sqrt(df (threshold^(2/(df+1)) - 1))``: also the critical value, at which :func:`log_lr_t_bound` is the
    threshold.

    Parameters
    ----------
    log_threshold : array_like
        Natural log of the evidence asked for, not negative.
    df : array_like
        Degrees of freedom, above zero; infinity means the normal distribution.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain, infinite where it lies beyond the largest double.
    """
    return rowwise(_umpbt_t_rows, lambda size, df: _is_threshold(size) & (df > 0), log_threshold, df)


def _local_normal_rows(z: FloatArray) -> FloatArray:
    size = np.maximum(np.abs(z), 1.0)
    bound: FloatArray = (size - 1) * (size + 1) / 2 - np.log(size)
    return bound


def _folded_rows(z: FloatArray) -> FloatArray:
    size = np.abs(z)
    square = size * size
    # The product x of z and the effect solves x = z^2 tanh x; the difference is convex, its root at or above here.
    x = np.sqrt(3 * np.maximum(square - 1, 0.0))
    for _ in range(NEWTON_STEPS):
        tangent = np.tanh(x)
        slope = 1 - square * (1 - tangent) * (1 + tangent)
        x -= np.where(slope > 0, (x - square * tangent) / slope, 0.0)
    effect = np.where(size > 1, x / size, 0.0)
    return np.maximum(log_lr_z_rows(size, effect, np.zeros(size.shape, dtype=np.bool_)), 0.0)


def _t_rows(t: FloatArray, df: FloatArray) -> FloatArray:
    size = np.abs(t)
    relative = size / np.sqrt(df)
    log_one_plus_square = np.where(
        relative < SAFE_TO_SQUARE, np.log1p(relative * relative), 2 * (np.log(size) - np.log(df) / 2)
    )
    return np.where(np.isinf(df), size * size / 2, (df + 1) / 2 * log_one_plus_square)


def _threshold_rows(alpha: FloatArray, one_sided: BoolArray) -> FloatArray:
    z = z_from_log_p_rows(np.log(alpha), one_sided)
    return z * z / 2


def _umpbt_t_rows(log_threshold: FloatArray, df: FloatArray) -> FloatArray:
    grown = np.sqrt(df) * np.sqrt(np.expm1(2 * log_threshold / (df + 1)))
    return np.where(np.isinf(df), np.sqrt(2 * log_threshold), grown)


def _can_be_squared(z: FloatArray) -> BoolArray:
    return np.abs(z) < SAFE_TO_SQUARE


def _is_threshold(log_threshold: FloatArray) -> BoolArray:
    return np.isfinite(log_threshold) & (log_threshold >= 0)


def _is_size(alpha: FloatArray, one_sided: BoolArray) -> BoolArray:
    return (alpha > 0) & (alpha <= np.where(one_sided, 0.5, 1.0))
