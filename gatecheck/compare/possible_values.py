"""Values that whole numbers can give: means and standard deviations of items, and p-values of permutations.

A mean of n whole numbers is a whole number over n (Brown and Heathers, Social Psychological and Personality Science
8 (2017) 363-369; from memory), and their sum of squares is a whole number as odd or even as their sum (Anaya, PeerJ
Preprints 4 (2016) e2400; from memory). Everything is computed in whole numbers, from the digits that were reported.
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Sequence
from decimal import Decimal
from fractions import Fraction
from typing import NamedTuple

from gatecheck.columns import Columns
from gatecheck.compare.agreement import Agreement, Compared, Kind, gathered
from gatecheck.compare.design_names import MODELLED, T_TEST, says
from gatecheck.compare.names import same_unit
from gatecheck.compare.written import places
from gatecheck.model.numbers import Reported
from gatecheck.model.record import Estimate, Group, Record, Test

_MEAN = Kind(
    "item-mean",
    ("the mean of a group", "its number of units", "its number of items"),
    (
        "the mean was cut off, not rounded",
        "items are missing for some units",
        "it is weighted or of parts of units",
    ),
)
_SD = Kind(
    "item-sd",
    ("the standard deviation of a group", "the mean of a group", "its number of units", "its number of items"),
    ("it was cut off, not rounded", "items are missing for some units", "it was computed from a rounded mean"),
)
_SHARE = Kind(
    "share",
    ("the estimate", "the number of units"),
    (
        "it is a share of fewer units, since some are missing",
        "it is weighted, or a mean of shares",
        "it was cut off, not rounded",
    ),
)
_PERMUTATION = Kind(
    "permutation", ("p", "the number of resamples"), ("the tail was fitted by a curve", "ties were counted by half")
)
#: A number of so many digits was not rounded by its author; it holds the rounding of its sum and of its division.
_ALL_DIGITS = 12
_LOST = Fraction(1, 10**_ALL_DIGITS)
#: From here on, whole numbers are not all doubles.
_LARGEST = 2.0**53
#: Of more sums than this that a mean leaves open, some fit any standard deviation.
_MOST_SUMS = 2000
_PERCENT = 100
_IN_PERCENT = r"^\s*(?:%|percent|per cent)\s*$"
#: A share of units; of what else a share may be, such as ground that is covered, only the author knows.
_SHARE_WORDS = (
    r"^(?:(?:the|observed|crude|raw|overall) )*(?:percentage|per ?cent|proportion|share|fraction|prevalence)"
)
_OF_WHAT = re.compile(r" (?:of|among) (?:the |all )?([\w-]+)(?: (?:with|that|which|who|having|showing)\b.*)?$")
_NOT_OF_UNITS = r"weighted|adjusted|imput|mean|bayes"


class Ends(NamedTuple):
    """The numbers that a reported one may stand for, a half rounded either way."""

    low: Fraction
    high: Fraction


def possible_values(columns: Columns) -> tuple[Agreement, ...]:
    """Every comparison with the values that are possible, of all rows; none where no record has such."""
    found: dict[Kind, dict[int, Compared]] = {_MEAN: {}, _SD: {}, _SHARE: {}, _PERMUTATION: {}}
    for row, one in enumerate(columns.found):
        for kind, compared in _of_record(one.record):
            found[kind][row] = compared
    return tuple(gathered(kind, rows, len(columns.found)) for kind, rows in found.items() if rows)


def _of_record(record: Record) -> list[tuple[Kind, Compared]]:
    groups = of_items(record)
    permuted = None if record.test is None else compare_permutation(record.test)
    each = (
        (_MEAN, _worst(groups, compare_mean)),
        (_SD, _worst(groups, compare_sd)),
        (_SHARE, compare_share(record)),
        (_PERMUTATION, permuted),
    )
    return [(kind, compared) for kind, compared in each if compared is not None]


def of_items(record: Record) -> tuple[Group, ...]:
    """The groups whose scores average whole-number items; of numbers too large to be told apart, none."""
    groups = () if record.sample is None else record.sample.groups
    return tuple(
        group for group in groups if group.n * (group.integer_items or 0) > 0 and _largest(group) < _LARGEST
    )


def _largest(group: Group) -> float:
    figures = [abs(figure.value) for figure in (group.mean, group.sd) if figure is not None]
    return max(*figures, 1.0, group.n * (group.integer_items or 0))


def first_impossible(groups: Sequence[Group], compare: Callable[[Group], Compared | None]) -> Group | None:
    """The first group whose figure cannot be; `None` if all can."""
    return next((group for group in groups if (found := compare(group)) is not None and not found.agrees), None)


def _worst(groups: Sequence[Group], compare: Callable[[Group], Compared | None]) -> Compared | None:
    found = [each for group in groups if (each := compare(group)) is not None]
    return min(found, key=lambda each: each.agrees, default=None)


def ends_of(number: Reported, beside: Sequence[Reported | None] = ()) -> Ends:
    """The ends of a number as it was written; a whole one that is no text has the places of those beside it."""
    written = Decimal(repr(number.value) if number.text is None else number.text.strip())
    value = Fraction(written)
    if number.text is None and len(written.as_tuple().digits) >= _ALL_DIGITS:
        return Ends(value - abs(value) * _LOST, value + abs(value) * _LOST)
    own = places(number)
    others = [each for each in (places(other) for other in beside if other is not None) if each is not None]
    half = Fraction(1, 2 * 10 ** (max(others, default=0) if own is None else own))
    if number.text is not None or own is not None:
        half = Fraction(Decimal((0, (5,), int(written.as_tuple().exponent) - 1)))
    return Ends(value - half, value + half)


def _sums(mean: Reported, sd: Reported | None, whole: int) -> range:
    """The sums of all items of all units that round to the mean; empty where none does."""
    ends = ends_of(mean, (sd,))
    return range(math.ceil(ends.low * whole), math.floor(ends.high * whole) + 1)


def compare_mean(group: Group) -> Compared | None:
    """Whether whole-number items can have this mean; `low` and `high` are the nearest means that they can have."""
    mean, items = group.mean, group.integer_items
    if mean is None or items is None or mean.relation != "=":
        return None
    whole = group.n * items
    exact = Fraction(mean.value) * whole
    return Compared(bool(_sums(mean, group.sd, whole)), math.floor(exact) / whole, math.ceil(exact) / whole)


def compare_sd(group: Group, *, least_divisor: int = 0) -> Compared | None:
    """Whether whole-number items of this mean can have this standard deviation, by divisor n - 1 or n.

    `least_divisor` 1 leaves out divisor n. None where the mean is not known or cannot be.
    """
    mean, sd, items = group.mean, group.sd, group.integer_items
    if mean is None or sd is None or items is None or {mean.relation, sd.relation} != {"="}:
        return None
    sums = _sums(mean, sd, group.n * items)
    if not sums or group.n < 2:  # noqa: PLR2004  # one value does not vary
        return None
    low, high = (max(end, Fraction(0)) * items for end in ends_of(sd, (mean,)))
    fits = sums.stop - sums.start > _MOST_SUMS or any(
        _has_squares(total, group.n, low**2 * divisor, high**2 * divisor)
        for total in sums
        for divisor in range(group.n - 1, group.n + 1 - least_divisor)
    )
    nearest = _nearest_sds(sums[0], group.n, Fraction(sd.value) * items)
    return Compared(fits, nearest[0] / items, nearest[1] / items)


def _has_squares(total: int, n: int, low: Fraction, high: Fraction) -> bool:
    """Whether n whole numbers of this sum have squared deviations between `low` and `high`, so far as parity tells.

    Their squares sum to the squared deviations and the square of the sum over n. The least such sum is that of
    numbers as equal as can be.
    """
    quotient, rest = divmod(total, n)
    least = n * quotient**2 + rest * (2 * quotient + 1)
    mean_part = Fraction(total**2, n)
    first = max(math.ceil(low + mean_part), least)
    first += (first - total) % 2
    return first <= high + mean_part


def _nearest_sds(total: int, n: int, deviation: Fraction) -> tuple[float, float]:
    """The standard deviations, by divisor n - 1, on either side of this one that n numbers of this sum have."""
    quotient, rest = divmod(total, n)
    least = n * quotient**2 + rest * (2 * quotient + 1)
    mean_part = Fraction(total**2, n)
    below = math.floor(deviation**2 * (n - 1) + mean_part)
    below -= (below - total) % 2
    low, high = (math.sqrt((max(square, least) - mean_part) / (n - 1)) for square in (below, below + 2))
    return low, high


def compare_share(record: Record) -> Compared | None:
    """Whether a count of units can be this share of all of them; `low` and `high` are the nearest shares.

    None where the events are given, or the record does not plainly say that it is a share of its units.
    """
    estimate, n = record.estimate, _units_counted(record)
    if estimate is None or not n or estimate.value.relation != "=" or not _is_share_of_units(record, estimate):
        return None
    told_in_percent = says(_IN_PERCENT, estimate.unit or "") or (not estimate.unit and estimate.value.value > 1)
    unit = _PERCENT if told_in_percent else 1
    interval = estimate.interval
    ends = ends_of(estimate.value, () if interval is None else (interval.low, interval.high))
    exact = Fraction(estimate.value.value) * n / unit
    fits = math.ceil(max(ends.low, Fraction(0)) * n / unit) <= math.floor(min(ends.high, Fraction(unit)) * n / unit)
    return Compared(fits, unit * math.floor(exact) / n, unit * math.ceil(exact) / n)


def _units_counted(record: Record) -> int:
    """The units of a single group of which nothing but their number is given, or of all; 0 where it is not told."""
    sample = record.sample
    if sample is None or len(sample.groups) > 1 or sample.clusters is not None or sample.excluded:
        return 0
    bare = all((group.events, group.mean, group.sd) == (None, None, None) for group in sample.groups)
    counted = {group.n for group in sample.groups} | ({sample.n} if sample.n is not None else set())
    return counted.pop() if bare and len(counted) == 1 else 0


def _is_share_of_units(record: Record, estimate: Estimate) -> bool:
    """Whether the measure is a plain share, of the units of the sample if it says of what."""
    test, unit = record.test or Test(), None if record.sample is None else record.sample.unit
    name = f"{test.name or ''} {estimate.measure}"
    other = (
        test.statistic in {"t", "F", "r"} or says(T_TEST, name) or says(MODELLED, name) or says(_NOT_OF_UNITS, name)
    )
    in_other_unit = estimate.unit not in {None, "1"} and not says(_IN_PERCENT, estimate.unit or "")
    rest = re.sub(_SHARE_WORDS, "", estimate.measure, flags=re.IGNORECASE)
    if other or in_other_unit or rest == estimate.measure or estimate.scale == "log" or record.covariates:
        return False
    of_what = _OF_WHAT.match(rest)
    return not rest or (of_what is not None and unit is not None and same_unit(of_what[1], unit))


def compare_permutation(test: Test) -> Compared | None:
    """Whether a permutation p is a count of resamples over their number, or one more of each.

    A p of 0 is none: the data themselves are one arrangement. (Phipson and Smyth, Statistical Applications in
    Genetics and Molecular Biology 9 (2010) article 39; from memory.)
    """
    if test.p_kind != "permutation" or test.p is None:
        return None
    if test.resamples is None:
        return Compared(test.p.high > 0, 0.0, 1.0) if test.p.relation == "=" and test.p.value == 0 else None
    least = 1 / (test.resamples + 1)
    if test.p.relation == ">":
        return None
    if test.p.relation == "<":
        return Compared(test.p.value > least, least, 1.0)
    ends = ends_of(test.p) if test.p.value not in {0, 1} or test.p.text else Ends(*[Fraction(test.p.value)] * 2)
    counts = [
        (max(1, math.ceil(ends.low * of)), math.floor(ends.high * of))
        for of in (test.resamples + 1, test.resamples)
    ]
    nearest = max(1, round(test.p.value * (test.resamples + 1)))
    return Compared(any(low <= high for low, high in counts), least, nearest / (test.resamples + 1))
