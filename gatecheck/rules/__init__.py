"""The rules of a reporting policy: an explicit list, one module each."""

from gatecheck.rules import (
    all_promised_reported,
    all_tests_recorded,
    false_positive_risk,
    family,
    fresh,
    looks,
    no_effect_support,
    numbers_agree,
    planned_split,
    practical_size,
    prior_needed,
    registered,
    replication,
    reported_in_full,
    robust,
    screen,
    text_agrees,
    wording,
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
    all_tests_recorded.RULE,
    registered.RULE,
    all_promised_reported.RULE,
    replication.RULE,
    screen.RULE,
    practical_size.RULE,
    numbers_agree.RULE,
    planned_split.RULE,
    reported_in_full.RULE,
    wording.RULE,
    fresh.RULE,
    text_agrees.RULE,
)
