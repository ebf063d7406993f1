"""Logging commands of Azure Pipelines, by which it shows findings beside the lines that they concern."""

from __future__ import annotations

from gatecheck.model.verdict import Place, Verdict
from gatecheck.render.annotations import LONGEST_MESSAGE, Annotation, beside_lines
from gatecheck.render.text import cut, log_message, log_property, plain


def commands(verdict: Verdict) -> str:
    """Return one logging command a line, worst first, as many of each level as a workflow command would have.

    There are errors and warnings and no third level, so that what is waived stays silent. Where a level has more,
    its last line says how many.
    """
    return "".join(f"{_command(one)}\n" for one in beside_lines(verdict) if one.level != "notice")


def _command(one: Annotation) -> str:
    # SOURCE: learn.microsoft.com, Logging commands, task.logissue.
    said = cut(plain(f"{one.title}: {one.message}"), LONGEST_MESSAGE)
    return f"##vso[task.logissue type={one.level}{_position(one.at)}]{log_message(said)}"


def _position(place: Place | None) -> str:
    if place is None or place.is_whole_tree:
        return ""
    return f";sourcepath={log_property(place.path)};linenumber={place.line}"
