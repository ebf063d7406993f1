"""What the formats for machines are made of: the order, and that the same tree gives the same bytes."""

from __future__ import annotations

from dataclasses import replace

import pytest
from render.sample_verdicts import BOTH, BY_NAME, FALLS_SHORT, STANDS

from gatecheck.render import RENDERERS
from gatecheck.render.entries import entries, identities, state_of, worst_first


@pytest.mark.parametrize("form", RENDERERS)
@pytest.mark.parametrize("name", BY_NAME)
def test_the_order_in_which_things_were_found_changes_no_byte(name: str, form: str) -> None:
    verdict = BY_NAME[name]
    turned = replace(verdict, judged=verdict.judged[::-1], problems=verdict.problems[::-1])
    assert turned.judged != verdict.judged or len(verdict.judged) == 1
    assert RENDERERS[form](turned) == RENDERERS[form](verdict)


def test_entries_are_sorted_worst_first_then_by_place() -> None:
    assert [(one.kind, one.record, one.rule) for one in entries(BOTH)] == [
        ("problem", "", "readable"),
        ("short", "drainage/earthworm-biomass", "false-positive-risk"),
        ("short", "drainage/earthworm-biomass", "prior-needed"),
        ("undecided", "rows/mildew", "false-positive-risk"),
        ("noted", "drainage/earthworm-biomass", "reported-in-full"),
    ]
    assert [one.kind for one in entries(STANDS)] == ["unchanged", "waived"]


def test_records_are_sorted_worst_first() -> None:
    assert [(one.id, state_of(one)) for one in worst_first(FALLS_SHORT.judged)] == [
        ("drainage/earthworm-biomass", "short"),
        ("weeds/cover", "short"),
        ("shade/yield", "waived"),
        ("liming/soil-ph", "stands"),
        ("mulch/moisture", "stands"),
        ("slope/covariate", "stands"),
    ]
    assert [state_of(one) for one in worst_first((*BOTH.judged, *STANDS.judged))][:3] == [
        "short",
        "undecided",
        "unchanged",
    ]


def test_identities_are_those_of_every_run() -> None:
    """Were they to change, every alert that is open would be closed and opened anew."""
    assert identities(entries(STANDS)) == IDENTITIES


#: By sha256sum of `1 [false, "yield/2029", "false-positive-risk"]`, and the same with `shade/yield`.
IDENTITIES = [
    "9428e1abf795382da21bc5675acee7643aa371af4fc38f5f70f07ad8c3bc1a4c",
    "f0ebc217546bb00a2995d88cd3080f45aa182f70e043bc02387a7c1d45ffed1b",
]
