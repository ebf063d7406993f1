"""What plans have promised through time: a promise that stood when results came is not undone by a later edit.

What counts of a plan is what was frozen for any result that names it, in the tree or earlier in the history; where
none does, what it says now. A plan that is gone counts still if it was sealed, or a result named it, save for what
was reported while it was there: a study may be put away whole.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace
from pathlib import Path

from gatecheck.fetching import contents_advice, history_advice
from gatecheck.globs import matches
from gatecheck.history.records import Recorded, hypothesis_of, record_versions
from gatecheck.history.walk import History
from gatecheck.model.plan import Hypothesis, Plan
from gatecheck.model.plan_settings import PlanSettings
from gatecheck.model.promise import PlanInTree, Promise
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Place, Problem
from gatecheck.plans.order import First, Governed, Line, Version, in_force
from gatecheck.plans.reading import may_be_plan
from gatecheck.plans.seal import fits, seal_path
from gatecheck.plans.store import Store

_UNKNOWN = "what plans promised earlier is not known, as {}"


@struct
class Ever:
    """The plans with all that they promised, sorted by path, and what keeps that from being known."""

    plans: tuple[PlanInTree, ...]
    unknown: tuple[Problem, ...] = ()


def promised_ever(
    root: Path,
    history: History | None,
    settings: PlanSettings,
    here: Sequence[PlanInTree],
    promises: Sequence[Promise],
) -> Ever:
    """Return the plans `here`, and those that the history had, with what they promised to any result.

    Parameters
    ----------
    history
        The first-parent line of the base, or of the checked-out commit where there is none; `None` for a folder in
        no repository.
    here
        The plans of the tree and of the base, one for each path.
    promises
        What stood behind the records of the tree.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    plans = {one.path: one for one in here}
    if history is None:
        return Ever(_together(plans, promises, {}))
    order = {commit.id: index for index, commit in enumerate(history.commits)}
    said = sorted(promises, key=lambda one: order.get(one.frozen_at or "", len(order)))
    if history.cut_at:
        why = f"the history in this clone is cut at {history.cut_at[0][:12]}"
        return Ever(_together(plans, said, {}), (_unknown(why, history_advice(root)),))
    past = _Past(Store(root, history, settings), Line(history), plans)
    gone = {path: one for path in past.gone if (one := past.put_away(path)) is not None}
    frozen = {path: past.frozen(path) for path in (*plans, *gone)}
    every = _together({**plans, **gone}, said, frozen)
    left = (past.not_answered(one) if one.path in gone else one for one in every)
    unknown: tuple[Problem, ...] = ()
    if past.recorded.missing:
        clone, advice = contents_advice(root)
        unknown = (_unknown(f"an earlier file is not in {clone}", advice),)
    return Ever(tuple(one for one in left if one.plan.hypotheses or one.path in plans), unknown)


def _unknown(why: str, advice: str) -> Problem:
    return Problem(Place("."), _UNKNOWN.format(why), advice)


def _together(
    plans: Mapping[str, PlanInTree], promises: Sequence[Promise], frozen: Mapping[str, Plan | None]
) -> tuple[PlanInTree, ...]:
    """Each plan with the hypotheses of all its frozen versions; the one that its own result answers goes first."""
    return tuple(
        _with_all(plans[path], [one for one in promises if one.file == path], frozen.get(path))
        for path in sorted(plans)
    )


def _with_all(plan: PlanInTree, promises: Sequence[Promise], frozen: Plan | None) -> PlanInTree:
    versions = [one.plan for one in promises if one.plan is not None]
    if not versions and frozen is None:
        return plan
    stood = [*versions, *([frozen] if frozen is not None else [])]
    hypotheses: dict[str, Hypothesis] = {}
    for each in (one for version in stood for one in version.hypotheses):
        hypotheses.setdefault(each.id, each)
    hypotheses |= {one.hypothesis.id: one.hypothesis for one in reversed(promises) if one.hypothesis is not None}
    digest = next((one.digest for one in promises if one.digest), plan.digest)
    every = tuple(hypotheses.values())
    return PlanInTree(plan.path, plan.line, replace(stood[0], hypotheses=every), digest, plan.gone_since)


class _Past:
    """What the history of the base has of plans, and of the results that name them."""

    def __init__(self, store: Store, line: Line, here: Mapping[str, PlanInTree]) -> None:
        self._store = store
        self._line = line
        self._here = here
        changed = {change.path for commit in line.history.commits for change in commit.changes}
        plans = {path for path in changed if may_be_plan(path) and matches(store.settings.include, path)}
        before = plans - line.names_of(here)
        renamed = {one.path for path in before for one in line.versions_of(path) if one.path != path}
        #: The paths of files that no plan of the tree is by another name.
        self.gone = sorted(before - renamed)
        store.load(one for path in (*here, *self.gone) for one in line.versions_of(path))
        self.recorded = self._results()

    def _results(self) -> Recorded:
        """The records that name a hypothesis of any version of these plans, wherever they stood."""
        named = {
            (name, identifier)
            for path in (*self._here, *self.gone)
            for name in self._line.names_of({path})
            for identifier in (None, *(each.id for one in self._versions(path) for each in one.hypotheses))
        }
        if not named:
            return Recorded({}, (), 0)
        return record_versions(self._store.root, self._line.history, frozenset(), hypotheses=frozenset(named))

    def _versions(self, path: str) -> Iterator[Plan]:
        for version in self._line.versions_of(path):
            plan = self._plan_in(version)
            if plan is not None:
                yield plan

    def _plan_in(self, version: Version) -> Plan | None:
        return None if version.blob is None else self._store.plan_in(version).plan

    def _answers(self, path: str) -> Iterator[tuple[First, str | None]]:
        """Where a record names the plan at `path`, and which hypothesis."""
        names = self._line.names_of({path})
        for versions in self.recorded.by_id.values():
            for one in versions:
                asked = hypothesis_of(one.record)
                if asked is not None and asked[0] in names:
                    yield (one.index, one.path), asked[1]

    def frozen(self, path: str) -> Plan | None:
        """Return the plan as it stood when the first result named it; `None` where none has."""
        first = min((at for at, _ in self._answers(path)), default=None)
        if first is None:
            return None
        version = self._line.frozen(path, Governed(frozenset(), frozenset(), first)).version
        return None if version is None else self._plan_in(version)

    def put_away(self, path: str) -> PlanInTree | None:
        """Return the last version of a plan that is gone, if it was final: sealed, or named by a result."""
        made = self._line.versions_of(path)
        last = next(one for one in reversed(made) if one.blob is not None)
        plan = self._store.plan_in(last)
        if plan.plan is None or any(plan.plan.id == one.plan.id for one in self._here.values()):
            return None
        end = made[-1].index if made[-1].blob is None else len(self._line.history.commits)
        sealed = in_force(self._line.versions_of(seal_path(path)), end)
        seal = None if sealed is None else self._store.seal_in(sealed)
        final = seal is not None and fits(seal, last.path, plan.plan.id, self._store.digest_of(plan))
        if not final and next(self._answers(path), None) is None:
            return None
        gone = made[-1].commit if made[-1].blob is None else None
        return PlanInTree(path, plan.line, plan.plan, self._store.whole_digest_of(plan), gone)

    def not_answered(self, plan: PlanInTree) -> PlanInTree:
        """Return a plan that is gone without the hypotheses that a record answered while it was there."""
        reported = {name for _, name in self._answers(plan.path)}
        hypotheses = plan.plan.hypotheses
        if None in reported and len(hypotheses) == 1:
            hypotheses = ()
        left = tuple(one for one in hypotheses if one.id not in reported)
        return replace(plan, plan=replace(plan.plan, hypotheses=left))
