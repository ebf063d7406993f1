"""The sentences that all formats share."""

from __future__ import annotations

import math

import pytest
from render.sample_verdicts import BROKEN, DRAINAGE, OLD, POLICY, ROWS, SLOPE, WEEDS

from gatecheck.model.verdict import Finding, Judged, Outcome, Place, PolicyUsed, Problem, Verdict
from gatecheck.render import RENDERERS, words


def judged(outcome: Outcome, *, claim: str | None = "It grows.", counts_now: bool = True) -> Judged:
    finding = Finding("false-positive-risk", outcome, "block")
    return Judged("id", Place("r.json"), claim, "t = 2", None, (finding,), (), counts_now)


STANDS, SHORT, WAIVED, UNDECIDED = (judged(outcome) for outcome in ("met", "short", "waived", "undecided"))
REPORTED_UNDECIDED = judged("undecided", claim=None)


@pytest.mark.parametrize(
    ("records", "problems", "sentence"),
    [
        ([], [], "Nothing falls short: 0 results are reported and nothing is claimed."),
        ([SLOPE], [], "Nothing falls short: 1 result is reported and nothing is claimed."),
        ([STANDS], [], "Stands: the only claim meets the policy."),
        ([STANDS] * 3, [], "Stands: all 3 claims meet the policy."),
        ([STANDS, WAIVED], [], "Stands: 1 of 2 claims meet the policy; 1 is waived."),
        ([WAIVED], [], "Nothing blocks: none of 1 claim meets the policy; 1 is waived."),
        (
            [STANDS, OLD, OLD],
            [],
            "Stands: 1 of 3 claims meet the policy; 2 are short or undecided but unchanged, and not counted.",
        ),
        ([SHORT], [], "Falls short of the policy: the only claim."),
        ([SHORT, SHORT], [], "Falls short of the policy: 2 of 2 claims; none stands."),
        ([SHORT, STANDS, STANDS], [], "Falls short of the policy: 1 of 3 claims; 2 stand."),
        ([WEEDS, STANDS], [], "Falls short of the policy: 1 result without a claim; 1 stands."),
        (
            [WEEDS, WEEDS, SHORT, WAIVED, WAIVED],
            [],
            "Falls short of the policy: 1 of 3 claims and 2 results without a claim; none stands; 2 are waived.",
        ),
        ([], [BROKEN], "Cannot judge: 1 problem."),
        ([STANDS], [BROKEN, BROKEN], "Cannot judge: 2 problems; 1 stands."),
        ([UNDECIDED], [], "Cannot judge: the only claim undecided."),
        ([REPORTED_UNDECIDED], [], "Cannot judge: 1 result without a claim undecided."),
        (
            [UNDECIDED, SHORT, STANDS],
            [BROKEN],
            "Cannot judge: 1 problem and 1 of 3 claims undecided; 1 of 3 claims short of the policy; 1 stands.",
        ),
    ],
)
def test_headline(records: list[Judged], problems: list[Problem], sentence: str) -> None:
    assert words.headline(Verdict(POLICY, tuple(records), tuple(problems))) == sentence


@pytest.mark.parametrize(
    ("log_ratio", "said"),
    [
        (None, "unknown"),
        (math.nan, "unknown"),
        (0.0, "about even (natural log 0)"),
        (0.708, "about 2 to 1 for an effect over none (natural log 0.708)"),
        (1.6213, "about 5 to 1 for an effect over none (natural log 1.62)"),
        (math.log(0.057), "about 18 to 1 for no effect over one (natural log -2.86)"),
        (math.log(1234), "about 1,200 to 1 for an effect over none (natural log 7.12)"),
        (20000.0, "above 1,000,000 to 1 for an effect over none (natural log 20000)"),
        (-math.inf, "above 1,000,000 to 1 for no effect over one (natural log minus infinite)"),
    ],
)
def test_likelihood_ratio(log_ratio: float | None, said: str) -> None:
    """The pairs LR 5.06 and LR 0.057 ("18 times") are stories S01 and S02 of an invented lab, computed exactly."""
    assert words.likelihood_ratio(log_ratio) == said


def test_places() -> None:
    assert words.where(Place("a.json", 3)) == "a.json, line 3"
    assert words.where(Place("a.ipynb", 3, 2)) == "a.ipynb, line 3 (cell 2)"
    assert words.where(Place("a.ipynb", 3, 2, 1)) == "a.ipynb, line 3 (cell 2, output 1)"


def test_a_risk_comes_with_its_assumptions_or_not_at_all() -> None:
    assert words.risk(DRAINAGE) == "false positive risk 17 % (prior 0.5, against the effect as observed)"
    assert not words.risk(ROWS)
    assert not words.risk(SLOPE)


def test_a_finding_without_a_message_says_its_outcome() -> None:
    assert words.found(Finding("numbers-agree", "short", "block")) == "Numbers agree: short of the policy."
    assert words.found(Finding("", "undecided", "note")) == ": cannot be decided; the policy only notes it."


@pytest.mark.parametrize(
    ("text", "ended"), [("a", "a."), ("a. ", "a."), ("a?", "a?"), ("a!", "a!"), (" \n", ""), ("\x1f", "\x1f.")]
)
def test_sentence(text: str, ended: str) -> None:
    assert words.sentence(text) == ended


def test_policy_used() -> None:
    """The digest is short, the origin in words."""
    assert words.policy_used(None) == "Policy: none could be read."
    built_in = PolicyUsed("starting policy", "sha256:" + "ab" * 32, "built-in")
    assert words.policy_used(built_in) == (
        "Policy: starting policy (built in, as the tree has no policy of its own; sha256:abababababab)."
    )


def test_a_problem_of_the_whole_tree_has_no_line() -> None:
    assert words.where(Place(".")) == "the whole tree"
    told = RENDERERS["annotations"](Verdict(None, (), (Problem(Place("."), "nothing is here", "look elsewhere"),)))
    assert told == "::error title=Could not be read or judged::nothing is here. To mend: look elsewhere.\n"
