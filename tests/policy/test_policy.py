"""The policy: complaints name their key, overrides merge, the last match wins."""

from __future__ import annotations

from typing import Any

import pytest
from support import POLICY, Document, changed, drainage

from gatecheck.model.record import Record
from gatecheck.policies import read_own_policy
from gatecheck.policy import STARTING_POLICY, Applied, Policy
from gatecheck.rules import NAMES, false_positive_risk
from gatecheck.schema.records import read_record

FPR = "false-positive-risk"


def faults_of(document: Any) -> list[tuple[str, str, str]]:
    """Every fault of a policy, as field, message and advice."""
    policy, faults = read_own_policy(document)
    assert (policy is None) == bool(faults)
    return [(fault.field, fault.message, fault.advice) for fault in faults]


def policy_of(**changes: Any) -> Policy:
    """The policy of the field station with other values."""
    policy, faults = read_own_policy({**POLICY, **changes})
    assert faults == ()
    assert policy is not None
    return policy


def applied(overrides: list[Document], path: str = "results/a.json", **record: Any) -> Applied:
    """What a policy with these overrides asks of the drainage record with other values."""
    read, faults = read_record(drainage(**record))
    assert faults == ()
    assert isinstance(read, Record)
    return policy_of(**{"for": overrides}).for_record(read, path)


@pytest.mark.parametrize(
    ("changes", "fault"),
    [
        (
            {"rules": {"false-positive-rsk": {}}},
            (
                "rules.false-positive-rsk",
                "is no known rule",
                "the nearest known one is false-positive-risk (known: " + ", ".join(sorted(NAMES)) + ")",
            ),
        ),
        (
            {"rules": {FPR: {}}},
            (f"rules.{FPR}.limit", "is missing", "give it: largest false positive risk allowed"),
        ),
        (
            {"rules": {FPR: {"limit": 5}}},
            (f"rules.{FPR}.limit", "is 5, outside its range", "give a number from above 0 to below 1"),
        ),
        (
            {"rules": {FPR: {"limit": 0.05, "enforce": "warn"}}},
            (f"rules.{FPR}.enforce", "is 'warn'", "known: block, note, off"),
        ),
        ({"rules": {FPR: 0.05}}, (f"rules.{FPR}", "is 0.05, not an object", None)),
        (
            {"for": [{"match": {"status": "exploratory"}, "rules": {"prior-needed": {"enforce": "note"}}}]},
            ("for[0].rules.prior-needed.risk", "is missing", "give it: false positive risk to reach"),
        ),
        (
            {"for": [{"match": {"stage": "late"}}]},
            ("for[0].match.stage", "is no known key", None),
        ),
        ({"evidence": {"scale": 0}}, ("evidence.scale", "is 0, outside its range", "give a number above 0")),
        ({"evidence": {"prior": 0}}, ("evidence.prior", "is 0, outside its range", None)),
        (
            {"at_least": "1"},
            ("at_least", "is the text '1', where only a number is meant", "write 1 without quotes"),
        ),
        ({"gatecheck": "record/1"}, ("gatecheck", "is 'record/1'", "known: policy/1")),
    ],
)
def test_every_complaint_names_its_key(changes: Document, fault: tuple[str, str, str | None]) -> None:
    field, message, advice = fault

    found = faults_of({**POLICY, **changes})

    assert (field, message) in [each[:2] for each in found]
    assert advice is None or (field, message, advice) in found


def test_a_document_that_is_no_policy_is_one_fault() -> None:
    assert faults_of([]) == [("", "is a list, not an object", "write an object: The team's reporting policy.")]


def test_a_rule_that_is_off_needs_no_other_setting_and_says_nothing() -> None:
    assert faults_of({**POLICY, "rules": {FPR: {"enforce": "off"}}}) == []
    asked = applied([{"match": {"id": "drainage/*"}, "rules": {FPR: {"enforce": "off"}}}])
    assert sorted(asked.rules) == ["no-effect-support", "numbers-agree", "planned-split", "screen"]


def test_a_rule_that_is_not_named_is_off_save_those_always_on() -> None:
    assert sorted(applied([]).rules) == [FPR, "no-effect-support", "numbers-agree", "planned-split", "screen"]


@pytest.mark.parametrize(
    ("match", "hits"),
    [
        ({}, True),
        ({"status": "confirmatory"}, True),
        ({"status": ["exploratory", "descriptive"]}, False),
        ({"role": "primary"}, True),
        ({"role": "secondary"}, False),
        ({"aim": ["superiority", "difference"]}, True),
        ({"aim": "equivalence"}, False),
        ({"id": "drainage/*"}, True),
        ({"id": "*"}, False),
        ({"id": ["other", "**"]}, True),
        ({"path": "results/**"}, True),
        ({"path": ["notebooks/**"]}, False),
        ({"tag": "soil"}, True),
        ({"tag": ["water", "soil"]}, True),
        ({"tag": "water"}, False),
        ({"harm": False}, True),
        ({"harm": True}, False),
        ({"status": "confirmatory", "tag": "water"}, False),
    ],
)
def test_an_override_is_for_the_records_that_match_in_all_that_is_named(match: Document, hits: bool) -> None:
    asked = applied([{"match": match, "rules": {FPR: {"limit": 0.2}}}], tags=["soil"])

    settings = asked.rules[FPR]
    assert isinstance(settings, false_positive_risk.Settings)
    assert settings.limit == (0.2 if hits else 0.05)


def test_overrides_merge_in_order_and_the_last_wins() -> None:
    asked = applied([
        {"match": {}, "rules": {FPR: {"limit": 0.2, "enforce": "note"}}, "evidence": {"prior": 0.2}},
        {"match": {}, "rules": {FPR: {"limit": 0.1}}, "evidence": {"alternative": "bound"}},
    ])

    settings = asked.rules[FPR]
    assert isinstance(settings, false_positive_risk.Settings)
    assert (settings.limit, settings.enforce) == (0.1, "note")
    assert (asked.evidence.prior, asked.evidence.alternative) == (0.2, ("bound",))


def test_settings_are_worked_out_once_for_each_set_of_overrides() -> None:
    record, _ = read_record(drainage())
    policy = policy_of()
    assert record is not None

    assert policy.for_record(record, "a.json") is policy.for_record(record, "b.json")


def test_the_starting_policy_notes_what_is_exploratory() -> None:
    policy, _ = read_own_policy(STARTING_POLICY)
    record, _ = read_record(changed(drainage(), status="exploratory"))
    assert policy is not None
    assert record is not None

    asked = policy.for_record(record, "a.json")

    assert {name: each.enforce for name, each in sorted(asked.rules.items())} == {
        FPR: "note",
        "no-effect-support": "block",
        "numbers-agree": "block",
        "planned-split": "block",
        "screen": "block",
        "prior-needed": "note",
        "reported-in-full": "block",
    }
