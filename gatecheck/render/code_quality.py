"""The verdict as a report of code quality for GitLab, which shows it in a merge request."""

from __future__ import annotations

import json
from typing import Any

from gatecheck.model.verdict import Verdict
from gatecheck.render.entries import LONGEST_TEXT, Entry, Kind, entries, identities
from gatecheck.render.text import cut, plain

#: How bad each entry is in GitLab's words (SOURCE: GitLab, Code Quality report format: these five).
SEVERITIES: dict[Kind, str] = {
    "problem": "blocker",
    "short": "critical",
    "undecided": "major",
    "unchanged": "minor",
    "noted": "minor",
    "waived": "info",
}
#: Every entry needs a file: what concerns the whole tree stands at the policy, which says what it holds.
WHOLE_TREE = "gatecheck.yaml"


def code_quality(verdict: Verdict) -> str:
    """Return the verdict as a JSON array: ASCII, worst first, one element for each entry.

    GitLab takes entries with one fingerprint for one, so that no two have the same.
    """
    found = entries(verdict)
    shown = [_issue(entry, name) for entry, name in zip(found, identities(found), strict=True)]
    return json.dumps(shown, indent=2, ensure_ascii=True) + "\n"


def _issue(entry: Entry, fingerprint: str) -> dict[str, Any]:
    path = WHOLE_TREE if entry.at.is_whole_tree else plain(entry.at.path)
    return {
        "description": cut(plain(entry.text), LONGEST_TEXT),
        "check_name": entry.rule,
        "fingerprint": fingerprint,
        "severity": SEVERITIES[entry.kind],
        "location": {"path": path, "lines": {"begin": entry.at.line}},
    }
