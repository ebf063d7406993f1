"""Keys and signatures for the tests: made by ssh-keygen, used by git."""

from __future__ import annotations

import os
import subprocess
from pathlib import Path

from plans.planting import Station, needs
from support import GIT_ENVIRONMENT

SIGNERS = "keys/signers"


def key(folder: Path, name: str = "key") -> Path:
    """A new pair of keys without a pass phrase; the path of the private one."""
    needs("ssh-keygen")
    path = folder / name
    command = ["ssh-keygen", "-q", "-t", "ed25519", "-N", "", "-C", name, "-f", str(path)]
    subprocess.run(command, check=True, capture_output=True)
    return path


def allowed(path: Path, options: str = "") -> str:
    """The line of allowed signers for the key at `path`."""
    kind, public, _ = path.with_suffix(".pub").read_text("ascii").split(" ")
    return f'field@example.invalid namespaces="git"{options} {kind} {public}\n'


def signing(station: Station, path: Path, *arguments: str, date: str | None = None) -> None:
    """Run git in the station with the key at `path`; `date` is what it takes for the time."""
    times = {} if date is None else {"GIT_COMMITTER_DATE": date, "GIT_AUTHOR_DATE": date}
    subprocess.run(
        ["git", "-c", "gpg.format=ssh", "-c", f"user.signingKey={path}", *arguments],
        cwd=station.root,
        env={**os.environ, **GIT_ENVIRONMENT, **times},
        check=True,
        capture_output=True,
    )
