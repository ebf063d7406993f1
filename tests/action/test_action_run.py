"""The composite action on a real runner (act, on this machine): one pull request, five steps."""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import pytest
import yaml
from support import POLICY, changed, commit_all, drainage, git

pytestmark = pytest.mark.xdist_group("action")

PROJECT = Path(__file__).parents[2]
EXAMPLE = PROJECT / "examples" / "teaching-review"
STRONG = drainage(
    test__value=6.0,
    test__p="<0.0001",
    estimate__value=11.4,
    estimate__interval={"level": 0.95, "low": 7.54, "high": 15.26},
    sample__groups=...,
)
#: The step and its inputs; `loosened` is the one whose policy the pull request changes.
STEPS: Mapping[str, Mapping[str, str]] = {
    "stands": {"path": "stands"},
    "short": {"path": "short"},
    "broken": {"path": "broken"},
    "loosened": {"path": "loosened", "only-changed": "true"},
    "example": {"path": "teaching-review"},
}
#: Modules that Python would take from the working directory, were it not isolated from it.
TRAPS = ("gatecheck.py", "json.py", "numpy.py", "pip.py", "tempfile.py", "venv.py", "yaml.py")


@dataclass(slots=True)
class Step:
    """What the runner says of one step."""

    result: str = ""
    summary: str = ""
    outputs: dict[str, str] = field(default_factory=dict)
    annotations: list[dict[str, str]] = field(default_factory=list)
    log: str = ""


@dataclass(frozen=True, slots=True)
class Build:
    """What the runner says of the whole build."""

    status: int
    base: str
    steps: Mapping[str, Step]


@pytest.fixture(scope="module")
def build(tmp_path_factory: pytest.TempPathFactory) -> Build:
    """Run the action on a shallow checkout of a pull request's merge commit, as a build service does."""
    act = _act()
    folder = tmp_path_factory.mktemp("build")
    origin = folder / "origin"
    base = _pull_request(origin)
    git(folder, "clone", "-q", "--depth=1", f"file://{origin}", "checkout")
    event = folder / "event.json"
    event.write_text(json.dumps({"number": 7, "pull_request": {"number": 7, "base": {"sha": base}}}))
    command = [act, "pull_request", "--json", "--no-cache-server", "--eventpath", str(event)]
    command += ["--platform", "ubuntu-latest=-self-hosted", "--action-cache-path", str(folder / "runner")]
    command += ["--local-repository", f"gatecheck/gatecheck@main={_copy_of_project(folder / 'action')}"]
    # A search path that leads into the judged repository, as an analysis may set it for itself.
    environment = {**os.environ, "PATH": f"{Path(sys.executable).parent}:{os.environ['PATH']}", "PYTHONPATH": "."}
    done = subprocess.run(
        command,
        cwd=folder / "checkout",
        env=environment,
        stdin=subprocess.DEVNULL,
        capture_output=True,
        text=True,
        check=False,
    )
    return Build(done.returncode, base, _steps(done.stdout))


def _act() -> str:
    beside = Path(sys.executable).parent / "act"
    act = str(beside) if beside.exists() else shutil.which("act")
    if act is None:
        reason = "the runner act is not installed (it comes with the extra `test`)"
        if os.environ.get("CI"):
            pytest.fail(reason)
        pytest.skip(reason)
    return act


def _copy_of_project(folder: Path) -> Path:
    """What a release of the action holds, without what lies about in a work tree."""
    for name in ("action", "gatecheck"):
        shutil.copytree(PROJECT / name, folder / name, ignore=shutil.ignore_patterns("__pycache__"))
    for name in ("LICENSE", "README.md", "pyproject.toml"):
        shutil.copy(PROJECT / name, folder / name)
    return folder


def _pull_request(origin: Path) -> str:
    """Make a repository whose HEAD merges a branch that loosens a policy; return the base."""
    for name, record in {"stands": STRONG, "short": drainage(), "loosened": drainage()}.items():
        _write(origin / name / "record.json", record)
        _write(origin / name / "gatecheck.yaml", POLICY)
    _write(origin / "broken" / "gatecheck.yaml", POLICY)
    _write(origin / "broken" / "record.json", drainage(), cut=40)
    shutil.copytree(EXAMPLE, origin / "teaching-review")
    workflow = origin / ".github" / "workflows" / "checks.yml"
    workflow.parent.mkdir(parents=True)
    workflow.write_text(yaml.safe_dump(_workflow()))
    base = commit_all(origin, "base")
    git(origin, "checkout", "-q", "-b", "branch")
    loose = changed(POLICY, rules={"false-positive-risk": {"limit": 0.99}})
    _write(origin / "loosened" / "gatecheck.yaml", loose)
    _write(origin / "loosened" / "record.json", drainage(claim="Drainage raises earthworm biomass."))
    for trap in TRAPS:
        (origin / trap).write_text("raise SystemExit('the gate ran code of the repository that it judges')\n")
    commit_all(origin, "loosen the policy")
    git(origin, "checkout", "-q", "main")
    git(origin, "merge", "-q", "--no-ff", "-m", "merge", "branch")
    return base


def _write(path: Path, document: Any, cut: int | None = None) -> None:
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_text(json.dumps(document)[:cut], encoding="utf-8")


def _workflow() -> dict[str, Any]:
    judge = "gatecheck/gatecheck/action@main"
    steps: list[dict[str, Any]] = [{"uses": "actions/checkout@v4"}]
    steps += [
        {"id": name, "uses": judge, "with": dict(inputs), "continue-on-error": name != "example"}
        for name, inputs in STEPS.items()
    ]
    told = {"REPORT": "${{ steps.short.outputs.report }}", "EXIT": "${{ steps.short.outputs.exit }}"}
    run = 'echo "exit $EXIT"; cat "$REPORT"'
    steps.append({"id": "after", "if": "always()", "env": told, "run": run})
    return {"on": "pull_request", "jobs": {"checks": {"runs-on": "ubuntu-latest", "steps": steps}}}


def _steps(log: str) -> dict[str, Step]:
    steps: dict[str, Step] = {}
    for line in log.splitlines():
        told = json.loads(line)
        if told.get("stage") != "Main" or "stepID" not in told:
            continue
        outer, *inner = told["stepID"]
        _take(steps.setdefault(outer, Step()), told, of_step=not inner)
    return steps


def _take(step: Step, told: Mapping[str, Any], *, of_step: bool) -> None:
    command = told.get("command")
    if command == "set-output" and of_step:
        step.outputs[told["name"]] = told["arg"]
    elif command == "summary":
        step.summary += told["content"]
    elif command in {"error", "warning", "notice"}:
        step.annotations.append({"level": command, "message": told["arg"], **told["kvPairs"]})
    elif told.get("raw_output"):
        step.log += told["msg"]
    if of_step and "stepResult" in told:
        step.result = told["stepResult"]


def test_the_build_fails_by_its_last_step(build: Build) -> None:
    """The steps before it go on after an error, so the example's alone can fail the build."""
    assert build.status == 1
    assert {name: build.steps[name].result for name in STEPS} == {
        "stands": "success",
        "short": "failure",
        "broken": "failure",
        "loosened": "failure",
        "example": "failure",
    }


@pytest.mark.parametrize(
    ("name", "verdict", "status", "counts"),
    [
        ("stands", "stands", "0", ("1", "1", "0", "0", "0")),
        ("short", "falls-short", "1", ("1", "0", "1", "0", "0")),
        ("broken", "cannot-judge", "3", ("0", "0", "0", "0", "0")),
        ("loosened", "falls-short", "1", ("1", "0", "1", "0", "0")),
    ],
)
def test_outputs(build: Build, name: str, verdict: str, status: str, counts: tuple[str, ...]) -> None:
    outputs = build.steps[name].outputs

    report, page = outputs.pop("report"), outputs.pop("page")
    names = ("claims", "stands", "falls-short", "undecided", "waived")
    assert outputs == {"verdict": verdict, "exit": status, **dict(zip(names, counts, strict=True))}
    assert (report[-13:], page[-13:]) == ("/verdict.json", "/verdict.html")


def test_the_example_falls_short(build: Build) -> None:
    outputs = build.steps["example"].outputs

    assert (outputs["verdict"], outputs["exit"]) == ("falls-short", "1")
    assert int(outputs["claims"]) > int(outputs["falls-short"]) >= 1


def test_a_later_step_reads_the_outputs_and_the_report(build: Build) -> None:
    """They are there although the step that wrote them failed."""
    first, _, report = build.steps["after"].log.partition("\n")

    assert first == "exit 1"
    assert json.loads(report)["verdict"] == "falls-short"


def test_summaries(build: Build) -> None:
    assert "Falls short of the policy: the only claim." in build.steps["short"].summary
    assert "Cannot judge" in build.steps["broken"].summary
    assert "record.json" in build.steps["broken"].summary


def test_annotations_name_places_from_the_workspace(build: Build) -> None:
    """The judged folder is not the workspace, and the build service shows places in the workspace."""
    (short,) = build.steps["short"].annotations
    broken = build.steps["broken"].annotations

    assert (short["level"], short["file"], short["line"]) == ("error", "short/record.json", "1")
    assert short["title"] == "drainage/earthworm-biomass: False positive risk"
    assert "the policy allows 5 %" in short["message"]
    assert {each.get("file") for each in broken} == {"broken/record.json", None}
    assert build.steps["stands"].annotations == []


def test_the_policy_of_the_base_counts(build: Build) -> None:
    """The branch would allow 99 %; the base is fetched once, since a checkout of depth 1 lacks it."""
    loosened = build.steps["loosened"]

    assert "the policy allows 5 %" in loosened.annotations[0]["message"]
    assert (
        f"The policy gatecheck.yaml is changed here; what counts is the base, {build.base[:12]}" in loosened.summary
    )
    fetched = f"This checkout lacks the base commit {build.base}; fetching it alone."
    assert [name for name in STEPS if fetched in build.steps[name].log] == ["stands"]


def test_nothing_of_the_judged_repository_runs(build: Build) -> None:
    """The branch brings modules of the names that the gate and its installer import."""
    assert [name for name, step in build.steps.items() if "ran code" in step.log + step.summary] == []
    assert build.steps["stands"].outputs["verdict"] == "stands"
