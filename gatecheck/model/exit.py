"""The exit statuses of the command."""

from __future__ import annotations

from enum import IntEnum


class Exit(IntEnum):
    """What the command's exit status says."""

    STANDS = 0
    FALLS_SHORT = 1
    USAGE = 2
    CANNOT_JUDGE = 3
