"""Command `adopt`: accept what falls short now, so that only new shortfalls block."""

from __future__ import annotations

import argparse

from gatecheck.commands.edge import bold, folder, policy_path, tell, width, write
from gatecheck.errors import CannotJudge
from gatecheck.gate import Request, check
from gatecheck.model.exit import Exit
from gatecheck.permissions.accepted import ACCEPTED_FILE, adoption, as_file, read_accepted
from gatecheck.render import account, adopted


def act(parsed: argparse.Namespace) -> int:
    """Write the list, or take off what has ended; return the status of the verdict that then holds."""
    root = folder(parsed)
    request = Request(root, policy_path(parsed))
    verdict = check(request)
    if verdict.policy is None:
        tell(account(verdict, width(), bold=bold()))
        return Exit.CANNOT_JUDGE
    before = read_accepted(root, None)
    if before.problems:
        first = before.problems[0]
        raise CannotJudge(f"{first.at}: {first.message}", first.advice)
    listed = None if before.value is None else before.value.accepted
    done = adoption(listed, verdict.judged, whole=not verdict.problems)
    if done.added or done.dropped:
        write(str(root / ACCEPTED_FILE), as_file(done.entries))
        verdict = check(request)
    tell(adopted(done, ACCEPTED_FILE, listed is not None, width()))
    if verdict.exit is not Exit.STANDS:
        tell(f"\n{account(verdict, width(), bold=bold())}")
    return verdict.exit
