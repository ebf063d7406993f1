"""What the fields of a plan demand of each other, beyond the shape of each."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from gatecheck.model.plan import Hypothesis, Plan, PlannedFamily
from gatecheck.schema.read import Fault, Path, nearest_advice, shown

_FIXED = "fixed-sequence"


def faults_between(plan: Plan) -> Iterator[Fault]:
    """Yield every fault between the fields of a plan that has the right shape."""
    seen: dict[str, int] = {}
    for index, each in enumerate(plan.hypotheses):
        at = ("hypotheses", index)
        first = seen.setdefault(each.id, index)
        if first != index:
            yield Fault((*at, "id"), f"is {shown(each.id)}, as that of hypotheses[{first}] is", "give each its own")
        yield from _of_hypothesis(each, at)
        if plan.families is not None and each.family is not None and each.family not in plan.families:
            advice = nearest_advice(each.family, plan.families)
            yield Fault((*at, "family"), f"is {shown(each.family)}, which is not among families", advice)
    for name, family in (plan.families or {}).items():
        yield from _of_family(plan, name, family)


def _of_hypothesis(one: Hypothesis, at: Path) -> Iterator[Fault]:
    if one.sides == 1 and one.direction == "either":
        yield Fault((*at, "direction"), "is either where sides is 1", "say increase or decrease, or set sides to 2")
    if one.margin is not None and one.margin[0].low >= one.margin[1].high:
        yield Fault((*at, "margin"), "is not [low, high] with low below high", "order its two numbers")
    if one.looks is not None and one.looks.boundary is not None and one.looks.planned == 1:
        yield Fault(
            (*at, "looks", "boundary"), "is given for one look", "give the number of looks planned, or leave it out"
        )


def _of_family(plan: Plan, name: str, family: PlannedFamily) -> Iterator[Fault]:
    at = ("families", name, "order")
    if family.procedure != _FIXED:
        if family.order:
            advice = f"set procedure to {_FIXED}, or leave the order out"
            yield Fault(at, f"is given where procedure is {family.procedure}", advice)
        return
    members = {each.id: index for index, each in enumerate(plan.hypotheses) if each.family == name}
    yield from _of_order(family.order, members, at)
    left = [identifier for identifier in members if identifier not in family.order]
    if left:
        yield Fault(at, f"leaves out {', '.join(map(shown, left))}", "order every hypothesis of the family")


def _of_order(order: tuple[str, ...], members: Mapping[str, int], at: Path) -> Iterator[Fault]:
    for index, identifier in enumerate(order):
        if identifier not in members:
            message = f"is {shown(identifier)}, which is no hypothesis of this family"
            yield Fault((*at, index), message, nearest_advice(identifier, members))
        elif identifier in order[:index]:
            yield Fault((*at, index), f"is {shown(identifier)} a second time", "name each once")
