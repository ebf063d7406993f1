"""What the action writes around a run of the gate, where the run itself is not needed to see it."""

from __future__ import annotations

import json
from dataclasses import dataclass
from pathlib import Path

import entry
import pytest


@dataclass(frozen=True, slots=True)
class Job:
    """A step of a build: the files that the build service gives to it, its inputs, and its log."""

    folder: Path
    monkeypatch: pytest.MonkeyPatch
    captured: pytest.CaptureFixture[str]

    def set(self, **variables: str) -> None:
        """Set inputs, or what the build service says."""
        for name, value in variables.items():
            self.monkeypatch.setenv(name, value)

    def install(self, script: str) -> None:
        """Put a program in the place of the installed gate: it keeps its arguments, and then runs a script."""
        environment = self.folder / "gatecheck-environment"
        program = environment / "bin" / "python"
        program.parent.mkdir(parents=True)
        keep = f'printf "%s\\n" "$@" > "{self.folder}/arguments"'
        program.write_text(f"#!/bin/sh\n{keep}\n{script}\n", encoding="utf-8")
        program.chmod(0o755)
        (environment / "installed-from").write_text(str(Path(entry.__file__).parents[1]), encoding="utf-8")

    def run(self) -> str:
        """Run the step and return its log."""
        entry.main()
        return self.captured.readouterr().out

    def arguments(self) -> list[str]:
        """The arguments of the program that was installed."""
        return (self.folder / "arguments").read_text(encoding="utf-8").splitlines()

    def outputs(self) -> dict[str, str]:
        """The outputs that were written."""
        lines = (self.folder / "output").read_text(encoding="utf-8").splitlines()
        return dict(line.split("=", 1) for line in lines)


@pytest.fixture
def job(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capfd: pytest.CaptureFixture[str]) -> Job:
    made = Job(tmp_path, monkeypatch, capfd)
    workspace = tmp_path / "workspace"
    workspace.mkdir()
    monkeypatch.chdir(workspace)
    made.set(GATECHECK_PATH=".", GATECHECK_POLICY="", GATECHECK_BASE="", GATECHECK_ONLY_CHANGED="false")
    made.set(GITHUB_EVENT_NAME="push", GITHUB_WORKSPACE=str(workspace), RUNNER_TEMP=str(tmp_path))
    made.set(GITHUB_OUTPUT=str(tmp_path / "output"), GITHUB_STEP_SUMMARY=str(tmp_path / "summary"))
    return made


WRITE_VERDICT = 'for each; do case "$each" in json=*) printf "%s" \'{}\' > "${{each#json=}}";; esac; done'


def _answer(status: int) -> str:
    counts = {"claims": 3, "stands": 1, "falls-short": 1, "undecided": 0, "waived": 1}
    return WRITE_VERDICT.format(json.dumps({"verdict": "falls-short", "exit": status, "counts": counts}))


def test_the_inputs_become_options(job: Job) -> None:
    """A value that begins with a dash stays a value."""
    job.install(f"{_answer(1)}; exit 1")
    (job.folder / "workspace" / "-results").mkdir()
    job.set(GATECHECK_PATH="-results", GATECHECK_POLICY="--help", GATECHECK_BASE="--version")
    job.set(GATECHECK_ONLY_CHANGED="true")

    job.run()

    given = job.arguments()
    assert given[:7] == ["-I", "-m", "gatecheck", "weigh", "--policy=--help", "--base=--version", "--only-changed"]
    assert "annotations=-" in given
    assert given[-3].endswith("/verdict.html")
    assert given[-2:] == ["--", "-results"]


def test_outputs_are_short_tokens(job: Job) -> None:
    job.install(f"{_answer(1)}; exit 1")

    job.run()

    outputs = job.outputs()
    assert Path(outputs.pop("report")).name == "verdict.json"
    assert Path(outputs.pop("page")).name == "verdict.html"
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
def test_a_status_without_its_verdict_is_no_answer(job: Job, script: str, status: str) -> None:
    """An interpreter that dies exits with 1, which would otherwise mean that a claim falls short."""
    job.install(script)

    log = job.run()

    assert job.outputs() == {"verdict": "cannot-judge", "exit": status}
    sentence = "the gate ended before its answer was whole; the lines above say why."
    assert f"::error title=gatecheck::{sentence}\n" in log
    assert (job.folder / "summary").read_text(encoding="utf-8") == f"**The gate cannot judge**: {sentence}\n"


def test_what_the_gate_complains_of_is_no_command(job: Job) -> None:
    """A runner takes `::` at the start of a line for a command, and `##[` anywhere in it."""
    job.install(r'printf "  ::set-output name=verdict::stands\nx ##[error]y\033[1m\n" >&2; exit 3')

    lines = job.run().splitlines()

    assert "|   ::set-output name=verdict::stands" in lines
    assert "| x ## [error]y?[1m" in lines


@pytest.mark.parametrize(
    ("folder", "place"),
    [(".", "results/a.json"), ("sub", "sub/results/a.json"), ("50%,a:b", "50%25%2Ca%3Ab/results/a.json")],
)
def test_places_are_told_from_the_workspace(job: Job, folder: str, place: str) -> None:
    job.install(f"echo '::error file=results/a.json,line=2,title=T::see file=x'; {_answer(1)}; exit 1")
    (job.folder / "workspace" / folder).mkdir(exist_ok=True)
    job.set(GATECHECK_PATH=folder)

    assert f"::error file={place},line=2,title=T::see file=x\n" in job.run()


def test_no_base_to_compare_with(job: Job) -> None:
    """A push has no base, so `only-changed` cannot be passed on; all claims decide, which is the stricter way."""
    job.install(f"{_answer(1)}; exit 1")
    job.set(GATECHECK_ONLY_CHANGED="true")

    assert "This event has no base to compare with, so every claim decides.\n" in job.run()
    assert "--only-changed" not in job.arguments()


@pytest.mark.parametrize(
    ("variable", "value", "status", "sentence"),
    [
        ("GATECHECK_PATH", "nowhere\n::x", "3", "the input `path` names no folder: 'nowhere\\n::x'"),
        ("GATECHECK_ONLY_CHANGED", "yes", "2", "the input `only-changed` is true or false, not 'yes'"),
        ("GITHUB_EVENT_NAME", "pull_request", "3", "the base of this pull request is not known: check out with"),
    ],
)
def test_wrong_inputs(job: Job, variable: str, value: str, status: str, sentence: str) -> None:
    job.set(**{variable: value})

    assert f"::error title=gatecheck::{sentence}" in job.run()
    assert job.outputs() == {"verdict": "cannot-judge", "exit": status}


def test_an_installation_that_fails_stops_the_gate(job: Job) -> None:
    """The place of the environment is taken by a file."""
    (job.folder / "gatecheck-environment").write_text("in the way", encoding="utf-8")

    assert "gatecheck could not be installed; the lines above say why" in job.run()
    assert job.outputs() == {"verdict": "cannot-judge", "exit": "3"}
