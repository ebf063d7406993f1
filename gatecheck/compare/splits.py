"""The sizes of the groups against the split that was planned."""

from __future__ import annotations

import numpy as np

from gatecheck import weigh
from gatecheck.columns import Booleans, Columns, Floats
from gatecheck.model.record import Sample
from gatecheck.model.struct import struct

#: Up to so many units in two groups, p is summed over every split; chi-squared is close enough beyond.
_MOST_EXACT = 1000
_PAIR = 2
_SAME = 1e-9


@struct
class Splits:
    """Splits as arrays of shape (n,): where one was planned, and p of a split as far from it as the one that came.

    p is nan where the groups are not those of the plan, or hold no unit.
    """

    planned: Booleans
    p: Floats


def splits(columns: Columns) -> Splits:
    """The splits of all rows."""
    samples = [one.record.sample for one in columns.found]
    planned = np.array([sample is not None and sample.planned_split is not None for sample in samples], np.bool_)
    p = np.array([np.nan if sample is None else _p(sample) for sample in samples], np.float64)
    return Splits(planned, p)


def expected_sizes(sample: Sample) -> Floats:
    """The sizes that the units would have if they were split as planned."""
    shares = np.array(sample.planned_split or (), np.float64)
    expected: Floats = shares / shares.sum() * sum(float(group.n) for group in sample.groups)
    return expected


def _p(sample: Sample) -> float:
    """P by the exact binomial for few units in two groups, else by chi-squared of the sizes (textbook forms)."""
    sizes = np.array([group.n for group in sample.groups], np.float64)
    expected = expected_sizes(sample)
    if sizes.size < _PAIR or sizes.size != expected.size or sizes.sum() == 0:
        return np.nan
    if sizes.size == _PAIR and sizes.sum() <= _MOST_EXACT:
        return exact_binomial(int(sizes[0]), int(sizes.sum()), float(expected[0] / sizes.sum()))
    statistic = float(((sizes - expected) ** 2 / expected).sum())
    return float(np.exp(weigh.log_p_chi2(statistic, float(sizes.size - 1))))


def exact_binomial(first: int, n: int, share: float) -> float:
    """The probability of all numbers out of `n` units that are no more probable than `first` at this share."""
    counts = np.arange(n)
    steps = np.log(n - counts) - np.log(counts + 1) + np.log(share) - np.log1p(-share)
    logs = np.concatenate([[0.0], np.cumsum(steps)])
    probability = np.exp(logs - logs.max())
    probability /= probability.sum()
    return float(min(1.0, probability[probability <= probability[first] * (1 + _SAME)].sum()))
