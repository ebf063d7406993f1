"""Workflow commands, by which a build service shows findings beside the lines that they concern."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Literal

from gatecheck.model.verdict import Finding, Judged, Place, Problem, Verdict
from gatecheck.render import order, words
from gatecheck.render.text import command_data, command_property, cut, fitted, plain

Level = Literal["error", "warning", "notice"]
LEVELS: tuple[Level, ...] = ("error", "warning", "notice")

#: Runners keep this many annotations of each level, and this many characters of each.
MOST_OF_A_LEVEL = 10
LONGEST_LINE = 4096
LONGEST_MESSAGE = 4000
_LONGEST_PATH = 1024
_LONGEST_TITLE = 256


@dataclass(frozen=True, slots=True)
class Annotation:
    """One finding or problem, as it is shown beside a line; `at` is None where it concerns no one line."""

    level: Level
    at: Place | None
    title: str
    message: str


def commands(verdict: Verdict) -> str:
    """Return one workflow command a line, worst first, at most `MOST_OF_A_LEVEL` of each level.

    Errors are problems and what keeps a claim from standing, warnings what falls short of a rule that is only
    noted, notices what is waived. Records that do not count now stay silent. Where a level has more, its last
    line says how many.
    """
    return "".join(f"{_command(one)}\n" for one in beside_lines(verdict))


def beside_lines(verdict: Verdict) -> list[Annotation]:
    """Return what the commands show: the worst first, and at most `MOST_OF_A_LEVEL` of each level."""
    everything = [*_errors(verdict), *_of_findings(verdict, "warning"), *_of_findings(verdict, "notice")]
    shown = []
    for level in LEVELS:
        shown += _capped(level, [one for one in everything if one.level == level])
    return shown


def _errors(verdict: Verdict) -> Iterator[Annotation]:
    yield from map(_of_problem, order.problems_by_place(verdict.problems))
    held = [(finding, one) for one in order.blocked(verdict) for finding in order.blocking_findings(one)]
    for finding, one in sorted(held, key=lambda pair: order.outcome_rank(pair[0])):
        yield _of_finding("error", one, finding)


def _of_findings(verdict: Verdict, level: Literal["warning", "notice"]) -> Iterator[Annotation]:
    for one in order.by_place(verdict.judged):
        noted = [finding for finding in order.noted_findings(one) if finding.outcome == "short"]
        chosen = noted if level == "warning" else order.waived_findings(one)
        if one.counts_now:
            yield from (_of_finding(level, one, finding) for finding in chosen)


def _of_problem(problem: Problem) -> Annotation:
    return Annotation("error", problem.at, "Could not be read or judged", words.problem(problem))


def _of_finding(level: Level, one: Judged, finding: Finding) -> Annotation:
    message = words.with_remedy(words.message(finding), finding.remedy)
    return Annotation(level, one.at, f"{one.id}: {words.rule_words(finding.rule)}", message)


def _capped(level: Level, found: list[Annotation]) -> list[Annotation]:
    if len(found) <= MOST_OF_A_LEVEL:
        return found
    more = len(found) - MOST_OF_A_LEVEL + 1
    rest = f"{more} more of this level are not shown here; all stand in the summary."
    return [*found[: MOST_OF_A_LEVEL - 1], Annotation(level, None, f"{more} more in the summary", rest)]


def _command(one: Annotation) -> str:
    title = f"title={fitted(plain(one.title), _LONGEST_TITLE, command_property)}"
    head = f"::{one.level} {_position(one.at)}{title}::"
    message = cut(plain(one.message), LONGEST_MESSAGE)
    return head + fitted(message, LONGEST_LINE - 1 - len(head), command_data)


def _position(place: Place | None) -> str:
    if place is None or place.is_whole_tree:
        return ""
    return f"file={fitted(plain(place.path), _LONGEST_PATH, command_property)},line={place.line},"
