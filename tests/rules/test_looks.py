"""Rule `looks`: what interim looks cost, and the boundary that was planned for them."""

from __future__ import annotations

from pathlib import Path

import pytest
from support import POLICY, Document, changed, drainage, judge

RULE = "looks"
POLICY_ON = changed(POLICY, rules={RULE: {}})


def looked(p: float, look: Document, **test: object) -> Document:
    """A claim with that p at that look."""
    return drainage(test={"name": "z", "statistic": "z", "p": p, **test}, estimate=..., look=look)


def test_five_peeks_without_a_plan_fall_short(tmp_path: Path) -> None:
    """P = .031 at the fifth of five equal looks: the real error is .142, and Pocock's limit .0158.

    Armitage, McPherson and Rowe (1969) give .142 for five looks at .05; Pocock's nominal level for five looks is
    .0158 (Jennison and Turnbull 2000, Table 2.1 gives c = 2.413; both recomputed).
    """
    answer = judge(tmp_path, looked(0.031, {"number": 5}), policy=POLICY_ON)

    said = answer.rule(RULE)
    assert (answer.status, said["outcome"]) == (1, "short")
    assert said["message"] == (
        "p = 0.031 (z, 18 + 18 plots) was found at look 5, without a boundary that was planned: 5 unadjusted looks "
        "at 0.05 have a real type I error of 0.142; the policy wants looks planned with their boundary."
    )
    assert said["remedy"].startswith(
        "For orientation: a Pocock boundary over 5 looks would have been 0.0158 at each"
    )


@pytest.mark.parametrize(
    ("boundary", "limit"),
    # Nominal two-sided p at the last of five looks (Jennison and Turnbull 2000, recomputed).
    [("obrien-fleming", 0.0413), ("pocock", 0.015814)],
)
def test_the_planned_boundary_decides(tmp_path: Path, boundary: str, limit: float) -> None:
    look = {"number": 5, "planned": 5, "boundary": boundary}

    said = judge(tmp_path, looked(0.031, look), policy=POLICY_ON).rule(RULE)

    assert said["outcome"] == ("met" if limit > 0.031 else "short")
    assert said["limit"] == pytest.approx(limit, abs=6e-5)
    assert said["observed"] == pytest.approx(0.031)


@pytest.mark.parametrize(
    ("look", "outcome"),
    [
        ({"number": 3, "planned": 2, "boundary": "pocock"}, "short"),
        ({"number": 1, "planned": 3}, "short"),
        ({"number": 1, "planned": 2, "boundary": "obrien-fleming"}, "short"),
        ({"number": 2, "planned": 2, "boundary": "haybittle-peto"}, "met"),
        ({"number": 2, "planned": 2, "boundary": "spending-pocock", "schedule": [0.3, 1.0]}, "met"),
        (
            {
                "number": 2,
                "planned": 2,
                "boundary": "spending-obrien-fleming",
                "schedule": [0.5, 1],
                "information": 1,
            },
            "met",
        ),
        ({"number": 1, "planned": 2, "boundary": "pocock", "schedule": [1.0]}, "undecided"),
        ({"number": 1, "planned": 2, "boundary": "pocock", "information": 0.7}, "undecided"),
    ],
)
def test_looks_beyond_the_plan_fall_short_and_a_schedule_is_kept(
    tmp_path: Path, look: Document, outcome: str
) -> None:
    answer = judge(tmp_path, looked(0.012, look), policy=POLICY_ON)

    assert answer.rule(RULE)["outcome"] == outcome
    assert answer.status == {"met": 0, "short": 1, "undecided": 3}[outcome]


@pytest.mark.parametrize(("look", "outcome"), [
    ({"number": 10**12}, "short"),
    ({"number": 1, "planned": 10**12, "boundary": "pocock"}, "undecided"),
])  # fmt: skip
def test_looks_beyond_all_plans_are_not_computed(tmp_path: Path, look: Document, outcome: str) -> None:
    said = judge(tmp_path, looked(0.012, look), policy=POLICY_ON).rule(RULE)

    assert said["outcome"] == outcome
    assert outcome == "undecided" or "have a real type I error of unknown" in said["message"]


def test_one_side_and_an_alpha_of_its_own_are_heeded(tmp_path: Path) -> None:
    """One-sided at .025 has the boundary of two-sided at .05, on half the p."""
    look = {"number": 2, "planned": 2, "boundary": "pocock"}
    one = looked(0.012, look, sides=1, tail="greater", alpha=0.025)

    said = judge(tmp_path, one, policy=POLICY_ON).rule(RULE)

    assert said["limit"] == pytest.approx(0.0294 / 2, abs=1e-4)
    assert said["outcome"] == "met"


@pytest.mark.parametrize("look", [None, {"number": 1}, {"number": 1, "planned": 1}])
def test_the_only_look_is_none_of_its_business(tmp_path: Path, look: Document | None) -> None:
    answer = judge(tmp_path, looked(0.0001, look) if look else drainage(), policy=POLICY_ON)

    assert RULE not in [each["rule"] for each in answer.claim()["rules"]]


def test_a_look_that_cannot_be_told_says_so(tmp_path: Path) -> None:
    look = {"number": 1, "planned": 2, "boundary": "pocock", "information": 0.7}

    said = judge(tmp_path, looked(0.012, look), policy=POLICY_ON).rule(RULE)

    assert said["message"].startswith("The boundary at look 1 of 2 cannot be told")
    assert said["remedy"] == "Give look.schedule with the information at each planned look, rising to 1."
