"""One record in the page: what it claims, why it does not stand, on what its figures rest, and its plots."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Sequence

from gatecheck.model.interval_shown import IntervalShown
from gatecheck.model.shown import decimal, percent
from gatecheck.model.verdict import Figures, Finding, Judged
from gatecheck.render import order, words
from gatecheck.render.page.drawing import Drawing, filled
from gatecheck.render.page.interval_plot import band, interval_drawing, interval_plot
from gatecheck.render.page.risk_plot import RISK, Axes, risk_drawing
from gatecheck.render.text import cut, html, plain

_LONGEST = 4000
_STANDINGS = {
    "stands": "stands",
    "falls-short": "short of the policy",
    "waived": "short of the policy, and waived",
    "undecided": "cannot be decided",
}


def said(text: str) -> str:
    """Return text from outside as it stands literally in the page; one without end is cut."""
    # A number stays with its unit.
    return html(cut(plain(text), _LONGEST)).replace(" %", "\u00a0%")


class Shared:
    """What the records of a page have in common and stands in it once: axes, and remarks on figures."""

    def __init__(self, judged: Sequence[Judged]) -> None:
        self.axes = Axes(judged)
        found = Counter(one.evidence.note for one in judged if one.evidence and one.evidence.note)
        self.remarks = [note for note, times in sorted(found.items()) if times > 1]
        self._numbers = {note: number for number, note in enumerate(self.remarks, 1)}

    def number_of(self, remark: str) -> int | None:
        """Return the number of a remark that several records share."""
        return self._numbers.get(remark)


def name_of(one: Judged) -> str:
    """Return what a record is told by among others: its id, as it stands in the page."""
    return f"<code>{said(one.id)}</code>"


def claim(one: Judged, number: int, shared: Shared, *, in_full: bool, drawn: bool) -> str:
    """Return the record `number` of the page: unfolded `in_full`, or folded to its claim, verdict and risk.

    One that is not `drawn` gets its drawings when it is opened.
    """
    title = said(words.sentence(one.result if one.claim is None else one.claim))
    plots = _plots(one, shared.axes) if drawn else ""
    body = f"{_findings(one)}{plots}{_figures(one, shared, in_full=in_full)}"
    return (
        f'<details class="claim" id="c{number}"{" open" if in_full else ""}><summary><h3>{title}</h3> '
        f"<span>{name_of(one)}: {_standing(one)}.{_risk(one)}</span></summary>{body}</details>\n"
    )


def _standing(one: Judged) -> str:
    told = _STANDINGS[one.standing]
    if one.claim is None and one.standing == "stands":
        told = "reported without a claim" if one.kind == "record" else "nothing blocks"
    return told if one.counts_now else f"{told}; unchanged, and not counted"


def _risk(one: Judged) -> str:
    """The risk with its prior, which the page recomputes at other ones."""
    figures = one.evidence
    if figures is None or figures.false_positive_risk is None:
        return ""
    value = said(words.probability(figures.false_positive_risk, words.limit_of(one, words.RISK_RULE)))
    own = " of its own" if figures.prior_from == "record" else ""
    return f" False positive risk <b>{value} at prior {html(words.prior(figures))}{own}</b>."


def _findings(one: Judged) -> str:
    groups = [
        ("Why it does not stand", order.blocking_findings(one)),
        ("Waived", order.waived_findings(one)),
        ("Noted, without effect on the verdict", order.noted_findings(one)),
    ]
    return "".join(f"<h4>{title}</h4>{_told(found)}" for title, found in groups if found)


def _told(findings: Sequence[Finding]) -> str:
    """What each finding says; a remedy that an earlier one tells already is not told twice."""
    texts, remedies = [], ""
    for finding in findings:
        new = finding.remedy if finding.remedy not in remedies else ""
        mended = f" <i>To mend:</i> {said(words.sentence(new))}" if new else ""
        texts.append(
            f"<p><b>{said(words.rule_words(finding.rule))}.</b> {said(words.message(finding))}{mended}</p>"
        )
        remedies += f"{finding.remedy} "
    return "".join(texts)


def drawings(one: Judged, axes: Axes) -> tuple[Drawing | None, list[Drawing] | None]:
    """Return what fills the templates of the two drawings of a record, where it has them."""
    return risk_drawing(one.evidence, axes.number_of(words.limit_of(one, words.RISK_RULE))), interval_drawing(
        one.interval
    )


def _plots(one: Judged, axes: Axes) -> str:
    """Both drawings; a reader who does not see them finds all their numbers in words."""
    risk, interval = drawings(one, axes)
    told = ("" if risk is None else filled(RISK, risk)) + ("" if interval is None else interval_plot(interval))
    return f'<div class="plots" aria-hidden="true">{told}</div>' if told else ""


def _figures(one: Judged, shared: Shared, *, in_full: bool) -> str:
    """What is known of a record: as a list, or in a paragraph, of which a page can hold thousands."""
    rows = [] if one.claim is None else [("Result", said(words.sentence(one.result)))]
    if one.evidence is not None:
        rows += _evidence(one, one.evidence, shared)
    rows += [] if one.interval is None else _too_small(one.interval)
    rows.append(("Place", f"{said(words.places(one))}."))
    rows += _other_rules(one)
    if in_full:
        return f"<dl>{''.join(f'<dt>{term}<dd>{told}' for term, told in rows)}</dl>"
    return f"<p>{' '.join(f'{term}: {told}' for term, told in rows)}</p>"


def _evidence(one: Judged, figures: Figures, shared: Shared) -> Iterator[tuple[str, str]]:
    weighed, remark = said(words.assumptions(figures)), shared.number_of(figures.note)
    yield "Weighed", f"{weighed}." if remark is None else f'<a href="#remark{remark}">{weighed}</a>.'
    yield "Likelihood ratio", f"{said(words.likelihood_ratio(figures.log_likelihood_ratio))}."
    limit = words.limit_of(one, words.RISK_RULE)
    if limit is not None:
        yield "Risk allowed", f"up to {said(percent(limit, limit))}."
    needed = words.limit_of(one, words.PRIOR_RULE)
    allowed = "" if needed is None else f"; allowed up to {said(percent(needed, needed))}"
    yield "Prior needed", f"{said(words.probability(figures.prior_needed, needed))}{allowed}."
    if figures.note and remark is None:
        yield "Remark", remark_told(figures.note)


def remark_told(note: str) -> str:
    """Return a remark on figures as a sentence."""
    told = words.sentence(note)
    return said(f"{told[:1].upper()}{told[1:]}")


def _too_small(shown: IntervalShown) -> Iterator[tuple[str, str]]:
    ends = band(shown)
    if ends is not None:
        low, high = map(decimal, sorted(ends))
        yield "Too small to matter", f"{said(low)} to {said(high)}, shaded."


def _other_rules(one: Judged) -> Iterator[tuple[str, str]]:
    """The rules that are met, and those that do not apply."""
    findings = order.by_rule(one.findings)
    met = [words.rule_words(each.rule).lower() for each in findings if each.outcome == "met"]
    not_applying = [_not_applying(each) for each in findings if each.outcome == "does-not-apply"]
    if met:
        yield "Met", f"{said(', '.join(met))}."
    if not_applying:
        yield "Does not apply", " ".join(not_applying)


def _not_applying(finding: Finding) -> str:
    because = f" ({finding.message})" if finding.message else ""
    return said(f"{words.rule_words(finding.rule).lower()}{because}.")
