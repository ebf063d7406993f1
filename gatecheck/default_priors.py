"""The Bayes factor of each record under the default prior that its test has.

Means: a Cauchy prior on the standardised effect. Correlations: a uniform prior on the correlation. Both are folded
onto the direction tested where that is one. Two proportions: independent uniform priors, exact from the counts.
Other single effects (a coefficient of a regression or of a generalised model): the prior worth one observation, by
the Schwarz approximation.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from gatecheck import weigh
from gatecheck.columns import CHI2, Booleans, Columns, F, Floats, R, T, Z
from gatecheck.model.record import Record
from gatecheck.model.struct import struct
from gatecheck.weigh import default_prior
from gatecheck.weigh.proportions import log_bf_proportions

_PROPORTIONS = ("proportion", "fisher")
_PAIR = 2
_UNIFORM = 1.0
_NEARLY = 1e-6


@struct
class Weighed:
    """The statistics as they are weighed and the layout of the units, arrays of shape (n,).

    `two_samples` and `one_sample` say what a t compares; `total` is the number of units or pairs.
    """

    value: Floats
    one_sided: Booleans
    total: Floats
    two_samples: Booleans
    one_sample: Booleans


def log_bf_default(columns: Columns, weighed: Weighed, scales: Floats, times: Floats | float = 1.0) -> Floats:
    """Natural log of the Bayes factor of each row; nan where its test has no default prior here.

    With so many `times` as many units, laid out as they are, and the effect as it was observed.
    """
    proportions = _proportions([one.record for one in columns.found], times)
    means = _means(columns, weighed, scales, times)
    correlations = _correlations(columns, weighed, times)
    other = _unit_information(columns, weighed, times)
    of_means = columns.test.is_one_of(T) & (weighed.two_samples | weighed.one_sample)
    by_test = np.where(of_means | _is_f_of_two_groups(columns), means, other)
    by_test = np.where(columns.test.is_one_of(R), correlations, by_test)
    return np.where(np.isfinite(proportions), np.where(weighed.one_sided, np.nan, proportions), by_test)


def why_no_default_prior(columns: Columns, row: int) -> tuple[str, str]:
    """Say why the test of a row, whose statistic is known, has no default prior, and what to do about it."""
    test, other = columns.test, "name another alternative for such tests in the policy, under `for` with a match"
    if test.is_one_of(CHI2, F)[row] and test.df1.value[row] > 1:
        name = "chi-squared" if test.is_one_of(CHI2)[row] else "F"
        return f"{name} with {test.df1.value[row]:g} df has no default prior, whatever the record gives", other
    if not test.is_one_of(T, R, Z, CHI2, F)[row]:
        return "a test without a likelihood ratio of its own has no default prior, whatever the record gives", other
    if np.isnan(columns.sample.n[row]):
        return "the default prior needs the number of units", "give sample.n, and where there are groups their n"
    return "this test has no default prior in one direction, whatever the record gives", other


def _means(columns: Columns, weighed: Weighed, scales: Floats, times: Floats | float) -> Floats:
    n1, n2, of_two = columns.sample.n1, columns.sample.n2, _is_f_of_two_groups(columns)
    effective = np.where(weighed.two_samples | of_two, n1 * n2 / (n1 + n2), weighed.total) * times
    t = np.where(of_two, np.sqrt(weighed.value), np.where(columns.test.is_one_of(T), weighed.value, np.nan))
    more = np.where(np.isfinite(weighed.total), weighed.total, 0.0) * (times - 1)
    df = np.where(of_two, columns.test.df2.value, columns.test.df1.value) + more
    t *= np.sqrt(times)
    return default_prior.log_bf_t(t, df, effective, scales, one_sided=weighed.one_sided)


def _is_f_of_two_groups(columns: Columns) -> Booleans:
    """F with one degree of freedom between two groups is the square of their t, and weighs as much."""
    test, sample = columns.test, columns.sample
    between_two = (test.df1.value == 1) & (sample.groups == _PAIR)
    alone: Booleans = between_two & (np.abs(test.df2.value - (sample.n1 + sample.n2 - _PAIR)) < _NEARLY)
    return alone & test.is_one_of(F)


def _correlations(columns: Columns, weighed: Weighed, times: Floats | float) -> Floats:
    df = columns.test.df1.value
    r = weigh.r_from_t(np.where(columns.test.is_one_of(R), weighed.value, np.nan), df)
    return default_prior.log_bf_r(r, (df + _PAIR) * times, _UNIFORM, one_sided=weighed.one_sided)


def _unit_information(columns: Columns, weighed: Weighed, times: Floats | float) -> Floats:
    """Single effects only: a statistic of several effects at once has another dimension."""
    test, n = columns.test, columns.sample.n * times
    square = np.where(test.is_one_of(T, Z), weighed.value**2, weighed.value) * times
    error_df = np.where(test.is_one_of(F), test.df2.value, test.df1.value) + columns.sample.n * (times - 1)
    finite = np.where(test.is_one_of(T, F), n / 2 * np.log1p(square / error_df), square / 2)
    single = test.is_one_of(T, Z) | (test.is_one_of(CHI2, F) & (test.df1.value == 1))
    return default_prior.log_bf_unit_information(np.where(single & ~weighed.one_sided, finite, np.nan), n)


def _proportions(records: Sequence[Record], times: Floats | float) -> Floats:
    counts = np.array([_counts(record) for record in records], np.float64).reshape(-1, 4)
    return log_bf_proportions(*(counts.T * times))


def _counts(record: Record) -> tuple[float, float, float, float]:
    """Events and units of both groups where the test compares two proportions; else nan."""
    groups = record.sample.groups if record.sample else ()
    if len(groups) == _PAIR and _compares_proportions(record):
        first, second = groups
        if first.events is not None and second.events is not None:
            return float(first.events), float(first.n), float(second.events), float(second.n)
    return (np.nan,) * 4


def _compares_proportions(record: Record) -> bool:
    test = record.test
    if test is None:
        return False
    named = any(word in (test.name or "").lower() for word in _PROPORTIONS)
    return named or (test.statistic == "chi2" and test.df is not None and test.df[0].value == 1)
