"""Families of the base in a tree: who left, what goes on under another name, and what a procedure may reject."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st
from promising import model
from statsmodels.stats.multitest import multipletests
from support import Document, drainage

from gatecheck.compare.families_before import FamiliesSinceBase, families_since_base, loosened
from gatecheck.model.changes import FamilyBefore
from gatecheck.model.found import Found
from gatecheck.model.record import Procedure, Record
from gatecheck.model.verdict import Place

METHODS: dict[Procedure, str] = {
    "benjamini-hochberg": "fdr_bh",
    "hommel": "hommel",
    "hochberg": "simes-hochberg",
    "holm": "holm",
    "bonferroni": "bonferroni",
}


def found(name: str, family: str | None, *aliases: str) -> Found:
    """A record of that id in that family, or in none."""
    given_family: Document = {} if family is None else {"family": {"name": family}}
    return Found(model(Record, drainage(id=name, aliases=list(aliases), **given_family)), Place("r.json"), {})


def since(*records: Found, size: int | None = 3, **lost: tuple[str, ...]) -> FamiliesSinceBase:
    """What became of the families of the base that lost these members."""
    return families_since_base(
        records, {name: FamilyBefore(size, those, ("holm",)) for name, those in lost.items()}
    )


def test_without_a_base_nobody_has_left_anything() -> None:
    told = since(found("a", "growth"), found("b", None))

    assert (told.left, dict(told.before)) == ((None, None), {})


def test_members_that_are_gone_are_told_apart_from_those_that_left() -> None:
    told = since(found("a", "growth"), found("b2", "yield", "b"), found("c", None), growth=("b", "c", "d"))

    assert told.left == (None, "growth", "growth")
    (before,) = told.before["growth"]
    assert (before.size, before.procedures, before.gone, before.left) == (3, ("holm",), ("d",), ("b", "c"))


def test_a_family_that_is_renamed_in_all_its_members_goes_on() -> None:
    told = since(found("a", "height"), found("b2", "height", "b"), growth=("a", "b"))

    assert told.left == (None, None)
    (before,) = told.before["height"]
    assert (before.size, before.gone, before.left) == (3, (), ())
    assert "growth" not in told.before


@pytest.mark.parametrize(
    "records",
    [
        (found("a", "height"), found("b", "yield")),
        (found("a", "height"), found("b", None)),
        (found("a", None), found("b", None)),
        (found("a", "height"),),
        (found("a", "height"), found("b", "height"), found("new", "growth")),
    ],
)
def test_a_family_that_is_split_or_left_is_not_renamed(records: tuple[Found, ...]) -> None:
    told = since(*records, growth=("a", "b"))

    former = {"a", "b"}
    assert told.left == tuple("growth" if one.record.id in former else None for one in records)
    assert list(told.before) == ["growth"]


def test_two_families_may_go_on_as_one() -> None:
    told = since(found("a", "all"), found("b", "all"), growth=("a",), yields=("b",))

    assert told.left == (None, None)
    assert len(told.before["all"]) == 2


def test_a_record_that_takes_another_id_upon_itself_does_not_leave_its_own_family() -> None:
    told = since(found("a", "growth", "b"), growth=("b",))

    assert told.left == (None,)
    assert told.before["growth"][0].gone == ("b",)


@given(
    raw=st.lists(st.floats(0.0001, 1), min_size=2, max_size=8),
    before=st.sampled_from(sorted(METHODS)),
    now=st.sampled_from(sorted(METHODS)),
)
def test_a_procedure_that_is_not_looser_rejects_no_more(
    raw: list[float], before: Procedure, now: Procedure
) -> None:
    """By statsmodels' adjusted p: none of them becomes smaller."""
    first, second = (multipletests(raw, method=METHODS[each])[1] for each in (before, now))

    if not loosened(before, now):
        assert (second >= first - 1e-9).all()
    if loosened(before, now):
        assert (second <= first + 1e-9).all()


@pytest.mark.parametrize(
    ("before", "now", "looser"),
    [
        ("holm", "holm", False),
        ("holm", "none", True),
        ("none", "holm", False),
        ("none", "fixed-sequence", False),
        ("holm", "bonferroni", False),
        ("bonferroni", "holm", True),
        ("holm", "fixed-sequence", True),
        ("graphical", "holm", True),
        ("benjamini-yekutieli", "benjamini-yekutieli", False),
        ("benjamini-yekutieli", "benjamini-hochberg", True),
    ],
)
def test_what_is_looser(before: Procedure, now: Procedure, looser: bool) -> None:
    assert loosened(before, now) is looser
