"""Command `start`: write a first policy and an example record."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

from gatecheck.model.exit import Exit
from gatecheck.starting import start


def act(parsed: argparse.Namespace) -> int:
    """Write what is not there yet, and tell it."""
    sys.stdout.write("".join(f"{line}\n" for line in start(Path(parsed.folder), parsed.team)))
    return Exit.STANDS
