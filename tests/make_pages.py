"""Write the page of each rule from its module: what it asks, how it judges, its settings, what it spares.

Run `python tests/make_pages.py` after a rule changed; a test compares the files.
"""

from __future__ import annotations

import dataclasses
import inspect
from importlib import import_module
from pathlib import Path
from typing import Any

import gatecheck.rules
from gatecheck.rules import ALWAYS_ON, NAMES, rules_among
from gatecheck.rules.rule import Rule
from gatecheck.schema.publish import json_schema

FOLDER = Path(gatecheck.rules.__file__).parent / "pages"
_ENFORCE = "`enforce: block | note | off` (default `block`)"


def page(rule: Rule) -> str:
    """The page of one rule, in Markdown."""
    text = inspect.getdoc(import_module(f"gatecheck.rules.{rule.name.replace('-', '_')}")) or ""
    _, _, body = text.partition("\n\n")
    named = (
        "It is always on, unless the policy sets it otherwise."
        if rule.name in ALWAYS_ON
        else "It is on where the policy names it."
    )
    spared = "".join(f"- {each.because}\n" for each in rule.exempt)
    parts = [
        f"# {rule.name}",
        f"{rule.asks[0].upper()}{rule.asks[1:]}. {named}",
        body.strip(),
        f"## Settings\n\n{_settings(rule)}",
        f"## What it spares\n\n{spared}".rstrip() if spared else "",
    ]
    return "\n\n".join(part for part in parts if part) + "\n"


def _settings(rule: Rule) -> str:
    schema = json_schema(rule.settings, rule.name)["properties"]
    rows = [
        f"| `{field.name}` | {schema[field.name]['description']} | {_default(field)} |\n"
        for field in dataclasses.fields(rule.settings)
        if field.name != "enforce"
    ]
    table = f"| setting | meaning | default |\n| --- | --- | --- |\n{''.join(rows)}\n" if rows else ""
    return f"{table}{_ENFORCE}, as every rule."


def _default(field: dataclasses.Field[Any]) -> str:
    if field.default is dataclasses.MISSING:
        return "none: it must be given"
    value = field.default
    if isinstance(value, bool):
        return f"`{str(value).lower()}`"
    if isinstance(value, tuple):
        return f"`[{', '.join(map(str, value))}]`"
    return "none" if value is None else f"`{value}`"


if __name__ == "__main__":
    FOLDER.mkdir(exist_ok=True)
    for one in rules_among(NAMES):
        (FOLDER / f"{one.name}.md").write_text(page(one), encoding="utf-8")
