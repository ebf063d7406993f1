"""What stops the whole gate, as opposed to a problem in one place."""

from __future__ import annotations


class CannotJudge(Exception):  # noqa: N818  # the sentence that it stands for, "the gate cannot judge"
    """The gate cannot judge at all: `message` says what stands in the way, `advice` what mends it."""

    def __init__(self, message: str, advice: str) -> None:
        super().__init__(f"{message}: {advice}")
        self.message = message
        self.advice = advice


class WrongUsage(Exception):  # noqa: N818  # as its exit status is called
    """The command was called in a way that it does not know."""
