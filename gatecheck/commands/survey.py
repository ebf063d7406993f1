"""Command `survey`: list what records there are, and what cannot be read."""

from __future__ import annotations

import argparse

from gatecheck.commands.edge import bold, folder, progress, readable_policy, tell, width
from gatecheck.model.exit import Exit
from gatecheck.render import survey
from gatecheck.scan import scan


def act(parsed: argparse.Namespace) -> int:
    """List what the scan finds; it judges nothing."""
    globs = readable_policy(parsed).document.scan
    with progress() as line:
        found = scan(folder(parsed), globs.include, globs.exclude, progress=line)
    tell(survey(found, width(), bold=bold()))
    return Exit.STANDS
