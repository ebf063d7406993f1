"""The words in which a result, its evidence and its remedies are told."""

from __future__ import annotations

import math

import numpy as np

from gatecheck.columns import Columns
from gatecheck.evidence import Evidence
from gatecheck.model.numbers import Reported
from gatecheck.model.record import Record, Sample, Test

_SUGGESTIVE = 0.20
_FEW_DIGITS = 4
_MOST_NAMED = 3
_LARGEST_LOG_ODDS = 60.0
#: Endings of units and of their plurals (common usage); the first that fits is taken.
_PLURALS = {
    "mouse": "mice",
    "mice": "mice",
    "child": "children",
    "children": "children",
    "person": "people",
    "people": "people",
    "ss": "sses",
    "s": "s",
    "x": "xes",
    "ch": "ches",
    "sh": "shes",
    "ay": "ays",
    "ey": "eys",
    "oy": "oys",
    "y": "ies",
}


def describe_result(record: Record) -> str:
    """One line that gives the result as it is reported, such as `t(34) = 2.21, p = 0.034`."""
    test = record.test or Test()
    parts = [tell_statistic(test), _p(test), _estimate(record), _screen(record)]
    return ", ".join(part for part in parts if part) or "no test and no estimate"


def _screen(record: Record) -> str:
    screen = record.screen
    if screen is None or screen.hits is None or screen.tests is None:
        return ""
    return f"{screen.hits:,} hits of {screen.tests:,} tests"


def tell_result(columns: Columns, evidence: Evidence, row: int) -> str:
    """The result at the head of a message: `p = 0.034 (t(34) = 2.21, 18 + 18 plots)`, or the pooled one."""
    if evidence.on_all[row]:
        return _tell_together(columns, evidence, row)
    record = columns.found[row].record
    test = record.test or Test()
    log_p = evidence.statistics.log_p[row]
    head = _p(test) or (f"p = {_digits(math.exp(log_p))}" if math.isfinite(log_p) else "The result")
    behind = [tell_statistic(test) or test.name or "", tell_sample(record.sample)]
    inside = ", ".join(part for part in behind if part)
    return f"{head} ({inside})" if inside else head


def _tell_together(columns: Columns, evidence: Evidence, row: int) -> str:
    return (
        f"Together with {tell_others(columns, evidence, row)}, this result ({tell_pooled(evidence, row)}, pooled)"
    )


def tell_others(columns: Columns, evidence: Evidence, row: int) -> str:
    """The records with which a row is pooled, the first few by name."""
    others = [columns.found[each].record.id for each in evidence.together.members[row] if each != row]
    more = f" and {len(others) - _MOST_NAMED} more" if len(others) > _MOST_NAMED else ""
    return ", ".join(others[:_MOST_NAMED]) + more


def tell_pooled(evidence: Evidence, row: int) -> str:
    """The pooled result, such as `t(4) = 2.83, p = 0.04742`; a z where all standard errors are known."""
    df = evidence.together.df[row]
    named = f"t({df:.3g})" if math.isfinite(df) else "z"
    p = _digits(math.exp(evidence.weighed.log_p[row]))
    return f"{named} = {evidence.weighed.value[row]:.3g}, p = {p}"


def tell_sample(sample: Sample | None) -> str:
    """The sample sizes with their unit, such as `18 + 18 plots`."""
    if sample is None:
        return ""
    sizes = " + ".join(str(group.n) for group in sample.groups) if len(sample.groups) > 1 else ""
    sizes = sizes or (str(sample.n) if sample.n is not None else "")
    return f"{sizes} {plural(sample.unit)}" if sizes else ""


def plural(unit: str | None) -> str:
    """The unit in the plural; one that is given in the plural stays, and one that is unknown is just units."""
    if unit is None:
        return "units"
    for singular, many in _PLURALS.items():
        if unit.endswith(singular):
            return unit.removesuffix(singular) + many
    return f"{unit}s"


def tell_number(number: Reported | None) -> str:
    """A number as it was reported; an exact one in a few digits. A limit that is not there is unbounded."""
    if number is None:
        return "unbounded"
    return number.text.strip() if number.text is not None else _digits(number.value)


def tell_prior(columns: Columns, evidence: Evidence, row: int) -> str:
    """The prior with its origin where that is the record or its plan."""
    prior = f"prior {evidence.prior[row]:.4g}"
    if columns.prior_from_plan[row]:
        return f"{prior}, which the plan sets"
    who = "had at the base" if columns.prior_at_base[row] else "sets"
    basis = columns.prior_basis[row]
    return f"{prior}, which the record {who} ({basis})" if basis else prior


def tell_alternative(columns: Columns, evidence: Evidence, row: int) -> str:
    """Against which effect the evidence was weighed, and which way that errs."""
    match evidence.alternative[row]:
        case "observed-effect":
            return "even against an effect as large as the one observed, which errs in favour of the claim"
        case "design-effect":
            planned = columns.found[row].record.alternative
            effect = "" if planned is None else f" of {planned.effect:g} ({planned.scale})"
            return f"against the effect{effect} that the study was designed to find"
        case "default-prior":
            return "averaged over the default prior of its test (a wider prior favours no effect more)"
        case _:
            return _tell_bound(columns, row)


def _tell_bound(columns: Columns, row: int) -> str:
    calibration = "by the calibration -e p ln p of its p-value, which errs in favour of the claim"
    test = columns.found[row].record.test
    if test is None or test.statistic is None:
        return f"{calibration} (this test has no likelihood ratio of its own)"
    return calibration


def tell_wording(risk: float, log_likelihood_ratio: float) -> str:
    """The wording that the evidence allows."""
    if log_likelihood_ratio < 0:
        return "as it stands, the data fit no effect better than the effect weighed: do not claim it"
    if risk <= _SUGGESTIVE:
        return "as it stands, call it suggestive"
    return "as it stands, say that the data do not settle it"


def tell_odds(log_likelihood_ratio: float) -> str:
    """A likelihood ratio in words."""
    toward = "an effect over none" if log_likelihood_ratio >= 0 else "no effect over one"
    if abs(log_likelihood_ratio) > _LARGEST_LOG_ODDS:
        return f"more than 1e+26 to 1 for {toward}"
    return f"about {math.exp(abs(log_likelihood_ratio)):.3g} to 1 for {toward}"


def tell_n(evidence: Evidence, row: int, n: float, unit: str | None) -> str:
    """The sample that would do: `29 plots per group`."""
    each = " per group" if evidence.design.arms[row] > 1 else ""
    return f"{n:,.0f} {plural(unit)}{each}"


def as_reported(columns: Columns, row: int, shift: float) -> str:
    """A shift from no effect on the scale of the estimate as it is reported."""
    null = float(columns.estimate.null[row])
    value = null * float(np.exp(shift)) if columns.estimate.log_scale[row] else null + float(shift)
    return f"{value:.3g}" if math.isfinite(value) else "unbounded"


def tell_statistic(test: Test) -> str:
    """The statistic with its degrees of freedom, such as `t(34) = 2.21`; empty where there is none."""
    if test.value is None:
        named = test.named_statistic
        return f"{named.symbol} = {tell_number(named.value)}" if named else ""
    df = ", ".join(tell_number(each) for each in test.df or ())
    return f"{test.statistic}{f'({df})' if df else ''} = {tell_number(test.value)}"


def _p(test: Test) -> str:
    if test.p is None:
        return ""
    kind = "adjusted p" if test.p_kind == "adjusted" else "p"
    sided = "one-sided " if test.sides == 1 and test.statistic not in {"chi2", "F"} else ""
    text = tell_number(test.p)
    return f"{sided}{kind} {text}" if text[:1] in {"<", ">"} else f"{sided}{kind} = {text}"


def _estimate(record: Record) -> str:
    estimate = record.estimate
    if estimate is None:
        return ""
    unit = "" if estimate.unit in {None, "1", ""} else f" {estimate.unit}"
    told = f"{estimate.measure} {tell_number(estimate.value)}{unit}"
    interval = estimate.interval
    if interval is None or interval.low is None or interval.high is None:
        return told
    level = f"{100 * interval.level:.4g} %"
    return f"{told} ({level} interval {tell_number(interval.low)} to {tell_number(interval.high)})"


def _digits(value: float) -> str:
    return f"{value:.{_FEW_DIGITS}g}"
