"""Five peeks at one growing sample, through the real command: what the history shows decides."""

from __future__ import annotations

from pathlib import Path

import pytest
from history.repositories import FIVE_LOOKS, Repository, repository, result, with_looks
from support import POLICY, Document, changed, weigh

RULE = "looks"
POLICY_ON = changed(POLICY, rules={RULE: {}})
PLAN: Document = {"planned": 5, "boundary": "obrien-fleming"}


def peeked(folder: Path, *, planned: bool) -> Repository:
    """A repository with five looks, with or without their boundary told from the first one on."""
    made = repository(folder)
    made.put("gatecheck.yaml", POLICY_ON)
    for number, (p, n) in enumerate(FIVE_LOOKS, 1):
        changes: Document = {"look": {"number": number, **PLAN}} if planned else {}
        made.commit(f"2031-0{number}-02", r=result(p, n, **changes))
    return made


def test_five_peeks_without_a_plan_fall_short(tmp_path: Path) -> None:
    """Type I error .142 (Armitage, McPherson and Rowe 1969), Pocock's level .0158 (recomputed)."""
    repo = peeked(tmp_path / "repo", planned=False)
    first = repo.git("rev-list", "--max-parents=0", "HEAD")[:12]

    answer = weigh(repo.root)

    said = answer.rule(RULE)
    assert (answer.status, said["outcome"]) == (1, "short")
    assert f"at look 5, as the history shows (5 looks: {first} of 2031-01-02, " in said["message"]
    assert "5 unadjusted looks at 0.05 have a real type I error of 0.142" in said["message"]
    assert "a Pocock boundary over 5 looks would have been 0.0158 at each" in said["remedy"]


def test_the_same_data_with_their_looks_planned_stand(tmp_path: Path) -> None:
    """O'Brien-Fleming's nominal p at the last of five looks is .0413 (Jennison and Turnbull 2000, recomputed)."""
    answer = weigh(peeked(tmp_path / "repo", planned=True).root)

    said = answer.rule(RULE)
    assert (answer.status, said["outcome"]) == (0, "met")
    assert said["limit"] == pytest.approx(0.0413, abs=6e-5)


def test_a_boundary_told_at_the_last_look_is_no_plan(tmp_path: Path) -> None:
    repo = peeked(tmp_path / "repo", planned=False)
    repo.put("r.json", result(*FIVE_LOOKS[-1], look={"number": 5, **PLAN}))

    answer = weigh(repo.root)

    assert (answer.status, answer.rule(RULE)["outcome"]) == (1, "short")
    assert "with a boundary that its first look did not tell" in answer.rule(RULE)["message"]


def test_a_shallow_clone_cannot_decide(tmp_path: Path) -> None:
    shallow = peeked(tmp_path / "repo", planned=True).clone(tmp_path / "shallow", "--depth=1")

    answer = weigh(shallow.root)

    said = answer.rule(RULE)
    assert (answer.status, said["outcome"]) == (3, "undecided")
    assert said["message"].startswith("How many looks were taken is not known (history cut at ")
    assert said["remedy"] == "Run `git fetch --unshallow origin`; with actions/checkout, set `fetch-depth: 0`."
    shallow.git("fetch", "-q", "--unshallow", "origin")
    assert weigh(shallow.root).status == 0


def test_a_pull_request_with_one_more_look(tmp_path: Path) -> None:
    repo = with_looks(tmp_path / "repo")
    repo.put("gatecheck.yaml", POLICY_ON)
    repo.commit()
    repo.git("checkout", "-q", "-b", "side")
    repo.commit("2031-06-02", r=result(0.01, 120))
    repo.git("checkout", "-q", "--detach", "main")
    repo.git("merge", "-q", "--no-ff", "-m", "merged", "side")

    said = weigh(repo.root, "--base", "main").rule(RULE)

    assert said["outcome"] == "short"
    assert "at look 6, as the history shows (6 looks: " in said["message"]
    assert "off the main line" not in said["message"]


def test_without_the_rule_no_history_is_asked(tmp_path: Path) -> None:
    repo = with_looks(tmp_path / "repo")
    repo.put("gatecheck.yaml", changed(POLICY, rules={"numbers-agree": {}}))
    shallow = repo.clone(tmp_path / "shallow", "--depth=1")
    shallow.put("gatecheck.yaml", changed(POLICY, rules={"numbers-agree": {}}))

    assert RULE not in [each["rule"] for each in weigh(shallow.root).claim()["rules"]]
