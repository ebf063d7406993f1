"""The command `trace`: one record through the history, as people read it."""

from __future__ import annotations

import json
from base64 import b64encode
from collections.abc import Iterator
from pathlib import Path

import pytest
from history.repositories import ID, Repository, result, with_looks
from support import POLICY, Document, changed, command

from gatecheck.cli import main
from gatecheck.errors import CannotJudge
from gatecheck.model.found import Found
from gatecheck.model.looks_seen import Course
from gatecheck.model.verdict import Problem
from gatecheck.policies import read_own_policy
from gatecheck.policy import Policy
from gatecheck.render import course_account as course
from gatecheck.scan import scan
from gatecheck.scan.documents import judged
from gatecheck.scan.readers.document import Document as Parsed
from gatecheck.tracing import trace


def policy(**changes: object) -> Policy:
    """The usual policy of the tests with other values."""
    made, faults = read_own_policy(changed(POLICY, **changes))
    assert made is not None, faults
    return made


def traced(repo: Repository, record_id: str = ID, base: str | None = None, **changes: object) -> Course:
    """Return the course of a record that there is."""
    told = trace(repo.root, policy(**changes), record_id, base)
    assert told is not None
    return told


def ask(capsys: pytest.CaptureFixture[str], *arguments: str | Path) -> tuple[int, str, str]:
    """Run the command and return its status and what it wrote."""
    status = main(["trace", *map(str, arguments)])
    written = capsys.readouterr()
    return status, written.out, written.err


def short_ids(repo: Repository) -> list[str]:
    """Return the ids of the commits on the line of first parents, oldest first, as they are shown."""
    return [each[:12] for each in repo.git("rev-list", "--reverse", "--first-parent", "HEAD").split("\n")]


def test_five_looks_at_one_growing_sample(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Five looks at 0.05 have a type I error of 0.142 (Armitage, McPherson and Rowe 1969)."""
    repo = with_looks(tmp_path / "repo")
    a, b, c, d, e = short_ids(repo)

    status, out, err = ask(capsys, ID, repo.root)

    assert (status, err) == (0, "")
    assert (
        out
        == f"""\
drainage/earthworm-biomass through 5 states, oldest first.

Date        Commit          n  Statistic  p      Risk  What changed
2031-01-02  {a}   20  z          0.42   53 %  first state
2031-02-02  {b}   40  z          0.21   47 %  new look
2031-03-02  {c}   60  z          0.11   36 %  new look
2031-04-02  {d}   80  z          0.06   25 %  new look
2031-05-02  {e}  100  z          0.031  16 %  new look, claim added

Risk: the false positive risk against the effect as observed, prior 0.5.

The history shows 5 looks: without a boundary planned for them, as many at 0.05
have a real type I error of 0.142.
"""
    )


def test_what_changed_is_told_below_the_figures_where_it_has_no_room_beside_them(tmp_path: Path) -> None:
    repo = with_looks(tmp_path / "repo")
    repo.commit("2031-06-02", r=result(0.031, 100, claim="A sentence about earthworms."))

    lines = course(traced(repo), 70).splitlines()

    first = short_ids(repo)[0]
    assert lines[2:6] == [
        "Date        Commit          n  Statistic  p      Risk",
        "    What changed",
        f"2031-01-02  {first}   20  z          0.42   53 %",
        "    first state",
    ]
    assert "    rerun, claim changed" in lines


def test_all_that_can_change(repo: Repository) -> None:
    t = {"name": "t", "statistic": "t", "value": 1.5, "df": 18}
    repo.commit("2031-01-01", r=result(0.4, 20, id="older", test=t))
    repo.commit("2031-01-02", r=result(0.4, 20, id="older", test=t), other="1")
    repo.commit("2031-01-03", r=result(0.4, 20, aliases=["older"], test=t, claim=...))
    repo.commit("2031-01-04", r=result(0.3, 20, aliases=["older"]))
    repo.commit("2031-01-05", r=result(0.2, 15, aliases=["older"]))
    repo.put("r.json", result(0.1, 40, aliases=["older"]))

    told = traced(repo)

    assert [(each.day, each.change, each.claim, each.id_before) for each in told.steps] == [
        ("2031-01-01", "look", "added", None),
        ("2031-01-03", "rerun", "taken out", "older"),
        ("2031-01-04", "other", "added", None),
        ("2031-01-05", "smaller", "kept", None),
        ("", "look", "kept", None),
    ]
    assert told.steps[0].p == "0.151"
    text = course(told, 140)
    for said in (
        "first state, claim added",
        "rerun, claim taken out, id changed from older",
        "other data or code, claim added",
        "fewer units: other data or code",
        "the tree",
        "t(18) = 1.5",
        "The history shows 2 looks",
    ):
        assert said in text
    assert [each.id for each in (told, traced(repo, "older"))] == [ID, ID]


def test_a_look_off_the_main_line_is_marked(repo: Repository) -> None:
    repo.commit(r=result(0.4, 20))
    repo.git("checkout", "-q", "-b", "side")
    repo.commit(r=result(0.2, 40))
    repo.git("checkout", "-q", "main")
    repo.commit(r=result(0.03, 60))
    repo.git("merge", "-q", "--no-ff", "-m", "merged", "-s", "ours", "side")

    text = course(traced(repo), 100)

    assert text.count("off the main line") == 1
    assert "40  z          0.2   46 %  new look, off the main line" in text
    assert "off the main line" not in course(traced(repo, base="HEAD^1"), 100)


def test_each_state_is_weighed_as_the_policy_asks_for_it_then(repo: Repository) -> None:
    """At even odds the risk of z = 1.96, two-sided, is 1 / (1 + (exp(z^2 / 2) + exp(-3 z^2 / 2)) / 2) = 0.2265."""
    z = {"name": "z", "statistic": "z", "value": 1.96}
    repo.commit(r=result(0.05, 20, test=z, status="exploratory"))
    repo.commit(r=result(0.05, 20, test=z, status="confirmatory"))
    override = [{"match": {"status": "exploratory"}, "evidence": {"prior": 0.1}}]

    made, _ = read_own_policy({**POLICY, "for": override})
    assert made is not None
    told = trace(repo.root, made, ID)

    assert told is not None
    low, even = (step.risk for step in told.steps)
    assert low is not None
    assert even is not None
    assert even == pytest.approx(0.226512, abs=1e-6)
    assert low / (1 - low) == pytest.approx(9 * even / (1 - even))
    assert told.assumed == (("observed-effect", 0.1), ("observed-effect", 0.5))
    assert "prior 0.1; against the effect as observed, prior 0.5." in course(told, 200)


def test_earlier_states_are_no_further_evidence(repo: Repository) -> None:
    """Both states answer one hypothesis of one plan, and the older is not pooled with the newer."""
    estimate = {"measure": "mean difference", "value": 4.2, "standard_error": 1.9}
    plan = {"file": "plan.yaml", "hypothesis": "H1"}
    changes = {"estimate": estimate, "plan": plan}
    repo.commit(r=result(0.03, 20, **changes))
    alone = traced(repo).steps[0].risk
    repo.commit(r=result(0.03, 40, **{**changes, "estimate": {**estimate, "value": 4.3}}))

    assert [each.risk for each in traced(repo).steps] == pytest.approx([alone, alone])


def test_what_cannot_be_weighed_has_no_risk(repo: Repository) -> None:
    repo.commit(r=result(0.2, 20, test=...))
    repo.commit(r=result(0.2, 20, aim="equivalence"))

    told = traced(repo)

    assert [(each.p, each.risk) for each in told.steps] == [("", None), ("0.2", None)]
    repo.put("r.json", result(0.2, 20, test=..., id="another"))
    assert "No risk is given, as no result could be weighed." in course(traced(repo, "another"), 80)


def test_the_level_is_that_of_the_record_else_of_the_rule(tmp_path: Path) -> None:
    repo = with_looks(tmp_path / "repo")

    assert traced(repo).alpha == 0.05
    assert traced(repo, rules={"looks": {"alpha": 0.01}}).alpha == 0.01
    repo.put("r.json", result(0.01, 120, test__alpha=0.025))
    told = traced(repo, rules={"looks": {"alpha": 0.01}})
    assert (told.alpha, len(told.looks.looks)) == (0.025, 6)
    assert "6 looks: without a boundary planned for them, as many at 0.025" in " ".join(course(told, 80).split())


def test_one_look_has_the_error_of_one_test(repo: Repository) -> None:
    repo.commit(r=result(0.2, 20))

    assert "The history shows one look, so its type I error is that of one test: 0.05." in course(traced(repo), 80)
    assert traced(repo).error == pytest.approx(0.05)


def test_a_record_that_is_gone_has_its_course_still(repo: Repository) -> None:
    repo.commit(r=result(0.2, 20))
    repo.commit(r=None)

    text = course(traced(repo), 100)

    assert text.startswith("drainage/earthworm-biomass through 1 state, oldest first. The tree holds it no longer.")


def test_a_shallow_clone_tells_what_it_knows_and_what_to_fetch(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    shallow = with_looks(tmp_path / "repo").clone(tmp_path / "shallow", "--depth=2")
    cut = short_ids(shallow)[0]

    status, out, _ = ask(capsys, ID, shallow.root)

    assert status == 0
    assert "The history shows at least 2 looks" in out
    assert f"How many looks were taken is not known (history cut at {cut}). To mend:" in out
    assert "run `git fetch --unshallow origin`; with actions/checkout, set `fetch-depth: 0`." in out
    status, out, err = ask(capsys, "another", shallow.root)
    assert (status, out) == (3, "")
    assert err == (
        "gatecheck: cannot judge: neither the tree nor what is here of the history has that record: history cut at "
        f"{cut}; run `git fetch --unshallow origin`; with actions/checkout, set `fetch-depth: 0`.\n"
    )


def test_what_could_not_be_read_is_listed(repo: Repository) -> None:
    repo.commit(r=json.dumps(result(0.4, 10))[:-1])
    repo.commit(r=result(0.2, 20))

    told = traced(repo)

    assert [(each.path, each.commit[:12]) for each in told.unreadable] == [("r.json", short_ids(repo)[0])]
    listed = " ".join(course(told, 80).split())
    assert f"Could not be read r.json at {short_ids(repo)[0]}: the text is no JSON" in listed


PLANNED = {"plan": {"file": "plan.yaml", "hypothesis": "H1"}}
NO_PLAN = {"plan": {"file": "plan.yaml"}}


@pytest.mark.parametrize(
    ("before", "now", "doubted"),
    [
        (result(0.4, 20, id="old", **PLANNED), result(0.2, 40, **PLANNED), True),
        (
            result(0.4, 20, id="old", **PLANNED),
            result(0.2, 40, plan__file="./plan.yaml", plan__hypothesis="H1"),
            True,
        ),
        (result(0.4, 20, id="old", **NO_PLAN), result(0.2, 40, **NO_PLAN), True),
        (result(0.4, 20, id="old", **PLANNED), result(0.2, 40, aliases=["old"], **PLANNED), False),
        (result(0.4, 20, id="old", **NO_PLAN), result(0.2, 40, **PLANNED), False),
        (result(0.4, 20, id="old"), result(0.2, 40, **PLANNED), False),
        (result(0.4, 20, id="old", **PLANNED), result(0.2, 40), False),
        (result(0.4, 20, id="old", **PLANNED), result(0.2, 40, **NO_PLAN), False),
    ],
)
def test_looks_under_an_id_that_was_rewritten_are_not_known(
    repo: Repository, before: Document, now: Document, doubted: bool
) -> None:
    repo.commit(r=before)
    repo.commit(r=now)

    told = traced(repo)

    assert told.looks.known != doubted
    assert (told.maybe_before, len(told.steps)) == ((), 2 if now.get("aliases") else 1)
    text = " ".join(course(told, 80).split())
    held = "the history held old for the same hypothesis, and no record here has such an id or alias. To mend: name"
    assert (held in text) == doubted
    assert ("The history shows at least one look" in text) == doubted


def test_an_id_that_was_rewritten_with_its_result_is_a_hint(repo: Repository) -> None:
    repo.commit(r=result(0.4, 40, id="old", **PLANNED))
    repo.commit(r=result(0.2, 40, **PLANNED))

    told = traced(repo)

    assert (told.looks.known, told.maybe_before) == (True, ("old",))
    assert (
        "The history held old for the same hypothesis, and no record here does. What is an earlier id of this "
        "result belongs under aliases."
    ) in " ".join(course(told, 80).split())


def test_a_record_beside_another_of_its_hypothesis_is_no_rewritten_one(repo: Repository) -> None:
    old, new = result(0.4, 20, id="old", **PLANNED), result(0.2, 40, **PLANNED)
    repo.commit(r=json.dumps([old]))
    repo.commit(r=json.dumps([old, new]))
    assert (traced(repo).maybe_before, traced(repo).looks.known) == ((), True)
    repo.put("n.json", result(0.2, 40, id="new", **PLANNED))
    assert (traced(repo, "new").maybe_before, traced(repo, "new").looks.known) == ((), True)


def test_a_p_of_the_same_statistic_is_told_otherwise(repo: Repository) -> None:
    t = {"name": "t", "statistic": "t", "value": 2.19, "df": 98, "p": "0.031"}
    repo.commit(r=result(0.4, 100, test=t))
    repo.commit(r=result(0.4, 100, test={**t, "p": "0.0155", "sides": 1, "tail": "greater"}))
    repo.commit(r=result(0.4, 100, test={**t, "value": 2.18, "p": "0.032"}))

    told = traced(repo)

    assert [each.change for each in told.steps] == ["look", "retold", "other"]
    assert "p told otherwise" in course(told, 100)
    assert "The history shows one look," in course(told, 100)


def one_sided(p: float, n: int, **changes: object) -> Document:
    """A one-sided result at level 0.025."""
    return result(p, n, test__sides=1, test__tail="greater", test__alpha=0.025, **changes)


def test_the_cost_of_looks_is_by_sides_and_units(repo: Repository) -> None:
    """By scipy.stats.multivariate_normal, as in `tests/compare/test_looks_facts.py`: 0.0607."""
    for p, n in ((0.2, 20), (0.15, 22), (0.1, 24), (0.06, 26), (0.0155, 100)):
        repo.commit(r=one_sided(p, n))

    told = traced(repo)

    assert told.error == pytest.approx(0.06068, abs=2e-5)
    assert (
        "The history shows 5 looks: without a boundary planned for them, as many one-sided ones at 0.025, with "
        "information as 20 : 22 : 24 : 26 : 100, have a real type I error of 0.0607."
    ) in " ".join(course(told, 80).split())


LOOKS = {"planned": 5, "boundary": "obrien-fleming"}
PLAN: Document = {
    "gatecheck": "plan/1",
    "id": "drainage",
    "title": "Drainage",
    "data": "none",
    "hypotheses": [{"id": "H1", "text": "It grows.", "looks": LOOKS}],
}


@pytest.mark.parametrize(
    ("first", "look", "told"),
    [
        # A plan that came first, O'Brien-Fleming's nominal p at the last of five looks (recomputed).
        (
            "plan",
            None,
            "The history shows 2 looks. This is look 2 of 5, by the obrien-fleming boundary that plan.json sets, "
            "with a nominal p of 0.00126 there.",
        ),
        (
            "result",
            None,
            "The history shows 2 looks. They come with a boundary that plan.json set only after the first look.",
        ),
        (
            "result",
            {"number": 2, **LOOKS, "schedule": [1.0]},
            "The history shows 2 looks. They come with a boundary that plan.json set only after the first look.",
        ),
    ],
)
def test_what_was_planned_for_the_looks_is_told(
    repo: Repository, first: str, look: Document | None, told: str
) -> None:
    answers: Document = {"plan": {"file": "plan.json", "hypothesis": "H1"}}
    if first == "plan":
        repo.commit(plan=PLAN)
    repo.commit(r=result(0.4, 20, **answers))
    if first != "plan":
        repo.commit(plan=PLAN)
    repo.commit(r=result(0.2, 40, **answers, **({} if look is None else {"look": look})))

    assert told in " ".join(course(traced(repo), 80).split())


def test_a_boundary_of_the_record_and_what_is_not_known_of_it_are_told(repo: Repository) -> None:
    repo.commit(r=result(0.4, 20, look={"number": 1, **LOOKS}))
    repo.commit(r=result(0.2, 40, look={"number": 2, **LOOKS, "schedule": [1.0]}))
    squashed = result(0.2, 40, id="squashed", look={"number": 2, **LOOKS})
    repo.commit(s=squashed, t={**squashed, "id": "unread", "look": {"number": 2}, "plan": {"file": "gone.json"}})
    repo.commit(
        u=result(0.2, 40, id="broken", look={"number": 2}, plan={"file": "b.json"}), b='{"gatecheck": "plan/1"}'
    )

    own, not_known, unplanned, broken = (
        " ".join(course(traced(repo, name), 80).split()) for name in (ID, "squashed", "unread", "broken")
    )

    assert "The history shows 2 looks. This is look 2 of 5, by the obrien-fleming boundary that its first" in own
    assert own.endswith("that its first look told.")
    assert (
        "This is look 2 of 5, by the obrien-fleming boundary that the record tells, with a nominal p" in not_known
    )
    assert "The first result that the history shows is by its own word from look 2, so" in not_known
    assert "The history shows one look, so its type I error is that of one test: 0.05." in unplanned
    assert "The history shows one look. What b.json promised is not known (the plan cannot be read)." in broken


def test_text_from_a_record_is_cleaned(repo: Repository) -> None:
    repo.commit(r=result(0.2, 20, id="old::error"))
    repo.commit(r=result(0.2, 20, aliases=["old::error"], test={"name": "z\x1b[2J", "p": 0.2}))

    text = course(traced(repo), 200)

    assert "::error" not in text
    assert "\x1b" not in text
    assert "z{U+001B}[2J" in text


def test_the_policy_of_the_base_counts(repo: Repository, capsys: pytest.CaptureFixture[str]) -> None:
    repo.put("gatecheck.yaml", changed(POLICY, evidence__prior=0.2))
    repo.commit(r=result(0.2, 20))
    repo.put("gatecheck.yaml", changed(POLICY, evidence__prior=0.7))

    assert "prior 0.2." in ask(capsys, ID, repo.root, "--base", "HEAD")[1]
    assert "prior 0.7." in ask(capsys, ID, repo.root)[1]
    repo.put("other.yaml", changed(POLICY, evidence__prior=0.3))
    assert "prior 0.3." in ask(capsys, ID, repo.root, "--policy", repo.root / "other.yaml")[1]


def test_a_policy_that_cannot_be_read_stops_it(repo: Repository, capsys: pytest.CaptureFixture[str]) -> None:
    repo.put("gatecheck.yaml", "gatecheck: policy/1\nnaame: x\n")
    repo.commit(r=result(0.2, 20))

    assert ask(capsys, ID, repo.root) == (
        3,
        "",
        "gatecheck: cannot judge: the policy cannot be read; see `gatecheck weigh` for what is wrong with it.\n",
    )


def test_an_unknown_id_is_wrong_usage(repo: Repository) -> None:
    repo.commit(r=result(0.2, 20))

    asked = command("trace", "drainage/earthworms", str(repo.root))

    assert (asked.returncode, asked.stdout) == (2, "")
    said = "there is and was no record 'drainage/earthworms'; `gatecheck survey` lists those that there are"
    assert asked.stderr == f"gatecheck: {said}\n"


def test_a_folder_in_no_repository_has_no_course(tmp_path: Path) -> None:
    Repository(tmp_path).put("r.json", result(0.2, 20))

    with pytest.raises(CannotJudge, match="is in no git repository, so it has no history"):
        trace(tmp_path, policy(), ID)


def test_git_that_fails_is_status_3(
    repo: Repository, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    repo.commit(r=result(0.2, 20))
    monkeypatch.setenv("GIT_TEST_ASSUME_DIFFERENT_OWNER", "1")

    status, out, err = ask(capsys, ID, repo.root)

    assert (status, out) == (3, "")
    assert "another user owns it" in err


def test_a_branch_without_a_commit_has_the_tree_alone(repo: Repository) -> None:
    repo.put("r.json", result(0.2, 20))

    assert [(each.commit, each.day) for each in traced(repo).steps] == [(None, "")]
    assert trace(repo.root, policy(), "another") is None


def test_of_the_tree_only_what_may_hold_the_id_is_parsed(repo: Repository, monkeypatch: pytest.MonkeyPatch) -> None:
    repo.commit(a=result(0.2, 20), b=result(0.3, 20, id="another", claim='A "claim" \u2013 with escapes.'))
    repo.put("c.json", json.dumps(result(0.4, 20, id="third")).replace("third", "th\\u0069rd"))
    parsed: list[str] = []

    def counting(document: Parsed) -> Iterator[Found | Problem]:
        parsed.append(document.place.path)
        return judged(document)

    monkeypatch.setattr("gatecheck.scan.judged", counting)

    assert [each.p for each in traced(repo).steps] == ["0.2"]
    assert sorted(parsed) == ["a.json", "c.json"]
    assert trace(repo.root, policy(), "third") is not None


@pytest.mark.parametrize(("old", "new"), [("/e", "\\/e"), ("/e", "\\u002Fe"), ("drain", "dr\\u0061in")])
def test_an_escaped_id_is_traced(repo: Repository, old: str, new: str) -> None:
    for p, n in ((0.4, 20), (0.2, 40)):
        repo.commit(r=json.dumps(result(p, n)).replace(old, new))
    repo.put("r.json", json.dumps(result(0.1, 60)).replace(old, new))

    told = traced(repo)

    assert [(each.p, each.change, each.commit is None) for each in told.steps] == [
        ("0.4", "look", False), ("0.2", "look", False), ("0.1", "look", True),
    ]  # fmt: skip


@pytest.mark.parametrize("encoded", [False, True])
def test_a_record_in_a_notebook_is_traced(repo: Repository, encoded: bool) -> None:
    for p, n in ((0.4, 20), (0.2, 40)):
        told = json.dumps(result(p, n))
        data = {"application/vnd.gatecheck.record+json": b64encode(told.encode()).decode() if encoded else told}
        output = {"output_type": "display_data", "data": data, "metadata": {}}
        repo.put("n.ipynb", {"nbformat": 4, "nbformat_minor": 5, "metadata": {}, "cells": [{"outputs": [output]}]})
        repo.commit()

    course_told = traced(repo)

    assert (course_told.in_tree, [each.p for each in course_told.steps]) == (True, ["0.4", "0.2"])


def test_of_two_records_with_one_id_the_tree_has_that_at_the_earlier_place(repo: Repository) -> None:
    repo.commit(b=result(0.4, 20))
    repo.put("a.json", result(0.2, 40))

    assert [each.p for each in traced(repo).steps] == ["0.4", "0.2"]
    repo.put("a.json", result(0.2, 40, id="another"))
    assert [each.p for each in traced(repo).steps] == ["0.4"]


def test_an_earlier_id_leads_to_the_record_that_the_tree_has(repo: Repository) -> None:
    """Of two records with one id a scan finds that at the earlier place, whose aliases alone count."""
    repo.commit(b=result(0.4, 20, aliases=["old"]))

    assert traced(repo, "old").id == ID
    repo.put("a.json", result(0.2, 40))
    assert [one.at.path for one in scan(repo.root, ["**"], []).found] == ["a.json"]
    assert trace(repo.root, policy(), "old") is None
    repo.put("a.json", result(0.2, 40, aliases=["old"]))
    assert [each.p for each in traced(repo, "old").steps] == ["0.4", "0.2"]
    repo.put("c.json", result(0.1, 60, id="old"))
    assert [each.p for each in traced(repo, "old").steps] == ["0.1"]


def test_a_record_that_the_policy_does_not_scan_is_not_traced(repo: Repository) -> None:
    repo.put("scratch/r.json", result(0.4, 20))
    repo.commit(r=result(0.2, 40, id="another"))
    only_kept = {"scan": {"include": ["**"], "exclude": ["scratch/**"]}}

    assert traced(repo).in_tree
    assert trace(repo.root, policy(**only_kept), ID) is None
