"""Prose held against records: facts about links and statistics, not judgements."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator, Mapping, Sequence

from gatecheck.git import safe
from gatecheck.model.numbers import Reported
from gatecheck.model.record import Record
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Place, Problem
from gatecheck.prose.fields import Subject, fields_of, is_in_percent, number_of
from gatecheck.prose.links import CLAIM, Link, links_in
from gatecheck.prose.matching import Match, Matcher, differences, share_differs
from gatecheck.prose.numbers_in_text import Shown, agrees, rewritten
from gatecheck.prose.others import references, tells_of_others
from gatecheck.prose.sentences import sentence_at
from gatecheck.prose.source import Passage
from gatecheck.prose.statistics_in_text import ShownShare, Statistic, may_hold_statistics, statistics

#: Words that call a result planned or confirmed, in English.
_CONFIRMED = re.compile(
    r"\b(?:confirm(?:s|ed|ing|atory)|(?:pre-?)?registered|as (?:predicted|hypothesi[sz]ed|planned)|a priori)\b",
    re.IGNORECASE,
)
#: Words beside them that call it the opposite, or leave it open.
_NOT_CONFIRMED = re.compile(
    r"\b(?:not?|never|cannot|n't|without|nor|neither|un(?:confirmed|registered|planned)|explorat(?:ory|ive)|post.?hoc|"
    r"to be|should|must|needs?|await(?:s|ing)?|if|whether|future|candidates?)\b|n['’]t\b",
    re.IGNORECASE,
)
_MOST_ADVISED = 20


@struct
class NumberDiffers:
    """A linked number that is not the record's; `anew` is the record's in the same writing, where that can be."""

    link: Link
    number: Shown
    recorded: Reported
    anew: str | None


@struct
class NothingClaimed:
    """A sentence that is tied to the claim of a record that claims nothing."""

    record: Record


@struct
class CalledConfirmed:
    """A sentence on a record that is not confirmatory, with the word that calls it planned or confirmed."""

    record: Record
    word: str


@struct
class StatisticDiffers:
    """A statistic that no record has in full; `nearest` has the most of it, where any has something."""

    statistic: Statistic
    nearest: Match | None


@struct
class ShareDiffers:
    """A percentage that is not that of the counts beside it."""

    share: ShownShare


@struct
class Fact:
    """Something that prose says and the records do not, at an offset; `linked` is true where a link ties it."""

    passage: Passage
    at: int
    linked: bool
    what: NumberDiffers | NothingClaimed | CalledConfirmed | StatisticDiffers | ShareDiffers


@struct
class Facts:
    """What prose and records say differently, in the order of the text, and the links that lead nowhere."""

    facts: tuple[Fact, ...]
    problems: tuple[Problem, ...]


def held_against(passages: Iterable[Passage], known: Mapping[str, Subject], *, unlinked: bool = True) -> Facts:
    """Hold the prose against the records `known` by id.

    Without `unlinked` statistics in sentences that are tied to no record are passed over.
    """
    matcher = Matcher(tuple({id(one): one for one in known.values()}.values()))
    facts: list[Fact] = []
    problems: list[Problem] = []
    for passage in passages:
        ties = _ties(passage, known, problems)
        facts += _of_links(passage, ties)
        if (unlinked or ties) and may_hold_statistics(passage.body):
            found = _of_statistics(passage, ties, matcher, unlinked=unlinked)
            facts += (fact for fact in found if unlinked or fact.linked)
    return Facts(tuple(facts), tuple(problems))


@struct
class _Tie:
    """A link that leads to a record, with the number there that it ties its own to."""

    link: Link
    subject: Subject
    recorded: Reported | None

    @property
    def in_percent(self) -> bool:
        return is_in_percent(self.subject, self.link.field)


def numbers_that_differ(passage: Passage, known: Mapping[str, Subject]) -> tuple[NumberDiffers, ...]:
    """Return the linked numbers of a passage that are not those of the records `known` by id, in order."""
    return tuple(_numbers_that_differ(_ties(passage, known, [])))


def broken_links(passages: Iterable[Passage], known: Mapping[str, Subject]) -> tuple[Problem, ...]:
    """Return the links that lead to no record, to no number in one, or from no number."""
    problems: list[Problem] = []
    for passage in passages:
        _ties(passage, known, problems)
    return tuple(problems)


def _ties(passage: Passage, known: Mapping[str, Subject], problems: list[Problem]) -> list[_Tie]:
    ties = []
    for link in links_in(passage):
        found = _tie(link, known, advise=len(problems) < _MOST_ADVISED)
        if isinstance(found, Problem):
            problems.append(found)
        else:
            ties.append(found)
    return ties


def _tie(link: Link, known: Mapping[str, Subject], *, advise: bool) -> _Tie | Problem:
    if not link.record:
        advice = "write `gatecheck: ID FIELD`, such as `gatecheck: yield/spring estimate.value`"
        return _broken(link, f"the link {safe(link.says)!r} is not an id and a field", advice)
    record, field = safe(link.record), safe(link.field)
    subject = known.get(link.record)
    if subject is None:
        near = _nearest(link.record, known) if advise else ""
        advice = f"the nearest known one is {safe(near)}" if near else "`gatecheck survey` lists the records"
        return _broken(link, f"the link to {record} leads to no record", advice)
    if link.field == CLAIM:
        return _Tie(link, subject, None)
    recorded = number_of(subject, link.field)
    if recorded is None:
        near = _nearest(link.field, fields_of(subject)) if advise else ""
        advice = f"the nearest field with a number is {near}" if near else "name a field that holds a number"
        return _broken(link, f"{record} has no number in {field}", advice)
    if link.number is None:
        advice = "put the link right behind its number, in the same paragraph"
        return _broken(link, f"no number stands before the link to {record} {field}", advice)
    return _Tie(link, subject, recorded)


def _broken(link: Link, told: str, advice: str) -> Problem:
    return Problem(Place(link.passage.file.path, link.line), told, advice)


def _nearest(word: str, known: Iterable[str]) -> str:
    import difflib  # noqa: PLC0415  # needed for a broken link alone, and costs start-up time

    return next(iter(difflib.get_close_matches(word, sorted(known), n=1, cutoff=0.6)), "")


def _of_links(passage: Passage, ties: Sequence[_Tie]) -> Iterator[Fact]:
    for differing in _numbers_that_differ(ties):
        yield Fact(passage, differing.number.start, True, differing)
    told: set[tuple[int, str]] = set()
    for tie in ties:
        link, record = tie.link, tie.subject.record
        if link.field == CLAIM and record.claim is None:
            yield Fact(passage, link.start, True, NothingClaimed(record))
        word = _word_of_confirmation(record, passage.visible[link.start : link.end])
        if word and (link.start, record.id) not in told:
            told.add((link.start, record.id))
            yield Fact(passage, link.start, True, CalledConfirmed(record, word))


def _numbers_that_differ(ties: Iterable[_Tie]) -> Iterator[NumberDiffers]:
    for tie in ties:
        number, recorded = tie.link.number, tie.recorded
        if number is None or recorded is None or agrees(number, recorded, in_percent=tie.in_percent):
            continue
        yield NumberDiffers(tie.link, number, recorded, rewritten(number, recorded, in_percent=tie.in_percent))


def _word_of_confirmation(record: Record, sentence: str) -> str:
    """The word by which a sentence calls a result planned or confirmed that its record does not; else empty."""
    if record.status == "confirmatory" or _NOT_CONFIRMED.search(sentence):
        return ""
    found = _CONFIRMED.search(sentence)
    return found[0] if found else ""


def _of_statistics(passage: Passage, ties: Sequence[_Tie], matcher: Matcher, *, unlinked: bool) -> Iterator[Fact]:
    found = tuple(statistics(passage.visible))
    listed = references(passage.visible) if found else ()
    for one in found:
        around = [tie for tie in ties if tie.link.start <= one.start < tie.link.end]
        if (around or unlinked) and not any(start <= one.start < end for start, end in listed):
            yield from _of_statistic(passage, one, around, matcher)


def _of_statistic(passage: Passage, one: Statistic, around: Sequence[_Tie], matcher: Matcher) -> Iterator[Fact]:
    if isinstance(one, ShownShare) and share_differs(one):
        yield Fact(passage, one.start, False, ShareDiffers(one))
        return
    match = matcher.match(passage.visible, one)
    start, end = sentence_at(passage.visible, one.start)
    if match is not None and not match.differences:
        word = "" if around else _word_of_confirmation(match.record, passage.visible[start:end])
        if word:
            yield Fact(passage, one.start, False, CalledConfirmed(match.record, word))
        return
    tied = _tied(passage.visible, one, around)
    if tied is None and not tells_of_others(passage.body[start:end]):
        yield Fact(passage, one.start, False, StatisticDiffers(one, match))
    elif tied is not None and tied.differences:
        yield Fact(passage, one.start, True, StatisticDiffers(one, tied))


def _tied(text: str, one: Statistic, around: Sequence[_Tie]) -> Match | None:
    """What a statistic has of the record that it is tied to, by a number in it or by its sentence.

    The numbers that have a link of their own are left to it.
    """
    inside = {tie.link.number.text: tie for tie in around if tie.link.number and _holds(one, tie.link.number.start)}
    for tie in inside.values() or (tie for tie in around if tie.link.field == CLAIM):
        found = differences(text, one, tie.subject)
        if found is not None:
            return Match(tie.subject.record, tuple(each for each in found if each.shown not in inside))
    return Match(next(iter(inside.values())).subject.record) if inside else None


def _holds(one: Statistic, at: int) -> bool:
    return one.start <= at < one.end
