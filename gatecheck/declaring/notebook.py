"""Display of a record in a running notebook: as data for the gate, and for people with what it will say of it."""

from __future__ import annotations

import html
import sys
from collections.abc import Callable, Mapping
from importlib import import_module
from pathlib import Path
from typing import Any

MEDIA_TYPE = "application/vnd.gatecheck.record+json"
#: Tells what the gate will say of a record. It is known by name and loaded in a notebook alone: analysis code that
#: declares a result loads no gate.
_TELLER = "gatecheck.displaying"
#: What computes in the gate, and may compute in the analysis.
_ARRAYS = ("numpy", "scipy")

#: HTML and text.
Shown = tuple[str, str]


def kernel() -> Any:
    """Return the shell of the running notebook kernel, or `None` outside a notebook."""
    ipython = sys.modules.get("IPython")
    shell = None if ipython is None else ipython.get_ipython()
    return shell if hasattr(shell, "kernel") else None


class Display:
    """The display of the records of one session."""

    def __init__(self) -> None:
        self._loaded: set[str] = set()

    def show(self, document: Mapping[str, Any], written: Path | None) -> None:
        """Show a record, which was `written` to a file, as an output of the running cell; elsewhere do nothing."""
        shell = kernel()
        if shell is not None:
            before = set(sys.modules)
            shell.display_pub.publish(data=bundle(document, _verdict(document, written)))
            self._loaded.update(name for name in _ARRAYS if name in sys.modules and name not in before)

    def of_analysis(self, software: Mapping[str, str], result: object) -> dict[str, str]:
        """Return `software` without what only the display has loaded, so that running a cell again changes nothing.

        Where `result` itself is of a library, all is of the analysis.
        """
        plain = type(result).__module__ == "builtins" and "statsmodels" not in software
        return {name: version for name, version in software.items() if not (plain and name in self._loaded)}


def bundle(document: Mapping[str, Any], verdict: Shown | None = None) -> dict[str, Any]:
    """Return a record under its media type, with a table as HTML and as text beside it, and the verdict below."""
    rows = _rows(document)
    html_below, text_below = ("", "") if verdict is None else (verdict[0], f"\n\n{verdict[1]}")
    return {
        MEDIA_TYPE: document,
        "text/html": f"{_html(rows)}{html_below}",
        "text/plain": f"{_text(rows)}{text_below}",
    }


def _verdict(document: Mapping[str, Any], written: Path | None) -> Shown:
    """What the gate will say. The analysis goes on whatever becomes of it, and one sentence tells that."""
    try:
        shown: Callable[..., Shown] = import_module(_TELLER).shown
        return shown(document, Path.cwd(), written)
    except Exception as error:  # noqa: BLE001  # of whatever kind: a display never stops an analysis
        sentence = (
            f"What the gate will say could not be worked out here ({type(error).__name__}); "
            f"`gatecheck explain {document['id']}` tells it."
        )
        return f"<p>{html.escape(sentence)}</p>", sentence


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
