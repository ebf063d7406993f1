"""A p-value against the statistic that gives it, and an adjusted p against the raw one."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np

from gatecheck import weigh
from gatecheck.columns import CHI2, Booleans, Columns, F, Floats, Interval, R, T, Z
from gatecheck.compare.agreement import Agreement
from gatecheck.compare.design_names import CONTINUITY, SPHERICITY, named
from gatecheck.evidence import Evidence
from gatecheck.model.numbers import Reported
from gatecheck.model.record import Family, Record

#: Relative difference that two careful programs may show between logarithms of p.
_SAME_LOG_P = 1e-6
#: Smallest double above 0: a p below it is written as 0.
_LOG_SMALLEST = -744.4
#: Euler's constant.
_EULER = 0.5772156649015329
#: The procedures by which an adjusted p is at most the raw one times the size of the family.
_AT_MOST_TIMES_SIZE = {"bonferroni", "holm", "hochberg", "hommel", "benjamini-hochberg"}


def p_from_statistic(columns: Columns, evidence: Evidence) -> Agreement:
    """The p that statistic, df and sides give, against the p reported."""
    test = columns.test
    low, high = _log_p_range(columns, evidence)
    checked = test.p_is_raw & test.value.known & np.isfinite(low) & test.p.known
    reported = Interval(test.p.value, np.log(np.maximum(test.p.low, 0)), np.log(test.p.high))
    slack = _SAME_LOG_P * np.maximum(1, np.abs(high))
    fits = (low <= reported.high + slack) & (high >= reported.low - slack)
    underflown = (test.p.high == 0) & (low < _LOG_SMALLEST)
    fits |= underflown
    fits |= _corrected(columns, evidence, checked & ~fits, reported)
    return Agreement(
        "p",
        ("the statistic", "the df", "p"),
        checked,
        fits,
        np.exp(low),
        np.exp(high),
        (
            "p is adjusted for several tests, from a permutation or exact",
            "it is one-sided",
            "a correction was made to p alone",
        ),
        # Many df give nearly the same p.
        ("the statistic", "p"),
    )


def _log_p_range(columns: Columns, evidence: Evidence) -> tuple[Floats, Floats]:
    statistics = evidence.statistics

    def log_p(value: Floats, df1: Floats, df2: Floats) -> Floats:
        return weigh.log_p(statistics.kind, value, df1, df2, statistics.one_sided)

    return _range_over(log_p, _signed_value(columns, evidence), columns.test.df1, columns.test.df2)


def _signed_value(columns: Columns, evidence: Evidence) -> Interval:
    """The statistic's interval as it is weighed: correlations as t, one-sided ones toward their direction."""
    test = columns.test
    as_r = test.is_one_of(R)
    ends = [
        np.where(as_r, weigh.t_from_r(np.where(as_r, np.clip(end, -1, 1), 0.0), test.df1.value), end)
        for end in (test.value.low, test.value.high)
    ]
    signs = np.where(evidence.statistics.one_sided, test.toward, 1.0)
    low, high = np.minimum(*(end * signs for end in ends)), np.maximum(*(end * signs for end in ends))
    folded = test.is_one_of(T, Z, R) & ~evidence.statistics.one_sided
    nearest = np.where((low <= 0) & (high >= 0), 0.0, np.minimum(np.abs(low), np.abs(high)))
    farthest = np.maximum(np.abs(low), np.abs(high))
    other = ~test.is_one_of(T, Z, R)
    low = np.where(folded, nearest, np.where(other, np.maximum(low, 0), low))
    return Interval(evidence.statistics.value, low, np.where(folded, farthest, high))


def _range_over(
    log_p: Callable[[Floats, Floats, Floats], Floats], value: Interval, df1: Interval, df2: Interval
) -> tuple[Floats, Floats]:
    """The least and the greatest log p over the corners of the intervals; p is monotone in each of them."""
    corners = np.stack([
        log_p(v, a, b) for v in (value.low, value.high) for a in (df1.low, df1.high) for b in (df2.low, df2.high)
    ])
    return corners.min(axis=0), corners.max(axis=0)


def _corrected(columns: Columns, evidence: Evidence, where: Booleans, reported: Interval) -> Booleans:
    """Where a correction that the test names explains a larger p than its statistic and df give.

    For spread that differs between conditions the df shrink at most to those of two conditions (Greenhouse and
    Geisser, Psychometrika 24 (1959) 95-112; from memory); the continuity correction makes the
    statistic smaller.
    """
    test, statistics = columns.test, evidence.statistics
    spread = named(columns, where & test.is_one_of(F), SPHERICITY)
    most = weigh.log_p(
        statistics.kind,
        test.value.low,
        np.ones_like(test.df1.value),
        test.df2.value / test.df1.value,
        statistics.one_sided,
    )
    least = statistics.log_p
    within = (reported.high >= least) & (reported.low <= most)
    continuity = named(columns, where & test.is_one_of(CHI2, Z), CONTINUITY)
    return (spread & within) | (continuity & (reported.high >= least))


def adjusted_p(columns: Columns, evidence: Evidence) -> Agreement | None:
    """An adjusted p against the raw one and the size of its family, or all raw ones where the family is whole.

    `None` where no record gives such a p.
    """
    given = [_adjusted(one.record) for one in columns.found]
    if not any(given):
        return None
    from gatecheck.compare.adjusted_in_family import within_family  # noqa: PLC0415  # few records give such a p

    bounds = np.array([_multiples_of_raw(one.record.family) for one in columns.found]).T
    low, high = (np.exp(end) for end in _log_p_range(columns, evidence))
    from_p = ~np.isfinite(low) & columns.test.p_is_raw
    raw = np.where(from_p, columns.test.p.low, low), np.where(from_p, columns.test.p.high, high)
    of_own_p = np.minimum(raw[0] * bounds[0], 1.0), np.minimum(raw[1] * bounds[1], 1.0)
    low, high = within_family(columns, evidence, raw, of_own_p)
    ends = [(np.nan, np.nan) if each is None else (each.low, each.high) for each in given]
    adjusted_low, adjusted_high = np.array(ends).T
    return Agreement(
        "adjusted",
        ("the adjusted p", "the raw result"),
        np.isfinite(adjusted_high) & np.isfinite(low) & ~np.isnan(high),
        (adjusted_low <= high * (1 + _SAME_LOG_P)) & (adjusted_high >= low * (1 - _SAME_LOG_P)),
        low,
        high,
        ("the family has another size", "another procedure was used", "a q-value stands for p"),
    )


def _adjusted(record: Record) -> Reported | None:
    """The p that is adjusted by the procedure of the family."""
    family, test = record.family, record.test
    if family is None or family.procedure == "none":
        return None
    own = test.p if test is not None and test.p_kind == "adjusted" else None
    given = family.adjusted_p or own
    return None if given is None else given.as_rounded()


def _multiples_of_raw(family: Family | None) -> tuple[float, float]:
    """The least and the greatest multiple of the raw p that the procedure can make of it."""
    if family is None or family.size is None:
        return 1.0, np.inf
    if family.procedure == "benjamini-yekutieli":
        # The sum of 1 / k up to the size is below this, and barely so.
        return 1.0, family.size * (math.log(family.size) + _EULER + 1 / (2 * family.size))
    if family.procedure not in _AT_MOST_TIMES_SIZE:
        return 1.0, np.inf
    return (float(family.size) if family.procedure == "bonferroni" else 1.0), float(family.size)
