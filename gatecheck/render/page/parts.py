"""What stands in the page before and after the records."""

from __future__ import annotations

import re
from collections.abc import Sequence

from gatecheck.model.verdict import Judged, Verdict
from gatecheck.render import order, words
from gatecheck.render.page.notes import Notes
from gatecheck.render.page.rows import Rows
from gatecheck.render.page.wording import said

_READING = (
    (
        "A p-value says how surprising the data would be if there were no effect. The false positive risk says how "
        "probable it is that there is no effect, given the data and the prior; the prior is the probability of a "
        "real effect before the data. A p just below 0.05 can leave a risk far above 5 %."
    ),
    (
        "Each claim has up to two drawings. In the first, the bold curve is its risk (upward) at each prior (to "
        "the right); the ring is the risk as judged, the dashed line the limit of the policy, and the upright line "
        "the prior that would be needed. Both scales are stretched toward their ends, and what lies beyond them "
        "stands at the edge."
    ),
    (
        "In the second, the ring is the estimate on its interval and the upright line is no effect. What is shaded "
        "is too small to matter by the record's own word."
    ),
    (
        "A number in brackets, such as [1], stands for words that several records have in common. They are said "
        "once, below the records."
    ),
)
_FIRST_LETTER = re.compile(r"^\W*\w")
_SHORT_DIGEST = len("sha256:") + 12
_COUNTED = ("stand", "short of the policy", "waived", "undecided", "in all")


def opening(verdict: Verdict) -> str:
    """Return the verdict in one sentence, then what was judged by which policy, and the counts."""
    told = [words.policy_used(verdict.policy), words.judged_commits(verdict)]
    return (
        '<p class="soft">Statement on the findings claimed in this tree</p>\n'
        f"<h1>{said(words.headline(verdict))}</h1>\n"
        f"<p>{said(' '.join(each for each in told if each))}</p>\n{_counts(verdict)}"
    )


def _counts(verdict: Verdict) -> str:
    heads = "".join(f'<th scope="col">{each}</th>' for each in _COUNTED)
    rows = [_row("Claims", verdict.claims)]
    if verdict.reported:
        rows.append(_row("Results without a claim", verdict.reported))
    if verdict.others:
        rows.append(_row("Plans, text and code", verdict.others))
    return f"<table>\n<tr><td></td>{heads}</tr>\n{''.join(rows)}</table>\n"


def _row(name: str, judged: Sequence[Judged]) -> str:
    standings = [one.standing for one in judged]
    numbers = [standings.count(each) for each in ("stands", "falls-short", "waived", "undecided")]
    cells = "".join(f"<td>{number}</td>" for number in [*numbers, len(judged)])
    return f'<tr><th scope="row">{name}</th>{cells}</tr>\n'


def told(verdict: Verdict) -> str:
    """Return what could not be read, what changed since the base, and the notes on the whole."""
    problems = [
        f"{said(words.where(one.at))}: {said(words.problem(one))}"
        for one in order.problems_by_place(verdict.problems)
    ]
    changed = [said(words.change(one)) for one in order.changes(verdict)]
    notes = [said(words.sentence(note)) for note in verdict.notes]
    return (
        _listed("problems", "Could not be read or judged", problems)
        + _listed("changed", "Changed since the base", changed)
        + _listed("notes", "Notes on the whole", notes)
    )


def reading() -> str:
    """Return how the figures and drawings are read."""
    paragraphs = "".join(f"<p>{each}</p>\n" for each in _READING)
    return f'<details class="reading"><summary><h2>How to read the figures</h2></summary>\n{paragraphs}</details>\n'


def common(rows: Rows) -> str:
    """Return what holds for every record that tells nothing else under the same term."""
    if not rows:
        return ""
    listed = "".join(f"<dt>{term}<dd>{told}" for term, told in rows.items())
    return _section("common", "Of every record that says nothing else", f"<dl>{listed}</dl>\n")


def noted(notes: Notes) -> str:
    """Return what several records say, to which they point by its number."""
    entries = [f'<li id="n{number}">{note(told)}</li>' for number, told in enumerate(notes.entries, 1)]
    if not entries:
        return ""
    return _section("said-once", "Said once, of several records", f"<ol>{''.join(entries)}</ol>\n")


def note(told: str) -> str:
    """Return a note as a sentence."""
    return said(words.sentence(_FIRST_LETTER.sub(lambda found: found[0].upper(), told, count=1)))


def closing(verdict: Verdict) -> str:
    """Return what was not checked, what standing means, and on what and by which version it was judged."""
    plans = ", ".join(f"{path} ({digest[:_SHORT_DIGEST]})" for path, digest in sorted(verdict.plans))
    ends = [
        f"Plans read: {plans}." if plans else "",
        f"Judged by gatecheck {verdict.version}." if verdict.version else "",
    ]
    paragraphs = [words.NOT_CHECKED, words.CAUTION, *filter(None, ends)]
    return _section(
        "closing",
        "What was not checked, and what standing means",
        "".join(f"<p>{said(each)}</p>\n" for each in paragraphs),
    )


def _listed(name: str, title: str, entries: Sequence[str]) -> str:
    if not entries:
        return ""
    return _section(name, title, f"<ul>{''.join(f'<li>{each}</li>' for each in entries)}</ul>\n")


def _section(name: str, title: str, body: str) -> str:
    return f'<section aria-labelledby="{name}">\n<h2 id="{name}">{title}</h2>\n{body}</section>\n'
