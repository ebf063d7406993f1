"""R code read for hypothesis tests: never run."""

from __future__ import annotations

import bisect
import re
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from functools import partial
from itertools import pairwise

from gatecheck.analysis.catalogue import Known
from gatecheck.analysis.flow import NOTHING, Flow, Keys, Learned, Site, SiteKind, Times
from gatecheck.analysis.pieces import Cell
from gatecheck.analysis.r_names import RNames, draws
from gatecheck.analysis.r_tokens import (
    Group,
    Node,
    Token,
    flat,
    is_function,
    is_name,
    is_named_argument,
    is_operator,
    opens,
    split,
    takes,
    value_of,
)

#: Functions that run a piece of code, or call a function, for each member of something (common usage).
_MAPPING = re.compile(
    r"[slvm]apply|Map|apply|tapply|by|aggregate|outer|rapply|ave|(?:future_)?p?i?map2?(?:_\w+)?|i?walk2?|pwalk|modify"
    r"|do|summari[sz]e\w*|mutate\w*|reframe|nest|foreach|across|par[LS]apply|mclapply"
)
_GROUPING = re.compile(r"group_by\w*|nest_by|rowwise|group_split|split")
#: Functions that hand on what they are given (common usage).
_HANDING_ON = frozenset({
    "append", "c", "identity", "invisible", "list", "local", "print", "return", "rev", "setNames", "step",
    "stepAIC", "suppressMessages", "suppressWarnings", "try", "tryCatch", "update", "with", "within",
})  # fmt: skip
#: Parts of a fit that are the fit no more.
_PARTS = frozenset({"coefficients", "df.residual", "fitted.values", "model", "resid", "residuals"})
#: What a result tells beside its p.
_NO_P = frozenset({"estimate", "expected", "observed", "parameter", "residuals", "statistic", "stdres"})
_NOT_RUN = frozenset({"bquote", "expression", "library", "quote", "require", "source", "substitute"})
_PIPES = ("%>%", "|>", "%<>%", "%T>%", "%$%")
_ASSIGNING = ("<-", "<<-", "=", ":=")
_CONTROL = frozenset({"if", "for", "while", "repeat"})
_AFTER_HEAD = frozenset({"if", "for", "while", "function"})
_WAITING = frozenset({"else", "repeat", "in"})


def read_r(cells: Sequence[tuple[Cell, list[Node]]]) -> Flow:
    """Read the cells of a notebook in order, or one file."""
    names = RNames([tree for _, tree in cells])
    # The first reading finds what the functions of the file do, wherever they stand.
    first = _walk(cells, names, None)
    return _walk(cells, names, first.learned) if first.learned.defined else first


def _walk(cells: Sequence[tuple[Cell, list[Node]]], names: RNames, learned: Learned | None) -> Flow:
    flow = Flow(learned)
    for cell, tree in cells:
        _Reading(flow, names, cell).block(tree)
    return flow


class _Reading:
    """A walk over one piece; reading an expression returns the results that it may hold."""

    def __init__(self, flow: Flow, names: RNames, cell: Cell) -> None:
        self.flow = flow
        self.names = names
        self.cell = cell
        self.maps = False
        self._ends = [found.start() for found in re.finditer("\n", cell.text)]

    def block(self, items: Sequence[Node]) -> Keys:
        """Read statements in order; the value is that of the last."""
        held = NOTHING
        for each in _statements(items):
            held = self.statement(each)
        return held

    def statement(self, items: Sequence[Node]) -> Keys:
        """Read one statement, or one argument."""
        if not items:
            return NOTHING
        if is_name(items[0], *_CONTROL):
            return self._control(items)
        at = next((at for at, each in enumerate(items) if is_operator(each, *_ASSIGNING)), None)
        if at:
            return self._assign(items[:at], items[at + 1 :])
        at = next((at for at, each in enumerate(items) if is_operator(each, "->", "->>")), None)
        if at:
            return self._assign(items[at + 1 :], items[:at])
        return self._expression(items)

    def _assign(self, target: Sequence[Node], value: Sequence[Node]) -> Keys:
        lone = target[0] if len(target) == 1 else None
        if isinstance(lone, Token) and is_function(value):
            self._function(lone.text, value)
            return NOTHING
        held = self.statement(value)
        if isinstance(lone, Token):
            self.flow.bind(lone.text, held)
        else:
            named = next((each for each in flat(target) if is_name(each)), None)
            if isinstance(named, Token):
                self.flow.bind(named.text, held, also=True)
        return held

    def _control(self, items: Sequence[Node]) -> Keys:
        word = items[0].text if isinstance(items[0], Token) else ""
        if word == "repeat" or len(items) == 1 or not isinstance(items[1], Group):
            with self.flow.inside(self.flow.context.loop(None, draws=draws(items))):
                return self.statement(items[1:])
        head, body = items[1].items, items[2:]
        if word == "if":
            self.statement(head)
            at = next((at for at, each in enumerate(body) if is_name(each, "else")), len(body))
            branches = [part for part in (body[:at], body[at + 1 :]) if part]
            read = [partial(self.statement, part) for part in branches]
            return self.flow.branches(read, may_pass=len(branches) == 1)
        length = self._loop_head(head) if word == "for" else None
        if any(is_name(each, "break", "next", "return", "stop") for each in flat(body)):
            length = None
        with self.flow.inside(self.flow.context.loop(length, draws=draws(body))):
            self.statement(body)
        return NOTHING

    def _loop_head(self, head: Sequence[Node]) -> int | None:
        over = head[2:]
        held = self.statement(over)
        if head and isinstance(head[0], Token):
            self.flow.bind(head[0].text, held)
        return self.names.length(over)

    def _function(self, name: str, items: Sequence[Node]) -> None:
        head, body = items[1], items[2:]
        listed = split(head.items, ",") if isinstance(head, Group) else []
        parameters = [each[0].text for each in listed if each and isinstance(each[0], Token)]
        if draws(body):
            self.flow.learned.drawing.add(name)
        with self.flow.function(name, parameters):
            self.flow.returned(self.statement(body))

    def _expression(self, items: Sequence[Node]) -> Keys:
        """Read an expression, in which pipes hand what stands before them to the call after them."""
        parts = split(items, *_PIPES)
        held = self._operand(parts[0], NOTHING)
        context = self.flow.context
        for before, part in pairwise(parts):
            if any(isinstance(each, Token) and _GROUPING.fullmatch(each.text) for each in before):
                context = context.loop(None)
            with self.flow.inside(context):
                held = self._operand(part, held)
        return held

    def _operand(self, items: Sequence[Node], piped: Keys) -> Keys:
        held, at = NOTHING, 0
        while at < len(items):
            if is_function(items, at):
                return held | self._nameless(items[at:])
            if is_name(items[at]) and at + 1 < len(items) and opens(items[at + 1], "("):
                called = self._call(items, at, piped)
                at += 1
                held |= self.flow.without_p(called) if takes(items, at + 1, _NO_P) else called
            else:
                found = self._other(items[at])
                held |= found - self.flow.of_kind(found, "fit") if takes(items, at + 1, _PARTS) else found
            # What stands behind a sign of membership is no name of its own.
            at += 3 if takes(items, at + 1) else 1
        return held

    def _nameless(self, items: Sequence[Node]) -> Keys:
        context = self.flow.context
        with self.flow.inside(context if self.maps else context.perhaps()):
            return self.statement(items[2:])

    def _other(self, node: Node) -> Keys:
        if isinstance(node, Group):
            if node.opened == "{":
                return self.block(node.items)
            return NOTHING.union(*(self.statement(each) for each in split(node.items, ",")))
        if node.kind != "name":
            return NOTHING
        if node.text in self.flow.functions:
            self.flow.mentioned(node.text, Times(int(self.maps), more=True))
        return self.flow.held(node.text)

    def _call(self, items: Sequence[Node], at: int, piped: Keys) -> Keys:
        named, group = items[at], items[at + 1]
        if not isinstance(named, Token) or not isinstance(group, Group) or named.text in _NOT_RUN:
            return NOTHING
        arguments = [each for each in split(group.items, ",") if each]
        if at and is_operator(items[at - 1], "$", "@"):
            return piped | self._arguments(arguments)
        package = items[at - 2] if at > 1 and is_operator(items[at - 1], "::", ":::") else None
        known = self.names.known(named.text, package.text if isinstance(package, Token) else None)
        if known is not None and named.text not in self.flow.functions:
            return self._of_library(named, arguments, known, piped)
        if named.text == "replicate":
            with self.flow.inside(self.flow.context.loop(None, draws=True)):
                return self._arguments(arguments)
        if _MAPPING.fullmatch(named.text):
            return piped | self._mapped(arguments)
        return self._of_file(named.text, arguments, piped)

    def _of_file(self, name: str, arguments: Sequence[list[Node]], piped: Keys) -> Keys:
        """A call of a function of the file, of `declare`, or of one that nothing is known of."""
        held = piped | self._arguments(arguments)
        if name == "declare":
            self.flow.declare(held, _texts(arguments))
        elif name == "return":
            self.flow.returned(held)
        elif name in self.flow.functions:
            return self.flow.called(name, held)
        # What a function makes of a fit, such as its residuals, is the fit no more.
        return held if name in _HANDING_ON else held - self.flow.of_kind(held, "fit")

    def _arguments(self, arguments: Sequence[Sequence[Node]]) -> Keys:
        return NOTHING.union(*(self.statement(value_of(each)) for each in arguments))

    def _mapped(self, arguments: Sequence[list[Node]]) -> Keys:
        length = self.names.length(value_of(arguments[0])) if arguments else None
        simulated = any(draws(each) for each in arguments)
        held = NOTHING
        with self._mapping(), self.flow.inside(self.flow.context.loop(length, draws=simulated)):
            for each in arguments:
                value = value_of(each)
                held |= self._handed(value) | self.statement(value)
        return held

    @contextmanager
    def _mapping(self) -> Iterator[None]:
        outer, self.maps = self.maps, True
        try:
            yield
        finally:
            self.maps = outer

    def _handed(self, argument: Sequence[Node]) -> Keys:
        """A test that is itself handed to a function that calls it."""
        last = argument[-1] if argument else None
        lone = len(argument) == 1 or (len(argument) == 3 and is_operator(argument[1], "::"))  # noqa: PLR2004
        if not lone or not isinstance(last, Token) or last.kind != "name":
            return NOTHING
        package = argument[0] if len(argument) > 1 else None
        known = self.names.known(last.text, package.text if isinstance(package, Token) else None)
        if known is None or known.kind != "test" or self.flow.held(last.text):
            self.flow.checks += known is not None and known.kind == "check"
            return NOTHING
        return self._site(last, "test", known)

    def _of_library(self, named: Token, arguments: Sequence[list[Node]], known: Known, piped: Keys) -> Keys:
        held = piped | self._arguments(arguments)
        fits = self.flow.of_kind(held, "fit")
        unnamed = len(arguments) - sum(is_named_argument(each) for each in arguments) + bool(piped)
        if known.kind == "look" or (known.kind == "table" and fits and unnamed == 1):
            self.flow.look(held)
            return held
        if known.kind == "model":
            return self._site(named, "fit", known)
        if known.kind == "check" or (known.of_a_distribution and _names_a_distribution(arguments)):
            self.flow.checks += 1
            return NOTHING
        return self._site(named, "test", known)

    def _site(self, named: Token, kind: SiteKind, known: Known) -> Keys:
        line = bisect.bisect_left(self._ends, named.offset) + 1 + self.cell.before
        context = self.flow.context
        key = (self.cell.number, line, named.offset, kind)
        times = context.times * Times(1, known.several)
        return self.flow.met(Site(key, kind, named.text, known.test, context, times))


def _statements(items: Sequence[Node]) -> list[list[Node]]:
    """Split a block at the ends of its statements."""
    found: list[list[Node]] = [[]]
    for each in items:
        if is_operator(each, ";") or (isinstance(each, Token) and each.kind == "newline"):
            if found[-1] and not _goes_on(found[-1]):
                found.append([])
        elif is_name(each, "else") and not found[-1] and len(found) > 1:
            found.pop()
            found[-1].append(each)
        else:
            found[-1].append(each)
    return [each for each in found if each]


def _goes_on(items: Sequence[Node]) -> bool:
    """Whether a statement cannot end here."""
    last = items[-1]
    if isinstance(last, Token):
        return last.kind == "operator" or (last.kind == "name" and last.text in _WAITING)
    before = items[-2] if len(items) > 1 else None
    return last.opened == "(" and (is_name(before, *_AFTER_HEAD) or is_operator(before, "\\"))


def _names_a_distribution(arguments: Sequence[Sequence[Node]]) -> bool:
    """Whether the second argument is a distribution, such as "pnorm" or pnorm."""
    second = value_of(arguments[1]) if len(arguments) > 1 else []
    first = second[0] if len(second) == 1 else None
    return isinstance(first, Token) and (
        first.kind == "text" or re.fullmatch(r"p[a-z]{1,7}", first.text) is not None
    )


def _texts(arguments: Sequence[Sequence[Node]]) -> tuple[str, ...] | None:
    """The texts of the id that `declare` is given around what is filled in; `None` where it may be any."""
    given = next((each[2:] for each in arguments if is_named_argument(each) and is_name(each[0], "id")), None)
    match given:
        case [Token(kind="text", text=text)]:
            return (text,)
        case [Token(text="paste0"), Group(items=items)]:
            parts = [""]
            for each in split(items, ","):
                match each:
                    case [Token(kind="text", text=text)]:
                        parts[-1] += text
                    case _:
                        parts.append("")
            return tuple(parts) if any(parts) else None
        case _:
            return None
