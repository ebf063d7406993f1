"""Command `trace`: show one record through the history."""

from __future__ import annotations

import argparse

from gatecheck.commands.edge import folder, policy_path, tell, width
from gatecheck.errors import CannotJudge, WrongUsage
from gatecheck.model.exit import Exit
from gatecheck.policies import standing_policy
from gatecheck.render import course_account
from gatecheck.tracing import trace


def act(parsed: argparse.Namespace) -> int:
    """Tell what the record was after each commit that changed it; it judges nothing."""
    policy = standing_policy(folder(parsed), policy_path(parsed), parsed.base).policy
    if policy is None:
        raise CannotJudge("the policy cannot be read", "see `gatecheck weigh` for what is wrong with it")
    found = trace(folder(parsed), policy, parsed.id, parsed.base)
    if found is None:
        raise WrongUsage(f"there is and was no record {parsed.id!a}; `gatecheck survey` lists those that there are")
    tell(course_account(found, width()))
    return Exit.STANDS
