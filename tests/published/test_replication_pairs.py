"""Does the verdict say something about the world? Findings that the gate lets stand, and their replications.

73 findings in psychology and their independent replications: Open Science Collaboration (2015), Estimating the
reproducibility of psychological science, Science 349, aac4716 (the meta-analytic subset, dedicated to the public
domain under CC0 1.0). The table of pairs is not part of the project: the environment variable
GATECHECK_REPLICATIONS names it.
"""

from __future__ import annotations

import csv
import os
from collections.abc import Callable, Mapping
from pathlib import Path

import numpy as np
import pytest
from scipy import stats
from support import POLICY, changed, write_tree

from gatecheck.gate import Request, check
from gatecheck.weigh.replication import Calibration, log_p_difference, log_p_same_direction, log_sceptical_p

VARIABLE = "GATECHECK_REPLICATIONS"
Pair = Mapping[str, str]


@pytest.fixture(scope="module", name="pairs")
def read_pairs() -> list[Pair]:
    """The originals that were significant (two-sided p < .05), for only these made a claim."""
    path = os.environ.get(VARIABLE)
    if path is None:
        missing = f"set {VARIABLE} to the table of replication pairs (columns pair, z_original, se_z_original, ...)"
        if "CI" in os.environ:
            pytest.fail(missing)
        pytest.skip(missing)
    with Path(path).open(encoding="utf-8", newline="") as table:
        every = list(csv.DictReader(table))
    assert len(every) == 73
    return [pair for pair in every if float(pair["p_original"]) < 0.05]


def replicated(pair: Pair) -> bool:
    """One-sided p in the direction of the original at most .025."""
    return float(pair["p_replication_one_sided"]) <= 0.025


def record(pair: Pair) -> dict[str, object]:
    """The original as it would be declared: z of Fisher's transformed correlation, nothing of the replication."""
    return {
        "gatecheck": "record/1",
        "id": pair["pair"],
        "claim": "The two are related.",
        "status": "confirmatory",
        "role": "primary",
        "aim": "difference",
        "test": {
            "name": "Fisher z",
            "statistic": "z",
            "value": float(pair["z_original"]) / float(pair["se_z_original"]),
            "p": pair["p_original"],
            "sides": 2,
        },
        "sample": {"unit": "participant", "n": int(pair["n_original"])},
    }


def judged(folder: Path, pairs: list[Pair], alternative: str, prior: float) -> Mapping[str, tuple[int, int]]:
    """How many originals have each standing, and how many of them replicated."""
    policy = changed(POLICY, evidence={"alternative": alternative, "prior": prior})
    verdict = check(Request(write_tree(folder, *map(record, pairs), policy=policy)))
    assert verdict.problems == ()
    standing = {one.id: one.standing for one in verdict.judged}
    counts: dict[str, tuple[int, int]] = {}
    for pair in pairs:
        n, successes = counts.get(standing[pair["pair"]], (0, 0))
        counts[standing[pair["pair"]]] = (n + 1, successes + replicated(pair))
    return counts


# The counts are facts of the data set, as found with this gate; the p value is Fisher's exact one, one-sided, of
# the difference between the two shares. The rows regroup the same 65 findings: they are not six trials of the idea.
@pytest.mark.parametrize(
    ("alternative", "prior", "stands", "falls_short", "exact_p"),
    [
        ("observed-effect", 0.5, (35, 13), (30, 8), 0.264),
        ("observed-effect", 0.25, (26, 12), (39, 9), 0.047),
        ("observed-effect", 0.1, (19, 11), (46, 10), 0.006),
        ("bound", 0.5, (30, 13), (35, 8), 0.068),
        ("bound", 0.25, (22, 11), (43, 10), 0.030),
        ("bound", 0.1, (14, 8), (51, 13), 0.030),
    ],
)
def test_findings_that_stand_replicate_more_often_than_those_held_back(
    tmp_path: Path,
    pairs: list[Pair],
    record_property: Callable[[str, object], None],
    alternative: str,
    prior: float,
    stands: tuple[int, int],
    falls_short: tuple[int, int],
    exact_p: float,
) -> None:
    """At a limit of 5 % on the false positive risk, with 21 of 65 replicated in all."""
    found = judged(tmp_path, pairs, alternative, prior)

    record_property("stand: n, replicated", found["stands"])
    record_property("held back: n, replicated", found["falls-short"])
    assert found == {"stands": stands, "falls-short": falls_short}
    assert (stands[0] + falls_short[0], stands[1] + falls_short[1]) == (65, 21)
    assert stands[1] / stands[0] > falls_short[1] / falls_short[0]
    table = np.array([[n_replicated, n - n_replicated] for n, n_replicated in (stands, falls_short)])
    assert stats.fisher_exact(table, alternative="greater").pvalue == pytest.approx(exact_p, abs=5e-4)


def test_the_criteria_of_replication_on_the_same_pairs(pairs: list[Pair]) -> None:
    """Own criteria against the table's p values, and how many pairs each criterion calls replicated."""
    z_o, se_o, z_r, se_r, one_sided, two_sided = (
        np.array([float(pair[column]) for pair in pairs])
        for column in (
            "z_original", "se_z_original", "z_replication", "se_z_replication", "p_replication_one_sided",
            "p_replication",
        )
    )  # fmt: skip
    log_p = log_p_same_direction(z_o, z_r, se_r)

    assert np.exp(log_p) == pytest.approx(one_sided, rel=1e-6)
    assert np.exp(log_p_difference(0.0, 0.0, z_r, se_r)) == pytest.approx(two_sided, rel=1e-6)
    assert int((log_p <= np.log(0.025)).sum()) == 21
    assert int((log_p_difference(z_o, se_o, z_r, se_r) > np.log(0.05)).sum()) == 44
    assert int((log_p_difference(z_o, 0.0, z_r, se_r) > np.log(0.05)).sum()) == 25
    sceptical = [
        log_sceptical_p(z_o / se_o, z_r / se_r, (se_o / se_r) ** 2, calibration=each, one_sided=True)
        for each in (Calibration.NOMINAL, Calibration.GOLDEN, Calibration.CONTROLLED)
    ]
    assert [int((each <= np.log(0.025)).sum()) for each in sceptical] == [11, 21, 22]
