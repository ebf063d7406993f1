"""The pieces of code in notebooks, R Markdown and Quarto: which language each is in, and where it stands.

Notebooks are those of format 4, and of format 3, whose cells stand in worksheets
(https://github.com/jupyter/nbformat). Lines that speak to the notebook and not to its language become `pass`, so
that the lines of the others stay.
"""

from __future__ import annotations

import json
import re
from collections.abc import Iterator, Sequence
from typing import Any, Literal

from gatecheck.model.struct import struct

_FENCE = re.compile(
    r"^[ \t>]*(?P<fence>`{3,}|~{3,})[ \t]*\{(?P<language>[rR]|python)\b(?P<options>[^}\n]*)\}[ \t\r]*$",
    re.MULTILINE,
)
_OPTION = re.compile(r"\beval\s*[=:]\s*(?:F|FALSE|false|no)\b")
_COMMENT_OPTION = re.compile(r"^\s*#\|\s*eval\s*:\s*(?:false|FALSE|no)\b", re.MULTILINE)
#: Lines of a cell that speak to the notebook: magics, commands of the shell, and questions.
_TO_NOTEBOOK = re.compile(r"^([ \t]*)(?:[%!].*|\?.*|[\w.]+\?\??[ \t]*|[\w., ]+=[ \t]*[%!].*)$", re.MULTILINE)
_CELL_MAGIC = re.compile(r"\s*%%(\w+)[^\n]*")
#: Magics of a cell whose other lines are still Python.
_STILL_PYTHON = frozenset({"capture", "prun", "time", "timeit"})
_R_MAGICS = frozenset({"R", "r"})
_R_MAGIC = re.compile(r"%%[Rr]\b")
_R = frozenset({"r", "ir"})


@struct
class Cell:
    """One piece of code: its number (0 outside of notebooks), and how many lines stand `before` it in the file.

    `path` is that of its source within the notebook.
    """

    language: Literal["python", "r"]
    text: str
    number: int = 0
    before: int = 0
    path: tuple[str | int, ...] = ()


@struct
class Notebook:
    """The language of a notebook, and number, path and text of its cells of code; `whole` joins the texts."""

    language: str
    sources: Sequence[tuple[int, tuple[str | int, ...], str]]
    whole: str


def sources_of_notebook(text: str) -> Notebook:
    """Return what the cells of code in a notebook hold.

    Raises
    ------
    ValueError, RecursionError
        It is no JSON, or nested too deep.
    """
    notebook = json.loads(text)
    if not isinstance(notebook, dict):
        return Notebook("", (), "")
    sources = _sources(notebook)
    return Notebook(_language(notebook), sources, "\n".join([source for _, _, source in sources]))


def _sources(notebook: dict[str, Any]) -> list[tuple[int, tuple[str | int, ...], str]]:
    sheets = enumerate(_list(notebook.get("worksheets")))
    held = [(("worksheets", at, "cells"), sheet.get("cells")) for at, sheet in sheets if isinstance(sheet, dict)]
    found, before = [], 1
    for path, cells in (*held, (("cells",), notebook.get("cells"))):
        for at, cell in enumerate(_list(cells)):
            if isinstance(cell, dict) and cell.get("cell_type") == "code":
                key = "source" if "source" in cell else "input"
                found.append((at + before, (*path, at, key), _text(cell.get(key))))
        before += len(_list(cells))
    return found


def may_hold_r(notebook: Notebook) -> bool:
    """Whether there may be cells of R in a notebook."""
    return notebook.language in _R or ("%%" in notebook.whole and _R_MAGIC.search(notebook.whole) is not None)


def cells_of(notebook: Notebook) -> list[Cell]:
    """Return the cells of a notebook whose code is Python or R."""
    cells = (_cell(notebook.language, text, number, path) for number, path, text in notebook.sources)
    return [each for each in cells if each is not None]


def _language(notebook: dict[str, Any]) -> str:
    metadata = notebook.get("metadata")
    told = metadata if isinstance(metadata, dict) else {}
    for key, name in (("language_info", "name"), ("kernelspec", "language"), ("kernelspec", "name")):
        holder = told.get(key)
        language = holder.get(name) if isinstance(holder, dict) else None
        if isinstance(language, str):
            return language.lower()
    return "python"


def _list(value: Any) -> list[Any]:
    return value if isinstance(value, list) else []


def _text(source: Any) -> str:
    if isinstance(source, str):
        return source
    try:
        return "".join(source) if isinstance(source, list) else ""
    except TypeError:  # something else stands among the lines
        return "".join(each for each in source if isinstance(each, str))


def _cell(language: str, text: str, number: int, path: tuple[str | int, ...]) -> Cell | None:
    magic = _CELL_MAGIC.match(text) if "%%" in text else None
    if language in _R:
        return Cell("r", text, number, 0, path)
    if magic is not None and magic[1] in _R_MAGICS:
        return Cell("r", " " * magic.end() + text[magic.end() :], number, 0, path)
    if language.startswith(("python", "ipython")) and (magic is None or magic[1] in _STILL_PYTHON):
        speaks = "%" in text or "!" in text or "?" in text
        return Cell("python", _TO_NOTEBOOK.sub(r"\1pass", text) if speaks else text, number, 0, path)
    return None


def chunks_of_markdown(text: str) -> Iterator[Cell]:
    """Yield the chunks of R and Python in R Markdown or Quarto that are not switched off."""
    at = 0
    while (opening := _FENCE.search(text, at)) is not None:
        closing = re.compile(rf"^[ \t>]*{opening['fence'][0]}{{{len(opening['fence'])},}}[ \t]*$", re.MULTILINE)
        last = closing.search(text, opening.end())
        end = len(text) if last is None else last.start()
        at = len(text) if last is None else last.end()
        code = text[opening.end() : end]
        if _OPTION.search(opening["options"]) is None and _COMMENT_OPTION.search(code) is None:
            language: Literal["python", "r"] = "python" if opening["language"] == "python" else "r"
            yield Cell(language, code, 0, text.count("\n", 0, opening.end()))
