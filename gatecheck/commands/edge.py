"""What the commands share: the folder and policy that were named, and the streams and files that they write."""

from __future__ import annotations

import argparse
import os
import sys
from pathlib import Path

from gatecheck.errors import CannotJudge, WrongUsage
from gatecheck.policies import standing_policy
from gatecheck.policy import Policy

_WIDTH = 80
_WIDEST = 140


def folder(parsed: argparse.Namespace) -> Path:
    """The folder to judge."""
    return Path(parsed.folder)


def policy_path(parsed: argparse.Namespace) -> str | None:
    """The policy as a path relative to the folder, which is how it can also be read at a revision."""
    if parsed.policy is None:
        return None
    relative: str = os.path.relpath(parsed.policy, parsed.folder)
    return relative.replace(os.sep, "/")


def readable_policy(parsed: argparse.Namespace) -> Policy:
    """The policy of the folder.

    Raises
    ------
    CannotJudge
        It cannot be read.
    """
    standing = standing_policy(folder(parsed), None, None)
    if standing.policy is None:
        raise CannotJudge("the policy cannot be read", "see `gatecheck weigh` for what is wrong with it")
    return standing.policy


def width() -> int:
    """The number of columns to write."""
    if not sys.stdout.isatty():
        return _WIDTH
    return max(40, min(_WIDEST, os.get_terminal_size(sys.stdout.fileno()).columns))


def tell(text: str) -> None:
    """Write to standard output."""
    sys.stdout.write(text)


def write(path: str, text: str) -> None:
    """Write a report to `path`; `-` is standard output.

    Raises
    ------
    WrongUsage
        The file cannot be written.
    """
    if path == "-":
        tell(text)
        return
    try:
        Path(path).write_bytes(text.encode("utf-8"))
    except OSError as error:
        raise WrongUsage(f"cannot write {path!a}: {error.strerror}") from None
