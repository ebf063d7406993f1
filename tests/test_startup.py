"""What a run loads: start-up time is paid on every run, and modules are its stable measure."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest
from support import drainage, write_tree

PROJECT = Path(__file__).parents[1]
HEAVY = {
    "IPython",
    "importlib.metadata",
    "nbconvert",
    "nbformat",
    "numpy",
    "pandas",
    "scipy",
    "statsmodels",
    "yaml",
}
#: Five more than measured on CPython 3.11: argparse, dataclasses, pathlib, shutil, and what these load.
MOST_TO_HELP = 72
LISTED = "print(*sys.modules, sep='\\n', file=sys.stderr)"
RUN = f"""
import sys
from gatecheck.cli import main
try:
    main(sys.argv[1:])
except SystemExit as left:
    assert left.code == 0
{LISTED}
"""


def _loaded(code: str, *arguments: str) -> set[str]:
    """The modules that a new interpreter holds after `code`."""
    # A measurement of coverage would load modules of its own.
    kept = {name: value for name, value in os.environ.items() if not name.startswith("COV")}
    done = subprocess.run(
        [sys.executable, "-c", code, *arguments],
        capture_output=True,
        text=True,
        check=True,
        env={**kept, "PYTHONPATH": str(PROJECT)},
    )
    return set(done.stderr.split())


def _loaded_by(*arguments: str) -> set[str]:
    return _loaded(RUN, *arguments) - _loaded(f"import sys; {LISTED}")


@pytest.mark.parametrize("arguments", [["--help"], ["--version"], ["weigh", "--help"]])
def test_help_loads_no_arrays(arguments: list[str]) -> None:
    loaded = _loaded_by(*arguments)

    assert "gatecheck.cli" in loaded
    assert loaded & HEAVY == set()
    assert len(loaded) <= MOST_TO_HELP


def test_weighing_json_loads_nothing_for_other_formats(tmp_path: Path) -> None:
    """The common path: no YAML, no notebook, and of scipy the special functions alone."""
    loaded = _loaded_by("weigh", str(write_tree(tmp_path, drainage(), policy=None)))

    assert {"numpy", "scipy.special", "gatecheck.gate"} <= loaded
    assert loaded & (HEAVY - {"importlib.metadata", "numpy", "scipy"}) == set()
    assert (
        loaded & {"scipy.stats", "scipy.optimize", "scipy.linalg", "scipy.integrate", "gatecheck.declaring"}
        == set()
    )


def test_yaml_is_loaded_for_yaml(tmp_path: Path) -> None:
    """The measure sees what it looks for."""
    assert "yaml" in _loaded_by("weigh", str(write_tree(tmp_path, drainage())))
