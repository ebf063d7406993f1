"""Python code as a syntax tree: parsed once, and walked over often."""

from __future__ import annotations

import ast
import warnings

from gatecheck.analysis.unreadable import Unreadable

#: Fields that hold texts, numbers, signs such as `+` and the roles of names, and no code.
_WITHOUT_CODE = frozenset({
    "arg", "asname", "attr", "conversion", "ctx", "id", "is_async", "kind", "level", "module", "op", "ops",
    "simple", "type_comment",
})  # fmt: skip


class _Parts(dict[type[ast.AST], tuple[str, ...]]):
    """By the kind of a node its fields that may hold code, learned as kinds are met."""

    def __missing__(self, kind: type[ast.AST]) -> tuple[str, ...]:
        self[kind] = tuple(part for part in kind._fields if part not in _WITHOUT_CODE)
        return self[kind]


_PARTS = _Parts({ast.Constant: ()})


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


def nodes(node: ast.AST) -> list[ast.AST]:
    """Return a node and all that is inside, what is nested less first, but for signs and the roles of names.

    Most of the time of a reading goes into this, so that it calls nothing for a node.
    """
    found = [node]
    for each in found:  # noqa: PLR1702  # see above
        for part in _PARTS[each.__class__]:
            value = getattr(each, part)
            if isinstance(value, ast.AST):
                found.append(value)
            elif value.__class__ is list:
                for one in value:
                    if isinstance(one, ast.AST):
                        found.append(one)  # noqa: PERF401  # a list made for each would take longer
    return found


def children(node: ast.AST) -> list[ast.AST]:
    """Return the parts of a node in the order of the text, but for signs and the roles of names."""
    found: list[ast.AST] = []
    for part in _PARTS[node.__class__]:
        value = getattr(node, part)
        if isinstance(value, ast.AST):
            found.append(value)
        elif value.__class__ is list:
            found += [each for each in value if isinstance(each, ast.AST)]
    return found
