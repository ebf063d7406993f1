"""One run of the gate in a build: install it, find the base, weigh once, and write what the build shows.

The judged repository is data. Python runs isolated from it: it looks for modules neither in the working directory
nor along PYTHONPATH. No text from it reaches the log outside the annotations, which are made safe.
"""

from __future__ import annotations

import json
import os
import re
import subprocess
import sys
import tempfile
from collections.abc import Sequence
from pathlib import Path
from typing import Any

from base_commit import CANNOT_JUDGE, StopError, find_base

_PROJECT = Path(__file__).resolve().parents[1]
_USAGE = 2
_COUNTS = ("claims", "stands", "falls-short", "undecided", "waived")
_PLACED = re.compile(r"^(::(?:error|warning|notice) file=)", re.MULTILINE)


def main() -> None:
    """Run the gate; what it answers is in the outputs, and the last step of the action fails by it."""
    try:
        outputs = _run()
    except StopError as stop:
        outputs = _stopped(stop)
    _append("GITHUB_OUTPUT", "".join(f"{name}={value}\n" for name, value in outputs.items()))


def _run() -> dict[str, str | int]:
    folder = Path(os.environ["GATECHECK_PATH"])
    if not folder.is_dir():
        raise StopError(f"the input `path` names no folder: {str(folder)!a}")
    base = find_base(folder, os.environ, _tell)
    options = _options(base)
    python = _installed(Path(os.environ["RUNNER_TEMP"]) / "gatecheck-environment")
    reports = Path(tempfile.mkdtemp(prefix="gatecheck-", dir=os.environ["RUNNER_TEMP"]))
    verdict, summary, page = reports / "verdict.json", reports / "summary.md", reports / "verdict.html"
    options += ["--write", f"json={verdict}", "--write", f"summary={summary}", "--write", "annotations=-"]
    options += ["--write", f"page={page}"]
    status = _weigh([str(python), "-I", "-m", "gatecheck", "weigh", *options, "--", str(folder)], folder)
    if summary.exists():
        _append("GITHUB_STEP_SUMMARY", summary.read_text(encoding="utf-8"))
    return _outputs(status, verdict, page)


def _options(base: str | None) -> list[str]:
    only_changed = os.environ["GATECHECK_ONLY_CHANGED"]
    if only_changed not in {"true", "false"}:
        raise StopError(f"the input `only-changed` is true or false, not {only_changed!a}", _USAGE)
    policy = os.environ["GATECHECK_POLICY"]
    options = [f"--policy={policy}"] if policy else []
    if base is not None:
        return [*options, f"--base={base}", *(["--only-changed"] if only_changed == "true" else [])]
    if only_changed == "true":
        _tell("This event has no base to compare with, so every claim decides.")
    return options


def _installed(environment: Path) -> Path:
    """Return the Python of an environment that holds this checkout; made once a job."""
    python = environment / "bin" / "python"
    done = environment / "installed-from"
    if done.exists() and done.read_text(encoding="utf-8") == str(_PROJECT):
        return python
    make = [sys.executable, "-I", "-m", "venv", "--clear", str(environment)]
    fill = [str(python), "-I", "-m", "pip", "install", "--quiet", "--disable-pip-version-check", str(_PROJECT)]
    for command in (make, fill):
        if _run_apart(command).returncode:
            raise StopError("gatecheck could not be installed; the lines above say why")
    done.write_text(str(_PROJECT), encoding="utf-8")
    return python


def _weigh(command: Sequence[str], folder: Path) -> int:
    done = _run_apart(command, subprocess.PIPE)
    # The command names places from the judged folder, the build from the workspace.
    prefix = _from_workspace(folder)
    placed = _PLACED.sub(lambda start: start[1] + prefix, done.stdout.decode("utf-8"))
    _tell(placed.removesuffix("\n"))
    for line in done.stderr.decode("utf-8", "replace").splitlines():
        _tell(_quoted(line))
    return done.returncode


def _run_apart(command: Sequence[str], streams: int | None = None) -> subprocess.CompletedProcess[bytes]:
    # The option -I holds for one process; what it starts in turn would still search PYTHONPATH.
    environment = {name: value for name, value in os.environ.items() if not name.startswith("PYTHON")}
    return subprocess.run(command, stdout=streams, stderr=streams, check=False, env=environment)  # noqa: S603  # no shell


def _from_workspace(folder: Path) -> str:
    inside = os.path.relpath(folder, os.environ["GITHUB_WORKSPACE"])
    return "" if inside == "." else f"{_escaped(inside)}/"


def _escaped(path: str) -> str:
    """Return `path` as a property of a workflow command, which ends at a comma and a colon."""
    for character, code in {"%": "%25", "\r": "%0D", "\n": "%0A", ":": "%3A", ",": "%2C"}.items():
        path = path.replace(character, code)
    return path


def _quoted(line: str) -> str:
    """Return `line` so that a runner takes no part of it for a command."""
    printable = "".join(character if character.isprintable() else "?" for character in line)
    return f"| {printable.replace('##[', '## [')}"


def _outputs(status: int, verdict: Path, page: Path) -> dict[str, str | int]:
    """Return the outputs by the verdict; an exit status that it does not bear out answers nothing."""
    answer: Any = json.loads(verdict.read_text(encoding="utf-8")) if verdict.exists() else {"exit": None}
    if answer["exit"] != status:
        sentence = "the gate ended before its answer was whole; the lines above say why"
        return _stopped(StopError(sentence, _USAGE if status == _USAGE else CANNOT_JUDGE))
    counts = {name: int(answer["counts"][name]) for name in _COUNTS}
    told = {"verdict": answer["verdict"], "exit": answer["exit"], **counts}
    return {**told, "report": str(verdict), "page": str(page)}


def _stopped(stop: StopError) -> dict[str, str | int]:
    _tell(f"::error title=gatecheck::{stop}.")
    _append("GITHUB_STEP_SUMMARY", f"**The gate cannot judge**: {stop}.\n")
    return {"verdict": "cannot-judge", "exit": stop.status}


def _append(variable: str, text: str) -> None:
    with Path(os.environ[variable]).open("a", encoding="utf-8", newline="\n") as file:
        file.write(text)


def _tell(line: str) -> None:
    sys.stdout.write(f"{line}\n")
    sys.stdout.flush()


if __name__ == "__main__":
    main()
