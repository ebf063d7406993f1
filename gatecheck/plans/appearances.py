"""Where a result was first recorded: a record is the same by its id and earlier ids, whatever file it stands in."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from gatecheck.fetching import contents_advice
from gatecheck.history.records import Recorded, versions_with_aliases
from gatecheck.history.walk import History
from gatecheck.model.found import Found
from gatecheck.model.struct import struct
from gatecheck.plans.order import First


@struct
class Appearances:
    """The first appearance of each record; `unread` says what keeps an earlier one from being known, if anything.

    `advice` says what mends that.
    """

    firsts: tuple[First | None, ...]
    unread: str = ""
    advice: str = ""


def appearances(
    root: Path, history: History, found: Sequence[Found], include: Sequence[str], exclude: Sequence[str]
) -> Appearances:
    """Return where `history` first has each of `found` that names a plan, in files that the globs name.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    ids = frozenset(name for one in found if one.record.plan is not None for name in _names(one))
    recorded = versions_with_aliases(root, history, ids, include, exclude)
    index_of = {commit.id: index for index, commit in enumerate(history.commits)} if recorded.gaps else {}
    firsts = tuple(
        None if one.record.plan is None else _first(recorded, recorded.lineage(_names(one)), index_of)
        for one in found
    )
    if not recorded.missing:
        return Appearances(firsts)
    clone, advice = contents_advice(root)
    return Appearances(
        firsts, f"an earlier file is not in {clone}, so whether it holds the result is not known", advice
    )


def _names(one: Found) -> tuple[str, ...]:
    return (one.record.id, *one.record.aliases)


def _first(recorded: Recorded, names: frozenset[str], index_of: dict[str, int]) -> First | None:
    """The first file that holds the record, or that declares a record, names it and cannot be read."""
    read = [(one.index, one.path) for one in recorded.versions(names)[:1]]
    written = [name.encode("utf-8", "surrogatepass") for name in names]
    broken = [
        (index_of[gap.commit.id], gap.path) for gap in recorded.gaps if any(name in gap.content for name in written)
    ]
    return min([*read, *broken], default=None)
