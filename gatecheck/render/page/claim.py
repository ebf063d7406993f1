"""One record in the page: what it claims, why it does not stand, on what its figures rest, and its plots."""

from __future__ import annotations

from collections.abc import Sequence

from gatecheck.model.verdict import Judged
from gatecheck.render import words
from gatecheck.render.page.drawing import Drawing, filled
from gatecheck.render.page.findings import Group, Told
from gatecheck.render.page.interval_plot import interval_drawing, interval_plot
from gatecheck.render.page.notes import Notes
from gatecheck.render.page.risk_plot import RISK, Axes, risk_drawing
from gatecheck.render.page.shared import Shared
from gatecheck.render.page.wording import said
from gatecheck.render.text import html

_STANDINGS = {
    "stands": "stands",
    "falls-short": "short of the policy",
    "waived": "short of the policy, and waived",
    "undecided": "cannot be decided",
}


def claim(one: Judged, number: int, shared: Shared, *, in_full: bool, drawn: bool) -> str:
    """Return the record `number` of the page: unfolded `in_full`, or folded to its claim, verdict and risk.

    One that is not `drawn` gets its drawings from the page's own program, once it is open.
    """
    title = said(words.sentence(one.result if one.claim is None else one.claim))
    plots = _plots(one, shared.axes) if drawn else ""
    findings = _findings(shared.findings[number], shared.notes)
    body = f"{findings}{plots}{_listed(shared.rows[number], in_full=in_full)}"
    return (
        f'<details class="claim" id="c{number}"{" open" if in_full else ""}><summary><h3>{title}</h3>'
        f"<code>{said(one.id)}</code>: {_standing(one)}.{_risk(one)}</summary>{body}</details>\n"
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


def _findings(groups: Sequence[Group], notes: Notes) -> str:
    return "".join(
        (f"<h4>{group.title}</h4>" if group.title else "") + "".join(_told(each, notes) for each in group.told)
        for group in groups
    )


def _told(finding: Told, notes: Notes) -> str:
    mended = f" <i>To mend:</i> {notes.told(finding.remedy)}" if finding.remedy else ""
    return f"<p><b>{said(finding.rule)}.</b> {notes.told(finding.message)}{mended}</p>"


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


def _listed(rows: Sequence[tuple[str, str]], *, in_full: bool) -> str:
    """What is known of a record: as a list, or in a paragraph, of which a page can hold thousands."""
    if in_full:
        return f"<dl>{''.join(f'<dt>{term}<dd>{told}' for term, told in rows)}</dl>"
    return f"<p>{' '.join(f'{term}: {told}' for term, told in rows)}</p>"
