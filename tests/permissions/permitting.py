"""What the tests of permissions share."""

from __future__ import annotations

from datetime import date
from typing import Any

from support import Document, drainage

from gatecheck.model.found import Found
from gatecheck.model.verdict import Finding, Place
from gatecheck.model.waivers import Waiver
from gatecheck.permissions.authors import Changer
from gatecheck.permissions.waivers import Circumstances
from gatecheck.schema.records import read_record

RULE = "false-positive-risk"
RULES = (RULE, "prior-needed", "numbers-agree")
AUTHOR = Changer("Ada Example", "ada@example.org")


def found(document: Document | None = None, path: str = "results/drainage.json") -> Found:
    """A record as the scan finds it."""
    whole = drainage() if document is None else document
    record, faults = read_record(whole)
    assert record is not None, faults
    return Found(record, Place(path), whole)


SHORT = Finding(
    RULE,
    "short",
    "block",
    0.165,
    0.05,
    "The risk is 17 %; the policy allows 5 %.",
    "More plots.",
    found().permission_digest(),
)


def waiver(**changes: Any) -> Waiver:
    """A waiver that applies to the drainage record on any day of May 2031, with other values."""
    fields: dict[str, Any] = {
        "record": "drainage/earthworm-biomass",
        "rule": RULE,
        "reason": "A second season is under way.",
        "granted_by": "Bo Sample <bo@example.org>",
        "granted_on": "2031-05-01",
        "until": "2031-05-31",
        "digest": SHORT.digest,
    }
    return Waiver(**(fields | changes))


def circumstances(day: str = "2031-05-15", *changers: Changer) -> Circumstances:
    """That day, and who brought every record to what it says."""
    return Circumstances(date.fromisoformat(day), lambda _, __: changers or (AUTHOR,), RULES)
