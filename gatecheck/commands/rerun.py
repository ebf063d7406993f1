"""Command `rerun`: run the analysis in a clean copy, and compare what it emits with the records of the tree."""

from __future__ import annotations

import argparse
import sys

from gatecheck.commands.edge import folder, policy_path, tell, width
from gatecheck.errors import CannotJudge
from gatecheck.policies import standing_policy
from gatecheck.render import rerun_account, rerun_ahead
from gatecheck.render.text import plain
from gatecheck.rerunning import rerun, to_run


def act(parsed: argparse.Namespace) -> int:
    """Tell what will run, run it, and tell what came of it."""
    root = folder(parsed)
    policy = standing_policy(root, policy_path(parsed), None).policy
    if policy is None:
        raise CannotJudge("the policy cannot be read", "see `gatecheck weigh` for what is wrong with it")
    document = policy.document
    paths = to_run(root, document.rerun.run)
    tell(rerun_ahead(paths, width()))
    sys.stdout.flush()

    def progress(number: int, path: str) -> None:
        if sys.stderr.isatty():
            sys.stderr.write(plain(f"running {number} of {len(paths)}: {path}") + "\n")

    found = rerun(root, paths, document.rerun, (document.scan.include, document.scan.exclude), progress)
    tell(f"\n{rerun_account(found, width())}")
    return found.exit
