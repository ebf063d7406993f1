"""Find the code files of a tree, and read in each which hypothesis tests it calls."""

from __future__ import annotations

import json
import re
from collections.abc import Callable, Mapping, Sequence
from functools import cache
from pathlib import Path

from gatecheck.analysis.catalogue import Language, libraries, names_of_tests
from gatecheck.analysis.flow import Flow
from gatecheck.analysis.pieces import Cell, cells_of, chunks_of_markdown, may_hold_r, sources_of_notebook
from gatecheck.analysis.python_cells import code_of, read_cells_of_python, read_python, words_in, words_of_tests
from gatecheck.analysis.python_tree import parsed
from gatecheck.analysis.r_calls import read_r
from gatecheck.analysis.r_tokens import Node, tree_of
from gatecheck.analysis.unreadable import Unreadable
from gatecheck.globs import matches
from gatecheck.model.code import CodeFile, CodeRead, NotRead
from gatecheck.scan.readers import suffix_of
from gatecheck.scan.readers.positions import Positions
from gatecheck.scan.tree import Unread, contents, listed
from gatecheck.scan.unread import as_text

#: More code than this in one file is not parsed, in bytes; nor is a longer notebook, which holds outputs too.
LONGEST_CODE = 1 << 19
LONGEST_NOTEBOOK = 1 << 25
_NO_CONTENT = {
    "link": "is a link that is not followed", "refused": "cannot be opened", "too long": "is too long to be read",
    "not in this clone": "is not in this clone, which is a partial one",
}  # fmt: skip


def read_code(root: Path, include: Sequence[str], exclude: Sequence[str], revision: str | None = None) -> CodeRead:
    """Read the code below `root` for calls of hypothesis tests; nothing is run.

    Parameters
    ----------
    root
        The folder to judge; all paths are relative to it.
    include, exclude
        Globs of paths relative to `root`: a file of Python, R, R Markdown or Quarto, or a notebook, is read where
        one of the first names it and none of the second.
    revision
        The commit to read in place of the work tree.

    Raises
    ------
    CannotJudge
        `root` is no folder, git fails, or the revision is not known.
    """
    tree = listed(root, revision)
    wanted = [entry for entry in tree.entries if entry.kind in {"file", "unmerged"}]
    wanted = [entry for entry in wanted if suffix_of(entry.path) in _READERS and matches(include, entry.path)]
    wanted = [entry for entry in wanted if not matches(exclude, entry.path)]
    files = []
    for entry, content in contents(tree, wanted):
        found = _without_content(entry.path, content) if isinstance(content, Unread) else _read(entry.path, content)
        if found.tests or found.not_read:
            files.append(found)
    return CodeRead(tuple(sorted(files, key=lambda one: one.path)), names_of_tests())


def _without_content(path: str, unread: Unread) -> CodeFile:
    why = _NO_CONTENT.get(unread.why)
    return CodeFile(as_text(path), (), not_read=() if why is None else (NotRead(f"the file {why}"),))


def _read(path: str, content: bytes) -> CodeFile:
    """Read the content of one file, unless it names no test."""
    suffix = suffix_of(path)
    longest = LONGEST_NOTEBOOK if suffix == ".ipynb" else LONGEST_CODE
    reader, may_test = _READERS[suffix]
    if not may_test(content):
        return CodeFile(as_text(path), ())
    if len(content) > longest:
        return _too_long(as_text(path), "file", len(content), longest)
    return reader(as_text(path), content)


def _too_long(path: str, what: str, size: int, longest: int) -> CodeFile:
    why = f"the {what} has {size / 1024:,.0f} KiB, and is read up to {longest / 1024:,.0f} KiB"
    return CodeFile(path, (), not_read=(NotRead(why),))


def _names_library(content: bytes) -> bool:
    """Whether the name of a library of Python stands in the bytes."""
    return any(root in content for root in _roots())


def _names_function(content: bytes) -> bool:
    """Whether a function of R that tests or fits is named in the bytes."""
    return _r_name().search(content) is not None


def _names_either(content: bytes) -> bool:
    return _names_library(content) or _names_function(content)


@cache
def _roots() -> tuple[bytes, ...]:
    return tuple(sorted({library.prefix.partition(".")[0].encode() for library in libraries("python")}))


@cache
def _r_name() -> re.Pattern[bytes]:
    return re.compile(rb"(?<![\w.])(?:" + b"|".join(_escaped("r")) + rb")(?![\w.])")


def _escaped(language: Language) -> list[bytes]:
    kinds = {"test", "table", "model", "check"}
    functions = [each for library in libraries(language) for each in library.functions.items()]
    return sorted({re.escape(name).encode() for name, known in functions if known.kind in kinds})


def _read_python(path: str, content: bytes) -> CodeFile:
    # A file without the name of a test calls none, whatever else it is.
    if words_of_tests().isdisjoint(words_in(_decoded(content))):
        return CodeFile(path, ())
    try:
        return _made(path, [read_python([code_of(Cell("python", ""), parsed(content))])], [])
    except Unreadable as error:
        return CodeFile(path, (), not_read=(NotRead(f"the code {error.why}", error.line),), line=error.line)


def _read_r(path: str, content: bytes) -> CodeFile:
    return _read_cells(path, [Cell("r", _decoded(content), 0)])


def _read_markdown(path: str, content: bytes) -> CodeFile:
    return _read_cells(path, list(chunks_of_markdown(_decoded(content))))


def _decoded(content: bytes) -> str:
    """The text; a file that is not UTF-8 is read byte by byte, as names of functions are ASCII."""
    try:
        return content.decode("utf-8-sig")
    except UnicodeDecodeError:
        return content.decode("latin-1")


def _read_notebook(path: str, content: bytes) -> CodeFile:
    try:
        text = content.decode("utf-8-sig")
        notebook = sources_of_notebook(text)
    except (ValueError, RecursionError):
        return CodeFile(path, (), not_read=(NotRead("the file is no notebook: its JSON cannot be parsed"),))
    # Most notebooks test nothing, and need not be taken apart to tell.
    if not (_names_library(notebook.whole.encode("utf-8", "replace")) or may_hold_r(notebook)):
        return CodeFile(path, ())
    cells = cells_of(notebook)
    code = "\n".join(each.text for each in cells).encode("utf-8", "replace")
    if not _names_library(code) and all(each.language == "python" for each in cells):
        return CodeFile(path, ())
    if len(code) > LONGEST_CODE:
        return _too_long(path, "code", len(code), LONGEST_CODE)
    found = _read_cells(path, cells)
    undeclared = next((one for one in found.tests if not one.declared), None)
    if undeclared is None:
        return found
    holder = next(each for each in cells if each.number == undeclared.cell)
    line = _line_in_notebook(text, holder, undeclared.line)
    return CodeFile(path, found.tests, found.checks, found.not_read, line)


def _line_in_notebook(text: str, cell: Cell, line: int) -> int:
    """The line of the file with that line of a cell, or where its source starts, if the same text stands twice."""
    written = json.dumps(cell.text.splitlines()[line - 1], ensure_ascii=False)[1:-1]
    if text.count(written) == 1:
        return text.count("\n", 0, text.find(written)) + 1
    return Positions(text).line(cell.path)


def _read_cells(path: str, cells: Sequence[Cell]) -> CodeFile:
    """Read pieces of code; one that cannot be read is told, and the others are read all the same."""
    not_read: list[NotRead] = []
    flows: list[Flow] = []
    in_python = [each for each in cells if each.language == "python"]
    in_r = [each for each in cells if each.language == "r"]
    if (flow := read_cells_of_python(in_python, not_read)) is not None:
        flows.append(flow)
    if any(_names_function(each.text.encode("utf-8", "replace")) for each in in_r):
        trees = [(each, tree) for each in in_r if (tree := _tree_of_r(each, not_read)) is not None]
        flows.append(read_r(trees))
    return _made(path, flows, not_read)


def _tree_of_r(cell: Cell, not_read: list[NotRead]) -> list[Node] | None:
    try:
        return tree_of(cell.text)
    except Unreadable as error:
        not_read.append(NotRead(f"the code {error.why}", error.line + cell.before, cell.number or None))
        return None


def _made(path: str, flows: Sequence[Flow], not_read: Sequence[NotRead]) -> CodeFile:
    tests = sorted((test for flow in flows for test in flow.tests()), key=lambda one: (one.cell or 0, one.line))
    undeclared = next((one for one in tests if not one.declared), None)
    line = 1 if undeclared is None else undeclared.line
    return CodeFile(path, tuple(tests), sum(flow.checks for flow in flows), tuple(not_read), line)


#: How a file of each suffix is read, and whether its bytes make that worth while.
_READERS: Mapping[str, tuple[Callable[[str, bytes], CodeFile], Callable[[bytes], bool]]] = {
    ".py": (_read_python, _names_library),
    ".r": (_read_r, _names_function),
    # Its code is a small part of a notebook: to find it takes less time than to search the outputs too.
    ".ipynb": (_read_notebook, bool),
    ".rmd": (_read_markdown, _names_either),
    ".qmd": (_read_markdown, _names_either),
}
