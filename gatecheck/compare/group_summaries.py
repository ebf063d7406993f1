"""Means, standard deviations and sizes of groups as arrays, and statistics that they give against reported ones."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from gatecheck.columns import Booleans, Columns, Floats, Integers, Interval
from gatecheck.compare.agreement import overlap, widened
from gatecheck.compare.design_names import MODELLED, named, says
from gatecheck.compare.written import rounded_alike
from gatecheck.model.numbers import Reported
from gatecheck.model.struct import struct

SUMMARIES = "the means, standard deviations and sizes of the groups"
#: Relative difference between figures of careful programs that are given in all their digits.
SAME = 1e-6
HARMLESS = (
    "the test is another one than its df say (Welch, paired, with covariates)",
    "the summaries are of another scale or of all units before exclusions",
    "a standard error stands for a standard deviation",
)
_OTHER_SCALE = r"ratio|percent|%|fold|\blog|median|rank|hodges|adjusted|relative|geometric"


@struct
class Group:
    """Size, mean and standard deviation of one group of one record."""

    n: float
    mean: Reported
    sd: Reported


@struct
class Summaries:
    """The summaries of one group in each of some rows, arrays of shape (k,)."""

    n: Floats
    mean: Interval
    sd: Interval


def summarised(columns: Columns, row: int) -> tuple[Group, ...]:
    """The groups of a row where all have mean, standard deviation and two units or more; else none.

    With clusters or covariates the groups do not tell the error.
    """
    record = columns.found[row].record
    sample = record.sample
    if sample is None or not sample.groups or sample.clusters is not None or record.covariates:
        return ()
    figures = [figure for group in sample.groups for figure in (group.mean, group.sd) if figure is not None]
    if len(figures) < 2 * len(sample.groups) or min(group.n for group in sample.groups) <= 1:
        return ()
    alike = iter(rounded_alike(figures))
    return tuple(Group(float(group.n), next(alike), next(alike)) for group in sample.groups)


def of_groups(groups: Sequence[Group]) -> Summaries:
    """The groups of several rows as arrays."""
    return Summaries(
        np.array([group.n for group in groups]),
        _interval([group.mean for group in groups]),
        _interval([group.sd for group in groups]),
    )


def _interval(numbers: Sequence[Reported]) -> Interval:
    return Interval(
        np.array([number.value for number in numbers]),
        np.array([number.low for number in numbers]),
        np.array([number.high for number in numbers]),
    )


def at(numbers: Interval, rows: Integers) -> Interval:
    """The interval of some rows."""
    return Interval(numbers.value[rows], numbers.low[rows], numbers.high[rows])


def unmodelled(columns: Columns, rows: Integers) -> Booleans:
    """Rows whose test is no model with more terms, and whose estimate is not on another scale."""
    candidates = np.zeros(len(columns.found), np.bool_)
    candidates[rows] = True
    modelled = named(columns, candidates, MODELLED)
    scaled = np.array([says(_OTHER_SCALE, _measure(columns, row)) for row in rows.tolist()], np.bool_)
    return ~modelled[rows] & ~scaled & ~columns.estimate.log_scale[rows]


def _measure(columns: Columns, row: int) -> str:
    estimate = columns.found[row].record.estimate
    return "" if estimate is None else estimate.measure


def measured(columns: Columns, rows: Integers, words: str) -> Booleans:
    """Which rows name what they estimate by one of `words`."""
    return np.array([says(words, _measure(columns, row)) for row in rows.tolist()], np.bool_)


def named_rows(columns: Columns, rows: Integers, words: str) -> Booleans:
    """Which rows name their test by one of `words`."""
    candidates = np.zeros(len(columns.found), np.bool_)
    candidates[rows] = True
    return named(columns, candidates, words)[rows]


def over(numbers: Interval, by: Floats) -> Interval:
    """The interval over a number that is positive."""
    return Interval(numbers.value / by, numbers.low / by, numbers.high / by)


def over_root(statistic: Interval, n: Floats) -> Interval:
    """The statistic where the standard deviation has divisor n."""
    return over(statistic, np.sqrt(n / (n - 1)))


def quotient(size: Interval, error: Interval) -> Interval:
    """The interval of a size over its error."""
    return Interval(size.value / error.value, size.low / error.high, size.high / error.low)


def fits(reported: Interval, *variants: Interval) -> Booleans:
    """Where a reported number may stand for any of several, which are not negative."""
    fitting: Booleans = np.logical_or.reduce([overlap(reported, widened(each, SAME)) for each in variants])
    return fitting
