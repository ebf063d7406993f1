"""How many seeded faults `numbers-agree` finds: one figure of a consistent record changed beyond its rounding.

Run `PYTHONPATH=tests python tests/bench/bench_recall.py`. On 2026-12-01 it found 4,442 of the 4,664 that
`seeded_faults` makes (95.2 %). What it misses are limits of ratios that stand beside p alone, limits far from where
their error puts both, and values that whole numbers may have as well.
"""

from __future__ import annotations

from seeded_faults import recall


def main() -> None:
    """Print one line for each kind and figure, and one for all."""
    seeded, found = recall()
    for key, many in seeded.items():
        print(f"{key[0]:22} {key[1]:15} {found[key]:4} of {many:4}")  # noqa: T201  # a script that reports
    share = found.total() / seeded.total()
    print(f"all: {found.total()} of {seeded.total()} ({share:.1%})")  # noqa: T201  # a script that reports


if __name__ == "__main__":
    main()
