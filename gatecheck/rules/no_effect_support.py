"""Rule `no-effect-support`: a claim of equivalence or non-inferiority has its margin, and an interval inside it.

A claim with `aim: equivalence` has its `estimate.margin`, set before the data, and the interval of level 1 - 2
`alpha` (90 %, where `alpha` is 0.05 as it is unless the policy says otherwise) lies inside it: two one-sided
tests (Schuirmann 1987, from memory). One of `noninferiority` lies above the lower end of the margin, or below its
upper end where `tail` is `less`. "No difference" on p > 0.05 alone falls short, with the interval in the message.
The interval comes from the standard error, or from the one reported; ratios are set against their margin on the
log scale, and a difference of two proportions that gives only the `events` and `n` of both groups is tested by
score (Miettinen and Nurminen 1985, from memory).

Beside it stand, deciding nothing, the Bayes factor for no effect under the default prior of the test and the
power that the tests had if there is no effect; where that is below 80 %, the remedy tells the sample that would
reach it. `gatecheck explain` tells both for a claim that stands, too.

> The 90 % interval -0.413 to 0.653 (p = 0.286 by the one-sided tests) leaves the margin -0.3 to 0.3; the policy
> wants it inside for a claim of equivalence. The data fit no effect 3.06 times better than an effect under the
> default prior of its test; if there is no effect, the tests had a power below 0.001 % to show it. As it
> stands, call it inconclusive: neither a difference nor its absence was shown; 191 plots per group would give a
> power of 80 %.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import KW_ONLY
from typing import Annotated

import numpy as np

from gatecheck.columns import Booleans, Floats
from gatecheck.compare.margins import (
    USUAL_POWER,
    Margins,
    margins,
    n_for_power,
    power_if_no_effect,
    tests_no_effect,
)
from gatecheck.model.marks import Range
from gatecheck.model.shown import decimal, percent
from gatecheck.model.struct import struct
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Judgement, Rule, Said, Table, setting
from gatecheck.rules.words import as_reported, describe_result, plural, tell_number

_Alpha = Annotated[float, Range(0, 0.5, low_open=True, high_open=True)]

_PAIR = 2
_MANY = 1e6
_LARGEST_TOLD = 1e8
_LARGEST_LOG_TOLD = 60.0
_NEARLY_CERTAIN = 1 - 1e-9


@struct
class Settings(RuleSettings):
    """How a claim of no effect is tested."""

    _: KW_ONLY
    alpha: Annotated[_Alpha, "level of each one-sided test; the interval has level 1 - 2 alpha"] = 0.05


@struct
class _Support:
    """The margins, and of the rows that fall short the power that they had and the units that would do."""

    margins: Margins
    power: Floats
    would_do: Floats


def judge(table: Table, settings: Sequence[Settings | None]) -> Judgement:
    """Short where there is no margin or the interval leaves it, undecided where there is no interval."""
    estimate, alpha = table.columns.estimate, setting(settings, "alpha")
    found = margins(table.columns, alpha)
    above, below = found.low > found.wanted_low, found.high < found.wanted_high
    # A side that is left open asks nothing, not even for an end of the interval.
    inside = (above | np.isneginf(found.wanted_low)) & (below | np.isposinf(found.wanted_high))
    margin = np.isfinite(estimate.margin_low) & np.isfinite(estimate.margin_high)
    known = np.isfinite(found.low) | np.isfinite(found.high)
    short = ~margin | ~inside
    support = _support(table, found, short & margin & known & table.columns.no_effect_aim)
    return Judgement(short, _p(found), alpha, would_do=support.would_do, known=~margin | known, facts=support)


def _p(found: Margins) -> Floats:
    """The greater of the p-values that the aim needs."""
    low = np.where(np.isneginf(found.wanted_low), -np.inf, found.p_low)
    high = np.where(np.isposinf(found.wanted_high), -np.inf, found.p_high)
    return np.maximum(low, high)


def _support(table: Table, found: Margins, short: Booleans) -> _Support:
    power, would_do = np.full_like(found.low, np.nan), np.full_like(found.low, np.nan)
    rows = np.flatnonzero(short)
    power[rows] = power_if_no_effect(found, rows)
    wanting = np.flatnonzero(power < USUAL_POWER)
    would_do[wanting] = n_for_power(found, _n_or_df(table, found), _equal_groups(table), wanting)
    return _Support(found, power, would_do)


def _n_or_df(table: Table, found: Margins) -> Floats:
    """The number of units; where it is not told one that stands for it, since only the ratio will be told."""
    n = table.evidence.design.total
    return np.where(np.isfinite(n), n, np.where(np.isfinite(found.df), found.df + 1, _MANY))


def _equal_groups(table: Table) -> Floats:
    sample, design = table.columns.sample, table.evidence.design
    return np.where((sample.groups == _PAIR) & (sample.n1 == sample.n2) & ~design.one_sample, 2.0, 1.0)


def explain(table: Table, row: int, settings: Settings, judgement: Judgement) -> Said:
    """Where the interval lies against the margin, what supports no effect, and the wording that is left."""
    record = table.record(row)
    estimate = record.estimate
    if estimate is None or estimate.margin is None:
        return Said(
            f"The claim is one of {record.aim} and gives no margin ({_result(table, row, judgement)}); a p-value "
            "above any level does not show that there is no effect, and the policy wants an interval inside a "
            "margin.",
            "Give estimate.margin as it was set before the data, or say that no difference was found.",
        )
    margin = f"{tell_number(estimate.margin[0])} to {tell_number(estimate.margin[1])}"
    level = f"{100 * (1 - 2 * settings.alpha):.4g} % interval"
    if judgement.known is not None and not judgement.known[row]:
        return Said(
            f"The {level} that is set against the margin {margin} cannot be told ({describe_result(record)}).",
            "Give estimate.standard_error, or estimate.interval at that level; for a difference of two proportions "
            "the events and n of both groups do.",
        )
    support: _Support = judgement.facts
    found = support.margins
    low, high = (as_reported(table.columns, row, each[row]) for each in (found.low, found.high))
    ends = f"{low} to {high}"
    p = judgement.observed[row] if judgement.observed is not None else np.nan
    tests = f" ({_tell_p(float(p), settings.alpha)} by the one-sided tests)" if np.isfinite(p) else ""
    where = "leaves" if judgement.short[row] else "lies within"
    return Said(
        f"The {level} {ends}{tests} {where} the margin {margin}; the policy wants it inside for a claim of "
        f"{record.aim}.{_tell_support(table, row, support, short=bool(judgement.short[row]))}",
        _tell_remedy(table, row, support),
    )


def _result(table: Table, row: int, judgement: Judgement) -> str:
    """The result, with the interval that its standard error gives where it reports none."""
    record, found = table.record(row), judgement.facts.margins
    reported = record.estimate is not None and record.estimate.interval is not None
    if reported or not np.isfinite(found.low[row] + found.high[row]):
        return describe_result(record)
    low, high = (as_reported(table.columns, row, ends[row]) for ends in (found.low, found.high))
    level = f"{100 * (1 - 2 * found.alpha[row]):.4g} %"
    return f"{describe_result(record)}; {level} interval by its standard error {low} to {high}"


def _tell_support(table: Table, row: int, support: _Support, *, short: bool) -> str:
    """One more sentence: the Bayes factor, and the power if there is no effect, as far as they can be told."""
    parts = [_tell_factor(table, row, support.margins)]
    power = support.power[row] if short else power_if_no_effect(support.margins, np.array([row]))[0]
    if np.isfinite(power):
        parts.append(f"if there is no effect, the tests had {_tell_power(float(power))} to show it")
    told = "; ".join(part for part in parts if part)
    return f" {told[0].upper()}{told[1:]}." if told else ""


def _tell_p(p: float, alpha: float) -> str:
    told = decimal(p, alpha)
    return f"p {told}" if told.startswith("<") else f"p = {told}"


def _tell_power(power: float) -> str:
    # It may round to 1 and is never quite that.
    told = percent(min(power, _NEARLY_CERTAIN), USUAL_POWER)
    bound = {"<": "below", ">": "above"}.get(told[0])
    return f"a power {bound} {told[1:]}" if bound else f"a power of {told}"


def _tell_factor(table: Table, row: int, found: Margins) -> str:
    """The Bayes factor of the default prior, where it is that of this result against no effect."""
    evidence = table.evidence
    log_bf = float(evidence.under["default-prior"][row])
    if not np.isfinite(log_bf) or evidence.on_all[row] or not tests_no_effect(table.columns, found, row):
        return ""
    times = f"{math.exp(abs(log_bf)):.3g}" if abs(log_bf) < _LARGEST_LOG_TOLD else "more than 1e+26"
    if times == "1":
        return "the data fit no effect and an effect under the default prior of its test about equally"
    if log_bf > 0:
        return f"the data fit an effect under the default prior of its test {times} times better than no effect"
    return f"the data fit no effect {times} times better than an effect under the default prior of its test"


def _tell_remedy(table: Table, row: int, support: _Support) -> str:
    """The wording that is left, and the sample with which the claim could be supported."""
    found = support.margins
    if found.low[row] >= found.wanted_high[row] or found.high[row] <= found.wanted_low[row]:
        return "As it stands, do not claim it: the whole interval lies beyond the margin."
    wording = "As it stands, call it inconclusive: neither a difference nor its absence was shown"
    n = support.would_do[row]
    if not n < _LARGEST_TOLD:
        return f"{wording}."
    return f"{wording}; {_tell_sample(table, row, n, found)} would give a power of {percent(USUAL_POWER)}."


def _tell_sample(table: Table, row: int, n: float, found: Margins) -> str:
    total, groups = _n_or_df(table, found)[row], _equal_groups(table)[row]
    if not np.isfinite(table.evidence.design.total[row]):
        return f"a sample {decimal(n * groups / total)} times as large"
    sample = table.record(row).sample
    each = " per group" if groups > 1 else ""
    return f"{n:,.0f} {plural(sample.unit if sample else None)}{each}"


RULE = Rule(
    name="no-effect-support",
    asks="a claim of equivalence or non-inferiority has its margin, and an interval inside it",
    settings=Settings,
    judge=judge,
    explain=explain,
    concerns=lambda table, _: table.columns.claims & table.columns.no_effect_aim,
)
