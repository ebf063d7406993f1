"""A verdict as it is read back from its file (`verdict/1`), and what differs between two of them."""

from __future__ import annotations

from dataclasses import field
from typing import Annotated, Any, Literal

from gatecheck.model.marks import Pattern, Range
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Answer, Outcome, Standing

_Line = Annotated[int, Range(1)]


@struct
class ToldTool:
    """The program that gave a verdict."""

    name: str
    version: str


@struct
class ToldPolicy:
    """The policy that was applied."""

    name: str
    digest: Annotated[str, Pattern(r"^sha256:[0-9a-f]{64}$", "sha256: and 64 hexadecimal digits")]
    from_: Literal["base", "tree", "built-in"]


@struct
class ToldPlan:
    """A plan that claims were held against."""

    path: str
    digest: str


@struct
class ToldPlace:
    """A position in a file."""

    path: str
    line: _Line
    cell: _Line | None = None
    output: _Line | None = None


@struct
class ToldRule:
    """What one rule says of one record."""

    rule: str
    outcome: Outcome
    enforce: Literal["block", "note"]
    message: str
    remedy: str
    observed: float | None = None
    limit: float | None = None


@struct
class ToldRecord:
    """One record with all that the rules say of it."""

    id: str
    verdict: Standing
    at: ToldPlace
    result: str
    rules: tuple[ToldRule, ...]
    also_at: tuple[ToldPlace, ...]
    claim: str | None = None
    evidence: dict[str, Any] | None = None
    counts_now: bool = True


@struct
class ToldProblem:
    """What could not be read or judged."""

    at: ToldPlace
    message: str
    advice: str


@struct
class ToldVerdict:
    """A verdict of the gate, as its file tells it."""

    gatecheck: Literal["verdict/1"]
    verdict: Answer
    exit: Literal[0, 1, 3]
    counts: dict[str, Annotated[int, Range(0)]]
    claims: tuple[ToldRecord, ...]
    reported: tuple[ToldRecord, ...]
    problems: tuple[ToldProblem, ...]
    notes: tuple[str, ...]
    policy: ToldPolicy | None = None
    tool: ToldTool | None = None
    base: str | None = None
    head: str | None = None
    plans: tuple[ToldPlan, ...] = ()
    others: tuple[ToldRecord, ...] = ()


@struct
class Difference:
    """One thing that two verdicts say differently, as each says it; `None` where one says nothing of it."""

    what: str
    first: str | float | None
    second: str | float | None


@struct
class RecordDifference:
    """What two verdicts say differently of one record: of itself, and by rule."""

    id: str
    itself: tuple[Difference, ...] = ()
    rules: dict[str, tuple[Difference, ...]] = field(default_factory=dict)


@struct
class TwoVerdicts:
    """What differs between two verdicts.

    `conditions` tell under what each was given; they decide nothing. `only_first` and `only_second` are ids of
    records that one of them alone knows, `records` the number of those that either knows, `problems` what one of
    them alone could not read or judge, with its place.
    """

    conditions: tuple[Difference, ...]
    records: int
    only_first: tuple[str, ...]
    only_second: tuple[str, ...]
    changed: tuple[RecordDifference, ...]
    problems: tuple[Difference, ...]

    @property
    def same(self) -> bool:
        """Whether both say the same of every claim and rule."""
        return not (self.only_first or self.only_second or self.changed or self.problems)
