"""A first policy, an example record and a build's file, for a repository that has none."""

from __future__ import annotations

import os
from pathlib import Path
from typing import Literal

from gatecheck import git
from gatecheck.errors import CannotJudge

Host = Literal["github", "gitlab"]

_TEMPLATES = Path(__file__).parent
POLICY = "gatecheck.yaml"
EXAMPLE = "results/example.record.json"
#: Where the file of each host goes.
BUILDS: dict[Host, str] = {"github": ".github/workflows/claims.yml", "gitlab": ".gitlab-ci.yml"}
_MARKS: tuple[tuple[str, Host], ...] = ((".github", "github"), (".gitlab-ci.yml", "gitlab"), (".gitlab", "gitlab"))
_OWNERS: dict[Host, str] = {
    "github": "Put the owner and the commit of your copy of the action into it.",
    "gitlab": "Put the group and the commit of your copy into it.",
}


def start(folder: Path, team: str | None) -> tuple[str, ...]:
    """Write the first policy and the example record below `folder`, and what its host needs; overwrite nothing.

    The policy is the one for that kind of `team`, a file in `teams`; `None` is one for any team. The host is
    recognised by its files or by the address of a remote; where none is, no file of a build is written. Returns
    what was done, a sentence for each file.

    Raises
    ------
    CannotJudge
        `folder` is no folder, or cannot be written.
    """
    if not folder.is_dir():
        raise CannotJudge(f"{str(folder)!a} is not a folder", "name the folder to start in")
    policy = _TEMPLATES / (POLICY if team is None else f"teams/{team}.yaml")
    done = [
        _write(folder, POLICY, policy),
        _write(folder, EXAMPLE, _TEMPLATES / "example.record.json"),
    ]
    host = host_of(folder)
    if host is not None:
        done.append(f"{_write(folder, BUILDS[host], _TEMPLATES / 'hosts' / f'{host}.yml')} {_OWNERS[host]}")
    return (*done, "Next: `gatecheck weigh`, then put the records of your own analyses in place of the example.")


def host_of(folder: Path) -> Host | None:
    """Return the host whose builds judge `folder`; `None` where none is known, or below the top of a repository."""
    top = git.toplevel(folder)
    if top is not None and top != folder.resolve():
        return None
    for mark, host in _MARKS:
        if os.path.lexists(folder / mark):
            return host
    if top is None:
        return None
    _, addresses, _ = git.run(folder, "config", "--get-regexp", r"^remote\..*\.url$")
    return next((host for host in BUILDS if host in addresses.decode("utf-8", "replace")), None)


def _write(folder: Path, place: str, template: Path) -> str:
    target = folder / place
    if os.path.lexists(target):
        return f"{place} is there already and was left as it is."
    try:
        target.parent.mkdir(parents=True, exist_ok=True)
        with target.open("xb") as file:
            file.write(template.read_bytes())
    except OSError as error:
        reason = os.strerror(error.errno or 0)
        raise CannotJudge(f"{place} cannot be written ({reason})", "make the folder writable") from None
    return f"{place} was written."
