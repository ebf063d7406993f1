"""The standard error of each estimate, as it is reported or as its interval implies it."""

from __future__ import annotations

import numpy as np

from gatecheck import weigh
from gatecheck.columns import NO_STATISTIC, Booleans, Columns, F, Floats, R, T

_SYMMETRIC = 0.02


def standard_error(columns: Columns) -> Floats:
    """The standard error reported, or the one that a symmetric interval implies; nan where neither tells it."""
    estimate = columns.estimate
    with np.errstate(all="ignore"):
        upper, lower = estimate.high.value - estimate.value.value, estimate.value.value - estimate.low.value
        symmetric = np.abs(upper - lower) <= _SYMMETRIC * (upper + lower)
        multiple = weigh.t_quantile_two_sided(estimate.level, t_df(columns))
        implied = np.where(symmetric & ~estimate.adjusted, (upper + lower) / 2 / multiple, np.nan)
    return np.where(estimate.standard_error.known, estimate.standard_error.value, implied)


def by_t(columns: Columns) -> Booleans:
    """Where the estimate over its standard error is a t."""
    return columns.test.is_one_of(T, R) & np.isfinite(columns.test.df1.value)


def t_df(columns: Columns) -> Floats:
    """Degrees of freedom of the estimate over its standard error; infinite where it is a z."""
    return np.where(by_t(columns), columns.test.df1.value, np.inf)


def error_df(columns: Columns) -> Floats:
    """Degrees of freedom on which the standard error itself is estimated; infinite where it is a z's, or unknown.

    Where the record gives no statistic they are its units less its groups.
    """
    of_f = columns.test.is_one_of(F) & (columns.test.df1.value == 1) & np.isfinite(columns.test.df2.value)
    left = columns.sample.n - np.maximum(columns.sample.groups, 1)
    without = columns.test.is_one_of(NO_STATISTIC) & (left > 0)
    return np.where(of_f, columns.test.df2.value, np.where(without, left, t_df(columns)))
