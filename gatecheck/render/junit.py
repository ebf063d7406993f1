"""The verdict as a report of tests (JUnit XML), one test case for each record and each problem."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterable, Iterator
from itertools import chain

from gatecheck.model.struct import struct
from gatecheck.model.verdict import Judged, Place, Problem, Verdict
from gatecheck.render import order, words
from gatecheck.render.entries import (
    LONGEST_TEXT,
    READABLE,
    State,
    left_out,
    said_of,
    said_of_problem,
    state_of,
    told_of,
    worst_first,
)
from gatecheck.render.text import cut, plain, xml

#: GitLab takes reports below 30 MB (SOURCE: GitLab, Unit test reports); this leaves a margin for head and foot.
BUDGET = 25 * 1024 * 1024
SUITE = "gatecheck"
#: The strict dialect wants a time and a host. These tell nothing, so that the same tree gives the same bytes.
TIMESTAMP = "1970-01-01T00:00:00"
HOST = "localhost"

_ELEMENTS: dict[State, str] = {
    "short": "failure",
    "undecided": "error",
    "unchanged": "skipped",
    "waived": "skipped",
    "stands": "",
}
_COUNTED = {"failures": "failure", "errors": "error", "skipped": "skipped"}


@struct
class _Case:
    """One test case: `element` is what its outcome is told by, and empty where it passed."""

    at: Place
    name: str
    element: str = ""
    kind: str = ""
    lines: tuple[str, ...] = ()


def junit(verdict: Verdict, budget: int = BUDGET) -> str:
    """Return the verdict as one suite, worst first, in the dialect that most readers know.

    What falls short is a failure, what cannot be read or decided is an error, and what is waived or does not count
    now is skipped. Cases and notes take at most `budget` bytes; the output of the suite says how many had no room.
    """
    return _report(verdict, budget, _case, "")


def junit_strict(verdict: Verdict, budget: int = BUDGET) -> str:
    """Return the same with nothing in it that strict schemas do not know, and with all that they want."""
    return _report(
        verdict, budget, _strict_case, f' id="0" package="{SUITE}" hostname="{HOST}" timestamp="{TIMESTAMP}"'
    )


def _report(verdict: Verdict, budget: int, write: Callable[[_Case], str], attributes: str) -> str:
    cases, noted = list(_named(_cases(verdict))), list(_noted(verdict))
    texts = _that_fit(chain(map(write, cases), (f"{_line(text)}\n" for text in noted)), budget)
    shown, missing = cases[: len(texts)], len(cases) + len(noted) - len(texts)
    elements = Counter(case.element for case in shown)
    counts = "".join(f' {name}="{elements[element]}"' for name, element in _COUNTED.items())
    return (
        '<?xml version="1.0" encoding="UTF-8"?>\n<testsuites>\n'
        f'<testsuite name="{SUITE}" tests="{len(shown)}"{counts} time="0"{attributes}>\n'
        f"<properties>\n{_property('verdict', verdict.answer)}{_property('version', verdict.version)}"
        "</properties>\n"
        f"{''.join(texts[: len(shown)])}"
        f"<system-out>{''.join(texts[len(shown) :])}{_told(verdict, missing)}</system-out>\n"
        "<system-err></system-err>\n</testsuite>\n</testsuites>\n"
    )


def _cases(verdict: Verdict) -> Iterator[_Case]:
    yield from map(_of_problem, order.problems_by_place(verdict.problems))
    yield from map(_of_record, worst_first(verdict.judged))


def _of_problem(one: Problem) -> _Case:
    name = f"line {one.at.line}: could not be read or judged"
    return _Case(one.at, name, "error", READABLE, (said_of_problem(one), f"In {words.where(one.at)}."))


def _of_record(one: Judged) -> _Case:
    element = _ELEMENTS[state_of(one)]
    if not element:
        return _Case(one.at, one.id)
    told = [(kind, finding) for kind, finding in told_of(one) if kind != "noted"]
    result = f"Result: {words.sentence(one.result)}"
    lines = (*(said_of(kind, finding) for kind, finding in told), result, f"In {words.places(one)}.")
    return _Case(one.at, one.id, element, told[0][1].rule, lines)


def _named(cases: Iterable[_Case]) -> Iterator[_Case]:
    """The cases, each with a name of its own, as readers keep one case of a name and drop the others."""
    taken: set[tuple[str, str]] = set()
    for case in cases:
        first = name = cut(plain(case.name), LONGEST_TEXT)
        number = 1
        while (_class_of(case.at), name) in taken:
            number += 1
            name = f"{first} ({number})"
        taken.add((_class_of(case.at), name))
        yield _Case(case.at, name, case.element, case.kind, case.lines)


def _that_fit(texts: Iterable[str], budget: int) -> list[str]:
    shown = []
    for text in texts:
        budget -= len(text.encode())
        if budget < 0:
            break
        shown.append(text)
    return shown


def _noted(verdict: Verdict) -> Iterator[str]:
    for one in order.by_place(verdict.judged):
        yield from (f"{one.id}: {said_of(kind, finding)}" for kind, finding in told_of(one) if kind == "noted")


def _told(verdict: Verdict, missing: int) -> str:
    lines = [words.headline(verdict), *verdict.notes, words.policy_used(verdict.policy)]
    if missing:
        lines.append(left_out(missing, "entry", "entries"))
    return "\n".join(map(_line, lines))


def _case(case: _Case) -> str:
    place = f' file="{xml(case.at.path)}" line="{case.at.line}"'
    message = f' message="{_line(case.lines[0])}" type="{case.kind}"' if case.element else ""
    return _written(case, place, message)


def _strict_case(case: _Case) -> str:
    # There, what is skipped has content and no attributes.
    told = case.element not in {"", "skipped"}
    return _written(case, "", f' message="{_line(case.lines[0])}" type="{case.kind}"' if told else "")


def _written(case: _Case, place: str, attributes: str) -> str:
    head = f'<testcase classname="{xml(_class_of(case.at))}" name="{xml(case.name)}"{place} time="0"'
    if not case.element:
        return f"{head}/>\n"
    content = "\n".join(map(_line, case.lines))
    return f"{head}><{case.element}{attributes}>{content}</{case.element}></testcase>\n"


def _line(text: str) -> str:
    return xml(cut(plain(text), LONGEST_TEXT))


def _class_of(place: Place) -> str:
    """The path without its ending and with dots, as readers take a class for a package and a name between dots."""
    if place.is_whole_tree:
        return SUITE
    folder, slash, file = plain(place.path).rpartition("/")
    stem = file.rpartition(".")[0] or file
    return f"{folder}{slash}{stem}".replace("/", ".") or SUITE


def _property(name: str, value: str) -> str:
    return f'<property name="{name}" value="{xml(value)}"/>\n'
