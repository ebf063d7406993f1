"""Plans, lines of prose and files of code beside records, in what people read."""

from __future__ import annotations

import pytest
from render.sample_verdicts import POLICY, SLOPE

from gatecheck.model.verdict import Finding, Judged, Kind, Place, Verdict
from gatecheck.render import RENDERERS, account
from gatecheck.render.words import headline


def row(kind: Kind, number: int, *, blocks: bool = True) -> Judged:
    finding = Finding("text-agrees", "short", "block" if blocks else "note", message="Found a difference.")
    return Judged(f"{kind}/{number}", Place(f"{kind}/{number}"), None, "what it is", None, (finding,), kind=kind)


def test_each_kind_is_counted_as_what_it_is() -> None:
    rows = (row("plan", 1), row("text", 1), row("text", 2), row("code", 1))

    assert headline(Verdict(POLICY, rows)) == (
        "Falls short of the policy: 1 plan and 2 lines of text and 1 file of code."
    )


@pytest.mark.parametrize(
    ("kind", "said"),
    [
        ("plan", "none; this is a plan"),
        ("text", "none of its own; this is a line of text"),
        ("code", "none; this is a file of code"),
    ],
)
def test_what_stands_in_place_of_a_claim(kind: Kind, said: str) -> None:
    verdict = Verdict(POLICY, (row(kind, 1),))

    assert f"Claim    {said}" in account(verdict, 80)
    assert f"Claim: {said}" in RENDERERS["summary"](verdict)


def test_what_is_only_noted_is_no_result_without_a_claim() -> None:
    verdict = Verdict(POLICY, (row("plan", 1, blocks=False), SLOPE))

    assert [one.id for one in verdict.reported] == [SLOPE.id]
    assert [one.id for one in verdict.others] == ["plan/1"]
    assert "plan/1" not in account(verdict, 80).split("Reported without a claim")[1]
    assert "nothing blocks" in RENDERERS["page"](verdict)
    assert "Plans, text and code" in RENDERERS["page"](verdict)
