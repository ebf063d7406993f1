"""The slider and the filter: hidden until the page's own program is there to answer them."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Sequence

from gatecheck.model.verdict import Judged
from gatecheck.render import words
from gatecheck.render.page.numbers import STANDINGS, folders, is_weighed, rules_not_met
from gatecheck.render.page.wording import said

_USUAL_PRIOR = 0.5
_LEAST, _MOST = 0.01, 0.99
_STANDING_WORDS = {
    "falls-short": "short of the policy",
    "undecided": "undecided",
    "waived": "waived",
    "stands": "standing",
}


def tools(shown: Sequence[Judged]) -> str:
    """Return the slider where a risk was weighed, and the filter, for the records in the order of the page."""
    if not shown:
        return ""
    slider = _slider(shown) if any(map(is_weighed, shown)) else ""
    return (
        '<section id="tools" aria-labelledby="asking" hidden>\n<h2 id="asking">Ask the figures</h2>\n'
        f"{slider}{_filter(shown)}</section>\n"
    )


def _slider(shown: Sequence[Judged]) -> str:
    prior = f'min="{_LEAST}" max="{_MOST}" value="{_common_prior(shown):g}"'
    return (
        "<fieldset><legend>What if the prior were another one?</legend>\n"
        f'<p><label>Prior <input type="range" id="slide" {prior} step="0.01"></label>\n'
        f'<label>in numbers <input type="number" id="prior" {prior} step="any"></label>\n'
        '<button type="button" id="as-judged">As judged</button></p>\n'
        '<output id="told" for="slide prior">All figures stand as they were judged.</output>\n</fieldset>\n'
    )


def _common_prior(shown: Iterable[Judged]) -> float:
    """The prior of most records, to the step of the slider."""
    priors = Counter(one.evidence.prior for one in shown if is_weighed(one) and one.evidence is not None)
    ranked = sorted((-times, prior) for prior, times in priors.items() if prior is not None)
    prior = ranked[0][1] if ranked else _USUAL_PRIOR
    return max(_LEAST, min(_MOST, round(prior, 2)))


def _filter(shown: Sequence[Judged]) -> str:
    standings = Counter(one.standing for one in shown)
    rules = Counter(rule for one in shown for rule in rules_not_met(one))
    by_standing = [
        (number, f"{_STANDING_WORDS[each]} ({standings[each]})")
        for number, each in enumerate(STANDINGS)
        if standings[each]
    ]
    by_rule = [(number, f"{words.rule_words(rule)} ({rules[rule]})") for number, rule in enumerate(sorted(rules))]
    by_folder = list(enumerate(folders(shown)))
    return (
        "<fieldset><legend>Show only</legend>\n<p>"
        f"{_select('standing', 'Verdict', by_standing)}{_select('rule', 'Rule not met', by_rule)}"
        f"{_select('folder', 'Folder', by_folder)}"
        '<button type="button" id="all">Show all</button></p>\n'
        f'<output id="count">Shown: {len(shown)} of {len(shown)}.</output>\n</fieldset>\n'
    )


def _select(name: str, label: str, options: Sequence[tuple[int, str]]) -> str:
    listed = "".join(f'<option value="{number}">{said(told)}</option>' for number, told in options)
    return f'<label>{label} <select id="by-{name}"><option value="">any</option>{listed}</select></label>\n'
