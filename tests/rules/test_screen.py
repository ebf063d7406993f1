"""Rule `screen`: the long-run share of false hits, filters, and what is told beside them."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
from support import POLICY, Answer, Document, changed, drainage, judge, write_tree

from gatecheck.cli import main
from gatecheck.weigh.long_run import long_run_false_positive_risk

RULE = "screen"
ID = "compounds/first-pass"
SCREEN: Document = {"tests": 10_000, "hits": 139, "alpha": 0.01, "power": 0.8, "prior": 0.005}
IN_FULL = changed(POLICY, rules={"false-positive-risk": {"limit": 0.05}, "reported-in-full": {}})


def hit_list(**changes: Any) -> Document:
    """A claim on a whole screen, with other values."""
    record = {"gatecheck": "record/1", "id": ID, "claim": "Actives were found.", "screen": SCREEN}
    return changed(record, **changes)


def judged(tmp_path: Path, policy: Document = POLICY, **changes: Any) -> Answer:
    """The answer on a tree of this one record."""
    return judge(tmp_path, hit_list(**changes), policy=policy)


def rules_of(answer: Answer) -> dict[str, str]:
    """The outcome of each rule."""
    return {each["rule"]: each["outcome"] for each in answer.claim(ID)["rules"]}


@pytest.mark.parametrize(
    ("screen", "limit"),
    [
        ({"prior": 0.5, "alpha": 0.01}, 0.05),
        ({"prior": 0.005, "alpha": 0.01}, 0.72),
        ({"prior": 0.005, "alpha": 0.000211}, 0.05),
        ({"prior": 0.9, "alpha": 0.01, "power": 1}, 0.05),
    ],
)
def test_findings_stand_where_few_enough_are_false(
    tmp_path: Path, screen: Document, limit: float, capsys: pytest.CaptureFixture[str]
) -> None:
    record = hit_list(screen={**SCREEN, **screen})
    write_tree(tmp_path, record, policy=changed(POLICY, rules={RULE: {"limit": limit}}))

    assert main(["explain", ID, str(tmp_path)]) == 0

    assert f"the policy allows {limit * 100:g} % for findings." in " ".join(capsys.readouterr().out.split())


@pytest.mark.parametrize(
    ("alpha", "power", "prior", "limit"),
    [(0.01, 0.8, 0.005, 0.05), (0.05, 0.3, 0.2, 0.1), (0.05, 1.0, 0.0005, 0.01), (0.2, 0.9, 1e-6, 0.333)],
)
def test_the_level_that_is_told_to_do_does(
    tmp_path: Path, alpha: float, power: float, prior: float, limit: float
) -> None:
    """At the level in the remedy the share is within the limit, and a hundredth above it it is not."""
    screen = {**SCREEN, "alpha": alpha, "power": power, "prior": prior}
    policy = changed(POLICY, rules={RULE: {"limit": limit}})

    remedy = judge(tmp_path, hit_list(screen=screen), policy=policy).rule(RULE, ID)["remedy"]

    told = float(remedy.split(" at an alpha of ")[1].split()[0])
    assert float(long_run_false_positive_risk(told, power, prior)) <= limit
    assert float(long_run_false_positive_risk(told * 1.01, power, prior)) > limit


def test_where_no_level_would_do(tmp_path: Path) -> None:
    said = judged(tmp_path, screen__prior=1e-300).rule(RULE, ID)

    assert said["outcome"] == "short"
    assert said["remedy"] == (
        "Call them candidates (screen.called) and confirm them; no level that a test could have would do."
    )


@pytest.mark.parametrize(
    ("hits", "sentence"),
    [
        (100, " It had 100 hits, and so many would be expected with no true effect at all."),
        (119, " It had 119 hits, and so many would be expected with no true effect at all."),
        (81, " It had 81 hits, and so many would be expected with no true effect at all."),
        (120, ""),  # two standard deviations of 9.95 above 100 are 119.9
        (139, ""),
        (174, ""),  # three of 11.7 above 139.5 are 174.7
        (175, " It had 175 hits where the design expects 140: the assumptions do not fit what was found."),
        (2400, " It had 2,400 hits where the design expects 140: the assumptions do not fit what was found."),
        (0, " It had 0 hits where the design expects 140: the assumptions do not fit what was found."),
    ],
)
def test_hits_that_differ_from_the_design_are_told_and_decide_nothing(
    tmp_path: Path, hits: int, sentence: str
) -> None:
    said = judged(tmp_path, screen__hits=hits).rule(RULE, ID)

    assert said["outcome"] == "short"
    assert said["message"].endswith(f"the policy allows 5 % for findings.{sentence}")


@pytest.mark.parametrize("called", ["findings", "candidates"])
@pytest.mark.parametrize("missing", ["tests", "hits", "alpha", "power", "prior"])
def test_what_is_missing_is_undecided(tmp_path: Path, missing: str, called: str) -> None:
    record = changed(hit_list(screen__called=called), **{f"screen__{missing}": ...})

    answer = judge(tmp_path, record)

    said = answer.rule(RULE, ID)
    assert (answer.status, said["outcome"]) == (3, "undecided")
    assert said["message"] == (
        "The share of false positives among the hits of this screen cannot be told without screen." + missing + "."
    )
    assert said["remedy"] == f"Give screen.{missing}, as assumed when the screen was planned."


def test_all_that_is_missing_is_told_at_once(tmp_path: Path) -> None:
    said = judged(tmp_path, screen={}).rule(RULE, ID)

    assert said["remedy"].startswith("Give screen.tests, screen.hits, screen.alpha, screen.power, screen.prior, as")


@pytest.mark.parametrize(("tests", "outcome"), [(1, "undecided"), (99, "undecided"), (100, "met")])
def test_few_tests_are_no_whole_screen(tmp_path: Path, tests: int, outcome: str) -> None:
    """A single result with p just below 0.05 is not weighed by the long-run risk of its test, which is 4.8 %."""
    screen = {"tests": tests, "hits": 1, "alpha": 0.05, "power": 0.999, "prior": 0.5}

    answer = judged(tmp_path, screen=screen)

    said = answer.rule(RULE, ID)
    assert said["outcome"] == outcome
    if outcome == "undecided":
        assert answer.status == 3
        assert said["message"] == (
            "The screen has fewer than 100 tests, so each of its results can be weighed by itself, which a "
            "long-run risk does not do."
        )
        assert said["remedy"] == "Report each result in a record of its own, with the family that they make."


def test_more_hits_than_tests_cannot_be(tmp_path: Path) -> None:
    answer = judged(tmp_path, screen__hits=10_001)

    said = answer.rule(RULE, ID)
    assert (answer.status, said["outcome"]) == (3, "undecided")
    assert said["message"] == "The screen is said to have 10,001 hits of 10,000 tests, which cannot be."
    assert said["remedy"] == "Give in screen.tests the number of tests among which the hits were counted."


@pytest.mark.parametrize("missing", ["tests", "hits", "alpha", "power", "prior"])
def test_an_unplanned_filter_falls_short_whatever_is_missing(tmp_path: Path, missing: str) -> None:
    removed = [{"n": 5, "reason": "edge wells"}]

    answer = judge(tmp_path, changed(hit_list(screen__removed=removed), **{f"screen__{missing}": ...}))

    said = answer.rule(RULE, ID)
    assert (answer.status, said["outcome"]) == (1, "short")
    assert said["message"].startswith(
        "5 tests were left out before the hits were counted (edge wells), and no such"
    )
    assert "By its design" not in said["message"]
    assert said["remedy"].endswith(" say planned: true where the filter was registered before the data.")


def test_filters_are_counted_together_and_few_reasons_named(tmp_path: Path) -> None:
    removed = [{"n": 10, "reason": f"reason {number}"} for number in range(5)]
    removed += [{"n": 7, "reason": "registered", "planned": True}, {"n": 0, "reason": "none"}]

    said = judged(tmp_path, screen__called="candidates", screen__removed=removed).rule(RULE, ID)

    assert said["message"].startswith(
        "50 tests were left out before the hits were counted (reason 0; reason 1; reason 2 and 2 more reasons), "
    )


@pytest.mark.parametrize("policy", [POLICY, IN_FULL])
def test_it_is_always_on_and_no_evidence_rule_is_in_its_way(tmp_path: Path, policy: Document) -> None:
    outcomes = rules_of(judged(tmp_path, policy, screen__called="candidates"))

    assert outcomes["screen"] == "met"
    assert outcomes["false-positive-risk"] == "does-not-apply"
    assert outcomes.get("reported-in-full", "met") == "met"


@pytest.mark.parametrize(
    "rules",
    [
        {"false-positive-risk": {"limit": 0.05}},
        {"prior-needed": {"risk": 0.05, "limit": 0.5}},
        {"robust": {"alternatives": ["bound"], "priors": [0.5], "limit": 0.2}},
    ],
)
def test_where_it_is_off_a_whole_screen_does_not_pass_in_silence(tmp_path: Path, rules: Document) -> None:
    answer = judged(tmp_path, changed(POLICY, rules={**rules, RULE: {"enforce": "off"}}))

    assert answer.status == 3
    assert rules_of(answer)[next(iter(rules))] == "undecided"


def test_where_it_is_off_the_reason_is_told(tmp_path: Path) -> None:
    policy = changed(POLICY, rules={"false-positive-risk": {"limit": 0.05}, RULE: {"enforce": "off"}})

    said = judged(tmp_path, policy).rule("false-positive-risk", ID)

    assert said["message"] == "A whole screen has no single result whose evidence could be weighed."
    assert said["remedy"] == "Leave the rule screen on, which judges it, or report each hit in a record of its own."


@pytest.mark.parametrize("test", [{"name": "robust z"}, {"name": "robust z", "alpha": 0.01}])
def test_a_test_that_gives_no_result_leaves_a_whole_screen(tmp_path: Path, test: Document) -> None:
    assert rules_of(judged(tmp_path, test=test))["false-positive-risk"] == "does-not-apply"


def test_a_screen_beside_the_result_of_a_single_test_exempts_it_from_nothing(tmp_path: Path) -> None:
    """A screen is no way around the rules on evidence: the result is weighed, and the screen judged."""
    answer = judge(tmp_path, drainage(screen={**SCREEN, "called": "candidates"}))

    assert answer.status == 1
    assert answer.rule("false-positive-risk")["outcome"] == "short"
    assert answer.rule(RULE)["outcome"] == "met"


@pytest.mark.parametrize(
    "test", [{"p": 0.03}, {"statistic": "z", "value": 2.2}, {"named_statistic": {"symbol": "U", "value": 93}}]
)
def test_any_result_of_a_single_test_is_weighed(tmp_path: Path, test: Document) -> None:
    outcome = rules_of(judged(tmp_path, test={"name": "a test", **test}))["false-positive-risk"]

    assert outcome in {"short", "undecided"}


def test_a_possible_harm_is_exempt(tmp_path: Path) -> None:
    answer = judged(tmp_path, harm=True)

    assert (answer.status, rules_of(answer)[RULE]) == (0, "does-not-apply")


def test_a_screen_without_a_claim_and_a_claim_without_a_screen_are_none_of_its_business(tmp_path: Path) -> None:
    answer = judge(tmp_path, hit_list(claim=...), drainage())

    assert RULE not in rules_of(answer)
    assert RULE not in [each["rule"] for each in answer.claim()["rules"]]


@pytest.mark.parametrize(
    ("screen", "message"),
    [
        ({"tests": 0}, "screen.tests is 0, outside its range"),
        ({"hits": -1}, "screen.hits is -1, outside its range"),
        ({"hits": 1.5}, "screen.hits is 1.5, not a whole number"),
        ({"alpha": 0}, "screen.alpha is 0, outside its range"),
        ({"power": 1.1}, "screen.power is 1.1, outside its range"),
        ({"power": 0}, "screen.power is 0, outside its range"),
        ({"prior": 1}, "screen.prior is 1, outside its range"),
        ({"called": "hits"}, "screen.called is 'hits'"),
        ({"removed": [{"n": 3}]}, "screen.removed[0].reason is missing"),
        ({"removed": [{"n": 3, "reason": "x", "planned": "yes"}]}, "screen.removed[0].planned is 'yes'"),
        ({"wells": 384}, "screen.wells is no known key"),
    ],
)
def test_what_cannot_be_read_is_a_problem_with_its_field(tmp_path: Path, screen: Document, message: str) -> None:
    answer = judged(tmp_path, changed(POLICY, at_least=0), screen={**SCREEN, **screen})

    assert answer.status == 3
    assert [each["message"] for each in answer.verdict["problems"]] == [f"{ID}: {message}"]


@pytest.mark.parametrize(
    "screen",
    [
        {"tests": 1e300, "hits": 1e299},
        {"alpha": 5e-324, "power": 5e-324, "prior": 5e-324},
        {"alpha": 5e-324},
        {"power": 5e-324, "prior": 5e-324},
        {"prior": 1 - 1e-16, "alpha": 1 - 1e-16},
        {"removed": [{"n": 1.7e308, "reason": "x"}, {"n": 1.7e308, "reason": "y"}]},
    ],
)
def test_absurd_figures_are_judged_or_undecided_and_told_in_words(tmp_path: Path, screen: Document) -> None:
    answer = judged(tmp_path, screen={**SCREEN, **screen})

    said = answer.rule(RULE, ID)
    assert said["outcome"] in {"met", "short", "undecided"}
    assert answer.status == {"met": 0, "short": 1, "undecided": 3}[said["outcome"]]
    assert len(said["message"]) < 500
    assert {"nan", "inf", "None"}.isdisjoint(said["message"].replace("(", " ").split())
