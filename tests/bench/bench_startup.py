"""Measure start-up: `python tests/bench/bench_startup.py` prints two ratios and the most that each should be.

The command runs from an installed copy in an environment of its own, since an editable one is slower to find.
"""

from __future__ import annotations

import json
import subprocess
import sys
import tempfile
import time
from collections.abc import Sequence
from pathlib import Path

PROJECT = Path(__file__).parents[2]
RUNS = 15
RECORDS = 200
MOST_FOR_HELP = 3.0
MOST_FOR_WEIGHING = 1.6


def installed_copy(folder: Path) -> Path:
    """Install the package in `folder`, and return the programs of that environment."""
    bin_folder = folder / "bin"
    subprocess.run([sys.executable, "-m", "venv", folder], check=True)
    subprocess.run([bin_folder / "pip", "install", "--quiet", PROJECT], check=True)
    return bin_folder


def tree_of_records(folder: Path) -> Path:
    """Write a tree of records, one a file, as JSON and without a policy."""
    example = json.loads((PROJECT / "gatecheck" / "starting" / "example.record.json").read_bytes())
    folder.mkdir()
    for number in range(RECORDS):
        record = {**example, "id": f"example/{number}"}
        (folder / f"{number}.json").write_text(json.dumps(record), encoding="utf-8")
    return folder


def shortest(*commands: Sequence[Path | str]) -> list[float]:
    """Return the shortest of several runs of each command, in seconds; the commands take turns."""
    times: list[list[float]] = [[] for _ in commands]
    for _ in range(RUNS):
        for command, taken in zip(commands, times, strict=True):
            start = time.perf_counter()
            subprocess.run(command, capture_output=True, check=False)
            taken.append(time.perf_counter() - start)
    return [min(taken) for taken in times]


def main() -> None:
    """Measure, and print."""
    with tempfile.TemporaryDirectory() as name:
        programs = installed_copy(Path(name) / "environment")
        records = tree_of_records(Path(name) / "records")
        python, gatecheck = programs / "python", programs / "gatecheck"
        bare, told, arrays, weighed = shortest(
            [python, "-c", "pass"],
            [gatecheck, "--help"],
            [python, "-c", "import numpy, scipy.special"],
            [gatecheck, "weigh", records],
        )
    sys.stdout.write(
        f"gatecheck --help: {told * 1000:.0f} ms, {told / bare:.2f} times a bare interpreter"
        f" (at most {MOST_FOR_HELP})\n"
        f"gatecheck weigh, {RECORDS} records: {weighed * 1000:.0f} ms, {weighed / arrays:.2f} times the import of"
        f" numpy and scipy.special (at most {MOST_FOR_WEIGHING})\n"
    )


if __name__ == "__main__":
    main()
