"""Command `schema`: print the JSON Schema of a format."""

from __future__ import annotations

import argparse
import sys

from gatecheck.model.exit import Exit
from gatecheck.schema import published


def act(parsed: argparse.Namespace) -> int:
    """Print the schema as it is published."""
    sys.stdout.write(published(parsed.kind))
    return Exit.STANDS
