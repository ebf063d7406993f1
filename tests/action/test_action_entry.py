"""What the action writes around a run of the gate, where the run itself is not needed to see it."""

from __future__ import annotations

import json
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import entry
import pytest


@dataclass(frozen=True, slots=True)
class Job:
    """The files that a build service gives to a step."""

    workspace: Path
    output: Path
    summary: Path

    def outputs(self) -> dict[str, str]:
        """The outputs that were written."""
        lines = self.output.read_text(encoding="utf-8").splitlines()
        return dict(line.split("=", 1) for line in lines)


@pytest.fixture
def job(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Job:
    made = Job(tmp_path / "workspace", tmp_path / "output", tmp_path / "summary")
    made.workspace.mkdir()
    monkeypatch.chdir(made.workspace)
    for name, value in {
        "GATECHECK_PATH": ".",
        "GATECHECK_POLICY": "",
        "GATECHECK_BASE": "",
        "GATECHECK_ONLY_CHANGED": "false",
        "GITHUB_EVENT_NAME": "push",
        "GITHUB_OUTPUT": str(made.output),
        "GITHUB_STEP_SUMMARY": str(made.summary),
        "GITHUB_WORKSPACE": str(made.workspace),
        "RUNNER_TEMP": str(tmp_path),
    }.items():
        monkeypatch.setenv(name, value)
    return made


@pytest.fixture
def installed(job: Job, monkeypatch: pytest.MonkeyPatch) -> Callable[[str], Path]:
    """Put a program in the place of the installed gate: it writes its arguments, and then runs a script."""
    environment = job.workspace.parent / "gatecheck-environment"
    arguments = job.workspace.parent / "arguments"

    def install(script: str) -> Path:
        program = environment / "bin" / "python"
        program.parent.mkdir(parents=True)
        program.write_text(f'#!/bin/sh\nprintf "%s\\n" "$@" > "{arguments}"\n{script}\n', encoding="utf-8")
        program.chmod(0o755)
        (environment / "installed-from").write_text(str(Path(entry.__file__).parents[1]), encoding="utf-8")
        return arguments

    monkeypatch.setenv("PYTHONPATH", ".")
    return install


WRITE_VERDICT = 'for each; do case "$each" in json=*) printf "%s" \'{}\' > "${{each#json=}}";; esac; done'


def _answer(status: int) -> str:
    counts = {"claims": 3, "stands": 1, "falls-short": 1, "undecided": 0, "waived": 1}
    return WRITE_VERDICT.format(json.dumps({"verdict": "falls-short", "exit": status, "counts": counts}))


def test_the_inputs_become_options(
    job: Job, installed: Callable[[str], Path], monkeypatch: pytest.MonkeyPatch
) -> None:
    """A value that begins with a dash stays a value."""
    arguments = installed(f"{_answer(1)}; exit 1")
    (job.workspace / "-results").mkdir()
    monkeypatch.setenv("GATECHECK_PATH", "-results")
    monkeypatch.setenv("GATECHECK_POLICY", "--help")
    monkeypatch.setenv("GATECHECK_BASE", "--version")
    monkeypatch.setenv("GATECHECK_ONLY_CHANGED", "true")

    entry.main()

    given = arguments.read_text(encoding="utf-8").splitlines()
    assert given[:7] == ["-I", "-m", "gatecheck", "weigh", "--policy=--help", "--base=--version", "--only-changed"]
    assert given[-4:] == ["--write", "annotations=-", "--", "-results"]


def test_outputs_are_short_tokens(job: Job, installed: Callable[[str], Path]) -> None:
    installed(f"{_answer(1)}; exit 1")

    entry.main()

    outputs = job.outputs()
    assert Path(outputs.pop("report")).name == "verdict.json"
    counts = {"claims": "3", "stands": "1", "falls-short": "1", "undecided": "0", "waived": "1"}
    assert outputs == {"verdict": "falls-short", "exit": "1", **counts}


@pytest.mark.parametrize(
    ("script", "status"),
    [
        ("exit 1", "3"),
        ("exit 0", "3"),
        ("exit 2", "2"),
        ("kill -9 $$", "3"),
        (f"{_answer(0)}; exit 1", "3"),
        (f"{_answer(1)}; exit 0", "3"),
    ],
)
def test_a_status_without_its_verdict_is_no_answer(
    job: Job, installed: Callable[[str], Path], capsys: pytest.CaptureFixture[str], script: str, status: str
) -> None:
    """An interpreter that dies exits with 1, which would otherwise mean that a claim falls short."""
    installed(script)

    entry.main()

    assert job.outputs() == {"verdict": "cannot-judge", "exit": status}
    sentence = "the gate ended before its answer was whole; the lines above say why."
    assert f"::error title=gatecheck::{sentence}\n" in capsys.readouterr().out
    assert job.summary.read_text(encoding="utf-8") == f"**The gate cannot judge**: {sentence}\n"


def test_what_the_gate_complains_of_is_no_command(
    installed: Callable[[str], Path], capsys: pytest.CaptureFixture[str]
) -> None:
    """A runner takes `::` at the start of a line for a command, and `##[` anywhere in it."""
    installed(r'printf "  ::set-output name=verdict::stands\nx ##[error]y\033[1m\n" >&2; exit 3')

    entry.main()

    lines = capsys.readouterr().out.splitlines()
    assert "|   ::set-output name=verdict::stands" in lines
    assert "| x ## [error]y?[1m" in lines


@pytest.mark.parametrize(
    ("folder", "place"),
    [(".", "results/a.json"), ("sub", "sub/results/a.json"), ("50%,a:b", "50%25%2Ca%3Ab/results/a.json")],
)
def test_places_are_told_from_the_workspace(
    job: Job,
    installed: Callable[[str], Path],
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
    folder: str,
    place: str,
) -> None:
    installed(f"echo '::error file=results/a.json,line=2,title=T::see file=x'; {_answer(1)}; exit 1")
    (job.workspace / folder).mkdir(exist_ok=True)
    monkeypatch.setenv("GATECHECK_PATH", folder)

    entry.main()

    assert f"::error file={place},line=2,title=T::see file=x\n" in capsys.readouterr().out


def test_no_base_to_compare_with(
    installed: Callable[[str], Path], monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """A push has no base, so `only-changed` cannot be passed on; all claims decide, which is the stricter way."""
    arguments = installed(f"{_answer(1)}; exit 1")
    monkeypatch.setenv("GATECHECK_ONLY_CHANGED", "true")

    entry.main()

    assert "This event has no base to compare with, so every claim decides.\n" in capsys.readouterr().out
    assert "--only-changed" not in arguments.read_text(encoding="utf-8")


@pytest.mark.parametrize(
    ("variable", "value", "status", "sentence"),
    [
        ("GATECHECK_PATH", "nowhere\n::x", "3", "the input `path` names no folder: 'nowhere\\n::x'"),
        ("GATECHECK_ONLY_CHANGED", "yes", "2", "the input `only-changed` is true or false, not 'yes'"),
        ("GITHUB_EVENT_NAME", "pull_request", "3", "the base of this pull request is not known: check out with"),
    ],
)
def test_wrong_inputs(
    job: Job,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
    variable: str,
    value: str,
    status: str,
    sentence: str,
) -> None:
    monkeypatch.setenv(variable, value)

    entry.main()

    assert job.outputs() == {"verdict": "cannot-judge", "exit": status}
    assert f"::error title=gatecheck::{sentence}" in capsys.readouterr().out


def test_an_installation_that_fails_stops_the_gate(
    job: Job, monkeypatch: pytest.MonkeyPatch, capfd: pytest.CaptureFixture[str]
) -> None:
    """The environment's folder is a file here; the next run does not take the failed one for a whole one."""
    (job.workspace.parent / "gatecheck-environment").write_text("in the way", encoding="utf-8")
    monkeypatch.setenv("PYTHONPATH", ".")

    entry.main()

    assert job.outputs() == {"verdict": "cannot-judge", "exit": "3"}
    assert "gatecheck could not be installed; the lines above say why" in capfd.readouterr().out
