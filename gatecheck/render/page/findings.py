"""What the findings of a record say in the page, without what the same record says already."""

from __future__ import annotations

from collections.abc import Sequence

from gatecheck.model.struct import struct
from gatecheck.model.verdict import Finding, Judged
from gatecheck.render import order, words
from gatecheck.render.page.notes import Text, parts
from gatecheck.render.page.wording import cleaned

#: Brackets that hold less are kept, as they are no whole result.
_LONG = 20


@struct
class Told:
    """One finding: the name of its rule, what was found, and what would mend it where that is not told yet."""

    rule: str
    message: Text
    remedy: Text | None


@struct
class Group:
    """Findings under one heading; why a record does not stand needs none."""

    title: str
    told: list[Told]


def findings_of(one: Judged) -> list[Group]:
    """Return the findings that a reader must see: what blocks first, then what is waived, then what is noted."""
    groups = [
        ("", order.blocking_findings(one)),
        ("Waived", order.waived_findings(one)),
        ("Noted, without effect on the verdict", order.noted_findings(one)),
    ]
    return [Group(title, _told(one, found)) for title, found in groups if found]


def texts_of(groups: Sequence[Group]) -> list[Text]:
    """Return all that the findings say."""
    return [text for group in groups for each in group.told for text in (each.message, each.remedy) if text]


def _told(one: Judged, findings: Sequence[Finding]) -> list[Told]:
    """A result in brackets, or a remedy, that is told already is not told twice."""
    told, known, remedies = [], cleaned(one.result), ""
    for finding in findings:
        message = cleaned(words.message(finding))
        remedy = finding.remedy if finding.remedy not in remedies else ""
        mended = Text(cleaned(words.sentence(remedy)), whole=True) if remedy else None
        told.append(Told(words.rule_words(finding.rule), Text(_without(message, known)), mended))
        known += f" {message}"
        remedies += f"{finding.remedy} "
    return told


def _without(message: str, known: str) -> str:
    return "".join(part for part in parts(message) if not _is_known(part, known))


def _is_known(part: str, known: str) -> bool:
    return part.startswith(" (") and len(part) >= _LONG and part[2:-1] in known
