"""Verdicts of an invented field station, for whole-text comparisons."""

from __future__ import annotations

from gatecheck.model.verdict import Figures, Finding, Judged, Place, PolicyUsed, Problem, Verdict

POLICY = PolicyUsed("field-station reporting policy", "sha256:" + "1a2b3c4d5e6f" * 5 + "0f1e", "base")

DRAINAGE = Judged(
    id="drainage/earthworm-biomass",
    at=Place("results/drainage.json", 4),
    claim="Drainage increases earthworm biomass.",
    result="two-sample t(34) = 2.21, p = 0.034; mean difference 4.2 g/m2 (95 % interval 0.34 to 8.06)",
    evidence=Figures(
        alternative="observed-effect",
        log_likelihood_ratio=1.6213,
        prior=0.5,
        prior_from="policy",
        false_positive_risk=0.1650,
        prior_needed=0.7897,
        note="The effect as observed is a favourable choice; against the designed effect the risk is higher.",
    ),
    findings=(
        Finding("reported-in-full", "short", "note", None, None, "found no list of units left out", "give it"),
        Finding("numbers-agree", "met", "block"),
        Finding(
            "prior-needed",
            "short",
            "block",
            0.7897,
            0.5,
            "found that a prior of 79 % is needed to bring the risk to 5 %; the policy allows at most 50 %",
            "stronger data, or a claim worded as suggestive",
        ),
        Finding(
            "false-positive-risk",
            "short",
            "block",
            0.1650,
            0.05,
            "found a risk of 17 % against the effect as observed, with a prior of 50 %; "
            "the policy allows at most 5 %",
            "about 31 plots per group if the effect stays the same; or claim it as suggestive only",
        ),
        Finding("seed-noise", "does-not-apply", "off"),
    ),
    also_at=(Place("notebooks/drainage.ipynb", 210, 7, 1),),
    alternatives=(
        Figures("design-effect", 1.3403, 0.5, "policy", 0.2074, 0.83, ""),
        Figures("bound", 0.708, 0.5, "policy", 0.33, 0.9, ""),
    ),
)
LIMING = Judged(
    id="liming/soil-ph",
    at=Place("results/liming.json", 2),
    claim="Liming raises soil pH.",
    result="two-sample t(58) = 6.1, p < 0.0001; mean difference 0.61 (95 % interval 0.41 to 0.81)",
    evidence=Figures("observed-effect", 15.2, 0.5, "policy", 2.5e-7, 4.8e-6, ""),
    findings=(Finding("false-positive-risk", "met", "block", 2.5e-7, 0.05),),
)
MULCH = Judged(
    id="mulch/moisture",
    at=Place("results/mulch.json", 2),
    claim="Mulch keeps topsoil moister than bare ground.",
    result="Welch t(41.3) = 3.9, p = 0.0004",
    evidence=Figures("design-effect", 6.1, 0.3, "record", 0.0022, 0.04, ""),
    findings=(Finding("false-positive-risk", "met", "block", 0.0022, 0.05),),
)
ROWS = Judged(
    id="rows/mildew",
    at=Place("results/rows.json", 2),
    claim="Wider rows lower mildew",
    result="rank sum U = 88, p = 0.02",
    evidence=Figures("none", None, 0.5, "policy", None, None, "A rank sum has no such ratio."),
    findings=(
        Finding(
            "false-positive-risk",
            "undecided",
            "block",
            None,
            0.05,
            "the statistic of this test carries no likelihood ratio; the policy allows a risk of at most 5 %",
            "give the estimate with its standard error",
        ),
    ),
)
SHADE = Judged(
    id="shade/yield",
    at=Place("results/shade.json", 2),
    claim="Shade lowers yield.",
    result="two-sample t(20) = 2.3, p = 0.032",
    evidence=Figures("observed-effect", 1.7, 0.5, "policy", 0.15, 0.78, ""),
    findings=(
        Finding(
            "false-positive-risk",
            "waived",
            "block",
            0.15,
            0.05,
            "found 15 %; the policy allows at most 5 %; waived by the field board until 2031-09-01",
        ),
    ),
)
SLOPE = Judged(
    id="slope/covariate",
    at=Place("results/slope.json", 2),
    claim=None,
    result="r(34) = 0.11, p = 0.52",
    evidence=None,
    findings=(Finding("numbers-agree", "met", "block"),),
)
WEEDS = Judged(
    id="weeds/cover",
    at=Place("results/weeds.json", 2),
    claim=None,
    result="t(20) = 2.3, p = 0.20",
    evidence=None,
    findings=(
        Finding("numbers-agree", "short", "block", None, None, "found that t and df give p = 0.032, not 0.20"),
    ),
)
OLD = Judged(
    id="yield/2029",
    at=Place("results/2029.json", 2),
    claim="The 2029 mixture yields more.",
    result="t(12) = 2.2, p = 0.048",
    evidence=None,
    findings=(Finding("false-positive-risk", "short", "block", None, 0.05, "found 21 %"),),
    counts_now=False,
)
BROKEN = Problem(
    Place("results/broken.json", 9),
    "the document ends inside a text that begins on this line",
    "write the file again from the analysis, or exclude it in the scan section of the policy",
)

STANDS = Verdict(POLICY, (SLOPE, MULCH, SHADE, OLD, LIMING))
FALLS_SHORT = Verdict(
    POLICY,
    (SHADE, DRAINAGE, LIMING, MULCH, SLOPE, WEEDS),
    (),
    ("the policy changed in this branch, and the one of the base revision was applied",),
)
CANNOT_JUDGE = Verdict(None, (ROWS,), (BROKEN,))
BOTH = Verdict(POLICY, (SLOPE, ROWS, DRAINAGE, LIMING), (BROKEN,))

BY_NAME = {"stands": STANDS, "falls-short": FALLS_SHORT, "cannot-judge": CANNOT_JUDGE, "both": BOTH}
