"""Texts from plans and records set against each other: the same words, the same unit, the same test.

The other names of a test are the trade's (common practice, no source). A name that is left open, such as "t test",
contradicts none of the tests that it may stand for.
"""

from __future__ import annotations

import functools
import re
import unicodedata

_LONGEST_SHOWN = 60
_APOSTROPHES = re.compile(r"['’‘`]")
#: Signs that only separate words; a point within a number, a sign before one, and < = > carry meaning.
_SEPARATORS = re.compile(r"\.(?!\d)|(?<=\w)-|-(?!\d)|[\s_‐‑–—,;:!?\"“”()\[\]{}/\\|]+")
_LETTER_BESIDE_DIGIT = re.compile(r"(?<=\d)(?=[^\W\d_])|(?<=[^\W\d_])(?=\d)")
_SIDES = re.compile(r"\b(?:one|two|1|2) (?:sided|tailed)\b")
_WITHOUT_MEANING = {"test", "tests", "the", "a", "an"}
_ENDINGS = ("", "s", "es")

#: Tests with their other names.
_OTHER_NAMES: dict[str, tuple[str, ...]] = {
    "two-sample t": (
        "Student's t", "Student t", "two samples t", "2-sample t", "independent samples t", "independent t",
        "independent two-sample t", "unpaired t", "pooled t", "equal-variance t", "equal variances t",
        "t with equal variances", "t for two independent samples", "t of two independent samples",
    ),
    "Welch t": (
        "Welch", "Welch's t", "Welch two sample t", "Welch's two-sample t", "unequal-variance t",
        "unequal variances t", "t with unequal variances", "Welch-Satterthwaite t",
    ),
    "paired t": (
        "paired samples t", "paired-sample t", "dependent t", "dependent samples t", "matched pairs t",
        "t for paired samples", "t of paired samples",
    ),
    "one-sample t": ("single-sample t", "1-sample t"),
    "Mann-Whitney": (
        "Mann-Whitney U", "Wilcoxon rank-sum", "rank-sum", "Wilcoxon-Mann-Whitney", "Mann-Whitney-Wilcoxon",
    ),
    "Wilcoxon signed-rank": ("signed-rank", "Wilcoxon matched pairs", "Wilcoxon matched-pairs signed-rank"),
    "Kruskal-Wallis": ("Kruskal-Wallis H", "Kruskal-Wallis rank-sum"),
    "chi-squared": ("chi-square", "chi2", "χ2", "χ²", "Pearson chi-squared", "Pearson's chi-squared",
                    "Pearson chi-square", "Pearson's chi-square"),
    "chi-squared of a contingency table": ("chi-squared of independence", "chi-square of independence"),
    "chi-squared of frequencies": ("chi-squared goodness of fit", "chi-square goodness of fit"),
    "Fisher's exact": ("Fisher exact", "Fisher"),
    "exact binomial": ("binomial",),
    "McNemar": ("McNemar's",),
    "Cochran-Mantel-Haenszel": ("Mantel-Haenszel", "CMH"),
    "two-proportion z": ("two-proportions z", "two proportions", "z for two proportions", "z of two proportions"),
    "ANOVA": ("analysis of variance",),
    "one-way ANOVA": ("one-way analysis of variance", "single-factor ANOVA"),
    "ANCOVA": ("analysis of covariance",),
    "Pearson correlation": (
        "Pearson r", "Pearson's r", "Pearson's correlation", "Pearson product-moment correlation",
        "Pearson's product-moment correlation",
    ),
    "Spearman correlation": ("Spearman", "Spearman's rho", "Spearman rho", "Spearman's rank correlation",
                             "Spearman rank correlation", "Spearman's correlation"),
    "Kendall correlation": ("Kendall", "Kendall's tau", "Kendall tau", "Kendall's rank correlation",
                            "Kendall rank correlation"),
    "linear regression": ("ordinary least squares", "OLS", "OLS regression", "least squares regression",
                          "ordinary least squares regression", "linear model"),
    "logistic regression": ("logit", "logit regression", "binary logistic regression"),
    "linear mixed model": ("LMM", "mixed model", "mixed-effects model", "linear mixed-effects model"),
    "log-rank": ("logrank", "Mantel-Cox"),
    "Cox regression": ("Cox model", "Cox proportional hazards", "Cox proportional hazards model",
                       "Cox proportional hazards regression", "proportional hazards regression"),
}  # fmt: skip
#: Names that leave open which of several tests is meant.
_LEFT_OPEN: dict[str, tuple[str, ...]] = {
    "t": ("two-sample t", "Welch t", "paired t", "one-sample t"),
    "Wilcoxon": ("Mann-Whitney", "Wilcoxon signed-rank"),
    "chi-squared": ("chi-squared of a contingency table", "chi-squared of frequencies"),
    "ANOVA": ("one-way ANOVA", "two-way ANOVA", "repeated-measures ANOVA", "Welch ANOVA"),
    "correlation": ("Pearson correlation", "Spearman correlation", "Kendall correlation"),
    "regression": ("linear regression", "logistic regression", "Poisson regression", "Cox regression"),
    "z": ("two-proportion z", "one-proportion z"),
}


def words_of(text: str) -> str:
    """The words of a text in one writing: `"Seedling_survival, 90d"` and `"seedling survival 90 d"` are the same.

    Case, separators and apostrophes do not count; numbers with their sign and point, and comparisons, do.
    """
    folded = unicodedata.normalize("NFKC", text).casefold().replace("−", "-")
    bare = _SEPARATORS.sub(" ", _APOSTROPHES.sub("", folded))
    words = " ".join(_LETTER_BESIDE_DIGIT.sub(" ", bare).split())
    return words or folded.strip()


def same_words(one: str, other: str) -> bool:
    """Whether two texts are the same but for case and separators."""
    return words_of(one) == words_of(other)


def same_unit(one: str, other: str) -> bool:
    """Whether two units are the same, in the singular or the plural."""
    first, second = ({words_of(unit) + ending for ending in _ENDINGS} for unit in (one, other))
    return not first.isdisjoint(second)


def same_test(one: str, other: str) -> bool:
    """Whether two names may stand for the same test."""
    first, second = _test(one), _test(other)
    left_open = _tests_left_open()
    return first == second or second in left_open.get(first, ()) or first in left_open.get(second, ())


def shown(text: str) -> str:
    """A text from a document in one line of moderate length."""
    line = " ".join(text.split())
    return line if len(line) <= _LONGEST_SHOWN else f"{line[: _LONGEST_SHOWN - 1]}…"


def _test(name: str) -> str:
    bare = _bare_test(name)
    return _tests_by_name().get(bare, bare)


def _bare_test(name: str) -> str:
    """The name without its sides, which are a field of their own, and without words that say nothing."""
    words = words_of(name)
    told = " ".join(word for word in _SIDES.sub("", words).split() if word not in _WITHOUT_MEANING)
    return told or words


@functools.cache
def _tests_by_name() -> dict[str, str]:
    return {_bare_test(other): _bare_test(name) for name, others in _OTHER_NAMES.items() for other in others}


@functools.cache
def _tests_left_open() -> dict[str, frozenset[str]]:
    return {_bare_test(name): frozenset(map(_bare_test, tests)) for name, tests in _LEFT_OPEN.items()}
