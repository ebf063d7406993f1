"""Rule `wording`: the words of a claim against the evidence in its record, and a sentence that it allows."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from pathlib import Path

import pytest
from scipy import stats
from support import DRAINAGE, POLICY, Answer, Document, changed, drainage, judge, write_tree

from gatecheck.cli import main
from gatecheck.columns import columns_of
from gatecheck.evidence import weigh_columns
from gatecheck.model.found import Found
from gatecheck.model.record import Record
from gatecheck.model.verdict import Judged, Place, PolicyUsed, Verdict
from gatecheck.policies import read_own_policy
from gatecheck.render.terminal import account
from gatecheck.rules.rule import Table
from gatecheck.rules.wording import judge_sentences
from gatecheck.schema.read import read

RULE = "wording"
ON = changed(POLICY, rules={RULE: {}})
SE = {"measure": "mean difference", "unit": "t/ha", "standard_error": 0.25}


def with_settings(**settings: object) -> Document:
    """The policy with this rule alone, so set."""
    return changed(POLICY, rules={RULE: settings})


def said(folder: Path, claim: str, policy: Document = ON, **changes: object) -> Document:
    """What the rule says of the drainage record with that claim."""
    return judge(folder, drainage(claim=claim, **changes), policy=policy).rule(RULE)


def outcome(folder: Path, claim: str, policy: Document = ON, **changes: object) -> str:
    """Short, met or undecided."""
    return str(said(folder, claim, policy, **changes)["outcome"])


def test_it_is_off_unless_it_is_named(tmp_path: Path) -> None:
    answer = judge(tmp_path, drainage(claim="Drainage proves safe; it has no effect."))

    assert RULE not in [each["rule"] for each in answer.claim()["rules"]]


def test_a_plain_claim_stands(tmp_path: Path) -> None:
    answer = judge(tmp_path, drainage(design="randomised"), policy=ON)

    assert (answer.status, answer.rule(RULE)["outcome"]) == (0, "met")


def test_what_is_not_claimed_says_nothing(tmp_path: Path) -> None:
    answer = judge(tmp_path, drainage(claim=...), policy=ON)

    assert RULE not in [each["rule"] for each in answer.claim()["rules"]]


NO_EFFECT = "Drainage has no effect on biomass."
MARGIN = {"estimate__margin": [-9, 9]}


@pytest.mark.parametrize(
    ("claim", "changes", "expected"),
    [
        (NO_EFFECT, {}, "short"),
        (NO_EFFECT, MARGIN, "short"),  # of a difference
        (NO_EFFECT, {"aim": "equivalence"}, "short"),
        (NO_EFFECT, {"aim": "equivalence", **MARGIN}, "met"),
        (NO_EFFECT, {"aim": "equivalence", "estimate__margin": [-7, 7]}, "short"),
        (NO_EFFECT, {"aim": "noninferiority", **MARGIN}, "met"),
        (NO_EFFECT, {"aim": "noninferiority", "estimate__margin": [-1, 1]}, "short"),
        ("Drainage is no worse.", {"aim": "noninferiority", "estimate__margin": [-1, 1]}, "met"),
        ("Drainage is no worse.", {"aim": "noninferiority", "estimate__margin": [2, 9]}, "short"),
        ("Drainage is no worse.", {"aim": "equivalence", **MARGIN}, "met"),
        ("Drainage is no worse.", {}, "short"),
        ("Drainage is safe.", {"aim": "noninferiority", "estimate__margin": [-1, 1]}, "short"),
        ("Drainage is safe.", {"aim": "noninferiority", "estimate__margin": [-1, 1], "harm": True}, "met"),
        ("Drainage is safe.", {"harm": True}, "short"),
        (
            NO_EFFECT,
            {"aim": "equivalence", **MARGIN, "estimate__standard_error": ..., "estimate__interval": ...},
            "undecided",
        ),
        ("Drainage may have no effect on biomass.", {}, "short"),
        ("Drainage may have no effect on biomass.", {"status": "exploratory"}, "met"),
        ("No effect on biomass was found.", {}, "met"),
    ],
)
def test_words_of_no_effect_need_a_margin(tmp_path: Path, claim: str, changes: Document, expected: str) -> None:
    """The 90 % interval of 4.2 with the error 1.9 and 34 df is 0.987 to 7.413."""
    assert outcome(tmp_path, claim, **changes) == expected


def test_an_interval_that_is_not_given(tmp_path: Path) -> None:
    bare: Document = {"estimate__standard_error": ..., "estimate__interval": ..., **MARGIN}

    found = said(tmp_path, NO_EFFECT, aim="equivalence", **bare)

    assert found["message"].endswith(": the interval that is set against the margin -9 to 9 cannot be told.")
    assert found["remedy"] == "Give estimate.standard_error, or estimate.interval."


def test_the_margin_is_tested_at_the_level_of_the_rule_on_no_effect(tmp_path: Path) -> None:
    """At 0.005 the interval of 99 % reaches from -0.98 to 9.38."""
    policy = changed(ON, rules={RULE: {}, "no-effect-support": {"alpha": 0.005}})

    found = said(tmp_path, NO_EFFECT, policy, aim="equivalence", **MARGIN)

    assert found["message"] == (
        "The claim says “no effect”, which needs an interval inside a margin that was set before the data: "
        "the 99 % interval -0.984 to 9.38 leaves the margin -9 to 9."
    )
    assert stats.t.ppf(0.995, 34) * 1.9 + 4.2 == pytest.approx(9.384, abs=5e-4)


@pytest.mark.parametrize(
    ("claim", "changes", "ground"),
    [
        (NO_EFFECT, {}, "the record's aim is difference"),
        (NO_EFFECT, {"aim": "equivalence"}, "its aim is equivalence, and it gives no margin"),
        (
            NO_EFFECT,
            {"aim": "noninferiority", "estimate__margin": [-1, 1]},
            "the 90 % interval 0.987 to 7.41 lies on the right side of one end alone of the margin -1 to 1",
        ),
        ("Drainage is safe.", {"aim": "equivalence", **MARGIN}, "the record is not marked as a harm outcome"),
        ("Drainage is safe.", {"harm": True}, "the record's aim is difference"),
    ],
)
def test_what_the_record_has_is_told(tmp_path: Path, claim: str, changes: Document, ground: str) -> None:
    assert said(tmp_path, claim, **changes)["message"].endswith(f": {ground}.")


@pytest.mark.parametrize(
    ("claim", "changes", "step"),
    [
        (NO_EFFECT, {}, "Give aim: equivalence with the estimate.margin that was set before the data, or say"),
        ("Drainage is no worse.", {}, "Give aim: noninferiority with the estimate.margin that was set before the"),
        ("Drainage is safe.", {}, "Mark a harm outcome with harm: true and give the margin that was set before"),
        ("Drainage is safe.", {"harm": True}, "Give aim: equivalence with the estimate.margin"),
        (NO_EFFECT, {"aim": "equivalence", "estimate__margin": [-7, 7]}, "Say for instance"),
    ],
)
def test_the_step_that_would_mend_it(tmp_path: Path, claim: str, changes: Document, step: str) -> None:
    assert said(tmp_path, claim, **changes)["remedy"].startswith(step)


@pytest.mark.parametrize(
    ("changes", "sentence"),
    [
        ({}, "“The mean difference was 4.2 g/m2 (95 % interval 0.34 to 8.06; 18 + 18 plots).”"),
        (
            {"estimate__value": 0.1, "test__p": "0.96", "test__value": 0.05, "estimate__interval": ...},
            "“Inconclusive: the mean difference was 0.1 g/m2 (90 % interval -3.11 to 3.31; 18 + 18 plots); "
            "neither a difference nor its absence was shown.”",
        ),
        (
            {"estimate": {"measure": "d", "value": 0.1, "unit": "1"}, "test__p": "0.96", "test__value": 0.05},
            "“Inconclusive: the d was 0.1 (18 + 18 plots); neither a difference nor its absence was shown.”",
        ),
        ({"estimate": ..., "sample": ...}, "“The result was t(34) = 2.21, p = 0.034.”"),
        (
            {"outcome": {"variable": "earthworm_biomass"}},
            "“Earthworm biomass was 4.2 g/m2 higher in drained than in undrained (95 % interval 0.34 to 8.06; "
            "18 + 18 plots).”",
        ),
        (
            {"outcome": {"variable": "biomass"}, "estimate__value": -4.2, "estimate__interval": ...},
            "“For biomass, the mean difference was -4.2 g/m2 (90 % interval -7.41 to -0.987; 18 + 18 plots).”",
        ),
        (
            {
                "outcome": {"variable": "biomass"},
                "sample__groups": [{"name": "a", "n": 18}, {"name": "b", "n": 18}],
            },
            "“For biomass, the mean difference was 4.2 g/m2 (95 % interval 0.34 to 8.06; 18 + 18 plots).”",
        ),
        (
            {"outcome": {"variable": "biomass"}, "estimate__value": 4.9, "sample": DRAINAGE["sample"]},
            "“For biomass, the mean difference was 4.9 g/m2 (95 % interval 0.34 to 8.06; 18 + 18 plots).”",
        ),
        (
            {"estimate__interval": ..., "estimate__standard_error": ..., "sample": ...},
            "“The mean difference was 4.2 g/m2.”",
        ),
    ],
)
def test_the_sentence_is_built_from_the_record(tmp_path: Path, changes: Document, sentence: str) -> None:
    assert said(tmp_path, NO_EFFECT, **changes)["remedy"].endswith(f"say for instance: {sentence}")


def test_a_ratio_is_told_as_a_ratio(tmp_path: Path) -> None:
    """The log of 1.2 with the error 0.1: the 90 % interval is 1.018 to 1.415 by the normal distribution."""
    ratio = {"measure": "odds ratio", "value": 1.2, "scale": "log", "standard_error": 0.1, "margin": [0.8, 1.25]}

    found = said(
        tmp_path,
        NO_EFFECT,
        aim="equivalence",
        estimate=ratio,
        test={"name": "Wald", "statistic": "z", "value": 1.82},
    )

    assert "the 90 % interval 1.02 to 1.41 leaves the margin 0.8 to 1.25" in found["message"]
    assert math.exp(math.log(1.2) + stats.norm.ppf(0.95) * 0.1) == pytest.approx(1.4145, abs=1e-4)


def test_an_interval_with_one_end(tmp_path: Path) -> None:
    """The 95 % interval from -0.5 upwards leaves the margin at -0.2, and where it ends is not told."""
    estimate = {
        "measure": "difference",
        "value": 1,
        "unit": "1",
        "interval": {"level": 0.95, "low": -0.5},
        "margin": [-0.2, 0.2],
    }

    found = said(tmp_path, "It is no worse.", aim="noninferiority", estimate=estimate)

    assert found["message"].endswith(": the 90 % interval -0.5 to unbounded leaves the margin -0.2 to 0.2.")


def two_sites(second: float = 0.35, **changes: object) -> tuple[Document, Document]:
    """The effect on drained and on undrained plots, each with the standard error 0.25; nothing is claimed."""
    return (
        drainage(id="yield/drained", claim=..., estimate={"value": "0.60", **SE}),
        drainage(id="yield/undrained", claim=..., estimate={"value": second, **SE}, **changes),
    )


def compare(folder: Path, *others: Document, **changes: object) -> Answer:
    """Judge a claim that compares the two sites, beside their records."""
    record = drainage(
        id="yield/where",
        claim="Lime works only on drained plots.",
        compares=["yield/drained", "yield/undrained"],
        estimate={"value": "0.60", **SE},
        test={"name": "Welch", "p": 0.016},
    )
    return judge(folder, changed(record, **changes), *(others or two_sites()), policy=ON)


def test_a_difference_in_significance_is_no_difference(tmp_path: Path) -> None:
    """0.25 with the error 0.25 times the root of 2: p = .480, interval -.443 to .943."""
    answer = compare(tmp_path)

    found = answer.rule(RULE, "yield/where")
    assert (answer.status, found["outcome"]) == (1, "short")
    assert found["message"] == (
        "The claim says “works only on”, which needs a test of the difference between the two effects, and no "
        "record gives one: the difference of yield/drained and yield/undrained is 0.25, SE 0.35, p = 0.48 (95 % "
        "interval -0.44 to 0.94)."
    )
    assert found["remedy"] == (
        "Record a test of the difference, or say for instance: “The mean difference was 0.60 t/ha (yield/drained) "
        "and 0.35 t/ha (yield/undrained); the difference of the two is 0.25 (95 % interval -0.44 to 0.94), which "
        "does not settle whether they differ.”"
    )
    assert 2 * stats.norm.sf(0.25 / (0.25 * math.sqrt(2))) == pytest.approx(0.4795, abs=5e-5)


OWN_TEST = {"value": 1.2, "measure": "mean difference", "unit": "t/ha", "standard_error": 0.36}


@pytest.mark.parametrize(
    ("changes", "second", "expected"),
    [
        ({"estimate": OWN_TEST, "test__p": 0.001}, -0.6, "met"),
        ({"estimate": {**OWN_TEST, "value": -1.2}, "test__p": 0.001}, -0.6, "met"),
        ({"estimate": OWN_TEST, "test__p": 0.06}, -0.6, "short"),
        ({"estimate": {**OWN_TEST, "value": 1.05}, "test__p": 0.001}, -0.6, "short"),  # another number
        ({"estimate": {**OWN_TEST, "standard_error": 0.2}, "test__p": 0.001}, -0.6, "short"),
        ({"test__name": "treatment-by-site interaction", "test__p": 0.001}, -0.6, "met"),
        ({"test__name": "treatment-by-site interaction", "test__p": 0.06}, -0.6, "short"),
        ({"test__name": "interaction", "test__p": ..., "test__value": ...}, -0.6, "undecided"),
        ({"estimate__measure": "difference of the differences", "test__p": 0.001}, -0.6, "met"),
        ({"estimate__measure": "difference in differences", "compares": ..., "test__p": 0.001}, -0.6, "met"),
        ({"estimate__measure": "ratio of odds ratios", "compares": ..., "test__p": 0.001}, -0.6, "met"),
        ({"compares": ...}, -0.6, "short"),
        ({"estimate": ..., "test": ...}, -0.6, "short"),
    ],
)
def test_the_record_that_tests_the_difference_itself(
    tmp_path: Path, changes: Document, second: float, expected: str
) -> None:
    assert compare(tmp_path, *two_sites(second), **changes).rule(RULE, "yield/where")["outcome"] == expected


@pytest.mark.parametrize(
    ("changes", "ground"),
    [
        ({"compares": ...}, "the difference between the two effects, and no record gives one"),
        (
            {"test__name": "interaction", "test__p": 0.06},
            "two effects: its own test of that difference has p = 0.06",
        ),
        ({"test": {"name": "interaction"}}, "two effects: its own test of that difference has no p"),
    ],
)
def test_the_ground_of_a_difference_is_told(tmp_path: Path, changes: Document, ground: str) -> None:
    assert compare(tmp_path, **changes).rule(RULE, "yield/where")["message"].endswith(f" {ground}.")


def test_without_names_the_remedy_asks_for_them(tmp_path: Path) -> None:
    found = compare(tmp_path, compares=...).rule(RULE, "yield/where")

    assert found["remedy"].startswith(
        "Record a test of the difference, with both results named in compares, or say for instance: “The mean "
        "difference was 0.60 t/ha"
    )


@pytest.mark.parametrize(
    ("changes", "why"),
    [
        ({"compares": ["yield/drained", "yield/elsewhere"]}, "there is no record yield/elsewhere"),
        ({"compares": ["yield/drained", "yield/drained"]}, "it names one record twice"),
        ({"compares": ["yield/drained", "yield/bare"]}, "their estimates have other measures, units or scales"),
        ({"compares": ["yield/bare", "yield/bare-too"]}, "an estimate or its standard error is not given"),
    ],
)
def test_what_cannot_be_compared_is_undecided(tmp_path: Path, changes: Document, why: str) -> None:
    bare = [drainage(id=each, claim=..., estimate=...) for each in ("yield/bare", "yield/bare-too")]

    found = compare(tmp_path, *two_sites(), *bare, **changes).rule(RULE, "yield/where")

    assert found["outcome"] == "undecided"
    assert found["message"].endswith(f": the two that it compares cannot be set against each other: {why}.")
    assert found["remedy"] == (
        "Name in compares two records that report the same measure and unit with their standard errors."
    )


def test_a_comparison_in_other_words_is_held_to_it_too(tmp_path: Path) -> None:
    found = compare(tmp_path, claim="Lime is at its best where the soil was drained.").rule(RULE, "yield/where")

    assert found["message"].startswith(
        "The claim says that two effects differ, which needs a test of the difference"
    )


@pytest.mark.parametrize(
    ("changes", "policy"),
    [
        ({"aim": "equivalence", "estimate__margin": [-9, 9]}, {}),
        ({"aim": "estimation"}, {}),
        ({"claim": ...}, {}),
        ({}, {"allow": "difference"}),
    ],
)
def test_a_comparison_that_asserts_no_difference(tmp_path: Path, changes: Document, policy: Document) -> None:
    record = drainage(
        id="yield/where", claim="Both sites were limed.", compares=["yield/drained", "yield/undrained"]
    )

    answer = judge(tmp_path, changed(record, **changes), *two_sites(), policy=with_settings(**policy))

    assert [each["outcome"] for each in answer.claim("yield/where")["rules"] if each["rule"] == RULE] in (
        [],
        ["met"],
    )


def test_ratios_are_compared_on_the_log_scale(tmp_path: Path) -> None:
    """Odds ratios 4 and 1.5 with errors 0.2: their ratio is 2.67, error 0.283, interval 1.53 to 4.64."""
    ratio = {"measure": "odds ratio", "scale": "log", "standard_error": 0.2}
    sites = [changed(each, estimate={**ratio, "value": x}) for each, x in zip(two_sites(), (4, 1.5), strict=True)]

    found = compare(tmp_path, *sites, estimate={**ratio, "value": 4}).rule(RULE, "yield/where")

    assert (
        "the ratio of yield/drained and yield/undrained is 2.67, SE 0.28 of the logarithm, p = 0.000525"
        in (found["message"])
    )
    assert "(95 % interval 1.53 to 4.64)." in found["message"]
    assert found["remedy"].endswith("the ratio of the two is 2.67 (95 % interval 1.53 to 4.64).”")
    half = stats.norm.ppf(0.975) * 0.2 * math.sqrt(2)
    assert math.exp(math.log(4 / 1.5) + half) == pytest.approx(4.642, abs=5e-4)


def test_a_tiny_p_of_a_difference(tmp_path: Path) -> None:
    found = compare(tmp_path, *two_sites(-5.0)).rule(RULE, "yield/where")

    assert "is 5.6, SE 0.35, p <0.0001 (95 % interval 4.91 to 6.29)" in found["message"]


TREND = "There was a trend towards higher biomass."


@pytest.mark.parametrize(
    ("changes", "expected"),
    [
        ({"test__p": "0.08"}, "short"),
        ({"test__p": "0.034"}, "met"),
        ({"test__p": 0.05}, "met"),
        ({"test__p": "0.034", "test__alpha": 0.01}, "short"),
        ({"test__p": "0.034", "test__alpha": ...}, "met"),
        ({"test__p": "0.08", "test__alpha": ...}, "short"),
        ({"test__p": ">0.05"}, "short"),
        ({"test__p": ">0.01"}, "short"),
        ({"test__p": "<0.001"}, "met"),
        ({"test__p": ...}, "met"),
        ({"test__p": ..., "test__value": 1.5}, "short"),
        ({"test": ...}, "short"),
        ({"test__p": "0.08", "status": "exploratory", "claim": "There may be a trend towards more."}, "short"),
    ],
)
def test_hedges_stand_for_a_p_above_alpha(tmp_path: Path, changes: Document, expected: str) -> None:
    assert outcome(tmp_path, **{"claim": TREND, **changes}) == expected


def test_what_is_said_of_a_hedge(tmp_path: Path) -> None:
    found = said(tmp_path, TREND, test__p="0.08", test__value=1.8)

    assert found["message"] == (
        "The claim says “trend towards”, which is no result by itself: p = 0.08 at an alpha of 0.05."
    )
    assert found["remedy"].startswith(
        "Say for instance: “The mean difference was 4.2 g/m2 (95 % interval 0.34 to 8.06; 18 + 18 plots); with an "
        "even prior the risk that there is no effect is "
    )
    assert found["remedy"].endswith("; the data do not settle whether there is an effect.”")


def test_a_hedge_without_a_p(tmp_path: Path) -> None:
    found = said(tmp_path, TREND, test=...)

    assert found["message"].endswith(": the record gives no p.")
    assert found["remedy"] == (
        "Say for instance: “The mean difference was 4.2 g/m2 (95 % interval 0.34 to 8.06; 18 + 18 plots).”"
    )


CAUSE = "Drainage increases earthworm biomass."


@pytest.mark.parametrize(
    ("design", "setting", "claim", "expected"),
    [
        (..., "open", CAUSE, "met"),
        (..., "required", CAUSE, "short"),
        (..., "open", "Drainage prevents rot.", "met"),
        (..., "required", "Drainage prevents rot.", "short"),
        (..., "required", "Drainage may increase biomass.", "met"),
        ("randomised", "required", CAUSE, "met"),
        ("quasi-experimental", "required", CAUSE, "met"),
        ("observational", "open", CAUSE, "short"),
        ("observational", "open", "Drainage is associated with more biomass.", "met"),
        ("observational", "open", "Drainage may increase biomass.", "met"),
        ("observational", "open", "Drainage does not increase biomass.", "met"),
    ],
)
def test_causal_words_need_a_design(
    tmp_path: Path, design: object, setting: str, claim: str, expected: str
) -> None:
    assert outcome(tmp_path, claim, with_settings(design=setting), design=design) == expected


def test_what_is_said_of_a_cause(tmp_path: Path) -> None:
    (tmp_path / "a").mkdir()
    (tmp_path / "b").mkdir()

    observed = said(tmp_path / "a", CAUSE, design="observational", prior={"probability": 0.25, "basis": "earlier"})
    untold = said(tmp_path / "b", CAUSE)

    assert observed["message"] == (
        "The claim says “increases”, which speaks of cause, and needs a design that allows it: the record's design "
        "is observational."
    )
    assert observed["remedy"] == (
        "Say for instance: “The mean difference was 4.2 g/m2 (95 % interval 0.34 to 8.06; 18 + 18 plots); with a "
        "prior of 0.25 the risk that there is no effect is 37 % (against the effect as observed, which errs in its "
        "favour).”"
    )
    assert untold["message"].endswith(": the record declares no design.")
    assert untold["remedy"].startswith("Declare the design, or say for instance: “The mean difference was 4.2 g/m2")


@pytest.mark.parametrize(("design", "expected"), [(..., "met"), ("observational", "short")])
def test_a_possible_harm_is_reported_without_a_word_on_the_design(
    tmp_path: Path, design: object, expected: str
) -> None:
    assert outcome(tmp_path, "The dressing causes bleeding.", harm=True, design=design) == expected


@pytest.mark.parametrize(
    ("alternative", "told"),
    [
        ("design-effect", "21 % (against the effect planned)"),
        ("bound", "24 % (by the calibration of its p-value)"),
        ("default-prior", "33 % (under the default prior of its test)"),
    ],
)
def test_the_risk_is_told_with_what_it_rests_on(tmp_path: Path, alternative: str, told: str) -> None:
    policy = changed(ON, evidence__alternative=alternative)

    assert (
        f"the risk that there is no effect is {told}.”"
        in (said(tmp_path, CAUSE, policy, design="observational")["remedy"])
    )


POWER = "Observed power was low, so the null result is unreliable."


def test_observed_power_is_p_rewritten(tmp_path: Path) -> None:
    """At z = 1.2816 the power of a two-sided test at 0.05 is 24.9 %; that for one SD, 18 + 18, is 83 %."""
    found = said(tmp_path, POWER, test__p="0.20", test__value=...)

    assert found["message"] == (
        "The claim says “Observed power”, which is only the p-value rewritten: p = 0.2 gives 25 %, whatever the "
        "study."
    )
    assert found["remedy"].startswith("Give the interval, or the power for the effect planned, 83 %, or say for")
    z, critical = stats.norm.isf(0.1), stats.norm.isf(0.025)
    assert stats.norm.sf(critical - z) + stats.norm.cdf(-critical - z) == pytest.approx(0.24935, abs=5e-6)
    shift = 3.0
    assert stats.nct.sf(stats.t.isf(0.025, 34), 34, shift) == pytest.approx(0.83, abs=0.005)


@pytest.mark.parametrize(
    ("changes", "told"),
    [
        ({"test__sides": 1, "test__tail": "greater", "test__p": "0.20", "test__value": ...}, "p = 0.2 gives 21 %"),
        ({"test__p": "0.05", "test__value": ...}, "p = 0.05 gives 50 %"),
        ({"test__alpha": 0.01, "test__p": "0.01", "test__value": ...}, "p = 0.01 gives 50 %"),
        ({"test": ...}, "give the interval, or the power for the effect planned"),
        ({"test__p": 0, "test__value": ...}, "give the interval, or the power for the effect planned"),
    ],
)
def test_observed_power_follows_from_p_and_alpha(tmp_path: Path, changes: Document, told: str) -> None:
    assert told in said(tmp_path, POWER, **changes)["message"]


@pytest.mark.parametrize(
    "changes", [{"alternative": ...}, {"test__statistic": "chi2", "test__df": 1}, {"sample": ...}]
)
def test_the_planned_power_is_left_out_where_it_cannot_be_told(tmp_path: Path, changes: Document) -> None:
    assert said(tmp_path, POWER, **changes)["remedy"].startswith(
        "Give the interval, or the power for the effect planned, or say for instance"
    )


def test_the_planned_power_of_a_normal_test(tmp_path: Path) -> None:
    found = said(tmp_path, POWER, test={"name": "z", "statistic": "z", "value": 1.2}, estimate=...)

    assert "the power for the effect planned, 85 %, or say" in found["remedy"]
    assert stats.norm.sf(stats.norm.isf(0.025) - 3) == pytest.approx(0.851, abs=5e-4)


CHANCE = "The probability that the result is due to chance is 3.4 %."


@pytest.mark.parametrize(
    ("claim", "changes", "expected"),
    [
        (CHANCE, {}, "short"),
        (CHANCE, {"test": ...}, "short"),
        (
            CHANCE,
            {"status": "exploratory", "claim": "Perhaps the probability that it is a fluke is 3.4 %."},
            "short",
        ),
        ("The risk of error is 3.4 %.", {}, "short"),
        ("The risk of error is 3 %.", {}, "short"),
        ("The risk of error is .034.", {}, "short"),
        ("The risk of error is 0.96.", {"test__p": "0.04", "test__value": ...}, "short"),
        ("The risk of error is 0.5 %.", {"test__p": "0.0053", "test__value": ...}, "short"),
        ("The risk of error is 3.5 %.", {}, "met"),
        ("The risk of error is 5 %.", {}, "met"),
        ("The risk of error is 1 %.", {}, "met"),
        ("The risk of error is 3.4 %.", {"test": ...}, "undecided"),
        ("We are 96.6 % confident that drainage works.", {}, "short"),
        ("There is a 97 % chance that drainage works.", {}, "short"),
        ("There is a 90 % chance that drainage works.", {}, "met"),
        ("The probability that the null hypothesis H0 is true is small.", {}, "short"),
    ],
)
def test_p_is_no_probability_of_chance_or_of_a_hypothesis(
    tmp_path: Path, claim: str, changes: Document, expected: str
) -> None:
    """Where a number is told it is p or 1 - p within its digits, here of p = 0.034."""
    assert outcome(tmp_path, **{"claim": claim, **changes}) == expected


def test_what_is_said_of_p_as_a_probability(tmp_path: Path) -> None:
    """The risk is the record's own, 20.7 % against the effect planned; without one p stands alone."""
    for name in "abc":
        (tmp_path / name).mkdir()

    planned = said(tmp_path / "a", CHANCE, changed(ON, evidence__alternative="design-effect"))
    no_p = said(tmp_path / "b", CHANCE, test=...)
    untold = said(tmp_path / "c", "The risk of error is 3.4 %.", test=...)

    assert planned["message"] == (
        "The claim says “probability that the result is due to chance”, which no p-value gives: p = 0.034, and "
        "with an even prior the risk that there is no effect is 21 % (against the effect planned)."
    )
    assert planned["remedy"].endswith("the risk that there is no effect is 21 % (against the effect planned).”")
    assert no_p["message"].endswith("which no p-value gives: the record gives no p.")
    assert untold["remedy"] == "Give test.p, or the statistic with its df."


@pytest.mark.parametrize("changes", [{}, {"test__p": "0.20", "test__value": ...}, {"design": "observational"}])
@pytest.mark.parametrize("claim", [CHANCE, "There was a trend towards more.", "It has no effect.", "It proves it."])
def test_the_sentence_that_is_suggested_stands(tmp_path: Path, changes: Document, claim: str) -> None:
    for name in "ab":
        (tmp_path / name).mkdir()

    remedy = str(
        said(tmp_path / "a", **{"claim": claim, "test__p": "0.08", "test__value": ..., **changes})["remedy"]
    )
    suggested = remedy[remedy.index("“") + 1 : remedy.index("”")]

    assert outcome(tmp_path / "b", suggested, **{"test__p": "0.08", "test__value": ..., **changes}) == "met"


@pytest.mark.parametrize(
    ("claim", "p", "expected"),
    [
        ("The difference is significant.", "0.034", "short"),
        ("The difference is statistically significant.", "0.034", "met"),
        ("The difference is statistically significant.", "0.08", "short"),
        ("The difference is not significant.", "0.08", "met"),
        ("The difference is significant (p = 0.034).", "0.034", "met"),
        ("The difference is highly significant (p = 0.034).", "0.034", "met"),
    ],
)
def test_significant_says_how(tmp_path: Path, claim: str, p: str, expected: str) -> None:
    assert outcome(tmp_path, claim, test__p=p) == expected


def test_what_is_said_of_significance(tmp_path: Path) -> None:
    (tmp_path / "a").mkdir()
    (tmp_path / "b").mkdir()
    (tmp_path / "c").mkdir()

    bare = said(tmp_path / "a", "The difference is significant.")
    above = said(tmp_path / "b", "The difference is significant.", test__p="0.08")
    untold = said(tmp_path / "c", "It is statistically significant.", test=...)

    assert bare["message"] == (
        "The claim says “significant”, which does not say whether statistically or practically."
    )
    assert bare["remedy"].startswith("Write “statistically significant” where that is meant, or say for instance")
    assert above["remedy"].startswith("Say for instance")
    assert (untold["outcome"], untold["remedy"]) == ("undecided", "Give test.p, or the statistic with its df.")


def test_a_whole_screen_may_call_its_hits_significant(tmp_path: Path) -> None:
    screen = {"tests": 1000, "hits": 20, "alpha": 0.001, "power": 0.8, "prior": 0.1}
    record = {
        "gatecheck": "record/1",
        "id": DRAINAGE["id"],
        "claim": "Twenty compounds had statistically significant activity.",
        "screen": screen,
    }

    assert judge(tmp_path, record, policy=ON).rule(RULE)["outcome"] == "met"


@pytest.mark.parametrize(
    ("changes", "expected"),
    [
        ({}, "short"),
        ({"estimate__smallest_effect": 9}, "short"),
        ({"estimate__smallest_effect": 8}, "met"),
        ({"estimate__smallest_effect": 8, "estimate__interval": ...}, "undecided"),
    ],
)
def test_words_of_importance(tmp_path: Path, changes: Document, expected: str) -> None:
    assert outcome(tmp_path, "The rise is biologically relevant.", **changes) == expected


def test_what_is_said_of_importance(tmp_path: Path) -> None:
    for name in "abc":
        (tmp_path / name).mkdir()
    claim = "The rise is biologically relevant."

    bare = said(tmp_path / "a", claim)
    below = said(tmp_path / "b", claim, estimate__smallest_effect=9)
    open_ended = said(tmp_path / "c", claim, estimate__smallest_effect=9, estimate__interval=...)

    assert bare["message"].endswith("and an interval that reaches it: the record names none.")
    assert bare["remedy"].startswith("Give estimate.smallest_effect, or say for instance: “The mean")
    assert below["message"].endswith(": its whole interval is below the smallest effect of interest, 9.")
    assert below["remedy"].endswith("8.06; 18 + 18 plots): a difference smaller than we care about (9).”")
    assert open_ended["message"].endswith(": the record has no interval with two limits.")
    assert open_ended["remedy"] == "Give estimate.interval with two limits."


def statistic_for(ratio: float) -> float:
    """The z at which the likelihood ratio at the effect as observed is `ratio`: two-sided, folded."""
    low, high = 0.0, 20.0
    for _ in range(200):
        z = (low + high) / 2
        folded = stats.norm.pdf(0) + stats.norm.pdf(2 * z)
        low, high = (z, high) if folded / (2 * stats.norm.pdf(z)) < ratio else (low, z)
    return low


@pytest.mark.parametrize(("words", "least"), [("Moderate", 3), ("Strong", 20), ("Overwhelming", 150)])
def test_words_of_strength_follow_the_scale(tmp_path: Path, words: str, least: float) -> None:
    for name, ratio, expected in (("a", 0.999, "short"), ("b", 1.001, "met")):
        (tmp_path / name).mkdir()
        test = {"name": "z", "statistic": "z", "value": statistic_for(least * ratio)}
        found = said(tmp_path / name, f"{words} evidence for a rise.", test=test, estimate=...)
        assert found["outcome"] == expected


@pytest.mark.parametrize(
    ("changes", "ground"),
    [
        ({}, "needs a likelihood ratio of 20 or more: the likelihood ratio is 5.06."),
        (
            {"test": {"name": "t", "p": 0.04, "p_kind": "adjusted"}},
            "the likelihood ratio of this result cannot be told.",
        ),
        ({"claim": "This proves it.", "test__value": 40, "test__p": ...}, "the likelihood ratio is above 1e+26."),
        ({"test__value": 0.001, "test__p": ...}, "the likelihood ratio is 1."),
    ],
)
def test_what_is_said_of_strength(tmp_path: Path, changes: Document, ground: str) -> None:
    assert said(tmp_path, **{"claim": "Strong evidence for a rise.", **changes})["message"].endswith(ground)


def test_a_ratio_against_the_claim(tmp_path: Path) -> None:
    """A z of 0 against a planned effect 40 standard errors away."""
    found = said(
        tmp_path,
        "Strong evidence for a rise.",
        changed(ON, evidence__alternative="design-effect"),
        test={"name": "z", "statistic": "z", "value": 0.0},
        estimate={"measure": "difference", "value": 0.0, "unit": "1", "standard_error": 0.025},
        alternative={"effect": 1.0, "scale": "raw"},
    )

    assert found["message"].endswith("the likelihood ratio is below 1e-26.")


def test_evidence_for_no_effect_is_graded_as_such(tmp_path: Path) -> None:
    """At t = 0.1 with 2000 + 2000 units: the default prior gives about 28 to 1 for no effect."""
    sample = {"unit": "plot", "groups": [{"name": "a", "n": 2000}, {"name": "b", "n": 2000}]}
    changes: Document = {
        "aim": "equivalence",
        "test__value": 0.1,
        "test__df": 3998,
        "test__p": ...,
        "sample": sample,
    }

    assert outcome(tmp_path, "Strong evidence of equal yields.", **changes) == "met"
    (tmp_path / "b").mkdir()
    assert outcome(tmp_path / "b", "Overwhelming evidence of equal yields.", **changes) == "short"


@pytest.mark.parametrize("claim", ["Strong evidence of bleeding.", "This proves that it causes bleeding."])
def test_strong_words_on_a_harm_are_let_be(tmp_path: Path, claim: str) -> None:
    """Nobody needs strong evidence to report a possible harm."""
    assert outcome(tmp_path, claim, harm=True) == "met"


def test_suggestive_words_of_an_exploratory_claim_are_fine(tmp_path: Path) -> None:
    """It falls short on evidence, which another rule says; its words are careful."""
    claim = "These data suggest strong evidence that drainage may be biologically relevant."

    assert outcome(tmp_path, claim, status="exploratory") == "met"
    (tmp_path / "b").mkdir()
    assert outcome(tmp_path / "b", claim) == "short"


def test_a_softened_hedge_stays_a_hedge_where_p_is_small_enough_it_is_fine(tmp_path: Path) -> None:
    assert outcome(tmp_path, "There may be a trend towards more.", status="exploratory") == "met"


def test_all_words_are_told_at_once(tmp_path: Path) -> None:
    claim = "It proves a significant rise, is safe, biologically relevant, no worse, and has no effect on pH."

    found = said(tmp_path, claim)

    quotes = re.findall("“(.*?)”, which", found["message"])
    assert quotes == ["no effect", "is safe", "no worse"]
    assert found["message"].endswith(" (and 3 more).")


def test_what_is_undecided_is_told_beside_what_is_short(tmp_path: Path) -> None:
    found = said(tmp_path, "It is significant and statistically significant.", test=...)

    assert found["outcome"] == "short"
    assert "“significant”, which does not say" in found["message"]
    assert found["message"].endswith(
        "“statistically significant”, which needs a p of at most alpha: the record gives no p."
    )


@pytest.mark.parametrize("kind", ["strength", ["strength", "causal"]])
def test_kinds_of_words_may_be_allowed(tmp_path: Path, kind: object) -> None:
    assert outcome(tmp_path, "This proves it.", with_settings(allow=kind)) == "met"


def test_a_language_without_a_list_is_refused(tmp_path: Path) -> None:
    answer = judge(tmp_path, drainage(), policy=with_settings(language="xx"))

    assert answer.status == 3
    assert "rules.wording.language" in answer.verdict["problems"][0]["message"]


@pytest.mark.parametrize(
    ("claim", "told"),
    [
        (CAUSE, "The claim says “increases”, which its evidence allows."),
        ("The risk of error is 5 %.", "The claim says “risk of error is 5”, which its evidence allows."),
        ("Biomass was higher.", "The claim has no words that need more than its evidence gives."),
    ],
)
def test_explain_says_why_it_is_met(
    tmp_path: Path, claim: str, told: str, capsys: pytest.CaptureFixture[str]
) -> None:
    write_tree(tmp_path, drainage(claim=claim, design="randomised"), policy=ON)

    assert main(["explain", DRAINAGE["id"], str(tmp_path)]) == 0

    assert told in " ".join(capsys.readouterr().out.split())


def test_a_note_does_not_block(tmp_path: Path) -> None:
    answer = judge(tmp_path, drainage(claim="This proves it."), policy=with_settings(enforce="note"))

    assert (answer.status, answer.rule(RULE)["outcome"]) == (0, "short")


def test_results_judged_together_tell_no_risk_of_one(tmp_path: Path) -> None:
    again = drainage(id="drainage/again", replicates=DRAINAGE["id"], claim=...)

    found = judge(tmp_path, drainage(design="observational"), again, policy=ON).rule(RULE)

    assert found["remedy"] == (
        "Say for instance: “The mean difference was 4.2 g/m2 (95 % interval 0.34 to 8.06; 18 + 18 plots).”"
    )


@dataclass(frozen=True)
class Linked:
    """A sentence that is tied to a record."""

    path: str
    line: int
    record_id: str
    text: str


def table(*documents: Document, policy: Document = ON) -> Table:
    """A table of records with all that this rule needs."""
    records = [read(Record, each)[0] for each in documents]
    found = [Found(record, Place("r.json"), {}) for record in records if record is not None]
    assert len(found) == len(documents)
    standing, faults = read_own_policy(policy)
    assert standing is not None, faults
    applied = tuple(standing.for_record(one.record, one.at.path) for one in found)
    columns = columns_of(found)
    return Table(columns, weigh_columns(columns, [each.evidence for each in applied]), (), applied)


def rows(*sentences: Linked, policy: Document = ON, **changes: object) -> tuple[Judged, ...]:
    """The rows of sentences that are tied to the drainage record."""
    return judge_sentences(sentences, table(drainage(**changes), policy=policy))


def linked(text: str, line: int = 3, record_id: str = DRAINAGE["id"], path: str = "paper.md") -> Linked:
    """A sentence of a paper."""
    return Linked(path, line, record_id, text)


def test_a_linked_sentence_is_judged_by_its_record() -> None:
    (row,) = rows(linked("As expected, drainage has no effect on pH."), claim=...)

    assert (row.id, row.at, row.claim, row.standing) == ("paper.md:3", Place("paper.md", 3), None, "falls-short")
    assert row.result == "the text “As expected, drainage has no effect on pH.”"
    (finding,) = row.findings
    assert (finding.rule, finding.outcome, finding.enforce) == (RULE, "short", "block")
    assert finding.message == (
        "The sentence linked to drainage/earthworm-biomass says “no effect”, which needs an interval inside a "
        "margin that was set before the data: the record's aim is difference."
    )
    verdict = Verdict(PolicyUsed("a policy", "sha256:0", "tree"), (row,))
    assert verdict.exit == 1
    assert "“no effect”" in account(verdict, 200)


def test_sentences_of_one_line_share_a_row_and_rows_are_in_order() -> None:
    found = rows(
        linked("It is safe.", 12),
        linked("This proves it.", 3),
        linked("It is no worse.", 3),
        linked("It is safe.", 4, path="a.md"),
        linked("Biomass was higher.", 5),
    )

    assert [(row.id, len(row.findings)) for row in found] == [("a.md:4", 1), ("paper.md:3", 2), ("paper.md:12", 1)]


@pytest.mark.parametrize(
    "policy", [POLICY, with_settings(linked=False), with_settings(allow="strength"), with_settings(enforce="off")]
)
def test_sentences_that_are_not_judged(policy: Document) -> None:
    assert rows(linked("This proves it."), policy=policy) == ()


def test_a_sentence_on_no_record_is_passed_over() -> None:
    assert rows(linked("This proves it.", record_id="elsewhere")) == ()
    assert rows() == ()


def test_a_sentence_that_cannot_be_judged_is_undecided() -> None:
    (row,) = rows(linked("It is statistically significant."), policy=with_settings(enforce="note"), test=...)

    (finding,) = row.findings
    assert (finding.outcome, finding.enforce, row.standing) == ("undecided", "note", "stands")
    assert finding.remedy == "Give test.p, or the statistic with its df."
