"""Every command line of the README is one that the command takes, and does what it says on an example."""

from __future__ import annotations

import argparse
import json
import re
import shutil
from pathlib import Path

import pytest
from support import commit_all

from gatecheck.arguments import parser
from gatecheck.cli import main

PROJECT = Path(__file__).parents[1]
README = (PROJECT / "README.md").read_text(encoding="utf-8")
EXAMPLE = "layout-experiment"
PLAN = """\
gatecheck: plan/1
id: layout
title: A new layout for the stall
data: none
hypotheses:
  - {id: H1, text: The new layout raises the number of items in a basket.}
"""
#: What stands for the words in capitals of the README.
MEANT = {
    "[DIR]": ".",
    "ID": "layout/basket-size",
    "PLAN": "plans/x.yaml",
    "REV": "HEAD",
    "A.json": "a.json",
    "B.json": "b.json",
    "TEST": "two-sample-t",
    "X": "0.5",
    "KIND": "record",
}
#: The exit status of each command on the example, of which one claim falls short.
STATUS = {"weigh": 1, "rerun": 3}


def lines() -> list[list[str]]:
    """The command lines of the README with values in place of its words, each once."""
    found = re.findall(r"`gatecheck ([a-z]+[^`]*)`", README)
    given = [[MEANT.get(word, word) for word in line.split()] for line in found if "examples/" not in line]
    whole = [[*words, *([MEANT["ID"]] if words == ["explain"] else [])] for words in given]
    return [list(words) for words in dict.fromkeys(map(tuple, whole))]


@pytest.fixture
def example(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A copy of an example as the current folder, a repository of its own, with a plan and two verdicts."""
    copy = tmp_path / EXAMPLE
    shutil.copytree(PROJECT / "examples" / EXAMPLE, copy)
    (copy / "plans").mkdir()
    (copy / "plans" / "x.yaml").write_text(PLAN, encoding="utf-8")
    commit_all(copy, "the example")
    monkeypatch.chdir(copy)
    for name in ("a", "b"):
        main(["weigh", "--write", f"json={name}.json"])
    return copy


def test_the_readme_names_every_command() -> None:
    commands = next(each for each in parser()._actions if isinstance(each, argparse._SubParsersAction))

    assert {words[0] for words in lines()} == set(commands.choices)


@pytest.mark.usefixtures("example")
@pytest.mark.parametrize("words", lines(), ids=" ".join)
def test_a_command_line_of_the_readme_runs(words: list[str], capsys: pytest.CaptureFixture[str]) -> None:
    status = main(words)

    told = capsys.readouterr()
    assert status == STATUS.get(words[0], 0), told.err
    assert told.out or told.err or "--write" in words


def test_the_record_and_the_policy_of_the_readme_are_read(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    record = next(block for block in re.findall(r"```json\n(.*?)```", README, re.DOTALL) if "record/1" in block)
    policy = next(block for block in re.findall(r"```yaml\n(.*?)```", README, re.DOTALL) if "policy/1" in block)
    (tmp_path / "results").mkdir()
    (tmp_path / "results" / "record.json").write_text(record, encoding="utf-8")
    (tmp_path / "gatecheck.yaml").write_text(policy, encoding="utf-8")

    assert main(["weigh", str(tmp_path), "--write", "json=-"]) == 1
    verdict = json.loads(capsys.readouterr().out)
    assert (verdict["problems"], [claim["verdict"] for claim in verdict["claims"]]) == ([], ["falls-short"])
