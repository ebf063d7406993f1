"""Rule `numbers-agree`: the figures of a record that determine each other agree within their rounding.

Figures that determine each other agree within the rounding of what was reported:

- statistic, df, sides and p; an adjusted p and the raw one by the declared procedure and size of the family, or all
  raw ones where the family is whole in the tree;
- estimate, standard error, interval with its level, statistic and p, ratios on the log scale; a correlation and
  its r. A ratio that does not say its scale is read on the one on which its interval is symmetric, on each where
  that does not tell, and against 1; a relative change also as the ratio that it makes;
- means, standard deviations and sizes of groups against statistic (Student's, Welch's, of one sample, one-way
  analysis of variance), difference, standardised effect, standard error and Welch's df; counts of events against
  every form of z and chi-squared of two proportions, odds and risk ratios, differences, their errors, and
  Fisher's exact p;
- effect sizes that follow from the statistic, by every usual form: d and g (of two groups, pairs, one sample), eta,
  omega and epsilon squared, Cohen's f, phi, Cramér's V, r; the interval of an odds ratio, risk ratio or risk
  difference against the counts, which only one beyond all usual methods contradicts; chi-squared of the events of
  three groups or more; the difference of two records that a third one `compares`;
- df against the units of the groups: who is missing stands in `sample.excluded` with the reason; and against what
  the experimental unit allows: more df than clusters or units, and an error smaller than that of so many
  independent units, count measurements of the same units as units;
- values that whole numbers can give: means and standard deviations of `integer_items`, events of n, a share of n
  units, a permutation p of its `resamples`.

Each finding names the figure that would be consistent, the odd one out where the others bear each other out, and
the harmless explanations to rule out first. What the name of a test does not tell is not assumed: models with
covariates, mixed and clustered models, stratified and rank tests are not set against plain formulas. Not
compared, since it is no fault: a p that is `adjusted`, `exact` or from `permutation` with a statistic; what is
adjusted with what is not (`explain` says so); an interval that is not symmetric about its estimate (profile,
bootstrap) with a standard error, unless one limit lies just where that error puts it; a score test with a Wald
interval where they differ a little. A number written with few digits is taken as rounded to them, and one that
may have lost its trailing zeros like those beside it. Of 4,664 faults seeded in computed results, one figure
each, it found 95 %, with no alarm on the results as they were (`tests/bench/bench_recall.py`).
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from gatecheck.compare.agreement import odd_one_out
from gatecheck.compare.interval_numbers import may_be_ratio
from gatecheck.model.record import Test
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Judgement, Rule, Said, Table
from gatecheck.rules.words import describe_result

_MOST_EXPLANATIONS = 4
_MOST_TOLD = 5
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
    "effect-statistic": "effect size and statistic",
    "compared": "difference and the effects compared",
    "sizes": "groups and n",
    "df": "df and groups",
    "df-n": "df and n",
    "df-between": "df and number of groups",
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
    "counts-interval": "counts and interval",
    "counts-exact": "counts and exact p",
    "table-statistic": "counts of several groups and statistic",
    "item-mean": "mean and whole-number items",
    "item-sd": "standard deviation and whole-number items",
    "share": "share and number of units",
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
    from gatecheck.rules.numbers_told import either, tell  # noqa: PLC0415  # most figures agree

    told = [tell(table, row, each) for each in short[:_MOST_TOLD]]
    more = f"; {len(short) - _MOST_TOLD} more of its figures do not fit" if len(short) > _MOST_TOLD else ""
    # More df than units can be sound in themselves: it is the analysis that took other units.
    odd = None if any(each.name == "units" for each in short) else odd_one_out(table.own_numbers, row)
    lone = f"; the other figures fit together, so the odd one out is {odd}" if odd else ""
    found = "; ".join(dict.fromkeys(each.message for each in told))
    explanations = list(dict.fromkeys(text for each in told for text in each.harmless))[:_MOST_EXPLANATIONS]
    rule_out = f" Rule out first that {either(explanations)}." if explanations else ""
    return Said(
        f"{found}{more}{lone}; the policy wants figures that fit together.",
        f"{_in_one_sentence([action for each in told for action in each.actions])}{rule_out}",
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
    if _scale_is_unsaid(table, row):
        compared += (
            "; estimate.scale does not say the scale of the ratio, so it was read on those that it may be on"
        )
    return f"{describe_result(record)}: {compared}."


def _scale_is_unsaid(table: Table, row: int) -> bool:
    one = table.columns.found[row]
    if not may_be_ratio(one.record.estimate):
        return False
    from gatecheck.compare.ratio_scales import readings  # noqa: PLC0415  # ratios that do not say their scale

    return readings(one)[0] is not one


def _in_one_sentence(actions: Sequence[str]) -> str:
    """What to do about each disagreement, without repeats, so that a shortfall stays short."""
    first, *others = dict.fromkeys(actions)
    return "; ".join([first, *(f"{other[0].lower()}{other[1:]}" for other in others)]) + "."


RULE = Rule(
    name="numbers-agree",
    asks="figures that determine each other agree within the rounding of what was reported",
    settings=RuleSettings,
    judge=judge,
    explain=explain,
)
