"""The account, the survey and the explanation, as whole texts."""

from __future__ import annotations

from pathlib import Path

import pytest
from render.sample_verdicts import BOTH, BROKEN, BY_NAME, DRAINAGE, FALLS_SHORT, OLD, POLICY

from gatecheck.model.found import Found, Scan
from gatecheck.model.record import Record
from gatecheck.model.verdict import Figures, Finding, Judged, Place, Verdict
from gatecheck.render import account, explain, survey
from gatecheck.render.layout import paragraph

EXPECTED = Path(__file__).parent / "expected"


@pytest.mark.parametrize("width", [80, 140])
@pytest.mark.parametrize("name", BY_NAME)
def test_account(name: str, width: int) -> None:
    expected = (EXPECTED / f"account-{name}-{width}.txt").read_text(encoding="utf-8")
    assert account(BY_NAME[name], width) == expected


def is_one_token(line: str) -> bool:
    return len(line.replace(" %", "%").split()) == 1


@pytest.mark.parametrize("width", [40, 60, 80, 140])
@pytest.mark.parametrize("name", BY_NAME)
def test_no_line_is_longer_than_the_width(name: str, width: int) -> None:
    verdict = BY_NAME[name]
    text = account(verdict, width) + explain(verdict, verdict.judged[0].id, width)
    lines = text.splitlines()
    assert max(map(len, lines)) > width - 10
    assert [line for line in lines if len(line) > width and not is_one_token(line)] == []


def test_a_width_below_the_narrowest_is_the_narrowest() -> None:
    assert account(BOTH, 0) == account(BOTH, 40)


def test_the_account_does_not_depend_on_the_order_of_the_records() -> None:
    turned = Verdict(POLICY, FALLS_SHORT.judged[::-1], (), FALLS_SHORT.notes)
    assert account(turned, 80) == account(FALLS_SHORT, 80)


def test_of_many_records_without_a_claim_five_are_named() -> None:
    many = tuple(Judged(f"r/{n}", Place("r.json", n), None, "t = 1", None, ()) for n in range(1, 8))
    text = account(Verdict(POLICY, many), 80)
    assert "Reported without a claim: 7 results (r/1, r/2, r/3, r/4, r/5 and 2 more).\n" in text


def test_what_is_noted_and_what_is_waived_stands_below_the_id_of_its_record() -> None:
    findings = (
        Finding("robust", "short", "note", message="found 21 % at prior 0.2"),
        Finding("fresh", "undecided", "note", message="no input is named"),
        Finding("family", "waived", "block", message="found 3 tests; waived by the field board"),
    )
    one = Judged("a/b", Place("a.json"), "It grows.", "t(9) = 3", None, findings)
    assert (
        "Waived\n\n"
        "  a/b\n"
        "    Family: found 3 tests; waived by the field board.\n\n"
        "Noted, without effect on the verdict\n\n"
        "  a/b\n"
        "    Robust: found 21 % at prior 0.2.\n"
        "    Fresh: no input is named.\n\n"
    ) in account(Verdict(POLICY, (one,)), 60)


def test_records_with_blank_lines_in_them_are_two_apart() -> None:
    text = account(FALLS_SHORT, 80)
    assert "only.\n\n  Why      Prior needed" in text
    assert "suggestive.\n\n\n  weeds/cover\n" in text


@pytest.mark.parametrize("whole", ["t(34) = 2.21", "17 %", "-e p ln p"])
def test_what_belongs_together_is_not_broken_across_lines(whole: str) -> None:
    words = " ".join(f"{'x' * length} {whole}" for length in range(1, 30))
    lines = paragraph(words, 40).splitlines()
    assert sum(line.count(whole) for line in lines) == 29


def test_the_note_of_the_figures_begins_as_a_sentence() -> None:
    figures = Figures("bound", 1.0, 0.5, "policy", 0.1, 0.2, "errs in favour of the claim.")
    one = Judged("a", Place("a.json"), "It grows.", "t(9) = 3", figures, ())
    assert "  Note     Errs in favour of the claim.\n" in explain(Verdict(POLICY, (one,)), "a", 80)


def test_explain() -> None:
    expected = (EXPECTED / "explain-drainage.txt").read_text(encoding="utf-8")
    assert explain(FALLS_SHORT, DRAINAGE.id, 80) == expected


def test_explain_without_evidence_and_not_counted() -> None:
    text = explain(Verdict(POLICY, (OLD,)), OLD.id, 100)
    assert text.startswith(
        "yield/2029 falls short of the policy. It is unchanged, and does not count now.\n\n"
        "  Claim    The 2029 mixture yields more.\n"
        "  Result   t(12) = 2.2, p = 0.048\n"
        "  Place    results/2029.json, line 2\n\n"
        "Evidence\n\n"
        "  None was computed for this record.\n\n"
        "Rules\n\n"
        "  False positive risk (false-positive-risk): short of the policy.\n"
        "  Why      found 21 %.\n\n"
    )


def test_explain_a_record_without_claim_message_and_origin_of_the_prior() -> None:
    figures = Figures("bound", None, None, "", None, None, "")
    one = Judged("a", Place("a.json"), None, "", figures, (Finding("in-full", "short", "block", remedy="list it"),))
    assert explain(Verdict(POLICY, (one,)), "a", 100).startswith(
        "a falls short of the policy.\n\n"
        "  Claim    nothing claimed\n"
        "  Place    a.json, line 1\n\n"
        "Evidence\n\n"
        "  By the calibration -e p ln p of its p-value, prior unknown:\n"
        "  Ratio    likelihood ratio unknown\n"
        "  Risk     false positive risk unknown; prior needed unknown\n"
        "  Source   Sellke, Bayarri and Berger 2001, The American Statistician 55, 62-71\n\n"
        "Rules\n\n"
        "  In full (in-full): short of the policy.\n"
        "  Why      short of the policy.\n"
        "  To mend  list it.\n\n"
    )


def test_explain_an_unknown_id() -> None:
    assert explain(BOTH, "x", 80) == (
        "No record has the id x. The survey of this tree lists the ids that there are.\n"
    )


def test_survey() -> None:
    claimed = Record("record/1", "b/growth", "It grows.", "confirmatory", "primary")
    silent = Record("record/1", "a/colour")
    scan = Scan(
        (
            Found(silent, Place("results/z.json", 1), {}),
            Found(claimed, Place("results/b.json", 4), {}, (Place("notebooks/b.ipynb", 30, 2, 1),)),
        ),
        (BROKEN,),
        7,
    )
    assert survey(scan, 80) == (
        "2 records in 7 files; 1 claims something; 1 problem.\n\n"
        "Records\n\n"
        "  b/growth\n"
        "  Status   confirmatory, primary outcome\n"
        "  Claim    It grows.\n"
        "  Place    results/b.json, line 4; also in notebooks/b.ipynb, line 30 (cell 2,\n"
        "           output 1)\n\n"
        "  a/colour\n"
        "  Status   exploratory, other outcome\n"
        "  Claim    nothing claimed\n"
        "  Place    results/z.json, line 1\n\n"
        "Could not be read\n\n"
        "  results/broken.json, line 9\n"
        "  Found    the document ends inside a text that begins on this line.\n"
        "  To mend  write the file again from the analysis, or exclude it in the scan\n"
        "           section of the policy.\n"
    )


def test_survey_of_nothing() -> None:
    assert survey(Scan((), (), 0), 80) == "0 records in 0 files; 0 claim something; 0 problems.\n"
