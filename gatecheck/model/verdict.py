"""The verdict: what the gate answers, one list of findings from which everything else follows."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Literal

from gatecheck.model.exit import Exit
from gatecheck.model.interval_shown import IntervalShown
from gatecheck.model.struct import struct

Outcome = Literal["met", "short", "waived", "does-not-apply", "undecided"]
Enforce = Literal["block", "note", "off"]
Standing = Literal["stands", "falls-short", "waived", "undecided"]
Answer = Literal["stands", "falls-short", "cannot-judge"]
Kind = Literal["record", "plan", "text", "code"]
ChangeKind = Literal["strengthened", "new", "changed", "withdrawn"]


@dataclass(frozen=True, slots=True, order=True)
class Place:
    """A position: path relative to the judged folder, 1-based line, and for notebooks cell and output."""

    path: str
    line: int = 1
    cell: int | None = None
    output: int | None = None

    @property
    def is_whole_tree(self) -> bool:
        """Whether this is the judged folder itself and no file in it."""
        return self.path == "."

    def __str__(self) -> str:
        where = f"{self.path}:{self.line}"
        return where if self.cell is None else f"{where} (cell {self.cell}, output {self.output})"


@dataclass(frozen=True, slots=True, order=True)
class Problem:
    """Something that could not be read or judged: where, what, and what to do."""

    at: Place
    message: str
    advice: str


@dataclass(frozen=True, slots=True)
class Figures:
    """The evidence in one result, with the assumptions that it rests on.

    `log_likelihood_ratio` is the natural log of the likelihood ratio for `alternative` over no effect;
    `None` in a number means that it could not be computed, and `note` says why. `pooled` says with which records
    the result was pooled, and to what; empty where it was weighed alone.
    """

    alternative: str
    log_likelihood_ratio: float | None
    prior: float | None
    prior_from: str
    false_positive_risk: float | None
    prior_needed: float | None
    note: str
    pooled: str = ""


@dataclass(frozen=True, slots=True)
class Finding:
    """What one rule says of one record.

    `digest` is of all that a permission to pass over it rests on; empty where there can be none.
    """

    rule: str
    outcome: Outcome
    enforce: Enforce
    observed: float | None = None
    limit: float | None = None
    message: str = ""
    remedy: str = ""
    digest: str = ""

    @property
    def blocks(self) -> bool:
        """Whether this finding keeps its claim from standing."""
        return self.enforce == "block" and self.outcome in {"short", "undecided"}


@struct
class Sensitivity:
    """The false positive risk of one result over a grid of priors, under every alternative that it allows.

    `risks` holds a row for each of `alternatives` (the one chosen first) with a risk for each of `priors`;
    `limit` is the risk that the policy allows, where it says.
    """

    priors: tuple[float, ...]
    alternatives: tuple[str, ...]
    risks: tuple[tuple[float, ...], ...]
    limit: float | None


@dataclass(frozen=True, slots=True)
class Judged:
    """One record with all that the rules say of it.

    A plan, a line of prose and a file of code are judged alike: they are of another `kind` and claim nothing.
    """

    id: str
    at: Place
    claim: str | None
    result: str
    evidence: Figures | None
    findings: tuple[Finding, ...]
    also_at: tuple[Place, ...] = ()
    counts_now: bool = True
    alternatives: tuple[Figures, ...] = ()
    sensitivity: Sensitivity | None = None
    interval: IntervalShown | None = None
    kind: Kind = "record"

    @property
    def standing(self) -> Standing:
        """The standing that the findings give this record."""
        blocking = {finding.outcome for finding in self.findings if finding.blocks}
        if "short" in blocking:
            return "falls-short"
        if "undecided" in blocking:
            return "undecided"
        waived = any(finding.outcome == "waived" for finding in self.findings)
        return "waived" if waived else "stands"


@dataclass(frozen=True, slots=True)
class PolicyUsed:
    """The policy that was applied: its name, its digest, and where it came from."""

    name: str
    digest: str
    origin: Literal["base", "tree", "built-in"]


@dataclass(frozen=True, slots=True)
class Change:
    """One claim that is not as it is at the base: `told` says in one sentence what changed.

    `at` is its place in the judged tree, and at the base where it is gone.
    """

    id: str
    kind: ChangeKind
    at: Place
    told: str


@dataclass(frozen=True, slots=True)
class Verdict:
    """The answer of the gate of that `version`.

    `base` and `head` are commits, `changes` are those of claims since the base, and `plans` names the plans that
    were read with their digests.
    """

    policy: PolicyUsed | None
    judged: tuple[Judged, ...] = ()
    problems: tuple[Problem, ...] = ()
    notes: tuple[str, ...] = field(default=())
    changes: tuple[Change, ...] = ()
    base: str | None = None
    head: str | None = None
    plans: tuple[tuple[str, str], ...] = ()
    version: str = ""

    @property
    def claims(self) -> tuple[Judged, ...]:
        """The records that claim something."""
        return tuple(one for one in self.judged if one.claim is not None)

    @property
    def reported(self) -> tuple[Judged, ...]:
        """The records that report a result and claim nothing."""
        return tuple(one for one in self.judged if one.claim is None and one.kind == "record")

    @property
    def others(self) -> tuple[Judged, ...]:
        """What is judged and is no record: plans, lines of prose, files of code."""
        return tuple(one for one in self.judged if one.kind != "record")

    @property
    def exit(self) -> Exit:
        """The exit status; what cannot be judged wins over what falls short."""
        standings = {one.standing for one in self.judged if one.counts_now}
        if self.problems or "undecided" in standings:
            return Exit.CANNOT_JUDGE
        return Exit.FALLS_SHORT if "falls-short" in standings else Exit.STANDS

    @property
    def answer(self) -> Answer:
        """The verdict in one word."""
        words: dict[Exit, Answer] = {Exit.STANDS: "stands", Exit.FALLS_SHORT: "falls-short"}
        return words.get(self.exit, "cannot-judge")

    def count(self, standing: Standing) -> int:
        """Return the number of claims with that standing."""
        return sum(one.standing == standing for one in self.claims)
