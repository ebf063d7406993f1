"""Stories of promised families, families that change in a request, and departures that are disclosed."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import pytest
from support import Answer, Document, changed, command, commit_all, drainage, weigh

from gatecheck.cli import main

PLAN = "plans/growth.json"
HOLM = {"procedure": "holm", "alpha": 0.005}


def write(folder: Path, path: str, document: Document) -> None:
    """Write a document into a file of the repository."""
    file = folder / path
    file.parent.mkdir(parents=True, exist_ok=True)
    file.write_text(json.dumps(document), encoding="utf-8")


def policy(folder: Path, **rules: Document) -> None:
    """Write a policy with these rules."""
    named = {name.replace("_", "-"): settings for name, settings in rules.items()}
    write(folder, "gatecheck.yaml", {"gatecheck": "policy/1", "rules": named})


def registered(folder: Path, hypotheses: Sequence[Document], **plan: Any) -> str:
    """Seal a plan with these hypotheses, and return its commit."""
    kind = {"gatecheck": "plan/1", "id": "growth", "title": "Drainage and growth", "data": "none"}
    write(folder, PLAN, {**kind, "hypotheses": list(hypotheses), **plan})
    assert main(["seal", str(folder / PLAN)]) == 0
    return commit_all(folder, "plan")


def six(**values: Any) -> list[Document]:
    """Six hypotheses of one family."""
    return [{"id": f"H{number}", "text": "It grows.", "family": "growth", **values} for number in range(1, 7)]


def answering(number: int, value: float, p: str, **changes: Any) -> Document:
    """A record that answers one of the six, in a family of six."""
    return drainage(**{
        "id": f"growth/{number}",
        "test__value": value,
        "test__p": p,
        "test__alpha": 0.005,
        "estimate": ...,
        "plan": {"file": PLAN, "hypothesis": f"H{number}"},
        "family": {"name": "growth", "size": 6, "procedure": "holm"},
        **changes,
    })


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """The folder of a repository."""
    made = tmp_path / "repository"
    made.mkdir()
    return made


def test_one_of_six_promised_reported_as_a_family_of_one(folder: Path) -> None:
    """Six hypotheses at a level of .005 together, and a record of one alone with p = .034."""
    policy(folder, registered={}, family={})
    frozen = registered(folder, six(alpha=0.005), families={"growth": HOLM})
    write(folder, "r.json", answering(1, 2.21, "0.034", test__alpha=..., family__size=1))
    commit_all(folder, "result")

    answer = weigh(folder)

    assert answer.status == 1
    assert answer.rule("registered", "growth/1")["message"] == (
        f"The claim differs from H1 of {PLAN} as frozen at {frozen[:12]}, without a deviation that says so: alpha "
        "is not told, and 0.005 was promised; the size of the family is 1, and 6 was promised."
    )
    assert answer.rule("family", "growth/1")["message"] == (
        "t(34) = 2.21, p = 0.034 has an adjusted p of 0.0339 in the family growth (holm, 1 member); the plan "
        "promises a level of 0.005."
    )


@pytest.mark.parametrize(("alpha", "outcome"), [(0.005, "met"), (0.001, "met"), (0.05, "short")])
def test_the_level_of_the_family_stands_for_that_of_its_hypotheses(
    folder: Path, alpha: float, outcome: str
) -> None:
    """Where the hypotheses have none of their own; one test may take a share of it."""
    policy(folder, registered={})
    registered(folder, six(), families={"growth": HOLM})
    write(folder, "r.json", answering(1, 4.21, "<0.001", test__alpha=alpha))
    commit_all(folder, "result")

    said = weigh(folder).rule("registered", "growth/1")

    assert said["outcome"] == outcome
    assert ("alpha is 0.05, and 0.005 was promised" in said["message"]) is (outcome == "short")


def test_a_claim_stands_in_its_family_at_the_level_that_was_promised(folder: Path) -> None:
    """t(34) = 3.2, p = .003: by Holm over six .018, within .05 of the policy and not within .005 of the plan."""
    policy(folder, family={})
    registered(folder, six(), families={"growth": HOLM})
    write(folder, "r1.json", answering(1, 3.2, "0.0030"))
    for number in range(2, 7):
        write(folder, f"r{number}.json", answering(number, 5.5, "<0.001"))
    commit_all(folder, "results")

    planned = weigh(folder)
    write(folder, "gatecheck.yaml", {"gatecheck": "policy/1", "rules": {"family": {"alpha": 0.001}}})
    stricter = weigh(folder)

    assert (planned.status, planned.rule("family", "growth/2")["outcome"]) == (0, "met")
    assert planned.rule("family", "growth/1")["limit"] == 0.005
    assert stricter.rule("family", "growth/1")["message"].endswith("; the policy allows 0.001.")


@pytest.mark.parametrize(
    ("families", "size", "said"),
    [
        ({"growth": {"procedure": "holm"}}, 8, "the size of the family is 8, and 6 was promised"),
        ({"growth": {"procedure": "holm"}}, ..., "the size of the family is not told, and 6 was promised"),
        ({}, 5, "the size of the family is 5, and 6 was promised"),
        ({}, 8, None),
        ({"growth": {"procedure": "holm"}}, 6, None),
    ],
)
def test_the_size_of_a_family_is_that_of_the_plan(
    folder: Path, families: Document, size: Any, said: str | None
) -> None:
    """A plan that does not describe the family may leave members of it to other plans."""
    policy(folder, registered={})
    registered(folder, six(), **({"families": families} if families else {}))
    write(folder, "r.json", answering(1, 4.21, "<0.001", family__size=size))
    commit_all(folder, "result")

    answer = weigh(folder)

    assert answer.status == (0 if said is None else 1)
    assert said is None or answer.rule("registered", "growth/1")["message"].endswith(f": {said}.")


@pytest.mark.parametrize(("size", "status"), [(5, 0), (6, 0), (4, 1), (7, 1)])
def test_a_deferred_hypothesis_may_be_counted_and_need_not(folder: Path, size: int, status: int) -> None:
    policy(folder, registered={})
    hypotheses = six()
    hypotheses[5]["deferred"] = True
    registered(folder, hypotheses, families={"growth": {"procedure": "holm"}})
    write(folder, "r.json", answering(1, 4.21, "<0.001", family__size=size))
    commit_all(folder, "result")

    assert weigh(folder).status == status


def member(number: int, **changes: Any) -> Document:
    """One of three results of a family: p .034, .324 and .62."""
    value, p = ((2.21, "0.034"), (1.0, "0.324"), (0.5, "0.620"))[number]
    family = {"name": "growth", "size": 3, "procedure": "holm"}
    return drainage(**{
        "id": f"growth/{number}", "test__value": value, "test__p": p, "estimate": ..., "family": family, **changes,
    })  # fmt: skip


def members(folder: Path, *records: Document) -> None:
    """Write these records in place of those that there were."""
    for file in folder.glob("m*.json"):
        file.unlink()
    for number, record in enumerate(records):
        write(folder, f"m{number}.json", record)


@pytest.fixture
def family(folder: Path) -> Path:
    """A repository with a family of three at its base."""
    policy(folder, family={})
    members(folder, *(member(number) for number in range(3)))
    commit_all(folder, "base")
    return folder


LEFT = (
    "At the base t(34) = 2.21, p = 0.034 was in the family growth, and now it is {now}; the policy wants every "
    "test behind a claim in its family."
)


def requested(folder: Path, *records: Document) -> Answer:
    """The answer on a request that makes the family into these records."""
    members(folder, *records)
    commit_all(folder, "request")
    return weigh(folder, "--base", "HEAD~1")


def test_a_family_that_all_records_drop_binds_them_still(family: Path) -> None:
    answer = requested(family, *(member(number, family=...) for number in range(3)))

    assert answer.status == 1
    said = answer.rule("family", "growth/0")
    assert (said["outcome"], said["observed"]) == ("short", None)
    assert said["message"] == LEFT.format(now="in none")
    assert said["remedy"] == (
        "Name the family growth again, with its size and procedure; to rename it, do so in all its members at once."
    )
    assert [each["verdict"] for each in answer.verdict["claims"]] == ["falls-short"] * 3


def test_a_record_that_leaves_its_family_does_not_stand(family: Path) -> None:
    answer = requested(family, member(0, family=...), member(1), member(2))

    assert answer.rule("family", "growth/0")["message"] == LEFT.format(now="in none")
    assert answer.rule("family", "growth/1")["message"] == (
        "The family growth is not whole: since the base growth/0 has left it; 2 of 3 members are in this tree."
    )


def test_a_record_that_moves_into_a_family_of_its_own_does_not_stand(family: Path) -> None:
    alone = {"name": "height", "size": 1, "procedure": "holm"}
    answer = requested(family, member(0, family=alone), member(1, family__size=2), member(2, family__size=2))

    assert answer.rule("family", "growth/0")["message"] == LEFT.format(now="in the family height")
    assert answer.rule("family", "growth/1")["message"] == (
        "The family growth is not whole: since the base growth/0 has left it; it had 3 members at the base and "
        "declares 2."
    )


def test_several_that_left_and_a_size_that_is_told_no_more(family: Path) -> None:
    records = [member(0, family=...), member(1, family=...), member(2, family__size=...)]

    said = requested(family, *records).rule("family", "growth/2")

    assert said["message"] == (
        "The family growth is not whole: since the base growth/0, growth/1 have left it; it had 3 members at the "
        "base and has 1."
    )


def test_a_family_that_is_renamed_in_all_its_members_is_judged_as_before(family: Path) -> None:
    answer = requested(family, *(member(number, family__name="height") for number in range(3)))

    assert answer.rule("family", "growth/0")["message"] == (
        "t(34) = 2.21, p = 0.034 has an adjusted p of 0.102 in the family height (holm, 3 members); the policy "
        "allows 0.05."
    )


def test_a_renamed_family_that_shrinks_is_missed(family: Path) -> None:
    answer = requested(family, *(member(n, family__name="height", family__size=2) for n in range(3)))

    assert answer.rule("family", "growth/0")["message"] == (
        "The family height is not whole: it had 3 members at the base and declares 2; 3 members are in this tree "
        "and 2 are declared."
    )


def test_a_family_of_one_with_two_members_is_told_as_what_it_is(folder: Path) -> None:
    policy(folder, family={})
    members(folder, member(0, family__size=1), member(1, family__size=1))

    assert weigh(folder).rule("family", "growth/0")["message"] == (
        "The family growth is not whole: 2 members are in this tree and 1 is declared."
    )


def test_a_record_that_claims_nothing_may_leave(family: Path) -> None:
    """What is only reported is no claim on which a family is to be held."""
    answer = requested(family, member(0, family=..., claim=...), member(1), member(2))

    assert "family" not in [each["rule"] for each in answer.claim("growth/0")["rules"]]


def test_every_difference_is_listed_by_weigh_and_by_explain(folder: Path) -> None:
    policy(folder, registered={})
    promised = {"id": "H1", "text": "It grows.", "outcome": {"variable": "height", "metric": "cm"}, "alpha": 0.01,
                "population": "all plots", "covariates": ["block"], "test": "Mann-Whitney"}  # fmt: skip
    registered(folder, [promised])
    write(folder, "r.json", drainage(
        id="growth/1", outcome={"variable": "mass", "metric": "g"}, plan={"file": PLAN, "hypothesis": "H1"},
    ))  # fmt: skip
    commit_all(folder, "result")

    account = " ".join(command("weigh", str(folder)).stdout.split())
    explained = " ".join(command("explain", "growth/1", str(folder)).stdout.split())

    for text in (account, explained):
        assert text.count(" was promised") - text.count("what was promised") == 6
        assert " more." not in text


CHANGED_VERDICT = "Noted, without effect on the verdict"


def told_in(folder: Path) -> dict[str, str]:
    """What the terminal, the summary and the page say, in one line each."""
    made = {}
    for name, arguments in (
        ("terminal", []),
        ("summary", ["--write", "summary=-"]),
        ("page", ["--write", "page=-"]),
    ):
        run = command("weigh", str(folder), *arguments)
        assert run.returncode == 0, run.stderr
        made[name] = " ".join(run.stdout.split())
    return made


@pytest.mark.parametrize("known", ["before-data", "before-results"])
def test_a_departure_that_is_disclosed_is_seen_beside_a_claim_that_stands(folder: Path, known: str) -> None:
    policy(folder, registered={})
    registered(folder, [{"id": "H1", "text": "It grows.", "population": "all plots"}])
    stated = {"planned": "all plots", "done": "drained plots", "reason": "flood closed the site", "known": known}
    write(folder, "r.json", drainage(
        id="growth/1", population="drained plots", plan={"file": PLAN, "hypothesis": "H1"},
        deviations=[{"field": "population", **stated}],
    ))  # fmt: skip
    commit_all(folder, "result")
    disclosed = (
        f"the population is drained plots, and all plots was promised (decided {known}: flood closed the site)"
    )

    answer, told = weigh(folder), told_in(folder)

    assert (answer.status, answer.claim("growth/1")["verdict"]) == (0, "stands")
    assert answer.rule("registered", "growth/1")["message"].endswith(f"It discloses: {disclosed}.")
    for text in told.values():
        assert CHANGED_VERDICT in text
        assert "flood closed the site" in text
        assert "all plots was promised" in text


def test_a_deviation_for_the_reverse_change_excuses_nothing(folder: Path) -> None:
    policy(folder, registered={})
    registered(folder, [{"id": "H1", "text": "It grows.", "sides": 2}])
    reverse = {"field": "sides", "planned": "1", "done": "2", "reason": "a flood", "known": "before-data"}
    write(folder, "r.json", drainage(
        id="growth/1", test__sides=1, test__tail="greater", test__p="0.017", estimate=...,
        plan={"file": PLAN, "hypothesis": "H1"}, deviations=[reverse],
    ))  # fmt: skip
    commit_all(folder, "result")

    answer = weigh(folder)

    assert answer.status == 1
    assert answer.rule("registered", "growth/1")["message"].endswith(
        "one side of the test is taken, and both sides were promised (two-sided p = 0.0339), while its deviation "
        "says that 1 was planned and 2 was done."
    )


def test_code_that_changed_after_the_record_is_seen_beside_a_claim_that_stands(folder: Path) -> None:
    policy(folder, fresh={})
    (folder / "plots.csv").write_bytes(b"plot,yield\n")
    (folder / "analysis.py").write_text("1\n", encoding="utf-8")
    digest = hashlib.sha256(b"plot,yield\n").hexdigest()
    inputs = [{"path": "plots.csv", "sha256": digest}]
    write(folder, "r.json", drainage(provenance={"code": "analysis.py", "inputs": inputs}))
    commit_all(folder, "result")
    before = told_in(folder)
    (folder / "analysis.py").write_text("2\n", encoding="utf-8")
    commit_all(folder, "other code")

    answer, told = weigh(folder), told_in(folder)

    assert (answer.status, answer.rule("fresh")["outcome"]) == (0, "met")
    newer = "Its code, analysis.py, changed in a later commit than the record."
    assert answer.rule("fresh")["message"].endswith(newer)
    for name, text in told.items():
        assert CHANGED_VERDICT in text
        assert newer in text.replace("\\", "")
        assert newer not in before[name].replace("\\", "")


@pytest.mark.parametrize(
    ("procedure", "was"), [("none", "holm"), ("benjamini-hochberg", "holm"), ("fixed-sequence", "holm")]
)
def test_a_looser_procedure_in_all_members_does_not_free_the_claim(family: Path, procedure: str, was: str) -> None:
    records = [member(number, family__procedure=procedure, family__position=number + 1) for number in range(3)]

    answer = requested(family, *records)

    assert answer.rule("family", "growth/0")["message"] == (
        f"The family growth is not whole: its procedure was {was} at the base and is {procedure}."
    )


def test_a_stricter_procedure_is_no_shortfall_of_its_own(family: Path) -> None:
    answer = requested(family, *(member(number, family__procedure="bonferroni") for number in range(3)))

    assert "has an adjusted p of 0.102" in answer.rule("family", "growth/0")["message"]
    assert changed(answer.verdict, claims=...)["exit"] == 1
