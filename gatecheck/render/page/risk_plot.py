"""The risk of one result against the prior, as a small vector drawing.

The prior stands on the scale of its log odds and the risk on that of its logarithm, so that the curve of every
result has one shape, moved along by its log likelihood ratio: it stands in the page once. All numbers in a drawing
also stand in words beside it; its coordinates are whole numbers of half a pixel or so, as a page may hold many.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from typing import TypeGuard

from gatecheck.model.shown import percent
from gatecheck.model.verdict import Figures, Judged
from gatecheck.render.page.drawing import NOTHING, Drawing
from gatecheck.render.text import html
from gatecheck.render.words import RISK_RULE, limit_of

#: The box of the drawing, which `page.js` knows too: priors from 1 % to 99 %, risks from 100 % down to 0.1 %.
LEFT, RIGHT, TOP, BOTTOM = 94, 536, 20, 272
_MOST_LOG_ODDS = math.log(99)
_DECADES = 3
_PRIORS = (0.01, 0.1, 0.5, 0.9, 0.99)
#: Log odds of an effect at which the curve bends; beyond them it is straight, until it runs along the edge.
_BENDS = (-6.0, -4.0, -2.8, -2.0, -1.4, -0.9, -0.45, 0.0, 0.45, 0.9, 1.4, 2.0, 2.8, 4.0, math.log(10**_DECADES - 1))
#: A log likelihood ratio beyond this one leaves but an edge of the curve to be seen, whatever it is.
_MOST_LOG_LR = 12.0
_BEYOND = 700.0


class Axes:
    """The axes of all drawings, a symbol for each limit that the policy sets for a risk."""

    def __init__(self, judged: Iterable[Judged]) -> None:
        limits = {limit_of(one, RISK_RULE) for one in judged if one.evidence is not None}
        self._numbers = {limit: number for number, limit in enumerate(sorted(filter(_is_finite, limits)), 1)}

    def number_of(self, limit: float | None) -> int:
        """Return the number of the axes with that limit; of those without one it is 0."""
        return 0 if limit is None else self._numbers.get(limit, 0)

    def drawn(self) -> str:
        """Return all axes, and the curve, as symbols, to be used by the drawings."""
        bare = _axes()
        curve = f'<symbol id="curve"><path class="c" d="{curve_path()}"/></symbol>'
        return f'{curve}<symbol id="a0">{bare}</symbol>' + "".join(
            f'<symbol id="a{number}">{bare}{_limit(limit)}</symbol>' for limit, number in self._numbers.items()
        )


def _axes() -> str:
    risks = [10.0**-decade for decade in range(_DECADES + 1)]
    grid = "".join(f"M{LEFT} {_y(risk)}H{RIGHT}" for risk in risks)
    levels = "".join(
        f'<text x="{LEFT - 10}" y="{_y(risk) + 8}" class="e">{100 * risk:g} %</text>' for risk in risks
    )
    priors = "".join(
        f'<text x="{_x(_log_odds(prior))}" y="{BOTTOM + 30}" class="m">{100 * prior:g} %</text>'
        for prior in _PRIORS
    )
    title = f'<text x="{(LEFT + RIGHT) // 2}" y="{BOTTOM + 62}" class="m">risk (upward) at each prior</text>'
    return f'<path class="g" d="{grid}"/>{levels}{priors}{title}'


def _limit(limit: float) -> str:
    y = _y(limit)
    told = html(percent(limit, limit))
    return f'<path class="l" d="M{LEFT} {y}H{RIGHT}"/><text x="{RIGHT + 8}" y="{y + 8}">{told}</text>'


#: Axes, the prior needed as a line and as a text, the curve within the box of priors, and the ring.
RISK = (
    '<svg viewBox="0 0 600 344"><use href="#a{0}"/><path class="n" d="{1}"/>'
    f'<text class="{{2}}" x="{{3}}" y="{BOTTOM - 8}">{{4}}</text>'
    f'<svg x="{LEFT}" width="{RIGHT - LEFT}"><use href="#curve" x="{{5}}"/></svg>'
    '<circle class="d" cx="{6}" cy="{7}" r="9"/></svg>'
)


def risk_drawing(figures: Figures | None, axes: int) -> Drawing | None:
    """Return what fills the template `RISK`: the risk against the prior on those axes, with the prior needed.

    `None` where there is no risk.
    """
    if figures is None:
        return None
    log_lr, prior, risk = figures.log_likelihood_ratio, figures.prior, figures.false_positive_risk
    if not (_is_finite(log_lr) and _is_finite(prior) and _is_finite(risk)):
        return None
    return [axes, *_needed(log_lr, figures.prior_needed), _moved(log_lr), _x(_log_odds(prior)), _y(risk)]


def _needed(log_lr: float, needed: float | None) -> Drawing:
    """The prior needed as an upright line from the curve down; for one beyond the ends, where it would be."""
    if not _is_finite(needed):
        return [NOTHING, "", 0, ""]
    log_odds, told = _log_odds(needed), html(percent(needed))
    if log_odds < -_MOST_LOG_ODDS:
        return [NOTHING, "", LEFT + 6, f"← {told}"]
    if log_odds > _MOST_LOG_ODDS:
        return [NOTHING, "e", RIGHT, f"{told} →"]
    x, y = _x(log_odds), _y(_share(-log_lr - log_odds))
    side: Drawing = ["", x + 8] if x < LEFT + (RIGHT - LEFT) // 3 else ["e", x - 8]
    return [f"M{x},{y}V{BOTTOM}", *side, told]


def curve_path() -> str:
    """Return the curve of a result that tells nothing, beyond both ends as far as any other one is moved."""
    farthest = _MOST_LOG_LR + _MOST_LOG_ODDS
    corners = " ".join(f"{_across(each)} {_y(_share(-each))}" for each in _BENDS)
    return f"M{_across(-farthest)} {TOP}L{corners}H{_across(farthest)}"


def _moved(log_lr: float) -> int:
    """How far the curve is moved to the right."""
    return _across(max(-_MOST_LOG_LR, min(_MOST_LOG_LR, -log_lr))) - _across(0.0)


def _x(log_odds: float) -> int:
    return LEFT + _across(max(-_MOST_LOG_ODDS, min(_MOST_LOG_ODDS, log_odds)))


def _across(log_odds: float) -> int:
    """How far to the right of the left edge of the box."""
    return round((log_odds + _MOST_LOG_ODDS) / (2 * _MOST_LOG_ODDS) * (RIGHT - LEFT))


def _y(risk: float) -> int:
    decades = -math.log10(risk) if risk > 0 else _DECADES
    return round(TOP + max(0.0, min(_DECADES, decades)) / _DECADES * (BOTTOM - TOP))


def _log_odds(probability: float) -> float:
    if not 0 < probability < 1:
        return _BEYOND if probability >= 1 else -_BEYOND
    return math.log(probability) - math.log1p(-probability)


def _share(log_odds: float) -> float:
    """The probability of which these are the log odds."""
    return 1 / (1 + math.exp(-max(-_BEYOND, log_odds)))


def _is_finite(number: float | None) -> TypeGuard[float]:
    return number is not None and math.isfinite(number)
