"""Stories of interim looks in real repositories, through the real command; all data are invented."""

from __future__ import annotations

from pathlib import Path

import pytest
from history.repositories import FIVE_LOOKS, ID, Repository, repository, result
from support import POLICY, Answer, Document, changed, weigh

from gatecheck.cli import main

RULE = "looks"
LOOKS: Document = {"planned": 5, "boundary": "obrien-fleming"}
LAST: Document = {"number": 5, **LOOKS}
PLAN_FILE = "plans/drainage.json"
ANSWERS: Document = {"plan": {"file": PLAN_FILE, "hypothesis": "H1"}}


@pytest.fixture
def repo(tmp_path: Path) -> Repository:
    """A repository whose policy counts looks."""
    made = repository(tmp_path / "repo")
    made.put("gatecheck.yaml", changed(POLICY, rules={RULE: {}}))
    made.commit()
    return made


def plan(**hypothesis: object) -> Document:
    """A plan of one hypothesis."""
    promised = {"id": "H1", "text": "Drainage increases biomass.", **hypothesis}
    return {"gatecheck": "plan/1", "id": "drainage", "title": "Drainage", "data": "none", "hypotheses": [promised]}


def seal(repo: Repository, **hypothesis: object) -> None:
    """Commit a plan with its seal."""
    repo.put(PLAN_FILE, plan(**hypothesis))
    assert main(["seal", str(repo.root / PLAN_FILE)]) == 0
    repo.commit()


def take_looks(repo: Repository, last: Document | None = None, **changes: object) -> None:
    """Commit five looks at one growing sample; the last tells `last` of its look, and the others nothing."""
    for number, (p, n) in enumerate(FIVE_LOOKS, 1):
        told = {} if last is None or number < len(FIVE_LOOKS) else {"look": last}
        repo.commit(f"2031-0{number}-02", r=result(p, n, **changes, **told))


def said_of(answer: Answer, record_id: str = ID) -> tuple[int, str, str]:
    """The exit status, and the outcome of the rule with its message."""
    said = answer.rule(RULE, record_id)
    return answer.status, said["outcome"], said.get("message", "")


@pytest.mark.parametrize("last", [None, {"number": 5}, LAST])
def test_a_sealed_plan_sets_the_boundary_whatever_the_record_repeats(
    repo: Repository, last: Document | None
) -> None:
    """O'Brien-Fleming's nominal p at the last of five looks is .0413 (Jennison and Turnbull 2000, recomputed)."""
    seal(repo, looks=LOOKS)
    take_looks(repo, last, **ANSWERS)

    answer = weigh(repo.root)

    assert said_of(answer)[:2] == (0, "met")
    assert answer.rule(RULE)["limit"] == pytest.approx(0.0413, abs=6e-5)


@pytest.mark.parametrize("planned", [{"n": {"planned": 20}}, None])
def test_a_boundary_chosen_after_the_fact_is_none_whatever_plan_is_named(
    repo: Repository, planned: Document | None
) -> None:
    """Five looks at .05 have a type I error of .142 (Armitage, McPherson and Rowe 1969)."""
    if planned is not None:
        seal(repo, **planned)
    take_looks(repo, LAST, **ANSWERS)

    status, outcome, message = said_of(weigh(repo.root))

    assert (status, outcome) == (1, "short")
    assert "with a boundary that its first look did not tell: 5 unadjusted looks at 0.05 have a real" in message


@pytest.mark.parametrize("moved", [False, True])
def test_a_plan_sealed_after_the_first_look_sets_no_boundary(repo: Repository, moved: bool) -> None:
    take_looks(repo, **ANSWERS)
    seal(repo, looks=LOOKS)
    if moved:
        repo.git("mv", "r.json", "s.json")
        repo.commit()

    status, outcome, message = said_of(weigh(repo.root))

    assert (status, outcome) == (1, "short")
    assert "with a boundary that plans/drainage.json set only after the first look" in message


def test_a_plan_that_comes_with_its_looks_in_one_merge_does_not_show_their_order(repo: Repository) -> None:
    repo.git("checkout", "-q", "-b", "side")
    seal(repo, looks=LOOKS)
    take_looks(repo, LAST, **ANSWERS)
    repo.git("checkout", "-q", "main")
    repo.commit(other="1")
    repo.git("merge", "-q", "--no-ff", "-m", "merged", "side")

    status, outcome, message = said_of(weigh(repo.root))

    assert (status, outcome) == (3, "undecided")
    assert message.startswith(
        "Whether plans/drainage.json set its looks before the first one is not known (the plan and"
    )


def rewritten(repo: Repository, *ids: str, **changes: object) -> None:
    """Commit looks that answer one hypothesis, each under an id of its own in place of the one before."""
    for name, (p, n) in zip(ids, FIVE_LOOKS, strict=False):
        repo.commit(r=result(p, n, id=name, **ANSWERS, **changes))


def test_an_id_that_was_rewritten_hides_no_look(repo: Repository) -> None:
    rewritten(repo, "a", "b", "c")

    answer = weigh(repo.root)

    assert said_of(answer, "c") == (
        3,
        "undecided",
        "How many looks were taken is not known: the history held a, b for the same hypothesis, and no record here "
        "has such an id or alias.",
    )
    assert answer.rule(RULE, "c")["remedy"] == (
        "Name under aliases what are earlier ids of this result, and keep what is a result of its own."
    )


def test_both_remedies_for_a_rewritten_id_mend_it(repo: Repository) -> None:
    rewritten(repo, "a", "b")
    repo.put("r.json", result(*FIVE_LOOKS[1], id="b", aliases=["a"], **ANSWERS))
    assert said_of(weigh(repo.root), "b")[:2] == (1, "short")
    repo.put("r.json", result(*FIVE_LOOKS[1], id="b", **ANSWERS))
    repo.put("s.json", result(*FIVE_LOOKS[0], id="a", claim=..., **ANSWERS))

    answer = weigh(repo.root)

    assert (answer.status, RULE in [each["rule"] for each in answer.claim("b")["rules"]]) == (0, False)


def test_an_alias_of_an_id_that_is_gone_counts_with_it(repo: Repository) -> None:
    """The oldest id named no plan: it is known by the alias of the one that took its place."""
    repo.commit(r=result(*FIVE_LOOKS[0], id="oldest"))
    repo.commit(r=result(*FIVE_LOOKS[2], id="older", aliases=["oldest"], **ANSWERS))
    repo.commit(r=result(*FIVE_LOOKS[2], id="now", **ANSWERS))

    assert said_of(weigh(repo.root), "now")[:2] == (3, "undecided")


@pytest.mark.parametrize("states", [
    [(0.2, 40), (0.2, 40)],  # the same result under another name
    [(0.1, 40), (0.2, 40)],  # from as many units
    [(0.1, 60), (0.2, 40)],  # from more
])  # fmt: skip
def test_what_was_no_look_under_another_id_is_none(repo: Repository, states: list[tuple[float, int]]) -> None:
    for name, (p, n) in zip("ab", states, strict=True):
        repo.commit(r=result(p, n, id=name, **ANSWERS))

    answer = weigh(repo.root)

    assert RULE not in [each["rule"] for each in answer.claim("b")["rules"]]


def test_a_result_that_is_gone_without_its_number_of_units_may_have_been_a_look(repo: Repository) -> None:
    repo.commit(r=result(0.2, 40, id="a", sample=..., **ANSWERS))
    repo.commit(r=result(0.1, 60, id="b", **ANSWERS))

    assert said_of(weigh(repo.root), "b")[:2] == (3, "undecided")


@pytest.mark.parametrize("registered", [False, True])
def test_a_squash_leaves_the_last_look_and_no_proof_of_a_plan(repo: Repository, registered: bool) -> None:
    if registered:
        seal(repo, looks=LOOKS)
    repo.git("checkout", "-q", "-b", "side")
    take_looks(repo, LAST, **ANSWERS)
    repo.git("checkout", "-q", "main")
    repo.git("merge", "-q", "--squash", "side")
    repo.commit()

    status, outcome, message = said_of(weigh(repo.root))

    assert (status, outcome) == ((0, "met") if registered else (3, "undecided"))
    if not registered:
        assert message.startswith(
            "The first result that the history shows is by its own word from look 5, so whether"
        )


def test_the_cost_of_looks_is_by_sides_and_units(repo: Repository) -> None:
    """By scipy.stats.multivariate_normal, as in `tests/compare/test_looks_facts.py`."""
    for p, n in ((0.2, 20), (0.15, 22), (0.1, 24), (0.06, 26), (0.031, 100)):
        repo.commit(r=result(p, n))
    uneven = (
        "5 unadjusted looks at 0.05, with information as 20 : 22 : 24 : 26 : 100, have a real type I error of 0.121"
    )
    assert uneven in said_of(weigh(repo.root))[2]
    for p, n in ((0.1, 150), (0.2, 200), (0.3, 250)):
        repo.commit(r=result(p, n))
    repo.put("r.json", result(0.015, 300, test__sides=1, test__tail="greater", test__alpha=0.025))

    said = said_of(weigh(repo.root))[2]

    assert (
        "9 unadjusted one-sided looks at 0.025, with information as 20 : 22 : 24 : 26 : 100 : 150 : ... : 300,"
        in said
    )


def test_a_safety_outcome_pays_no_penalty_for_looks(repo: Repository) -> None:
    take_looks(repo, harm=True)

    assert said_of(weigh(repo.root)) == (
        0,
        "does-not-apply",
        "A safety outcome: no penalty for several looks is put on reporting a possible harm.",
    )


def test_what_to_fetch_is_named_by_the_remote_that_there_is(repo: Repository, tmp_path: Path) -> None:
    take_looks(repo)
    shallow = repo.clone(tmp_path / "shallow", "--depth=1", "-o", "upstream")
    partial = repo.clone(tmp_path / "partial", "--filter=blob:none", "-o", "upstream")

    assert "Run `git fetch --unshallow upstream`" in weigh(shallow.root).rule(RULE)["remedy"]
    assert "Run `git fetch --refetch --no-filter upstream`" in weigh(partial.root).rule(RULE)["remedy"]
