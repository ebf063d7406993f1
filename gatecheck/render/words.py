"""The sentences that every format for people shares. They may hold text from records: clean them before use."""

from __future__ import annotations

import math

from gatecheck.model.shown import decimal, percent
from gatecheck.model.verdict import Change, Figures, Finding, Judged, Place, PolicyUsed, Problem, Verdict
from gatecheck.render.order import blocked, blocking_findings, place_key

RISK_RULE = "false-positive-risk"
PRIOR_RULE = "prior-needed"

UNKNOWN = "unknown"
NOT_CHECKED = (
    "Not checked: the quality of the data, whether the design supports cause and effect, blinding, "
    "and whether the records tell all that was tried."
)
CAUTION = (
    "Standing means consistent with this team's policy; it does not mean true, important or safe to act on. "
    "Every risk rests on a prior and an alternative that people chose. "
    "Falling short is a statement about a record, not about a person. "
    "In matters of health and safety, local rules and licensed practice decide."
)

_ALTERNATIVES = {
    "observed-effect": "against the effect as observed",
    "design-effect": "against the effect that the study was designed to find",
    "default-prior": "averaged over the default prior of its test",
    "bound": "by the calibration -e p ln p of its p-value",
    "none": "against no alternative",
}
_P_EQUALS = (
    "Colquhoun 2017, Royal Society Open Science 4, 171085 (the result as observed, and not all at least as extreme)"
)
_SOURCES = {
    "observed-effect": _P_EQUALS,
    "design-effect": _P_EQUALS,
    "default-prior": (
        "Rouder and others 2009, Psychonomic Bulletin & Review 16, 225-237 (means); Ly, Verhagen and Wagenmakers "
        "2016, Journal of Mathematical Psychology 72, 19-32 (correlations); Wagenmakers 2007, Psychonomic Bulletin "
        "& Review 14, 779-804 (a prior worth one observation)"
    ),
    "bound": "Sellke, Bayarri and Berger 2001, The American Statistician 55, 62-71",
}
_OUTCOMES = {
    "met": "met",
    "short": "short of the policy",
    "waived": "short of the policy, and waived",
    "does-not-apply": "does not apply",
    "undecided": "cannot be decided",
}
_ENFORCED = {"block": "", "note": "; the policy only notes it", "off": "; the policy leaves it off"}
_ORIGINS = {
    "base": "from the base revision",
    "tree": "from the judged tree",
    "built-in": "built in, as the tree has no policy of its own",
}
_CHANGES = {
    "strengthened": "claims more than at the base",
    "new": "a new claim",
    "changed": "changed",
    "withdrawn": "withdrawn",
}
_KINDS = {
    "plan": ("plan", "plans"),
    "text": ("line of text", "lines of text"),
    "code": ("file of code", "files of code"),
}
_NO_CLAIM = {
    "record": "none; this rule holds for every result that is reported",
    "plan": "none; this is a plan",
    "text": "none of its own; this is a line of text",
    "code": "none; this is a file of code",
}
_IN_BRIEF = {"strengthened": "claiming more", "new": "new", "changed": "changed", "withdrawn": "withdrawn"}
_SHORT_COMMIT = 12
_SHORT_DIGEST = len("sha256:") + 12

_EVEN = math.log(1.05)
_FEW, _HUNDRED, _MILLION = 3.0, 100.0, 1e6


def count(number: int, one: str, many: str | None = None) -> str:
    """Return `number` with its noun, such as ``1 claim`` and ``2 claims``."""
    return f"{number} {one if number == 1 else many or f'{one}s'}"


def headline(verdict: Verdict) -> str:
    """Return the verdict in one sentence with its counts."""
    leads = {"stands": _all_stand, "falls-short": _falls_short, "cannot-judge": _cannot_judge}
    clauses = [*leads[verdict.answer](verdict), *_rest(verdict)]
    return "; ".join(clause for clause in clauses if clause) + "."


def _all_stand(verdict: Verdict) -> list[str]:
    claims, stand = len(verdict.claims), verdict.count("stands")
    if not claims:
        reported = count(len(verdict.reported), "result is", "results are")
        return [f"Nothing falls short: {reported} reported and nothing is claimed"]
    if stand == claims == 1:
        return ["Stands: the only claim meets the policy"]
    if not stand:
        return [f"Nothing blocks: none of {count(claims, 'claim')} meets the policy"]
    return [f"Stands: {'all' if stand == claims else f'{stand} of'} {claims} claims meet the policy"]


def _falls_short(verdict: Verdict) -> list[str]:
    return [f"Falls short of the policy: {_share(verdict, 'falls-short')}", _stand(verdict)]


def _cannot_judge(verdict: Verdict) -> list[str]:
    reasons = []
    if verdict.problems:
        reasons.append(count(len(verdict.problems), "problem"))
    if undecided := _share(verdict, "undecided"):
        reasons.append(f"{undecided} undecided")
    short = _share(verdict, "falls-short")
    return [
        f"Cannot judge: {' and '.join(reasons)}",
        f"{short} short of the policy" if short else "",
        _stand(verdict),
    ]


def _share(verdict: Verdict, standing: str) -> str:
    held = [one for one in blocked(verdict) if one.standing == standing]
    claims, total = sum(one.claim is not None for one in held), len(verdict.claims)
    reported = sum(one.kind == "record" for one in held) - claims
    parts = ["the only claim" if total == 1 else f"{claims} of {total} claims"] if claims else []
    parts += [count(reported, "result without a claim", "results without a claim")] if reported else []
    for kind, (one_of_them, several) in _KINDS.items():
        number = sum(one.kind == kind for one in held)
        parts += [count(number, one_of_them, several)] if number else []
    return " and ".join(parts)


def what_is_claimed(one: Judged) -> str:
    """Return the claim, or what stands in its place."""
    return one.claim or _NO_CLAIM[one.kind]


def _stand(verdict: Verdict) -> str:
    stand = verdict.count("stands")
    if stand:
        return count(stand, "stands", "stand")
    return "none stands" if len(verdict.claims) > 1 else ""


def _rest(verdict: Verdict) -> list[str]:
    waived = sum(one.standing == "waived" for one in verdict.judged)
    unchanged = len(blocked(verdict, counting=False))
    return [
        count(waived, "is waived", "are waived") if waived else "",
        count(unchanged, "is short or undecided", "are short or undecided") + " but unchanged, and not counted"
        if unchanged
        else "",
    ]


def where(place: Place) -> str:
    """Return a place in words."""
    if place.is_whole_tree:
        return "the whole tree"
    if place.cell is None:
        return f"{place.path}, line {place.line}"
    output = "" if place.output is None else f", output {place.output}"
    return f"{place.path}, line {place.line} (cell {place.cell}{output})"


def places(one: Judged) -> str:
    """Return where a record stands, and where else."""
    also = (f"; also in {where(place)}" for place in sorted(one.also_at, key=place_key))
    return where(one.at) + "".join(also)


def rule_words(rule: str) -> str:
    """Return the name of a rule as the beginning of a sentence."""
    words = rule.replace("-", " ")
    return words[:1].upper() + words[1:]


def outcome_words(finding: Finding) -> str:
    """Return what the finding says, in words, and whether the policy acts on it."""
    return _OUTCOMES[finding.outcome] + _ENFORCED[finding.enforce]


def found(finding: Finding) -> str:
    """Return the message of a finding behind the name of its rule."""
    return f"{rule_words(finding.rule)}: {message(finding)}"


def message(finding: Finding) -> str:
    """Return the message of a finding as a sentence; its outcome where it has none."""
    return sentence(finding.message or outcome_words(finding))


def problem(one: Problem) -> str:
    """Return what a problem is and what to do."""
    return with_remedy(sentence(one.message), one.advice)


def with_remedy(said: str, remedy: str) -> str:
    """Return what was `said`, then what would mend it where that is known."""
    return f"{said} To mend: {sentence(remedy)}" if remedy else said


def sentence(text: str) -> str:
    """Return `text` with a full stop where it has no end of its own."""
    # Blanks alone: what else Python strips is a control character, and must be seen.
    bare = text.strip(" \t\r\n")
    return bare if not bare or bare.endswith((".", "!", "?")) else f"{bare}."


def result(one: Judged) -> str:
    """Return the result of a record with its risk, and what keeps it from standing."""
    value = risk(one)
    held = "".join(f" {found(finding)}" for finding in blocking_findings(one))
    return f"{sentence(one.result + (f'; {value}' if value else ''))}{held}"


def limit_of(one: Judged, rule: str) -> float | None:
    """Return the limit that the policy sets for a rule on this record."""
    return next((finding.limit for finding in one.findings if finding.rule == rule), None)


def probability(value: float | None, limit: float | None = None) -> str:
    """Return a probability in percent, or that it is unknown."""
    return UNKNOWN if value is None else percent(value, limit)


def prior(figures: Figures) -> str:
    """Return the prior as a probability, the way in which policies and records give it."""
    return UNKNOWN if figures.prior is None else f"{figures.prior:.4g}"


def alternative_words(alternative: str) -> str:
    """Return in words against what the evidence was weighed."""
    return _ALTERNATIVES.get(alternative, alternative)


def risk(one: Judged) -> str:
    """Return the false positive risk of a record with its assumptions, or nothing where none was computed."""
    figures = one.evidence
    if figures is None or figures.false_positive_risk is None:
        return ""
    value = percent(figures.false_positive_risk, limit_of(one, RISK_RULE))
    chosen = f"prior {prior(figures)}, {alternative_words(figures.alternative)}{_pooled(figures)}"
    return f"false positive risk {value} ({chosen})"


def likelihood_ratio(log_ratio: float | None) -> str:
    """Return a natural log likelihood ratio as odds in words, with the log itself."""
    if log_ratio is None or math.isnan(log_ratio):
        return UNKNOWN
    if abs(log_ratio) < _EVEN:
        favours = "about even"
    else:
        side = "for an effect over none" if log_ratio > 0 else "for no effect over one"
        favours = f"{_odds(abs(log_ratio))} to 1 {side}"
    return f"{favours} (natural log {decimal(log_ratio)})"


def _odds(log_ratio: float) -> str:
    if log_ratio >= math.log(_MILLION):
        return "above 1,000,000"
    ratio = math.exp(log_ratio)
    if ratio < _FEW:
        return f"about {ratio:.2g}"
    return f"about {ratio:.0f}" if ratio < _HUNDRED else f"about {float(f'{ratio:.1e}'):,.0f}"


def assumptions(figures: Figures) -> str:
    """Return on what the figures rest."""
    origin = f", set by the {figures.prior_from}" if figures.prior_from else ""
    return f"{alternative_words(figures.alternative)}, prior {prior(figures)}{origin}{_pooled(figures)}"


def _pooled(figures: Figures) -> str:
    return f"; {figures.pooled}" if figures.pooled else ""


def change(one: Change) -> str:
    """Return what changed in one claim since the base."""
    return f"{one.id}, {_CHANGES[one.kind]}: {sentence(one.told)}"


def changes_in_brief(verdict: Verdict) -> str:
    """Return in one sentence how many claims changed since the base, and how; empty where there is no base."""
    if verdict.base is None:
        return ""
    kinds = [one.kind for one in verdict.changes]
    told = [f"{kinds.count(kind)} {words}" for kind, words in _IN_BRIEF.items() if kind in kinds]
    counted = ", ".join(told) if told else "no claim changed"
    return f"Since the base {verdict.base[:_SHORT_COMMIT]}: {counted}."


def judged_commits(verdict: Verdict) -> str:
    """Return which state was judged, and against which base; empty outside of a git history."""
    if verdict.head is None and verdict.base is None:
        return ""
    head = f"the commit {verdict.head[:_SHORT_COMMIT]}" if verdict.head else "a tree with changes not committed"
    base = f", into the base {verdict.base[:_SHORT_COMMIT]}" if verdict.base else ""
    return f"Judged: {head}{base}."


def source(figures: Figures) -> str:
    """Return where the way is published by which evidence was weighed; empty where none was."""
    return _SOURCES.get(figures.alternative, "")


def policy_used(policy: PolicyUsed | None) -> str:
    """Return which policy was applied."""
    if policy is None:
        return "Policy: none could be read."
    return f"Policy: {policy.name} ({_ORIGINS[policy.origin]}; {policy.digest[:_SHORT_DIGEST]})."
