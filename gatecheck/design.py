"""How large a study must be for a true effect to meet the policy: the assurance of standing."""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

import numpy as np

from gatecheck import weigh
from gatecheck.columns import Floats
from gatecheck.design_tests import Plan, plan_of
from gatecheck.errors import CannotJudge, WrongUsage
from gatecheck.model.design import BareDesign, CurvePoint, Design, DesignQuestion, Least, Level, Need
from gatecheck.model.record import Record
from gatecheck.model.struct import struct
from gatecheck.policy import Applied, Policy
from gatecheck.weigh import assurance as of_standing
from gatecheck.weigh.long_run import long_run_false_positive_risk
from gatecheck.weigh.planned import Planned

ASSURANCES = (0.5, 0.8, 0.9, 0.95)
_POINTS = (0.05, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 0.95, 0.99)
_MOST_UNITS = 10**8
#: Sizes, evenly spaced in logarithms, between which the least one is looked for.
_LANDMARKS = 40
#: Several sizes at once cost hardly more than one: where a bracket of them is divided.
_PARTS = np.arange(1, 8) / 8
#: So many units (per group) allow whatever the test allows.
_SOME_UNITS = 100
_NEARLY_SURE = 1 - 1e-9
_USUAL_ALPHA, _USUAL_POWER = 0.05, 0.8
_WEIGHINGS = {
    "observed-effect": of_standing.Weighing.OBSERVED_EFFECT,
    "design-effect": of_standing.Weighing.DESIGN_EFFECT,
    "default-prior": of_standing.Weighing.DEFAULT_PRIOR,
    "bound": of_standing.Weighing.BOUND,
}


def design(question: DesignQuestion, policy: Policy) -> Design:
    """Answer how many units (per group) a true effect needs to meet `policy`.

    Raises
    ------
    WrongUsage
        The options do not go together, or the effect is no effect of that test, or no boundary keeps the level.
    CannotJudge
        The policy sets no limit on evidence that blocks, or weighs by what the test does not allow.
    """
    claim = Record("record/1", "design", claim="the planned effect", status="confirmatory", role="primary")
    applied = policy.for_record(claim, "design")
    plan = plan_of(question, applied.evidence.scale)
    prior = question.prior if question.prior is not None else applied.evidence.prior
    alternative, needs = _needs(plan, applied, prior)
    log_p_limits = _log_p_limits(question, applied)
    wanted = _Wanted(
        tuple((_WEIGHINGS[need.alternative], need.log_likelihood_ratio) for need in needs), log_p_limits
    )
    levels = sorted({*ASSURANCES, question.assurance})
    least = _least_sizes(plan, wanted, [*levels, *_POINTS])
    (bare,) = _least_sizes(plan, _Wanted((), (math.log(_USUAL_ALPHA),)), [_USUAL_POWER])
    serving = _at_sizes(plan, wanted, [*least, bare])
    return Design(
        question=question,
        policy=policy.document.name,
        alternative=alternative,
        prior=prior,
        needs=needs,
        log_p_limit=log_p_limits[-1],
        statistic=plan.test.statistic,
        levels=tuple(
            Level(level, None if n is None else serving[n]) for level, n in zip(levels, least, strict=False)
        ),
        curve=tuple(CurvePoint(n, each.assurance) for n, each in serving.items() if n in least),
        bare=None if bare is None else _bare(plan, _WEIGHINGS[alternative], prior, serving[bare]),
    )


@struct
class _Wanted:
    """What is wanted of a result: log likelihood ratios, each by a weighing, and the log of a p-value by look."""

    log_ratios: tuple[tuple[of_standing.Weighing, float], ...]
    log_p: tuple[float, ...]


def _needs(plan: Plan, applied: Applied, prior: float) -> tuple[str, tuple[Need, ...]]:
    """The alternative of the claim, and the strictest of what the blocking rules want under each alternative."""
    rules: Mapping[str, Any] = {name: each for name, each in applied.rules.items() if each.enforce == "block"}
    alternative = next((name for name in applied.evidence.alternative if _allows(plan, name)), None)
    if alternative is None:
        raise CannotJudge(
            f"the policy weighs by {' or '.join(applied.evidence.alternative)}, which {plan.named} does not allow",
            "name another alternative behind it in evidence.alternative of the policy",
        )
    targets: dict[str, list[float]] = defaultdict(list)
    if risk := rules.get("false-positive-risk"):
        targets[alternative].append(float(weigh.log_lr_needed(prior, risk.limit)))
    if needed := rules.get("prior-needed"):
        targets[alternative].append(float(weigh.log_lr_needed(needed.limit, needed.risk)))
    if robust := rules.get("robust"):
        for name in robust.alternatives:
            if not _allows(plan, name):
                raise CannotJudge(
                    f"the rule robust of the policy lists {name}, which {plan.named} does not allow: the "
                    "claim would be undecided",
                    "plan another test, or take that alternative out of the rule",
                )
            targets[name].append(float(weigh.log_lr_needed(min(robust.priors), robust.limit)))
    if not targets:
        raise CannotJudge(
            "the policy sets no limit on evidence that blocks",
            "name false-positive-risk, prior-needed or robust in it",
        )
    return alternative, tuple(Need(name, max(ratios)) for name, ratios in targets.items())


def _allows(plan: Plan, alternative: str) -> bool:
    """As the gate chooses: a ratio can be computed.

    Raises
    ------
    CannotJudge
        The gate would choose it, and what it rests on cannot be known from the design.
    """
    if alternative == "default-prior" and plan.asked.test == "log-rank" and not plan.one_sided:
        raise CannotJudge(
            "the default prior of log-rank rests on the number of units, which a design by events does not know",
            "put another alternative before it in the policy",
        )
    some = np.array([float(_SOME_UNITS)])
    planned = plan.at(some)
    return bool(np.isfinite(of_standing.log_lr(planned, _WEIGHINGS[alternative], np.ones_like(some))).all())


def _log_p_limits(question: DesignQuestion, applied: Applied) -> tuple[float, ...]:
    """The p that family and looks ask for at each look: Bonferroni over the family, at the boundary's level."""
    behind = {"family": question.family > 1, "looks": question.looks > 1}
    if not any(behind.values()):
        return (0.0,)
    levels = [getattr(applied.rules.get(rule), "alpha", _USUAL_ALPHA) for rule, there in behind.items() if there]
    alpha = min(levels) / question.family
    if question.looks == 1:
        return (math.log(alpha),)
    from gatecheck.weigh import spending  # noqa: PLC0415  # most designs have one look

    kind = spending.BoundaryKind[question.boundary.upper().replace("-", "_")]
    limits = spending.boundary(kind, np.arange(1, question.looks + 1), alpha, sides=question.sides)
    if np.isnan(limits).any():
        raise WrongUsage(
            f"A boundary {question.boundary} over {question.looks} looks cannot keep the level {alpha:.4g}: "
            "choose another --boundary, or a smaller --family."
        )
    with np.errstate(divide="ignore"):
        return tuple(np.log(spending.nominal_p(limits, sides=question.sides)).tolist())


def _standing(plan: Plan, wanted: _Wanted, n: Floats) -> tuple[Planned, Floats, Floats]:
    """The test at each number of units (per group), its least value, and the assurance."""
    *earlier, last = wanted.log_p
    planned = plan.at(n)
    least = of_standing.least_value(planned, wanted.log_ratios, last)
    assured = of_standing.assurance(planned, least)
    if earlier and not plan.asked.only_last_look:
        assured = assured + _by_earlier_looks(plan, wanted, n, assured)
    return planned, least, assured


def _by_earlier_looks(plan: Plan, wanted: _Wanted, n: Floats, at_last: Floats) -> Floats:
    """What equally spaced looks before the last add to the assurance, where one goes on until the claim stands.

    By the normal process of the looks, at each of which the same evidence is wanted from the units so far, and the
    p-value of its boundary.
    """
    from gatecheck.weigh import looks  # noqa: PLC0415  # most designs have one look

    information = np.arange(1, len(wanted.log_p) + 1) / len(wanted.log_p)
    limits = np.full((len(wanted.log_p), n.size), np.inf)
    for look, (share, log_p) in enumerate(zip(information, wanted.log_p, strict=True)):
        some = n * share >= plan.test.fewest
        planned = plan.at(n[some] * share)
        least = of_standing.least_value(planned, wanted.log_ratios, log_p)
        limits[look, some] = of_standing.as_z(planned, least)
    drift, added = plan.at(n).ncp, np.zeros_like(n)
    # Where the last look leaves next to nothing to add the drift may be beyond the integration.
    for row in np.flatnonzero(np.isfinite(limits[-1]) & (at_last < _NEARLY_SURE)):
        each, mean = limits[:, row], float(drift[row])
        over_all = looks.power_of_looks(each, information, mean, sides=plan.asked.sides)
        added[row] = over_all - looks.power_of_looks(each[-1:], information[-1:], mean, sides=plan.asked.sides)
    return np.clip(added, 0.0, 1 - at_last)


def _least_sizes(plan: Plan, wanted: _Wanted, levels: Sequence[float]) -> list[int | None]:
    """The least number of units (per group) from which on each assurance holds; `None` above a hundred million.

    With little evidence wanted a small study may stand where a somewhat larger one does not: the last landmark that
    falls short counts.
    """
    level = np.array(levels, np.float64)
    marks = np.unique(np.round(np.geomspace(plan.test.fewest, _MOST_UNITS, _LANDMARKS)))
    short = ~(_standing(plan, wanted, marks)[2][:, None] >= level)
    last_short = np.where(short.any(axis=0), marks.size - 1 - np.argmax(short[::-1], axis=0), -1)
    possible = last_short < marks.size - 1
    low = np.where(last_short >= 0, marks[last_short], marks[0] - 1)
    high = marks[np.minimum(last_short + 1, marks.size - 1)]
    while np.any(high - low > 1):
        inside = np.floor(low[:, None] + (high - low)[:, None] * _PARTS)
        inside = np.clip(inside, low[:, None] + 1, np.maximum(high - 1, low + 1)[:, None])
        tried, back = np.unique(inside, return_inverse=True)
        serves = _standing(plan, wanted, tried)[2][back].reshape(inside.shape) >= level[:, None]
        low = np.where(serves, low[:, None], inside).max(axis=1)
        high = np.where(serves & (inside > low[:, None]), inside, high[:, None]).min(axis=1)
    return [int(n) if each else None for n, each in zip(high, possible, strict=True)]


def _at_sizes(plan: Plan, wanted: _Wanted, sizes: Iterable[int | None]) -> Mapping[int, Least]:
    """What serves at each of the sizes that there are, in order."""
    found = np.array(sorted({n for n in sizes if n is not None}), np.float64)
    planned, values, assured = _standing(plan, wanted, found)
    p = np.exp(of_standing.log_p_of(planned, values))
    shown = weigh.r_from_t(values, planned.df1) if plan.test.statistic == "r" else values
    rows = zip(map(int, found), shown, p, assured, strict=True)
    return {n: Least(plan.size(n), *map(float, row)) for n, *row in rows}


def _bare(plan: Plan, weighing: of_standing.Weighing, prior: float, least: Least) -> BareDesign:
    """What a study of that size gives, and the risk that a result just significant at 0.05 leaves in it."""
    planned = plan.at(np.array([float(least.size.n)]))
    just = of_standing.value_at(planned, math.log(_USUAL_ALPHA))
    risk = weigh.false_positive_risk(of_standing.log_lr(planned, weighing, just), prior)
    long_run = long_run_false_positive_risk(_USUAL_ALPHA, _USUAL_POWER, prior)
    return BareDesign(least.size, least.assurance, float(risk[0]), float(long_run))
