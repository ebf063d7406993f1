"""The log for code scanning: the published schema, what its readers want, caps and stable identities."""

from __future__ import annotations

import gzip
import json
import random
import string
from pathlib import Path
from typing import Any

import jsonschema
import pytest
from render.sample_verdicts import BOTH, BROKEN, BY_NAME, CANNOT_JUDGE, DRAINAGE, FALLS_SHORT, POLICY, STANDS
from render.sarif_schema import PUBLISHED, VALIDATOR

from gatecheck.model.verdict import Enforce, Finding, Judged, Outcome, Place, Problem, Verdict
from gatecheck.render import RENDERERS
from gatecheck.render.sarif import MOST_RESULTS, SCHEMA

EXPECTED = Path(__file__).parent / "expected"


def log_of(verdict: Verdict) -> dict[str, Any]:
    read: dict[str, Any] = json.loads(RENDERERS["sarif"](verdict))
    VALIDATOR.validate(read)
    return read


def run_of(verdict: Verdict) -> dict[str, Any]:
    run: dict[str, Any] = log_of(verdict)["runs"][0]
    return run


def record(name: str, *findings: Finding, counts_now: bool = True, line: int = 2) -> Judged:
    return Judged(name, Place("a.json", line), "c", "", None, findings, (), counts_now)


def finding(outcome: Outcome, enforce: Enforce = "block") -> Finding:
    return Finding("false-positive-risk", outcome, enforce, message="found 7 %", remedy="more plots")


@pytest.mark.parametrize("name", BY_NAME)
def test_whole_text(name: str) -> None:
    expected = (EXPECTED / f"sarif-{name}.json").read_text(encoding="utf-8")
    assert RENDERERS["sarif"](BY_NAME[name]) == expected
    VALIDATOR.validate(json.loads(expected))


def test_the_published_schema_is_the_one_that_is_named_and_refuses_what_is_wrong() -> None:
    assert PUBLISHED["id"] == SCHEMA
    log = log_of(BOTH)
    assert log["$schema"] == SCHEMA
    log["runs"][0]["results"][0]["level"] = "blocker"
    with pytest.raises(jsonschema.ValidationError, match="blocker"):
        VALIDATOR.validate(log)


@pytest.mark.parametrize("name", BY_NAME)
def test_what_code_scanning_wants_stands_and_is_not_empty(name: str) -> None:
    """SOURCE: GitHub, SARIF support for code scanning: required properties, none of them empty."""
    run = run_of(BY_NAME[name])
    rules = run["tool"]["driver"]["rules"]
    for rule in rules:
        assert all(rule[key]["text"] for key in ("shortDescription", "fullDescription", "help"))
    assert run["results"]
    for result in run["results"]:
        assert rules[result["ruleIndex"]]["id"] == result["ruleId"]
        assert result["message"]["text"]
        (location,) = result["locations"]
        assert location["physicalLocation"]["artifactLocation"]["uri"]
        region = location["physicalLocation"]["region"]
        assert (region["startColumn"], region["endLine"], region["endColumn"]) == (1, region["startLine"], 2)
        assert list(result["partialFingerprints"]) == ["primaryLocationLineHash"]


@pytest.mark.parametrize(
    ("outcome", "enforce", "counts_now", "level", "state"),
    [
        ("short", "block", True, "error", "short"),
        ("undecided", "block", True, "error", "undecided"),
        ("short", "block", False, "note", "unchanged"),
        ("undecided", "block", False, "note", "unchanged"),
        ("short", "note", True, "note", "noted"),
        ("undecided", "note", True, "note", "noted"),
        ("waived", "block", True, "note", "waived"),
    ],
)
def test_an_error_is_what_decides_the_exit_status(
    outcome: Outcome, enforce: Enforce, counts_now: bool, level: str, state: str
) -> None:
    verdict = Verdict(POLICY, (record("a", finding(outcome, enforce), counts_now=counts_now),))
    (result,) = run_of(verdict)["results"]
    assert (result["level"], result["properties"]) == (level, {"record": "a", "state": state})
    assert (level == "error") == (verdict.exit != 0)
    # The standard gives every other kind no level.
    assert "kind" not in result


@pytest.mark.parametrize(("outcome", "enforce"), [("met", "block"), ("does-not-apply", "block"), ("short", "off")])
def test_what_the_policy_does_not_act_on_is_no_result(outcome: Outcome, enforce: Enforce) -> None:
    assert run_of(Verdict(POLICY, (record("a", finding(outcome, enforce)),)))["results"] == []


def test_a_waiver_is_an_accepted_suppression_with_its_reason() -> None:
    waived = Finding("r", "waived", "block", message="found 7 %. Waived until 2031-09-01 by B: pilot")
    (result,) = run_of(Verdict(POLICY, (record("a", waived),)))["results"]
    assert result["suppressions"] == [
        {
            "kind": "external",
            "status": "accepted",
            "justification": "R: found 7 %. Waived until 2031-09-01 by B: pilot.",
        }
    ]


def test_a_problem_is_seen() -> None:
    run = run_of(CANNOT_JUDGE)
    assert (run["results"][0]["ruleId"], run["results"][0]["level"]) == ("readable", "error")
    assert run["results"][0]["message"]["text"].startswith("Could not be read or judged: the document ends inside")
    assert (run["invocations"][0]["executionSuccessful"], run["invocations"][0]["exitCode"]) == (False, 3)


def test_a_problem_of_the_whole_tree_stands_at_the_policy() -> None:
    (result,) = run_of(Verdict(None, (), (Problem(Place("."), "too few records", "add some"),)))["results"]
    assert result["locations"][0]["physicalLocation"]["artifactLocation"] == {"uri": "gatecheck.yaml"}
    assert result["message"]["text"].startswith("The whole tree: Could not be read or judged: too few records.")


def test_the_run_tells_the_version_the_headline_and_the_notes() -> None:
    run = run_of(Verdict(POLICY, STANDS.judged, notes=("One note.",), version="1.2.3"))
    assert run["tool"]["driver"]["version"] == "1.2.3"
    assert [one["message"]["text"] for one in run["invocations"][0]["toolExecutionNotifications"]] == [
        "Stands: 2 of 4 claims meet the policy; 1 is waived; 1 is short or undecided but unchanged, and not "
        "counted.",
        "One note.",
    ]
    assert "version" not in run_of(STANDS)["tool"]["driver"]


def test_also_at_becomes_related_locations_with_their_cells() -> None:
    result = run_of(FALLS_SHORT)["results"][0]
    assert [one["message"]["text"] for one in result["relatedLocations"]] == [
        "notebooks/drainage.ipynb, line 210 (cell 7, output 1)"
    ]
    many = Judged(
        "a", DRAINAGE.at, "c", "", None, (finding("short"),), tuple(Place("b", n + 1) for n in range(150))
    )
    assert len(run_of(Verdict(POLICY, (many,)))["results"][0]["relatedLocations"]) == 100


def fingerprints(verdict: Verdict) -> list[str]:
    return [result["partialFingerprints"]["primaryLocationLineHash"] for result in run_of(verdict)["results"]]


def test_a_fingerprint_rests_on_the_record_and_the_rule_alone() -> None:
    before = fingerprints(Verdict(POLICY, (record("a", finding("short")),)))
    moved = Judged("a", Place("z/b.json", 900), "other", "t = 9", None, (finding("undecided"),))
    assert fingerprints(Verdict(None, (moved,), (BROKEN,)))[1:] == before
    assert fingerprints(Verdict(POLICY, (record("b", finding("short")),))) != before
    other = Finding("prior-needed", "short", "block")
    assert fingerprints(Verdict(POLICY, (record("a", other),))) != before


def test_no_two_results_have_one_fingerprint() -> None:
    """What says the same twice in one place must not hide behind itself."""
    twice = record("a", finding("short"))
    verdict = Verdict(POLICY, (twice, twice), (BROKEN, BROKEN, Problem(BROKEN.at, "other", "")))
    assert len(set(fingerprints(verdict))) == 5


def test_the_worst_stand_where_there_are_too_many_and_a_notification_counts_the_rest() -> None:
    judged = tuple(record(f"r{n:05}", finding("short" if n % 2 else "undecided"), line=n + 1) for n in range(6000))
    verdict = Verdict(POLICY, (*judged, record("n", finding("short", "note"))), (BROKEN,))
    run = json.loads(RENDERERS["sarif"](verdict))["runs"][0]
    states = [result["properties"]["state"] for result in run["results"]]
    assert len(states) == MOST_RESULTS
    assert states == ["problem"] + ["short"] * 3000 + ["undecided"] * 1999
    assert run["invocations"][0]["toolExecutionNotifications"][-1] == {
        "level": "warning",
        "message": {"text": "Left out for length: 1002 results. The JSON verdict holds them all."},
    }


def test_the_largest_log_stays_below_what_code_scanning_takes() -> None:
    """At most 10 MB, compressed (SOURCE: GitHub, SARIF support for code scanning)."""
    letters = random.Random(3)  # noqa: S311  # text that compresses badly, no secret
    # More of them than a compressor looks back on.
    texts = ["".join(letters.choices(string.ascii_letters, k=2000)) for _ in range(50)]
    findings = [Finding("r", "short", "block", message=text) for text in texts]
    log = RENDERERS["sarif"](Verdict(POLICY, tuple(record(f"r{n}", findings[n % 50]) for n in range(MOST_RESULTS))))
    assert 5_000_000 < len(gzip.compress(log.encode(), 1)) < 10_000_000


@pytest.mark.parametrize(
    ("path", "uri"),
    [
        ("results/a b.json", "results/a%20b.json"),
        ("c:d/e#f?g.json", "c%3Ad/e%23f%3Fg.json"),
        ("grün/草.json", "gr%C3%BCn/%E8%8D%89.json"),
        ("back\\slash%20.json", "back%5Cslash%2520.json"),
        ("no-utf8-\udcff.json", "no-utf8-%FF.json"),
        ("/absolute", "%2Fabsolute"),
    ],
)
def test_a_path_is_a_relative_uri(path: str, uri: str) -> None:
    (result,) = run_of(Verdict(None, (), (Problem(Place(path), "m", ""),)))["results"]
    assert result["locations"][0]["physicalLocation"]["artifactLocation"]["uri"] == uri
