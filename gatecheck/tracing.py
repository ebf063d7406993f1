"""The course of one record through the history: what it was after each commit, and what its evidence was then."""

from __future__ import annotations

import math
from collections.abc import Collection, Iterator, Sequence
from dataclasses import replace
from pathlib import Path

from gatecheck.columns import Columns, columns_of
from gatecheck.compare.looks import real_error
from gatecheck.errors import CannotJudge
from gatecheck.evidence import Evidence, weigh_columns
from gatecheck.history.looks import doubt_of, gaps_of, names_of, versions_of, with_doubts
from gatecheck.history.records import Version, records_in, versions_with_aliases
from gatecheck.history.seen import Told, distinct, looks_seen
from gatecheck.history.walk import history_of, line_of
from gatecheck.model.found import Found
from gatecheck.model.looks_seen import ClaimChange, Course, Step, Unreadable
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
    history = history_of(root, first_parent=False)
    now = _in_tree(root, record_id, globs.include, globs.exclude)
    names = (record_id,) if now is None else names_of(now)
    recorded = versions_with_aliases(root, history, frozenset(names), globs.include, globs.exclude)
    versions = recorded.versions(recorded.lineage(names)) if now is None else versions_of(now, history, recorded)
    if not versions and (doubt := doubt_of(history, recorded)):
        raise CannotJudge(f"neither the tree nor what is here of the history has that record: {doubt[0]}", doubt[1])
    if not versions:
        return None
    line = line_of(history, base)
    looks = with_doubts(looks_seen(versions, line), history, recorded, names)
    last = versions[-1]
    alpha = _alpha(policy, last.found)
    steps, assumed = _steps(versions, line, policy)
    return Course(
        last.record.id,
        steps,
        looks,
        alpha,
        real_error(max(1, len(looks.looks)), alpha),
        now is not None,
        assumed,
        tuple(_maybe_before(root, versions[0], recorded.lineage(names))),
        tuple(Unreadable(gap.commit.id, gap.path, gap.message) for gap in gaps_of(recorded, names)),
    )


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


def _alpha(policy: Policy, found: Found) -> float:
    own = found.record.test.alpha if found.record.test else None
    asked: float = getattr(policy.for_record(found.record, found.at.path).rules.get("looks"), "alpha", _USUAL_ALPHA)
    return asked if own is None else own


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


def _maybe_before(root: Path, first: Version, lineage: frozenset[str]) -> Iterator[str]:
    """The ids that stood in the same file for the same hypothesis, until the first version took their place."""
    plan, commit = first.record.plan, first.commit
    if plan is None or plan.hypothesis is None or commit is None:
        return
    change = next(each for each in commit.changes if each.path == first.path)
    before = records_in(root, change.before, change.path)
    after = {record.id for record in records_in(root, change.after, change.path)}
    for record in before:
        told = record.plan
        same = told is not None and (told.file, told.hypothesis) == (plan.file, plan.hypothesis)
        if same and record.id not in after | lineage:
            yield record.id
