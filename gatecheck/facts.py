"""Facts about the records of a tree that stand in its plans, its history and its files.

They are looked up only where a rule asks for them: most trees have neither plans nor looks.
"""

from __future__ import annotations

import functools
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, cast

from gatecheck.model.code import CodeRead
from gatecheck.model.found import Found
from gatecheck.model.freshness import Freshness
from gatecheck.model.looks_seen import LooksSeen
from gatecheck.model.promise import PlanInTree, Promise
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Problem
from gatecheck.policy import Applied, Policy

if TYPE_CHECKING:
    from gatecheck.compare.tests_recorded import Behind
    from gatecheck.history.walk import History
    from gatecheck.rules import all_promised_reported, all_tests_recorded

    _History = Callable[[], History | None]

_PLANS, _CODE, _FRESH, _LOOKS = "all-promised-reported", "all-tests-recorded", "fresh", "looks"


@struct
class Asked:
    """Where facts are looked up: a folder, the revision into which a request goes, and the policy that asks."""

    root: Path
    base: str | None
    policy: Policy


@struct
class Facts:
    """What was found, row by row or empty where nothing was asked.

    `plan_digests` names each plan that was read with the digest of what it says.
    """

    promises: tuple[Promise | None, ...] = ()
    looks_seen: tuple[LooksSeen | None, ...] = ()
    inputs: tuple[Freshness, ...] = ()
    code: CodeRead | None = None
    tests_behind: tuple[Behind | None, ...] = ()
    plans: tuple[PlanInTree, ...] = ()
    plan_digests: tuple[tuple[str, str], ...] = ()
    problems: tuple[Problem, ...] = ()


def look_up(asked: Asked, found: Sequence[Found], applied: Sequence[Applied]) -> Facts:
    """Look up all that the rules of the policy ask of the records `found`.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    history = functools.cache(functools.partial(_history, asked))
    promises, problems = _promises(asked, found, history)
    plans, unread = _plans(asked, promises, history)
    code, behind = _code(asked, found)
    return Facts(
        promises=promises,
        looks_seen=_looks_seen(asked, found, applied),
        inputs=_inputs(asked, found, applied),
        code=code,
        tests_behind=behind,
        plans=plans,
        plan_digests=_digests(plans, promises),
        problems=tuple(dict.fromkeys((*problems, *unread))),
    )


def _history(asked: Asked) -> History | None:
    """The first-parent line of the base, or of what is checked out; none in a folder without git."""
    from gatecheck.history.walk import has_history, history_of  # noqa: PLC0415  # most trees name no plan

    return history_of(asked.root, asked.base or "HEAD") if has_history(asked.root) else None


def _promises(
    asked: Asked, found: Sequence[Found], history: _History
) -> tuple[tuple[Promise | None, ...], tuple[Problem, ...]]:
    if all(one.record.plan is None for one in found):
        return (), ()
    from gatecheck.plans.promise import promises  # noqa: PLC0415  # most trees name no plan

    globs, settings = asked.policy.document.scan, asked.policy.document.plans
    made = promises(asked.root, found, history(), settings, include=globs.include, exclude=globs.exclude)
    return made.promises, made.problems


def _plans(
    asked: Asked, promises: Sequence[Promise | None], history: _History
) -> tuple[tuple[PlanInTree, ...], tuple[Problem, ...]]:
    """The plans whose promises must be reported: as they stood for a result, else as the base or tree has them."""
    if _PLANS not in asked.policy.in_general.rules:
        return (), ()
    from gatecheck.plans.ever import promised_ever  # noqa: PLC0415  # few policies ask for it
    from gatecheck.plans.reading import plans_in_tree  # noqa: PLC0415

    include = asked.policy.document.plans.include
    here, problems = plans_in_tree(asked.root, include)
    by_path = {one.path: one for one in here}
    if asked.base is not None:
        there, problems_there = plans_in_tree(asked.root, include, asked.base)
        by_path |= {one.path: one for one in there}
        problems = (*problems, *problems_there)
    named = [one for one in promises if one is not None]
    ever = promised_ever(asked.root, history(), asked.policy.document.plans, list(by_path.values()), named)
    settings = cast("all_promised_reported.Settings", asked.policy.in_general.rules[_PLANS])
    due = settings.release == "strict" and settings.enforce == "block"
    return ever.plans, (*problems, *(ever.unknown if due else ()))


def _digests(plans: Sequence[PlanInTree], promises: Sequence[Promise | None]) -> tuple[tuple[str, str], ...]:
    """Each plan with the digest of what it says, as it counted."""
    read = {one.path: one.digest for one in plans}
    read |= {one.file: one.digest for one in promises if one is not None and one.digest}
    return tuple(sorted(read.items()))


def _looks_seen(asked: Asked, found: Sequence[Found], applied: Sequence[Applied]) -> tuple[LooksSeen | None, ...]:
    """The looks that the history shows of each claim for which they are counted."""
    rows = [row for row, one in enumerate(found) if one.record.claim and _LOOKS in applied[row].rules]
    if not rows:
        return ()
    from gatecheck.history.looks import looks_of_records  # noqa: PLC0415  # few policies count looks

    globs = asked.policy.document.scan
    seen = looks_of_records(asked.root, [found[row] for row in rows], globs.include, globs.exclude, asked.base)
    by_row = dict(zip(rows, seen, strict=True))
    return tuple(by_row.get(row) for row in range(len(found)))


def _inputs(asked: Asked, found: Sequence[Found], applied: Sequence[Applied]) -> tuple[Freshness, ...]:
    wanted = [_FRESH in each.rules for each in applied]
    if not any(wanted):
        return ()
    from gatecheck.freshness import freshness  # noqa: PLC0415  # few policies ask for it

    return freshness(asked.root, found, wanted)


def _code(asked: Asked, found: Sequence[Found]) -> tuple[CodeRead | None, tuple[Behind | None, ...]]:
    """The tests that code calls, and how many of them stand behind each claim."""
    settings = asked.policy.in_general.rules.get(_CODE)
    if settings is None:
        return None, ()
    from gatecheck.analysis import read_code  # noqa: PLC0415  # few policies ask for it
    from gatecheck.compare.tests_recorded import behind_claims  # noqa: PLC0415

    named = cast("all_tests_recorded.Settings", settings)
    code = read_code(asked.root, named.include, named.exclude)
    return code, behind_claims(found, code)
