"""The page: what it tells and in what order, that text from outside stays text, and how much it weighs."""

from __future__ import annotations

import base64
import hashlib
import json
import re
import unicodedata
from collections import Counter
from dataclasses import replace
from html.parser import HTMLParser
from itertools import pairwise
from pathlib import Path
from typing import Any

import pytest
from hostile.test_text import commands_in
from hostile.verdicts import VERDICTS
from hypothesis import given, settings
from hypothesis import strategies as st
from render.page_samples import judged_station, judged_strips, many, waived
from render.sample_verdicts import BOTH, BY_NAME, CANNOT_JUDGE, DRAINAGE, FALLS_SHORT, LIMING, OLD, POLICY, STANDS
from support import drainage, write_tree

from gatecheck.cli import main
from gatecheck.model.shown import percent
from gatecheck.model.verdict import Change, Figures, Finding, Judged, Place, Verdict
from gatecheck.render import RENDERERS
from gatecheck.render.page.notes import MANY, parts
from gatecheck.render.page.numbers import STANDINGS
from gatecheck.render.text import html, plain, script_data

MOST_FOR_100 = 150_000


INLINE = {"a", "b", "i", "code", "span"}


class Read(HTMLParser):
    """What a page says to a reader: its elements, and its text without style, program and drawings."""

    def __init__(self, page: str) -> None:
        super().__init__(convert_charrefs=True)
        self.elements: list[tuple[str, dict[str, str | None]]] = []
        self.told: list[str] = []
        self.hidden: dict[str, str] = {}
        self._aside = ""
        self.feed(page)
        self.close()

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        """Note an element, and whether what follows is aside from the text."""
        self.elements.append((tag, dict(attrs)))
        if tag in {"style", "script", "svg"}:
            self._aside = tag
        if tag not in INLINE:
            self.told.append(" ")

    def handle_endtag(self, tag: str) -> None:
        """Come back to the text where what was aside ends."""
        self._aside = "" if tag == self._aside else self._aside
        if tag not in INLINE:
            self.told.append(" ")

    def handle_data(self, data: str) -> None:
        """Keep text, or a style or program under its name."""
        if not self._aside:
            self.told.append(data)
        elif self._aside != "svg":
            self.hidden[self.elements[-1][1].get("id") or self._aside] = data

    @property
    def text(self) -> str:
        """The text with single blanks."""
        return " ".join("".join(self.told).split())

    @property
    def numbers(self) -> dict[str, Any]:
        """What the program of the page works on."""
        read: dict[str, Any] = json.loads(self.hidden["numbers"])
        return read

    def ids(self) -> list[str]:
        """The ids of all elements."""
        return [attributes["id"] or "" for _, attributes in self.elements if "id" in attributes]


def page(verdict: Verdict) -> str:
    return RENDERERS["page"](verdict)


def read(verdict: Verdict) -> Read:
    return Read(page(verdict))


def same(text: str) -> str:
    """A text without its stops and brackets: words are found wherever a note of several records begins or ends."""
    return re.sub(r"[\s;:.,()]+", " ", text).strip().casefold()


def read_in(text: str) -> list[str]:
    """What a page says of each record, with the notes that it points to put in their places."""
    notes = dict(re.findall(r'<li id="n(\d+)">(.*?)</li>', text))
    claims = re.findall(r'<details class="claim".*?</details>', text)
    put = re.sub(r'(?:see)? <a href="#n(\d+)">\[\d+\]</a>', lambda to: f" {notes[to[1]]}", "".join(claims))
    return [same(Read(claim).text) for claim in put.split("</details>")[:-1]]


def in_order(text: str, *parts: str) -> bool:
    at = [text.find(part) for part in parts]
    return -1 not in at and at == sorted(at)


@pytest.fixture(scope="module")
def station(tmp_path_factory: pytest.TempPathFactory) -> Verdict:
    return judged_station(tmp_path_factory.mktemp("station"))


def test_the_verdict_stands_on_top_and_the_rest_in_order_of_what_blocks() -> None:
    both = replace(BOTH, judged=(*BOTH.judged, OLD, FALLS_SHORT.judged[0]), notes=("a note",), version="9.9")
    both = replace(both, plans=(("plans/z.yaml", "sha256:" + "9" * 64), ("plans/a.yaml", "sha256:" + "a" * 64)))
    changes = (Change("a/b", "new", Place("a.json"), "it claims more"),)
    told = read(replace(both, changes=changes, head="0123456789abcdef", base="fedcba9876543210")).text
    assert in_order(
        told,
        "Statement on the findings claimed in this tree Cannot judge: 1 problem and 1 of 5 claims undecided",
        "Policy: field-station reporting policy (from the base revision; sha256:1a2b3c4d5e6f). Judged: the commit",
        "stand short of the policy waived undecided in all Claims 1 2 1 1 5 Results without a claim 1 0 0 0 1",
        "Could not be read or judged results/broken.json, line 9: the document ends",
        "Changed since the base a/b, a new claim: it claims more.",
        "Notes on the whole a note.",
        "How to read the figures",
        "Short of the policy (1) Drainage increases earthworm biomass.",
        "Undecided (1) Wider rows lower mildew. rows/mildew: cannot be decided.",
        "Waived (1) Shade lowers yield. shade/yield: short of the policy, and waived. False positive risk 15 %",
        "Short or undecided, but unchanged (1) The 2029 mixture yields more.",
        "Standing (1) Liming raises soil pH. liming/soil-ph: stands. False positive risk <0.001 % at prior 0.5.",
        "Reported without a claim (1) r(34) = 0.11, p = 0.52.",
        "Plans, looks, families and waivers",
        "What was not checked, and what standing means Not checked: the quality of the data",
        "Standing means consistent with this team's policy",
        "Plans read: plans/a.yaml (sha256:aaaaaaaaaaaa), plans/z.yaml (sha256:999999999999).",
        "Judged by gatecheck 9.9.",
    )


def test_a_claim_that_blocks_is_told_in_full() -> None:
    told = read(FALLS_SHORT).text
    assert (
        "drainage/earthworm-biomass: short of the policy. False positive risk 17 % at prior 0.5. "
        "False positive risk. found a risk of 17 % against the effect as observed, with a "
        "prior of 50 %; the policy allows at most 5 %. To mend: about 31 plots per group if the effect stays the "
        "same; or claim it as suggestive only."
    ) in told
    assert "Noted, without effect on the verdict Reported in full. found no list of units left out." in told
    assert (
        "Likelihood ratio about 5 to 1 for an effect over none (natural log 1.62). Risk allowed up to 5 %. "
        "Prior needed 79 %; allowed up to 50 %."
    ) in told
    assert "results/drainage.json, line 4; also in notebooks/drainage.ipynb, line 210 (cell 7, output 1)." in told
    assert "Met numbers agree. Does not apply seed noise." in told


def test_only_what_blocks_or_is_waived_is_unfolded() -> None:
    opened = [
        "open" in attributes
        for tag, attributes in read(FALLS_SHORT).elements
        if tag == "details" and attributes.get("class") == "claim"
    ]
    assert opened == [True, True, True, False, False, False]


def test_of_thousands_only_the_first_are_unfolded() -> None:
    held = tuple(replace(DRAINAGE, id=f"d/{number:03}") for number in range(250))
    text = page(Verdict(POLICY, held))
    assert text.count('class="claim"') == 250
    assert text.count(" open><summary>") == 200
    assert text.count("<b>False positive risk.</b>") == 250


def test_a_remedy_that_two_rules_share_is_told_once() -> None:
    findings = (
        Finding("false-positive-risk", "short", "block", 0.2, 0.05, "too risky", "Be surer. Gather more plots."),
        Finding("prior-needed", "short", "block", 0.8, 0.5, "too sure", "Gather more plots."),
    )
    told = read(Verdict(POLICY, (replace(DRAINAGE, findings=findings),))).text
    assert told.count("Gather more plots") == told.count("To mend:") == 1


def test_a_rule_that_does_not_apply_says_why() -> None:
    exempt = Finding("family", "does-not-apply", "block", message="A safety outcome: it needs no penalty.")
    told = read(Verdict(POLICY, (replace(LIMING, findings=(exempt,)),))).text
    assert "Does not apply: family (A safety outcome: it needs no penalty.)." in told


def test_a_prior_of_its_own_is_marked() -> None:
    told = read(STANDS).text
    assert "mulch/moisture: stands. False positive risk 0.22 % at prior 0.3 of its own." in told
    assert "against the effect that the study was designed to find, prior 0.3, set by the record." in told


def test_remarks_that_several_share_stand_once_and_others_with_their_claim(station: Verdict) -> None:
    text = page(station)
    told = Read(text).text
    assert told.count("Errs in favour of the claim: hardly any effect fits the data better") == 1
    assert told.count("against the effect as observed, prior 0.5, set by the policy [1].") > 1
    assert 'href="#n1"' in text
    assert "Remark Errs in favour of the claim: the most that alternatives spread smoothly" in told
    assert in_order(told, "Said once, of several records", "Errs in favour of the claim: hardly any")


@pytest.mark.parametrize("second", ["looks", "practical-size", "prior-needed"])
def test_what_many_claims_say_stands_once_and_is_theirs_still(tmp_path: Path, second: str) -> None:
    verdict = judged_strips(tmp_path, 100, 1.0, second)
    text = page(verdict)
    told = Read(text).text
    assert told.count("plan on the smallest effect of interest") == 1
    assert told.count("even against an effect as large as the one observed") == 0
    assert 1 <= told.count("Even against an effect as large as the one observed") <= 2
    assert len(re.findall(r"really this large, \d+ plots per group would do \[\d\]", told)) == 100
    assert len(re.findall(r"leaves a false positive risk of [\d.]+ % at prior 0.5 \[\d\]", told)) == 100
    shown = read_in(text)
    for one in verdict.judged:
        (claim,) = (each for each in shown if same(f"{one.id}: short") in each)
        said = [each for finding in one.findings if finding.blocks for each in (finding.message, finding.remedy)]
        assert [part for each in said for part in parts(each) if same(part) not in claim] == []


def test_what_more_than_half_have_in_common_stands_once(tmp_path: Path) -> None:
    told = read(judged_strips(tmp_path, 20, 0.4)).text
    assert in_order(
        told,
        "Of every record that says nothing else",
        "Weighed against the effect as observed, prior 0.5, set by the policy [1]. Risk allowed up to 5 %. "
        "Met false positive risk, numbers agree, reported in full.",
        "Short of the policy (8) Barley in strip 1",
    )
    assert told.count("Weighed") == told.count("Risk allowed") == 1
    assert told.count("Met numbers agree, reported in full.") == 8
    assert told.count("Met") == 9


def test_a_record_without_what_most_have_says_so(tmp_path: Path) -> None:
    verdict = judged_strips(tmp_path, 10, 0.0)
    bare = Judged("bare", Place("bare.json"), None, "t = 1", None, ())
    told = read(replace(verdict, judged=(*verdict.judged, bare))).text
    assert "Weighed: no. Risk allowed: no limit. Place: bare.json, line 1. Met: nothing." in told


def test_few_records_say_all_of_it_themselves(tmp_path: Path) -> None:
    told = read(judged_strips(tmp_path, 9, 1.0)).text
    assert "Of every record that says nothing else" not in told
    assert told.count("Weighed") == told.count("plan on the smallest effect of interest") == 9


def test_a_result_in_brackets_is_told_once(station: Verdict) -> None:
    told = read(station).text
    assert "False positive risk. p = 0.01959 (t(34) = 2.45, 18 + 18 plots) leaves a false positive risk" in told
    assert "Looks. p = 0.01959 was found at look 3, without a boundary" in told
    assert "Practical size. The whole interval is below the smallest effect of interest, 20;" in told


def test_where_plans_looks_families_and_waivers_matter() -> None:
    plan = Finding("registered", "short", "block", message="the sides differ")
    look = Finding("looks", "met", "block")
    family = Finding("family", "undecided", "note", message="a member is missing")
    one = replace(LIMING, findings=(plan, look))
    two = waived(replace(DRAINAGE, id="two", findings=(*DRAINAGE.findings, replace(look, rule="registered"))))
    three = replace(LIMING, id="three", findings=(family,))
    told = read(Verdict(POLICY, (one, two, three))).text
    assert in_order(
        told,
        "Differences from the plan 2 records were held to a plan. Registered, short of the policy: liming/soil-ph.",
        "Interim looks 1 record was judged for interim looks. All is met.",
        "Families of tests 1 record was judged in a family. Family, cannot be decided; the policy only",
        "Waivers False positive risk, short of the policy, and waived: two. Prior needed, short",
        "Noted without effect Reported in full, short of the policy; the policy only notes it: two. Family,",
    ), told[told.find("Differences from") :]
    nothing = read(STANDS).text
    assert "Differences from the plan No record was held to a plan." in nothing
    assert "Noted without effect Nothing is noted." in nothing
    assert "Nothing is waived." in read(Verdict(POLICY, (LIMING,))).text


def test_links_lead_to_what_is_there(station: Verdict) -> None:
    for verdict in (station, *BY_NAME.values()):
        found = read(verdict)
        targets = [attributes.get("href") or "" for _, attributes in found.elements if "href" in attributes]
        assert {target.removeprefix("#") for target in targets} <= set(found.ids())
        assert len(set(found.ids())) == len(found.ids())
        labelled = {attributes.get("aria-labelledby") for _, attributes in found.elements} - {None}
        assert labelled <= set(found.ids())


def test_headings_go_down_one_step_at_a_time(station: Verdict) -> None:
    levels = [int(tag[1]) for tag, _ in read(station).elements if re.fullmatch("h[1-6]", tag)]
    assert levels[0] == 1
    assert levels.count(1) == 1
    assert all(below - above <= 1 for above, below in pairwise(levels))


def test_nothing_to_judge_is_a_page_too() -> None:
    found = read(Verdict(None))
    assert "Nothing falls short: 0 results are reported and nothing is claimed." in found.text
    assert "Policy: none could be read." in found.text
    assert "tools" not in found.ids()
    assert found.numbers["claims"] == []
    assert "How to read the figures" not in found.text


def test_the_slider_needs_a_risk() -> None:
    assert "slide" not in read(CANNOT_JUDGE).ids()
    assert "tools" in read(CANNOT_JUDGE).ids()


def test_the_slider_begins_at_the_prior_of_most(station: Verdict) -> None:
    values = [dict(attributes) for tag, attributes in read(station).elements if tag == "input"]
    assert [each["value"] for each in values] == ["0.5", "0.5"]
    rare = [replace(one, evidence=replace(one.evidence, prior=0.001)) for one in (LIMING,) if one.evidence]
    values = [dict(each) for tag, each in read(Verdict(POLICY, tuple(rare))).elements if tag == "input"]
    assert [each["value"] for each in values] == ["0.01", "0.01"]


def options(found: Read) -> dict[str, list[str]]:
    """The choices of each filter, by its id."""
    listed: dict[str, list[str]] = {}
    for tag, attributes in found.elements:
        if tag == "select":
            name = attributes["id"] or ""
            listed[name] = []
        elif tag == "option" and attributes["value"]:
            listed[name].append(attributes["value"])
    return listed


def test_the_filter_offers_what_there_is(station: Verdict) -> None:
    found = read(station)
    assert "Verdict any short of the policy (5) standing (4)" in found.text
    assert "Looks (1)" in found.text
    assert "Folder any crops crops/variety soil" in found.text
    assert options(found) == {
        "by-standing": ["0", "3"],
        "by-rule": ["0", "1", "2", "3"],
        "by-folder": ["0", "1", "2"],
    }
    assert found.numbers["parents"] == [-1, 0, -1]


def test_the_numbers_are_those_of_the_verdict() -> None:
    shade = waived(replace(DRAINAGE, id="waived", at=Place("a/b/c.json")))
    noted = Finding("false-positive-risk", "short", "note", 0.165, 0.05)
    verdict = Verdict(
        POLICY, (DRAINAGE, shade, LIMING, replace(LIMING, id="noted", findings=(noted,)), *CANNOT_JUDGE.judged)
    )
    numbers = read(verdict).numbers
    short, undecided, passed, stands, noted_one = numbers["claims"]
    assert numbers["parents"] == [-1, 0, -1]
    assert short[:5] == [0, 2, [0, 1, 2], 1, [1.6213, 0.05, 1, 0, 0]]
    assert undecided[:5] == [1, 2, [0], 1, None]
    assert passed[:5] == [2, 1, [0, 1, 2], 1, [1.6213, 0.05, 1, 1, 2]]
    assert stands[:5] == [3, 2, [], 1, [15.2, 0.05, 1, 0, 3]]
    assert noted_one[:5] == [3, 2, [0], 1, [15.2, 0.05, 0, 0, 3]]


@pytest.mark.parametrize(("ratio", "risk"), [(None, 0.2), (float("nan"), 0.2), (float("inf"), 0.0), (1.0, None)])
def test_what_has_no_finite_figures_is_not_weighed_again(ratio: float | None, risk: float | None) -> None:
    one = replace(LIMING, evidence=Figures("bound", ratio, 0.5, "policy", risk, 0.2, ""))
    found = read(Verdict(POLICY, (one,)))
    assert found.numbers["claims"][0][4] is None
    assert "slide" not in found.ids()


def test_a_limit_that_is_no_number_decides_nothing() -> None:
    one = replace(LIMING, findings=(Finding("false-positive-risk", "met", "block", 0.1, float("nan")),))
    assert read(Verdict(POLICY, (one,))).numbers["claims"][0][4] == [15.2, None, 0, 0, 3]


def test_no_text_from_outside_is_among_the_numbers(station: Verdict) -> None:
    texts: list[str] = []

    def collect(value: Any) -> None:
        for each in value.values() if isinstance(value, dict) else value if isinstance(value, list) else ():
            collect(each)
        if isinstance(value, str):
            texts.append(value)

    collect(read(many(station, 60, 0.5)).numbers["claims"])
    assert texts
    assert [text for text in texts if not re.fullmatch(r"[MHVv0-9 ,.<>%←→e-]*|&lt;0\.001 %", text)] == []


def test_the_same_verdict_is_the_same_page_whatever_the_order(station: Verdict) -> None:
    for verdict in (station, *BY_NAME.values()):
        assert page(verdict) == page(replace(verdict, judged=tuple(reversed(verdict.judged))))


@pytest.mark.parametrize(
    ("short", "second"), [(0.2, "looks"), (1.0, "looks"), (1.0, "practical-size"), (1.0, "prior-needed")]
)
def test_a_hundred_claims_weigh_little(tmp_path: Path, short: float, second: str) -> None:
    """Also where all of them fall short by two rules each."""
    verdict = judged_strips(tmp_path, 100, short, second)
    held = [
        {each.rule for each in one.findings if each.blocks} for one in verdict.judged if one.standing != "stands"
    ]
    assert held == [{"false-positive-risk", second}] * round(100 * short)
    text = page(verdict)
    assert text.count('class="claim"') == 100
    assert len(text.encode()) <= MOST_FOR_100


def test_a_page_of_one_claim_is_small(station: Verdict) -> None:
    assert len(page(many(station, 1, 0)).encode()) < 25_000


def test_the_page_stands_by_itself(station: Verdict) -> None:
    text = page(station)
    found = Read(text)
    assert (
        re.search(r"https?:|//\w|url\(|@import|@font-face", found.hidden["style"] + text.split("<script>")[0])
        is None
    )
    attributes = Counter(name for _, given in found.elements for name in given)
    assert not {
        name for name in attributes if name.startswith("on") or name in {"src", "style", "srcset", "action"}
    }
    assert {tag for tag, _ in found.elements}.isdisjoint({
        "link",
        "img",
        "iframe",
        "object",
        "embed",
        "form",
        "base",
    })
    assert text.startswith('<!DOCTYPE html>\n<html lang="en">\n')


def test_only_its_own_style_and_program_are_allowed(station: Verdict) -> None:
    text = page(station)
    allowed = {
        kind: "sha256-" + base64.b64encode(hashlib.sha256(content.encode()).digest()).decode()
        for kind, content in (
            ("style", text.split("<style>")[1].split("</style>")[0]),
            ("script", text.split("<script>")[1].split("</script>")[0]),
        )
    }
    assert (
        f"content=\"default-src 'none'; style-src '{allowed['style']}'; script-src '{allowed['script']}'; "
        "base-uri 'none'; form-action 'none'\">"
    ) in text


OWN = {
    *("html", "head", "meta", "title", "style", "body", "svg", "symbol", "path", "text", "circle", "rect", "use"),
    *("header", "nav", "main", "section", "h1", "h2", "h3", "h4", "p", "ul", "ol", "li", "a", "b", "i", "code"),
    *("table", "tr", "td", "th", "details", "summary", "span", "div", "dl", "dt", "dd", "script"),
    *("fieldset", "legend", "label", "input", "select", "option", "button", "output"),
}


@settings(deadline=None)
@given(VERDICTS)
def test_text_from_outside_stays_text(verdict: Verdict) -> None:
    text = page(verdict)
    found = Read(text)
    assert commands_in(text) == []
    assert {unicodedata.category(each) for each in set(text) - set("\n\u200c\u200d")} & {
        "Cc",
        "Cf",
        "Cs",
        "Zl",
        "Zp",
    } == set()
    tags = Counter(tag for tag, _ in found.elements)
    assert set(tags) <= OWN
    assert tags["script"] == 2
    assert tags["details"] == len(verdict.judged) + bool(verdict.judged)
    assert tags["h3"] == len(verdict.judged)
    assert len(found.numbers["claims"]) == len(verdict.judged)
    shown = found.text.replace("\u00a0", " ")
    for one in verdict.judged:
        assert " ".join(plain(one.id).split()) in shown
        assert all(" ".join(plain(each.message).split()) in shown for each in one.findings if each.blocks)
    assert all(" ".join(plain(problem.advice).split()).rstrip(" ") in shown for problem in verdict.problems)


@settings(deadline=None)
@given(VERDICTS)
def test_text_that_many_records_share_stays_text(verdict: Verdict) -> None:
    again = tuple(replace(one, id=f"{one.id}/{number}") for one in verdict.judged for number in range(MANY))
    text = page(replace(verdict, judged=again))
    assert commands_in(text) == []
    assert {tag for tag, _ in Read(text).elements} <= OWN
    shown = " ".join(read_in(text))
    said = [plain(each.message) for one in again for each in one.findings if each.blocks]
    assert [part for each in said for part in parts(each) if same(part) not in shown] == []


@given(st.text())
def test_escaped_text_is_one_text_in_an_attribute_too(text: str) -> None:
    found = Read(f'<p title="{html(text)}">{html(text)}</p>')
    assert found.elements == [("p", {"title": plain(text)})]
    assert "".join(found.told).strip() == plain(text)


@given(st.recursive(st.none() | st.text() | st.integers(), st.lists))
def test_a_document_in_a_script_reads_back_and_ends_it_nowhere(document: Any) -> None:
    written = script_data(json.dumps(document, ensure_ascii=False))
    assert set(written).isdisjoint("<>&\u2028\u2029")
    assert json.loads(written) == document


def test_a_text_without_end_is_cut() -> None:
    one = replace(LIMING, claim="x" * 1_000_000)
    assert len(page(Verdict(POLICY, (one,)))) < 40_000


def test_the_risks_are_shown_as_everywhere() -> None:
    close = replace(
        LIMING,
        evidence=Figures("bound", 1.0, 0.5, "policy", 0.0504, 0.50001, ""),
        findings=(
            Finding("false-positive-risk", "short", "block", 0.0504, 0.05, "too risky"),
            Finding("prior-needed", "short", "block", 0.50001, 0.5, "too sure"),
        ),
    )
    told = read(Verdict(POLICY, (close,))).text
    assert f"False positive risk {percent(0.0504, 0.05)} at prior 0.5." in told
    assert f"Prior needed {percent(0.50001, 0.5)}; allowed up to 50 %." in told


def test_the_order_of_standings_is_that_of_the_program() -> None:
    program = page(STANDS).split("<script>")[1]
    listed = re.search(r"const STANDINGS = (\[.*?\]);", program)
    assert listed is not None
    assert tuple(json.loads(listed[1])) == STANDINGS


def test_a_result_that_nothing_is_claimed_of_is_told_by_itself() -> None:
    one = Judged("a", Place("a.json"), None, "t = 1", None, ())
    told = read(Verdict(POLICY, (one,))).text
    assert "t = 1. a: reported without a claim. Place: a.json, line 1." in told


def test_the_command_writes_it(tmp_path: Path) -> None:
    folder = tmp_path / "tree"
    folder.mkdir()
    target = tmp_path / "verdict.html"
    assert main(["weigh", str(write_tree(folder, drainage())), "--write", f"page={target}"]) == 1
    assert target.read_text(encoding="utf-8").count('class="claim"') == 1
