"""The question how large a study must be, and its answer."""

from __future__ import annotations

from typing import Literal

from gatecheck.model.record import Boundary
from gatecheck.model.struct import struct

PlannedTest = Literal[
    "two-sample-t",
    "one-sample-t",
    "paired-t",
    "one-proportion",
    "two-proportions",
    "correlation",
    "one-way-F",
    "chi-squared",
    "log-rank",
]

#: Over more looks than this the integration would take long, at every size that is tried.
MOST_LOOKS_COUNTED = 25
_WITHOUT_DIRECTION = ("one-way-F", "chi-squared")


@struct
class DesignQuestion:
    """What is planned: the test, the true effect on its standard scale, and what stands behind it.

    The scale is d for t (of the differences where paired), h for proportions, r, f for one-way-F, w for chi-squared
    and the hazard ratio for log-rank. `family` is the number of tests behind the claim, `looks` the number of looks
    with their `boundary`, `assurance` the probability that the claim stands which is wanted; `prior` overrides that
    of the policy. `groups` belongs to one-way-F, `df` to chi-squared, and `ratio`, of the second group over the
    first, to tests of two groups.
    """

    test: PlannedTest
    effect: float
    assurance: float = 0.8
    prior: float | None = None
    family: int = 1
    looks: int = 1
    boundary: Boundary = "obrien-fleming"
    sides: int = 2
    groups: int | None = None
    df: int | None = None
    ratio: float | None = None

    @property
    def only_last_look(self) -> bool:
        """Whether of several looks the last alone is reckoned with.

        The others are where they are few enough to integrate over, and the statistic has a direction.
        """
        return self.looks > 1 and (self.looks > MOST_LOOKS_COUNTED or self.test in _WITHOUT_DIRECTION)


@struct
class Need:
    """The likelihood ratio that the policy wants under one alternative, as its natural log."""

    alternative: str
    log_likelihood_ratio: float


@struct
class StudySize:
    """The size of a study: units (pairs, events) in each or the first group, in the second where asked, in all."""

    n: int
    second: int | None
    total: int


@struct
class Least:
    """The least size that serves; there the least statistic that does, its p-value, and the assurance."""

    size: StudySize
    value: float
    p: float
    assurance: float


@struct
class Level:
    """One row of the table: the assurance wanted, and what serves; `None`: no size up to a hundred million does."""

    wanted: float
    least: Least | None


@struct
class CurvePoint:
    """One point of the curve: units (per group) and the probability that the claim stands."""

    n: int
    assurance: float


@struct
class BareDesign:
    """A design with 80 % power at 0.05 alone.

    Its size, the probability that its claim stands, the risk that a result which is just significant leaves, and
    the share of false ones among all results below 0.05 over many such designs (tail areas).
    """

    size: StudySize
    assurance: float
    risk: float
    long_run: float


@struct
class Design:
    """The answer.

    `alternative` is that against which the claim will be weighed; `needs` are all that the policy wants of its
    evidence, and `log_p_limit` the natural log of the p-value that the family and the looks want (0: none).
    `statistic` is the letter of the statistic in `levels`.
    """

    question: DesignQuestion
    policy: str
    alternative: str
    prior: float
    needs: tuple[Need, ...]
    log_p_limit: float
    statistic: str
    levels: tuple[Level, ...]
    curve: tuple[CurvePoint, ...]
    bare: BareDesign | None

    @property
    def wanted(self) -> Least | None:
        """What serves for the assurance that was asked for."""
        return next(level.least for level in self.levels if level.wanted == self.question.assurance)
