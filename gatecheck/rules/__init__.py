"""The rules of a reporting policy: an explicit list, one module each."""

from gatecheck.rules import false_positive_risk, numbers_agree, prior_needed, reported_in_full
from gatecheck.rules.rule import Rule

#: Every rule, in the order in which findings are told.
RULES: tuple[Rule, ...] = (
    false_positive_risk.RULE,
    prior_needed.RULE,
    numbers_agree.RULE,
    reported_in_full.RULE,
)
