"""The cells of Python in a notebook that matter: parsing takes most of the time, and most cells call no test.

First come the cells that name a test, a library of tests or `declare`; then those that mention what these give a
name to: a result, a function, or a list that they walk over.
"""

from __future__ import annotations

import ast
import re
from collections.abc import Sequence
from functools import cache
from itertools import chain
from unicodedata import normalize

from gatecheck.analysis.catalogue import functions, libraries, methods_that_test
from gatecheck.analysis.flow import Flow, Learned
from gatecheck.analysis.pieces import Cell
from gatecheck.analysis.python_calls import Reading
from gatecheck.analysis.python_names import Names, naming
from gatecheck.analysis.python_tree import parsed
from gatecheck.analysis.unreadable import Unreadable
from gatecheck.model.code import NotRead
from gatecheck.model.struct import struct

_WORD = re.compile(r"[^\W\d]\w*")
#: Each character of ASCII that no word has, as a space.
_SPACED = bytes(code if chr(code).isalnum() or chr(code) == "_" else ord(" ") for code in range(128)).ljust(256)
#: After so many rounds every cell is read.
_MOST_ROUNDS = 4


@struct
class Code:
    """One cell that was parsed: its statements, and what in it gives names something (`naming`)."""

    cell: Cell
    body: Sequence[ast.stmt]
    naming: Sequence[ast.AST]


def code_of(cell: Cell, tree: ast.Module) -> Code:
    """Return a cell with its syntax tree, as `read_python` takes it."""
    return Code(cell, tree.body, naming(tree))


def read_python(cells: Sequence[Code]) -> Flow:
    """Read the cells of a notebook in order, or one file.

    Raises
    ------
    Unreadable
        The code is nested too deep to be read.
    """
    names = Names(chain.from_iterable(each.naming for each in cells))
    try:
        # The first reading finds what the functions of the file do, wherever they stand.
        flow = _walk(cells, names, None)
        if flow.learned.defined:
            flow = _walk(cells, names, flow.learned)
    except RecursionError:
        raise Unreadable(1, "is nested too deep to be read") from None
    flow.words |= flow.learned.defined.keys() | names.words()
    return flow


def _walk(cells: Sequence[Code], names: Names, learned: Learned | None) -> Flow:
    flow = Flow(learned)
    for each in cells:
        Reading(flow, names, each.cell).block(each.body)
    return flow


@cache
def words_of_tests() -> frozenset[str]:
    """Return the words of which one stands in every cell that calls a test by its own name."""
    return functions("python") | methods_that_test("python")


@cache
def _telling() -> frozenset[str]:
    roots = {library.prefix.partition(".")[0] for library in libraries("python")}
    return words_of_tests() | roots | {"gatecheck", "declare"}


def words_in(text: str) -> frozenset[str]:
    """Return the words of a text, as Python takes names: in other letters for the same, too."""
    if text.isascii():
        return frozenset(text.encode().translate(_SPACED).decode().split())
    return frozenset(_WORD.findall(normalize("NFKC", text)))


def read_cells_of_python(cells: Sequence[Cell], not_read: list[NotRead]) -> Flow | None:
    """Read the cells of one file; `None` where none of them names a test, or they cannot be read.

    What cannot be read of the cells that name a test is added to `not_read`; other cells are passed over.
    """
    words = {cell: words_in(cell.text) for cell in cells}
    if all(words_of_tests().isdisjoint(each) for each in words.values()):
        return None
    read: dict[Cell, Code | None] = {}
    wanted, flow = _telling(), None
    try:
        for number in range(_MOST_ROUNDS):
            new = [each for each in cells if each not in read and not wanted.isdisjoint(words[each])]
            if flow is not None and not new:
                break
            if number == _MOST_ROUNDS - 1:
                new = [each for each in cells if each not in read]
            read |= {each: _code(each, words[each], not_read) for each in new}
            flow = read_python([code for each in cells if (code := read.get(each)) is not None])
            wanted = frozenset(flow.words)
    except Unreadable as error:
        not_read.append(NotRead(f"the code {error.why}", error.line))
        return None
    return flow


def _code(cell: Cell, words: frozenset[str], not_read: list[NotRead]) -> Code | None:
    try:
        return code_of(cell, parsed(cell.text))
    except Unreadable as error:
        if not words_of_tests().isdisjoint(words):
            not_read.append(NotRead(f"the code {error.why}", error.line + cell.before, cell.number or None))
        return None
