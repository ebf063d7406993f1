"""Standardised differences that a t and the sizes of its groups give, by every standard deviation in use.

From the t of pooled variances d is `t sqrt(1/n1 + 1/n2)`, and from that of one sample or of pairs `t / sqrt(n)`,
which is the d of the differences (textbook forms, from memory). Another standard deviation, or Welch's error,
leaves open how unlike the spreads of the groups are, and the d of pairs how closely these go together; so each is a
range.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import NamedTuple

import numpy as np

from gatecheck.columns import Columns, F, Floats, T
from gatecheck.compare.design_names import INDEPENDENT, MODELLED, PAIRED, T_TEST, WELCH, says, test_name
from gatecheck.model.record import Record

STANDARDISED = (
    r"^[dg](?:[-_ ]?(?:av|z|s|rm|p(?:ooled)?))?$|cohen['’]?s? d|hedges|glass|\bsmd\b"
    r"|standardi[sz]ed (?:mean )?(?:difference|effect)|standardi[sz]ed mean"
)
#: Any of these may be standardised by one group alone.
_ONE_GROUP = r"glass|smd|standardi[sz]ed|delta"
_OF_DIFFERENCES = r"\bd[-_ ]?z\b|g[-_ ]?z\b"
_OTHER = r"median|robust|trimm|adjusted|model|latent|probit|covari|change|gain|baseline"
#: Standard deviations of groups that are compared differ hardly by more than this factor, and by so much more over
#: the units of the smaller group (common practice, no source).
_MOST_UNLIKE = 3.0
_MORE_IF_FEW = 12.0
_STEPS = 41
#: Values of one unit measured twice go together hardly more closely than this (common practice, no source).
_CLOSEST = 0.99
#: By how much the approximations of the correction for small samples differ from it (common practice, no source).
_CORRECTION = 2e-3
_PAIR = 2

_Range = tuple[float, float]


class _Units(NamedTuple):
    """Numbers of units of one row: of its groups, and in all; nan where it is not told."""

    groups: tuple[float, ...]
    n: float
    excluded: float


def standardised_difference(columns: Columns, row: int, record: Record) -> Sequence[_Range]:
    """The standardised differences, in size, that t and the numbers of units allow; none where they tell none."""
    size, df, units = _t_in_size(columns, row), _df(columns, row), _units(record)
    name, measure = test_name(columns, row), "" if record.estimate is None else record.estimate.measure
    usual = (not name or says(T_TEST, name) or says(PAIRED, name) or says("anova|one-way", name)) and not says(
        MODELLED, name
    )
    clustered = record.sample is not None and record.sample.clusters is not None
    if size is None or not usual or clustered or record.covariates or says(_OTHER, measure):
        return ()
    if _summarised(record) and len(units.groups) == _PAIR and not says(PAIRED, name):
        return ()  # Set against the standard deviations themselves.
    factors = _factors(name, measure, df, units)
    if factors is None:
        return ()
    least, most = factors
    # Some correct for small samples twice, by the divisor n too.
    return ((size[0] * least * _correction(df) / _divisor(df), size[1] * most * _divisor(df)),)


def _t_in_size(columns: Columns, row: int) -> _Range | None:
    """The ends of the size of a t, or of the root of an F on one df."""
    test = columns.test
    low, high = float(test.value.low[row]), float(test.value.high[row])
    if test.statistic[row] == F and test.df1.value[row] == 1:
        return math.sqrt(max(low, 0.0)), math.sqrt(high)
    if test.statistic[row] != T:
        return None
    return (0.0 if low <= 0 <= high else min(abs(low), abs(high))), max(abs(low), abs(high))


def _df(columns: Columns, row: int) -> float:
    test = columns.test
    return float((test.df2 if test.statistic[row] == F else test.df1).value[row])


def _units(record: Record) -> _Units:
    sample = record.sample
    if sample is None:
        return _Units((), math.nan, 0.0)
    n = math.nan if sample.n is None else float(sample.n)
    excluded = sum(float(each.n) for each in sample.excluded)
    return _Units(tuple(float(group.n) for group in sample.groups), n, excluded)


def _summarised(record: Record) -> bool:
    groups = () if record.sample is None else record.sample.groups
    return all(group.mean is not None and group.sd is not None for group in groups)


def _factors(name: str, measure: str, df: float, units: _Units) -> _Range | None:
    """What a t is to be multiplied by, least and most; `None` where its design cannot be told."""
    groups = units.groups
    if len(groups) > _PAIR or (groups and min(groups) <= 1):
        return None
    in_all = units.n if len(groups) < _PAIR and math.isfinite(units.n) else sum(groups)
    pairs = groups[0] if len(groups) == _PAIR and groups[0] == groups[1] else in_all
    single = says(PAIRED, name) or df == pairs - 1
    if single and not says(INDEPENDENT, name):
        return _of_differences(name, measure, df + 1)
    if len(groups) == _PAIR:
        return _of_two(name, measure, df, groups, units.excluded)
    if df != in_all - 2 or says(_ONE_GROUP, measure):
        return None
    # Least of groups of one size; by the average of variances however unlike, over sizes however unlike, less.
    return math.sqrt(2 / in_all), math.inf


def _of_differences(name: str, measure: str, n: float) -> _Range | None:
    """Of one sample or of pairs, by the standard deviation of the differences or by that of the values."""
    if not math.isfinite(n) or says(_ONE_GROUP, measure):
        return None
    if says("one|1-sample|single", name) or says(_OF_DIFFERENCES, measure):
        return 1 / math.sqrt(n), 1 / math.sqrt(n)
    # Values that go against each other as closely as can be spread half as widely as their differences.
    return math.sqrt(2 * (1 - _CLOSEST)) / math.sqrt(n), 2 / math.sqrt(n)


def _of_two(name: str, measure: str, df: float, groups: Sequence[float], excluded: float) -> _Range | None:
    """Of two groups, over all spreads that are not too unlike."""
    n1, n2 = groups
    both = n1 + n2 - 2
    pooled = both - excluded <= df <= both and not says(WELCH, name)
    if not pooled and not (math.isnan(df) or min(groups) - 1 - excluded <= df <= both):
        return None
    most_unlike = _MOST_UNLIKE + _MORE_IF_FEW / min(groups)
    ratio = np.geomspace(most_unlike**-2, most_unlike**2, _STEPS)
    variance = ((n1 - 1) * ratio + (n2 - 1)) / both
    errors = [variance * (1 / n1 + 1 / n2), *(() if pooled else (ratio / n1 + 1 / n2,))]
    spreads: list[Floats] = [variance, (ratio + 1) / 2]
    if says(_ONE_GROUP, measure):
        spreads += [ratio, np.ones_like(ratio)]
    factors = np.sqrt(np.stack([error / spread for error in errors for spread in spreads]))
    # Also as if the groups were of one size, and those left out among the units counted.
    alike = 2 / math.sqrt(both + 2), 2 / math.sqrt(max(both - excluded, 1.0))
    return min(float(factors.min()), alike[0]), max(float(factors.max()), alike[1])


def _correction(df: float) -> float:
    """The correction for small samples, a little below; 0 where there are too few df for one."""
    if not math.isfinite(df):
        return 1 - _CORRECTION
    return max(0.0, 1 - 3 / (4 * df - 1)) * (1 - _CORRECTION) if df > 1 else 0.0


def _divisor(df: float) -> float:
    """By how much a standard deviation of divisor n is smaller, at most."""
    return math.sqrt((df + 2) / df) if math.isfinite(df) else 1.0
