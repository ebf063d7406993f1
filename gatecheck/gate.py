"""The runner: scan, weigh, compare, judge, tell. Start reading here.

Data flows one way: files become records or problems, records become columns, columns become evidence and facts,
these become findings, and findings become the verdict, from which everything that is shown follows.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import field, replace
from pathlib import Path

from gatecheck import git
from gatecheck.columns import columns_of
from gatecheck.compare.own_numbers import own_numbers
from gatecheck.errors import CannotJudge
from gatecheck.evidence import weigh_columns
from gatecheck.figures import FigureTable
from gatecheck.model.found import Found, Scan
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Figures, Finding, Judged, Place, Problem, Verdict
from gatecheck.policies import Standing, standing_policy
from gatecheck.policy import Policy
from gatecheck.rules import RULES
from gatecheck.rules.engine import judge_all
from gatecheck.rules.rule import Table
from gatecheck.rules.words import describe_result
from gatecheck.scan import scan

WHOLE_TREE = Place(".")
_MOST_NAMED = 5


@struct
class Request:
    """What is to be judged.

    `policy` names the policy file relative to `root`; `base` is the revision into which a pull request goes:
    its policy counts. With `only_changed` only claims that are new or changed since `base` decide. Records in
    `explain` are told in full.
    """

    root: Path
    policy: str | None = None
    base: str | None = None
    only_changed: bool = False
    explain: frozenset[str] = field(default=frozenset())


def check(request: Request) -> Verdict:
    """Judge every record below `request.root`; what stops the gate is a problem of the verdict."""
    try:
        standing = standing_policy(request.root, request.policy, request.base)
        if standing.policy is None:
            return Verdict(standing.used, (), standing.problems, standing.notes)
        return _check(request, standing, standing.policy)
    except CannotJudge as stop:
        return Verdict(None, (), (Problem(WHOLE_TREE, stop.message, stop.advice),))


def _check(request: Request, standing: Standing, policy: Policy) -> Verdict:
    globs = policy.document.scan
    tree = scan(request.root, globs.include, globs.exclude)
    table = _table(tree, policy)
    explained = frozenset(row for row, one in enumerate(tree.found) if one.record.id in request.explain)
    findings = judge_all(RULES, table, explain=explained)
    since = request.base if request.only_changed else None
    unchanged = frozenset() if since is None else _unchanged(request.root, since, policy, tree.found)
    figures = FigureTable(table)
    judged = tuple(
        _judged(one, findings[row], figures.of_row(row, in_full=row in explained), unchanged)
        for row, one in enumerate(tree.found)
    )
    judged = tuple(
        replace(one, sensitivity=figures.sensitivity(row)) if row in explained else one
        for row, one in enumerate(judged)
    )
    problems = (*tree.problems, *_too_few(tree, policy))
    notes = (*standing.notes, *_note_on_priors(table))
    return Verdict(standing.used, judged, problems, notes)


def _table(tree: Scan, policy: Policy) -> Table:
    applied = tuple(policy.for_record(one.record, one.at.path) for one in tree.found)
    columns = columns_of(tree.found)
    evidence = weigh_columns(columns, [each.evidence for each in applied])
    return Table(columns, evidence, own_numbers(columns, evidence), applied)


def _note_on_priors(table: Table) -> tuple[str, ...]:
    """Name the claims that are weighed at a prior of their own above the policy's: it helps them to stand."""
    raised = [
        one.record.id
        for row, one in enumerate(table.columns.found)
        if table.columns.claims[row] and table.columns.own_prior[row] > table.applied[row].evidence.prior
    ]
    if not raised:
        return ()
    named = ", ".join(raised[:_MOST_NAMED])
    more = f" and {len(raised) - _MOST_NAMED} more" if len(raised) > _MOST_NAMED else ""
    return (f"Weighed at a prior that the record itself sets above the policy's: {named}{more}.",)


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
    )


def _unchanged(root: Path, since: str, policy: Policy, found: Sequence[Found]) -> frozenset[str]:
    """The ids whose documents are the same at the revision `since`."""
    globs = policy.document.scan
    base = scan(root, globs.include, globs.exclude, git.resolve(root, since))
    before: Mapping[str, str] = {one.record.id: one.digest for one in base.found}
    return frozenset(one.record.id for one in found if before.get(one.record.id) == one.digest)


def _too_few(tree: Scan, policy: Policy) -> tuple[Problem, ...]:
    least = policy.document.at_least
    if len(tree.found) >= least:
        return ()
    seen = f"{len(tree.found)} records in {tree.files} files, and the policy wants at least {least}"
    advice = "see with `gatecheck survey` what was found; check scan.include and scan.exclude of the policy"
    return (Problem(WHOLE_TREE, f"the tree holds {seen}", advice),)
