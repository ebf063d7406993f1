"""Rule `false-positive-risk`: the risk that there is no effect, given the result as observed, is small enough.

The risk that there is no effect, given the result as observed, is at most `limit`. With the likelihood ratio LR
of the result as observed and the prior probability *p* of a real effect it is 1 / (1 + LR · p / (1 - p)). It is
the risk of this one result, not of all results at least as extreme. It binds claims only, and not safety outcomes
(`harm: true`; `include_harm: true` in the policy changes that): nobody needs strong evidence to report a possible
harm. A claim that is an estimate is exempt, and so is one of equivalence or non-inferiority, which evidence for
an effect does not back: `no-effect-support` judges it.

> p = 0.034 (t(34) = 2.21, 18 + 18 plots) leaves a false positive risk of 17 % at prior 0.5, even against an
> effect as large as the one observed, which errs in favour of the claim; the policy allows 5 %. One would have
> to be 79 % sure beforehand. If the effect is really this large, 29 plots per group would do (an effect found
> significant is more often too large than too small: plan on the smallest effect of interest); as it stands,
> call it suggestive.
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
from gatecheck.rules.mending import tell_mending, tell_prior_to_defend, would_do
from gatecheck.rules.rule import Judgement, Rule, Said, Table, every_claim, setting
from gatecheck.rules.weighed import EXEMPT, LOG_LIKELIHOOD_RATIO
from gatecheck.rules.words import tell_alternative, tell_odds, tell_prior, tell_result


@struct
class Settings(RuleSettings):
    """The risk of having no effect that a claim may leave."""

    _: KW_ONLY
    limit: Annotated[OpenProbability, "largest false positive risk allowed"]
    include_harm: Annotated[bool, "hold safety outcomes to this limit too"] = False


def judge(table: Table, settings: Sequence[Settings | None]) -> Judgement:
    """Short where the risk is above the limit."""
    risk, limit = table.evidence.false_positive_risk, setting(settings, "limit")
    short = risk > limit
    return Judgement(short, risk, limit, would_do(table, short, weigh.log_lr_needed(table.evidence.prior, limit)))


def explain(table: Table, row: int, settings: Settings, judgement: Judgement) -> Said:
    """What the result leaves as risk, what the policy allows, and what would mend it."""
    columns, evidence = table.columns, table.evidence
    log_lr, risk = float(evidence.log_likelihood_ratio[row]), float(evidence.false_positive_risk[row])
    ratio = f" (the data fit {tell_odds(log_lr)})" if log_lr < 0 else ""
    message = (
        f"{tell_result(columns, evidence, row)} leaves a false positive risk of {percent(risk, settings.limit)} "
        f"at {tell_prior(columns, evidence, row)}, {tell_alternative(columns, evidence, row)}{ratio}; "
        f"the policy allows {percent(settings.limit, settings.limit)}."
    )
    target = float(weigh.log_lr_needed(evidence.prior[row], settings.limit))
    defend = tell_prior_to_defend(table, row, settings.limit)
    return Said(message, f"{defend[0].upper()}{defend[1:]}. {tell_mending(table, row, target, judgement)}")


RULE = Rule(
    name="false-positive-risk",
    asks="the risk that there is no effect, given the result as observed, is within the limit",
    settings=Settings,
    judge=judge,
    explain=explain,
    needs=(LOG_LIKELIHOOD_RATIO,),
    exempt=EXEMPT,
    concerns=every_claim,
)
