"""What a history shows of one record: its results through time, and which of them are looks at growing data."""

from __future__ import annotations

from typing import Literal

from gatecheck.model.record import Record
from gatecheck.model.struct import struct

#: What a result is beside the earlier ones: the first, or other numbers from more units, is a look; the same
#: numbers are a rerun; other numbers from as many units, or from fewer, come from other data or other code.
Change = Literal["look", "rerun", "other", "smaller", "unsized"]

ClaimChange = Literal["kept", "added", "changed", "taken out"]


def day_of(time: int) -> str:
    """Return the date in UTC of `time`, in seconds since 1970, such as 2031-04-02; git lets it be anything."""
    import datetime as dt  # noqa: PLC0415  # costs start-up time, and few verdicts tell a date

    try:
        return dt.datetime.fromtimestamp(time, dt.UTC).strftime("%Y-%m-%d")
    except (OverflowError, ValueError, OSError):
        return "no date"


@struct
class Seen:
    """One result of a record as it once stood.

    `commit` is `None` for the tree as it is judged. `time` is the committer's, in seconds since 1970, free text to
    git and no evidence. `size` is the number of units, or the degrees of freedom where only these are always told;
    `None` where it is not told. `on_line` is false off the line of first parents.
    """

    commit: str | None
    time: int | None
    record: Record
    size: float | None
    change: Change
    on_line: bool = True

    @property
    def day(self) -> str:
        """The date of the commit in UTC."""
        return "" if self.time is None else day_of(self.time)


@struct
class LooksSeen:
    """The distinct results of one record, oldest first.

    Where not all of them are `known`, there may have been more looks: `why` says so in a sentence, and `advice`
    what mends it. `gaps` counts earlier texts that name the record and can no longer be read.
    """

    results: tuple[Seen, ...]
    known: bool = True
    why: str = ""
    advice: str = ""
    gaps: int = 0

    @property
    def looks(self) -> tuple[Seen, ...]:
        """The results that are looks at growing data."""
        return tuple(one for one in self.results if one.change == "look")


@struct
class Step:
    """One state of a record in its course, and what changed in it.

    `commit`, `size` and `change` are as in `Seen`; `day` is the date of the commit. `risk` is the false positive
    risk of the result, `None` where it cannot be weighed. `claim` says what happened to the claim, `id_before` is
    the id that it had.
    """

    commit: str | None
    day: str
    size: float | None
    statistic: str
    p: str
    risk: float | None
    change: Change
    first: bool
    claim: ClaimChange
    id_before: str | None
    on_line: bool


@struct
class Unreadable:
    """An earlier text that declares the record and cannot be read."""

    commit: str
    path: str
    message: str


@struct
class Course:
    """A record through the history, oldest first.

    `error` is the real type I error of its looks, each at level `alpha`, if no boundary was planned for them.
    `assumed` says under which alternative and prior the risks are. `maybe_before` names ids that stood in its file
    for the same hypothesis before it did.
    """

    id: str
    steps: tuple[Step, ...]
    looks: LooksSeen
    alpha: float
    error: float
    in_tree: bool
    assumed: tuple[tuple[str, float], ...] = ()
    maybe_before: tuple[str, ...] = ()
    unreadable: tuple[Unreadable, ...] = ()
