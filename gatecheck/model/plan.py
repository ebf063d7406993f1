"""The registration: what was promised before the data (`plan/1`)."""

from __future__ import annotations

from typing import Annotated, Literal

from gatecheck.model.marks import Length, OneOrMore, Range
from gatecheck.model.numbers import Reported
from gatecheck.model.record import (
    Aim,
    Alternative,
    Boundary,
    Identifier,
    OpenProbability,
    Outcome,
    PositiveCount,
    Prior,
    Procedure,
    Role,
    Text,
)
from gatecheck.model.struct import struct

Direction = Literal["increase", "decrease", "either"]
DataState = Literal["none", "collecting", "unseen", "seen"]


@struct
class PlannedSample:
    """How many units are planned."""

    planned: Annotated[PositiveCount | None, "number of units planned"] = None
    unit: Annotated[Text | None, "the experimental unit"] = None
    deferred: Annotated[bool, "true where the number is settled later, before the first result"] = False


@struct
class PlannedLooks:
    """The interim looks planned."""

    planned: Annotated[PositiveCount, "number of looks"]
    boundary: Annotated[Boundary | None, "stopping boundary"] = None


@struct
class Hypothesis:
    """One promised test."""

    id: Annotated[Identifier, "stable name of the hypothesis"]
    text: Annotated[Text, "the hypothesis in words"]
    role: Annotated[Role, "place of the outcome among the others"] = "primary"
    aim: Annotated[Aim, "what the claim will be about"] = "difference"
    direction: Annotated[Direction, "direction of the effect promised"] = "either"
    outcome: Annotated[Outcome | None, "what is measured"] = None
    test: Annotated[tuple[Text, ...] | None, OneOrMore(), "the test, or those allowed"] = None
    sides: Annotated[Literal[1, 2] | None, "1 or 2"] = None
    alpha: Annotated[OpenProbability | None, "significance level"] = None
    n: Annotated[PlannedSample | None, "number of units"] = None
    population: Annotated[Text | None, "analysis population"] = None
    exclusions: Annotated[tuple[Text, ...], "rules of exclusion"] = ()
    covariates: Annotated[tuple[Text, ...], "covariates"] = ()
    alternative: Annotated[Alternative | None, "the effect that the study is designed to find"] = None
    smallest_effect: Annotated[Reported | None, "smallest effect of interest"] = None
    margin: Annotated[tuple[Reported, ...] | None, Length(2), "margin: [low, high]"] = None
    prior: Annotated[Prior | None, "probability of a real effect before the data"] = None
    looks: Annotated[PlannedLooks | None, "interim looks"] = None
    family: Annotated[Text | None, "name of the family that it belongs to"] = None
    deferred: Annotated[bool, "true where the hypothesis is settled later, before the first result"] = False


@struct
class PlannedFamily:
    """How the error over a set of tests is controlled."""

    procedure: Annotated[Procedure, "the procedure"]
    alpha: Annotated[Annotated[float, Range(0, 1, low_open=True, high_open=True)] | None, "level"] = None
    order: Annotated[tuple[Text, ...], "ids in the order of a fixed sequence"] = ()


@struct
class Plan:
    """A registration: what was promised before the data."""

    gatecheck: Annotated[Literal["plan/1"], "kind and version of this document"]
    id: Annotated[Identifier, "stable name of the plan"]
    title: Annotated[Text, "title"]
    data: Annotated[DataState, "state of the data at registration"]
    hypotheses: Annotated[tuple[Hypothesis, ...], "the promised tests"] = ()
    families: Annotated[dict[str, PlannedFamily] | None, "families by name"] = None
