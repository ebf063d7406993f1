"""The last stage: a verdict in, text out. Each format is one module, loaded when it is asked for."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from importlib import import_module

from gatecheck.model.accepted import Adoption
from gatecheck.model.design import Design
from gatecheck.model.found import Scan
from gatecheck.model.looks_seen import Course
from gatecheck.model.rerun import Rerun
from gatecheck.model.two_verdicts import TwoVerdicts
from gatecheck.model.verdict import Verdict


def _late(module: str, function: str) -> Callable[..., str]:
    def render(*arguments: object, **marks: bool) -> str:
        renderer: Callable[..., str] = getattr(import_module(f"gatecheck.render.{module}"), function)
        return renderer(*arguments, **marks)

    return render


#: The formats that can be written, by name.
RENDERERS: Mapping[str, Callable[[Verdict], str]] = {
    "json": _late("document", "document"),
    "summary": _late("summary", "summary"),
    "annotations": _late("annotations", "commands"),
    "page": _late("page", "page"),
    "azure-annotations": _late("azure", "commands"),
    "sarif": _late("sarif", "sarif"),
    "junit": _late("junit", "junit"),
    "junit-strict": _late("junit", "junit_strict"),
    "code-quality": _late("code_quality", "code_quality"),
    "tap": _late("tap", "tap"),
}


def account(verdict: Verdict, width: int, *, bold: bool = False) -> str:
    """Return the verdict as plain text for a terminal or a log of `width` columns (at least 40)."""
    return _late("terminal", "account")(verdict, width, bold=bold)


def survey(scan: Scan, width: int, *, bold: bool = False) -> str:
    """Return what records a tree holds and what could not be read, as plain text of `width` columns."""
    return _late("listing", "survey")(scan, width, bold=bold)


def design(answer: Design, width: int) -> str:
    """Return how large a study must be, as plain text of `width` columns."""
    return _late("study", "design")(answer, width)


def explain(verdict: Verdict, record_id: str, width: int, *, bold: bool = False) -> str:
    """Return all that was found of the record `record_id`, as plain text of `width` columns."""
    return _late("listing", "explain")(verdict, record_id, width, bold=bold)


def adopted(done: Adoption, path: str, again: bool, width: int) -> str:
    """Return what was written to the list of accepted shortfalls, as plain text of `width` columns."""
    return _late("adoption", "told")(done, path, again, width)


def difference_account(found: TwoVerdicts, names: tuple[str, str], width: int) -> str:
    """Return what differs between two verdicts, as plain text of `width` columns."""
    return _late("two_verdicts", "account")(found, names, width)


def course_account(told: Course, width: int) -> str:
    """Return the course of one record through the history, as plain text of `width` columns."""
    return _late("course", "course")(told, width)


def rerun_ahead(paths: Sequence[str], width: int) -> str:
    """Return what a rerun will run, and what that means, as plain text of `width` columns."""
    return _late("rerun", "ahead")(paths, width)


def rerun_account(found: Rerun, width: int) -> str:
    """Return what came of a rerun, as plain text of `width` columns."""
    return _late("rerun", "account")(found, width)
