"""What records a tree holds, and all that was found of one of them, as plain text."""

from __future__ import annotations

from collections.abc import Sequence

from gatecheck.model.found import Found, Scan
from gatecheck.model.verdict import Figures, Finding, Judged, Verdict
from gatecheck.render import order, words
from gatecheck.render.curve import risk_against_prior
from gatecheck.render.layout import BLANK_LINE, finding, item, labelled, page, paragraph, problem, section, strong

_STANDINGS = {
    "stands": "stands",
    "falls-short": "falls short of the policy",
    "waived": "is short of the policy, and waived",
    "undecided": "cannot be decided",
}


def survey(scan: Scan, width: int, *, bold: bool = False) -> str:
    """Return counts, the records by place, and what could not be read with what to do about it.

    With `bold` the counts and the ids of records are in bold type.
    """
    claiming = sum(found.record.claim is not None for found in scan.found)
    problems = order.problems_by_place(scan.problems)
    head = [
        f"{words.count(len(scan.found), 'record')} in {words.count(scan.files, 'file')}",
        words.count(claiming, "claims something", "claim something"),
        words.count(len(problems), "problem"),
    ]
    found = sorted(scan.found, key=lambda one: (order.place_key(one.at), one.record.id))
    return page(
        [
            strong(paragraph(f"{'; '.join(head)}.", width), bold=bold),
            section("Records", [_found(one, width, bold) for one in found], BLANK_LINE),
            section("Could not be read", [problem(one, width) for one in problems], BLANK_LINE),
        ],
    )


def _found(found: Found, width: int, bold: bool) -> str:
    record = found.record
    also = "".join(f"; also in {words.where(place)}" for place in sorted(found.also_at, key=order.place_key))
    return "\n".join(
        [
            strong(item(record.id, width), bold=bold),
            labelled("Status", f"{record.status}, {record.role} outcome", width),
            labelled("Claim", record.claim or "nothing claimed", width),
            labelled("Place", words.where(found.at) + also, width),
        ],
    )


def explain(verdict: Verdict, record_id: str, width: int, *, bold: bool = False) -> str:
    """Return everything found of the records with that id, or a sentence where there is none.

    With `bold` the verdict on each is in bold type.
    """
    chosen = [one for one in order.by_place(verdict.judged) if one.id == record_id]
    if not chosen:
        missing = f"No record has the id {record_id}. The survey of this tree lists the ids that there are."
        return page([paragraph(missing, width)])
    parts = [part for one in chosen for part in _explained(one, width, bold)]
    closing = [paragraph(words.CAUTION, width), paragraph(words.policy_used(verdict.policy), width)]
    return page([*parts, *closing])


def _explained(one: Judged, width: int, bold: bool) -> list[str]:
    unchanged = "" if one.counts_now else " It is unchanged, and does not count now."
    identity = [
        labelled("Claim", one.claim or "nothing claimed", width),
        labelled("Result", one.result, width),
        labelled("Place", words.places(one), width),
    ]
    evidence = [] if one.evidence is None else [_figures(one, one.evidence, width)]
    other = [_figures(one, figures, width) for figures in one.alternatives]
    findings = sorted(order.by_rule(one.findings), key=order.outcome_rank)
    return [
        strong(paragraph(f"{one.id} {_STANDINGS[one.standing]}.{unchanged}", width), bold=bold),
        "\n".join(line for line in identity if line),
        section("Evidence", evidence or [item("None was computed for this record.", width)]),
        section("The same result under other assumptions", other, BLANK_LINE),
        section("Risk against prior", [] if one.sensitivity is None else risk_against_prior(one.sensitivity)),
        section("Rules", [_finding(finding, width) for finding in findings], BLANK_LINE),
        section("Digests, for a waiver", _digests(findings, width)),
    ]


def _digests(findings: Sequence[Finding], width: int) -> list[str]:
    """What a waiver of each rule rests on, said once for the rules that rest on the same."""
    rules: dict[str, list[str]] = {}
    for one in findings:
        if one.digest:
            rules.setdefault(one.digest, []).append(one.rule)
    return [item(f"{', '.join(dict.fromkeys(names))}: {digest}", width) for digest, names in rules.items()]


def _figures(one: Judged, figures: Figures, width: int) -> str:
    risk = words.probability(figures.false_positive_risk, words.limit_of(one, words.RISK_RULE))
    needed = words.probability(figures.prior_needed, words.limit_of(one, words.PRIOR_RULE))
    assumed = words.assumptions(figures)
    lines = [
        item(f"{_capital(assumed)}:", width),
        labelled("Ratio", f"likelihood ratio {words.likelihood_ratio(figures.log_likelihood_ratio)}", width),
        labelled("Risk", f"false positive risk {risk}; prior needed {needed}", width),
        labelled("Note", _capital(figures.note), width) if figures.note else "",
        labelled("Source", words.source(figures), width),
    ]
    return "\n".join(line for line in lines if line)


def _capital(text: str) -> str:
    return f"{text[:1].upper()}{text[1:]}"


def _finding(one: Finding, width: int) -> str:
    outcome = item(f"{words.rule_words(one.rule)} ({one.rule}): {words.outcome_words(one)}.", width)
    if not (one.message or one.remedy):
        return outcome
    return f"{outcome}\n{finding(words.message(one), one.remedy, width)}"
