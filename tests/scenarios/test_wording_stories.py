"""Claims whose words say more than their results: whole repositories, the real command, invented data."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from support import POLICY, Answer, Document, changed, command, commit_all, drainage, write_tree

RULE = "wording"
ON = changed(POLICY, rules={RULE: {}})


def weighed(folder: Path, *records: Document, policy: Document = ON) -> Answer:
    """Commit the records with the policy, and weigh the repository by the command as a process of its own."""
    repository = folder / "repository"
    repository.mkdir()
    commit_all(write_tree(repository, *records, policy=policy), "Results")
    report = folder / "verdict.json"
    done = command("weigh", ".", "--write", f"json={report}", cwd=repository)
    assert done.stderr == ""
    return Answer(done.returncode, json.loads(report.read_text(encoding="utf-8")))


def mean_difference(value: str, error: float) -> Document:
    """An estimate with its standard error."""
    return {"measure": "mean difference", "value": value, "unit": "t/ha", "standard_error": error}


def test_a_small_sample_says_what_it_found(tmp_path: Path) -> None:
    """The claim is short on evidence, and its words are plain: this rule lets it be."""
    answer = weighed(
        tmp_path,
        drainage(design="randomised"),
        policy=changed(ON, rules={RULE: {}, "false-positive-risk": {"limit": 0.05}}),
    )

    assert answer.status == 1
    assert [(each["rule"], each["outcome"]) for each in answer.claim()["rules"] if each["outcome"] == "short"] == [
        ("false-positive-risk", "short")
    ]
    assert answer.rule(RULE)["outcome"] == "met"


def test_a_difference_in_significance_is_read_as_a_difference(tmp_path: Path) -> None:
    """Drained .60 (SE .25), p = .016; undrained .35 (SE .25), p = .16; the difference .25, p = .48."""
    sites = [
        drainage(
            id="lime/drained", claim=..., test={"name": "z", "p": "0.016"}, estimate=mean_difference("0.60", 0.25)
        ),
        drainage(
            id="lime/undrained", claim=..., test={"name": "z", "p": "0.16"}, estimate=mean_difference("0.35", 0.25)
        ),
    ]
    claim = changed(
        sites[0],
        id="lime/where",
        claim="Liming works only on drained plots.",
        compares=["lime/drained", "lime/undrained"],
    )

    answer = weighed(tmp_path, claim, *sites)

    said = answer.rule(RULE, "lime/where")
    assert (answer.status, said["outcome"]) == (1, "short")
    assert said["message"].endswith(
        ", and no record gives one: the difference of lime/drained and lime/undrained is 0.25, SE 0.35, p = 0.48 "
        "(95 % interval -0.44 to 0.94)."
    )


@pytest.mark.parametrize(
    ("margin", "told"),
    [
        ([-0.3, 0.3], "the 90 % interval -0.413 to 0.653 leaves the margin -0.3 to 0.3."),
        (None, "its aim is equivalence, and it gives no margin."),
    ],
)
def test_equivalence_from_a_large_p(tmp_path: Path, margin: list[float] | None, told: str) -> None:
    """Twenty against twenty, d = .12, p = .71: the 90 % interval is -.41 to .65."""
    record = drainage(
        claim="Drainage has no effect on yield.",
        aim="equivalence",
        test__value=...,
        test__df=38,
        test__p="0.71",
        estimate={
            "measure": "standardised mean difference",
            "value": 0.12,
            "unit": "1",
            "standard_error": 0.3162,
            "margin": margin,
        },
        sample={"unit": "plot", "groups": [{"name": "drained", "n": 20}, {"name": "undrained", "n": 20}]},
    )

    answer = weighed(tmp_path, record)

    said = answer.rule(RULE)
    assert (answer.status, said["outcome"]) == (1, "short")
    assert said["message"].endswith(told)
    assert (
        "“Inconclusive: the standardised mean difference was 0.12 (90 % interval -0.413 to 0.653; 20 + 20 plots)"
        in (said["remedy"])
    )


def test_power_after_the_fact(tmp_path: Path) -> None:
    record = drainage(
        claim="Observed power was 25 %, so the null result is unreliable.",
        test={"name": "two-sample t", "statistic": "t", "df": 34, "p": "0.20"},
        estimate={"measure": "mean difference", "value": "2.5", "unit": "g/m2"},
    )

    answer = weighed(tmp_path, record)

    said = answer.rule(RULE)
    assert (answer.status, said["outcome"]) == (1, "short")
    assert said["message"] == (
        "The claim says “Observed power”, which is only the p-value rewritten: p = 0.2 gives 25 %, whatever the "
        "study."
    )
    assert said["remedy"].startswith(
        "Give the interval, or the power for the effect planned, 83 %, or say for instance"
    )


@pytest.mark.parametrize(
    ("claim", "told"),
    [
        (
            "The probability that the result is due to chance is 3.4 %.",
            "“probability that the result is due to chance”",
        ),
        (
            "The null hypothesis is false with a probability of 96.6 %.",
            "“null hypothesis is false with a probability”",
        ),
        ("The risk of error is 3.4 %.", "“risk of error is 3.4”"),
    ],
)
def test_p_is_read_as_the_probability_of_chance(tmp_path: Path, claim: str, told: str) -> None:
    """At p = .034 the risk against the effect as observed is 16.5 %, and the message says so."""
    answer = weighed(tmp_path, drainage(claim=claim))

    said = answer.rule(RULE)
    assert (answer.status, said["outcome"]) == (1, "short")
    assert said["message"] == (
        f"The claim says {told}, which no p-value gives: p = 0.034, and with an even prior the risk that there is "
        "no effect is 17 % (against the effect as observed, which errs in its favour)."
    )


@pytest.mark.parametrize(
    "claim", ["Yield was the same in both groups.", "Yields were similar.", "Yield was marginally higher."]
)
def test_what_a_large_p_does_not_say(tmp_path: Path, claim: str) -> None:
    """t(34) = 1.50, p = .143, and nobody set a margin."""
    record = drainage(
        claim=claim,
        test={"name": "two-sample t", "statistic": "t", "value": "1.50", "df": 34, "p": "0.143", "sides": 2},
        estimate={"measure": "mean difference", "value": "2.9", "unit": "g/m2"},
        sample__groups=[],
    )

    answer = weighed(tmp_path, record)

    assert (answer.status, answer.rule(RULE)["outcome"]) == (1, "short")


@pytest.mark.parametrize("design", ["randomised", "quasi-experimental", "observational", ...])
def test_a_cause_needs_a_design_that_allows_it(tmp_path: Path, design: object) -> None:
    """Without a word on the design it is not declared causal."""
    answer = weighed(tmp_path, drainage(claim="Drainage causes higher biomass.", design=design))

    allowed = design in {"randomised", "quasi-experimental"}
    assert (answer.status, answer.rule(RULE)["outcome"]) == ((0, "met") if allowed else (1, "short"))


def test_exploratory_work_is_left_alone(tmp_path: Path) -> None:
    """Fourteen unregistered correlations, one of them with careful words, the others claimed by nobody."""
    records = [
        drainage(
            id=f"traits/{number:02}",
            claim="Leaf area may increase with shade, which these data suggest." if number == 13 else ...,
            status="exploratory",
            test={"name": "Pearson correlation", "statistic": "r", "value": 0.1 + number / 50, "df": 34},
            estimate=...,
            design="observational",
        )
        for number in range(14)
    ]

    answer = weighed(tmp_path, *records)

    assert answer.status == 0
    assert answer.rule(RULE, "traits/13")["outcome"] == "met"
    assert answer.verdict["counts"]["reported"] == 13


@pytest.mark.parametrize(("claim", "status"), [("A worthwhile lift in conversion.", 1), ("Conversion differs.", 0)])
def test_a_huge_sample_with_a_trivial_effect(tmp_path: Path, claim: str, status: int) -> None:
    """Conversion 10.00 against 10.10 %, interval .05 to .15 points, smallest effect of interest .30."""
    record = drainage(
        claim=claim,
        test={"name": "two-proportion z", "statistic": "z", "value": 3.64, "p": "0.00027"},
        estimate={
            "measure": "difference",
            "value": "0.10",
            "unit": "points",
            "interval": {"level": 0.95, "low": "0.05", "high": "0.15"},
            "smallest_effect": "0.30",
        },
        sample={"unit": "user", "n": 4_800_000},
        alternative=...,
    )

    answer = weighed(tmp_path, record)

    said = answer.rule(RULE)
    assert answer.status == status
    if status:
        assert said["message"].endswith("its whole interval is below the smallest effect of interest, 0.30.")
        assert said["remedy"] == (
            "Say for instance: “The difference was 0.10 points (95 % interval 0.05 to 0.15; 4800000 users): a "
            "difference smaller than we care about (0.30).”"
        )


def test_the_recipe_of_claims_that_are_careful(tmp_path: Path) -> None:
    """What reads like a phrase and is none: nothing is said of it."""
    claims = [
        "Same-day delivery had a shorter median time.",
        "The test for trend (Cochran–Armitage) found more events at higher doses.",
        "No effect modification was planned, and biomass was higher.",
        "The safety outcome was rarer in the new arm.",
        "To three significant figures the slope is 0.123.",
        "We found no difference in pH, and biomass was higher.",
        "No difference in soil type existed at baseline; biomass was higher.",
        "The groups were similar in age; biomass was higher by 4.2 g/m2.",
        "Biomass increased by 4.2 g/m2.",
        "The proven reserves were larger.",
    ]
    records = [drainage(id=f"careful/{number}", claim=claim) for number, claim in enumerate(claims)]

    answer = weighed(tmp_path, *records)

    assert answer.status == 0
    assert {answer.rule(RULE, record["id"])["outcome"] for record in records} == {"met"}
