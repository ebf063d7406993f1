"""The verdict as Markdown, for the summary page of a build and for review."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from functools import partial

from gatecheck.model.shown import percent
from gatecheck.model.verdict import Figures, Finding, Judged, Problem, Verdict
from gatecheck.render import order, words
from gatecheck.render.entries import left_out
from gatecheck.render.text import cut, markdown, plain

#: A page above 1 MiB is dropped whole by the build services; this leaves a margin.
BUDGET = 900 * 1024
LONGEST_TEXT = 2000
_LONGEST_NAME = 200

_HOW_TO_READ = (
    "How to read this: a p-value says how surprising the data would be if there were no effect. "
    "The false positive risk says how probable it is that there is no effect, given the data and the prior, "
    "which is the probability of a real effect before the data. "
    "A p just below 0.05 can leave a risk far above 5 %. "
    "The prior needed is the prior at which the risk would come down to what the policy asks.\n\n"
)
_BLOCKED_HEAD = (
    "| Claim | Result | False positive risk | Prior needed | The policy allows |\n| --- | --- | --- | --- | --- |\n"
)
_FIGURES_HEAD = (
    "| Record | Alternative | Prior | Likelihood ratio | False positive risk | Prior needed |\n"
    "| --- | --- | --- | --- | --- | --- |\n"
)


#: An entry is written only where there may be room for it: what stands above all seconds, and its second text.
_Entry = Callable[[], tuple[str, str]]


@dataclass(frozen=True, slots=True)
class _Section:
    """Entries between a head and a foot; the first texts of all entries stand before their second ones."""

    head: str
    entries: list[_Entry]
    foot: str = ""

    def that_fit(self, room: int) -> tuple[str, int]:
        """Return the text of at most `room` bytes, and the number of entries in it."""
        room -= _size(self.head) + _size(self.foot) + 1
        shown: list[tuple[str, str]] = []
        for entry in self.entries:
            texts = entry()
            room -= _size(texts[0]) + _size(texts[1])
            if room < 0:
                break
            shown.append(texts)
        first, second = "".join(texts[0] for texts in shown), "".join(texts[1] for texts in shown)
        return (f"{self.head}{first}\n{second}{self.foot}" if shown else ""), len(shown)


def summary(verdict: Verdict, budget: int = BUDGET) -> str:
    """Return the verdict as Markdown of at most `budget` bytes, worst first.

    The headline, the cautions and the policy always stand; a budget below 4 KiB may be too small for them.
    Where entries had to be left out, the last line says how many.
    """
    brief = words.changes_in_brief(verdict)
    head = f"## {markdown(words.headline(verdict))}\n\n" + (f"{markdown(brief)}\n\n" if brief else "")
    tail = _closing(verdict)
    sections = [section for section in _sections(verdict) if section.entries]
    entries = sum(len(section.entries) for section in sections)
    room = budget - _size(head) - _size(tail) - _size(_left_out(entries))
    texts, shown = [], 0
    for section in sections:
        text, kept = section.that_fit(room)
        texts.append(text)
        shown += kept
        # What matters less must not stand where what matters more had no room.
        room = room - _size(text) if kept == len(section.entries) else 0
    return head + "".join(texts) + tail + _left_out(entries - shown)


def _sections(verdict: Verdict) -> list[_Section]:
    held = order.blocked(verdict)
    explained = any(one.evidence is not None for one in held)
    return [
        _Section(
            "### Could not be read or judged\n\n",
            [partial(_problem, one) for one in order.problems_by_place(verdict.problems)],
        ),
        _Section((_HOW_TO_READ if explained else "") + _BLOCKED_HEAD, [partial(_held, one) for one in held]),
        _Section(
            "### Changed since the base\n\n",
            [partial(_line, words.change(one)) for one in order.changes(verdict)],
        ),
        _Section("### Notes\n\n", [partial(_line, note) for note in verdict.notes]),
        _folded("Waived", ((one, order.waived_findings(one)) for one in order.with_waiver(verdict))),
        _folded(
            "Noted, without effect on the verdict",
            ((one, order.noted_findings(one)) for one in order.by_place(verdict.judged)),
        ),
        _folded_results("Short or undecided, but unchanged", order.blocked(verdict, counting=False)),
        _folded_results("Standing", order.standing(verdict)),
        _folded_results("Reported without a claim", order.without_claim(verdict)),
        _details(
            "The evidence and its assumptions",
            [partial(_figures, one, one.evidence) for one in order.by_place(verdict.judged) if one.evidence],
            _FIGURES_HEAD,
        ),
    ]


def _details(title: str, entries: list[_Entry], head: str = "") -> _Section:
    opening = f"<details>\n<summary>{title} ({len(entries)})</summary>\n\n{head}"
    return _Section(opening, entries, "</details>\n\n")


def _folded(title: str, found: Iterable[tuple[Judged, list[Finding]]]) -> _Section:
    return _details(title, [partial(_finding_of, one, finding) for one, findings in found for finding in findings])


def _folded_results(title: str, judged: list[Judged]) -> _Section:
    return _details(title, [partial(_result, one) for one in judged])


def _line(text: str) -> tuple[str, str]:
    return f"- {_md(text)}\n", ""


def _problem(one: Problem) -> tuple[str, str]:
    return _line(f"{words.where(one.at)}: {words.problem(one)}")


def _finding_of(one: Judged, finding: Finding) -> tuple[str, str]:
    return _line(f"{one.id}: {words.found(finding)}")


def _result(one: Judged) -> tuple[str, str]:
    claim = f"{words.sentence(one.claim)} " if one.claim is not None else ""
    return _line(f"{one.id}: {claim}{words.result(one)}")


def _row(one: Judged) -> str:
    risk = needed = words.UNKNOWN
    if one.evidence is not None:
        risk, needed = _risk(one, one.evidence), _needed(one, one.evidence)
        # A risk without its prior misleads.
        risk += "" if risk == words.UNKNOWN else f", at prior {words.prior(one.evidence)}"
        risk += f"; {one.evidence.pooled}" if one.evidence.pooled else ""
    return _cells([f"{one.claim or 'Nothing is claimed.'} ({one.id})", one.result, risk, needed, _allowed(one)])


def _risk(one: Judged, figures: Figures) -> str:
    return words.probability(figures.false_positive_risk, words.limit_of(one, words.RISK_RULE))


def _needed(one: Judged, figures: Figures) -> str:
    return words.probability(figures.prior_needed, words.limit_of(one, words.PRIOR_RULE))


def _cells(cells: list[str]) -> str:
    return f"| {' | '.join(map(_md, cells))} |\n"


def _allowed(one: Judged) -> str:
    known = {words.RISK_RULE: "risk up to", words.PRIOR_RULE: "prior needed up to"}
    allowed = []
    for finding in order.by_rule(one.findings):
        if finding.rule in known and finding.limit is not None and finding.outcome != "does-not-apply":
            allowed.append(f"{known[finding.rule]} {percent(finding.limit, finding.limit)}")
        elif finding.blocks:
            allowed.append(f"{words.rule_words(finding.rule).lower()}: see below")
    return "; ".join(allowed)


def _held(one: Judged) -> tuple[str, str]:
    state = "Cannot be decided" if one.standing == "undecided" else "Short of the policy"
    claim = f"Claim: {words.sentence(words.what_is_claimed(one))} In {words.places(one)}."
    findings = "".join(map(_finding, order.blocking_findings(one)))
    return _row(one), f"### {_md(one.id)}\n\n{state}. {_md(claim)}\n\n{findings}\n"


def _finding(finding: Finding) -> str:
    said = words.with_remedy(words.message(finding), finding.remedy)
    return f"- **{_md(words.rule_words(finding.rule))}:** {_md(said)}\n"


def _figures(one: Judged, figures: Figures) -> tuple[str, str]:
    origin = f" ({figures.prior_from})" if figures.prior_from else ""
    cells = [
        one.id,
        words.alternative_words(figures.alternative),
        words.prior(figures) + origin,
        words.likelihood_ratio(figures.log_likelihood_ratio),
        _risk(one, figures),
        _needed(one, figures),
    ]
    return _cells(cells), ""


def _closing(verdict: Verdict) -> str:
    policy = markdown(cut(plain(words.policy_used(verdict.policy)), _LONGEST_NAME))
    commits = words.judged_commits(verdict)
    judged = f"- {markdown(commits)}\n" if commits else ""
    return (
        "<details>\n<summary>What was not checked, what standing means, and the policy</summary>\n\n"
        f"- {words.NOT_CHECKED}\n- {words.CAUTION}\n- {policy}\n{judged}\n</details>\n"
    )


def _left_out(entries: int) -> str:
    return f"\n{left_out(entries, 'entry', 'entries')}\n" if entries else ""


def _md(text: str) -> str:
    return markdown(cut(plain(text), LONGEST_TEXT))


def _size(text: str) -> int:
    return len(text.encode())
