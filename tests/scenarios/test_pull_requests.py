"""Pull requests into a real repository: what they change, and that no change helps the request that makes it."""

from __future__ import annotations

import json
from collections.abc import Sequence
from pathlib import Path

import pytest
from support import POLICY, Document, changed, command, commit_all, drainage, git, weigh, write_tree

from gatecheck.errors import CannotJudge
from gatecheck.facts import Asked, Facts, look_up
from gatecheck.model.found import Found
from gatecheck.policy import Applied

ID = "drainage/earthworm-biomass"
STRICT = changed(POLICY, name="stricter policy", rules={"false-positive-risk": {"limit": 0.001}})
#: t(34) = 4.21 by statistic alone: a false positive risk of 0.3 % at even prior odds.
STRONG = drainage(test__value=4.21, test__p="<0.001", estimate=...)


@pytest.fixture
def repository(tmp_path: Path) -> Path:
    """A git repository with the policy and one strong claim, committed as the base."""
    folder = tmp_path / "repository"
    folder.mkdir()
    write_tree(folder, STRONG)
    commit_all(folder, "base")
    return folder


def test_a_request_is_told_with_its_commits_and_what_it_changes(repository: Path) -> None:
    base = git(repository, "rev-parse", "HEAD")
    write_tree(repository, STRONG, drainage(id="liming/ph", claim="Liming raises pH."))
    head = commit_all(repository, "liming")

    answer = weigh(repository, "--base", base)

    assert (answer.status, answer.verdict["base"], answer.verdict["head"]) == (1, base, head)
    assert answer.verdict["changes"] == [
        {
            "id": "liming/ph",
            "change": "new",
            "at": {"path": "r001.json", "line": 1},
            "told": "New: t(34) = 2.21, p = 0.034, mean difference 4.2 g/m2 (95 % interval 0.34 to 8.06).",
        }
    ]


def test_the_account_and_the_summary_tell_the_changes(repository: Path) -> None:
    base = git(repository, "rev-parse", "HEAD")
    write_tree(repository, changed(STRONG, status="exploratory"))
    commit_all(repository, "weaker")
    write_tree(repository, STRONG)

    account = command("weigh", str(repository), "--base", "HEAD").stdout
    summary = command("weigh", str(repository), "--base", base, "--write", "summary=-").stdout

    assert (
        "Changed since the base\n\n  drainage/earthworm-biomass, claims more than at the base: Exploratory"
        in account
    )
    assert "Judged: a tree with changes not committed, into the base " in account
    assert f"Since the base {git(repository, 'rev-parse', 'HEAD')[:12]}: 1 claiming more." in account
    assert f"Since the base {base[:12]}: no claim changed.\n" in summary
    assert "### Changed since the base" not in summary
    assert f"into the base {base[:12]}" in summary


def test_a_request_that_loosens_the_policy_shows_the_verdict_under_both(repository: Path) -> None:
    (repository / "gatecheck.yaml").write_text(json.dumps(STRICT), encoding="utf-8")
    commit_all(repository, "stricter base")
    write_tree(repository, STRONG, drainage(id="b"))

    answer = weigh(repository, "--base", "HEAD")

    assert answer.status == 1
    assert answer.verdict["notes"][1] == (
        f"Under the policy proposed here: {ID} would stand (falls short under the base)."
    )


def test_a_policy_that_changes_nothing_for_any_record_says_so(repository: Path) -> None:
    renamed = changed(POLICY, name="the same under another name")
    (repository / "gatecheck.yaml").write_text(json.dumps(renamed), encoding="utf-8")

    answer = weigh(repository, "--base", "HEAD")

    assert answer.verdict["notes"][1] == "Under the policy proposed here: every record would be judged alike."


def test_a_first_policy_is_shown_beside_the_built_in_one(repository: Path) -> None:
    git(repository, "rm", "-q", "--cached", "gatecheck.yaml")
    git(repository, "commit", "-q", "-m", "no policy")

    answer = weigh(repository, "--base", "HEAD")

    assert answer.verdict["policy"]["from"] == "built-in"
    assert answer.verdict["notes"][-1].startswith("Under the policy proposed here: ")


def test_a_proposed_policy_that_cannot_be_read_does_not_hide_the_verdict(repository: Path) -> None:
    (repository / "gatecheck.yaml").write_text("{", encoding="utf-8")

    answer = weigh(repository, "--base", "HEAD")

    assert answer.status == 0
    assert "is changed here" in answer.verdict["notes"][0]


def test_a_prior_raised_with_the_result_does_not_help_it(repository: Path) -> None:
    """At .25, which the base sets, t(34) = 2.21 leaves 37 %; at .9, as the request would have it, 2.2 %."""
    sceptical = {"probability": 0.25, "basis": "4 of 16 earlier soil interventions held up"}
    hopeful = {"probability": 0.9, "basis": "it has to work"}
    write_tree(repository, changed(STRONG, prior=sceptical))
    commit_all(repository, "sceptical")
    write_tree(repository, drainage(prior=hopeful))

    alone, answer = weigh(repository), weigh(repository, "--base", "HEAD")

    assert (alone.status, answer.status) == (0, 1)
    assert answer.claim()["evidence"]["prior"] == 0.25
    assert answer.verdict["notes"] == [
        f"The prior of {ID} is changed here; it is judged at 0.25, which is that of the base, and at 0.9 its false "
        "positive risk would be 2.1 %."
    ]


def test_a_prior_that_is_added_or_taken_away_does_not_help_either(repository: Path) -> None:
    write_tree(repository, drainage(prior={"probability": 0.1, "basis": "a base rate"}), drainage(id="b"))
    commit_all(repository, "base rate")
    write_tree(repository, drainage(), drainage(id="b", prior={"probability": 0.9, "basis": "it has to work"}))

    answer = weigh(repository, "--base", "HEAD")

    assert answer.claim()["evidence"]["prior"] == 0.1
    assert (answer.claim("b")["evidence"]["prior"], answer.claim("b")["evidence"]["prior_from"]) == (0.5, "policy")
    assert [note.split(",")[0] for note in answer.verdict["notes"]] == [
        f"The prior of {ID} is changed here; it is judged at 0.1",
        "The prior of b is changed here; it is judged at 0.5",
    ]


def test_a_changed_prior_of_what_cannot_be_weighed_has_no_risk(repository: Path) -> None:
    bare: Document = drainage(test=..., estimate=..., prior={"probability": 0.1, "basis": "a base rate"})
    write_tree(repository, bare)
    commit_all(repository, "bare")
    write_tree(repository, changed(bare, prior__probability=0.2))

    notes = weigh(repository, "--base", "HEAD").verdict["notes"]

    assert notes[0].endswith("and at 0.2 its false positive risk would be unknown.")


def test_a_merge_checkout_of_depth_two_knows_its_base(repository: Path, tmp_path: Path) -> None:
    """As build services check out a request: its merge into the base, with the parents and no more."""
    base = commit_all(repository, "later base")
    git(repository, "checkout", "-q", "-b", "branch", "HEAD~1")
    write_tree(repository, STRONG, drainage(id="b"))
    commit_all(repository, "a claim")
    git(repository, "checkout", "-q", "main")
    git(repository, "merge", "-q", "--no-ff", "branch", "-m", "merge")
    clone = tmp_path / "clone"
    git(tmp_path, "clone", "-q", "--depth", "2", f"file://{repository}", str(clone))

    answer = weigh(clone, "--base", "HEAD^1")

    assert (answer.status, answer.verdict["base"]) == (1, base)
    assert [each["id"] for each in answer.verdict["changes"]] == ["b"]


def test_a_base_that_a_shallow_clone_lacks_is_asked_for_with_the_command(repository: Path, tmp_path: Path) -> None:
    base = git(repository, "rev-parse", "HEAD")
    commit_all(repository, "next")
    clone = tmp_path / "clone"
    git(tmp_path, "clone", "-q", "--depth", "1", f"file://{repository}", str(clone))

    lacking = weigh(clone, "--base", base)
    assert lacking.status == 3
    assert lacking.verdict["problems"][0]["advice"] == f"run `git fetch --depth=1 origin {base}`"

    git(clone, "fetch", "-q", "--depth=1", "origin", base)
    assert weigh(clone, "--base", base).status == 0


FAMILY_ON = changed(POLICY, rules={"family": {"alpha": 0.05}})


def member(name: str, **changes: object) -> Document:
    """One of three strong results of one family."""
    return changed(STRONG, id=name, family={"name": "growth", "size": 3, "procedure": "holm"}, **changes)


@pytest.fixture
def family(repository: Path) -> Path:
    """The repository with a family of three at the base."""
    write_tree(repository, member("a"), member("b"), member("c"), policy=FAMILY_ON)
    commit_all(repository, "a family of three")
    return repository


def test_a_member_that_vanishes_from_its_family_is_missed(family: Path) -> None:
    (family / "r002.json").unlink()
    smaller = {"family__size": 2}
    write_tree(family, member("a", **smaller), member("b", **smaller), policy=FAMILY_ON)

    alone, answer = weigh(family), weigh(family, "--base", "HEAD")

    assert (alone.status, answer.status) == (0, 1)
    assert answer.rule("family", "a")["message"] == (
        "The family growth is not whole: since the base it has lost c (gone, or renamed without aliases); it "
        "had 3 members at the base and declares 2."
    )


def test_a_member_that_is_renamed_must_say_so(family: Path) -> None:
    write_tree(family, member("a"), member("b"), member("d"), policy=FAMILY_ON)
    silent = weigh(family, "--base", "HEAD")
    write_tree(family, member("a"), member("b"), member("d", aliases=["c"]), policy=FAMILY_ON)
    told = weigh(family, "--base", "HEAD")

    assert (silent.status, told.status) == (1, 0)
    assert silent.rule("family", "b")["message"] == (
        "The family growth is not whole: since the base it has lost c (gone, or renamed without aliases)."
    )


def test_many_lost_members_are_counted(repository: Path) -> None:
    members = [changed(STRONG, id=name, family={"name": "growth", "procedure": "holm"}) for name in "abcdef"]
    write_tree(repository, *members, policy=FAMILY_ON)
    commit_all(repository, "six")
    for number in range(1, 6):
        (repository / f"r{number:03}.json").unlink()

    said = weigh(repository, "--base", "HEAD").rule("family", "a")

    assert "since the base it has lost b, c, d and 2 more (gone, or renamed" in said["message"]


def test_a_family_that_is_new_has_lost_nothing(repository: Path) -> None:
    write_tree(repository, STRONG, policy=FAMILY_ON)
    commit_all(repository, "a policy for families")
    write_tree(repository, member("a"), member("b"), member("c"), policy=FAMILY_ON)

    assert weigh(repository, "--base", "HEAD").rule("family", "a")["outcome"] == "met"


def test_a_proposed_policy_may_judge_what_that_of_the_base_does_not(repository: Path) -> None:
    """A line of prose that only the proposed policy would judge is a row under that policy alone."""
    (repository / "report.md").write_text("Biomass: t(34) = 9.99, p = .5.\n", encoding="utf-8")
    proposed = changed(POLICY, rules={**POLICY["rules"], "text-agrees": {"unlinked": "block"}})
    (repository / "gatecheck.yaml").write_text(json.dumps(proposed), encoding="utf-8")

    answer = weigh(repository, "--base", "HEAD")

    assert answer.status == 0
    assert answer.verdict["notes"][1] == (
        "Under the policy proposed here: report.md:1 would fall short (not judged under the base)."
    )


def test_a_policy_that_would_judge_less_says_what_falls_away(repository: Path) -> None:
    (repository / "report.md").write_text("Biomass: t(34) = 9.99, p = .5.\n", encoding="utf-8")
    strict = changed(POLICY, rules={**POLICY["rules"], "text-agrees": {"unlinked": "block"}})
    (repository / "gatecheck.yaml").write_text(json.dumps(strict), encoding="utf-8")
    commit_all(repository, "a policy that reads text")
    (repository / "gatecheck.yaml").write_text(json.dumps(POLICY), encoding="utf-8")

    answer = weigh(repository, "--base", "HEAD")

    assert answer.status == 1
    assert answer.verdict["notes"][1] == (
        "Under the policy proposed here: report.md:1 would not be judged (falls short under the base)."
    )


def test_only_what_is_new_of_plans_and_code_counts_where_only_changes_do(repository: Path) -> None:
    """A promise that the base does not keep, and a test that it does not record, block no other request."""
    plan = {"gatecheck": "plan/1", "id": "p", "title": "A plan", "data": "none"}
    first = {"id": "H1", "text": "Drainage lowers soil pH."}
    (repository / "plans").mkdir()
    (repository / "plans" / "p.json").write_text(json.dumps({**plan, "hypotheses": [first]}), encoding="utf-8")
    test = "from scipy import stats\nprint(stats.ttest_ind([1, 2], [3, 4]).pvalue)\n"
    (repository / "a.py").write_text(test, encoding="utf-8")
    rules = {**POLICY["rules"], "all-promised-reported": {"release": "strict"}, "all-tests-recorded": {}}
    (repository / "gatecheck.yaml").write_text(json.dumps(changed(POLICY, rules=rules)), encoding="utf-8")
    commit_all(repository, "a base with shortfalls")

    whole, unchanged = weigh(repository, "--base", "HEAD"), weigh(repository, "--base", "HEAD", "--only-changed")
    (repository / "b.py").write_text(test, encoding="utf-8")
    another = weigh(repository, "--base", "HEAD", "--only-changed")

    assert (whole.status, unchanged.status, another.status) == (1, 0, 1)
    counted = {row["id"]: row.get("counts_now", True) for row in another.verdict["others"]}
    assert counted == {"a.py": False, "b.py": True, "plans/p.json": False}


def test_a_proposed_policy_that_stops_the_gate_does_not_stop_the_verdict(
    repository: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def looked_up(asked: Asked, found: Sequence[Found], applied: Sequence[Applied]) -> Facts:
        if asked.policy.document.name == "proposed":
            raise CannotJudge("git log failed", "mend the repository")
        return look_up(asked, found, applied)

    monkeypatch.setattr("gatecheck.gate.look_up", looked_up)
    (repository / "gatecheck.yaml").write_text(json.dumps(changed(POLICY, name="proposed")), encoding="utf-8")

    answer = weigh(repository, "--base", "HEAD")

    assert answer.status == 0
    assert answer.verdict["notes"][1] == (
        "What the policy proposed here would say cannot be told: git log failed; mend the repository."
    )
