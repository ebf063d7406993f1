"""The course of one record through the history: what it was after each commit, and what its evidence was then."""

from __future__ import annotations

import math
from collections.abc import Collection, Sequence
from dataclasses import replace
from pathlib import Path

from gatecheck.columns import Columns, columns_of
from gatecheck.compare.looks import equal_steps, look_facts, real_error
from gatecheck.errors import CannotJudge
from gatecheck.evidence import Evidence, weigh_columns
from gatecheck.history.looks import (
    Asked,
    gaps_of,
    gone_for,
    looks_of,
    names_of,
    past_of,
    versions_of,
    with_doubts,
)
from gatecheck.history.records import Version
from gatecheck.history.seen import Told, distinct, looks_seen
from gatecheck.history.walk import history_of
from gatecheck.model.found import Found
from gatecheck.model.looks_seen import ClaimChange, Course, LooksSeen, Step, Unreadable
from gatecheck.model.promise import Promise
from gatecheck.model.record import Record, Test
from gatecheck.model.shown import decimal
from gatecheck.policy import Policy
from gatecheck.rules.words import tell_number, tell_statistic
from gatecheck.scan import scan_for

_USUAL_ALPHA = 0.05


def trace(root: Path, policy: Policy, record_id: str, base: str | None = None) -> Course | None:
    """Return the course of the record `record_id`, which may also be one of its earlier ids.

    All commits that lead to `HEAD` count, and then the tree as it is. Each result is weighed as the policy asks
    for the record as it was then. `None` where neither the tree nor the history has such a record.

    Raises
    ------
    CannotJudge
        There is no repository, git fails, or the record may be in a part of the history that is not here.
    """
    globs = policy.document.scan
    now = _in_tree(root, record_id, globs.include, globs.exclude)
    found = () if now is None else (now,)
    names = (record_id,) if now is None else names_of(now)
    past = past_of(Asked(root, found, globs.include, globs.exclude), frozenset(names), base)
    recorded = past.recorded
    versions = recorded.versions(recorded.lineage(names)) if now is None else versions_of(now, past)
    if not versions and past.doubt:
        why, advice = past.doubt
        raise CannotJudge(f"neither the tree nor what is here of the history has that record: {why}", advice)
    if not versions:
        return None
    last = versions[-1].found
    looks = with_doubts(looks_seen(versions, past.line), past, names) if now is None else looks_of(now, past)
    alpha, sides = _level(policy, last)
    steps, assumed = _steps(versions, past.line, policy)
    return Course(
        id=last.record.id,
        steps=steps,
        looks=looks,
        alpha=alpha,
        sides=sides,
        error=real_error(looks.information or equal_steps(max(1, len(looks.looks))), alpha, sides),
        planned=_planned(last, looks, _promise(root, policy, last, base), alpha),
        in_tree=now is not None,
        assumed=assumed,
        maybe_before=() if now is None or not looks.known else gone_for(now, past),
        unreadable=tuple(Unreadable(gap.commit.id, gap.path, gap.message) for gap in gaps_of(recorded, names)),
    )


def _promise(root: Path, policy: Policy, found: Found, base: str | None) -> Promise | None:
    """What stands behind the plan that a record names."""
    if found.record.plan is None:
        return None
    from gatecheck.plans.promise import promises  # noqa: PLC0415  # most records name no plan

    line, globs = history_of(root, base or "HEAD"), policy.document.scan
    made = promises(root, [found], line, policy.document.plans, include=globs.include, exclude=globs.exclude)
    return made.promises[0]


def _planned(found: Found, looks: LooksSeen, promise: Promise | None, alpha: float) -> str:
    """What was planned for the looks at a record, in sentences; empty where nothing was."""
    (facts,) = look_facts(columns_of([found]), [alpha], [looks], [promise])
    if facts is None or not facts.planned:
        return "" if facts is None or not facts.plan.late else f"They come {facts.plan.late}."
    plan = facts.plan
    if plan.boundary is None or plan.planned is None:
        return plan.why
    limit = f", with a nominal p of {decimal(facts.limit)} there" if math.isfinite(facts.limit) else ""
    told = f"This is look {facts.number} of {plan.planned}, by the {plan.boundary} boundary that {plan.by}{limit}."
    return f"{told} {plan.why}".strip()


def _in_tree(root: Path, record_id: str, include: Sequence[str], exclude: Sequence[str]) -> Found | None:
    """Return the record with that id, else the first one that has it among its aliases."""
    found = scan_for(root, [record_id], include, exclude)
    own = next((one for one in found if one.record.id == record_id), None)
    later = {one.record.id for one in found if record_id in one.record.aliases}
    if own is not None or not later:
        return own
    # Another file may hold one of their ids at an earlier place, and then that record stands in the tree.
    found = scan_for(root, later, include, exclude)
    return next((one for one in found if record_id in one.record.aliases), None)


def _level(policy: Policy, found: Found) -> tuple[float, int]:
    """The level at which a record is tested, and on how many sides."""
    test = found.record.test or Test()
    asked: float = getattr(policy.for_record(found.record, found.at.path).rules.get("looks"), "alpha", _USUAL_ALPHA)
    return asked if test.alpha is None else test.alpha, test.sides or 2


def _steps(
    versions: Sequence[Version], line: Collection[str], policy: Policy
) -> tuple[tuple[Step, ...], tuple[tuple[str, float], ...]]:
    """Return a step for each version that differs from the one before it, and under what they were weighed."""
    kept = [each for row, each in enumerate(versions) if not row or each.digest != versions[row - 1].digest]
    # The versions of a record are no further evidence beside it.
    settings = [
        replace(policy.for_record(each.record, each.place.path).evidence, together="apart") for each in kept
    ]
    columns = columns_of([each.found for each in kept])
    evidence = weigh_columns(columns, settings)
    results = {version: told for told in distinct(versions, line) for version in told.versions}
    steps = []
    for row, version in enumerate(kept):
        p, risk = _p_and_risk(columns, evidence, row)
        on_line = version.commit is None or version.commit.id in line
        before = kept[row - 1].record if row else None
        steps.append(_step(version, results[version], before, (p, risk), on_line=on_line))
    names = zip(evidence.alternative, evidence.prior, strict=True)
    return tuple(steps), tuple(sorted({(name, float(prior)) for name, prior in names if name}))


def _p_and_risk(columns: Columns, evidence: Evidence, row: int) -> tuple[str, float | None]:
    """The p of a result as it was told, else that of its statistic; and its risk, where it can be weighed."""
    test = columns.found[row].record.test or Test()
    p = math.exp(evidence.statistics.log_p[row])
    told = tell_number(test.p) if test.p else decimal(p) if math.isfinite(p) else ""
    risk = float(evidence.false_positive_risk[row])
    return told, risk if math.isfinite(risk) and not columns.no_effect_aim[row] else None


def _step(
    version: Version, told: Told, before: Record | None, figures: tuple[str, float | None], *, on_line: bool
) -> Step:
    record, commit = version.record, version.commit
    renamed = before is not None and before.id != record.id
    return Step(
        commit=None if commit is None else commit.id,
        day="" if commit is None else commit.day,
        size=told.size,
        statistic=_statistic(record.test or Test()),
        p=figures[0],
        risk=figures[1],
        change=told.change if version is told.versions[0] else "rerun",
        first=before is None,
        claim=_claim(None if before is None else before.claim, record.claim),
        id_before=before.id if renamed and before is not None else None,
        on_line=on_line,
    )


def _statistic(test: Test) -> str:
    return tell_statistic(test) or test.statistic or test.name or ""


def _claim(before: str | None, now: str | None) -> ClaimChange:
    if before == now:
        return "kept"
    if before is None:
        return "added"
    return "taken out" if now is None else "changed"
