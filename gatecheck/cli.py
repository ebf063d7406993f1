"""Arguments in, exit status out: which command acts, and what is said where it cannot."""

from __future__ import annotations

import gc
import os
import sys
from importlib import import_module

from gatecheck.arguments import parser
from gatecheck.errors import CannotJudge, WrongUsage
from gatecheck.model.exit import Exit

TYPE_CHECKING = False  # a type checker reads it as true; `typing` itself would cost start-up time
if TYPE_CHECKING:
    import argparse
    from collections.abc import Callable, Sequence


def run() -> None:
    """Run the command with the arguments of the process, and exit with its status."""
    # What a run makes lives to its end and holds hardly a cycle: to look for some takes a seventh of the time.
    gc.disable()
    for stream in (sys.stdout, sys.stderr):
        stream.reconfigure(encoding="utf-8", errors="replace")  # type: ignore[union-attr]
    try:
        status = main(sys.argv[1:])
        sys.stdout.flush()
    except BrokenPipeError:
        # The reader has gone; without this the interpreter complains when it flushes at exit.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        status = Exit.CANNOT_JUDGE
    sys.exit(status)


def main(arguments: Sequence[str]) -> int:
    """Run the command with `arguments` and return its exit status."""
    parsed = parser().parse_args(arguments)
    try:
        # Only the command that acts is loaded; what it needs beyond that, it loads itself.
        act: Callable[[argparse.Namespace], int] = import_module(f"gatecheck.commands.{parsed.command}").act
        return act(parsed)
    except WrongUsage as wrong:
        _complain(str(wrong))
        return Exit.USAGE
    except CannotJudge as stop:
        _complain(f"cannot judge: {stop.message}; {stop.advice}.")
        return Exit.CANNOT_JUDGE
    except KeyboardInterrupt:
        _complain("interrupted before it could judge.")
        return Exit.CANNOT_JUDGE


def _complain(sentence: str) -> None:
    sys.stderr.write(f"gatecheck: {sentence}\n")
