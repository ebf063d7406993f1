"""Measure the likelihood ratios and Bayes factors against the 50-digit oracle, at random points and all corners.

Run ``PYTHONPATH=. python tests/weigh/measure_accuracy.py`` from the root of the repository; ``--points t=1000``
changes how many random points one function gets, ``--seed`` which. It takes seven minutes of processor time.
The corners are the ends of the domain, statistics of p values far below the least double, and both sides of every
switch between methods. The error is ``|difference| / max(1, |log LR|)``.

Measured on 1 December 2026 (Python 3.11, numpy 2.4.6, scipy 1.17.1, seed 1):

===============  ======  =======  =======  ======  ==========================================================
function         random  corners  worst    target  where
===============  ======  =======  =======  ======  ==========================================================
t                10000   1090     1.3e-14  1e-13   t 9, df 1, ncp 14.23, two-sided
r                1500    108      8.8e-15  1e-13   r -.99597, df 1.0568
z                1500    64       2.2e-16  1e-14   z 3.0638, ncp -3.0638, two-sided
chi-squared      3000    252      8.6e-14  1e-12   x 7.7656, df .90866, ncp 25.987
F                3000    672      9.7e-14  1e-10   F 3.9364, df 937.19 and 2.4773, ncp 3689.1
default-prior t  400     38       1.7e-15  1e-12   t 3.0936, df 47153, effective n 11789, scale .43611
default-prior r  1500    85       6.8e-15  1e-12   r 1e-6, 21 pairs, kappa .1
===============  ======  =======  =======  ======  ==========================================================
"""

from __future__ import annotations

import argparse
import os
import sys
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import ProcessPoolExecutor
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

import mpmath as mp
import numpy as np

from gatecheck import weigh
from gatecheck.weigh import default_prior

sys.path.insert(0, str(Path(__file__).parents[1]))

from weigh import accuracy_points as points  # found by the path set above
from weigh import oracle

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Array = NDArray[np.float64]

Row = tuple[float, ...]


@dataclass(frozen=True)
class Function:
    """One function, what it should give, where to ask, how many random points, and what it may err by."""

    ours: Callable[..., Array]
    truth: Callable[..., mp.mpf]
    corners: Callable[[], Iterator[Row]]
    draw: Callable[[np.random.Generator], Row]
    switches: Callable[[], list[points.Switch]]
    points: int
    target: float


def lr_of_r(r: Array, df: Array) -> Array:
    return weigh.observed_t(weigh.t_from_r(r, df), df, one_sided=False)


def true_lr_of_r(r: float, df: float) -> mp.mpf:
    with mp.workdps(oracle.DIGITS):
        t = mp.mpf(r) * mp.sqrt(mp.mpf(df) / ((1 - mp.mpf(r)) * (1 + mp.mpf(r))))
        return oracle.log_lr_t(t, df, t, one_sided=False)


def lr_of_t(t: Array, df: Array, ncp: Array, side: Array) -> Array:
    return weigh.log_lr_t(t, df, ncp, one_sided=side > 0)


def lr_of_z(z: Array, ncp: Array, side: Array) -> Array:
    return weigh.log_lr_z(z, ncp, one_sided=side > 0)


def default_t(t: Array, df: Array, n: Array, scale: Array, side: Array) -> Array:
    return default_prior.log_bf_t(t, df, n, scale, one_sided=side > 0)


def default_r(r: Array, n: Array, kappa: Array, side: Array) -> Array:
    return default_prior.log_bf_r(r, n, kappa, one_sided=side > 0)


def no_switches() -> list[points.Switch]:
    return []


FUNCTIONS = {
    "t": Function(
        lr_of_t, oracle.log_lr_t, points.corners_t, points.random_t, points.switches_t, points=10_000, target=1e-13
    ),
    "r": Function(lr_of_r, true_lr_of_r, points.corners_r, points.random_r, no_switches, points=1500, target=1e-13),
    "z": Function(
        lr_of_z, oracle.log_lr_z, points.corners_z, points.random_z, no_switches, points=1500, target=1e-14
    ),
    "chi-squared": Function(
        weigh.log_lr_chi2,
        oracle.log_lr_chi2,
        points.corners_chi2,
        points.random_chi2,
        points.switches_chi2,
        points=3000,
        target=1e-12,
    ),
    "F": Function(
        weigh.log_lr_f,
        oracle.log_lr_f,
        points.corners_f,
        points.random_f,
        points.switches_f,
        points=3000,
        target=1e-10,
    ),
    "default-prior t": Function(
        default_t,
        oracle.log_bf_t,
        points.corners_default_t,
        points.random_default_t,
        points.switches_default_t,
        points=400,
        target=1e-12,
    ),
    "default-prior r": Function(
        default_r,
        oracle.log_bf_r,
        points.corners_default_r,
        points.random_default_r,
        points.switches_default_r,
        points=1500,
        target=1e-12,
    ),
}


def random_rows(name: str, count: int, seed: int) -> list[Row]:
    rng = np.random.default_rng(seed)
    return [FUNCTIONS[name].draw(rng) for _ in range(count)]


def true_value(name: str, row: Row) -> mp.mpf:
    return FUNCTIONS[name].truth(*row)


def errors(name: str, rows: Sequence[Row], pool: ProcessPoolExecutor | None = None) -> list[float]:
    """Error at each row, infinite where the result is not a number."""
    results = FUNCTIONS[name].ours(*np.array(rows, dtype=np.float64).T)
    mapped = map if pool is None else pool.map
    truths = mapped(true_value, [name] * len(rows), rows)
    return [error(float(result), truth) for result, truth in zip(results, truths, strict=True)]


def error(result: float, truth: mp.mpf) -> float:
    if not np.isfinite(result):
        return float("inf")
    with mp.workdps(oracle.DIGITS):
        return float(abs(mp.mpf(result) - truth) / max(1, abs(truth)))


def read_counts(pairs: list[str]) -> dict[str, int]:
    given = dict(pair.rsplit("=", 1) for pair in pairs)
    return {name: int(given.get(name, function.points)) for name, function in FUNCTIONS.items()}


def main() -> None:
    """Print one line for each function."""
    parser = argparse.ArgumentParser(description="Measure accuracy against the oracle.")
    parser.add_argument("--points", action="append", default=[], metavar="FUNCTION=NUMBER")
    parser.add_argument("--seed", type=int, default=1)
    arguments = parser.parse_args()
    counts = read_counts(arguments.points)
    print(f"{'function':16} {'random':>7} {'corners':>8} {'worst':>8} {'target':>7}  where")  # noqa: T201  # a script that reports
    with ProcessPoolExecutor(os.cpu_count()) as pool:
        for name, function in FUNCTIONS.items():
            corners = list(function.corners())
            rows = corners + random_rows(name, counts[name], arguments.seed)
            found = errors(name, rows, pool)
            worst = int(np.argmax(found))
            where = ", ".join(f"{value:.17g}" for value in rows[worst])
            numbers = f"{counts[name]:7} {len(corners):8} {found[worst]:8.1e} {function.target:7.0e}"
            print(f"{name:16} {numbers}  {where}", flush=True)  # noqa: T201


if __name__ == "__main__":
    main()
