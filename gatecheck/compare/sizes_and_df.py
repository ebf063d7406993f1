"""Numbers of units against each other, against degrees of freedom, and against what the experimental unit allows.

The df of a t of two samples are n - 2, of one sample or of pairs n - 1, of a correlation n - 2, and those of a
one-way analysis of variance k - 1 and n - k (textbook forms, from memory). Units that were left out with a reason
may be among those counted or not.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping

import numpy as np

from gatecheck.columns import CHI2, NO_STATISTIC, Columns, F, R, T, Z
from gatecheck.compare.agreement import Agreement, Compared, Kind, gathered
from gatecheck.compare.design_names import (
    INDEPENDENT,
    MODELLED,
    ONE_WAY,
    PAIRED,
    PROPORTIONS,
    T_TEST,
    WELCH,
    WITHIN_UNITS,
    says,
    test_name,
)
from gatecheck.model.record import Sample
from gatecheck.model.struct import struct

DF, UNITS, GROUPS = "the df", "n", "the sizes of the groups"
_OTHER_DF = (
    "the df are Welch's or those of a model with covariates",
    "the test is paired",
    "units are missing in one variable",
)
_DF_GROUPS = Kind("df", (DF, GROUPS), _OTHER_DF, (DF, GROUPS))
_DF_N = Kind("df-n", (DF, UNITS), _OTHER_DF, (DF, UNITS))
_MOST_DF = Kind(
    "units",
    (DF, GROUPS, UNITS),
    ("the model has units within units (name it)", "the units counted are groups of those analysed"),
)
_DF_BETWEEN = Kind(
    "df-between",
    (DF, "the number of groups"),
    ("there are more groups than those named", "it is the F of a contrast or of another factor"),
    (DF, "the number of groups"),
)
_SIZES = Kind(
    "sizes",
    (GROUPS, UNITS),
    ("units stand in several groups", "there are more groups than those named"),
    (GROUPS, UNITS),
)
_PAIR = 2
#: Names of an F whose df within are those of all units less its terms, and of one that takes up a part of them.
_ALL_TERMS = r"regress|linear model|\bols\b|\blm\b|ancova|analysis of covariance"
_PART = r"planned|linear|quadratic|comparison|component"


@struct
class _Sizes:
    """The units of one record: in all, in its groups together, and left out with a reason; nan where not told."""

    n: float
    in_groups: float
    groups: tuple[int, ...]
    excluded: float
    clusters: float

    @property
    def counted(self) -> float:
        """The units of the groups, else those in all."""
        return self.in_groups if len(self.groups) > 1 or np.isnan(self.n) else self.n

    @property
    def most(self) -> float:
        """The most independent units that there can be."""
        if np.isfinite(self.clusters):
            return self.clusters
        return float(np.fmax(self.n, self.in_groups))


def sizes_and_df(columns: Columns) -> tuple[Agreement, ...]:
    """Every comparison of numbers of units and df, of all rows; none where no record tells its units."""
    kinds = _SIZES, _DF_GROUPS, _DF_N, _DF_BETWEEN, _MOST_DF
    found: dict[Kind, dict[int, Compared]] = {kind: {} for kind in kinds}
    for row, one in enumerate(columns.found):
        if one.record.sample is None:
            continue
        sizes = _sizes(one.record.sample)
        of_design = _DF_GROUPS if len(sizes.groups) > 1 else _DF_N
        for kind, compare in (
            (_SIZES, _independent_groups),
            (of_design, _df_of_design),
            (_DF_BETWEEN, _df_between),
            (_MOST_DF, _df_of_units),
        ):
            compared = compare(columns, row, sizes)
            if compared is not None:
                found[kind][row] = compared
    return tuple(gathered(kind, rows, len(columns.found)) for kind, rows in found.items() if rows)


def _sizes(sample: Sample) -> _Sizes:
    groups = tuple(group.n for group in sample.groups)
    return _Sizes(
        np.nan if sample.n is None else float(sample.n),
        sum(map(float, groups)) if groups else np.nan,
        groups,
        sum(float(each.n) for each in sample.excluded),
        np.nan if sample.clusters is None else float(sample.clusters),
    )


def _independent_groups(columns: Columns, row: int, sizes: _Sizes) -> Compared | None:
    """The units of independent groups together against those in all."""
    name = test_name(columns, row)
    independent = says(INDEPENDENT, name) or _is_two_sample_t(columns, row, sizes)
    if not independent or says(PAIRED, name) or says(MODELLED, name):
        return None
    if len(sizes.groups) < _PAIR or np.isnan(sizes.n):
        return None
    gap = abs(sizes.n - sizes.in_groups)
    return Compared(gap <= sizes.excluded, sizes.in_groups, sizes.in_groups + sizes.excluded)


def _is_two_sample_t(columns: Columns, row: int, sizes: _Sizes) -> bool:
    """Whether a t, whatever its name, has the df of two independent groups."""
    df, test = columns.test.df1, columns.test
    if test.statistic[row] != T or len(sizes.groups) != _PAIR or not says(T_TEST, test_name(columns, row)):
        return False
    pooled = df.low[row] <= sizes.in_groups - 2 <= df.high[row]
    return bool(pooled or _fractional(df.value[row]))


def _df_of_design(columns: Columns, row: int, sizes: _Sizes) -> Compared | None:
    """The df against those of the design, where name, statistic and groups tell it."""
    name, record, test = test_name(columns, row), columns.found[row].record, columns.test
    if says(MODELLED, name) or record.covariates or np.isfinite(sizes.clusters):
        return None
    if test.statistic[row] == CHI2:
        return _df_of_table(columns, row, name)
    df = test.df2 if test.statistic[row] == F else test.df1
    whole = _DF_OF[int(test.statistic[row])](columns, row, sizes) if np.isfinite(df.value[row]) else ()
    if not whole:
        return None
    fits = any(df.high[row] >= each - sizes.excluded and df.low[row] <= each for each in whole)
    return Compared(fits or _by_welch(columns, row, sizes), min(whole) - sizes.excluded, max(whole))


def _df_of_t(columns: Columns, row: int, sizes: _Sizes) -> tuple[float, ...]:
    """The df that a t has if every unit counted was analysed, by each design that it may be of."""
    name, n = test_name(columns, row), sizes.counted
    known = not name or says(T_TEST, name) or says(PAIRED, name)
    if len(sizes.groups) > _PAIR or np.isnan(n) or not known:
        return ()
    alike = len(set(sizes.groups)) == 1
    if len(sizes.groups) == _PAIR:
        pairs = (sizes.groups[0] - 1.0,) if alike and not says(INDEPENDENT, name) else ()
        return pairs if says(PAIRED, name) else (n - 2, *pairs)
    if says(PAIRED, name) or (sizes.groups and not says(INDEPENDENT, name)):
        return (n - 1,)
    return (n - 2,) if says(INDEPENDENT, name) else ((n - 1, n - 2) if name else ())


def _df_of_r(_: Columns, __: int, sizes: _Sizes) -> tuple[float, ...]:
    """The df of a correlation; its groups are not compared, so that their units may be all or a part."""
    return (sizes.n - 2,) if np.isfinite(sizes.n) else ()


def _df_of_f(columns: Columns, row: int, sizes: _Sizes) -> tuple[float, ...]:
    """The df within groups of a one-way analysis of variance."""
    groups, name, df = len(sizes.groups), test_name(columns, row), columns.test.df2
    one_way = says(ONE_WAY, name) and columns.test.df1.value[row] == groups - 1
    # Df that are written with decimals, as 17.0, are Welch's and whole by chance.
    of_welch = says(WELCH, name) or _fractional(df.value[row]) or 0 < df.high[row] - df.low[row] < 1
    return (sizes.in_groups - groups,) if one_way and not of_welch else ()


def _df_between(columns: Columns, row: int, sizes: _Sizes) -> Compared | None:
    """The df between the groups of a one-way analysis of variance, where those named are plainly all of them."""
    name, test, groups = test_name(columns, row), columns.test, len(sizes.groups)
    one_way = (
        test.statistic[row] == F and says(ONE_WAY, name) and not says(MODELLED, name) and not says(_PART, name)
    )
    if not one_way or groups < _PAIR or columns.found[row].record.covariates or np.isfinite(sizes.clusters):
        return None
    within = sizes.in_groups - groups
    as_counted = test.df2.high[row] >= within - sizes.excluded and test.df2.low[row] <= within
    if not np.isfinite(test.df1.value[row]) or not (as_counted or sizes.n == sizes.in_groups):
        return None
    expected = float(groups - 1)
    return Compared(bool(test.df1.low[row] <= expected <= test.df1.high[row]), expected, expected)


def _df_of_none(_: Columns, __: int, ___: _Sizes) -> tuple[float, ...]:
    return ()


_DF_OF: Mapping[int, Callable[[Columns, int, _Sizes], tuple[float, ...]]] = {
    NO_STATISTIC: _df_of_none,
    T: _df_of_t,
    Z: _df_of_none,
    F: _df_of_f,
    R: _df_of_r,
}


def _df_of_table(columns: Columns, row: int, name: str) -> Compared | None:
    """The df of a table of events by groups."""
    sample, df = columns.found[row].record.sample, columns.test.df1
    groups = () if sample is None else sample.groups
    counted = len(groups) > 1 and all(group.events is not None for group in groups)
    if not counted or not says(PROPORTIONS, name) or not np.isfinite(df.value[row]):
        return None
    expected = float(len(groups) - 1)
    return Compared(bool(df.low[row] <= expected <= df.high[row]), expected, expected)


def _fractional(df: float) -> bool:
    return bool(np.isfinite(df)) and not float(df).is_integer()


def _by_welch(columns: Columns, row: int, sizes: _Sizes) -> bool:
    """Whether the df may be those of Welch's t: by its name, by their fraction, or by the standard deviations."""
    df = columns.test.df1
    if columns.test.statistic[row] != T or len(sizes.groups) != _PAIR:
        return False
    if says(WELCH, test_name(columns, row)) or _fractional(df.value[row]):
        least = min(sizes.groups) - 1 - sizes.excluded
        return bool(df.high[row] >= least and df.low[row] <= sizes.in_groups - 2)
    from gatecheck.compare.group_numbers import has_welch_df  # noqa: PLC0415  # few df are none of the plain ones

    return has_welch_df(columns, row)


def _df_of_units(columns: Columns, row: int, sizes: _Sizes) -> Compared | None:
    """The df against the most that independent units allow; each covariate takes at least one."""
    test, name = columns.test, test_name(columns, row)
    of_f = test.statistic[row] == F
    df = test.df2 if of_f else test.df1
    plain = test.statistic[row] in {T, R, F} and not says(WITHIN_UNITS, name) and np.isfinite(sizes.most)
    if not plain or not np.isfinite(df.value[row]) or _fractional(df.value[row]):
        return None
    covariates, between = columns.found[row].record.covariates or (), max(float(test.df1.value[row]), 1.0)
    most = sizes.most - 1 - (0 if np.isfinite(sizes.clusters) else len(covariates))
    if of_f and says(_ALL_TERMS, name):
        # Each term takes at least a df of its own, and there may be no constant.
        most = min(most, sizes.most - between) if np.isnan(sizes.clusters) else most
    elif of_f and not covariates:
        # Of measurements repeated within units, the df within are those of units times those between.
        most *= between
    return Compared(bool(df.low[row] <= most), 0.0, max(most, 0.0))
