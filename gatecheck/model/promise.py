"""What was promised for a result: the hypothesis as it was frozen, and the standing of its plan."""

from __future__ import annotations

from typing import Literal

from gatecheck.model.plan import Hypothesis, Plan
from gatecheck.model.struct import struct

Grade = Literal["none", "self-declared", "repository-order", "signed", "third-party-time"]
#: Every grade of evidence that a plan came before the data, the weakest first.
GRADES: tuple[Grade, ...] = ("none", "self-declared", "repository-order", "signed", "third-party-time")


@struct
class Promise:
    """What stands behind one record that names a plan.

    `plan` and `hypothesis` are as they were frozen, when data or results first appeared; `None` where there is
    none, and `missing` says why, or where it is not known which version that is or what it says, and `missing` is
    empty. `grade` is `None` where it is not known, as where the history is cut; it is then `at_least` what is
    known. `because` says what it rests on or why it is not known, and `advice` what would tell or raise it.
    `frozen_at` is the commit of the frozen version, `changed_later` whether the plan has changed since.
    `digest` is that of what the frozen version says.
    """

    file: str
    asked: str | None
    plan: Plan | None = None
    hypothesis: Hypothesis | None = None
    grade: Grade | None = None
    because: str = ""
    advice: str = ""
    frozen_at: str | None = None
    changed_later: bool = False
    missing: str = ""
    at_least: Grade = "none"
    digest: str = ""


@struct
class PlanInTree:
    """A plan with the place of its document (path from the judged folder, 1-based line) and its digest.

    `gone_since` is the commit that took it away, where the history alone has it still.
    """

    path: str
    line: int
    plan: Plan
    digest: str = ""
    gone_since: str | None = None
