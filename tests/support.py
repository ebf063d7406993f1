"""What several tests share: an invented record to change, and the real command on a folder of documents."""

from __future__ import annotations

import copy
import json
import os
import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from gatecheck.cli import main

Document = dict[str, Any]

#: An invented soil-ecology result whose figures agree: t(34) = 2.21, 18 + 18 plots.
DRAINAGE: Document = {
    "gatecheck": "record/1",
    "id": "drainage/earthworm-biomass",
    "claim": "Drainage increases earthworm biomass.",
    "status": "confirmatory",
    "role": "primary",
    "aim": "difference",
    "test": {
        "name": "two-sample t",
        "statistic": "t",
        "value": 2.21,
        "df": 34,
        "p": "0.034",
        "p_kind": "raw",
        "sides": 2,
        "alpha": 0.05,
    },
    "estimate": {
        "measure": "mean difference",
        "value": 4.2,
        "unit": "g/m2",
        "null": 0,
        "scale": "linear",
        "standard_error": 1.9,
        "interval": {"level": 0.95, "low": 0.34, "high": 8.06},
    },
    "sample": {
        "unit": "plot",
        "n": 36,
        "planned_n": 36,
        "groups": [
            {"name": "drained", "n": 18, "mean": 21.1, "sd": 5.9},
            {"name": "undrained", "n": 18, "mean": 16.9, "sd": 5.5},
        ],
        "excluded": [],
    },
    "alternative": {"effect": 1.0, "scale": "standardised"},
}
POLICY: Document = {
    "gatecheck": "policy/1",
    "name": "field-station reporting policy",
    "evidence": {"alternative": "observed-effect", "prior": 0.5},
    "rules": {"false-positive-risk": {"limit": 0.05}},
}


def changed(document: Document, **changes: Any) -> Document:
    """A copy of `document` with other values; `a__b=value` reaches inside, and `...` takes a field away."""
    made = copy.deepcopy(document)
    for path, value in changes.items():
        *outer, last = path.split("__")
        place = made
        for step in outer:
            place = place.setdefault(step, {})
        if value is ...:
            place.pop(last, None)
        else:
            place[last] = value
    return made


def drainage(**changes: Any) -> Document:
    """The drainage record with other values.

    Another test or estimate is that of other data: the means and standard deviations of the groups go with it,
    unless the sample is given too.
    """
    made = changed(DRAINAGE, **changes)
    names = {name.split("__")[0] for name in changes}
    if names & {"test", "estimate"} and "sample" not in names:
        for group in made["sample"]["groups"]:
            del group["mean"], group["sd"]
    return made


def write_tree(folder: Path, *records: Document, policy: Document | None = POLICY) -> Path:
    """Write records, each in a file of its own, and a policy; return the folder."""
    for number, record in enumerate(records):
        (folder / f"r{number:03}.json").write_text(json.dumps(record), encoding="utf-8")
    if policy is not None:
        (folder / "gatecheck.yaml").write_text(json.dumps(policy), encoding="utf-8")
    return folder


@dataclass(frozen=True, slots=True)
class Answer:
    """The JSON verdict of the command and its exit status."""

    status: int
    verdict: Document

    def claim(self, identifier: str = DRAINAGE["id"]) -> Document:
        """What the verdict says of one record or other row, whether or not it claims something."""
        rows = self.verdict["claims"] + self.verdict["reported"] + self.verdict["others"]
        (one,) = (each for each in rows if each["id"] == identifier)
        return dict(one)

    def rule(self, name: str, identifier: str = DRAINAGE["id"]) -> Document:
        """What one rule says of one record."""
        (one,) = (each for each in self.claim(identifier)["rules"] if each["rule"] == name)
        return dict(one)


def weigh(folder: Path, *arguments: str) -> Answer:
    """Run `gatecheck weigh` on `folder` in this process and return its JSON verdict."""
    report = folder.parent / f"{folder.name}.verdict.json"
    status = main(["weigh", str(folder), *arguments, "--write", f"json={report}"])
    return Answer(status, json.loads(report.read_text(encoding="utf-8")))


def judge(folder: Path, *records: Document, policy: Document | None = POLICY) -> Answer:
    """Write a tree and weigh it."""
    return weigh(write_tree(folder, *records, policy=policy))


def command(*arguments: str, cwd: Path | None = None) -> subprocess.CompletedProcess[str]:
    """Run the real command as a process of its own."""
    return subprocess.run(
        [sys.executable, "-m", "gatecheck", *arguments],
        capture_output=True,
        text=True,
        encoding="utf-8",
        check=False,
        cwd=cwd,
        env={**os.environ, "PYTHONPATH": str(Path(__file__).parents[1])},
    )


GIT_ENVIRONMENT = {
    "GIT_CONFIG_GLOBAL": os.devnull,
    "GIT_CONFIG_SYSTEM": os.devnull,
    "GIT_AUTHOR_NAME": "someone",
    "GIT_AUTHOR_EMAIL": "someone@example.invalid",
    "GIT_COMMITTER_NAME": "someone",
    "GIT_COMMITTER_EMAIL": "someone@example.invalid",
}


def git(folder: Path, *arguments: str) -> str:
    """Run git in `folder` with settings of its own, and return what it printed."""
    return subprocess.run(
        ["git", "-c", "init.defaultBranch=main", *arguments],
        cwd=folder,
        env={**os.environ, **GIT_ENVIRONMENT},
        check=True,
        capture_output=True,
        text=True,
    ).stdout.strip()


def commit_all(folder: Path, message: str) -> str:
    """Commit everything in `folder` and return the commit's id."""
    if not (folder / ".git").exists():
        git(folder, "init", "-q")
    git(folder, "add", "-A")
    git(folder, "commit", "-q", "--allow-empty", "-m", message)
    return git(folder, "rev-parse", "HEAD")
