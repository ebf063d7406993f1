"""Time repeated looks and families against the library's general routines.

Run ``PYTHONPATH=. python tests/bench/bench_looks.py`` from the root of the repository; it takes some seconds.
Each line says how often ours fits into the other (best of three, one thread), and how far the two are apart.
The multivariate normal integrates by random numbers and is right to some 1e-5 only.
"""

from __future__ import annotations

import time
from functools import partial
from typing import TYPE_CHECKING

import numpy as np
from scipy import stats
from statsmodels.stats.multitest import multipletests

from gatecheck.weigh.families import Procedure, adjusted_p
from gatecheck.weigh.looks import type_one_error

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    Array = NDArray[np.float64]

LIMIT = 2.4


def seconds(function: Callable[[], object]) -> float:
    best = np.inf
    for _ in range(3):
        start = time.perf_counter()
        function()
        best = min(best, time.perf_counter() - start)
    return best


def compare(name: str, ours: Callable[[], Array], other: Callable[[], Array]) -> None:
    apart = float(np.abs(ours() - other()).max())
    report = f"{name:40} ratio {seconds(other) / seconds(ours):9.1f}, apart {apart:.0e}"
    print(report)  # noqa: T201  # a script that reports


def by_multivariate_normal(looks: int) -> Array:
    information, limits = np.arange(1.0, looks + 1), np.full(looks, LIMIT)
    covariance = np.sqrt(np.minimum.outer(information, information) / np.maximum.outer(information, information))
    return np.asarray(1 - stats.multivariate_normal(cov=covariance, seed=1).cdf(limits, lower_limit=-limits))


def by_recursion(looks: int) -> Array:
    return np.asarray(type_one_error(np.full(looks, LIMIT), np.arange(1.0, looks + 1)))


def by_statsmodels(p: Array, name: str) -> Array:
    return np.asarray(multipletests(p, method=name)[1])


def main() -> None:
    """Print one line for each comparison."""
    for looks in (3, 5, 10):
        compare(
            f"{looks} looks, multivariate normal",
            partial(by_recursion, looks),
            partial(by_multivariate_normal, looks),
        )
    p = np.random.default_rng(1).uniform(size=2000) ** 3
    for procedure, name in (
        (Procedure.HOLM, "holm"),
        (Procedure.HOMMEL, "hommel"),
        (Procedure.BENJAMINI_HOCHBERG, "fdr_bh"),
    ):
        compare(
            f"{name}, 2000 members, statsmodels",
            partial(adjusted_p, procedure, p),
            partial(by_statsmodels, p, name),
        )


if __name__ == "__main__":
    main()
