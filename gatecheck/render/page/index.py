"""Where plans, looks, families and waivers matter: for each the records that it concerns, with the way to them."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from gatecheck.model.verdict import Finding, Judged
from gatecheck.render import order, words
from gatecheck.render.page.wording import said

_BY_RULES = (
    ("Differences from the plan", "held to a plan", {"registered", "all-promised-reported"}),
    ("Interim looks", "judged for interim looks", {"looks"}),
    ("Families of tests", "judged in a family", {"family"}),
)
_NOT_MET = {"short", "undecided", "waived"}
_ASKED = {"met", *_NOT_MET}


def index(shown: Sequence[Judged]) -> str:
    """Return the entries for the records in the order of the page."""
    entries = [(title, _of_rules(shown, rules, what)) for title, what, rules in _BY_RULES]
    entries += [
        ("Waivers", _told(shown, order.waived_findings, "Nothing is waived.")),
        ("Noted without effect", _told(shown, order.noted_findings, "Nothing is noted.")),
    ]
    rows = "".join(f"<dt>{title}</dt><dd>{told}</dd>\n" for title, told in entries)
    return (
        '<section aria-labelledby="index">\n<h2 id="index">Plans, looks, families and waivers</h2>\n'
        f'<dl class="index">\n{rows}</dl>\n</section>\n'
    )


def _of_rules(shown: Sequence[Judged], rules: set[str], what: str) -> str:
    def not_met(one: Judged) -> list[Finding]:
        return order.by_rule(each for each in one.findings if each.rule in rules and each.outcome in _NOT_MET)

    asked = sum(any(each.rule in rules and each.outcome in _ASKED for each in one.findings) for one in shown)
    if not asked:
        return f"No record was {what}."
    held = words.count(asked, f"record was {what}", f"records were {what}")
    return f"{held}. {_told(shown, not_met, 'All is met.')}"


def _told(shown: Sequence[Judged], found: Callable[[Judged], list[Finding]], nothing: str) -> str:
    links: dict[str, list[str]] = {}
    for number, one in enumerate(shown):
        for finding in found(one):
            links.setdefault(_outcome(finding), []).append(f'<a href="#c{number}">{said(one.id)}</a>')
    listed = "".join(f"<li>{said(outcome)}: {', '.join(each)}.</li>" for outcome, each in links.items())
    return f"<ul>{listed}</ul>" if links else nothing


def _outcome(finding: Finding) -> str:
    return f"{words.rule_words(finding.rule)}, {words.outcome_words(finding)}"
