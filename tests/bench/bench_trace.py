"""Compare the reading of a whole history with `git log --raw` alone, on 10,000 commits and 5,000 records.

Run as `python tests/bench/bench_trace.py`; it prints the times and their ratios, and exits 1 where the whole of
tracing one record takes more than 3 times as long as git itself.
"""

from __future__ import annotations

import gc
import json
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable, Iterator
from pathlib import Path

from gatecheck.history.looks import looks_of_records
from gatecheck.history.walk import history_of
from gatecheck.policies import read_own_policy
from gatecheck.policy import STARTING_POLICY
from gatecheck.scan import scan
from gatecheck.tracing import trace

COMMITS = 10_000
RECORDS = 5_000
FOLDERS = 100
HIGHEST_RATIO = 3.0
ROUNDS = 5


def build(root: Path) -> None:
    """Write the repository: the first commit adds all records, each other one changes one of them."""
    git(root, "init", "-q", "-b", "main")
    subprocess.run(["git", "-C", str(root), "fast-import", "--quiet"], input=b"".join(stream()), check=True)
    git(root, "reset", "-q", "--hard", "main")


def stream() -> Iterator[bytes]:
    """Yield the commands of `git fast-import`."""
    for commit in range(COMMITS):
        message = f"commit {commit}".encode()
        yield b"commit refs/heads/main\ncommitter bench <bench@example.org> %d +0000\n" % (10**9 + 60 * commit)
        yield b"data %d\n%s\n" % (len(message), message)
        for number in range(RECORDS) if commit == 0 else (commit % RECORDS,):
            content = record(number, commit).encode()
            yield b"M 100644 inline results/f%02d/r%04d.json\n" % (number % FOLDERS, number)
            yield b"data %d\n%s\n" % (len(content), content)


def record(number: int, commit: int) -> str:
    """Return a record of about 400 bytes."""
    test = {"name": "two-sample t", "statistic": "t", "value": 2 + commit / COMMITS, "df": 34, "sides": 2}
    sample = {"unit": "plot", "n": 36 + commit // RECORDS, "groups": []}
    claim = "Drainage increases the biomass of earthworms in clay soil."
    document = {"gatecheck": "record/1", "id": f"plot/{number}", "claim": claim, "test": test, "sample": sample}
    return json.dumps(document, indent=1)


def git(root: Path, *arguments: str) -> bytes:
    """Run git in `root`."""
    return subprocess.run(["git", "-C", str(root), *arguments], check=True, capture_output=True).stdout


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
    policy, _ = read_own_policy(STARTING_POLICY)
    assert policy is not None
    gc.disable()  # as the command does
    with tempfile.TemporaryDirectory() as folder:
        root = Path(folder)
        build(root)
        found = scan(root, ["**"], []).found
        told = trace(root, policy, "plot/77")
        looks = 0 if told is None else len(told.looks.looks)
        floor, walked, traced, all_seen = best(
            lambda: git(root, "log", "--raw", "-z", "--no-renames", "--no-abbrev"),
            lambda: history_of(root, first_parent=False),
            lambda: trace(root, policy, "plot/77"),
            lambda: looks_of_records(root, found),
        )
    ratio = traced / floor
    sys.stdout.write(
        f"{looks} looks at one of {len(found)} records in {COMMITS} commits: git log --raw {floor * 1e3:.0f} ms, "
        f"the walk {walked * 1e3:.0f} ms, ratio {walked / floor:.2f}; tracing one record {traced * 1e3:.0f} ms, "
        f"ratio {ratio:.2f} (at most {HIGHEST_RATIO}); the looks at all records {all_seen * 1e3:.0f} ms, ratio "
        f"{all_seen / floor:.2f}\n"
    )
    return int(looks != 2 or ratio > HIGHEST_RATIO)


if __name__ == "__main__":
    sys.exit(main())
