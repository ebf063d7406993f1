"""Rule `registered`: a confirmatory claim is as it was promised, in a plan that came before the data.

A confirmatory claim names a hypothesis of a plan (`plan: {file, hypothesis}`), the evidence that the plan came
before the data is of `grade` or better (`repository-order` unless the policy says otherwise), and the claim is as
the plan had it when it was frozen: outcome, test, sides, direction, alpha (that of the family where the hypothesis
has none), n and its unit, population, exclusions, covariates, effect designed for, margins, prior, family with its
size, looks, role and aim. Each difference is told with both values, and with the p that the promise gives where
sides or direction differ. A `deviations` entry that names the field turns it into an amendment (decided
`before-data`) or a departure (`before-results`), and either is noted beside the claim; one decided `after-results`
makes the claim exploratory (`after_results: keep` lets it stand). An entry that states other values as planned or
done than the plan and the record have excuses nothing. Safety outcomes are exempt: nobody needs a registration to
report a possible harm.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import KW_ONLY
from typing import Annotated, Literal

import numpy as np

from gatecheck.columns import Booleans
from gatecheck.compare.names import shown
from gatecheck.compare.promised_hypotheses import promises_something
from gatecheck.compare.promises import Difference, differences, unused_deviations
from gatecheck.model.promise import GRADES, Grade, Promise
from gatecheck.model.record import Deviation, Record
from gatecheck.model.struct import struct
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Exemption, Judgement, Rule, Said, Table

_COMMIT = 12
_NEXT_TIME = "set status: exploratory, and register the next study before its data"
_LATE = "set status: exploratory, or confirm the claim in a study of its own"
_DISCLOSE = "restore what was promised, or disclose each departure under deviations with its reason and time"
_AT_WHAT_COST = " (one decided after the results makes the claim exploratory)"


@struct
class Settings(RuleSettings):
    """How good the evidence of registration must be, and what a departure after the results costs."""

    _: KW_ONLY
    grade: Annotated[Grade, "least evidence that the plan came before the data"] = "repository-order"
    after_results: Annotated[
        Literal["exploratory", "keep"],
        "exploratory: with a departure decided after the results, a claim is no confirmatory one",
    ] = "exploratory"


@struct
class Case:
    """What stands against one claim: clauses that say what was found and is wanted, each with its remedy.

    Where nothing does and the promise is `None`, it is not known whether the claim keeps what was promised.
    """

    against: tuple[Said, ...]
    promise: Promise | None = None
    differences: tuple[Difference, ...] = ()

    @property
    def is_known(self) -> bool:
        """Whether it can be told that the claim is kept, or that it is not."""
        return bool(self.against) or self.promise is not None


def concerns(table: Table, _: Sequence[Settings | None]) -> Booleans:
    """Claims that say that they were planned."""
    planned = [one.record.status == "confirmatory" for one in table.columns.found]
    return table.columns.claims & np.array(planned, np.bool_)


def judge(table: Table, settings: Sequence[Settings | None]) -> Judgement:
    """Short where anything stands against a claim, undecided where it is not known that the plan came first."""
    cases = [
        _case(table, row, each) if each is not None and concerned else None
        for row, (each, concerned) in enumerate(zip(settings, concerns(table, settings), strict=True))
    ]
    short = np.array([case is not None and bool(case.against) for case in cases], np.bool_)
    known = np.array([case is None or case.is_known for case in cases], np.bool_)
    noted = np.array([case is not None and bool(table.record(row).deviations) for row, case in enumerate(cases)])
    return Judgement(short, known=known, noted=noted, facts=cases)


def _case(table: Table, row: int, settings: Settings) -> Case:
    record = table.record(row)
    promise = table.promises[row] if table.promises else None
    if promise is None:
        return Case(tuple(_without_plan(record)))
    if (absent := _absent(promise)) is not None:
        return Case((absent,))
    found = differences(record, promise)
    against = (*_undeclared(promise, found, settings), *_late(record, settings), *_grade(promise, settings))
    return Case(against, promise if _is_known(promise, settings) else None, found)


def _is_known(promise: Promise, settings: Settings) -> bool:
    """Whether the promise is known, and whether its evidence is good enough."""
    enough = promise.grade is not None or GRADES.index(promise.at_least) >= GRADES.index(settings.grade)
    return enough and promise.hypothesis is not None


def _without_plan(record: Record) -> Iterable[Said]:
    if record.plan is None:
        yield Said(
            "the claim is confirmatory and names no plan, and the policy wants such claims registered before the "
            "data",
            "name the plan and its hypothesis under plan, or set status: exploratory",
        )


def _absent(promise: Promise) -> Said | None:
    """Why nothing was promised for a claim, where that is so; not where the plan is only not known."""
    if promise.hypothesis is None:
        if promise.grade is None and not promise.missing:
            return None
        why = _clause(promise.missing) or f"{promise.file} does not hold {promise.asked or 'it'}"
        return Said(
            f"the hypothesis that the claim is to answer is not there: {why}",
            "name a hypothesis that the plan holds, or set status: exploratory",
        )
    if promises_something(promise.hypothesis):
        return None
    return Said(f"{_place(promise)} was deferred and never filled, so that nothing was promised", _NEXT_TIME)


def _undeclared(promise: Promise, found: Sequence[Difference], settings: Settings) -> Iterable[Said]:
    told = [each.told for each in found if each.standing == "undeclared"]
    if told:
        cost = _AT_WHAT_COST if settings.after_results == "exploratory" else ""
        yield Said(
            f"the claim differs from {_place(promise)}, without a deviation that says so: {'; '.join(told)}",
            f"{_DISCLOSE}{cost}",
        )


def _late(record: Record, settings: Settings) -> Iterable[Said]:
    late = [each for each in record.deviations if each.known == "after-results"]
    if late and settings.after_results == "exploratory":
        fields = ", ".join(dict.fromkeys(shown(each.field) for each in late))
        yield Said(
            f"the departure in {fields} was decided after the results, and the policy calls such a claim "
            "exploratory",
            _LATE,
        )


def _grade(promise: Promise, settings: Settings) -> Iterable[Said]:
    if promise.grade is not None and GRADES.index(promise.grade) < GRADES.index(settings.grade):
        because = f" ({_clause(promise.because)})" if promise.because else ""
        yield Said(
            f"the evidence that {promise.file} came before the data is {promise.grade}{because}, and the policy "
            f"wants {settings.grade} or better",
            _clause(promise.advice) or _NEXT_TIME,
        )


def explain(table: Table, row: int, _: Settings, judgement: Judgement) -> Said:
    """What stands against the claim, or what it keeps, and which departures it discloses."""
    case: Case = judgement.facts[row]
    record = table.record(row)
    if case.against:
        found = "; ".join(each.message for each in case.against)
        remedies = dict.fromkeys(each.remedy for each in case.against)
        return Said(_sentence(found) + _in_time(record, case), _sentence("; ".join(remedies)))
    if case.promise is None:
        why = _undecided(record, table.promises[row] if table.promises else None)
        return Said(why.message + _in_time(record, case), why.remedy)
    return Said(" ".join(_sentence(each) for each in _kept(record, case, case.promise)))


def _undecided(record: Record, promise: Promise | None) -> Said:
    file = record.plan.file if record.plan is not None else "the plan"
    because = promise.because if promise is not None else "the plan was not looked at"
    advice = promise.advice if promise is not None else ""
    return Said(
        f"Whether {file} came before the data cannot be told: {_clause(because) or 'its history is not known'}.",
        _sentence(advice or "judge a clone that holds the whole history"),
    )


def _kept(record: Record, case: Case, promise: Promise) -> Iterable[str]:
    """What a claim that stands keeps, and what it discloses."""
    grade = promise.grade or f"{promise.at_least} or better"
    because = f" ({_clause(promise.because)})" if promise.because else ""
    yield f"the claim keeps to {_place(promise)}; that the plan came first is {grade}{because}"
    unused = unused_deviations(record, case.differences)
    departures = [_departure(each, case.differences) for each in record.deviations if each not in unused]
    if departures:
        yield f"it discloses: {'; '.join(departures)}"
    if unused:
        yield f"in {', '.join(each.field for each in unused)} a deviation is disclosed and nothing differs"


def _in_time(record: Record, case: Case) -> str:
    """What a claim that does not stand discloses of its differences in time: those do not stand against it."""
    known = [one.disclosed for one in case.differences if one.standing in {"amendment", "flagged"}]
    disclosed = [each for each in record.deviations if each in known]
    departures = [_departure(each, case.differences) for each in disclosed]
    return f" The claim discloses: {'; '.join(departures)}." if departures else ""


def _departure(deviation: Deviation, found: Sequence[Difference]) -> str:
    """What a deviation discloses, with both values where the field is compared, and when and why it was decided."""
    told = "; ".join(each.told for each in found if each.disclosed is deviation)
    return f"{told or shown(deviation.field)} (decided {deviation.known}: {shown(deviation.reason)})"


def _place(promise: Promise) -> str:
    """The hypothesis with its plan and the commit at which it was frozen."""
    hypothesis = promise.hypothesis.id if promise.hypothesis is not None else promise.asked
    frozen = f" as frozen at {promise.frozen_at[:_COMMIT]}" if promise.frozen_at else ""
    later = ", which was changed later" if promise.changed_later else ""
    return f"{hypothesis} of {promise.file}{frozen}{later}"


def _clause(text: str) -> str:
    return text.strip().removesuffix(".")


def _sentence(text: str) -> str:
    bare = _clause(text)
    return f"{bare[:1].upper()}{bare[1:]}."


RULE = Rule(
    name="registered",
    asks="a confirmatory claim is as it was promised, in a plan that came before the data",
    settings=Settings,
    judge=judge,
    explain=explain,
    exempt=(
        Exemption(
            lambda table, _: table.columns.harm,
            "A safety outcome: nobody needs a registration to report a possible harm.",
        ),
    ),
    concerns=concerns,
    reads=("role", "outcome", "population", "covariates", "plan", "deviations"),
)
