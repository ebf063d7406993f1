"""What an interval says of its standard error: its half width, its multiple of the error, and how it was made."""

from __future__ import annotations

import numpy as np

from gatecheck import weigh
from gatecheck.columns import CHI2, Booleans, Columns, F, Floats, Interval, R, T, Z
from gatecheck.compare.agreement import in_size, minus, over_ends, overlap, where, widened
from gatecheck.compare.design_names import PAIRED, T_TEST, WITHIN_UNITS, named, says

ESTIMATE, ERROR, INTERVAL, STATISTIC = "the estimate", "the standard error", "the interval", "the statistic"
#: Relative differences that two careful programs may show between multiples of an error (1.96 for 1.959964).
SAME_MULTIPLE = 1e-3
_OTHER_INTERVAL = (
    r"bootstrap|percentile|\bbca\b|profile|credible|posterior|bayes|wilson|clopper|exact|binomial|score|jeffreys"
    r"|newcombe|fieller|jackknife|simultaneous|likelihood"
)
_EFFECT_SIZE = (
    r"standardi[sz]ed|cohen|hedges|glass|\bsmd\b|effect size|\beta\b|eta[- ]?squared|η|omega|\br ?(2|²|squared)"
    r"|cram[eé]r|\bphi\b|correlation|median|hodges|shift|\bauc\b|common language|rank|dominance|cliff"
)
_OF_MEANS = rf"{T_TEST}|{PAIRED}|linear (?:regression|model)|\bols\b|\blm\b|ancova|analysis of covariance"
_NOT_PLAIN = rf"{WITHIN_UNITS}|generali[sz]ed|quasi|non-?linear|weighted|rank|\bsigned|wilcoxon|trimm|yuen|log-"
_BY_RANKS = r"\brank|wilcoxon|mann|kruskal|signed"


def half_width(columns: Columns) -> Interval:
    """Half the width of the interval where it is symmetric about the estimate within rounding; else nan.

    An interval that is not (profile, bootstrap, exact) was made another way, and its width says nothing of
    the standard error.
    """
    low, value, high = columns.estimate.low, columns.estimate.value, columns.estimate.high
    upper, lower = minus(high, value), minus(value, low)
    slack = SAME_MULTIPLE * np.abs(high.value - low.value)
    symmetric = (upper.low <= lower.high + slack) & (lower.low <= upper.high + slack)
    return where(symmetric, over_ends(lambda end: end / 2, minus(high, low)))


def own_df(columns: Columns) -> Floats:
    """The df of the estimate over its standard error where the test tells them; infinite for a z, else nan."""
    test = columns.test
    of_f = np.where(test.is_one_of(F) & (test.df1.value == 1), test.df2.low, np.nan)
    return np.where(test.is_one_of(T, R), test.df1.low, np.where(test.is_one_of(Z), np.inf, of_f))


def multiples(columns: Columns) -> tuple[Floats, Floats]:
    """The least and the greatest multiple of the standard error that an interval of this level may use.

    That of the normal, and where a t with its df is reported that of the t; without a statistic the df are not
    known, so nothing bounds it from above.
    """
    level, df = columns.estimate.level, own_df(columns)
    normal = weigh.t_quantile_two_sided(level, np.full_like(level, np.inf))
    student = weigh.t_quantile_two_sided(level, df)
    most = np.where(np.isfinite(student), student, np.inf)
    return normal * (1 - SAME_MULTIPLE), most * (1 + SAME_MULTIPLE)


def otherwise_made(columns: Columns, rows: Booleans) -> Booleans:
    """Which of these rows say that their interval is no multiple of a standard error."""
    found = named(columns, rows, _OTHER_INTERVAL)
    for row in np.flatnonzero(rows & ~found).tolist():
        record = columns.found[row].record
        told = ((record.estimate.measure if record.estimate else ""), *record.tags)
        found[row] = any(says(_OTHER_INTERVAL, text) for text in told)
    return found


def of_plain_t(columns: Columns, rows: Booleans) -> Booleans:
    """Which of these rows have a t that is the estimate over its error, in a test of means or a linear model.

    Unless it is said to be made another way, their interval is of that same error.
    """
    test, error = columns.test, columns.estimate.standard_error
    size = in_size(columns.estimate.value)
    ratio = Interval(size.value / error.value, size.low / error.high, size.high / error.low)
    same = rows & test.is_one_of(T) & overlap(in_size(test.value), widened(ratio, SAME_MULTIPLE))
    return named(columns, same, _OF_MEANS) & ~named(columns, same, _NOT_PLAIN)


def apart_from_test(columns: Columns, rows: Booleans) -> Booleans:
    """Which of these rows estimate what their test does not test by an error of its own.

    The error of a standardised difference is not that of the raw one; squared and ranked effects have none.
    """
    found = named(columns, rows, _BY_RANKS)
    for row in np.flatnonzero(rows & ~found).tolist():
        estimate = columns.found[row].record.estimate
        found[row] = estimate is not None and says(_EFFECT_SIZE, estimate.measure)
    return found


def statistic_size(columns: Columns) -> Interval:
    """The size of a statistic on one df, as that of an estimate over its standard error; else nan."""
    test = columns.test
    squared = test.is_one_of(CHI2, F) & (test.df1.value == 1)
    roots = over_ends(lambda end: np.sqrt(np.maximum(end, 0)), test.value)
    return where(test.is_one_of(T, Z), in_size(test.value), where(squared, roots))
