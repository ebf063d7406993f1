"""An original result against the independent repetitions of it, by published criteria."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence

import numpy as np

from gatecheck.columns import Columns, Floats
from gatecheck.model.struct import struct
from gatecheck.standard_errors import standard_error
from gatecheck.together import rows_by_name, why_apart


@struct
class Replication:
    """One original and its repetitions, which are taken together where there are several.

    The p-values are natural logs: `log_p_direction` is the one-sided one of the repetitions in the direction of
    the original, `log_p_difference` the two-sided one of the difference between the two estimates,
    `log_p_sceptical` the one-sided sceptical one with its golden level (Held, Micheloud and Pawel, Annals of
    Applied Statistics 16 (2022) 706-720; from memory). All are nan where the two cannot be compared, and `apart`
    says why.
    """

    original: int
    repeated_in: tuple[int, ...]
    log_p_direction: float
    log_p_difference: float
    log_p_sceptical: float
    apart: str = ""


def replications(columns: Columns) -> tuple[Replication | None, ...]:
    """The repetition that each row is part of, as the original or as one that repeats it; else `None`."""
    facts: list[Replication | None] = [None] * len(columns.found)
    repeated = _repeated(columns)
    errors = standard_error(columns) if repeated else np.empty(0)
    for original, rows in repeated.items():
        fact = _compared(columns, original, tuple(rows), errors)
        for row in rows:
            facts[row] = fact
        facts[original] = fact
    return tuple(facts)


def _repeated(columns: Columns) -> dict[int, list[int]]:
    """The rows that repeat another, by the row that they repeat."""
    records = [one.record for one in columns.found]
    row_of = rows_by_name(records)
    repeated: dict[int, list[int]] = defaultdict(list)
    for row, record in enumerate(records):
        original = None if record.replicates is None else row_of.get(record.replicates)
        if original is not None and original != row:
            repeated[original].append(row)
    return repeated


def _compared(columns: Columns, original: int, rows: tuple[int, ...], errors: Floats) -> Replication:
    apart = why_apart(columns, (original, *rows), errors)
    if apart:
        return Replication(original, rows, np.nan, np.nan, np.nan, apart)
    from gatecheck.weigh import replication  # noqa: PLC0415  # most trees hold no repetition

    estimate = columns.estimate.value.value
    first, first_error = estimate[original], errors[original]
    again, again_error = _taken_together(estimate[list(rows)], errors[list(rows)])
    return Replication(
        original,
        rows,
        float(replication.log_p_same_direction(first, again, again_error)),
        float(replication.log_p_difference(first, first_error, again, again_error)),
        float(
            replication.log_sceptical_p(
                first / first_error,
                again / again_error,
                (first_error / again_error) ** 2,
                calibration=replication.Calibration.GOLDEN,
                one_sided=True,
            )
        ),
    )


def _taken_together(estimates: Sequence[float] | Floats, errors: Sequence[float] | Floats) -> tuple[float, float]:
    from gatecheck.weigh.pooling import pool_fixed  # noqa: PLC0415  # most trees hold no repetition

    pooled = pool_fixed(estimates, errors)
    return float(pooled.estimate[0]), float(pooled.standard_error[0])
