"""What is judged and is no record: plans, prose and code, each a row of the verdict like the records."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import cast

from gatecheck.facts import Facts
from gatecheck.model.code import CodeRead
from gatecheck.model.found import Found
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Judged, Problem
from gatecheck.policy import Policy
from gatecheck.rules.rule import Table

_PLANS, _PROSE, _WORDS, _CODE = "all-promised-reported", "text-agrees", "wording", "all-tests-recorded"
Rows = tuple[tuple[Judged, ...], tuple[Problem, ...]]


@struct
class Tree:
    """The tree that is judged by a policy: its records, and those at `base` where only changes since then count.

    `gained` are the files that the base of a request has added since the request departed from it.
    """

    root: Path
    policy: Policy
    found: Sequence[Found]
    base: str | None = None
    at_base: Sequence[Found] = ()
    gained: frozenset[str] = frozenset()


def judge_beyond_records(tree: Tree, facts: Facts, table: Table, records: Sequence[Judged]) -> Rows:
    """Return a row for each line of prose and file of code that falls short, and what cannot be read.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    prose, problems = _prose(tree, records)
    sentences = _sentences(tree, table)
    return (*merged((*prose, *sentences)), *_code(tree, facts.code)), problems


def merged(rows: Sequence[Judged]) -> tuple[Judged, ...]:
    """Return one row for each id, with the findings of all: one line of prose may fall short in several ways."""
    by_id: dict[str, Judged] = {}
    for row in rows:
        there = by_id.get(row.id)
        by_id[row.id] = row if there is None else _both(there, row)
    return tuple(sorted(by_id.values(), key=lambda one: (one.at.path, one.at.line, one.id)))


def counting_new(rows: Sequence[Judged], before: Sequence[Judged]) -> tuple[Judged, ...]:
    """Return `rows` so that those do not count now of which `before`, at the base, says all of the same file."""
    said = {(one.at.path, finding.message) for one in before for finding in one.findings}
    return tuple(
        replace(row, counts_now=any((row.at.path, finding.message) not in said for finding in row.findings))
        for row in rows
    )


def _both(first: Judged, second: Judged) -> Judged:
    findings = (*first.findings, *second.findings)
    return replace(first, findings=findings, counts_now=first.counts_now or second.counts_now)


def judge_plans(tree: Tree, facts: Facts) -> tuple[Judged, ...]:
    """Return a row for each plan of which something is not reported."""
    settings = tree.policy.in_general.rules.get(_PLANS)
    if settings is None:
        return ()
    from gatecheck.rules import all_promised_reported as rule  # noqa: PLC0415  # few policies ask for it

    plans = [one for one in facts.plans if one.path not in tree.gained]

    def judged(found: Sequence[Found]) -> tuple[Judged, ...]:
        return rule.judge_plans(plans, [one.record for one in found], cast("rule.Settings", settings))

    rows = judged(tree.found)
    return rows if tree.base is None else counting_new(rows, judged(tree.at_base))


def _prose(tree: Tree, records: Sequence[Judged]) -> Rows:
    if _PROSE not in tree.policy.in_general.rules:
        return (), ()
    from gatecheck.rules import text_agrees as rule  # noqa: PLC0415  # few policies ask for it

    settings = rule.settings_in(tree.policy)
    rows, problems = rule.judge_prose(tree.root, tree.found, settings, judged=records)
    if rows and tree.base is not None:
        before, _ = rule.judge_prose(tree.root, tree.at_base, settings, tree.base, records)
        rows = counting_new(rows, before)
    return rows, problems


def _sentences(tree: Tree, table: Table) -> tuple[Judged, ...]:
    """Sentences of prose that a link ties to a record, judged by their words."""
    if not any(_WORDS in applied.rules for applied in table.applied):
        return ()
    from gatecheck.prose.links import linked_sentences  # noqa: PLC0415  # few policies judge words
    from gatecheck.rules import text_agrees, wording  # noqa: PLC0415

    globs = text_agrees.settings_in(tree.policy) or text_agrees.Settings()
    return wording.judge_sentences(linked_sentences(tree.root, globs.include, globs.exclude), table)


def _code(tree: Tree, code: CodeRead | None) -> tuple[Judged, ...]:
    if code is None:
        return ()
    from gatecheck.analysis import read_code  # noqa: PLC0415  # few policies ask for it
    from gatecheck.rules import all_tests_recorded as rule  # noqa: PLC0415

    settings = cast("rule.Settings", tree.policy.in_general.rules[_CODE])
    rows = rule.judge_code(code, tree.found, settings)
    if not rows or tree.base is None:
        return rows
    before = read_code(tree.root, settings.include, settings.exclude, tree.base)
    return counting_new(rows, rule.judge_code(before, tree.at_base, settings))
