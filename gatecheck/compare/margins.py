"""An estimate against the margin of a claim of no effect: two one-sided tests, and the interval that they need.

Schuirmann, Journal of Pharmacokinetics and Biopharmaceutics 15 (1987) 657-680: both one-sided tests at level alpha
reject just where the interval of level 1 - 2 alpha lies within the margin (from memory).
"""

from __future__ import annotations

import numpy as np

from gatecheck import weigh
from gatecheck.columns import CHI2, NO_STATISTIC, Columns, F, Floats, Integers, R
from gatecheck.compare.counts import Counts, counts_behind
from gatecheck.model.struct import struct
from gatecheck.standard_errors import by_t, standard_error, t_df

#: The power that a study of no effect is commonly planned for (common practice, no source).
USUAL_POWER = 0.8


@struct
class Margins:
    """Estimates against their margins, arrays of shape (n,) on the scale of the estimates less no effect.

    `low` and `high` end the interval of level 1 - 2 alpha (nan where the record does not give enough), `p_low` and
    `p_high` are the p-values against the lower and the upper end of the margin (nan without a standard error or
    counts). `error` with `df` is the standard error that a study of this size has where there is no effect, and
    `wanted_low` to `wanted_high` the range in which the interval is to lie, unbounded on a side that the aim
    leaves open.
    """

    low: Floats
    high: Floats
    p_low: Floats
    p_high: Floats
    error: Floats
    df: Floats
    wanted_low: Floats
    wanted_high: Floats
    alpha: Floats


def margins(columns: Columns, alpha: Floats) -> Margins:
    """Compare each estimate with its margin at level `alpha`.

    The interval comes from the standard error where there is one, else from the reported interval: rescaled
    where that is symmetric about its estimate, and as it stands where its level is 1 - 2 alpha or more. A
    difference of two proportions without either is tested by score on the counts of events.
    """
    estimate = columns.estimate
    with np.errstate(all="ignore"):
        error = standard_error(columns)
        half = weigh.t_quantile_two_sided(1 - 2 * alpha, t_df(columns)) * error
        wide_enough = estimate.level >= 1 - 2 * alpha - _SAME_LEVEL
        low = np.where(
            np.isfinite(half), estimate.value.value - half, np.where(wide_enough, estimate.low.value, np.nan)
        )
        high = np.where(
            np.isfinite(half), estimate.value.value + half, np.where(wide_enough, estimate.high.value, np.nan)
        )
        found = Margins(
            low,
            high,
            _p(columns, (estimate.value.value - estimate.margin_low) / error),
            _p(columns, (estimate.margin_high - estimate.value.value) / error),
            error,
            t_df(columns),
            np.where(columns.noninferiority & (columns.test.toward < 0), -np.inf, estimate.margin_low),
            np.where(columns.noninferiority & (columns.test.toward > 0), np.inf, estimate.margin_high),
            alpha,
        )
        rows = np.flatnonzero(columns.no_effect_aim & ~np.isfinite(low) & ~np.isfinite(high))
        return found if not rows.size else _by_counts(columns, found, counts_behind(columns, rows))


def power_if_no_effect(found: Margins, rows: Integers) -> Floats:
    """The power that the tests of `rows` had: how probably the interval lies in the margin if there is no effect.

    nan without a standard error, and where no effect lies at the margin or beyond.
    """
    from gatecheck.weigh.equivalence import power_equivalence  # noqa: PLC0415  # few trees claim no effect

    inside = (found.wanted_low < 0) & (found.wanted_high > 0)
    return power_equivalence(
        0.0,
        np.where(inside, found.error, np.nan)[rows],
        found.df[rows],
        low=found.wanted_low[rows],
        high=found.wanted_high[rows],
        alpha=found.alpha[rows],
    )


def n_for_power(found: Margins, n: Floats, groups: Floats, rows: Integers) -> Floats:
    """The least number of units per group at which the tests of `rows` would have the usual power, else nan.

    `n` are the units that the study had and `groups` the equal groups in which they were.
    """
    from gatecheck.weigh.sizes_for_power import n_equivalence_at_error  # noqa: PLC0415  # few trees claim no effect

    return n_equivalence_at_error(
        found.error[rows],
        found.df[rows],
        n[rows],
        groups[rows],
        USUAL_POWER,
        low=found.wanted_low[rows],
        high=found.wanted_high[rows],
        alpha=found.alpha[rows],
    )


def tests_no_effect(columns: Columns, found: Margins, row: int) -> bool:
    """Whether the test of a row is that of its estimate against no effect, and not one against a margin.

    A test without a statistic, such as an exact one of counts, is taken as named.
    """
    test, estimate = columns.test, columns.estimate
    if test.one_sided[row]:
        return False
    if test.statistic[row] == NO_STATISTIC:
        return True
    statistic = float(test.value.value[row])
    if test.statistic[row] in {CHI2, F}:
        statistic = float(np.sqrt(statistic)) if test.df1.value[row] == 1 else np.nan
    elif test.statistic[row] == R:
        statistic = float(weigh.t_from_r(statistic, test.df1.value[row]))
    size = abs(float(estimate.value.value[row] / found.error[row]))
    return bool(abs(abs(statistic) - size) <= _SAME_STATISTIC * max(size, 1.0))


_SAME_LEVEL = 1e-9
#: Estimate and standard error are reported in few digits (common practice, no source).
_SAME_STATISTIC = 0.05


def _by_counts(columns: Columns, found: Margins, counts: Counts) -> Margins:
    """The same by score on the counts, where they are behind the estimate."""
    from gatecheck.weigh.score import score_interval, score_z  # noqa: PLC0415  # records commonly give the interval

    rows = counts.rows
    given = (counts.events1, counts.n1, counts.events2, counts.n2)
    critical = weigh.t_quantile_two_sided(1 - 2 * found.alpha[rows], np.inf)
    estimate = columns.estimate
    ends = score_interval(*given, critical)
    from_low = score_z(*given, estimate.margin_low[rows] / counts.unit)
    from_high = score_z(*given, estimate.margin_high[rows] / counts.unit)

    def filled(column: Floats, values: Floats) -> Floats:
        column = column.copy()
        column[rows] = values
        return column

    return Margins(
        filled(found.low, ends[0] * counts.unit),
        filled(found.high, ends[1] * counts.unit),
        filled(found.p_low, np.exp(weigh.log_p_z(from_low, one_sided=True))),
        filled(found.p_high, np.exp(weigh.log_p_z(-from_high, one_sided=True))),
        filled(found.error, counts.error_without_effect * counts.unit),
        filled(found.df, np.full(rows.size, np.inf)),
        found.wanted_low,
        found.wanted_high,
        found.alpha,
    )


def _p(columns: Columns, statistic: Floats) -> Floats:
    kind = np.where(by_t(columns), weigh.Statistic.T, weigh.Statistic.Z)
    df = columns.test.df1.value
    return np.exp(weigh.log_p(kind, statistic, df, df, np.ones(df.shape, np.bool_)))
