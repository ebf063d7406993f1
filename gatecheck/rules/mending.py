"""What would mend a claim that falls short of an evidence limit, in numbers."""

from __future__ import annotations

import math

import numpy as np

from gatecheck import weigh
from gatecheck.columns import Booleans, Floats
from gatecheck.default_priors import Weighed, log_bf_default
from gatecheck.model.shown import percent
from gatecheck.rules.rule import Judgement, Table
from gatecheck.rules.words import tell_n, tell_wording

#: A study so many times as large is no advice to anybody, and an effect so small is none that was found.
_MOST_TIMES = 100.0
_MOST_PER_GROUP = 1e6


def would_do(table: Table, short: Booleans, target_log_lr: Floats) -> Floats:
    """The least number of units per group at the effect observed, or at the effect planned.

    Computed where a row is `short`; nan elsewhere, where it cannot be told or no larger sample helps, and where a
    row is judged on several records, of which no single size can be told.
    """
    by_default = np.array([name == "default-prior" for name in table.evidence.alternative], np.bool_)
    n = _at_its_own_effect(table, short & ~by_default, target_log_lr)
    if (short & by_default).any():
        n = np.where(by_default, _by_default_prior(table, short & by_default, target_log_lr), n)
    times = n * table.evidence.design.arms / table.evidence.design.total
    return np.where((times > 1) & (times <= _MOST_TIMES), n, np.nan)


def _by_default_prior(table: Table, short: Booleans, target_log_lr: Floats) -> Floats:
    """The number per group at which the effect observed would be so much evidence over the default prior."""
    evidence, design = table.evidence, table.evidence.design
    scales = np.array([each.evidence.scale for each in table.applied], np.float64)
    statistics = evidence.statistics
    weighed = Weighed(statistics.value, statistics.one_sided, design.total, design.two_samples, design.one_sample)

    def serves(n: Floats) -> Booleans:
        times = n * design.arms / design.total
        enough: Booleans = log_bf_default(table.columns, weighed, scales, times) >= target_log_lr
        return enough & short & ~evidence.on_all

    # No fewer than there are: what falls short with all of them does not stand with less.
    return weigh.least_that_serves(np.ceil(design.total / design.arms), serves, _MOST_PER_GROUP)


def _at_its_own_effect(table: Table, short: Booleans, target_log_lr: Floats) -> Floats:
    statistics, design = table.evidence.weighed, table.evidence.design
    by_plan = np.array([name == "design-effect" for name in table.evidence.alternative], np.bool_)
    by_bound = np.array([name == "bound" for name in table.evidence.alternative], np.bool_)
    ncp = np.where(statistics.kind == weigh.Statistic.F, table.evidence.ncp / statistics.df1, table.evidence.ncp)
    rows = np.flatnonzero(short & ~by_bound & ~table.evidence.on_all)
    n = np.full(short.shape, np.nan)
    n[rows] = weigh.n_to_stand(
        statistics.kind[rows],
        np.where(by_plan, ncp, statistics.value)[rows],
        statistics.df1[rows],
        statistics.df2[rows],
        design.total[rows],
        design.arms[rows],
        target_log_lr[rows],
        one_sided=statistics.one_sided[rows],
    )
    return n


def tell_mending(table: Table, row: int, target_log_lr: float, judgement: Judgement) -> str:
    """The sample or the p that would do, and the wording that the evidence allows as it stands."""
    evidence = table.evidence
    wording = tell_wording(evidence.false_positive_risk[row], evidence.log_likelihood_ratio[row])
    if evidence.weighed.one_sided[row] and evidence.weighed.value[row] < 0:
        wording = "as it stands, the effect points away from the direction tested: do not claim it"
    told = _what_would_do(table, row, target_log_lr, judgement)
    return f"{told}; {wording}." if told else f"{wording[0].upper()}{wording[1:]}."


def tell_prior_to_defend(table: Table, row: int, risk: float) -> str:
    """How sure one would have to be beforehand for that risk."""
    needed = float(weigh.prior_needed(table.evidence.log_likelihood_ratio[row], risk))
    return f"one would have to be {percent(needed)} sure beforehand"


def _what_would_do(table: Table, row: int, target_log_lr: float, judgement: Judgement) -> str:
    alternative = table.evidence.alternative[row]
    if alternative == "bound":
        p = math.exp(float(weigh.log_p_for_bound(target_log_lr)))
        return f"A p-value of {_rounded_down(p)} or less would do"
    n = math.nan if judgement.would_do is None else float(judgement.would_do[row])
    if math.isnan(n):
        return ""
    sample = table.record(row).sample
    told = tell_n(table.evidence, row, n, sample.unit if sample else None)
    if alternative == "design-effect":
        return f"Where the planned effect comes out as planned, {told} would do"
    return (
        f"If the effect is really this large, {told} would do (an effect found significant is more often too "
        "large than too small: plan on the smallest effect of interest)"
    )


def _rounded_down(p: float) -> str:
    """Two digits that are no more than `p`, so that what is told to do does."""
    unit = 10.0 ** (math.floor(math.log10(p)) - 1)
    return f"{math.floor(p / unit) * unit:.2g}"
