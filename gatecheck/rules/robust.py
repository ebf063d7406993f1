"""Rule `robust`: the claim stands under every alternative and every prior that the policy lists.

Settings: `alternatives` and `priors`, all combinations of which are weighed; `limit`, the largest false positive
risk that any of them may leave; `include_harm` as in `false-positive-risk`. A record that does not allow one of the
alternatives is undecided. A prior that the record itself sets plays no part here.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import KW_ONLY
from typing import Annotated

import numpy as np

from gatecheck import weigh
from gatecheck.columns import Floats
from gatecheck.model.marks import OneOrMore
from gatecheck.model.record import OpenProbability
from gatecheck.model.shown import percent
from gatecheck.model.struct import struct
from gatecheck.policy import AlternativeName, RuleSettings
from gatecheck.rules.rule import Judgement, Rule, Said, Table, every_claim, setting
from gatecheck.rules.weighed import EXEMPT
from gatecheck.rules.words import tell_result


@struct
class Settings(RuleSettings):
    """Under what a claim must stand."""

    _: KW_ONLY
    alternatives: Annotated[tuple[AlternativeName, ...], OneOrMore(), "every alternative to weigh"]
    priors: Annotated[tuple[OpenProbability, ...], OneOrMore(), "every prior to weigh"]
    limit: Annotated[OpenProbability, "largest false positive risk that any of them may leave"]
    include_harm: Annotated[bool, "hold safety outcomes to this limit too"] = False


def judge(table: Table, settings: Sequence[Settings | None]) -> Judgement:
    """Short where the worst risk is above the limit, undecided where one of them cannot be weighed."""
    worst = np.array(
        [np.nan if each is None else _worst(table, row, each) for row, each in enumerate(settings)], np.float64
    )
    limit = setting(settings, "limit")
    return Judgement(worst > limit, worst, limit, known=np.isfinite(worst))


def explain(table: Table, row: int, settings: Settings, _: Judgement) -> Said:
    """The combination that leaves the greatest risk, or the alternative that cannot be weighed."""
    result = tell_result(table.columns, table.evidence, row)
    missing = [name for name in settings.alternatives if not np.isfinite(table.evidence.under[name][row])]
    if missing:
        message = f"{result} cannot be weighed under {' and '.join(missing)}, which the policy lists."
        return Said(message, "Give what that alternative needs, such as the effect planned and the sample sizes.")
    risks = _risks(table, row, settings)
    at, prior = np.unravel_index(np.argmax(risks), risks.shape)
    worst = percent(float(risks.max()), settings.limit)
    short = int((risks > settings.limit).sum())
    message = (
        f"{result} leaves a risk of {worst} under {settings.alternatives[at]} at prior "
        f"{settings.priors[prior]:.4g}, and is above the limit in {short} of {risks.size} combinations; "
        f"the policy wants at most {percent(settings.limit, settings.limit)} under each."
    )
    return Said(message, "Say for which prior and alternative the claim holds, or gather more data.")


def _risks(table: Table, row: int, settings: Settings) -> Floats:
    """Risks of shape (alternatives, priors)."""
    log_lr = np.array([table.evidence.under[name][row] for name in settings.alternatives])
    return weigh.false_positive_risk(log_lr[:, None], np.array(settings.priors))


def _worst(table: Table, row: int, settings: Settings) -> float:
    return float(_risks(table, row, settings).max())


RULE = Rule(
    name="robust",
    asks="the claim stands under every alternative and prior that the policy lists",
    settings=Settings,
    judge=judge,
    explain=explain,
    exempt=EXEMPT,
    concerns=every_claim,
)
