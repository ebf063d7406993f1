"""The page in headless Chromium: its figures, slider, filter, keyboard, widths, print and accessibility."""

from __future__ import annotations

import json
import math
import random
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from axe_playwright_python.sync_playwright import Axe as Accessibility
from browser.browsing import opened, running_browser
from playwright.sync_api import Browser, Page
from render.page_samples import judged_station, judged_strips, many, waived
from render.sample_verdicts import BROKEN, DRAINAGE

from gatecheck.model.shown import percent
from gatecheck.model.verdict import Finding, Verdict
from gatecheck.render import RENDERERS
from gatecheck.render.page.claim import drawings
from gatecheck.render.page.drawing import filled
from gatecheck.render.page.interval_plot import interval_plot
from gatecheck.render.page.risk_plot import RISK, Axes

pytestmark = pytest.mark.xdist_group("browser")

OWN_PRIOR = "mulch/moisture"


@pytest.fixture(scope="module")
def browser() -> Iterator[Browser]:
    with running_browser() as running:
        yield running


@pytest.fixture(scope="module")
def station(tmp_path_factory: pytest.TempPathFactory) -> Verdict:
    return judged_station(tmp_path_factory.mktemp("station"))


@pytest.fixture(scope="module")
def everything(station: Verdict) -> Verdict:
    """A verdict with every section that a page can have, and more claims than are drawn at once."""
    undecided = Finding("numbers-agree", "undecided", "block", message="the degrees of freedom are missing")
    first, *rest = station.judged
    others = (
        waived(replace(DRAINAGE, id="waived")),
        replace(first, id="undecided", findings=(undecided,)),
        replace(DRAINAGE, id="unchanged", counts_now=False),
    )
    more = many(station, 25, 0).judged
    return replace(station, judged=(first, *rest, *others, *more), problems=(BROKEN,), notes=("a note",))


def written(folder: Path, verdict: Verdict) -> Path:
    target = folder / "verdict.html"
    target.write_text(RENDERERS["page"](verdict), encoding="utf-8")
    return target


@pytest.fixture(scope="module")
def station_page(tmp_path_factory: pytest.TempPathFactory, station: Verdict) -> Path:
    return written(tmp_path_factory.mktemp("station-page"), station)


@pytest.fixture(scope="module")
def full_page(tmp_path_factory: pytest.TempPathFactory, everything: Verdict) -> Path:
    return written(tmp_path_factory.mktemp("full-page"), everything)


def plain_text(text: str) -> str:
    return " ".join(text.replace("\u00a0", " ").split())


def risks(page: Page) -> dict[str, str]:
    """What the page says of the risk of each claim, by its id."""
    listed: list[list[str]] = page.evaluate(
        "[...document.querySelectorAll('.claim summary')].map((each) => "
        "[each.querySelector('code').textContent, each.querySelector('b')?.textContent ?? ''])"
    )
    return {name: plain_text(told) for name, told in listed}


def told(page: Page, selector: str) -> str:
    return plain_text(page.text_content(selector) or "")


def move_to(page: Page, prior: float) -> None:
    page.fill("#prior", f"{prior}")
    page.wait_for_function(
        "prior => document.getElementById('told').textContent.includes(`prior of ${prior} `)", arg=prior
    )


def document_of(verdict: Verdict) -> dict[str, Any]:
    """What the command writes as JSON, by the id of the record."""
    document = json.loads(RENDERERS["json"](verdict))
    return {one["id"]: one for one in document["claims"] + document["reported"]}


def risk_shown(one: dict[str, Any]) -> str:
    evidence = one["evidence"]
    limit = next((rule["limit"] for rule in one["rules"] if rule["rule"] == "false-positive-risk"), None)
    own = " of its own" if evidence["prior_from"] == "record" else ""
    return f"{percent(evidence['false_positive_risk'], limit)} at prior {evidence['prior']:.4g}{own}"


def test_the_figures_are_those_of_the_verdict(browser: Browser, station_page: Path, station: Verdict) -> None:
    with opened(browser, station_page) as page:
        assert risks(page) == {name: risk_shown(one) for name, one in document_of(station).items()}
        assert told(page, "h1") == "Falls short of the policy: 5 of 8 claims; 3 stand."


@pytest.mark.parametrize("prior", [0.01, 0.08, 0.33, 0.5, 0.77, 0.9, 0.99])
def test_the_slider_gives_what_the_command_gives_at_that_prior(
    browser: Browser, station_page: Path, tmp_path: Path, prior: float
) -> None:
    """Of every record without a prior of its own, which keeps that when the policy has another."""
    judged = document_of(judged_station(tmp_path / "again", prior))
    with opened(browser, station_page) as page:
        move_to(page, prior)
        shown = risks(page)
        assert shown.pop(OWN_PRIOR).endswith(f"at prior {prior:.4g}")
        assert shown == {name: risk_shown(one) for name, one in judged.items() if name != OWN_PRIOR}
        would = page.evaluate("claims.map((claim) => [nameOf(claim), STANDINGS[claim.now]])")
        assert {name: standing for name, standing in would if name != OWN_PRIOR} == {
            name: one["verdict"] for name, one in judged.items() if name != OWN_PRIOR
        }
        short = sum(standing == "falls-short" for _, standing in would)
        assert f"{short} would be short of the policy (5 as judged)" in told(page, "#told")
        assert "for orientation only: the verdict of the policy stays as it is" in told(page, "#told")


def test_a_claim_says_what_it_was_judged_at_and_goes_back(browser: Browser, station_page: Path) -> None:
    with opened(browser, station_page) as page:
        before = risks(page), page.get_attribute(".d", "cx"), told(page, "main")
        move_to(page, 0.03)
        mulch = told(page, f"summary:has-text('{OWN_PRIOR}')")
        assert mulch.endswith(
            "False positive risk 10 % at prior 0.03. There the claim would be short of the policy. "
            "As judged: 0.79 % at prior 0.3 of its own."
        )
        assert f"Other than as judged: {OWN_PRIOR}." in told(page, "#told")
        assert page.get_attribute(".d", "cx") != before[1]
        page.click("#as-judged")
        assert (risks(page), page.get_attribute(".d", "cx"), told(page, "main")) == before
        assert page.input_value("#prior") == page.input_value("#slide") == "0.5"


def test_the_slider_itself_and_a_number_that_is_none(browser: Browser, station_page: Path) -> None:
    with opened(browser, station_page) as page:
        page.focus("#slide")
        page.keyboard.press("ArrowRight")
        page.wait_for_function("document.getElementById('told').textContent.includes('prior of 0.51 ')")
        assert page.input_value("#prior") == "0.51"
        for text in ("", "1.5", "-1"):
            page.fill("#prior", text)
            page.wait_for_timeout(60)
            assert "prior of 0.51 " in told(page, "#told")


def test_waivers_stay_and_what_other_rules_say_stays(browser: Browser, full_page: Path) -> None:
    """At a high prior a waived risk is none; at a low one it is waived still, and a claim undecided stays so."""
    with opened(browser, full_page) as page:
        standing = "name => STANDINGS[claims.find((claim) => nameOf(claim) === name).now]"
        seen = {}
        for prior in (0.99, 0.05):
            move_to(page, prior)
            seen[prior] = [page.evaluate(standing, name) for name in ("waived", "undecided", "unchanged")]
        assert seen == {
            0.99: ["waived", "undecided", "falls-short"],
            0.05: ["waived", "undecided", "falls-short"],
        }


def test_percentages_are_written_as_the_command_writes_them(browser: Browser, station_page: Path) -> None:
    chance = random.Random(20260101)  # noqa: S311  # values to compare, no secrets
    limits = [None, 0.05, 0.01, 0.2, 0.5, 1e-6, 0.0, 1.0, 0.99999999]
    near = [limit + step for limit in limits if limit for step in (-1e-17, -1e-9, -1e-4, 0.0, 1e-9, 1e-4)]
    values = [
        *(chance.random() for _ in range(2000)),
        *(10 ** -chance.uniform(0, 20) for _ in range(2000)),
        *(1 - 10 ** -chance.uniform(0, 16) for _ in range(1000)),
        *(value for value in near if 0 <= value <= 1),
        *(round(chance.random(), digits) for digits in range(1, 7) for _ in range(100)),
        *(0.0, 1.0, 0.001, 1e-5, 9.99e-6, 5e-324, 0.99999, 0.999995, 1 - 2**-53, 0.0125, 0.00125, 0.995, 0.9949999),
    ]
    cases = [(value, limit) for value in values for limit in (None, 0.05, chance.choice(limits))]
    with opened(browser, station_page) as page:
        shown = page.evaluate("cases => cases.map(([value, limit]) => percent(value, limit))", cases)
    assert len(cases) > 15_000
    assert shown == [percent(value, limit) for value, limit in cases]


def test_the_ring_moves_along_the_curve(browser: Browser, station_page: Path) -> None:
    with opened(browser, station_page) as page:
        move_to(page, 0.9)
        x, y = (float(page.get_attribute(".d", name) or "nan") for name in ("cx", "cy"))
        risk = page.evaluate("riskAt(weighed[0].weighed.logRatio, 0.9)")
        assert x == pytest.approx(94 + (math.log(9) + math.log(99)) / (2 * math.log(99)) * 442)
        assert y == pytest.approx(20 + -math.log10(risk) / 3 * 252)


def test_a_claim_is_drawn_when_it_is_opened_as_it_would_stand_in_the_page(
    browser: Browser, full_page: Path, everything: Verdict
) -> None:
    with opened(browser, full_page) as page:
        count = page.locator(".claim").count()
        undrawn = page.evaluate("claims.filter((claim) => claim.drawing).length")
        assert undrawn == count - 20
        last = page.locator(".claim").nth(count - 2)
        assert last.locator("svg").count() == 0
        move_to(page, 0.9)
        last.locator("summary").click()
        last.locator("svg").first.wait_for()
        assert last.locator(".plots > svg").count() == 2
        assert float(last.locator(".d").get_attribute("cx") or 0) == pytest.approx(
            94 + (math.log(9) + math.log(99)) / (2 * math.log(99)) * 442
        )
        page.click("#as-judged")
        name, html = page.evaluate(
            "number => [nameOf(claims[number]), claims[number].element.querySelector('.plots').innerHTML]",
            count - 2,
        )
        (one,) = (each for each in everything.judged if each.id == name)
        risk, interval = drawings(one, Axes(everything.judged))
        assert risk is not None
        assert interval is not None
        parsed = "html => Object.assign(document.createElement('div'), {innerHTML: html}).innerHTML"
        assert html == page.evaluate(parsed, filled(RISK, risk) + interval_plot(interval))


def test_what_is_open_from_the_first_is_drawn_though_nobody_opened_it(browser: Browser, tmp_path: Path) -> None:
    with opened(browser, written(tmp_path, judged_strips(tmp_path / "tree", 40, 0.75))) as page:
        page.wait_for_function("() => claims.every((claim) => claim.element.open !== Boolean(claim.drawing))")
        assert page.locator(".claim[open] .plots").count() == 30
        assert page.locator(".claim:not([open]) .plots").count() == 0


@pytest.fixture(scope="module")
def long_page(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("long-page")
    return written(folder, judged_strips(folder / "tree", 300, 0.1))


def test_a_filter_leaves_no_gap_where_folded_claims_are_hidden(browser: Browser, long_page: Path) -> None:
    with opened(browser, long_page) as page:
        assert page.locator(".part").count() == 6
        page.select_option("#by-folder", label="fields/flax")
        assert len(visible(page)) == 30
        page.select_option("#by-standing", label="standing (270)")
        height = page.evaluate("document.getElementById('standing').closest('section').offsetHeight")
        assert 27 * 40 < height < 27 * 120
        page.select_option("#by-standing", label="short of the policy (30)")
        assert page.locator(".part:not([hidden])").count() == 0
        page.click("#all")
        assert page.locator(".part:not([hidden])").count() == 6


def test_a_link_leads_to_a_claim_far_down(browser: Browser, long_page: Path) -> None:
    with opened(browser, long_page) as page:
        page.evaluate("location.hash = '#c299'")
        page.wait_for_function("() => claims[299].element.open && !claims[299].drawing")
        page.wait_for_timeout(100)
        top = page.evaluate("claims[299].element.getBoundingClientRect().top")
        assert -5 <= top < 900


def test_a_number_in_brackets_leads_to_what_it_stands_for(browser: Browser, long_page: Path) -> None:
    with opened(browser, long_page) as page:
        page.locator(".claim a:has-text('[2]')").first.click()
        assert told(page, ":target").startswith("Even against an effect as large as the one observed")
        assert page.locator(":target").is_visible()


def visible(page: Page) -> list[str]:
    names: list[str] = page.evaluate(
        "[...document.querySelectorAll('.claim')].filter((each) => each.checkVisibility())"
        ".map((each) => each.querySelector('code').textContent)"
    )
    return sorted(names)


def test_the_filter(browser: Browser, station_page: Path, station: Verdict) -> None:
    short = sorted(one.id for one in station.judged if one.standing == "falls-short")
    with opened(browser, station_page) as page:
        page.select_option("#by-standing", label="short of the policy (5)")
        assert visible(page) == short
        assert page.is_hidden("#standing")
        assert told(page, "#count") == "Shown: 5 of 9."
        page.select_option("#by-rule", label="Looks (1)")
        assert visible(page) == ["mixture/yield"]
        page.click("#all")
        assert len(visible(page)) == 9
        assert page.is_visible("#standing")
        page.select_option("#by-folder", label="crops")
        assert visible(page) == sorted(one.id for one in station.judged if one.at.path.startswith("crops/"))
        page.select_option("#by-folder", label="crops/variety")
        assert visible(page) == ["variety/hardiness"]


def test_a_link_opens_its_claim_though_it_is_filtered_out(browser: Browser, station_page: Path) -> None:
    with opened(browser, station_page) as page:
        page.select_option("#by-folder", label="soil")
        page.click(".index a:has-text('rows/mildew')")
        page.wait_for_function("document.activeElement !== null && location.hash !== ''")
        assert page.locator(".claim[open]:has-text('rows/mildew')").is_visible()
        page.evaluate("location.hash = '#closing'")
        assert page.is_visible("#closing")


@pytest.mark.parametrize("width", [360, 1440])
def test_nothing_is_wider_than_the_window(browser: Browser, full_page: Path, width: int) -> None:
    with opened(browser, full_page, width) as page:
        page.evaluate("document.querySelectorAll('details').forEach((each) => (each.open = true))")
        move_to(page, 0.03)
        assert page.evaluate("document.documentElement.scrollWidth") <= width
        beyond = page.evaluate(
            "width => [...document.querySelectorAll('body *')].filter((each) => !each.closest('svg') && "
            "each.getBoundingClientRect().right > width + 1).map((each) => each.outerHTML.slice(0, 80))",
            width,
        )
        assert beyond == []


def test_long_words_break(browser: Browser, tmp_path: Path) -> None:
    long = replace(
        DRAINAGE, id="x" * 200, claim="y" * 300, result="z" * 300, at=replace(DRAINAGE.at, path="f/" + "p" * 300)
    )
    with opened(browser, written(tmp_path, Verdict(None, (long,), (BROKEN,))), 360) as page:
        assert page.evaluate("document.documentElement.scrollWidth") == 360


@pytest.mark.parametrize("scheme", ["light", "dark"])
@pytest.mark.parametrize("width", [360, 1440])
def test_accessibility(browser: Browser, full_page: Path, scheme: str, width: int) -> None:
    with opened(browser, full_page, width, scheme) as page:
        page.evaluate("document.querySelectorAll('details').forEach((each) => (each.open = true))")
        move_to(page, 0.03)
        found = Accessibility().run(page).response
        assert len(found["passes"]) > 20
        assert [(each["id"], each["nodes"][0]["html"]) for each in found["violations"]] == []


def test_everything_is_reached_by_the_keyboard(browser: Browser, station_page: Path) -> None:
    with opened(browser, station_page) as page:
        reached = []
        for _ in range(80):
            page.keyboard.press("Tab")
            reached.append(
                page.evaluate("document.activeElement.id || document.activeElement.parentElement.id || 'else'")
            )
        wanted = ["slide", "prior", "as-judged", "by-standing", "by-rule", "by-folder", "all", "c0", "c5", "c8"]
        assert [name for name in dict.fromkeys(reached) if name in wanted] == wanted
        page.locator("#c8 > summary").focus()
        assert page.locator("#c8[open]").count() == 0
        page.keyboard.press("Enter")
        assert page.locator("#c8[open]").count() == 1
        outline = page.evaluate("getComputedStyle(document.activeElement).outlineStyle")
        assert outline == "solid"


def test_print_shows_all_of_it_as_it_was_judged(browser: Browser, full_page: Path) -> None:
    with opened(browser, full_page) as page:
        page.select_option("#by-folder", label="soil")
        move_to(page, 0.03)
        page.evaluate("dispatchEvent(new Event('beforeprint'))")
        page.emulate_media(media="print")
        assert page.locator("#tools").is_hidden()
        folded = page.evaluate(
            "[...document.querySelectorAll('.claim')].map((each) => each.querySelector(':scope > dl, :scope > p'))"
            ".filter((each) => !each.checkVisibility({contentVisibilityAuto: true}) || !each.offsetHeight).length"
        )
        assert folded == 0
        assert page.evaluate("claims.filter((claim) => claim.element.hidden || claim.drawing).length") == 0
        assert " at prior 0.03" not in " ".join(risks(page).values())


def test_without_its_program_all_is_there_but_slider_and_filter(browser: Browser, station_page: Path) -> None:
    context = browser.new_context(java_script_enabled=False)
    page = context.new_page()
    page.goto(station_page.as_uri())
    assert page.is_hidden("#tools")
    assert page.locator(".claim").count() == 9
    assert page.locator(".plots > svg").count() == 17
    page.locator("summary:has-text('liming/soil-ph')").click()
    assert "about 170,000 to 1 for an effect over none" in plain_text(page.inner_text("main"))
    context.close()


def test_only_the_program_of_the_page_may_run(browser: Browser, station_page: Path, tmp_path: Path) -> None:
    """The policy of content is in force: a program that was put in is refused."""
    text = station_page.read_text(encoding="utf-8")
    changed = tmp_path / "changed.html"
    changed.write_text(
        text.replace("</body>", "<script>document.title = 'taken'</script></body>"), encoding="utf-8"
    )
    page = browser.new_page()
    page.goto(changed.as_uri())
    assert page.title().startswith("Falls short")
    assert page.is_visible("#tools")
    page.close()
