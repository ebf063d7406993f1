"""An estimate against the margin of a claim of no effect: two one-sided tests, and the interval that they need.

Schuirmann, Journal of Pharmacokinetics and Biopharmaceutics 15 (1987) 657-680: both one-sided tests at level alpha
reject just where the interval of level 1 - 2 alpha lies within the margin (from memory).
"""

from __future__ import annotations

import numpy as np

from gatecheck import weigh
from gatecheck.columns import Booleans, Columns, Floats, R, T
from gatecheck.model.struct import struct


@struct
class Margins:
    """Estimates against their margins, arrays of shape (n,) on the scale of the estimates less no effect.

    `low` and `high` end the interval of level 1 - 2 alpha (nan where the record does not give enough), `p_low` and
    `p_high` are the p-values against the lower and the upper end of the margin (nan without a standard error).
    """

    low: Floats
    high: Floats
    p_low: Floats
    p_high: Floats


def margins(columns: Columns, alpha: Floats) -> Margins:
    """Compare each estimate with its margin at level `alpha`.

    The interval comes from the standard error where there is one, else from the reported interval: rescaled
    where that is symmetric about its estimate, and as it stands where its level is 1 - 2 alpha or more.
    """
    estimate = columns.estimate
    with np.errstate(all="ignore"):
        error = _standard_error(columns)
        half = weigh.t_quantile_two_sided(1 - 2 * alpha, _df(columns)) * error
        wide_enough = estimate.level >= 1 - 2 * alpha - _SAME_LEVEL
        low = np.where(
            np.isfinite(half), estimate.value.value - half, np.where(wide_enough, estimate.low.value, np.nan)
        )
        high = np.where(
            np.isfinite(half), estimate.value.value + half, np.where(wide_enough, estimate.high.value, np.nan)
        )
        return Margins(
            low,
            high,
            _p(columns, (estimate.value.value - estimate.margin_low) / error),
            _p(columns, (estimate.margin_high - estimate.value.value) / error),
        )


_SAME_LEVEL = 1e-9
_SYMMETRIC = 0.02


def _standard_error(columns: Columns) -> Floats:
    """The standard error reported, or the one that a symmetric interval implies."""
    estimate = columns.estimate
    upper, lower = estimate.high.value - estimate.value.value, estimate.value.value - estimate.low.value
    symmetric = np.abs(upper - lower) <= _SYMMETRIC * (upper + lower)
    multiple = weigh.t_quantile_two_sided(estimate.level, _df(columns))
    implied = np.where(symmetric & ~estimate.adjusted, (upper + lower) / 2 / multiple, np.nan)
    return np.where(estimate.standard_error.known, estimate.standard_error.value, implied)


def _by_t(columns: Columns) -> Booleans:
    return columns.test.is_one_of(T, R) & np.isfinite(columns.test.df1.value)


def _df(columns: Columns) -> Floats:
    return np.where(_by_t(columns), columns.test.df1.value, np.inf)


def _p(columns: Columns, statistic: Floats) -> Floats:
    kind = np.where(_by_t(columns), weigh.Statistic.T, weigh.Statistic.Z)
    df = columns.test.df1.value
    return np.exp(weigh.log_p(kind, statistic, df, df, np.ones(df.shape, np.bool_)))
