"""Time the likelihood ratios against the library's non-central densities, with the accuracy of both beside it.

Run ``PYTHONPATH=. python tests/bench/bench_weigh.py`` from the root of the repository; it takes two minutes.
Each line gives nanoseconds per record (best of five, one thread) and how often the faster fits into the slower.
The library column times one vectorised call of the non-central density alone; a likelihood ratio needs a central
one besides; a default prior, an average of ratios, stands beside the density at one point. The error is the
worst of a sample against the 50-digit oracle, over max(1, |log LR|). Of t the folded ratio should take at most an
eighth, and the first call, which computes coefficients, at most 30 ms for records that need all of them. The risk
at one prior, the risk at a prior of each record's own and the prior needed should each add at most 10 ns.
"""

from __future__ import annotations

import subprocess
import sys
import time
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

import mpmath as mp
import numpy as np
from scipy import stats

from gatecheck import weigh
from gatecheck.weigh.default_prior import log_bf_t

sys.path.insert(0, str(Path(__file__).parents[1]))

from weigh import oracle  # found by the path set above

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    Array = NDArray[np.float64]

RECORDS = 1_000_000
RUNS = 5
SAMPLE = 150
SCALE = float(np.sqrt(0.5))


def nanoseconds(*functions: Callable[[], object]) -> list[float]:
    """Least processor time of several runs; the functions take turns, for other programs slow all of them."""
    best = [np.inf] * len(functions)
    for _ in range(RUNS):
        for i, function in enumerate(functions):
            start = time.process_time()
            function()
            best[i] = min(best[i], time.process_time() - start)
    return [seconds / RECORDS * 1e9 for seconds in best]


def worst_error(results: Array, truth: list[mp.mpf]) -> float:
    gaps = [abs(mp.mpf(float(r)) - t) / max(1, abs(t)) for r, t in zip(results, truth, strict=True)]
    return float(max(gap if mp.isfinite(gap) else mp.inf for gap in gaps))


def compare(  # one argument a column of the report
    name: str,
    ours: Callable[..., Array],
    library: Callable[..., Array | float],
    central: Callable[..., Array | float],
    truths: tuple[Callable[..., mp.mpf], Callable[..., mp.mpf]],
    columns: tuple[Array, ...],
) -> None:
    sample = tuple(column[:SAMPLE] for column in columns)
    exact, exact_library = ([truth(*map(float, row)) for row in zip(*sample, strict=True)] for truth in truths)
    fast, slow = nanoseconds(lambda: ours(*columns), lambda: library(*columns))
    with np.errstate(all="ignore"):
        by_library = np.asarray(np.log(library(*sample)) - central(*sample))
    report = (
        f"{name:34} ours {fast:7.0f} ns, error {worst_error(ours(*sample), exact):.0e};"
        f"  library {slow:7.0f} ns, error {worst_error(by_library, exact_library):.0e};  ratio {slow / fast:6.1f}"
    )
    print(report)  # noqa: T201  # a script that reports


def first_call() -> str:
    """Milliseconds of the first and of the second call of a process, on three records with different methods."""
    program = """
import time
from gatecheck import weigh
for _ in range(2):
    start = time.perf_counter()
    weigh.observed_t([2.1, 9.0, 2.4], [15, 13, 200], one_sided=False)
    print(f"{(time.perf_counter() - start) * 1000:.1f}", end=" ")
"""
    return subprocess.run([sys.executable, "-c", program], capture_output=True, text=True, check=True).stdout


def added_by_risk(t: Array, df: Array) -> str:
    """Nanoseconds that each figure adds to a likelihood ratio."""
    log_lr, priors = weigh.observed_t(t, df, one_sided=False), np.linspace(0.05, 0.95, t.size)
    times = nanoseconds(
        lambda: weigh.false_positive_risk(log_lr, 0.5),
        lambda: weigh.false_positive_risk(log_lr, priors),
        lambda: weigh.prior_needed(log_lr, 0.05),
    )
    return "risk at one prior, at each record's own, prior needed: " + ", ".join(f"{each:.1f}" for each in times)


def at_t(t: float, df: float, *, one_sided: bool) -> mp.mpf:
    return oracle.log_lr_t(t, df, t, one_sided)


def at_eight(t: float, df: float) -> mp.mpf:
    return oracle.log_lr_t(t, df, float(np.sqrt(8)), one_sided=True)


def of_chi2(x: float, df: float) -> mp.mpf:
    return oracle.log_lr_chi2(x, df, x)


def of_f(f: float, df1: float, df2: float) -> mp.mpf:
    return oracle.log_lr_f(f, df1, df2, df1 * f)


def of_default_prior(t: float, df: float) -> mp.mpf:
    return oracle.log_bf_t(t, df, (df + 2) / 4, SCALE, one_sided=False)


def main() -> None:
    """Print one line for each kind of statistic."""
    print(f"t, three records: first and second call {first_call()}ms")  # noqa: T201
    rng = np.random.default_rng(1)
    t, df = rng.uniform(0, 8, RECORDS), rng.uniform(4, 500, RECORDS)
    print(f"{added_by_risk(t, df)} ns")  # noqa: T201
    df1 = rng.integers(2, 7, RECORDS).astype(np.float64)
    chi2, f = rng.uniform(0, 40, RECORDS), rng.uniform(0, 8, RECORDS)
    # The library raises for the whole array where t and ncp differ in sign: it gives the one direction only.
    compare(
        "t, folded, observed effect",
        lambda t, df: weigh.observed_t(t, df, one_sided=False),
        lambda t, df: stats.nct.pdf(t, df, t),
        stats.t.logpdf,
        (partial(at_t, one_sided=False), partial(at_t, one_sided=True)),
        (t, df),
    )
    far = 5 * t
    compare(
        "t from 0 to 40, folded, observed",
        lambda t, df: weigh.observed_t(t, df, one_sided=False),
        lambda t, df: stats.nct.pdf(t, df, t),
        stats.t.logpdf,
        (partial(at_t, one_sided=False), partial(at_t, one_sided=True)),
        (far, df),
    )
    compare(
        "t, one direction, ncp = sqrt 8",
        lambda t, df: weigh.log_lr_t(t, df, np.sqrt(8), one_sided=True),
        lambda t, df: stats.nct.pdf(t, df, np.sqrt(8)),
        stats.t.logpdf,
        (at_eight, at_eight),
        (t, df),
    )
    compare(
        "t, Cauchy prior (one point nearby)",
        lambda t, df: log_bf_t(t, df, (df + 2) / 4, SCALE),
        lambda t, df: stats.nct.pdf(t, df, t),
        stats.t.logpdf,
        (of_default_prior, partial(at_t, one_sided=True)),
        (t, df),
    )
    compare(
        "chi-squared, df 2..6, observed",
        weigh.observed_chi2,
        lambda x, df: stats.ncx2.pdf(x, df, x),
        stats.chi2.logpdf,
        (of_chi2, of_chi2),
        (chi2, df1),
    )
    compare(
        "F, df1 2..6, df2 4..500, observed",
        weigh.observed_f,
        lambda f, df1, df2: stats.ncf.pdf(f, df1, df2, df1 * f),
        stats.f.logpdf,
        (of_f, of_f),
        (f, df1, df),
    )


if __name__ == "__main__":
    main()
