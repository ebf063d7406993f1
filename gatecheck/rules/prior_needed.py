"""Rule `prior-needed`: the prior belief that one would need for an acceptable risk is one that can be defended.

The prior needed for a risk f is that p for which the false positive risk is just f: logit p = log((1 - f) / f) -
log LR. Settings: `risk`, the risk to reach; `limit`, the greatest prior that may be needed for it;
`include_harm`, whether safety outcomes are held to it too.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import KW_ONLY
from typing import Annotated

from gatecheck import weigh
from gatecheck.model.record import OpenProbability
from gatecheck.model.shown import percent
from gatecheck.model.struct import struct
from gatecheck.policy import RuleSettings
from gatecheck.rules.mending import tell_mending, would_do
from gatecheck.rules.rule import Judgement, Rule, Said, Table, every_claim, setting
from gatecheck.rules.weighed import EXEMPT, LOG_LIKELIHOOD_RATIO
from gatecheck.rules.words import tell_alternative, tell_result


@struct
class Settings(RuleSettings):
    """How sure one may have to be beforehand."""

    _: KW_ONLY
    risk: Annotated[OpenProbability, "false positive risk to reach"]
    limit: Annotated[OpenProbability, "greatest prior probability that may be needed for it"]
    include_harm: Annotated[bool, "hold safety outcomes to this limit too"] = False


def judge(table: Table, settings: Sequence[Settings | None]) -> Judgement:
    """Short where the prior needed is above the limit."""
    risk, limit = setting(settings, "risk"), setting(settings, "limit")
    needed = weigh.prior_needed(table.evidence.log_likelihood_ratio, risk)
    short = needed > limit
    return Judgement(short, needed, limit, would_do(table, short, weigh.log_lr_needed(limit, risk)))


def explain(table: Table, row: int, settings: Settings, judgement: Judgement) -> Said:
    """How sure one would have to be, how sure the policy lets one be, and what would mend it."""
    columns, evidence = table.columns, table.evidence
    needed = float(weigh.prior_needed(evidence.log_likelihood_ratio[row], settings.risk))
    message = (
        f"{tell_result(columns, evidence, row)}: one would have to be {percent(needed, settings.limit)} sure of a "
        f"real effect beforehand to leave a risk of {percent(settings.risk, settings.risk)}, "
        f"{tell_alternative(columns, evidence, row)}; "
        f"the policy lets at most {percent(settings.limit, settings.limit)} be needed."
    )
    target = float(weigh.log_lr_needed(settings.limit, settings.risk))
    return Said(message, tell_mending(table, row, target, judgement))


RULE = Rule(
    name="prior-needed",
    asks="the prior belief needed for an acceptable risk is no greater than the limit",
    settings=Settings,
    judge=judge,
    explain=explain,
    needs=(LOG_LIKELIHOOD_RATIO,),
    exempt=EXEMPT,
    concerns=every_claim,
)
