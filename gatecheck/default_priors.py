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


def log_bf_default(columns: Columns, weighed: Weighed, scales: Floats) -> Floats:
    """Natural log of the Bayes factor of each row; nan where its test has no default prior here."""
    proportions = _proportions([one.record for one in columns.found])
    means = _means(columns, weighed, scales)
    correlations = _correlations(columns, weighed)
    other = _unit_information(columns, weighed)
    by_test = np.where(weighed.two_samples | weighed.one_sample, means, other)
    by_test = np.where(columns.test.is_one_of(Z, CHI2, F), other, by_test)
    by_test = np.where(columns.test.is_one_of(R), correlations, by_test)
    return np.where(np.isfinite(proportions), np.where(weighed.one_sided, np.nan, proportions), by_test)


def _means(columns: Columns, weighed: Weighed, scales: Floats) -> Floats:
    n1, n2 = columns.sample.n1, columns.sample.n2
    effective = np.where(weighed.two_samples, n1 * n2 / (n1 + n2), weighed.total)
    is_t = columns.test.is_one_of(T)
    t = np.where(is_t, weighed.value, np.nan)
    return default_prior.log_bf_t(t, columns.test.df1.value, effective, scales, one_sided=weighed.one_sided)


def _correlations(columns: Columns, weighed: Weighed) -> Floats:
    df = columns.test.df1.value
    r = weigh.r_from_t(np.where(columns.test.is_one_of(R), weighed.value, np.nan), df)
    return default_prior.log_bf_r(r, df + _PAIR, _UNIFORM, one_sided=weighed.one_sided)


def _unit_information(columns: Columns, weighed: Weighed) -> Floats:
    """Single effects only: a statistic of several effects at once has another dimension."""
    test, n = columns.test, columns.sample.n
    square = np.where(test.is_one_of(T, Z), weighed.value**2, weighed.value)
    error_df = np.where(test.is_one_of(F), test.df2.value, test.df1.value)
    finite = np.where(test.is_one_of(T, F), n / 2 * np.log1p(square / error_df), square / 2)
    single = test.is_one_of(T, Z) | (test.is_one_of(CHI2, F) & (test.df1.value == 1))
    return default_prior.log_bf_unit_information(np.where(single & ~weighed.one_sided, finite, np.nan), n)


def _proportions(records: Sequence[Record]) -> Floats:
    counts = np.array([_counts(record) for record in records], np.float64).reshape(-1, 4)
    return log_bf_proportions(*counts.T)


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
