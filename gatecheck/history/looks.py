"""The looks that the history shows of each record of a tree."""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import replace
from pathlib import Path

from gatecheck.fetching import contents_advice, history_advice
from gatecheck.history.records import Gap, Hypothesis, Recorded, Version, hypothesis_of, versions_with_aliases
from gatecheck.history.seen import looks_seen
from gatecheck.history.walk import History, has_history, history_of, line_of
from gatecheck.model.found import Found
from gatecheck.model.looks_seen import LooksSeen
from gatecheck.model.struct import struct
from gatecheck.scan import scan_for

_SHORT = 12
_MOST_NAMED = 3
_NOT_KNOWN = "How many looks were taken is not known ({})."
_GONE = (
    "How many looks were taken is not known: the history held {} for the same hypothesis, and no record here has "
    "such an id or alias."
)
_ALIASES = "name under aliases what are earlier ids of this result, and keep what is a result of its own"


@struct
class Asked:
    """Of which records the looks are asked: what is `found` in the tree at `root`, by the globs of the scan."""

    root: Path
    found: Sequence[Found]
    include: Sequence[str]
    exclude: Sequence[str]


@struct
class Past:
    """The history of `HEAD`, and what it recorded under the ids of some records or for their hypotheses.

    `line` holds the ids of the commits on the line of first parents, `gone` the ids of records that answered a
    hypothesis and that the tree no longer has. `doubt` says what keeps the past from being known, and what mends
    it.
    """

    history: History
    recorded: Recorded
    line: Collection[str]
    gone: Mapping[Hypothesis, frozenset[str]]
    doubt: tuple[str, str] | None


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
    ids = frozenset(name for one in found for name in names_of(one))
    past = past_of(Asked(root, found, include, exclude), ids, base)
    return tuple(looks_of(one, past) for one in found)


def past_of(asked: Asked, ids: frozenset[str], base: str | None) -> Past:
    """Return the past of the records `ids` and of the hypotheses of those found in the tree.

    Raises
    ------
    CannotJudge
        There is no repository, or git fails.
    """
    history = history_of(asked.root, first_parent=False)
    hypotheses = frozenset(each for one in asked.found if (each := hypothesis_of(one.record)) is not None)
    recorded = versions_with_aliases(asked.root, history, ids, asked.include, asked.exclude, hypotheses=hypotheses)
    gone = _gone(asked, recorded, ids)
    return Past(history, recorded, line_of(history, base), gone, doubt_of(asked.root, history, recorded))


def _gone(asked: Asked, recorded: Recorded, ids: frozenset[str]) -> Mapping[Hypothesis, frozenset[str]]:
    """The ids beside `ids` that answered a hypothesis and that no record of the tree has, nor had."""
    others = frozenset(recorded.by_id) - recorded.lineage(ids)
    here = scan_for(asked.root, others, asked.include, asked.exclude) if others else ()
    gone: dict[Hypothesis, frozenset[str]] = {}
    for name in others - {name for one in here for name in recorded.lineage(names_of(one))}:
        for hypothesis in {hypothesis_of(one.record) for one in recorded.by_id[name]}:
            if hypothesis is not None:
                gone[hypothesis] = gone.get(hypothesis, frozenset()) | {name}
    return gone


def looks_of(found: Found, past: Past) -> LooksSeen:
    """Return the looks at a record that was `found` in the tree, with what makes their number uncertain."""
    versions = versions_of(found, past)
    looks = looks_seen(versions, past.line)
    gone = gone_for(found, past)
    if gone:
        earlier = past.recorded.versions(past.recorded.lineage(gone))
        together = looks_seen(sorted((*earlier, *versions), key=lambda one: one.index), past.line)
        if len(together.looks) > len(looks.looks) or (looks.known and not together.known):
            looks = replace(looks, known=False, why=_GONE.format(_listed(gone)), advice=_ALIASES)
    return with_doubts(looks, past, names_of(found))


def gone_for(found: Found, past: Past) -> tuple[str, ...]:
    """Return the ids that the history held for the hypothesis of a record, and that the tree no longer has."""
    hypothesis = hypothesis_of(found.record)
    return () if hypothesis is None else tuple(sorted(past.gone.get(hypothesis, ())))


def names_of(found: Found) -> tuple[str, ...]:
    """Return the id of a record and its earlier ones."""
    return (found.record.id, *found.record.aliases)


def versions_of(found: Found, past: Past) -> tuple[Version, ...]:
    """Return the versions of a record, the one that was `found` in the tree last."""
    now = Version(len(past.history.commits), None, found, found.at.path)
    return (*past.recorded.versions(past.recorded.lineage(names_of(found))), now)


def with_doubts(looks: LooksSeen, past: Past, names: Iterable[str]) -> LooksSeen:
    """Return `looks` with what makes their number uncertain: a history that is cut, contents that are not here."""
    gaps, ancestry = len(gaps_of(past.recorded, names)), past.history.ancestry
    if past.doubt is None:
        return replace(looks, gaps=gaps, ancestry=ancestry)
    why, advice = past.doubt
    return replace(looks, known=False, why=_NOT_KNOWN.format(why), advice=advice, gaps=gaps, ancestry=ancestry)


def gaps_of(recorded: Recorded, names: Iterable[str]) -> tuple[Gap, ...]:
    """Return the texts that cannot be read and that hold one of the ids, or an earlier one."""
    if not recorded.gaps:
        return ()
    lineage = [name.encode("utf-8", "surrogatepass") for name in recorded.lineage(names)]
    return tuple(gap for gap in recorded.gaps if any(name in gap.content for name in lineage))


def doubt_of(root: Path, history: History, recorded: Recorded) -> tuple[str, str] | None:
    """Return what keeps a history from being known, with what mends it; `None` where it is whole.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    if history.cut_at:
        named = _listed([name[:_SHORT] for name in history.cut_at])
        return f"history cut at {named}", f"{history_advice(root)}; with actions/checkout, set `fetch-depth: 0`"
    if recorded.missing:
        files = "an earlier file" if recorded.missing == 1 else f"{recorded.missing} earlier files"
        clone, advice = contents_advice(root)
        return f"the content of {files} is not in {clone}", advice
    return None


def _listed(names: Sequence[str]) -> str:
    more = f" and {len(names) - _MOST_NAMED} more" if len(names) > _MOST_NAMED else ""
    return f"{', '.join(names[:_MOST_NAMED])}{more}"
