"""Published examples of values that are possible or not, and of statistics recomputed from what is reported.

Sources, beside what follows from them:
[1] the encyclopedia article on the GRIM test (copy at w.owiki.org/wiki/GRIM_test): 20 whole numbers have no mean
    of 3.48.
[2] Brown, N. J. L. and Heathers, J. A. J. (2017), The GRIM test, Social Psychological and Personality Science 8(4),
    363-369 (from memory): a mean of N whole numbers is k/N, rounded. Expected values were computed from that.
[3] Lakens, D. (2022), Improving Your Statistical Inferences, chapter 12 (from memory): a table of Festinger and
    Carlsmith (1959) in which means of 20 whole numbers cannot be. Expected values were computed from [2].
[4] Anaya, J. (2016), The GRIMMER test, PeerJ Preprints 4:e2400 (from memory): the sum of squares is a whole number
    as odd or even as the sum. Expected values were checked by enumeration.
[5] Student (1908), Fisher (1925), Pearson (1900): p and its ends over the rounding of the statistic, to 40 digits.
[6] JASP, verification of the t-test from summary statistics: M 1.8 and 1.6, SD .7 and .9, n 125 and 150.
[7] Anscombe, F. J. (1973): r = 0.816 in 11 pairs, of which r(9) gives p = .00217 (from memory; recomputed).
"""

from __future__ import annotations

from typing import Any

import pytest
from consistent_records import compared, names_short

from gatecheck.compare.possible_values import compare_mean, compare_sd
from gatecheck.model.numbers import parse_reported
from gatecheck.model.record import Group


def group(n: int, mean: str, sd: str | None = None, items: int = 1) -> Group:
    """A group whose figures are as printed."""
    return Group("one", n, parse_reported(mean), None if sd is None else parse_reported(sd), integer_items=items)


@pytest.mark.parametrize(
    ("mean", "n", "items", "possible"),
    [
        ("3.48", 20, 1, False),  # [1]
        ("5.19", 28, 1, False), ("5.18", 28, 1, True), ("5.21", 28, 1, True), ("3.57", 25, 1, False),  # [2]
        ("4.125", 40, 1, True), ("4.12", 40, 1, True), ("4.13", 40, 1, True), ("5.19", 28, 3, True),  # [2]
        ("3.48", 20, 5, True), ("1.08", 15, 1, False), ("0.995", 200, 1, True), ("2.50", 99, 1, False),  # [2]
        ("7.77", 101, 1, True), ("5.1", 9, 1, True),  # [2]
        ("-0.05", 20, 1, True), ("1.35", 20, 1, True), ("3.15", 20, 1, True), ("2.80", 20, 1, True),  # [3]
        ("5.60", 20, 1, True), ("5.18", 20, 1, False), ("6.45", 20, 1, True), ("-0.62", 20, 1, False),  # [3]
        ("-0.25", 20, 1, True), ("1.20", 20, 1, True),  # [3]
    ],
)  # fmt: skip
def test_means_of_whole_numbers(mean: str, n: int, items: int, possible: bool) -> None:
    found = compare_mean(group(n, mean, items=items))

    assert found is not None
    assert found.agrees is possible


@pytest.mark.parametrize(
    ("n", "many"), [(10, 10), (15, 15), (25, 25), (28, 28), (40, 60), (50, 50), (75, 75), (100, 100)]
)
def test_how_many_means_of_two_decimals_are_possible(n: int, many: int) -> None:
    """min(N, 100) of 100, save that an exact half may be rounded either way [2]."""
    found = [compare_mean(group(n, f"3.{cents:02}")) for cents in range(100)]

    assert sum(each is not None and each.agrees for each in found) == many


@pytest.mark.parametrize(
    ("mean", "sd", "n", "possible"),
    [
        ("3.00", "1.00", 5, True), ("3.20", "1.30", 5, True), ("2.50", "1.29", 4, True), ("2.50", "1.30", 4, False),
        ("4.40", "1.52", 10, False), ("4.40", "1.51", 10, True), ("4.40", "1.50", 10, False),
        ("5.21", "1.60", 28, True), ("3.44", "2.47", 18, False), ("3.45", "1.20", 20, False),
        ("2.80", "0.43", 10, False), ("0.50", "0.51", 20, True), ("0.50", "0.52", 20, False),
    ],
)  # fmt: skip
def test_standard_deviations_of_whole_numbers(mean: str, sd: str, n: int, possible: bool) -> None:
    """With divisor n - 1, as the examples have it [4]."""
    found = compare_sd(group(n, mean, sd), least_divisor=1)

    assert found is not None
    assert found.agrees is possible


@pytest.mark.parametrize(
    ("statistic", "df", "value", "low", "high"),
    [
        ("t", 60, "2.00", 0.0494807691739, 0.0505906071504),
        ("t", 200, "1.96", 0.0507988983465, 0.0519764729681),
        ("t", 19, "2.37", 0.0282331140638, 0.0288239087695),
        ("t", 12, "3.10", 0.00910502523662, 0.00927576352904),
        ("t", "17.77600000000000", "-1.86", 0.0787771753860, 0.0802590086028),
        ("F", [2, 27], "4.85", 0.0158059871796, 0.0159226998098),
        ("F", [1, 98], "3.94", 0.0498039244017, 0.0500888204495),
        ("chi2", 1, "3.84", 0.0498945216655, 0.0501929910764),
        ("chi2", 3, "12.60", 0.00557355905026, 0.00559956306959),
        ("z", None, "1.96", 0.0494142375450, 0.0505830702705),
        ("z", None, "2.58", 0.00973789974068, 0.0100240086635),
        ("z", None, "5.00", 5.58620310312e-7, 5.88357674119e-7),
        ("r", 41, "-0.13", 0.388066361499, 0.424484107356),
        ("r", 18, "0.50", 0.0231424590563, 0.0264857884200),
    ],
)
def test_p_over_the_rounding_of_a_statistic(statistic: str, df: Any, value: str, low: float, high: float) -> None:
    """The ends to ten digits; a p on either side of them disagrees, one between them agrees [5]."""
    test = {"name": "a test", "statistic": statistic, "value": value} | ({"df": df} if df is not None else {})
    beside = [f"{low * 0.99:.6e}", f"{(low + high) / 2:.6e}", f"{high * 1.01:.6e}"]

    found = compared(*({"test": {**test, "p": p}} for p in beside))[0]

    assert found.name == "p"
    assert found.low == pytest.approx([low] * 3, rel=1e-10)
    assert found.high == pytest.approx([high] * 3, rel=1e-10)
    assert found.agrees.tolist() == [False, True, False]


SUMMARIES = {
    "unit": "student",
    "groups": [
        {"name": "one", "n": 125, "mean": "1.8", "sd": "0.7"},
        {"name": "other", "n": 150, "mean": "1.6", "sd": "0.9"},
    ],
}
EXACT = {
    "unit": "student",
    "groups": [
        {"name": "one", "n": 125, "mean": "1.80000000", "sd": "0.70000000"},
        {"name": "other", "n": 150, "mean": "1.60000000", "sd": "0.90000000"},
    ],
}


@pytest.mark.parametrize(
    ("name", "t", "df", "p"),
    [("Student t", "2.0257", 273, 0.0437720197601347), ("Welch t", "2.0717", 271.7615, 0.0392389830584111)],
)
def test_t_from_summary_statistics(name: str, t: str, df: float, p: float) -> None:
    """Statistic, df and p of both tests as they were printed [6], and not those of the other test."""
    result = {"test": {"name": name, "statistic": "t", "value": t, "df": df, "p": f"{p:.4f}"}}
    other = {"test": {"name": name, "statistic": "t", "value": "2.0487", "df": df, "p": f"{p:.4f}"}}

    assert names_short({**result, "sample": EXACT}, {**result, "sample": SUMMARIES}) == [[], []]
    assert names_short({**other, "sample": EXACT})[0][-1] == "groups-statistic"


def test_an_r_by_its_df() -> None:
    right = {"test": {"name": "Pearson correlation", "statistic": "r", "value": "0.816", "df": 9, "p": "0.00217"}}
    wrong = {"test": {**right["test"], "df": 11}, "sample": {"unit": "pair", "n": 11}}

    assert names_short({**right, "sample": {"unit": "pair", "n": 11}}, wrong) == [[], ["p", "df-n", "units"]]
