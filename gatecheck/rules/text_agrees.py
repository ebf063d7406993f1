"""Rule `text-agrees`: prose says what the records say.

Prose says what the records say. It judges text in Markdown, Markdown cells of notebooks, Quarto and R Markdown,
LaTeX and reStructuredText (`include` and `exclude` say where), and it is off unless the policy names it. A
**link** is a comment, invisible when rendered, that ties the number before it to a field of a record, or the
sentence before it to the record's claim:

```
Yield rose by 3.3 g <!-- gatecheck: yield/spring estimate.value --> in spring.
<!-- gatecheck: yield/spring claim -->
```

In LaTeX it is `% gatecheck: ID FIELD` up to the end of the line, in reStructuredText `.. gatecheck: ID FIELD` as
a block below the paragraph.

A field is a path in the record, such as `test.p`, `estimate.interval.low`, `sample.groups[0].mean`, or `risk` and
`prior-needed`, as the gate computes them. Where several links stand together, they tie the last numbers before
them, in order. A linked number falls short where the record's cannot be rounded to it: 3.3 may stand for 3.28, 25
% for 0.25, and `< .001` for all below. `gatecheck refresh` shows how the text would change, and with `--write` it
does. The statistics of a linked sentence are held against its record too.

Statistics without a link are recognised as they are usually written (t, F, χ², z, r with their p, intervals with
their level, percentages with counts) and looked for among the records; what none has is listed with the nearest,
and blocks with `unlinked: block` (`note` unless the policy says otherwise, or `off`). A percentage that is not
that of its own counts is listed as well. A sentence that calls a result confirmed or registered whose record is
not confirmatory is said. Code, comments, addresses and lists of references are left alone, and so are the results
of others in a sentence that cites them and speaks of no own work; a cell of a table is read like other text, a bare
number in it only where it has a link. A link that leads nowhere, and a file that is no UTF-8, cannot be judged.

> The text says 3.8 for estimate.value of yield/spring, and the record says 3.3; the policy wants the record's
> number within the digits shown. Write 3.3; `gatecheck refresh --write` does so for every link.

Common practice, no source.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import KW_ONLY
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any, cast

from gatecheck.compare.names import shown
from gatecheck.model.found import Found
from gatecheck.model.marks import OneOrMore
from gatecheck.model.record import Text
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Enforce, Finding, Judged, Place, Problem
from gatecheck.policy import Globs, Policy, RuleSettings
from gatecheck.rules.rule import Said, rule_beyond_records

if TYPE_CHECKING:
    from gatecheck.prose import agree

_NAME = "text-agrees"
_ASKS = "prose says what the records say"
#: Where prose is looked for unless the policy says otherwise.
PROSE: tuple[str, ...] = ("**/*.md", "**/*.qmd", "**/*.Rmd", "**/*.tex", "**/*.rst", "**/*.ipynb")
#: Figures that links may name and that are computed, to be shown with few digits.
_COMPUTED = {"risk", "prior-needed"}


@struct
class Settings(RuleSettings):
    """Which files are prose, and what a statistic without a link means."""

    _: KW_ONLY
    include: Annotated[Globs, "globs of the files of prose"] = PROSE
    exclude: Annotated[tuple[Text, ...], OneOrMore(least=0), "globs of the files to leave out"] = ()
    unlinked: Annotated[
        Enforce, "statistics without a link that no record has: block, note (they are listed) or off"
    ] = "note"


def settings_in(policy: Policy) -> Settings | None:
    """Return how `policy` judges prose, or `None` where it does not name the rule or has it off."""
    return cast("Settings | None", policy.in_general.rules.get(_NAME))


def judge_prose(
    root: Path,
    found: Sequence[Found],
    settings: Settings | None,
    revision: str | None = None,
    judged: Sequence[Judged] = (),
) -> tuple[tuple[Judged, ...], tuple[Problem, ...]]:
    """Return a row for each line of prose below `root` that does not agree with the records `found`.

    The row's id is the path with the line, it claims nothing, and it has a finding for each disagreement. The
    problems are links that lead nowhere and files that cannot be read. With `revision` the prose is that of this
    commit. `judged` gives the figures of evidence that links may name. `settings` is `None` where the rule is off.

    Raises
    ------
    CannotJudge
        `root` is no folder, git fails, or the revision is not known.
    """
    if settings is None:
        return (), ()
    from gatecheck.prose.agree import held_against  # noqa: PLC0415  # loaded where the rule is on alone
    from gatecheck.prose.fields import subjects  # noqa: PLC0415  # the same
    from gatecheck.prose.reading import read_prose  # noqa: PLC0415  # the same

    prose = read_prose(root, settings.include, settings.exclude, revision)
    known = subjects([one.record for one in found], judged)
    facts = held_against(prose.passages, known, unlinked=settings.unlinked != "off")
    rows: dict[Place, list[agree.Fact]] = {}
    for fact in facts.facts:
        rows.setdefault(Place(fact.passage.file.path, fact.passage.line(fact.at)), []).append(fact)
    judged_rows = tuple(_row(place, rows[place], settings) for place in sorted(rows))
    return judged_rows, (*prose.problems, *facts.problems)


def _row(place: Place, facts: Sequence[agree.Fact], settings: Settings) -> Judged:
    from gatecheck.prose.sentences import sentence_at  # noqa: PLC0415  # loaded where something disagrees alone

    passage, at = facts[0].passage, facts[0].at
    start, end = sentence_at(passage.visible, at)
    cell = "" if passage.cell is None else f"cell {passage.cell}, "
    return Judged(
        kind="text",
        id=str(place),
        at=place,
        claim=None,
        result=f"{cell}the text “{shown(passage.visible[start:end])}”",
        evidence=None,
        findings=tuple(_finding(fact, settings) for fact in facts),
    )


def _finding(fact: agree.Fact, settings: Settings) -> Finding:
    enforce = settings.enforce
    if not fact.linked and settings.unlinked == "note":
        enforce = "note"
    said = _SAY[type(fact.what).__name__](fact, fact.what)
    return Finding(_NAME, "short", enforce, message=said.message, remedy=said.remedy)


def _say_number(_: agree.Fact, what: agree.NumberDiffers) -> Said:
    field, record = what.link.field, what.link.record
    recorded = f"{what.recorded.value:.4g}" if field in _COMPUTED else what.recorded.shown
    message = (
        f"The text says {what.number.told} for {field} of {record}, and the record says {recorded}; the policy "
        "wants the record's number within the digits shown."
    )
    if what.anew is None:
        return Said(message, f"Write {recorded} by hand: it cannot be written in the digits that are shown.")
    sign = " %" if what.number.percent else ""
    return Said(message, f"Write {what.anew}{sign}; `gatecheck refresh --write` does so for every link.")


def _say_nothing_claimed(_: agree.Fact, what: agree.NothingClaimed) -> Said:
    return Said(
        f"The sentence is linked to the claim of {what.record.id}, and that record claims nothing.",
        "Link the record that claims it, or link the numbers of the sentence instead.",
    )


def _say_confirmed(_: agree.Fact, what: agree.CalledConfirmed) -> Said:
    return Said(
        f"The text calls the result of {what.record.id} “{what.word}”, and its record is {what.record.status}; the "
        "policy wants this said of confirmatory results alone.",
        f"Say that the result is {what.record.status}, or link the record that confirms it.",
    )


def _say_statistic(fact: agree.Fact, what: agree.StatisticDiffers) -> Said:
    told = shown(fact.passage.visible[what.statistic.start : what.statistic.end])
    if what.nearest is None:
        return Said(
            f"No record has {told}, which the text says; the policy wants statistics that records stand behind.",
            "Emit a record of this result, correct the text, or leave out files that quote the results of others.",
        )
    record = what.nearest.record.id
    differ = ", ".join(f"{each.figure} {each.recorded} (not {each.shown})" for each in what.nearest.differences)
    if fact.linked:
        message = f"The text says {told}, and {record}, to which it is linked, has {differ}"
    else:
        message = f"The text says {told}, and no record has all of it: the nearest, {record}, has {differ}"
    remedy = "Write the figures of the record, or link the record that is meant."
    return Said(f"{message}; the policy wants the record's figures.", remedy)


def _say_share(_: agree.Fact, what: agree.ShareDiffers) -> Said:
    share = what.share
    digits = max(0, -share.percent.unit.adjusted()) + 1
    return Said(
        f"The text says {share.percent.text} % for {share.part} of {share.whole}, which is "
        f"{100 * share.part / share.whole:.{digits}f} %; the policy wants figures that fit together.",
        "Correct the percentage or the counts.",
    )


#: How each kind of fact is told.
_SAY: dict[str, Callable[[agree.Fact, Any], Said]] = {
    "NumberDiffers": _say_number,
    "NothingClaimed": _say_nothing_claimed,
    "CalledConfirmed": _say_confirmed,
    "StatisticDiffers": _say_statistic,
    "ShareDiffers": _say_share,
}


RULE = rule_beyond_records(_NAME, _ASKS, Settings, "prose")
