"""An invented plan, the record that keeps it, and promises and tables made by hand."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, TypeVar

from support import Document, changed, drainage

from gatecheck.columns import columns_of
from gatecheck.compare.own_numbers import own_numbers
from gatecheck.evidence import weigh_columns
from gatecheck.model.found import Found
from gatecheck.model.plan import Plan
from gatecheck.model.promise import Promise
from gatecheck.model.record import Record
from gatecheck.model.verdict import Place
from gatecheck.policy import Applied, EvidenceSettings, RuleSettings
from gatecheck.rules.rule import Table
from gatecheck.schema.read import read

M = TypeVar("M")
FILE = "plans/drainage.yaml"
FROZEN_AT = "a1b2c3d4e5f60718293a4b5c6d7e8f9001122334"

HYPOTHESIS: Document = {
    "id": "H1",
    "text": "Drainage increases earthworm biomass.",
    "role": "primary",
    "aim": "difference",
    "direction": "increase",
    "outcome": {
        "variable": "earthworm_biomass",
        "metric": "change from baseline",
        "aggregation": "mean",
        "time_point": "90 days",
    },
    "test": ["two-sample t", "Welch t"],
    "sides": 2,
    "alpha": 0.05,
    "n": {"planned": 40, "unit": "plot"},
    "population": "all plots as assigned",
    "exclusions": ["flooded", "marker lost"],
    "covariates": ["block", "slope"],
    "alternative": {"effect": 1.0, "scale": "standardised"},
    "smallest_effect": 2.0,
    "margin": [-1.5, "1.50"],
    "prior": {"probability": 0.25, "basis": "4 of 16 earlier interventions held up"},
    "looks": {"planned": 3, "boundary": "obrien-fleming"},
    "family": "growth",
}
PLAN: Document = {
    "gatecheck": "plan/1",
    "id": "drainage",
    "title": "Drainage and soil life",
    "data": "none",
    "hypotheses": [HYPOTHESIS],
    "families": {"growth": {"procedure": "fixed-sequence", "order": ["H1", "H2"]}},
}
#: The record that does all that was promised: four plots were flooded.
KEPT: Document = drainage(
    test__name="Student's t-test",
    estimate__smallest_effect=2,
    estimate__margin=["-1.5", 1.5],
    sample__excluded=[{"n": 4, "reason": "Flooded."}],
    prior={"probability": 0.25, "basis": "the plan"},
    family={"name": "growth", "size": 2, "procedure": "fixed-sequence", "position": 1},
    look={"number": 3, "planned": 3, "boundary": "obrien-fleming"},
    outcome=HYPOTHESIS["outcome"],
    population="All plots, as assigned",
    covariates=["slope", "block"],
    plan={"file": FILE, "hypothesis": "H1"},
)


def model(kind: type[M], document: Document) -> M:
    """The document as its typed model; it must be without fault."""
    value, faults = read(kind, document)
    assert value is not None, [f"{fault.field} {fault.message}" for fault in faults]
    return value


def kept(**changes: Any) -> Record:
    """The record that keeps its promise, with other values."""
    return model(Record, changed(KEPT, **changes))


def planned(document: Document = PLAN, **changes: Any) -> Plan:
    """The plan, with another hypothesis H1."""
    return model(Plan, changed(document, hypotheses=[changed(HYPOTHESIS, **changes)]))


def promise(plan: Plan | None = None, **values: Any) -> Promise:
    """What is promised for H1 of the plan, by a plan that was committed before the data."""
    given = planned() if plan is None else plan
    standing = {"grade": "repository-order", "because": "its commit comes before the data", "frozen_at": FROZEN_AT}
    return Promise(FILE, "H1", **{"plan": given, "hypothesis": given.hypotheses[0], **standing, **values})


def deviation(field: str, known: str = "before-data") -> Document:
    """A disclosed departure in that field."""
    return {"field": field, "planned": "one thing", "done": "another", "reason": "a flood", "known": known}


def table(
    records: Sequence[Record],
    promises: Sequence[Promise | None],
    rule: str,
    settings: RuleSettings | None,
) -> Table:
    """A table of these records and promises, under a policy that has this one rule."""
    found = tuple(Found(one, Place(f"r{row:03}.json"), {}) for row, one in enumerate(records))
    columns = columns_of(found)
    evidence = weigh_columns(columns, [EvidenceSettings()] * len(found))
    applied = Applied({} if settings is None else {rule: settings}, EvidenceSettings())
    compared = own_numbers(columns, evidence)
    return Table(columns, evidence, compared, (applied,) * len(found), promises=tuple(promises))
