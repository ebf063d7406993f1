"""The verdict as plain text for a person at a terminal, or in a build log."""

from __future__ import annotations

from functools import partial

from gatecheck.model.verdict import Judged, Verdict
from gatecheck.render import order, words
from gatecheck.render.layout import (
    BLANK_LINE,
    TWO_BLANK_LINES,
    entry,
    finding,
    item,
    labelled,
    page,
    paragraph,
    problem,
    section,
    strong,
)

_NAMED = 5


def account(verdict: Verdict, width: int, *, bold: bool = False) -> str:
    """Return the verdict in words, then what keeps it from standing, then the rest, then what was not checked.

    With `bold` the headline and the ids of records are in bold type.
    """
    held, compact = partial(_held, width=width, bold=bold), partial(_compact, width=width, bold=bold)
    short = [held(one) for one in order.blocked(verdict) if one.standing == "falls-short"]
    undecided = [held(one) for one in order.blocked(verdict) if one.standing == "undecided"]
    unchanged = [compact(one) for one in order.blocked(verdict, counting=False)]
    problems = [problem(one, width) for one in order.problems_by_place(verdict.problems)]
    return page(
        [
            strong(paragraph(words.headline(verdict), width), bold=bold),
            paragraph(words.changes_in_brief(verdict), width),
            section("Could not be read or judged", problems, BLANK_LINE),
            section("Short of the policy", short, TWO_BLANK_LINES),
            section("Undecided", undecided, TWO_BLANK_LINES),
            section("Changed since the base", [item(words.change(one), width) for one in order.changes(verdict)]),
            section("Waived", [_waived(one, width, bold) for one in order.with_waiver(verdict)]),
            section("Noted, without effect on the verdict", _noted(verdict, width, bold)),
            section("Short or undecided, but unchanged", unchanged),
            section("Standing", [compact(one) for one in order.standing(verdict)]),
            paragraph(_without_claim(verdict), width),
            *(paragraph(f"Note: {words.sentence(note)}", width) for note in verdict.notes),
            paragraph(words.NOT_CHECKED, width),
            paragraph(words.CAUTION, width),
            paragraph(words.policy_used(verdict.policy), width),
            paragraph(words.judged_commits(verdict), width),
        ],
    )


def _held(one: Judged, width: int, bold: bool) -> str:
    identity = [
        strong(item(one.id, width), bold=bold),
        labelled("Claim", words.what_is_claimed(one), width),
        labelled("Result", one.result, width),
        labelled("Place", words.places(one), width),
    ]
    findings = [finding(words.found(found), found.remedy, width) for found in order.blocking_findings(one)]
    return BLANK_LINE.join(["\n".join(line for line in identity if line), *findings])


def _waived(one: Judged, width: int, bold: bool) -> str:
    return entry(one.id, map(words.found, order.waived_findings(one)), width, bold=bold)


def _noted(verdict: Verdict, width: int, bold: bool) -> list[str]:
    noted = ((one, order.noted_findings(one)) for one in order.by_place(verdict.judged))
    return [entry(one.id, map(words.found, findings), width, bold=bold) for one, findings in noted if findings]


def _compact(one: Judged, width: int, bold: bool) -> str:
    return entry(one.id, [words.result(one)], width, bold=bold)


def _without_claim(verdict: Verdict) -> str:
    reported = order.without_claim(verdict)
    if not reported:
        return ""
    named = ", ".join(one.id for one in reported[:_NAMED])
    more = f" and {len(reported) - _NAMED} more" if len(reported) > _NAMED else ""
    return f"Reported without a claim: {words.count(len(reported), 'result')} ({named}{more})."
