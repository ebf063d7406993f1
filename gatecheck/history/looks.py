"""The looks that the history shows of each record of a tree."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import replace
from pathlib import Path

from gatecheck.history.records import Gap, Recorded, Version, versions_with_aliases
from gatecheck.history.seen import looks_seen
from gatecheck.history.walk import History, has_history, history_of, line_of
from gatecheck.model.found import Found
from gatecheck.model.looks_seen import LooksSeen

_SHORT = 12
_MOST_NAMED = 3
_NOT_KNOWN = "How many looks were taken is not known ({})."


def looks_of_records(
    root: Path,
    found: Sequence[Found],
    include: Sequence[str] = ("**",),
    exclude: Sequence[str] = (),
    base: str | None = None,
) -> tuple[LooksSeen | None, ...]:
    """Return what the history of `HEAD` shows of each of the records `found`, whose own values come last in it.

    Every commit that leads to `HEAD` counts, also those of side branches. `include` and `exclude` are the globs of
    the scan; with `base` the tree is judged as a pull request into it. In a folder that is in no repository there
    is no history, and each is `None`.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    if not found or not has_history(root):
        return (None,) * len(found)
    history = history_of(root, first_parent=False)
    ids = frozenset(name for one in found for name in names_of(one))
    recorded = versions_with_aliases(root, history, ids, include, exclude)
    line = line_of(history, base)
    return tuple(
        with_doubts(looks_seen(versions_of(one, history, recorded), line), history, recorded, names_of(one))
        for one in found
    )


def names_of(found: Found) -> tuple[str, ...]:
    """Return the id of a record and its earlier ones."""
    return (found.record.id, *found.record.aliases)


def versions_of(found: Found, history: History, recorded: Recorded) -> tuple[Version, ...]:
    """Return the versions of a record, the one that was `found` in the tree last."""
    now = Version(len(history.commits), None, found, found.at.path)
    return (*recorded.versions(recorded.lineage(names_of(found))), now)


def with_doubts(looks: LooksSeen, history: History, recorded: Recorded, names: Iterable[str]) -> LooksSeen:
    """Return `looks` with what makes their number uncertain: a history that is cut, contents that are not here."""
    gaps = len(gaps_of(recorded, names))
    doubt = doubt_of(history, recorded)
    if doubt is None:
        return replace(looks, gaps=gaps) if gaps else looks
    return replace(looks, known=False, why=_NOT_KNOWN.format(doubt[0]), advice=doubt[1], gaps=gaps)


def gaps_of(recorded: Recorded, names: Iterable[str]) -> tuple[Gap, ...]:
    """Return the texts that cannot be read and that hold one of the ids, or an earlier one."""
    if not recorded.gaps:
        return ()
    lineage = [name.encode("utf-8", "surrogatepass") for name in recorded.lineage(names)]
    return tuple(gap for gap in recorded.gaps if any(name in gap.content for name in lineage))


def doubt_of(history: History, recorded: Recorded) -> tuple[str, str] | None:
    """Return what keeps a history from being known, with what mends it; `None` where it is whole."""
    if history.cut_at:
        named = ", ".join(name[:_SHORT] for name in history.cut_at[:_MOST_NAMED])
        more = f" and {len(history.cut_at) - _MOST_NAMED} more" if len(history.cut_at) > _MOST_NAMED else ""
        advice = "run `git fetch --unshallow origin`; with actions/checkout, set `fetch-depth: 0`"
        return f"history cut at {named}{more}", advice
    if recorded.missing:
        files = "an earlier file" if recorded.missing == 1 else f"{recorded.missing} earlier files"
        advice = "run `git fetch --refetch --no-filter origin`, or clone without --filter"
        return f"the content of {files} is not in this clone, a partial one", advice
    return None
