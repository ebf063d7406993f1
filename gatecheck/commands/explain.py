"""Command `explain`: show all reasoning for one record."""

from __future__ import annotations

import argparse

from gatecheck.commands.edge import folder, policy_path, tell, width
from gatecheck.errors import WrongUsage
from gatecheck.gate import Request, check
from gatecheck.model.exit import Exit
from gatecheck.render import account, explain


def act(parsed: argparse.Namespace) -> int:
    """Tell all that was found of the record; the verdict on it is no status of this command."""
    request = Request(folder(parsed), policy_path(parsed), parsed.base, explain=frozenset([parsed.id]))
    verdict = check(request)
    if any(one.id == parsed.id for one in verdict.judged):
        tell(explain(verdict, parsed.id, width()))
        return Exit.STANDS
    if verdict.problems:
        tell(account(verdict, width()))
        return Exit.CANNOT_JUDGE
    raise WrongUsage(f"there is no record {parsed.id!a}; `gatecheck survey` lists those that there are")
