"""Command `compare`: tell what two verdicts say differently."""

from __future__ import annotations

import argparse
from pathlib import Path

from gatecheck.commands.edge import tell, width
from gatecheck.errors import CannotJudge
from gatecheck.model.exit import Exit
from gatecheck.model.two_verdicts import ToldVerdict
from gatecheck.render import difference_account as told
from gatecheck.render.text import plain
from gatecheck.scan.own_file import read_own
from gatecheck.two_verdicts import compared, read_verdict


def act(parsed: argparse.Namespace) -> int:
    """Compare the two files; the status is 0 where they say the same of every claim and rule, else 1."""
    found = compared(_verdict(parsed.first), _verdict(parsed.second))
    tell(told(found, (parsed.first, parsed.second), width()))
    return Exit.STANDS if found.same else Exit.FALLS_SHORT


def _verdict(named: str) -> ToldVerdict:
    path = Path(named)
    file = read_own(path.parent, path.name)
    if file is None:
        raise CannotJudge(
            f"there is no file {named!a}", "name a verdict that `gatecheck weigh --write json=PATH` wrote"
        )
    if file.document is None:
        problem = file.problems[0]
        raise _refusal(named, problem.at.line, problem.message, problem.advice)
    verdict, faults = read_verdict(file.document.value)
    if verdict is None:
        fault, more = faults[0], f" (and {len(faults) - 1} more)" if len(faults) > 1 else ""
        what = f"{fault.field or 'the document'} {fault.message}{more}"
        raise _refusal(named, file.document.locate(fault.path), what, fault.advice)
    return verdict


def _refusal(named: str, line: int, what: str, advice: str) -> CannotJudge:
    return CannotJudge(plain(f"{named!a} is no verdict that can be read: line {line}, {what}"), plain(advice))
