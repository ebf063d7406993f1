"""What the page's own program works on: numbers and templates of drawings, and no text from outside."""

from __future__ import annotations

import json
import math
from collections.abc import Iterator, Sequence
from dataclasses import replace

from gatecheck.model.verdict import Finding, Judged, Standing
from gatecheck.render import words
from gatecheck.render.page.claim import drawings
from gatecheck.render.page.interval_plot import INTERVAL, LABEL, TICK, VIEW
from gatecheck.render.page.risk_plot import RISK, Axes
from gatecheck.render.text import script_data

#: The order in which they are counted, which `page.js` knows too.
STANDINGS: tuple[Standing, ...] = ("falls-short", "undecided", "waived", "stands")
_NOT_MET = {"short", "undecided", "waived"}
_JUDGED = {"met", "short", "waived"}

_Weighed = list[float | int | None]


def rules_not_met(one: Judged) -> list[str]:
    """Return the rules that the record is short of, waived or not, or that cannot be decided for it."""
    return sorted({each.rule for each in one.findings if each.outcome in _NOT_MET and each.enforce != "off"})


def folders(judged: Sequence[Judged]) -> list[str]:
    """Return every folder in which a record lies, at any depth, sorted."""
    return sorted({folder for one in judged for folder in _above(one.at.path)})


def embedded(judged: Sequence[Judged], axes: Axes, drawn: int) -> str:
    """Return, for the records in the order of the page, what the slider and the filter need, as JSON.

    Those from number `drawn` on are drawn when they are opened.
    `parents` gives for each of the `folders` the number of the one in which it lies, and -1 for one at the top.
    Each of `claims` holds its standing, its folder (-1: none), the numbers of the rules not met, 1 where it claims
    something, and what was weighed or null: the log likelihood ratio, the limit of the risk, 1 where that decides,
    1 where being above it is waived, and the standing that all other rules leave; then what fills the `templates`
    of its drawings, where it is not drawn yet.
    """
    places = folders(judged)
    rule_numbers = _numbered(sorted({rule for one in judged for rule in rules_not_met(one)}))
    folder_numbers = _numbered(places)
    whole = {
        "parents": [folder_numbers.get(_parent(folder), -1) for folder in places],
        "claims": [
            [
                STANDINGS.index(one.standing),
                folder_numbers.get(_parent(one.at.path), -1),
                [rule_numbers[rule] for rule in rules_not_met(one)],
                int(one.claim is not None),
                _weighed(one),
                *(drawings(one, axes) if number >= drawn else ()),
            ]
            for number, one in enumerate(judged)
        ],
        "templates": {"risk": RISK, "view": VIEW, "interval": INTERVAL, "tick": TICK, "label": LABEL},
    }
    return script_data(json.dumps(whole, separators=(",", ":"), allow_nan=False))


def is_weighed(one: Judged) -> bool:
    """Whether a record has a risk that can be told at another prior."""
    return _log_ratio(one) is not None


def _log_ratio(one: Judged) -> float | None:
    figures = one.evidence
    if figures is None or figures.false_positive_risk is None or figures.log_likelihood_ratio is None:
        return None
    ratio = float(figures.log_likelihood_ratio)
    return ratio if math.isfinite(ratio) else None


def _weighed(one: Judged) -> _Weighed | None:
    ratio = _log_ratio(one)
    if ratio is None:
        return None
    limit = words.limit_of(one, words.RISK_RULE)
    limit = limit if limit is not None and math.isfinite(limit) else None
    found = [each for each in one.findings if each.rule == words.RISK_RULE]
    others = replace(one, findings=tuple(each for each in one.findings if each.rule != words.RISK_RULE))
    return [
        ratio,
        limit,
        int(limit is not None and any(map(_decides, found))),
        int(any(each.outcome == "waived" for each in found)),
        STANDINGS.index(others.standing),
    ]


def _decides(finding: Finding) -> bool:
    return finding.outcome in _JUDGED and finding.enforce == "block"


def _numbered(names: Sequence[str]) -> dict[str, int]:
    return {name: number for number, name in enumerate(names)}


def _parent(path: str) -> str:
    return path.rpartition("/")[0]


def _above(path: str) -> Iterator[str]:
    while path := _parent(path):
        yield path
