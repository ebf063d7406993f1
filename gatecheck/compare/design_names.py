"""What the name of a test says of its design, so that figures are compared by the formula that they come from.

The words are those of the trade (common practice, no source). A name that says nothing of these leaves a test
unknown, and an unknown test is not set against a formula that need not be its own.
"""

from __future__ import annotations

import functools
import re

import numpy as np

from gatecheck.columns import Booleans, Columns

#: A model with more terms or other errors than the summaries of its groups tell.
MODELLED = (
    r"coefficient|slope|regress|contrast|covarian|ancova|adjusted|mixed|multilevel|hierarch|random|satterth|kenward"
    r"|\bgee\b|\bgls\b|robust|sandwich|cluster|survey|design-based|weighted|imput|bootstrap|permut|jackknife|repeated"
    r"|within|cross-?over|split|nested|block|factorial|two-way|three-way|two-factor|interaction|manova|tukey|dunnett"
    r"|post[- ]hoc|trimm|yuen|rank|stratif|mantel|logrank|log-rank|\bcox\b|hazard|poisson|trend|mcnemar"
    r"|partial|multiple|linear model|\bglm\b|\bols\b|\blm|log(?:arithm)?[- ]?transform|bayes"
)
#: Units within units, or measured again and again: then degrees of freedom are no count of units.
WITHIN_UNITS = (
    r"mixed|multilevel|hierarch|random|satterth|kenward|\bgee\b|\bgls\b|robust|sandwich|cluster|survey|design-based"
    r"|repeated|within|cross-?over|split|nested|contrast|tukey|post[- ]hoc|manova|bootstrap|permut|jackknife|panel"
    r"|time series|imput|interaction|factorial|two-way|three-way"
)
PAIRED = r"paired(?<!unpaired)|depend(?<!independ)|matched|\bsigned|one[- ]sample|1-sample|single-sample"
T_TEST = r"\bt\b|student|welch|\bttest|two[- ]sample|independent|unpaired|pooled"
WELCH = r"welch|unequal|satterthwaite"
ONE_WAY = r"one-way|one-factor|single-factor"
PROPORTIONS = (
    r"proportion|pearson|contingency|2 ?[x×] ?2|yates|chi-?squared?\b|chi2|χ|risk difference|odds ratio|risk ratio"
)
FISHER = r"fisher"
BINOMIAL = r"binomial"
INDEPENDENT = (
    r"two[- ]sample|independent|unpaired|welch|student|pooled|one-way|mann|rank[- ]sum|kruskal|fisher|contingency"
    r"|two[- ]proportion"
)
#: For spread that differs between conditions df are made smaller, and p is that of the smaller ones.
SPHERICITY = r"greenhouse|geisser|huynh|feldt|sphericity|lower[- ]bound"
CONTINUITY = r"(?<!without )(?<!no )(?:yates|continuity)"
#: Tests that are no estimate over its error, and differ from it by more where effects are large.
OTHER_METHOD = r"score|log-?rank|likelihood|mantel|\bcmh\b|mcnemar|exact"
WALD = r"\bwald\b"
#: Measures that may be ratios, or the relative changes that they make.
RATIO_OR_CHANGE = (
    r"\bratios?\b|relative|\bfold\b|fractional|proportional|%|per ?cent|efficacy|effectiveness"
    r"|^\W*a?(?:or|rr|hr|irr|gmr)\W*$"
)


@functools.lru_cache(maxsize=4096)
def says(words: str, text: str) -> bool:
    """Whether a text holds one of `words`, a regular expression; thousands of records hold the same few texts."""
    return _compiled(words).search(text) is not None


@functools.cache
def _compiled(words: str) -> re.Pattern[str]:
    # Compiled where they are first needed: all of them together would cost more than to judge a hundred records.
    return re.compile(words, re.IGNORECASE)


def test_name(columns: Columns, row: int) -> str:
    """The name of the test of a row; empty where it has none."""
    test = columns.found[row].record.test
    return "" if test is None or test.name is None else test.name


def named(columns: Columns, where: Booleans, words: str) -> Booleans:
    """Which rows among `where` name their test by one of `words`; the others are not looked at."""
    found = np.zeros(where.shape, np.bool_)
    for row in np.flatnonzero(where).tolist():
        found[row] = says(words, test_name(columns, row))
    return found
