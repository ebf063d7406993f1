"""What stands behind each record that names a plan: the promise as it was frozen, and how good its evidence is."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any

from gatecheck import git
from gatecheck.history.walk import History
from gatecheck.model.found import Found
from gatecheck.model.plan import Hypothesis, Plan
from gatecheck.model.plan_settings import PlanSettings
from gatecheck.model.promise import Promise
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Problem
from gatecheck.plans.appearances import Appearances, appearances
from gatecheck.plans.canonical import filled, has_open_slots, whole_digest_of
from gatecheck.plans.grade import Graded, Question, cut, frozen_in, grade
from gatecheck.plans.order import First, Governed, Line, Version
from gatecheck.plans.reading import PlanFile, tidy
from gatecheck.plans.seal import seal_path
from gatecheck.plans.store import Store
from gatecheck.schema.read import nearest_advice, read, shown

_NAME_IT = "name a plan that is there, by its path from the judged folder"


@struct
class Promised:
    """A promise for each record, `None` where it names no plan, and what is wrong with the plans named."""

    promises: tuple[Promise | None, ...]
    problems: tuple[Problem, ...]


@struct
class _Asked:
    """What one record asks: the path of its plan, `None` if outside; what is governed; when it was made."""

    path: str | None
    governed: Governed
    made_at: str | None


def promises(
    root: Path,
    found: Sequence[Found],
    history: History | None,
    settings: PlanSettings,
    *,
    include: Sequence[str] = ("**",),
    exclude: Sequence[str] = (),
) -> Promised:
    """Return what was promised for each of `found`, by the history of the base.

    Parameters
    ----------
    root
        The judged folder; plans in its work tree count where no commit of `history` has them.
    history
        The first-parent line of the base, or of the checked-out commit where there is none; `None` for a folder
        in no repository.
    include, exclude
        The globs of the files in which earlier results are looked for.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    whole = history is not None and not history.cut_at
    seen = (
        appearances(root, history, found, include, exclude)
        if history and whole
        else Appearances((None,) * len(found))
    )
    promiser = _Promiser(Store(root, history, settings), seen)
    asked = [_asked(one, first) for one, first in zip(found, seen.firsts, strict=True)]
    promiser.load([one for one in asked if one is not None])
    made = tuple(
        None
        if question is None or one.record.plan is None
        else promiser.promise(question, one.record.plan.file, one.record.plan.hypothesis)
        for one, question in zip(found, asked, strict=True)
    )
    return Promised(made, tuple(sorted(promiser.problems)))


def _asked(one: Found, first: First | None) -> _Asked | None:
    if one.record.plan is None:
        return None
    made_in = one.record.provenance
    inputs = (tidy(each.path) for each in made_in.inputs) if made_in is not None else ()
    results = frozenset(each.path for each in (one.at, *one.also_at))
    governed = Governed(frozenset(each for each in inputs if each is not None), results, first)
    return _Asked(tidy(one.record.plan.file), governed, made_in.made_at if made_in is not None else None)


@struct
class _Stood:
    """A plan as it counts for some records, with its slots filled, or why there is none."""

    plan: Plan | None
    graded: Graded
    frozen_at: str | None = None
    changed_later: bool = False
    missing: str = ""
    digest: str = ""


class _Promiser:
    """Answers for the records of one tree; records that ask the same are answered once."""

    def __init__(self, store: Store, seen: Appearances) -> None:
        self.store = store
        self.seen = seen
        self.problems: set[Problem] = set()
        self._answers: dict[tuple[Any, ...], _Stood] = {}

    def load(self, asked: Sequence[_Asked]) -> None:
        """Read all versions of the plans and of their seals at once."""
        line = self.store.line
        if line is not None:
            paths = {path for one in asked if one.path is not None for path in (one.path, seal_path(one.path))}
            self.store.load(version for path in paths for version in line.versions_of(path))

    def promise(self, asked: _Asked, file: str, identifier: str | None) -> Promise:
        """Return the promise behind one record, which names `file` and the hypothesis `identifier`."""
        if asked.path is None:
            missing = f"{git.safe(file)} lies outside the judged folder; {_NAME_IT}"
            return Promise(file, identifier, grade="none", missing=missing)
        governed = asked.governed
        key = (asked.path, governed.data, governed.results, governed.first, asked.made_at)
        if key not in self._answers:
            self._answers[key] = self._stood(asked.path, asked)
        stood = self._answers[key]
        hypothesis, missing = (
            (None, stood.missing) if stood.plan is None else _named(stood.plan, asked.path, identifier)
        )
        return Promise(
            file=asked.path,
            asked=identifier,
            plan=stood.plan,
            hypothesis=hypothesis,
            grade=stood.graded.grade,
            because=stood.graded.because,
            advice=stood.graded.advice,
            frozen_at=stood.frozen_at,
            changed_later=stood.changed_later,
            missing=missing,
            at_least=stood.graded.at_least,
            digest=stood.digest,
        )

    def _stood(self, path: str, asked: _Asked) -> _Stood:
        found = frozen_in(self.store, path, asked.governed)
        submodule = self.store.submodule_of(path) if found.version is None else None
        if submodule is not None:
            inside = f"lies in {git.safe(submodule)}, a repository of its own, whose history is not here"
            return _Stood(None, Graded("none", ""), missing=f"{git.safe(path)} {inside}")
        current = self.store.in_tree(path)
        plan = current if found.version is None else self.store.plan_in(found.version)
        self.problems.update(current.problems if current is not None else ())
        if plan is None:
            return _Stood(None, Graded("none", ""), missing=f"there is no plan {git.safe(path)}; {_NAME_IT}")
        line = self.store.line
        if line is not None and line.history.cut_at:
            return _Stood(None, cut(self.store.root, line.history))
        self.problems.update(plan.problems)
        if plan.plan is None:
            return _Stood(None, Graded(None, "the plan cannot be read", "mend the plan"))
        graded = grade(self.store, Question(path, plan, found, asked.governed, asked.made_at))
        if self.seen.unread and graded.grade not in {"none", "self-declared"}:
            graded = Graded(None, self.seen.unread, self.seen.advice, "self-declared")
        if line is None or found.version is None:
            return _Stood(plan.plan, graded, digest=self.store.whole_digest_of(plan))
        promised, document = self._with_slots_filled(line, plan, found.version, asked)
        same = document is plan.document
        digest = self.store.whole_digest_of(plan) if same else whole_digest_of(document)
        changed = current is None or self.store.whole_digest_of(current) != digest
        return _Stood(promised, graded, found.version.commit, changed, digest=digest)

    def _with_slots_filled(
        self, line: Line, plan: PlanFile, counts: Version, asked: _Asked
    ) -> tuple[Plan | None, Any]:
        """Return the plan with each open slot as it was first filled before the first result."""
        document = plan.document
        if not has_open_slots(document):
            return plan.plan, document
        end = line.first_with(replace(asked.governed, data=frozenset()))
        for version in line.versions_of(asked.path or ""):
            later = self.store.plan_in(version) if counts.index < version.index < end and version.blob else None
            if later is not None and later.plan is not None:
                document = filled(document, later.document)
        promised, _ = read(Plan, document)
        return promised, document


def _named(plan: Plan, path: str, identifier: str | None) -> tuple[Hypothesis | None, str]:
    """Return the hypothesis that a record asks for, or why there is none."""
    known = {one.id: one for one in plan.hypotheses}
    if identifier is None and len(known) == 1:
        return plan.hypotheses[0], ""
    if identifier in known:
        return known[identifier], ""
    if not known:
        return None, f"{git.safe(path)} holds no hypothesis"
    if identifier is None:
        return None, f"the record names none of the hypotheses of {git.safe(path)} ({', '.join(map(shown, known))})"
    return None, f"{git.safe(path)} has no hypothesis {shown(identifier)}; {nearest_advice(identifier, known)}"
