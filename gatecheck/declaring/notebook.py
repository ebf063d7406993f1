"""Display of a record in a running notebook, as data for the gate and as a table for people."""

from __future__ import annotations

import html
import sys
from collections.abc import Mapping
from typing import Any

MEDIA_TYPE = "application/vnd.gatecheck.record+json"


def kernel() -> Any:
    """Return the shell of the running notebook kernel, or `None` outside a notebook."""
    ipython = sys.modules.get("IPython")
    shell = None if ipython is None else ipython.get_ipython()
    return shell if hasattr(shell, "kernel") else None


def display(document: Mapping[str, Any]) -> None:
    """Show a record as an output of the running notebook cell; elsewhere do nothing."""
    shell = kernel()
    if shell is not None:
        shell.display_pub.publish(data=bundle(document))


def bundle(document: Mapping[str, Any]) -> dict[str, Any]:
    """Return a record under its media type, with a table as HTML and as text beside it."""
    rows = _rows(document)
    return {MEDIA_TYPE: document, "text/html": _html(rows), "text/plain": _text(rows)}


def _rows(document: Mapping[str, Any]) -> list[tuple[str, str]]:
    rows = {
        "record": document["id"],
        "claim": document.get("claim", "(nothing is claimed)"),
        "status": document["status"],
        "test": _test(document.get("test", {})),
        "estimate": _estimate(document.get("estimate", {})),
        "sample": _sample(document.get("sample", {})),
    }
    return [(label, text) for label, text in rows.items() if text]


def _test(test: Mapping[str, Any]) -> str:
    named = test.get("named_statistic", {"symbol": test.get("statistic"), "value": test.get("value")})
    df = test.get("df")
    degrees = "" if df is None else f"({_listed(df)})"
    statistic = "" if named["value"] is None else f"{named['symbol']}{degrees} = {_shown(named['value'])}"
    p = _shown(test.get("p"))
    p = p if not p or p[0] in "<>" else f"= {p}"
    return ", ".join(part for part in (test.get("name"), statistic, p and f"p {p}") if part)


def _estimate(estimate: Mapping[str, Any]) -> str:
    if not estimate:
        return ""
    unit = estimate.get("unit", "1")
    text = f"{estimate['measure']} {_shown(estimate['value'])}" + ("" if unit == "1" else f" {unit}")
    interval = estimate.get("interval")
    if interval is None:
        return text
    low, high = _shown(interval.get("low", "-inf")), _shown(interval.get("high", "inf"))
    return f"{text}, {100 * interval['level']:g} % interval {low} to {high}"


def _sample(sample: Mapping[str, Any]) -> str:
    unit, n = sample.get("unit"), sample.get("n")
    return ", ".join(part for part in (n and f"n = {n}", unit and f"unit: {unit}") if part)


def _listed(df: Any) -> str:
    return ", ".join(map(_shown, df if isinstance(df, list) else [df]))


def _shown(value: Any) -> str:
    """Return a number to four digits, and a number as reported as it stands."""
    return f"{value:.4g}" if isinstance(value, int | float) else str(value or "")


def _html(rows: list[tuple[str, str]]) -> str:
    cells = (
        f'<tr><th style="text-align:left">{html.escape(label)}</th>'
        f'<td style="text-align:left">{html.escape(text)}</td></tr>'
        for label, text in rows
    )
    return f"<table>{''.join(cells)}</table>"


def _text(rows: list[tuple[str, str]]) -> str:
    width = max(len(label) for label, _ in rows)
    return "\n".join(f"{label:<{width}}  {text}" for label, text in rows)
