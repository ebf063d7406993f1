"""Both permissions together, read at the edge: the file of waivers first, then what was accepted."""

from __future__ import annotations

import json
from collections.abc import Sequence
from datetime import date
from pathlib import Path

import pytest
from permissions.permitting import RULE, RULES, SHORT, found
from support import commit_all

from gatecheck.model.accepted import AcceptedShortfall
from gatecheck.model.verdict import Finding
from gatecheck.permissions import Setting, Settled, permitted
from gatecheck.permissions.accepted import ACCEPTED_FILE, as_file
from gatecheck.permissions.waivers import WAIVERS_FILE

RECORD = found(path="results/drainage.json")
WAIVER = f"""gatecheck: waivers/1
waivers:
  - record: drainage/earthworm-biomass
    rule: {RULE}
    reason: A second season is under way.
    granted_by: Bo Sample
    granted_on: 2031-05-01
    until: 2031-05-31
    digest: {SHORT.digest}
"""


@pytest.fixture
def root(tmp_path: Path) -> Path:
    """A repository with the record in it, whose author is called `someone`."""
    (tmp_path / "results").mkdir()
    (tmp_path / "results" / "drainage.json").write_text(json.dumps(RECORD.document), encoding="utf-8")
    return tmp_path


def settle(root: Path, base: str | None = None, findings: Sequence[Finding] = (SHORT,)) -> Settled:
    """What is permitted on a day of May 2031, where no commit tells another one."""
    return permitted(Setting(root, base, date(2031, 5, 15), RULES), [tuple(findings)], [RECORD])


def test_without_files_nothing_changes(root: Path) -> None:
    settled = settle(root)

    assert (settled.findings, settled.problems, settled.notes) == (((SHORT,),), (), ())


def test_an_empty_list_of_waivers_asks_git_for_nothing(root: Path) -> None:
    (root / WAIVERS_FILE).write_text("gatecheck: waivers/1\n", encoding="utf-8")

    assert settle(root).findings == ((SHORT,),)


def test_what_is_waived_needs_no_acceptance(root: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("GIT_COMMITTER_DATE", "2031-05-20T12:00:00Z")
    (root / WAIVERS_FILE).write_text(WAIVER, encoding="utf-8")
    family = Finding("family", "short", "block", message="Too few.", digest=SHORT.digest)
    entries = [AcceptedShortfall(RECORD.record.id, rule, SHORT.digest) for rule in (RULE, "family")]
    (root / ACCEPTED_FILE).write_text(as_file(entries), encoding="utf-8")
    commit_all(root, "base")

    settled = settle(root, "HEAD", (SHORT, family))

    first, second = settled.findings[0]
    assert first.message == (
        "The risk is 17 %; the policy allows 5 %. Waived until 2031-05-31 by Bo Sample: "
        "A second season is under way."
    )
    assert second.message == "Too few. Accepted on adoption, until the record changes in what the rule reads."
    assert [one.outcome for one in settled.findings[0]] == ["waived", "waived"]
    assert (settled.problems, settled.notes) == ((), ())


def test_outside_of_a_repository_a_waiver_has_no_author_to_hold_its_approver_against(root: Path) -> None:
    (root / WAIVERS_FILE).write_text(WAIVER, encoding="utf-8")

    settled = settle(root)

    assert settled.findings == ((SHORT,),)
    assert settled.notes == (
        "The waiver of false-positive-risk on drainage/earthworm-biomass does not apply: who changed the record is "
        "not known here: judge it in the git repository that holds its history.",
    )


def test_broken_files_waive_nothing_and_are_problems(root: Path) -> None:
    (root / WAIVERS_FILE).write_text(WAIVER.replace("2031-05-31", "soon"), encoding="utf-8")
    (root / ACCEPTED_FILE).write_text("gatecheck: accepted/1\naccepted: 7\n", encoding="utf-8")

    settled = settle(root)

    assert settled.findings == ((SHORT,),)
    assert [(one.at.path, one.at.line, one.message) for one in settled.problems] == [
        (WAIVERS_FILE, 8, "waivers[0].until is 'soon'"),
        (ACCEPTED_FILE, 2, "accepted is 7, not a list"),
    ]


def test_notes_on_the_base_come_first(root: Path) -> None:
    base = commit_all(root, "base")
    (root / WAIVERS_FILE).write_text(WAIVER, encoding="utf-8")
    (root / ACCEPTED_FILE).write_text(as_file([]), encoding="utf-8")

    settled = settle(root, "HEAD")

    assert settled.findings == ((SHORT,),)
    assert settled.notes == (
        f"gatecheck.waivers.yaml is new here; what counts is the base, {base[:12]}.",
        f"gatecheck.accepted.yaml is new here; what counts is the base, {base[:12]}.",
    )
