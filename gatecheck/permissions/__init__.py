"""Permissions to merge although a rule falls short: waivers, and what was accepted when the gate was adopted.

They change no computed number: a finding that they cover keeps what was observed and what the policy wants.
"""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import replace
from datetime import date
from pathlib import Path
from typing import TYPE_CHECKING

from gatecheck.model.found import Found
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Judged, Problem
from gatecheck.model.waivers import Waivers
from gatecheck.permissions.accepted import accept, read_accepted
from gatecheck.permissions.commits import day_of
from gatecheck.permissions.waivers import Circumstances, Permitted, Row, Subject, read_waivers, waive

if TYPE_CHECKING:
    from gatecheck.permissions.authors import Changer


@struct
class Setting:
    """Where and when permissions are asked for, and the rules that there are, by name.

    With the revision `base` the permissions are those that stand there: a pull request grants itself none.
    `today` counts where no commit tells the day; see `day_of`.
    """

    root: Path
    base: str | None
    today: date
    rules: Collection[str]


@struct
class Settled:
    """Findings by row, and those of plans, of which some are waived; what could not be read, and what is told."""

    findings: tuple[Row, ...]
    plans: tuple[Judged, ...]
    problems: tuple[Problem, ...]
    notes: tuple[str, ...]


def permitted(
    setting: Setting, findings: Sequence[Row], found: Sequence[Found], plans: Sequence[Judged] = ()
) -> Settled:
    """Return `findings`, a row for each of `found`, and `plans`, with what a permission covers waived.

    Raises
    ------
    CannotJudge
        Git fails or does not know the base, or a file of permissions is there and cannot be read.
    """
    waivers, accepted = read_waivers(setting.root, setting.base), read_accepted(setting.root, setting.base)
    subjects: tuple[Subject, ...] = (*found, *plans)
    result = Permitted((*findings, *(one.findings for one in plans)), (*waivers.notes, *accepted.notes))
    if waivers.value is not None and waivers.value.waivers:
        waived = waive(result.findings, subjects, waivers.value.waivers, _circumstances(setting, waivers.value))
        result = Permitted(waived.findings, (*result.notes, *waived.notes))
    if accepted.value is not None:
        passed = accept(result.findings, subjects, accepted.value.accepted)
        result = Permitted(passed.findings, (*result.notes, *passed.notes))
    of_plans = zip(plans, result.findings[len(found) :], strict=True)
    return Settled(
        result.findings[: len(found)],
        tuple(replace(one, findings=row) for one, row in of_plans),
        (*waivers.problems, *accepted.problems),
        result.notes,
    )


def _circumstances(setting: Setting, waivers: Waivers) -> Circumstances:
    from gatecheck.permissions.authors import Authors  # noqa: PLC0415  # most trees have no waivers
    from gatecheck.rules import rule_named  # noqa: PLC0415

    authors = Authors(setting.root, {each.record for each in waivers.waivers})

    def changers(one: Subject, rule: str) -> Sequence[Changer]:
        return authors.of(one, rule_named(rule).reads) if isinstance(one, Found) else authors.of_file(one.at.path)

    day = day_of(setting.root, setting.base, setting.today)
    return Circumstances(day, changers, setting.rules)
