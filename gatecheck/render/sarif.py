"""The verdict in the interchange format of static analysis (SARIF 2.1.0), for code scanning."""

from __future__ import annotations

import json
from typing import Any

from gatecheck.model.exit import Exit
from gatecheck.model.verdict import Place, Verdict
from gatecheck.render import words
from gatecheck.render.entries import LONGEST_TEXT, READABLE, Entry, entries, identities, left_out
from gatecheck.render.text import cut, plain, sarif_message, uri

SCHEMA = "https://docs.oasis-open.org/sarif/sarif/v2.1.0/errata01/os/schemas/sarif-schema-2.1.0.json"
VERSION = "2.1.0"

#: Code scanning keeps this many results of a run (SOURCE: GitHub, SARIF support for code scanning).
MOST_RESULTS = 5000
#: It keeps this many locations of a result (SOURCE: the same).
MOST_LOCATIONS = 100
#: Every result needs a file: what concerns the whole tree stands at the policy, which says what it holds.
WHOLE_TREE = "gatecheck.yaml"
#: Readers know this fingerprint alone, and make one of the text of the line where it is missing (SOURCE: the same).
FINGERPRINT = "primaryLocationLineHash"

_ERRORS = {"problem", "short", "undecided"}
_RULE = "{rule}: one of the rules that the reporting policy of a team can set for its records."
_READABLE = (
    "Every record, and all that it is judged by, can be read and judged. What cannot be never counts as passed."
)
_HELP = "`gatecheck explain ID` shows all that was found of the record with that id."
_HELP_READABLE = "The message says what to do. `gatecheck survey` lists all that could not be read."


def sarif(verdict: Verdict) -> str:
    """Return the verdict as a log of one run: ASCII, at most `MOST_RESULTS` results, worst first.

    An error is what makes the exit status other than 0, and nothing else is. What is undecided is an error of the
    kind `fail`: the kinds for an open question may have no level, and would pass unseen. What is waived is a note
    with an accepted suppression.
    """
    found = entries(verdict)
    shown = found[:MOST_RESULTS]
    rules = sorted({entry.rule for entry in shown})
    run = {
        "tool": {"driver": {"name": "gatecheck", **_version(verdict), "rules": [_rule(name) for name in rules]}},
        "invocations": [_invocation(verdict, len(found) - len(shown))],
        "columnKind": "unicodeCodePoints",
        "results": [
            _result(entry, rules.index(entry.rule), name)
            for entry, name in zip(shown, identities(shown), strict=True)
        ],
    }
    return json.dumps({"$schema": SCHEMA, "version": VERSION, "runs": [run]}, indent=2, ensure_ascii=True) + "\n"


def _version(verdict: Verdict) -> dict[str, str]:
    return {"version": verdict.version} if verdict.version else {}


def _rule(name: str) -> dict[str, Any]:
    title = words.rule_words(name)
    readable = name == READABLE
    return {
        "id": name,
        "shortDescription": _text(title),
        "fullDescription": _text(_READABLE if readable else _RULE.format(rule=title)),
        "help": _text(_HELP_READABLE if readable else _HELP),
    }


def _invocation(verdict: Verdict, missing: int) -> dict[str, Any]:
    told = [_notification("note", text) for text in (words.headline(verdict), *verdict.notes)]
    if missing:
        told.append(_notification("warning", left_out(missing, "result")))
    return {
        "executionSuccessful": verdict.exit != Exit.CANNOT_JUDGE,
        "exitCode": int(verdict.exit),
        "toolExecutionNotifications": told,
    }


def _notification(level: str, text: str) -> dict[str, Any]:
    return {"level": level, "message": _text(text)}


def _result(entry: Entry, rule: int, identity: str) -> dict[str, Any]:
    result = {
        "ruleId": entry.rule,
        "ruleIndex": rule,
        "level": "error" if entry.kind in _ERRORS else "note",
        "message": _text(entry.text),
        "locations": [_location(entry.at)],
        "partialFingerprints": {FINGERPRINT: identity},
        "properties": {"record": plain(entry.record), "state": entry.kind},
    }
    if entry.also_at:
        result["relatedLocations"] = [
            {"id": number, **_location(place)}
            for number, place in enumerate(entry.also_at[:MOST_LOCATIONS], start=1)
        ]
    if entry.kind == "waived":
        justification = cut(plain(entry.said), LONGEST_TEXT)
        result["suppressions"] = [{"kind": "external", "status": "accepted", "justification": justification}]
    return result


def _location(place: Place) -> dict[str, Any]:
    path = WHOLE_TREE if place.is_whole_tree else place.path
    # Of a place the line is known and no column; readers want all four, and the first character is in every line.
    region = {"startLine": place.line, "startColumn": 1, "endLine": place.line, "endColumn": 2}
    location: dict[str, Any] = {"physicalLocation": {"artifactLocation": {"uri": uri(path)}, "region": region}}
    if place.cell is not None:
        location["message"] = _text(words.where(place))
    return location


def _text(text: str) -> dict[str, str]:
    return {"text": sarif_message(cut(plain(text), LONGEST_TEXT))}
