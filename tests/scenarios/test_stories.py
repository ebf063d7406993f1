"""Whole-repository stories through the real command; all data are invented, all figures computed exactly."""

from __future__ import annotations

from pathlib import Path

import pytest
from support import POLICY, changed, drainage, judge

DESIGN = changed(POLICY, evidence__alternative="design-effect")
BOUND = changed(POLICY, evidence__alternative="bound")


def test_small_sample_near_miss_against_the_effect_as_observed(tmp_path: Path) -> None:
    """P = .034 is no finding: the risk is 16.5 %, and 29 plots per group would do at the same effect."""
    answer = judge(tmp_path, drainage())

    assert answer.status == 1
    claim = answer.claim()
    assert claim["verdict"] == "falls-short"
    assert claim["evidence"]["alternative"] == "observed-effect"
    assert claim["evidence"]["log_likelihood_ratio"] == pytest.approx(1.6213, abs=5e-5)
    assert claim["evidence"]["false_positive_risk"] == pytest.approx(0.1650, abs=5e-5)
    assert claim["evidence"]["prior_needed"] == pytest.approx(0.7897, abs=5e-5)
    said = answer.rule("false-positive-risk")
    assert said["message"] == (
        "p = 0.034 (t(34) = 2.21, 18 + 18 plots) leaves a false positive risk of 17 % at prior 0.5, even against "
        "an effect as large as the one observed, which errs in favour of the claim; the policy allows 5 %."
    )
    assert said["remedy"] == (
        "One would have to be 79 % sure beforehand. If the effect is really this large, 29 plots per group would "
        "do (an effect found significant is more often too large than too small: plan on the smallest effect of "
        "interest); as it stands, call it suggestive."
    )


@pytest.mark.parametrize(
    ("policy", "prior", "ratio", "risk"),
    [
        (DESIGN, 0.5, 3.82, 0.207),
        (DESIGN, 0.2, 3.82, 0.51),
        (POLICY, 0.5, 5.06, 0.165),
        (BOUND, 0.5, 3.20, 0.238),
    ],
)
def test_the_same_result_under_other_assumptions(
    tmp_path: Path, policy: dict[str, object], prior: float, ratio: float, risk: float
) -> None:
    """One p, several risks: each figure carries the alternative and the prior that it rests on."""
    evidence = judge(tmp_path, drainage(), policy=changed(policy, evidence__prior=prior)).claim()["evidence"]

    assert 2.718281828 ** evidence["log_likelihood_ratio"] == pytest.approx(ratio, abs=0.006)
    assert evidence["false_positive_risk"] == pytest.approx(risk, abs=0.005)
    assert evidence["prior"] == prior


def test_the_prior_needed_under_the_planned_effect(tmp_path: Path) -> None:
    """For 5 % one would need a prior of .83 against the registered effect of one SD."""
    policy = changed(DESIGN, rules={"prior-needed": {"risk": 0.05, "limit": 0.5}})

    said = judge(tmp_path, drainage(), policy=policy).rule("prior-needed")

    assert said["observed"] == pytest.approx(0.83, abs=0.005)
    assert "one would have to be 83 % sure of a real effect beforehand to leave a risk of 5 %" in said["message"]


def test_high_power_reversal(tmp_path: Path) -> None:
    """P = .040 with 200 per arm is evidence for no effect over the half SD that was registered."""
    record = drainage(
        test__value=2.06,
        test__df=398,
        test__p="0.040",
        estimate=...,
        sample={
            "unit": "order",
            "n": 400,
            "groups": [{"name": "new", "n": 200}, {"name": "old", "n": 200}],
        },
        alternative={"effect": 0.5, "scale": "standardised"},
    )

    answer = judge(tmp_path, record, policy=DESIGN)

    assert answer.status == 1
    assert 2.718281828 ** answer.claim()["evidence"]["log_likelihood_ratio"] == pytest.approx(0.057, abs=1e-3)
    said = answer.rule("false-positive-risk")
    assert said["observed"] == pytest.approx(0.95, abs=0.005)
    assert "(the data fit about 17.7 to 1 for no effect over one)" in said["message"]
    assert said["remedy"].endswith(
        "As it stands, the data fit no effect better than the effect weighed: do not claim it."
    )


@pytest.mark.parametrize(("fpr", "status"), [({"limit": 0.05}, 0), ({"limit": 0.0001}, 1)])
def test_huge_sample_with_a_real_looking_difference(tmp_path: Path, fpr: dict[str, float], status: int) -> None:
    """The claim of a non-zero difference stands at 5 %: z = 3.64 in 2.4 million users per arm."""
    record = drainage(
        claim="Conversion differs.",
        test={"name": "two-proportion z", "statistic": "z", "value": 3.64, "p": "0.00027", "sides": 2},
        estimate={
            "measure": "difference",
            "value": "0.10",
            "unit": "points",
            "interval": {"level": 0.95, "low": "0.05", "high": "0.15"},
        },
        sample={"unit": "user", "n": 4_800_000},
    )

    answer = judge(tmp_path, record, policy=changed(POLICY, rules={"false-positive-risk": fpr}))

    assert answer.status == status
    assert answer.claim()["evidence"]["false_positive_risk"] == pytest.approx(0.00264, abs=2e-5)


@pytest.mark.parametrize(
    ("estimate", "low", "high", "p", "scale", "implied"),
    [(2.4, 0.3, 4.5, 0.20, "linear", "0.025"), (0.78, 0.60, 1.01, 0.03, "log", "0.061")],
)
def test_interval_that_does_not_match_p(
    tmp_path: Path, estimate: float, low: float, high: float, p: float, scale: str, implied: str
) -> None:
    """The interval excludes no effect and p does not, or the reverse; a ratio is rebuilt on the log scale."""
    record = drainage(
        test={"name": "Wald", "p": p},
        estimate={
            "measure": "ratio" if scale == "log" else "difference",
            "value": estimate,
            "unit": "1",
            "scale": scale,
            "interval": {"level": 0.95, "low": low, "high": high},
        },
    )

    answer = judge(tmp_path, record)

    said = answer.rule("numbers-agree")
    assert (answer.status, said["outcome"]) == (1, "short")
    verb = "includes 1" if scale == "log" else "excludes 0"
    assert f"the interval {low:g} to {high:g} {verb}, which goes with p = {implied}" in said["message"]


def test_the_ratio_never_comes_from_an_adjusted_p(tmp_path: Path) -> None:
    """Evidence is weighed on the raw statistic; the adjusted p stands beside it and changes no figure."""
    raw = drainage(test__p=..., test__value=2.8, estimate=...)
    adjusted = drainage(test__p=0.04, test__p_kind="adjusted", test__value=2.8, estimate=...)

    (tmp_path / "raw").mkdir()
    (tmp_path / "adjusted").mkdir()
    alone = judge(tmp_path / "raw", raw).claim()["evidence"]
    beside = judge(tmp_path / "adjusted", adjusted).claim()["evidence"]

    assert beside == alone


def test_an_adjusted_p_alone_is_undecided(tmp_path: Path) -> None:
    """Without the raw statistic there is nothing to weigh, and that is never a pass."""
    record = drainage(test={"name": "t", "p": 0.04, "p_kind": "adjusted"}, estimate=...)

    answer = judge(tmp_path, record)

    assert answer.status == 3
    assert answer.claim()["verdict"] == "undecided"
    assert answer.rule("false-positive-risk")["message"] == (
        "The evidence in this result (adjusted p = 0.04) cannot be weighed: its p-value is adjusted for several "
        "tests, and evidence is weighed on the raw result."
    )


def test_a_claim_of_no_effect_is_not_judged_by_evidence_for_one(tmp_path: Path) -> None:
    """A large p does not show equivalence, and evidence for an effect does not back a claim of none."""
    record = drainage(aim="equivalence", test__value=0.38, test__p="0.71", estimate=...)

    answer = judge(tmp_path, record)

    assert (answer.status, answer.claim()["verdict"]) == (1, "falls-short")
    assert answer.rule("false-positive-risk")["outcome"] == "does-not-apply"
    assert "gives no margin" in answer.rule("no-effect-support")["message"]


def test_exploratory_work_is_left_alone(tmp_path: Path) -> None:
    """Fourteen unregistered correlations, smallest p = .003, none claimed: all stand."""
    records = [
        drainage(
            id=f"screen/{number}",
            claim=...,
            status="exploratory",
            test={"name": "Pearson correlation", "statistic": "r", "value": 0.1 + number / 50, "df": 60},
            estimate=...,
            sample={"unit": "plot", "n": 62},
        )
        for number in range(14)
    ]

    answer = judge(tmp_path, *records)

    assert answer.status == 0
    assert (answer.verdict["counts"]["claims"], answer.verdict["counts"]["reported"]) == (0, 14)


def test_a_harm_outcome_needs_no_strong_evidence(tmp_path: Path) -> None:
    """Nobody needs strong evidence to report a possible harm, unless the policy says so."""
    record = drainage(harm=True)
    strict = changed(POLICY, rules={"false-positive-risk": {"limit": 0.05, "include_harm": True}})

    (tmp_path / "a").mkdir()
    (tmp_path / "b").mkdir()
    usual, held = judge(tmp_path / "a", record), judge(tmp_path / "b", record, policy=strict)

    assert (usual.status, usual.rule("false-positive-risk")["outcome"]) == (0, "does-not-apply")
    assert "report a possible harm" in usual.rule("false-positive-risk")["message"]
    assert (held.status, held.rule("false-positive-risk")["outcome"]) == (1, "short")


def test_a_rank_test_is_judged_by_the_bound(tmp_path: Path) -> None:
    """A test without a likelihood ratio of its own is judged by -e p ln p, and the message says so."""
    record = drainage(
        test={"name": "Mann-Whitney U", "p": 0.03, "named_statistic": {"symbol": "U", "value": 93}},
        estimate=...,
    )

    said = judge(tmp_path, record).rule("false-positive-risk")

    assert said["outcome"] == "short"
    assert said["observed"] == pytest.approx(0.2224, abs=5e-4)
    assert "(this test has no likelihood ratio of its own)" in said["message"]
    assert "A p-value of 0.0034 or less would do" in said["remedy"]


def test_a_prior_set_by_the_record_is_said(tmp_path: Path) -> None:
    """A record may set its own prior; the message says that it does, and on what basis."""
    record = drainage(prior={"probability": 0.25, "basis": "4 of 16 earlier soil interventions held up"})

    answer = judge(tmp_path, record)

    assert answer.claim()["evidence"]["prior_from"] == "record"
    assert (
        "at prior 0.25, which the record sets (4 of 16 earlier soil interventions held up)"
        in answer.rule("false-positive-risk")["message"]
    )


def test_an_overrides_last_match_wins(tmp_path: Path) -> None:
    """An exploratory claim is noted, a tagged one blocks again."""
    policy = changed(
        POLICY,
        **{
            "for": [
                {"match": {"status": "exploratory"}, "rules": {"false-positive-risk": {"enforce": "note"}}},
                {"match": {"tag": ["headline"]}, "rules": {"false-positive-risk": {"enforce": "block"}}},
            ]
        },
    )
    plain = drainage(id="a", status="exploratory")
    tagged = drainage(id="b", status="exploratory", tags=["headline"])

    answer = judge(tmp_path, plain, tagged, policy=policy)

    assert answer.status == 1
    assert (answer.claim("a")["verdict"], answer.claim("b")["verdict"]) == ("stands", "falls-short")
    assert answer.rule("false-positive-risk", "a")["outcome"] == "short"
