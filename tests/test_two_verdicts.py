"""Two verdicts: what differs by claim and rule, what is no verdict, and the command that tells it."""

from __future__ import annotations

import contextlib
import copy
import json
from pathlib import Path
from typing import Any

import pytest
from support import Document, changed, drainage, weigh, write_tree

from gatecheck.cli import main
from gatecheck.two_verdicts import compared, read_verdict

Said = tuple[int, str, str]
RULE: Document = {
    "rule": "false-positive-risk",
    "outcome": "short",
    "enforce": "block",
    "observed": 0.165,
    "limit": 0.05,
    "message": "m",
    "remedy": "r",
}
RECORD: Document = {
    "id": "yield_2030",
    "verdict": "falls-short",
    "at": {"path": "r.json", "line": 1},
    "claim": "Lime raises yield.",
    "result": "p = 0.034",
    "evidence": None,
    "rules": [RULE],
    "also_at": [{"path": "n.ipynb", "line": 3, "cell": 1, "output": 1}],
}
VERDICT: Document = {
    "gatecheck": "verdict/1",
    "verdict": "falls-short",
    "exit": 1,
    "policy": {"name": "station", "digest": "sha256:" + "1" * 64, "from": "tree"},
    "counts": {"claims": 1},
    "claims": [RECORD],
    "reported": [],
    "problems": [],
    "notes": ["a note"],
    "base": None,
    "head": "a" * 40,
    "tool": {"name": "gatecheck", "version": "0.1.0"},
    "plans": [{"path": "plans/p.yaml", "digest": "sha256:" + "2" * 64}],
}


def with_record(**changes: Any) -> Document:
    """The verdict with other values in its record."""
    return changed(VERDICT, claims=[changed(RECORD, **changes)])


def with_rule(**changes: Any) -> Document:
    """The verdict with other values in its finding."""
    return with_record(rules=[changed(RULE, **changes)])


def compare(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], first: Document | str, second: Document | str
) -> Said:
    """Write both files, and return the status of the command with both streams."""
    for name, content in (("a.json", first), ("b.json", second)):
        text = content if isinstance(content, str) else json.dumps(content)
        (tmp_path / name).write_text(text, encoding="utf-8")
    with contextlib.chdir(tmp_path):
        status = main(["compare", "a.json", "b.json"])
    streams = capsys.readouterr()
    return status, streams.out, streams.err


def lines(tmp_path: Path, capsys: pytest.CaptureFixture[str], second: Document) -> list[str]:
    """What is told of a verdict beside `VERDICT`, without head and foot; the status must be 1."""
    status, out, err = compare(tmp_path, capsys, VERDICT, second)
    assert (status, err) == (1, "")
    told = out.split("\n\n")
    assert told[1] == "First: a.json; second: b.json."
    assert told[-1] == "How findings are worded is not compared, nor the notes.\n"
    return [" ".join(line.split()) for line in "\n".join(told[2:-1]).split("\n")]


def test_the_same_verdict_says_the_same(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    status, out, err = compare(tmp_path, capsys, VERDICT, VERDICT)

    assert (status, err) == (0, "")
    assert out == (
        "The two verdicts say the same of every claim and rule (1 record).\n\n"
        "First: a.json; second: b.json.\n\n"
        "How findings are worded is not compared, nor the notes.\n"
    )


@pytest.mark.parametrize(
    "other",
    [
        changed(VERDICT, notes=[]),
        with_rule(message="worded otherwise", remedy=""),
        with_record(at={"path": "moved.json", "line": 9}, result="p = .034", also_at=[]),
        with_record(claim="Lime makes yield rise."),
        changed(VERDICT, a_field_of_a_later_version=[1], claims=[changed(RECORD, another=True)]),
        changed(VERDICT, plans=..., tool=..., head=..., base=...) | {"head": "a" * 40, "tool": VERDICT["tool"],
         "plans": VERDICT["plans"]},
    ],
)  # fmt: skip
def test_wording_and_places_make_no_difference(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], other: Document
) -> None:
    status, out, _ = compare(tmp_path, capsys, VERDICT, other)

    assert status == 0
    assert "other conditions" not in out


def test_other_conditions_are_told_and_decide_nothing(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    other = changed(
        VERDICT,
        policy__digest="sha256:" + "3" * 64,
        tool__version="0.2.0",
        base="b" * 40,
        head=None,
        plans=[{"path": "plans/p.yaml", "digest": "sha256:" + "4" * 64}, {"path": "q.yaml", "digest": "sha256:5"}],
    )

    status, out, _ = compare(tmp_path, capsys, VERDICT, other)

    told = " ".join(out.split())
    assert status == 0
    assert "Given under other conditions tool: gatecheck 0.1.0 in the first, gatecheck 0.2.0 in the second" in told
    assert f"policy: station (sha256:{'1' * 64}) in the first, station (sha256:{'3' * 64}) in the second" in told
    assert f"base: nothing in the first, {'b' * 40} in the second" in told
    assert f"judged commit: {'a' * 40} in the first, nothing in the second" in told
    assert f"plan plans/p.yaml: sha256:{'2' * 64} in the first, sha256:{'4' * 64} in the second" in told
    assert "plan q.yaml: nothing in the first, sha256:5 in the second" in told


def test_a_verdict_of_an_earlier_version_tells_no_conditions() -> None:
    """Files from before the tool was told in them are read too."""
    old = changed(VERDICT, tool=..., plans=..., base=..., head=..., policy=None)
    first, faults = read_verdict(old)
    second, _ = read_verdict(VERDICT)

    assert faults == ()
    assert first is not None
    assert second is not None
    found = compared(first, second)
    assert found.same
    assert [(one.what, one.first) for one in found.conditions] == [
        ("tool", None),
        ("policy", None),
        ("judged commit", None),
        ("plan plans/p.yaml", None),
    ]


def test_a_record_in_one_of_them_alone(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert lines(tmp_path, capsys, with_record(id="yield_2031")) == [
        "Only in the first",
        "yield_2030",
        "Only in the second",
        "yield_2031",
    ]


@pytest.mark.parametrize(
    ("second", "told"),
    [
        (
            with_record(verdict="stands"),
            ["Record verdict: falls-short in the first, stands in the second"],
        ),
        (
            changed(VERDICT, claims=[], reported=[changed(RECORD, claim=None)]),
            ["Record claimed: yes in the first, no in the second"],
        ),
        (
            with_record(counts_now=False),
            ["Record counts now: yes in the first, no in the second"],
        ),
        (
            with_rule(outcome="met", observed=0.04),
            [
                "Rule False positive risk (false-positive-risk): outcome: short in the",
                "first, met in the second; observed: 0.165 in the first, 0.04 in the",
                "second",
            ],
        ),
        (
            with_rule(enforce="note", limit=None),
            [
                "Rule False positive risk (false-positive-risk): enforce: block in the",
                "first, note in the second; limit: 0.05 in the first, nothing in the",
                "second",
            ],
        ),
        (
            with_rule(observed=0.16500000000000004),
            [
                "Rule False positive risk (false-positive-risk): observed: 0.165 in the",
                "first, 0.16500000000000004 in the second",
            ],
        ),
        (
            with_record(rules=[]),
            [
                "Rule False positive risk (false-positive-risk): outcome: short in the",
                "first, nothing in the second",
            ],
        ),
        (
            with_record(rules=[RULE, changed(RULE, rule="fresh", outcome="met")]),
            ["Rule Fresh (fresh): outcome: nothing in the first, met in the second"],
        ),
    ],
)
def test_a_record_judged_otherwise(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], second: Document, told: list[str]
) -> None:
    assert lines(tmp_path, capsys, second) == ["Judged otherwise", "yield_2030", *told]


def test_problems_count_as_often_as_they_stand(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    first = {"at": {"path": "b.json", "line": 2}, "message": "is no JSON", "advice": "mend it"}
    second = {"at": {"path": "n.ipynb", "line": 2, "cell": 1, "output": 3}, "message": "x", "advice": "y"}

    told = lines(tmp_path, capsys, changed(VERDICT, problems=[first, first, second]))
    status, out, _ = compare(
        tmp_path, capsys, changed(VERDICT, problems=[first, first]), changed(VERDICT, problems=[first])
    )

    assert told == [
        "Could not be read or judged in one of them",
        "b.json:2: nothing in the first, is no JSON in the second",
        "n.ipynb:2 (cell 1, output 3): nothing in the first, x in the second",
    ]
    assert (status, "The two verdicts differ in 1 problem." in out) == (1, True)
    assert "b.json:2: is no JSON in the first, nothing in the second" in out


@pytest.mark.parametrize(
    ("content", "complaint"),
    [
        ("{", "line 1, the text is no JSON: Expecting property name enclosed in double quotes"),
        ("[]", "line 1, the document is a list, not an object"),
        (json.dumps(drainage()), "line 1, gatecheck is 'record/1' (and 7 more); known: verdict/1"),
        (
            json.dumps({**VERDICT, "gatecheck": "verdict/2"}),
            "line 1, gatecheck is 'verdict/2'; the nearest known one is verdict/1",
        ),
        (json.dumps({**VERDICT, "exit": 2}), "line 1, exit is 2; known: 0, 1, 3"),
        (
            json.dumps(changed(VERDICT, claims=[RECORD], reported=[RECORD]), indent=1),
            "reported[0].id stands twice (yield_2030); write the verdict again.",
        ),
        (json.dumps(with_rule(outcome="passed")), "claims[0].rules[0].outcome is 'passed'"),
        (json.dumps(with_rule(observed="0.1")), "claims[0].rules[0].observed is the text '0.1'"),
        (json.dumps(changed(VERDICT, policy__digest="abc")), "policy.digest is 'abc'"),
        (
            json.dumps(changed(VERDICT, counts={"\x1b[31m": "x"})),
            "counts.{U+001B}[31m is the text 'x', where only a number is meant",
        ),
        ('{"gatecheck": "verdict/1", "gatecheck": "verdict/1"}', "line 1, gatecheck is given twice"),
    ],
)
def test_a_file_that_is_no_verdict_is_told_and_compares_with_nothing(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], content: str, complaint: str
) -> None:
    status, out, err = compare(tmp_path, capsys, VERDICT, content)

    assert (status, out) == (3, "")
    assert err.startswith("gatecheck: cannot judge: 'b.json' is no verdict that can be read: line ")
    assert complaint in err


def test_a_file_that_is_not_there(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    status = main(["compare", str(tmp_path / "none.json"), str(tmp_path / "none.json")])

    assert status == 3
    assert f"there is no file '{tmp_path}/none.json'; name a verdict that" in capsys.readouterr().err


def test_one_file_is_wrong_usage(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit) as left:
        main(["compare", "a.json"])

    assert left.value.code == 2
    assert "B.json" in capsys.readouterr().err


def test_what_the_gate_writes_is_read(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Real verdicts, one under another limit: the rules that differ are told."""
    folder = tmp_path / "tree"
    folder.mkdir()
    records = [drainage(), drainage(id="b", claim=...), drainage(id="c", test__p=7)]
    policy: Document = {"gatecheck": "policy/1", "rules": {"false-positive-risk": {"limit": 0.05}}}
    strict = weigh(write_tree(folder, *records, policy=policy)).verdict
    loose_policy = changed(policy, rules={"false-positive-risk": {"limit": 0.5}, "reported-in-full": {}})
    loose = weigh(write_tree(folder, *records, policy=loose_policy)).verdict

    same = compare(tmp_path, capsys, strict, copy.deepcopy(strict))
    status, out, _ = compare(tmp_path, capsys, strict, loose)

    told = " ".join(out.split())
    assert (same[0], same[2]) == (0, "")
    assert status == 1
    assert "The two verdicts differ on 2 of 2 records." in told
    assert "outcome: short in the first, met in the second; limit: 0.05 in the first, 0.5 in the second" in told
    assert "Reported in full (reported-in-full): outcome: nothing in the first, met in the second" in told


def test_a_verdict_on_many_records_is_read(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """More values than a record may hold."""
    many = changed(VERDICT, claims=[changed(RECORD, id=f"r{number}") for number in range(2000)])

    assert compare(tmp_path, capsys, many, many)[0] == 0
