"""What a history shows of one record: its results through time, and which of them are looks at growing data."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Literal

from gatecheck.model.record import Record
from gatecheck.model.shown import decimal
from gatecheck.model.struct import struct

#: What a result is beside the earlier ones: the first, or other numbers from more units, is a look; the same
#: numbers are a rerun, and with another p beside them that p is told otherwise; other numbers from as many units,
#: or from fewer, come from other data or other code.
Change = Literal["look", "rerun", "retold", "other", "smaller", "unsized"]

ClaimChange = Literal["kept", "added", "changed", "taken out"]

_MOST_TOLD = 8
_SAME_SHARE = 0.01


def day_of(time: int) -> str:
    """Return the date in UTC of `time`, in seconds since 1970, such as 2031-04-02; git lets it be anything."""
    import datetime as dt  # noqa: PLC0415  # costs start-up time, and few verdicts tell a date

    try:
        return dt.datetime.fromtimestamp(time, dt.UTC).strftime("%Y-%m-%d")
    except (OverflowError, ValueError, OSError):
        return "no date"


@struct
class Ancestry:
    """Which commits of a history lead to which: the parents of each commit, by its id."""

    parents: Mapping[str, tuple[str, ...]]

    def leads_to(self, earlier: str, later: str) -> bool:
        """Whether `later` is the commit `earlier` or comes after it; not where the history does not hold them."""
        waiting, passed = [later], set[str]()
        while waiting:
            name = waiting.pop()
            if name in passed or name not in self.parents:
                continue
            if name == earlier:
                return True
            passed.add(name)
            waiting.extend(self.parents[name])
        return False

    def stood_before(self, earlier: str, later: str) -> bool:
        """Whether `later` found `earlier` on its own branch, and did not bring it along by a merge."""
        return any(self.leads_to(earlier, parent) for parent in self.parents.get(later, ())[:1])


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
    what mends it. `gaps` counts earlier texts that name the record and can no longer be read. `ancestry` is that of
    the commits.
    """

    results: tuple[Seen, ...]
    known: bool = True
    why: str = ""
    advice: str = ""
    gaps: int = 0
    ancestry: Ancestry | None = None

    @property
    def looks(self) -> tuple[Seen, ...]:
        """The results that are looks at growing data."""
        return tuple(one for one in self.results if one.change == "look")

    @property
    def information(self) -> tuple[float, ...]:
        """The number of units at each look, rising; empty where one of them does not tell it, or tells none."""
        sizes = [one.size for one in self.looks if one.size]
        return tuple(sorted(sizes)) if len(sizes) == len(self.looks) else ()


def uneven_spacing(information: Sequence[float]) -> str:
    """Say how information grew from look to look, such as `20 : 30 : 100`; empty where it did by equal steps."""
    looks, last = len(information), information[-1]
    if all(abs(each / last - at / looks) <= _SAME_SHARE for at, each in enumerate(information, 1)):
        return ""
    told = [decimal(each) for each in information]
    return " : ".join(told if looks <= _MOST_TOLD else (*told[: _MOST_TOLD - 2], "...", told[-1]))


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

    `error` is the real type I error of its looks, each at level `alpha` of one or two `sides`, if no boundary was
    planned for them. `planned` says in sentences what was planned for them, and is empty where nothing was.
    `assumed` says under which alternative and prior the risks are. `maybe_before` names ids that the history had
    for the same hypothesis and the tree no longer has, where they would add no look.
    """

    id: str
    steps: tuple[Step, ...]
    looks: LooksSeen
    alpha: float
    sides: int
    error: float
    planned: str
    in_tree: bool
    assumed: tuple[tuple[str, float], ...] = ()
    maybe_before: tuple[str, ...] = ()
    unreadable: tuple[Unreadable, ...] = ()
