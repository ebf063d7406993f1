"""Pool estimates with standard errors: one common effect, or effects that differ from study to study.

Many poolings at once: each row is an estimate, and rows with the same group number are pooled. Sums run over
weights relative to the largest of the group, so that units do not matter and nothing overflows.

References
----------
Cochran, W. G. (1954). The combination of estimates from different experiments. Biometrics 10, 101-129 (Q).
DerSimonian, R. & Laird, N. (1986). Meta-analysis in clinical trials. Controlled Clinical Trials 7, 177-188.
Paule, R. C. & Mandel, J. (1982). Consensus values and weighting factors. Journal of Research of the National
Bureau of Standards 87, 377-385.
Hartung, J. & Knapp, G. (2001). A refined method for the meta-analysis of controlled clinical trials with binary
outcome. Statistics in Medicine 20, 3875-3889.
Higgins, J. P. T. & Thompson, S. G. (2002). Quantifying heterogeneity in a meta-analysis. Statistics in Medicine
21, 1539-1558 (I squared).
Higgins, J. P. T., Thompson, S. G. & Spiegelhalter, D. J. (2009). A re-evaluation of random-effects meta-analysis.
Journal of the Royal Statistical Society A 172, 137-159 (the prediction interval).
Meier, P. (1953). Variance of a weighted mean. Biometrics 9, 59-73.
Satterthwaite, F. E. (1946). An approximate distribution of estimates of variance components. Biometrics Bulletin 2,
110-114. All from memory.
"""

from __future__ import annotations

from enum import Enum
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from gatecheck.weigh.quantiles import t_quantile_two_sided
from gatecheck.weigh.tails import log_p_chi2, log_p_t

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    from gatecheck.weigh.arrays import FloatArray

# Newton's steps end where the generalised Q exceeds its expectation by no more than this share of it.
CLOSE_ENOUGH = 1e-14
# On fewer degrees of freedom chance would choose the weights: the study whose units happen to vary least would
# count most, and seem surer than it is (common practice, no source).
ENOUGH_DF = 30.0


class Spread(Enum):
    """How the variance between studies is estimated."""

    DERSIMONIAN_LAIRD = "moments, one step"
    PAULE_MANDEL = "generalised Q equals its expectation"


class Pooled(NamedTuple):
    """What pooling gives, each an array of shape (groups,).

    ``standard_error`` belongs to ``estimate`` on ``df`` degrees of freedom (infinite: normal). ``q`` is Cochran's
    Q on ``studies - 1``, ``log_p_q`` the natural log of its p value, ``i2`` the share of the variation that is
    between studies (0 to 1) and ``tau2`` the variance between studies in squared units of the estimates (0 where
    one common effect is assumed).
    """

    studies: FloatArray
    estimate: FloatArray
    standard_error: FloatArray
    df: FloatArray
    q: FloatArray
    log_p_q: FloatArray
    i2: FloatArray
    tau2: FloatArray


class _Rows(NamedTuple):
    """Estimates, squared standard errors in units of the least of their group, and their groups."""

    estimates: FloatArray
    variances: FloatArray
    groups: NDArray[np.int64]
    unit: FloatArray
    studies: FloatArray


def pool_fixed(estimates: ArrayLike, standard_errors: ArrayLike, groups: ArrayLike = 0) -> Pooled:
    """Pool under one common effect, weighted by the inverse of the squared standard errors.

    Parameters
    ----------
    estimates, standard_errors : array_like
        Broadcast to shape (rows,); standard errors above zero.
    groups : array_like of int
        The group of each row, 0 or above, in any order; one number for all rows pools them all.

    Returns
    -------
    Pooled
        Shape (largest group number + 1,). One study alone shows no spread: its q, i2 and tau2 are 0. All
        but ``studies`` is nan in a group without rows, or with a row that is not finite or whose standard error is
        not above zero.

    Raises
    ------
    ValueError
        If a group number is not whole or is negative.
    """
    rows = _rows(estimates, standard_errors, groups)
    with np.errstate(all="ignore"):
        return _pooled(rows, np.zeros_like(rows.unit))


def pool_random(
    estimates: ArrayLike,
    standard_errors: ArrayLike,
    groups: ArrayLike = 0,
    *,
    spread: Spread,
    hartung_knapp: bool,
) -> Pooled:
    """Pool effects that differ from study to study with variance ``tau2``.

    Parameters
    ----------
    estimates, standard_errors, groups : array_like
        As in :func:`pool_fixed`.
    spread : Spread
        Estimator of ``tau2``, which is 0 where Q does not exceed its degrees of freedom.
    hartung_knapp : bool
        Whether the standard error comes from the weighted residuals, on ``studies - 1`` degrees of freedom, in
        Hartung and Knapp's way (not widened where the studies agree by chance; nan for one study alone).

    Returns
    -------
    Pooled
        As in :func:`pool_fixed`.

    Raises
    ------
    ValueError
        If a group number is not whole or is negative.
    """
    rows = _rows(estimates, standard_errors, groups)
    estimator = _dersimonian_laird if spread is Spread.DERSIMONIAN_LAIRD else _paule_mandel
    with np.errstate(all="ignore"):
        tau2 = estimator(rows)
        pooled = _pooled(rows, tau2)
        return _hartung_knapp(rows, tau2, pooled) if hartung_knapp else pooled


def pool_estimated(
    estimates: ArrayLike,
    standard_errors: ArrayLike,
    df: ArrayLike,
    sizes: ArrayLike,
    groups: ArrayLike = 0,
    *,
    random: bool,
) -> Pooled:
    """Pool estimates whose standard errors are themselves estimated: the pooled effect has a t, and no z.

    Where all rows of a group have at least ``ENOUGH_DF`` degrees of freedom they are weighed by the inverse of
    their squared standard errors, and Meier's factor allows for weights that are estimated; else as if their units
    varied alike, which leaves the choice of weights to the sizes. Either way the standard error comes from those of
    the rows, with Satterthwaite's degrees of freedom.

    With variance between three or more rows these are ``studies - 1`` at most, which is Hartung and Knapp's way and
    never narrower than the ordinary one: at Paule and Mandel's variance their factor on the standard error is 1.

    Parameters
    ----------
    estimates, standard_errors, groups : array_like
        As in :func:`pool_fixed`.
    df : array_like
        Degrees of freedom of the standard errors, above zero; infinite where one is known.
    sizes : array_like
        What the squared standard errors are inverse to where units vary alike, in any unit and above zero; not used
        where the degrees of freedom suffice.
    random : bool
        Whether effects differ from row to row, with Paule and Mandel's variance between them.

    Returns
    -------
    Pooled
        As in :func:`pool_fixed`; q, i2 and tau2 rest on the standard errors by which the rows are weighed.

    Raises
    ------
    ValueError
        If a group number is not whole or is negative.
    """
    rows = _rows(estimates, standard_errors, groups)
    nu, size = (np.broadcast_to(np.asarray(each, dtype=np.float64), rows.groups.shape) for each in (df, sizes))
    with np.errstate(all="ignore"):
        by_size = (_sum(rows, (nu < ENOUGH_DF).astype(np.float64)) > 0)[rows.groups]
        weighing = rows._replace(variances=np.where(by_size, _alike(rows, size), rows.variances))
        tau2 = _paule_mandel(weighing) if random else np.zeros_like(rows.unit)
        weights, _, total = _weighted(weighing, tau2)
        shares = weights / total[rows.groups]
        own = shares**2 * rows.variances
        by_chance = np.where(by_size, 0.0, 4 * shares * (1 - shares) / nu)
        variance = _sum(rows, own) * (1 + _sum(rows, by_chance)) + tau2 * _sum(rows, shares**2)
        own_df = _sum(rows, own) ** 2 / _sum(rows, own**2 / nu)
        most = np.where((tau2 > 0) & (rows.studies > 2), rows.studies - 1, np.inf)  # noqa: PLR2004
        return _pooled(weighing, tau2)._replace(
            standard_error=rows.unit * np.sqrt(variance), df=np.minimum(own_df, most)
        )


def log_p_pooled(pooled: Pooled, null: ArrayLike = 0.0) -> FloatArray:
    """Natural log of the two-sided p value of the pooled effects against ``null``; nan at a zero standard error."""
    with np.errstate(all="ignore"):
        distance = pooled.estimate - np.asarray(null, dtype=np.float64)
        return log_p_t(distance / pooled.standard_error, pooled.df, one_sided=False)


def interval(pooled: Pooled, level: ArrayLike) -> tuple[FloatArray, FloatArray]:
    """Lower and upper confidence limits of the pooled effects at ``level`` (0 to below 1)."""
    half = t_quantile_two_sided(level, pooled.df) * pooled.standard_error
    return pooled.estimate - half, pooled.estimate + half


def prediction_interval(pooled: Pooled, level: ArrayLike) -> tuple[FloatArray, FloatArray]:
    """Limits within which the true effect of one more study lies, at ``level``: t on ``studies - 2``.

    Other texts take ``studies - 1`` or the normal distribution; nan where there are fewer than three studies.
    """
    spread = np.hypot(np.sqrt(pooled.tau2), pooled.standard_error)
    half = t_quantile_two_sided(level, pooled.studies - 2) * spread
    return pooled.estimate - half, pooled.estimate + half


def _rows(estimates: ArrayLike, standard_errors: ArrayLike, groups: ArrayLike) -> _Rows:
    numbers = np.asarray(groups)
    if not np.issubdtype(numbers.dtype, np.integer) or (numbers < 0).any():
        raise ValueError("groups must be whole numbers, 0 or above: give each row the number of its group")
    y, errors, of_group = (
        np.atleast_1d(column)
        for column in np.broadcast_arrays(
            np.asarray(estimates, dtype=np.float64),
            np.asarray(standard_errors, dtype=np.float64),
            numbers.astype(np.int64),
        )
    )
    legal = np.isfinite(y) & np.isfinite(errors) & (errors > 0)
    y, errors = np.where(legal, y, np.nan), np.where(legal, errors, np.nan)
    studies = np.bincount(of_group).astype(np.float64)
    unit = np.full(studies.size, np.inf)
    with np.errstate(invalid="ignore"):
        np.minimum.at(unit, of_group, errors)
    unit[studies == 0] = np.nan
    return _Rows(y / unit[of_group], (errors / unit[of_group]) ** 2, of_group, unit, studies)


def _sum(rows: _Rows, values: FloatArray) -> FloatArray:
    summed: FloatArray = np.bincount(rows.groups, weights=values, minlength=rows.unit.size).astype(np.float64)
    return summed


def _weighted(rows: _Rows, tau2: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Weights of the rows, and mean and sum of the weights of the groups; ``tau2`` in squared units."""
    weights = 1 / (rows.variances + tau2[rows.groups])
    total = _sum(rows, weights)
    return weights, _sum(rows, weights * rows.estimates) / total, total


def _generalised_q(rows: _Rows, tau2: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Weighted sum of squared residuals, and minus its derivative by ``tau2``."""
    weights, mean, _ = _weighted(rows, tau2)
    squares = weights * (rows.estimates - mean[rows.groups]) ** 2
    return _sum(rows, squares), _sum(rows, weights * squares)


def _pooled(rows: _Rows, tau2: FloatArray) -> Pooled:
    _, mean, total = _weighted(rows, tau2)
    q, _ = _generalised_q(rows, np.zeros_like(tau2))
    q = np.where(rows.studies > 1, q, np.where(np.isnan(mean), np.nan, 0.0))
    excess = _at_least_zero(q - (rows.studies - 1), q > 0)
    return Pooled(
        studies=rows.studies,
        estimate=mean * rows.unit,
        standard_error=rows.unit / np.sqrt(total),
        df=np.where(np.isnan(mean), np.nan, np.inf),
        q=q,
        log_p_q=np.where(rows.studies == 1, q, log_p_chi2(q, rows.studies - 1)),
        i2=np.where(q > 0, excess / q, q),
        tau2=tau2 * rows.unit**2,
    )


def _dersimonian_laird(rows: _Rows) -> FloatArray:
    none = np.zeros_like(rows.unit)
    q, _ = _generalised_q(rows, none)
    weights, _, total = _weighted(rows, none)
    scale = total - _sum(rows, weights * weights) / total
    return _at_least_zero((q - (rows.studies - 1)) / scale, rows.studies > 1)


def _paule_mandel(rows: _Rows) -> FloatArray:
    """Solve ``Q(tau2) = studies - 1`` by Newton's method on the concave ``1/Q``: from below, never too far."""
    df = rows.studies - 1
    tau2 = np.zeros_like(rows.unit)
    q, fall = _generalised_q(rows, tau2)
    while (rising := (df > 0) & (q > df * (1 + CLOSE_ENOUGH))).any():
        tau2 += np.where(rising, q * (q / df - 1) / fall, 0.0)
        q, fall = _generalised_q(rows, tau2)
    return tau2


def _hartung_knapp(rows: _Rows, tau2: FloatArray, pooled: Pooled) -> Pooled:
    df = rows.studies - 1
    q, _ = _generalised_q(rows, tau2)
    return pooled._replace(
        standard_error=pooled.standard_error * np.sqrt(q / df), df=np.where(np.isnan(pooled.df), np.nan, df)
    )


def _alike(rows: _Rows, sizes: FloatArray) -> FloatArray:
    """The squared standard errors that rows of these sizes would have if the units of all varied alike."""
    of_unit = _sum(rows, sizes**2 * rows.variances) / _sum(rows, sizes)
    alike: FloatArray = of_unit[rows.groups] / sizes
    return alike


def _at_least_zero(values: FloatArray, counts: NDArray[np.bool_]) -> FloatArray:
    return np.where(counts, np.maximum(values, 0.0), 0.0)
