"""Rule `robust`: the claim stands under every alternative and every prior that the policy lists.

Settings: `alternatives` and `priors`, all combinations of which are weighed; `limit`, the largest false positive
risk that any of them may leave; `include_harm` as in `false-positive-risk`. A record that does not allow one of the
alternatives is undecided, unless another one leaves too much already. A prior that the record itself sets plays no
part here.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import KW_ONLY
from typing import Annotated

import numpy as np

from gatecheck import weigh
from gatecheck.columns import Floats
from gatecheck.evidence import why_not_under
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
    """Short where the worst risk is above the limit, undecided where a risk is not known and the others are not."""
    rows = [None if each is None else _risks(table, row, each) for row, each in enumerate(settings)]
    worst = np.array([np.nan if risks is None else _worst(risks) for risks in rows], np.float64)
    whole = np.array([risks is not None and bool(np.isfinite(risks).all()) for risks in rows], np.bool_)
    limit = setting(settings, "limit")
    return Judgement(worst > limit, worst, limit, known=whole | (worst > limit))


def explain(table: Table, row: int, settings: Settings, _: Judgement) -> Said:
    """The combination that leaves the greatest risk, or the alternative that cannot be weighed."""
    result = tell_result(table.columns, table.evidence, row)
    missing = [name for name in settings.alternatives if not np.isfinite(table.evidence.under[name][row])]
    risks = _risks(table, row, settings)
    worst, short = _worst(risks), int((risks > settings.limit).sum())
    if missing and not short:
        why, advice = why_not_under(table.columns, row, missing[0])
        names = " and ".join(missing)
        message = f"{result} cannot be weighed under {names}, which the policy lists: {why}."
        return Said(message, f"{advice[0].upper()}{advice[1:]}.")
    at, prior = np.unravel_index(np.nanargmax(risks), risks.shape)
    weighed = int(np.isfinite(risks).sum())
    unknown = f", though {' and '.join(missing)} cannot be weighed" if missing else ""
    message = (
        f"{result} leaves a risk of {percent(worst, settings.limit)} under {settings.alternatives[at]} at prior "
        f"{settings.priors[prior]:.4g}, and is above the limit in {short} of {weighed} combinations{unknown}; "
        f"the policy wants at most {percent(settings.limit, settings.limit)} under each."
    )
    return Said(message, "Say for which prior and alternative the claim holds, or gather more data.")


def _risks(table: Table, row: int, settings: Settings) -> Floats:
    """Risks of shape (alternatives, priors)."""
    log_lr = np.array([table.evidence.under[name][row] for name in settings.alternatives])
    return weigh.false_positive_risk(log_lr[:, None], np.array(settings.priors))


def _worst(risks: Floats) -> float:
    """The greatest of the risks that are known."""
    known = risks[np.isfinite(risks)]
    return float(known.max()) if known.size else math.nan


RULE = Rule(
    name="robust",
    asks="the claim stands under every alternative and prior that the policy lists",
    settings=Settings,
    judge=judge,
    explain=explain,
    exempt=EXEMPT,
    concerns=every_claim,
)
