"""The evidence of one row as figures with their assumptions, for the verdict."""

from __future__ import annotations

import math

import numpy as np

from gatecheck import weigh
from gatecheck.model.shown import percent
from gatecheck.model.verdict import Figures
from gatecheck.policy import AlternativeName
from gatecheck.rules.rule import Table
from gatecheck.rules.weighed import tell_unweighed

_USUAL_RISK = 0.05
_ERRS = {
    "observed-effect": "errs in favour of the claim: hardly any effect fits the data better than the one observed",
    "design-effect": "right if the effect is as planned; a smaller or larger true effect gives another figure",
    "bound": (
        "errs in favour of the claim: the most that alternatives spread smoothly about no effect give for this p "
        "(a single one picked after the data can give more)"
    ),
}


def figures_of(table: Table, row: int, *, in_full: bool) -> tuple[Figures | None, tuple[Figures, ...]]:
    """The figures under the alternative that was chosen, and `in_full` also those under every other one.

    A record that claims nothing and has no evidence has no figures.
    """
    chosen = table.evidence.alternative[row]
    others: tuple[AlternativeName, ...] = tuple(
        name for name, column in table.evidence.under.items() if name != chosen and np.isfinite(column[row])
    )
    rest = tuple(_figures(table, row, name) for name in others) if in_full else ()
    if chosen is not None:
        return _figures(table, row, chosen), rest
    if not table.columns.claims[row]:
        return None, rest
    prior, prior_from = _prior(table, row)
    return Figures("none", None, prior, prior_from, None, None, tell_unweighed(table, row).message), rest


def _figures(table: Table, row: int, alternative: AlternativeName) -> Figures:
    log_lr = float(table.evidence.under[alternative][row])
    prior, prior_from = _prior(table, row)
    risk = _risk_wanted(table, row)
    recovered = " The statistic was recovered from p." if table.evidence.statistics.recovered[row] else ""
    return Figures(
        alternative,
        log_lr,
        prior,
        prior_from,
        float(weigh.false_positive_risk(log_lr, prior)),
        float(weigh.prior_needed(log_lr, risk)),
        f"{_ERRS[alternative]}; the prior needed is for a risk of {percent(risk, risk)}.{recovered}",
    )


def _prior(table: Table, row: int) -> tuple[float, str]:
    return float(table.evidence.prior[row]), "record" if table.evidence.prior_is_own[row] else "policy"


def _risk_wanted(table: Table, row: int) -> float:
    """The risk for which the prior needed is told: the policy's, else the usual one."""
    rules = table.applied[row].rules
    wanted = getattr(rules.get("prior-needed"), "risk", math.nan)
    limit = getattr(rules.get("false-positive-risk"), "limit", math.nan)
    return float(next((risk for risk in (wanted, limit) if math.isfinite(risk)), _USUAL_RISK))
