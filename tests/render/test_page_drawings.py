"""The two drawings of a claim: where their lines and rings stand, and that any numbers can be drawn."""

from __future__ import annotations

import math
import re
from itertools import pairwise

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from gatecheck.model.interval_shown import IntervalShown
from gatecheck.model.verdict import Figures, Finding, Judged, Place
from gatecheck.render.page.drawing import NOTHING, filled
from gatecheck.render.page.interval_plot import band, interval_drawing, interval_plot
from gatecheck.render.page.risk_plot import BOTTOM, LEFT, RIGHT, RISK, TOP, Axes, curve_path, risk_drawing

MIDDLE = (LEFT + RIGHT) // 2


def figures(log_lr: float | None, prior: float | None = 0.5, needed: float | None = None) -> Figures:
    risk = None if log_lr is None or prior is None else risk_of(log_lr, prior)
    return Figures("bound", log_lr, prior, "policy", risk, needed, "")


def risk_of(log_lr: float, prior: float) -> float:
    """The definition, on its own: no odds of an effect leave certainty, endless ones none."""
    if prior in {0.0, 1.0}:
        return 1 - prior
    odds = math.exp(min(700.0, log_lr)) * prior / (1 - prior)
    return 1 / (1 + odds)


def corners(path: str) -> list[tuple[float, float]]:
    numbers = [float(number) for number in re.findall(r"-?\d+", path)]
    return list(zip(numbers[::2], numbers[1::2], strict=True))


def curve_of(moved: int | str) -> list[tuple[float, float]]:
    """The corners of the one curve where a drawing puts it, of which the box of priors shows a part."""
    path = re.sub(r"H(\d+)$", rf" \1 {BOTTOM}", curve_path())
    return [(x + LEFT + int(moved), y) for x, y in corners(path)]


def height_at(x: float, path: list[tuple[float, float]]) -> float:
    """How high a curve runs over a place that lies between its ends."""
    (x1, y1), (x2, y2) = next(pair for pair in pairwise(path) if pair[0][0] <= x <= pair[1][0])
    return y1 + (y2 - y1) * (x - x1) / (x2 - x1)


def test_a_template_is_filled_slot_by_slot() -> None:
    assert filled("a{1}b{0}{1}", ["x", 7]) == "a7bx7"


def test_the_ring_stands_at_the_prior_and_the_risk() -> None:
    """A risk of 10 % lies one of three decades below the top, and a prior of 50 % in the middle."""
    drawing = risk_drawing(figures(math.log(9)), 3)
    assert drawing is not None
    assert drawing[0] == 3
    assert drawing[-2:] == [MIDDLE, TOP + (BOTTOM - TOP) // 3]
    assert filled(RISK, drawing).count("{") == 0


def test_the_curve_passes_the_ring_and_the_prior_needed() -> None:
    """At the prior needed for 5 % the upright line begins where the curve crosses 5 %."""
    log_lr = 1.6213
    needed = 1 / (1 + math.exp(log_lr) / 19)
    drawing = risk_drawing(figures(log_lr, needed=needed), 0)
    assert drawing is not None
    five = round(TOP + -math.log10(0.05) / 3 * (BOTTOM - TOP))
    (at,) = re.findall(rf"^M(\d+),{five}V{BOTTOM}$", str(drawing[1]))
    assert drawing[2:5] == ["e", int(at) - 8, "79 %"]
    path = curve_of(drawing[5])
    assert path == sorted(path), "the risk falls as the prior rises"
    assert height_at(int(at), path) == pytest.approx(five, abs=1.5)
    assert height_at(MIDDLE, path) == pytest.approx(int(drawing[7]), abs=1.5)


@given(st.floats(-12, 12), st.floats(0.01, 0.99))
def test_the_one_curve_is_the_risk_of_every_result_at_every_prior(log_lr: float, prior: float) -> None:
    drawing = risk_drawing(figures(log_lr, prior), 0)
    assert drawing is not None
    path = curve_of(drawing[5])
    across = (math.log(prior / (1 - prior)) + math.log(99)) / (2 * math.log(99))
    down = min(3.0, -math.log10(risk_of(log_lr, prior))) / 3
    # Whole numbers on both ways, and straight lines between the corners.
    assert height_at(LEFT + across * (RIGHT - LEFT), path) == pytest.approx(TOP + down * (BOTTOM - TOP), abs=3)


@pytest.mark.parametrize(
    ("needed", "told"),
    [
        (None, [NOTHING, "", 0, ""]),
        (math.nan, [NOTHING, "", 0, ""]),
        (1e-9, [NOTHING, "", LEFT + 6, "← &lt;0.001 %"]),
        (0.0, [NOTHING, "", LEFT + 6, "← 0 %"]),
        (0.9999, [NOTHING, "e", RIGHT, "99.99 % →"]),
        (1.0, [NOTHING, "e", RIGHT, "100 % →"]),
    ],
)
def test_a_prior_needed_beyond_the_ends_is_told_there(needed: float | None, told: list[int | str]) -> None:
    drawing = risk_drawing(figures(1.0, needed=needed), 0)
    assert drawing is not None
    assert drawing[1:5] == told


def test_a_prior_needed_on_the_left_is_told_to_the_right_of_its_line() -> None:
    drawing = risk_drawing(figures(5.0, needed=0.05), 0)
    assert drawing is not None
    line = corners(str(drawing[1]).split("V", maxsplit=1)[0])
    assert drawing[2:4] == ["", line[0][0] + 8]


@pytest.mark.parametrize(("log_lr", "y"), [(20.0, BOTTOM), (-20.0, TOP), (3000.0, BOTTOM), (-3000.0, TOP)])
def test_what_lies_beyond_the_drawing_stands_at_its_edge(log_lr: float, y: int) -> None:
    drawing = risk_drawing(figures(log_lr), 0)
    assert drawing is not None
    assert drawing[-1] == y
    path = curve_of(drawing[5])
    assert path[0][0] <= LEFT
    assert path[-1][0] >= RIGHT
    assert {round(height_at(x, path)) for x in range(LEFT, RIGHT + 1)} <= {y, y + 1}


@pytest.mark.parametrize(
    "missing",
    [
        None,
        figures(None),
        figures(1.0, None),
        figures(math.nan),
        Figures("bound", 1.0, 0.5, "policy", None, 0.5, ""),
    ],
)
def test_what_has_no_risk_has_no_drawing(missing: Figures | None) -> None:
    assert risk_drawing(missing, 0) is None


@given(st.floats(-1e6, 1e6), st.floats(0, 1), st.floats(0, 1))
def test_any_risk_is_drawn_within_its_box(log_lr: float, prior: float, needed: float) -> None:
    drawing = risk_drawing(figures(log_lr, prior, needed), 0)
    assert drawing is not None
    x, y = int(drawing[6]), int(drawing[7])
    assert LEFT <= x <= RIGHT
    assert TOP <= y <= BOTTOM
    path = curve_of(drawing[5])
    assert path[0][0] <= LEFT
    assert path[-1][0] >= RIGHT
    assert all(TOP <= corner_y <= BOTTOM for _, corner_y in path)


def test_the_curve_stands_in_the_page_once_and_each_drawing_shows_the_part_in_its_box() -> None:
    drawing = risk_drawing(figures(math.log(9)), 0)
    assert drawing is not None
    moved = -round(math.log(9) / (2 * math.log(99)) * (RIGHT - LEFT))
    assert f'<svg x="94" width="442"><use href="#curve" x="{moved}"/></svg>' in filled(RISK, drawing)
    assert Axes([]).drawn().count('<symbol id="curve">') == 1


def judged(limit: float | None) -> Judged:
    finding = Finding("false-positive-risk", "met", "block", 0.01, limit)
    return Judged("a", Place("a"), "c", "", figures(1.0), (finding,))


def test_each_limit_has_its_axes() -> None:
    axes = Axes([judged(0.05), judged(0.2), judged(0.05), judged(None), judged(math.nan)])
    assert [axes.number_of(limit) for limit in (None, 0.05, 0.2, 0.3, math.nan)] == [0, 1, 2, 0, 0]
    drawn = axes.drawn()
    assert re.findall(r'<symbol id="(a\d)">', drawn) == ["a0", "a1", "a2"]
    assert drawn.count('class="l"') == 2
    five = round(TOP + -math.log10(0.05) / 3 * (BOTTOM - TOP))
    assert f'd="M{LEFT} {five}H{RIGHT}"/><text x="{RIGHT + 8}" y="{five + 8}">5 %</text></symbol>' in drawn


def shown(
    value: float = 4.0, low: float | None = 1.0, high: float | None = 7.0, **more: float | bool
) -> IntervalShown:
    given = {"level": 0.95, "null": 0.0, "log_scale": False, **more}
    return IntervalShown("difference", "g", value, low, high, **given)  # type: ignore[arg-type]  # a test's shorthand


def test_an_interval_on_its_scale() -> None:
    """From 0 to 7 with 6 % to either side: 100 units of the drawing are 1.44 of the estimate."""
    drawing = interval_drawing(shown())
    assert drawing is not None
    main, *ticks = drawing
    at = [round(28 + (number + 0.42) / 7.84 * 544) for number in (0, 1, 7, 4)]
    assert main == [0, 0, at[0], f"M{at[1]},44H{at[2]}M{at[1]},34v20M{at[2]},34v20", at[3]]
    assert [label for _, label in ticks] == ["0", "2", "4", "6"]
    assert ticks[0][0] == at[0]
    text = interval_plot(drawing)
    assert text.startswith('<svg viewBox="0 0 600 124"><rect x="0" y="8" width="0"')
    assert text.count("<tspan") == text.count(",80v8") == 4
    assert f'<tspan x="{at[0]}">0</tspan>' in text


def test_a_limit_that_is_not_there_runs_to_the_edge() -> None:
    upper = interval_drawing(shown(low=None))
    lower = interval_drawing(shown(high=None))
    none = interval_drawing(IntervalShown("difference", "", 4.0, None, None, None, 0.0, False))
    assert upper is not None
    assert lower is not None
    assert none is not None
    assert re.fullmatch(r"M28,44H(\d+)M\1,34v20", str(upper[0][3]))
    assert re.fullmatch(r"M(\d+),44H572M\1,34v20", str(lower[0][3]))
    assert none[0][3] == NOTHING


@pytest.mark.parametrize(
    ("one", "ends"),
    [
        (shown(), None),
        (shown(smallest=3.0), (3.0, -3.0)),
        (shown(smallest=-3.0, null=1.0), (-3.0, 5.0)),
        (shown(smallest=1.25, null=1.0, log_scale=True), (1.25, 0.8)),
        (shown(smallest=3.0, margin_low=-1.0, margin_high=2.0), (-1.0, 2.0)),
        (shown(margin_low=-1.0), None),
    ],
)
def test_what_is_too_small_to_matter(one: IntervalShown, ends: tuple[float, float] | None) -> None:
    assert band(one) == ends
    drawing = interval_drawing(one)
    assert drawing is not None
    assert (int(drawing[0][1]) > 0) == (ends is not None)


@pytest.mark.parametrize(
    ("low", "high", "labels"),
    [
        (0.5, 2.0, ["0.5", "1", "2"]),
        (0.9, 1.3, ["0.9", "1", "1.1", "1.2", "1.3"]),
        (0.02, 30.0, ["0.1", "1", "10"]),
        (1e-6, 1e6, ["1e-06", "0.001", "1", "1000", "1000000"]),
    ],
)
def test_ratios_have_ticks_of_their_own(low: float, high: float, labels: list[str]) -> None:
    drawing = interval_drawing(shown(1.1, low, high, null=1.0, log_scale=True))
    assert drawing is not None
    assert [label for _, label in drawing[1:]] == labels


@pytest.mark.parametrize(
    "one",
    [
        shown(1e300, -1e308, 1e308),
        shown(0.0, -1e-320, 1e-320),
        shown(1e308, 1e-308, 1e308, null=1.0, log_scale=True),
        shown(2.0, 1.0, 3.0, null=1.0, log_scale=True, smallest=1e-320, margin_low=-1.0, margin_high=1.0),
    ],
)
def test_numbers_that_no_drawing_holds(one: IntervalShown) -> None:
    assert interval_drawing(one) is None


def test_nothing_given_is_nothing_drawn() -> None:
    assert interval_drawing(None) is None


def drawing_of(numbers: list[float], log_scale: bool) -> list[list[int | str]] | None:
    value, low, high, null, smallest = map(abs, numbers) if log_scale else numbers
    return interval_drawing(
        IntervalShown("x", "", value, min(low, high), max(low, high), 0.9, null, log_scale, smallest)
    )


def assert_within(drawing: list[list[int | str]]) -> None:
    xs = [int(x) for x, _ in drawing[1:]]
    assert 1 <= len(xs) <= 8
    assert all(28 <= int(x) <= 572 for x in (*xs, drawing[0][2], drawing[0][4]))


@given(st.lists(st.floats(allow_nan=False, allow_infinity=False), min_size=5, max_size=5), st.booleans())
def test_any_interval_is_drawn_within_its_box_or_not_at_all(numbers: list[float], log_scale: bool) -> None:
    assume(not log_scale or all(numbers))
    drawing = drawing_of(numbers, log_scale)
    assert drawing is None or drawing[0][0] is not None
    if drawing is not None:
        assert_within(drawing)


@given(st.lists(st.floats(1e-60, 1e60), min_size=5, max_size=5), st.booleans())
def test_numbers_of_ordinary_size_are_always_drawn(numbers: list[float], log_scale: bool) -> None:
    drawing = drawing_of(numbers, log_scale)
    assert drawing is not None
    assert_within(drawing)
