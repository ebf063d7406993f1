"""The hypothesis tests that analysis code calls, as a reading of its text finds them."""

from __future__ import annotations

from gatecheck.model.struct import struct


@struct
class CalledTest:
    """One place in code that calls a hypothesis test.

    `name` is how the code writes it, `test` what the trade calls it; `None` where it stands for any, as a fit does
    and one of several that a condition chooses from. `line` counts from 1, in a notebook within the `cell`. It is
    made `known` times at least, and with `more` possibly more often. `declared` is true where its result goes to
    `declare`; `ids` are then the ids that are given there, each as the texts around what the code fills in.
    """

    name: str
    test: str | None
    line: int
    cell: int | None
    known: int
    more: bool
    declared: bool
    ids: tuple[tuple[str, ...], ...]


@struct
class NotRead:
    """What could not be read of a code file, and why: a line of the file, or of one `cell`."""

    why: str
    line: int = 1
    cell: int | None = None


@struct
class CodeFile:
    """One file of code: its tests in order, how many checks of assumptions it calls, and what was not read.

    `line` is that of its first test without a declaration, in the file itself.
    """

    path: str
    tests: tuple[CalledTest, ...]
    checks: int = 0
    not_read: tuple[NotRead, ...] = ()
    line: int = 1


@struct
class CodeRead:
    """The code files that call hypothesis tests or could not be read, by path; `names` are all known tests."""

    files: tuple[CodeFile, ...]
    names: frozenset[str]
