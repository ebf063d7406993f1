"""The reader and the published JSON Schema come from one model and answer alike."""

from __future__ import annotations

import copy
import json
import random
from typing import Any

import jsonschema
import pytest
from make_schemas import schemas, text_of
from support import POLICY, drainage

from gatecheck.model.record import Record
from gatecheck.policies import read_own_policy
from gatecheck.policy import STARTING_POLICY
from gatecheck.schema import published
from gatecheck.schema.read import read

KINDS = ("record", "plan", "waivers", "policy", "verdict")
FULL = drainage(
    prior={"probability": 0.25, "basis": "earlier work"},
    family={
        "name": "growth",
        "size": 6,
        "procedure": "graphical",
        "adjusted_p": "0.12",
        "weight": 0.5,
        "passes_on": {"growth/height": 0.5, "growth/leaf-area": 0.5},
    },
    screen={
        "tests": 10_000,
        "hits": 139,
        "alpha": 0.01,
        "power": 0.8,
        "prior": 0.005,
        "called": "candidates",
        "removed": [{"n": 2300, "reason": "low cell count", "planned": True}],
    },
    look={"number": 1, "planned": 1, "information": 1.0, "boundary": "pocock"},
    plan={"file": "plans/drainage.yaml", "hypothesis": "H1"},
    deviations=[{"field": "n", "planned": "40", "done": "36", "reason": "flood", "known": "before-data"}],
    tags=["soil"],
    aliases=["old/id"],
    provenance={
        "code": "analysis.py",
        "inputs": [{"path": "plots.csv", "sha256": "0" * 64}],
        "software": {"python": "3.11.7"},
    },
)


@pytest.mark.parametrize("kind", ["record", "plan", "waivers", "policy"])
def test_the_published_schema_is_that_of_the_model(kind: str) -> None:
    """After a change of a model: python tests/make_schemas.py."""
    assert published(kind) == text_of(schemas()[kind])


@pytest.mark.parametrize("kind", KINDS)
def test_the_published_schema_is_a_valid_schema(kind: str) -> None:
    schema = json.loads(published(kind))

    jsonschema.Draft202012Validator.check_schema(schema)
    assert schema["title"] == f"{kind}/1"


def _faulty(random_: random.Random) -> Any:
    """The full record with one value, anywhere in it, replaced by an odd one, or with an odd key."""
    document = copy.deepcopy(FULL)
    place: Any = document
    while True:
        key: Any = random_.choice(list(place) if isinstance(place, dict) else range(len(place)))
        inner = place[key]
        if isinstance(inner, dict | list) and inner and random_.random() < 0.8:
            place = inner
            continue
        odd: list[Any] = [None, True, -1, 0, 0.5, 1, 36.0, 2.5, "x", "", "0.5", "<0.001", [], {}, [1, 2], ["a"]]
        place[key] = random_.choice(odd)
        return document


def test_reader_and_schema_agree_on_generated_records() -> None:
    """Whatever the reader takes the schema takes, and the reverse, over 3,000 records with one odd value."""
    validator = jsonschema.Draft202012Validator(json.loads(published("record")))
    random_ = random.Random(20310402)  # noqa: S311  # a seed that can be repeated
    taken = 0
    for _ in range(3000):
        document = _faulty(random_)
        _, faults = read(Record, document)
        assert validator.is_valid(document) == (not faults), (document, faults)
        taken += not faults
    assert 200 < taken < 2800


@pytest.mark.parametrize(
    ("changes", "valid"),
    [
        ({}, True),
        ({"rules": {"false-positive-risk": {}}}, False),
        ({"rules": {"false-positive-risk": {"enforce": "off"}}}, True),
        ({"rules": {"no-such-rule": {}}}, False),
        ({"rules": {"numbers-agree": None}}, True),
        ({"at_least": -1}, False),
        (
            {"for": [{"match": {"status": "exploratory"}, "rules": {"false-positive-risk": {"enforce": "note"}}}]},
            True,
        ),
        ({"for": [{"rules": {}}]}, False),
        ({"evidence": {"prior": 1}}, False),
    ],
)
def test_reader_and_schema_agree_on_policies(changes: dict[str, Any], valid: bool) -> None:
    validator = jsonschema.Draft202012Validator(json.loads(published("policy")))
    document = {**POLICY, **changes}

    policy, faults = read_own_policy(document)

    assert (policy is not None, not faults, validator.is_valid(document)) == (valid, valid, valid)


def test_the_built_in_policy_is_valid() -> None:
    jsonschema.Draft202012Validator(json.loads(published("policy"))).validate(STARTING_POLICY)
    assert read_own_policy(STARTING_POLICY)[1] == ()
