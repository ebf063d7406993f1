"""Compare the reading of prose with the least that it can cost.

Recognising the statistics in 10 MB of prose is compared with one pass of a single regular expression for the plain
ways to write them (at most 2 times), and the prose of a repository of 2,000 notebooks, held against 200 records,
with the reading of its bytes and one JSON parse of each (at most 3 times).

Run as `python tests/bench/bench_prose.py`; it prints the times and their ratios, and exits 1 where one is above its
limit.
"""

from __future__ import annotations

import json
import re
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

from gatecheck.prose.agree import held_against
from gatecheck.prose.fields import subjects
from gatecheck.prose.links import links_in
from gatecheck.prose.markdown import hidden
from gatecheck.prose.reading import read_prose
from gatecheck.prose.source import Passage, SourceFile
from gatecheck.prose.statistics_in_text import statistics
from gatecheck.scan import scan

SIZE = 10_000_000
NOTEBOOKS = 2_000
RECORDS = 200
HIGHEST_OF_PASS = 2.0
HIGHEST_OF_PARSE = 3.0
ROUNDS = 5
#: The plain ways to write a statistic, in one expression.
PLAIN = re.compile(
    r"\b[tFr] ?\([\d., ]+\) = -?\d*\.\d+|χ²\(\d+(?:, N = \d+)?\) = \d*\.\d+|\bz = -?\d*\.\d+|\bp [=<>] ?\d*\.\d+"
    r"|\d+ ?% (?:CI|confidence interval) \[?-?[\d.]+(?: to |, )-?[\d.]+\]?|\b\d+/\d+ \(\d+ ?%\)"
)
FILLER = (
    "The plots were sampled in spring and again in autumn, and the soil of each was sieved by hand. Worms were "
    "weighed alive, counted by species where that could be told, and put back where they came from the same day. "
    "Where a plot was flooded (3 of them were, in the second year), it was left out, as section 4.2 says. "
)


def figures(number: int) -> tuple[str, str, float]:
    """Return t, p and an estimate; there are as many different ones as records."""
    at = number % RECORDS
    return f"{1.5 + at / 100:.2f}", f"{(at * 7 + 1) / 2000:.4f}", 1.5 + at / 10


def paragraph(number: int) -> str:
    """Return some 430 characters of prose with two statistics, which a record has."""
    t, p, size = figures(number)
    interval = f"95 % CI {size - 1:.1f} to {size + 1:.1f}"
    return f"{FILLER}Biomass rose by {size:.1f} g ({interval}), t(34) = {t}, p = {p}.\n\n"


def prose(size: int) -> str:
    """Return prose of about `size` characters."""
    pieces, length, number = [], 0, 0
    while length < size:
        pieces.append(paragraph(number))
        length += len(pieces[-1])
        number += 1
    return "".join(pieces)


def record(number: int) -> dict[str, Any]:
    """Return the record of one paragraph."""
    t, p, size = figures(number)
    test = {"name": "two-sample t", "statistic": "t", "value": t, "df": 34, "p": p, "sides": 2}
    interval = {"level": 0.95, "low": size - 1, "high": size + 1}
    estimate = {"measure": "mean difference", "value": size, "unit": "g", "interval": interval}
    return {"gatecheck": "record/1", "id": f"plot/{number}", "test": test, "estimate": estimate}


def notebook(number: int) -> str:
    """Return a notebook of about 40 kB: 20 cells of code with outputs, 10 of prose, one of them with results."""
    output = {"output_type": "stream", "name": "stdout", "text": [f"{row} {number} 0.5\n" for row in range(60)]}
    code = {"cell_type": "code", "source": ["x = 1\n", "fit(x)"], "metadata": {}, "outputs": [output]}
    plain = {"cell_type": "markdown", "source": [f"## Part {number}\n", "\n", FILLER], "metadata": {}}
    name, t = f"plot/{number % RECORDS}", figures(number)[0]
    results = [*paragraph(number).splitlines(keepends=True), f"It was {t} <!-- gatecheck: {name} test.value -->.\n"]
    cells = [code, code, plain] * 9 + [code, code, {"cell_type": "markdown", "source": results, "metadata": {}}]
    return json.dumps({"cells": cells, "metadata": {}, "nbformat": 4, "nbformat_minor": 5}, indent=1)


def best(*works: Callable[[], object]) -> list[float]:
    """Return the shortest time of each work, in seconds; they take turns, so that a busy machine slows all."""
    times: list[list[float]] = [[] for _ in works]
    for _ in range(ROUNDS):
        for work, taken in zip(works, times, strict=True):
            start = time.perf_counter()
            work()
            taken.append(time.perf_counter() - start)
    return [min(taken) for taken in times]


def of_pass() -> float:
    """Measure the recognition in one long text."""
    text = prose(SIZE)
    passage = Passage(SourceFile("a.md", text), text, hidden)
    found, plain = sum(1 for _ in statistics(text)), sum(1 for _ in PLAIN.finditer(text))
    floor, taken, links = best(
        lambda: sum(1 for _ in PLAIN.finditer(text)),
        lambda: sum(1 for _ in statistics(text)),
        lambda: links_in(passage),
    )
    sys.stdout.write(
        f"{found} statistics in {len(text) / 1e6:.0f} MB: {taken * 1e3:.0f} ms; one pass with {plain} matches "
        f"{floor * 1e3:.0f} ms, ratio {taken / floor:.2f} (at most {HIGHEST_OF_PASS}); links {links * 1e3:.0f} ms\n"
    )
    return taken / floor


def of_parse() -> float:
    """Measure the prose of many notebooks."""
    with tempfile.TemporaryDirectory() as folder:
        root = Path(folder)
        for number in range(NOTEBOOKS):
            (root / f"n{number:04}.ipynb").write_text(notebook(number), encoding="utf-8")
        for number in range(RECORDS):
            (root / f"r{number:04}.json").write_text(json.dumps(record(number)), encoding="utf-8")
        known = subjects([one.record for one in scan(root, ["*.json"], []).found], [])
        paths = sorted(root.glob("*.ipynb"))
        floor, taken = best(
            lambda: [json.loads(path.read_bytes()) for path in paths],
            lambda: held_against(read_prose(root, ["**/*.ipynb"], []).passages, known),
        )
        facts = held_against(read_prose(root, ["**/*.ipynb"], []).passages, known)
    sys.stdout.write(
        f"{NOTEBOOKS} notebooks, {len(facts.facts)} disagreements: {taken * 1e3:.0f} ms; bytes and one parse "
        f"{floor * 1e3:.0f} ms, ratio {taken / floor:.2f} (at most {HIGHEST_OF_PARSE})\n"
    )
    return taken / floor


def main() -> int:
    """Measure both, print."""
    slow = [of_pass() > HIGHEST_OF_PASS, of_parse() > HIGHEST_OF_PARSE]
    return int(any(slow))


if __name__ == "__main__":
    sys.exit(main())
