"""R code as a tree of brackets: what is a name, a text, a number or an operator, and what stands inside of what.

That is all that finding calls needs. The tokens are those of the R Language Definition, section 10.3.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from typing import Literal

from gatecheck.analysis.unreadable import Unreadable
from gatecheck.model.struct import struct

TokenKind = Literal["name", "text", "number", "operator", "newline"]
#: Deeper nesting than this is refused.
DEEPEST = 100

_TOKEN = re.compile(
    r"""(?P<skipped>[^\S\n]+|\#[^\n]*)
    |(?P<raw>[rR](?P<quote>["'])(?P<dashes>-*)(?P<bracket>[(\[{]))
    |(?P<text>"[^"\\]*(?:\\.[^"\\]*)*"|'[^'\\]*(?:\\.[^'\\]*)*')
    |(?P<quoted>`[^`\n]+`)
    |(?P<number>(?:0[xX][0-9a-fA-F]+|\d+\.?\d*(?:[eE][+-]?\d+)?|\.\d+(?:[eE][+-]?\d+)?)[Li]?)
    |(?P<name>[^\W\d_][\w.]*|\.[\w.]*)
    |(?P<newline>\n)
    |(?P<operator>%[^%\n]*%|<<-|->>|<-|->|\|>|:::|::|:=|[<>=!]=|&&|\|\||[^\w\s"'`])""",
    re.VERBOSE | re.DOTALL,
)
_CLOSING = {"(": ")", "[": "]", "{": "}"}


@struct
class Token:
    """One token; a name in backticks and a text stand without their quotes."""

    kind: TokenKind
    text: str
    offset: int


@struct
class Group:
    """What stands between two brackets; ends of lines are kept between braces, where they end statements."""

    opened: str
    items: list[Node]
    offset: int


Node = Token | Group


def tree_of(text: str) -> list[Node]:
    """Return the tree of R code.

    Raises
    ------
    Unreadable
        A text or a bracket does not end, or the code is nested too deep.
    """
    top = Group("{", [], 0)
    open_groups = [top]
    for token in _tokens(text):
        if token.kind == "operator" and token.text in _CLOSING:
            if len(open_groups) > DEEPEST:
                raise Unreadable(_line(text, token.offset), f"is nested more than {DEEPEST} deep")
            inner = Group(token.text, [], token.offset)
            open_groups[-1].items.append(inner)
            open_groups.append(inner)
        elif token.kind == "operator" and token.text in ")]}":
            if len(open_groups) == 1 or _CLOSING[open_groups[-1].opened] != token.text:
                raise Unreadable(_line(text, token.offset), "has a bracket that closes none")
            open_groups.pop()
        elif token.kind != "newline" or open_groups[-1].opened == "{":
            open_groups[-1].items.append(token)
    if len(open_groups) > 1:
        raise Unreadable(_line(text, open_groups[-1].offset), "has a bracket that is not closed")
    return top.items


def _tokens(text: str) -> Iterator[Token]:
    at = 0
    while at < len(text):
        found = _TOKEN.match(text, at)
        if found is None:
            if text[at] in "\"'`":
                raise Unreadable(_line(text, at), "has a text that does not end")
            at += 1  # a sign that R does not know, such as a byte of another encoding
            continue
        at = found.end()
        if found["raw"] is not None:
            closing = f"{_CLOSING[found['bracket']]}{found['dashes']}{found['quote']}"
            end = text.find(closing, at)
            if end < 0:
                raise Unreadable(_line(text, found.start()), "has a text that does not end")
            yield Token("text", text[at:end], found.start())
            at = end + len(closing)
        elif found["skipped"] is None:
            yield _token(found)


def _token(found: re.Match[str]) -> Token:
    kind, text = found.lastgroup, found[0]
    match kind:
        case "text":
            return Token("text", text[1:-1], found.start())
        case "quoted":
            return Token("name", text[1:-1], found.start())
        case "name" | "number" | "newline":
            return Token(kind, text, found.start())
        case _:
            return Token("operator", text, found.start())


def _line(text: str, offset: int) -> int:
    return text.count("\n", 0, offset) + 1


def is_name(node: Node | None, *texts: str) -> bool:
    """Whether a node is a name, one of `texts` where any are given."""
    return isinstance(node, Token) and node.kind == "name" and (not texts or node.text in texts)


def is_operator(node: Node | None, *texts: str) -> bool:
    """Whether a node is one of these operators."""
    return isinstance(node, Token) and node.kind == "operator" and node.text in texts


def split(items: Sequence[Node], *separators: str) -> list[list[Node]]:
    """Split at operators, such as the commas between arguments; empty parts are kept."""
    parts: list[list[Node]] = [[]]
    for each in items:
        if is_operator(each, *separators):
            parts.append([])
        else:
            parts[-1].append(each)
    return parts


def everything(items: Sequence[Node]) -> Iterator[list[Node]]:
    """Yield the items, and those of every group inside."""
    waiting = [list(items)]
    while waiting:
        inner = waiting.pop()
        yield inner
        waiting.extend(each.items for each in inner if isinstance(each, Group))


def flat(items: Sequence[Node]) -> Iterator[Node]:
    """Yield every token and group inside, in the order of the text."""
    waiting = list(reversed(items))
    while waiting:
        each = waiting.pop()
        yield each
        if isinstance(each, Group):
            waiting.extend(reversed(each.items))


def opens(node: Node, bracket: str) -> bool:
    """Whether a node is a group that this bracket opens."""
    return isinstance(node, Group) and node.opened == bracket


def takes(items: Sequence[Node], at: int, parts: frozenset[str] = frozenset()) -> bool:
    """Whether a part is taken there, such as `$p.value`: one of `parts`, where any are given."""
    if at + 1 >= len(items) or not is_operator(items[at], "$", "@"):
        return False
    called = at + 2 < len(items) and opens(items[at + 2], "(")
    return is_name(items[at + 1], *parts) and not called


def is_function(items: Sequence[Node], at: int = 0) -> bool:
    """Whether a function starts there, `function(x) …` or its short form."""
    if at + 1 >= len(items) or not opens(items[at + 1], "("):
        return False
    return is_name(items[at], "function") or is_operator(items[at], "\\")


def is_named_argument(argument: Sequence[Node]) -> bool:
    """Whether an argument has a name, as in `data = plots`."""
    return len(argument) > 1 and is_operator(argument[1], "=")


def value_of(argument: Sequence[Node]) -> Sequence[Node]:
    """An argument without its name."""
    return argument[2:] if is_named_argument(argument) else argument
