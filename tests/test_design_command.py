"""The command `design`: how large a study must be for a true effect to meet the policy."""

from __future__ import annotations

import json
import math
from itertools import pairwise
from pathlib import Path
from typing import Any

import pytest
from support import POLICY, Document, changed

from gatecheck import weigh
from gatecheck.cli import main
from gatecheck.design import design
from gatecheck.errors import CannotJudge
from gatecheck.model.design import Design, DesignQuestion
from gatecheck.policies import read_own_policy
from gatecheck.render import design as told
from gatecheck.weigh.assurance import Weighing, assurance, least_t


def answer(policy: Document = POLICY, **question: Any) -> Design:
    """The answer under a policy to a question about two samples."""
    read, _ = read_own_policy(policy)
    assert read is not None
    return design(DesignQuestion(**{"test": "two-sample-t", "effect": 0.5, **question}), read)


def size(found: Design, level: float = 0.8) -> int:
    """The number of units for that assurance."""
    n = dict(found.sizes)[level]
    assert n is not None
    return n


@pytest.mark.parametrize(
    ("test", "effect", "n"),
    # Cohen (1988): d = .2, .5, .8 at power .80 take 393, 64 and 26 a group (the exact solution is 394 for .2);
    # one sample d = .5 takes 34; h = .5 takes 63 a group; r = .3 takes 84 by the exact distribution (from memory).
    [
        ("two-sample-t", 0.2, 394),
        ("two-sample-t", 0.5, 64),
        ("two-sample-t", 0.8, 26),
        ("one-sample-t", 0.5, 34),
        ("two-proportions", 0.5, 63),
        ("correlation", 0.3, 84),
    ],
)
def test_the_bare_design_has_the_handbooks_size(test: str, effect: float, n: int) -> None:
    found = answer(test=test, effect=effect)

    assert found.bare is not None
    assert found.bare.n == n


@pytest.mark.parametrize("alternative", ["observed-effect", "design-effect", "bound"])
def test_the_size_told_has_the_assurance_and_one_unit_less_does_not(alternative: str) -> None:
    found = answer(changed(POLICY, evidence__alternative=alternative))
    weighing = Weighing[alternative.upper().replace("-", "_")]

    def standing(n: int) -> float:
        ncp = 0.5 * math.sqrt(n / 2)
        least = least_t(weighing, 2 * n - 2, ncp, math.log(19), 0.0)
        return float(assurance(least, 2 * n - 2, ncp))

    n = size(found)
    assert standing(n) >= 0.8 > standing(n - 1)
    assert found.alternative == alternative


def test_a_bare_design_leaves_the_risk_of_a_just_significant_result() -> None:
    """64 a group: p = .05 leaves 22 % at prior .5 against the effect observed, and the claim stands with 54 %."""
    found = answer()

    assert found.bare is not None
    ratio = weigh.observed_t(weigh.t_from_log_p(math.log(0.05), 126, one_sided=False), 126, one_sided=False)
    assert found.bare.risk == pytest.approx(float(weigh.false_positive_risk(ratio, 0.5)))
    assert 0.5 < found.bare.assurance < 0.6
    assert found.bare.long_run == pytest.approx(0.05 / 0.85)  # alpha over alpha plus power, at even prior odds


@pytest.mark.parametrize("alternative", ["design-effect", "bound"])
def test_the_bare_risk_is_weighed_as_the_policy_weighs(alternative: str) -> None:
    found = answer(changed(POLICY, evidence__alternative=alternative))

    assert found.bare is not None
    if alternative == "bound":
        assert found.bare.risk == pytest.approx(0.289350, abs=1e-6)
    else:
        t = weigh.t_from_log_p(math.log(0.05), 126, one_sided=False)
        ratio = weigh.log_lr_t(t, 126, 0.5 * math.sqrt(32), one_sided=False)
        assert found.bare.risk == pytest.approx(float(weigh.false_positive_risk(ratio, 0.5)))


def test_a_lower_prior_a_family_and_looks_take_more_units() -> None:
    plain = size(answer())

    assert size(answer(prior=0.1)) > plain
    assert size(answer(family=100)) > plain
    assert size(answer(family=100, looks=5, boundary="pocock")) > size(answer(family=100))


def test_the_strictest_rule_of_the_policy_counts() -> None:
    """A prior needed of .2 at most for a risk of 5 % wants 76 to 1, the risk at prior .5 only 19."""
    strict = changed(
        POLICY, rules={"false-positive-risk": {"limit": 0.05}, "prior-needed": {"risk": 0.05, "limit": 0.2}}
    )

    assert answer().log_likelihood_ratio == pytest.approx(math.log(19))
    assert answer(strict).log_likelihood_ratio == pytest.approx(math.log(76))
    assert answer(changed(strict, rules={"prior-needed": {"risk": 0.05, "limit": 0.2}})).log_likelihood_ratio == (
        pytest.approx(math.log(76))
    )


def test_the_curve_rises_with_size() -> None:
    points = answer(assurance=0.42).curve

    assert [point.n for point in points] == sorted({point.n for point in points})
    assert all(a.assurance < b.assurance for a, b in pairwise(points))


def test_an_effect_too_small_for_any_study_is_told() -> None:
    found = answer(effect=1e-6)

    assert dict(found.sizes)[0.8] is None
    assert found.bare is None
    text = told(found, 80)
    assert text.startswith("more than 100,000,000 units per group for a claim")
    assert "above 1e8" in text
    assert "A design with 80 % power" not in text


@pytest.mark.parametrize(
    ("policy", "question", "message"),
    [
        (changed(POLICY, rules={}), {}, "the policy sets no limit on evidence"),
        (changed(POLICY, evidence__alternative="default-prior"), {}, "a design is not weighed by default-prior"),
        (POLICY, {"effect": 0.0}, "0 is no effect of two-sample-t"),
        (POLICY, {"effect": math.nan}, "nan is no effect of two-sample-t"),
        (POLICY, {"test": "correlation", "effect": 1.0}, "1 is no effect of correlation"),
    ],
)
def test_what_has_no_answer_says_why(policy: Document, question: dict[str, Any], message: str) -> None:
    with pytest.raises(CannotJudge, match=message):
        answer(policy, **question)


def test_the_command_tells_size_curve_and_what_a_bare_design_leaves(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / "gatecheck.yaml").write_text(json.dumps(POLICY), encoding="utf-8")

    status = main(["design", "--test", "two-sample-t", "--effect", "0.5", str(tmp_path)])

    text = capsys.readouterr().out
    words = " ".join(text.split())
    assert status == 0
    assert words.startswith(
        "102 units per group for a claim on a true effect of 0.5 (two-sample-t) to stand with 80 % probability "
        "under the policy field-station reporting policy, weighed against the effect as observed at prior 0.5 (a "
        "likelihood ratio of 19 is wanted)."
    )
    assert "A design with 80 % power at 0.05 alone would take 64 units per group." in words
    assert max(map(len, text.splitlines())) <= 80


def test_the_command_names_family_and_looks(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    arguments = ["--test", "correlation", "--effect", "0.3", "--family", "6", "--looks", "3", "--prior", "0.2"]

    assert main(["design", *arguments, str(tmp_path)]) == 0

    words = " ".join(capsys.readouterr().out.split())
    assert "(correlation), as one of a family of 6, at the last of 3 looks (obrien-fleming) to stand" in words
    assert "at prior 0.2 (a likelihood ratio of 76 is wanted)" in words


@pytest.mark.parametrize(
    "arguments",
    [
        ["--test", "anova", "--effect", "1"],
        ["--test", "correlation"],
        ["--test", "correlation", "--effect", "x"],
        ["--test", "correlation", "--effect", "0.3", "--prior", "1"],
        ["--test", "correlation", "--effect", "0.3", "--looks", "0"],
        ["--test", "correlation", "--effect", "0.3", "--family", "1001"],
    ],
)
def test_what_the_command_does_not_know_exits_with_2(
    capsys: pytest.CaptureFixture[str], arguments: list[str]
) -> None:
    with pytest.raises(SystemExit, match="2"):
        main(["design", *arguments])

    assert capsys.readouterr().err.startswith("usage: gatecheck design")


def test_a_policy_that_cannot_be_read_gives_no_design(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "gatecheck.yaml").write_text("- 1", encoding="utf-8")

    assert main(["design", "--test", "correlation", "--effect", "0.3", str(tmp_path)]) == 3
    assert "the policy cannot be read" in capsys.readouterr().err
