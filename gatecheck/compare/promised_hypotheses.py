"""What the hypotheses of a plan promise: whether one is settled, and how many tests are put into one family."""

from __future__ import annotations

from gatecheck.compare.names import same_words
from gatecheck.model.plan import Hypothesis, Plan

#: What fills a deferred hypothesis.
_FILLED_IN = (
    "outcome", "test", "sides", "alpha", "n", "population", "exclusions", "covariates", "alternative",
    "smallest_effect", "margin", "prior", "looks",
)  # fmt: skip


def promises_something(hypothesis: Hypothesis) -> bool:
    """Whether a hypothesis is settled: one that was deferred and says no more than its text promises nothing."""
    settled = any(getattr(hypothesis, name) not in {None, ()} for name in _FILLED_IN)
    return not hypothesis.deferred or settled or hypothesis.direction != "either"


def members_of_family(plan: Plan, name: str) -> tuple[int, int]:
    """Return how many tests the plan puts into the family, without those deferred and never filled, and with them.

    Those that only the order of the family names count too.
    """
    members = [one for one in plan.hypotheses if one.family is not None and same_words(one.family, name)]
    described = (plan.families or {}).get(name)
    in_order = set() if described is None else set(described.order)
    settled = {one.id for one in members if promises_something(one)} | in_order
    return len(settled), len(settled | {one.id for one in members})
