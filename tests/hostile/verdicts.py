"""Verdicts whose every text tries to command a build runner or to change the structure of a format."""

from __future__ import annotations

from hypothesis import strategies as st

from gatecheck.model.verdict import Figures, Finding, Judged, Place, PolicyUsed, Problem, Verdict

FRAGMENTS = [
    *("\n", "\r", "\r\n", "\u2028", "\u2029", "\x85", "\v", "\f", "\t", "  ", "    "),
    *(
        "|",
        "\\",
        "\\|",
        "`",
        "```",
        "<script>",
        "</details>",
        "<!--",
        "-->",
        "]]>",
        "<a href='x'>",
        "&lt;",
        "&#8203;",
    ),
    *("::", ":", "::error::", "::error file=a,line=1::owned", "::set-output name=a::b", "::stop-commands::t"),
    *("%0A", "%0D", "%25", "%", "%3A%3A", ",", "="),
    *("#", "##", "##[error]", "##[error]x", "##[add-mask]x", "##vso[task.complete]", "vso[", "[", "]"),
    *("\x1b[31m", "\x1b]8;;http://a.example\x07", "\x9b2J", "\x00", "\x07", "\x08", "\x7f"),
    *("\u202e", "\u2066", "\u200b", "\u200d", "\ufeff", "\ud800", "\udfff", "\ufffe", "\U000e0041"),
    *("@name", "#1", "http://a.example", "www.a.example", "[a](b)", "![a](b)", "**a**", "_a_", "~~a~~", "$a$"),
    *("# SKIP", "\\# SKIP", " # TODO", "ok 1 - a", "not ok 1", "Bail out!", "1..0", "...", "  ...", "Subtest: a"),
    *('"', "'", "\\n", "]](", "](1)", "{0}", "]]]]>", "&#0;", "<?xml", "<!DOCTYPE a>", "%3B", "%5D", "%AZP25", ";"),
    *("/", "..", "../a", "a/b.json", "\udc80", "C:\\a", "?a", "\uffff"),
    *("- a", "1. a", "> a", "---", "===", "# a", "| --- |", "a", "pH", "{", "}"),
]
TEXTS = st.lists(
    st.sampled_from(FRAGMENTS) | st.text(st.characters(exclude_categories=()), max_size=4), max_size=5
).map(
    "".join,
)
PLACES = st.builds(
    Place,
    path=TEXTS,
    line=st.integers(1, 999),
    cell=st.none() | st.integers(0, 9),
    output=st.none() | st.integers(0, 9),
)
RISKS = st.none() | st.floats(0, 1)
FIGURES = st.builds(
    Figures,
    alternative=TEXTS,
    log_likelihood_ratio=st.none() | st.floats(),
    prior=RISKS,
    prior_from=TEXTS,
    false_positive_risk=RISKS,
    prior_needed=RISKS,
    note=TEXTS,
)
RULES = st.sampled_from(["false-positive-risk", "prior-needed", "numbers-agree"])
FINDINGS = st.builds(
    Finding,
    rule=RULES,
    outcome=st.sampled_from(["met", "short", "waived", "does-not-apply", "undecided"]),
    enforce=st.sampled_from(["block", "note", "off"]),
    observed=RISKS,
    limit=RISKS,
    message=TEXTS,
    remedy=TEXTS,
)
JUDGED = st.builds(
    Judged,
    id=TEXTS,
    at=PLACES,
    claim=st.none() | TEXTS,
    result=TEXTS,
    evidence=st.none() | FIGURES,
    findings=st.lists(FINDINGS, max_size=2).map(tuple),
    also_at=st.lists(PLACES, max_size=1).map(tuple),
    counts_now=st.booleans(),
    alternatives=st.lists(FIGURES, max_size=1).map(tuple),
)
PROBLEMS = st.builds(Problem, at=PLACES, message=TEXTS, advice=TEXTS)
POLICIES = st.builds(PolicyUsed, name=TEXTS, digest=TEXTS, origin=st.sampled_from(["base", "tree", "built-in"]))
VERDICTS = st.builds(
    Verdict,
    policy=st.none() | POLICIES,
    judged=st.lists(JUDGED, max_size=3).map(tuple),
    problems=st.lists(PROBLEMS, max_size=2).map(tuple),
    notes=st.lists(TEXTS, max_size=2).map(tuple),
)
