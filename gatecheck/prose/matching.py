"""Which record a statistic in prose is of: one that it fits, or the nearest of the same kind with what differs."""

from __future__ import annotations

import bisect
import functools
from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass, field

from gatecheck.model.numbers import Reported, exact
from gatecheck.model.record import Estimate, Interval, Record, Test
from gatecheck.model.struct import struct
from gatecheck.prose.fields import Subject, is_in_percent
from gatecheck.prose.numbers_in_text import Shown, agrees, numbers
from gatecheck.prose.sentences import sentence_at
from gatecheck.prose.statistics_in_text import Result, ShownInterval, ShownShare, ShownTest, Statistic

_NO_TEST, _NO_ESTIMATE, _NO_INTERVAL = Test(), Estimate("none", exact(0.0)), Interval(0.5)
#: The estimate of an interval may stand this far before it in its sentence, in characters.
_ESTIMATE_WITHIN = 120


@struct
class Difference:
    """One figure of a statistic that is not the record's: its name, as the text shows it, as the record has it."""

    figure: str
    shown: str
    recorded: str


@struct
class Match:
    """The record that a statistic is of, or the nearest: then `differences` says what keeps it from being that."""

    record: Record
    differences: tuple[Difference, ...] = ()


@dataclass(eq=False, repr=False)
class _Sorted:
    """Records by the size of a number of theirs; `widest` is the most by which rounding may have moved one."""

    keyed: list[tuple[float, int, Subject]]
    widest: float

    def near(self, shown: Shown, scale: float = 1.0) -> Iterator[Subject]:
        """Those whose number may be the one that is shown, and the next one to either side."""
        size, margin = abs(float(shown.value)) * scale, float(shown.unit) * scale + self.widest
        first = bisect.bisect_left(self.keyed, size - margin, key=_key)
        last = bisect.bisect_right(self.keyed, size + margin, key=_key)
        return (one[2] for one in self.keyed[max(0, first - 1) : last + 1])


def _key(one: tuple[float, int, Subject]) -> float:
    return one[0]


def _sorted(subjects: Iterable[Subject], number: Callable[[Subject], Reported | None]) -> _Sorted:
    known = [(each, row, one) for row, one in enumerate(subjects) if (each := number(one)) is not None]
    widest = max((each.high - each.value for each, _, __ in known if each.relation == "="), default=0.0)
    return _Sorted(sorted((abs(each.value), row, one) for each, row, one in known), widest)


@dataclass(eq=False, repr=False)
class Matcher:
    """Finds the record of a statistic among `subjects`."""

    subjects: Sequence[Subject]
    _by_statistic: dict[tuple[str, tuple[str, ...]], tuple[_Sorted, list[Subject]]] = field(default_factory=dict)

    def match(self, text: str, one: Statistic) -> Match | None:
        """Return the record that `one`, which stands in `text`, fits, the nearest one, or `None`."""
        if isinstance(one, Result):
            return self._of_p(one.statistic) if one.statistic.kind == "p" else self._of_test(one.statistic, one.p)
        if isinstance(one, ShownInterval):
            return self._of_interval(text, one)
        return self._shares.get((one.part, one.whole))

    def _of_test(self, one: ShownTest, p: ShownTest | None) -> Match | None:
        by_value, without_value = self._comparable(one)
        near = [*by_value.near(one.value), *without_value]
        found = (Match(each.record, tuple(_of_test(one, p, each.record))) for each in near)
        # Without degrees of freedom it is the value alone that a record is known by.
        return _best(
            each for each in found if one.df or all(other.figure != one.kind for other in each.differences)
        )

    def _comparable(self, one: ShownTest) -> tuple[_Sorted, list[Subject]]:
        """The records of this statistic with these degrees of freedom: by value, and those that give none."""
        key = (one.kind, tuple(each.text for each in one.df))
        if key not in self._by_statistic:
            same = [each for each in self._by_kind.get(one.kind, ()) if _same_df(one, each.record.test or _NO_TEST)]
            without = [each for each in same if (each.record.test or _NO_TEST).value is None]
            self._by_statistic[key] = _sorted(same, lambda each: (each.record.test or _NO_TEST).value), without
        return self._by_statistic[key]

    def _of_p(self, p: ShownTest) -> Match | None:
        near = (*self._p.near(p.value), *self._adjusted_p.near(p.value))
        fitting = (each.record for each in near if _fits_p(p, each.record))
        return next((Match(record) for record in fitting), None)

    def _of_interval(self, text: str, one: ShownInterval) -> Match | None:
        scales = (1.0, 0.01) if one.low.percent or one.high.percent else (1.0,)
        near = [each for scale in scales for each in self._low.near(one.low, scale)]
        found = (Match(each.record, tuple(_of_interval(text, one, each))) for each in near)
        return _best(each for each in found if all(other.figure != "lower limit" for other in each.differences))

    @functools.cached_property
    def _by_kind(self) -> dict[str, list[Subject]]:
        kinds: dict[str, list[Subject]] = {}
        for one in self.subjects:
            kinds.setdefault((one.record.test or _NO_TEST).statistic or "", []).append(one)
        return kinds

    @functools.cached_property
    def _p(self) -> _Sorted:
        return _sorted(self.subjects, lambda one: (one.record.test or _NO_TEST).p)

    @functools.cached_property
    def _adjusted_p(self) -> _Sorted:
        return _sorted(self.subjects, lambda one: one.record.family.adjusted_p if one.record.family else None)

    @functools.cached_property
    def _low(self) -> _Sorted:
        return _sorted(self.subjects, lambda one: _interval_of(one.record).low)

    @functools.cached_property
    def _shares(self) -> dict[tuple[int, int], Match]:
        return {pair: Match(one.record) for one in reversed(self.subjects) for pair in _pairs(one.record)}


def differences(text: str, one: Statistic, subject: Subject) -> tuple[Difference, ...] | None:
    """Return what differs between a statistic and the record of `subject`, or `None` where they have nothing alike.

    A statistic has something alike with a record of the same statistic and degrees of freedom, and an interval
    with one of the same level.
    """
    test = subject.record.test or _NO_TEST
    if isinstance(one, Result) and one.statistic.kind == "p":
        return None if test.p is None else tuple(_of_p(one.statistic, subject.record))
    if isinstance(one, Result):
        same = test.statistic == one.statistic.kind and _same_df(one.statistic, test)
        return tuple(_of_test(one.statistic, one.p, subject.record)) if same else None
    if isinstance(one, ShownInterval):
        interval = _interval_of(subject.record)
        comparable = interval.low is not None and agrees(one.level, exact(100 * interval.level), in_percent=True)
        return tuple(_of_interval(text, one, subject)) if comparable else None
    return None


def share_differs(one: ShownShare) -> bool:
    """Whether a percentage is not that of its own counts."""
    return not agrees(one.percent, exact(one.part / one.whole))


def _best(matches: Iterable[Match]) -> Match | None:
    """The match with the fewest differences; of equals the first."""
    return min(matches, key=lambda one: len(one.differences), default=None)


def _of_test(one: ShownTest, p: ShownTest | None, record: Record) -> Iterator[Difference]:
    test, sample = record.test or _NO_TEST, record.sample
    if test.value is not None and not _same_size(one.value, test.value):
        yield Difference(one.kind, one.value.text, test.value.shown)
    if one.n is not None and sample is not None and sample.n is not None and one.n.value != sample.n:
        yield Difference("N", one.n.text, str(sample.n))
    if p is not None:
        yield from _of_p(p, record)


def _of_p(p: ShownTest, record: Record) -> Iterator[Difference]:
    recorded = (record.test or _NO_TEST).p
    if recorded is not None and not _fits_p(p, record):
        yield Difference("p", p.value.told, recorded.shown)


def _fits_p(p: ShownTest, record: Record) -> bool:
    test, family = record.test or _NO_TEST, record.family
    given = (test.p, family.adjusted_p if family else None)
    return any(each is not None and agrees(p.value, each) for each in given)


def _same_size(shown: Shown, recorded: Reported) -> bool:
    """Whether a statistic agrees; a text may leave out the sign, which only says which group came first."""
    return agrees(shown, recorded) or (shown.value >= 0 > recorded.value and agrees(shown, _turned(recorded)))


def _turned(negative: Reported) -> Reported:
    text = None if negative.text is None else negative.text.strip().removeprefix("-")
    return Reported(-negative.value, -negative.high, -negative.low, text=text)


def _same_df(one: ShownTest, test: Test) -> bool:
    """Whether degrees of freedom are the same; where either side gives none, nothing speaks against it."""
    if not one.df or test.df is None:
        return True
    return len(one.df) == len(test.df) and all(map(agrees, one.df, test.df))


def _of_interval(text: str, one: ShownInterval, subject: Subject) -> Iterator[Difference]:
    interval, estimate = _interval_of(subject.record), subject.record.estimate or _NO_ESTIMATE
    in_percent = is_in_percent(subject, "estimate.value")
    if not agrees(one.level, exact(100 * interval.level), in_percent=True):
        yield Difference("level", one.level.text, f"{100 * interval.level:.4g}")
    for name, shown, limit in (("lower limit", one.low, interval.low), ("upper limit", one.high, interval.high)):
        if limit is None or not agrees(shown, limit, in_percent=in_percent):
            yield Difference(name, shown.text, "none" if limit is None else limit.shown)
            return
    if one.estimate is not None:
        start, _ = sentence_at(text, one.start)
        before = numbers(text, max(start, one.start - _ESTIMATE_WITHIN), one.start)
        if not any(agrees(each, estimate.value, in_percent=in_percent) for each in before):
            yield Difference("estimate", one.estimate.text, estimate.value.shown)


def _interval_of(record: Record) -> Interval:
    return (record.estimate or _NO_ESTIMATE).interval or _NO_INTERVAL


def _pairs(record: Record) -> Iterator[tuple[int, int]]:
    groups = record.sample.groups if record.sample else ()
    yield from ((each.events, each.n) for each in groups if each.events is not None)
    screen = record.screen
    if screen is not None and screen.hits is not None and screen.tests is not None:
        yield screen.hits, screen.tests
