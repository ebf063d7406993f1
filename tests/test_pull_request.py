"""Records of a tree against those of its base: claimed anew, otherwise, more strongly or no more."""

from __future__ import annotations

import pytest
from support import Document, changed, drainage

from gatecheck.model.found import Found
from gatecheck.model.verdict import Place
from gatecheck.pull_request import SinceBase, since_base
from gatecheck.schema.records import read_record

ID = "drainage/earthworm-biomass"


def found(*documents: Document) -> list[Found]:
    read = []
    for row, document in enumerate(documents):
        record, faults = read_record(document)
        assert record is not None, faults
        read.append(Found(record, Place(f"r{row}.json"), document))
    return read


def compared(base: list[Document], tree: list[Document]) -> SinceBase:
    return since_base(found(*tree), found(*base))


def told(base: list[Document], tree: list[Document]) -> list[tuple[str, str, str]]:
    return [(each.id, each.kind, each.told) for each in compared(base, tree).changes]


def test_an_equal_tree_changes_nothing() -> None:
    since = compared([drainage(), drainage(id="b", claim=...)], [drainage(), drainage(id="b", claim=...)])

    assert since.changes == ()
    assert since.unchanged == {ID, "b"}
    assert [before is not None and before.id for before in since.before] == [ID, "b"]


def test_a_new_claim_is_told_with_its_result() -> None:
    assert told([], [drainage(), drainage(id="b", claim=...)]) == [
        (
            ID,
            "new",
            "New: t(34) = 2.21, p = 0.034, mean difference 4.2 g/m2 (95 % interval 0.34 to 8.06).",
        )
    ]


@pytest.mark.parametrize(
    ("before", "now", "said"),
    [
        ({"claim": ...}, {}, "It claims what it only reported before."),
        ({"status": "exploratory"}, {}, "Exploratory before, confirmatory now."),
        ({"status": "descriptive"}, {"status": "exploratory"}, "Descriptive before, exploratory now."),
        ({"role": "other"}, {}, "Its role was other and is primary."),
        ({}, {"importance": True}, "It now says that the effect is large enough to matter."),
        (
            {"design": "observational"},
            {"design": "randomised"},
            "Its design was observational and is randomised.",
        ),
        ({"design": "observational"}, {}, "Its design was observational and is not told."),
        ({"aim": "estimation"}, {}, "Its aim was estimation and is difference."),
        (
            {"status": "exploratory", "role": "secondary"},
            {"claim": "Drainage doubles biomass."},
            "Exploratory before, confirmatory now; its role was secondary and is primary; the claim is worded "
            "otherwise.",
        ),
    ],
)
def test_a_claim_that_says_more(before: Document, now: Document, said: str) -> None:
    assert told([drainage(**before)], [drainage(**now)]) == [(ID, "strengthened", said)]


@pytest.mark.parametrize(
    ("before", "now", "said"),
    [
        (
            {},
            {"test__p": "0.0341"},
            "The result was t(34) = 2.21, p = 0.034, mean difference 4.2 g/m2 (95 % interval 0.34 to 8.06) and is "
            "t(34) = 2.21, p = 0.0341, mean difference 4.2 g/m2 (95 % interval 0.34 to 8.06).",
        ),
        ({}, {"prior": {"probability": 0.8, "basis": "hope"}}, "Its own prior was not set and is 0.8."),
        ({"prior": {"probability": 0.8, "basis": "hope"}}, {}, "Its own prior was 0.8 and is not set."),
        ({}, {"claim": "Drainage helps."}, "The claim is worded otherwise."),
        ({}, {"id": "biomass", "aliases": [ID]}, f"Its id was {ID}."),
        ({}, {"tags": ["late"]}, "What stands around its numbers changed."),
        ({"importance": True, "role": "primary"}, {"role": "other"}, "What stands around its numbers changed."),
        (
            {"family": {"name": "growth", "size": 6, "procedure": "holm"}},
            {"family": {"name": "growth", "procedure": "none"}},
            "Its family was growth of 6 tests, holm and is growth, none.",
        ),
        ({"family": {"name": "growth"}}, {}, "Its family was growth, none and is none."),
    ],
)
def test_a_claim_that_changed(before: Document, now: Document, said: str) -> None:
    tree = drainage(**now)

    assert told([drainage(**before)], [tree]) == [(tree["id"], "changed", said)]


def test_a_claim_that_is_withdrawn() -> None:
    assert told([drainage()], []) == [(ID, "withdrawn", "The record is gone.")]
    assert told([drainage()], [drainage(claim=...)]) == [(ID, "withdrawn", "The record no longer claims anything.")]
    assert told([drainage(claim=...)], []) == []
    assert told([drainage(claim=...)], [drainage(claim=..., test__p="0.035")]) == []


GROWTH = {"name": "growth", "size": 3, "procedure": "holm"}


def test_a_family_knows_the_members_that_it_lost() -> None:
    base = [drainage(id=name, family=GROWTH) for name in "abc"]
    tree = [
        drainage(id="a", family=GROWTH),
        drainage(id="renamed", aliases=["b"], family=GROWTH),
        drainage(id="c"),
    ]

    family = compared(base, tree).families["growth"]

    assert (family.size, family.lost) == (3, ("c",))
    assert compared(base, []).families["growth"].lost == ("a", "b", "c")
    assert compared([drainage(family={"name": "growth"})], []).families["growth"].size is None


def test_changes_are_sorted_whatever_the_order_of_files() -> None:
    base = [drainage(id="a"), drainage(id="z")]
    tree = [drainage(id="n"), drainage(id="m"), changed(drainage(id="a"), claim="Other words.")]

    kinds = [(each.kind, each.id) for each in compared(base, tree).changes]

    assert kinds == [("changed", "a"), ("new", "m"), ("new", "n"), ("withdrawn", "z")]
    assert kinds == [(each.kind, each.id) for each in compared(base[::-1], tree[::-1]).changes]
