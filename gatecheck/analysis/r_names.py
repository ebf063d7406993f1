"""What names stand for in R code: functions of libraries, and vectors whose length is written in the text."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Iterable, Sequence
from itertools import pairwise

from gatecheck.analysis.catalogue import Known, libraries
from gatecheck.analysis.r_tokens import Group, Node, Token, everything, is_name, is_operator, split

_LOADING = frozenset({"library", "p_load", "require", "requireNamespace"})
_KEEPING_LENGTH = frozenset({"names", "rev", "seq_along", "sort", "unique"})
#: Functions of base R and MASS that draw random numbers, from the help pages of their distributions.
_DRAWING = frozenset({
    "rbeta", "rbinom", "rcauchy", "rchisq", "replicate", "rexp", "rf", "rgamma", "rgeom", "rhyper", "rlnorm",
    "rlogis", "rmultinom", "rmvnorm", "rnbinom", "rnorm", "rpois", "rt", "runif", "rweibull", "mvrnorm", "sample",
    "sample.int", "simulate",
})  # fmt: skip
_WHOLE = re.compile(r"[0-9]{1,9}")
#: The value of a name is looked at no further, in tokens.
_LONGEST_VALUE = 4


def draws(items: Sequence[Node]) -> bool:
    """Whether random numbers are drawn somewhere inside."""
    for inner in everything(items):
        for first, second in pairwise(inner):
            if is_name(first, *_DRAWING) and isinstance(second, Group) and second.opened == "(":
                return True
    return False


class RNames:
    """The names of a file, from all that it loads and assigns, wherever that stands."""

    def __init__(self, trees: Iterable[Sequence[Node]]) -> None:
        self._loaded: set[str] = set()
        self._bound: Counter[str] = Counter()
        self._literals: dict[str, Sequence[Node]] = {}
        for tree in trees:
            for inner in everything(tree):
                self._note(inner)

    def _note(self, items: Sequence[Node]) -> None:
        for at, each in enumerate(items):
            before = items[at - 1] if at else None
            if isinstance(each, Group) and is_name(before, *_LOADING):
                self._loaded |= {one.text for one in each.items if isinstance(one, Token)}
            elif is_operator(each, "<-", "<<-", "=", "in") or is_name(each, "in"):
                self._assigned(before, items[at + 1 : at + 1 + _LONGEST_VALUE])

    def _assigned(self, target: Node | None, value: Sequence[Node]) -> None:
        if isinstance(target, Token):
            self._bound[target.text] += 1
            self._literals[target.text] = _until_end(value)

    def known(self, name: str, package: str | None) -> Known | None:
        """Return what a function is, in that package or among those that the file loads."""
        for library in libraries("r"):
            loaded = library.attached or library.prefix in self._loaded
            if (library.prefix == package or (package is None and loaded)) and name in library.functions:
                return library.functions[name]
        return None

    def length(self, items: Sequence[Node]) -> int | None:
        """Return how many members an expression has, where the text tells it."""
        match items:
            case [Token(kind="number", text=first), Token(text=":"), Token(kind="number", text=last)]:
                return _length_of_range(first, last)
            case [Token(kind="name", text=name)]:
                value = self._literals.get(name, ())
                return self.length(value) if self._bound[name] == 1 and _is_written_out(value) else None
            case [Token(kind="name", text="c"), Group(items=members)]:
                return _length_of_vector(members)
            case [Token(kind="name", text="list"), Group(items=members)]:
                return len(split(members, ",")) if members else None
            case [Token(kind="name", text=function), Group(items=members)] if function in _KEEPING_LENGTH:
                return self.length(members)
            case _:
                return None


def _is_written_out(value: Sequence[Node]) -> bool:
    """Whether a value is a vector or a range; `x <- rev(x)` tells no length."""
    return len(value) > 1 and (is_name(value[0], "c", "list") or is_operator(value[1], ":"))


def _until_end(items: Sequence[Node]) -> Sequence[Node]:
    """What stands before the end of the statement or argument."""
    for at, each in enumerate(items):
        if is_operator(each, ",", ";") or (isinstance(each, Token) and each.kind == "newline"):
            return items[:at]
    return items


def _length_of_range(first: str, last: str) -> int | None:
    ends = [end.removesuffix("L") for end in (first, last)]
    if not all(_WHOLE.fullmatch(end) for end in ends):
        return None
    return abs(int(ends[1]) - int(ends[0])) + 1


def _length_of_vector(members: Sequence[Node]) -> int | None:
    """The number of texts and numbers in `c(...)`; what else it holds may itself have several members."""
    parts = split(members, ",")
    return len(parts) if all(map(_is_single, parts)) else None


def _is_single(part: Sequence[Node]) -> bool:
    match part:
        case [Token(kind="text" | "number")] | [Token(), Token(text="="), Token(kind="text" | "number")]:
            return True
        case [Token(text="-"), Token(kind="number")]:
            return True
        case _:
            return False
