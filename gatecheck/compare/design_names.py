"""What the name of a test says of its design, so that figures are compared by the formula that they come from.

The words are those of the trade (common practice, no source). A name that says nothing of these leaves a test
unknown, and an unknown test is not set against a formula that need not be its own.
"""

from __future__ import annotations

import re

import numpy as np

from gatecheck.columns import Booleans, Columns

#: A model with more terms or other errors than the summaries of its groups tell.
MODELLED = re.compile(
    r"coefficient|slope|regress|contrast|covarian|ancova|adjusted|mixed|multilevel|hierarch|random|satterth|kenward"
    r"|\bgee\b|\bgls\b|robust|sandwich|cluster|survey|design-based|weighted|imput|bootstrap|permut|jackknife|repeated"
    r"|within|cross-?over|split|nested|block|factorial|two-way|three-way|two-factor|interaction|manova|tukey|dunnett"
    r"|post[- ]hoc|trimm|yuen|rank|stratif|mantel|logrank|log-rank|\bcox\b|hazard|poisson|trend|mcnemar"
    r"|partial|multiple|linear model|\bglm\b|\bols\b|\blm|log(?:arithm)?[- ]?transform|bayes",
    re.IGNORECASE,
)
#: Units within units, or measured again and again: then degrees of freedom are no count of units.
WITHIN_UNITS = re.compile(
    r"mixed|multilevel|hierarch|random|satterth|kenward|\bgee\b|\bgls\b|robust|sandwich|cluster|survey|design-based"
    r"|repeated|within|cross-?over|split|nested|contrast|tukey|post[- ]hoc|manova|bootstrap|permut|jackknife|panel"
    r"|time series|imput|interaction|factorial|two-way|three-way",
    re.IGNORECASE,
)
PAIRED = re.compile(
    r"paired(?<!unpaired)|depend(?<!independ)|matched|\bsigned|one[- ]sample|1-sample|single-sample", re.IGNORECASE
)
T_TEST = re.compile(r"\bt\b|student|welch|\bttest|two[- ]sample|independent|unpaired|pooled", re.IGNORECASE)
WELCH = re.compile(r"welch|unequal|satterthwaite", re.IGNORECASE)
ONE_WAY = re.compile(r"one-way|one-factor|single-factor", re.IGNORECASE)
PROPORTIONS = re.compile(
    r"proportion|pearson|contingency|2 ?[x×] ?2|yates|chi-?squared?\b|chi2|χ|risk difference|odds ratio|risk ratio",
    re.IGNORECASE,
)
FISHER = re.compile(r"fisher", re.IGNORECASE)
BINOMIAL = re.compile(r"binomial", re.IGNORECASE)
INDEPENDENT = re.compile(
    r"two[- ]sample|independent|unpaired|welch|student|pooled|one-way|mann|rank[- ]sum|kruskal|fisher|contingency"
    r"|two[- ]proportion",
    re.IGNORECASE,
)
#: For spread that differs between conditions df are made smaller, and p is that of the smaller ones.
SPHERICITY = re.compile(r"greenhouse|geisser|huynh|feldt|sphericity|lower[- ]bound", re.IGNORECASE)
CONTINUITY = re.compile(r"yates|continuity", re.IGNORECASE)
#: Tests that are no estimate over its error, and differ from it by more where effects are large.
OTHER_METHOD = re.compile(r"score|log-?rank|likelihood|mantel|\bcmh\b|mcnemar|exact", re.IGNORECASE)
WALD = re.compile(r"\bwald\b", re.IGNORECASE)


def test_name(columns: Columns, row: int) -> str:
    """The name of the test of a row; empty where it has none."""
    test = columns.found[row].record.test
    return "" if test is None or test.name is None else test.name


def named(columns: Columns, where: Booleans, words: re.Pattern[str]) -> Booleans:
    """Which rows among `where` name their test by one of `words`; the others are not looked at."""
    found = np.zeros(where.shape, np.bool_)
    for row in np.flatnonzero(where).tolist():
        found[row] = words.search(test_name(columns, row)) is not None
    return found
