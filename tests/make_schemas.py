"""Write the published JSON Schemas from the typed models.

Run `python tests/make_schemas.py` after a model or the settings of a rule changed; a test compares the files.
The schema of `verdict` is written by hand, and a test holds every verdict against it.
"""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import gatecheck.schema
from gatecheck.model.accepted import Accepted
from gatecheck.model.plan import Plan
from gatecheck.model.record import Record
from gatecheck.model.seal import Seal
from gatecheck.model.waivers import Waivers
from gatecheck.policy import PolicyDocument
from gatecheck.rules import NAMES, rules_among
from gatecheck.schema.publish import json_schema

FOLDER = Path(gatecheck.schema.__file__).parent
Schema = dict[str, Any]


def schemas() -> dict[str, Schema]:
    """The schema of every format that has a typed model, by kind."""
    return {
        "record": json_schema(Record, "record/1"),
        "plan": json_schema(Plan, "plan/1"),
        "waivers": json_schema(Waivers, "waivers/1"),
        "seal": json_schema(Seal, "seal/1"),
        "accepted": json_schema(Accepted, "accepted/1"),
        "policy": policy_schema(),
    }


def policy_schema() -> Schema:
    """The schema of a policy, in which each rule has its own settings; an override may give a part of them."""
    schema = json_schema(PolicyDocument, "policy/1")
    whole = {rule.name: json_schema(rule.settings, rule.name) for rule in rules_among(NAMES)}
    off = {"type": "object", "properties": {"enforce": {"const": "off"}}, "required": ["enforce"]}
    _set_rules(schema, {name: _rule(each, off) for name, each in whole.items()})
    parts = {name: _rule({**each, "required": []}, off) for name, each in whole.items()}
    _set_rules(schema["properties"]["for"]["anyOf"][0]["items"], parts)
    return schema


def _rule(schema: Schema, off: Schema) -> Schema:
    bare = {key: value for key, value in schema.items() if key not in {"$schema", "title"}}
    return {"anyOf": [bare, off, {"type": "null"}]}


def _set_rules(schema: Schema, rules: Schema) -> None:
    table = schema["properties"]["rules"]["anyOf"][0]
    table["properties"] = rules
    table["additionalProperties"] = False


def text_of(schema: Schema) -> str:
    """The schema as it is published."""
    return json.dumps(schema, indent=2, ensure_ascii=True) + "\n"


if __name__ == "__main__":
    for kind, schema in schemas().items():
        (FOLDER / f"{kind}.schema.json").write_text(text_of(schema), encoding="utf-8")
