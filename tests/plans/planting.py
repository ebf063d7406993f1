"""An invented registration in a real repository: plan, seal, data and results, each committed by itself."""

from __future__ import annotations

import json
import os
import shutil
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import pytest
from support import Document, changed, commit_all, drainage, git

from gatecheck.history.walk import History, history_of
from gatecheck.model.found import Found
from gatecheck.model.plan_settings import PlanSettings
from gatecheck.model.promise import Promise
from gatecheck.model.record import Record
from gatecheck.model.verdict import Place
from gatecheck.plans.grade import Graded, grade_of
from gatecheck.plans.promise import Promised, promises
from gatecheck.plans.seal import seal_plan
from gatecheck.schema.read import read

FILE = "plans/drainage.yaml"
SEAL = "plans/drainage.yaml.seal.json"
STAMP = "plans/drainage.yaml.tsr"
DATA = "data/plots.csv"
RESULT = "results/drainage.json"
PLAN: Document = {
    "gatecheck": "plan/1",
    "id": "drainage",
    "title": "Drainage and soil life",
    "data": "none",
    "hypotheses": [
        {
            "id": "H1",
            "text": "Drainage increases earthworm biomass.",
            "direction": "increase",
            "outcome": {"variable": "earthworm_biomass", "time_point": "30 days"},
            "n": {"planned": 36, "unit": "plot"},
        }
    ],
}


def hypothesis(**changes: Any) -> Document:
    """The plan with other values in its hypothesis."""
    return changed(PLAN, hypotheses=[changed(PLAN["hypotheses"][0], **changes)])


def record(**changes: Any) -> Document:
    """The record that answers the plan."""
    named = drainage(
        plan={"file": FILE, "hypothesis": "H1"},
        provenance={"inputs": [{"path": DATA}, {"path": "../elsewhere.csv"}]},
    )
    return changed(named, **changes)


@dataclass
class Station:
    """A repository with a registration; the methods commit one step each and return the id of the commit."""

    root: Path
    settings: PlanSettings = field(default_factory=PlanSettings)

    def write(self, path: str, content: Any) -> None:
        """Write a file: bytes and text as they are, anything else as JSON."""
        file = self.root / path
        file.parent.mkdir(parents=True, exist_ok=True)
        if isinstance(content, bytes):
            file.write_bytes(content)
        else:
            file.write_text(
                content if isinstance(content, str) else json.dumps(content, indent=1), encoding="utf-8"
            )

    def commit(self, message: str = "a step") -> str:
        """Commit everything."""
        return commit_all(self.root, message)

    def put(self, path: str, content: Any) -> str:
        """Write a file and commit it."""
        self.write(path, content)
        return self.commit(f"put {path}")

    def plan(self, document: Any = PLAN, *, sealed: bool = True) -> str:
        """Commit the plan, with a seal of it if there is none."""
        self.write(FILE, document)
        if sealed:
            seal_plan(self.root / FILE)
        return self.commit("register")

    def data(self) -> str:
        """Commit the data."""
        return self.put(DATA, "plot,biomass\n1,21.1\n")

    def result(self, document: Document | None = None) -> str:
        """Commit the record."""
        return self.put(RESULT, document or record())

    def history(self, revision: str = "HEAD") -> History:
        """The history of a base."""
        return history_of(self.root, revision)

    def grade(self, *governed: str, revision: str = "HEAD") -> Graded:
        """The grade of the plan by that base."""
        return grade_of(self.root, FILE, self.history(revision), governed or (DATA, RESULT), self.settings)

    def promised(self, *documents: Document, revision: str = "HEAD") -> Promised:
        """What was promised for records, by that base."""
        found = [found_of(each) for each in documents or (record(),)]
        return promises(self.root, found, self.history(revision), self.settings)

    def promise(self, document: Document | None = None, revision: str = "HEAD") -> Promise:
        """What was promised for one record whose plan has no problem."""
        promised = self.promised(document or record(), revision=revision)
        assert promised.problems == ()
        (one,) = promised.promises
        assert one is not None
        return one


def found_of(document: Document, path: str = RESULT, *also: str) -> Found:
    """The record as the scan finds it."""
    read_record, faults = read(Record, document)
    assert read_record is not None, faults
    return Found(read_record, Place(path), document, tuple(Place(each) for each in also))


def needs(program: str) -> None:
    """Skip, saying so, where `program` is not there; fail where everything must be there."""
    if shutil.which(program) is None:
        if os.environ.get("CI"):
            pytest.fail(f"{program} is not installed")
        pytest.skip(f"{program} is not installed")


def fresh(folder: Path) -> Station:
    """A station with a first commit that holds no plan and no data."""
    folder.mkdir()
    station = Station(folder)
    station.put("README.md", "Field notes\n")
    return station


def clone(station: Station, folder: Path, *arguments: str) -> Station:
    """A clone of the repository in another folder."""
    git(station.root.parent, "clone", "-q", *arguments, station.root.as_uri(), str(folder))
    return Station(folder, station.settings)
