"""Command `explain`: show all reasoning for one record."""

from __future__ import annotations

import argparse

from gatecheck.commands.edge import bold, folder, policy_path, progress, tell, width
from gatecheck.errors import WrongUsage
from gatecheck.gate import Request, check
from gatecheck.model.exit import Exit
from gatecheck.render import account, explain


def act(parsed: argparse.Namespace) -> int:
    """Tell all that was found of the record; the verdict on it is no status of this command."""
    explained = frozenset([parsed.id])
    with progress() as line:
        request = Request(folder(parsed), policy_path(parsed), parsed.base, explain=explained, progress=line)
        verdict = check(request)
    if any(one.id == parsed.id for one in verdict.judged):
        tell(explain(verdict, parsed.id, width(), bold=bold()))
        return Exit.STANDS
    if verdict.problems:
        tell(account(verdict, width(), bold=bold()))
        return Exit.CANNOT_JUDGE
    raise WrongUsage(f"there is no record {parsed.id!a}; `gatecheck survey` lists those that there are")
