"""The question how large a study must be, and its answer."""

from __future__ import annotations

from typing import Literal

from gatecheck.model.record import Boundary
from gatecheck.model.struct import struct

PlannedTest = Literal["two-sample-t", "one-sample-t", "two-proportions", "correlation"]


@struct
class DesignQuestion:
    """What is planned: the test, the true effect on its standard scale (d, d, h, r), and what stands behind it.

    `family` is the number of tests behind the claim, `looks` the number of looks with their `boundary`,
    `assurance` the probability that the claim stands which is wanted; `prior` overrides that of the policy.
    """

    test: PlannedTest
    effect: float
    assurance: float = 0.8
    prior: float | None = None
    family: int = 1
    looks: int = 1
    boundary: Boundary = "obrien-fleming"


@struct
class CurvePoint:
    """One point of the curve: units (per group) and the probability that the claim stands."""

    n: int
    assurance: float


@struct
class BareDesign:
    """A design with 80 % power at 0.05 alone.

    Its units (per group), the probability that its claim stands, the risk that a result which is just significant
    leaves, and the share of false ones among all results below 0.05 over many such designs (tail areas).
    """

    n: int
    assurance: float
    risk: float
    long_run: float


@struct
class Design:
    """The answer: `sizes` gives the least number of units (per group) for each assurance, `None` above 1e8."""

    question: DesignQuestion
    policy: str
    alternative: str
    prior: float
    log_likelihood_ratio: float
    sizes: tuple[tuple[float, int | None], ...]
    curve: tuple[CurvePoint, ...]
    bare: BareDesign | None
