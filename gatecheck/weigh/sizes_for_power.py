"""Least whole number of units, pairs or events at which a test has the power that is wanted.

The number meets the power, and one less (two less, where totals are even) does not.

References
----------
As of :mod:`gatecheck.weigh.power` and :mod:`gatecheck.weigh.equivalence`; Blackwelder, W. C. (1982). "Proving the
null hypothesis" in clinical trials. Controlled Clinical Trials 3, 345-353 (non-inferiority of proportions; from
memory).
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from gatecheck.weigh.arrays import rowwise
from gatecheck.weigh.equivalence import log_scale_sd, power_equivalence
from gatecheck.weigh.power import (
    power_anova,
    power_chi2,
    power_correlation_exact,
    power_correlation_fisher,
    power_log_rank,
    power_one_sample_t,
    power_one_sample_z,
    power_proportions_arcsine,
    power_proportions_pooled,
    power_regression,
    power_two_sample_t,
    power_z,
)

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray

    # From a number of units and the rows' own columns to their power.
    PowerAt = Callable[..., FloatArray]

MOST = 2.0**40


def n_one_sample_t(d: ArrayLike, power: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Least number of units (or of pairs, ``d`` in standard deviations of their differences) for the t test.

    Parameters
    ----------
    d : array_like
        Standardised effect; one-sided rows promise a positive one.
    power : array_like
        Power wanted, strictly between 0 and 1.
    alpha, one_sided : array_like
        As of :func:`gatecheck.weigh.power.power_t`.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain and where no number up to 2^40 serves.
    """
    return _least_sided(_n_at(power_one_sample_t, 1), 2, power, d, alpha, one_sided)


def n_two_sample_t(d: ArrayLike, power: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Least number in each of two equal groups for the pooled t test; see :func:`n_one_sample_t`."""
    return _least_sided(_n_at(power_two_sample_t, 1, 2), 2, power, d, alpha, one_sided)


def n_one_sample_z(d: ArrayLike, power: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Least number of units for the z test of one sample, known variance; see :func:`n_one_sample_t`."""
    return _least_sided(_n_at(power_one_sample_z, 1), 1, power, d, alpha, one_sided)


def n_proportions_arcsine(h: ArrayLike, power: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Least number in each of two equal groups for two proportions by arcsines; see :func:`n_one_sample_t`."""
    return _least_sided(_n_at(power_proportions_arcsine, 1, 2), 1, power, h, alpha, one_sided)


def n_proportions_pooled(
    p1: ArrayLike, p2: ArrayLike, power: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike
) -> FloatArray:
    """Least number in each of two equal groups for the z test of two proportions with pooled variance.

    See :func:`gatecheck.weigh.power.power_proportions_pooled` and :func:`n_one_sample_t`.
    """
    return _least_sided(_n_at(power_proportions_pooled, 2), 1, power, p1, p2, alpha, one_sided)


def n_non_inferiority_proportions(
    p_new: ArrayLike, p_standard: ArrayLike, margin: ArrayLike, power: ArrayLike, alpha: ArrayLike
) -> FloatArray:
    """Least number in each of two equal groups to show a proportion not lower by ``margin`` (above zero).

    One-sided z test at ``alpha`` with each group's own variance; nan where the new one is lower by the margin.
    """
    return _least(_non_inferiority_power, 1, power, p_new, p_standard, margin, alpha)


def n_correlation_exact(rho: ArrayLike, power: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Least number of pairs for the t test of a correlation, exact distribution; see :func:`n_one_sample_t`."""
    return _least_sided(_n_at(power_correlation_exact, 1), 3, power, rho, alpha, one_sided)


def n_correlation_fisher(rho: ArrayLike, power: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Least number of pairs for the z test of ``atanh r``, an approximation; see :func:`n_one_sample_t`."""
    return _least_sided(_n_at(power_correlation_fisher, 1), 4, power, rho, alpha, one_sided)


def n_chi2(w: ArrayLike, df: ArrayLike, power: ArrayLike, alpha: ArrayLike) -> FloatArray:
    """Least number of units in all for the chi-squared test of an effect ``w``; see :func:`n_one_sample_t`."""
    return _least(_n_at(power_chi2, 1), 1, power, w, df, alpha)


def n_anova(f: ArrayLike, groups: ArrayLike, power: ArrayLike, alpha: ArrayLike) -> FloatArray:
    """Least number in each group for the one-way analysis of an effect ``f``; see :func:`n_one_sample_t`."""
    return _least(_n_at(power_anova, 2), 2, power, f, groups, alpha)


def n_regression(f2: ArrayLike, predictors: ArrayLike, power: ArrayLike, alpha: ArrayLike) -> FloatArray:
    """Least number of units for the F test of all so many predictors at once; see :func:`n_one_sample_t`."""
    error_df = _least(_n_at(power_regression, 2), 1, power, f2, predictors, alpha)
    return error_df + (np.asarray(predictors, dtype=np.float64) + 1)


def events_log_rank(
    hazard_ratio: ArrayLike, share: ArrayLike, power: ArrayLike, alpha: ArrayLike, *, one_sided: ArrayLike
) -> FloatArray:
    """Least number of events in both arms for the log-rank test, by Schoenfeld's approximation.

    See :func:`gatecheck.weigh.power.power_log_rank` and :func:`n_one_sample_t`.
    """
    return _least_sided(_n_at(power_log_rank, 1), 1, power, hazard_ratio, share, alpha, one_sided)


def n_equivalence_crossover(
    ratio: ArrayLike, cv: ArrayLike, power: ArrayLike, *, low: ArrayLike, high: ArrayLike, alpha: ArrayLike
) -> FloatArray:
    """Least even number of units in a balanced two-period crossover to show a ratio of means equivalent.

    Parameters
    ----------
    ratio : array_like
        True ratio, above zero.
    cv : array_like
        Coefficient of variation within units, above zero, of log-normal values.
    power : array_like
        Power wanted, strictly between 0 and 1.
    low, high : array_like
        Margins of the ratio, above zero.
    alpha : array_like
        Level of each of the two one-sided tests.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain and where no number serves.
    """
    return _even_total(2.0, ratio, cv, power, low, high, alpha)


def n_equivalence_parallel(
    ratio: ArrayLike, cv: ArrayLike, power: ArrayLike, *, low: ArrayLike, high: ArrayLike, alpha: ArrayLike
) -> FloatArray:
    """Least even number of units in two parallel groups; as the crossover, ``cv`` between units."""
    return _even_total(4.0, ratio, cv, power, low, high, alpha)


def n_equivalence_at_error(  # noqa: PLR0913  # the study as it stands, and what it is to show
    standard_error: ArrayLike,
    df: ArrayLike,
    n: ArrayLike,
    groups: ArrayLike,
    power: ArrayLike,
    *,
    low: ArrayLike,
    high: ArrayLike,
    alpha: ArrayLike,
) -> FloatArray:
    """Least number in each of equal groups at which the absence of an effect is shown, were there none.

    The standard error falls with the root of the number of units, and as many degrees of freedom are added as
    there are new units.

    Parameters
    ----------
    standard_error, df : array_like
        As of :func:`gatecheck.weigh.equivalence.power_equivalence`, in the study as it stands.
    n, groups : array_like
        Units of the study as it stands and number of its groups, above zero.
    power : array_like
        Power wanted, strictly between 0 and 1.
    low, high : array_like
        Margins, less the value of no effect; one may be infinite.
    alpha : array_like
        Level of each of the two one-sided tests.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain and where no number serves.
    """

    def power_at(each: FloatArray, *columns: FloatArray) -> FloatArray:
        error, df, n, groups, low, high, alpha = columns
        total = each * groups
        return power_equivalence(0.0, error * np.sqrt(n / total), df + (total - n), low=low, high=high, alpha=alpha)

    return _least(power_at, 1, power, standard_error, df, n, groups, low, high, alpha)


def _even_total(
    variance: float, ratio: ArrayLike, cv: ArrayLike, power: ArrayLike, *limits: ArrayLike
) -> FloatArray:
    """Search through half totals; the estimate has ``variance / n`` times that of a value."""

    def power_at(half: FloatArray, *columns: FloatArray) -> FloatArray:
        log_ratio, sd, low, high, alpha = columns
        error = sd * np.sqrt(variance / (2 * half))
        return power_equivalence(log_ratio, error, 2 * half - 2, low=low, high=high, alpha=alpha)

    low, high, alpha = limits
    return 2 * _least(power_at, 2, power, _log(ratio), log_scale_sd(cv), _log(low), _log(high), alpha)


def _non_inferiority_power(
    n: FloatArray, p_new: FloatArray, p_standard: FloatArray, margin: FloatArray, alpha: FloatArray
) -> FloatArray:
    ncp = rowwise(
        lambda n, p, q, margin: (p - q + margin) / np.sqrt((p * (1 - p) + q * (1 - q)) / n),
        lambda _, p, q, margin: (p >= 0) & (p <= 1) & (q >= 0) & (q <= 1) & (margin > 0),
        n,
        p_new,
        p_standard,
        margin,
    )
    return power_z(ncp, alpha, one_sided=True)


def _n_at(power_of: PowerAt, *places: int) -> PowerAt:
    """Put first the number of units that ``power_of`` takes in these places among its columns."""

    def power_at(n: FloatArray, *columns: FloatArray, **side: BoolArray) -> FloatArray:
        arguments = list(columns)
        for place in places:
            arguments.insert(place, n)
        return power_of(*arguments, **side)

    return power_at


def _least_sided(power_at: PowerAt, fewest: int, power: ArrayLike, *columns: ArrayLike) -> FloatArray:
    """Search for a test whose last column says whether it is one-sided; ``power_at`` takes that by its name."""

    def power_of_side(n: FloatArray, *others: FloatArray) -> FloatArray:
        *rest, one_sided = others
        return power_at(n, *rest, one_sided=one_sided > 0)

    return _least(power_of_side, fewest, power, *columns)


def _least(power_at: PowerAt, fewest: int, power: ArrayLike, *columns: ArrayLike) -> FloatArray:
    """Find the least whole number, ``fewest`` or more, at which a power that grows with it is ``power``."""
    broadcast = np.broadcast_arrays(*(np.asarray(column, dtype=np.float64) for column in (power, *columns)))
    flat = [column.ravel() for column in broadcast]
    low, high = _bracket(power_at, fewest, flat)
    open_rows = np.flatnonzero(high - low > 1)
    while open_rows.size:
        middle = np.floor((low[open_rows] + high[open_rows]) / 2)
        serves = _serves(power_at, middle, [column[open_rows] for column in flat])
        high[open_rows[serves]] = middle[serves]
        low[open_rows[~serves]] = middle[~serves]
        open_rows = open_rows[high[open_rows] - low[open_rows] > 1]
    return high.reshape(broadcast[0].shape)


def _bracket(power_at: PowerAt, fewest: int, columns: list[FloatArray]) -> tuple[FloatArray, FloatArray]:
    """Double from ``fewest`` on; the upper end is nan where not even the most serve."""
    low, high = np.full_like(columns[0], fewest - 1.0), np.full_like(columns[0], float(fewest))
    open_rows = np.flatnonzero((columns[0] > 0) & (columns[0] < 1))
    high[~((columns[0] > 0) & (columns[0] < 1))] = np.nan
    while open_rows.size:
        serves = _serves(power_at, high[open_rows], [column[open_rows] for column in columns])
        open_rows = open_rows[~serves]
        low[open_rows] = high[open_rows]
        high[open_rows] *= 2
        beyond = high[open_rows] > MOST
        high[open_rows[beyond]] = np.nan
        open_rows = open_rows[~beyond]
    return low, high


def _serves(power_at: PowerAt, n: FloatArray, columns: list[FloatArray]) -> BoolArray:
    power, *others = columns
    return power_at(n, *others) >= power


def _log(column: ArrayLike) -> FloatArray:
    return rowwise(np.log, lambda ratio: ratio > 0, column)
