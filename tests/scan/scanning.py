"""What the tests of the scan share."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

from gatecheck.model.found import Scan

#: Runs git in the folder under test.
Git = Callable[..., str]
#: Writes a file below the folder under test.
Write = Callable[[str, Any], Path]


def ids(found: Scan) -> list[str]:
    """Return the ids that were found."""
    return [one.record.id for one in found.found]


def places(found: Scan) -> list[tuple[str, str]]:
    """Return the ids that were found, with their places."""
    return [(one.record.id, str(one.at)) for one in found.found]


def said(found: Scan) -> list[tuple[str, str, str]]:
    """Return the problems as texts: place, message, advice."""
    return [(str(one.at), one.message, one.advice) for one in found.problems]
