"""Statistics as prose writes them: what is recognised, and what only looks like it."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from gatecheck.prose.statistics_in_text import (
    Result,
    ShownInterval,
    ShownShare,
    ShownTest,
    Statistic,
    may_hold_statistics,
    statistics,
)


def told(one: Statistic) -> str:
    """A statistic in one plain writing."""
    if isinstance(one, ShownShare):
        return f"{one.part}/{one.whole} ({one.percent.text} %)"
    if isinstance(one, ShownInterval):
        before = "" if one.estimate is None else f"{one.estimate.text} "
        return f"{before}({one.level.text} % {one.low.text} to {one.high.text})"
    return ", ".join(_test(each) for each in (one.statistic, one.p) if each is not None)


def _test(one: ShownTest) -> str:
    inside = [each.text for each in one.df] + ([f"N = {one.n.text}"] if one.n else [])
    return f"{one.kind}{_inside(inside)} {one.value.relation} {one.value.text}"


def _inside(parts: list[str]) -> str:
    return f"({', '.join(parts)})" if parts else ""


def found(text: str) -> list[str]:
    """All statistics of a text."""
    return [told(one) for one in statistics(text)]


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("Biomass rose, t(34) = 2.21, p = .034.", "t(34) = 2.21, p = .034"),
        ("t(34)=2.21; p=0.034", "t(34) = 2.21, p = 0.034"),
        ("t (34) = −2.21 (two-sided p = 0.034)", "t(34) = −2.21, p = 0.034"),
        ("t(df = 43.7) = 2.21", "t(43.7) = 2.21"),
        ("t[34] = 2.21, P < .05", "t(34) = 2.21, p < .05"),
        ("*t*(34) = 2.21, *p* = .034", "t(34) = 2.21, p = .034"),
        ("_t_(34) = 2.21, _p_ = .034", "t(34) = 2.21, p = .034"),
        ("t~34~ = 2.21, p-value = .034", "t(34) = 2.21, p = .034"),
        ("t<sub>34</sub> = 2.21, p &lt; .001", "t(34) = 2.21, p < .001"),
        ("$t(34) = 2.21$, $p = .034$", "t(34) = 2.21, p = .034"),
        (r"$t_{34} = 2.21$, $p \leq .05$", "t(34) = 2.21, p ≤ .05"),
        (r"\(t\left(34\right) = 2.21\)", "t(34) = 2.21"),
        (r"\textit{t}(34)~=~2.21, \textit{p}~=~.034", "t(34) = 2.21, p = .034"),
        ("t = 2.21, df = 34, p-value = 0.034", "t = 2.21, p = 0.034"),
        ("t(34)&nbsp;=&nbsp;2.21, p&nbsp;=&nbsp;.034", "t(34) = 2.21, p = .034"),
        ("t(34)&thinsp;=&thinsp;2.21", "t(34) = 2.21"),
        ("<i>t</i>(34) = 2.21, <em>p</em> = .034", "t(34) = 2.21, p = .034"),
        ("<i>F</i><sub>2,57</sub> = 3.4", "F(2, 57) = 3.4"),
        ("<i>χ</i><sup>2</sup>(1) = 4.1", "chi2(1) = 4.1"),
        ("<i>χ²</i>(1) = 4.1", "chi2(1) = 4.1"),
        ("t₃₄ = 2.21", "t(34) = 2.21"),
        ("χ²₁ = 4.1", "chi2(1) = 4.1"),
        ("F₂,₅₇ = 3.4", "F(2, 57) = 3.4"),
        ("F1,34 = 6.30", "F(1, 34) = 6.30"),
        ("F 1, 34.5 = 6.30, P = .017", "F(1, 34.5) = 6.30, p = .017"),
        ("p-value: 0.017", "p = 0.017"),
        ("P value of 0.017", "p = 0.017"),
        ("the *p*-value was .017", "p = .017"),
        ("the $p$-value is .017", "p = .017"),
        ("t-value: 2.21 (p-value: .034)", "t = 2.21, p = .034"),
        (r"$t(34) = 5.1$, $p < 10^{-4}$", "t(34) = 5.1, p < 10^{-4}"),
        ("t(34) = 5.1, p < 10^-4^", "t(34) = 5.1, p < 10^-4^"),
        ("F(2, 57) = 3.4, p = .04", "F(2, 57) = 3.4, p = .04"),
        ("$F_{2,57}=3.4$", "F(2, 57) = 3.4"),
        ("*F*~2,57~ = 3.4", "F(2, 57) = 3.4"),
        ("χ²(1, N = 90) = 4.1, p = .043", "chi2(1, N = 90) = 4.1, p = .043"),
        ("χ^2^(1, *N* = 90) = 4.1", "chi2(1, N = 90) = 4.1"),
        (r"$\chi^2(1) = 4.1$", "chi2(1) = 4.1"),
        (r"$\chi^{2}_{1} = 4.1$", "chi2(1) = 4.1"),
        ("chi2(1) = 4.1", "chi2(1) = 4.1"),
        ("chi-squared(1) = 4.1", "chi2(1) = 4.1"),
        ("chi-square = 4.1", "chi2 = 4.1"),
        ("X²(1) = 4.1", "chi2(1) = 4.1"),
        ("x² = 4.1, p = .043", "chi2 = 4.1, p = .043"),
        ("t(8) = 0, p = 1", "t(8) = 0, p = 1"),
        ("χ<sup>2</sup>(1) = 4.1", "chi2(1) = 4.1"),
        ("z = 2.31, p = .021", "z = 2.31, p = .021"),
        ("Z = 2.31 (p = .021)", "z = 2.31, p = .021"),
        ("r(28) = .36", "r(28) = .36"),
        ("r = .36, p = .05", "r = .36, p = .05"),
        ("It fell (p = 0.034).", "p = 0.034"),
        ("p = 2.1 × 10^-5", "p = 2.1 × 10^-5"),
        ("3.8 g (95 % CI 1.1 to 5.4)", "3.8 (95 % 1.1 to 5.4)"),
        ("3.8 g, 95% CI [1.1, 5.4]", "3.8 (95 % 1.1 to 5.4)"),
        ("95% CI: −0.3–8.1", "(95 % −0.3 to 8.1)"),
        (r"95\,\% CI 0.3--8.1", "(95 % 0.3 to 8.1)"),
        (r"a 95\% CI $[0.3, 8.1]$", "(95 % 0.3 to 8.1)"),
        ("a 95 % confidence interval from -0.3 to 0.1", "(95 % -0.3 to 0.1)"),
        ("90 % interval 1.1 g to 5.4 g", "(90 % 1.1 to 5.4)"),
        ("95 % CI -5.4 to -1.1", "(95 % -5.4 to -1.1)"),
        ("95 % CI −5.4 g and −1.1 g", "(95 % −5.4 to −1.1)"),
        ("12.5 % (95 % CI 10.1 % to 15.0 %)", "12.5 (95 % 10.1 to 15.0)"),
        ("0.5 (CI 95 %: 0.3–0.8)", "0.5 (95 % 0.3 to 0.8)"),
        ("12/48 (25 %)", "12/48 (25 %)"),
        ("12 (45.5%) of 22", "12/22 (45.5 %)"),
        ("1,200 [25.0 %] out of the 4,800", "1200/4800 (25.0 %)"),
        ("93 of 86 (96.5 %)", "93/86 (96.5 %)"),
        ("12 of 48 plots (25%)", "12/48 (25 %)"),
        ("12 out of the 48 (25 %)", "12/48 (25 %)"),
        ("25 % (12/48)", "12/48 (25 %)"),
        (r"25\% (12 of 48 plots)", "12/48 (25 %)"),
        ("1,200 of 4,800 [25.0 %]", "1200/4800 (25.0 %)"),
    ],
)
def test_the_usual_ways(text: str, expected: str) -> None:
    assert found(text) == [expected]
    assert may_hold_statistics(text)
    (one,) = statistics(text)
    assert 0 <= one.start < one.end <= len(text)


@pytest.mark.parametrize(
    "text",
    [
        "p < .05",  # a level, or a bound that many results satisfy
        "all p > .1",
        "z = 2.31 m",
        "t = 3 s, r = 5 mm and F = 3 N",
        "R² = .36, r² = .3, t² = 4",
        "t(34, 35) = 2.21",
        "F(2) = 3.4",
        "z(3) = 1",
        "p(3) = .1",
        "p = 3",
        "AR(p) with p = 1, and p=0,1,2",
        "t[0] = 0",
        "the integral of x^2 = 1/3",
        "p = n.s.",
        "t(34) = large",
        "temp = 3, exp(3) = 20",
        'class="p" width=95%',
        "95 % of plots",
        "12 (45.5 %) of them",
        "group (12 %) of 22",
        "group 12 had more (45.5 %) of 22",
        "The significance threshold was p = 0.05.",
        "The cut-off for screening was p = .1.",
        "The threshold was set at *p* = .01.",
        "It was above the significance level (p = .05).",
        "chi2(1) critical value is 3.84 at p = .05.",
        "A p-value of 0.05 or less was called small.",
        "A p value of 0.05 was considered significant.",
        "We chose k with probability p = 0.5.",
        "P = 0.9 bar and p = 0.3 kPa",
        "3/4 (75 %) cup of sugar",
        "1/2 (50 %) of the way",
        "the value: 0.3, a value of 0.3 and the v",
        "p-value: none, p-value of interest",
        "F1,0 = 3",
        "95 % CI unknown",
        "95 % CI 1.1",
        "95 % CI 1.1 in 5",
        "In 2019 (12 %)",
        "48/12 (25 %)",
        "0 of 0 (0 %)",
        "12/48 (25)",
        "25 (12/48) %",
        "3/4/2019 (12 %)",
        "x = 3, y < 5 and 7 %",
        "(12 of 48)",
        "χ = 3",
        "= 3",
        "",
    ],
)
def test_what_is_no_statistic(text: str) -> None:
    assert found(text) == []


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("The threshold was p = .05. The rise had p = .03", ["p = .03"]),
        ("Hearing thresholds differed (p = .02).", ["p = .02"]),
        ("Ozone levels rose, p = .03.", ["p = .03"]),
        ("12/48 (25 %) cured", ["12/48 (25 %)"]),
        ("12 of 48 (25 %) cups", ["12/48 (25 %)"]),
        ("t(34) = 2.21. The other p = .03", ["t(34) = 2.21", "p = .03"]),
        ("t(34) = 2.21, and much later in the same long sentence p = .03", ["t(34) = 2.21", "p = .03"]),
        ("t(34) = 2.21, F(2, 57) = 3.4, p = .03, p = .04", ["t(34) = 2.21", "F(2, 57) = 3.4, p = .03", "p = .04"]),
        ("z = 2.3 (95 % CI 1.1 to 5.4), p = .04", ["(95 % 1.1 to 5.4)", "p = .04"]),
        ("t(34) = 2.21 (12/48 (25 %))", ["t(34) = 2.21", "12/48 (25 %)"]),
        ("p = .03 and $F_{2,57}=3.4$", ["p = .03", "F(2, 57) = 3.4"]),
        ("r = .3 and r = .4, p = .03", ["r = .4, p = .03"]),
    ],
)
def test_which_p_belongs_to_which_statistic(text: str, expected: list[str]) -> None:
    assert found(text) == expected


def test_the_ends_of_a_result() -> None:
    text = "It rose, *t*(34) = 2.21, *p* = .034, and 12/48 (25 %)."

    result, share = statistics(text)

    assert text[result.start : result.end] == "t*(34) = 2.21, *p* = .034"
    assert text[share.start : share.end] == "12/48 (25 %)"
    assert isinstance(result, Result)


def test_a_number_that_begins_out_of_sight_is_no_estimate() -> None:
    (one,) = statistics(f"12{'3' * 70} (95 % CI 1.1 to 5.4)")

    assert isinstance(one, ShownInterval)
    assert one.estimate is None


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("t(34) = 2.21, p = .034, 95 % CI 0.3 to 8.1", ["t(34) = 2.21, p = .034", "(95 % 0.3 to 8.1)"]),
        ("t(34) = 2.21, 95 % CI 0.3 to 8.1", ["t(34) = 2.21", "(95 % 0.3 to 8.1)"]),
        ("p = .034 (95 % CI 0.3 to 8.1)", ["p = .034", "(95 % 0.3 to 8.1)"]),
        ("t(34) = 2.21, 4.2 g (95 % CI 0.3 to 8.1)", ["t(34) = 2.21", "4.2 (95 % 0.3 to 8.1)"]),
        ("r(28) = .36, 95 % CI .01 to .64", ["r(28) = .36", ".36 (95 % .01 to .64)"]),
    ],
)
def test_a_statistic_before_an_interval_is_not_its_estimate_but_r(text: str, expected: list[str]) -> None:
    assert found(text) == expected


PARTS = [
    "t",
    "(",
    "34",
    ")",
    " = ",
    "2.21",
    ", ",
    "p",
    "<",
    ".05",
    "95 %",
    "%",
    " CI ",
    " to ",
    "12/48",
    " of ",
    "χ²",
    "$",
]
PARTS += ["*", "_", "{", "}", "\\", "~", "[", "]", "\n", ". A", "N", "F", "\\chi^2", "=", "&lt;", "−"]


@given(st.lists(st.sampled_from(PARTS), max_size=40).map("".join))
def test_any_text_is_searched(text: str) -> None:
    ends = [(one.start, one.end) for one in statistics(text)]

    assert all(0 <= start < end <= len(text) for start, end in ends)
    assert bool(ends) <= may_hold_statistics(text)
