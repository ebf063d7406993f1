"""Records of a tree against those of its base: claimed anew, otherwise, more strongly or no more."""

from __future__ import annotations

import pytest
from support import Document, changed, drainage

from gatecheck.model.found import Found
from gatecheck.model.verdict import Place
from gatecheck.pull_request import Base, SinceBase, since_base
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
    at_base = found(*base)
    return since_base(found(*tree), Base(at_base, at_base, lambda _: False))


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


def moved(base: list[Document], tree: list[Document], *files: str) -> dict[str, str]:
    """What unchanged claims rest on that is another, where `files` changed."""
    at_base = found(*base)
    return dict(since_base(found(*tree), Base(at_base, at_base, set(files).__contains__)).moved)


def test_a_claim_rests_on_the_files_that_it_names() -> None:
    made = {"code": "analysis.py", "inputs": [{"path": "data/a.csv"}, {"path": "data/b.csv"}]}
    tree = [drainage(provenance=made, plan={"file": "plans/p.yaml", "hypothesis": "H1"})]

    assert moved(tree, tree) == moved(tree, tree, "data/c.csv") == {}
    for path in ("data/a.csv", "data/b.csv", "analysis.py", "plans/p.yaml"):
        assert moved(tree, tree, path) == {ID: path}
    assert moved([drainage(provenance={})], [drainage(provenance={})], "analysis.py") == {}


def test_a_record_that_claims_nothing_or_changed_itself_rests_on_nothing() -> None:
    named = drainage(provenance={"code": "analysis.py"})
    assert moved([named], [changed(named, claim=...)], "analysis.py") == {}
    assert moved([changed(named, claim=...)], [changed(named, claim=...)], "analysis.py") == {}
    assert moved([named], [changed(named, test__p="0.035")], "analysis.py") == {}
    assert moved([], [named], "analysis.py") == {}


A, B, C = (drainage(id=name, family=GROWTH) for name in "abc")
ALL_GROWTH = dict.fromkeys("abc", "the family growth")


@pytest.mark.parametrize(
    ("tree", "moves"),
    [
        ([A, B, C], ""),
        ([A, B, changed(C, claim="Other words.", tags=["late"])], ""),
        ([A, B], "ab"),
        ([A, B, changed(C, family=...)], "ab"),
        ([A, B, changed(C, family__name="yield")], "ab"),
        ([A, B, changed(C, family__size=2)], "ab"),
        ([A, B, changed(C, test__p="0.035")], "ab"),
        ([A, B, changed(C, id="d")], "ab"),
        ([A, B, changed(C, id="d", aliases=["c"])], ""),
        ([A, B, C, changed(C, id="d")], "abc"),
        ([A, B, C, drainage(id="d")], ""),
    ],
)
def test_a_claim_rests_on_the_other_members_of_its_family(tree: list[Document], moves: str) -> None:
    assert moved([A, B, C], tree) == {name: ALL_GROWTH[name] for name in moves}


FIRST = drainage(id="first")
AGAIN = drainage(id="again", replicates="first")
OTHER = drainage(id="other")


@pytest.mark.parametrize(
    ("base", "tree", "moves"),
    [
        ([FIRST, AGAIN, OTHER], [FIRST, AGAIN, OTHER], {}),
        ([FIRST, AGAIN, OTHER], [FIRST, OTHER], {"first": "again"}),
        ([FIRST, OTHER], [FIRST, AGAIN, OTHER], {"first": "again"}),
        ([FIRST, AGAIN, OTHER], [FIRST, changed(AGAIN, replicates=...), OTHER], {"first": "again"}),
        ([FIRST, AGAIN, OTHER], [FIRST, changed(AGAIN, estimate__value=1), OTHER], {"first": "again"}),
        ([FIRST, AGAIN, OTHER], [FIRST, changed(AGAIN, claim="Again."), OTHER], {}),
        ([FIRST, AGAIN], [changed(FIRST, sample__n=40), AGAIN], {"again": "first"}),
        ([OTHER, drainage(id="new", aliases=["old"])], [OTHER, drainage(id="new", aliases=["old"])], {}),
    ],
)
def test_a_claim_rests_on_what_answers_the_same_hypothesis(
    base: list[Document], tree: list[Document], moves: dict[str, str]
) -> None:
    assert moved(base, tree) == moves


def test_claims_that_name_one_hypothesis_of_a_plan_rest_on_each_other() -> None:
    plan = {"file": "p.yaml", "hypothesis": "H1"}
    one, two = drainage(id="one", plan=plan), drainage(id="two", plan=plan)
    apart = drainage(id="apart", plan={"file": "p.yaml", "hypothesis": "H2"})
    unnamed = drainage(id="unnamed", plan={"file": "p.yaml"})
    base = [one, two, apart, unnamed]

    assert moved(base, [one, changed(two, test__p="0.9"), apart, unnamed]) == {"one": "two"}
    assert moved(base, [one, two, apart]) == {}


def test_a_claim_that_two_effects_differ_rests_on_both_and_not_they_on_it() -> None:
    compares = drainage(id="differ", compares=["first", "renamed"])
    second = drainage(id="second", aliases=["renamed"])
    base = [FIRST, second, compares]

    assert moved(base, [FIRST, changed(second, estimate__value=1), compares]) == {"differ": "second"}
    assert moved(base, [second, compares]) == {"differ": "first"}
    assert moved(base, [FIRST, second]) == {}


def trusted(
    base: list[Document], tree: list[Document], tip: list[Document] | None = None, places: str = ""
) -> list[str | None]:
    """The ids of the records whose priors count; `places` names the files of the tree."""
    departed, now = found(*base), found(*tree)
    now = [Found(one.record, Place(f"{place}.json"), one.document) for one, place in zip(now, places, strict=True)]
    since = since_base(now, Base(departed, departed if tip is None else found(*tip), lambda _: False))
    return [None if each is None else each.id for each in since.trusted]


OTHERWISE: Document = {"test__value": 3.1, "test__p": "0.004", "estimate": ...}


@pytest.mark.parametrize(
    ("base", "tree", "places", "ids"),
    [
        ([FIRST], [FIRST], "x", ["first"]),
        ([FIRST], [drainage(id="b", aliases=["first"])], "x", ["first"]),
        # The same result under another id, wherever it stands.
        ([FIRST], [drainage(id="b", claim="Other words.")], "x", ["first"]),
        # Another result.
        ([FIRST], [drainage(id="b", **OTHERWISE)], "x", [None]),
        # The first one is still there.
        ([FIRST], [FIRST, drainage(id="b")], "xy", ["first", None]),
        # Neither says what was tested.
        ([drainage(id="a", test=...)], [drainage(id="b", test=...)], "x", [None]),
    ],
)
def test_a_prior_is_that_of_the_record_at_the_base_also_where_its_id_is_another(
    base: list[Document], tree: list[Document], places: str, ids: list[str | None]
) -> None:
    assert trusted(base, tree, places=places) == ids


def test_a_record_that_takes_the_place_of_the_only_one_of_a_file_is_that_one() -> None:
    other = drainage(id="b", **OTHERWISE)
    departed = [Found(one.record, Place("r.json"), one.document) for one in found(FIRST, OTHER)]

    def at_place(*now: Found) -> list[str | None]:
        since = since_base(now, Base(departed[: len(now)], departed, lambda _: False))
        return [None if each is None else each.id for each in since.trusted]

    (one,) = found(other)
    assert at_place(Found(one.record, Place("r.json"), other)) == ["first"]
    # One of several in a file may have been taken out, and another put in.
    assert at_place(Found(one.record, Place("r.json"), other), departed[1]) == [None, "other"]


def test_the_base_as_it_is_now_goes_before_the_one_that_the_request_departed_from() -> None:
    assert trusted([FIRST], [drainage(id="b", aliases=["first", "c"])], [drainage(id="c")], "x") == ["c"]
    assert trusted([FIRST], [FIRST], [], "x") == ["first"]
    assert trusted([], [FIRST], [FIRST], "x") == ["first"]
