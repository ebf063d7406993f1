"""Write the reference tables in ``tables/`` from the 50-digit oracle.

Run ``python tests/weigh/make_oracle_tables.py`` from the root of the repository; it takes a few minutes. The grids
are fixed, so that a second run writes the same bytes. They hold ordinary values, corners of the domain, and both
sides of every place where the package changes its method. Numbers stand with all the digits of a double, results
with 25 digits.
"""

from __future__ import annotations

import csv
import itertools
import math
import sys
from collections.abc import Callable, Iterator
from pathlib import Path

import mpmath as mp

sys.path.insert(0, str(Path(__file__).parents[1]))

from weigh import oracle  # found by the path set above

TABLES = Path(__file__).parent / "tables"
JUST_BELOW, JUST_ABOVE = 1 - 1e-9, 1 + 1e-9
Row = tuple[float, ...]


def below(x: float) -> float:
    """Return the double before ``x``."""
    return math.nextafter(x, 0.0)


T_DF_SWITCHES = [12.0, 20.0, 30.0, 60.0, 120.0, 250.0]
T_DF = [
    *(1.0, 1.5, 2.0, 3.7, 5.0, 8.0, 10.0),
    *(df for switch in T_DF_SWITCHES for df in (below(switch), switch)),
    *(40.0, 100.0, 1e3, 1e4, 1e5, 1e6, 1e7),
]
T_SIZE = [1e-6, 1e-3, 0.1, 1.0, 2.1, 5.0, 8.0, 20.0, 40.0, 300.0, 1e4]


def t_rows() -> Iterator[Row]:
    """t, df, ncp, one-sided."""
    for (i, t), (j, df) in itertools.product(enumerate(T_SIZE), enumerate(T_DF)):
        others = [2.83, 0.3, t + 3, 40.0, 0.7 * t, 1e-6]
        one, other = others[(i + j) % 6], others[(i + j + 3) % 6]
        cases = ((t, t, 0), (t, t, 1), (-t, t, 1), (t, one, 0), (t, other, 1), (t, -one, 1))
        yield from ((signed_t, df, ncp, side) for signed_t, ncp, side in cases)
    yield from t_switches()
    yield from [(5.0, 1000.0, -2.83, 0), (5.0, 1000.0, -2.83, 1), (1e4, 1.0, 1e4, 1), (1e-6, 1e7, 1e-6, 0)]
    yield from [(0.0, df, ncp, side) for df in (1.0, 30.0, 1e6) for ncp in (0.0, 2.0, -2.0) for side in (0, 1)]


def t_switches() -> Iterator[Row]:
    """Few degrees of freedom: both sides of the arguments where the method changes."""
    for t, df, side in itertools.product((0.5, 2.0, 9.0), (1.0, 2.5, 7.0, 11.5), (0, 1)):
        for mu in (math.sqrt(200), math.sqrt(0.4 / (df + 1)), 1000.0):
            ncp = mu * math.sqrt(t * t + df) / t
            signs = (1, -1) if side else (1,)
            yield from ((t, df, sign * ncp * shift, side) for shift in (JUST_BELOW, JUST_ABOVE) for sign in signs)


def z_rows() -> Iterator[Row]:
    """z, ncp, one-sided."""
    yield from itertools.product((0.0, 1e-6, 0.5, -1.96, 4.0, -38.0), (0.0, 1e-6, 2.0, -2.8, 38.0), (0, 1))


def chi2_rows() -> Iterator[Row]:
    """x, df, ncp."""
    sizes = [1e-12, 1e-3, 0.5, 1.0, 3.84, 10.0, 30.0, 100.0, 700.0, 1e4, 1e6, 1e8]
    dfs = [0.5, 1.0, 1.7, 2.0, 3.0, 4.0, 5.0, 10.0, 30.0, below(42.0), 42.0, 100.0, 1e3, 1e5, 1e6]
    for x, df in itertools.product(sizes, dfs):
        yield from ((x, df, ncp) for ncp in (x, 1.0, x / 2, 25.0))
    for x, df, shift in itertools.product((0.4, 4.0, 90.0), dfs, (JUST_BELOW, JUST_ABOVE)):
        yield from ((x, df, product / x * shift) for product in (16.0, 1e8))
    yield from [(0.0, 3.0, 2.0), (5.0, 3.0, 0.0), (0.0, 1.0, 0.0)]


def f_rows() -> Iterator[Row]:
    """F, df1, df2, ncp."""
    sizes = [1e-6, 0.1, 0.5, 1.0, 2.0, 4.0, 10.0, 50.0, 1e3, 1e5]
    df1s = [0.6, 1.0, 1.7, 2.0, 3.0, 5.0, 10.0, 50.0, 300.0, 1000.0]
    df2s = [1.0, 2.0, 5.0, 20.0, 57.3, 200.0, 1e4, 1e7]
    for (i, f), (j, df1), df2 in itertools.product(enumerate(sizes), enumerate(df1s), df2s):
        yield (f, df1, df2, df1 * f)
        yield (f, df1, df2, (1.0, df1 * f / 2, 30.0)[(i + j) % 3])
    for f, df1, df2 in itertools.product((0.7, 3.0), (2.0, 10.0, 300.0), (2.0, 57.3, 1e4)):
        a, b = (df1 + df2) / 2, df1 / 2
        modes = [mode * (b + mode) / (a + mode) for mode in (5, 15, 35, 80)]
        for x in (0.05 * b / a, *modes, 200.0, (a + 15) ** 2):
            ncp = 2 * x * (df2 + df1 * f) / (df1 * f)
            yield from ((f, df1, df2, ncp * shift) for shift in (JUST_BELOW, JUST_ABOVE))


def p_z_rows() -> Iterator[Row]:
    """z, one-sided."""
    sizes = (0.0, 1e-9, 1e-3, 0.5, 1.96, 5.0, 12.0, 37.6, 100.0, 1e4)
    yield from ((sign * z, side) for z in sizes for sign in (1, -1) for side in (0, 1))


def p_t_rows() -> Iterator[Row]:
    """t, df, one-sided."""
    sizes = (1e-8, 1e-3, 0.5, 0.7, 1.0, 2.1, 6.0, 9.0, 40.0, 1e4)
    dfs = (1.0, 1.5, 3.7, 12.0, 30.0, 57.3, 500.0, 1e5, 1e7)
    yield from ((t, df, 0) for t in sizes for df in dfs)
    yield from ((sign * t, df, 1) for t in (1e-8, 0.5, 2.1, 40.0) for df in (1.0, 30.0, 1e7) for sign in (1, -1))


def p_chi2_rows() -> Iterator[Row]:
    """x, df."""
    dfs = (0.5, 1.0, 2.0, 3.0, 10.0, 57.3, 1e3, 1e6)
    for df in dfs:
        yield from ((df * ratio, df) for ratio in (1e-3, 0.5, 0.99, 1.01, 1.4, 3.0, 20.0))
        yield from ((df + distance * math.sqrt(2 * df), df) for distance in (2.0, 8.5, 9.5, 40.0))


def p_f_rows() -> Iterator[Row]:
    """F, df1, df2."""
    sizes = (1e-3, 0.5, 0.95, 1.05, 1.5, 2.5, 10.0, 300.0, 1e5)
    yield from itertools.product(sizes, (0.6, 1.0, 3.0, 10.0, 1000.0), (1.0, 5.0, 57.3, 1e3, 1e6))


def bf_t_rows() -> Iterator[Row]:
    """t, df, effective n, scale, one-sided."""
    sizes = (0.0, 1e-3, 0.5, 2.1, 5.0, 8.0, 20.0, 100.0, 1e4)
    units = (2, 3, 6, 13, 20, 50, 200, 1000, 10**5, 5 * 10**6)
    scales = (0.1, 0.3, 0.7071, 1.0, 2.0, 5.0)
    for (i, t), (j, n) in itertools.product(enumerate(sizes), enumerate(units)):
        yield from ((t, n - 1.0, float(n), scales[(i + j + k) % 6], 0) for k in (0, 1, 3))
        yield (t, n - 0.5, n / 4, scales[(i + j + 4) % 6], 0)
    for (i, t), (j, n) in itertools.product(enumerate((0.0, 0.5, 2.1, 6.0, 30.0, 1e4)), enumerate(units[:7])):
        yield from ((sign * t, n - 1.0, n / 4, scales[(i + j) % 6], 1) for sign in (1, -1))


def bf_r_rows() -> Iterator[Row]:
    """r, pairs, kappa, one-sided."""
    sizes = (0.0, 1e-4, -0.1, 0.3, 0.5, -0.7, 0.95, 0.9999)
    for (i, r), (j, n) in itertools.product(
        enumerate(sizes), enumerate((3.0, 4.0, 7.0, 20.0, 57.0, 200.0, 2000.0))
    ):
        yield from ((r, n, kappa, 0) for kappa in ((1.0, 0.1), (1 / 3, 2.0), (0.5, 1.0))[(i + j) % 3])
    one_way = (1e-300, 1e-6, 1e-3, 0.05, 0.3, below(0.5), 0.5, 0.95, 0.9999, below(1.0))
    for (i, r), (j, n) in itertools.product(enumerate(one_way), enumerate((3.0, 4.0, 8.0, 30.0, 300.0, 1e4, 1e7))):
        yield from ((sign * r, n, (1.0, 0.1, 2.0, 1 / 3)[(i + j) % 4], 1) for sign in (1, -1))


def bf_proportions_rows() -> Iterator[Row]:
    """Successes and trials of two groups."""
    trials = (0, 1, 7, 40, 1000, 10**6, 10**9)
    for n, n2 in itertools.product(trials, trials):
        shares = ((0, 0), (1, 1), (0, 1), (0.5, 0.5), (0.1, 0.12), (0.3, 0.3004))
        yield from ((float(round(p * n)), float(n), float(round(q * n2)), float(n2)) for p, q in shares)


def folded_bound_rows() -> Iterator[Row]:
    """Rows of z alone."""
    yield from ((z,) for z in (0.0, 0.5, 1.0, below(1.0), 1 + 1e-12, 1 + 1e-6, 1.001, 1.01, 1.1, -1.2, 1.5, 1.96))
    yield from ((1.2**j,) for j in range(2, 40))


Source = tuple[Callable[..., mp.mpf], Callable[[], Iterator[Row]], tuple[str, ...]]
SOURCES: dict[str, Source] = {
    "log_lr_t": (oracle.log_lr_t, t_rows, ("t", "df", "ncp", "one_sided")),
    "log_lr_z": (oracle.log_lr_z, z_rows, ("z", "ncp", "one_sided")),
    "log_lr_chi2": (oracle.log_lr_chi2, chi2_rows, ("x", "df", "ncp")),
    "log_lr_f": (oracle.log_lr_f, f_rows, ("f", "df1", "df2", "ncp")),
    "log_bf_t": (oracle.log_bf_t, bf_t_rows, ("t", "df", "n_effective", "scale", "one_sided")),
    "log_bf_r": (oracle.log_bf_r, bf_r_rows, ("r", "n", "kappa", "one_sided")),
    "log_bf_proportions": (
        oracle.log_bf_proportions,
        bf_proportions_rows,
        ("successes", "trials", "successes2", "trials2"),
    ),
    "log_lr_folded_bound": (oracle.log_lr_folded_bound, folded_bound_rows, ("z",)),
    "log_p_t": (oracle.log_p_t, p_t_rows, ("t", "df", "one_sided")),
    "log_p_z": (oracle.log_p_z, p_z_rows, ("z", "one_sided")),
    "log_p_chi2": (oracle.log_p_chi2, p_chi2_rows, ("x", "df")),
    "log_p_f": (oracle.log_p_f, p_f_rows, ("f", "df1", "df2")),
}


def main() -> None:
    """Write all tables."""
    TABLES.mkdir(exist_ok=True)
    for name, (function, rows, columns) in SOURCES.items():
        with (TABLES / f"{name}.csv").open("w", newline="") as file:
            writer = csv.writer(file, lineterminator="\n")
            writer.writerow([*columns, "result"])
            for row in rows():
                writer.writerow([*(repr(float(x)) for x in row), mp.nstr(function(*row), 25)])


if __name__ == "__main__":
    main()
