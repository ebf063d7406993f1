"""Rule `no-effect-support`: a claim of equivalence or non-inferiority has its margin, and an interval inside it.

"No difference" on a p above 0.05 alone falls short: absence of evidence is no evidence of absence. Equivalence asks
that the interval of level 1 - 2 alpha lie within the margin, which is where two one-sided tests at alpha both
reject (Schuirmann 1987, from memory); non-inferiority that it lie above the lower end of the margin, or below its
upper end where the side tested is `less`. Setting: `alpha`, the level of each one-sided test.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import KW_ONLY
from typing import Annotated

import numpy as np

from gatecheck.columns import Booleans, Floats
from gatecheck.compare.margins import Margins, margins
from gatecheck.model.marks import Range
from gatecheck.model.shown import decimal
from gatecheck.model.struct import struct
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Judgement, Rule, Said, Table, setting
from gatecheck.rules.words import describe_result, tell_number

_Alpha = Annotated[float, Range(0, 0.5, low_open=True, high_open=True)]


@struct
class Settings(RuleSettings):
    """How a claim of no effect is tested."""

    _: KW_ONLY
    alpha: Annotated[_Alpha, "level of each one-sided test; the interval has level 1 - 2 alpha"] = 0.05


def judge(table: Table, settings: Sequence[Settings | None]) -> Judgement:
    """Short where there is no margin or the interval leaves it, undecided where there is no interval."""
    estimate, alpha = table.columns.estimate, setting(settings, "alpha")
    found = margins(table.columns, alpha)
    above, below = found.low > estimate.margin_low, found.high < estimate.margin_high
    inside = (above | ~_needs_low(table)) & (below | ~_needs_high(table))
    margin = np.isfinite(estimate.margin_low) & np.isfinite(estimate.margin_high)
    has_interval = np.isfinite(found.low) | np.isfinite(found.high)
    return Judgement(~margin | ~inside, _p(table, found), alpha, known=~margin | has_interval, facts=found)


def _needs_low(table: Table) -> Booleans:
    return ~table.columns.noninferiority | (table.columns.test.toward > 0)


def _needs_high(table: Table) -> Booleans:
    return ~table.columns.noninferiority | (table.columns.test.toward < 0)


def _p(table: Table, found: Margins) -> Floats:
    """The greater of the p-values that the aim needs."""
    low = np.where(_needs_low(table), found.p_low, -np.inf)
    high = np.where(_needs_high(table), found.p_high, -np.inf)
    return np.maximum(low, high)


def explain(table: Table, row: int, settings: Settings, judgement: Judgement) -> Said:
    """Where the interval lies against the margin, and the wording that is left."""
    record = table.record(row)
    estimate = record.estimate
    if estimate is None or estimate.margin is None:
        return Said(
            f"The claim is one of {record.aim} and gives no margin ({describe_result(record)}); a p-value above "
            "any level does not show that there is no effect, and the policy wants an interval inside a margin.",
            "Give estimate.margin as it was set before the data, or say that no difference was found.",
        )
    margin = f"{tell_number(estimate.margin[0])} to {tell_number(estimate.margin[1])}"
    found: Margins = judgement.facts
    level = f"{100 * (1 - 2 * settings.alpha):.4g} % interval"
    if judgement.known is not None and not judgement.known[row]:
        return Said(
            f"The {level} that is set against the margin {margin} cannot be told ({describe_result(record)}).",
            "Give estimate.standard_error, or estimate.interval at that level.",
        )
    ends = f"{_as_given(table, row, found.low[row])} to {_as_given(table, row, found.high[row])}"
    p = judgement.observed[row] if judgement.observed is not None else np.nan
    tests = f" (p = {decimal(float(p), settings.alpha)} by the one-sided tests)" if np.isfinite(p) else ""
    where = "leaves" if judgement.short[row] else "lies within"
    return Said(
        f"The {level} {ends}{tests} {where} the margin {margin}; the policy wants it inside for a claim of "
        f"{record.aim}.",
        "As it stands, call it inconclusive: neither a difference nor its absence was shown.",
    )


def _as_given(table: Table, row: int, end: float) -> str:
    """An end of the interval on the scale of the estimate as it is reported."""
    estimate = table.columns.estimate
    null = float(estimate.null[row])
    value = null * float(np.exp(end)) if estimate.log_scale[row] else null + float(end)
    return f"{value:.3g}" if np.isfinite(value) else "unbounded"


RULE = Rule(
    name="no-effect-support",
    asks="a claim of equivalence or non-inferiority has its margin, and an interval inside it",
    settings=Settings,
    judge=judge,
    explain=explain,
    concerns=lambda table, _: table.columns.claims & table.columns.no_effect_aim,
    always_on=True,
)
