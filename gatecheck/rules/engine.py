"""The rule engine: three answers for each row, and words only where they are needed."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import Literal

import numpy as np

from gatecheck.columns import Floats
from gatecheck.model.found import Found
from gatecheck.model.verdict import Finding
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Judgement, Rule, Table

Row = tuple[Finding, ...]


def judge_all(rules: Sequence[Rule], table: Table, *, explain: frozenset[int] = frozenset()) -> list[Row]:
    """Judge every row of `table` by every rule that is on for it; findings stand in the order of `rules`.

    Rows in `explain` carry words for every outcome, the others for what falls short, is undecided or noted.
    """
    found: list[list[Finding]] = [[] for _ in table.applied]
    # What is not finite makes a row undecided; a warning beside that would tell nobody anything.
    with np.errstate(all="ignore"):
        for rule in rules:
            for row, finding in _judge(rule, table, explain):
                found[row].append(finding)
    return [tuple(each) for each in found]


def _judge(rule: Rule, table: Table, explain: frozenset[int]) -> list[tuple[int, Finding]]:
    settings = [applied.rules.get(rule.name) for applied in table.applied]
    if not any(settings):
        return []
    concerned = rule.concerns(table, settings)
    rows = [row for row, each in enumerate(settings) if each is not None and concerned[row]]
    if not rows:
        return []
    judging = _Judging(rule, table, settings)
    findings = [(row, judging.finding(row, wordy=row in explain)) for row in rows]
    return [(row, _permissible(finding, rule, table.columns.found[row])) for row, finding in findings]


def _permissible(finding: Finding, rule: Rule, one: Found) -> Finding:
    """The finding with what a permission to pass over it rests on, where it may need one."""
    if finding.outcome in {"met", "does-not-apply"}:
        return finding
    return replace(finding, digest=one.permission_digest(rule.reads))


class _Judging:
    """One rule at work on a table."""

    def __init__(self, rule: Rule, table: Table, settings: Sequence[RuleSettings | None]) -> None:
        self.rule = rule
        self.table = table
        self.settings = settings
        self.exempt = [(each.rows(table, settings), each.because) for each in rule.exempt]
        self.known = [np.isfinite(need.column(table)) for need in rule.needs]
        self.judgement: Judgement = rule.judge(table, settings)

    def finding(self, row: int, *, wordy: bool) -> Finding:
        """What the rule says of one row: exempt first, then undecided, then short or met."""
        enforce = (self.settings[row] or RuleSettings()).enforce
        for rows, because in self.exempt:
            if rows[row]:
                return Finding(self.rule.name, "does-not-apply", enforce, message=because)
        for need, known in zip(self.rule.needs, self.known, strict=True):
            if not known[row]:
                said = need.missing(self.table, row)
                return Finding(self.rule.name, "undecided", enforce, None, None, said.message, said.remedy)
        outcome = self.outcome(row)
        observed, limit = _at(self.judgement.observed, row), _at(self.judgement.limit, row)
        if outcome == "met" and not wordy and not self.noted(row):
            return Finding(self.rule.name, outcome, enforce, observed, limit)
        said = self.rule.explain(self.table, row, self.settings[row], self.judgement)
        remedy = "" if outcome == "met" else said.remedy
        return Finding(self.rule.name, outcome, enforce, observed, limit, said.message, remedy)

    def outcome(self, row: int) -> Literal["met", "short", "undecided"]:
        """What the judgement says of a row that the rule is known to judge."""
        if self.judgement.known is not None and not self.judgement.known[row]:
            return "undecided"
        return "short" if self.judgement.short[row] else "met"

    def noted(self, row: int) -> bool:
        """Whether what the rule says of a row is to be told although it is met."""
        return self.judgement.noted is not None and bool(self.judgement.noted[row])


def _at(column: Floats | None, row: int) -> float | None:
    return None if column is None else float(column[row])
