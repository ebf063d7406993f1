"""What names stand for in Python code: functions of libraries, and lists whose length is written in the text."""

from __future__ import annotations

import ast
import math
from collections import Counter
from collections.abc import Iterable, Sequence
from itertools import chain
from typing import Any

from gatecheck.analysis.catalogue import Known, libraries
from gatecheck.analysis.python_tree import nodes

_DECLARE = frozenset({"gatecheck.declare", "gatecheck.declaring.declare"})
_KEEPING_LENGTH = frozenset({"enumerate", "list", "reversed", "sorted", "tuple", "tqdm"})
_VIEWS = frozenset({"items", "keys", "values"})
_CHANGING = frozenset({
    "add", "append", "clear", "discard", "extend", "insert", "pop", "popitem", "remove", "setdefault", "update",
})  # fmt: skip
#: Methods that draw random numbers, in numpy, scipy, pandas and the standard library (common usage).
_DRAWING = frozenset({
    "choice", "permutation", "permuted", "randint", "randn", "random_sample", "resample", "rvs", "sample",
    "shuffle", "standard_normal",
})  # fmt: skip
_DRAWERS = frozenset({"random", "rng"})
_NAMING = frozenset({
    ast.Assign, ast.AsyncFor, ast.AugAssign, ast.For, ast.Import, ast.ImportFrom, ast.comprehension,
})  # fmt: skip
#: What gives a name something only in the role of a target.
_ROLES = frozenset({ast.Name, ast.Subscript})
#: What a result tells beside its p.
_NO_P = frozenset({"correlation", "intercept", "rvalue", "slope", "statistic"})
#: Where p stands in a result of so many members: (statistic, p), (statistic, p, df), that of a regression line.
_PLACE_OF_P = {2: 1, 3: 1, 4: 1, 5: 3}
_LONGEST_PRODUCT = 1_000_000


def dotted(node: ast.AST) -> str | None:
    """Return the dotted name that an expression is, such as `stats.ttest_ind`."""
    parts = []
    while isinstance(node, ast.Attribute):
        parts.append(node.attr)
        node = node.value
    return ".".join([node.id, *reversed(parts)]) if isinstance(node, ast.Name) else None


def naming(tree: ast.AST) -> list[ast.AST]:
    """Return the parts of code that `Names` is made of: imports, assignments, changes and loops."""
    every: list[Any] = nodes(tree)
    return [
        node
        for node in every
        if (kind := node.__class__) in _NAMING
        or (kind in _ROLES and not isinstance(node.ctx, ast.Load))
        or (kind is ast.Attribute and node.attr in _CHANGING)
    ]


class Names:
    """The names of a file, from all its imports and assignments, wherever they stand."""

    def __init__(self, parts: Iterable[ast.AST]) -> None:
        """Note what `naming` found in the code, in the order of the text."""
        self._stands_for: dict[str, str] = {}
        self._stars: list[str] = []
        self._bound: Counter[str] = Counter()
        self._literals: dict[str, ast.expr] = {}
        self._changed: set[str] = set()
        self._walked_over: set[str] = set()
        for node in parts:
            self._note(node)
        self._found: dict[str, Known | None] = {}
        self._resolved: dict[str, str] = {}
        loaded = {each.partition(".")[0] for each in self._stands_for.values()}
        #: What methods of tables of data are, where a library that is loaded has given them some.
        self.methods = {
            name: library.functions[name]
            for library in libraries("python")
            if library.prefix in loaded
            for name in library.frame_methods
        }

    def _note(self, node: ast.AST) -> None:
        match node:
            case ast.Import():
                self._import(node)
            case ast.ImportFrom(module=str(module)):
                self._import_from(module, node.names)
            case ast.Name():
                self._bound[node.id] += 1
            case ast.Assign(targets=[ast.Name(id=name)], value=value):
                self._literals[name] = value
            case ast.AugAssign(target=ast.Name(id=name)):
                self._changed.add(name)
            case ast.Subscript(value=ast.Name(id=name)) | ast.Attribute(value=ast.Name(id=name)):
                self._changed.add(name)
            case ast.For(iter=walked) | ast.AsyncFor(iter=walked) | ast.comprehension(iter=walked):
                parts = walked.args if isinstance(walked, ast.Call) else [walked]
                self._walked_over |= {each.id for each in parts if isinstance(each, ast.Name)}
            case _:
                pass

    def _import(self, node: ast.Import) -> None:
        for each in node.names:
            name = each.name.partition(".")[0]
            self._stands_for[each.asname or name] = each.name if each.asname else name

    def _import_from(self, module: str, names: Sequence[ast.alias]) -> None:
        for each in names:
            if each.name == "*":
                self._stars.append(module)
            else:
                self._stands_for[each.asname or each.name] = f"{module}.{each.name}"

    def resolved(self, name: str) -> str:
        """Return the full name of what `name` stands for; itself where it is no import."""
        if name not in self._resolved:
            self._resolved[name] = self._resolve(name)
        return self._resolved[name]

    def _resolve(self, name: str) -> str:
        head, dot, rest = name.partition(".")
        # An alias may stand for another one: `ttest = stats.ttest_ind`.
        whole = self._stands_for.get(head)
        value = self._literals.get(head)
        if whole is None and value is not None and self._bound[head] == 1:
            other = dotted(value)
            if other is not None and other.partition(".")[0] in self._stands_for:
                whole = self.resolved(other)
        return name if whole is None else f"{whole}{dot}{rest}"

    def words(self) -> set[str]:
        """Return the names that other code may call a test by, and those of what loops walk over."""
        given = {name for name in {*self._stands_for, *self._literals} if self.known(name) or self.declares(name)}
        return given | self._walked_over

    def known(self, name: str | None) -> Known | None:
        """Return what a dotted name is among the known functions."""
        if name is None:
            return None
        if name not in self._found:
            self._found[name] = self._known(name)
        return self._found[name]

    def _known(self, name: str) -> Known | None:
        whole = self.resolved(name)
        found = _known(whole)
        if found is None and "." not in name and whole == name:
            found = next((one for module in self._stars if (one := _known(f"{module}.{name}"))), None)
        return found

    def declares(self, name: str | None) -> bool:
        """Whether a dotted name is the function that declares results."""
        return name is not None and self.resolved(name) in _DECLARE

    def length(self, node: ast.expr) -> int | None:
        """Return how many members an expression has, where the text tells it."""
        match node:
            case ast.List(elts=members) | ast.Tuple(elts=members):
                return None if any(isinstance(each, ast.Starred) for each in members) else len(members)
            case ast.Dict(keys=keys):
                return None if None in keys else len(keys)
            case ast.Name(id=name):
                return self._length_of_name(name)
            case ast.Call(func=ast.Attribute(value=value, attr=attribute), args=[]) if attribute in _VIEWS:
                return self.length(value)
            case ast.Call(func=function, args=arguments, keywords=keywords):
                return None if keywords else self._length_of_call(dotted(function) or "", arguments)
            case _:
                return None

    def _length_of_name(self, name: str) -> int | None:
        value = self._literals.get(name)
        # A parameter that is made a list of itself, `groups = list(groups)`, has no length here.
        single = self._bound[name] == 1 and name not in self._changed
        if not single or not isinstance(value, ast.List | ast.Tuple | ast.Dict):
            return None
        return self.length(value)

    def _length_of_call(self, name: str, arguments: Sequence[ast.expr]) -> int | None:
        function = self.resolved(name).rpartition(".")[2]
        if function == "range":
            return _length_of_range(arguments)
        if function in _KEEPING_LENGTH and arguments:
            return self.length(arguments[0])
        lengths = [self.length(each) for each in arguments]
        known = [each for each in lengths if each is not None]
        if function == "zip" and len(known) == len(lengths) > 0:
            return min(known)
        if function == "product" and len(known) == len(lengths):
            return min(math.prod(known), _LONGEST_PRODUCT)
        match arguments:
            case [_, ast.Constant(value=int(size))] if function == "combinations" and lengths[0] is not None:
                return min(math.comb(lengths[0], size), _LONGEST_PRODUCT) if size >= 0 else None
        return None


def _length_of_range(arguments: Sequence[ast.expr]) -> int | None:
    ends = [each.value for each in arguments if isinstance(each, ast.Constant) and isinstance(each.value, int)]
    if len(ends) != len(arguments) or not 1 <= len(ends) <= 2:  # noqa: PLR2004  # with a step it is left open
        return None
    return max(0, ends[-1] - (ends[0] if len(ends) > 1 else 0))


def _known(whole: str) -> Known | None:
    whole = whole.removesuffix(".from_formula")
    for library in libraries("python"):
        if whole.startswith(f"{library.prefix}."):
            return library.functions.get(whole.rpartition(".")[2])
    return None


def draws(node: ast.AST) -> bool:
    """Whether random numbers are drawn somewhere inside."""
    return any(isinstance(each, ast.Call) and _draws(each.func) for each in nodes(node))


def _draws(function: ast.expr) -> bool:
    name = dotted(function)
    parts = [] if name is None else name.split(".")
    last = function.attr if isinstance(function, ast.Attribute) else ""
    return last in _DRAWING or (len(parts) > 1 and not _DRAWERS.isdisjoint(parts[:-1]) and last != "default_rng")


def discards_p(node: ast.Attribute | ast.Subscript) -> bool:
    """Whether an expression takes no p from the result in it: `pearsonr(x, y)[0]`, or its statistic."""
    if not isinstance(node.value, ast.Call):
        return False
    if isinstance(node, ast.Attribute):
        return node.attr in _NO_P
    return isinstance(node.slice, ast.Constant) and node.slice.value == 0


def unpacks_no_p(target: ast.expr) -> bool:
    """Whether names that a result is unpacked to leave its p unnamed: `r, _ = pearsonr(x, y)`."""
    if not isinstance(target, ast.Tuple):
        return False
    at = _PLACE_OF_P.get(len(target.elts))
    p = None if at is None else target.elts[at]
    return isinstance(p, ast.Name) and p.id.startswith("_")


def leaves(body: Sequence[ast.stmt]) -> bool:
    """Whether a loop may end early, or pass over a round."""
    inside = chain.from_iterable(map(nodes, body))
    return any(isinstance(each, ast.Break | ast.Continue | ast.Return | ast.Raise) for each in inside)


def names_a_distribution(node: ast.Call) -> bool:
    """Whether the second argument is the name of a distribution, or its cumulative distribution function."""
    given = [*node.args[1:2], *(each.value for each in node.keywords if each.arg == "cdf")]
    return any(
        isinstance(each, ast.Constant) or (isinstance(each, ast.Attribute) and each.attr == "cdf") for each in given
    )


def written(node: ast.expr) -> str:
    """The name under which a model is fitted, as the code writes it."""
    return dotted(node.func if isinstance(node, ast.Call) else node) or "fit"


def texts_of(node: ast.expr) -> tuple[str, ...] | None:
    """The texts of an id around what the code fills in; `None` where it may be any."""
    match node:
        case ast.Constant(value=str(text)):
            return (text,)
        case ast.JoinedStr(values=values):
            parts = [""]
            for each in values:
                if isinstance(each, ast.Constant):
                    parts[-1] += str(each.value)
                else:
                    parts.append("")
            return tuple(parts) if any(parts) else None
        case _:
            return None
