"""Python code read for hypothesis tests: parsed, never run."""

from __future__ import annotations

import ast
import re
from collections.abc import Callable, Iterable, Iterator, Sequence
from contextlib import contextmanager
from functools import partial
from itertools import chain
from typing import Any, ClassVar

from gatecheck.analysis.catalogue import Known, looks, methods_that_test
from gatecheck.analysis.flow import NOTHING, Context, Flow, Keys, Site, SiteKind, Times
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
from gatecheck.analysis.python_tree import children

#: Functions and methods that call what they are given for each member of something (common usage).
_MAPPING = frozenset({
    "agg", "aggregate", "apply", "applymap", "imap", "imap_unordered", "map", "pipe", "starmap", "submit",
    "transform",
})  # fmt: skip
_FIT = re.compile(r"fit|fit_constrained|fit_right_censoring|fit_left_censoring")
_ADDING = frozenset({"add", "append", "extend", "insert", "setdefault", "update"})
Function = ast.FunctionDef | ast.AsyncFunctionDef
Comprehension = ast.ListComp | ast.SetComp | ast.DictComp | ast.GeneratorExp


class Reading:
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
        """Read one node; what any part holds, the whole may hold."""
        how = self._HOW.get(node.__class__)
        return self._all(children(node)) if how is None else how(self, node)

    def _all(self, nodes: Iterable[ast.AST]) -> Keys:
        held = [found for each in nodes if (found := self.visit(each))]
        return NOTHING.union(*held) if held else NOTHING

    def _read_value(self, node: ast.Expr | ast.Await) -> Keys:
        return self.visit(node.value)

    def _read_constant(self, _: ast.Constant) -> Keys:
        return NOTHING

    def _read_name(self, node: ast.Name) -> Keys:
        if node.id in self.flow.functions and isinstance(node.ctx, ast.Load):
            self.flow.mentioned(node.id, Times(int(self.maps), more=True))
        return self.flow.held(node.id)

    def _read_attribute(self, node: ast.Attribute) -> Keys:
        held = self.visit(node.value)
        if node.attr in looks("python"):
            self.flow.look(held)
        return self.flow.without_p(held) if discards_p(node) else held

    def _read_subscript(self, node: ast.Subscript) -> Keys:
        held = self.visit(node.value)
        held = self.flow.without_p(held) if discards_p(node) else held
        return held | self.visit(node.slice)

    def _read_lambda(self, node: ast.Lambda) -> Keys:
        context = self.flow.context
        with self.flow.inside(context.loop(None, draws=draws(node)) if self.maps else context.perhaps()):
            return self.visit(node.body)

    # Statements that hand results on.

    def _read_assign(self, node: ast.Assign) -> Keys:
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

    def _read_annotated(self, node: ast.AnnAssign) -> Keys:
        held = NOTHING if node.value is None else self.visit(node.value)
        self._bind(node.target, held)
        return NOTHING

    def _read_augmented(self, node: ast.AugAssign) -> Keys:
        self._bind(node.target, self.visit(node.value), also=True)
        return NOTHING

    def _read_named(self, node: ast.NamedExpr) -> Keys:
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

    def _read_if(self, node: ast.If) -> Keys:
        self.visit(node.test)
        self._branches([node.body, node.orelse], may_pass=not node.orelse)
        return NOTHING

    def _read_try(self, node: ast.Try) -> Keys:
        self.block(node.body)
        with self.flow.inside(self.flow.context.branch(first=False, alone=False)):
            self.block(chain.from_iterable(each.body for each in node.handlers))
        self.block([*node.orelse, *node.finalbody])
        return NOTHING

    def _read_match(self, node: ast.Match) -> Keys:
        self.visit(node.subject)
        self._branches([case.body for case in node.cases], may_pass=True)
        return NOTHING

    def _read_choice(self, node: ast.IfExp) -> Keys:
        self.visit(node.test)
        return self._branches([[node.body], [node.orelse]], may_pass=False)

    def _branches(self, bodies: Sequence[Sequence[ast.AST]], *, may_pass: bool) -> Keys:
        return self.flow.branches([partial(self._all, body) for body in bodies if body], may_pass=may_pass)

    def _read_for(self, node: ast.For | ast.AsyncFor) -> Keys:
        self._bind(node.target, self.visit(node.iter))
        length = None if leaves(node.body) else self.names.length(node.iter)
        with self.flow.inside(self.flow.context.loop(length, draws=any(map(draws, node.body)))):
            self.block(node.body)
        self.block(node.orelse)
        return NOTHING

    def _read_while(self, node: ast.While) -> Keys:
        with self.flow.inside(self.flow.context.loop(None, draws=any(map(draws, node.body)))):
            self.visit(node.test)
            self.block(node.body)
        self.block(node.orelse)
        return NOTHING

    def _read_comprehension(self, node: Comprehension) -> Keys:
        context = self.flow.context
        for each in node.generators:
            length = None if each.ifs else self.names.length(each.iter)
            self._bind(each.target, self.visit(each.iter))
            context = context.loop(length, draws=draws(node))
        with self.flow.inside(context):
            filters = chain.from_iterable(each.ifs for each in node.generators)
            made = [node.key, node.value] if isinstance(node, ast.DictComp) else [node.elt]
            return self._all([*filters, *made])

    # Functions of the file.

    def _read_definition(self, node: Function) -> Keys:
        self._all(node.decorator_list)
        self._function(node.name, node.args, node.body, node)
        return NOTHING

    def _function(self, name: str, arguments: ast.arguments, body: Sequence[ast.stmt], whole: ast.AST) -> None:
        self._all([*arguments.defaults, *filter(None, arguments.kw_defaults)])
        listed = [*arguments.posonlyargs, *arguments.args, *arguments.kwonlyargs]
        listed += [each for each in (arguments.vararg, arguments.kwarg) if each is not None]
        if draws(whole):
            self.flow.learned.drawing.add(name)
        with self.flow.function(name, [each.arg for each in listed]):
            self.block(body)

    def _read_return(self, node: ast.Return | ast.Yield | ast.YieldFrom) -> Keys:
        held = NOTHING if node.value is None else self.visit(node.value)
        self.flow.returned(held)
        return held

    # Calls.

    def _read_call(self, node: ast.Call) -> Keys:
        name = dotted(node.func)
        if name is not None:
            if (known := self.names.known(name)) is not None:
                return self._of_library(node, name, known)
            if self.names.declares(name):
                return self._declare(node)
        function = node.func
        if isinstance(function, ast.Attribute):
            return self._method(node, function)
        if isinstance(function, ast.Name) and function.id in self.flow.functions:
            return self.flow.called(function.id, self._arguments(node))
        return self.visit(function) | self._mapped(node, name or "")

    def _method(self, node: ast.Call, function: ast.Attribute) -> Keys:
        held = self._read_attribute(function)
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
        if (known := self.names.methods.get(function.attr)) is not None:
            self._arguments(node)
            return self._site(node, "test", function.attr, known)
        handed = self._mapped(node, function.attr)
        if function.attr in _ADDING:
            self._bind(function.value, handed, also=True)
        if function.attr in self.flow.functions:
            return held | self.flow.called(function.attr, handed)
        return held | handed

    def _arguments(self, node: ast.Call) -> Keys:
        if not node.keywords:
            return self._all(node.args)
        return self._all([*node.args, *[each.value for each in node.keywords]])

    def _mapped(self, node: ast.Call, function: str) -> Keys:
        """Read arguments, among them functions that are called for each member of something."""
        if function not in _MAPPING:
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

    #: How the nodes of each kind are read; of others, what any part holds, the whole may hold.
    _HOW: ClassVar[dict[type[ast.AST], Callable[[Reading, Any], Keys]]] = {
        ast.AnnAssign: _read_annotated,
        ast.Assign: _read_assign,
        ast.AsyncFor: _read_for,
        ast.AsyncFunctionDef: _read_definition,
        ast.Attribute: _read_attribute,
        ast.AugAssign: _read_augmented,
        ast.Await: _read_value,
        ast.Call: _read_call,
        ast.Constant: _read_constant,
        ast.DictComp: _read_comprehension,
        ast.Expr: _read_value,
        ast.For: _read_for,
        ast.FunctionDef: _read_definition,
        ast.GeneratorExp: _read_comprehension,
        ast.If: _read_if,
        ast.IfExp: _read_choice,
        ast.Lambda: _read_lambda,
        ast.ListComp: _read_comprehension,
        ast.Match: _read_match,
        ast.Name: _read_name,
        ast.NamedExpr: _read_named,
        ast.Return: _read_return,
        ast.SetComp: _read_comprehension,
        ast.Subscript: _read_subscript,
        ast.Try: _read_try,
        ast.While: _read_while,
        ast.Yield: _read_return,
        ast.YieldFrom: _read_return,
    }
