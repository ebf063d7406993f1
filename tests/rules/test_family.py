"""Rule `family`: whole families, one procedure, and claims that stand in them."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
from statsmodels.stats.multitest import multipletests
from support import POLICY, Answer, Document, changed, drainage, judge, write_tree

from gatecheck.cli import main

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
    answer = judged(tmp_path, [drainage(), *members(RAW)])

    assert RULE not in [each["rule"] for each in answer.claim()["rules"]]
    assert answer.rule(RULE, "growth/2")["observed"] == pytest.approx(0.06)


def graph(raw: list[float], shares: list[float], passes_on: list[dict[int, float]]) -> list[Document]:
    """A claim for each raw p, all of one graph whose members pass on parts to others by their number."""
    records = members(raw, procedure="graphical")
    for record, share, parts in zip(records, shares, passes_on, strict=True):
        to = {f"growth/{number}": part for number, part in parts.items()}
        record["family"] |= {"weight": share, "passes_on": to}
    return records


def observed(answer: Answer, size: int) -> list[float]:
    """The adjusted p of each member."""
    return [answer.rule(RULE, f"growth/{number}")["observed"] for number in range(size)]


def test_equal_shares_are_holm(tmp_path: Path) -> None:
    expected = multipletests(RAW, method="holm")[1]

    answer = judged(tmp_path, members(RAW, procedure="weighted-holm", weight=0.25))

    assert observed(answer, 4) == pytest.approx(expected, rel=1e-9)


def test_a_graph_of_equal_shares_and_parts_is_holm(tmp_path: Path) -> None:
    """Thirds are written in four decimals, and sum to less than 1."""
    everyone = [{other: 0.3333 for other in range(4) if other != one} for one in range(4)]

    answer = judged(tmp_path, graph(RAW, [0.25] * 4, everyone))

    assert observed(answer, 4) == pytest.approx(multipletests(RAW, method="holm")[1], rel=1e-3)


def test_a_fixed_sequence_as_a_graph(tmp_path: Path) -> None:
    """All of alpha starts at the first, and each passes all of it on to the next; the last keeps it."""
    records = graph([0.01, 0.04, 0.2, 0.001], [1, 0, 0, 0], [{1: 1}, {2: 1}, {3: 1}, {}])
    records[3]["family"]["passes_on"] = None

    answer = judged(tmp_path, records)

    assert observed(answer, 4) == pytest.approx([0.01, 0.04, 0.2, 0.2], rel=1e-9)
    assert [answer.rule(RULE, f"growth/{n}")["outcome"] for n in range(4)] == ["met", "met", "short", "short"]


def test_a_graph_worked_by_hand(tmp_path: Path) -> None:
    """Two gates with halves of alpha, each with one behind it.

    Ratios at the start: .01/.5 = .02 and .04/.5 = .08. The first is rejected at .02 and passes its half on to the
    third: .02/.5 = .04. That one passes it on to the second gate: .04/1 = .04, not less than .04. The fourth then
    has all of alpha: .03/1 = .03, raised to .04.
    """
    records = graph([0.01, 0.04, 0.02, 0.03], [0.5, 0.5, 0, 0], [{2: 1}, {3: 1}, {1: 1}, {0: 1}])

    assert observed(judged(tmp_path, records), 4) == pytest.approx([0.02, 0.04, 0.04, 0.04], rel=1e-9)


def test_parts_that_round_up_to_more_than_all_are_scaled_down(tmp_path: Path) -> None:
    """Three shares of .335 sum to 1.005: the adjusted p are those of thirds."""
    everyone = [{other: 0.505 for other in range(3) if other != one} for one in range(3)]

    answer = judged(tmp_path, graph(RAW[:3], [0.335] * 3, everyone))

    assert observed(answer, 3) == pytest.approx(multipletests(RAW[:3], method="holm")[1], rel=1e-9)


def test_shares_are_told_where_they_matter(tmp_path: Path) -> None:
    """Ratios .03/.75 = .04 and .02/.25 = .08: the first at its share, the second with all of alpha."""
    records = members([0.03, 0.02], procedure="weighted-holm")
    for record, share in zip(records, (0.75, 0.25), strict=True):
        record["family"] |= {"weight": share, "adjusted_p": "0.04"}
    records[1]["family"] |= {"adjusted_p": "0.08"}

    said = judged(tmp_path, records).rule(RULE, "growth/1")

    assert said["message"] == (
        "p = 0.02 has an adjusted p of 0.04 in the family growth (weighted-holm, 2 members, share of alpha 0.25), "
        "and 0.08 is reported."
    )


def test_the_share_at_the_start_of_a_graph_is_told(tmp_path: Path) -> None:
    said = judged(tmp_path, graph([0.5, 0.02], [0.5, 0.25], [{1: 1}, {0: 1}])).rule(RULE, "growth/1")

    assert said["message"] == (
        "p = 0.02 has an adjusted p of 0.08 in the family growth (graphical, 2 members, share of alpha 0.25 at the "
        "start); the policy allows 0.05."
    )


SHARES = "Give every member family.weight, its share of alpha as planned; the shares sum to 1."
PARTS = "Name other members of the family in family.passes_on, by id, with parts that sum to at most 1."


@pytest.mark.parametrize(
    ("procedure", "changes", "why", "remedy"),
    [
        ("weighted-holm", {"weight": None}, "growth/1 has no family.weight", SHARES),
        ("graphical", {"weight": None}, "growth/1 has no family.weight", SHARES),
        (
            "weighted-holm",
            {"weight": 0},
            "growth/1 has no share of alpha above 0, which weighted-holm wants",
            SHARES,
        ),
        ("weighted-holm", {"weight": 0.5}, "the shares of its members sum to 1.25 and not to 1", SHARES),
        ("weighted-holm", {"weight": 0.2}, "the shares of its members sum to 0.95 and not to 1", SHARES),
        ("graphical", {"weight": 0.5}, "the shares of its members sum to 1.25 and not to 1", SHARES),
        (
            "graphical",
            {"passes_on": {"growth/0": 0.5, "growth/9": 0.5, "growth/7": 0}},
            "growth/1 passes its share on to growth/7, which is no member in this tree",
            PARTS,
        ),
        ("graphical", {"passes_on": {"growth/1": 1}}, "growth/1 passes its share on to itself", PARTS),
        (
            "graphical",
            {"passes_on": {"growth/0": 1, "growth/2": 0.5}},
            "growth/1 passes on parts that sum to 1.5, which is more than all",
            PARTS,
        ),
    ],
)
def test_shares_that_make_no_procedure_are_undecided(
    tmp_path: Path, procedure: str, changes: Document, why: str, remedy: str
) -> None:
    records = members(RAW, procedure=procedure, weight=0.25)
    records[1]["family"] |= changes

    answer = judged(tmp_path, records)

    for number in range(4):
        said = answer.rule(RULE, f"growth/{number}")
        assert (answer.status, said["outcome"]) == (3, "undecided")
        assert f" in the family growth cannot be told: {why}." in said["message"]
        assert said["remedy"] == remedy


def test_shares_of_a_graph_may_sum_to_less(tmp_path: Path) -> None:
    answer = judged(tmp_path, members(RAW, procedure="graphical", weight=0.2))

    assert observed(answer, 4) == pytest.approx([0.005, 0.04, 0.15, 0.2], rel=1e-9)


def test_a_graph_that_is_not_whole_says_so_before_its_parts(tmp_path: Path) -> None:
    records = members(RAW, procedure="graphical", weight=0.1, size=5, passes_on={"growth/4": 1})

    said = judged(tmp_path, records).rule(RULE, "growth/0")

    assert said["message"] == "The family growth is not whole: 4 of 5 members are in this tree."


@pytest.mark.parametrize("procedure", ["weighted-holm", "graphical"])
def test_where_a_member_is_absent_its_share_is_not_known(tmp_path: Path, procedure: str) -> None:
    said = judged(tmp_path, members(RAW, procedure=procedure, weight=0.25, size=5)).rule(RULE, "growth/0")

    assert (said["outcome"], said["observed"]) == ("short", None)


def test_a_weighted_member_without_a_raw_p_leaves_all_undecided(tmp_path: Path) -> None:
    for procedure in ("weighted-holm", "graphical"):
        (tmp_path / procedure).mkdir()
        records = members(RAW, procedure=procedure, weight=0.25)
        records[3]["test"] = {"name": "t", "p": 0.2, "p_kind": "adjusted"}

        said = judged(tmp_path / procedure, records).rule(RULE, "growth/0")

        assert (said["outcome"], said["observed"]) == ("undecided", None)
        assert "a raw p of a member, or its place in a fixed sequence, is missing" in said["message"]


def test_a_graph_too_large_to_compute_is_undecided(tmp_path: Path) -> None:
    size = 501
    said = judge_list(tmp_path, members([0.001] * size, procedure="graphical", weight=1 / size))

    assert said.rule(RULE, "growth/0")["message"].endswith(
        "cannot be told: a graph of more than 500 members is not computed."
    )


def judge_list(tmp_path: Path, records: list[Document]) -> Answer:
    """The answer on a tree that holds these records in one file."""
    (tmp_path / "records.json").write_text(json.dumps(records), encoding="utf-8")
    return judged(tmp_path, [])


def large(size: int, hits: int = 20) -> list[float]:
    """Raw p of a large family: `hits` at .0001, the others spread evenly over 0 to 1."""
    rest = size - hits
    return [0.0001] * hits + [(number + 0.5) / rest for number in range(rest)]


def test_true_nulls_of_a_large_family_are_told_beside_the_decision(tmp_path: Path) -> None:
    """100 of 220 p lie above .5, so 200 true nulls, 91 %; up to the largest p rejected, .0025, half of one."""
    answer = judge_list(tmp_path, members(large(220), procedure="benjamini-hochberg"))

    said = answer.rule(RULE, "growth/21")
    assert said["outcome"] == "short"
    assert said["message"].endswith(
        "in the family growth (benjamini-hochberg, 220 members); the policy allows 0.05. The share of true nulls "
        "in it is estimated at 91 %, so about 0.5 of the 21 members rejected are expected to be false."
    )
    assert said["message"].count(". ") == 1
    assert answer.rule(RULE, "growth/0")["outcome"] == "met"


def test_true_nulls_are_explained_where_the_claim_stands(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    records = members(large(120), procedure="benjamini-hochberg")
    (tmp_path / "records.json").write_text(json.dumps(records), encoding="utf-8")
    write_tree(tmp_path, policy=POLICY_ON)

    assert main(["explain", "growth/0", str(tmp_path)]) == 0

    told = " ".join(capsys.readouterr().out.split())
    assert "The share of true nulls in it is estimated at 83 %, so about 0.5 of the 21 members rejected are" in told


def test_a_member_at_the_level_itself_is_among_those_rejected(tmp_path: Path) -> None:
    """By Bonferroni .0005 is adjusted to .05, which the level of .05 just allows: 51 are rejected, and not 50."""
    raw = [0.0001] * 50 + [0.0005] + [0.9] * 49

    answer = judge_list(tmp_path, members(raw, procedure="bonferroni"))

    assert (answer.rule(RULE, "growth/50")["outcome"], answer.rule(RULE, "growth/50")["observed"]) == ("met", 0.05)
    said = answer.rule(RULE, "growth/99")
    assert said["message"].endswith(
        "estimated at 98 %, so about 0.049 of the 51 members rejected are expected to be false."
    )


def test_true_nulls_are_told_by_the_p_above_a_half(tmp_path: Path) -> None:
    said = judge_list(tmp_path, members([0.3] * 150 + [0.9] * 50)).rule(RULE, "growth/0")

    assert said["message"].endswith(
        "The share of true nulls in it is estimated at 50 %, and none of its members is rejected."
    )


def test_a_large_family_of_which_none_is_rejected(tmp_path: Path) -> None:
    said = judge_list(tmp_path, members(large(100, hits=0))).rule(RULE, "growth/0")

    assert said["message"].endswith(
        "The share of true nulls in it is estimated at 100 %, and none of its members is rejected."
    )


@pytest.mark.parametrize(
    ("size", "family"),
    [
        (99, {}),
        (100, {"size": 101}),
        (100, {"procedure": "weighted-holm", "weight": 0.01}),
        (100, {"procedure": "graphical", "weight": 0.01}),
    ],
)
def test_true_nulls_are_not_told(tmp_path: Path, size: int, family: Document) -> None:
    """Not of a small family or one that is not whole, nor where no one p-value parts what is rejected."""
    said = judge_list(tmp_path, members(large(size), **family)).rule(RULE, "growth/50")

    assert said["outcome"] == "short"
    assert "true nulls" not in said["message"]


def test_true_nulls_are_not_told_where_a_raw_p_is_missing(tmp_path: Path) -> None:
    records = members(large(100))
    records[3]["test"] = {"name": "t", "p": 0.2, "p_kind": "adjusted"}

    said = judge_list(tmp_path, records).rule(RULE, "growth/50")

    assert (said["outcome"], "true nulls" in said["message"]) == ("undecided", False)
