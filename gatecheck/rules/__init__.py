"""The rules of a reporting policy: an explicit list, one module each."""

from gatecheck.rules import (
    false_positive_risk,
    family,
    looks,
    no_effect_support,
    numbers_agree,
    practical_size,
    prior_needed,
    reported_in_full,
    robust,
)
from gatecheck.rules.rule import Rule

#: Every rule, in the order in which findings are told.
RULES: tuple[Rule, ...] = (
    false_positive_risk.RULE,
    prior_needed.RULE,
    robust.RULE,
    no_effect_support.RULE,
    looks.RULE,
    family.RULE,
    practical_size.RULE,
    numbers_agree.RULE,
    reported_in_full.RULE,
)
