"""The course of one record through the history, as plain text."""

from __future__ import annotations

from collections.abc import Sequence

from gatecheck.model.looks_seen import Course, Step, uneven_spacing
from gatecheck.model.shown import decimal, percent
from gatecheck.render import words
from gatecheck.render.layout import item, page, paragraph, section
from gatecheck.render.text import plain

_HEAD = ("Date", "Commit", "n", "Statistic", "p", "Risk")
_TO_THE_RIGHT = {2, 5}
_GAP = "  "
#: What changed stands beside the figures where so many columns are left, else below them.
_ROOM = 24
_SHORT = 12
_CHANGES = {
    "look": "new look",
    "rerun": "rerun",
    "retold": "p told otherwise",
    "other": "other data or code",
    "smaller": "fewer units: other data or code",
    "unsized": "other numbers, from a number of units that is not told",
}


def course(told: Course, width: int) -> str:
    """Return the states of a record, oldest first, and what they say about looks."""
    doubts = [f"{told.looks.why} To mend: {words.sentence(told.looks.advice)}"] if not told.looks.known else []
    return page([
        paragraph(_head(told), width),
        "\n".join(_table(told.steps, width)),
        paragraph(_assumed(told), width),
        *(paragraph(text, width) for text in (_looks(told), *doubts)),
        section("Could not be read", [item(text, width) for text in _unreadable(told)]),
        *(paragraph(text, width) for text in _hints(told)),
    ])


def _head(told: Course) -> str:
    gone = "" if told.in_tree else " The tree holds it no longer."
    return f"{told.id} through {words.count(len(told.steps), 'state')}, oldest first.{gone}"


def _table(steps: Sequence[Step], width: int) -> list[str]:
    rows = [_HEAD, *(_row(step) for step in steps)]
    widths = [max(len(row[column]) for row in rows) for column in range(len(_HEAD))]
    indent = sum(widths) + len(_GAP) * len(widths)
    if indent + _ROOM > width:
        indent = len(_GAP) * 2
    changes = [_changed(step) for step in steps]
    lines = []
    for row, change in zip(rows, ("What changed", *changes), strict=True):
        figures = _GAP.join(_aligned(text, widths[at], at) for at, text in enumerate(row)) + _GAP
        if indent == len(figures):
            lines.append(paragraph(change, width, figures, " " * indent))
        else:
            lines.append(f"{figures.rstrip()}\n{paragraph(change, width, ' ' * indent)}")
    return lines


def _aligned(text: str, width: int, column: int) -> str:
    return text.rjust(width) if column in _TO_THE_RIGHT else text.ljust(width)


def _row(step: Step) -> tuple[str, ...]:
    cells = (
        step.day,
        "the tree" if step.commit is None else step.commit[:_SHORT],
        "" if step.size is None else decimal(step.size),
        step.statistic,
        step.p,
        "" if step.risk is None else percent(step.risk),
    )
    return tuple(plain(cell) for cell in cells)


def _changed(step: Step) -> str:
    parts = ["first state" if step.first else _CHANGES[step.change]]
    if step.claim != "kept":
        parts.append(f"claim {step.claim}")
    if step.id_before is not None:
        parts.append(f"id changed from {step.id_before}")
    if not step.on_line:
        parts.append("off the main line")
    return ", ".join(parts)


def _assumed(told: Course) -> str:
    if not told.assumed:
        return "No risk is given, as no result could be weighed."
    under = [f"{words.alternative_words(name)}, prior {prior:.4g}" for name, prior in told.assumed]
    return f"Risk: the false positive risk {'; '.join(under)}."


def _looks(told: Course) -> str:
    looks = len(told.looks.looks)
    least = "" if told.looks.known else "at least "
    shown = f"The history shows {least}{'one look' if looks == 1 else f'{looks} looks'}"
    if told.planned:
        return f"{shown}. {told.planned}"
    if looks == 1:
        return f"{shown}, so its type I error is that of one test: {told.alpha:g}."
    return (
        f"{shown}: without a boundary planned for them, as many{' one-sided ones' if told.sides == 1 else ''} at "
        f"{told.alpha:g}{_spacing(told)} have a real type I error of {decimal(told.error, told.alpha)}."
    )


def _spacing(told: Course) -> str:
    information = told.looks.information
    spacing = uneven_spacing(information) if information else ""
    return f", with information as {spacing}," if spacing else ""


def _unreadable(told: Course) -> list[str]:
    return [f"{one.path} at {one.commit[:_SHORT]}: {words.sentence(one.message)}" for one in told.unreadable]


def _hints(told: Course) -> list[str]:
    if not told.maybe_before:
        return []
    held = f"The history held {', '.join(told.maybe_before)} for the same hypothesis, and no record here does."
    return [f"{held} What is an earlier id of this result belongs under aliases."]
