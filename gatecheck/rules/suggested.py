"""The sentence that the evidence in a result allows, built from its record, for words that it does not allow."""

from __future__ import annotations

import math

import numpy as np

from gatecheck.compare.interactions import LEVEL, Interaction
from gatecheck.compare.names import shown
from gatecheck.compare.wordings import Kind
from gatecheck.model.record import Estimate, Record
from gatecheck.model.shown import percent
from gatecheck.rules.allowed_words import Grounds, has_margin
from gatecheck.rules.words import describe_result, tell_number, tell_sample
from gatecheck.rules.words_not_allowed import difference_told, tell_margin_interval, tell_risk

_NO_EFFECT_WORDS: frozenset[Kind] = frozenset({"no-effect", "safe", "not-worse"})
#: Means and their difference are reported in few digits (common practice, no source).
_SAME_DIFFERENCE = 0.05
_PAIR = 2


def suggest(on: Grounds, row: int, kind: Kind) -> str:
    """What would mend words of that kind: a step where one would do, and a sentence that may be said as it is."""
    step = _step(on, row, kind)
    sentence = _sentence(on, row, kind)
    say = f"say for instance: “{sentence[0].upper()}{sentence[1:]}.”"
    return f"{step}, or {say}" if step else f"{say[0].upper()}{say[1:]}"


def _step(on: Grounds, row: int, kind: Kind) -> str:
    if kind == "safe" and not on.record(row).harm:
        return "Mark a harm outcome with harm: true and give the margin that was set before the data"
    if kind in _NO_EFFECT_WORDS and not (has_margin(on, row) and on.table.columns.no_effect_aim[row]):
        aim = "noninferiority" if kind == "not-worse" else "equivalence"
        return f"Give aim: {aim} with the estimate.margin that was set before the data"
    if kind == "difference" and not on.interactions.tested[row]:
        named = "" if on.record(row).compares else ", with both results named in compares"
        return f"Record a test of the difference{named}"
    if kind == "observed-power":
        return f"Give the interval, or the power for the effect planned{_planned_power(on, row)}"
    if kind == "significant" and on.p[row] <= on.alpha[row]:
        return "Write “statistically significant” where that is meant"
    if kind == "causal" and on.record(row).design is None:
        return "Declare the design"
    if kind == "importance" and not np.isfinite(on.table.columns.estimate.smallest[row]):
        return "Give estimate.smallest_effect"
    return ""


def _planned_power(on: Grounds, row: int) -> str:
    """The power for the effect planned, where a t or a normal test has one."""
    from gatecheck.weigh import Statistic  # noqa: PLC0415  # few claims speak of power
    from gatecheck.weigh.power import power_t  # noqa: PLC0415  # the same

    evidence = on.table.evidence
    kind, ncp = evidence.statistics.kind[row], float(evidence.ncp[row])
    if kind not in {Statistic.T, Statistic.Z} or not math.isfinite(ncp):
        return ""
    df = float(evidence.statistics.df1[row]) if kind == Statistic.T else math.inf
    power = float(power_t(ncp, df, on.alpha[row], one_sided=bool(on.table.columns.test.one_sided[row])))
    return f", {percent(power)}" if math.isfinite(power) else ""


def _sentence(on: Grounds, row: int, kind: Kind) -> str:
    compared = on.interactions.compared[row]
    if kind == "difference" and compared is not None and not compared.apart:
        return _two_effects(on, compared)
    outcome = _outcome(on, row)
    if kind in _NO_EFFECT_WORDS:
        open_still = "neither a difference nor its absence was shown"
        return f"inconclusive: {outcome}; {open_still}" if _includes_no_effect(on, row) else outcome
    if kind == "importance" and np.isfinite(on.table.columns.estimate.smallest[row]):
        estimate = on.record(row).estimate
        smallest = tell_number(estimate.smallest_effect if estimate else None)
        return f"{outcome}: a difference smaller than we care about ({smallest})"
    ending = [tell_risk(on, row)]
    if on.p[row] > on.alpha[row]:
        ending.append("the data do not settle whether there is an effect")
    return "; ".join([outcome, *filter(None, ending)])


def _includes_no_effect(on: Grounds, row: int) -> bool:
    """Whether the interval holds no effect; where there is none, whether p is above alpha."""
    low, high = float(on.margins.low[row]), float(on.margins.high[row])
    if math.isfinite(low) or math.isfinite(high):
        return not (low > 0 or high < 0)
    return not on.p[row] <= on.alpha[row]


def _outcome(on: Grounds, row: int) -> str:
    """What was found, with its interval and the number of units: no word of whether it is real."""
    record = on.record(row)
    estimate = record.estimate
    if estimate is None:
        return f"the result was {describe_result(record)}"
    inside = "; ".join(filter(None, [_interval(on, row, estimate), tell_sample(record.sample)]))
    behind = f" ({inside})" if inside else ""
    compared = _higher(record, estimate)
    if compared:
        return f"{compared}{behind}"
    variable = _variable(record)
    what = f"for {variable}, the {shown(estimate.measure)}" if variable else f"the {shown(estimate.measure)}"
    return f"{what} was {_with_unit(estimate)}{behind}"


def _variable(record: Record) -> str:
    return shown(record.outcome.variable.replace("_", " ")) if record.outcome else ""


def _with_unit(estimate: Estimate) -> str:
    unit = "" if estimate.unit in {None, "", "1"} else f" {estimate.unit}"
    return f"{tell_number(estimate.value)}{unit}"


def _interval(on: Grounds, row: int, estimate: Estimate) -> str:
    interval = estimate.interval
    if interval is None:
        return tell_margin_interval(on, row)
    ends = f"{tell_number(interval.low)} to {tell_number(interval.high)}"
    return f"{100 * interval.level:.4g} % interval {ends}"


def _higher(record: Record, estimate: Estimate) -> str:
    """`earthworm biomass was 4.2 g/m2 higher in drained than in undrained`, where the means say which is higher."""
    groups = record.sample.groups if record.sample else ()
    variable = _variable(record)
    if not variable or len(groups) != _PAIR or estimate.scale == "log" or estimate.value.value <= 0:
        return ""
    first, second = groups
    if first.mean is None or second.mean is None or (estimate.null is not None and estimate.null.value != 0):
        return ""
    value = estimate.value.value
    if abs(first.mean.value - second.mean.value - value) > _SAME_DIFFERENCE * value:
        return ""
    return f"{variable} was {_with_unit(estimate)} higher in {shown(first.name)} than in {shown(second.name)}"


def _two_effects(on: Grounds, fact: Interaction) -> str:
    """Both effects, their difference with its interval, and whether that is settled."""
    first, second = (on.record(row) for row in fact.rows)
    told = [_with_unit(each.estimate) for each in (first, second) if each.estimate]
    measure = shown(first.estimate.measure) if first.estimate else ""
    what, size, low, high = difference_told(fact)
    ends = f"{100 * LEVEL:.4g} % interval {low} to {high}"
    open_still = "" if fact.low > 0 or fact.high < 0 else ", which does not settle whether they differ"
    return (
        f"the {measure} was {told[0]} ({first.id}) and {told[1]} ({second.id}); the {what} of the two is {size} "
        f"({ends}){open_still}"
    )
