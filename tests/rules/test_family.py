"""Rule `family`: whole families, one procedure, and claims that stand in them."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
from statsmodels.stats.multitest import multipletests
from support import POLICY, Answer, Document, changed, drainage, judge

RULE = "family"
POLICY_ON = changed(POLICY, rules={RULE: {}})
RAW = [0.001, 0.008, 0.03, 0.04]
METHODS = {
    "bonferroni": "bonferroni",
    "holm": "holm",
    "hochberg": "simes-hochberg",
    "hommel": "hommel",
    "benjamini-hochberg": "fdr_bh",
    "benjamini-yekutieli": "fdr_by",
}


def members(raw: list[float], **family: Any) -> list[Document]:
    """A claim for each raw p, all of one family."""
    return [
        drainage(
            id=f"growth/{number}",
            test={"name": "t", "statistic": "t", "df": 34, "p": p},
            estimate=...,
            family={"name": "growth", "size": len(raw), "procedure": "holm", **family},
        )
        for number, p in enumerate(raw)
    ]


def judged(tmp_path: Path, records: list[Document]) -> Answer:
    """The answer on a tree of these records."""
    return judge(tmp_path, *records, policy=POLICY_ON)


@pytest.mark.parametrize("procedure", METHODS)
def test_p_is_adjusted_anew_from_all_members(tmp_path: Path, procedure: str) -> None:
    """The same figures as statsmodels' multipletests, and the claim stands where they are within the level."""
    answer = judged(tmp_path, members(RAW, procedure=procedure))

    expected = multipletests(RAW, method=METHODS[procedure])[1]
    for number, adjusted in enumerate(expected):
        said = answer.rule(RULE, f"growth/{number}")
        assert said["observed"] == pytest.approx(adjusted, rel=1e-9)
        assert said["outcome"] == ("met" if adjusted <= 0.05 else "short")


def test_without_a_procedure_the_raw_p_counts(tmp_path: Path) -> None:
    answer = judged(tmp_path, members(RAW, procedure="none"))

    assert [answer.rule(RULE, f"growth/{number}")["observed"] for number in range(4)] == pytest.approx(RAW)


def test_a_claim_that_does_not_stand_in_its_family_says_where_it_is(tmp_path: Path) -> None:
    said = judged(tmp_path, members(RAW)).rule(RULE, "growth/2")

    assert said["message"] == (
        "p = 0.03 has an adjusted p of 0.06 in the family growth (holm, 4 members); the policy allows 0.05."
    )
    assert (
        said["remedy"] == "Claim the members that the procedure rejects, or confirm this one in a study of its own."
    )


def test_a_family_that_shrank_is_not_whole(tmp_path: Path) -> None:
    """Four of eight planned members here: the claim falls short whatever its p."""
    said = judged(tmp_path, members(RAW, size=8)).rule(RULE, "growth/0")

    assert said["outcome"] == "short"
    assert said["message"] == "The family growth is not whole: 4 of 8 members are in this tree."
    assert said["observed"] == pytest.approx(0.008)  # an absent member counts as one that showed nothing


def test_a_family_of_absurd_size_is_not_whole_and_not_computed(tmp_path: Path) -> None:
    said = judged(tmp_path, members(RAW, size=10**15)).rule(RULE, "growth/0")

    assert (said["outcome"], said["observed"]) == ("short", None)


def test_members_that_declare_different_families_are_told(tmp_path: Path) -> None:
    records = members(RAW)
    records[1]["family"] |= {"size": 3}
    records[2]["family"] |= {"procedure": "hommel"}

    said = judged(tmp_path, records).rule(RULE, "growth/0")

    assert said["outcome"] == "short"
    assert said["message"] == (
        "The family growth is not whole: its members declare the sizes 3 and 4; its members declare the procedures "
        "holm and hommel."
    )


@pytest.mark.parametrize(
    ("adjusted", "outcome"),
    [("0.024", "met"), (0.024, "met"), ("<0.05", "met"), ("0.02", "met"), ("0.04", "short"), ("0.020", "short")],
)
def test_an_adjusted_p_that_is_reported_agrees(tmp_path: Path, adjusted: Any, outcome: str) -> None:
    records = members(RAW)
    records[1]["family"] |= {"adjusted_p": adjusted}

    said = judged(tmp_path, records).rule(RULE, "growth/1")

    assert said["outcome"] == outcome
    if outcome == "short":
        assert said["message"].endswith(f"(holm, 4 members), and {adjusted} is reported.")


def test_a_fixed_sequence_stops_at_the_first_that_is_not_rejected(tmp_path: Path) -> None:
    """Order is the declared position, not that of the files: the third fails, so the fourth does not count."""
    raw = [0.02, 0.3, 0.001, 0.01]
    records = members(raw, procedure="fixed-sequence")
    for record, position in zip(records, (2, 3, 4, 1), strict=True):
        record["family"] |= {"position": position}

    answer = judged(tmp_path, records)

    observed = [answer.rule(RULE, f"growth/{number}")["observed"] for number in range(4)]
    assert observed == pytest.approx([0.02, 0.3, 0.3, 0.01])


@pytest.mark.parametrize("positions", [(1, 2, 3, None), (1, 2, 3, 3)])
def test_a_fixed_sequence_without_an_order_is_undecided(tmp_path: Path, positions: tuple[int | None, ...]) -> None:
    records = members(RAW, procedure="fixed-sequence")
    for record, position in zip(records, positions, strict=True):
        record["family"] |= {"position": position}

    answer = judged(tmp_path, records)

    assert (answer.status, answer.rule(RULE, "growth/0")["outcome"]) == (3, "undecided")
    assert "cannot be told" in answer.rule(RULE, "growth/0")["message"]


def test_a_member_without_a_raw_p_leaves_all_undecided(tmp_path: Path) -> None:
    records = members(RAW)
    records[3]["test"] = {"name": "t", "p": 0.2, "p_kind": "adjusted"}

    assert judged(tmp_path, records).rule(RULE, "growth/0")["outcome"] == "undecided"


def test_a_member_that_claims_nothing_counts_and_a_family_without_size_is_as_large_as_it_is(tmp_path: Path) -> None:
    records = members(RAW, size=None)
    records[3] = changed(records[3], claim=...)

    answer = judged(tmp_path, records)

    assert answer.rule(RULE, "growth/2")["observed"] == pytest.approx(0.06)
    assert RULE not in [each["rule"] for each in answer.claim("growth/3")["rules"]]


def test_no_penalty_is_put_on_reporting_a_harm(tmp_path: Path) -> None:
    records = [changed(record, harm=True) for record in members(RAW)]

    assert judged(tmp_path, records).rule(RULE, "growth/3")["outcome"] == "does-not-apply"


def test_a_claim_without_a_family_is_none_of_its_business(tmp_path: Path) -> None:
    assert RULE not in [each["rule"] for each in judged(tmp_path, [drainage()]).claim()["rules"]]
