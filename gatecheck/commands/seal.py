"""Command `seal`: freeze a plan by a digest of what it promises, in a file beside it."""

from __future__ import annotations

import argparse
from pathlib import Path

from gatecheck.commands.edge import tell
from gatecheck.model.exit import Exit
from gatecheck.plans.seal import seal_path, seal_plan, stamp_path

_NEXT = (
    "Commit both to the base, in a commit of their own, before the data and the results. "
    "A signed tag on that commit (`git tag -s`), or a time-stamp token on the seal in {stamp}, raises the grade of "
    "evidence that the plan came first."
)


def act(parsed: argparse.Namespace) -> int:
    """Seal the plan, or tell all that is wrong with it."""
    done = seal_plan(Path(parsed.plan))
    if done.problems:
        tell("".join(f"{one.at}: {one.message}; {one.advice}.\n" for one in done.problems))
        return Exit.CANNOT_JUDGE
    name = ascii(parsed.plan)[1:-1]
    if not done.is_new:
        tell(f"{name} is sealed already and has not changed since: {done.digest}.\n")
        return Exit.STANDS
    tell(f"{name} was sealed in {seal_path(name)}: {done.digest}.\n{_NEXT.format(stamp=stamp_path(name))}\n")
    return Exit.STANDS
