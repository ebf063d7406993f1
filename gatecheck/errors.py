"""What stops the whole gate, as opposed to a problem in one place."""

from __future__ import annotations

_LONGEST = 200


class CannotJudge(Exception):  # noqa: N818  # the sentence that it stands for, "the gate cannot judge"
    """The gate cannot judge at all: `message` says what stands in the way, `advice` what mends it."""

    def __init__(self, message: str, advice: str) -> None:
        super().__init__(f"{message}: {advice}")
        self.message = message
        self.advice = advice


class WrongUsage(Exception):  # noqa: N818  # as its exit status is called
    """The command was called in a way that it does not know."""


def safe(text: str) -> str:
    """Return `text` in printable ASCII and of bounded length, for a message."""
    plain = ascii(text)[1:-1]
    return plain if len(plain) <= _LONGEST else plain[:_LONGEST] + "…"
