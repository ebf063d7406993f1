"""The answer of `design` as plain text: a table, a curve, and what a bare design would leave."""

from __future__ import annotations

from collections.abc import Callable
from decimal import ROUND_CEILING, ROUND_FLOOR, Decimal

from gatecheck.model.design import Design, DesignQuestion, Least, StudySize
from gatecheck.model.shown import percent
from gatecheck.model.struct import struct
from gatecheck.render import words
from gatecheck.render.layout import page, paragraph, section

_CURVE = 41
_DIGITS, _TRUE_DIGITS = 4, 12
_LONGEST_LEVEL = 9
_STANDS_WIDTH = 11
#: From 10 to this power on, and below 10 to the other, a number is written with an exponent.
_LARGE, _SMALL = 7, -5
_PER_GROUP = {"two-sample-t", "two-proportions", "one-way-F"}
_NOUNS = {"paired-t": "pair", "correlation": "pair", "log-rank": "event"}
_WITHOUT_DIRECTION = {"one-way-F", "chi-squared"}
_ARCSINE = "The test is taken on the arcsine scale, where the effect is h = 2 asin sqrt p1 - 2 asin sqrt p2."
_NOTES = {
    "paired-t": "Pairs are counted, and d is that of the differences: the test is the one-sample t of these.",
    "one-proportion": _ARCSINE,
    "two-proportions": _ARCSINE,
    "chi-squared": "The distribution of chi-squared is that of large samples.",
    "log-rank": "Events are counted, of both groups together, and not units: plan for as many units as will have "
    "so many events. The test is taken by Schoenfeld's approximation.",
}
_BY_COUNTS = (
    "The default prior is that of a test without counts: a record that gives the events of both groups is averaged "
    "over its two proportions instead."
)
_ASSUMED = (
    "All of it takes the true effect to be as large as planned. Effects found significant earlier are more often "
    "too large than too small: plan on the smallest effect of interest."
)
_MAY_HAVE_COUNTS = {"two-proportions", "chi-squared"}


def design(answer: Design, width: int) -> str:
    """Return the answer as plain text of `width` columns."""
    return page([
        paragraph(_headline(answer), width),
        section("Least size for each assurance", [_table(answer)]),
        paragraph(_table_read(answer), width),
        section("Assurance by size (o; | is the one asked for)", [_curve(answer)] if answer.curve else []),
        paragraph(_bare(answer), width),
        paragraph(_assumed(answer), width),
    ])


def _headline(answer: Design) -> str:
    asked, least = answer.question, answer.wanted
    size = f"More than 100,000,000 {_nouns(asked)}{_each(asked)}" if least is None else _size(asked, least.size)
    behind = f", as one of a family of {asked.family}" if asked.family > 1 else ""
    which = "if it goes on to the last" if asked.only_last_look else "at one"
    looks = f", {which} of {asked.looks} looks ({asked.boundary})," if asked.looks > 1 else ""
    return (
        f"{size} for a claim on a true effect of {asked.effect:g} ({_test(asked)}){behind}{looks} to stand "
        f"with {percent(asked.assurance, asked.assurance)} probability under the policy {answer.policy}, weighed "
        f"{words.alternative_words(answer.alternative)} at prior {answer.prior:.4g} ({_wanted(answer)})."
    )


def _wanted(answer: Design) -> str:
    """The likelihood ratios that the policy wants, and the p of family and looks."""
    told: list[str] = []
    for need in answer.needs:
        against = "" if need.alternative == answer.alternative else f" {words.alternative_words(need.alternative)}"
        ratio = _rounded(Decimal(need.log_likelihood_ratio).exp(), ROUND_CEILING)
        told.append(f"{'one' if told else 'a likelihood ratio'} of {ratio}{against}")
    if answer.log_p_limit < 0:
        at_last = " at the last look" if answer.question.looks > 1 else ""
        told.append(f"a p of at most {_rounded(Decimal(answer.log_p_limit).exp(), ROUND_FLOOR)}{at_last}")
    *others, last = told
    return f"{', '.join(others)} and {last} are wanted" if others else f"{last} is wanted"


def _test(asked: DesignQuestion) -> str:
    details = [
        asked.test,
        *(["one-sided"] if asked.sides == 1 else []),
        *([f"{asked.groups} groups"] if asked.groups else []),
        *([f"{asked.df} df"] if asked.df else []),
        *([f"ratio {asked.ratio:g}"] if asked.ratio else []),
    ]
    return ", ".join(details)


def _nouns(asked: DesignQuestion) -> str:
    return f"{_NOUNS.get(asked.test, 'unit')}s"


def _each(asked: DesignQuestion) -> str:
    if asked.test not in _PER_GROUP:
        return ""
    return " per group" if asked.ratio is None else " in the first group"


def _size(asked: DesignQuestion, size: StudySize) -> str:
    nouns = _nouns(asked) if size.n > 1 else _nouns(asked).removesuffix("s")
    second = "" if size.second is None else f" and {size.second:,} in the second"
    return f"{size.n:,} {nouns}{_each(asked)}{second}"


@struct
class _Column:
    """One column of the table."""

    head: str
    width: int
    cell: Callable[[Least], str]


def _table(answer: Design) -> str:
    columns = [*_columns_of_size(answer.question), *_columns_of_result(answer)]
    stands = [percent(each.least.assurance, each.wanted) if each.least else "" for each in answer.levels]
    # An assurance close to 1 takes as many digits as tell it from 1.
    last = max(_STANDS_WIDTH, *(len(each) + 2 for each in stands))
    lines = [
        f"{'wanted':>9}" + "".join(f"{column.head:>{column.width}}" for column in columns) + f"{'stands':>{last}}"
    ]
    for level, stand in zip(answer.levels, stands, strict=True):
        exact = percent(level.wanted, level.wanted)
        wanted = exact if len(exact) <= _LONGEST_LEVEL else percent(level.wanted)
        if level.least is None:
            lines.append(f"{wanted:>9}  above 100,000,000")
            continue
        cells = "".join(f"{column.cell(level.least):>{column.width}}" for column in columns)
        lines.append(f"{wanted:>9}{cells}{stand:>{last}}")
    return "\n".join(lines)


def _columns_of_size(asked: DesignQuestion) -> list[_Column]:
    if asked.test not in _PER_GROUP:
        return [_Column(_nouns(asked), 13, lambda least: f"{least.size.n:,}")]
    if asked.ratio is None:
        return [
            _Column("per group", 13, lambda least: f"{least.size.n:,}"),
            _Column("in all", 17, lambda least: f"{least.size.total:,}"),
        ]
    return [
        _Column("first group", 13, lambda least: f"{least.size.n:,}"),
        _Column("second", 17, lambda least: f"{least.size.second:,}"),
    ]


def _columns_of_result(answer: Design) -> list[_Column]:
    return [
        _Column(f"{answer.statistic} from", 11, lambda least: _rounded(least.value, ROUND_CEILING)),
        _Column("p up to", 11, lambda least: _rounded(least.p, ROUND_FLOOR)),
    ]


def _rounded(value: float | Decimal, towards: str) -> str:
    """A few digits of a limit, rounded so that what is shown meets it too; a rounding error is no digit of it."""
    exact = Decimal(f"{value:.{_TRUE_DIGITS}g}")
    shown = exact.quantize(Decimal(1).scaleb(exact.adjusted() - _DIGITS + 1), towards).normalize()
    return f"{shown:f}" if _SMALL <= shown.adjusted() < _LARGE else f"{shown:g}"


def _table_read(answer: Design) -> str:
    if all(level.least is None for level in answer.levels):
        return ""
    met = f"A result meets the policy from that {answer.statistic} on"
    if answer.question.test in _WITHOUT_DIRECTION:
        return f"{met}."
    if answer.question.sides == 1:
        return f"{met} in the direction tested, which is that of the true effect; p is one-sided."
    return f"{met}, and only results in the direction of the true effect are counted here; p is two-sided."


def _curve(answer: Design) -> str:
    mark = _position(answer.question.assurance)
    lines = [f"{_nouns(answer.question):>13}{'stands':>11}  0 %{'100 %':>{_CURVE - 3}}"]
    for point in answer.curve:
        cells = [" "] * _CURVE
        cells[mark] = "|"
        cells[_position(point.assurance)] = "o"
        stands = percent(point.assurance, answer.question.assurance)
        lines.append(f"{point.n:>13,}{stands:>11}  {''.join(cells).rstrip()}")
    return "\n".join(lines)


def _position(share: float) -> int:
    return round(share * (_CURVE - 1))


def _bare(answer: Design) -> str:
    if answer.bare is None:
        return ""
    return (
        f"A design with 80 % power at 0.05 alone would take {_size(answer.question, answer.bare.size)}. Its claim "
        f"would stand with {percent(answer.bare.assurance)} probability, and a result that is just significant "
        f"would leave a false positive risk of {percent(answer.bare.risk)}. Of all results below 0.05 over many "
        f"such designs {percent(answer.bare.long_run)} would be false, which is another question: most lie far "
        "below it."
    )


def _assumed(answer: Design) -> str:
    test = answer.question.test
    counts = _BY_COUNTS if answer.alternative == "default-prior" and test in _MAY_HAVE_COUNTS else ""
    looks = _looks(answer.question) if answer.question.looks > 1 else ""
    return " ".join(filter(None, [_NOTES.get(test, ""), counts, looks, _ASSUMED]))


def _looks(asked: DesignQuestion) -> str:
    if asked.only_last_look:
        return (
            "What stands at a look before the last is not counted: over all looks the probability is no smaller, "
            "if the study goes on where its claim does not stand yet."
        )
    return (
        "The looks are equally spaced, the units are those up to the last one, and the statistic and the p in the "
        "table are those wanted at it. A look ends the study where the claim stands at it, and not where it is "
        "within its boundary alone."
    )
