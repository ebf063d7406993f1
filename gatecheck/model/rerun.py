"""What a rerun found: what could not be run, and how the records from the run compare with those of the tree."""

from __future__ import annotations

from gatecheck.model.exit import Exit
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Problem


@struct
class Failure:
    """A notebook or script that did not run to its end: its path, what happened, what to do."""

    path: str
    message: str
    advice: str


@struct
class FieldDifference:
    """One field with both its values; `None` where a record does not have it."""

    field: str
    in_tree: str | None
    from_run: str | None


@struct
class ChangedRecord:
    """A record of which the run gives other values."""

    id: str
    fields: tuple[FieldDifference, ...]


@struct
class Compared:
    """Records by their ids, each in one of the five: sorted, and what the run changed with its fields."""

    equal: tuple[str, ...]
    close: tuple[str, ...]
    changed: tuple[ChangedRecord, ...]
    not_emitted: tuple[str, ...]
    new: tuple[str, ...]

    @property
    def records(self) -> int:
        """The number of records that are known from either side."""
        return sum(map(len, (self.equal, self.close, self.changed, self.not_emitted, self.new)))

    @property
    def same(self) -> bool:
        """Whether the run gives what stands in the tree."""
        return not (self.changed or self.not_emitted or self.new)


@struct
class Rerun:
    """The whole outcome.

    `problems` are records that could not be read, in the tree or from the run; `notes` say what the copy lacks.
    """

    ran: tuple[str, ...]
    failures: tuple[Failure, ...]
    problems: tuple[Problem, ...]
    notes: tuple[str, ...]
    compared: Compared
    tolerance: float

    @property
    def exit(self) -> Exit:
        """What could not be run or read, or no record at all, is never taken for the same."""
        if self.failures or self.problems or not self.compared.records:
            return Exit.CANNOT_JUDGE
        return Exit.STANDS if self.compared.same else Exit.FALLS_SHORT
