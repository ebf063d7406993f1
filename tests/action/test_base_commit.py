"""Which commit a pull request is judged against, on real repositories and checkouts."""

from __future__ import annotations

import json
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import pytest
from base_commit import CANNOT_JUDGE, StopError, find_base
from support import commit_all, git


@dataclass(slots=True)
class Project:
    """A branch of two commits, merged into `tip`; the branch began at `start`."""

    folder: Path
    start: str
    tip: str
    first_of_branch: str
    branch: str
    merge: str
    told: list[str] = field(default_factory=list)

    def base(self, checkout: Path, **settings: str) -> str | None:
        """The base that is found in `checkout`."""
        return find_base(checkout, settings, self.told.append)

    def event(self, document: Any) -> str:
        """A file that holds the payload of an event."""
        path = self.folder.parent / "event.json"
        path.write_text(json.dumps(document), encoding="utf-8")
        return str(path)

    def checkout(self, revision: str, depth: int | None = 1) -> Path:
        """A checkout of `revision`, as a build service makes it."""
        place = self.folder.parent / "checkout"
        git(self.folder.parent, "init", "-q", str(place))
        git(place, "remote", "add", "origin", f"file://{self.folder}")
        shallow = [] if depth is None else [f"--depth={depth}"]
        git(place, "fetch", "-q", "--no-tags", *shallow, "origin", revision)
        git(place, "checkout", "-q", revision)
        return place


@pytest.fixture
def project(tmp_path: Path) -> Project:
    folder = tmp_path / "origin"
    folder.mkdir()
    start = commit_all(folder, "start")
    git(folder, "checkout", "-q", "-b", "branch")
    first = _commit(folder, "loosen the policy")
    branch = _commit(folder, "a result")
    git(folder, "checkout", "-q", "main")
    tip = _commit(folder, "tighten the policy")
    git(folder, "merge", "-q", "--no-ff", "-m", "merge", "branch")
    return Project(folder, start, tip, first, branch, git(folder, "rev-parse", "HEAD"))


def _commit(folder: Path, what: str) -> str:
    (folder / f"{what}.txt").write_text(what, encoding="utf-8")
    return commit_all(folder, what)


def _of_pull_request(sha: str) -> dict[str, Any]:
    return {"pull_request": {"base": {"sha": sha}}}


@pytest.mark.parametrize("event", ["push", "workflow_dispatch", "schedule"])
def test_no_pull_request_no_base(project: Project, event: str) -> None:
    settings = {"GITHUB_EVENT_NAME": event, "GITHUB_SHA": project.merge}

    assert project.base(project.checkout(project.merge), **settings) is None


def test_outside_a_build_there_is_no_base(project: Project) -> None:
    assert project.base(project.folder) is None


def test_what_the_request_was_merged_into_goes_before_an_older_base_of_the_event(project: Project) -> None:
    """The tree that is judged contains the newer base, so the newer policy counts."""
    settings = {"GITHUB_EVENT_NAME": "pull_request", "GITHUB_SHA": project.merge}
    settings["GITHUB_EVENT_PATH"] = project.event(_of_pull_request(project.start))

    assert project.base(project.checkout(project.merge, depth=None), **settings) == project.tip
    assert project.told == []


def test_depth_1_fetches_the_base_once(project: Project) -> None:
    """The raw merge commit names parents that a checkout of depth 1 does not hold."""
    settings = {"GITHUB_EVENT_NAME": "pull_request", "GITHUB_SHA": project.merge}
    settings["GITHUB_EVENT_PATH"] = project.event({})
    checkout = project.checkout(project.merge)

    assert project.base(checkout, **settings) == project.tip
    assert project.base(checkout, **settings) == project.tip
    assert project.told == [f"This checkout lacks the base commit {project.tip}; fetching it alone."]
    assert git(checkout, "cat-file", "-t", project.tip) == "commit"


def test_depth_2_fetches_nothing(project: Project) -> None:
    settings = {"GITHUB_EVENT_NAME": "pull_request", "GITHUB_SHA": project.merge}

    assert project.base(project.checkout(project.merge, depth=2), **settings) == project.tip
    assert project.told == []


@pytest.mark.parametrize("name", ["pull_request", "pull_request_target"])
def test_a_checkout_of_the_branch_itself_takes_the_base_of_the_event(project: Project, name: str) -> None:
    """The parent of the author's own commit is the author's own too: its loosened policy must not count."""
    settings = {"GITHUB_EVENT_NAME": name, "GITHUB_SHA": project.merge}
    settings["GITHUB_EVENT_PATH"] = project.event(_of_pull_request(project.start))

    base = project.base(project.checkout(project.branch, depth=2), **settings)

    assert base == project.start
    assert base != project.first_of_branch


def test_a_merge_group(project: Project) -> None:
    settings = {"GITHUB_EVENT_NAME": "merge_group", "GITHUB_SHA": project.branch}
    settings["GITHUB_EVENT_PATH"] = project.event({"merge_group": {"base_sha": project.start}})

    assert project.base(project.checkout(project.branch), **settings) == project.start


@pytest.mark.parametrize(
    "document",
    [
        None,
        [],
        {"pull_request": None},
        {"pull_request": {"base": {"sha": None}}},
        {"pull_request": {"base": {"sha": "--upload-pack=touch"}}},
        {"pull_request": {"base": {"sha": "main"}}},
    ],
)
def test_an_unknown_base_stops_the_gate(project: Project, document: Any) -> None:
    """Without the base, the policy of the branch would count."""
    settings = {"GITHUB_EVENT_NAME": "pull_request", "GITHUB_SHA": project.merge}
    settings["GITHUB_EVENT_PATH"] = project.event(document)

    with pytest.raises(StopError, match=r"^the base of this pull request is not known: .*fetch-depth: 2") as stop:
        project.base(project.checkout(project.branch), **settings)
    assert stop.value.status == CANNOT_JUDGE == 3


@pytest.mark.parametrize("path", ["", "nowhere.json", "."])
def test_an_unreadable_event_stops_the_gate(project: Project, path: str) -> None:
    settings = {"GITHUB_EVENT_NAME": "pull_request", "GITHUB_SHA": "", "GITHUB_EVENT_PATH": path}

    with pytest.raises(StopError, match="is not known"):
        project.base(project.folder, **settings)


def test_a_folder_without_a_repository_stops_the_gate(project: Project, tmp_path: Path) -> None:
    settings = {"GITHUB_EVENT_NAME": "pull_request", "GITHUB_SHA": project.merge}
    bare = tmp_path / "bare"
    bare.mkdir()

    with pytest.raises(StopError, match="is not known"):
        project.base(bare, **settings)


def test_a_base_that_cannot_be_fetched_stops_the_gate(project: Project) -> None:
    settings = {"GITHUB_EVENT_NAME": "pull_request", "GITHUB_SHA": project.merge}
    checkout = project.checkout(project.merge)
    git(checkout, "remote", "set-url", "origin", f"file://{project.folder}-moved")

    complaint = f"^the base commit {project.tip} is not here and cannot be fetched: check out with `fetch-depth: 2`"
    with pytest.raises(StopError, match=complaint):
        project.base(checkout, **settings)


def test_a_named_base_goes_before_the_event(project: Project) -> None:
    """A name is left to the gate, which knows what to say of one that is not there; a commit is fetched."""
    settings = {"GITHUB_EVENT_NAME": "pull_request", "GITHUB_SHA": project.merge}
    checkout = project.checkout(project.merge)

    assert project.base(checkout, GATECHECK_BASE="release-2", **settings) == "release-2"
    assert project.base(checkout, GATECHECK_BASE=project.start, **settings) == project.start
    assert project.told == [f"This checkout lacks the base commit {project.start}; fetching it alone."]
