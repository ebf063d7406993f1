"""What the gate advises where a clone lacks something: run in a shell as it stands, it mends the case."""

from __future__ import annotations

import json
import shlex
import subprocess
from pathlib import Path

import pytest
from support import POLICY, changed, commit_all, drainage, git, weigh, write_tree

from gatecheck.cli import main

PLAN = {
    "gatecheck": "plan/1",
    "id": "drainage",
    "title": "Drainage and soil life",
    "data": "none",
    "hypotheses": [{"id": "H1", "text": "Drainage increases earthworm biomass."}],
}


@pytest.fixture
def upstream(tmp_path: Path) -> Path:
    """A repository with a sealed plan on `main`, and on `request` the result."""
    folder = tmp_path / "upstream"
    (folder / "plans").mkdir(parents=True)
    (folder / "plans/drainage.json").write_text(json.dumps(PLAN), encoding="utf-8")
    assert main(["seal", str(folder / "plans/drainage.json")]) == 0
    write_tree(folder, policy=changed(POLICY, rules={"registered": {}}))
    commit_all(folder, "plan")
    git(folder, "checkout", "-q", "-b", "request")
    write_tree(folder, drainage(plan={"file": "plans/drainage.json", "hypothesis": "H1"}), policy=None)
    commit_all(folder, "result")
    return folder


def shallow(upstream: Path) -> Path:
    """A clone of the last commit of `request` from a remote called `field`, with another one beside it."""
    clone = upstream.parent / "clone"
    arguments = ("-q", "--depth=1", "-o", "field", "-b", "request")
    git(upstream.parent, "clone", *arguments, upstream.as_uri(), str(clone))
    git(clone, "remote", "add", "z-empty", str(upstream.parent / "nowhere"))
    return clone


def follow(clone: Path, advice: str, base: str) -> str:
    """Do as advised, and return the base to name then."""
    for code in advice.split("`")[1::2]:
        if code.startswith("git "):
            subprocess.run(["bash", "-c", code], cwd=clone, check=True, capture_output=True)
        else:
            _, base = shlex.split(code)
    return base


@pytest.mark.parametrize("base", ["main", "field/main", "ID", "HEAD^", "HEAD~1"])
def test_a_base_that_a_shallow_clone_lacks(upstream: Path, base: str) -> None:
    clone = shallow(upstream)
    base = git(upstream, "rev-parse", "main") if base == "ID" else base

    lacking = weigh(clone, "--base", base)
    (problem,) = lacking.verdict["problems"]
    named = follow(clone, problem["advice"], base)
    mended = weigh(clone, "--base", named)

    assert lacking.status == 3
    assert problem["message"] == f"the revision {base} is not in this shallow clone"
    assert mended.verdict["base"] == git(upstream, "rev-parse", "main")
    assert mended.verdict["policy"]["from"] == "base"


def test_a_history_that_a_shallow_clone_lacks(upstream: Path) -> None:
    """`registered` asks what came first: undecided while the history is cut, and met when it is there."""
    clone = shallow(upstream)

    cut = weigh(clone)
    said = cut.rule("registered")
    follow(clone, said["remedy"], "")
    whole = weigh(clone)

    assert (cut.status, said["outcome"]) == (3, "undecided")
    assert "`git fetch --unshallow field`" in said["remedy"]
    assert (whole.status, whole.rule("registered")["outcome"]) == (0, "met")


def test_a_base_without_a_name_is_wrong_usage(upstream: Path, capsys: pytest.CaptureFixture[str]) -> None:
    for command in (["weigh"], ["explain", "x"], ["trace", "x"]):
        with pytest.raises(SystemExit) as left:
            main([*command, str(upstream), "--base", ""])

        assert left.value.code == 2
        assert "argument --base: it names no revision; leave the option out" in capsys.readouterr().err


def test_a_repository_whose_head_names_nothing_is_not_judged(upstream: Path) -> None:
    write_tree(upstream, drainage())
    (upstream / ".git/HEAD").write_text("ref: refs/heads/ma\x01in\n", encoding="ascii")

    answer = weigh(upstream)

    assert answer.status == 3
    assert [each["message"] for each in answer.verdict["problems"]] == [
        "HEAD of this repository names neither a branch nor a commit"
    ]
