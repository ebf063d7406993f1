"""The cells of Python in a notebook that matter: parsing takes most of the time, and most cells call no test.

First come the cells that name a test, a library of tests or `declare`; then those that mention what these give a
name to: a result, a function, or a list that they walk over.
"""

from __future__ import annotations

import ast
import re
from collections.abc import Sequence
from functools import cache

from gatecheck.analysis.catalogue import functions, libraries, methods_that_test
from gatecheck.analysis.flow import Flow
from gatecheck.analysis.pieces import Cell
from gatecheck.analysis.python_calls import parsed, read_python
from gatecheck.analysis.unreadable import Unreadable
from gatecheck.model.code import NotRead

_WORD = re.compile(r"[^\W\d]\w*")
#: After so many rounds every cell is read.
_MOST_ROUNDS = 4


@cache
def words_of_tests() -> frozenset[str]:
    """Return the words of which one stands in every cell that calls a test by its own name."""
    return functions("python") | methods_that_test("python")


@cache
def _telling() -> frozenset[str]:
    roots = {library.prefix.partition(".")[0] for library in libraries("python")}
    return words_of_tests() | roots | {"gatecheck", "declare"}


def words_in(text: str) -> frozenset[str]:
    """Return the words of a text."""
    return frozenset(_WORD.findall(text))


def read_cells_of_python(cells: Sequence[Cell], not_read: list[NotRead]) -> Flow | None:
    """Read the cells of one file; `None` where none of them names a test, or they cannot be read.

    What cannot be read of the cells that name a test is added to `not_read`; other cells are passed over.
    """
    words = {cell: words_in(cell.text) for cell in cells}
    if all(words_of_tests().isdisjoint(each) for each in words.values()):
        return None
    trees: dict[Cell, ast.Module | None] = {}
    wanted, flow = _telling(), None
    try:
        for number in range(_MOST_ROUNDS):
            new = [each for each in cells if each not in trees and not wanted.isdisjoint(words[each])]
            if flow is not None and not new:
                break
            if number == _MOST_ROUNDS - 1:
                new = [each for each in cells if each not in trees]
            trees |= {each: _tree(each, words[each], not_read) for each in new}
            flow = read_python([(each, tree) for each in cells if (tree := trees.get(each)) is not None])
            wanted = frozenset(flow.words)
    except Unreadable as error:
        not_read.append(NotRead(f"the code {error.why}", error.line))
        return None
    return flow


def _tree(cell: Cell, words: frozenset[str], not_read: list[NotRead]) -> ast.Module | None:
    try:
        return parsed(cell.text)
    except Unreadable as error:
        if not words_of_tests().isdisjoint(words):
            not_read.append(NotRead(f"the code {error.why}", error.line + cell.before, cell.number or None))
        return None
