"""The last stage: a verdict in, text out. Each format is one module, loaded when it is asked for."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from importlib import import_module

from gatecheck.model.design import Design
from gatecheck.model.found import Scan
from gatecheck.model.verdict import Verdict


def _late(module: str, function: str) -> Callable[..., str]:
    def render(*arguments: object) -> str:
        renderer: Callable[..., str] = getattr(import_module(f"gatecheck.render.{module}"), function)
        return renderer(*arguments)

    return render


#: The formats that can be written, by name.
RENDERERS: Mapping[str, Callable[[Verdict], str]] = {
    "json": _late("document", "document"),
    "summary": _late("summary", "summary"),
    "annotations": _late("annotations", "commands"),
}


def account(verdict: Verdict, width: int) -> str:
    """Return the verdict as plain text for a terminal or a log of `width` columns (at least 40)."""
    return _late("terminal", "account")(verdict, width)


def survey(scan: Scan, width: int) -> str:
    """Return what records a tree holds and what could not be read, as plain text of `width` columns."""
    return _late("listing", "survey")(scan, width)


def design(answer: Design, width: int) -> str:
    """Return how large a study must be, as plain text of `width` columns."""
    return _late("study", "design")(answer, width)


def explain(verdict: Verdict, record_id: str, width: int) -> str:
    """Return all that was found of the record `record_id`, as plain text of `width` columns."""
    return _late("listing", "explain")(verdict, record_id, width)
