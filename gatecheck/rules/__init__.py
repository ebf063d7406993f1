"""The rules of a reporting policy: an explicit list, one module each, loaded where a policy has them on."""

from __future__ import annotations

from collections.abc import Iterable
from importlib import import_module

from gatecheck.rules.rule import Rule

#: Every rule, in the order in which findings are told; its module has its name.
NAMES = (
    "false-positive-risk",
    "prior-needed",
    "robust",
    "no-effect-support",
    "looks",
    "family",
    "all-tests-recorded",
    "registered",
    "all-promised-reported",
    "replication",
    "screen",
    "practical-size",
    "numbers-agree",
    "planned-split",
    "reported-in-full",
    "wording",
    "fresh",
    "text-agrees",
)
#: The rules that hold although a policy does not name them.
ALWAYS_ON = frozenset({"no-effect-support", "screen", "numbers-agree", "planned-split"})


def rule_named(name: str) -> Rule:
    """Return the rule of that name, one of `NAMES`."""
    rule: Rule = import_module(f"gatecheck.rules.{name.replace('-', '_')}").RULE
    return rule


def rules_among(names: Iterable[str]) -> tuple[Rule, ...]:
    """Return the rules of these names, in the order in which findings are told."""
    wanted = frozenset(names)
    return tuple(rule_named(name) for name in NAMES if name in wanted)
