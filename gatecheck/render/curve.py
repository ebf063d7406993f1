"""The risk of one result against the prior, as a table and a curve of plain text."""

from __future__ import annotations

from gatecheck.model.shown import percent
from gatecheck.model.verdict import Sensitivity
from gatecheck.render.text import plain

_LABEL = 17
_COLUMNS = 41
_MOST_ALTERNATIVES = 4


def risk_against_prior(sensitivity: Sensitivity) -> list[str]:
    """Return the lines of the table, a row for each prior, with the curve of the first alternative beside them.

    The curve runs from 0 on the left to 100 % on the right; `o` is the risk and `|` the limit of the policy.
    """
    names = sensitivity.alternatives[:_MOST_ALTERNATIVES]
    head = "".join(f"{plain(name):>{_LABEL}}" for name in names)
    lines = [f"  {'prior':>6}{head}"]
    for column, prior in enumerate(sensitivity.priors):
        shown = [percent(risks[column], sensitivity.limit) for risks in sensitivity.risks[:_MOST_ALTERNATIVES]]
        lines.append(f"  {prior:>6g}" + "".join(f"{each:>{_LABEL}}" for each in shown))
    return [*lines, "", *_curve(sensitivity)]


def _curve(sensitivity: Sensitivity) -> list[str]:
    limit = "" if sensitivity.limit is None else f", | the limit of {percent(sensitivity.limit, sensitivity.limit)}"
    title = f"  {plain(sensitivity.alternatives[0])}: o the risk{limit}"
    scale = f"  {'prior':>6}  0 %{'100 %':>{_COLUMNS - 3}}"
    rows = [
        f"  {prior:>6g}  {_row(risk, sensitivity.limit)}".rstrip()
        for prior, risk in zip(sensitivity.priors, sensitivity.risks[0], strict=True)
    ]
    return [title, scale, *rows]


def _row(risk: float, limit: float | None) -> str:
    cells = [" "] * _COLUMNS
    if limit is not None:
        cells[_position(limit)] = "|"
    cells[_position(risk)] = "o"
    return "".join(cells)


def _position(share: float) -> int:
    return round(share * (_COLUMNS - 1))
