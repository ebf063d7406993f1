"""Walks over Python code, held against those of the standard library."""

from __future__ import annotations

import ast
from pathlib import Path

import pytest

import gatecheck
from gatecheck.analysis.python_tree import children, nodes, parsed

SIGNS = (ast.boolop, ast.cmpop, ast.expr_context, ast.operator, ast.unaryop)
SOURCES = sorted(Path(gatecheck.__file__).parent.rglob("*.py"))
RARE = """
async def f(a, /, b: int = 1, *c, d=2, **e) -> None:
    global g
    async with a as b, c: await d
    async for x in y: yield x
    try: raise A from b
    except* E as error: pass
    match x:
        case {"a": 1, **rest} | [1, *_] | C(y=None): del x[0], x.y
    return {**a, "b": f"{c!r:>{d}}", "e": (z := [i async for i in j if i])}
"""


def without_signs(found: list[ast.AST]) -> list[ast.AST]:
    """The nodes that are more than a sign or a role."""
    return [each for each in found if not isinstance(each, SIGNS)]


@pytest.mark.parametrize("code", [RARE, *(path.read_text(encoding="utf-8") for path in SOURCES[::12])])
def test_a_walk_finds_what_the_standard_one_finds_but_for_signs(code: str) -> None:
    tree = parsed(code)

    found = nodes(tree)
    assert found == without_signs(list(ast.walk(tree)))
    assert all(children(each) == without_signs(list(ast.iter_child_nodes(each))) for each in found)
