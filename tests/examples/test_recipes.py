"""Records from other languages: the recipe for R, run for real, and the bare file."""

from __future__ import annotations

import json
import os
import shutil
import subprocess
from pathlib import Path
from typing import Any

import pytest
from scipy import stats

from gatecheck.schema.records import read_record

RECIPES = Path(__file__).parents[2] / "examples" / "recipes"
# R's built-in data set sleep (Student 1908).
FIRST_DRUG = [0.7, -1.6, -0.2, -1.2, -0.1, 3.4, 3.7, 0.8, 0.0, 2.0]
SECOND_DRUG = [1.9, 0.8, 1.1, 0.1, -0.1, 4.4, 5.5, 1.6, 4.6, 3.4]
# What jsonlite keeps with digits = NA: 15 significant digits.
FULL = 1e-14


def documents(folder: Path) -> dict[str, Any]:
    return {path.name: json.loads(path.read_bytes()) for path in sorted(folder.rglob("*.record.json"))}


@pytest.fixture
def recipe(tmp_path: Path) -> Path:
    """Return a copy of the recipe for R without its records; a missing R fails continuous integration alone."""
    if shutil.which("Rscript") is None:
        if os.environ.get("CI"):
            pytest.fail("Rscript is missing: install R and its package jsonlite")
        pytest.skip("Rscript is not installed")
    for name in ("gatecheck.R", "sleep.R"):
        shutil.copy(RECIPES / "r" / name, tmp_path)
    return tmp_path


def run(folder: Path, *arguments: str) -> str:
    command = ["Rscript", "--vanilla", *arguments]
    return subprocess.run(command, cwd=folder, check=True, capture_output=True, text=True).stdout


def record_of(folder: Path, result: str, more: str = "") -> dict[str, Any]:
    """Return the record that the recipe makes of an expression of R."""
    code = f'source("gatecheck.R"); cat(as_json(record({result}, id = "x"{more})))'
    document: dict[str, Any] = json.loads(run(folder, "-e", code))
    assert read_record(document)[1] == ()
    return document


def assert_sleep(records: dict[str, Any]) -> None:
    """Compare with the help page of t.test (t = -1.8608, df = 17.776, p-value = 0.07939), and scipy in full."""
    welch, model = records["welch.record.json"], records["linear-model.record.json"]
    assert read_record(welch)[1] == read_record(model)[1] == ()
    assert f"{welch['test']['value']:.4f}" == "-1.8608"
    assert f"{welch['test']['df']:.3f}" == "17.776"
    assert f"{welch['test']['p']:.5f}" == "0.07939"
    known = stats.ttest_ind(FIRST_DRUG, SECOND_DRUG, equal_var=False)
    limits = known.confidence_interval(0.95)
    assert welch["test"]["value"] == pytest.approx(known.statistic, rel=FULL)
    assert welch["test"]["df"] == pytest.approx(known.df, rel=FULL)
    assert welch["test"]["p"] == pytest.approx(known.pvalue, rel=FULL)
    assert welch["estimate"]["interval"]["low"] == pytest.approx(limits.low, rel=FULL)
    assert welch["estimate"]["interval"]["high"] == pytest.approx(limits.high, rel=FULL)
    assert welch["sample"]["groups"][0]["mean"] == pytest.approx(0.75, rel=FULL)
    line = stats.linregress([0] * 10 + [1] * 10, FIRST_DRUG + SECOND_DRUG)
    assert model["estimate"]["value"] == pytest.approx(line.slope, rel=FULL)
    assert model["estimate"]["standard_error"] == pytest.approx(line.stderr, rel=FULL)
    assert model["test"]["p"] == pytest.approx(line.pvalue, rel=4 * FULL)
    assert (model["test"]["df"], model["sample"]["n"]) == (18, 20)


def test_committed_records_of_r() -> None:
    assert_sleep(documents(RECIPES / "r"))


@pytest.mark.needs_r
def test_recipe_for_r_writes_its_records(recipe: Path) -> None:
    run(recipe, "sleep.R")
    made, committed = documents(recipe), documents(RECIPES / "r")
    assert_sleep(made)
    assert list(made) == list(committed)
    assert [list(record) for record in made.values()] == [list(record) for record in committed.values()]
    assert not list(recipe.rglob("*.tmp"))


@pytest.mark.needs_r
def test_default_digits_would_have_lost_the_numbers(recipe: Path) -> None:
    """The trap that the recipe avoids: four decimals, and a small p becomes 0."""
    code = (
        'source("gatecheck.R"); welch <- record(t.test(extra ~ group, data = sleep), id = "sleep/welch"); '
        "welch$test$p <- c(welch$test$p, 0.00004); cat(jsonlite::toJSON(welch, auto_unbox = TRUE))"
    )
    p, small = json.loads(run(recipe, "-e", code))["test"]["p"]
    known = stats.ttest_ind(FIRST_DRUG, SECOND_DRUG, equal_var=False).pvalue
    assert p == 0.0794
    assert p != pytest.approx(known, rel=1e-6)
    assert small == 0


@pytest.mark.needs_r
@pytest.mark.parametrize(
    ("expression", "test"),
    [
        (
            't.test(sleep$extra, mu = 1, alternative = "less")',
            {"name": "One Sample t-test", "statistic": "t", "df": 19, "sides": 1, "tail": "less"},
        ),
        (
            "chisq.test(matrix(c(10, 20, 20, 10), 2))",
            {
                "name": "Pearson's Chi-squared test with Yates' continuity correction",
                "statistic": "chi2",
                "value": 5.4,
                "df": 1,
            },
        ),
        (
            "oneway.test(extra ~ group, sleep, var.equal = TRUE)",
            {"name": "One-way analysis of means", "statistic": "F", "df": [1, 18]},
        ),
        (
            'var.test(extra ~ group, sleep, alternative = "greater")',
            {"name": "F test to compare two variances", "sides": 1, "tail": "greater"},
        ),
        (
            "wilcox.test(c(1.1, 2, 3), c(4, 5, 6.5))",
            {
                "name": "Wilcoxon rank sum exact test",
                "p": 0.1,
                "p_kind": "exact",
                "named_statistic": {"symbol": "W", "value": 0},
                "sides": 2,
            },
        ),
        (
            "fisher.test(matrix(c(3, 1, 1, 3), 2))",
            {"name": "Fisher's Exact Test for Count Data", "p_kind": "exact", "sides": 2},
        ),
        ("kruskal.test(extra ~ group, sleep)", {"name": "Kruskal-Wallis rank sum test"}),
    ],
)
def test_tests_of_r(recipe: Path, expression: str, test: dict[str, Any]) -> None:
    found = record_of(recipe, expression)["test"]
    assert {key: found[key] for key in test} == test
    assert ("sides" in found) == ("sides" in test)
    assert ("statistic" in found) == ("statistic" in test)


@pytest.mark.needs_r
def test_values_given_in_r_lie_over_the_result(recipe: Path) -> None:
    more = ', test = list(name = "Welch t", alpha = 0.05), estimate = list(unit = "h"), claim = "It differs."'
    document = record_of(recipe, "t.test(extra ~ group, data = sleep)", more)
    assert (document["test"]["name"], document["test"]["alpha"]) == ("Welch t", 0.05)
    assert document["estimate"]["unit"] == "h"
    assert document["estimate"]["value"] == pytest.approx(-1.58, rel=FULL)
    assert document["claim"] == "It differs."


@pytest.mark.needs_r
@pytest.mark.parametrize("value", ["NaN", "Inf", "NA", "NA_real_"])
def test_what_is_not_finite_in_r_is_refused(recipe: Path, value: str) -> None:
    """With jsonlite such a value would become a text or vanish."""
    code = f'source("gatecheck.R"); declare(t.test(1:3), id = "x", test = list(value = {value}))'
    with pytest.raises(subprocess.CalledProcessError) as caught:
        run(recipe, "-e", code)
    assert "the record of x holds a value that is not finite" in caught.value.stderr
    assert not list(recipe.rglob("*.json"))


def test_bare_record() -> None:
    (document,) = documents(RECIPES / "bare").values()
    record, faults = read_record(document)
    assert faults == ()
    assert record is not None
    assert record.test is not None
    assert record.test.p is not None
    assert (record.test.p.text, record.test.p.low) == ("0.034", 0.0335)
    # The invented numbers agree with each other as far as they are printed.
    assert round(float(2 * stats.t.sf(2.21, 34)), 3) == 0.034
    assert round(4.2 / 1.9, 2) == 2.21
    assert round(float(4.2 + 1.9 * stats.t.ppf(0.975, 34)), 2) == 8.06
