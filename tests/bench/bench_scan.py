"""Compare scan() on 20,000 files with the least that git and the files themselves cost.

Run as `python tests/bench/bench_scan.py`; it prints both times and their ratio, and exits 1 where that is above 3.
"""

from __future__ import annotations

import json
import os
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

from gatecheck.scan import scan

FOLDERS = 200
FILES = 20_000
RECORDS = 200
HIGHEST_RATIO = 3.0
ROUNDS = 7


def build(root: Path) -> None:
    """Write the repository: one record in each folder, the rest measurements of about 400 bytes."""
    for folder in range(FOLDERS):
        (root / f"f{folder:03}").mkdir()
    for number in range(FILES):
        name = f"f{number % FOLDERS:03}/m{number:05}.json"
        (root / name).write_text(record(number) if number < RECORDS else measurements(number))
    git(root, "init", "-q")
    git(root, "add", ".")
    git(root, "-c", "user.name=bench", "-c", "user.email=bench@example.org", "commit", "-q", "-m", "files")


def git(root: Path, *arguments: str) -> bytes:
    """Run git in `root`."""
    return subprocess.run(["git", "-C", str(root), *arguments], check=True, capture_output=True).stdout


def record(number: int) -> str:
    """Return a record of about 400 bytes."""
    test = {"name": "two-sample t", "statistic": "t", "value": 2.21, "df": 34, "p": "0.034", "sides": 2}
    sample = {"unit": "plot", "n": 36, "groups": [{"name": "drained", "n": 18}, {"name": "undrained", "n": 18}]}
    claim = "Drainage increases the biomass of earthworms in clay soil."
    document = {"gatecheck": "record/1", "id": f"plot/{number}", "claim": claim, "test": test, "sample": sample}
    return json.dumps(document, indent=1)


def measurements(number: int) -> str:
    """Return a document of about 400 bytes that is no record."""
    return json.dumps({"plot": number, "depth": [round(0.01 * (number + step) % 7, 3) for step in range(55)]})


def least(root: Path) -> int:
    """List with git and read each file once."""
    listed = git(root, "ls-files", "-co", "--exclude-standard", "-z").split(b"\0")[:-1]
    return sum(len(_bytes(os.fsencode(root) + b"/" + path)) for path in listed)


def _bytes(path: bytes) -> bytes:
    handle = os.open(path, os.O_RDONLY)
    try:
        return os.read(handle, 1 << 16)
    finally:
        os.close(handle)


def best(*works: Callable[[], object]) -> list[float]:
    """Return the shortest time of each work, in seconds; they take turns, so that a busy machine slows all."""
    times: list[list[float]] = [[] for _ in works]
    for _ in range(ROUNDS):
        for work, taken in zip(works, times, strict=True):
            start = time.perf_counter()
            work()
            taken.append(time.perf_counter() - start)
    return [min(taken) for taken in times]


def main() -> int:
    """Build, measure, print."""
    with tempfile.TemporaryDirectory() as folder:
        root = Path(folder)
        build(root)
        found = len(scan(root, ["**"], []).found)
        floor, taken, committed = best(
            lambda: least(root), lambda: scan(root, ["**"], []), lambda: scan(root, ["**"], [], "HEAD")
        )
    ratio = taken / floor
    sys.stdout.write(
        f"{found} records in {FILES} files: scan {taken * 1e3:.0f} ms, git and reading {floor * 1e3:.0f} ms, "
        f"ratio {ratio:.2f} (at most {HIGHEST_RATIO}); of a commit {committed * 1e3:.0f} ms\n"
    )
    return int(found != RECORDS or ratio > HIGHEST_RATIO)


if __name__ == "__main__":
    sys.exit(main())
