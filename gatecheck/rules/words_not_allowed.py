"""What is said of words that the evidence in a result does not allow: what the record has, and what decides."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping

import numpy as np

from gatecheck.compare.interactions import LEVEL, Interaction
from gatecheck.compare.wordings import Kind, Wording
from gatecheck.model.shown import decimal, percent
from gatecheck.rules.allowed_words import Grounds, has_margin
from gatecheck.rules.words import tell_number

_LARGEST_LOG_TOLD = 60.0
_TWO_DIGITS_FROM = 0.1
_EVEN = 0.5
_UNDER: Mapping[str, str] = {
    "observed-effect": "against the effect as observed, which errs in its favour",
    "design-effect": "against the effect planned",
    "default-prior": "under the default prior of its test",
    "bound": "by the calibration of its p-value",
}


def tell_ground(on: Grounds, row: int, wording: Wording) -> str:
    """What the record has where words need something, as it goes on behind that; may be empty."""
    ground = _GROUNDS[wording.phrase.kind](on, row)
    return ground if ground.startswith(",") or not ground else f": {ground}"


def tell_missing(kind: Kind) -> str:
    """What would decide words of that kind."""
    return _MISSING[kind]


def _tell_margin(on: Grounds, row: int) -> str:
    aim = on.record(row).aim
    if not on.table.columns.no_effect_aim[row]:
        return f"the record's aim is {aim}"
    if not has_margin(on, row):
        return f"its aim is {aim}, and it gives no margin"
    estimate = on.record(row).estimate
    margin = () if estimate is None or estimate.margin is None else estimate.margin
    given = " to ".join(tell_number(each) for each in margin)
    ends = tell_margin_interval(on, row)
    if not ends:
        return f"the interval that is set against the margin {given} cannot be told"
    where = "lies on the right side of one end alone of" if on.inside_aim[row] else "leaves"
    return f"the {ends} {where} the margin {given}"


def _tell_safe(on: Grounds, row: int) -> str:
    return _tell_margin(on, row) if on.record(row).harm else "the record is not marked as a harm outcome"


def tell_margin_interval(on: Grounds, row: int) -> str:
    """The interval that is set against the margin: `90 % interval -0.41 to 0.65`; empty where there is none."""
    low, high = float(on.margins.low[row]), float(on.margins.high[row])
    if not math.isfinite(low) and not math.isfinite(high):
        return ""
    level = f"{100 * (1 - 2 * on.margins.alpha[row]):.4g} % interval"
    return f"{level} {tell_from_null(on, row, low)} to {tell_from_null(on, row, high)}"


def tell_from_null(on: Grounds, row: int, distance: float) -> str:
    """A distance from no effect, on the scale of the columns, as the estimate of that row is reported."""
    estimate = on.table.columns.estimate
    null = float(estimate.null[row])
    value = null * math.exp(distance) if estimate.log_scale[row] else null + distance
    return f"{value:.3g}" if math.isfinite(value) else "unbounded"


def _tell_interaction(on: Grounds, row: int) -> str:
    fact = on.interactions.compared[row]
    if on.interactions.tested[row]:
        p = _tell_p(on, row) if np.isfinite(on.p[row]) else "no p"
        return f"its own test of that difference has {p}"
    if fact is None:
        return ", and no record gives one"
    if fact.apart:
        return f"the two that it compares cannot be set against each other: {fact.apart}"
    return f", and no record gives one: {tell_difference(on, fact)}"


def tell_difference(on: Grounds, fact: Interaction) -> str:
    """The difference of two records, its standard error, p and interval."""
    first, second = (on.record(row).id for row in fact.rows)
    what, size, low, high = difference_told(fact)
    of_log = " of the logarithm" if fact.log_scale else ""
    told = f"{fact.p:.2f}" if fact.p >= _TWO_DIGITS_FROM else decimal(fact.p, 1 - LEVEL)
    p = f"p {told}" if told.startswith("<") else f"p = {told}"
    return (
        f"the {what} of {first} and {second} is {size}, SE {fact.error:.2g}{of_log}, {p} "
        f"({100 * LEVEL:.4g} % interval {low} to {high})"
    )


def difference_told(fact: Interaction) -> tuple[str, str, str, str]:
    """What it is on the scale reported, `difference` or `ratio`, its size, and the ends of its interval."""
    what, numbers = "difference", [fact.difference, fact.low, fact.high]
    if fact.log_scale:
        what, numbers = "ratio", [math.exp(each) for each in numbers]
    size, low, high = (f"{each:.2g}" if abs(each) < 1 else f"{each:.3g}" for each in numbers)
    return what, size, low, high


def _tell_p(on: Grounds, row: int) -> str:
    told = decimal(float(on.p[row]), float(on.alpha[row]))
    return f"p {told}" if told.startswith("<") else f"p = {told}"


def _tell_p_and_alpha(on: Grounds, row: int) -> str:
    if not np.isfinite(on.p[row]):
        return "the record gives no p"
    return f"{_tell_p(on, row)} at an alpha of {on.alpha[row]:g}"


def _tell_design(on: Grounds, row: int) -> str:
    design = on.record(row).design
    return "the record declares no design" if design is None else f"the record's design is {design}"


def _tell_risk_beside_p(on: Grounds, row: int) -> str:
    p = _tell_p(on, row) if np.isfinite(on.p[row]) else "the record gives no p"
    return ", and ".join(filter(None, [p, tell_risk(on, row)]))


def tell_risk(on: Grounds, row: int) -> str:
    """The false positive risk with the prior and the alternative that it rests on; empty where there is none."""
    evidence, columns = on.table.evidence, on.table.columns
    risk, under = float(evidence.false_positive_risk[row]), evidence.alternative[row]
    own = columns.no_effect_aim[row] or columns.estimation_aim[row] or evidence.on_all[row]
    if own or under is None or not math.isfinite(risk):
        return ""
    prior = float(evidence.prior[row])
    at = "an even prior" if prior == _EVEN else f"a prior of {prior:.4g}"
    return f"with {at} the risk that there is no effect is {percent(risk)} ({_UNDER[under]})"


def _tell_power(on: Grounds, row: int) -> str:
    power = observed_power(on, row)
    if not math.isfinite(power):
        return "give the interval, or the power for the effect planned"
    return f"{_tell_p(on, row)} gives {percent(power)}, whatever the study"


def observed_power(on: Grounds, row: int) -> float:
    """The power that a normal test has at an effect just as large as the one observed, from p and alpha alone.

    Hoenig and Heisey, The American Statistician 55 (2001) 19-24, show that it says nothing beside p (from memory).
    """
    p, alpha = float(on.p[row]), float(on.alpha[row])
    if not 0 < p <= 1:
        return math.nan
    from gatecheck import weigh  # noqa: PLC0415  # few claims speak of power
    from gatecheck.weigh.power import power_z  # noqa: PLC0415  # the same

    one_sided = bool(on.table.columns.test.one_sided[row])
    z = weigh.z_from_log_p(math.log(p), one_sided=one_sided)
    return float(power_z(z, alpha, one_sided=one_sided))


def _tell_smallest(on: Grounds, row: int) -> str:
    estimate = on.record(row).estimate
    smallest = None if estimate is None else estimate.smallest_effect
    if smallest is None:
        return "the record names none"
    if not np.isfinite(on.reach[row]):
        return "the record has no interval with two limits"
    return f"its whole interval is below the smallest effect of interest, {tell_number(smallest)}"


def _tell_ratio(on: Grounds, row: int) -> str:
    log_ratio = float(on.log_ratio[row])
    if not math.isfinite(log_ratio):
        return "the likelihood ratio of this result cannot be told"
    if abs(log_ratio) > _LARGEST_LOG_TOLD:
        return f"the likelihood ratio is {'above 1e+26' if log_ratio > 0 else 'below 1e-26'}"
    return f"the likelihood ratio is {math.exp(log_ratio):.3g}"


def _tell_nothing(_: Grounds, __: int) -> str:
    return ""


_GROUNDS: Mapping[Kind, Callable[[Grounds, int], str]] = {
    "no-effect": _tell_margin,
    "safe": _tell_safe,
    "not-worse": _tell_margin,
    "difference": _tell_interaction,
    "observed-power": _tell_power,
    "p-as-probability": _tell_risk_beside_p,
    "hedge": _tell_p_and_alpha,
    "causal": _tell_design,
    "statistical-significance": _tell_p_and_alpha,
    "importance": _tell_smallest,
    "significant": _tell_nothing,
    "strength": _tell_ratio,
}
_MISSING: Mapping[Kind, str] = {
    "no-effect": "Give estimate.standard_error, or estimate.interval",
    "safe": "Give estimate.standard_error, or estimate.interval",
    "not-worse": "Give estimate.standard_error, or estimate.interval",
    "difference": "Name in compares two records that report the same measure and unit with their standard errors",
    "p-as-probability": "Give test.p, or the statistic with its df",
    "statistical-significance": "Give test.p, or the statistic with its df",
    "importance": "Give estimate.interval with two limits",
    "strength": "Give the statistic with its df, or the raw p",
}
