"""Records that are legal and odd: whatever their numbers, an answer for each, and none that passes unweighed."""

from __future__ import annotations

import json
import os
import random
from pathlib import Path
from typing import Any

import pytest
from support import Document, changed, weigh

from gatecheck.gate import Request, check
from gatecheck.model.verdict import Verdict
from gatecheck.render import RENDERERS, account, explain

NUMBERS: list[Any] = [
    *(0, 1, 2, -2, 0.5, 40, 200, -1e4, 1e150, 1e308, -1e308, 1e-6, 1e-300, 5e-324),
    *("0", "0.00", "2.21", "-2.2", "1e300", "1e-300", ".5"),
]
POSITIVE: list[Any] = [1e-9, 0.5, 1, 1.7, 3, 34, 1e3, 1e7, 1e300, 1e308, "34", "43.7", "0.0"]
P_VALUES: list[Any] = [
    0,
    1,
    0.5,
    0.034,
    1e-10,
    1e-300,
    5e-324,
    "0.000",
    "<0.001",
    ">0.05",
    "0.034",
    "1.00",
    "<0",
    ">1",
]
COUNTS = [1, 2, 3, 18, 10**6, 10**15]
POLICY: Document = {
    "gatecheck": "policy/1",
    "evidence": {"alternative": "observed-effect"},
    "rules": {
        "false-positive-risk": {"limit": 0.05},
        "prior-needed": {"risk": 0.05, "limit": 0.5},
        "robust": {
            "alternatives": ["observed-effect", "default-prior", "bound"],
            "priors": [1e-6, 0.999],
            "limit": 0.9999999,
            "enforce": "note",
        },
        "practical-size": {"claims": "all", "enforce": "note"},
        "looks": {"enforce": "note"},
        "family": {"enforce": "note"},
        "reported-in-full": {},
    },
    "for": [
        {"match": {"tag": "design"}, "evidence": {"alternative": ["design-effect", "bound"], "prior": 0.999}},
        {"match": {"tag": "bound"}, "evidence": {"alternative": "bound", "prior": 1e-9}},
    ],
}


def odd_test(chance: random.Random) -> Document:
    """A test with odd numbers, within what the format admits."""
    statistic = chance.choice(["t", "z", "chi2", "F", "r", None])
    df = [chance.choice(POSITIVE) for _ in range(2 if statistic == "F" else 1)]
    test: Document = {"name": "a test", "statistic": statistic, "df": df, "p": chance.choice([*P_VALUES, None])}
    if statistic is not None and chance.random() < 0.8:
        low = -0.999 if statistic == "r" else -1e308
        wanted = [0.3, -0.99, "0.5", "1.0", 0.999999] if statistic == "r" else NUMBERS
        value = chance.choice(wanted)
        test["value"] = value if float(value) >= (0 if statistic in {"chi2", "F"} else low) else 0
    test["p_kind"] = chance.choice(["raw", "raw", "raw", "adjusted", "exact", "permutation"])
    if chance.random() < 0.3:
        test |= {"sides": 1, "tail": chance.choice(["greater", "less"])}
    return {key: value for key, value in test.items() if value is not None}


def odd_estimate(chance: random.Random) -> Document:
    """An estimate with odd numbers; on a log scale above 0."""
    log = chance.random() < 0.4
    numbers = [1, 0.5, 2.5, 1e-300, 1e300, "0.8", "1.0"] if log else NUMBERS
    ends = sorted((chance.choice(numbers) for _ in range(2)), key=float)
    estimate: Document = {
        "measure": "shift",
        "unit": "1",
        "value": chance.choice(numbers),
        "scale": "log" if log else "linear",
        "standard_error": chance.choice([*POSITIVE, None]),
        "margin": [chance.choice([0.5, 0.8]), 1.25] if log else [chance.choice([-1e308, -0.3]), 0.3],
        "smallest_effect": chance.choice(numbers),
        "interval": {"level": chance.choice([0.95, 1e-12, 1 - 1e-12]), "low": ends[0], "high": ends[1]},
    }
    if chance.random() < 0.3:
        estimate["null"] = chance.choice(numbers)
    return estimate


def odd_background(chance: random.Random) -> Document:
    """A look and a family with odd numbers."""
    look: Document = {"number": chance.choice([1, 2, 5, 10**12])}
    if chance.random() < 0.7:
        boundaries = ["pocock", "obrien-fleming", "haybittle-peto", "spending-pocock", None]
        look |= {"planned": chance.choice([1, 2, 5]), "boundary": chance.choice(boundaries)}
    if chance.random() < 0.3:
        look["schedule"] = chance.choice([[0.5, 1.0], [1.0, 0.5], [1e-12, 1.0], [0.1, 0.1]])
    procedure = chance.choice(["none", "holm", "hommel", "benjamini-yekutieli", "fixed-sequence"])
    family = {"name": chance.choice("abcdef"), "size": chance.choice([1, 8, 10**15]), "procedure": procedure}
    return {"look": look, "family": family}


def odd_record(chance: random.Random, number: int) -> Document:
    """A claim on an odd result."""
    groups = [{"name": str(each), "n": chance.choice([0, *COUNTS])} for each in range(chance.randrange(4))]
    record: Document = {
        "gatecheck": "record/1",
        "id": f"odd/{number}",
        "claim": "Something differs.",
        "tags": [chance.choice(["design", "bound", "plain"])],
        "aim": chance.choice(["difference", "difference", "superiority", "equivalence"]),
        "test": odd_test(chance),
        "estimate": odd_estimate(chance),
        "sample": {"unit": "plot", "n": chance.choice(COUNTS), "groups": groups},
        "alternative": {
            "effect": chance.choice([0, 1.0, -0.5, 0.3, 1e-300, 1e200, -1e308]),
            "scale": chance.choice(["standardised", "raw"]),
        },
    }
    if chance.random() < 0.3:
        record |= odd_background(chance)
    if chance.random() < 0.2:
        record["prior"] = {"probability": chance.choice([1e-300, 0.5, 1 - 1e-15]), "basis": "none"}
    return record


@pytest.fixture(scope="module")
def verdict(tmp_path_factory: pytest.TempPathFactory) -> Verdict:
    """The verdict over a tree of seeded odd records; warnings of the mathematics are errors here."""
    chance = random.Random(20310402)  # noqa: S311  # a seed that can be repeated
    folder = tmp_path_factory.mktemp("odd")
    amount = int(os.environ.get("GATECHECK_HOSTILE", "1000"))
    records = [odd_record(chance, number) for number in range(amount)]
    (folder / "records.json").write_text(json.dumps(records), encoding="utf-8")
    (folder / "gatecheck.yaml").write_text(json.dumps(POLICY), encoding="utf-8")
    answer = check(Request(folder))
    assert answer.problems == ()
    assert len(answer.judged) == amount
    return answer


def test_no_claim_stands_without_figures_within_the_limits(verdict: Verdict) -> None:
    """A claim stands only where its risk was computed and is within the limit, and its numbers agree."""
    standing = [one for one in verdict.judged if one.standing == "stands"]

    assert len(standing) >= 5
    for one in standing:
        outcomes = {finding.rule: finding.outcome for finding in one.findings if finding.enforce == "block"}
        if one.evidence is None:
            assert outcomes["no-effect-support"] == "met"
            continue
        assert one.evidence.false_positive_risk is not None
        assert 0 <= one.evidence.false_positive_risk <= 0.05
        assert set(outcomes.values()) == {"met"}


def test_what_cannot_be_weighed_is_undecided(verdict: Verdict) -> None:
    unweighed = [one for one in verdict.judged if one.evidence and one.evidence.log_likelihood_ratio is None]

    assert len(unweighed) >= 50
    for one in unweighed:
        assert one.standing in {"undecided", "falls-short"}
        outcomes = {finding.rule: finding.outcome for finding in one.findings}
        assert outcomes["false-positive-risk"] == outcomes["prior-needed"] == "undecided"


def test_every_format_can_tell_it(verdict: Verdict) -> None:
    """Each record stands in the JSON with finite numbers or null, and every text can be made."""
    document = json.loads(RENDERERS["json"](verdict), parse_constant=pytest.fail)

    assert len(document["claims"]) == len(verdict.judged)
    assert document["exit"] == 3
    told = account(verdict, 80)
    assert all(one.id in told for one in verdict.judged)
    assert {"nan", "inf", "-inf"}.isdisjoint(told.split())
    assert RENDERERS["summary"](verdict).startswith("## Cannot judge: ")
    told = RENDERERS["annotations"](verdict)
    assert told.count("::error ") == told.count("::warning ") == 10
    assert told.count("more in the summary::") == 2


def test_every_odd_record_can_be_explained(tmp_path: Path) -> None:
    chance = random.Random(4)  # noqa: S311  # a seed that can be repeated
    records = [odd_record(chance, number) for number in range(40)]
    (tmp_path / "records.json").write_text(json.dumps(records), encoding="utf-8")
    answer = check(Request(tmp_path, explain=frozenset(one["id"] for one in records)))

    for one in answer.judged:
        assert one.id in explain(answer, one.id, 80)


@pytest.mark.parametrize("limit", [0.05, 0.999999])
def test_a_zero_p_alone_never_passes(tmp_path: Path, limit: float) -> None:
    """A p of 0, from a writer that rounds, is no evidence without end."""
    record = odd_record(random.Random(1), 1)  # noqa: S311  # a seed that can be repeated
    record |= {"aim": "difference", "test": {"name": "t", "statistic": "t", "df": 30, "p": 0}, "estimate": None}
    policy = changed(POLICY, rules={"false-positive-risk": {"limit": limit}}, **{"for": []})
    (tmp_path / "record.json").write_text(json.dumps(record), encoding="utf-8")
    (tmp_path / "gatecheck.yaml").write_text(json.dumps(policy), encoding="utf-8")

    answer = weigh(tmp_path)

    assert answer.status in {1, 3}
    assert answer.rule("false-positive-risk", record["id"])["outcome"] == "undecided"
