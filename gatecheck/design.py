"""How large a study must be for a true effect to meet the policy: the assurance of standing."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence

import numpy as np

from gatecheck import weigh
from gatecheck.columns import Floats
from gatecheck.errors import CannotJudge
from gatecheck.model.design import BareDesign, CurvePoint, Design, DesignQuestion
from gatecheck.model.record import Record
from gatecheck.model.struct import struct
from gatecheck.policy import Applied, Policy
from gatecheck.weigh import assurance as of_standing
from gatecheck.weigh.long_run import long_run_false_positive_risk

ASSURANCES = (0.5, 0.8, 0.9, 0.95)
_POINTS = (0.05, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 0.95, 0.99)
_MOST_UNITS = 10**8
_USUAL_ALPHA, _USUAL_POWER = 0.05, 0.8
_WEIGHINGS = {
    "observed-effect": of_standing.Weighing.OBSERVED_EFFECT,
    "design-effect": of_standing.Weighing.DESIGN_EFFECT,
    "bound": of_standing.Weighing.BOUND,
}


@struct
class _Layout:
    """How df and non-centrality of the planned effect follow from the number of units (per group)."""

    fewest: int
    df: Callable[[Floats], Floats]
    ncp: Callable[[Floats, float], Floats]


_LAYOUTS = {
    "two-sample-t": _Layout(2, lambda n: 2 * n - 2, lambda n, effect: effect * np.sqrt(n / 2)),
    "one-sample-t": _Layout(2, lambda n: n - 1, lambda n, effect: effect * np.sqrt(n)),
    "two-proportions": _Layout(1, lambda n: np.full_like(n, np.inf), lambda n, effect: effect * np.sqrt(n / 2)),
    "correlation": _Layout(4, lambda n: n - 2, lambda n, effect: effect * np.sqrt(n / (1 - effect**2))),
}


@struct
class _Wanted:
    """What the policy wants of a result: evidence and p, and against what it is weighed."""

    weighing: of_standing.Weighing
    log_lr: float
    log_p: float


def design(question: DesignQuestion, policy: Policy) -> Design:
    """Answer how many units (per group) a true effect needs to meet `policy`.

    Raises
    ------
    CannotJudge
        The policy sets no limit on evidence, or the effect is no effect of that test.
    """
    if not 0 < question.effect < (1 if question.test == "correlation" else math.inf):
        raise CannotJudge(
            f"{question.effect:g} is no effect of {question.test}", "give a size above 0 (r: below 1)"
        )
    claim = Record("record/1", "design", claim="the planned effect", status="confirmatory", role="primary")
    applied = policy.for_record(claim, "design")
    prior = question.prior if question.prior is not None else applied.evidence.prior
    wanted = _wanted(question, applied, prior)
    plain = _Wanted(of_standing.Weighing.BOUND, 0.0, math.log(_USUAL_ALPHA))
    (bare,) = _least_n(question, plain, (_USUAL_POWER,))
    levels = sorted({*ASSURANCES, question.assurance})
    sizes = _least_n(question, wanted, levels)
    on_curve = np.array(sorted({n for n in _least_n(question, wanted, _POINTS) if n is not None}), np.float64)
    assured = _standing(question, wanted, on_curve)
    return Design(
        question=question,
        policy=policy.document.name,
        alternative=applied.evidence.alternative[0],
        prior=prior,
        log_likelihood_ratio=wanted.log_lr,
        sizes=tuple(zip(levels, sizes, strict=True)),
        curve=tuple(CurvePoint(int(n), float(each)) for n, each in zip(on_curve, assured, strict=True)),
        bare=None if bare is None else _bare(question, wanted, prior, bare),
    )


def _wanted(question: DesignQuestion, applied: Applied, prior: float) -> _Wanted:
    """The strictest of what the policy's rules on evidence, the family and the looks ask for."""
    risk = applied.rules.get("false-positive-risk")
    needed = applied.rules.get("prior-needed")
    targets = []
    if risk is not None:
        targets.append(float(weigh.log_lr_needed(prior, getattr(risk, "limit", math.nan))))
    if needed is not None:
        limit, wanted_risk = getattr(needed, "limit", math.nan), getattr(needed, "risk", math.nan)
        targets.append(float(weigh.log_lr_needed(limit, wanted_risk)))
    if not targets:
        raise CannotJudge("the policy sets no limit on evidence", "name false-positive-risk or prior-needed in it")
    named = applied.evidence.alternative[0]
    if named not in _WEIGHINGS:
        raise CannotJudge(f"a design is not weighed by {named}", "name another alternative first in the policy")
    return _Wanted(_WEIGHINGS[named], max(targets), _log_p_limit(question))


def _log_p_limit(question: DesignQuestion) -> float:
    """The p that family and looks ask for at the last look: Bonferroni over the family, at the boundary's level."""
    if question.family == 1 and question.looks == 1:
        return 0.0
    alpha = _USUAL_ALPHA / question.family
    if question.looks == 1:
        return math.log(alpha)
    from gatecheck.weigh import spending  # noqa: PLC0415  # most designs have one look

    kind = spending.BoundaryKind[question.boundary.upper().replace("-", "_")]
    limits = spending.boundary(kind, np.arange(1, question.looks + 1), alpha)
    return math.log(float(spending.nominal_p(limits)[-1]))


def _standing(question: DesignQuestion, wanted: _Wanted, n: Floats) -> Floats:
    """The assurance at each number of units (per group)."""
    layout = _LAYOUTS[question.test]
    df, ncp = layout.df(n), layout.ncp(n, question.effect)
    least = of_standing.least_t(wanted.weighing, df, ncp, wanted.log_lr, wanted.log_p)
    if question.test == "correlation":
        return of_standing.assurance_of_correlation(least, n, question.effect)
    return of_standing.assurance(least, df, ncp)


def _least_n(question: DesignQuestion, wanted: _Wanted, levels: Sequence[float]) -> list[int | None]:
    """The least number of units (per group) with at least each assurance; `None` above a hundred million."""
    level = np.array(levels, np.float64)
    low = np.full_like(level, _LAYOUTS[question.test].fewest - 1)
    high = np.full_like(level, _MOST_UNITS)
    possible = _standing(question, wanted, high) >= level
    while np.any(high - low > 1):
        middle = np.floor((low + high) / 2)
        serves = _standing(question, wanted, middle) >= level
        low, high = np.where(serves, low, middle), np.where(serves, middle, high)
    return [int(n) if each else None for n, each in zip(high, possible, strict=True)]


def _bare(question: DesignQuestion, wanted: _Wanted, prior: float, n: int) -> BareDesign:
    """What a study of that size gives, and the risk that a result just significant at 0.05 leaves in it."""
    units = np.array([float(n)])
    layout = _LAYOUTS[question.test]
    df, ncp = layout.df(units), layout.ncp(units, question.effect)
    log_p = math.log(_USUAL_ALPHA)
    t = weigh.t_from_log_p(log_p, df, one_sided=False)
    log_lr = {
        of_standing.Weighing.BOUND: lambda: weigh.log_lr_bound(log_p),
        of_standing.Weighing.DESIGN_EFFECT: lambda: weigh.log_lr_t(t, df, ncp, one_sided=False),
        of_standing.Weighing.OBSERVED_EFFECT: lambda: weigh.observed_t(t, df, one_sided=False),
    }[wanted.weighing]()
    risk = weigh.false_positive_risk(log_lr, prior)
    long_run = long_run_false_positive_risk(_USUAL_ALPHA, _USUAL_POWER, prior)
    return BareDesign(n, float(_standing(question, wanted, units)[0]), float(np.ravel(risk)[0]), float(long_run))
