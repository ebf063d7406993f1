"""The estimate of a difference of two effects against the two records whose effects it compares."""

from __future__ import annotations

import math

from gatecheck.columns import Columns
from gatecheck.compare.agreement import Agreement, Compared, Kind, gathered
from gatecheck.compare.design_names import says, test_name
from gatecheck.compare.interactions import Interaction, interactions

_KIND = Kind(
    "compared",
    ("the estimate", "the first effect compared", "the second effect compared"),
    (
        "the difference is of another model than the two effects",
        "it is coded as a half or a quarter of the difference",
    ),
)
#: What measures the difference itself; the coefficient of an interaction is commonly a part of it.
_DIFFERENCE = (
    r"\b(?:difference|ratio)s? (?:of|in|between)(?: the)?(?: two)? (?:(?:mean |risk )?differences|effects|slopes"
    r"|means|(?:odds |risk |hazard |rate )?ratios)|\bdifference[- ]in[- ]differences?"
)
_OTHER_MODEL = (
    r"adjust|covari|mixed|multilevel|hierarch|random|weighted|imput|\bgee\b|bayes|robust|propensity|match"
    r"|coefficient"
)
#: Estimates of one difference in two models agree to so many of its standard errors (common practice, no source).
_NEAR = 0.25
#: The exponential of more than this is no double.
_MOST_LOG = 700.0


def compared_effects(columns: Columns) -> tuple[Agreement, ...]:
    """The difference of every row that compares two records with the one that these give; none where none does."""
    found: dict[int, Compared] = {}
    for row, fact in enumerate(interactions(columns).compared):
        if fact is not None and not fact.apart and _measures_it(columns, row, fact):
            found[row] = _compare(columns, row, fact)
    return (gathered(_KIND, found, len(columns.found)),) if found else ()


def _measures_it(columns: Columns, row: int, fact: Interaction) -> bool:
    """Whether the row estimates the plain difference of the two, in their unit and on their scale."""
    own, of_first = columns.found[row].record.estimate, columns.found[fact.rows[0]].record.estimate
    if own is None or of_first is None or not says(_DIFFERENCE, own.measure):
        return False
    names = [test_name(columns, each) for each in (row, *fact.rows)]
    adjusted = any(columns.found[each].record.covariates for each in (row, *fact.rows))
    other = adjusted or any(says(_OTHER_MODEL, text) for text in (own.measure, of_first.measure, *names))
    return not other and own.unit == of_first.unit and own.scale == of_first.scale


def _compare(columns: Columns, row: int, fact: Interaction) -> Compared:
    value, (first, second) = columns.estimate.value, fact.rows
    ends = float(value.low[first] - value.high[second]), float(value.high[first] - value.low[second])
    least = 0.0 if ends[0] <= 0 <= ends[1] else min(map(abs, ends))
    most, near = max(map(abs, ends)), _NEAR * fact.error
    own = abs(float(value.low[row])), abs(float(value.high[row]))
    fits = max(own) >= least - near and min(own) <= most + near
    told = math.exp(min(abs(fact.difference), _MOST_LOG)) if fact.log_scale else abs(fact.difference)
    return Compared(fits, told, told)
