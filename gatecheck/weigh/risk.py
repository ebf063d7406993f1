"""From a likelihood ratio and a prior to the risk that a claimed effect is none, and back.

All of it happens in log odds, so that a risk of 1e-300 keeps its digits.

References
----------
Colquhoun, D. (2017). The reproducibility of research and the misinterpretation of p-values. Royal Society
Open Science 4, 171085 (false positive risk and the prior needed; from memory).
Sellke, T., Bayarri, M. J. & Berger, J. O. (2001). Calibration of p values for testing precise null
hypotheses. The American Statistician 55(1), 62-71 (the bound).
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy import special

from gatecheck.weigh.arrays import CHUNK, rowwise

if TYPE_CHECKING:
    from collections.abc import Iterator

    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray

_NEWTON_STEPS = 12


def false_positive_risk(log_lr: ArrayLike, prior: ArrayLike) -> FloatArray:
    """Probability that there is no effect, given the result: ``1 / (1 + LR prior/(1-prior))``.

    Parameters
    ----------
    log_lr : array_like
        Natural log of the likelihood ratio, effect over none.
    prior : array_like
        Probability of a real effect before the result, from 0 to 1.

    Returns
    -------
    ndarray of float64
        Broadcast shape, 0 to 1; nan where the ratio is nan or the prior no probability.
    """
    return _complement_of_posterior(log_lr, prior)


def log_false_positive_risk(log_lr: ArrayLike, prior: ArrayLike) -> FloatArray:
    """Natural log of :func:`false_positive_risk`, right where the risk itself underflows; same arguments."""
    return rowwise(lambda log_lr, prior: special.log_expit(-(log_lr + special.logit(prior))), _legal, log_lr, prior)


def prior_needed(log_lr: ArrayLike, risk: ArrayLike) -> FloatArray:
    """Prior probability of an effect at which the false positive risk is exactly ``risk`` (0 to 1).

    What prior and risk are to each other is the same both ways: the risk at a prior of ``risk`` is that prior.
    """
    return _complement_of_posterior(log_lr, risk)


def log_lr_needed(prior: ArrayLike, risk: ArrayLike) -> FloatArray:
    """Natural log of the likelihood ratio at which ``prior`` leaves exactly ``risk``.

    Infinite where the prior or the risk is 0 or 1 and no finite ratio serves; nan where they contradict.
    """
    return rowwise(
        _needed_rows,
        lambda prior, risk: _is_probability(prior) & _is_probability(risk),
        prior,
        risk,
    )


def log_lr_bound(log_p: ArrayLike) -> FloatArray:
    """Natural log of the upper bound ``1 / (-e p ln p)`` on the likelihood ratio; 0 from ``p = 1/e`` on.

    ``log_p`` is the natural log of a two-sided p value, at most zero; nan outside the domain.
    """
    return rowwise(_bound_rows, _is_log_p, log_p)


def log_p_for_bound(log_lr: ArrayLike) -> FloatArray:
    """Natural log of the p value at which :func:`log_lr_bound` is ``log_lr`` (above zero); else nan.

    Solves ``s - 1 - ln s = L`` for ``s = -ln p > 1`` by Newton's method, from above: the left side is convex.
    """
    return rowwise(_for_bound_rows, lambda log_lr: np.isfinite(log_lr) & (log_lr > 0), log_lr)


def _complement_of_posterior(log_lr: ArrayLike, probability: ArrayLike) -> FloatArray:
    """``1 / (1 + LR odds)``; what is no probability has odds without a logarithm, and comes out as nan.

    It is asked for every record at every prior, so that the fast functions are used, and in place: they keep the
    digits of the smallest risks, and what overflows is a risk of zero.
    """
    evidence, chance = np.asarray(log_lr, np.float64), np.asarray(probability, np.float64)
    result = np.empty(np.broadcast_shapes(evidence.shape, chance.shape))
    with np.errstate(all="ignore"):
        np.add(evidence, _log_odds(chance), out=result)
        for rows in _in_chunks(result):
            np.exp(rows, out=rows)
            np.add(rows, 1.0, out=rows)
            np.divide(1.0, rows, out=rows)
    return result


def _log_odds(chance: FloatArray) -> FloatArray:
    odds = np.empty(chance.shape)
    for rows, chances in zip(_in_chunks(odds), _in_chunks(chance), strict=True):
        np.subtract(1.0, chances, out=rows)
        np.divide(chances, rows, out=rows)
        np.log(rows, out=rows)
    return odds


def _in_chunks(values: FloatArray) -> Iterator[FloatArray]:
    flat = values.reshape(-1)
    return (flat[start : start + CHUNK] for start in range(0, flat.size, CHUNK))


def _needed_rows(prior: FloatArray, risk: FloatArray) -> FloatArray:
    needed: FloatArray = -(special.logit(risk) + special.logit(prior))
    return needed


def _for_bound_rows(log_lr: FloatArray) -> FloatArray:
    size = 1 + log_lr + np.sqrt(2 * log_lr)
    for _ in range(_NEWTON_STEPS):
        slope = 1 - 1 / size
        size -= np.where(slope > 0, (size - 1 - np.log(size) - log_lr) / slope, 0.0)
    return -size


def _bound_rows(log_p: FloatArray) -> FloatArray:
    size = np.maximum(-log_p, 1.0)
    return size - 1 - np.log(size)


def _is_log_p(log_p: FloatArray) -> BoolArray:
    return np.isfinite(log_p) & (log_p <= 0)


def _is_probability(p: FloatArray) -> BoolArray:
    return (p >= 0) & (p <= 1)


def _legal(log_lr: FloatArray, probability: FloatArray) -> BoolArray:
    return ~np.isnan(log_lr) & _is_probability(probability)
