"""Text from records must neither command a build runner nor change the structure of a format."""

from __future__ import annotations

import html
import json
import re
import unicodedata
from collections import Counter
from dataclasses import asdict, dataclass
from typing import Any

import mistune
from hostile.verdicts import PLACES, PROBLEMS, TEXTS, VERDICTS
from hypothesis import given, settings
from hypothesis import strategies as st

from gatecheck.model.found import Found, Scan
from gatecheck.model.record import Record
from gatecheck.model.verdict import Finding, Judged, Place, Problem, Verdict
from gatecheck.render import RENDERERS, account, explain, survey
from gatecheck.render.text import markdown, plain


@dataclass(frozen=True)
class Command:
    """What a runner takes from one line of a log."""

    name: str
    properties: dict[str, str]
    data: str


def unescaped(text: str, escapes: dict[str, str]) -> str:
    for escape, character in escapes.items():
        text = text.replace(escape, character)
    return text


DATA_ESCAPES = {"%0D": "\r", "%0A": "\n", "%25": "%"}
PROPERTY_ESCAPES = {"%0D": "\r", "%0A": "\n", "%3A": ":", "%2C": ",", "%25": "%"}


def command_of(line: str) -> Command | None:
    """Read a line as a runner does, but take every name for a known one.

    SOURCE: ActionCommand.cs of the runner. The newer form stands after blanks at the start of a line; the older
    one, with a bracket, anywhere in it, and another runner puts a word before that bracket.
    """
    trimmed = line.lstrip()
    if trimmed.startswith("::") and (end := trimmed.find("::", 2)) >= 0:
        name, _, listed = trimmed[2:end].partition(" ")
        pairs = [pair.split("=", 1) for pair in listed.strip().split(",") if "=" in pair]
        properties = {key: unescaped(value, PROPERTY_ESCAPES) for key, value in pairs}
        return Command(name, properties, unescaped(trimmed[end + 2 :], DATA_ESCAPES))
    old = re.search(r"##(\w*)\[(.*)", line, re.DOTALL)
    return Command(old[1] + old[2], {}, "") if old else None


def commands_in(text: str) -> list[Command]:
    lines = re.split(r"\r\n|[\n\r\v\f\x85\u2028\u2029]", text)
    return [command for line in lines if (command := command_of(line))]


def test_the_grammar_reads_what_a_runner_reads() -> None:
    """The parser of this test must find commands, or the tests below could not fail."""
    text = "a ##[error]b\n  ::error file=a%3Ab,line=1::c%250A%0A\rx::error::y\u2028##vso[task]z\n::no"
    assert commands_in(text) == [
        Command("error]b", {}, ""),
        Command("error", {"file": "a:b", "line": "1"}, "c%0A\n"),
        Command("vsotask]z", {}, ""),
    ]


Annotation = tuple[str, str, str, str, str]
#: Titles and paths are cut where their escaped form is long; these beginnings never are.
TITLE_KEPT, PATH_KEPT = 80, 300


def annotation(level: str, at: Place, title: str, said: str, remedy: str) -> Annotation:
    mended = f"{said} To mend: {ended(remedy)}" if remedy else said
    return level, plain(at.path)[:PATH_KEPT], str(at.line), plain(title)[:TITLE_KEPT], plain(mended)


def ended(text: str) -> str:
    bare = text.strip(" \t\r\n")
    return f"{bare}." if bare and bare[-1] not in ".!?" else bare


def level_of(finding: Finding) -> str | None:
    if finding.outcome == "waived":
        return "notice"
    if finding.enforce == "block" and finding.outcome in {"short", "undecided"}:
        return "error"
    return "warning" if (finding.enforce, finding.outcome) == ("note", "short") else None


def said_by(finding: Finding) -> str:
    if finding.message:
        return ended(finding.message)
    acts = {"block": "", "note": "; the policy only notes it", "off": "; the policy leaves it off"}
    outcome = {"short": "short of the policy", "undecided": "cannot be decided"}
    return f"{outcome.get(finding.outcome, 'short of the policy, and waived')}{acts[finding.enforce]}."


def expected_annotations(verdict: Verdict) -> Counter[Annotation]:
    expected = [
        annotation("error", one.at, "Could not be read or judged", ended(one.message), one.advice)
        for one in verdict.problems
    ]
    for one in verdict.judged:
        for finding in one.findings if one.counts_now else ():
            title = f"{one.id}: {finding.rule.capitalize().replace('-', ' ')}"
            if level := level_of(finding):
                expected.append(annotation(level, one.at, title, said_by(finding), finding.remedy))
    return Counter(expected)


@settings(deadline=None)
@given(VERDICTS)
def test_annotations_read_back_to_the_same_findings_and_nothing_else(verdict: Verdict) -> None:
    text = RENDERERS["annotations"](verdict)
    commands = commands_in(text)
    assert len(commands) == text.count("\n")
    assert all(set(command.properties) == {"file", "line", "title"} for command in commands)
    shown = [
        (
            command.name,
            command.properties["file"][:PATH_KEPT],
            command.properties["line"],
            command.properties["title"][:TITLE_KEPT],
            command.data,
        )
        for command in commands
    ]
    assert Counter(shown) == expected_annotations(verdict)


@settings(deadline=None)
@given(VERDICTS, st.integers(40, 140))
def test_the_account_and_the_explanation_hold_no_command(verdict: Verdict, width: int) -> None:
    explanations = "".join(explain(verdict, one.id, width) for one in verdict.judged)
    text = account(verdict, width) + explanations + explain(verdict, "::error::##[error]x", width)
    assert commands_in(text) == []
    assert [character for character in text if is_invisible(character)] == []
    assert text.encode()


def is_invisible(character: str) -> bool:
    """Whether a character is neither seen nor needed: all but the end of a line and the joiners of scripts."""
    return character not in "\n\u200c\u200d" and unicodedata.category(character) in {"Cc", "Cf", "Cs", "Zl", "Zp"}


@settings(deadline=None)
@given(st.lists(st.tuples(TEXTS, st.none() | TEXTS, PLACES), max_size=3), st.lists(PROBLEMS, max_size=2))
def test_the_survey_holds_no_command(records: list[tuple[str, str | None, Place]], problems: list[Problem]) -> None:
    found = tuple(Found(Record("record/1", name, claim), at, {}) for name, claim, at in records)
    text = survey(Scan(found, tuple(problems), 9), 80)
    assert commands_in(text) == []
    assert text.encode()


def cells_of(row: str) -> list[str]:
    """Split a table row as GFM does: at each bar that no backslash escapes."""
    return re.split(r"(?<!\\)(?:\\\\)*\|", row)[1:-1]


def blocked(verdict: Verdict) -> list[Judged]:
    return [one for one in verdict.judged if one.counts_now and one.standing in {"falls-short", "undecided"}]


@settings(deadline=None)
@given(VERDICTS)
def test_the_summary_has_its_own_structure_only(verdict: Verdict) -> None:
    text = RENDERERS["summary"](verdict)
    assert commands_in(text) == []
    assert text.count("<details>") == text.count("</details>") == text.count("<summary>")
    assert re.search("[<>]", re.sub(r"</?(details|summary)>", "", text)) is None
    lines = text.split("\n")
    assert text.splitlines() == lines[:-1]
    rows = Counter(len(cells_of(line)) for line in lines if line.startswith("|"))
    evidence = sum(one.evidence is not None for one in verdict.judged)
    held = len(blocked(verdict))
    assert rows == Counter({5: held + 2 if held else 0, 6: evidence + 2 if evidence else 0})
    headings = [line for line in lines if line.startswith("#")]
    assert len(headings) == 1 + held + bool(verdict.problems) + bool(verdict.notes)
    assert [line for line in lines if not line.startswith(OPENINGS) and line] == []


OPENINGS = (
    *("## ", "### ", "| ", "- ", "<details>", "<summary>", "</details>", "How to read this: "),
    *("Short of the policy. Claim: ", "Cannot be decided. Claim: "),
)


@settings(deadline=None)
@given(TEXTS)
def test_markdown_renders_literally(text: str) -> None:
    """Another program's reading of the escaped text has its letters, and no element but the list around it."""
    render = mistune.create_markdown(escape=False, plugins=["table", "strikethrough", "url", "footnotes", "math"])
    page = str(render(f"above\n\n- {markdown(text)}\n"))
    assert set(re.findall(r"<(\w+)", page)) <= {"p", "ul", "li"}
    item = html.unescape(re.sub(r"<[^>]*>", "", page.split("<li>", 1)[1])).replace("\u200b", "")
    assert " ".join(item.split()) == plain(text)


@settings(deadline=None)
@given(VERDICTS)
def test_json_reads_back_to_the_same_findings(verdict: Verdict) -> None:
    text = RENDERERS["json"](verdict)
    assert text.isascii()
    document = json.loads(text)
    shown = [*document["claims"], *document["reported"]]
    assert sorted(map(as_shown, verdict.judged)) == sorted(
        json.dumps([one["id"], one["claim"], one["result"], one["rules"]]) for one in shown
    )
    assert sorted((one["message"], one["advice"]) for one in document["problems"]) == sorted(
        (problem.message, problem.advice) for problem in verdict.problems
    )
    assert document["notes"] == list(verdict.notes)


def as_shown(one: Judged) -> str:
    order: dict[str, int] = {"short": 0, "undecided": 1, "waived": 2, "met": 3, "does-not-apply": 4}
    findings: list[dict[str, Any]] = [asdict(finding) for finding in one.findings]
    for finding in findings:
        del finding["digest"]  # is for whoever writes a waiver, and told by `explain`
    findings.sort(
        key=lambda finding: (finding["rule"], order[finding["outcome"]], finding["message"], finding["remedy"])
    )
    return json.dumps([one.id, one.claim, one.result, findings])
