"""The figures of a record against each other: what must be caught, and the false alarms to avoid."""

from __future__ import annotations

import re
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from scipy import stats
from support import DRAINAGE, Answer, Document, drainage, judge

BARE = {"estimate": ..., "alternative": ..., "sample": {"unit": "plot"}}


def outcome(tmp_path: Path, record: Document) -> tuple[str, str]:
    """What `numbers-agree` says of a record, and its message."""
    said = judge(tmp_path, record).rule("numbers-agree")
    return str(said["outcome"]), str(said["message"])


def with_test(**test: Any) -> Document:
    """The drainage record with another test, no estimate and no sizes."""
    return drainage(**BARE, test={"name": "a test", **test})


@pytest.mark.parametrize(
    "test",
    [
        {"statistic": "t", "value": 2.21, "df": 34, "p": "0.034"},
        {"statistic": "t", "value": "2.21", "df": 34, "p": "0.03"},
        {"statistic": "t", "value": -2.21, "df": 34, "p": "0.034"},
        {"statistic": "t", "value": 2.21, "df": 34, "p": "<0.05"},
        {"statistic": "t", "value": 1.5, "df": 34, "p": ">0.05"},
        {"statistic": "t", "value": 2.21, "df": 34, "p": 0.034},
        {"statistic": "t", "value": "2.03", "df": "43.7", "p": "0.048"},
        {"statistic": "t", "value": 2.21, "df": 34, "p": "0.017", "sides": 1, "tail": "greater"},
        {"statistic": "t", "value": -2.21, "df": 34, "p": "0.017", "sides": 1, "tail": "less"},
        {"statistic": "t", "value": -2.21, "df": 34, "p": "0.983", "sides": 1, "tail": "greater"},
        {"statistic": "t", "value": "0.0", "df": 34, "p": "1.00"},
        {"statistic": "z", "value": 3.64, "p": "0.00027"},
        {"statistic": "z", "value": 40, "p": 0.0},
        {"statistic": "z", "value": 3.9, "p": "0.000"},
        {"statistic": "chi2", "value": 3.84, "df": 1, "p": "0.05"},
        {"statistic": "F", "value": 4.76, "df": [2, 45], "p": "0.013"},
        {"statistic": "r", "value": "0.35", "df": 30, "p": "0.05"},
        {"statistic": "t", "value": 2.21, "df": 34, "p": 0.5, "p_kind": "adjusted"},
        {"statistic": "t", "value": 2.21, "df": 34, "p": 0.021, "p_kind": "permutation", "resamples": 999},
        {"statistic": "chi2", "value": 4.2, "df": 1, "p": 0.06, "p_kind": "exact"},
        {"statistic": "t", "value": 2.21, "p": 0.5},
        {"p": 0.5},
    ],
)
def test_tests_that_agree_raise_no_alarm(tmp_path: Path, test: Document) -> None:
    """Within rounding, of any side and kind; a p of another kind is not set against the statistic."""
    assert outcome(tmp_path, with_test(**test))[0] == "met"


@pytest.mark.parametrize(
    ("test", "told", "remedy"),
    [
        ({"statistic": "t", "value": 2.21, "df": 34, "p": "0.34"}, "t(34) = 2.21 gives p = 0.0339,", "same run"),
        (
            {"statistic": "t", "value": "2.21", "df": 34, "p": "0.34"},
            "t(34) = 2.21 gives p = 0.0339 (0.0336 to 0.0343 within its rounding), and 0.34 is reported",
            "same run",
        ),
        ({"statistic": "t", "value": 2.21, "df": 34, "p": "0.017"}, "and 0.017 is reported", "half of it"),
        (
            {"statistic": "t", "value": 2.21, "df": 34, "p": "0.034", "sides": 1, "tail": "greater"},
            "gives p = 0.017",
            "twice it",
        ),
        (
            {"statistic": "t", "value": -2.21, "df": 34, "p": "0.017", "sides": 1, "tail": "greater"},
            "gives p = 0.983",
            "same run",
        ),
        ({"statistic": "t", "value": 2.21, "df": 34, "p": "<0.01"}, "and <0.01 is reported", "same run"),
        ({"statistic": "t", "value": 2.21, "df": 34, "p": ">0.05"}, "and >0.05 is reported", "same run"),
        ({"statistic": "t", "value": 5.2, "df": 34, "p": 0}, "gives p = 9.45e-06", "four decimals"),
        ({"statistic": "t", "value": 4.2, "df": 34, "p": 0}, "gives p = 0.00018", "three decimals"),
        ({"statistic": "t", "value": 2.1, "df": 34, "p": 0}, "gives p = 0.0432", "same run"),
        ({"statistic": "z", "value": 3.64, "p": "0.0027"}, "z = 3.64 gives p = 0.000273", "same run"),
        ({"statistic": "chi2", "value": 3.84, "df": 1, "p": "0.025"}, "chi2(1) = 3.84 gives p = 0.05,", "half"),
        ({"statistic": "F", "value": 4.76, "df": [2, 45], "p": "0.03"}, "F(2, 45) = 4.76 gives p = 0.01", "run"),
        ({"statistic": "r", "value": 0.35, "df": 30, "p": "0.01"}, "r(30) = 0.35 gives p = 0.04", "same run"),
    ],
)
def test_a_p_that_its_statistic_does_not_give(tmp_path: Path, test: Document, told: str, remedy: str) -> None:
    answer = judge(tmp_path, with_test(**test))

    said = answer.rule("numbers-agree")
    assert (answer.status, said["outcome"]) == (1, "short")
    assert told in said["message"]
    assert said["message"].endswith("; the policy wants figures that fit together.")
    assert remedy in said["remedy"]


@pytest.mark.parametrize(
    "estimate",
    [
        {"value": 4.2, "standard_error": 1.9, "interval": {"level": 0.95, "low": 0.34, "high": 8.06}},
        # The multiple of the normal is used too; 1.96 is written for 1.959964.
        {"value": 4.2, "standard_error": 1.9, "interval": {"level": 0.95, "low": 0.476, "high": 7.924}},
        # Not symmetric: a profile or bootstrap interval says nothing of the standard error.
        {"value": 4.2, "standard_error": 1.9, "interval": {"level": 0.95, "low": 0.1, "high": 9.9}},
        {"value": 4.2, "interval": {"level": 0.9, "low": 0.987, "high": 7.413}},
        {"value": 4.2, "interval": {"level": 0.95, "low": 0.34}},
        {"value": 4.2, "standard_error": 1.9},
        {"value": 4.2},
        {"value": 14.2, "null": 10, "standard_error": 1.9},
        # An interval adjusted for several comparisons is wider than its level alone makes it.
        {
            "value": 4.2,
            "standard_error": 1.9,
            "interval": {"level": 0.95, "low": -0.8, "high": 9.2, "adjusted": True},
        },
    ],
)
def test_estimates_that_agree_raise_no_alarm(tmp_path: Path, estimate: Document) -> None:
    record = drainage(estimate={"measure": "mean difference", "unit": "g", **estimate})

    assert outcome(tmp_path, record) == ("met", "")


@pytest.mark.parametrize(
    ("estimate", "told"),
    [
        (
            {"value": 9.2, "interval": {"level": 0.95, "low": 0.34, "high": 8.06}},
            "the estimate 9.2 lies outside its own interval 0.34 to 8.06",
        ),
        (
            {"value": 9.2, "interval": {"level": 0.95, "high": 8.06}},
            "the estimate 9.2 lies outside its own interval unbounded to 8.06",
        ),
        (
            {"value": 4.2, "standard_error": 1.9, "interval": {"level": 0.95, "low": 2.3, "high": 6.1}},
            "the 95 % interval 2.3 to 6.1 reaches 1.9 to either side, which is 1 standard errors of 1.9",
        ),
        (
            {"value": 4.2, "standard_error": 2.9},
            "estimate and standard error give t = 1.45 in size, and 2.21 is reported",
        ),
        (
            {"value": 4.2, "interval": {"level": 0.95, "low": 3.2, "high": 5.2}},
            "estimate and interval give t = 8.42 in size, and 2.21 is reported",
        ),
    ],
)
def test_estimates_that_do_not_agree_are_told(tmp_path: Path, estimate: Document, told: str) -> None:
    said = judge(tmp_path, drainage(estimate={"measure": "difference", "unit": "g", **estimate}))

    assert told in said.rule("numbers-agree")["message"]


def test_a_ratio_is_compared_on_the_log_scale(tmp_path: Path) -> None:
    """Odds ratio 2.5 with its logarithm's standard error 0.3: z = 3.05, interval 1.39 to 4.50."""
    test = {"name": "Wald", "statistic": "z", "value": "3.05", "p": "0.0023"}
    estimate = {
        "measure": "odds ratio",
        "value": 2.5,
        "scale": "log",
        "standard_error": 0.3,
        "interval": {"level": 0.95, "low": 1.39, "high": 4.50},
    }
    agreeing = drainage(test=test, estimate=estimate)
    linear = drainage(test=test, estimate={**estimate, "scale": "linear", "null": 1, "unit": "1"})

    (tmp_path / "log").mkdir()
    (tmp_path / "linear").mkdir()
    assert outcome(tmp_path / "log", agreeing) == ("met", "")
    assert outcome(tmp_path / "linear", linear)[0] == "short"


def test_a_score_test_beside_a_wald_interval_is_no_fault(tmp_path: Path) -> None:
    """Two proportions, 30 of 100 against 18 of 100: pooled z = 1.986 (p = .047), unpooled interval .003 to .237.

    Common practice, no source: tests pool the proportions, intervals do not.
    """
    record = drainage(
        test={"name": "two-proportion z", "statistic": "z", "value": 1.9868, "p": 0.04695},
        estimate={
            "measure": "difference",
            "value": 0.12,
            "unit": "1",
            "standard_error": 0.0598,
            "interval": {"level": 0.95, "low": 0.0028, "high": 0.2372},
        },
    )

    assert outcome(tmp_path, record) == ("met", "")


def test_an_omnibus_statistic_is_not_set_against_one_estimate(tmp_path: Path) -> None:
    """A chi-squared of three df tests more than the one difference whose interval excludes 0."""
    record = drainage(
        test={"name": "chi-squared", "statistic": "chi2", "value": 4.6, "df": 3, "p": "0.20"},
        estimate={
            "measure": "difference",
            "value": 2.4,
            "unit": "1",
            "interval": {"level": 0.95, "low": 0.3, "high": 4.5},
        },
    )

    assert outcome(tmp_path, record) == ("met", "")


def test_a_one_sided_p_is_doubled_before_it_is_set_against_an_interval(tmp_path: Path) -> None:
    record = drainage(
        test={"name": "t", "statistic": "t", "value": 1.78, "df": 46, "p": "0.041", "sides": 1, "tail": "greater"},
        estimate={
            "measure": "difference",
            "value": 1.78,
            "unit": "1",
            "standard_error": 1.0,
            "interval": {"level": 0.95, "low": -0.233, "high": 3.793},
        },
        sample={"unit": "plot"},
    )

    assert outcome(tmp_path, record) == ("met", "")


def _two_groups(generator: np.random.Generator) -> Document:
    """Full figures of a real two-sample test by scipy, as an exact record."""
    first = generator.normal(0.4, 1, generator.integers(4, 60))
    second = generator.normal(0, 1.5, generator.integers(4, 60))
    result = stats.ttest_ind(first, second, equal_var=bool(generator.integers(0, 2)))
    interval = result.confidence_interval(0.95)
    difference = float(first.mean() - second.mean())
    return drainage(
        id=f"pair/{generator.integers(1 << 60)}",
        test={"name": "t", "statistic": "t", "value": result.statistic, "df": result.df, "p": result.pvalue},
        estimate={
            "measure": "difference",
            "value": difference,
            "unit": "1",
            "standard_error": difference / result.statistic,
            "interval": {"level": 0.95, "low": interval.low, "high": interval.high},
        },
        sample={
            "unit": "plot",
            "groups": [
                {"name": name, "n": each.size, "mean": float(each.mean()), "sd": float(each.std(ddof=1))}
                for name, each in (("first", first), ("second", second))
            ],
        },
    )


def _plain(record: Document) -> Document:
    """The record with Python's own numbers."""
    return {
        key: _plain(value) if isinstance(value, dict) else float(value) if isinstance(value, np.floating) else value
        for key, value in record.items()
    }


@pytest.fixture(scope="module")
def real_results() -> list[Document]:
    """400 results of scipy, seeded."""
    generator = np.random.default_rng(20310402)
    return [_plain(_two_groups(generator)) for _ in range(400)]


def short_of(answer: Answer) -> set[str]:
    """The ids that `numbers-agree` finds short."""
    return {
        one["id"]
        for one in answer.verdict["claims"]
        if any(each["rule"] == "numbers-agree" and each["outcome"] == "short" for each in one["rules"])
    }


def test_no_real_result_raises_an_alarm_exact_or_rounded(tmp_path: Path, real_results: list[Document]) -> None:
    """Whatever the digits to which a correct result is rounded, its figures agree."""
    for digits in (None, 4, 3, 2):
        folder = tmp_path / str(digits)
        folder.mkdir()
        records = real_results if digits is None else [_rounded(record, digits) for record in real_results]
        assert short_of(judge(folder, *records)) == set(), digits


def _rounded(record: Document, digits: int) -> Document:
    """The record with every figure of test, estimate and groups as a text of so many significant digits."""

    def rounded(value: Any) -> Any:
        if isinstance(value, dict):
            return {key: each if key == "level" else rounded(each) for key, each in value.items()}
        if isinstance(value, list):
            return [rounded(each) for each in value]
        if not isinstance(value, float):
            return value
        return re.sub(r"e([+-])0*", r"e\1", f"{value:#.{digits}g}").replace(".e", "e").rstrip(".")

    return {**record, **{part: rounded(record[part]) for part in ("test", "estimate", "sample")}}


@pytest.mark.parametrize(
    ("field", "factor"),
    [("test__value", 1.2), ("test__p", 1.3), ("test__p", 0.5), ("estimate__standard_error", 1.3)],
)
def test_a_figure_changed_beyond_rounding_is_caught(
    tmp_path: Path, real_results: list[Document], field: str, factor: float
) -> None:
    """Every one of 400 results with one figure changed is found (p where it stays a probability)."""
    part, name = field.split("__")
    faulty = [
        drainage(**{
            **{key: record[key] for key in ("id", "test", "estimate", "sample")},
            part: {**record[part], name: record[part][name] * factor},
        })
        for record in real_results
        if name != "p" or record[part][name] * factor <= 1
    ]

    assert short_of(judge(tmp_path, *faulty)) == {record["id"] for record in faulty}


def test_several_disagreements_are_told_in_three_sentences(tmp_path: Path) -> None:
    """What was found and is wanted, what to do about all of it, and what to rule out first."""
    record = drainage(
        test__p="0.34",
        estimate={
            "measure": "difference",
            "value": 9.9,
            "unit": "g",
            "standard_error": 1.9,
            "interval": {"level": 0.95, "low": 0.34, "high": 8.06},
        },
        sample=DRAINAGE["sample"],
    )

    said = judge(tmp_path, record).rule("numbers-agree")

    assert said["message"].count("is reported") == 4
    assert said["message"].count(". ") + said["remedy"].count(". ") == 1
    assert said["remedy"] == (
        "Take statistic, df and p from the same run, and name the kind of p by p_kind; take estimate and interval "
        "from the same run and on the same scale; take estimate and statistic from the same test, and say in "
        "estimate.null what it is compared with; take estimate and means from the same units, and give covariates "
        "if there are any. Rule out first that p is adjusted for several tests, from a permutation or exact, it is "
        "one-sided, a correction was made to p alone or it is a profile or bootstrap interval."
    )
