"""Hit lists of whole screens, and raw results beside their family, through the real command; data are invented."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import pytest
from support import POLICY, Document, changed, command, drainage, judge, write_tree

from gatecheck import weigh

RULE = "screen"
#: 10,000 compounds, alpha .01, power .8, prior .005: about 40 true and 99.5 false positives, 71 % false.
COMPOUNDS: Document = {
    "gatecheck": "record/1",
    "id": "compounds/first-pass",
    "claim": "139 actives.",
    "status": "confirmatory",
    "screen": {"tests": 10_000, "hits": 139, "alpha": 0.01, "power": 0.8, "prior": 0.005},
}
LOW_WELLS: Document = {"n": 2300, "reason": "low cell count"}
DESIGN = (
    "By its design (10,000 tests at alpha 0.01, power 0.8, prior 0.005) this screen is expected to call 40 true "
    "and 99.5 false positives, so 71 % of its hits are false, which is the long-run risk of the whole design and "
    "not that of a single hit; "
)
MENDING = (
    "all them candidates (screen.called) and confirm them, or test each at an alpha of 0.000211 or less with the "
    "power kept at 0.8."
)


def compounds(**changes: Any) -> Document:
    """The record of the hit list with other values."""
    return changed(COMPOUNDS, **changes)


@pytest.mark.parametrize("policy", [POLICY, None])
def test_hits_that_are_called_findings(tmp_path: Path, policy: Document | None) -> None:
    """139 actives of which 99.5 are expected to be false: no findings, under the built-in policy too."""
    answer = judge(tmp_path, compounds(), policy=policy)

    said = answer.rule(RULE, COMPOUNDS["id"])
    assert (answer.status, said["outcome"]) == (1, "short")
    assert answer.claim(COMPOUNDS["id"])["verdict"] == "falls-short"
    assert said["observed"] == pytest.approx(99.5 / 139.5, rel=1e-14)
    assert said["limit"] == 0.05
    assert said["message"] == f"{DESIGN}the policy allows 5 % for findings."
    assert said["remedy"] == f"C{MENDING}"


@pytest.mark.parametrize("policy", [POLICY, None])
def test_hits_that_are_called_candidates(tmp_path: Path, policy: Document | None) -> None:
    """The same list stands where it is called what it is; no rule on evidence of one result is in its way."""
    answer = judge(tmp_path, compounds(screen__called="candidates"), policy=policy)

    claim = answer.claim(COMPOUNDS["id"])
    assert (answer.status, claim["verdict"]) == (0, "stands")
    outcomes = {each["rule"]: each["outcome"] for each in claim["rules"]}
    assert outcomes["screen"] == "met"
    assert outcomes["false-positive-risk"] == "does-not-apply"
    assert set(outcomes.values()) == {"met", "does-not-apply"}
    assert answer.rule(RULE, COMPOUNDS["id"])["limit"] is None


def test_what_stands_is_explained_as_a_risk_of_the_whole_design(tmp_path: Path) -> None:
    write_tree(tmp_path, compounds(screen__called="candidates"))

    done = command("explain", "compounds/first-pass", str(tmp_path))

    assert done.returncode == 0
    told = " ".join(done.stdout.split())
    assert f"{DESIGN}as they are called candidates for confirmation, the policy allows that." in told
    assert "A whole screen is judged by the rule screen" in told


@pytest.mark.parametrize("called", ["findings", "candidates"])
def test_a_filter_that_was_not_registered(tmp_path: Path, called: str) -> None:
    """2,300 wells of low count left out before the hits were counted: short whatever the hits are called."""
    answer = judge(tmp_path, compounds(screen__called=called, screen__removed=[LOW_WELLS]))

    said = answer.rule(RULE, COMPOUNDS["id"])
    assert (answer.status, said["outcome"]) == (1, "short")
    filtered = (
        "2,300 tests were left out before the hits were counted (low cell count), and no such filter was planned; "
        "the policy wants filters registered before the data, for one chosen afterwards can choose the hits."
    )
    anew = "Count the hits over all tests, or say planned: true where the filter was registered before the data"
    if called == "candidates":
        assert (said["message"], said["remedy"]) == (filtered, f"{anew}.")
    else:
        assert said["message"] == f"{filtered} {DESIGN}the policy allows 5 % for findings."
        assert said["remedy"] == f"{anew}; c{MENDING}"


def test_a_filter_that_was_registered_is_none_of_its_business(tmp_path: Path) -> None:
    planned = [{**LOW_WELLS, "planned": True}, {"n": 0, "reason": "broken plates"}]

    answer = judge(tmp_path, compounds(screen__called="candidates", screen__removed=planned))

    assert (answer.status, answer.rule(RULE, COMPOUNDS["id"])["outcome"]) == (0, "met")


def test_evidence_from_the_raw_result_and_the_family_by_itself(tmp_path: Path) -> None:
    """Double penalty: raw p .008 is adjusted to .04 by Holm, and the ratio is never that of .04."""
    policy = changed(POLICY, rules={"false-positive-risk": {"limit": 0.2}, "family": {}})
    t = float(weigh.t_from_log_p(math.log(0.008), 34, one_sided=False))
    family = {"name": "growth", "size": 5, "procedure": "holm"}
    first = drainage(
        test={"name": "t", "statistic": "t", "value": t, "df": 34, "p": 0.04, "p_kind": "adjusted"},
        estimate=...,
        family={**family, "adjusted_p": "0.04"},
    )
    others = [
        drainage(id=f"growth/{n}", claim=..., test={"name": "t", "p": p}, estimate=..., family=family)
        for n, p in enumerate((0.3, 0.4, 0.5, 0.6))
    ]

    answer = judge(tmp_path, first, *others, policy=policy)

    figures, said = answer.claim()["evidence"], answer.rule("family")
    of_the_raw = float(weigh.observed_t(t, 34, one_sided=False))
    assert figures["log_likelihood_ratio"] == pytest.approx(of_the_raw, rel=1e-12)
    assert figures["false_positive_risk"] == pytest.approx(1 / (1 + math.exp(of_the_raw)), rel=1e-12)
    assert (said["outcome"], said["observed"]) == ("met", pytest.approx(0.04, rel=1e-9))
    assert answer.claim()["verdict"] == "stands"


def test_four_of_eight_members_of_a_family_here(tmp_path: Path) -> None:
    """A family that is split over two places: each place says how many of the members it holds."""
    family = {"name": "growth", "size": 8, "procedure": "weighted-holm", "weight": 0.125}
    records = [
        drainage(id=f"growth/{n}", test={"name": "t", "p": 0.001}, estimate=..., family=family) for n in range(4)
    ]

    answer = judge(tmp_path, *records, policy=changed(POLICY, rules={"family": {}}))

    assert answer.status == 1
    said = answer.rule("family", "growth/0")
    assert said["message"] == "The family growth is not whole: 4 of 8 members are in this tree."
    assert said["observed"] is None  # the share of the absent ones is not known
