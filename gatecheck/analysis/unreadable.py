"""Code that cannot be read."""

from __future__ import annotations


class Unreadable(Exception):  # noqa: N818  # it is what the text is
    """A text that is no code of its language: the line, and what is wrong after the words "the code"."""

    def __init__(self, line: int, why: str) -> None:
        super().__init__(why)
        self.line = line
        self.why = why
