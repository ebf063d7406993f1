"""Which words the evidence in a result allows, kind by kind.

Strong words are graded on one published scale of the likelihood ratio: up to 3 it is worth no more than a bare
mention, from 3 to 20 the evidence is positive, from 20 to 150 strong, above that very strong (Kass and Raftery
1995; the bands as a secondary source gives them). No single result proves.
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Mapping, Sequence
from typing import Literal

import numpy as np

from gatecheck.columns import Booleans, Floats
from gatecheck.compare.interactions import Interactions, interactions
from gatecheck.compare.margins import Margins, margins
from gatecheck.compare.screens import is_whole_screen
from gatecheck.compare.wordings import Kind, Wording
from gatecheck.model.record import Record
from gatecheck.model.struct import struct
from gatecheck.rules.no_effect_support import Settings as NoEffectSettings
from gatecheck.rules.rule import Table

Answer = Literal["met", "short", "undecided"]
_USUAL_ALPHA = 0.05
_NUMBER = re.compile(r"(?<![\w.])\d*\.?\d+")


@struct
class Grounds:
    """What words rest on, arrays of shape (n,).

    `inside` is where the interval lies within both ends of the margin, `inside_aim` where it lies within those that
    the aim needs. `p` is the reported one (adjusted, where it is), `log_ratio` the natural log of the likelihood
    ratio for what the row claims, `reach` how far its interval goes from no effect.
    """

    table: Table
    margins: Margins
    inside: Booleans
    inside_aim: Booleans
    p: Floats
    alpha: Floats
    log_ratio: Floats
    reach: Floats
    interactions: Interactions
    design_required: Booleans

    def record(self, row: int) -> Record:
        """The record of that row."""
        return self.table.record(row)


def grounds(table: Table, design_required: Booleans) -> Grounds:
    """What the words of all rows rest on; `design_required` is where causal words need a declared design."""
    estimate = table.columns.estimate
    found = margins(table.columns, _alpha_of_margin(table))
    ends = np.isfinite(estimate.margin_low) & np.isfinite(estimate.margin_high)
    above, below = found.low > found.wanted_low, found.high < found.wanted_high
    inside_aim = ends & (above | np.isneginf(found.wanted_low)) & (below | np.isposinf(found.wanted_high))
    inside = ends & (found.low > estimate.margin_low) & (found.high < estimate.margin_high)
    for_no_effect = -table.evidence.under["default-prior"]
    return Grounds(
        table,
        found,
        inside,
        inside_aim,
        _p(table),
        _alpha(table),
        np.where(table.columns.no_effect_aim, for_no_effect, table.evidence.log_likelihood_ratio),
        np.maximum(np.abs(estimate.low.value), np.abs(estimate.high.value)),
        interactions(table.columns),
        design_required,
    )


def _alpha_of_margin(table: Table) -> Floats:
    """The level at which the rule on claims of no effect tests each row."""
    usual = NoEffectSettings()
    settings = [each.rules.get("no-effect-support", usual) for each in table.applied]
    return np.array([getattr(each, "alpha", usual.alpha) for each in settings], np.float64)


def _alpha(table: Table) -> Floats:
    tests = [one.record.test for one in table.columns.found]
    given = [None if test is None else test.alpha for test in tests]
    return np.array([_USUAL_ALPHA if each is None else each for each in given], np.float64)


def _p(table: Table) -> Floats:
    """The reported p, else that of the statistic; one that is only said to be above a bound is not below alpha."""
    p = table.columns.test.p
    reported = np.where(np.isposinf(p.high), 1.0, p.value)
    return np.where(p.known, reported, np.exp(table.evidence.statistics.log_p))


def answer(on: Grounds, row: int, wording: Wording) -> Answer:
    """Whether the evidence in a row allows these words."""
    kind = wording.phrase.kind
    if wording.suggestive and (kind == "causal" or on.record(row).status != "confirmatory"):
        return "short" if kind in _NEVER_SOFT and _ANSWERS[kind](on, row, wording) == "short" else "met"
    return _ANSWERS[kind](on, row, wording)


#: Words that a suggestion does not mend.
_NEVER_SOFT: frozenset[Kind] = frozenset({
    "hedge",
    "observed-power",
    "p-as-probability",
    "statistical-significance",
    "significant",
})


def _no_effect(on: Grounds, row: int, _: Wording) -> Answer:
    return _within_margin(on, row, on.inside)


def _not_worse(on: Grounds, row: int, _: Wording) -> Answer:
    return _within_margin(on, row, on.inside_aim)


def _safe(on: Grounds, row: int, _: Wording) -> Answer:
    return _within_margin(on, row, on.inside_aim) if on.record(row).harm else "short"


def _within_margin(on: Grounds, row: int, inside: Booleans) -> Answer:
    if not on.table.columns.no_effect_aim[row] or not has_margin(on, row):
        return "short"
    if not np.isfinite(on.margins.low[row]) and not np.isfinite(on.margins.high[row]):
        return "undecided"
    return "met" if inside[row] else "short"


def has_margin(on: Grounds, row: int) -> bool:
    """Whether the record gives a margin with two ends."""
    estimate = on.table.columns.estimate
    return bool(np.isfinite(estimate.margin_low[row]) and np.isfinite(estimate.margin_high[row]))


def _difference(on: Grounds, row: int, _: Wording) -> Answer:
    fact = on.interactions.compared[row]
    if on.interactions.tested[row]:
        return _below_alpha(on, row)
    return "undecided" if fact is not None and fact.apart else "short"


def _below_alpha(on: Grounds, row: int) -> Answer:
    if not np.isfinite(on.p[row]):
        return "undecided"
    return "met" if on.p[row] <= on.alpha[row] else "short"


def _hedge(on: Grounds, row: int, _: Wording) -> Answer:
    return "met" if on.p[row] <= on.alpha[row] else "short"


def _causal(on: Grounds, row: int, _: Wording) -> Answer:
    record = on.record(row)
    # Nobody needs a design to report a possible harm.
    wanting = record.design is None and bool(on.design_required[row]) and not record.harm
    return "short" if record.design == "observational" or wanting else "met"


def _p_as_probability(on: Grounds, row: int, wording: Wording) -> Answer:
    """Short where the number that the words give is p or the rest of 1, and where they give none."""
    told = _NUMBER.findall(wording.quote)
    if not told:
        return "short"
    if not np.isfinite(on.p[row]):
        return "undecided"
    return "short" if any(_is_of_p(each, float(on.p[row])) for each in told) else "met"


def _is_of_p(told: str, p: float) -> bool:
    """Whether a number, in percent or as a part of 1, is p or 1 - p within its last digit."""
    number, half = float(told), 0.5 * 10.0 ** -len(told.partition(".")[2])
    whole = (100.0, 1.0) if number < 1 else (100.0,)
    return any(abs(number - scale * each) <= half * (1 + 1e-9) for scale in whole for each in (p, 1 - p))


def _never(_: Grounds, __: int, ___: Wording) -> Answer:
    return "short"


def _statistical(on: Grounds, row: int, _: Wording) -> Answer:
    return "met" if is_whole_screen(on.record(row)) else _below_alpha(on, row)


def _importance(on: Grounds, row: int, _: Wording) -> Answer:
    smallest = on.table.columns.estimate.smallest[row]
    if not np.isfinite(smallest):
        return "short"
    if not np.isfinite(on.reach[row]):
        return "undecided"
    return "short" if on.reach[row] < smallest else "met"


def _strength(on: Grounds, row: int, wording: Wording) -> Answer:
    least = wording.phrase.at_least
    if on.record(row).harm:
        return "met"  # nobody needs strong evidence to report a possible harm
    if least is None:
        return "short"
    if not np.isfinite(on.log_ratio[row]):
        return "undecided"
    return "met" if on.log_ratio[row] >= math.log(least) else "short"


_ANSWERS: Mapping[Kind, Callable[[Grounds, int, Wording], Answer]] = {
    "no-effect": _no_effect,
    "safe": _safe,
    "not-worse": _not_worse,
    "difference": _difference,
    "observed-power": _never,
    "p-as-probability": _p_as_probability,
    "hedge": _hedge,
    "causal": _causal,
    "statistical-significance": _statistical,
    "importance": _importance,
    "significant": _never,
    "strength": _strength,
}


def not_allowed(on: Grounds, row: int, found: Sequence[Wording]) -> tuple[list[Wording], list[Wording]]:
    """The words of a text about a row that its evidence does not allow, and those of which that cannot be told."""
    answers = [(answer(on, row, each), each) for each in found]
    short = [each for told, each in answers if told == "short"]
    return short, [each for told, each in answers if told == "undecided"]
