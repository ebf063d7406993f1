"""The gate on whole trees: which policy counts, what blocks, and that the answer is always the same."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import jsonschema
import pytest
from support import POLICY, Document, changed, commit_all, drainage, git, judge, weigh, write_tree

from gatecheck.schema import published

LOOSE = changed(POLICY, name="loosened policy", rules={"false-positive-risk": {"limit": 0.9}})


@pytest.fixture
def repository(tmp_path: Path) -> Path:
    """A git repository with the policy and one claim that falls short, committed as the base."""
    folder = tmp_path / "repository"
    folder.mkdir()
    write_tree(folder, drainage())
    commit_all(folder, "base")
    return folder


def problems(verdict: Document) -> list[tuple[str, int, str]]:
    """The problems of a verdict as path, line and message."""
    return [(each["at"]["path"], each["at"]["line"], each["message"]) for each in verdict["problems"]]


def test_a_tree_without_a_policy_is_judged_by_the_built_in_one(tmp_path: Path) -> None:
    answer = judge(tmp_path, drainage(), policy=None)

    assert answer.status == 1
    assert answer.verdict["policy"]["name"] == "built-in starting policy"
    assert answer.verdict["policy"]["from"] == "built-in"
    assert answer.verdict["notes"] == [
        "No gatecheck.yaml is here, so the built-in starting policy applies; `gatecheck start` writes one."
    ]


def test_a_base_without_a_policy_is_what_is_told(repository: Path) -> None:
    git(repository, "rm", "-q", "gatecheck.yaml")
    base = commit_all(repository, "no policy")

    none = weigh(repository, "--base", "HEAD").verdict["notes"]
    write_tree(repository, drainage())
    first = weigh(repository, "--base", "HEAD").verdict["notes"]

    assert none == [
        "The base has no gatecheck.yaml, so the built-in starting policy applies; `gatecheck start` writes one."
    ]
    assert first[:2] == [
        f"The policy gatecheck.yaml is new here; what counts is the base, {base[:12]}.",
        "The base has no gatecheck.yaml, so the built-in starting policy applies.",
    ]


def test_an_empty_tree_is_no_pass(tmp_path: Path) -> None:
    answer = judge(tmp_path)

    assert answer.status == 3
    assert answer.verdict["verdict"] == "cannot-judge"
    assert problems(answer.verdict) == [
        (".", 1, "the tree holds 0 records in 1 files, and the policy wants at least 1")
    ]


def test_a_policy_may_allow_an_empty_tree(tmp_path: Path) -> None:
    assert judge(tmp_path, policy=changed(POLICY, at_least=0)).status == 0


def test_an_unreadable_record_wins_over_one_that_falls_short_and_both_are_told(tmp_path: Path) -> None:
    answer = judge(tmp_path, drainage(), drainage(id="b", test__p=7))

    assert answer.status == 3
    assert answer.verdict["counts"]["falls-short"] == 1
    assert problems(answer.verdict) == [("r001.json", 1, "b: test.p is 7, outside its range")]


@pytest.mark.parametrize(
    ("text", "line", "message"),
    [
        (
            "gatecheck: policy/1\nrules:\n  false-positive-risk: {limit: 5}\n",
            3,
            "rules.false-positive-risk.limit is 5, outside its range",
        ),
        ("gatecheck: policy/1\nrules: [\n", 3, None),
        ("- 1\n", 1, "the policy is a list, not an object"),
        (
            "gatecheck: policy/1\nrules:\n  numbers-agree: {}\n  numbers-agree: {}\n",
            4,
            "rules.numbers-agree is given twice",
        ),
        ("gatecheck: policy/1\n---\ngatecheck: policy/1\n", 1, "the file holds 2 documents"),
        ("", 1, None),
    ],
)
def test_a_broken_policy_judges_nothing(tmp_path: Path, text: str, line: int, message: str | None) -> None:
    write_tree(tmp_path, drainage(), policy=None)
    (tmp_path / "gatecheck.yaml").write_text(text, encoding="utf-8")

    answer = weigh(tmp_path)

    assert answer.status == 3
    assert answer.verdict["policy"] is None
    assert answer.verdict["claims"] == []
    found = problems(answer.verdict)
    assert [each[0] for each in found] == ["gatecheck.yaml"]
    assert message is None or found == [("gatecheck.yaml", line, message)]


def test_a_named_policy_is_used_and_must_be_there(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    folder = write_tree(tmp_path, drainage())
    (folder / "loose.json").write_text(json.dumps(LOOSE), encoding="utf-8")
    (folder / "policy.toml").write_text("gatecheck = 1", encoding="utf-8")

    named = weigh(folder, "--policy", str(folder / "loose.json"))
    missing = weigh(folder, "--policy", str(folder / "no.yaml"))
    other = weigh(folder, "--policy", str(folder / "policy.toml"))

    assert (named.status, named.verdict["policy"]["name"]) == (0, "loosened policy")
    assert (missing.status, problems(missing.verdict)) == (3, [(".", 1, "there is no policy no.yaml")])
    assert problems(other.verdict) == [("policy.toml", 1, "the file has a suffix that no reader knows")]
    assert capsys.readouterr().out == ""


def test_a_policy_that_cannot_be_read_is_no_missing_policy(tmp_path: Path) -> None:
    write_tree(tmp_path, drainage(), policy=None)
    (tmp_path / "gatecheck.yaml").mkdir()

    answer = weigh(tmp_path)

    assert (answer.status, problems(answer.verdict)) == (
        3,
        [(".", 1, "gatecheck.yaml cannot be read (Is a directory)")],
    )


def test_a_request_does_not_loosen_the_policy_that_it_is_judged_by(repository: Path) -> None:
    """With --base the policy is that of the base; the change is told and does not help."""
    base = git(repository, "rev-parse", "HEAD")
    (repository / "gatecheck.yaml").write_text(json.dumps(LOOSE), encoding="utf-8")
    commit_all(repository, "loosen")

    alone, against_base = weigh(repository), weigh(repository, "--base", "HEAD~1")

    assert (alone.status, alone.verdict["policy"]["from"]) == (0, "tree")
    assert (against_base.status, against_base.verdict["policy"]["from"]) == (1, "base")
    assert against_base.verdict["policy"]["name"] == "field-station reporting policy"
    assert against_base.verdict["notes"] == [
        f"The policy gatecheck.yaml is changed here; what counts is the base, {base[:12]}.",
        "Under the policy proposed here: drainage/earthworm-biomass would stand (falls short under the base).",
    ]


def test_a_policy_that_is_new_or_removed_in_a_request_is_told(repository: Path) -> None:
    (repository / "gatecheck.yaml").unlink()
    commit_all(repository, "remove")

    removed = weigh(repository, "--base", "HEAD~1")
    (repository / "gatecheck.yaml").write_text(json.dumps(LOOSE), encoding="utf-8")
    new = weigh(repository, "--base", "HEAD")

    assert "is removed here" in removed.verdict["notes"][0]
    assert removed.verdict["policy"]["from"] == "base"
    assert "is new here" in new.verdict["notes"][0]
    assert (new.status, new.verdict["policy"]["from"]) == (1, "built-in")


def test_a_base_that_is_not_there_is_no_pass(repository: Path, tmp_path: Path) -> None:
    bare = tmp_path / "bare"
    bare.mkdir()
    write_tree(bare, drainage())

    unknown, no_repository = weigh(repository, "--base", "nowhere"), weigh(bare, "--base", "main")
    named = weigh(repository, "--base", "HEAD", "--policy", str(repository / "other.yaml"))

    assert (unknown.status, unknown.verdict["policy"]) == (3, None)
    assert problems(unknown.verdict) == [(".", 1, "git knows no revision nowhere here")]
    assert no_repository.status == 3
    assert problems(named.verdict) == [(".", 1, "there is no policy other.yaml at HEAD")]


def test_only_changed_lets_only_new_and_changed_claims_decide(repository: Path) -> None:
    """What fell short before is listed still; what is new or changed decides."""
    untouched = weigh(repository, "--base", "HEAD", "--only-changed")
    (repository / "r001.json").write_text(json.dumps(drainage(id="new", test__value=9.0)), encoding="utf-8")
    good = weigh(repository, "--base", "HEAD", "--only-changed")
    (repository / "r000.json").write_text(json.dumps(drainage(test__value=2.3)), encoding="utf-8")
    changed_one = weigh(repository, "--base", "HEAD", "--only-changed")

    assert (untouched.status, untouched.claim()["verdict"]) == (0, "falls-short")
    assert untouched.claim()["counts_now"] is False
    assert "counts_now" not in good.claim("new")
    assert good.claim("new")["verdict"] == "falls-short"  # its p does not fit its statistic
    assert changed_one.status == 1
    assert "counts_now" not in changed_one.claim()


def test_an_unreadable_record_blocks_also_where_only_changed_ones_decide(repository: Path) -> None:
    (repository / "broken.json").write_text('{"gatecheck": "record/1", "id": "x",', encoding="utf-8")

    assert weigh(repository, "--base", "HEAD", "--only-changed").status == 3


def test_a_subfolder_is_judged_by_its_own_policy(repository: Path) -> None:
    inner = repository / "inner"
    inner.mkdir()
    write_tree(inner, drainage(id="inner"), policy=LOOSE)

    answer = weigh(inner)

    assert (answer.status, [one["at"]["path"] for one in answer.verdict["claims"]]) == (0, ["r000.json"])


def test_the_same_tree_gives_the_same_bytes_wherever_it_stands(tmp_path: Path) -> None:
    texts = []
    for name in ("one", "two"):
        (tmp_path / name).mkdir()
        judge(tmp_path / name, drainage(id="b"), drainage(id="a"), drainage(id="c", claim=...))
        texts.append((tmp_path / f"{name}.verdict.json").read_bytes())

    assert texts[0] == texts[1]
    assert str(tmp_path).encode() not in texts[0]


@pytest.mark.parametrize(
    "records",
    [
        [drainage()],
        [drainage(test__p=7)],
        [drainage(aim="equivalence"), drainage(id="b", claim=...), drainage(id="c", test=..., estimate=...)],
        [drainage(harm=True, status="exploratory")],
        [],
    ],
)
@pytest.mark.parametrize("policy", [POLICY, None, {"gatecheck": "policy/1", "rules": {"x": {}}}])
def test_every_verdict_follows_its_published_schema(
    tmp_path: Path, records: list[Document], policy: dict[str, Any] | None
) -> None:
    schema = json.loads(published("verdict"))

    answer = judge(tmp_path, *records, policy=policy)

    jsonschema.Draft202012Validator(schema).validate(answer.verdict)
    assert answer.verdict["exit"] == answer.status


def test_no_order_of_files_changes_a_verdict(tmp_path: Path) -> None:
    """Rules see no neighbours: a record alone has the verdict that it has among others."""
    (tmp_path / "alone").mkdir()
    (tmp_path / "among").mkdir()
    alone = judge(tmp_path / "alone", drainage()).claim()
    others = [drainage(id=f"o/{number}", test__value=1 + number, test__p=..., estimate=...) for number in range(8)]
    among = judge(tmp_path / "among", *others, drainage()).claim()

    assert {**among, "at": None} == {**alone, "at": None}


def test_claims_that_raise_their_own_prior_are_named(tmp_path: Path) -> None:
    """A request may bring a prior with its record; one that helps the claim is said before anything else."""
    raised = [
        drainage(id=f"raised/{number}", prior={"probability": 0.9, "basis": "a hunch"}) for number in range(6)
    ]
    lowered = drainage(id="lowered", prior={"probability": 0.1, "basis": "a base rate"})

    answer = judge(tmp_path, lowered, *raised)

    assert answer.verdict["notes"] == [
        "Weighed at a prior that the record itself sets above the policy's: raised/0, raised/1, raised/2, "
        "raised/3, raised/4 and 1 more."
    ]


def test_one_claim_that_raises_its_prior_is_named_alone(tmp_path: Path) -> None:
    answer = judge(tmp_path, drainage(prior={"probability": 0.9, "basis": "a hunch"}))

    assert answer.verdict["notes"] == [
        "Weighed at a prior that the record itself sets above the policy's: drainage/earthworm-biomass."
    ]
