"""The answer of `design` against the gate itself: records at the sizes told, weighed as the gate weighs them."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from support import POLICY, Document, changed

from gatecheck.columns import columns_of
from gatecheck.design import design
from gatecheck.evidence import Evidence, weigh_columns
from gatecheck.model.design import Design, DesignQuestion, Least
from gatecheck.model.found import Found
from gatecheck.model.record import Record
from gatecheck.model.verdict import Place
from gatecheck.policies import read_own_policy
from gatecheck.policy import Policy
from gatecheck.schema.records import read_record

Floats = NDArray[np.float64]
LIMIT = 0.05
ALTERNATIVES = ("observed-effect", "design-effect", "default-prior", "bound")
QUESTIONS: tuple[dict[str, Any], ...] = (
    {"test": "two-sample-t", "effect": 0.5},
    {"test": "two-sample-t", "effect": 0.5, "sides": 1, "ratio": 2.5},
    {"test": "one-sample-t", "effect": 0.5, "sides": 1},
    {"test": "paired-t", "effect": 0.4},
    {"test": "one-proportion", "effect": 0.5},
    {"test": "one-proportion", "effect": 0.5, "sides": 1},
    {"test": "two-proportions", "effect": 0.5, "ratio": 0.4},
    {"test": "correlation", "effect": 0.3},
    {"test": "correlation", "effect": 0.3, "sides": 1},
    {"test": "one-way-F", "effect": 0.3, "groups": 2},
    {"test": "one-way-F", "effect": 0.3, "groups": 4},
    {"test": "chi-squared", "effect": 0.3, "df": 1},
    {"test": "chi-squared", "effect": 0.3, "df": 6},
    {"test": "log-rank", "effect": 0.6, "ratio": 2.0},
    {"test": "log-rank", "effect": 0.6, "sides": 1},
)


def policy_by(*alternatives: str) -> Policy:
    policy, faults = read_own_policy(changed(POLICY, evidence__alternative=list(alternatives)))
    assert policy is not None, faults
    return policy


def weighed(documents: Sequence[Document], policy: Policy) -> Evidence:
    found = []
    for row, document in enumerate(documents):
        record, faults = read_record(document)
        assert record is not None, faults
        found.append(Found(record, Place(f"r{row}.json"), document))
    settings = [policy.for_record(one.record, one.at.path).evidence for one in found]
    return weigh_columns(columns_of(found), settings)


def groups(*sizes: int) -> list[Document]:
    return [{"name": f"g{row}", "n": n} for row, n in enumerate(sizes)]


def sampled(answer: Design, least: Least) -> tuple[Document, Any]:
    """The sample of a study of that size, and the degrees of freedom of its statistic."""
    asked, n = answer.question, least.size.n
    second = n if least.size.second is None else least.size.second
    k = asked.groups or 1
    samples: dict[str, tuple[Document, Any]] = {
        "two-sample-t": ({"groups": groups(n, second)}, n + second - 2),
        "one-sample-t": ({"n": n}, n - 1),
        "paired-t": ({"groups": groups(n, n)}, n - 1),
        "one-proportion": ({"n": n}, None),
        "two-proportions": ({"groups": groups(n, second)}, None),
        "correlation": ({"n": n}, n - 2),
        "one-way-F": ({"groups": groups(*[n] * k)}, [k - 1, k * n - k]),
        "chi-squared": ({"n": n}, asked.df),
        "log-rank": ({"groups": groups(3 * n, 6 * n)}, None),
    }
    return samples[asked.test]


def record_of(answer: Design, least: Least, value: float) -> Document:
    """What a study of that size would declare where its statistic comes out as `value`."""
    asked = answer.question
    sample, df = sampled(answer, least)
    test: Document = {"name": asked.test, "statistic": answer.statistic, "value": value}
    if df is not None:
        test["df"] = df
    if asked.sides == 1:
        test |= {"sides": 1, "tail": "greater"}
    record: Document = {"gatecheck": "record/1", "id": "a", "claim": "c", "status": "confirmatory"}
    record |= {"role": "primary", "test": test, "sample": {"unit": "plot", **sample}}
    if asked.test != "log-rank":
        return {**record, "alternative": {"effect": asked.effect, "scale": "standardised"}}
    share = 1 / (1 + (asked.ratio or 1))
    error = 1 / math.sqrt(least.size.n * share * (1 - share))
    estimate = {
        "measure": "hazard ratio",
        "value": math.exp(-value * error),
        "standard_error": error,
        "scale": "log",
    }
    return {**record, "estimate": estimate, "alternative": {"effect": asked.effect, "scale": "raw"}}


@pytest.mark.parametrize(
    ("question", "alternative"),
    [
        (question, alternative)
        for question in QUESTIONS
        for alternative in ALTERNATIVES
        if (question["test"], alternative) != ("log-rank", "default-prior")
    ],
    ids=str,
)
def test_the_gate_lets_stand_from_the_value_told_on(question: dict[str, Any], alternative: str) -> None:
    """Where the test does not allow the alternative both turn to the next one of the policy."""
    policy = policy_by(alternative, "observed-effect")
    answer = design(DesignQuestion(**question), policy)
    rows = [each.least for each in answer.levels if each.least is not None]

    at, short = (
        weighed([record_of(answer, least, least.value * near) for least in rows], policy)
        for near in (1 + 1e-6, 1 - 1e-6)
    )

    assert len(rows) == 4
    assert at.alternative == tuple([answer.alternative] * 4)
    assert np.all(at.false_positive_risk <= LIMIT)
    assert np.all(short.false_positive_risk > LIMIT)
    assert [least.p for least in rows] == pytest.approx(np.exp(at.statistics.log_p), rel=2e-4)


def pooled_t(first: Floats, second: Floats) -> Floats:
    """Student's t of two groups, studies in rows."""
    n1, n2 = first.shape[1], second.shape[1]
    squares = (n1 - 1) * first.var(axis=1, ddof=1) + (n2 - 1) * second.var(axis=1, ddof=1)
    error = np.sqrt(squares / (n1 + n2 - 2) * (1 / n1 + 1 / n2))
    t: Floats = (first.mean(axis=1) - second.mean(axis=1)) / error
    return t


def simulated(answer: Design, least: Least, studies: int) -> Floats:
    """Statistics of simulated studies in which the true effect is the one asked about."""
    generator = np.random.default_rng(20310402)
    asked, n = answer.question, least.size.n
    if asked.test == "two-sample-t":
        first = generator.normal(asked.effect, 1, (studies, n))
        return pooled_t(first, generator.normal(0, 1, (studies, least.size.second or n)))
    if asked.test == "correlation":
        x = generator.normal(size=(studies, n))
        y = asked.effect * x + math.sqrt(1 - asked.effect**2) * generator.normal(size=(studies, n))
        x, y = x - x.mean(axis=1, keepdims=True), y - y.mean(axis=1, keepdims=True)
        r: Floats = (x * y).sum(axis=1) / np.sqrt((x**2).sum(axis=1) * (y**2).sum(axis=1))
        return r
    # Three means whose standard deviation (divisor 3) is f.
    means = asked.effect * np.array([-1, 0, 1]) * math.sqrt(1.5)
    data = generator.normal(means[None, :, None], 1, (studies, 3, n))
    between = n * data.mean(axis=2).var(axis=1, ddof=1)
    f: Floats = between / data.var(axis=2, ddof=1).mean(axis=1)
    return f


@pytest.mark.parametrize(
    ("question", "alternative"),
    [
        ({"test": "two-sample-t", "effect": 0.6, "ratio": 2.0}, "default-prior"),
        ({"test": "two-sample-t", "effect": 0.6, "sides": 1}, "design-effect"),
        ({"test": "one-way-F", "effect": 0.3, "groups": 3}, "observed-effect"),
        ({"test": "one-way-F", "effect": 0.3, "groups": 3}, "bound"),
        ({"test": "correlation", "effect": 0.4}, "default-prior"),
    ],
    ids=str,
)
def test_the_share_of_simulated_claims_that_the_gate_lets_stand_is_the_assurance_told(
    question: dict[str, Any], alternative: str
) -> None:
    """2,000 seeded studies of the size told, every one weighed by the gate, within four standard errors."""
    policy, studies = policy_by(alternative), 2000
    answer = design(DesignQuestion(**question), policy)
    least = answer.wanted
    assert least is not None

    values = simulated(answer, least, studies)
    evidence = weighed([record_of(answer, least, float(value)) for value in values], policy)
    stands = (evidence.false_positive_risk <= LIMIT) & (values > 0)

    error = math.sqrt(least.assurance * (1 - least.assurance) / studies)
    assert 0.8 <= least.assurance < 0.82
    assert stands.mean() == pytest.approx(least.assurance, abs=4 * error)


def test_records_of_the_tests_are_whole() -> None:
    """A record that could not be read, or was weighed by nothing, would compare nothing."""
    answer = design(DesignQuestion(test="log-rank", effect=0.6), policy_by("design-effect"))
    least = answer.wanted
    assert least is not None
    record, _ = read_record(record_of(answer, least, least.value))

    assert isinstance(record, Record)
    evidence = weighed([record_of(answer, least, least.value)], policy_by("design-effect"))
    assert float(evidence.ncp[0]) == pytest.approx(abs(math.log(0.6)) * math.sqrt(least.size.n) / 2)
