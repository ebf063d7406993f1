"""Rerun: execute what the policy names in a clean copy of the tree, and compare the records with those of the tree.

It runs code that the repository names, so only a person's command may lead here, never a judgement.
"""

from __future__ import annotations

import tempfile
from collections.abc import Callable, Sequence
from pathlib import Path

from gatecheck.errors import CannotJudge
from gatecheck.git import safe
from gatecheck.globs import matches
from gatecheck.model.found import Scan
from gatecheck.model.rerun import Failure, Rerun
from gatecheck.model.rerun_settings import RerunSettings
from gatecheck.model.verdict import Problem
from gatecheck.rerunning.comparing import compared
from gatecheck.rerunning.copying import copied, without_records
from gatecheck.rerunning.running import SUFFIXES, run
from gatecheck.scan import scan
from gatecheck.scan.readers import suffix_of
from gatecheck.scan.tree import listed
from gatecheck.scan.twins import position

#: Told before each run: its number from 1, and the path.
Progress = Callable[[int, str], None]


def to_run(root: Path, patterns: Sequence[str]) -> tuple[str, ...]:
    """Return the paths below `root` that `patterns` name, in order, each once.

    Raises
    ------
    CannotJudge
        There is no pattern, or one of them names no notebook and no script.
    """
    if not patterns:
        raise CannotJudge("the policy names nothing to run", "name notebooks and scripts in its `rerun.run`")
    there = sorted(entry.path for entry in listed(root, None).entries if _runs(root, entry.path))
    chosen: dict[str, None] = {}
    for pattern in patterns:
        named = [path for path in there if path == pattern or matches((pattern,), path)]
        if not named:
            raise CannotJudge(
                f"`rerun.run` names {safe(pattern)}, and there is no such notebook or script here",
                "name files in .ipynb, .py or .R that git does not ignore, by their paths in the judged folder",
            )
        chosen.update(dict.fromkeys(named))
    return tuple(chosen)


def _runs(root: Path, path: str) -> bool:
    return suffix_of(path) in SUFFIXES and (root / path).is_file() and not (root / path).is_symlink()


def rerun(
    root: Path,
    paths: Sequence[str],
    settings: RerunSettings,
    globs: tuple[Sequence[str], Sequence[str]],
    progress: Progress,
) -> Rerun:
    """Run `paths`, of which a script starts in `root` and a notebook in its own folder, as copied.

    Parameters
    ----------
    root
        The folder whose records are compared; the whole repository around it is copied.
    paths
        What is run, relative to `root`; see `to_run`.
    settings
        The tolerance and the time limit.
    globs
        Which files are searched for records, and which are not, as for a scan.
    progress
        Called before each run.

    Raises
    ------
    CannotJudge
        Git fails, or the copy cannot be made.
    """
    in_tree = scan(root, *globs)
    with tempfile.TemporaryDirectory(prefix="gatecheck-", ignore_cleanup_errors=True) as place:
        copy = copied(root, Path(place).resolve())
        without_records(copy.folder, in_tree, paths)
        failures: list[Failure] = []
        for number, path in enumerate(paths, start=1):
            progress(number, path)
            failure = run(copy.folder, path, settings.minutes)
            failures += [] if failure is None else [failure]
        from_run = scan(copy.folder, *globs)
    return Rerun(
        ran=tuple(paths),
        failures=tuple(failures),
        problems=_problems(in_tree, from_run),
        notes=copy.notes,
        compared=compared(in_tree.found, from_run.found, settings.tolerance),
        tolerance=settings.tolerance,
    )


def _problems(in_tree: Scan, from_run: Scan) -> tuple[Problem, ...]:
    """What cannot be read on either side; a file that is none of the run's has its problem on both."""
    both = {*in_tree.problems, *from_run.problems}
    return tuple(sorted(both, key=lambda one: (position(one.at), one.message)))
