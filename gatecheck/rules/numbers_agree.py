"""Rule `numbers-agree`: the figures of a record that determine each other agree within their rounding.

Statistic, degrees of freedom, sides and p; estimate, standard error, interval, statistic and p; means, standard
deviations, counts and sizes of groups against statistic and effect; degrees of freedom against units, exclusions
and clusters; an adjusted p against the raw one; and values that whole numbers cannot give. A p that is adjusted,
exact or from resampling is not compared with a statistic, and an interval that is not symmetric about its estimate
not with a standard error.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from gatecheck.compare.agreement import odd_one_out
from gatecheck.model.record import Test
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Judgement, Rule, Said, Table
from gatecheck.rules.words import describe_result

_MOST_EXPLANATIONS = 4
#: What a comparison is called, by its name.
_CHECKED = {
    "p": "statistic, df, sides and p",
    "adjusted": "adjusted and raw p",
    "inside": "estimate and interval",
    "width": "interval and standard error",
    "limits": "limits and standard error",
    "lone-limit": "limit and standard error",
    "centre": "estimate and middle of the interval",
    "statistic": "estimate and statistic",
    "statistic-interval": "interval and statistic",
    "sides": "interval and p",
    "p-estimate": "estimate, precision and p",
    "correlation": "correlation and statistic",
    "fisher": "interval of the correlation and df",
    "sizes": "groups and n",
    "df": "df and groups",
    "df-n": "df and n",
    "units": "df and independent units",
    "proportion": "proportion and counts",
    "proportion-error": "precision and independent units",
    "groups-statistic": "groups and statistic",
    "welch-df": "groups and df",
    "groups-estimate": "means and estimate",
    "groups-effect": "groups and standardised effect",
    "groups-error": "groups and standard error",
    "counts": "events and units",
    "counts-statistic": "counts and statistic",
    "counts-estimate": "counts and estimate",
    "counts-error": "counts and standard error",
    "counts-exact": "counts and exact p",
    "item-mean": "mean and whole-number items",
    "item-sd": "standard deviation and whole-number items",
    "permutation": "p and resamples",
}


def judge(table: Table, settings: Sequence[RuleSettings | None]) -> Judgement:
    """Short where any two figures of the record cannot both be right."""
    disagrees = [agreement.disagrees for agreement in table.own_numbers]
    return Judgement(np.logical_or.reduce([*disagrees, np.zeros(len(settings), np.bool_)]))


def explain(table: Table, row: int, _: RuleSettings, __: Judgement) -> Said:
    """Which figures do not fit together, which would, which is the odd one out, and what to rule out first."""
    short = [each for each in table.own_numbers if each.disagrees[row]]
    if not short:
        return Said(_tell_compared(table, row))
    from gatecheck.rules.numbers_told import tell  # noqa: PLC0415  # most figures agree

    told = [tell(table, row, each) for each in short]
    odd = odd_one_out(table.own_numbers, row)
    lone = f"; the other figures fit together, so the odd one out is {odd}" if odd else ""
    found = "; ".join(dict.fromkeys(each.message for each in told))
    explanations = list(dict.fromkeys(text for each in told for text in each.harmless))[:_MOST_EXPLANATIONS]
    rule_out = f" Rule out first that {_or(explanations)}." if explanations else ""
    return Said(
        f"{found}{lone}; the policy wants figures that fit together.",
        f"{_in_one_sentence([each.action for each in told])}{rule_out}",
    )


def _tell_compared(table: Table, row: int) -> str:
    """What was compared, and what is not since it was adjusted by itself."""
    record = table.record(row)
    checked = dict.fromkeys(_CHECKED[each.name] for each in table.own_numbers if each.checked[row])
    compared = f"compared: {', '.join(checked)}" if checked else "no two of its figures determine each other"
    interval = None if record.estimate is None else record.estimate.interval
    p_adjusted = (record.test or Test()).p_kind == "adjusted"
    if interval is not None and p_adjusted != interval.adjusted:
        which = "p is adjusted and the interval is not" if p_adjusted else "the interval is adjusted and p is not"
        compared += f"; {which}, so these two are not compared"
    return f"{describe_result(record)}: {compared}."


def _in_one_sentence(actions: Sequence[str]) -> str:
    """What to do about each disagreement, without repeats, so that a shortfall stays short."""
    first, *others = dict.fromkeys(actions)
    return "; ".join([first, *(f"{other[0].lower()}{other[1:]}" for other in others)]) + "."


def _or(texts: Sequence[str]) -> str:
    *others, last = texts
    return f"{', '.join(others)} or {last}" if others else last


RULE = Rule(
    name="numbers-agree",
    asks="figures that determine each other agree within the rounding of what was reported",
    settings=RuleSettings,
    judge=judge,
    explain=explain,
    always_on=True,
)
