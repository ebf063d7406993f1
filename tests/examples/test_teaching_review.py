"""The example repository holds what its own analysis writes."""

from __future__ import annotations

import json
import shutil
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import nbformat
import pytest
from nbconvert.preprocessors import ExecutePreprocessor

from gatecheck.schema.records import read_record

EXAMPLE = Path(__file__).parents[2] / "examples" / "teaching-review"
MEDIA_TYPE = "application/vnd.gatecheck.record+json"
# Neither of the two says its types.
READ: Any = nbformat.read
EXECUTOR: Any = ExecutePreprocessor


@pytest.fixture(scope="module")
def rerun(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return a copy of the example, a repository of its own, in which the analysis ran on no earlier records."""
    copy = tmp_path_factory.mktemp("example") / "teaching-review"
    shutil.copytree(EXAMPLE, copy, ignore=shutil.ignore_patterns("results", "__pycache__"))
    subprocess.run(["git", "init", "--quiet", copy], check=True)
    for script in sorted(copy.glob("analysis/*.py")):
        subprocess.run([sys.executable, script], cwd=copy, check=True)
    return copy


def records_in(folder: Path) -> dict[str, Any]:
    paths = (folder / "results").rglob("*.record.json")
    return {path.relative_to(folder).as_posix(): json.loads(path.read_bytes()) for path in paths}


def outputs_of(notebook: Any) -> Iterator[Any]:
    for cell in notebook.cells:
        for output in cell.get("outputs", ()):
            if MEDIA_TYPE in output.get("data", {}):
                yield output["data"][MEDIA_TYPE]


def assert_same(found: Any, expected: Any, where: str = "") -> None:
    """Compare two documents, numbers within 1e-9: releases of the libraries differ in the last digits."""
    if isinstance(expected, dict):
        assert list(found) == list(expected), where
        for key, member in expected.items():
            assert_same(found[key], member, f"{where}.{key}")
    elif isinstance(expected, list):
        assert len(found) == len(expected), where
        for index, member in enumerate(expected):
            assert_same(found[index], member, f"{where}[{index}]")
    elif isinstance(expected, float):
        assert found == pytest.approx(expected, rel=1e-9), where
    else:
        assert found == expected, where


def without_versions(record: dict[str, Any]) -> dict[str, Any]:
    record["provenance"].pop("commit", None)
    assert record["provenance"].pop("software").keys() >= {"python", "numpy", "scipy"}
    return record


def test_committed_records_are_what_the_analysis_writes(rerun: Path) -> None:
    committed, made = records_in(EXAMPLE), records_in(rerun)
    assert sorted(committed) == sorted(made)
    for name, expected in committed.items():
        assert_same(without_versions(made[name]), without_versions(expected), name)


@pytest.mark.filterwarnings("default")  # the kernel's client warns of its own transport and event loop
def test_committed_notebook_shows_what_its_cells_give(tmp_path: Path) -> None:
    committed = READ(EXAMPLE / "notebooks" / "elasticity.ipynb", as_version=4)
    (expected,) = outputs_of(committed)
    EXECUTOR(timeout=120, kernel_name="python3").preprocess(committed, {"metadata": {"path": str(tmp_path)}})
    (made,) = outputs_of(committed)
    made, expected = (json.loads(json.dumps(record, sort_keys=True)) for record in (made, expected))
    assert_same(without_versions(made), without_versions(expected))
    assert list(tmp_path.iterdir()) == []


def test_every_record_is_of_the_contract() -> None:
    notebook = READ(EXAMPLE / "notebooks" / "elasticity.ipynb", as_version=4)
    documents = [*records_in(EXAMPLE).values(), *outputs_of(notebook)]
    assert [read_record(document)[1] for document in documents] == [()] * 6


def test_the_story_that_the_example_tells() -> None:
    """What its README says: who claims, on which status, and how small p is."""
    told = {
        record["id"]: ("claim" in record, record["status"], record["test"]["p"])
        for record in records_in(EXAMPLE).values()
    }
    assert told == {
        "psi/grade-improved": (True, "confirmatory", pytest.approx(0.0255, abs=5e-5)),
        "psi/average-grade-before": (False, "descriptive", pytest.approx(0.8345, abs=5e-5)),
        "psi/average-grade-and-entry-test": (True, "exploratory", pytest.approx(0.0287, abs=5e-5)),
        "food/expenditure-on-income": (True, "confirmatory", pytest.approx(2.71e-13, rel=1e-3)),
        "food/share-by-income": (True, "confirmatory", pytest.approx(2.145e-06, rel=1e-3)),
    }


def test_names_in_its_readme_exist() -> None:
    readme = (EXAMPLE / "README.md").read_text("utf-8")
    for name in ("analysis/psi.py", "analysis/food.py", "notebooks/elasticity.ipynb", "gatecheck.yaml"):
        assert f"`{name}`" in readme
        assert (EXAMPLE / name).is_file()
