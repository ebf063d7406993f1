"""The digest of a record's numbers: what a permission rests on, and what leaves it as it is."""

from __future__ import annotations

import hashlib
import json
from typing import Any

import pytest
from permissions.permitting import found
from support import drainage

from gatecheck.model.found import NUMBERS


def test_the_digest_is_that_of_the_canonical_json_of_what_it_covers() -> None:
    """Worked out anew here, field by field."""
    document = drainage()
    fields = {
        "test": document["test"],
        "estimate": document["estimate"],
        "sample": document["sample"],
        "alternative": document["alternative"],
        "prior": None,
        "family": None,
        "look": None,
        "screen": None,
        "compares": None,
        "design": None,
    }
    kind = ["confirmatory", "difference", False, False, True]
    text = json.dumps([fields, kind], sort_keys=True, separators=(",", ":"))

    assert found(document).permission_digest() == f"sha256:{hashlib.sha256(text.encode()).hexdigest()}"
    assert tuple(fields) == NUMBERS


@pytest.mark.parametrize(
    "changes",
    [
        {"claim": "Drainage helps earthworms."},
        {"tags": ["soil"]},
        {"provenance": {"code": "drainage.py"}},
        {"role": "secondary"},
        {"importance": False},
        {"harm": False},
        {"prior": None},
    ],
)
def test_wording_tags_and_provenance_leave_it_as_it_is(changes: dict[str, Any]) -> None:
    assert found(drainage(**changes)).permission_digest() == found().permission_digest()


@pytest.mark.parametrize(
    "changes",
    [
        {"claim": ...},
        {"status": "exploratory"},
        {"aim": "superiority"},
        {"importance": True},
        {"harm": True},
        {"test__value": 2.22},
        {"test__p": 0.034},
        {"estimate__value": 4.3},
        {"sample__n": 37},
        {"alternative__effect": 0.9},
        {"prior": {"probability": 0.5, "basis": "earlier work"}},
        {"family": {"name": "growth", "size": 6}},
        {"look": {"number": 1}},
        {"screen": {"tests": 10, "hits": 1}},
    ],
)
def test_every_number_changes_it(changes: dict[str, Any]) -> None:
    assert found(drainage(**changes)).permission_digest() != found().permission_digest()


def test_neither_the_order_of_fields_nor_where_they_stand_changes_it() -> None:
    turned = dict(reversed(drainage().items()))

    assert found(turned, "elsewhere.yaml").permission_digest() == found().permission_digest()
