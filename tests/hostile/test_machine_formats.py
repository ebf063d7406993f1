"""Every format for machines, read back by a reader that is not ours, holds the same findings and nothing else."""

from __future__ import annotations

import json
import re
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from io import StringIO
from typing import Any
from urllib.parse import unquote_to_bytes
from xml.etree import ElementTree as ET

import pytest
from hostile.verdicts import VERDICTS
from hypothesis import given, settings
from render.azure_agent import Logged, logged
from render.junit_schema import SCHEMA
from render.sarif_schema import VALIDATOR
from tap.parser import Parser

from gatecheck.model.verdict import Finding, Judged, Place, Verdict
from gatecheck.render import RENDERERS
from gatecheck.render.text import plain

HOSTILE = settings(deadline=None)
OUTCOMES = {"short": "short of the policy", "undecided": "cannot be decided"}
ENFORCED = {"block": "", "note": "; the policy only notes it", "off": "; the policy leaves it off"}


@dataclass(frozen=True)
class Told:
    """What a format must tell of a problem or a finding."""

    state: str
    at: Place
    record: str
    rule: str
    message: str
    remedy: str

    @property
    def text(self) -> str:
        """What is said, as a sentence or two."""
        mended = f"{self.message} To mend: {ended(self.remedy)}" if self.remedy else self.message
        if self.state == "problem":
            whole = "The whole tree: " if self.at.path == "." else ""
            return f"{whole}Could not be read or judged: {mended}"
        behind = {"unchanged": " It is unchanged, and does not count now.", "noted": " The policy only notes it."}
        return f"{self.rule.capitalize().replace('-', ' ')}: {mended}{behind.get(self.state, '')}"

    @property
    def whole(self) -> str:
        """What is said, cleaned, behind the record that it is said of."""
        return plain(self.text if self.state == "problem" else f"{self.record}: {self.text}")

    @property
    def file(self) -> str:
        """The file that it stands in; what concerns the whole tree stands at the policy."""
        return "gatecheck.yaml" if self.at.path == "." else self.at.path


def ended(text: str) -> str:
    bare = text.strip(" \t\r\n")
    return f"{bare}." if bare and bare[-1] not in ".!?" else bare


def told(verdict: Verdict) -> list[Told]:
    problems = [Told("problem", one.at, "", "readable", ended(one.message), one.advice) for one in verdict.problems]
    return problems + [each for one in verdict.judged for each in told_of(one)]


def told_of(one: Judged) -> Iterator[Told]:
    for finding in one.findings:
        if state := state_of(finding, counts=one.counts_now):
            outcome = OUTCOMES.get(finding.outcome, "short of the policy, and waived") + ENFORCED[finding.enforce]
            message = ended(finding.message or outcome)
            yield Told(state, one.at, one.id, finding.rule, message, finding.remedy)


def state_of(finding: Finding, *, counts: bool) -> str:
    if finding.outcome == "waived":
        return "waived"
    if finding.outcome not in OUTCOMES or finding.enforce == "off":
        return ""
    if finding.enforce == "note":
        return "noted"
    return finding.outcome if counts else "unchanged"


def state_of_record(one: Judged) -> str:
    states = {each.state for each in told_of(one)}
    worst = [state for state in ("short", "undecided", "unchanged", "waived") if state in states]
    return worst[0] if worst else "stands"


@HOSTILE
@given(VERDICTS)
def test_sarif(verdict: Verdict) -> None:
    text = RENDERERS["sarif"](verdict)
    assert text.isascii()
    (run,) = json.loads(text)["runs"]
    shown = [
        (
            one["properties"]["state"],
            one["properties"]["record"],
            one["ruleId"],
            message_of(one),
            *place_of(one["locations"]),
            "suppressions" in one,
        )
        for one in run["results"]
    ]
    assert Counter(shown) == Counter(
        (
            one.state,
            plain(one.record),
            one.rule,
            one.whole.replace("](", "] ("),
            raw(one.file),
            one.at.line,
            one.state == "waived",
        )
        for one in told(verdict)
    )
    assert [rule["id"] for rule in run["tool"]["driver"]["rules"]] == sorted({one.rule for one in told(verdict)})
    notifications = run["invocations"][0]["toolExecutionNotifications"]
    assert len(notifications) == 1 + len(verdict.notes)


@settings(deadline=None, max_examples=50)
@given(VERDICTS)
def test_sarif_stays_valid(verdict: Verdict) -> None:
    log = json.loads(RENDERERS["sarif"](verdict))
    VALIDATOR.validate(log)
    assert len(log["runs"][0]["results"]) == len(told(verdict))


def message_of(result: dict[str, Any]) -> str:
    """The message as a reader formats it that takes doubled braces for one, and any other for a placeholder."""
    text: str = result["message"]["text"]
    assert re.fullmatch(r"(\{\{|\}\}|[^{}])*", text)
    assert "](" not in text
    return text.replace("{{", "{").replace("}}", "}")


def place_of(locations: list[Any]) -> tuple[bytes, int]:
    (location,) = locations
    uri = location["physicalLocation"]["artifactLocation"]["uri"]
    assert re.fullmatch(r"([A-Za-z0-9._~-]|%[0-9A-F]{2})([A-Za-z0-9._~/-]|%[0-9A-F]{2})*|", uri)
    return unquote_to_bytes(uri), location["physicalLocation"]["region"]["startLine"]


def raw(path: str) -> bytes:
    try:
        return path.encode("utf-8", "surrogateescape")
    except UnicodeEncodeError:
        return path.encode("utf-8", "surrogatepass")


@HOSTILE
@given(VERDICTS)
def test_code_quality(verdict: Verdict) -> None:
    text = RENDERERS["code-quality"](verdict)
    assert text.isascii()
    shown = json.loads(text)
    severities = {"problem": "blocker", "short": "critical", "undecided": "major", "waived": "info"}
    assert Counter(
        (
            one["description"],
            one["check_name"],
            one["severity"],
            one["location"]["path"],
            one["location"]["lines"]["begin"],
        )
        for one in shown
    ) == Counter(
        (one.whole, one.rule, severities.get(one.state, "minor"), plain(one.file), one.at.line)
        for one in told(verdict)
    )
    assert len({one["fingerprint"] for one in shown}) == len(shown)


ELEMENTS = {"short": "failure", "undecided": "error", "unchanged": "skipped", "waived": "skipped"}


def cases_of(text: str) -> tuple[ET.Element, list[ET.Element]]:
    # Not untrusted: it is what is tested.
    suite = ET.fromstring(text.encode("utf-8"))[0]  # noqa: S314
    assert {child.tag for child in suite} <= {"properties", "testcase", "system-out", "system-err"}
    return suite, suite.findall("testcase")


def findings_in(element: ET.Element) -> tuple[str, ...]:
    """The lines on findings: all but the last, the place, and for a record the one before it, its result."""
    *lines, place = (element.text or "").split("\n")
    assert place.startswith("In ")
    return tuple(sorted(lines[:-1] if lines[-1].startswith("Result:") else lines))


def unnumbered(name: str) -> str:
    """A name without the number that tells it from others of its kind."""
    return re.sub(r"( ?\(\d+\))*$", "", name)


def expected_cases(verdict: Verdict) -> Iterator[tuple[str, tuple[str, ...]]]:
    for one in told(verdict):
        if one.state == "problem":
            yield "error", (plain(one.text),)
    for judged in verdict.judged:
        if element := ELEMENTS.get(state_of_record(judged)):
            lines = [plain(each.text) for each in told_of(judged) if each.state != "noted"]
            yield element, tuple(sorted(lines))


@pytest.mark.parametrize("dialect", ["junit", "junit-strict"])
@HOSTILE
@given(VERDICTS)
def test_junit(dialect: str, verdict: Verdict) -> None:
    suite, cases = cases_of(RENDERERS[dialect](verdict))
    assert Counter((case[0].tag, findings_in(case[0])) for case in cases if len(case)) == Counter(
        expected_cases(verdict)
    )
    assert len(cases) == len(verdict.problems) + len(verdict.judged) == int(suite.attrib["tests"])
    names = Counter(unnumbered(case.attrib["name"]) for case in cases)
    expected = [f"line {one.at.line}: could not be read or judged" for one in verdict.problems]
    expected += [plain(one.id) for one in verdict.judged]
    assert names == Counter(map(unnumbered, expected))
    assert len({(case.attrib["classname"], case.attrib["name"]) for case in cases}) == len(cases)
    output = (suite.findtext("system-out") or "").split("\n")
    noted = [one.whole for one in told(verdict) if one.state == "noted"]
    assert Counter(output[: len(noted)]) == Counter(noted)
    assert len(output) == len(noted) + 2 + len(verdict.notes)


@HOSTILE
@given(VERDICTS)
def test_junit_holds_each_place(verdict: Verdict) -> None:
    """The default dialect has attributes for it."""
    _, cases = cases_of(RENDERERS["junit"](verdict))
    assert Counter((case.attrib["file"], case.attrib["line"]) for case in cases) == Counter(
        (plain(at.path), f"{at.line}")
        for at in (*(one.at for one in verdict.problems), *(one.at for one in verdict.judged))
    )


@settings(deadline=None, max_examples=50)
@given(VERDICTS)
def test_junit_strict_stays_valid(verdict: Verdict) -> None:
    SCHEMA.validate(RENDERERS["junit-strict"](verdict))
    assert "]]>" not in RENDERERS["junit-strict"](verdict)


STATUS = {"short": "not ok", "undecided": "not ok", "unchanged": "TODO", "waived": "SKIP", "stands": "ok"}


@HOSTILE
@given(VERDICTS)
def test_tap(verdict: Verdict) -> None:
    """Its reader knows no escape: no text may be a directive, or a line of its own, for it either."""
    text = RENDERERS["tap"](verdict)
    lines = list(Parser().parse(StringIO(text, newline=None)))
    points = [line for line in lines if line.category == "test"]
    assert Counter(line.category for line in lines) == Counter(
        {
            "version": 1,
            "plan": 1,
            "diagnostic": 1 + len(verdict.notes),
            "test": len(points),
        }
        if points
        else {"version": 1, "plan": 1, "diagnostic": 1 + len(verdict.notes)}
    )
    assert [line.expected_tests for line in lines if line.category == "plan"] == [len(points)]
    assert Counter(map(status_of, points)) == Counter(
        ["not ok" for _ in verdict.problems] + [STATUS[state_of_record(one)] for one in verdict.judged]
    )
    blocks = [point.yaml_block for point in points]
    shown = [
        (
            finding["state"],
            block["at"]["file"],
            block["at"]["line"],
            block.get("record", ""),
            finding["rule"],
            finding["message"],
            finding.get("remedy", ""),
        )
        for block in blocks
        if block
        for finding in block["findings"]
    ]
    assert Counter(shown) == Counter(
        (
            one.state,
            plain(one.at.path),
            one.at.line,
            plain(one.record),
            one.rule,
            plain(one.message),
            plain(one.remedy),
        )
        for one in told(verdict)
    )


def status_of(point: Any) -> str:
    if point.skip or point.todo:
        return "SKIP" if point.skip else "TODO"
    return "ok" if point.ok else "not ok"


@HOSTILE
@given(VERDICTS)
def test_azure_annotations(verdict: Verdict) -> None:
    text = RENDERERS["azure-annotations"](verdict)
    counting = Verdict(None, tuple(one for one in verdict.judged if one.counts_now), verdict.problems)
    expected = []
    for one in told(counting):
        noted = one.state == "noted"
        if one.state == "waived" or (noted and not short(one, counting)):
            continue
        said = one.text.removesuffix(" The policy only notes it.").removeprefix("The whole tree: ")
        said = said if one.state == "problem" else f"{one.record}: {said}"
        place = {} if one.at.path == "." else {"sourcepath": broken(one.at.path), "linenumber": f"{one.at.line}"}
        expected.append(Logged("warning" if noted else "error", tuple(sorted(place.items())), broken(said)))
    assert Counter(logged(text)) == Counter(expected)


def short(one: Told, verdict: Verdict) -> bool:
    """Whether a finding that is only noted is short: what is only noted and undecided is not shown."""
    return any(
        (finding.rule, finding.outcome, finding.enforce) == (one.rule, "short", "note")
        and one.message == next(told_of(Judged(judged.id, one.at, None, "", None, (finding,)))).message
        for judged in verdict.judged
        if judged.id == one.record
        for finding in judged.findings
    )


def broken(text: str) -> str:
    return re.sub(r"%(?=3B|0D|0A|5D|AZP25)", "% ", plain(text), flags=re.IGNORECASE)
