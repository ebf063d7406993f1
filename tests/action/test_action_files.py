"""The files by which build services and hooks take the gate over: valid, and consistent with the command."""

from __future__ import annotations

import json
import re
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest
import yaml
from support import POLICY, changed, command, commit_all, drainage, git, write_tree

PROJECT = Path(__file__).parents[2]
ACTION = PROJECT / "action" / "action.yml"
GITLAB = PROJECT / "action" / "gitlab-ci.yml"
HOOKS = PROJECT / ".pre-commit-hooks.yaml"
WORKFLOWS = sorted((PROJECT / ".github" / "workflows").iterdir())


def _load(path: Path) -> Any:
    return yaml.safe_load(path.read_text(encoding="utf-8"))


def _run(*arguments: str, cwd: Path = PROJECT) -> subprocess.CompletedProcess[str]:
    return subprocess.run([sys.executable, "-m", *arguments], cwd=cwd, capture_output=True, text=True, check=False)


@pytest.mark.parametrize(
    ("schema", "path"),
    [("github-actions", ACTION), ("gitlab-ci", GITLAB), *(("github-workflows", path) for path in WORKFLOWS)],
)
def test_valid_by_the_published_schema(schema: str, path: Path) -> None:
    """The schemas are those of SchemaStore, as check-jsonschema carries them."""
    done = _run("check_jsonschema", "--builtin-schema", f"vendor.{schema}", str(path))

    assert (done.returncode, done.stdout) == (0, "ok -- validation done\n")


def test_hooks_are_valid() -> None:
    done = _run("pre_commit", "validate-manifest", str(HOOKS))

    assert (done.returncode, done.stdout) == (0, "")


def test_every_input_is_declared_and_used() -> None:
    """The runner takes an unknown input for an empty text, without a word."""
    used = set(re.findall(r"inputs\.([\w-]+)", ACTION.read_text(encoding="utf-8")))

    assert used == set(_load(ACTION)["inputs"])


def test_the_inputs_are_the_options_of_the_command() -> None:
    options = set(re.findall(r"--([a-z-]+)", command("weigh", "--help").stdout))

    assert set(_load(ACTION)["inputs"]) == options - {"help", "write"} | {"path"}


def test_every_output_is_one_of_the_step() -> None:
    action = _load(ACTION)
    written = ["verdict", "exit", "claims", "stands", "falls-short", "undecided", "waived", "report", "page"]

    assert {name: output["value"] for name, output in action["outputs"].items()} == {
        name: f"${{{{ steps.weigh.outputs.{name} }}}}" for name in written
    }
    assert [step["id"] for step in action["runs"]["steps"] if "id" in step] == ["weigh"]


def test_no_expression_stands_in_a_script() -> None:
    """An expression in a script is put in as text, and would run; in `env` it is a value."""
    for step in _load(ACTION)["runs"]["steps"]:
        assert "${{" not in step["run"]
    for path in WORKFLOWS:
        assert not re.search(r"^\s*(- )?run:.*\$\{\{", path.read_text(encoding="utf-8"), re.MULTILINE)


def test_the_last_step_fails_by_the_status() -> None:
    """A missing status is no pass."""
    last = _load(ACTION)["runs"]["steps"][-1]["run"]

    for status in ("0", "1", "3"):
        assert subprocess.run(["bash", "-c", last], env={"GATECHECK_EXIT": status}, check=False).returncode == int(
            status
        )
    assert subprocess.run(["bash", "-c", last], env={"GATECHECK_EXIT": ""}, check=False).returncode == 3


def test_an_old_python_is_named(tmp_path: Path) -> None:
    first = _load(ACTION)["runs"]["steps"][0]["run"]
    old = tmp_path / "python3"
    old.write_text("#!/bin/sh\nexit 1\n", encoding="utf-8")
    old.chmod(0o755)

    done = subprocess.run(
        ["/bin/bash", "-e", "-c", first], env={"PATH": str(tmp_path)}, capture_output=True, text=True, check=False
    )

    assert done.returncode == 3
    assert done.stdout == (
        "::error title=gatecheck::python3 must be Python 3.11 or later; set one up in a step before this one.\n"
    )


def test_the_hook_runs_the_command_once() -> None:
    (hook,) = _load(HOOKS)

    program, *arguments = hook["entry"].split()
    assert program == "gatecheck"
    assert command(*arguments, "--help").returncode == 0
    assert (hook["pass_filenames"], hook["always_run"]) == (False, True)


def _gitlab(checkout: Path, base: str, **variables: str) -> subprocess.CompletedProcess[str]:
    """Run the job's last script, with the package of this tree in place of an installed one."""
    program = checkout.parent / "environment" / "bin" / "python"
    program.parent.mkdir(parents=True, exist_ok=True)
    program.write_text(f'#!/bin/sh\nshift\nPYTHONPATH="{PROJECT}" exec "{sys.executable}" "$@"\n', encoding="utf-8")
    program.chmod(0o755)
    script = _load(GITLAB)["gatecheck"]["script"][-1]
    return subprocess.run(
        ["sh", "-e", "-c", f"environment={program.parents[1]}\n{script}"],
        cwd=checkout,
        env={"PATH": "/usr/bin:/bin:/usr/local/bin", "CI_MERGE_REQUEST_DIFF_BASE_SHA": base} | variables,
        capture_output=True,
        text=True,
        check=False,
    )


@pytest.fixture
def merge_request(tmp_path: Path) -> tuple[Path, str]:
    """A checkout of depth 1 of a branch that loosens the policy, and the commit from which it departs."""
    origin = tmp_path / "origin"
    origin.mkdir()
    base = commit_all(write_tree(origin, drainage()), "base")
    commit_all(write_tree(origin, drainage(), policy=changed(POLICY, rules={})), "loosen the policy")
    git(tmp_path, "clone", "-q", "--depth=1", f"file://{origin}", "checkout")
    return tmp_path / "checkout", base


def test_the_gitlab_job_judges_by_the_base(merge_request: tuple[Path, str]) -> None:
    """The base is fetched, since the checkout lacks it; all artifacts are there although the job fails."""
    checkout, base = merge_request

    done = _gitlab(checkout, base)

    assert done.returncode == 1
    assert done.stdout.startswith(f"This checkout lacks the base commit {base}; fetching it alone.\n")
    assert "the policy allows 5 %" in done.stdout
    artifacts = _load(GITLAB)["gatecheck"]["artifacts"]
    for path in (*artifacts["paths"], *artifacts["reports"].values()):
        assert "drainage/earthworm-biomass" in (checkout / path).read_text(encoding="utf-8")
    assert _load(GITLAB)["gatecheck"]["artifacts"]["when"] == "always"


def test_the_gitlab_job_without_a_base_judges_the_tree(merge_request: tuple[Path, str]) -> None:
    done = _gitlab(merge_request[0], "")

    assert done.returncode == 0
    assert "lacks the base" not in done.stdout


def test_the_gitlab_job_stops_where_the_base_cannot_be_fetched(merge_request: tuple[Path, str]) -> None:
    checkout, base = merge_request
    git(checkout, "remote", "remove", "origin")

    done = _gitlab(checkout, base)

    assert done.returncode == 3
    assert done.stdout.endswith(f"The base commit {base} cannot be fetched: raise GIT_DEPTH.\n")


@pytest.fixture
def stale(tmp_path: Path) -> Path:
    """An origin whose branch `request` departs from `main` before `main` takes over a policy that asks for more."""
    origin = tmp_path / "origin"
    origin.mkdir()
    commit_all(origin, "start")
    commit_all(write_tree(origin, drainage(), policy=changed(POLICY, name="old", rules={})), "an old policy")
    git(origin, "checkout", "-q", "-b", "request")
    (origin / "notes.txt").write_text("only words\n", encoding="utf-8")
    commit_all(origin, "notes")
    git(origin, "checkout", "-q", "main")
    commit_all(write_tree(origin, drainage(), drainage(id="gained")), "a policy that asks for more")
    return origin


OF_THE_TARGET = {
    "CI_MERGE_REQUEST_TARGET_BRANCH_NAME": "main",
    "CI_MERGE_REQUEST_PROJECT_ID": "7",
    "CI_PROJECT_ID": "7",
}


def _told(checkout: Path) -> dict[str, Any]:
    return dict(json.loads((checkout / "gatecheck-verdict.json").read_text(encoding="utf-8")))


@pytest.mark.parametrize(("depth", "shallow"), [("0", "false"), ("2", "true")])
def test_the_gitlab_job_takes_the_policy_of_the_target_branch_as_it_is(
    stale: Path, depth: str, shallow: str
) -> None:
    """A branch that departed long ago chooses no older policy; what it changes is told since it departed."""
    few = [] if depth == "0" else [f"--depth={depth}"]
    git(stale.parent, "clone", "-q", *few, "--single-branch", "--branch=request", f"file://{stale}", "checkout")
    checkout = stale.parent / "checkout"

    done = _gitlab(checkout, git(stale, "rev-parse", "main~1"), GIT_DEPTH=depth, **OF_THE_TARGET)

    assert done.returncode == 1
    assert done.stdout.startswith("Fetching the target branch.\n")
    told = _told(checkout)
    assert (told["policy"]["name"], told["base"]) == (POLICY["name"], git(stale, "rev-parse", "main"))
    assert told["changes"] == []
    assert git(checkout, "rev-parse", "--is-shallow-repository") == shallow


def test_the_gitlab_job_takes_what_a_pipeline_of_merged_results_was_merged_into(stale: Path) -> None:
    git(stale, "merge", "-q", "--no-ff", "request", "-m", "merged results")
    merged_into = git(stale, "rev-parse", "HEAD^1")
    git(stale.parent, "clone", "-q", "--depth=1", f"file://{stale}", "checkout")
    checkout = stale.parent / "checkout"

    done = _gitlab(checkout, "", CI_MERGE_REQUEST_TARGET_BRANCH_SHA=merged_into, **OF_THE_TARGET)

    assert done.stdout.startswith(f"This checkout lacks the base commit {merged_into}; fetching it alone.\n")
    assert (_told(checkout)["base"], _told(checkout)["changes"]) == (merged_into, [])


@pytest.mark.parametrize(
    ("variables", "said"),
    [
        ({"CI_PROJECT_ID": "8"}, ""),
        (
            {"CI_MERGE_REQUEST_TARGET_BRANCH_NAME": "gone"},
            "Fetching the target branch.\nIt cannot be fetched: the commit from which the merge request departs "
            "counts in its place.\n",
        ),
    ],
)
def test_the_gitlab_job_where_the_target_branch_cannot_be_had(
    stale: Path, variables: dict[str, str], said: str
) -> None:
    """The branches of a fork are its author's own: the commit that the service names counts, as it is no choice."""
    git(stale.parent, "clone", "-q", "--branch=request", f"file://{stale}", "checkout")
    checkout, departs = stale.parent / "checkout", git(stale, "rev-parse", "main~1")

    done = _gitlab(checkout, departs, **OF_THE_TARGET | variables)

    assert done.returncode == 0
    assert done.stdout.startswith(f"{said}#")
    assert _told(checkout)["base"] == departs
