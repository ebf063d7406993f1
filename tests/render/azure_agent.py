"""What an agent of Azure Pipelines takes from a log: a reader for tests."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass

#: SOURCE: microsoft/vsts-tasks, logging commands; ``%AZP25`` is from memory.
ESCAPES = {"%3B": ";", "%0D": "\r", "%0A": "\n", "%5D": "]", "%AZP25": "%"}


@dataclass(frozen=True)
class Logged:
    """One issue that was logged: its type, its other properties in order of name, and its message."""

    level: str
    properties: tuple[tuple[str, str], ...]
    message: str


def logged(text: str) -> Iterator[Logged]:
    """Read each line of a log; every command in it must be an issue, and every line a command."""
    for line in re.split(r"\r\n|[\n\r\v\f\x85\u2028\u2029]", text)[:-1]:
        head, command, rest = line.partition("##vso[")
        assert (head, command) == ("", "##vso[")
        listed, _, message = rest.partition("]")
        name, _, pairs = listed.partition(" ")
        assert name == "task.logissue"
        properties = {
            key: unescaped(value) for key, _, value in (pair.partition("=") for pair in pairs.split(";") if pair)
        }
        level = properties.pop("type")
        assert re.search(r"##\w*\[", message) is None
        yield Logged(level, tuple(sorted(properties.items())), unescaped(message))


def unescaped(text: str) -> str:
    """Undo the escapes, in any case of their letters."""
    for escape, character in ESCAPES.items():
        text = re.sub(escape, character, text, flags=re.IGNORECASE)
    return text
