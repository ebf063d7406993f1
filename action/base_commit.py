"""The commit into which a pull request goes: found here, fetched once where a shallow checkout lacks it."""

from __future__ import annotations

import json
import re
import subprocess
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any

CANNOT_JUDGE = 3
_COMMIT = re.compile(r"[0-9a-f]{40}|[0-9a-f]{64}")
_WITH_BASE = {"pull_request", "pull_request_target", "merge_group"}
_ADVICE = "check out with `fetch-depth: 2`, or name the base in the input `base`"


class StopError(Exception):
    """The gate cannot run; the sentence says why, and `status` is its exit status."""

    def __init__(self, sentence: str, status: int = CANNOT_JUDGE) -> None:
        super().__init__(sentence)
        self.status = status


def find_base(folder: Path, environment: Mapping[str, str], tell: Callable[[str], None]) -> str | None:
    """Return the revision whose policy counts, as a commit that is here; `None` where the event has no base.

    `environment` holds `GATECHECK_BASE` and the runner's `GITHUB_EVENT_NAME`, `GITHUB_EVENT_PATH` and
    `GITHUB_SHA`; a fetch is announced through `tell`.

    Raises
    ------
    StopError
        The event has a base, and it is not known or cannot be fetched.
    """
    named = environment.get("GATECHECK_BASE", "")
    if named:
        return _here(folder, named, tell) if _COMMIT.fullmatch(named) else named
    if environment.get("GITHUB_EVENT_NAME") not in _WITH_BASE:
        return None
    candidates = _candidates(folder, environment)
    if not candidates:
        raise StopError(f"the base of this pull request is not known: {_ADVICE}")
    present = (commit for commit in candidates if _is_here(folder, commit))
    return next(present, None) or _here(folder, candidates[0], tell)


def _candidates(folder: Path, environment: Mapping[str, str]) -> list[str]:
    # The event's own base may be older than what the request was merged into to be tested.
    merged_into = _first_parent(folder, environment.get("GITHUB_SHA", ""))
    of_event = _base_of_event(_event(environment.get("GITHUB_EVENT_PATH", "")))
    return [commit for commit in (merged_into, of_event) if commit]


def _first_parent(folder: Path, tested: str) -> str | None:
    """Return what the merge commit that the event tests was merged into, even where it is not fetched.

    Any other commit is the author's own, and so are its parents: their policy must not count.
    """
    if _git(folder, "rev-parse", "--verify", "HEAD^{commit}") != tested:
        return None
    # The raw object names the parents that a shallow checkout hides.
    head = (_git(folder, "cat-file", "commit", "HEAD") or "").partition("\n\n")[0]
    parents = [line.removeprefix("parent ") for line in head.splitlines() if line.startswith("parent ")]
    return parents[0] if len(parents) == 2 else None  # noqa: PLR2004  # a merge has two


def _event(path: str) -> Any:
    try:
        return json.loads(Path(path).read_text(encoding="utf-8"))
    except (OSError, ValueError):
        return None


def _base_of_event(event: Any) -> str | None:
    for keys in (("pull_request", "base", "sha"), ("merge_group", "base_sha")):
        value = event
        for key in keys:
            value = value.get(key) if isinstance(value, dict) else None
        if isinstance(value, str) and _COMMIT.fullmatch(value):
            return value
    return None


def _here(folder: Path, commit: str, tell: Callable[[str], None]) -> str:
    if not _is_here(folder, commit):
        tell(f"This checkout lacks the base commit {commit}; fetching it alone.")
        _git(folder, "fetch", "--quiet", "--depth=1", "--no-tags", "origin", commit)
        if not _is_here(folder, commit):
            raise StopError(f"the base commit {commit} is not here and cannot be fetched: {_ADVICE}")
    return commit


def _is_here(folder: Path, commit: str) -> bool:
    return _git(folder, "cat-file", "-e", f"{commit}^{{commit}}") is not None


def _git(folder: Path, *arguments: str) -> str | None:
    """Return what git prints, or `None` where it fails; what it complains of is not for the log."""
    command = ["git", "-C", str(folder), *arguments]
    done = subprocess.run(command, capture_output=True, check=False)  # noqa: S603  # no shell, and no text but ours
    return done.stdout.decode("utf-8", "replace").strip() if done.returncode == 0 else None
