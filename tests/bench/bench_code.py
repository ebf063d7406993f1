"""Compare read_code() on 2,000 notebooks with reading their bytes and parsing their JSON once.

Run as `python tests/bench/bench_code.py`; it prints both times and their ratio, and exits 1 where that is above 3.
Every fourth notebook calls tests, without a record. Each has some 20 cells of code, and three plots of 40 kB. The
same notebooks stripped of their outputs, 5 kB each, are told beside it without a limit: there the code is nearly
all that JSON holds, and to parse the cells that test as Python takes longer than to parse all of it as JSON.
"""

from __future__ import annotations

import base64
import json
import os
import random
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

from gatecheck.analysis import read_code

NOTEBOOKS = 2_000
SHARE = 4
CELLS = 20
PLOT = 30_000
PLOTS = (5, 10, 15)
HIGHEST_RATIO = 3.0
ROUNDS = 5
ALL = ("**",)


def build(root: Path, *, with_outputs: bool) -> None:
    """Write the repository."""
    drawing = random.Random(1)  # noqa: S311  # pictures, no secrets
    for number in range(NOTEBOOKS):
        made = notebook(number, drawing, with_outputs=with_outputs)
        (root / f"n{number:04}.ipynb").write_text(json.dumps(made, indent=1), encoding="utf-8")
    for command in (("init", "-q"), ("add", ".")):
        subprocess.run(["git", "-C", str(root), *command], check=True)


def notebook(number: int, drawing: random.Random, *, with_outputs: bool) -> dict[str, object]:
    """Return a notebook that loads data, makes plots and, every fourth one, tests."""
    loads = "import numpy as np\nimport pandas as pd\n" + ("from scipy import stats\n" * (number % SHARE == 0))
    cells = [cell(loads)] + [cell(code(at, with_test=number % SHARE == 0)) for at in range(CELLS)]
    for at in PLOTS if with_outputs else ():
        picture = base64.b64encode(drawing.randbytes(PLOT)).decode()
        cells[at]["outputs"] = [{"output_type": "display_data", "data": {"image/png": picture}, "metadata": {}}]
    metadata = {"language_info": {"name": "python"}}
    return {"cells": cells, "metadata": metadata, "nbformat": 4, "nbformat_minor": 5}


def code(at: int, *, with_test: bool) -> str:
    """Return a cell; every fifth one makes a test where the notebook does."""
    lines = f"wet = plots[plots['depth'] > {at}]\nwet.groupby('field')['worms'].mean().plot(kind='bar')\n"
    return lines + (f"stats.ttest_ind(wet['worms'], dry['worms{at}'])\n" if with_test and at % 5 == 0 else "")


def cell(source: str) -> dict[str, object]:
    """Return a cell of code."""
    lines = source.splitlines(keepends=True)
    return {"cell_type": "code", "metadata": {}, "execution_count": 1, "outputs": [], "source": lines}


def least(root: Path) -> int:
    """List with git, read each file once and parse it once."""
    listed = subprocess.run(["git", "-C", str(root), "ls-files", "-z"], check=True, capture_output=True).stdout
    paths = [root / os.fsdecode(path) for path in listed.split(b"\0")[:-1]]
    return sum(len(json.loads(path.read_bytes())["cells"]) for path in paths)


def best(*works: Callable[[], object]) -> list[float]:
    """Return the shortest time of each work, in seconds; they take turns, so that a busy machine slows all."""
    times: list[list[float]] = [[] for _ in works]
    for _ in range(ROUNDS):
        for work, taken in zip(works, times, strict=True):
            start = time.perf_counter()
            work()
            taken.append(time.perf_counter() - start)
    return [min(taken) for taken in times]


def ratio(*, with_outputs: bool) -> float:
    """Print the times and their ratio, and return this."""
    with tempfile.TemporaryDirectory() as folder:
        root = Path(folder)
        build(root, with_outputs=with_outputs)
        found = read_code(root, ALL, ())
        tests = sum(len(one.tests) for one in found.files)
        ours, floor = best(lambda: read_code(root, ALL, ()), lambda: least(root))
    what = "notebooks" if with_outputs else "notebooks without outputs"
    times = f"{ours:.2f} s, bytes and JSON {floor:.2f} s, ratio {ours / floor:.2f}"
    print(f"{NOTEBOOKS} {what}, {tests} tests: {times}")  # noqa: T201  # a script that reports
    return ours / floor


def main() -> int:
    """Print both ratios; the first has a limit."""
    highest = ratio(with_outputs=True)
    ratio(with_outputs=False)
    return int(highest > HIGHEST_RATIO)


if __name__ == "__main__":
    sys.exit(main())
