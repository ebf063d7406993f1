"""The JSON document against its contract."""

from __future__ import annotations

import json
import math
from typing import Any

import jsonschema
import pytest
from render.sample_verdicts import BOTH, BY_NAME, DRAINAGE, FALLS_SHORT, OLD, POLICY, SLOPE

from gatecheck.model.verdict import Figures, Finding, Judged, Place, Verdict
from gatecheck.render import RENDERERS


def closed(**properties: Any) -> dict[str, Any]:
    return {
        "type": "object",
        "properties": properties,
        "required": list(properties),
        "additionalProperties": False,
    }


TEXT = {"type": "string"}
NUMBER = {"type": ["number", "null"]}
COUNT = {"type": "integer", "minimum": 0}
PLACE = {
    **closed(path=TEXT, line={"type": "integer", "minimum": 1}, cell=COUNT, output=COUNT),
    "required": ["path", "line"],
}
RULE = closed(
    rule=TEXT,
    outcome={"enum": ["met", "short", "waived", "does-not-apply", "undecided"]},
    enforce={"enum": ["block", "note", "off"]},
    observed=NUMBER,
    limit=NUMBER,
    message=TEXT,
    remedy=TEXT,
)
EVIDENCE = closed(
    alternative=TEXT,
    log_likelihood_ratio=NUMBER,
    prior=NUMBER,
    prior_from=TEXT,
    false_positive_risk=NUMBER,
    prior_needed=NUMBER,
    note=TEXT,
)
JUDGED = closed(
    id=TEXT,
    verdict={"enum": ["stands", "falls-short", "waived", "undecided"]},
    at=PLACE,
    claim={"type": ["string", "null"]},
    result=TEXT,
    evidence={"anyOf": [EVIDENCE, {"type": "null"}]},
    rules={"type": "array", "items": RULE},
    also_at={"type": "array", "items": PLACE},
)
JUDGED["properties"]["counts_now"] = {"const": False}
JUDGED["properties"]["kind"] = {"enum": ["plan", "text", "code"]}
POLICY_USED = closed(name=TEXT, digest=TEXT, **{"from": {"enum": ["base", "tree", "built-in"]}})
COUNTS = closed(
    **dict.fromkeys(
        ["claims", "stands", "falls-short", "waived", "undecided", "reported", "reported-falling-short"], COUNT
    )
)
COMMIT = {"type": ["string", "null"], "pattern": "^([0-9a-f]{40}|[0-9a-f]{64})$"}
CHANGE = closed(id=TEXT, change={"enum": ["strengthened", "new", "changed", "withdrawn"]}, at=PLACE, told=TEXT)
CONTRACT = closed(
    gatecheck={"const": "verdict/1"},
    verdict={"enum": ["stands", "falls-short", "cannot-judge"]},
    exit={"enum": [0, 1, 3]},
    policy={"anyOf": [POLICY_USED, {"type": "null"}]},
    counts=COUNTS,
    claims={"type": "array", "items": JUDGED},
    reported={"type": "array", "items": JUDGED},
    others={"type": "array", "items": JUDGED},
    problems={"type": "array", "items": closed(at=PLACE, message=TEXT, advice=TEXT)},
    notes={"type": "array", "items": TEXT},
    changes={"type": "array", "items": CHANGE},
    plans={"type": "array", "items": closed(path=TEXT, digest=TEXT)},
    base=COMMIT,
    head=COMMIT,
    tool=closed(name={"const": "gatecheck"}, version=TEXT),
)


def refuse(name: str) -> None:
    pytest.fail(f"{name} is not JSON")


def parsed(verdict: Verdict) -> dict[str, Any]:
    text = RENDERERS["json"](verdict)
    assert text.isascii()
    assert text.endswith("}\n")
    read: dict[str, Any] = json.loads(text, parse_constant=refuse)
    return read


@pytest.mark.parametrize("name", BY_NAME)
def test_the_document_keeps_the_contract(name: str) -> None:
    document = parsed(BY_NAME[name])
    jsonschema.validate(document, CONTRACT)
    assert list(document) == list(CONTRACT["properties"])


def test_counts_and_answer() -> None:
    document = parsed(FALLS_SHORT)
    assert (document["verdict"], document["exit"]) == ("falls-short", 1)
    assert document["counts"] == {
        "claims": 4,
        "stands": 2,
        "falls-short": 1,
        "waived": 1,
        "undecided": 0,
        "reported": 2,
        "reported-falling-short": 1,
    }
    assert document["notes"] == list(FALLS_SHORT.notes)
    assert document["policy"] == {"name": POLICY.name, "digest": POLICY.digest, "from": "base"}


def test_a_claim_reads_back_whole() -> None:
    claim = parsed(BOTH)["claims"][0]
    assert claim["id"] == DRAINAGE.id
    assert claim["at"] == {"path": "results/drainage.json", "line": 4}
    assert claim["also_at"] == [{"path": "notebooks/drainage.ipynb", "line": 210, "cell": 7, "output": 1}]
    assert DRAINAGE.evidence == Figures(**claim["evidence"])
    assert sorted(DRAINAGE.findings, key=lambda finding: finding.rule) == [
        Finding(**rule) for rule in claim["rules"]
    ]


def test_floats_keep_every_digit() -> None:
    one = Judged("a", Place("a"), None, "", None, (Finding("r", "met", "block", 0.1 + 0.2, 1e-300),))
    rule = parsed(Verdict(None, (one,)))["reported"][0]["rules"][0]
    assert (rule["observed"], rule["limit"]) == (0.1 + 0.2, 1e-300)


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf])
def test_what_is_not_finite_is_null(value: float) -> None:
    one = Judged(
        "a",
        Place("a"),
        "c",
        "",
        Figures("x", value, value, "", value, value, ""),
        (Finding("r", "met", "block", value),),
    )
    claim = parsed(Verdict(None, (one,)))["claims"][0]
    assert claim["evidence"]["log_likelihood_ratio"] is None
    assert claim["evidence"]["false_positive_risk"] is None
    assert claim["rules"][0]["observed"] is None


def test_records_sort_by_place_then_id_and_rules_by_name() -> None:
    places = [Place("b", 1), Place("a", 2), Place("a", 1, 3, 1), Place("a", 1, 3, 0), Place("a", 1)]
    findings = (Finding("z", "met", "block"), Finding("a", "met", "block"))
    records = [Judged(f"{n}", at, None, "", None, findings) for n, at in enumerate(places)]
    records.append(Judged("00", Place("b", 1), None, "", None, ()))
    document = parsed(Verdict(None, tuple(records)))
    assert [one["id"] for one in document["reported"]] == ["4", "3", "2", "1", "0", "00"]
    assert [rule["rule"] for rule in document["reported"][0]["rules"]] == ["a", "z"]


def test_only_a_record_that_does_not_count_says_so() -> None:
    assert parsed(Verdict(None, (OLD,)))["claims"][0]["counts_now"] is False
    assert "counts_now" not in parsed(Verdict(None, (SLOPE,)))["reported"][0]
