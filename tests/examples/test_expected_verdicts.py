"""Each example is judged as it says of itself."""

from __future__ import annotations

import json
import shutil
from pathlib import Path

import pytest
from support import commit_all, weigh

EXAMPLES = sorted(path.parent for path in (Path(__file__).parents[2] / "examples").glob("*/gatecheck.yaml"))


@pytest.mark.parametrize("example", EXAMPLES, ids=lambda path: path.name)
def test_the_example_is_judged_as_it_says(example: Path, tmp_path: Path) -> None:
    """In a repository of its own, since looks are counted in the history."""
    copy = tmp_path / example.name
    shutil.copytree(example, copy, ignore=shutil.ignore_patterns("__pycache__"))
    commit_all(copy, "the example")

    answer = weigh(copy)

    expected = json.loads((example / "expected.json").read_text(encoding="utf-8"))
    assert answer.verdict["problems"] == []
    assert {claim["id"]: claim["verdict"] for claim in answer.verdict["claims"]} == expected["claims"]
    assert answer.status == expected["exit"]


def test_there_are_examples_of_several_kinds() -> None:
    assert [example.name for example in EXAMPLES] == ["compound-screen", "layout-experiment", "teaching-review"]
