r"""Statistics as prose writes them: test statistics, p-values, intervals, and percentages with their counts.

Recognised are the usual ways of the trade (common practice, no source), plain, in Markdown, HTML and LaTeX:
`t(34) = 2.21, p = .034`, `F(2, 57) = 3.4`, `F1,34 = 6.3`, `t₃₄ = 2.2`, `χ²(1, N = 90) = 4.1`,
`$\chi^2_1 = 4.1$`, `z = 2.1, p = .04`, `r(28) = .36`, `p-value: 0.03`, `3.3 (95 % CI 0.3 to 8.1)`, `12/48 (25 %)`,
`12 (25 %) of 48`, `25 % (12 of 48)`. Letters that also stand for other things (t, z, r, F) count with degrees of
freedom or a p alone. A bound on p by itself, such as p < 0.05, names no result and is left alone, and so are a p
that is called a threshold, a P that is a pressure or a power, and a fraction of a measure, such as 3/4 (75 %) cup.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from typing import Literal

from gatecheck.model.struct import struct
from gatecheck.prose.numbers_in_text import Shown, number_at, numbers

Kind = Literal["t", "z", "chi2", "F", "r", "p"]

#: Each statistic has one of these in it; everything else is looked at only around them.
ANCHOR = re.compile(
    r"[=<>≤≥%\\&v](?:(?<=[=<>≤≥%])|(?<=\\)[lg](?:eq?|t)(?:slant)?\b|(?<=&)[lg]t;"
    r"|(?<=v)alue(?P<says>\s?:|\s(?:of|was|is)\b))"
)
#: How far around them, and how far behind its statistic a p may stand, in characters.
_BEFORE, _FARTHEST_P = 64, 40
#: How many degrees of freedom each statistic may show.
_DEGREES: dict[Kind, tuple[int, ...]] = {
    "t": (0, 1),
    "z": (0,),
    "chi2": (0, 1),
    "F": (0, 2),
    "r": (0, 1),
    "p": (0,),
}
#: What markup may put between the parts of a statistic.
_GAP = r"(?:[\s*_$~{}]|\\[,;:! ]|\\(?:left|right)|&(?:nb|thin)sp;){0,8}"
_CLOSED = r"(?:</(?:i|em|b|strong)>)?"
_ONLY_GAP = re.compile(_GAP)
_FIGURE = r"[\d₀-₉]{1,9}(?:\.\d{1,6})?"
_SUBSCRIPTS = str.maketrans("₀₁₂₃₄₅₆₇₈₉", "0123456789")
#: A letter at the head of a word; a search is faster where all that a pattern may begin with is plain.
_AT_HEAD = {one: rf"{one}(?<![^\W_]{one})(?<!\\{one})" for one in "tFzZrpPχΧxX"}
_NAME = (
    rf"(?P<name>{'|'.join(_AT_HEAD[one] for one in 'tFzZrpPχΧ')}|\\chi(?<![^\W_]\\chi)|chi(?<![^\W_]chi)"
    rf"|{_AT_HEAD['x']}(?=\s?[²^])|{_AT_HEAD['X']}(?=\s?[²^]))"
)
_SQUARED = r"(?P<squared>_?\}?\s?(?:²|\^\s?\{?2\}?\^?|2\b|[- ]?squared?|<sup>2</sup>)\*?)?"
_N = r"[\s*_$]{0,3}[Nn][\s*_$]{0,3}=[\s*_$]{0,3}(?P<n>\d{1,9})"
_DF = (
    r"(?:(?:\(|\[|_\{?|~|<sub>|(?=[₀-₉])|(?=\d{1,4},\s?\d))"
    rf"\s?(?:df\s?=\s?)?(?P<df>{_FIGURE})(?:\s?[,;](?:{_N}|\s?(?P<df2>{_FIGURE})))?"
    r"\s?(?:\\right)?(?:\)|\]|\}|~|</sub>)?)?"
)
_VALUE = r"(?:[*_$}]{0,2}[- ]values?)?"
_SYMBOL = re.compile(rf"{_NAME}{_CLOSED}{_SQUARED}{_CLOSED}{_VALUE}{_GAP}{_DF}{_GAP}\Z")
_LAST_OF_SYMBOL = frozenset("tFzZrpPχΧ2²)]}~>;ied0123456789₀₁₂₃₄₅₆₇₈₉")
_MARKUP = " \t\r\n*_$~{}\\\u00a0"
_LEVEL = re.compile(r"(?P<ci>\bCI[\s~_{$:=]{0,3})?(?<![\w.])(?P<level>\d\d(?:\.\d{1,3})?)(?:[\s~]|\\,)?\\?\Z")
_INTERVAL = re.compile(
    r"[\s~-]{0,2}(?:(?P<words>CIs?\b|C\.I\.|(?:confidence|uncertainty|compatibility|credible)\s(?:intervals?|limits)"
    r"|intervals?\b)|(?=[\s~]{0,2}[:=(\[]))(?:[\s~$:=,(\[{*_]|from\b|of\b|is\b|was\b|\\left|\\\{){0,10}"
)
_TO = re.compile(
    r"(?:[\s~]?\\?%)?(?:[\s~](?!(?:to|and|through)\b)[^\W\d_/²]{1,6})?[\s~$]{0,3}"
    r"(?:to|and|,|;|–|—|--?-?|through)[\s~$]{0,3}"
)
_COUNT = r"\d{1,3}(?:,\d{3})+|\d{1,12}"
_OF = rf"(?P<part>{_COUNT})\s?(?:(?P<slash>/)|of(?:\sthe)?|out\sof(?:\sthe)?)\s?(?P<whole>{_COUNT})"
_COUNTS_BEFORE = re.compile(rf"(?<![\w./,]){_OF}(?![\d/]|\.\d)[^\d.()%]{{0,30}}[(\[]\s?\Z")
_PART_BEFORE = re.compile(rf"(?<![\w./,])(?P<part>{_COUNT})\s?[(\[]\s?\Z")
_WHOLE_BEHIND = re.compile(rf"%\s?[)\]]\s(?:out\s)?of\s(?:the\s)?(?P<whole>{_COUNT})(?![\d/]|\.\d)")
_COUNTS_BEHIND = re.compile(rf"%\s?[(\[]\s?{_OF}(?![\d/])[^\d()%]{{0,30}}[)\]]")
_BESIDE_COUNTS = re.compile(r"%\s?[()\[\]]")
#: What follows a fraction of a measure, which counts nothing.
_MEASURE = re.compile(
    r"[)\]]?\s(?:of\s(?:a|an|the)\s)?(?:cups?|inch(?:es)?|miles?|pints?|(?:tea|table)spoons?|hours?|full|way|strength"
    r"|power|speed|load|throttle|capacity)\b"
)
#: A p that is a threshold, or a letter for the probability in a model, and a pressure or a power by that letter.
_THRESHOLD_BEFORE = re.compile(
    r"(?:\b(?:threshold|cut-?off|criterion)s?\b(?:[^.;!?()\n]|\.\d){0,40}\b(?:was|were|is|are|of)\s(?:set\s(?:at|to)\s)?"
    r"|\b(?:significance|alpha|critical)\s(?:threshold|cut-?off|criterion|level|value)s?\b(?:[^.;!?\n]|\.\d){0,40}"
    r"|\bwith(?: a)? probability\s)[*_$]{0,3}\Z",
    re.IGNORECASE,
)
_THRESHOLD_BEHIND = re.compile(
    r"[\s*_$)]{0,3}(?:or (?:less|lower|below|smaller|under)\b"
    r"|(?:was|were|is|are) (?:considered|deemed|regarded|taken|used|set|chosen|judged|defined)\b"
    r"|[kMGhm]?(?:Pa|bar|W)\b|atm\b|mmHg\b|torr\b|psi\b)"
)
_END_OF_SENTENCE = re.compile(r"[.!?]\s+[^\W\d_a-z]|\n[ \t\r]*\n")
_ESTIMATE = re.compile(r"[^\d.;()\[\]]{0,24}[(\[,;:]\s?\Z")


@struct
class ShownTest:
    """A test statistic or a p: `value` is its figure, `df` has 0 to 2 members, `n` the N beside them."""

    kind: Kind
    start: int
    end: int
    value: Shown
    df: tuple[Shown, ...] = ()
    n: Shown | None = None


@struct
class Result:
    """A test statistic with the `p` behind it, if one is there; or a p alone."""

    statistic: ShownTest
    p: ShownTest | None = None

    @property
    def start(self) -> int:
        """Where it begins."""
        return self.statistic.start

    @property
    def end(self) -> int:
        """Where it ends."""
        return self.statistic.end if self.p is None else self.p.end


@struct
class ShownInterval:
    """An interval with its level in percent; `estimate` is the number right before it, if one stands there."""

    start: int
    end: int
    level: Shown
    low: Shown
    high: Shown
    estimate: Shown | None


@struct
class ShownShare:
    """A percentage with its counts."""

    start: int
    end: int
    part: int
    whole: int
    percent: Shown


Statistic = Result | ShownInterval | ShownShare


def may_hold_statistics(text: str) -> bool:
    """Whether anything in `text`, code and comments too, looks like a statistic."""
    return next(_recognised(text), None) is not None


def statistics(text: str) -> Iterator[Statistic]:
    """Yield the statistics in `text`, in order."""
    waiting: ShownTest | None = None
    last_test: ShownTest | None = None
    for one in _recognised(text):
        before, last_test = last_test, one if isinstance(one, ShownTest) else last_test
        if isinstance(one, ShownTest) and one.kind == "p" and waiting and _belongs(text, waiting, one):
            yield Result(waiting, one)
            waiting = None
            continue
        yield from _alone(waiting)
        waiting = one if isinstance(one, ShownTest) else None
        if isinstance(one, ShownInterval):
            yield _without_figure_of_test(one, before)
        elif isinstance(one, ShownShare):
            yield one
    yield from _alone(waiting)


def _without_figure_of_test(one: ShownInterval, before: ShownTest | None) -> ShownInterval:
    """The interval without its estimate where that is the figure of a statistic or p; r is an estimate."""
    if before is None or one.estimate is None or before.kind == "r" or one.estimate.start != before.value.start:
        return one
    return ShownInterval(one.start, one.end, one.level, one.low, one.high, None)


def _alone(one: ShownTest | None) -> Iterator[Result]:
    """A statistic without a p, or a p alone: letters that stand for much else need their degrees of freedom.

    A p alone of 0 or 1 without decimals is an order or a power as often as a probability, and x² a square.
    """
    if one is None:
        return
    text = one.value.found.string
    is_probability = one.kind == "p" and one.value.relation == "=" and not one.value.text.isdigit()
    is_square = text[one.start] == "x"
    if one.df or (one.kind == "chi2" and not is_square) or (is_probability and _is_of_result(text, one)):
        yield Result(one)


def _is_of_result(text: str, p: ShownTest) -> bool:
    """Whether a p alone is that of a result, as far as the words around it tell."""
    before = _THRESHOLD_BEFORE.search(text, max(0, p.start - _BEFORE), p.start)
    return before is None and _THRESHOLD_BEHIND.match(text, p.end) is None


def _belongs(text: str, statistic: ShownTest, p: ShownTest) -> bool:
    near = statistic.kind != "p" and p.start - statistic.end <= _FARTHEST_P
    return near and _END_OF_SENTENCE.search(text, statistic.end, p.start) is None


def _recognised(text: str) -> Iterator[ShownTest | ShownInterval | ShownShare]:
    for anchor in ANCHOR.finditer(text):
        one = _at_percent(text, anchor.start()) if anchor[0] == "%" else _at_relation(text, anchor)
        if one is not None:
            yield one


def _at_relation(text: str, anchor: re.Match[str]) -> ShownTest | None:
    at = anchor.start("says") if anchor["says"] else anchor.start()
    least = max(0, at - _BEFORE)
    if text[least:at].rstrip(_MARKUP)[-1:] not in _LAST_OF_SYMBOL:
        return None
    symbol = _SYMBOL.search(text, least, at)
    value = _behind(text, anchor.end()) if symbol else None
    kind = _kind(symbol) if symbol else None
    if symbol is None or value is None or kind is None:
        return None
    df = tuple(each for each in (_inside(symbol, "df"), _inside(symbol, "df2")) if each is not None)
    if len(df) not in _DEGREES[kind] or any(each.value == 0 for each in df):
        return None
    if kind == "p" and not 0 <= value.value <= 1:
        return None
    return ShownTest(kind, symbol.start(), value.end, value, df, _inside(symbol, "n"))


def _kind(symbol: re.Match[str]) -> Kind | None:
    letters: dict[str, Kind] = {"t": "t", "F": "F", "z": "z", "Z": "z", "r": "r", "p": "p", "P": "p"}
    kind = letters.get(symbol["name"])
    if symbol["squared"]:
        return "chi2" if kind is None else None
    return kind


def _inside(symbol: re.Match[str], group: str) -> Shown | None:
    if symbol[group] is None:
        return None
    return number_at(symbol[group].translate(_SUBSCRIPTS), 0)


def _behind(text: str, at: int) -> Shown | None:
    gap = _ONLY_GAP.match(text, at)
    return number_at(text, gap.end()) if gap else None


def _at_percent(text: str, at: int) -> ShownInterval | ShownShare | None:
    level = _LEVEL.search(text, max(0, at - _BEFORE), at)
    interval = _INTERVAL.match(text, at + 1) if level else None
    if level and interval and (interval["words"] or level["ci"]):
        return _interval(text, level, interval.end())
    return _share(text, at)


def _interval(text: str, level: re.Match[str], at: int) -> ShownInterval | None:
    low = number_at(text, at)
    between = _TO.match(text, low.end) if low else None
    high = number_at(text, between.end()) if between else None
    shown = number_at(text, level.start("level"))
    if low is None or high is None or shown is None:
        return None
    start = level.start()
    return ShownInterval(start, high.end, shown, low, high, _estimate(text, start))


def _estimate(text: str, before: int) -> Shown | None:
    """The number that stands right before an interval, with its unit between them at most."""
    last = _last_number(text, before)
    return last if last and _ESTIMATE.match(text, last.end, before) else None


def _last_number(text: str, before: int) -> Shown | None:
    """The last number that ends above `before`; one that begins too far above may be only the end of one."""
    least = max(0, before - _BEFORE)
    last = next(iter([*numbers(text, least, before)][-1:]), None)
    return last if last and (last.start > least or least == 0) else None


def _share(text: str, at: int) -> ShownShare | None:
    last = _last_number(text, at + 1) if _BESIDE_COUNTS.match(text, at) else None
    if last is None or last.found.end() != at + 1:
        return None
    counts = _counts(text, at, last.start)
    if counts is None:
        return None
    first, second = counts
    part, whole = int(first["part"].replace(",", "")), int(second["whole"].replace(",", ""))
    end = max(second.end(), at + 1)
    end += text[end : end + 1] in {")", "]"}
    # 12/10 may be a date or a ratio; "12 of 10" is a slip.
    is_fraction = "slash" in first.groupdict() and first["slash"] is not None
    if whole == 0 or (is_fraction and (part > whole or _MEASURE.match(text, end))):
        return None
    return ShownShare(min(first.start(), last.start), end, part, whole, last)


def _counts(text: str, at: int, percent: int) -> tuple[re.Match[str], re.Match[str]] | None:
    """The counts beside the percent sign at `at`, whose number begins at `percent`: where part and whole stand."""
    least = max(0, at - _BEFORE)
    both = _COUNTS_BEFORE.search(text, least, percent) or _COUNTS_BEHIND.match(text, at)
    if both:
        return both, both
    whole = _WHOLE_BEHIND.match(text, at)
    part = _PART_BEFORE.search(text, least, percent) if whole else None
    return (part, whole) if part and whole else None
