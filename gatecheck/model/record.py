"""The result record: one inferential result that analysis code emits (`record/1`)."""

from __future__ import annotations

from typing import Annotated, Literal

from gatecheck.model.marks import Length, OneOrMore, Pattern, Range
from gatecheck.model.numbers import Reported
from gatecheck.model.struct import struct

Status = Literal["confirmatory", "exploratory", "descriptive"]
Role = Literal["primary", "secondary", "other"]
Aim = Literal["difference", "superiority", "noninferiority", "equivalence", "estimation"]
StatisticName = Literal["t", "z", "chi2", "F", "r"]
PKind = Literal["raw", "adjusted", "permutation", "exact"]
Tail = Literal["greater", "less"]
Scale = Literal["linear", "log"]
Procedure = Literal[
    "none",
    "bonferroni",
    "holm",
    "hochberg",
    "hommel",
    "benjamini-hochberg",
    "benjamini-yekutieli",
    "fixed-sequence",
    "weighted-holm",
    "graphical",
]
Boundary = Literal["pocock", "obrien-fleming", "haybittle-peto", "spending-obrien-fleming", "spending-pocock"]
Known = Literal["before-data", "before-results", "after-results"]
Called = Literal["findings", "candidates"]
StudyDesign = Literal["randomised", "quasi-experimental", "observational"]

Text = Annotated[str, Pattern(r"\S", "some text")]
Identifier = Annotated[
    str,
    Pattern(r"^[^\u0000-\u0020\u007f-\u00a0\u2028\u2029]{1,200}$", "1 to 200 characters without spaces"),
]
Count = Annotated[int, Range(0)]
PositiveCount = Annotated[int, Range(1)]
Probability = Annotated[Reported, Range(0, 1)]
OpenProbability = Annotated[float, Range(0, 1, low_open=True, high_open=True)]
Positive = Annotated[Reported, Range(0, low_open=True)]
NotNegative = Annotated[Reported, Range(0)]
Share = Annotated[float, Range(0, 1)]


@struct
class NamedStatistic:
    """A statistic without a distribution of its own in this format, such as the U of a rank test."""

    symbol: Annotated[Text, "its letter in the trade"]
    value: Annotated[Reported, "its value"]


@struct
class Test:
    """The test behind a result."""

    name: Annotated[Text | None, "the trade's name of the test"] = None
    statistic: Annotated[StatisticName | None, "its distribution without an effect"] = None
    value: Annotated[Reported | None, "the statistic; absent: recovered from p, df and sides"] = None
    df: Annotated[
        tuple[Positive, ...] | None,
        OneOrMore(2),
        "degrees of freedom: one number, for F a list of two (numerator, denominator)",
    ] = None
    p: Annotated[Probability | None, 'probability; a text such as "0.034" or "<0.001" is as reported'] = None
    p_kind: Annotated[PKind, "how p was made"] = "raw"
    resamples: Annotated[PositiveCount | None, "number of resamples behind a permutation p"] = None
    sides: Annotated[Literal[1, 2] | None, "1 or 2 (absent: 2)"] = None
    tail: Annotated[Tail | None, "the direction tested where sides is 1"] = None
    alpha: Annotated[OpenProbability | None, "the significance level of the test"] = None
    named_statistic: Annotated[
        NamedStatistic | None, "the statistic of a test that is none of t, z, chi2, F and r"
    ] = None


@struct
class Interval:
    """An uncertainty interval of the estimate."""

    level: Annotated[OpenProbability, "confidence level, such as 0.95"]
    low: Annotated[Reported | None, "lower limit; absent: unbounded below"] = None
    high: Annotated[Reported | None, "upper limit; absent: unbounded above"] = None
    adjusted: Annotated[bool, "true where the level was adjusted for several comparisons"] = False


@struct
class Estimate:
    """The size of the effect, with its precision."""

    measure: Annotated[Text, "what is estimated, such as mean difference or odds ratio"]
    value: Annotated[Reported, "the estimate"]
    unit: Annotated[str | None, 'unit of the estimate; "1" for a number without unit'] = None
    null: Annotated[Reported | None, "the value of no effect (absent: 0, on a log scale 1)"] = None
    scale: Annotated[Scale, "scale on which the interval is symmetric: log for ratios"] = "linear"
    standard_error: Annotated[Positive | None, "standard error (log scale: of the logarithm)"] = None
    interval: Annotated[Interval | None, "uncertainty interval"] = None
    smallest_effect: Annotated[Reported | None, "smallest effect of interest, in the unit of value"] = None
    margin: Annotated[
        tuple[Reported, ...] | None, Length(2), "equivalence or non-inferiority margin: [low, high]"
    ] = None


@struct
class Group:
    """One group of the sample."""

    name: Annotated[Text, "name of the group"]
    n: Annotated[Count, "number of units analysed"]
    mean: Annotated[Reported | None, "mean"] = None
    sd: Annotated[NotNegative | None, "standard deviation"] = None
    events: Annotated[Count | None, "number of units with the event"] = None
    integer_items: Annotated[
        PositiveCount | None, "number of whole-number items that each unit's score averages"
    ] = None


@struct
class Exclusion:
    """Units left out of the analysis."""

    n: Annotated[Count, "number of units left out"]
    reason: Annotated[Text, "why"]


@struct
class Sample:
    """What was counted."""

    unit: Annotated[Text | None, "the experimental unit, such as plot or patient"] = None
    n: Annotated[PositiveCount | None, "number of units analysed"] = None
    planned_n: Annotated[PositiveCount | None, "number of units planned"] = None
    groups: Annotated[tuple[Group, ...], "the groups compared"] = ()
    excluded: Annotated[tuple[Exclusion, ...], "units left out, by reason"] = ()
    planned_split: Annotated[
        tuple[Annotated[float, Range(0, low_open=True)], ...] | None, "planned ratio of the groups"
    ] = None
    clusters: Annotated[PositiveCount | None, "number of clusters that were assigned or sampled"] = None


@struct
class Alternative:
    """The effect that the study was designed to find."""

    effect: Annotated[float, "its size"]
    scale: Annotated[
        Literal["standardised", "raw"],
        "standardised: d for means, r for correlations, h for proportions, w for chi2, f for F; "
        "raw: in the unit of the estimate",
    ]


@struct
class Prior:
    """Probability of a real effect before these data, and what it rests on."""

    probability: Annotated[OpenProbability, "between 0 and 1, both excluded"]
    basis: Annotated[Text, "what the probability rests on"]


@struct
class Family:
    """The set of tests that stands behind one claim."""

    name: Annotated[Text, "name of the family"]
    size: Annotated[PositiveCount | None, "number of tests declared"] = None
    procedure: Annotated[Procedure, "how the error over the family is controlled"] = "none"
    position: Annotated[PositiveCount | None, "place of this test in a fixed sequence"] = None
    adjusted_p: Annotated[Probability | None, "p adjusted by that procedure"] = None
    weight: Annotated[
        Share | None, "share of the family's alpha that this test has (weighted-holm, graphical: at the start)"
    ] = None
    passes_on: Annotated[
        dict[str, Share] | None,
        "graphical: by id of another member, the part of its share that goes there when this test is rejected",
    ] = None


@struct
class Removed:
    """Tests left out of a screen before its hits were counted."""

    n: Annotated[Count, "number of tests left out"]
    reason: Annotated[Text, "why"]
    planned: Annotated[bool, "true where this filter was registered before the data"] = False


@struct
class Screen:
    """A whole screen, whose list of hits is one claim on many tests."""

    tests: Annotated[PositiveCount | None, "number of tests among which the hits were counted"] = None
    hits: Annotated[Count | None, "number of tests called positive"] = None
    alpha: Annotated[OpenProbability | None, "level of each test"] = None
    power: Annotated[
        Annotated[float, Range(0, 1, low_open=True)] | None, "power of each test against a true effect, assumed"
    ] = None
    prior: Annotated[OpenProbability | None, "share of true effects among the tests, expected before"] = None
    called: Annotated[Called, "findings, or candidates that are still to be confirmed"] = "findings"
    removed: Annotated[tuple[Removed, ...], "tests left out before the hits were counted, by reason"] = ()


@struct
class Look:
    """The interim look at which this result was taken."""

    number: Annotated[PositiveCount, "which look this is"]
    planned: Annotated[PositiveCount | None, "number of looks planned"] = None
    information: Annotated[
        Annotated[float, Range(0, 1, low_open=True)] | None, "fraction of the planned information"
    ] = None
    boundary: Annotated[Boundary | None, "stopping boundary planned"] = None
    schedule: Annotated[
        tuple[Annotated[float, Range(0, 1, low_open=True)], ...],
        "information at each planned look, rising to 1; absent: equally spaced",
    ] = ()


@struct
class Outcome:
    """What is measured, defined in full."""

    variable: Annotated[Text, "the variable"]
    metric: Annotated[Text | None, "how it is expressed, such as change from baseline"] = None
    aggregation: Annotated[Text | None, "how units are summarised, such as mean or share"] = None
    time_point: Annotated[Text | None, "when it is measured"] = None


@struct
class PlanReference:
    """The registration, and the hypothesis in it that this result answers."""

    file: Annotated[Text, "path of the plan in the repository"]
    hypothesis: Annotated[Text | None, "id of the hypothesis in the plan"] = None


@struct
class Deviation:
    """A disclosed departure from the plan."""

    field: Annotated[Text, "field of the plan"]
    planned: Annotated[Text, "what was planned"]
    done: Annotated[Text, "what was done"]
    reason: Annotated[Text, "why"]
    known: Annotated[Known, "when the departure was decided"]


@struct
class InputFile:
    """One input of the analysis."""

    path: Annotated[Text, "path in the repository"]
    sha256: Annotated[
        Annotated[str, Pattern("^[0-9a-f]{64}$", "64 hexadecimal digits")] | None, "hash of its bytes"
    ] = None


@struct
class Provenance:
    """Where the result comes from."""

    code: Annotated[Text | None, "path of the code that emitted the record"] = None
    commit: Annotated[Text | None, "commit of that code"] = None
    inputs: Annotated[tuple[InputFile, ...], "inputs of the analysis"] = ()
    made_at: Annotated[Text | None, "time, where the author asked for it"] = None
    software: Annotated[dict[str, str] | None, "versions by name"] = None


@struct
class Record:
    """One result that analysis code emits."""

    gatecheck: Annotated[Literal["record/1"], "kind and version of this document"]
    id: Annotated[Identifier, "stable name of the hypothesis or contrast, unique in a tree"]
    claim: Annotated[Text | None, "the sentence that the team asserts; absent: nothing is claimed"] = None
    status: Annotated[Status, "whether the test was planned"] = "exploratory"
    role: Annotated[Role, "place of the outcome among the others"] = "other"
    aim: Annotated[Aim, "what the claim is about"] = "difference"
    importance: Annotated[bool, "true where the claim says that the effect is large enough to matter"] = False
    harm: Annotated[bool, "true for a safety outcome: no strong evidence is demanded to report it"] = False
    aliases: Annotated[tuple[Identifier, ...], "earlier ids"] = ()
    replicates: Annotated[
        Identifier | None, "id of the record whose hypothesis this one tests again, on data of its own"
    ] = None
    compares: Annotated[
        tuple[Identifier, ...] | None,
        Length(2),
        "ids of the two records whose effects are claimed to differ, each on units of its own",
    ] = None
    design: Annotated[StudyDesign | None, "how the groups compared came about; absent: not told"] = None
    tags: Annotated[tuple[Text, ...], "free words that policy overrides can match"] = ()
    test: Annotated[Test | None, "the test"] = None
    estimate: Annotated[Estimate | None, "the estimate"] = None
    sample: Annotated[Sample | None, "the sample"] = None
    alternative: Annotated[Alternative | None, "the effect that the study was designed to find"] = None
    prior: Annotated[Prior | None, "probability of a real effect before these data"] = None
    family: Annotated[Family | None, "the set of tests behind the claim"] = None
    screen: Annotated[Screen | None, "the whole screen, where the claim is its list of hits"] = None
    look: Annotated[Look | None, "the interim look"] = None
    outcome: Annotated[Outcome | None, "what was measured"] = None
    population: Annotated[Text | None, "the analysis population"] = None
    covariates: Annotated[tuple[Text, ...] | None, "covariates of the analysis; absent: not told"] = None
    plan: Annotated[PlanReference | None, "the registration"] = None
    deviations: Annotated[tuple[Deviation, ...], "disclosed departures from the plan"] = ()
    provenance: Annotated[Provenance | None, "where the result comes from"] = None
