"""What the commands share: the folder and policy that were named, and the streams and files that they write."""

from __future__ import annotations

import argparse
import contextlib
import os
import sys
from collections.abc import Iterator
from pathlib import Path
from typing import TextIO

from gatecheck.errors import CannotJudge, WrongUsage
from gatecheck.model.progress import Progress
from gatecheck.policies import standing_policy
from gatecheck.policy import Policy

_WIDTH = 80
_WIDEST = 140
#: What a terminal calls itself that only prints.
_NO_MARKS = "dumb"


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


def bold() -> bool:
    """Whether to mark what matters most by bold type, the only mark there is beside the words.

    A person at a terminal sees it who has not asked for plain text (SOURCE: https://no-color.org, from memory: any
    value of NO_COLOR that is not empty asks for it); no file and no log of a build holds it.
    """
    kind = os.environ.get("TERM", "")
    return _is_for_a_person(sys.stdout) and not os.environ.get("NO_COLOR") and kind not in {"", _NO_MARKS}


@contextlib.contextmanager
def progress() -> Iterator[Progress | None]:
    """Show how far long work has come on standard error, if a person may watch; else there is no `Progress`."""
    if not _is_for_a_person(sys.stderr) or os.environ.get("TERM") == _NO_MARKS:
        yield None
        return
    from gatecheck.commands.progress import ProgressLine  # noqa: PLC0415  # a build does without

    # A terminal that nobody has told its size says 0.
    with ProgressLine(sys.stderr, os.get_terminal_size(sys.stderr.fileno()).columns or _WIDTH) as line:
        yield line


def _is_for_a_person(stream: TextIO) -> bool:
    """Whether `stream` is a terminal; build runners that give one set CI (common practice, no source)."""
    return stream.isatty() and not os.environ.get("CI")


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
