"""Evidence as figures with their assumptions, for the verdict."""

from __future__ import annotations

import math

import numpy as np

from gatecheck import weigh
from gatecheck.model.shown import decimal, percent
from gatecheck.model.verdict import Figures, Sensitivity
from gatecheck.policy import AlternativeName, Applied
from gatecheck.rules.rule import Table
from gatecheck.rules.weighed import tell_unweighed
from gatecheck.rules.words import tell_others, tell_pooled

_USUAL_RISK = 0.05
#: From what a screen may start with to near certainty.
PRIORS = (0.01, 0.05, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 0.95, 0.99)
_ERRS = {
    "observed-effect": "errs in favour of the claim: hardly any effect fits the data better than the one observed",
    "design-effect": "right if the effect is as planned; a smaller or larger true effect gives another figure",
    "default-prior": (
        "errs neither way if the prior on the size of the effect is apt; the answer depends on its width, and a "
        "wider one favours no effect more"
    ),
    "bound": (
        "errs in favour of the claim: the most that alternatives spread smoothly about no effect give for this p "
        "(a single one picked after the data can give more)"
    ),
}
#: How records are weighed that are pooled, and whether it is by their sizes.
_WEIGHTS = {
    False: "Each counts by the inverse of its squared standard error.",
    True: (
        "Each counts by its size, as standard errors on fewer than 30 degrees of freedom are too uncertain to "
        "choose the weights."
    ),
}


class FigureTable:
    """The figures of a table, computed for all rows under each alternative at once."""

    def __init__(self, table: Table) -> None:
        self.table = table
        self.risk_wanted = [_risk_wanted(applied) for applied in table.applied]
        under = table.evidence.under
        self.risk = {
            name: weigh.false_positive_risk(log_lr, table.evidence.prior) for name, log_lr in under.items()
        }
        self.needed = {name: weigh.prior_needed(log_lr, self.risk_wanted) for name, log_lr in under.items()}

    def of_row(self, row: int, *, in_full: bool) -> tuple[Figures | None, tuple[Figures, ...]]:
        """The figures under the alternative that was chosen, and `in_full` also those under every other one.

        A record that claims nothing and has no evidence has no figures, and a claim of no effect none for one.
        """
        if self.table.columns.no_effect_aim[row]:
            return None, ()
        chosen = self.table.evidence.alternative[row]
        rest = tuple(self._under(row, name) for name in self._others(row)) if in_full else ()
        if chosen is not None:
            return self._under(row, chosen), rest
        if not self.table.columns.claims[row]:
            return None, rest
        why = tell_unweighed(self.table, row).message
        return Figures("none", None, *self._prior(row), None, None, why), rest

    def sensitivity(self, row: int) -> Sensitivity | None:
        """The risk over a grid of priors under every alternative; `None` where there is nothing to weigh."""
        chosen = self.table.evidence.alternative[row]
        if chosen is None or self.table.columns.no_effect_aim[row]:
            return None
        names = [chosen, *self._others(row)]
        log_lr = np.array([self.table.evidence.under[name][row] for name in names])
        risks = weigh.false_positive_risk(log_lr[:, None], np.array(PRIORS))
        limit = getattr(self.table.applied[row].rules.get("false-positive-risk"), "limit", None)
        return Sensitivity(PRIORS, tuple(names), tuple(tuple(map(float, each)) for each in risks), limit)

    def _others(self, row: int) -> list[AlternativeName]:
        evidence = self.table.evidence
        chosen = evidence.alternative[row]
        return [name for name, column in evidence.under.items() if name != chosen and np.isfinite(column[row])]

    def _under(self, row: int, alternative: AlternativeName) -> Figures:
        evidence, wanted = self.table.evidence, self.risk_wanted[row]
        recovered = " The statistic was recovered from p." if evidence.weighed.recovered[row] else ""
        return Figures(
            alternative,
            float(evidence.under[alternative][row]),
            *self._prior(row),
            float(self.risk[alternative][row]),
            float(self.needed[alternative][row]),
            f"{_ERRS[alternative]}; the prior needed is for a risk of {percent(wanted, wanted)}.{recovered}"
            f"{self._together(row)}",
            self._pooled(row),
        )

    def _pooled(self, row: int) -> str:
        """With which records a row is pooled, how, and to what."""
        columns, evidence = self.table.columns, self.table.evidence
        if not evidence.on_all[row]:
            return ""
        return (
            f"pooled with {tell_others(columns, evidence, row)} by {self._how(row)} to {tell_pooled(evidence, row)}"
        )

    def _how(self, row: int) -> str:
        return "random effects" if self.table.applied[row].evidence.together == "random" else "one common effect"

    def _together(self, row: int) -> str:
        """On how many records a row is judged, or why it is not judged on all that answer its hypothesis."""
        together = self.table.evidence.together
        if self.table.evidence.on_all[row]:
            spread = decimal(math.exp(together.log_p_spread[row]))
            members = len(together.members[row])
            return (
                f" Weighed on {members} records of one hypothesis, pooled with {self._how(row)} "
                f"(spread: p = {spread}). {_WEIGHTS[bool(together.by_size[row])]}"
            )
        if together.pooled[row]:
            return (
                " Pooling would make the claim stronger, and no record says that its data are its own (replicates)."
            )
        why = together.apart[row]
        return f" Not weighed together with other records of its hypothesis: {why}." if why else ""

    def _prior(self, row: int) -> tuple[float, str]:
        evidence = self.table.evidence
        own = "plan" if self.table.columns.prior_from_plan[row] else "record"
        return float(evidence.prior[row]), own if evidence.prior_is_own[row] else "policy"


def risk_at(table: Table, row: int, prior: float) -> str:
    """The false positive risk of a row at another prior, as it is shown."""
    risk = float(weigh.false_positive_risk(table.evidence.log_likelihood_ratio[row], prior))
    return "unknown" if math.isnan(risk) else percent(risk)


def _risk_wanted(applied: Applied) -> float:
    """The risk for which the prior needed is told: the policy's, else the usual one."""
    wanted = getattr(applied.rules.get("prior-needed"), "risk", math.nan)
    limit = getattr(applied.rules.get("false-positive-risk"), "limit", math.nan)
    return float(next((risk for risk in (wanted, limit) if math.isfinite(risk)), _USUAL_RISK))
