"""How good the evidence is that a plan came before its data, from git alone; dates and claims are no evidence.

Each grade includes what the one below it shows. Above a plan's own word stands the order of commits on the
first-parent line of the base: a sealed plan in a commit before the first one with data or results. A signature or
a time stamp adds to that order and does not replace it, since it says nothing of when the data came.
"""

from __future__ import annotations

from collections.abc import Collection
from pathlib import Path

from gatecheck import git
from gatecheck.fetching import history_advice
from gatecheck.history.walk import History
from gatecheck.model.plan_settings import PlanSettings
from gatecheck.model.promise import Grade
from gatecheck.model.struct import struct
from gatecheck.plans.order import Frozen, Governed, Line, Version, in_force
from gatecheck.plans.reading import PlanFile, tidy
from gatecheck.plans.seal import fits, seal_path, stamp_path
from gatecheck.plans.store import Store
from gatecheck.plans.witnesses import Sealing, Shown, signed, stamped

_BEFORE = "commit the sealed plan to the base before the data, in a pull request of its own"
_LINE = "on the base's first-parent line"
_NO_DATA = " (none of its data are in that history, so when they came is not shown)"
_PUSH = "someone with the right to push rewrote that branch"


@struct
class Graded:
    """A grade, `None` where it is not known and then `at_least` what is; what it rests on, what would raise it."""

    grade: Grade | None
    because: str
    advice: str = ""
    at_least: Grade = "none"


@struct
class Question:
    """A plan, `path` as it is called now, the version of it that counts, and what it governs.

    `made_at` is when the results were made by their own word.
    """

    path: str
    plan: PlanFile
    found: Frozen
    governed: Governed
    made_at: str | None = None


def grade_of(
    root: Path, path: str, history: History | None, governed: Collection[str], settings: PlanSettings
) -> Graded:
    """Return how good the evidence is that the plan at `path` came before the files at the paths `governed`.

    `history` is that of the base, `None` for a folder in no repository.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    store = Store(root, history, settings)
    inside = tidy(path)
    files = Governed(frozenset(governed), frozenset())
    found = frozen_in(store, inside or "", files)
    plan = None if inside is None else plan_of_question(store, inside, found)
    if inside is None or plan is None or plan.plan is None:
        return Graded("none", f"there is no plan {git.safe(path)} that can be read")
    return grade(store, Question(inside, plan, found, files))


def frozen_in(store: Store, path: str, governed: Governed) -> Frozen:
    """Return which version of the plan counts; none where there is no history, or the plan is not in it."""
    return Frozen(0, None, before=False) if store.line is None else store.line.frozen(path, governed)


def plan_of_question(store: Store, path: str, found: Frozen) -> PlanFile | None:
    """Return the plan as frozen, or as it is in the tree where no commit has it."""
    return store.in_tree(path) if found.version is None else store.plan_in(found.version)


def grade(store: Store, asked: Question) -> Graded:
    """Grade a plan that was read, in the version that counts."""
    if store.line is not None and store.line.history.cut_at:
        return cut(store.root, store.line.history)
    says = "seen" if asked.plan.plan is None else asked.plan.plan.data
    if says == "seen":
        because = "the plan itself says that the data had been seen when it was registered"
        return Graded("none", because, "register the next question before its data are seen")
    own = f"that it came first is its own word (data: {says})"
    if store.line is None:
        because = f"the folder is in no git repository, so nothing shows what came first; {own}"
        return Graded("self-declared", because, "keep plans and results in a git repository")
    version = asked.found.version
    if version is None:
        return Graded("self-declared", f"the plan is in no commit {_LINE}; {own}", _BEFORE)
    if not asked.found.before:
        return _not_before(store.line, version, asked, own)
    return _before(store, store.line, version, asked)


def cut(root: Path, history: History) -> Graded:
    """Return the grade where the beginning of the history is not in this clone: it is not known."""
    because = f"the history in this clone is cut at {history.cut_at[0][:12]}, so it is not known what came first"
    return Graded(None, because, history_advice(root))


def _not_before(line: Line, version: Version, asked: Question, own: str) -> Graded:
    end = asked.found.end
    what, first = git.safe(line.first_of(asked.governed, end)), line.id_of(end)
    if version.index == end:
        because = f"the plan and {what} came in the same commit {first}, so their order is not shown; {own}"
        return Graded("self-declared", because, _BEFORE)
    because = f"the plan was first committed in {version.commit[:12]}, after {first} added {what}"
    if asked.plan.plan is not None and asked.plan.plan.data == "none":
        return Graded("none", because, _BEFORE)
    return Graded("self-declared", f"{because}; that this had not been looked at is its own word", _BEFORE)


def _before(store: Store, line: Line, version: Version, asked: Question) -> Graded:
    """Grade a plan that stood before what it governs: it counts where it was sealed by then."""
    end = asked.found.end
    ahead = _ahead_of(line, asked)
    sealed = in_force(line.versions_of(seal_path(version.path)), end)
    seal = None if sealed is None else store.seal_in(sealed)
    if sealed is None or seal is None or asked.plan.plan is None:
        because = f"the plan was committed in {version.commit[:12]}{ahead}, but without a seal"
        advice = f"run `gatecheck seal {git.safe(asked.path)}`, and commit the seal to the base before the data"
        return Graded("self-declared", f"{because}, so that it was final then is its own word", advice)
    if not fits(seal, version.path, asked.plan.plan.id, store.digest_of(asked.plan)):
        because = f"the plan was changed in {version.commit[:12]}{ahead}, and its seal is of another version"
        advice = "seal each version that is to count, in a plan file of its own, before the data"
        return Graded("self-declared", f"{because}, so that it was final then is its own word", advice)
    start = max(version.index, sealed.index)
    shown = f"sealed in {line.id_of(start)} {_LINE}{ahead}"
    return _witnessed(store, Sealing(line, version.path, sealed, seal, range(start, end)), asked, shown)


def _ahead_of(line: Line, asked: Question) -> str:
    end = asked.found.end
    if end == len(line.history.commits):
        return ", which holds none of its data and results yet"
    alone = "" if line.has_any(asked.governed.data) else _NO_DATA
    return f", before {line.id_of(end)} first added {git.safe(line.first_of(asked.governed, end))}{alone}"


def _witnessed(store: Store, sealing: Sealing, asked: Question, shown: str) -> Graded:
    """Grade a plan that was sealed first, by who else than those who push vouches for that."""
    stamp = stamped(store, sealing, stamp_path(asked.path), asked.made_at)
    if stamp.held:
        because = (
            f"{shown}; {stamp.held}; that the seal was there by then holds unless that authority stamped a false "
            f"time, and that the data were not, unless {_PUSH}"
        )
        return Graded("third-party-time", because)
    signature = signed(store, sealing)
    token = f"time-stamp token on the seal as {git.safe(stamp_path(asked.path))}"
    if signature.held:
        because = (
            f"{shown}, and signed in {signature.held} by a key that the base lists; holds unless {_PUSH} and a "
            "holder of such a key signed it afterwards, as the date of a signature is the signer's own word"
        )
        return _or_not_known("signed", because, (stamp,), f"add a {token}")
    advice = (
        "sign the commit that seals it, or a tag of it, with a key that the base lists under `plans: signers`, or "
        f"add a {token}"
    )
    return _or_not_known("repository-order", f"{shown}; holds unless {_PUSH}", (stamp, signature), advice)


def _or_not_known(grade: Grade, because: str, others: Collection[Shown], advice: str) -> Graded:
    """The grade, or that it is not known where something that could raise it was not judged."""
    told = "; ".join([because, *(one.why for one in others if one.why)])
    mends = [one.advice for one in others if one.advice]
    if mends:
        return Graded(None, told, ", and ".join(mends), grade)
    return Graded(grade, told, advice)
