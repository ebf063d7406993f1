"""The fields of a hypothesis, each set against what a record says of it: where the two differ, and how.

What a plan leaves out is not compared. A plan that speaks of its sample (`n`, `population`, `exclusions`) and names
no rule of exclusion and no interim look promises that there are none; so does one that names its test and no
covariates.

What a record leaves out differs where the plan promises it and it shapes the result: outcome, test, alpha,
population, n with its unit, covariates, family with its size, and looks; the rules on families and looks see only
what a record tells. Left out and not compared are `alternative`, `margin`, `smallest_effect` and `prior`, for which
the policy's or none stands then, and the `role` where it is `other`, as it is where nothing is said. Sides that are
not told are two.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator
from dataclasses import replace

from gatecheck.compare.names import same_test, same_unit, same_words, shown, words_of
from gatecheck.compare.one_test import effect_sign, p_with_sides
from gatecheck.compare.promised_gaps import NOT_TOLD, Gap, Pair
from gatecheck.compare.promised_hypotheses import members_of_family
from gatecheck.model.numbers import Reported, exact
from gatecheck.model.record import Estimate, Outcome, Sample
from gatecheck.model.shown import decimal

_SAME = 1e-9
_TOWARD = {"increase": 1, "decrease": -1}
_TOWARD_TAIL = {"greater": 1, "less": -1}
_DIRECTIONS = {1: "increase", -1: "decrease"}
_AN_EFFECT = {"increase": "an increase", "decrease": "a decrease"}
_TAKEN = {1: "one side of the test is taken", 2: "both sides of the test are taken"}
_PROMISED = {1: "one side was promised", 2: "both sides were promised"}
_P = {1: "one-sided p", 2: "two-sided p"}
_OF_EFFECTS = {"difference", "superiority"}
_WITHOUT_SIDES = {"chi2", "F"}


def gaps(pair: Pair) -> Iterator[Gap]:
    """Every field in which the record is not as promised, in the order in which a plan has them."""
    for compare in _COMPARISONS:
        yield from compare(pair)


def _gap(field: str, label: str, planned: str, done: str) -> Gap:
    return Gap(field, planned, done, f"{label} is {shown(done)}, and {shown(planned)} was promised")


def _of_text(field: str, label: str, planned: str | None, done: str | None) -> Iterator[Gap]:
    """A text that a record must tell where the plan does."""
    if planned is not None and (done is None or not same_words(planned, done)):
        yield _gap(field, label, planned, NOT_TOLD if done is None else done)


def _of_number(field: str, label: str, planned: float | None, done: float | None) -> Iterator[Gap]:
    """A number that a record may leave out."""
    if planned is not None and done is not None and not math.isclose(planned, done, rel_tol=_SAME):
        yield _gap(field, label, f"{planned:.15g}", f"{done:.15g}")


def _outcome(pair: Pair) -> Iterator[Gap]:
    planned, done = pair.hypothesis.outcome, pair.record.outcome
    if planned is None:
        return
    if done is None:
        yield _gap("outcome", "the outcome", _in_words(planned), NOT_TOLD)
        return
    yield from _of_text("outcome.variable", "the variable measured", planned.variable, done.variable)
    yield from _of_text("outcome.metric", "the metric of the outcome", planned.metric, done.metric)
    yield from _of_text(
        "outcome.aggregation", "the aggregation of the outcome", planned.aggregation, done.aggregation
    )
    yield from _of_text("outcome.time_point", "the time point of the outcome", planned.time_point, done.time_point)


def _in_words(outcome: Outcome) -> str:
    parts = (outcome.variable, outcome.metric, outcome.aggregation, outcome.time_point)
    return ", ".join(part for part in parts if part is not None)


def _test(pair: Pair) -> Iterator[Gap]:
    allowed, name = pair.hypothesis.test, pair.test.name
    if allowed is None or (name is not None and any(same_test(each, name) for each in allowed)):
        return
    yield _gap("test", "the test", " or ".join(allowed), NOT_TOLD if name is None else name)


def _sides(pair: Pair) -> Iterator[Gap]:
    planned, done = pair.hypothesis.sides, pair.test.sides or 2
    if planned is None or pair.record.test is None or pair.test.statistic in _WITHOUT_SIDES or planned == done:
        return
    honest = _honest_p(pair, planned, _TOWARD.get(pair.hypothesis.direction, 0))
    yield Gap("sides", str(planned), str(done), f"{_TAKEN[done]}, and {_PROMISED[planned]}{honest}")


def _honest_p(pair: Pair, sides: int, toward: int) -> str:
    """The p of the test as it was promised, where the record tells enough."""
    p = p_with_sides(pair.test, sides, toward)
    return "" if p is None else f" ({_P[sides]} = {decimal(p, pair.hypothesis.alpha or pair.test.alpha)})"


def _direction(pair: Pair) -> Iterator[Gap]:
    """Against a promised direction stands the side tested, or the effect where the claim is one of an effect."""
    planned = pair.hypothesis.direction
    wanted = _TOWARD.get(planned)
    if wanted is None:
        return
    tail = pair.test.tail if pair.test.sides == 1 else None
    if tail is not None and _TOWARD_TAIL[tail] != wanted:
        honest = _honest_p(pair, 1, wanted)
        told = f"the side tested is {tail}, and {_AN_EFFECT[planned]} was promised{honest}"
        yield Gap("direction", planned, tail, told)
    elif pair.record.aim in _OF_EFFECTS and effect_sign(pair.record) == -wanted:
        found = _DIRECTIONS[-wanted]
        told = f"the effect found is {_AN_EFFECT[found]}{_figure(pair)}, and {_AN_EFFECT[planned]} was promised"
        yield Gap("direction", planned, found, told)


def _figure(pair: Pair) -> str:
    estimate = pair.record.estimate
    if estimate is not None:
        unit = "" if estimate.unit in {None, "1", ""} else f" {estimate.unit}"
        return f" ({shown(estimate.measure)} {estimate.value.shown}{unit})"
    return f" ({pair.test.statistic} = {pair.test.value.shown})" if pair.test.value else ""


def _alpha(pair: Pair) -> Iterator[Gap]:
    """The level of the hypothesis, else of its family, of which one test may have a share."""
    own, family, done = pair.hypothesis.alpha, pair.planned_family, pair.test.alpha
    planned = own if own is not None or family is None else family.alpha
    if planned is None:
        return
    if done is None:
        yield _gap("alpha", "alpha", f"{planned:.15g}", NOT_TOLD)
    elif own is not None or done > planned * (1 + _SAME):
        yield from _of_number("alpha", "alpha", planned, done)


def _n(pair: Pair) -> Iterator[Gap]:
    promised, sample = pair.hypothesis.n, pair.sample
    if promised is None:
        return
    other = promised.unit is not None and (sample.unit is None or not same_unit(promised.unit, sample.unit))
    if promised.unit is not None and other:
        yield _gap("n.unit", "the experimental unit", promised.unit, sample.unit or NOT_TOLD)
    # A number of other units is another quantity.
    if promised.planned is not None and (not other or sample.unit is None):
        yield from _number_of_units(pair, promised.planned)


def _number_of_units(pair: Pair, planned: int) -> Iterator[Gap]:
    """The number is kept where the analysed are as many as planned, alone or with those that were left out."""
    n, left_out = _analysed(pair.sample), sum(each.n for each in pair.sample.excluded)
    if n is None:
        yield _gap("n", "the number of units", str(planned), NOT_TOLD)
    elif planned not in {n, n + left_out} and not (n < planned and _is_interim(pair)):
        done = f"{n} analysed and {left_out} left out" if left_out else f"{n}"
        gap = _gap("n", "the number of units", str(planned), done)
        yield replace(gap, unit=pair.sample.unit)


def _analysed(sample: Sample) -> int | None:
    if sample.n is not None:
        return sample.n
    return sum(group.n for group in sample.groups) if sample.groups else None


def _is_interim(pair: Pair) -> bool:
    """Whether the record stands at a planned look before the last."""
    look, looks = pair.record.look, pair.hypothesis.looks
    return look is not None and looks is not None and look.number < looks.planned


def _population(pair: Pair) -> Iterator[Gap]:
    yield from _of_text("population", "the population", pair.hypothesis.population, pair.record.population)


def _exclusions(pair: Pair) -> Iterator[Gap]:
    if not pair.speaks_of_sample:
        return
    rules = {words_of(rule) for rule in pair.hypothesis.exclusions}
    others = [each for each in pair.sample.excluded if each.n and words_of(each.reason) not in rules]
    if others:
        done = _listed(f"{each.reason} ({each.n})" for each in others)
        planned = _listed(pair.hypothesis.exclusions)
        told = f"units are left out by no rule that was promised: {shown(done)}"
        yield Gap("exclusions", planned, done, told)


def _covariates(pair: Pair) -> Iterator[Gap]:
    planned, done = pair.hypothesis.covariates, pair.record.covariates
    if done is None and planned:
        yield _gap("covariates", "the set of covariates", _listed(planned), NOT_TOLD)
    speaks = bool(planned) or pair.hypothesis.test is not None
    if done is not None and speaks and set(map(words_of, planned)) != set(map(words_of, done)):
        yield _gap("covariates", "the set of covariates", _listed(planned), _listed(done))


def _listed(texts: Iterable[str]) -> str:
    return ", ".join(texts) or "none"


def _alternative(pair: Pair) -> Iterator[Gap]:
    planned, done = pair.hypothesis.alternative, pair.record.alternative
    if planned is None or done is None:
        return
    if planned.scale != done.scale or not math.isclose(planned.effect, done.effect, rel_tol=_SAME):
        what = (f"{each.effect:.15g} ({each.scale})" for each in (planned, done))
        yield _gap("alternative", "the effect designed for", *what)


def _margin(pair: Pair) -> Iterator[Gap]:
    planned, done = pair.hypothesis.margin, _estimate(pair).margin
    if planned and done and not all(map(_fit, planned, done)):
        what = (" to ".join(end.shown for end in each) for each in (planned, done))
        yield _gap("margin", "the margin", *what)


def _smallest_effect(pair: Pair) -> Iterator[Gap]:
    planned, done = pair.hypothesis.smallest_effect, _estimate(pair).smallest_effect
    if planned and done and not _fit(planned, done):
        yield _gap("smallest_effect", "the smallest effect of interest", planned.shown, done.shown)


def _estimate(pair: Pair) -> Estimate:
    return pair.record.estimate or Estimate("estimate", exact(math.nan))


def _fit(one: Reported, other: Reported) -> bool:
    """Whether two numbers, each as it was reported, may be the same."""
    slack = _SAME * max(abs(one.value), abs(other.value))
    return one.low <= other.high + slack and other.low <= one.high + slack


def _prior(pair: Pair) -> Iterator[Gap]:
    """A prior above the one promised helps the claim; one below it does not."""
    planned, done = pair.hypothesis.prior, pair.record.prior
    if planned and done and done.probability > planned.probability * (1 + _SAME):
        yield from _of_number("prior", "the prior", planned.probability, done.probability)


def _family(pair: Pair) -> Iterator[Gap]:
    name, family = pair.hypothesis.family, pair.record.family
    if name is None:
        return
    if family is None or not same_words(name, family.name):
        yield _gap("family", "the family", name, NOT_TOLD if family is None else family.name)
        return
    yield from _family_size(pair, name, family.size)
    planned = pair.planned_family
    if planned is None:
        return
    if planned.procedure != family.procedure:
        yield _gap("family.procedure", "the procedure of the family", planned.procedure, family.procedure)
    if family.position is not None and pair.hypothesis.id in planned.order:
        place = planned.order.index(pair.hypothesis.id) + 1
        yield from _of_number("family.position", "the place in the family", place, family.position)


def _family_size(pair: Pair, name: str, done: int | None) -> Iterator[Gap]:
    """A family that the plan names and does not describe may have members beyond the plan."""
    least, most = members_of_family(pair.plan, name)
    if least > 1 if done is None else done < least:
        yield _gap("family.size", "the size of the family", str(least), NOT_TOLD if done is None else str(done))
    elif done is not None and pair.planned_family is not None and done > most:
        yield _gap("family.size", "the size of the family", str(most), str(done))


def _looks(pair: Pair) -> Iterator[Gap]:
    promised, look = pair.hypothesis.looks, pair.record.look
    planned = 1 if promised is None else promised.planned
    if look is None:
        if planned > 1:
            yield _gap("looks", "the number of looks", str(planned), NOT_TOLD)
        return
    done = max(look.number, look.planned or planned)
    if done != planned and (promised is not None or pair.speaks_of_sample):
        yield _gap("looks", "the number of looks", str(planned), str(done))
    boundary = None if promised is None else promised.boundary
    if boundary is not None and look.boundary != boundary:
        yield _gap("looks.boundary", "the boundary of the looks", boundary, look.boundary or NOT_TOLD)


def _role(pair: Pair) -> Iterator[Gap]:
    if pair.record.role not in {pair.hypothesis.role, "other"}:
        yield _gap("role", "the role of the outcome", pair.hypothesis.role, pair.record.role)


def _aim(pair: Pair) -> Iterator[Gap]:
    yield from _of_text("aim", "the aim", pair.hypothesis.aim, pair.record.aim)


def _status(pair: Pair) -> Iterator[Gap]:
    """A plan made when the data had been seen promises no confirmation."""
    if pair.plan.data == "seen" and pair.record.status == "confirmatory":
        told = "the claim is confirmatory, and the data had been seen when the plan was made"
        yield Gap("status", "data seen before the plan", "confirmatory", told)


_COMPARISONS = (
    _outcome, _test, _sides, _direction, _alpha, _n, _population, _exclusions, _covariates, _alternative, _margin,
    _smallest_effect, _prior, _family, _looks, _role, _aim, _status,
)  # fmt: skip
#: Every field that is compared, as a plan names it.
FIELDS = frozenset({
    "outcome", "outcome.variable", "outcome.metric", "outcome.aggregation", "outcome.time_point", "test", "sides",
    "direction", "alpha", "n", "n.unit", "population", "exclusions", "covariates", "alternative", "margin",
    "smallest_effect", "prior", "family", "family.size", "family.procedure", "family.position", "looks",
    "looks.boundary", "role", "aim", "status",
})  # fmt: skip
