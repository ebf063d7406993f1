"""What the gate will say of a record that was just declared, as HTML and as text beside its display in a notebook.

The record is judged by itself, under the policy of the nearest folder. What needs the other records, a plan, the
history or files is left to the gate, and the display says so.
"""

from __future__ import annotations

import os
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from gatecheck import git
from gatecheck.columns import columns_of
from gatecheck.compare.own_numbers import own_numbers
from gatecheck.errors import CannotJudge
from gatecheck.evidence import weigh_columns
from gatecheck.figures import FigureTable
from gatecheck.globs import matches
from gatecheck.model.found import Found
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Finding, Judged, Place
from gatecheck.policies import POLICY_FILE, Standing, standing_policy
from gatecheck.policy import Applied, Policy
from gatecheck.render import order, words
from gatecheck.render.layout import paragraph
from gatecheck.render.text import html
from gatecheck.rules import rules_among
from gatecheck.rules.engine import judge_all
from gatecheck.rules.rule import Rule, Table
from gatecheck.rules.words import describe_result
from gatecheck.schema.records import read_record

_WORDS = "wording"
#: The rules that look at nothing but the record.
BY_ITSELF = frozenset({
    "false-positive-risk", "prior-needed", "robust", "no-effect-support", "screen", "practical-size",
    "numbers-agree", "planned-split", "reported-in-full", _WORDS,
})  # fmt: skip
CLOSING = (
    "the gate decides by the policy of the base, and with the other records (families, replications), plans, the "
    "history and waivers; none of these was looked at here."
)
_WIDTH = 100
_STANDINGS = {
    "stands": "meets what the policy asks of this record by itself",
    "falls-short": "falls short of the policy",
    "undecided": "cannot be decided",
}

Row = tuple[str, str]


@struct
class _Near:
    """The folder whose policy counts, how it is reached from the notebook's, and the top of the repository."""

    root: Path
    way: str
    top: Path | None


def shown(document: Mapping[str, Any], folder: Path, written: Path | None) -> tuple[str, str]:
    """Return what the gate will say of a record, as HTML and as text.

    Parameters
    ----------
    document
        The record, without faults.
    folder
        The notebook's folder. The policy is that of the nearest `gatecheck.yaml` from there up to the top of the
        repository, else the built-in starting policy.
    written
        The file of the record, relative to `folder` or absolute; `None` where the notebook is its file.

    Raises
    ------
    ValueError
        The record has faults.
    """
    try:
        rows = _rows(document, folder.resolve(), written)
    except CannotJudge as stop:
        rows = [("verdict", words.with_remedy(words.sentence(f"cannot judge: {stop.message}"), stop.advice))]
    return _html(rows), _text(rows)


def _rows(document: Mapping[str, Any], folder: Path, written: Path | None) -> list[Row]:
    near = _nearest(folder)
    standing = standing_policy(near.root, None, None)
    if standing.policy is None:
        problems = " ".join(f"{words.where(one.at)}: {words.problem(one)}" for one in standing.problems)
        return [("verdict", f"cannot judge, as the policy cannot be read. {problems}")]
    file = _file(document, folder, written, near)
    record, _ = read_record(document)
    if record is None:
        raise ValueError("the record has faults")
    found = Found(record, Place(file or "."), document)
    applied = standing.policy.for_record(record, file or "")
    judged = _judged(found, applied)
    return [
        ("verdict", _verdict(judged)),
        *_figures(judged),
        *_findings(judged),
        ("policy", _policy(standing, standing.policy.document.name, near)),
        *_left_out(found, applied),
        *_doubts(file, standing.policy),
        ("in CI", CLOSING),
    ]


def _nearest(folder: Path) -> _Near:
    top = git.toplevel(folder)
    above = [folder, *folder.parents]
    reachable = above[: above.index(top.resolve()) + 1] if top is not None and top.resolve() in above else [folder]
    root = next((each for each in reachable if (each / POLICY_FILE).exists()), folder)
    return _Near(root, _relative(root / POLICY_FILE, folder), top)


def _file(document: Mapping[str, Any], folder: Path, written: Path | None, near: _Near) -> str | None:
    """The file of the record relative to the folder of the policy; `None` where it is not known."""
    code = document.get("provenance", {}).get("code")
    if written is not None:
        file = (folder / written).resolve()
    elif code is not None and near.top is not None:
        file = near.top.resolve() / code
    else:
        return None
    return _relative(file, near.root)


def _relative(file: Path, folder: Path) -> str:
    relative: str = os.path.relpath(file, folder)
    return relative.replace(os.sep, "/")


def _judged(found: Found, applied: Applied) -> Judged:
    columns = columns_of([found])
    evidence = weigh_columns(columns, [applied.evidence])
    table = Table(columns, evidence, own_numbers(columns, evidence), (applied,))
    figures, _ = FigureTable(table).of_row(0, in_full=False)
    (findings,) = judge_all(_rules(found), table)
    record = found.record
    return Judged(record.id, found.at, record.claim, describe_result(record), figures, findings)


def _rules(found: Found) -> tuple[Rule, ...]:
    """The rules that can be answered: words that compare two effects need the records that they compare."""
    left_open = {_WORDS} if found.record.compares is not None else set()
    return rules_among(BY_ITSELF - left_open)


def _verdict(one: Judged) -> str:
    if one.claim is None and one.standing == "stands":
        return "nothing is claimed; the result is only reported"
    return _STANDINGS[one.standing]


def _figures(one: Judged) -> list[Row]:
    """The risk with what it rests on, and the prior that would be needed."""
    figures = one.evidence
    if figures is None:
        return []
    if figures.false_positive_risk is None:
        return [("risk", words.UNKNOWN)]
    needed = words.probability(figures.prior_needed, words.limit_of(one, words.PRIOR_RULE))
    return [("risk", f"{words.risk(one)}; prior needed {needed}"), ("note", figures.note)]


def _findings(one: Judged) -> list[Row]:
    rows: list[Row] = []
    for finding in order.blocking_findings(one):
        rows += [("why", words.found(finding)), *_remedy(finding)]
    for finding in order.noted_findings(one):
        rows += [("noted only", words.found(finding)), *_remedy(finding)]
    return rows


def _remedy(finding: Finding) -> list[Row]:
    return [("to mend", words.sentence(finding.remedy))] if finding.remedy else []


def _policy(standing: Standing, name: str, near: _Near) -> str:
    if standing.used is not None and standing.used.origin == "tree":
        return f"{name} ({near.way})"
    return (
        f"{name}, as there is no {POLICY_FILE} from this folder up to the top of the repository; "
        "`gatecheck start` writes one"
    )


def _left_out(found: Found, applied: Applied) -> list[Row]:
    answered = {rule.name for rule in _rules(found)}
    left = ", ".join(sorted(applied.rules.keys() - answered))
    return [("left open", f"the policy also asks for {left}, which needs more than this record.")] if left else []


def _doubts(file: str | None, policy: Policy) -> list[Row]:
    """Where the gate may not see the record, or see it under another part of the policy."""
    globs = policy.document.scan
    if file is None:
        by_path = any(override.match.path is not None for override in policy.document.for_)
        doubt = "the path of this notebook is not known here, and parts of the policy hold for some paths only."
        return [("file", doubt)] if by_path else []
    if file.startswith("../"):
        return [("file", "the record lies outside of the folder of this policy, so it is not judged by it.")]
    if matches(globs.include, file) and not matches(globs.exclude, file):
        return []
    return [("file", f"the policy does not name {file} in its scan, so the gate will not see the record there.")]


def _html(rows: list[Row]) -> str:
    cells = (f"<dt>{html(label)}</dt><dd>{html(text)}</dd>" for label, text in rows)
    return f"<dl>{''.join(cells)}</dl>"


def _text(rows: list[Row]) -> str:
    width = max(len(label) for label, _ in rows)
    return "\n".join(paragraph(text, _WIDTH, f"{label:<{width}}  ", " " * (width + 2)) for label, text in rows)
