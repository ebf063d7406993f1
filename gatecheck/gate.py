"""The runner: scan, weigh, compare, judge, tell. Start reading here.

Data flows one way: files become records or problems, records become columns, columns become evidence and facts,
these become findings, and findings become the verdict, from which everything that is shown follows.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import field, replace
from datetime import UTC, date, datetime
from pathlib import Path
from typing import TYPE_CHECKING

from gatecheck import __version__
from gatecheck.beyond import Tree, judge_beyond_records, judge_plans
from gatecheck.columns import columns_of, with_promised, with_trusted_priors
from gatecheck.compare.own_numbers import own_numbers
from gatecheck.errors import CannotJudge
from gatecheck.evidence import weigh_columns
from gatecheck.facts import Asked, Facts, look_up
from gatecheck.figures import FigureTable
from gatecheck.interval_figures import interval_of
from gatecheck.model.found import Found, Scan
from gatecheck.model.progress import Progress
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Figures, Finding, Judged, Place, Problem, Verdict
from gatecheck.notes import (
    note_on_proposed,
    notes_on_apart,
    notes_on_moved,
    notes_on_plans,
    notes_on_priors,
    notes_on_priors_changed,
    notes_on_priors_of_plans,
)
from gatecheck.permissions import Setting, Settled, permitted
from gatecheck.permissions.commits import judged_commit
from gatecheck.policies import Standing, standing_policy
from gatecheck.policy import Applied, Policy
from gatecheck.pull_request import Base, SinceBase, since_base
from gatecheck.rules import NAMES, rules_among
from gatecheck.rules.engine import judge_all
from gatecheck.rules.rule import Table
from gatecheck.rules.words import describe_result
from gatecheck.scan import scan

if TYPE_CHECKING:
    from gatecheck.history.departure import ChangedFiles, Departure
    from gatecheck.model.plan import Hypothesis
    from gatecheck.model.promise import Promise

WHOLE_TREE = Place(".")


@struct
class Request:
    """What is to be judged.

    `policy` names the policy file relative to `root`; `base` is the revision into which a pull request goes:
    its policy counts. With `only_changed` only claims that are new or changed since `base` decide. Records in
    `explain` are told in full. `today` counts for waivers where no commit tells the day,
    and `progress` is told how far the work has come.
    """

    root: Path
    policy: str | None = None
    base: str | None = None
    only_changed: bool = False
    explain: frozenset[str] = field(default=frozenset())
    today: date = field(default_factory=lambda: datetime.now(UTC).date())
    progress: Progress | None = None


def check(request: Request) -> Verdict:
    """Judge every record below `request.root`; what stops the gate is a problem of the verdict."""
    try:
        departed = _departure(request)
        commit = None if departed is None else departed.commit
        standing = standing_policy(request.root, request.policy, request.base, commit)
        if standing.policy is None:
            return Verdict(standing.used, (), standing.problems, standing.notes)
        return _check(request, standing, standing.policy, departed)
    except CannotJudge as stop:
        return Verdict(None, (), (Problem(WHOLE_TREE, stop.message, stop.advice),))


def _departure(request: Request) -> Departure | None:
    if request.base is None:
        return None
    from gatecheck.history.departure import departure  # noqa: PLC0415  # there is no request without a base

    return departure(request.root, request.base)


def _check(request: Request, standing: Standing, policy: Policy, departed: Departure | None) -> Verdict:
    globs = policy.document.scan
    tree = scan(request.root, globs.include, globs.exclude, progress=request.progress)
    pull = None if departed is None else _pull(request, policy, tree, departed)
    state = _judge_all(request, tree, pull, policy)
    return Verdict(
        policy=standing.used,
        judged=state.judged,
        problems=(*tree.problems, *state.problems, *_too_few(tree, policy)),
        notes=(
            *standing.notes,
            *state.notes,
            *_notes_on_proposed(request, state, standing.proposed),
            *_notes_on_pull(request, state),
            *notes_on_priors(state.table),
            *notes_on_apart(state.table),
        ),
        changes=() if pull is None else pull.since.changes,
        base=None if pull is None else pull.departed.base,
        head=judged_commit(request.root),
        plans=state.facts.plan_digests,
        version=__version__,
    )


@struct
class _Pull:
    """A tree as a request into its base: where it departs from it, which files it changes, and its records."""

    departed: Departure
    files: ChangedFiles
    since: SinceBase


@struct
class _State:
    """A tree judged by one policy, with what it was judged on."""

    tree: Scan
    pull: _Pull | None
    table: Table
    facts: Facts
    judged: tuple[Judged, ...]
    problems: tuple[Problem, ...]
    notes: tuple[str, ...]


def _judge_all(request: Request, tree: Scan, pull: _Pull | None, policy: Policy) -> _State:
    applied = tuple(policy.for_record(one.record, one.at.path) for one in tree.found)
    facts = look_up(Asked(request.root, request.base, policy), tree.found, applied)
    _tell(request, "Weighing {1:,} records", tree)
    table = _table(tree, applied, None if pull is None else pull.since, facts)
    _tell(request, "Judging {1:,} records", tree)
    whole = _whole(request, tree, pull, policy)
    settled = _settled(request, table, judge_plans(whole, facts))
    _tell(request, "Telling what came of {1:,} records", tree)
    records = _judge(request, table, pull, settled)
    others, unread = judge_beyond_records(whole, facts, table, records)
    problems = (*facts.problems, *settled.problems, *unread)
    return _State(tree, pull, table, facts, (*records, *settled.plans, *others), problems, settled.notes)


def _tell(request: Request, sentence: str, tree: Scan) -> None:
    if request.progress is not None:
        request.progress(sentence, 0, len(tree.found))


def _whole(request: Request, tree: Scan, pull: _Pull | None, policy: Policy) -> Tree:
    if pull is None:
        return Tree(request.root, policy, tree.found)
    gained = _gained(request, pull)
    if not request.only_changed:
        return Tree(request.root, policy, tree.found, gained=gained)
    return Tree(request.root, policy, tree.found, pull.departed.commit, pull.since.base, gained)


def _gained(request: Request, pull: _Pull) -> frozenset[str]:
    """The files that the base has added since a request departed, and that it does not add itself."""
    if pull.departed.commit == pull.departed.base:
        return frozenset()
    from gatecheck.history.departure import gained  # noqa: PLC0415  # there is no request without a base

    return frozenset(path for path in gained(request.root, pull.departed) if pull.files.at(path) is None)


def _pull(request: Request, policy: Policy, tree: Scan, departed: Departure) -> _Pull:
    from gatecheck.history.departure import changed_files  # noqa: PLC0415  # there is no request without a base

    globs = policy.document.scan
    found = {
        revision: scan(request.root, globs.include, globs.exclude, revision, request.progress).found
        for revision in {departed.commit, departed.base}
    }
    files = changed_files(request.root, departed.commit)
    base = Base(found[departed.commit], found[departed.base], lambda path: files.at(path) is not None)
    return _Pull(departed, files, since_base(tree.found, base))


def _explained(request: Request, table: Table) -> frozenset[int]:
    return frozenset(row for row, one in enumerate(table.columns.found) if one.record.id in request.explain)


def _settled(request: Request, table: Table, plans: Sequence[Judged]) -> Settled:
    """What the rules find, and what of it is permitted all the same."""
    setting = Setting(request.root, request.base, request.today, NAMES)
    rules = rules_among(name for applied in table.applied for name in applied.rules)
    findings = judge_all(rules, table, explain=_explained(request, table))
    return permitted(setting, findings, table.columns.found, plans)


def _judge(request: Request, table: Table, pull: _Pull | None, settled: Settled) -> tuple[Judged, ...]:
    found, findings, explained = table.columns.found, settled.findings, _explained(request, table)
    unchanged: frozenset[str] = frozenset()
    if pull is not None and request.only_changed:
        unchanged = pull.since.unchanged - pull.since.moved.keys()
    figures = FigureTable(table)
    return tuple(
        replace(
            _judged(one, findings[row], figures.of_row(row, in_full=row in explained), unchanged),
            sensitivity=figures.sensitivity(row) if row in explained else None,
        )
        for row, one in enumerate(found)
    )


def _table(tree: Scan, applied: tuple[Applied, ...], since: SinceBase | None, facts: Facts) -> Table:
    columns = columns_of(tree.found)
    if since is not None:
        columns = with_trusted_priors(columns, since.trusted)
    if any(facts.promises):
        columns = with_promised(columns, [_promised(each, since) for each in facts.promises])
    evidence = weigh_columns(columns, [each.evidence for each in applied])
    return Table(
        columns,
        evidence,
        own_numbers(columns, evidence),
        applied,
        promises=facts.promises,
        looks_seen=facts.looks_seen,
        inputs=facts.inputs,
        tests_behind=facts.tests_behind,
        families_before={} if since is None else since.families,
    )


def _promised(promise: Promise | None, since: SinceBase | None) -> Hypothesis | None:
    """What a plan promises; of one that the base does not have, its prior does not count for the request."""
    if promise is None or promise.hypothesis is None:
        return None
    on_base = since is None or promise.frozen_at is not None
    return promise.hypothesis if on_base else replace(promise.hypothesis, prior=None)


def _notes_on_pull(request: Request, state: _State) -> tuple[str, ...]:
    pull, table, facts = state.pull, state.table, state.facts
    if pull is None:
        return ()
    moved = pull.since.moved if request.only_changed else {}
    proposed: tuple[float | None, ...] = ()
    if any(facts.promises):
        from gatecheck.plans.proposed import priors_proposed  # noqa: PLC0415  # most trees name no plan

        proposed = priors_proposed(request.root, facts.promises, pull.files.at)
    return (
        *([pull.departed.told] if pull.departed.told else []),
        *notes_on_moved(moved),
        *notes_on_plans(facts.promises, facts.plans, pull.files.at, pull.departed.base),
        *notes_on_priors_of_plans(table, proposed),
        *notes_on_priors_changed(table, pull.since),
    )


def _notes_on_proposed(request: Request, state: _State, proposed: Policy | None) -> tuple[str, ...]:
    if proposed is None:
        return ()
    try:
        other = _judge_all(request, state.tree, state.pull, proposed)
    except CannotJudge as stop:
        return (f"What the policy proposed here would say cannot be told: {stop.message}; {stop.advice}.",)
    return (note_on_proposed(state.judged, other.judged),)


def _judged(
    one: Found,
    findings: Sequence[Finding],
    figures: tuple[Figures | None, tuple[Figures, ...]],
    unchanged: frozenset[str],
) -> Judged:
    chosen, others = figures
    return Judged(
        id=one.record.id,
        at=one.at,
        claim=one.record.claim,
        result=describe_result(one.record),
        evidence=chosen,
        findings=tuple(findings),
        also_at=one.also_at,
        counts_now=one.record.id not in unchanged,
        alternatives=others,
        interval=interval_of(one.record),
    )


def _too_few(tree: Scan, policy: Policy) -> tuple[Problem, ...]:
    least = policy.document.at_least
    if len(tree.found) >= least:
        return ()
    seen = f"{len(tree.found)} records in {tree.files} files, and the policy wants at least {least}"
    advice = "see with `gatecheck survey` what was found; check scan.include and scan.exclude of the policy"
    return (Problem(WHOLE_TREE, f"the tree holds {seen}", advice),)
