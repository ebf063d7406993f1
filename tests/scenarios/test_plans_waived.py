"""A study that was stopped, and a repository with old plans: permissions for what a plan does not report."""

from __future__ import annotations

import json
import os
import subprocess
from pathlib import Path

import pytest
from support import GIT_ENVIRONMENT, Document, drainage, git, weigh

from gatecheck.cli import main
from gatecheck.permissions.accepted import ACCEPTED_FILE
from gatecheck.permissions.waivers import WAIVERS_FILE

RULE, FILE = "all-promised-reported", "plans/stopped.json"
ADA, BO = "Ada Example <ada@example.org>", "Bo Sample <bo@example.org>"
PLAN: Document = {
    "gatecheck": "plan/1",
    "id": "stopped",
    "title": "A trial that was stopped",
    "data": "none",
    "hypotheses": [
        {"id": "H1", "text": "More survive.", "outcome": {"variable": "survival"}},
        {"id": "H2", "text": "They grow more.", "outcome": {"variable": "biomass"}},
    ],
}
WHAT = f"The waiver of {RULE} on {FILE}"


def write(folder: Path, path: str, document: Document) -> None:
    """Write a document into a file of the repository."""
    (folder / path).parent.mkdir(parents=True, exist_ok=True)
    (folder / path).write_text(json.dumps(document), encoding="utf-8")


def commit(folder: Path, author: str = ADA) -> str:
    """Commit everything on a day of May 2031."""
    git(folder, "add", "-A")
    environment = {**os.environ, **GIT_ENVIRONMENT, "GIT_COMMITTER_DATE": "2031-05-10T12:00:00Z"}
    command = ["git", "commit", "-q", "--allow-empty", "-m", "x", f"--author={author}"]
    subprocess.run(command, cwd=folder, env=environment, check=True)
    return git(folder, "rev-parse", "HEAD")


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """A repository with a plan by Ada of which nothing is reported, at release."""
    folder = tmp_path / "station"
    folder.mkdir()
    git(folder, "init", "-q")
    write(folder, "gatecheck.yaml", {"gatecheck": "policy/1", "rules": {RULE: {"release": "strict"}}})
    write(folder, FILE, PLAN)
    write(folder, "results/a.json", drainage())
    commit(folder)
    return folder


def digest_told(capsys: pytest.CaptureFixture[str], folder: Path) -> str:
    """The digest that `explain` prints for the plan."""
    assert main(["explain", FILE, str(folder)]) == 0
    told = capsys.readouterr().out.partition("Digests, for a waiver")[2]
    return next(word for word in told.split() if word.startswith("sha256:"))


def grant(folder: Path, digest: str, granted_by: str) -> None:
    """Commit a waiver for the plan."""
    waiver = {
        "record": FILE,
        "rule": RULE,
        "reason": "The trial was stopped after a flood; nothing was measured.",
        "granted_by": granted_by,
        "granted_on": "2031-05-01",
        "until": "2031-12-31",
        "digest": digest,
    }
    write(folder, WAIVERS_FILE, {"gatecheck": "waivers/1", "waivers": [waiver]})
    commit(folder, BO)


def test_a_study_that_was_stopped_may_be_waived(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """By somebody else than who wrote the plan, and for as long as the plan and what is missing stay the same."""
    before, digest = weigh(folder), digest_told(capsys, folder)
    grant(folder, digest, ADA)
    by_author = weigh(folder)
    grant(folder, digest, BO)
    granted = weigh(folder)
    write(folder, "results/survival.json", drainage(id="s", plan={"file": FILE, "hypothesis": "H1"}))
    commit(folder)
    other_gap = weigh(folder)

    assert (before.status, before.claim(FILE)["verdict"]) == (1, "falls-short")
    assert (by_author.status, by_author.verdict["notes"]) == (
        1,
        [f"{WHAT} does not apply: it was granted by the author of the plan's change."],
    )
    assert (granted.status, granted.claim(FILE)["verdict"], granted.verdict["notes"]) == (0, "waived", [])
    assert [each["message"] for each in granted.claim(FILE)["rules"]] == [
        f"Primary outcome not reported: {what}. Waived until 2031-12-31 by {BO}: The trial was stopped after a "
        "flood; nothing was measured."
        for what in ("biomass (H2)", "survival (H1)")
    ]
    assert (other_gap.status, other_gap.verdict["notes"]) == (
        1,
        [f"{WHAT} does not apply: the plan has changed since in what the rule reads."],
    )


def test_on_a_request_the_waiver_of_the_base_counts(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    base = git(folder, "rev-parse", "HEAD")
    grant(folder, digest_told(capsys, folder), BO)

    assert weigh(folder, "--base", base).status == 1
    assert weigh(folder, "--base", "HEAD").status == 0


def test_a_waiver_that_no_plan_needs_is_told(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    digest = digest_told(capsys, folder)
    answers = [drainage(id=name, plan={"file": FILE, "hypothesis": name}) for name in ("H1", "H2")]
    for one in answers:
        write(folder, f"results/{one['id']}.json", one)
    grant(folder, digest, BO)

    answer = weigh(folder)

    assert (answer.status, answer.verdict["notes"]) == (
        0,
        [f"{WHAT} does not apply: there is no record of that id, and no plan at that path falls short."],
    )


def test_old_plans_are_accepted_on_adoption(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    status = main(["adopt", str(folder)])
    told = " ".join(capsys.readouterr().out.split())
    entries = (folder / ACCEPTED_FILE).read_text(encoding="utf-8").count("record:")
    commit(folder)
    adopted = weigh(folder)
    write(folder, FILE, {**PLAN, "hypotheses": [*PLAN["hypotheses"], {"id": "H3", "text": "They bloom."}]})
    commit(folder)
    changed = weigh(folder)
    again = main(["adopt", str(folder)])

    assert (status, entries) == (0, 1)
    assert told == (
        "Accepted 1 shortfall of 1 plan in gatecheck.accepted.yaml: each holds until its plan changes in what the "
        "rule reads. Commit this file; on a pull request the one that counts is that of the base."
    )
    assert (adopted.status, adopted.claim(FILE)["verdict"], adopted.verdict["notes"]) == (0, "waived", [])
    assert (changed.status, changed.verdict["notes"]) == (
        1,
        [f"Accepted on adoption and no longer, as the plan changed: {FILE} ({RULE})."],
    )
    assert again == 1
    assert "taken off it: 1 entry" in " ".join(capsys.readouterr().out.split())


def test_records_and_plans_are_accepted_together(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    rules = {RULE: {"release": "strict"}, "false-positive-risk": {"limit": 0.05}}
    write(folder, "gatecheck.yaml", {"gatecheck": "policy/1", "rules": rules})
    commit(folder)

    assert main(["adopt", str(folder)]) == 0
    assert (
        "Accepted 2 shortfalls of 1 record and 1 plan in gatecheck.accepted.yaml: each holds until its record or"
        in (" ".join(capsys.readouterr().out.split()))
    )
