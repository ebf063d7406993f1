"""The F of a one-way analysis of variance against the summaries of its groups."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from gatecheck.columns import Columns, F, Interval
from gatecheck.compare.agreement import Agreement, on_all
from gatecheck.compare.group_summaries import HARMLESS, SUMMARIES, Group, at, fits, of_groups, unmodelled


def analysis_of_variance(columns: Columns, summarised: Sequence[tuple[Group, ...]]) -> tuple[Agreement, ...]:
    """The F of a one-way analysis of variance, where its df are those of one."""
    test = columns.test
    rows = [
        row
        for row in np.flatnonzero(test.is_one_of(F) & test.value.known).tolist()
        if len(summarised[row]) > 1
        and test.df1.value[row] == len(summarised[row]) - 1
        and test.df2.value[row] == sum(group.n for group in summarised[row]) - len(summarised[row])
    ]
    if not rows:
        return ()
    place = np.array(rows, np.intp)
    expected = [_f_of(summarised[row]) for row in rows]
    by_n = [_f_of(summarised[row], less=0.0) for row in rows]
    ratio, other = (Interval(*np.array(each).T) for each in (expected, by_n))
    found = Agreement(
        "groups-statistic",
        (SUMMARIES, "the statistic"),
        unmodelled(columns, place) & np.isfinite(ratio.high),
        fits(at(test.value, place), ratio, other),
        ratio.low,
        ratio.high,
        HARMLESS,
    )
    return (on_all(found, place, len(summarised)),)


def _f_of(groups: tuple[Group, ...], less: float = 1.0) -> tuple[float, float, float]:
    """F and its ends over the rounding of means and standard deviations.

    The root of the sum of squares between groups is a norm of the means, so rounding moves it at most by the
    norm of the rounding.
    """
    each = of_groups(groups)
    n, mean, sd = each.n, each.mean, each.sd
    centred = mean.value - (n * mean.value).sum() / n.sum()
    between = float(np.sqrt((n * centred**2).sum()))
    moved = float(np.sqrt((n * ((mean.high - mean.low) / 2) ** 2).sum()))
    within = [float(((n - less) * end**2).sum()) / (n.sum() - n.size) for end in (sd.value, sd.low, sd.high)]
    over = n.size - 1

    def ratio(root: float, variance: float) -> float:
        return root**2 / over / variance if variance > 0 else np.inf

    return (
        ratio(between, within[0]),
        ratio(max(0.0, between - moved), within[2]),
        ratio(between + moved, within[1]),
    )
