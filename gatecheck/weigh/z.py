"""Log likelihood ratio of a normal statistic: closed forms."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from gatecheck.weigh.arrays import rowwise

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray


def log_lr_z(z: ArrayLike, ncp: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Natural log of the likelihood ratio, ``ncp`` against zero, of a normal statistic as observed.

    One-sided: ``ncp z - ncp^2/2``. Two-sided, by the density of ``|z|``: ``-ncp^2/2 + log cosh(ncp z)``.

    Parameters
    ----------
    z : array_like
        The statistic; for one-sided rows signed so that the promised direction is positive.
    ncp : array_like
        Mean of the statistic (unit variance) under the alternative, signed in the same way.
    one_sided : array_like of bool
        Whether the direction was fixed beforehand.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan where an input is not finite.
    """
    return rowwise(log_lr_z_rows, _legal, z, ncp, one_sided)


def observed_z(z: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Log likelihood ratio at the effect as observed: ``ncp = |z|``, or ``max(z, 0)`` where one-sided."""
    return rowwise(_observed_rows, _legal_observed, z, one_sided)


def log_lr_z_rows(z: FloatArray, ncp: FloatArray, one_sided: BoolArray) -> FloatArray:
    """Compute rows known to be legal."""
    towards = np.where(one_sided, z * np.sign(ncp), np.abs(z))
    size = np.abs(ncp)
    directed = size * (towards - size / 2)
    folding = np.log1p(np.expm1(-2 * size * towards) / 2)
    return np.where(one_sided, directed, directed + folding)


def _observed_rows(z: FloatArray, one_sided: BoolArray) -> FloatArray:
    return log_lr_z_rows(z, np.where(one_sided, np.maximum(z, 0.0), np.abs(z)), one_sided)


def _legal(z: FloatArray, ncp: FloatArray, _: BoolArray) -> BoolArray:
    return np.isfinite(z) & np.isfinite(ncp)


def _legal_observed(z: FloatArray, _: BoolArray) -> BoolArray:
    return np.isfinite(z)
