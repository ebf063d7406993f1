"""The grade of evidence that a plan came first, in real histories: order counts, and dates do not."""

from __future__ import annotations

import json
import subprocess
from pathlib import Path

import pytest
from plans.planting import (
    DATA,
    FILE,
    PLAN,
    RESULT,
    SEAL,
    Station,
    clone,
    fresh,
    hypothesis,
)
from support import changed, git

from gatecheck.model.plan_settings import PlanSettings
from gatecheck.plans.grade import grade_of

PUSH = "holds unless someone with the right to push rewrote that branch"


def test_sealed_before_the_data(station: Station) -> None:
    sealed, data = station.plan(), station.data()
    station.result()

    graded = station.grade()
    assert graded.grade == "repository-order"
    assert graded.because == (
        f"sealed in {sealed[:12]} on the base's first-parent line, before {data[:12]} first added data/plots.csv; "
        f"{PUSH}"
    )
    assert graded.advice == (
        "sign the commit that seals it, or a tag of it, with a key that the base lists under `plans: signers`, or "
        "add a time-stamp token on the seal as plans/drainage.yaml.tsr"
    )


def test_sealed_while_neither_data_nor_results_are_on_the_base(station: Station) -> None:
    sealed = station.plan()

    graded = station.grade()
    assert graded.grade == "repository-order"
    assert graded.because == (
        f"sealed in {sealed[:12]} on the base's first-parent line, which holds none of its data and results yet; "
        f"{PUSH}"
    )


def test_sealed_after_it_was_committed_and_before_the_data(station: Station) -> None:
    station.plan(sealed=False)
    sealed = station.plan()
    station.data()

    assert station.grade().grade == "repository-order"
    assert station.grade().because.startswith(f"sealed in {sealed[:12]} ")


def test_without_a_seal_the_order_is_told_and_does_not_count(station: Station) -> None:
    plan, data = station.plan(sealed=False), station.data()

    graded = station.grade()
    assert (graded.grade, graded.advice) == (
        "self-declared",
        "run `gatecheck seal plans/drainage.yaml`, and commit the seal to the base before the data",
    )
    assert graded.because == (
        f"the plan was committed in {plan[:12]}, before {data[:12]} first added data/plots.csv, but without a "
        "seal, so that it was final then is its own word"
    )


def test_a_seal_that_came_with_the_data_does_not_count(station: Station) -> None:
    station.plan(sealed=False)
    station.write(DATA, "1\n")
    station.plan()

    assert station.grade().grade == "self-declared"
    assert "without a seal" in station.grade().because


def test_a_seal_that_was_taken_away_before_the_data_does_not_count(station: Station) -> None:
    station.plan()
    (station.root / SEAL).unlink()
    station.commit()
    station.data()

    assert station.grade().grade == "self-declared"


@pytest.mark.parametrize("seal", ["{", '{"gatecheck": "seal/1", "more": 1}'])
def test_a_seal_that_cannot_be_read_is_none(station: Station, seal: str) -> None:
    station.plan(sealed=False)
    station.put(SEAL, seal)
    station.data()

    assert station.grade().grade == "self-declared"
    assert "without a seal" in station.grade().because


def test_a_plan_changed_after_it_was_sealed_and_before_the_data(station: Station) -> None:
    station.plan()
    edited = station.put(FILE, hypothesis(sides=1))
    station.data()

    graded = station.grade()
    assert graded.grade == "self-declared"
    assert graded.because.startswith(f"the plan was changed in {edited[:12]}, before ")
    assert "its seal is of another version" in graded.because


def test_the_seal_of_another_plan_does_not_count(station: Station) -> None:
    station.plan()
    seal = json.loads((station.root / SEAL).read_text("ascii"))
    station.put(SEAL, changed(seal, plan="other.yaml"))
    station.data()

    assert station.grade().grade == "self-declared"


def test_plan_and_data_in_one_commit(station: Station) -> None:
    """As a rebase, a squash or a first import leaves them."""
    station.write(DATA, "1\n")
    both = station.plan()

    graded = station.grade()
    assert graded.grade == "self-declared"
    assert graded.because == (
        f"the plan and data/plots.csv came in the same commit {both[:12]}, so their order is not shown; that it "
        "came first is its own word (data: none)"
    )
    assert graded.advice == "commit the sealed plan to the base before the data, in a pull request of its own"


def test_a_squash_merge_hides_the_order_of_the_branch(station: Station) -> None:
    git(station.root, "checkout", "-q", "-b", "study")
    station.plan()
    station.data()
    git(station.root, "checkout", "-q", "main")
    git(station.root, "merge", "-q", "--squash", "study")
    station.commit("squashed")

    assert station.grade().grade == "self-declared"
    assert station.grade(revision="study").grade == "repository-order"


def test_a_merge_shows_the_order_of_the_base_and_not_of_the_branch(station: Station) -> None:
    """The author alone orders a branch: a merge that brings plan and data at once shows no order."""
    git(station.root, "checkout", "-q", "-b", "study")
    station.plan()
    station.data()
    git(station.root, "checkout", "-q", "main")
    git(station.root, "merge", "-q", "--no-ff", "-m", "study", "study")

    assert station.grade().grade == "self-declared"
    assert "came in the same commit" in station.grade().because


def test_two_merges_show_the_order(station: Station) -> None:
    for step in (station.plan, station.data):
        git(station.root, "checkout", "-q", "-b", f"step-{step.__name__}")
        step()
        git(station.root, "checkout", "-q", "main")
        git(station.root, "merge", "-q", "--no-ff", "-m", "a step", f"step-{step.__name__}")

    assert station.grade().grade == "repository-order"


def test_a_plan_after_its_data(station: Station, monkeypatch: pytest.MonkeyPatch) -> None:
    """That its commit is dated 2001 does not help."""
    data = station.data()
    monkeypatch.setenv("GIT_AUTHOR_DATE", "2001-01-01T00:00:00Z")
    monkeypatch.setenv("GIT_COMMITTER_DATE", "2001-01-01T00:00:00Z")
    plan = station.plan()

    graded = station.grade()
    assert graded.grade == "none"
    assert graded.because == (
        f"the plan was first committed in {plan[:12]}, after {data[:12]} added data/plots.csv"
    )


@pytest.mark.parametrize("state", ["unseen", "collecting"])
def test_a_plan_for_data_that_it_says_nobody_had_looked_at(station: Station, state: str) -> None:
    station.data()
    station.plan(changed(PLAN, data=state))

    graded = station.grade()
    assert graded.grade == "self-declared"
    assert graded.because.endswith("; that this had not been looked at is its own word")


def test_a_plan_that_says_that_the_data_were_seen(station: Station) -> None:
    station.plan(changed(PLAN, data="seen"))
    station.data()

    graded = station.grade()
    assert graded.grade == "none"
    assert graded.because == "the plan itself says that the data had been seen when it was registered"


def test_the_results_count_where_the_data_are_kept_elsewhere(station: Station) -> None:
    sealed, result = station.plan(), station.result()
    station.data()

    assert station.grade(RESULT).because.startswith(
        f"sealed in {sealed[:12]} on the base's first-parent line, before {result[:12]} first added {RESULT}"
    )


def test_data_under_an_earlier_name_count(station: Station) -> None:
    station.put("data/raw.csv", "1\n")
    station.plan()
    git(station.root, "mv", "data/raw.csv", "data/moved.csv")
    station.commit()
    git(station.root, "mv", "data/moved.csv", DATA)
    station.commit()

    graded = station.grade()
    assert graded.grade == "none"
    assert graded.because.endswith("added data/raw.csv")


def test_a_plan_under_an_earlier_name_counts(station: Station) -> None:
    station.plan()
    station.data()
    for name in ("drainage.yaml", "drainage.yaml.seal.json"):
        git(station.root, "mv", f"plans/{name}", name)
    station.commit()

    graded = grade_of(station.root, "drainage.yaml", station.history(), {DATA}, station.settings)
    assert graded.grade == "repository-order"
    assert grade_of(station.root, FILE, station.history(), {DATA}, station.settings).grade == "repository-order"


def test_files_that_swap_names_end(station: Station) -> None:
    """Names that lead round in a circle are followed once."""
    station.put("data/a.csv", "1\n")
    git(station.root, "mv", "data/a.csv", "data/b.csv")
    station.commit()
    git(station.root, "mv", "data/b.csv", "data/a.csv")
    station.commit()
    station.plan()

    assert station.grade("data/a.csv").grade == "none"


def test_data_that_were_taken_away_and_came_again(station: Station) -> None:
    station.data()
    (station.root / DATA).unlink()
    station.plan()
    station.data()

    assert station.grade().grade == "none"


def test_a_plan_in_no_commit(station: Station) -> None:
    station.data()
    station.write(FILE, PLAN)

    graded = station.grade()
    assert graded.grade == "self-declared"
    assert graded.because == (
        "the plan is in no commit on the base's first-parent line; that it came first is its own word (data: none)"
    )


def test_a_repository_without_a_commit(tmp_path: Path) -> None:
    git(tmp_path, "init", "-q")
    station = Station(tmp_path)
    station.write(FILE, PLAN)

    assert station.grade().grade == "self-declared"


def test_a_folder_without_git(tmp_path: Path) -> None:
    station = Station(tmp_path)
    station.write(FILE, PLAN)

    graded = grade_of(tmp_path, FILE, None, {DATA}, station.settings)
    assert graded.grade == "self-declared"
    assert graded.because == (
        "the folder is in no git repository, so nothing shows what came first; that it came first is its own word "
        "(data: none)"
    )
    assert grade_of(tmp_path, "plans/none.yaml", None, {DATA}, station.settings).because == (
        "there is no plan plans/none.yaml that can be read"
    )
    assert grade_of(tmp_path, "../plans.yaml", None, {DATA}, station.settings).grade == "none"


@pytest.mark.parametrize("depth", [1, 2, 3])
def test_a_shallow_clone_knows_no_order_until_the_command_is_run(
    station: Station, tmp_path: Path, depth: int
) -> None:
    """Also where plan and data both came after the cut: what was there before it, and taken away, is not known."""
    station.put("notes.txt", "so that the deepest clone is cut before the plan\n")
    station.plan()
    station.data()
    shallow = clone(station, tmp_path / "shallow", f"--depth={depth}")
    at = git(shallow.root, "rev-list", "HEAD").splitlines()[-1]

    graded = shallow.grade()
    assert (graded.grade, graded.at_least) == (None, "none")
    assert graded.because == (f"the history in this clone is cut at {at[:12]}, so it is not known what came first")
    assert graded.advice == "run `git fetch --unshallow origin`"
    git(shallow.root, *graded.advice.removeprefix("run `git ").removesuffix("`").split())
    assert shallow.grade().grade == "repository-order"


def test_the_command_works_for_a_pull_request_and_names_the_remote_that_there_is(
    station: Station, tmp_path: Path
) -> None:
    """As CI fetches one: the merge alone, detached, from a remote of any name."""
    station.plan()
    git(station.root, "checkout", "-q", "--detach")
    station.data()
    git(station.root, "update-ref", "refs/pull/7/merge", "HEAD")
    git(station.root, "checkout", "-q", "main")
    work = fresh(tmp_path / "work")
    git(work.root, "remote", "add", "field", station.root.as_uri())
    git(work.root, "fetch", "-q", "--depth=1", "field", "refs/pull/7/merge")
    git(work.root, "checkout", "-q", "FETCH_HEAD")

    advice = work.grade().advice
    assert advice == "run `git fetch --unshallow field`"
    subprocess.run(
        advice.removeprefix("run `").removesuffix("`").split(), cwd=work.root, check=True, capture_output=True
    )
    assert work.grade().grade == "repository-order"


def test_a_judged_folder_below_the_repository(station: Station) -> None:
    """Paths are those from the judged folder."""
    inner = Station(station.root / "site")
    inner.write(FILE, PLAN)
    station.commit()
    inner.plan()
    inner.data()

    assert inner.grade().grade == "repository-order"
    assert inner.settings.include == PlanSettings().include == ("plans/**",)


def test_a_line_with_odd_names(station: Station) -> None:
    """Names are told in printable ASCII."""
    odd = "data/\u00e9\u200b\n.csv"
    station.plan()
    station.put(odd, "1\n")

    assert "first added data/\\xe9\\u200b\\n.csv;" in station.grade(odd).because
