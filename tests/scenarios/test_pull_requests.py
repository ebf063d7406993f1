"""Pull requests into a real repository: what they change, and that no change helps the request that makes it."""

from __future__ import annotations

import hashlib
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


def plan(*hypotheses: Document) -> Document:
    """A plan with these hypotheses."""
    made = {"gatecheck": "plan/1", "id": "p", "title": "A plan", "data": "none"}
    return {**made, "hypotheses": [{"text": "Drainage increases biomass.", **each} for each in hypotheses]}


def write(folder: Path, path: str, content: Document | str) -> None:
    """Write one file below `folder`."""
    (folder / path).parent.mkdir(exist_ok=True)
    text = content if isinstance(content, str) else json.dumps(content)
    (folder / path).write_text(text, encoding="utf-8")


def only_changed(folder: Path) -> tuple[int, list[str]]:
    """The exit status of a request into `main` where only changes count, and its notes."""
    answer = weigh(folder, "--base", "main", "--only-changed")
    return answer.status, answer.verdict["notes"]


def rests_on(*told: str) -> list[str]:
    return [f"Counted although the record is unchanged, since what it rests on is not: {', '.join(told)}."]


def test_data_that_change_below_an_unchanged_record_count(repository: Path) -> None:
    """Story S18, where only what a request changes decides."""
    write(repository, "data/plots.csv", "18,4.2\n")
    digest = hashlib.sha256(b"18,4.2\n").hexdigest()
    made = {"inputs": [{"path": "data/plots.csv", "sha256": digest}]}
    write_tree(repository, changed(STRONG, provenance=made), policy=changed(POLICY, rules={"fresh": {}}))
    commit_all(repository, "made from data")
    git(repository, "checkout", "-q", "-b", "request")

    write(repository, "notes.txt", "nothing to do with it\n")
    commit_all(repository, "notes")
    assert only_changed(repository) == (0, [])

    write(repository, "data/plots.csv", "18,4.3\n")
    assert only_changed(repository) == (1, rests_on(f"{ID} (data/plots.csv)"))
    commit_all(repository, "other data")
    assert only_changed(repository) == (1, rests_on(f"{ID} (data/plots.csv)"))


@pytest.mark.parametrize("leaves", ["r001.json r002.json", "r002.json", ""])
def test_what_a_request_does_to_a_family_counts_for_its_other_members(family: Path, leaves: str) -> None:
    git(family, "checkout", "-q", "-b", "request")
    for path in leaves.split():
        (family / path).unlink()
    if not leaves:
        write(family, "r002.json", changed(member("c"), family=...))
    commit_all(family, "a smaller family")

    status, notes = only_changed(family)

    members = ["a (the family growth)", "b (the family growth)"]
    assert (status, notes) == (1, rests_on(*members[: 1 if "r001.json" in leaves else 2]))


def test_a_repetition_that_fails_counts_for_the_claim_that_it_repeats(repository: Path) -> None:
    git(repository, "checkout", "-q", "-b", "request")
    write_tree(repository, drainage(), policy=changed(POLICY, rules={"replication": {}}))
    commit_all(repository, "a policy")
    git(repository, "branch", "-f", "main")
    interval = {"level": 0.95, "low": -3.46, "high": 4.26}
    again = drainage(id="again", replicates=ID, claim=..., test__value=0.21, test__p="0.83", estimate__value=0.4)
    write(repository, "again.json", changed(again, estimate__interval=interval))

    answer = weigh(repository, "--base", "main", "--only-changed")

    assert (answer.status, answer.verdict["notes"]) == (1, rests_on(f"{ID} (again)"))
    assert "was tested again in again" in answer.rule("replication")["message"]


def test_a_base_that_goes_on_withdraws_nothing(repository: Path) -> None:
    """A request that changes no record departs from a family of two, which the base has given a third member."""
    pair = [member(name, family__size=2) for name in "ab"]
    write_tree(repository, *pair, policy=FAMILY_ON)
    departs = commit_all(repository, "two members")
    git(repository, "checkout", "-q", "-b", "request")
    write(repository, "notes.txt", "only words\n")
    commit_all(repository, "notes")
    git(repository, "checkout", "-q", "main")
    write_tree(repository, member("a"), member("b"), member("c"), policy=FAMILY_ON)
    tip = commit_all(repository, "a third member")
    git(repository, "checkout", "-q", "request")

    answer = weigh(repository, "--base", "main")

    assert (answer.status, answer.verdict.get("changes")) == (0, [])
    assert answer.verdict["base"] == tip
    (note,) = answer.verdict["notes"]
    assert note.startswith(f"The base has gone on since {departs[:12]}, from which this request departs: ")


@pytest.fixture
def gone_on(repository: Path) -> Path:
    """A request of words alone, which departs from a base that then takes over a stricter policy and a prior."""
    write_tree(repository, changed(STRONG, prior={"probability": 0.8, "basis": "hope"}))
    commit_all(repository, "a hopeful prior")
    git(repository, "checkout", "-q", "-b", "request")
    write(repository, "notes.txt", "only words\n")
    commit_all(repository, "notes")
    git(repository, "checkout", "-q", "main")
    sceptical = changed(STRONG, prior={"probability": 0.1, "basis": "1 of 10 held up"})
    write_tree(repository, sceptical, policy=changed(POLICY, name="policy of the base"))
    commit_all(repository, "a sceptical prior")
    git(repository, "checkout", "-q", "request")
    return repository


def test_what_is_trusted_is_that_of_the_base_as_it_is_now(gone_on: Path) -> None:
    tip = git(gone_on, "rev-parse", "main")

    answer = weigh(gone_on, "--base", "main")

    assert answer.verdict["policy"]["name"] == "policy of the base"
    assert answer.claim()["evidence"]["prior"] == 0.1
    assert answer.verdict["notes"][0] == (
        f"The policy gatecheck.yaml has changed at the base since this request departed; what counts is the base, "
        f"{tip[:12]}."
    )
    assert answer.verdict["notes"][2] == (
        f"The prior of {ID} is changed at the base since this request departed; it is judged at 0.1, which is that "
        "of the base, and at 0.8 its false positive risk would be 0.036 %."
    )
    assert len(answer.verdict["notes"]) == 3


def test_a_request_that_took_the_base_over_is_told_no_more_of_it(gone_on: Path) -> None:
    git(gone_on, "merge", "-q", "main", "-m", "take over the base")

    assert weigh(gone_on, "--base", "main").verdict["notes"] == []


def test_a_policy_that_both_change_is_proposed_against_that_of_the_base(gone_on: Path) -> None:
    write(gone_on, "gatecheck.yaml", STRICT)

    notes = weigh(gone_on, "--base", "main").verdict["notes"]

    assert notes[0].startswith("The policy gatecheck.yaml is changed here; what counts is the base, ")
    assert notes[1].startswith("Under the policy proposed here: ")


REPORTED = changed(POLICY, rules={"all-promised-reported": {"release": "strict"}})


def test_a_plan_that_the_base_has_gained_is_no_matter_of_the_request(repository: Path) -> None:
    write(repository, "gatecheck.yaml", REPORTED)
    commit_all(repository, "promises are to be kept")
    git(repository, "checkout", "-q", "-b", "request")
    write(repository, "notes.txt", "only words\n")
    commit_all(repository, "notes")
    git(repository, "checkout", "-q", "main")
    write(repository, "plans/p.json", plan({"id": "H1"}))
    commit_all(repository, "a plan")
    git(repository, "checkout", "-q", "request")

    without = weigh(repository, "--base", "main")
    write(repository, "plans/p.json", plan({"id": "H1"}, {"id": "H2"}))
    of_its_own = weigh(repository, "--base", "main")

    assert (without.status, without.verdict["others"]) == (0, [])
    assert [row["id"] for row in of_its_own.verdict["others"]] == ["plans/p.json"]


def test_a_shallow_clone_that_cannot_tell_says_so(repository: Path, tmp_path: Path) -> None:
    git(repository, "checkout", "-q", "-b", "request")
    commit_all(repository, "nothing")
    git(repository, "checkout", "-q", "main")
    write(repository, "gained.json", changed(STRONG, id="gained"))
    tip = commit_all(repository, "a claim at the base")
    clone = tmp_path / "clone"
    git(tmp_path, "clone", "-q", "--depth=1", "--branch=request", f"file://{repository}", str(clone))
    git(clone, "fetch", "-q", "--depth=1", "origin", tip)

    shallow = weigh(clone, "--base", tip)
    git(clone, "fetch", "-q", "--unshallow", "origin")
    whole = weigh(clone, "--base", tip)

    assert [(each["id"], each["change"]) for each in shallow.verdict["changes"]] == [("gained", "withdrawn")]
    assert "what the base has gained meanwhile may appear as withdrawn" in shallow.verdict["notes"][0]
    assert whole.verdict["changes"] == []


SURE = {"probability": 0.95, "basis": "it has to work"}
OF_PLAN = {"file": "plans/p.json", "hypothesis": "H1"}


@pytest.mark.parametrize("at_base", [[], [drainage()]])
def test_the_prior_of_a_plan_that_the_base_does_not_have_does_not_count(
    repository: Path, at_base: list[Document]
) -> None:
    """At even odds t(34) = 2.21 leaves 17 %, and at .95 1.0 %: a plan of the request must not make it stand."""
    (repository / "r000.json").unlink()
    write_tree(repository, changed(STRONG, id="another"), *at_base)
    commit_all(repository, "base")
    git(repository, "checkout", "-q", "-b", "request")
    write(repository, "plans/p.json", plan({"id": "H1", "prior": SURE}))
    write_tree(repository, changed(STRONG, id="another"), drainage(plan=OF_PLAN))
    commit_all(repository, "a plan and its result")

    alone, answer = weigh(repository), weigh(repository, "--base", "main")

    assert (alone.status, answer.status) == (0, 1)
    assert (answer.claim()["evidence"]["prior"], answer.claim()["evidence"]["prior_from"]) == (0.5, "policy")
    assert answer.verdict["notes"] == [
        "The plan plans/p.json is new here, beside results that name it: the base does not have it.",
        f"The prior that the plan of {ID} sets is new or changed here; it is judged at 0.5, which is that of the "
        "base, and at 0.95 its false positive risk would be 1 %.",
    ]


def test_a_plan_that_changes_beside_its_results_is_told(repository: Path) -> None:
    (repository / "r000.json").unlink()
    write(repository, "plans/p.json", plan({"id": "H1", "prior": {"probability": 0.3, "basis": "a base rate"}}))
    frozen = commit_all(repository, "a plan")
    git(repository, "checkout", "-q", "-b", "request")
    write(repository, "plans/p.json", plan({"id": "H1", "prior": SURE}))
    write_tree(repository, drainage(plan=OF_PLAN))
    commit_all(repository, "its result")

    summary = command("weigh", str(repository), "--base", "main", "--write", "summary=-").stdout
    answer = weigh(repository, "--base", "main")

    assert answer.claim()["evidence"]["prior"] == 0.3
    assert answer.verdict["notes"] == [
        f"The plan plans/p.json is changed here; what counts is the plan of the base, as of {frozen[:12]}.",
        f"The prior that the plan of {ID} sets is new or changed here; it is judged at 0.3, which is that of the "
        "base, and at 0.95 its false positive risk would be 1 %.",
    ]
    assert f"- {answer.verdict['notes'][0]}\n" in summary.split("### Notes")[1]


def test_a_plan_that_is_taken_away_or_names_no_other_prior_is_told_alone(repository: Path) -> None:
    write(repository, "plans/p.json", plan({"id": "H1"}))
    frozen = commit_all(repository, "a plan")
    write_tree(repository, changed(STRONG, plan=OF_PLAN))
    (repository / "plans" / "p.json").unlink()

    gone = weigh(repository, "--base", "main").verdict["notes"]
    write(repository, "plans/p.json", plan({"id": "H1", "role": "primary"}, {"id": "H2", "prior": SURE}))
    other = weigh(repository, "--base", "main").verdict["notes"]
    write(repository, "plans/p.json", "gatecheck: plan/1\n")
    unreadable = weigh(repository, "--base", "main").verdict["notes"]

    told = f"; what counts is the plan of the base, as of {frozen[:12]}."
    assert gone == [f"The plan plans/p.json is removed here{told}"]
    assert other == unreadable == [f"The plan plans/p.json is changed here{told}"]


def test_the_own_prior_of_a_record_goes_before_what_a_plan_of_the_request_sets(repository: Path) -> None:
    own = {"probability": 0.9, "basis": "9 of 10 held up"}
    write_tree(repository, changed(STRONG, prior=own))
    commit_all(repository, "a prior")
    git(repository, "checkout", "-q", "-b", "request")
    write(repository, "plans/p.json", plan({"id": "H1", "prior": SURE}))
    write_tree(repository, changed(STRONG, prior=own, plan={"file": "plans/p.json"}))

    notes = weigh(repository, "--base", "main").verdict["notes"]

    assert notes == [
        "The plan plans/p.json is new here, beside results that name it: the base does not have it.",
        f"Weighed at a prior that the record itself sets above the policy's: {ID}.",
    ]


def test_a_plan_that_no_result_names_is_told_where_promises_are_to_be_kept(repository: Path) -> None:
    write_tree(repository, STRONG, policy=REPORTED)
    write(repository, "plans/p.json", plan({"id": "H1"}))
    tip = commit_all(repository, "a plan")
    write(repository, "plans/p.json", plan({"id": "H1", "role": "other"}))
    write(repository, "plans/q.json", plan({"id": "H1", "role": "other"}))

    notes = weigh(repository, "--base", "main").verdict["notes"]

    assert notes == [
        f"The plan plans/p.json is changed here; what counts is the plan of the base, as of {tip[:12]}."
    ]


def test_another_id_does_not_free_a_record_of_its_prior(repository: Path) -> None:
    write_tree(repository, drainage())
    commit_all(repository, "base")
    git(repository, "checkout", "-q", "-b", "request")
    write_tree(repository, drainage(id="biomass", prior=SURE))

    answer = weigh(repository, "--base", "main")

    assert (answer.status, answer.claim("biomass")["evidence"]["prior"]) == (1, 0.5)
    assert answer.verdict["notes"] == [
        f"The prior of biomass (at the base {ID}) is changed here; it is judged at 0.5, which is that of the base, "
        "and at 0.95 its false positive risk would be 1 %."
    ]


@pytest.mark.parametrize(
    ("before", "now", "said"),
    [
        (
            (0.2, "4 of 20 held"),
            (0.9, "a pilot"),
            "at prior 0.2, which the record had at the base (4 of 20 held), ",
        ),
        ((0.2, "4 of 20 held"), None, "at prior 0.2, which the record had at the base (4 of 20 held), "),
        (None, (0.9, "a pilot"), "at prior 0.5, even "),
        (
            (0.2, "4 of 20 held"),
            (0.2, "a guess"),
            "at prior 0.2, which the record had at the base (4 of 20 held), ",
        ),
        ((0.2, "4 of 20 held"), (0.2, "4 of 20 held"), "at prior 0.2, which the record sets (4 of 20 held), "),
    ],
)
def test_a_prior_is_told_with_where_it_comes_from(
    repository: Path, before: tuple[float, str] | None, now: tuple[float, str] | None, said: str
) -> None:
    def with_prior(prior: tuple[float, str] | None) -> Document:
        return drainage(prior=... if prior is None else {"probability": prior[0], "basis": prior[1]})

    write_tree(repository, with_prior(before))
    commit_all(repository, "base")
    write_tree(repository, with_prior(now))

    assert said in weigh(repository, "--base", "HEAD").rule("false-positive-risk")["message"]
