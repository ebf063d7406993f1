"""What the plans of a request would promise, had the base taken them over already."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from pathlib import Path

from gatecheck.model.promise import Promise
from gatecheck.plans.reading import read_plan


def priors_proposed(
    root: Path, promises: Sequence[Promise | None], how: Callable[[str], object | None]
) -> tuple[float | None, ...]:
    """Return, row by row, the prior in the tree's version of a plan that a request adds or changes.

    `None` where it sets none, or the request leaves the plan as it is; `how` tells how a request changes the file
    of that path, and `None` where it does not.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    changed = {one.file for one in promises if one is not None and how(one.file) is not None}
    plans = {path: read_plan(root, path) for path in changed}
    priors = {
        (path, each.id): each.prior.probability
        for path, file in plans.items()
        if file is not None and file.plan is not None
        for each in file.plan.hypotheses
        if each.prior is not None
    }
    return tuple(
        None if one is None or one.hypothesis is None else priors.get((one.file, one.hypothesis.id))
        for one in promises
    )
