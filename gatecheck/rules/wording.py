"""Rule `wording`: a claim, or a sentence linked to a record, says no more than the evidence in its record allows.

It looks for words that need more than a result has: "no effect", "safe" or "not worse" without a margin and an
interval inside it; a difference in significance read as a difference between effects, without a test of that
difference; "trend" and "marginally" where p is above alpha; causal verbs where no design that allows them is
declared; observed power as an argument; p read as the probability of chance, of a hypothesis or of an error;
"significant" that does not say how; words of importance without a smallest effect of interest; words of strength
above the likelihood ratio. The phrases and their exceptions are data, one list a language. Sources: the statement
on p-values of the American Statistical Association (2016), SAMPL guidelines (Lang and Altman 2013), and those
beside each kind.

A claim that is softened ("may", "suggests") is let be where the record is not confirmatory, and softened causal
words are let be always.

A claim of a difference between two results names both in `compares: [ID, ID]`, and the message gives their
difference. Causal words need the `design` in the record, `randomised` or `quasi-experimental`; with `design: open`
in the policy, and where the record reports a harm (`harm: true`), only an `observational` one forbids them. A
probability of chance or of a hypothesis falls short unless its number is neither p nor 1 - p; the message gives the
risk that the gate computes. Strength words follow Kass and Raftery (20 for "strong"), and "proves" is never met.

The remedy is a sentence built from the record. `allow` names kinds of words to let be: `no-effect`, `safe`,
`not-worse`, `difference`, `observed-power`, `p-as-probability`, `hedge`, `causal`, `statistical-significance`,
`importance`, `significant`, `strength`; `linked: false` leaves sentences in prose alone. The phrases, with what
only looks like them, are lists in `gatecheck/compare/phrases`, one a `language`.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Sequence
from dataclasses import KW_ONLY
from typing import TYPE_CHECKING, Annotated, Literal, Protocol

import numpy as np

from gatecheck.compare.names import shown
from gatecheck.compare.wordings import Kind, Language, Wording, phrase_of, wordings
from gatecheck.model.marks import OneOrMore
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Finding, Judged, Outcome, Place
from gatecheck.policy import Applied, RuleSettings
from gatecheck.rules.rule import Judgement, Rule, Said, Table, every_claim

if TYPE_CHECKING:
    from gatecheck.rules.allowed_words import Grounds

_NAME = "wording"
_MOST_TOLD = 3


@struct
class Settings(RuleSettings):
    """Which words are looked for, and where."""

    _: KW_ONLY
    language: Annotated[tuple[Language, ...], OneOrMore(), "languages in which claims are written"] = ("en",)
    allow: Annotated[tuple[Kind, ...], OneOrMore(least=0), "kinds of words that are not judged"] = ()
    design: Annotated[
        Literal["open", "required"],
        "required: causal words also fall short where the record declares no design; open: they are then let be",
    ] = "required"
    linked: Annotated[bool, "judge sentences that are linked to a record like its claim"] = True


class Sentence(Protocol):
    """A sentence in prose that is tied to a record; `line` is 1-based."""

    @property
    def path(self) -> str:
        """The path of its file."""

    @property
    def line(self) -> int:
        """The line on which it begins."""

    @property
    def record_id(self) -> str:
        """The id of the record to which it is tied."""

    @property
    def text(self) -> str:
        """The sentence in one line."""


@struct
class _Found:
    """The words in each claim, and which of them its evidence does not allow or cannot tell."""

    on: Grounds
    words: list[tuple[Wording, ...]]
    short: list[list[Wording]]
    undecided: list[list[Wording]]


def judge(table: Table, settings: Sequence[Settings | None]) -> Judgement:
    """Short where a claim has words that its evidence does not allow, undecided where that cannot be told."""
    from gatecheck.rules.allowed_words import not_allowed  # noqa: PLC0415  # loaded where the rule is on alone

    texts = [one.record.claim if each else None for one, each in zip(table.columns.found, settings, strict=True)]
    found = _words(texts, settings)
    on = _grounds(table, settings)
    words = [(*each, *_asserted_by_field(on, row, each, settings[row])) for row, each in enumerate(found)]
    judged = [not_allowed(on, row, each) for row, each in enumerate(words)]
    short, undecided = [each for each, _ in judged], [each for _, each in judged]
    known = [bool(wrong) or not unknown for wrong, unknown in judged]
    return Judgement(
        np.array([bool(each) for each in short], np.bool_),
        known=np.array(known, np.bool_),
        facts=_Found(on, words, short, undecided),
    )


def _grounds(table: Table, settings: Sequence[Settings | None]) -> Grounds:
    from gatecheck.rules.allowed_words import grounds  # noqa: PLC0415  # loaded where the rule is on alone

    required = [each is not None and each.design == "required" for each in settings]
    return grounds(table, np.array(required, np.bool_))


def _words(texts: Sequence[str | None], settings: Sequence[Settings | None]) -> list[tuple[Wording, ...]]:
    found = wordings(texts, [each.language if each else () for each in settings])
    return [
        tuple(word for word in words if each is None or word.phrase.kind not in each.allow)
        for words, each in zip(found, settings, strict=True)
    ]


def _asserted_by_field(
    on: Grounds, row: int, words: Iterable[Wording], settings: Settings | None
) -> tuple[Wording, ...]:
    """That two effects differ, where the record says so in `compares` and its claim in other words."""
    columns = on.table.columns
    if settings is None or "difference" in settings.allow or on.record(row).compares is None:
        return ()
    if columns.no_effect_aim[row] or columns.estimation_aim[row] or not columns.claims[row]:
        return ()
    if any(word.phrase.kind == "difference" for word in words):
        return ()
    return (Wording(phrase_of("difference", settings.language[0]), "", suggestive=False),)


def explain(_: Table, row: int, __: Settings, judgement: Judgement) -> Said:
    """The words, what they need and what the record has, with a sentence that it allows."""
    found: _Found = judgement.facts
    said = _said("The claim", found.on, row, found.short[row], found.undecided[row])
    if said is not None:
        return said
    words = ", ".join(_quoted(each.quote) for each in found.words[row] if each.quote)
    if words:
        return Said(f"The claim says {words}, which its evidence allows.")
    return Said("The claim has no words that need more than its evidence gives.")


def _said(whose: str, on: Grounds, row: int, short: Sequence[Wording], undecided: Sequence[Wording]) -> Said | None:
    from gatecheck.rules.suggested import suggest  # noqa: PLC0415  # loaded where something is said alone
    from gatecheck.rules.words_not_allowed import tell_missing  # noqa: PLC0415  # the same

    wrong = [*short, *undecided]
    if not wrong:
        return None
    told = "; ".join(_tell(on, row, each) for each in wrong[:_MOST_TOLD])
    more = f" (and {len(wrong) - _MOST_TOLD} more)" if len(wrong) > _MOST_TOLD else ""
    if short:
        return Said(f"{whose} says {told}{more}.", suggest(on, row, short[0].phrase.kind))
    kind = undecided[0].phrase.kind
    return Said(f"{whose} says {told}{more}.", f"{tell_missing(kind)}.")


def _tell(on: Grounds, row: int, wording: Wording) -> str:
    from gatecheck.rules.words_not_allowed import tell_ground  # noqa: PLC0415  # loaded where something is said

    quote = _quoted(wording.quote) if wording.quote else "that two effects differ"
    return f"{quote}, which {wording.phrase.needs}{tell_ground(on, row, wording)}"


def _quoted(text: str) -> str:
    return f"“{shown(text)}”"


def judge_sentences(sentences: Sequence[Sentence], table: Table) -> tuple[Judged, ...]:
    """Return a row for each line of prose on which a linked sentence says more than its record allows.

    The rows are in the order of path and line. The id of a row is its place, it claims nothing, and it has a
    finding for each sentence and record. Each sentence is judged by the settings that the policy has for its
    record; one whose record is not in the tree, or has `linked: false` in its settings, is passed over.
    """
    settings = [_linked(applied) for applied in table.applied]
    row_of = {one.record.id: row for row, one in enumerate(table.columns.found) if settings[row] is not None}
    judged = [(row_of[each.record_id], each) for each in sentences if each.record_id in row_of]
    if not judged:
        return ()
    words = _words([each.text for _, each in judged], [settings[row] for row, _ in judged])
    on = _grounds(table, settings)
    findings: dict[Place, list[Finding]] = defaultdict(list)
    texts: dict[Place, str] = {}
    for (row, sentence), found in zip(judged, words, strict=True):
        finding = _finding(on, row, sentence, found)
        if finding is not None:
            place = Place(sentence.path, sentence.line)
            findings[place].append(finding)
            texts.setdefault(place, sentence.text)
    return tuple(_row(place, texts[place], findings[place]) for place in sorted(findings))


def _linked(applied: Applied) -> Settings | None:
    """The settings under which sentences linked to a record are judged; `None` where they are not."""
    settings = applied.rules.get(_NAME)
    return settings if isinstance(settings, Settings) and settings.linked else None


def _finding(on: Grounds, row: int, sentence: Sentence, words: Sequence[Wording]) -> Finding | None:
    from gatecheck.rules.allowed_words import not_allowed  # noqa: PLC0415  # loaded where the rule is on alone

    short, undecided = not_allowed(on, row, words)
    said = _said(f"The sentence linked to {sentence.record_id}", on, row, short, undecided)
    if said is None:
        return None
    enforce = on.table.applied[row].rules[_NAME].enforce
    outcome: Outcome = "short" if short else "undecided"
    return Finding(_NAME, outcome, enforce, message=said.message, remedy=said.remedy)


def _row(place: Place, text: str, findings: Sequence[Finding]) -> Judged:
    return Judged(
        kind="text",
        id=str(place),
        at=place,
        claim=None,
        result=f"the text {_quoted(text)}",
        evidence=None,
        findings=tuple(findings),
    )


RULE = Rule(
    name=_NAME,
    asks="a claim says no more in words than the evidence in its record allows",
    settings=Settings,
    judge=judge,
    explain=explain,
    concerns=every_claim,
    reads=("claim",),
)
