"""Permissions to merge although a rule falls short: waivers, and what was accepted when the gate was adopted.

They change no computed number: a finding that they cover keeps what was observed and what the policy wants.
"""

from __future__ import annotations

import functools
from collections.abc import Collection, Sequence
from datetime import date
from pathlib import Path

from gatecheck.model.found import Found
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Problem
from gatecheck.permissions.accepted import accept, read_accepted
from gatecheck.permissions.commits import changer_of, day_of
from gatecheck.permissions.waivers import Circumstances, Permitted, Row, read_waivers, waive


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
    """Findings by row of which some are waived, with what is told and what could not be read."""

    findings: tuple[Row, ...]
    problems: tuple[Problem, ...]
    notes: tuple[str, ...]


def permitted(setting: Setting, findings: Sequence[Row], found: Sequence[Found]) -> Settled:
    """Return `findings`, a row for each of `found`, with those waived that a permission covers.

    Raises
    ------
    CannotJudge
        Git fails or does not know the base, or a file of permissions is there and cannot be read.
    """
    waivers, accepted = read_waivers(setting.root, setting.base), read_accepted(setting.root, setting.base)
    result = Permitted(tuple(findings), (*waivers.notes, *accepted.notes))
    if waivers.value is not None and waivers.value.waivers:
        day = day_of(setting.root, setting.base, setting.today)
        changer = functools.cache(functools.partial(changer_of, setting.root))
        waived = waive(result.findings, found, waivers.value.waivers, Circumstances(day, changer, setting.rules))
        result = Permitted(waived.findings, (*result.notes, *waived.notes))
    if accepted.value is not None:
        passed = accept(result.findings, found, accepted.value.accepted)
        result = Permitted(passed.findings, (*result.notes, *passed.notes))
    return Settled(result.findings, (*waivers.problems, *accepted.problems), result.notes)
