"""Records weighed under the default prior of their test."""

from __future__ import annotations

import math
import re
from pathlib import Path
from typing import Any

import pytest
from support import POLICY, Document, changed, drainage, judge

from gatecheck import weigh
from gatecheck.weigh import default_prior
from gatecheck.weigh.proportions import log_bf_proportions

DEFAULT = changed(POLICY, evidence__alternative="default-prior")


def log_bf(tmp_path: Path, record: Document, policy: Document = DEFAULT) -> float:
    """The natural log of the factor of one record."""
    evidence = judge(tmp_path, record, policy=policy).claim()["evidence"]
    assert evidence["alternative"] == "default-prior", evidence["note"]
    return float(evidence["log_likelihood_ratio"])


def made(**changes: Any) -> Document:
    """The drainage record without estimate, and with other values."""
    return drainage(**{"estimate": ..., **changes})


def two(n: int, unit: str = "order") -> Document:
    """Two groups of n."""
    return {"unit": unit, "n": 2 * n, "groups": [{"name": "a", "n": n}, {"name": "b", "n": n}]}


@pytest.mark.parametrize(
    ("t", "n", "factor"),
    # Invented stories, computed exactly: 2.03 (18 a group), .85 (200 an arm), 1/12.5 (50,000 an arm).
    [(2.21, 18, 2.03), (2.06, 200, 0.85), (2.20, 50_000, 1 / 12.5)],
)
def test_a_small_p_may_favour_no_effect_under_a_default_prior(
    tmp_path: Path, t: float, n: int, factor: float
) -> None:
    """P just below .05 is weak evidence in a small sample, none in a larger one, and the reverse in a huge one."""
    record = made(test={"name": "two-sample t", "statistic": "t", "value": t, "df": 2 * n - 2}, sample=two(n))

    assert math.exp(log_bf(tmp_path, record)) == pytest.approx(factor, rel=0.006)


def test_the_answer_says_that_it_depends_on_the_width_of_the_prior(tmp_path: Path) -> None:
    record = made(test={"name": "t", "statistic": "t", "value": 2.2, "df": 99_998}, sample=two(50_000))

    answer = judge(tmp_path, record, policy=DEFAULT)

    assert "(a wider prior favours no effect more)" in answer.rule("false-positive-risk")["message"]
    assert "the answer depends on its width" in answer.claim()["evidence"]["note"]


def test_the_scale_is_a_setting(tmp_path: Path) -> None:
    (tmp_path / "a").mkdir()
    (tmp_path / "b").mkdir()
    usual = log_bf(tmp_path / "a", made())
    wide = log_bf(tmp_path / "b", made(), changed(DEFAULT, evidence__scale=1.0))

    assert usual == pytest.approx(float(default_prior.log_bf_t(2.21, 34, 9, math.sqrt(2) / 2)))
    assert wide == pytest.approx(float(default_prior.log_bf_t(2.21, 34, 9, 1.0)))


def test_an_override_may_widen_the_prior(tmp_path: Path) -> None:
    policy = changed(DEFAULT, **{"for": [{"match": {}, "evidence": {"scale": 1.0}}]})

    assert log_bf(tmp_path, made(), policy) == pytest.approx(float(default_prior.log_bf_t(2.21, 34, 9, 1.0)))


@pytest.mark.parametrize(
    ("changes", "expected"),
    [
        (
            {"test": {"name": "paired t", "statistic": "t", "value": 2.5, "df": 19}, "sample": {"n": 20}},
            lambda: default_prior.log_bf_t(2.5, 19, 20, math.sqrt(2) / 2),
        ),
        (
            {"test": {"name": "t", "statistic": "t", "value": -2.5, "df": 19, "sides": 1, "tail": "less"},
             "sample": {"n": 20}},
            lambda: default_prior.log_bf_t(2.5, 19, 20, math.sqrt(2) / 2, one_sided=True),
        ),
        (
            {"test": {"name": "Pearson", "statistic": "r", "value": 0.4, "df": 28}, "sample": {"n": 30}},
            lambda: default_prior.log_bf_r(0.4, 30, 1.0),
        ),
        (
            {"test": {"name": "Pearson", "statistic": "r", "value": -0.4, "df": 28, "sides": 1, "tail": "less"},
             "sample": {"n": 30}},
            lambda: default_prior.log_bf_r(0.4, 30, 1.0, one_sided=True),
        ),
        (
            {"test": {"name": "Pearson", "statistic": "r", "value": -0.4, "df": 28, "sides": 1, "tail": "greater"},
             "sample": {"n": 30}},
            lambda: default_prior.log_bf_r(-0.4, 30, 1.0, one_sided=True),
        ),
        (
            {"test": {"name": "Wald", "statistic": "z", "value": 3.0}, "sample": {"n": 400}},
            lambda: default_prior.log_bf_unit_information(4.5, 400),
        ),
        (
            {"test": {"name": "t of a slope", "statistic": "t", "value": 3.0, "df": 95}, "sample": {"n": 100}},
            lambda: default_prior.log_bf_unit_information(50 * math.log1p(9 / 95), 100),
        ),
        (
            {"test": {"name": "F", "statistic": "F", "value": 9.0, "df": [1, 95]}, "sample": {"n": 100}},
            lambda: default_prior.log_bf_unit_information(50 * math.log1p(9 / 95), 100),
        ),
        (
            {"test": {"name": "deviance", "statistic": "chi2", "value": 9.0, "df": 1}, "sample": {"n": 100}},
            lambda: default_prior.log_bf_unit_information(4.5, 100),
        ),
        (
            {"test": {"name": "Fisher's exact test", "p": 0.01, "p_kind": "exact"},
             "sample": {"groups": [{"name": "a", "n": 20, "events": 3}, {"name": "b", "n": 22, "events": 12}]}},
            lambda: log_bf_proportions(3, 20, 12, 22),
        ),
        (
            {"test": {"name": "chi-squared", "statistic": "chi2", "value": 7.0, "df": 1},
             "sample": {"groups": [{"name": "a", "n": 20, "events": 3}, {"name": "b", "n": 22, "events": 12}]}},
            lambda: log_bf_proportions(3, 20, 12, 22),
        ),
    ],
)  # fmt: skip
def test_each_test_has_its_default_prior(tmp_path: Path, changes: Document, expected: Any) -> None:
    assert log_bf(tmp_path, made(**changes)) == pytest.approx(float(expected()), abs=1e-10)


@pytest.mark.parametrize(
    "changes",
    [
        {"test": {"name": "F", "statistic": "F", "value": 4.0, "df": [2, 33]}},
        {"test": {"name": "chi-squared", "statistic": "chi2", "value": 9.1, "df": 3}},
        {"test": {"name": "Wald", "statistic": "z", "value": 3.0}, "sample": {"unit": "plot"}},
        {
            "test": {"name": "Fisher", "statistic": "z", "value": 2.0, "sides": 1, "tail": "less"},
            "sample": {"groups": [{"name": "a", "n": 20, "events": 3}, {"name": "b", "n": 22, "events": 12}]},
        },
    ],
)
def test_a_test_without_a_default_prior_here_is_undecided(tmp_path: Path, changes: Document) -> None:
    answer = judge(tmp_path, made(**changes), policy=DEFAULT)

    assert (answer.status, answer.claim()["verdict"]) == (3, "undecided")


@pytest.mark.parametrize("groups", [[], [{"name": "a", "n": 20, "events": 3}, {"name": "b", "n": 22}]])
def test_an_exact_test_without_counts_falls_back_on_the_bound(tmp_path: Path, groups: list[Document]) -> None:
    record = made(test={"name": "Fisher", "p": 0.01, "p_kind": "exact"}, sample={"groups": groups})

    evidence = judge(tmp_path, record, policy=DEFAULT).claim()["evidence"]

    assert evidence["alternative"] == "bound"
    assert evidence["log_likelihood_ratio"] == pytest.approx(float(weigh.log_lr_bound(math.log(0.01))))


def test_a_record_without_a_test_has_no_default_prior(tmp_path: Path) -> None:
    answer = judge(tmp_path, made(test=..., sample=two(18)), policy=DEFAULT)

    assert answer.claim()["evidence"]["alternative"] == "none"


@pytest.mark.parametrize(
    ("test", "sample"),
    [
        ({"name": "two-sample t", "statistic": "t", "value": 3.1, "df": 50}, two(26)),
        ({"name": "paired t", "statistic": "t", "value": 2.5, "df": 19}, {"n": 20}),
        ({"name": "correlation", "statistic": "r", "value": 0.3, "df": 58}, {"n": 60}),
        ({"name": "Wald", "statistic": "z", "value": 2.3}, {"n": 120}),
    ],
)
def test_the_number_that_would_do_does_under_the_same_prior(
    tmp_path: Path, test: dict[str, Any], sample: Document
) -> None:
    """A record of so many units with the effect as it was stands, and one of a unit less in each group does not."""
    policy = changed(DEFAULT, evidence__prior=0.3)
    arms = len(sample.get("groups", ())) or 1
    (tmp_path / "short").mkdir()
    answer = judge(tmp_path / "short", made(test=test, sample=sample), policy=policy)
    told = re.search(r"this large, ([\d,]+) ", answer.rule("false-positive-risk")["remedy"])
    assert told is not None
    n = int(told[1].replace(",", ""))

    verdicts = []
    for per_group in (n - 1, n):
        folder = tmp_path / str(per_group)
        folder.mkdir()
        times = per_group * arms / sample["n"]
        grown = dict(test)
        if test["statistic"] != "r":
            grown["value"] = test["value"] * math.sqrt(times)
        if "df" in test:
            grown["df"] = per_group * arms - (sample["n"] - test["df"])
        units = two(per_group) if arms > 1 else {"n": per_group}
        verdicts.append(judge(folder, made(test=grown, sample=units), policy=policy).claim()["verdict"])

    assert verdicts == ["falls-short", "stands"]


def test_an_effect_next_to_none_gets_no_number(tmp_path: Path) -> None:
    record = made(test={"name": "two-sample t", "statistic": "t", "value": 0.01, "df": 50}, sample=two(26))

    assert "would do" not in judge(tmp_path, record, policy=DEFAULT).rule("false-positive-risk")["remedy"]


def test_f_between_two_groups_weighs_as_the_t_that_it_is_the_square_of(tmp_path: Path) -> None:
    groups: Document = {"n": 50, "groups": [{"name": "a", "n": 20}, {"name": "b", "n": 30}]}
    (tmp_path / "f").mkdir()
    (tmp_path / "t").mkdir()
    f = made(test={"name": "one-way ANOVA", "statistic": "F", "value": 9.61, "df": [1, 48]}, sample=groups)
    t = made(test={"name": "two-sample t", "statistic": "t", "value": 3.1, "df": 48}, sample=groups)

    assert log_bf(tmp_path / "f", f) == pytest.approx(log_bf(tmp_path / "t", t), rel=1e-12)
