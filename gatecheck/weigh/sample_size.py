"""How large a study would have to be for the same effect to carry enough evidence."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from gatecheck.weigh.mixed import Statistic, observed_effect

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray

MOST_PER_GROUP = 1e9


def n_to_stand(  # noqa: PLR0913, PLR0917  # one argument a column of the result, and the target
    kind: ArrayLike,
    value: ArrayLike,
    df1: ArrayLike,
    df2: ArrayLike,
    n_total: ArrayLike,
    groups: ArrayLike,
    target_log_lr: ArrayLike,
    *,
    one_sided: ArrayLike,
) -> FloatArray:
    """Least whole number per group at which the observed effect reaches a log likelihood ratio.

    The effect stays as observed. With ``k`` times as many units t and z grow by ``sqrt(k)``, chi-squared
    and F by ``k``, and the error degrees of freedom of t and F by as many as there are new units.

    Parameters
    ----------
    kind, value, df1, df2, one_sided : array_like
        As in :func:`gatecheck.weigh.mixed.observed_effect`.
    n_total : array_like
        Units in the study as it stands, above zero.
    groups : array_like
        Number of groups, taken as equally large; 1 for a single sample.
    target_log_lr : array_like
        Log likelihood ratio to reach.

    Returns
    -------
    ndarray of float64
        Broadcast shape; a whole number, or nan where no number up to 1e9 serves or an input is missing.
    """
    given = (kind, value, df1, df2, n_total, groups, target_log_lr, one_sided)
    columns = np.broadcast_arrays(*(np.asarray(column, dtype=np.float64) for column in given))
    flat = [column.ravel() for column in columns]
    with np.errstate(all="ignore"):
        least = least_that_serves(_fewest_per_group(*flat[:6]), lambda n: _reaches(n, *flat))
    return least.reshape(columns[0].shape)


def least_that_serves(
    fewest: FloatArray, serves: Callable[[FloatArray], BoolArray], most: float = MOST_PER_GROUP
) -> FloatArray:
    """Least whole number from ``fewest`` to ``most`` that ``serves`` row by row; nan where ``most`` does not.

    What serves is taken to serve from some number on.
    """
    low, high = fewest.copy(), np.full_like(fewest, most)
    at_once = serves(low)
    possible = at_once | serves(high)
    # The lower end falls short and the upper end serves, until nothing whole lies between them.
    open_rows = possible & ~at_once
    while open_rows.any():
        middle = np.floor((low + high) / 2)
        enough = serves(middle)
        high = np.where(open_rows & enough, middle, high)
        low = np.where(open_rows & ~enough, middle, low)
        open_rows &= high - low > 1
    return np.where(at_once, low, np.where(possible, high, np.nan))


def _fewest_per_group(
    kind: FloatArray, _: FloatArray, df1: FloatArray, df2: FloatArray, n_total: FloatArray, groups: FloatArray
) -> FloatArray:
    """Return the number per group that leaves at least one error degree of freedom."""
    error_df = np.where(kind == Statistic.T, df1, np.where(kind == Statistic.F, df2, np.inf))
    return np.maximum(np.ceil((n_total - error_df + 1) / groups), 1.0)


def _reaches(n: FloatArray, *columns: FloatArray) -> BoolArray:
    kind, value, df1, df2, n_total, groups, target, one_sided = columns
    grown = n * groups / n_total
    more = n * groups - n_total
    t_like = (kind == Statistic.T) | (kind == Statistic.Z)
    scaled = value * np.where(t_like, np.sqrt(grown), grown)
    log_lr = observed_effect(
        kind,
        scaled,
        np.where(kind == Statistic.T, df1 + more, df1),
        np.where(kind == Statistic.F, df2 + more, df2),
        one_sided > 0,
    )
    return (log_lr >= target) & (n_total > 0) & (groups > 0)
