"""The verdict as plain text for a person at a terminal, or in a build log."""

from __future__ import annotations

from functools import partial

from gatecheck.model.verdict import Judged, Verdict
from gatecheck.render import order, words
from gatecheck.render.layout import BLANK_LINE, finding, item, labelled, page, paragraph, problem, section

_NAMED = 5


def account(verdict: Verdict, width: int) -> str:
    """Return the verdict in words, then what keeps it from standing, then the rest, then what was not checked."""
    held = partial(_held, width=width)
    short = [held(one) for one in order.blocked(verdict) if one.standing == "falls-short"]
    undecided = [held(one) for one in order.blocked(verdict) if one.standing == "undecided"]
    unchanged = [_compact(one, width) for one in order.blocked(verdict, counting=False)]
    problems = [problem(one, width) for one in order.problems_by_place(verdict.problems)]
    return page(
        [
            paragraph(words.headline(verdict), width),
            section("Could not be read or judged", problems, BLANK_LINE),
            section("Short of the policy", short, BLANK_LINE),
            section("Undecided", undecided, BLANK_LINE),
            section("Waived", [_waived(one, width) for one in order.with_waiver(verdict)]),
            section("Noted, without effect on the verdict", _noted(verdict, width)),
            section("Short or undecided, but unchanged", unchanged),
            section("Standing", [_compact(one, width) for one in order.standing(verdict)]),
            paragraph(_without_claim(verdict), width),
            *(paragraph(f"Note: {words.sentence(note)}", width) for note in verdict.notes),
            paragraph(words.NOT_CHECKED, width),
            paragraph(words.CAUTION, width),
            paragraph(words.policy_used(verdict.policy), width),
        ],
    )


def _held(one: Judged, width: int) -> str:
    identity = [
        item(one.id, width),
        labelled("Claim", one.claim or words.NO_CLAIM, width),
        labelled("Result", one.result, width),
        labelled("Place", words.places(one), width),
    ]
    findings = [finding(words.found(found), found.remedy, width) for found in order.blocking_findings(one)]
    return BLANK_LINE.join(["\n".join(line for line in identity if line), *findings])


def _waived(one: Judged, width: int) -> str:
    return item(f"{one.id}: {' '.join(words.found(found) for found in order.waived_findings(one))}", width)


def _noted(verdict: Verdict, width: int) -> list[str]:
    return [
        item(f"{one.id}: {words.found(found)}", width)
        for one in order.by_place(verdict.judged)
        for found in order.noted_findings(one)
    ]


def _compact(one: Judged, width: int) -> str:
    return item(f"{one.id}: {words.result(one)}", width)


def _without_claim(verdict: Verdict) -> str:
    reported = order.without_claim(verdict)
    if not reported:
        return ""
    named = ", ".join(one.id for one in reported[:_NAMED])
    more = f" and {len(reported) - _NAMED} more" if len(reported) > _NAMED else ""
    return f"Reported without a claim: {words.count(len(reported), 'result')} ({named}{more})."
