"""Rule `reported-in-full`: the record holds what published guidelines ask of every inferential result.

An exact p (an inequality only where it bounds p at 0.001 or less), a named test, the statistic with its degrees
of freedom, n with its unit, and the estimate with its interval and unit. Sources: SAMPL guidelines (Lang and
Altman 2013); CONSORT 2025, item 26; APA journal article reporting standards for quantitative research.
A test of several effects at once (F or chi-squared with more than one numerator df) has no single estimate, an
exact test no statistic with df, and an estimate alone needs no test. A whole screen has no single test or estimate:
it gives its numbers of tests and hits and the level of each test (common practice, no source).
"""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np

from gatecheck.compare.screens import is_whole_screen
from gatecheck.model.record import Estimate, Record, Sample, Test
from gatecheck.model.struct import struct
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Judgement, Rule, Said, Table
from gatecheck.rules.words import describe_result

_LEAST_BOUND = 0.001


@struct
class Requirement:
    """One thing that a result must carry: how to see that it is missing, and what to write."""

    what: str
    missing: Callable[[Record], bool]
    advice: str


def _tested(record: Record) -> Test | None:
    """The test, where one is due: an estimate, a description or a whole screen needs none."""
    without = record.test is None and (record.aim == "estimation" or record.status == "descriptive")
    return None if without or is_whole_screen(record) else record.test or Test()


def _lacks_name(record: Record) -> bool:
    test = _tested(record)
    return test is not None and test.name is None


def _lacks_p(record: Record) -> bool:
    test = _tested(record)
    return test is not None and test.p is None


def _lacks_exact_p(record: Record) -> bool:
    p = record.test.p if record.test else None
    if p is None or p.relation == "=":
        return False
    return p.relation == ">" or p.value > _LEAST_BOUND


def _has_p_of_zero(record: Record) -> bool:
    p = record.test.p if record.test else None
    return p is not None and p.relation == "=" and p.value == 0


def _lacks_statistic(record: Record) -> bool:
    test = _tested(record)
    if test is None or test.named_statistic or test.p_kind in {"exact", "permutation"}:
        return False
    return test.value is None or (test.df is None and test.statistic != "z")


def _lacks_n(record: Record) -> bool:
    sample = record.sample or Sample()
    return not is_whole_screen(record) and ((sample.n is None and not sample.groups) or sample.unit is None)


def _lacks_estimate(record: Record) -> bool:
    due = not is_whole_screen(record) and not _tests_several_effects(record.test or Test())
    return due and record.estimate is None


def _tests_several_effects(test: Test) -> bool:
    return test.statistic in {"F", "chi2"} and test.df is not None and test.df[0].value > 1


def _lacks_counts_of_screen(record: Record) -> bool:
    screen = record.screen
    return screen is not None and (screen.tests is None or screen.hits is None)


def _lacks_level_of_screen(record: Record) -> bool:
    return record.screen is not None and record.screen.alpha is None


def _lacks_interval(record: Record) -> bool:
    return record.estimate is not None and record.estimate.interval is None


def _lacks_unit(record: Record) -> bool:
    estimate: Estimate | None = record.estimate
    return estimate is not None and estimate.scale == "linear" and not estimate.unit


REQUIREMENTS = (
    Requirement("the name of the test", _lacks_name, "test.name"),
    Requirement("a p-value", _lacks_p, "test.p"),
    Requirement("an exact p-value", _lacks_exact_p, 'the exact test.p ("<0.001" may stand for less than that)'),
    Requirement("a p-value above 0", _has_p_of_zero, 'all digits of test.p, or "<0.001"'),
    Requirement("the statistic with its df", _lacks_statistic, "test.statistic, value and df"),
    Requirement("n with its unit", _lacks_n, "sample.n or groups, and sample.unit"),
    Requirement("an estimate", _lacks_estimate, "estimate with measure, value, interval and unit"),
    Requirement("the interval of the estimate", _lacks_interval, "estimate.interval"),
    Requirement("the unit of the estimate", _lacks_unit, 'estimate.unit ("1" for a number without unit)'),
    Requirement("the numbers of tests and hits", _lacks_counts_of_screen, "screen.tests and screen.hits"),
    Requirement("the level of each test", _lacks_level_of_screen, "screen.alpha"),
)


def judge(table: Table, _: Sequence[RuleSettings | None]) -> Judgement:
    """Short where anything is missing."""
    records = (found.record for found in table.columns.found)
    return Judgement(np.array([bool(_missing(record)) for record in records], np.bool_))


def explain(table: Table, row: int, _: RuleSettings, __: Judgement) -> Said:
    """What is missing, and the fields to fill."""
    record = table.record(row)
    missing = _missing(record)
    if not missing:
        return Said(f"{describe_result(record)}: nothing that guidelines ask for is missing.")
    what = _listed([each.what for each in missing])
    return Said(
        f"The record ({describe_result(record)}) lacks {what}; the policy wants every result reported in full.",
        f"Give {_listed([each.advice for each in missing])}.",
    )


def _missing(record: Record) -> list[Requirement]:
    return [requirement for requirement in REQUIREMENTS if requirement.missing(record)]


def _listed(words: list[str]) -> str:
    return words[0] if len(words) == 1 else f"{'; '.join(words[:-1])} and {words[-1]}"


RULE = Rule(
    name="reported-in-full",
    asks="exact p, named test, statistic with df, n with its unit, estimate with interval and unit are there",
    settings=RuleSettings,
    judge=judge,
    explain=explain,
)
