"""The answer of `design` as plain text: a table, a curve, and what a bare design would leave."""

from __future__ import annotations

import math

from gatecheck.model.design import Design
from gatecheck.model.shown import percent
from gatecheck.render import words
from gatecheck.render.layout import page, paragraph, section

_COLUMNS = 41


def design(answer: Design, width: int) -> str:
    """Return the answer as plain text of `width` columns."""
    return page([
        paragraph(_headline(answer), width),
        section("Units for the claim to stand", [_table(answer)]),
        section("Assurance by size (o from 0 on the left to 100 % on the right)", [_curve(answer)]),
        paragraph(_bare(answer), width),
        paragraph(_ASSUMED, width),
    ])


_ASSUMED = (
    "All of it takes the true effect to be as large as planned, and counts only results in its direction. Effects "
    "found significant earlier are more often too large than too small: plan on the smallest effect of interest."
)
_PER_GROUP = {"two-sample-t", "two-proportions"}


def _headline(answer: Design) -> str:
    asked = answer.question
    n = dict(answer.sizes)[asked.assurance]
    each = " per group" if asked.test in _PER_GROUP else ""
    size = "more than 100,000,000 units" if n is None else words.count(n, "unit")
    behind = f", as one of a family of {asked.family}" if asked.family > 1 else ""
    looks = f", at the last of {asked.looks} looks ({asked.boundary})" if asked.looks > 1 else ""
    return (
        f"{size}{each} for a claim on a true effect of {asked.effect:g} ({asked.test}){behind}{looks} to stand "
        f"with {percent(asked.assurance, asked.assurance)} probability under the policy {answer.policy}, weighed "
        f"{words.alternative_words(answer.alternative)} at prior {answer.prior:.4g} (a likelihood ratio of "
        f"{math.exp(answer.log_likelihood_ratio):.4g} is wanted)."
    )


def _table(answer: Design) -> str:
    each = "units per group" if answer.question.test in _PER_GROUP else "units"
    rows = [f"  {'assurance':>9}  {each:>16}"]
    rows += [
        f"  {percent(level, level):>9}  {'above 1e8' if n is None else f'{n:,}':>16}" for level, n in answer.sizes
    ]
    return "\n".join(rows)


def _curve(answer: Design) -> str:
    rows = [f"  {'units':>12}"]
    for point in answer.curve:
        position = round(point.assurance * (_COLUMNS - 1))
        rows.append(f"  {point.n:>12,}  {' ' * position}o")
    return "\n".join(rows)


def _bare(answer: Design) -> str:
    if answer.bare is None:
        return ""
    each = " per group" if answer.question.test in _PER_GROUP else ""
    return (
        f"A design with 80 % power at 0.05 alone would take {words.count(answer.bare.n, 'unit')}{each}. Its claim "
        f"would stand with {percent(answer.bare.assurance)} probability, and a result that is just significant "
        f"would leave a false positive risk of {percent(answer.bare.risk)}. Of all results below 0.05 over many "
        f"such designs {percent(answer.bare.long_run)} would be false, which is another question: most lie far "
        "below it."
    )
