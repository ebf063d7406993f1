"""Waivers: which of them apply to what falls short, and why the others do not."""

from __future__ import annotations

import unicodedata
from collections.abc import Callable, Collection, Iterable, Iterator, Sequence
from dataclasses import replace
from datetime import date
from pathlib import Path
from typing import TYPE_CHECKING

from gatecheck.model.found import Found
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Finding, Judged, Outcome
from gatecheck.model.waivers import Waiver, Waivers
from gatecheck.permissions.reading import Read, problem, read_permissions
from gatecheck.schema.read import Fault

if TYPE_CHECKING:
    from gatecheck.permissions.authors import Changer

WAIVERS_FILE = "gatecheck.waivers.yaml"
Row = tuple[Finding, ...]
#: What a row of findings is about: a record, or a plan as it was judged.
Subject = Found | Judged

_NOT_NEEDED: dict[Outcome, str] = {
    "met": "the record meets the rule",
    "does-not-apply": "the rule does not apply to the record",
}


@struct
class Circumstances:
    """On what it depends whether a waiver applies: the day, and who made something say what a rule reads in it."""

    day: date
    changers: Callable[[Subject, str], Sequence[Changer]]
    rules: Collection[str]


@struct
class Permitted:
    """Findings by row of which some are waived, and what is told of the permissions."""

    findings: tuple[Row, ...]
    notes: tuple[str, ...]


def read_waivers(root: Path, base: str | None) -> Read[Waivers]:
    """Read the waivers of the tree at `root`; with `base` those of that revision.

    Raises
    ------
    CannotJudge
        Git fails or does not know the base, or the file is there and cannot be read.
    """
    read = read_permissions(root, WAIVERS_FILE, Waivers, base)
    if read.value is None or read.file is None:
        return read
    faults = [*_faults_of_dates(read.value.waivers), *_repeats(read.value.waivers)]
    problems = tuple(problem(read.file, fault) for fault in faults)
    return Read(None, read.file, problems, read.notes) if problems else read


def _faults_of_dates(waivers: Sequence[Waiver]) -> Iterator[Fault]:
    for row, waiver in enumerate(waivers):
        dates = {"granted_on": waiver.granted_on, "until": waiver.until}
        wrong = [name for name, text in dates.items() if not _is_date(text)]
        for name in wrong:
            yield Fault(("waivers", row, name), f"is {dates[name]}, a day that no calendar has", "give a real day")
        if not wrong and waiver.until < waiver.granted_on:
            message = f"is {waiver.until}, before granted_on"
            yield Fault(("waivers", row, "until"), message, f"give a day from {waiver.granted_on} on")


def _is_date(text: str) -> bool:
    try:
        date.fromisoformat(text)
    except ValueError:
        return False
    return True


def _repeats(waivers: Sequence[Waiver]) -> Iterator[Fault]:
    seen: set[tuple[str, str]] = set()
    for row, waiver in enumerate(waivers):
        if (waiver.record, waiver.rule) in seen:
            message = f"waives {waiver.rule} on {waiver.record} a second time"
            yield Fault(("waivers", row), message, "keep one of the two")
        seen.add((waiver.record, waiver.rule))


def waive(
    findings: Sequence[Row], subjects: Sequence[Subject], waivers: Iterable[Waiver], circumstances: Circumstances
) -> Permitted:
    """Return `findings`, a row for each of `subjects`, with those waived that a waiver permits.

    A waived finding keeps all that was observed. A waiver that does not apply leaves a note that says why.
    """
    rows = {name_of(one): row for row, one in enumerate(subjects)}
    judged = list(findings)
    notes = []
    for waiver in waivers:
        why = _unknown(waiver, rows, circumstances.rules)
        if why:
            notes.append(f"The waiver of {waiver.rule} on {waiver.record} does not apply: {why}.")
            continue
        row = rows[waiver.record]
        finding = next((one for one in judged[row] if one.rule == waiver.rule), None)
        if finding is None or finding.outcome in _NOT_NEEDED or finding.enforce != "block":
            notes.append(f"The waiver of {waiver.rule} on {waiver.record} is not needed: {_not_needed(finding)}.")
        elif why := _against(waiver, finding, subjects[row], circumstances):
            notes.append(f"The waiver of {waiver.rule} on {waiver.record} does not apply: {why}.")
        else:
            judged[row] = tuple(_waived(one, waiver) if one.rule == waiver.rule else one for one in judged[row])
    return Permitted(tuple(judged), tuple(notes))


def name_of(subject: Subject) -> str:
    """Return what a permission calls a subject: the id of a record, the path of a plan."""
    return subject.record.id if isinstance(subject, Found) else subject.id


def _unknown(waiver: Waiver, rows: Collection[str], rules: Collection[str]) -> str:
    if waiver.rule not in rules:
        return f"there is no rule of that name{_nearest(waiver.rule, rules)}"
    if waiver.record not in rows:
        return f"there is no record of that id, and no plan at that path falls short{_nearest(waiver.record, rows)}"
    return ""


def _nearest(word: str, known: Iterable[str]) -> str:
    import difflib  # noqa: PLC0415  # needed for a waiver of nothing alone, and costs start-up time

    near = difflib.get_close_matches(word, sorted(known), n=1)
    return f"; the nearest is {near[0]}" if near else ""


def _not_needed(finding: Finding | None) -> str:
    if finding is None:
        return "the policy does not ask the rule of the record"
    return _NOT_NEEDED.get(finding.outcome, "the policy only notes what the rule finds there")


def _against(waiver: Waiver, finding: Finding, one: Subject, circumstances: Circumstances) -> str:
    """Why a waiver does not apply to a finding that blocks; nothing where it does."""
    if finding.outcome == "undecided":
        return "the rule cannot be decided there, and only what was judged can be waived"
    day = circumstances.day.isoformat()
    if day < waiver.granted_on:
        return f"it begins on {waiver.granted_on}"
    if day > waiver.until:
        return f"it expired on {waiver.until}"
    if finding.digest.removeprefix("sha256:") != waiver.digest.removeprefix("sha256:"):
        return f"the {kind_of(one)} has changed since in what the rule reads"
    if not _names(waiver.granted_by or ""):
        return "it says nobody in granted_by who grants it"
    return _against_approver(waiver.granted_by or "", circumstances.changers(one, waiver.rule), kind_of(one))


def kind_of(subject: Subject) -> str:
    """Return what a subject is called in a sentence."""
    return "record" if isinstance(subject, Found) else "plan"


def _against_approver(granted_by: str, changers: Sequence[Changer], kind: str) -> str:
    unknown = next((each.unknown for each in changers if each.unknown), "")
    if unknown:
        return f"who changed the {kind} is not known here: {unknown}"
    if any(_names(granted_by) & {_plain(each.name), _plain(each.email)} for each in changers):
        return f"it was granted by the author of the {kind}'s change"
    return ""


def _names(text: str) -> set[str]:
    """The name and the e-mail in `Name <mail>`, or the one of them that is there."""
    name, _, mail = text.partition("<")
    return {_plain(name), _plain(mail.partition(">")[0])} - {""}


def _plain(name: str) -> str:
    """A name or e-mail without what two spellings of it may differ in: case, blanks, forms of a letter."""
    return "".join(unicodedata.normalize("NFKC", name).casefold().split())


def _waived(finding: Finding, waiver: Waiver) -> Finding:
    granted = f"Waived until {waiver.until} by {(waiver.granted_by or '').strip()}: {waiver.reason.strip()}"
    return replace(finding, outcome="waived", message=f"{finding.message} {granted}".strip())
