"""The command `rerun`, on a policy that names what is run."""

from __future__ import annotations

import io
from pathlib import Path
from typing import Any

import pytest
from rerunning.rerunning_trees import emitting, place, worms
from support import POLICY, changed, command, commit_all, weigh

from gatecheck.cli import main

Said = tuple[int, str, str]
WARNING = "Run only what you trust."


def tree(folder: Path, code: str, **settings: Any) -> Path:
    """A repository with one record, and a script that a rerun runs."""
    policy = changed(POLICY, rerun={"run": ["analysis/*.py"], **settings})
    place(folder, {"gatecheck.yaml": policy, "analysis/a.py": code, "results/r.json": worms()})
    commit_all(folder, "first")
    return folder


def said(capsys: pytest.CaptureFixture[str], *arguments: str) -> Said:
    status = main(["rerun", *arguments])
    streams = capsys.readouterr()
    return status, " ".join(streams.out.split()), streams.err


def test_the_real_command_agrees(tmp_path: Path) -> None:
    ran = command("rerun", cwd=tree(tmp_path, emitting(worms())))

    assert (ran.returncode, ran.stderr) == (0, "")
    assert ran.stdout.startswith("Runs 1 file, in this order\n\n  analysis/a.py\n\n")
    assert "\n\nThe run gives what stands in the tree (1 record).\n\nEqual\n\n  worms\n\n" in ran.stdout
    assert max(map(len, ran.stdout.splitlines())) <= 80


def test_a_difference_is_shown_and_exits_with_1(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    status, out, err = said(capsys, str(tree(tmp_path, emitting(worms(test__p="0.041")))))

    assert (status, err) == (1, "")
    assert "worms test.p: 0.034 in the tree, 0.041 from the run" in out


def test_what_could_not_run_exits_with_3(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    status, out, _ = said(capsys, str(tree(tmp_path, "while True: pass", minutes=0.02)))

    assert status == 3
    assert "analysis/a.py Found it was not done after 0.02 minutes, and was stopped." in out


def test_another_policy_can_be_named(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    folder = tree(tmp_path, "")
    place(folder, {"b.py": emitting(worms()), "other.yaml": changed(POLICY, rerun={"run": "b.py"})})

    status, out, _ = said(capsys, str(folder), "--policy", str(folder / "other.yaml"))

    assert status == 0
    assert out.startswith("Runs 1 file, in this order b.py The code runs")


@pytest.mark.parametrize(
    ("policy", "complaint"),
    [
        (
            POLICY,
            "the policy names nothing to run; name notebooks and scripts in its `rerun.run`",
        ),
        (
            changed(POLICY, rerun={"minutes": 0}),
            "the policy cannot be read; see `gatecheck weigh` for what is wrong with it",
        ),
    ],
)
def test_without_anything_to_run_the_command_cannot_judge(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], policy: Any, complaint: str
) -> None:
    place(tmp_path, {"gatecheck.yaml": policy})

    assert said(capsys, str(tmp_path)) == (3, "", f"gatecheck: cannot judge: {complaint}.\n")


def test_progress_is_told_at_a_terminal_alone(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    class Terminal(io.StringIO):
        def isatty(self) -> bool:
            return True

    folder = place(tree(tmp_path, emitting(worms())), {"analysis/b\x1b.py": ""})
    assert said(capsys, str(folder))[2] == ""

    monkeypatch.setattr("sys.stderr", terminal := Terminal())
    assert said(capsys, str(folder))[0] == 0
    assert terminal.getvalue() == "running 1 of 2: analysis/a.py\nrunning 2 of 2: analysis/b{U+001B}.py\n"


def test_weighing_runs_nothing(tmp_path: Path) -> None:
    tree(tmp_path, f"open({str(tmp_path / 'ran')!r}, 'w').close()")

    assert weigh(tmp_path).status in {0, 1}
    assert not (tmp_path / "ran").exists()


def test_its_help_says_that_it_runs_code(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit, match="0"):
        main(["rerun", "--help"])

    assert "It runs code, and a copy is no sandbox: run only what you trust." in " ".join(
        capsys.readouterr().out.split()
    )


def test_a_base_is_unknown_to_it(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit, match="2"):
        main(["rerun", "--base", "main"])

    assert "unrecognized arguments: --base" in capsys.readouterr().err
