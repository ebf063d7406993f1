"""The one module that starts git, with settings under which it fetches nothing and says the same everywhere."""

from __future__ import annotations

import os
import re
import shlex
import subprocess
import tempfile
from collections.abc import Iterator
from pathlib import Path
from typing import IO, cast

from gatecheck.errors import CannotJudge, safe

_SETTINGS = {
    "LC_ALL": "C",
    "GIT_OPTIONAL_LOCKS": "0",
    "GIT_TERMINAL_PROMPT": "0",
    "GIT_NO_LAZY_FETCH": "1",
    "GIT_ALLOW_PROTOCOL": "none",  # versions that do not know GIT_NO_LAZY_FETCH fail here instead of fetching
    "GIT_NO_REPLACE_OBJECTS": "1",
    "GIT_GRAFT_FILE": f"{os.devnull}/none",  # as replaced objects, invented parents would tell another history
}
#: A hook sets these for its own repository, which need not be the one that is judged.
_OF_ANOTHER_REPOSITORY = {
    "GIT_ALTERNATE_OBJECT_DIRECTORIES",
    "GIT_COMMON_DIR",
    "GIT_DIR",
    "GIT_INDEX_FILE",
    "GIT_NAMESPACE",
    "GIT_OBJECT_DIRECTORY",
    "GIT_PREFIX",
    "GIT_SHALLOW_FILE",
    "GIT_WORK_TREE",
}
_OVERRULED = (
    "-c",
    "core.fsmonitor=false",  # the monitor of file changes is a program that the settings may name
    "-c",
    "log.diffMerges=first-parent",  # what `-m` means to `git log`
)
_OWNER = re.compile(r"detected dubious ownership in repository at '([^\n]*)'")
_CHUNK = 1 << 20


class NotInstalledError(CannotJudge):
    """There is no git to run."""


def run(folder: Path, *arguments: str) -> tuple[int, bytes, str]:
    """Run git in `folder` and return its exit status, its output and its complaint."""
    with start(folder, *arguments) as process:
        output, error = process.communicate()
    return process.returncode, output, error.decode("utf-8", "replace")


def pieces(folder: Path, command: str, *arguments: str) -> Iterator[str]:
    """Yield what git writes, as it writes it, in the pieces that NUL bytes end.

    Raises
    ------
    CannotJudge
        Git fails, which is seen after its last piece.
    """
    # Git may complain at length while it writes: a pipe that nobody reads would stop it.
    with tempfile.TemporaryFile() as complaints:
        with start(folder, command, *arguments, complaints=complaints) as process:
            rest = b""
            while chunk := cast("IO[bytes]", process.stdout).read(_CHUNK):
                *whole, rest = (rest + chunk).split(b"\0")
                yield from map(os.fsdecode, whole)
        complaints.seek(0)
        error = complaints.read().decode("utf-8", "replace")
    checked(folder, command, process.returncode, rest, error)


def start(
    folder: Path, *arguments: str, feeding: bool = False, complaints: IO[bytes] | None = None
) -> subprocess.Popen[bytes]:
    """Start git in `folder`; with `feeding` it reads from a pipe, and `complaints` takes what it complains of.

    Raises
    ------
    NotInstalledError
        There is no git that can be started.
    """
    kept = {name: value for name, value in os.environ.items() if name not in _OF_ANOTHER_REPOSITORY}
    command = ["git", "-C", str(folder), *_OVERRULED, *arguments]
    try:
        return subprocess.Popen(  # noqa: S603  # no shell: each argument arrives as it is
            command,
            env=kept | _SETTINGS,
            stdin=subprocess.PIPE if feeding else subprocess.DEVNULL,
            stdout=subprocess.PIPE,
            stderr=subprocess.DEVNULL if feeding else complaints or subprocess.PIPE,
        )
    except OSError as error:
        raise NotInstalledError(
            f"git cannot be started ({safe(str(error.strerror))})",
            "install git, and see that it is on the PATH",
        ) from error


def checked(folder: Path, command: str, status: int, output: bytes, error: str) -> bytes:
    """Return the output of git.

    Raises
    ------
    CannotJudge
        Git failed; what it says and what mends it are told.
    """
    if status == 0:
        return output
    owner = _OWNER.search(error)
    if owner:
        where = owner[1]
        raise CannotJudge(
            f"git does not read the repository at {safe(where)}, since another user owns it",
            f"run `git config --global --add safe.directory {shlex.quote(safe(where))}`",
        )
    says = safe(error.strip().split("\n")[0].removeprefix("fatal: ")) or f"exit status {status}"
    raise CannotJudge(f"git {command} failed in {safe(str(folder))}: {says}", "mend the repository, then run again")
