"""Where the accuracy of the likelihood ratios is measured: random points, corners of the domain, and switches.

A switch is a place where the package changes its method; it is taken from the package. The corners hold both sides
of each.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np

from gatecheck import weigh
from gatecheck.weigh import chi2, chi_laplace, default_prior, f, gamma, t_few, t_ordinary

Row = tuple[float, ...]
Rows = Iterator[Row]

BELOW, ABOVE = 1 - 1e-9, 1 + 1e-9
LOG_P = (math.log(0.05), math.log(1e-15), math.log(1e-300), -3000.0)
# The oracle's 50 digits suffice for the squares of statistics up to here.
LARGEST_STATISTIC = 1e8
FEW_DF = (1.0, 2.5, 7.0, 11.5)
T_SWITCHES = [least for least, _ in reversed(chi_laplace.ORDERS)]


@dataclass(frozen=True)
class Switch:
    """A quantity, nan where it does not decide, and the value at which the method changes."""

    name: str
    at: float
    quantity: Callable[..., float]


def sides(value: float) -> tuple[float, float]:
    """Return numbers just below and above."""
    return value * BELOW, value * ABOVE


def df_of_t() -> list[float]:
    return [1.0, 1.5, 5.0, 1e3 + 0.5, 1e7, *(df for least in T_SWITCHES for df in before_and_at(least))]


def before_and_at(value: float) -> tuple[float, float]:
    return math.nextafter(value, 0), value


def corners_t() -> Rows:
    """t, df, ncp, one-sided."""
    sizes = [1e-6, 1e-3, 1.0, *sides(t_ordinary.LARGEST), 40.0, 1e4]
    for (i, size), (j, df), side in itertools.product(enumerate(sizes), enumerate(df_of_t()), (0, 1)):
        other = (2.83, *sides(t_ordinary.LARGEST), size + 3)[(i + j) % 4]
        yield from ((size, df, ncp, side) for ncp in (size, -size, other))
    for size, df, side in itertools.product((0.5, 2.0, 9.0), FEW_DF, (0, 1)):
        for mu in (math.sqrt(2 * t_few.LARGE_X), math.sqrt(4 * t_few.SMALL_AX / (df + 1)), chi_laplace.LARGE_MU):
            ncp = mu * math.sqrt(size * size + df) / size
            yield from ((size, df, sign * edge, side) for edge in sides(ncp) for sign in (1, -1))
    for df, log_p in itertools.product(df_of_t(), LOG_P):
        statistic = float(weigh.t_from_log_p(log_p, df, one_sided=False))
        if statistic < LARGEST_STATISTIC:
            yield from ((statistic, df, statistic, side) for side in (0, 1))


def random_t(rng: np.random.Generator) -> Row:
    size = float(10 ** rng.uniform(-6, 4) if rng.random() < 0.5 else rng.uniform(0, 16))
    ncp = (size, -size, rng.uniform(-8, 8), size + rng.uniform(-3, 3))[int(rng.integers(4))]
    return size, float(10 ** rng.uniform(0, 7)), float(ncp), float(rng.integers(2))


def few(df: float, value: float) -> float:
    return value if df < chi_laplace.LEAST_EXPANDED else math.nan


def mu_of(size: float, df: float, ncp: float) -> float:
    return abs(ncp * size) / math.sqrt(size * size + df)


def switches_t() -> list[Switch]:
    def x_of(size: float, df: float, ncp: float) -> float:
        return few(df, mu_of(size, df, ncp) ** 2 / 2)

    largest = t_ordinary.LARGEST
    return [
        *(Switch("df", least, lambda _, df, *__: df) for least in T_SWITCHES),
        Switch("|t|", largest, lambda t_, _, ncp, __: abs(t_) if abs(ncp) <= largest else math.nan),
        Switch("|ncp|", largest, lambda t_, _, ncp, __: abs(ncp) if abs(t_) <= largest else math.nan),
        Switch("x, few df", t_few.LARGE_X, lambda t_, df, ncp, _: x_of(t_, df, ncp)),
        Switch("a x, few df", t_few.SMALL_AX, lambda t_, df, ncp, _: (df + 1) / 2 * x_of(t_, df, ncp)),
        Switch(
            "mu, few df, one-sided",
            chi_laplace.LARGE_MU,
            lambda t_, df, ncp, side: few(df, mu_of(t_, df, ncp)) if side else math.nan,
        ),
    ]


def corners_r() -> Rows:
    """r, df."""
    yield from itertools.product((1e-6, -0.1, 0.5, -0.9, 0.9999, 1 - 1e-9), (*df_of_t(), 100.0))


def random_r(rng: np.random.Generator) -> Row:
    return float(np.tanh(rng.uniform(-4, 4))), float(10 ** rng.uniform(0, 5))


def corners_z() -> Rows:
    """z, ncp, one-sided."""
    by_p = [float(weigh.z_from_log_p(log_p, one_sided=False)) for log_p in LOG_P]
    for z, side in itertools.product((0.0, 1e-6, 1.0, 1e4, *by_p), (0, 1)):
        yield from ((z, ncp, side) for ncp in (z, -z, 2.83, 1e-6))


def random_z(rng: np.random.Generator) -> Row:
    z = float(10 ** rng.uniform(-6, 4) if rng.random() < 0.5 else rng.uniform(0, 16))
    return z, float((z, -z, rng.uniform(-8, 8))[int(rng.integers(3))]), float(rng.integers(2))


def corners_chi2() -> Rows:
    """x, df, ncp."""
    dfs = [0.5, 1.0, 2.0, 3.7, 10.0, *before_and_at(2 * chi2.LEAST_ORDER + 2), 300.0, 1000.0]
    for df in dfs:
        by_p = [float(weigh.chi2_from_log_p(log_p, df)) for log_p in LOG_P]
        for x in (1e-12, 0.5, 4.0, 90.0, 1e4, 1e6, *by_p):
            yield from ((x, df, ncp) for ncp in (x, 8.0))
        for x, product in itertools.product((4.0, 90.0), (4 * chi2.SMALL_W, chi2.LARGE_Z**2)):
            yield from ((x, df, ncp) for ncp in sides(product / x))


def random_chi2(rng: np.random.Generator) -> Row:
    x = float(10 ** rng.uniform(-3, 4))
    ncp = (x, x * rng.uniform(0.5, 1.5), rng.uniform(0, 30))[int(rng.integers(3))]
    return x, float(10 ** rng.uniform(-0.3, 3)), float(ncp)


def switches_chi2() -> list[Switch]:
    return [
        Switch("w", chi2.SMALL_W, lambda x, _, ncp: ncp * x / 4),
        Switch("v", chi2.LEAST_ORDER, lambda x, df, ncp: df / 2 - 1 if ncp * x / 4 >= chi2.SMALL_W else math.nan),
        Switch(
            "z", chi2.LARGE_Z, lambda x, df, ncp: math.sqrt(ncp * x) if df / 2 - 1 < chi2.LEAST_ORDER else math.nan
        ),
    ]


def corners_f() -> Rows:
    """F, df1, df2, ncp."""
    df2s = (1.0, 5.0, 57.3, 1e4, 1e7)
    for df1, df2 in itertools.product((1.0, math.nextafter(1.0, 2), 2.0, 10.0, 300.0, 1000.0), df2s):
        by_p = [float(weigh.f_from_log_p(log_p, df1, df2)) for log_p in LOG_P]
        for size in (1e-6, 0.5, 2.0, 50.0, 1e5, *(size for size in by_p if size < LARGEST_STATISTIC)):
            yield from ((size, df1, df2, ncp) for ncp in (df1 * size, 8.0))
    for size, df1, df2 in itertools.product((0.7, 3.0), (2.0, 10.0, 300.0), (2.0, 57.3, 1e4)):
        a, b = (df1 + df2) / 2, df1 / 2
        modes = [mode * (b + mode) / (a + mode) for mode in f.SERIES_MODES[1:]]
        for x in (f.SMALL_RATIO * b / a, *modes, (a + f.LARGE_MARGIN) ** 2):
            yield from ((size, df1, df2, ncp) for ncp in sides(2 * x * (df2 + df1 * size) / (df1 * size)))


def random_f(rng: np.random.Generator) -> Row:
    size, df1 = float(10 ** rng.uniform(-2, 2)), float(10 ** rng.uniform(0, 3))
    ncp = df1 * size if rng.random() < 0.5 else rng.uniform(0, 30)
    return size, df1, float(10 ** rng.uniform(0, 7)), float(ncp)


def switches_f() -> list[Switch]:
    def x_of(size: float, df1: float, df2: float, ncp: float) -> float:
        return ncp / 2 * df1 * size / (df2 + df1 * size)

    def mode_of(size: float, df1: float, df2: float, ncp: float) -> float:
        a, b, x = (df1 + df2) / 2, df1 / 2, x_of(size, df1, df2, ncp)
        excess = (x - b) / 2
        return excess + math.hypot(excess, math.sqrt(a * x))

    def margin(*row: float) -> float:
        return x_of(*row) / ((row[1] + row[2]) / 2 + f.LARGE_MARGIN) ** 2

    return [
        Switch("a x / b", f.SMALL_RATIO, lambda *row: x_of(*row) * (row[1] + row[2]) / row[1]),
        *(Switch("mode", mode, mode_of) for mode in f.SERIES_MODES[1:]),
        Switch("x / (a + margin)^2", 1.0, margin),
    ]


def corners_default_t() -> Rows:
    """t, df, effective n, scale, one-sided."""
    sizes = (0.0, 1e-6, 2.1, 8.0, 40.0, 1e4)
    for (i, size), (j, n) in itertools.product(enumerate(sizes), enumerate((2.0, 20.0, 1e3, 1e7))):
        yield size, n - 1, n, (0.1, 0.7071, 5.0)[(i + j) % 3], 0.0
    for i, df in enumerate(df for least in T_SWITCHES for df in before_and_at(least)):
        yield (-1) ** i * 2.1, df, df / 4, 0.7071, 1.0
    yield from ((sign * 1e4, 30.0, 31.0, 0.7071, 1.0) for sign in (1, -1))


def random_default_t(rng: np.random.Generator) -> Row:
    size = float(rng.uniform(0, 12) if rng.random() < 0.7 else 10 ** rng.uniform(-6, 4))
    n = float(10 ** rng.uniform(0.4, 6))
    side = float(rng.random() < 0.1)
    sign = float(rng.choice((-1, 1))) if side else 1.0
    return sign * size, n - 1, n / float(rng.choice((1, 4))), float(10 ** rng.uniform(-1, 0.7)), side


def switches_default_t() -> list[Switch]:
    def df_of(*row: float) -> float:
        return row[1] if row[-1] else math.nan

    return [Switch("df, one-sided", least, df_of) for least in T_SWITCHES]


def corners_default_r() -> Rows:
    """r, pairs, kappa, one-sided."""
    pairs = [3.0, 20.0, 2000.0, *sides(2 * gamma.LEAST_FOR_SERIES + 1)]
    for r, n in itertools.product((0.0, 1e-6, *sides(default_prior.SMALL_R), -0.9999), pairs):
        yield from ((r, n, kappa, 0.0) for kappa in (default_prior.LEAST_KAPPA, 1.0, default_prior.LARGEST_KAPPA))
    for kappa in (0.5, 1.0):
        for spare in sides(default_prior.LEAST_SPARE):
            yield 0.3, 2 * (spare + 1 / kappa + 0.5) + 1, kappa, 0.0
        for m in sides(gamma.LEAST_FOR_SERIES):
            yield 0.3, 2 * (m - 1 / kappa) + 1, kappa, 0.0
    yield from ((sign * 0.3, 20.0, 1.0, 1.0) for sign in (1, -1))


def random_default_r(rng: np.random.Generator) -> Row:
    side = float(rng.random() < 0.02)
    return float(np.tanh(rng.uniform(-3, 3))), float(10 ** rng.uniform(0.5, 3)), float(rng.uniform(0.1, 2)), side


def switches_default_r() -> list[Switch]:
    least = gamma.LEAST_FOR_SERIES
    return [
        Switch("|r|", default_prior.SMALL_R, lambda r, *_: abs(r)),
        Switch("spare", default_prior.LEAST_SPARE, lambda _, n, kappa, __: (n - 1) / 2 - 1 / kappa - 0.5),
        Switch("m", least, lambda _, n, *__: (n - 1) / 2),
        Switch("m + b", least, lambda _, n, kappa, __: (n - 1) / 2 + 1 / kappa),
    ]
