"""A record beside the hypothesis that it answers, and a field in which it is not as promised."""

from __future__ import annotations

from gatecheck.model.plan import Hypothesis, Plan, PlannedFamily
from gatecheck.model.record import Record, Sample, Test
from gatecheck.model.struct import struct

#: What stands for a value where a record has none.
NOT_TOLD = "not told"


@struct
class Pair:
    """A record, and the hypothesis of a plan that it answers."""

    record: Record
    plan: Plan
    hypothesis: Hypothesis

    @property
    def test(self) -> Test:
        """The test of the record."""
        return self.record.test or Test()

    @property
    def sample(self) -> Sample:
        """The sample of the record."""
        return self.record.sample or Sample()

    @property
    def speaks_of_sample(self) -> bool:
        """Whether the plan says who is analysed."""
        promised = self.hypothesis
        return promised.n is not None or promised.population is not None or bool(promised.exclusions)

    @property
    def planned_family(self) -> PlannedFamily | None:
        """What the plan says of the family of the hypothesis, where it describes it."""
        name = self.hypothesis.family
        return None if name is None or self.plan.families is None else self.plan.families.get(name)


@struct
class Gap:
    """One field in which a record is not as promised: what was planned, what was done, and both in a clause.

    `unit` is that of what is counted, where it is told.
    """

    field: str
    planned: str
    done: str
    told: str
    unit: str | None = None
