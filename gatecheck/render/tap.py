"""The verdict in the Test Anything Protocol (version 14), a test point for each record and each problem."""

from __future__ import annotations

from collections.abc import Iterator

from gatecheck.model.verdict import Judged, Place, Problem, Verdict
from gatecheck.render import order, words
from gatecheck.render.entries import LONGEST_TEXT, READABLE, State, state_of, told_of, worst_first
from gatecheck.render.text import cut, json_text, plain, point_text

VERSION_LINE = "TAP version 14"
#: A harness counts a point that is not ok as a failure, unless a directive says that it is skipped or to be done.
_POINTS: dict[State, tuple[str, str]] = {
    "short": ("not ok", ""),
    "undecided": ("not ok", ""),
    "unchanged": ("not ok", " # TODO unchanged, and does not count now"),
    "waived": ("ok", " # SKIP short of the policy, and waived"),
    "stands": ("ok", ""),
}


def tap(verdict: Verdict) -> str:
    """Return the verdict as one document: problems first, then the records, worst first; details as YAML.

    A description holds no ``#`` and no backslash, but their marks, so that readers of any version see no directive
    in it; in the details both stand as they are.
    """
    problems = order.problems_by_place(verdict.problems)
    records = worst_first(verdict.judged)
    points = [*map(_of_problem, problems), *map(_of_record, records)]
    plan = f"1..{len(points)}" if points else "1..0 # SKIP no record was found"
    numbered = [line for number, point in enumerate(points, start=1) for line in _numbered(number, point)]
    return "".join(f"{line}\n" for line in (VERSION_LINE, plan, *_remarks(verdict), *numbered))


_Point = tuple[str, str, str, list[str]]


def _numbered(number: int, point: _Point) -> Iterator[str]:
    status, title, directive, details = point
    description = point_text(cut(plain(title), LONGEST_TEXT))
    yield f"{status} {number} - {description}{directive}"
    if details:
        yield "  ---"
        yield from (f"  {line}" for line in details)
        yield "  ..."


def _remarks(verdict: Verdict) -> Iterator[str]:
    for text in (words.headline(verdict), *verdict.notes):
        yield f"# {point_text(cut(plain(text), LONGEST_TEXT))}"


def _of_problem(one: Problem) -> _Point:
    title = f"{words.where(one.at)}: could not be read or judged"
    found = _finding("problem", READABLE, words.sentence(one.message), one.advice)
    return "not ok", title, "", [*_at(one.at), "findings:", *found]


def _of_record(one: Judged) -> _Point:
    state = state_of(one)
    status, directive = _POINTS[state]
    told = [
        line
        for kind, finding in told_of(one)
        for line in _finding(kind, finding.rule, words.message(finding), finding.remedy)
    ]
    details = [f"state: {state}", f"record: {_quoted(one.id)}", *_claim(one), *_at(one.at), "findings:", *told]
    return status, one.id, directive, details if told else []


def _claim(one: Judged) -> list[str]:
    claim = [] if one.claim is None else [f"claim: {_quoted(one.claim)}"]
    return [*claim, f"result: {_quoted(one.result)}"]


def _at(place: Place) -> list[str]:
    return ["at:", f"  file: {_quoted(place.path)}", f"  line: {place.line}"]


def _finding(kind: str, rule: str, message: str, remedy: str) -> list[str]:
    mended = [f"    remedy: {_quoted(remedy)}"] if remedy else []
    return [f"  - rule: {rule}", f"    state: {kind}", f"    message: {_quoted(message)}", *mended]


def _quoted(text: str) -> str:
    return json_text(cut(plain(text), LONGEST_TEXT))
