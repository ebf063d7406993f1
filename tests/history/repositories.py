"""Repositories with a history, for the tests of it."""

from __future__ import annotations

import json
import os
import subprocess
from dataclasses import dataclass
from pathlib import Path

from support import GIT_ENVIRONMENT, Document, changed, drainage

ID = "drainage/earthworm-biomass"
#: p and number of plots of five invented looks at one growing sample.
FIVE_LOOKS = ((0.42, 20), (0.21, 40), (0.11, 60), (0.06, 80), (0.031, 100))


def result(p: float, n: int, **changes: object) -> Document:
    """The drainage record with that p from that many plots."""
    record = drainage(test={"name": "z", "statistic": "z", "p": p}, estimate=..., sample={"unit": "plot", "n": n})
    return changed(record, **changes)


@dataclass(frozen=True)
class Repository:
    """A repository under test, with settings of its own."""

    root: Path

    def git(self, *arguments: str, **environment: str) -> str:
        """Run git there."""
        made = subprocess.run(
            ["git", "-c", "init.defaultBranch=main", "-c", "protocol.file.allow=always", *arguments],
            cwd=self.root,
            env={**os.environ, **GIT_ENVIRONMENT, **environment},
            check=True,
            capture_output=True,
        )
        return os.fsdecode(made.stdout).strip()

    def put(self, path: str, content: Document | str | bytes) -> None:
        """Write a file: text and bytes as they are, a document as JSON."""
        file = self.root / path
        file.parent.mkdir(parents=True, exist_ok=True)
        if isinstance(content, dict):
            content = json.dumps(content, indent=1)
        file.write_bytes(content if isinstance(content, bytes) else content.encode())

    def commit(self, day: str = "2031-01-01", **files: Document | str | None) -> str:
        """Write the files `NAME.json` (`None` removes one), commit all, and return the id of the commit."""
        for name, content in files.items():
            if content is None:
                (self.root / f"{name}.json").unlink()
            else:
                self.put(f"{name}.json", content)
        self.git("add", "-A")
        date = f"{day}T12:00:00Z"
        self.git("commit", "-q", "--allow-empty", "-m", "made", GIT_COMMITTER_DATE=date, GIT_AUTHOR_DATE=date)
        return self.git("rev-parse", "HEAD")

    def clone(self, folder: Path, *arguments: str) -> Repository:
        """Clone it as over a network."""
        self.git("clone", "-q", *arguments, f"file://{self.root}", str(folder))
        return Repository(folder)


def repository(folder: Path) -> Repository:
    """Make a repository without a commit."""
    folder.mkdir(parents=True, exist_ok=True)
    made = Repository(folder)
    made.git("init", "-q")
    made.git("config", "uploadpack.allowFilter", "true")
    return made


def with_looks(folder: Path, **changes: object) -> Repository:
    """A repository with a commit for each of five looks, of which the last makes a claim."""
    made = repository(folder)
    for number, (p, n) in enumerate(FIVE_LOOKS, 1):
        claimed = {} if number == len(FIVE_LOOKS) else {"claim": ...}
        made.commit(f"2031-0{number}-02", r=result(p, n, **claimed, **changes))
    return made
