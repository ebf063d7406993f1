"""How a record is weighed: alternatives, what each needs, and why a record cannot be weighed."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from scipy import stats
from support import POLICY, Document, changed, drainage, judge

from gatecheck import weigh

DESIGN = changed(POLICY, evidence__alternative="design-effect")
TWO = {"unit": "plot", "groups": [{"name": "a", "n": 12}, {"name": "b", "n": 24}]}


def evidence(tmp_path: Path, record: Document, policy: Document = POLICY) -> Document:
    """The figures of one record."""
    return dict(judge(tmp_path, record, policy=policy).claim()["evidence"])


def made(**changes: Any) -> Document:
    """The drainage record without estimate and alternative, and with other values."""
    return drainage(**{"estimate": ..., "alternative": ..., **changes})


@pytest.mark.parametrize(
    ("test", "expected"),
    [
        ({"statistic": "t", "value": 2.5, "df": 20}, weigh.observed_t(2.5, 20, one_sided=False)),
        ({"statistic": "t", "value": -2.5, "df": 20}, weigh.observed_t(2.5, 20, one_sided=False)),
        (
            {"statistic": "t", "value": 2.5, "df": 20, "sides": 1, "tail": "greater"},
            weigh.observed_t(2.5, 20, one_sided=True),
        ),
        (
            {"statistic": "t", "value": -2.5, "df": 20, "sides": 1, "tail": "less"},
            weigh.observed_t(2.5, 20, one_sided=True),
        ),
        ({"statistic": "t", "value": 2.5, "df": 20, "sides": 1, "tail": "less"}, 0.0),
        ({"statistic": "z", "value": 2.5}, weigh.observed_z(2.5, one_sided=False)),
        ({"statistic": "chi2", "value": 9.1, "df": 3}, weigh.observed_chi2(9.1, 3)),
        ({"statistic": "F", "value": 4.2, "df": [2, 33]}, weigh.observed_f(4.2, 2, 33)),
        (
            {"statistic": "r", "value": 0.4, "df": 28},
            weigh.observed_t(0.4 * math.sqrt(28 / (1 - 0.16)), 28, one_sided=False),
        ),
    ],
)
def test_each_statistic_is_weighed_at_its_observed_effect(tmp_path: Path, test: Document, expected: Any) -> None:
    figures = evidence(tmp_path, made(test={"name": "a test", **test}))

    assert figures["alternative"] == "observed-effect"
    assert figures["log_likelihood_ratio"] == pytest.approx(float(expected), abs=1e-12)


@pytest.mark.parametrize(
    ("test", "value"),
    [
        ({"statistic": "t", "df": 34}, stats.t.isf(0.017, 34)),
        ({"statistic": "z"}, stats.norm.isf(0.017)),
        ({"statistic": "chi2", "df": 2}, stats.chi2.isf(0.034, 2)),
        ({"statistic": "F", "df": [2, 30]}, stats.f.isf(0.034, 2, 30)),
    ],
)
def test_a_statistic_is_recovered_from_its_raw_p(tmp_path: Path, test: Document, value: float) -> None:
    """The same figures as with the statistic itself, and the note says so."""
    (tmp_path / "given").mkdir()
    (tmp_path / "recovered").mkdir()
    given = evidence(tmp_path / "given", made(test={"name": "a", **test, "value": float(value)}))
    recovered = evidence(tmp_path / "recovered", made(test={"name": "a", **test, "p": 0.034}))

    assert recovered["log_likelihood_ratio"] == pytest.approx(given["log_likelihood_ratio"], abs=1e-10)
    assert recovered["note"].endswith("The statistic was recovered from p.")
    assert "recovered" not in given["note"]


@pytest.mark.parametrize(
    ("changes", "ncp"),
    [
        # d over the harmonic size of two groups.
        ({"sample": TWO, "test__df": 34}, math.sqrt(12 * 24 / 36)),
        # Pairs: df = n - 1, so d over the root of their number, whether listed as groups or not.
        ({"sample": {"groups": [{"name": "a", "n": 20}, {"name": "b", "n": 20}]}, "test__df": 19}, math.sqrt(20)),
        ({"sample": {"n": 20}, "test__df": 19}, math.sqrt(20)),
        # r through r / sqrt(1 - r^2).
        (
            {
                "test": {"name": "r", "statistic": "r", "value": 0.4, "df": 28},
                "alternative": {"effect": 0.3, "scale": "standardised"},
                "sample": ...,
            },
            0.3 / math.sqrt(0.91) * math.sqrt(30),
        ),
        # chi-squared as n w^2, F as n f^2.
        (
            {
                "test": {"name": "x", "statistic": "chi2", "value": 9.1, "df": 3},
                "alternative": {"effect": 0.3, "scale": "standardised"},
                "sample": {"n": 90},
            },
            8.1,
        ),
        (
            {
                "test": {"name": "F", "statistic": "F", "value": 4.2, "df": [2, 33]},
                "alternative": {"effect": 0.4, "scale": "standardised"},
                "sample": {"n": 36},
            },
            5.76,
        ),
        # A raw effect is counted in standard errors, reported or implied.
        (
            {
                "estimate": {"measure": "d", "value": 4.2, "unit": "g", "standard_error": 1.9},
                "alternative": {"effect": 5, "scale": "raw"},
            },
            5 / 1.9,
        ),
        (
            {"estimate": {"measure": "d", "value": 4.2, "unit": "g"}, "alternative": {"effect": 5, "scale": "raw"}},
            5 / (4.2 / 2.21),
        ),
        (
            {
                "test": {"name": "Wald", "statistic": "z", "value": "3.05"},
                "estimate": {"measure": "odds ratio", "value": 2.5, "scale": "log", "standard_error": 0.3},
                "alternative": {"effect": 2, "scale": "raw"},
            },
            math.log(2) / 0.3,
        ),
        (
            {
                "test": {"name": "Wald", "statistic": "chi2", "value": 9.33, "df": 1},
                "estimate": {"measure": "odds ratio", "value": 2.5, "scale": "log", "standard_error": 0.3},
                "alternative": {"effect": 2, "scale": "raw"},
            },
            (math.log(2) / 0.3) ** 2,
        ),
    ],
)
def test_the_planned_effect_becomes_a_noncentrality(tmp_path: Path, changes: Document, ncp: float) -> None:
    """Common definitions of standardised effects (Cohen 1988, from memory)."""
    record = drainage(**{"estimate": ..., **changes})

    figures = evidence(tmp_path, record, DESIGN)

    test = {"df": None, **record["test"]}
    df = test["df"] if isinstance(test["df"], list) else [test["df"] or math.nan]
    kinds = {"t": 0, "r": 0, "z": 1, "chi2": 2, "F": 3}
    value = float(test["value"])
    value = float(weigh.t_from_r(value, df[0])) if test["statistic"] == "r" else value
    expected = weigh.at_noncentrality(kinds[test["statistic"]], value, df[0], df[-1], ncp, one_sided=False)
    assert figures["alternative"] == "design-effect"
    assert figures["log_likelihood_ratio"] == pytest.approx(float(expected), abs=1e-9)


def test_a_simulated_designs_risk_is_that_of_the_design_effect() -> None:
    """Two groups of 16 with a true effect of one SD: 26.6 % at p = .05 and prior .5 against the design."""
    log_lr = weigh.log_lr_t(stats.t.isf(0.025, 30), 30, math.sqrt(8), one_sided=False)

    assert float(weigh.false_positive_risk(log_lr, 0.5)) == pytest.approx(0.266205, abs=1e-6)
    assert np.isclose(weigh.false_positive_risk(log_lr, 0.1), 0.765533, atol=1e-6)


def test_the_first_alternative_that_the_record_allows_is_taken(tmp_path: Path) -> None:
    policy = changed(POLICY, evidence__alternative=["design-effect", "bound"])
    (tmp_path / "with").mkdir()
    (tmp_path / "without").mkdir()

    assert evidence(tmp_path / "with", drainage(), policy)["alternative"] == "design-effect"
    assert evidence(tmp_path / "without", drainage(alternative=...), policy)["alternative"] == "bound"


@pytest.mark.parametrize(
    ("changes", "policy", "why", "advice"),
    [
        (
            {"test": ...},
            POLICY,
            "the record gives neither a statistic nor a p-value",
            "Give test.statistic, value, df and p.",
        ),
        (
            {"test": {"name": "t"}},
            POLICY,
            "the record gives neither a statistic nor a p-value",
            "Give test.statistic, value, df and p.",
        ),
        (
            {"test": {"name": "t", "statistic": "t", "df": 34, "p": 0}},
            POLICY,
            "p is given as 0, which no test gives",
            "Give all its digits, or the statistic with its df.",
        ),
        (
            {"test": {"name": "t", "statistic": "t", "df": 34, "p": ">0.05"}},
            POLICY,
            "the statistic cannot be told from what the record gives",
            "Give test.value with test.df.",
        ),
        (
            {"test": {"name": "t", "statistic": "t", "value": 2.21, "p": 0.034}},
            POLICY,
            "the record does not allow the alternative observed-effect",
            "Give test.p, or the statistic with its df.",
        ),
        (
            {"alternative": ...},
            DESIGN,
            "the record does not say which effect the study was designed to find",
            "Give alternative: {effect, scale}, as it was planned before the data.",
        ),
        (
            {"sample": {"n": 36}},
            DESIGN,
            "the planned effect cannot be set against this statistic",
            "Give sample.groups with their n, or the effect on the raw scale with estimate.standard_error.",
        ),
        (
            {
                "test": {"name": "r", "statistic": "r", "value": 0.4, "df": 34},
                "alternative": {"effect": 1.2, "scale": "standardised"},
            },
            DESIGN,
            "the planned effect cannot be set against this statistic",
            "The planned correlation is 1.2: give one between -1 and 1.",
        ),
        (
            {
                "test": {"name": "F", "statistic": "F", "value": 4.0, "df": [2, 33]},
                "alternative": {"effect": 1.2, "scale": "raw"},
            },
            DESIGN,
            "the planned effect cannot be set against this statistic",
            "Give the planned effect on the standardised scale: f of F, w of chi-squared.",
        ),
        (
            {"test": {"name": "U", "p": ">0.05"}},
            POLICY,
            "the record does not allow the alternative observed-effect",
            "Give test.p, or the statistic with its df.",
        ),
    ],
)
def test_what_cannot_be_weighed_is_undecided_and_says_why(
    tmp_path: Path, changes: Document, policy: Document, why: str, advice: str
) -> None:
    answer = judge(tmp_path, drainage(**{"estimate": ..., **changes}), policy=policy)

    said = answer.rule("false-positive-risk")
    assert (answer.status, answer.claim()["verdict"], said["outcome"]) == (3, "undecided", "undecided")
    assert said["message"].endswith(f" cannot be weighed: {why}.")
    assert said["remedy"] == advice
    assert answer.claim()["evidence"]["alternative"] == "none"
    assert answer.claim()["evidence"]["false_positive_risk"] is None


def test_an_estimate_claims_no_effect_over_none(tmp_path: Path) -> None:
    answer = judge(tmp_path, drainage(aim="estimation"))

    assert answer.status == 0
    assert answer.rule("false-positive-risk")["message"] == (
        "The claim is an estimate: it asserts no effect over none."
    )


def test_a_result_that_claims_nothing_and_has_no_evidence_has_no_figures(tmp_path: Path) -> None:
    assert judge(tmp_path, drainage(claim=..., test=..., estimate=...)).claim()["evidence"] is None


def test_a_limit_is_met_at_the_limit(tmp_path: Path) -> None:
    """A risk equal to the limit stands; the least bit above falls short."""
    (tmp_path / "first").mkdir()
    risk = judge(tmp_path / "first", drainage()).rule("false-positive-risk")["observed"]
    for name, limit, outcome in (("at", risk, "met"), ("below", np.nextafter(risk, 0), "short")):
        (tmp_path / name).mkdir()
        policy = changed(POLICY, rules={"false-positive-risk": {"limit": float(limit)}})

        assert judge(tmp_path / name, drainage(), policy=policy).rule("false-positive-risk")["outcome"] == outcome


def test_a_design_that_would_do_is_told_in_numbers(tmp_path: Path) -> None:
    """Against the planned effect the n is that at which the planned effect itself would meet the limit."""
    said = judge(tmp_path, drainage(), policy=DESIGN).rule("false-positive-risk")

    assert "against the effect of 1 (standardised) that the study was designed to find" in said["message"]
    assert said["remedy"] == (
        "One would have to be 83 % sure beforehand. As it stands, say that the data do not settle it."
    )


def test_an_f_test_is_mended_by_more_units_per_group(tmp_path: Path) -> None:
    """Three groups of 12: the n told meets the limit and one fewer does not (the least n is proved elsewhere)."""
    groups = [{"name": name, "n": 12} for name in "abc"]
    record = made(
        test={"name": "F", "statistic": "F", "value": 3.5, "df": [2, 33], "p": 0.0418},
        sample={"unit": "cage", "n": 36, "groups": groups},
    )

    said = judge(tmp_path, record).rule("false-positive-risk")

    n = int(weigh.n_to_stand(3, 3.5, 2, 33, 36, 3, math.log(19), one_sided=False))
    assert f"If the effect is really this large, {n} cages per group would do" in said["remedy"]


@pytest.mark.parametrize(("limit", "p"), [(0.05, "0.0034"), (0.2, "0.024"), (1e-6, "2e-08")])
def test_the_p_that_would_do_is_rounded_so_that_it_does(tmp_path: Path, limit: float, p: str) -> None:
    record = made(test={"name": "U", "p": 0.06, "named_statistic": {"symbol": "U", "value": 9}})
    policy = changed(POLICY, rules={"false-positive-risk": {"limit": limit}})

    said = judge(tmp_path, record, policy=policy).rule("false-positive-risk")

    assert f"A p-value of {p} or less would do" in said["remedy"]
    ratio = weigh.log_lr_bound(math.log(float(p)))
    assert float(weigh.false_positive_risk(ratio, 0.5)) <= limit


def test_an_effect_in_the_other_direction_is_told(tmp_path: Path) -> None:
    """One side was tested, and the effect points to the other: no sample makes that a finding."""
    record = made(test={"name": "t", "statistic": "t", "value": -2.5, "df": 20, "sides": 1, "tail": "greater"})

    said = judge(tmp_path, record).rule("false-positive-risk")

    assert said["observed"] == 0.5
    assert "p = 0.9894 (t(20) = -2.5, 18 + 18 plots)" in said["message"]
    assert said["remedy"] == (
        "One would have to be 95 % sure beforehand. "
        "As it stands, the effect points away from the direction tested: do not claim it."
    )


def test_an_exact_p_is_its_own_and_not_that_of_a_statistic_beside_it(tmp_path: Path) -> None:
    """The bound takes an exact p as it is, and the statistic's where there is none."""
    policy = changed(POLICY, evidence__alternative="bound")
    test = {"name": "chi-squared", "statistic": "chi2", "value": 4.2, "df": 1, "p_kind": "exact"}
    (tmp_path / "exact").mkdir()
    (tmp_path / "none").mkdir()

    exact = evidence(tmp_path / "exact", made(test={**test, "p": 0.06}), policy)
    none = evidence(tmp_path / "none", made(test=test), policy)

    assert exact["log_likelihood_ratio"] == pytest.approx(float(weigh.log_lr_bound(math.log(0.06))))
    assert none["log_likelihood_ratio"] == pytest.approx(float(weigh.log_lr_bound(stats.chi2.logsf(4.2, 1))))
