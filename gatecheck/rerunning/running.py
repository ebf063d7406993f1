"""Run one notebook or script with a limit in time, and say in clear words why it did not come to its end."""

from __future__ import annotations

import contextlib
import json
import os
import re
import signal
import subprocess
import sys
import tempfile
from pathlib import Path
from typing import IO, Any

from gatecheck.model.rerun import Failure
from gatecheck.model.shown import decimal
from gatecheck.model.struct import struct
from gatecheck.scan.readers import suffix_of

#: What can be run, in lower case.
SUFFIXES = frozenset({".ipynb", ".py", ".r"})

#: Our own package comes last on the path, and the folder of the notebook is not on it at all.
_RUNNER = (
    "import sys; sys.path.append(sys.argv[1]); "
    "from gatecheck.rerunning.notebook import main; sys.exit(main(*sys.argv[2:]))"
)
_HOME = str(Path(__file__).parents[2])
#: In seconds: what a notebook's client has beyond the limit of the cells, which it keeps itself.
_CLIENT = 90.0
#: In seconds, what a program has to end when it is told to.
_ENDING = 5.0
_TAIL = 8192
_LAST_LINES = 3
_LONGEST = 300
_MISSING = (
    re.compile(r"ModuleNotFoundError: No module named '([^'\s]+)'"),
    # R sets the name in quotes of the language that it speaks.
    re.compile(r"there is no package called [^\w.]*([\w.]+)"),
)
_kill_group = getattr(os, "killpg", os.kill)
_KILL = getattr(signal, "SIGKILL", signal.SIGTERM)


@struct
class _End:
    """How a program ended: its exit status (`None`: it was stopped at its limit), and its last complaints."""

    status: int | None
    complaints: str


def run(folder: Path, path: str, minutes: float) -> Failure | None:
    """Run the notebook or script at `path`, relative to `folder`; return why it failed, or `None`.

    A script starts in `folder`, a notebook in the folder in which it lies. Its environment is that of this process,
    without bytecode written; its output is thrown away. It is no prison: code reaches whatever this process can.
    """
    seconds = minutes * 60
    if suffix_of(path) == ".ipynb":
        return _notebook(folder, path, seconds)
    interpreter = sys.executable if suffix_of(path) == ".py" else "Rscript"
    try:
        end = _ended([interpreter, str(folder / path)], folder, seconds)
    except OSError as error:
        says = f"{interpreter} cannot be started ({error.strerror})"
        return Failure(path, says, "install it, and see that it is on the PATH")
    return _failure(path, end, seconds)


def _notebook(folder: Path, path: str, seconds: float) -> Failure | None:
    file = folder / path
    with tempfile.TemporaryDirectory() as aside:
        answer = Path(aside, "answer.json")
        command = [sys.executable, "-P", "-c", _RUNNER, _HOME, str(file), str(seconds), str(answer)]
        end = _ended(command, file.parent, seconds + _CLIENT)
        if end.status == 1 and answer.exists():
            return _of_answer(path, json.loads(answer.read_bytes()), seconds)
    return _failure(path, end, seconds)


def _ended(command: list[str], folder: Path, seconds: float) -> _End:
    """Run `command` to its end or to its limit, and stop whatever it has started and left running."""
    with tempfile.TemporaryFile() as complaints:
        process = subprocess.Popen(  # noqa: S603  # no shell: each argument arrives as it is
            command,
            cwd=folder,
            env={**os.environ, "PYTHONDONTWRITEBYTECODE": "1"},
            stdin=subprocess.DEVNULL,
            stdout=subprocess.DEVNULL,
            stderr=complaints,
            start_new_session=True,
        )
        status = None
        try:
            with contextlib.suppress(subprocess.TimeoutExpired):
                status = process.wait(seconds)
        finally:
            _stop(process)
        return _End(status, _tail(complaints))


def _stop(process: subprocess.Popen[bytes]) -> None:
    for number in (signal.SIGTERM, _KILL):
        with contextlib.suppress(OSError):  # nobody is left
            _kill_group(process.pid, number)
        with contextlib.suppress(subprocess.TimeoutExpired):
            process.wait(_ENDING)


def _tail(complaints: IO[bytes]) -> str:
    size = complaints.seek(0, os.SEEK_END)
    complaints.seek(max(0, size - _TAIL))
    return complaints.read().decode("utf-8", "replace")


def _failure(path: str, end: _End, seconds: float) -> Failure | None:
    if end.status == 0:
        return None
    if end.status is None:
        return _of_time(path, seconds)
    if end.status < 0:
        return _of_signal(path, -end.status)
    lines = [line.strip() for line in end.complaints.splitlines() if line.strip()]
    package = _missing_package(end.complaints)
    if package is not None:
        return _of_package(path, package)
    last = " / ".join(lines[-_LAST_LINES:])
    says = f"; its last words: {_short(last)}" if last else " and said nothing on standard error"
    return Failure(path, f"it ended with exit status {end.status}{says}", "run it by itself, and mend it there")


def _of_time(path: str, seconds: float) -> Failure:
    minutes = seconds / 60
    limit = f"{decimal(minutes)} minute{'' if minutes == 1 else 's'}"
    return Failure(path, f"it was not done after {limit}, and was stopped", "raise `rerun.minutes`, or shorten it")


def _of_signal(path: str, number: int) -> Failure:
    try:
        name = signal.Signals(number).name
    except ValueError:  # one without a name
        name = str(number)
    return Failure(
        path, f"it was ended by the signal {name}", "see what ends it there; too little memory often does"
    )


def _missing_package(complaints: str) -> str | None:
    found = [match for pattern in _MISSING for match in pattern.finditer(complaints)]
    return found[-1][1] if found else None


def _of_package(path: str, package: str) -> Failure:
    message = f"it needs the package {_short(package)}, which is not installed in this environment"
    return Failure(path, message, "install it, or, if it is code of yours, see that git does not ignore it")


def _of_answer(path: str, answer: dict[str, Any], seconds: float) -> Failure:
    why, says, cell = answer["why"], _short(answer.get("says", "")), answer.get("cell", 0)
    if why == "time":
        return _of_time(path, seconds)
    if why == "no kernel":
        advice = "install that kernel (for Python: the package ipykernel), or choose another in the notebook"
        return Failure(path, f"it asks for the kernel {says}, which is not installed here", advice)
    if why == "dead":
        where = f"while cell {cell} ran" if cell else "before its first cell"
        advice = "see what ends it there; too little memory often does"
        return Failure(path, f"its kernel died {where}", advice)
    if why == "no start":
        return Failure(path, f"its kernel did not start: {says}", "mend the installation of that kernel")
    if why == "unreadable":
        return Failure(path, f"it is no notebook that can be read: {says}", "save it again in Jupyter")
    package = _missing_package(f"{answer['name']}: {answer['says']}")
    if package is not None:
        return _of_package(path, package)
    message = f"cell {cell} ended with {_short(answer['name'])}: {says}"
    return Failure(path, message, "run the notebook by itself from top to bottom, and mend it there")


def _short(text: str) -> str:
    return text if len(text) <= _LONGEST else f"{text[:_LONGEST]}…"
