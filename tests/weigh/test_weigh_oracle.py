"""Every function of a likelihood ratio or a p value against 50-digit tables, and the tables against their source.

The tables are written by ``python tests/weigh/make_oracle_tables.py``.
"""

from __future__ import annotations

import csv
import random
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

import mpmath as mp
import numpy as np
import pytest
from weigh.make_oracle_tables import SOURCES

from gatecheck import weigh
from gatecheck.weigh import bounds, default_prior, proportions

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

TABLES = Path(__file__).parent / "tables"

# Bound on the error over max(1, |result|).
BOUNDS = {
    "log_lr_t": 3e-13,
    "log_lr_z": 1e-15,
    "log_lr_chi2": 1e-13,
    "log_lr_f": 5e-13,
    "log_bf_t": 1e-13,
    "log_bf_r": 1e-13,
    "log_bf_proportions": 1e-12,
    "log_lr_folded_bound": 1e-15,
    "log_p_t": 2e-15,
    "log_p_z": 1e-15,
    "log_p_chi2": 1e-13,
    # The incomplete beta function of the oldest library supported; 1e-14 with newer ones.
    "log_p_f": 1e-10,
}
# Where a function lives, unless the package itself offers it.
MODULES = {
    "log_bf_t": default_prior,
    "log_bf_r": default_prior,
    "log_bf_proportions": proportions,
    "log_lr_folded_bound": bounds,
}


def read(name: str) -> tuple[tuple[str, ...], list[list[float]], list[str]]:
    with (TABLES / f"{name}.csv").open(newline="") as file:
        header, *rows = csv.reader(file)
    return tuple(header[:-1]), [[float(x) for x in row[:-1]] for row in rows], [row[-1] for row in rows]


def evaluate(name: str, columns: tuple[str, ...], rows: list[list[float]]) -> NDArray[np.float64]:
    function: Callable[..., NDArray[np.float64]] = getattr(MODULES.get(name, weigh), name)
    arrays = dict(zip(columns, np.array(rows).T, strict=True))
    if "one_sided" in arrays:
        function = partial(function, one_sided=arrays.pop("one_sided") > 0)
    return function(*arrays.values())


def relative_errors(results: NDArray[np.float64], expected: list[str]) -> NDArray[np.float64]:
    with mp.workdps(30):
        return np.array([
            float(abs(mp.mpf(float(result)) - mp.mpf(text)) / max(1, abs(mp.mpf(text))))
            for result, text in zip(results, expected, strict=True)
        ])


@pytest.mark.parametrize("name", sorted(SOURCES))
def test_agrees_with_every_row_of_the_table(name: str) -> None:
    columns, rows, expected = read(name)
    results = evaluate(name, columns, rows)
    errors = relative_errors(results, expected)
    assert np.isfinite(results).all(), [rows[i] for i in np.flatnonzero(~np.isfinite(results))]
    worst = int(np.argmax(errors))
    assert errors[worst] <= BOUNDS[name], (rows[worst], results[worst], expected[worst])


def test_t_is_better_still_where_the_alternative_is_near_the_statistic() -> None:
    """Far from it parts of the size of ncp^2/2 cancel, and the last digits of the arguments tell."""
    columns, rows, expected = read("log_lr_t")
    near = [i for i, (t, _, ncp, _) in enumerate(rows) if abs(ncp) <= abs(t) + 3]
    errors = relative_errors(evaluate("log_lr_t", columns, [rows[i] for i in near]), [expected[i] for i in near])
    assert len(near) > 1000
    assert errors.max() <= 3e-14


@pytest.mark.parametrize(("name", "per_df"), [("log_lr_t", False), ("log_lr_chi2", False), ("log_lr_f", True)])
def test_tiny_observed_effects_keep_relative_digits(name: str, *, per_df: bool) -> None:
    """Where the logarithm itself is tiny, its own digits are right, not only those of 1."""
    columns, rows, expected = read(name)
    small = [
        i
        for i, row in enumerate(rows)
        if 0 < row[0] <= 1e-6 and row[columns.index("ncp")] == row[0] * (row[1] if per_df else 1) and row[-1] != 1.0
    ]
    results = evaluate(name, columns, [rows[i] for i in small])
    truth = np.array([float(expected[i]) for i in small])
    assert len(small) >= 10
    np.testing.assert_allclose(results, truth, rtol=1e-13, atol=0)


def test_the_tables_are_those_that_the_oracle_gives() -> None:
    """A new sample each run; the seed is in the output."""
    seed = random.SystemRandom().randrange(10**9)
    print(f"seed {seed}")  # noqa: T201  # pytest shows it where the test fails
    choice = random.Random(seed)  # noqa: S311  # a sample, not a secret
    for name, (function, _, _) in SOURCES.items():
        _, rows, expected = read(name)
        for i in choice.sample(range(len(rows)), 4):
            again = function(*rows[i])
            with mp.workdps(50):
                gap = abs(again - mp.mpf(expected[i])) / max(mp.mpf("1e-300"), abs(again))
            assert gap < mp.mpf("1e-20"), (seed, name, rows[i])


@pytest.mark.parametrize("name", sorted(SOURCES))
def test_the_grid_of_the_table_is_the_grid_of_the_script(name: str) -> None:
    _, rows, _ = read(name)
    assert rows == [[float(x) for x in row] for row in SOURCES[name][1]()]
    assert len(rows) >= 40
