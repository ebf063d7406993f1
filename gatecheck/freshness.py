"""What results were made from, as the tree and its history have it."""

from __future__ import annotations

import math
import os
from collections.abc import Sequence
from pathlib import Path

from gatecheck import git
from gatecheck.compare.freshness import Order, expected_inputs, freshness_of
from gatecheck.history.walk import history_of
from gatecheck.model.found import Found
from gatecheck.model.freshness import Freshness


def freshness(root: Path, found: Sequence[Found], asked: Sequence[bool]) -> tuple[Freshness, ...]:
    """Return what stands behind each record of `found` in the tree at `root`.

    Files are read, and git is asked, for the records that are `asked` for alone; of the others nothing is said.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    wanted = [one for one, each in zip(found, asked, strict=True) if each]
    if not wanted:
        return tuple(Freshness() for _ in found)
    from gatecheck.scan.hashes import sha256_of  # noqa: PLC0415  # costs start-up time where the rule is off

    hashes = sha256_of(root, expected_inputs(wanted))
    coded = any(one.record.provenance is not None and one.record.provenance.code for one in wanted)
    facts = iter(freshness_of(wanted, hashes, _order_of_changes(root) if coded else _unknown))
    return tuple(next(facts) if each else Freshness() for each in asked)


def _unknown(_: str) -> float | None:
    return None


def _order_of_changes(root: Path) -> Order:
    """The order of the changes on the line of first parents; what is not committed yet comes last.

    What a merge brings in together counts as changed together.
    """
    if git.toplevel(root) is None:
        return _unknown
    history = history_of(root)
    pending, cut = _pending(root), set(history.cut_at)

    def place(path: str) -> float | None:
        if path in pending:
            return math.inf
        last = history.last_change(path)
        return -math.inf if last is not None and history.commits[last].id in cut else last

    return place


def _pending(root: Path) -> frozenset[str]:
    """The files below `root` that differ from the last commit, or that git does not track yet."""
    asked = ("status", "--porcelain", "-z", "--no-renames", "--untracked-files=all", "--", ".")
    told = os.fsdecode(git.checked(root, "status", *git.run(root, *asked))).split("\0")[:-1]
    prefix = os.fsdecode(git.checked(root, "rev-parse", *git.run(root, "rev-parse", "--show-prefix")))
    # Two letters and a space stand before the path, which is relative to the top of the repository.
    return frozenset(entry[3:].removeprefix(prefix.removesuffix("\n")) for entry in told)
