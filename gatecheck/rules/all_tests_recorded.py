"""Rule `all-tests-recorded`: every hypothesis test that the code of a repository calls has a record.

Every hypothesis test that the code of the repository calls has a record. Python and R scripts, notebooks, R
Markdown and Quarto (`include`, `exclude`; folders named `tests` are left out unless the policy says otherwise)
are parsed and never run. Counted are the tests of scipy, statsmodels, pingouin, lifelines and scikit-posthocs, of
R and of its common packages, by the lists in `gatecheck/analysis/libraries`; a fitted model counts as one test
where someone looks at its p-values. Checks of assumptions, such as of normality or equal variances, are told
apart, and adjusted p-values and simulations on random numbers are no tests. In a loop over a list that stands in
the text each round counts; else a loop makes at least one, and so does a function that the file itself calls.

A test has a record where its result goes to `declare`, or where a record that names the file in
`provenance.code`, or that stands among the outputs of the notebook, is left to be its own. Else it is listed at
the file. It also counts in the family of each claim that the same file made: a claim falls short where its family
is smaller than its members and these tests together. Tests that are recorded count in the families that their
records name and in no other, so that recorded exploratory work costs a planned claim nothing. Exempt are claims
whose plan came before the data, and safety outcomes. With `unknown: block` code that cannot be read, and calls of
which the text does not tell whether they are made, make the verdict undecided; as it is without a word, they are
noted. A library that is in none of the lists, and a test that is written out by hand, are not seen.

> No record was found for 10 hypothesis tests in analysis/soil.py, so at least 11 tests stand behind this claim,
> which names no family. Record the 10, without a claim where nothing is claimed, or report the claim in a
> family of 11 with all its members.

That all analyses are to be reported, whatever they found: ASA statement on p-values (2016), principle 4.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import KW_ONLY
from itertools import groupby
from typing import Annotated, Literal

import numpy as np

from gatecheck.columns import Booleans
from gatecheck.compare.names import shown
from gatecheck.compare.tests_recorded import Behind, FileTests, Missing, recorded_tests
from gatecheck.model.code import CodeRead, NotRead
from gatecheck.model.found import Found
from gatecheck.model.marks import OneOrMore
from gatecheck.model.promise import GRADES
from gatecheck.model.record import Text
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Finding, Judged, Place
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Exemption, Judgement, Rule, Said, Table

_NAME = "all-tests-recorded"
_MOST_NAMED = 5
_MOST_LINES = 8
_BEFORE_DATA = GRADES.index("repository-order")
_CODE = ("**/*.py", "**/*.R", "**/*.r", "**/*.ipynb", "**/*.Rmd", "**/*.qmd")
_RECORD = "Record each, without a claim where nothing is claimed"
_LEAVE_OUT = f"or leave the file out (exclude of {_NAME})"


@struct
class Settings(RuleSettings):
    """Which code is read, and what becomes of tests whose number cannot be told."""

    _: KW_ONLY
    include: Annotated[tuple[Text, ...], OneOrMore(), "globs of the code to read"] = _CODE
    exclude: Annotated[tuple[Text, ...], OneOrMore(least=0), "globs of the code to leave out"] = ("**/tests/**",)
    unknown: Annotated[
        Literal["note", "block"], "what code that cannot be read, or tests whose number cannot be told, lead to"
    ] = "note"


def judge_code(code: CodeRead, found: Sequence[Found], settings: Settings | None) -> tuple[Judged, ...]:
    """Return a row for each file of which tests have no record, or were not counted, in the order of paths.

    Its id is the path of the file, and it claims nothing. `settings` is `None` where the rule is off.
    """
    if settings is None:
        return ()
    rows = (_judged(each, settings) for each in recorded_tests(found, code))
    return tuple(row for row in rows if row.findings)


def _judged(one: FileTests, settings: Settings) -> Judged:
    return Judged(
        kind="code",
        id=one.code.path,
        at=Place(one.code.path, one.code.line),
        claim=None,
        result=_tell_counts(one),
        evidence=None,
        findings=tuple(_findings(one, settings)),
    )


def _tell_counts(one: FileTests) -> str:
    if not one.code.tests:
        return "code, not read"
    recorded = one.made - one.without_record
    least = "at least " if one.more else ""
    checks = f", {_count(one.code.checks, 'check')} of assumptions apart" if one.code.checks else ""
    return f"code, {recorded} of {least}{_count(one.made, 'hypothesis test')} recorded{checks}"


def _findings(one: FileTests, settings: Settings) -> list[Finding]:
    findings = []
    if one.missing:
        least = "at least " if one.more else ""
        message = (
            f"No record was found for {one.without_record} of {least}{_count(one.made, 'hypothesis test')} in this "
            f"file: {_listed(one.missing)}."
        )
        remedy = f"{_RECORD}, {_LEAVE_OUT}; until then they count in the family of each claim from this file."
        findings.append(Finding(_NAME, "short", settings.enforce, one.without_record, 0.0, message, remedy))
    if one.unsure:
        message = (
            f"No record was found for {_listed(one.unsure)}, and the code does not tell whether "
            f"{'it is' if len(one.unsure) == 1 else 'they are'} called."
        )
        remedy = f"Declare results where they are made, {_LEAVE_OUT}."
        findings.append(Finding(_NAME, "undecided", settings.unknown, message=message, remedy=remedy))
    if one.code.not_read:
        message = f"Tests in this file were not counted: {_reasons(one.code.not_read)}."
        findings.append(
            Finding(_NAME, "undecided", settings.unknown, message=message, remedy=f"Mend it, {_LEAVE_OUT}.")
        )
    return findings


def _reasons(reasons: Sequence[NotRead]) -> str:
    told = [f"{each.why} ({_line(each.cell, each.line)})" for each in reasons[:_MOST_NAMED]]
    return _and_more(told, len(reasons))


def _listed(missing: Sequence[Missing]) -> str:
    """The tests by their names, each with the lines that call it."""
    by_name = {name: list(calls) for name, calls in groupby(sorted(missing, key=_name_of), key=_name_of)}
    first = sorted(by_name, key=lambda name: (by_name[name][0].test.cell or 0, by_name[name][0].test.line))
    told = [f"{shown(name)} ({_places(by_name[name])})" for name in first[:_MOST_NAMED]]
    return _and_more(told, len(first))


def _name_of(one: Missing) -> str:
    return one.test.name


def _places(calls: Sequence[Missing]) -> str:
    if all(each.test.cell is None and each.times <= 1 for each in calls):
        lines = [str(each.test.line) for each in calls[:_MOST_LINES]]
        return f"line{'s' if len(calls) > 1 else ''} {_and_more(lines, len(calls))}"
    told = [_line(each.test.cell, each.test.line) + _times(each.times) for each in calls[:_MOST_LINES]]
    return _and_more(told, len(calls), "; ")


def _line(cell: int | None, line: int) -> str:
    return f"line {line}" if cell is None else f"cell {cell}, line {line}"


def _times(times: int) -> str:
    return f", {times} times" if times > 1 else ""


def _and_more(told: Sequence[str], whole: int, between: str = ", ") -> str:
    more = f" and {whole - len(told)} more" if whole > len(told) else ""
    return f"{between.join(told)}{more}"


def _count(number: int, what: str) -> str:
    return f"{number:,} {what}{'' if number == 1 else 's'}"


def _facts(table: Table) -> Sequence[Behind | None]:
    return table.tests_behind or (None,) * len(table.applied)


def concerns(table: Table, _: Sequence[Settings | None]) -> Booleans:
    """Claims whose code calls tests."""
    return np.array([each is not None for each in _facts(table)], np.bool_)


def judge(table: Table, _: Sequence[Settings | None]) -> Judgement:
    """Short where more tests stand behind a claim than its family declares, because some have no record."""
    facts = _facts(table)
    tests = np.array([np.nan if each is None else each.tests for each in facts], np.float64)
    declared = np.array([np.nan if each is None else each.declared for each in facts], np.float64)
    unrecorded = np.array([each is not None and each.unrecorded > 0 for each in facts], np.bool_)
    return Judgement(unrecorded & (tests > declared), tests, declared, facts=facts)


def explain(table: Table, row: int, _: Settings, judgement: Judgement) -> Said:
    """How many tests stand behind the claim, and how many it declares."""
    behind: Behind = judgement.facts[row]
    family = table.record(row).family
    where = ", ".join(behind.paths[:_MOST_NAMED])
    if not behind.unrecorded:
        return Said(f"Every hypothesis test that {where} is known to make has a record.")
    declares = "names no family" if family is None else f"declares a family of {behind.declared}"
    return Said(
        f"No record was found for {_count(behind.unrecorded, 'hypothesis test')} in {where}, so at least "
        f"{_count(behind.tests, 'test')} stand behind this claim, which {declares}.",
        f"Record the {behind.unrecorded}, without a claim where nothing is claimed, or report the claim in a "
        f"family of {behind.tests} with all its members.",
    )


def _planned(table: Table, _: Sequence[Settings | None]) -> Booleans:
    """Claims that answer a hypothesis of a plan that came before the data."""
    promised = table.promises or (None,) * len(table.applied)
    return np.array(
        [
            each is not None
            and each.hypothesis is not None
            and GRADES.index(each.grade or each.at_least) >= _BEFORE_DATA
            for each in promised
        ],
        np.bool_,
    )


RULE = Rule(
    name=_NAME,
    asks="every hypothesis test that the code calls has a record",
    settings=Settings,
    judge=judge,
    explain=explain,
    exempt=(
        Exemption(
            lambda table, _: table.columns.harm,
            "A safety outcome: no penalty for several tests is put on reporting a possible harm.",
        ),
        Exemption(_planned, "Its plan came before the data and says what was to be tested."),
    ),
    concerns=concerns,
)
