"""Records as columns: a struct of arrays over which evidence is weighed and rules are judged."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace
from typing import Any

import numpy as np

from gatecheck.model.found import Found
from gatecheck.model.numbers import Reported
from gatecheck.model.plan import Hypothesis
from gatecheck.model.record import Estimate, Record, Sample, Test
from gatecheck.model.struct import struct

# What numpy.typing calls NDArray; that module costs more start-up time than all of this one.
Floats = np.ndarray[Any, np.dtype[np.float64]]
Booleans = np.ndarray[Any, np.dtype[np.bool_]]
Integers = np.ndarray[Any, np.dtype[np.intp]]

#: What stands in `statistic` where a record names none; the others are the order of `STATISTICS`.
NO_STATISTIC = -1
STATISTICS = ("t", "z", "chi2", "F", "r")
T, Z, CHI2, F, R = range(5)

_EMPTY_TEST = Test()
_EMPTY_SAMPLE = Sample()
_NAN = math.nan


@struct
class Interval:
    """A column of numbers as reported: the value and the ends of the interval that it may stand for."""

    value: Floats
    low: Floats
    high: Floats

    @property
    def known(self) -> Booleans:
        """Where there is a number."""
        return np.isfinite(self.value)


@struct
class Tests:
    """The tests, as arrays of shape (n,); nan stands for what a record does not give.

    `statistic` indexes `STATISTICS`. `toward` is -1 where one side, `less`, is tested, else 1: the sign that
    turns the direction tested into the positive one.
    """

    statistic: Integers
    value: Interval
    df1: Interval
    df2: Interval
    p: Interval
    p_is_raw: Booleans
    p_is_exact: Booleans
    one_sided: Booleans
    toward: Floats

    def is_one_of(self, *statistics: int) -> Booleans:
        """Where the statistic is one of these."""
        return np.isin(self.statistic, statistics)


@struct
class Estimates:
    """The estimates, on the scale on which their interval is symmetric and less the value of no effect.

    On a log scale these are natural logarithms of ratios. `null` is the value of no effect as given; `smallest`
    is the distance of the smallest effect of interest from it.
    """

    value: Interval
    standard_error: Interval
    low: Interval
    high: Interval
    level: Floats
    adjusted: Booleans
    null: Floats
    log_scale: Booleans
    margin_low: Floats
    margin_high: Floats
    smallest: Floats


@struct
class Samples:
    """Numbers of units: all of them, in the first and second group, and the number of groups."""

    n: Floats
    n1: Floats
    n2: Floats
    groups: Integers


@struct
class Columns:
    """Records as arrays of shape (n,), one row a record, in the order of `found`.

    `own_prior` is that of the record, as the base has it where it is `prior_at_base`, or of its plan where it is
    `prior_from_plan`; `prior_basis` is what a record says that its prior rests on, and empty where it sets none.
    """

    found: tuple[Found, ...]
    test: Tests
    estimate: Estimates
    sample: Samples
    effect: Floats
    effect_is_raw: Booleans
    own_prior: Floats
    prior_basis: tuple[str, ...]
    prior_at_base: Booleans
    prior_from_plan: Booleans
    claims: Booleans
    harm: Booleans
    importance: Booleans
    no_effect_aim: Booleans
    noninferiority: Booleans
    estimation_aim: Booleans


def columns_of(found: Sequence[Found]) -> Columns:
    """Return the records `found` as columns, in the same order."""
    records = [one.record for one in found]
    return Columns(
        found=tuple(found),
        test=_tests([record.test or _EMPTY_TEST for record in records]),
        estimate=_estimates([record.estimate for record in records]),
        sample=_samples([record.sample or _EMPTY_SAMPLE for record in records]),
        effect=_floats([_NAN if r.alternative is None else r.alternative.effect for r in records]),
        effect_is_raw=_booleans([r.alternative is not None and r.alternative.scale == "raw" for r in records]),
        own_prior=_priors(records),
        prior_basis=_bases(records),
        prior_at_base=np.zeros(len(records), np.bool_),
        prior_from_plan=np.zeros(len(records), np.bool_),
        claims=_booleans([r.claim is not None for r in records]),
        harm=_booleans([r.harm for r in records]),
        importance=_booleans([r.importance for r in records]),
        noninferiority=_booleans([r.aim == "noninferiority" for r in records]),
        no_effect_aim=_booleans([r.aim in {"equivalence", "noninferiority"} for r in records]),
        estimation_aim=_booleans([r.aim == "estimation" for r in records]),
    )


def with_trusted_priors(columns: Columns, trusted: Sequence[Record | None]) -> Columns:
    """Return `columns` with the priors that these records set, or do not, in place of the own ones of the rows.

    Where there is `None`, a row keeps its own.
    """
    records = [one.record if other is None else other for one, other in zip(columns.found, trusted, strict=True)]
    priors, bases = _priors(records), _bases(records)
    other = ~np.isclose(priors, columns.own_prior, rtol=0, atol=0, equal_nan=True)
    other |= _booleans([now != before for now, before in zip(columns.prior_basis, bases, strict=True)])
    return replace(columns, own_prior=priors, prior_basis=bases, prior_at_base=other)


def with_promised(columns: Columns, promised: Sequence[Hypothesis | None]) -> Columns:
    """Return `columns` with the prior and the effect that each plan promises, where the record gives none."""
    priors = _floats([_NAN if each is None or each.prior is None else each.prior.probability for each in promised])
    effects = [None if each is None else each.alternative for each in promised]
    lacks_prior, lacks_effect = np.isnan(columns.own_prior), np.isnan(columns.effect)
    raw = _booleans([effect is not None and effect.scale == "raw" for effect in effects])
    planned = _floats([_NAN if effect is None else effect.effect for effect in effects])
    return replace(
        columns,
        own_prior=np.where(lacks_prior, priors, columns.own_prior),
        prior_from_plan=lacks_prior & np.isfinite(priors),
        effect=np.where(lacks_effect, planned, columns.effect),
        effect_is_raw=np.where(lacks_effect, raw, columns.effect_is_raw),
    )


def _priors(records: Sequence[Record]) -> Floats:
    return _floats([_NAN if each.prior is None else each.prior.probability for each in records])


def _bases(records: Sequence[Record]) -> tuple[str, ...]:
    return tuple("" if each.prior is None else each.prior.basis for each in records)


def _tests(tests: Sequence[Test]) -> Tests:
    degrees = [test.df or () for test in tests]
    return Tests(
        statistic=np.array([_code(test) for test in tests], np.intp),
        value=_interval([test.value for test in tests]),
        df1=_interval([df[0] if df else None for df in degrees]),
        df2=_interval([df[1] if len(df) > 1 else None for df in degrees]),
        p=_interval([test.p for test in tests]),
        p_is_raw=_booleans([test.p_kind == "raw" for test in tests]),
        p_is_exact=_booleans([test.p_kind in {"exact", "permutation"} for test in tests]),
        one_sided=_booleans([test.sides == 1 for test in tests]),
        toward=_floats([-1.0 if test.tail == "less" else 1.0 for test in tests]),
    )


def _estimates(estimates: Sequence[Estimate | None]) -> Estimates:
    log_scale = _booleans([e is not None and e.scale == "log" for e in estimates])
    limits = [None if e is None else e.interval for e in estimates]
    nulls = [None if e is None else e.null for e in estimates]
    null, least, most = (
        _null(ends, log_scale)
        for ends in (
            [_NAN if each is None else each.value for each in nulls],
            [_NAN if each is None else each.low for each in nulls],
            [_NAN if each is None else each.high for each in nulls],
        )
    )

    def from_null(numbers: Sequence[Reported | None]) -> Interval:
        ends = _interval(numbers)
        return Interval(
            _from_null(ends.value, null, log_scale),
            _from_null(ends.low, most, log_scale),
            _from_null(ends.high, least, log_scale),
        )

    return Estimates(
        value=from_null([None if e is None else e.value for e in estimates]),
        standard_error=_interval([None if e is None else e.standard_error for e in estimates]),
        low=from_null([None if limit is None else limit.low for limit in limits]),
        high=from_null([None if limit is None else limit.high for limit in limits]),
        level=_floats([_NAN if limit is None else limit.level for limit in limits]),
        adjusted=_booleans([limit is not None and limit.adjusted for limit in limits]),
        null=null,
        log_scale=log_scale,
        margin_low=from_null([_margin(e, 0) for e in estimates]).value,
        margin_high=from_null([_margin(e, 1) for e in estimates]).value,
        smallest=np.abs(from_null([None if e is None else e.smallest_effect for e in estimates]).value),
    )


def _margin(estimate: Estimate | None, end: int) -> Reported | None:
    return None if estimate is None or estimate.margin is None else estimate.margin[end]


def _null(given: Sequence[float], log_scale: Booleans) -> Floats:
    """The value of no effect, or an end of what it may stand for; 0, or 1 for a ratio, where none is given."""
    ends = _floats(given)
    return np.where(np.isnan(ends), np.where(log_scale, 1.0, 0.0), ends)


def _from_null(numbers: Floats, null: Floats, log_scale: Booleans) -> Floats:
    with np.errstate(all="ignore"):
        return np.where(log_scale, np.log(numbers) - np.log(null), numbers - null)


def _samples(samples: Sequence[Sample]) -> Samples:
    return Samples(
        n=_floats([_sample_size(sample) for sample in samples]),
        n1=_floats([_group_size(sample, 0) for sample in samples]),
        n2=_floats([_group_size(sample, 1) for sample in samples]),
        groups=np.array([len(sample.groups) for sample in samples], np.intp),
    )


def _interval(numbers: Sequence[Reported | None]) -> Interval:
    rounded = [None if number is None else number.as_rounded() for number in numbers]
    return Interval(
        _floats([_NAN if number is None else number.value for number in numbers]),
        _floats([_NAN if number is None else number.low for number in rounded]),
        _floats([_NAN if number is None else number.high for number in rounded]),
    )


def _code(test: Test) -> int:
    return NO_STATISTIC if test.statistic is None else STATISTICS.index(test.statistic)


def _sample_size(sample: Sample) -> float:
    if sample.n is not None:
        return float(sample.n)
    return float(sum(group.n for group in sample.groups)) if sample.groups else _NAN


def _group_size(sample: Sample, position: int) -> float:
    return float(sample.groups[position].n) if len(sample.groups) > position else _NAN


def _floats(values: Sequence[float]) -> Floats:
    return np.array(values, np.float64)


def _booleans(values: Sequence[bool]) -> Booleans:
    return np.array(values, np.bool_)
