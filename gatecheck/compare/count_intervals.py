"""The interval of an odds ratio, a risk ratio or a difference of proportions against the counts of two groups.

Each limit is set against those of the usual methods. Odds ratios: the error of the logarithm (Woolf), also with
half a unit added to every cell, by the t distribution, or from the test of the same counts, and the exact one given
the margins. Risk ratios: the error of the logarithm (Katz), also with halves added or of Poisson counts, and the
score test. Differences: Wald's, also pooled, corrected for continuity or with units added (Agresti and Caffo),
Newcombe's from the intervals of Wilson, and the score test of Miettinen and Nurminen. (Textbook forms, from
memory.) What other methods give lies between these or barely beyond, so only a limit clearly beyond all of them
disagrees.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from typing import Literal

import numpy as np
from scipy import special

from gatecheck.compare.agreement import Compared
from gatecheck.compare.design_names import says
from gatecheck.compare.two_proportions import (
    Table,
    log_odds,
    log_risks,
    squares,
    variance_of_odds,
    variance_of_risks,
)
from gatecheck.compare.written import rounded_alike
from gatecheck.model.numbers import Reported
from gatecheck.model.record import Estimate, Interval
from gatecheck.weigh.roots import crossing
from gatecheck.weigh.score import score_interval

#: So far beyond all methods that are computed another may put a limit, in half widths of the interval, and by so
#: much more over the rarest count (common practice, no source; held against other methods in the tests).
_BEYOND = 0.05
_BEYOND_IF_FEW = 0.8
#: With more tables of the same margins an exact interval is close to the others.
_MOST_TABLES = 20_000
#: No ratio of counts has a logarithm beyond this.
_FARTHEST = 60.0

_OTHERWISE_MADE = r"bootstrap|percentile|\bbca\b|credible|posterior|bayes|jackknife|simultaneous|permut"
_SAME = 1e-6
_PERCENT = 100.0

Measure = Literal["odds", "risks", "difference"]
Ends = tuple[float, float]


def compare_interval(measure: Measure, table: Table, estimate: Estimate, *, as_logarithm: bool) -> Compared | None:
    """Whether the interval of an estimate that these counts give may be theirs, in either order of the groups.

    `as_logarithm` says that the figures of a ratio are logarithms. None where the estimate is not that of the
    counts, the interval is adjusted or made by other means, or a count of 0 leaves the ratio without one.
    """
    interval = estimate.interval
    if interval is None or interval.adjusted or says(_OTHERWISE_MADE, estimate.measure):
        return None
    given, on_scale = _rounded(estimate.value, interval), measure == "difference" or as_logarithm
    found = []
    for ordered in (table, Table(table.events2, table.n2, table.events1, table.n1)):
        for unit in (1.0, _PERCENT) if measure == "difference" else (1.0,):
            value, *limits = (each and (_over(each, unit) if on_scale else _log(each)) for each in given)
            if value is not None and _is_effect(measure, ordered, value):
                compared = compare_limits(measure, ordered, interval.level, *limits)
                found += [] if compared is None else [_as_told(compared, unit, on_scale=on_scale)]
    return max(found, key=lambda each: each.agrees, default=None)


def _rounded(value: Reported, interval: Interval) -> tuple[Reported | None, ...]:
    """The value and the limits, rounded alike."""
    limits = (interval.low, interval.high)
    rounded = iter(rounded_alike([value, *(each for each in limits if each is not None)]))
    return next(rounded), *(None if each is None else next(rounded) for each in limits)


def _over(number: Reported, unit: float) -> Reported:
    return Reported(number.value / unit, number.low / unit, number.high / unit)


def _log(number: Reported) -> Reported:
    value, low, high = map(_log_of_number, (number.value, number.low, number.high))
    return Reported(value, low, high)


def _as_told(compared: Compared, unit: float, *, on_scale: bool) -> Compared:
    low, high = (unit * end if on_scale else math.exp(end) for end in (compared.low, compared.high))
    return Compared(compared.agrees, low, high)


def _is_effect(measure: Measure, table: Table, value: Reported) -> bool:
    """Whether the estimate is that of the counts, also with half a unit added to every cell."""
    tables = (table, _with_added(table, 0.5))
    forms = [_difference(table)[0]] if measure == "difference" else [_log_of(measure, each)[0] for each in tables]
    return any(value.low - _SAME <= form <= value.high + _SAME for form in forms)


def compare_limits(
    measure: Measure, table: Table, level: float, low: Reported | None, high: Reported | None
) -> Compared | None:
    """Whether limits may be those of these counts: logarithms of a ratio, or differences of shares of 1.

    The result bounds the interval by the first method. None where counts of 0 leave a ratio without one, or a
    level so near 1 that its interval is endless.
    """
    needed = {"odds": table.cells, "risks": (table.events1, table.events2), "difference": (table.n1, table.n2)}
    if min(needed[measure]) <= 0 or not math.isfinite(_normal(level)):
        return None
    usual, *others = _QUICK[measure](table, level)
    if (low is None or high is None) and level > 1 / 2:
        # One limit alone may be that of an interval with all the error on its side.
        others += _QUICK[measure](table, 2 * level - 1)
    half, rarest = (usual[1] - usual[0]) / 2, max(min(table.cells), 1.0)
    beyond = half * (_BEYOND + _BEYOND_IF_FEW / rarest)
    fits = _lie_within([usual, *others], low, high, beyond) or _is_linear(measure, table, level, low, high)
    fits = fits or _lie_within([usual, *others, *_SLOW[measure](table, level)], low, high, beyond)
    return Compared(fits, *usual)


def _lie_within(methods: Sequence[Ends], low: Reported | None, high: Reported | None, beyond: float) -> bool:
    """Whether each limit is one that some method gives, or lies between those of two, or barely beyond."""
    for given, limits in ((low, [each[0] for each in methods]), (high, [each[1] for each in methods])):
        if given is not None and not (given.low <= max(limits) + beyond and given.high >= min(limits) - beyond):
            return False
    return True


def _is_linear(measure: Measure, table: Table, level: float, low: Reported | None, high: Reported | None) -> bool:
    """Whether the limits are symmetric about the ratio itself, by the error of the ratio."""
    if measure == "difference" or low is None or high is None:
        return False
    log, error = _log_of(measure, table)
    ratio = math.exp(log)
    half = ratio * error * _normal(level)
    slack = _BEYOND * half
    return all(
        _log_of_number(end - slack) <= given.high and given.low <= _log_of_number(end + slack)
        for given, end in ((low, ratio - half), (high, ratio + half))
    )


def _log_of_number(number: float) -> float:
    """The logarithm; of 0 and below, which a ratio may be by rounding, minus infinity."""
    return math.log(number) if number > 0 else -math.inf


def _normal(level: float) -> float:
    return float(special.ndtri((1 + level) / 2))


def _multiples(table: Table, level: float) -> tuple[float, float]:
    """Those of the normal distribution, and of t with the df of two groups."""
    df = max(table.n1 + table.n2 - 2, 1.0)
    return _normal(level), float(special.stdtrit(df, (1 + level) / 2))


def _around(centre: float, *halves: float) -> list[Ends]:
    return [(centre - half, centre + half) for half in halves]


def _log_of(measure: Measure, table: Table) -> tuple[float, float]:
    """The logarithm of the ratio, and its error."""
    if measure == "odds":
        return log_odds(table), math.sqrt(variance_of_odds(table))
    return log_risks(table), math.sqrt(max(variance_of_risks(table), 0.0))


def _with_added(table: Table, units: float) -> Table:
    """The counts with so many units more in every cell."""
    return Table(table.events1 + units, table.n1 + 2 * units, table.events2 + units, table.n2 + 2 * units)


def _quick_odds(table: Table, level: float) -> list[Ends]:
    return _of_logarithm("odds", table, level)


def _quick_risks(table: Table, level: float) -> list[Ends]:
    of_poisson = _normal(level) * math.sqrt(1 / table.events1 + 1 / table.events2)
    return [*_of_logarithm("risks", table, level), *_around(log_risks(table), of_poisson)]


def _of_logarithm(measure: Measure, table: Table, level: float) -> list[Ends]:
    log, error = _log_of(measure, table)
    normal, student = _multiples(table, level)
    with_halves, error_with_halves = _log_of(measure, _with_added(table, 0.5))
    chi2 = squares(table)["Pearson"]
    by_test = _around(log, normal * abs(log) / math.sqrt(chi2)) if chi2 > 0 else []
    return [
        *_around(log, normal * error, student * error),
        *_around(with_halves, normal * error_with_halves),
        *by_test,
    ]


def _quick_difference(table: Table, level: float) -> list[Ends]:
    normal, student = _multiples(table, level)
    difference, error = _difference(table)
    pooled, harmonic = (table.events1 + table.events2) / (table.n1 + table.n2), 1 / table.n1 + 1 / table.n2
    together = math.sqrt(pooled * (1 - pooled) * harmonic)
    corrected = normal * error + harmonic / 2
    with_units, error_with_units = _difference(_with_added(table, 1.0))
    return [
        *_around(difference, normal * error, student * error, normal * together, corrected),
        *_around(with_units, normal * error_with_units),
        _hybrid(table, normal, correction=0.0),
        _hybrid(table, normal, correction=0.5),
    ]


def _difference(table: Table) -> tuple[float, float]:
    """The difference of the proportions, and its error."""
    p1, p2 = table.events1 / table.n1, table.events2 / table.n2
    return p1 - p2, math.sqrt(p1 * (1 - p1) / table.n1 + p2 * (1 - p2) / table.n2)


def _hybrid(table: Table, normal: float, correction: float) -> Ends:
    """Newcombe's interval of the difference, from Wilson's of each proportion."""
    p1, p2 = table.events1 / table.n1, table.events2 / table.n2
    low1, high1 = _wilson(p1, table.n1, normal, correction)
    low2, high2 = _wilson(p2, table.n2, normal, correction)
    return p1 - p2 - math.hypot(p1 - low1, high2 - p2), p1 - p2 + math.hypot(high1 - p1, p2 - low2)


def _wilson(p: float, n: float, normal: float, correction: float) -> Ends:
    """Wilson's interval of a proportion, which may first be moved outwards by a part of one unit."""
    square = normal**2

    def limit(toward: float) -> float:
        share = min(max(p + toward * correction / n, 0.0), 1.0)
        half = normal * math.sqrt(share * (1 - share) / n + square / (4 * n**2))
        return (share + square / (2 * n) + toward * half) / (1 + square / n)

    return min(limit(-1.0), p), max(limit(1.0), p)


def _slow_odds(table: Table, level: float) -> list[Ends]:
    """The exact interval given the margins: the odds ratios that neither tail rejects."""
    drawn = table.events1 + table.events2
    first, last = max(0.0, drawn - table.n2), min(drawn, table.n1)
    if last - first > _MOST_TABLES:
        return []
    events = np.arange(first, last + 1)
    parts = (events, table.n1 - events, drawn - events, table.n2 - drawn + events)
    logs = -sum(special.gammaln(part + 1) for part in parts)
    at = int(table.events1 - first)

    def tail(log: float, part: slice) -> float:
        weights = logs + log * events
        shares = np.exp(weights - weights.max())
        return float(shares[part].sum() / shares.sum()) - (1 - level) / 2

    return [_between(lambda log: tail(log, slice(at, None)), lambda log: tail(log, slice(at + 1)))]


def _slow_risks(table: Table, level: float) -> list[Ends]:
    """The ratios that the score test does not reject."""
    normal = _normal(level)
    return [_between(lambda log: _score(table, log) - normal, lambda log: _score(table, log) + normal)]


def _between(lower: Callable[[float], float], upper: Callable[[float], float]) -> Ends:
    """Where each of two functions crosses zero."""
    return crossing(lower, -_FARTHEST, _FARTHEST), crossing(upper, -_FARTHEST, _FARTHEST)


def _score(table: Table, log: float) -> float:
    """The distance from a risk ratio in errors, those of the proportions that fit the counts best under it."""
    ratio, events, n = math.exp(log), table.events1 + table.events2, table.n1 + table.n2
    linear = table.n1 * ratio + table.events1 + table.n2 + table.events2 * ratio
    second = 2 * events / (linear + math.sqrt(max(linear**2 - 4 * ratio * n * events, 0.0)))
    first = ratio * second
    variance = max(first * (1 - first), 0.0) / table.n1 + ratio**2 * max(second * (1 - second), 0.0) / table.n2
    beyond = table.events1 / table.n1 - ratio * table.events2 / table.n2
    return beyond / math.sqrt(variance * n / (n - 1)) if variance > 0 else math.copysign(_FARTHEST, beyond)


def _slow_difference(table: Table, level: float) -> list[Ends]:
    low, high = score_interval(table.events1, table.n1, table.events2, table.n2, _normal(level))
    return [(float(low), float(high))]


_Methods = Mapping[Measure, Callable[[Table, float], list[Ends]]]
_QUICK: _Methods = {"odds": _quick_odds, "risks": _quick_risks, "difference": _quick_difference}
_SLOW: _Methods = {"odds": _slow_odds, "risks": _slow_risks, "difference": _slow_difference}
