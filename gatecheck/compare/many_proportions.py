"""Chi-squared of the events in three groups or more against their counts.

The forms are those in use: the power divergences, of which Pearson's and the likelihood ratio are two (Cressie and
Read, Journal of the Royal Statistical Society B 46 (1984) 440-464; from memory), Pearson's with N - 1 for N, the
likelihood ratio with Williams' correction, and Wald's of the proportions and of their logits (textbook forms, from
memory). One that is none of these disagrees.
"""

from __future__ import annotations

import math

import numpy as np
from scipy import special

from gatecheck.columns import CHI2, Columns, Floats
from gatecheck.compare.agreement import Agreement, Compared, Kind, gathered
from gatecheck.compare.design_names import MODELLED, PROPORTIONS, says, test_name
from gatecheck.model.record import Record

_KIND = Kind(
    "table-statistic",
    ("the counts of the groups", "the statistic"),
    (
        "the test is another one (stratified, for trend, with covariates)",
        "the counts are of other units than those analysed",
    ),
    ("the counts of the groups", "the statistic"),
)
_FEWEST = 3
_SAME = 1e-6
#: From here on, whole numbers are not all doubles.
_LARGEST = 2.0**53
#: Those of Cressie and Read, of Freeman and Tukey, of the modified likelihood ratio, and of Neyman.
_POWERS = (2 / 3, -1 / 2, -1.0, -2.0)


def many_proportions(columns: Columns) -> tuple[Agreement, ...]:
    """The chi-squared of every row whose three groups or more give their events; none where no record has such."""
    found: dict[int, Compared] = {}
    for row in (columns.test.is_one_of(CHI2) & columns.test.value.known).nonzero()[0].tolist():
        compared = _compare(columns, row, columns.found[row].record)
        if compared is not None:
            found[row] = compared
    return (gathered(_KIND, found, len(columns.found)),) if found else ()


def _compare(columns: Columns, row: int, record: Record) -> Compared | None:
    name, table, value = test_name(columns, row), table_of(record), columns.test.value
    crude = says(PROPORTIONS, name) and not says(MODELLED, name) and not columns.no_effect_aim[row]
    if table is None or not crude or columns.test.df1.value[row] != table.shape[1] - 1:
        return None
    forms = [form for form in forms_of(table) if math.isfinite(form)]
    slack = _SAME * max(forms)
    fits = any(value.low[row] - slack <= form <= value.high[row] + slack for form in forms)
    return Compared(fits, forms[0], forms[1])


def table_of(record: Record) -> Floats | None:
    """Units with and without the event, of shape (2, groups), where both occur and every group has a unit."""
    sample = record.sample
    if sample is None or len(sample.groups) < _FEWEST or sample.clusters is not None or record.covariates:
        return None
    events = [group.events for group in sample.groups if group.events is not None]
    n = np.array([float(group.n) for group in sample.groups])
    if len(events) < len(n) or n.min() <= 0 or n.max() > _LARGEST:
        return None
    with_event = np.array(events, np.float64)
    table = np.stack([with_event, n - with_event])
    return table if table.min() >= 0 and table.sum(axis=1).min() > 0 else None


def forms_of(table: Floats) -> list[float]:
    """Chi-squared by every form; Pearson's and the likelihood ratio stand first."""
    total = float(table.sum())
    expected = np.outer(table.sum(axis=1), table.sum(axis=0)) / total
    pearson = float(((table - expected) ** 2 / expected).sum())
    likelihood_ratio = 2 * float(special.xlogy(table, table / expected).sum())
    shares = total * (1 / table.sum(axis=1)).sum() - 1, total * (1 / table.sum(axis=0)).sum() - 1
    williams = 1 + shares[0] * shares[1] / (6 * total * (table.shape[1] - 1))
    powers = [_power_divergence(table, expected, power) for power in _POWERS]
    return [
        pearson,
        likelihood_ratio,
        pearson * (total - 1) / total,
        likelihood_ratio / williams,
        *powers,
        *_wald(table),
    ]


def _power_divergence(table: Floats, expected: Floats, power: float) -> float:
    with np.errstate(all="ignore"):
        if power == -1:
            return 2 * float(special.xlogy(expected, expected / table).sum())
        return 2 / (power * (power + 1)) * float((table * ((table / expected) ** power - 1)).sum())


def _wald(table: Floats) -> list[float]:
    """The spread of the proportions, and that of their logits, each weighed by the inverse of its variance."""
    n = table.sum(axis=0)
    share = table[0] / n
    with np.errstate(all="ignore"):
        pairs = (share, n / (share * (1 - share))), (np.log(table[0] / table[1]), n * share * (1 - share))
        return [float((weight * (x - (weight * x).sum() / weight.sum()) ** 2).sum()) for x, weight in pairs]
