"""Shortfalls accepted on adoption: they do not block until what they rest on changes, mostly a record's numbers."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from typing import Literal

from gatecheck.model.accepted import Accepted, AcceptedShortfall, Adoption
from gatecheck.model.verdict import Finding, Judged
from gatecheck.permissions.reading import Read, read_permissions
from gatecheck.permissions.waivers import Permitted, Row, Subject, kind_of, name_of

ACCEPTED_FILE = "gatecheck.accepted.yaml"
_MOST_NAMED = 5
_LAST_OF_FOUR_DIGITS = 0xFFFF
_HEAD = """\
# What fell short when the team adopted the gate: each entry lets one rule on one record pass, with the numbers that
# the record had, and for a rule that reads more than numbers with that too. An entry ends as soon as one of these
# changes; what falls short anew blocks. Running
# `gatecheck adopt` again takes off what has ended and adds nothing: to begin anew, delete this file first.
gatecheck: accepted/1
"""
Key = tuple[str, str]


def read_accepted(root: Path, base: str | None) -> Read[Accepted]:
    """Read the accepted shortfalls of the tree at `root`; with `base` those of that revision.

    Raises
    ------
    CannotJudge
        Git fails or does not know the base, or the file is there and cannot be read.
    """
    return read_permissions(root, ACCEPTED_FILE, Accepted, base)


def accept(
    findings: Sequence[Row], subjects: Sequence[Subject], accepted: Sequence[AcceptedShortfall]
) -> Permitted:
    """Return `findings`, a row for each of `subjects`, with those waived that were accepted on adoption."""
    rows = {name_of(one): row for row, one in enumerate(subjects)}
    judged = [list(row) for row in findings]
    changed: dict[Key, str] = {}
    over = 0
    for entry in accepted:
        row = rows.get(entry.record)
        position = None if row is None else _position(judged[row], entry.rule)
        if row is None or position is None:
            over += 1
            continue
        finding = judged[row][position]
        state = _state(entry, finding)
        over += state == "over"
        if finding.outcome == "short" and state == "changed":
            changed[entry.record, entry.rule] = kind_of(subjects[row])
        elif finding.outcome == "short" and state == "holds":
            kind = kind_of(subjects[row])
            judged[row] = [_waived(one, kind) if one.rule == entry.rule else one for one in judged[row]]
    return Permitted(tuple(tuple(row) for row in judged), (*_note_on_changed(changed), *_note_on_over(over)))


def adoption(listed: Sequence[AcceptedShortfall] | None, judged: Sequence[Judged], *, whole: bool) -> Adoption:
    """Return which shortfalls of the records `judged` are to be accepted.

    Without a list these are all that block and are short; what is neither record nor plan, such as a line of
    prose, has no digest and is not among them. Of a list that there is, those stay that still hold; none is added.
    Where the tree was not read `whole`, a record that is not there may be one that cannot be read, and its entries
    stay.
    """
    if listed is None:
        # A plan has a finding for each hypothesis that is missing, and one permission for all of them.
        found = {
            (one.id, finding.rule): AcceptedShortfall(one.id, finding.rule, finding.digest)
            for one in judged
            for finding in one.findings
            if finding.digest and finding.blocks and finding.outcome == "short"
        }
        entries = tuple(found.values())
        return Adoption(_in_order(entries), len(entries), 0)
    by_id = {one.id: one for one in judged}
    kept = [entry for entry in listed if _holds(entry, by_id.get(entry.record), whole=whole)]
    return Adoption(_in_order(kept), 0, len(listed) - len(kept))


def as_file(entries: Sequence[AcceptedShortfall]) -> str:
    """Return the text of the file that lists `entries`, which is ASCII whatever the records are called."""
    if not entries:
        return f"{_HEAD}accepted: []\n"
    lines = (
        f"  - {{record: {_quoted(each.record)}, rule: {_quoted(each.rule)}, digest: {_quoted(each.digest)}}}\n"
        for each in entries
    )
    return f"{_HEAD}accepted:\n{''.join(lines)}"


def _position(row: Sequence[Finding], rule: str) -> int | None:
    return next((position for position, finding in enumerate(row) if finding.rule == rule), None)


def _state(entry: AcceptedShortfall, finding: Finding) -> Literal["holds", "changed", "over"]:
    """Whether an entry is still for what its rule finds; one is over where nothing would block any more."""
    if finding.enforce != "block" or finding.outcome in {"met", "does-not-apply"}:
        return "over"
    same = entry.digest.removeprefix("sha256:") == finding.digest.removeprefix("sha256:")
    return "holds" if same else "changed"


def _holds(entry: AcceptedShortfall, one: Judged | None, *, whole: bool) -> bool:
    if one is None:
        return not whole
    position = _position(one.findings, entry.rule)
    return position is not None and _state(entry, one.findings[position]) == "holds"


def _waived(finding: Finding, kind: str) -> Finding:
    message = f"{finding.message} Accepted on adoption, until the {kind} changes in what the rule reads.".strip()
    return replace(finding, outcome="waived", message=message)


def _note_on_changed(changed: Mapping[Key, str]) -> tuple[str, ...]:
    if not changed:
        return ()
    named = ", ".join(f"{record} ({rule})" for record, rule in sorted(changed)[:_MOST_NAMED])
    more = f" and {len(changed) - _MOST_NAMED} more" if len(changed) > _MOST_NAMED else ""
    what = " or ".join(sorted(set(changed.values()), reverse=True))
    return (f"Accepted on adoption and no longer, as the {what} changed: {named}{more}.",)


def _note_on_over(over: int) -> tuple[str, ...]:
    if not over:
        return ()
    what = (
        "1 shortfall that was accepted on adoption is"
        if over == 1
        else (f"{over} shortfalls that were accepted on adoption are")
    )
    return (f"{what} there no more; `gatecheck adopt` takes such entries off {ACCEPTED_FILE}.",)


def _in_order(entries: Sequence[AcceptedShortfall]) -> tuple[AcceptedShortfall, ...]:
    return tuple(sorted(entries, key=lambda each: (each.record, each.rule)))


def _quoted(text: str) -> str:
    """`text` in double quotes, as YAML reads it."""
    return f'"{"".join(map(_written, text))}"'


def _written(character: str) -> str:
    if character.isascii() and character.isprintable():
        return f"\\{character}" if character in {'"', "\\"} else character
    code = ord(character)
    return f"\\u{code:04x}" if code <= _LAST_OF_FOUR_DIGITS else f"\\U{code:08x}"
