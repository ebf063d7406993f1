"""The tests that can be planned: their effects, their options, and the refusal of what does not go together."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping

import numpy as np

from gatecheck.columns import Floats
from gatecheck.errors import WrongUsage
from gatecheck.model.design import DesignQuestion, PlannedTest, StudySize
from gatecheck.model.struct import struct
from gatecheck.weigh import planned as tests

_LARGEST, _LARGEST_R = 1000.0, 0.9999
_ROUNDING = 1e-12
_SIDES, _RATIO, _GROUPS, _DF = "--sides 1", "--ratio", "--groups", "--df"
_FEWEST_GROUPS = 2


@struct
class _Scale:
    """The scale of an effect: its size on it, nan where it is no effect, and what to give instead."""

    size: Callable[[float], float]
    advice: str


def _either_sign(effect: float, largest: float) -> float:
    return abs(effect) if 0 < abs(effect) <= largest else math.nan


def _above_zero(effect: float) -> float:
    return effect if 0 < effect <= _LARGEST else math.nan


def _of_hazards(effect: float) -> float:
    return abs(math.log(effect)) if 1 / _LARGEST <= effect <= _LARGEST and effect != 1 else math.nan


_D = _Scale(
    lambda d: _either_sign(d, _LARGEST), "give d, in standard deviations, other than 0 and at most 1000 in size"
)
_H = _Scale(
    lambda h: _either_sign(h, math.pi),
    "give h = 2 asin sqrt p1 - 2 asin sqrt p2, other than 0 and at most pi in size",
)
_R = _Scale(lambda r: _either_sign(r, _LARGEST_R), "give r, other than 0 and at most 0.9999 in size")
_F = _Scale(_above_zero, "give f, above 0 and at most 1000")
_W = _Scale(_above_zero, "give w, above 0 and at most 1000")
_HAZARDS = _Scale(_of_hazards, "give the hazard ratio, from 0.001 to 1000 and other than 1")


@struct
class PlannableTest:
    """A test that can be planned: its scale and statistic, its fewest units (per group), and options of its own."""

    scale: _Scale
    statistic: str
    fewest: int
    options: frozenset[str]
    planned: Callable[[Plan, Floats], tests.Planned]


@struct
class Plan:
    """A question without fault: the size of the effect on its scale, and the scale of the default prior."""

    asked: DesignQuestion
    test: PlannableTest
    effect: float
    scale: float

    @property
    def one_sided(self) -> bool:
        """Whether the direction is fixed beforehand."""
        return self.asked.sides == 1

    @property
    def ratio(self) -> float:
        """The second group over the first."""
        return self.asked.ratio or 1.0

    @property
    def groups(self) -> int:
        """The number of groups that one-way-F compares; else 1."""
        return self.asked.groups or 1

    @property
    def df(self) -> int:
        """The degrees of freedom of chi-squared; else 1."""
        return self.asked.df or 1

    @property
    def named(self) -> str:
        """The test with what belongs to it."""
        asked = self.asked
        details = [
            *(["one-sided"] if self.one_sided else []),
            *([f"{asked.groups} groups"] if asked.groups else []),
            *([f"{asked.df} df"] if asked.df else []),
        ]
        return f"{asked.test} ({', '.join(details)})" if details else asked.test

    def second(self, n: Floats) -> Floats:
        """The units in the second group, rounded up; a rounding error is no unit."""
        return np.maximum(np.ceil(n * self.ratio * (1 - _ROUNDING)), 1.0)

    def at(self, n: Floats) -> tests.Planned:
        """The test at each number of units (per group)."""
        return self.test.planned(self, n)

    def size(self, n: int) -> StudySize:
        """The whole study with that number of units (per group)."""
        if self.asked.test not in _OF_TWO_GROUPS:
            return StudySize(n, None, n * self.groups)
        second = int(self.second(np.array([float(n)]))[0])
        return StudySize(n, None if self.asked.ratio is None else second, n + second)


_DIRECTED = frozenset({_SIDES})
_TWO_GROUPS = frozenset({_SIDES, _RATIO})
_OF_ONE_SAMPLE = PlannableTest(
    _D,
    "t",
    2,
    _DIRECTED,
    lambda plan, n: tests.one_sample_t(plan.effect, n, one_sided=plan.one_sided, scale=plan.scale),
)
_TESTS: Mapping[PlannedTest, PlannableTest] = {
    "two-sample-t": PlannableTest(
        _D,
        "t",
        2,
        _TWO_GROUPS,
        lambda plan, n: tests.two_sample_t(
            plan.effect, n, plan.second(n), one_sided=plan.one_sided, scale=plan.scale
        ),
    ),
    "one-sample-t": _OF_ONE_SAMPLE,
    "paired-t": _OF_ONE_SAMPLE,
    "one-proportion": PlannableTest(
        _H, "z", 1, _DIRECTED, lambda plan, n: tests.one_proportion(plan.effect, n, one_sided=plan.one_sided)
    ),
    "two-proportions": PlannableTest(
        _H,
        "z",
        1,
        _TWO_GROUPS,
        lambda plan, n: tests.two_proportions(plan.effect, n, plan.second(n), one_sided=plan.one_sided),
    ),
    "correlation": PlannableTest(
        _R, "r", 4, _DIRECTED, lambda plan, n: tests.correlation(plan.effect, n, one_sided=plan.one_sided)
    ),
    "one-way-F": PlannableTest(
        _F,
        "F",
        2,
        frozenset({_GROUPS}),
        lambda plan, n: tests.one_way_f(plan.effect, plan.groups, n, scale=plan.scale),
    ),
    "chi-squared": PlannableTest(
        _W, "chi2", 1, frozenset({_DF}), lambda plan, n: tests.chi_squared(plan.effect, plan.df, n)
    ),
    "log-rank": PlannableTest(
        _HAZARDS,
        "z",
        1,
        _TWO_GROUPS,
        lambda plan, n: tests.log_rank(plan.effect, plan.ratio, n, one_sided=plan.one_sided),
    ),
}
_OF_TWO_GROUPS = ("two-sample-t", "two-proportions")


def plan_of(question: DesignQuestion, scale: float) -> Plan:
    """Return the plan that a question asks for; `scale` is that of the default prior on means.

    Raises
    ------
    WrongUsage
        The options do not go together, or the effect is no effect of that test.
    """
    test = _TESTS[question.test]
    given = {
        _SIDES: question.sides == 1,
        _RATIO: question.ratio is not None,
        _GROUPS: question.groups is not None,
        _DF: question.df is not None,
    }
    for option, there in given.items():
        if there and option not in test.options:
            raise WrongUsage(_misplaced(option, question.test))
    if _GROUPS in test.options and (question.groups or 0) < _FEWEST_GROUPS:
        raise WrongUsage(f"{question.test} compares two groups or more: give their number with --groups.")
    if _DF in test.options and question.df is None:
        wanted = "give --df, which is (rows - 1) x (columns - 1) of a table"
        raise WrongUsage(f"{question.test} needs its degrees of freedom: {wanted}.")
    size = test.scale.size(question.effect)
    if math.isnan(size):
        raise WrongUsage(f"--effect {question.effect:g} is no effect of {question.test}: {test.scale.advice}.")
    return Plan(question, test, size, scale)


def _misplaced(option: str, test: str) -> str:
    fitting = [name for name, each in _TESTS.items() if option in each.options]
    return f"{option} does not go with {test}: leave it out, or plan a test that takes it ({', '.join(fitting)})."
