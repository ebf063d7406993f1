"""What would bring here what a clone lacks: commands for whoever reads the advice. Nothing here fetches.

Each is for the remote that the clone has, whatever it is called, and is complete: run as it stands, it brings what
was missing.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from pathlib import Path
from shlex import quote

from gatecheck.git_process import checked, run

_NAMED = re.compile(r"(?P<name>[^\s~^:?*\[\\{}-][^\s~^:?*\[\\{}]*)(?P<steps>(?:[~^][0-9]*)*)")
_STEP = re.compile(r"([~^])([0-9]*)")
_FULL_ID = re.compile(r"[0-9a-f]{40}(?:[0-9a-f]{24})?")
_SHORT_ID = re.compile(r"[0-9a-f]{7,63}")
_OF_THIS_CLONE = re.compile(r"@|[A-Z_]*HEAD")
_PARTIAL = r"^(extensions\.partialclone|remote\..*\.promisor)$"
_MOST_LETTERS = 200
_MOST_STEPS = 1000
_NAME_ONE = "name a commit that is here"
_USUAL = "origin"


def is_shallow(folder: Path) -> bool:
    """Whether the clone has only the last commits of its history.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    return _asked(folder, "rev-parse", "--is-shallow-repository") == "true\n"


def history_advice(folder: Path) -> str:
    """Return what brings the commits before those at which the history of a shallow clone is cut.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    remotes = _remotes(folder)
    return (
        f"run `git fetch --unshallow {quote(remotes[0])}`" if remotes else "clone it anew, with its whole history"
    )


def contents_advice(folder: Path) -> tuple[str, str]:
    """Return, for a message, what a clone is that lacks the content of a file, and what brings all contents.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    if run(folder, "config", "--get-regexp", _PARTIAL)[0]:
        advice = "run `git fsck`, which names what is lost, and clone anew"
        return "this clone, although it is no partial one", advice
    remotes = _remotes(folder)
    fetch = f"run `git fetch --refetch --no-filter {quote(remotes[0])}`, or " if remotes else ""
    return "this clone, a partial one", f"{fetch}clone without --filter"


def commit_advice(folder: Path, revision: str) -> str:
    """Return what brings the commit that `revision` names, which git does not know here, or what to name instead.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    named = _NAMED.fullmatch(revision)
    plain = revision.isprintable() and len(revision) <= _MOST_LETTERS
    if named is None or ".." in revision or not plain:
        return _NAME_ONE
    remotes = _remotes(folder)
    if not remotes:
        return f"{_NAME_ONE}, as this clone has no remote to fetch from"
    name, steps = named["name"], named["steps"]
    generations = _generations(steps)
    if steps and run(folder, "rev-parse", "--verify", "--quiet", f"{name}^{{commit}}")[0] == 0:
        return _deeper(folder, remotes[0], name, generations)
    depth = f"--depth={1 + generations} " if is_shallow(folder) else ""
    return _named(folder, remotes, name, steps, depth)


def _named(folder: Path, remotes: Sequence[str], name: str, steps: str, depth: str) -> str:
    """What brings the commit of a name or an id that is not here."""
    if _FULL_ID.fullmatch(name):
        return f"run `git fetch {depth}{quote(remotes[0])} {name}`"
    if _SHORT_ID.fullmatch(name):
        return "name the commit by its full id"
    if _OF_THIS_CLONE.fullmatch(name):
        return _NAME_ONE
    if name.startswith("refs/") and not name.startswith("refs/remotes/"):
        return f"run `git fetch {depth}{quote(remotes[0])} {quote(f'{name}:{name}')}`"
    followed = name.removeprefix("refs/").removeprefix("remotes/")
    remote = next((one for one in remotes if followed.startswith(f"{one}/")), None)
    if remote is not None:
        return _follow(remote, followed.removeprefix(f"{remote}/"), depth)
    here = _followed_here(folder, remotes, name)
    if here:
        return f"name {' or '.join(f'`--base {quote(one + steps)}`' for one in here)}, which is here"
    base = quote(f"{remotes[0]}/{name}{steps}")
    return f"{_follow(remotes[0], name, depth)}, and then name `--base {base}`"


def _follow(remote: str, branch: str, depth: str) -> str:
    return f"run `git fetch {depth}{quote(remote)} {quote(f'{branch}:refs/remotes/{remote}/{branch}')}`"


def _followed_here(folder: Path, remotes: Sequence[str], branch: str) -> list[str]:
    """The branches of remotes that have that name and are here, such as origin/main."""
    wanted = {f"refs/remotes/{one}/{branch}": f"{one}/{branch}" for one in remotes}
    there = _asked(folder, "for-each-ref", "--format=%(refname)", *wanted).split("\n")
    return [short for full, short in wanted.items() if full in there]


def _deeper(folder: Path, remote: str, name: str, generations: int) -> str:
    """What brings an ancestor of a commit that is here, where the history is cut between the two."""
    commits = _asked(folder, "rev-list", "--header", "--max-parents=0", f"{name}^{{commit}}").split("\0")
    cut = [one.partition("\n")[0] for one in commits if "\nparent " in one.partition("\n\n")[0]]
    if not cut:
        return _NAME_ONE
    if len(cut) == 1:
        return f"run `git fetch --deepen={generations} {quote(remote)} {cut[0]}`"
    return f"run `git fetch --unshallow {quote(remote)}`"


def _generations(steps: str) -> int:
    """How many commits back the steps lead, such as 3 of ~2^1."""
    back = sum(int(number or 1) if kind == "~" else 1 for kind, number in _STEP.findall(steps))
    return min(back, _MOST_STEPS)


def _remotes(folder: Path) -> tuple[str, ...]:
    """The remotes of the clone; the one that clones have by default comes first."""
    names = _asked(folder, "remote").split()
    return tuple(sorted(names, key=lambda name: name != _USUAL))


def _asked(folder: Path, command: str, *arguments: str) -> str:
    return checked(folder, command, *run(folder, command, *arguments)).decode("utf-8", "replace")
