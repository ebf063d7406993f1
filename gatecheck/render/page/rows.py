"""What is known of a record as terms with what is told of each."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping, Sequence

from gatecheck.model.interval_shown import IntervalShown
from gatecheck.model.shown import decimal, percent
from gatecheck.model.verdict import Figures, Finding, Judged
from gatecheck.render import order, words
from gatecheck.render.page.interval_plot import band
from gatecheck.render.page.notes import MANY, Notes
from gatecheck.render.page.wording import cleaned, said

Rows = Mapping[str, str]

#: The terms in their order, with what is told where the records have one in common and this record has none; what
#: is empty belongs to each record alone.
_WITHOUT = {
    "Result": "",
    "Weighed": "no.",
    "Likelihood ratio": "",
    "Risk allowed": "no limit.",
    "Prior needed": "",
    "Remark": "",
    "Too small to matter": "not told.",
    "Place": "",
    "Met": "nothing.",
    "Does not apply": "nothing.",
}


def rows_of(one: Judged, notes: Notes) -> Rows:
    """Return what the page tells of a record by its term."""
    rows = {} if one.claim is None else {"Result": said(words.sentence(one.result))}
    if one.evidence is not None:
        rows.update(_evidence(one, one.evidence, notes))
    if one.interval is not None:
        rows.update(_too_small(one.interval))
    rows["Place"] = f"{said(words.places(one))}."
    rows.update(_other_rules(one))
    return rows


def common(records: Sequence[Rows]) -> Rows:
    """Return what more than half of the records, and many, tell word for word under a term."""
    found = {}
    for term in filter(_WITHOUT.get, _WITHOUT):
        (told, times), *_ = Counter(rows.get(term, "") for rows in records).most_common(1) or [("", 0)]
        if told and times >= MANY and 2 * times > len(records):
            found[term] = told
    return found


def own(rows: Rows, shared: Rows) -> list[tuple[str, str]]:
    """Return what a record tells other than what the records have in common, in the order of the terms."""
    told = {term: rows.get(term) or (shared.get(term) and without) for term, without in _WITHOUT.items()}
    return [(term, each) for term, each in told.items() if each and each != shared.get(term)]


def _evidence(one: Judged, figures: Figures, notes: Notes) -> Iterator[tuple[str, str]]:
    mark = notes.mark(cleaned(figures.note))
    yield "Weighed", f"{said(words.assumptions(figures))}{mark}."
    yield "Likelihood ratio", f"{said(words.likelihood_ratio(figures.log_likelihood_ratio))}."
    limit = words.limit_of(one, words.RISK_RULE)
    if limit is not None:
        yield "Risk allowed", f"up to {said(percent(limit, limit))}."
    needed = words.limit_of(one, words.PRIOR_RULE)
    allowed = "" if needed is None else f"; allowed up to {said(percent(needed, needed))}"
    yield "Prior needed", f"{said(words.probability(figures.prior_needed, needed))}{allowed}."
    if figures.note and not mark:
        yield "Remark", _sentence(figures.note)


def _sentence(note: str) -> str:
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
