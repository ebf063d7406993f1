"""Records that answer one hypothesis on data of their own, pooled: a claim on them is judged on all of them.

Two records answer one hypothesis where one says that it `replicates` the other, where one has the other's id
among its `aliases`, or where both name the same hypothesis of the same plan. They are pooled only where their
data are their own: `replicates` says so, else the hashes of their inputs must differ. What rests on hashes alone
never makes a claim stronger than its own record, for a file and an extract of it have different hashes too.

An exploratory record is not pooled into a confirmatory claim: that it was picked from many would not show.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterator, Sequence
from itertools import combinations, pairwise

import numpy as np

from gatecheck.columns import Booleans, Columns, Floats
from gatecheck.model.record import Record
from gatecheck.model.struct import struct
from gatecheck.policy import Pooling
from gatecheck.standard_errors import error_df, standard_error
from gatecheck.weigh.default_prior import log_bf_unit_information
from gatecheck.weigh.quantiles import z_from_log_p


@struct
class Together:
    """What stands behind each row, arrays of shape (n,).

    `members` holds the rows that are pooled with a row, itself among them; only itself where it stands alone. On
    the scale of the estimates less no effect, `t` is the pooled estimate over its standard error on `df` degrees of
    freedom (infinite: a z), `log_p` the natural log of its two-sided p, `log_p_spread` that of Cochran's Q, and
    `share` the standard error for one common effect, if all standard errors were known, over the one that was used;
    all nan where a row stands alone. `by_size` is where the sizes of the records weigh them, as their standard
    errors rest on few degrees of freedom. `stated` is where the records say themselves that their data are their
    own. `apart` says why a row is not pooled with another that answers the same hypothesis; empty where there is
    none.
    """

    members: tuple[tuple[int, ...], ...]
    t: Floats
    df: Floats
    log_p: Floats
    log_p_spread: Floats
    share: Floats
    by_size: Booleans
    stated: Booleans
    apart: tuple[str, ...]

    @property
    def pooled(self) -> Booleans:
        """Where a row is pooled with another."""
        return np.isfinite(self.t)


def pool_columns(columns: Columns, settings: Sequence[Pooling]) -> Together:
    """Pool the rows of `columns` that answer one hypothesis, each by the setting in the same position."""
    count = len(columns.found)
    members: list[tuple[int, ...]] = [(row,) for row in range(count)]
    by_size, stated, apart = np.zeros(count, np.bool_), np.zeros(count, np.bool_), [""] * count
    figures, groups = np.full((5, count), np.nan), _groups([one.record for one in columns.found])
    errors = standard_error(columns) if groups else np.empty(0)
    on_df = error_df(columns) if groups else np.empty(0)
    for group in groups:
        for row in group:
            if settings[row] == "apart" or columns.no_effect_aim[row]:
                continue
            rows = tuple(each for each in group if _may_join(columns, each, row))
            if len(rows) == 1:
                continue
            estimates = _estimates(columns, rows, errors, on_df)
            apart[row] = why_apart(columns, rows, errors) or estimates.why_no_weights()
            if not apart[row]:
                members[row], stated[row] = rows, _say_so([columns.found[each].record for each in rows])
                by_size[row], figures[:, row] = estimates.few_df, estimates.pooled(settings[row])
    t, df, log_p, log_p_spread, share = figures
    return Together(tuple(members), t, df, log_p, log_p_spread, share, by_size, stated, tuple(apart))


def log_bf_together(columns: Columns, together: Together, one_sided: Booleans) -> Floats:
    """Natural log of the Bayes factor of the pooled estimates under the prior worth one observation.

    It is taken at the z that has the p of the pooled t. nan where a row stands alone, a sample size is missing, or
    one side is tested (Kass and Wasserman, Journal of the American Statistical Association 90 (1995) 928-934; from
    memory).
    """
    units = np.array([columns.sample.n[list(rows)].sum() for rows in together.members], np.float64)
    z = z_from_log_p(together.log_p, one_sided=False)
    return log_bf_unit_information(np.where(one_sided, np.nan, z**2 / 2), units)


def _groups(records: Sequence[Record]) -> list[list[int]]:
    """The rows that answer one hypothesis, where there are several, in order."""
    group = list(range(len(records)))

    def root(row: int) -> int:
        while group[row] != row:
            row = group[row]
        return row

    for first, second in _links(records):
        low, high = sorted((root(first), root(second)))
        group[high] = low
    rows: dict[int, list[int]] = defaultdict(list)
    for row in range(len(records)):
        rows[root(row)].append(row)
    return [each for each in rows.values() if len(each) > 1]


def rows_by_name(records: Sequence[Record]) -> dict[str, int]:
    """The row of each id, and of each earlier id that no record bears any more."""
    by_alias = {alias: row for row, record in enumerate(records) for alias in record.aliases}
    return by_alias | {record.id: row for row, record in enumerate(records)}


def _links(records: Sequence[Record]) -> Iterator[tuple[int, int]]:
    row_of = rows_by_name(records)
    answers: dict[tuple[str, str], list[int]] = defaultdict(list)
    for row, record in enumerate(records):
        named = (*record.aliases, *([record.replicates] if record.replicates else []))
        yield from ((row_of[each], row) for each in named if each in row_of)
        if record.plan is not None and record.plan.hypothesis is not None:
            answers[record.plan.file, record.plan.hypothesis].append(row)
    for rows in answers.values():
        yield from pairwise(rows)


def _may_join(columns: Columns, other: int, row: int) -> bool:
    if columns.no_effect_aim[other]:
        return False
    record, joining = columns.found[row].record, columns.found[other].record
    return record.status != "confirmatory" or joining.status == "confirmatory"


def why_apart(columns: Columns, rows: tuple[int, ...], errors: Floats) -> str:
    """Why the estimates of `rows`, with their standard errors, are not of one quantity on data of their own.

    Empty where they are.
    """
    records = [columns.found[row].record for row in rows]
    if any(record.look is not None and (record.look.planned or record.look.number) > 1 for record in records):
        return "looks at one study hold the same data"
    if _share_data(records):
        return "they are made from the same data"
    if not _say_so(records) and not all(_hashes(record) for record in records):
        return "they do not say that their data are their own (replicates, or provenance.inputs with their hashes)"
    if len({_comparable(record) for record in records}) > 1:
        return "their estimates have other measures, units, populations or groups"
    if not np.isfinite(columns.estimate.value.value[list(rows)] + errors[list(rows)]).all():
        return "an estimate or its standard error is not given"
    return ""


def _hashes(record: Record) -> set[str]:
    inputs = record.provenance.inputs if record.provenance else ()
    return {each.sha256 for each in inputs if each.sha256 is not None}


def _share_data(records: Sequence[Record]) -> bool:
    return any(_hashes(first) & _hashes(second) for first, second in combinations(records, 2))


def _say_so(records: Sequence[Record]) -> bool:
    """Whether all but the first say that they repeat another of them, which is to say on data of their own."""
    ids = {name for record in records for name in (record.id, *record.aliases)}
    return sum(record.replicates in ids for record in records) >= len(records) - 1


def _comparable(record: Record) -> tuple[object, ...]:
    """What must be equal for two estimates to be of one quantity."""
    estimate, sample = record.estimate, record.sample
    if estimate is None:
        return ()
    names = tuple(group.name for group in sample.groups) if sample else ()
    null = None if estimate.null is None else estimate.null.value
    return (estimate.measure, estimate.unit, estimate.scale, null, record.population, names)


@struct
class _Estimates:
    """The estimates of one hypothesis, arrays of shape (k,), with their standard errors and what these rest on.

    The squared standard errors are inverse to `sizes` where units vary alike; nan where the records do not tell.
    """

    values: Floats
    errors: Floats
    df: Floats
    sizes: Floats

    @property
    def few_df(self) -> bool:
        """Whether the standard errors are too uncertain to choose the weights."""
        from gatecheck.weigh.pooling import ENOUGH_DF  # noqa: PLC0415  # most trees hold each hypothesis once

        return bool((self.df < ENOUGH_DF).any())

    def why_no_weights(self) -> str:
        """Why nothing can weigh the estimates; empty where something can."""
        if np.isfinite(self.sizes).all() or not self.few_df:
            return ""
        return "a standard error rests on few degrees of freedom, and a record gives no sample.n to weigh it by"

    def pooled(self, setting: Pooling) -> tuple[float, float, float, float, float]:
        """The pooled t with its degrees of freedom, and the other figures of `Together` in their order."""
        from gatecheck.weigh import pooling  # noqa: PLC0415  # most trees hold each hypothesis once

        known = pooling.pool_fixed(self.values, self.errors)
        pooled = pooling.pool_estimated(self.values, self.errors, self.df, self.sizes, random=setting == "random")
        t = pooled.estimate[0] / pooled.standard_error[0]
        share = known.standard_error[0] / pooled.standard_error[0]
        log_p = pooling.log_p_pooled(pooled)[0]
        return float(t), float(pooled.df[0]), float(log_p), float(pooled.log_p_q[0]), float(share)


def _estimates(columns: Columns, rows: tuple[int, ...], errors: Floats, df: Floats) -> _Estimates:
    """The estimates of `rows`. Where not all give their numbers of units, degrees of freedom stand for these."""
    at, sample = list(rows), columns.sample
    with np.errstate(all="ignore"):
        of_two = sample.n1 * sample.n2 / (sample.n1 + sample.n2)
    units = np.where(sample.groups == 2, of_two, sample.n)[at]  # noqa: PLR2004
    sizes = units if (units > 0).all() else np.where(np.isfinite(df[at]), df[at], np.nan)
    return _Estimates(columns.estimate.value.value[at], errors[at], df[at], sizes)
