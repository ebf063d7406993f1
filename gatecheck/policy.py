"""The team's reporting policy (`policy/1`) as typed values; every complaint names its key."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import field
from typing import Annotated, Any, Literal

from gatecheck.globs import matches
from gatecheck.model.marks import OneOrMore, Range
from gatecheck.model.plan_settings import PlanSettings
from gatecheck.model.record import Aim, OpenProbability, Record, Role, Status, Text
from gatecheck.model.rerun_settings import RerunSettings
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Enforce
from gatecheck.schema.read import Fault, nearest_advice, read

AlternativeName = Literal["observed-effect", "design-effect", "default-prior", "bound"]
Pooling = Literal["random", "fixed", "apart"]
Globs = Annotated[tuple[Text, ...], OneOrMore()]
Document = dict[str, Any]
_Scale = Annotated[float, Range(0, low_open=True)]
#: Half the root of 2, "medium" in the literature (some programs round it to 0.707).
DEFAULT_SCALE = math.sqrt(2) / 2


@struct
class RuleSettings:
    """What every rule's settings hold; a rule adds its own."""

    enforce: Annotated[Enforce, "block: a shortfall fails the gate; note: it is listed; off"] = "block"


@struct
class ScanSettings:
    """Which files are looked at."""

    include: Annotated[Globs, "globs of the paths to look at"] = ("**",)
    exclude: Annotated[tuple[Text, ...], OneOrMore(least=0), "globs of the paths to leave out"] = ()


@struct
class EvidenceSettings:
    """How evidence is weighed."""

    alternative: Annotated[
        tuple[AlternativeName, ...], OneOrMore(), "the first of these that the record allows"
    ] = ("observed-effect",)
    prior: Annotated[OpenProbability, "probability of a real effect, where the record sets none"] = 0.5
    scale: Annotated[_Scale, "scale of the default Cauchy prior on a standardised difference"] = DEFAULT_SCALE
    together: Annotated[
        Pooling,
        "how records that answer one hypothesis on data of their own are pooled: random effects, fixed, apart",
    ] = "random"


@struct
class EvidenceOverride:
    """How evidence is weighed for the records that match."""

    alternative: Annotated[tuple[AlternativeName, ...] | None, OneOrMore(), "as under evidence"] = None
    prior: Annotated[OpenProbability | None, "as under evidence"] = None
    scale: Annotated[_Scale | None, "as under evidence"] = None
    together: Annotated[Pooling | None, "as under evidence"] = None


@struct
class Match:
    """Which records an override is for: all that is named must hold; of several values, one."""

    status: Annotated[tuple[Status, ...] | None, OneOrMore(), "status of the record"] = None
    role: Annotated[tuple[Role, ...] | None, OneOrMore(), "role of the record"] = None
    aim: Annotated[tuple[Aim, ...] | None, OneOrMore(), "aim of the record"] = None
    id: Annotated[Globs | None, "globs of ids"] = None
    path: Annotated[Globs | None, "globs of the paths of records"] = None
    tag: Annotated[Globs | None, "a tag of the record"] = None
    harm: Annotated[bool | None, "whether the record is of a safety outcome"] = None

    def admits(self, record: Record, path: str) -> bool:
        """Whether the override is for `record`, which stands in the file `path`."""
        return (
            (self.status is None or record.status in self.status)
            and (self.role is None or record.role in self.role)
            and (self.aim is None or record.aim in self.aim)
            and (self.id is None or matches(self.id, record.id))
            and (self.path is None or matches(self.path, path))
            and (self.tag is None or not set(self.tag).isdisjoint(record.tags))
            and (self.harm is None or self.harm == record.harm)
        )


@struct
class Override:
    """Other settings for the records that match."""

    match: Annotated[Match, "which records"]
    rules: Annotated[dict[str, Any], "settings of rules, merged over those of the policy"] = field(
        default_factory=dict
    )
    evidence: Annotated[EvidenceOverride, "settings of evidence, merged likewise"] = EvidenceOverride()


@struct
class PolicyDocument:
    """The team's reporting policy."""

    gatecheck: Annotated[Literal["policy/1"], "kind and version of this document"]
    name: Annotated[Text, "name of the policy"] = "unnamed policy"
    scan: Annotated[ScanSettings, "which files are looked at"] = ScanSettings()
    at_least: Annotated[Annotated[int, Range(0)], "with fewer records than this, the gate cannot judge"] = 1
    evidence: Annotated[EvidenceSettings, "how evidence is weighed"] = EvidenceSettings()
    plans: Annotated[PlanSettings, "where plans lie, and whose word counts for their date"] = PlanSettings()
    rerun: Annotated[RerunSettings, "what `gatecheck rerun` runs; nothing else runs it"] = RerunSettings()
    rules: Annotated[dict[str, Any], "settings by rule; a rule that is not named is off"] = field(
        default_factory=dict
    )
    for_: Annotated[tuple[Override, ...], "overrides, in order; the last match wins"] = ()


@struct
class Applied:
    """What the policy asks of one record: settings by rule, and how evidence is weighed."""

    rules: Mapping[str, RuleSettings]
    evidence: EvidenceSettings


@struct
class Policy:
    """A policy that was read without fault, with the settings of each rule in their types."""

    document: PolicyDocument
    settings: Mapping[str, type[RuleSettings]]
    always_on: frozenset[str]
    _worked_out: dict[tuple[int, ...], Applied] = field(default_factory=dict)

    def for_record(self, record: Record, path: str) -> Applied:
        """Return what the policy asks of `record`, which stands in the file `path`."""
        rows = tuple(row for row, override in enumerate(self.document.for_) if override.match.admits(record, path))
        if rows not in self._worked_out:
            self._worked_out[rows] = self._apply([self.document.for_[row] for row in rows])
        return self._worked_out[rows]

    @property
    def in_general(self) -> Applied:
        """What the policy asks where no override matches, such as of a plan."""
        return self._apply([])

    def _apply(self, overrides: list[Override]) -> Applied:
        evidence = self.document.evidence
        for override in overrides:
            evidence = EvidenceSettings(
                override.evidence.alternative or evidence.alternative,
                override.evidence.prior or evidence.prior,
                override.evidence.scale or evidence.scale,
                override.evidence.together or evidence.together,
            )
        merged = _merge(self.document.rules, self.always_on, overrides)
        on = {name: raw for name, raw in merged.items() if not _is_off(raw)}
        rules = {name: read(self.settings[name], raw)[0] for name, raw in on.items()}
        return Applied({name: found for name, found in rules.items() if found is not None}, evidence)


def _merge(rules: Document, always_on: frozenset[str], overrides: list[Override]) -> Document:
    merged: Document = {name: {} for name in always_on}
    for layer in (rules, *(override.rules for override in overrides)):
        for name, raw in layer.items():
            given = {} if raw is None else raw  # `numbers-agree:` with nothing behind it
            merged[name] = {**merged.get(name, {}), **given} if isinstance(given, Mapping) else given
    return merged


def read_policy(
    document: Any, settings: Mapping[str, type[RuleSettings]], always_on: frozenset[str]
) -> tuple[Policy | None, tuple[Fault, ...]]:
    """Read a parsed policy document.

    `settings` gives the settings of each rule that there is by its name, `always_on` those rules that hold
    although the policy does not name them. Returns the policy and no fault, or no policy and all the faults.
    """
    read_document, faults = read(PolicyDocument, document)
    if read_document is None:
        return None, faults
    found = tuple(_faults_of_rules(read_document, settings, always_on))
    return (None, found) if found else (Policy(read_document, settings, always_on), ())


def _faults_of_rules(
    document: PolicyDocument, settings: Mapping[str, type[RuleSettings]], always_on: frozenset[str]
) -> list[Fault]:
    merged = _merge(document.rules, always_on, [])
    faults = _faults_of_layer(("rules",), document.rules, merged, settings)
    for row, override in enumerate(document.for_):
        merged = _merge(document.rules, always_on, [override])
        faults += _faults_of_layer(("for", row, "rules"), override.rules, merged, settings)
    return faults


def _faults_of_layer(
    path: tuple[str | int, ...],
    layer: Document,
    merged: Document,
    settings: Mapping[str, type[RuleSettings]],
) -> list[Fault]:
    faults = []
    for name in layer:
        if name not in settings:
            faults.append(Fault((*path, name), "is no known rule", nearest_advice(name, settings)))
            continue
        if _is_off(merged[name]):
            continue
        _, wrong = read(settings[name], merged[name])
        faults += [Fault((*path, name, *each.path), each.message, each.advice) for each in wrong]
    return faults


def _is_off(raw: Any) -> bool:
    """A rule that is off needs no other settings."""
    return isinstance(raw, Mapping) and raw.get("enforce") == "off"


#: What applies where a tree holds no policy of its own.
STARTING_POLICY: Document = {
    "gatecheck": "policy/1",
    "name": "built-in starting policy",
    "evidence": {"alternative": "observed-effect", "prior": 0.5},
    "rules": {
        "false-positive-risk": {"limit": 0.05},
        "prior-needed": {"risk": 0.05, "limit": 0.5},
        "numbers-agree": {},
        "reported-in-full": {},
    },
    "for": [
        {
            "match": {"status": ["exploratory", "descriptive"]},
            "rules": {"false-positive-risk": {"enforce": "note"}, "prior-needed": {"enforce": "note"}},
        }
    ],
}
