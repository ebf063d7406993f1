"""Whole screens: what their design is expected to find, against the hits that were found."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from gatecheck.columns import Booleans, Columns, Floats
from gatecheck.model.record import Record, Screen, Test
from gatecheck.model.struct import struct

#: Fewer tests are no whole screen: each of their results can be weighed by itself (common practice, no source).
LEAST_TESTS = 100
_NO_SCREEN = Screen()
#: Tests of one screen share plates and batches, so hits vary more than independent ones: a gap is told beyond so
#: many standard deviations, and below so many a count is one that chance gives (common practice, no source).
_FAR = 3.0
_NEAR = 2.0


@struct
class Screens:
    """Screens as arrays of shape (n,); nan where there is none, or a field is missing.

    `true_positives` and `false_positives` are the numbers that the design is expected to call positive, and
    `false_share` the share of the false ones in the long run. `unplanned` counts the tests that were left out
    before by a filter that was not planned. `by_chance` says where no true effect at all would give as many hits,
    `unlike_design` where the hits are far from those expected.
    """

    tests: Floats
    hits: Floats
    true_positives: Floats
    false_positives: Floats
    false_share: Floats
    as_findings: Booleans
    unplanned: Floats
    by_chance: Booleans
    unlike_design: Booleans


def is_whole_screen(record: Record) -> bool:
    """Whether the record gives a screen and no result of a single test."""
    test = record.test or Test()
    single = test.p is not None or test.value is not None or test.named_statistic is not None
    return record.screen is not None and not single


def screens(columns: Columns) -> Screens:
    """The screens of all rows."""
    from gatecheck.weigh import long_run  # noqa: PLC0415  # most trees hold no screen

    given = [one.record.screen or _NO_SCREEN for one in columns.found]
    tests, hits = _column([each.tests for each in given]), _column([each.hits for each in given])
    alpha, power = _column([each.alpha for each in given]), _column([each.power for each in given])
    prior = _column([each.prior for each in given])
    expected = long_run.expected_screen(tests, alpha, power, prior)
    rate = alpha * (1 - prior) + power * prior
    return Screens(
        tests,
        hits,
        expected.true_positives,
        expected.false_positives,
        long_run.long_run_false_positive_risk(alpha, power, prior),
        as_findings=np.array([each.called == "findings" for each in given], np.bool_),
        unplanned=_column([sum(float(part.n) for part in each.removed if not part.planned) for each in given]),
        by_chance=_distance(hits, tests, alpha) <= _NEAR,
        unlike_design=_distance(hits, tests, rate) > _FAR,
    )


def alpha_within(limit: float, screen: Screen) -> float:
    """The level of each test at which just the share `limit` of the hits is false, with prior and power as given.

    It solves ``alpha (1 - prior) / (alpha (1 - prior) + power prior) = limit``; nan where a field is missing.
    """
    if screen.power is None or screen.prior is None:
        return float("nan")
    return limit / (1 - limit) * screen.power * screen.prior / (1 - screen.prior)


def _distance(hits: Floats, tests: Floats, rate: Floats) -> Floats:
    """How far the hits are from ``tests * rate``, in standard deviations of independent tests."""
    distance: Floats = np.abs(hits - tests * rate) / np.sqrt(tests * rate * (1 - rate))
    return distance


def _column(values: Sequence[float | None]) -> Floats:
    return np.array([np.nan if each is None else each for each in values], np.float64)
