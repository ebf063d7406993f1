"""Student's t on few degrees of freedom, two-sided: series and the library's confluent hypergeometric function.

The ratio of densities of ``|t|`` is ``exp(-ncp^2/2) 1F1(a; 1/2; x)``, ``a = (df+1)/2``, ``x = mu^2/2``,
``mu = ncp t / sqrt(t^2 + df)``.

References
----------
NIST Digital Library of Mathematical Functions, 13.2 (series) and 13.7 (large argument).
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy import special

from gatecheck.weigh.arrays import piecewise

if TYPE_CHECKING:
    from gatecheck.weigh.arrays import FloatArray

LARGE_X = 100.0
LARGE_TERMS = 20
SMALL_AX = 0.1
SMALL_TERMS = 14


def few_df_two_sided(
    mu: FloatArray, df: FloatArray, size_ncp: FloatArray, ncp_over_root_q: FloatArray
) -> FloatArray:
    """Log likelihood ratio from ``mu``, ``|ncp|`` and ``|ncp| / sqrt(t^2 + df)``; rows known to be legal."""
    x = mu * mu / 2
    a = (df + 1) / 2
    large, small = x > LARGE_X, a * x < SMALL_AX
    return piecewise(
        [(large, _large_argument), (small, _small_argument), (~large & ~small, _middle_argument)],
        a,
        mu,
        size_ncp,
        ncp_over_root_q,
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
