"""Python code read for hypothesis tests: parsed, never run."""

from __future__ import annotations

import ast
import re
import warnings
from collections.abc import Iterable, Iterator, Sequence
from contextlib import contextmanager
from functools import partial
from itertools import chain
from typing import cast

from gatecheck.analysis.catalogue import Known, looks, methods_that_test
from gatecheck.analysis.flow import NOTHING, Context, Flow, Keys, Learned, Site, SiteKind, Times
from gatecheck.analysis.pieces import Cell
from gatecheck.analysis.python_names import (
    Names,
    discards_p,
    dotted,
    draws,
    leaves,
    names_a_distribution,
    texts_of,
    unpacks_no_p,
    written,
)
from gatecheck.analysis.unreadable import Unreadable

#: Functions and methods that call what they are given for each member of something (common usage).
_MAPPING = frozenset({
    "agg", "aggregate", "apply", "applymap", "imap", "imap_unordered", "map", "pipe", "starmap", "submit",
    "transform",
})  # fmt: skip
_FIT = re.compile(r"fit|fit_constrained|fit_right_censoring|fit_left_censoring")
_ADDING = frozenset({"add", "append", "extend", "insert", "setdefault", "update"})
Function = ast.FunctionDef | ast.AsyncFunctionDef
Comprehension = ast.ListComp | ast.SetComp | ast.DictComp | ast.GeneratorExp


def parsed(code: bytes | str) -> ast.Module:
    """Return the syntax tree of Python code; bytes may name their encoding.

    Raises
    ------
    Unreadable
        It cannot be parsed.
    """
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            return ast.parse(code)
    except (SyntaxError, ValueError) as error:
        # Of a null byte some versions say the one, some the other.
        raise Unreadable(getattr(error, "lineno", None) or 1, "is not Python as this version knows it") from None
    except (RecursionError, MemoryError):
        raise Unreadable(1, "is nested too deep to be parsed") from None


def read_python(cells: Sequence[tuple[Cell, ast.Module]]) -> Flow:
    """Read the cells of a notebook in order, or one file.

    Raises
    ------
    Unreadable
        The code is nested too deep to be read.
    """
    names = Names(tree for _, tree in cells)
    try:
        # The first reading finds what the functions of the file do, wherever they stand.
        flow = _walk(cells, names, None)
        if flow.learned.defined:
            flow = _walk(cells, names, flow.learned)
    except RecursionError:
        raise Unreadable(1, "is nested too deep to be read") from None
    flow.words |= flow.learned.defined.keys() | names.words()
    return flow


def _walk(cells: Sequence[tuple[Cell, ast.Module]], names: Names, learned: Learned | None) -> Flow:
    flow = Flow(learned)
    for cell, tree in cells:
        _Reading(flow, names, cell).block(tree.body)
    return flow


class _Reading(ast.NodeVisitor):
    """A walk over the statements; visiting an expression returns the results that it may hold."""

    def __init__(self, flow: Flow, names: Names, cell: Cell) -> None:
        self.flow = flow
        self.names = names
        self.cell = cell
        self.maps = False

    def block(self, statements: Iterable[ast.AST]) -> None:
        """Read statements in order."""
        for each in statements:
            self.visit(each)

    def visit(self, node: ast.AST) -> Keys:
        """Read one node."""
        return cast("Keys", super().visit(node))

    def generic_visit(self, node: ast.AST) -> Keys:
        """What any part holds, the whole may hold."""
        return self._all(ast.iter_child_nodes(node))

    def _all(self, nodes: Iterable[ast.AST]) -> Keys:
        held = [found for each in nodes if (found := self.visit(each))]
        return NOTHING.union(*held) if held else NOTHING

    def visit_Name(self, node: ast.Name) -> Keys:
        if self.flow.is_function(node.id) and isinstance(node.ctx, ast.Load):
            self.flow.mentioned(node.id, Times(int(self.maps), more=True))
        return self.flow.held(node.id)

    def visit_Attribute(self, node: ast.Attribute) -> Keys:
        held = self.visit(node.value)
        if node.attr in looks("python"):
            self.flow.look(held)
        return self.flow.without_p(held) if discards_p(node) else held

    def visit_Subscript(self, node: ast.Subscript) -> Keys:
        held = self.visit(node.value)
        held = self.flow.without_p(held) if discards_p(node) else held
        return held | self.visit(node.slice)

    def visit_Lambda(self, node: ast.Lambda) -> Keys:
        context = self.flow.context
        with self.flow.inside(context.loop(None, draws=draws(node)) if self.maps else context.perhaps()):
            return self.visit(node.body)

    # Statements that hand results on.

    def visit_Assign(self, node: ast.Assign) -> Keys:
        match node:
            case ast.Assign(targets=[ast.Name(id=name)], value=ast.Lambda() as function):
                self._function(name, function.args, [ast.Return(function.body)], function)
                return NOTHING
        held = self.visit(node.value)
        if isinstance(node.value, ast.Call) and any(map(unpacks_no_p, node.targets)):
            self.flow.without_p(held)
        for target in node.targets:
            self._bind(target, held)
        return NOTHING

    def visit_AnnAssign(self, node: ast.AnnAssign) -> Keys:
        held = NOTHING if node.value is None else self.visit(node.value)
        self._bind(node.target, held)
        return NOTHING

    def visit_AugAssign(self, node: ast.AugAssign) -> Keys:
        self._bind(node.target, self.visit(node.value), also=True)
        return NOTHING

    def visit_NamedExpr(self, node: ast.NamedExpr) -> Keys:
        held = self.visit(node.value)
        self._bind(node.target, held)
        return held

    def _bind(self, target: ast.AST, held: Keys, *, also: bool = False) -> None:
        """Names get what is assigned to them; so does what an attribute or a member of belongs to."""
        if isinstance(target, ast.Name):
            self.flow.bind(target.id, held, also=also)
        elif isinstance(target, ast.Attribute | ast.Subscript | ast.Starred):
            self._bind(target.value, held, also=not isinstance(target, ast.Starred))
        elif isinstance(target, ast.Tuple | ast.List):
            for each in target.elts:
                self._bind(each, held, also=also)

    # Branches and loops.

    def visit_If(self, node: ast.If) -> Keys:
        self.visit(node.test)
        self._branches([node.body, node.orelse], may_pass=not node.orelse)
        return NOTHING

    def visit_Try(self, node: ast.Try) -> Keys:
        self.block(node.body)
        with self.flow.inside(self.flow.context.branch(first=False, alone=False)):
            self.block(chain.from_iterable(each.body for each in node.handlers))
        self.block([*node.orelse, *node.finalbody])
        return NOTHING

    def visit_Match(self, node: ast.Match) -> Keys:
        self.visit(node.subject)
        self._branches([case.body for case in node.cases], may_pass=True)
        return NOTHING

    def visit_IfExp(self, node: ast.IfExp) -> Keys:
        self.visit(node.test)
        return self._branches([[node.body], [node.orelse]], may_pass=False)

    def _branches(self, bodies: Sequence[Sequence[ast.AST]], *, may_pass: bool) -> Keys:
        return self.flow.branches([partial(self._all, body) for body in bodies if body], may_pass=may_pass)

    def visit_For(self, node: ast.For | ast.AsyncFor) -> Keys:
        self._bind(node.target, self.visit(node.iter))
        length = None if leaves(node.body) else self.names.length(node.iter)
        with self.flow.inside(self.flow.context.loop(length, draws=any(map(draws, node.body)))):
            self.block(node.body)
        self.block(node.orelse)
        return NOTHING

    visit_AsyncFor = visit_For  # noqa: N815  # the name that the walk looks for

    def visit_While(self, node: ast.While) -> Keys:
        with self.flow.inside(self.flow.context.loop(None, draws=any(map(draws, node.body)))):
            self.visit(node.test)
            self.block(node.body)
        self.block(node.orelse)
        return NOTHING

    def visit_ListComp(self, node: Comprehension) -> Keys:
        context = self.flow.context
        for each in node.generators:
            length = None if each.ifs else self.names.length(each.iter)
            self._bind(each.target, self.visit(each.iter))
            context = context.loop(length, draws=draws(node))
        with self.flow.inside(context):
            filters = chain.from_iterable(each.ifs for each in node.generators)
            made = [node.key, node.value] if isinstance(node, ast.DictComp) else [node.elt]
            return self._all([*filters, *made])

    visit_SetComp = visit_DictComp = visit_GeneratorExp = visit_ListComp  # noqa: N815

    # Functions of the file.

    def visit_FunctionDef(self, node: Function) -> Keys:
        self._all(node.decorator_list)
        self._function(node.name, node.args, node.body, node)
        return NOTHING

    visit_AsyncFunctionDef = visit_FunctionDef  # noqa: N815

    def _function(self, name: str, arguments: ast.arguments, body: Sequence[ast.stmt], whole: ast.AST) -> None:
        self._all([*arguments.defaults, *filter(None, arguments.kw_defaults)])
        listed = [*arguments.posonlyargs, *arguments.args, *arguments.kwonlyargs]
        listed += [each for each in (arguments.vararg, arguments.kwarg) if each is not None]
        if draws(whole):
            self.flow.learned.drawing.add(name)
        with self.flow.function(name, [each.arg for each in listed]):
            self.block(body)

    def visit_Return(self, node: ast.Return | ast.Yield | ast.YieldFrom) -> Keys:
        held = NOTHING if node.value is None else self.visit(node.value)
        self.flow.returned(held)
        return held

    visit_Yield = visit_YieldFrom = visit_Return  # noqa: N815

    # Calls.

    def visit_Call(self, node: ast.Call) -> Keys:
        name = dotted(node.func)
        known = self.names.known(name)
        if known is not None:
            return self._of_library(node, name or "", known)
        if self.names.declares(name):
            return self._declare(node)
        function = node.func
        if isinstance(function, ast.Name) and self.flow.is_function(function.id):
            return self.flow.called(function.id, self._arguments(node))
        if isinstance(function, ast.Attribute):
            return self._method(node, function)
        held = self.visit(function)
        return held | self._mapped(node, name or "")

    def _method(self, node: ast.Call, function: ast.Attribute) -> Keys:
        held = self.visit(function)
        models = self.flow.of_kind(held, "model")
        if models and _FIT.fullmatch(function.attr):
            self._arguments(node)
            made = self._site(node, "fit", written(function.value), Known("model"))
            if isinstance(function.value, ast.Name):
                self.flow.bind(function.value.id, models | made)
            return made
        if models and function.attr in methods_that_test("python"):
            self._arguments(node)
            return self._site(node, "test", function.attr, Known("test"))
        if (known := self.names.known_method(function.attr)) is not None:
            self._arguments(node)
            return self._site(node, "test", function.attr, known)
        handed = self._mapped(node, function.attr)
        if function.attr in _ADDING:
            self._bind(function.value, handed, also=True)
        if self.flow.is_function(function.attr):
            return held | self.flow.called(function.attr, handed)
        return held | handed

    def _arguments(self, node: ast.Call) -> Keys:
        return self._all([*node.args, *node.keywords])

    def _mapped(self, node: ast.Call, function: str) -> Keys:
        """Read arguments, among them functions that are called for each member of something."""
        if function.rpartition(".")[2] not in _MAPPING:
            return self._arguments(node)
        given = [*node.args, *(each.value for each in node.keywords)]
        made = [self._handed(each) for each in given]
        with self._mapping():
            return self._arguments(node).union(*made)

    @contextmanager
    def _mapping(self) -> Iterator[None]:
        outer, self.maps = self.maps, True
        try:
            yield
        finally:
            self.maps = outer

    def _handed(self, argument: ast.expr) -> Keys:
        """A test that is itself handed to a function that calls it."""
        name = dotted(argument)
        known = self.names.known(name)
        if known is None or known.kind != "test":
            self.flow.checks += known is not None and known.kind == "check"
            return NOTHING
        with self.flow.inside(self.flow.context.loop(None)):
            return self._site(argument, "test", name or "", known)

    def _of_library(self, node: ast.Call, name: str, known: Known) -> Keys:
        held = self._arguments(node)
        fits = self.flow.of_kind(held, "fit")
        if known.kind == "look" or (known.kind == "table" and fits and len(node.args) == 1):
            self.flow.look(held)
            return held
        if known.kind == "model":
            return self._site(node, "model", name, known)
        if known.kind == "check" or (known.of_a_distribution and names_a_distribution(node)):
            self.flow.checks += 1
            return NOTHING
        return self._site(node, "test", name, known)

    def _site(self, node: ast.expr, kind: SiteKind, name: str, known: Known) -> Keys:
        end = (node.end_lineno or 0) * 10_000 + (node.end_col_offset or 0)
        key = (self.cell.number, node.lineno + self.cell.before, end, kind)
        context: Context = self.flow.context
        return self.flow.met(Site(key, kind, name, known.test, context, context.times * Times(1, known.several)))

    def _declare(self, node: ast.Call) -> Keys:
        given = next((each.value for each in node.keywords if each.arg == "id"), None)
        self.flow.declare(self._arguments(node), None if given is None else texts_of(given))
        return NOTHING
