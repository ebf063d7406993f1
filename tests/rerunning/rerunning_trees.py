"""Trees of analysis code for the tests of rerunning."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

from support import DRAINAGE, changed

MEDIA_TYPE = "application/vnd.gatecheck.record+json"
#: Writes the record that stands in `RECORD` below the current folder.
EMIT = """
import json, pathlib
pathlib.Path("results").mkdir(exist_ok=True)
pathlib.Path("results", NAME).write_text(json.dumps(RECORD))
"""


def emitting(record: Any, name: str = "r.json") -> str:
    """A script that writes one record to `results`."""
    return f"NAME, RECORD = {name!r}, {record!r}\n{EMIT}"


def showing(record: Any) -> str:
    """The source of a cell whose output is a record."""
    return f"from IPython.display import display\ndisplay({{{MEDIA_TYPE!r}: {record!r}}}, raw=True)"


def notebook(*sources: str, kernel: str | None = "python3", outputs: Any = ()) -> str:
    """A notebook with a text and these cells; `outputs` stand in the first of them."""
    cells: list[dict[str, Any]] = [{"cell_type": "markdown", "id": "text", "metadata": {}, "source": "A text."}]
    for number, source in enumerate(sources):
        cells.append({
            "cell_type": "code",
            "id": f"cell-{number}",
            "metadata": {},
            "execution_count": None,
            "source": source,
            "outputs": [] if number else list(outputs),
        })
    metadata = {} if kernel is None else {"kernelspec": {"name": kernel, "display_name": kernel}}
    return json.dumps({"nbformat": 4, "nbformat_minor": 5, "metadata": metadata, "cells": cells})


def output(record: Any) -> dict[str, Any]:
    """The output of a cell that holds a record."""
    return {"output_type": "display_data", "metadata": {}, "data": {MEDIA_TYPE: record}}


def place(folder: Path, files: dict[str, Any]) -> Path:
    """Write files by their paths: text as it is, anything else as JSON; return the folder."""
    for name, content in files.items():
        path = folder / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(content if isinstance(content, str) else json.dumps(content), encoding="utf-8")
    return folder


def worms(**changes: Any) -> dict[str, Any]:
    """A record under a short name."""
    return changed(DRAINAGE, **{"id": "worms", **changes})
