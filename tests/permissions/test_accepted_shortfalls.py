"""Shortfalls accepted on adoption: what they let pass, when they end, and the file that lists them."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st
from permissions.permitting import RULE, SHORT, found
from support import drainage

from gatecheck.model.accepted import AcceptedShortfall
from gatecheck.model.verdict import Finding, Judged, Place
from gatecheck.permissions.accepted import ACCEPTED_FILE, accept, adoption, as_file, read_accepted

OTHER = "sha256:" + "0" * 64
ID = "drainage/earthworm-biomass"
HELD = AcceptedShortfall(ID, RULE, SHORT.digest)
CHANGED = AcceptedShortfall(ID, RULE, OTHER)
MET = replace(SHORT, outcome="met")
UNDECIDED = replace(SHORT, outcome="undecided")
WAIVED = replace(SHORT, outcome="waived")
NOTED = replace(SHORT, enforce="note")
OVER = (
    "1 shortfall that was accepted on adoption is there no more; `gatecheck adopt` takes such entries off "
    "gatecheck.accepted.yaml."
)
CHANGED_NOTE = (
    "Accepted on adoption and no longer, as the record changed: drainage/earthworm-biomass (false-positive-risk)."
)


def judged(*findings: Finding, name: str = ID) -> Judged:
    """A record with findings, as a verdict holds it."""
    return Judged(name, Place("a.json"), "A claim.", "p = 0.03", None, findings)


def told(entries: tuple[AcceptedShortfall, ...]) -> list[tuple[str, str, str]]:
    """The entries as texts."""
    return [(each.record, each.rule, each.digest) for each in entries]


def test_what_was_accepted_does_not_block_and_says_so() -> None:
    done = accept([(SHORT,)], [found()], [HELD])

    message = f"{SHORT.message} Accepted on adoption, until the record changes in what the rule reads."
    assert done.findings == ((replace(SHORT, outcome="waived", message=message),),)
    assert done.notes == ()


@pytest.mark.parametrize(
    ("entry", "finding", "notes"),
    [
        (CHANGED, SHORT, (CHANGED_NOTE,)),
        (CHANGED, UNDECIDED, ()),
        (HELD, UNDECIDED, ()),
        (HELD, WAIVED, ()),
        (HELD, MET, (OVER,)),
        (CHANGED, MET, (OVER,)),
        (HELD, NOTED, (OVER,)),
        (HELD, replace(SHORT, outcome="does-not-apply"), (OVER,)),
        (HELD, Finding("family", "short", "block"), (OVER,)),
        (AcceptedShortfall("gone", RULE, SHORT.digest), SHORT, (OVER,)),
    ],
)
def test_all_else_is_left_as_it_is(entry: AcceptedShortfall, finding: Finding, notes: tuple[str, ...]) -> None:
    done = accept([(finding,)], [found()], [entry])

    assert done.findings == ((finding,),)
    assert done.notes == notes


def test_many_notes_are_two() -> None:
    names = [f"r{number}" for number in range(7)]
    every = [found(drainage(id=name)) for name in names]
    entries = [AcceptedShortfall(name, RULE, OTHER) for name in names]
    gone = [AcceptedShortfall("gone", rule, OTHER) for rule in ("family", RULE)]

    done = accept([(SHORT,)] * 7, every, [*entries, *gone])

    assert done.notes == (
        "Accepted on adoption and no longer, as the record changed: r0 (false-positive-risk), "
        "r1 (false-positive-risk), r2 (false-positive-risk), r3 (false-positive-risk), r4 (false-positive-risk) "
        "and 2 more.",
        "2 shortfalls that were accepted on adoption are there no more; `gatecheck adopt` takes such entries off "
        "gatecheck.accepted.yaml.",
    )


def test_what_a_plan_does_not_report_is_accepted_as_one() -> None:
    """Until the plan changes, or another of its hypotheses is not reported."""
    path = "plans/p.json"
    findings = tuple(replace(SHORT, message=f"{name} is not reported.") for name in ("H1", "H2"))
    plan = Judged(path, Place(path), None, "a plan", None, findings, kind="plan")

    entries = adoption(None, [plan, judged(SHORT)], whole=True).entries
    done = accept([(SHORT,), plan.findings], [found(), plan], entries)
    other = [AcceptedShortfall(one.record, RULE, OTHER) for one in entries]

    assert told(entries) == [(ID, RULE, SHORT.digest), (path, RULE, SHORT.digest)]
    assert [[one.outcome for one in row] for row in done.findings] == [["waived"], ["waived", "waived"]]
    assert done.findings[1][1].message == (
        "H2 is not reported. Accepted on adoption, until the plan changes in what the rule reads."
    )
    assert accept([(SHORT,), plan.findings], [found(), plan], other).notes == (
        f"Accepted on adoption and no longer, as the record or plan changed: {ID} ({RULE}), {path} ({RULE}).",
    )


def test_adoption_lists_what_blocks_and_is_short() -> None:
    family = replace(SHORT, rule="family")
    records = [
        judged(SHORT, family, name="b"),
        judged(NOTED, MET, name="c"),
        judged(UNDECIDED, WAIVED, SHORT, name="a"),
    ]

    done = adoption(None, records, whole=True)

    assert told(done.entries) == [
        ("a", RULE, SHORT.digest),
        ("b", RULE, SHORT.digest),
        ("b", "family", SHORT.digest),
    ]
    assert (done.added, done.dropped) == (3, 0)


@pytest.mark.parametrize(
    ("entry", "finding", "kept"),
    [
        (HELD, SHORT, True),
        (HELD, WAIVED, True),
        (HELD, UNDECIDED, True),
        (CHANGED, SHORT, False),
        (HELD, MET, False),
        (HELD, NOTED, False),
        (HELD, Finding("family", "short", "block"), False),
    ],
)
def test_a_list_that_is_there_keeps_what_holds_and_takes_nothing_on(
    entry: AcceptedShortfall, finding: Finding, kept: bool
) -> None:
    new = judged(SHORT, name="new")

    done = adoption([entry], [judged(finding), new], whole=True)

    assert told(done.entries) == (told((entry,)) if kept else [])
    assert (done.added, done.dropped) == (0, int(not kept))


def test_a_record_that_may_be_unreadable_keeps_its_entry() -> None:
    gone = [AcceptedShortfall("gone", RULE, SHORT.digest)]

    assert told(adoption(gone, [], whole=False).entries) == told(tuple(gone))
    assert adoption(gone, [], whole=True).dropped == 1


def test_the_file_says_what_it_is_and_how_an_entry_ends(tmp_path: Path) -> None:
    text = as_file([HELD])

    assert text == (
        "# What fell short when the team adopted the gate: each entry lets one rule on one record pass, with the "
        "numbers that\n"
        "# the record had, and for a rule that reads more than numbers with that too. "
        "An entry ends as soon as one of these\n"
        "# changes; what falls short anew blocks. Running\n"
        "# `gatecheck adopt` again takes off what has ended and adds nothing: to begin anew, delete this file "
        "first.\n"
        "gatecheck: accepted/1\n"
        "accepted:\n"
        f'  - {{record: "drainage/earthworm-biomass", rule: "false-positive-risk", digest: "{SHORT.digest}"}}\n'
    )
    (tmp_path / ACCEPTED_FILE).write_text(as_file([]), encoding="utf-8")
    empty = read_accepted(tmp_path, None)
    assert empty.value is not None
    assert empty.value.accepted == ()


@given(st.text(st.characters(exclude_categories=["Cs"]), min_size=1, max_size=40))
def test_whatever_a_record_is_called_the_file_reads_back(
    tmp_path_factory: pytest.TempPathFactory, name: str
) -> None:
    """A name with characters that no id may have is refused by its pattern, and by nothing before it."""
    root = tmp_path_factory.mktemp("accepted")
    (root / ACCEPTED_FILE).write_text(as_file([AcceptedShortfall(name, RULE, SHORT.digest)]), encoding="ascii")

    read = read_accepted(root, None)

    if read.value is not None:
        assert told(read.value.accepted) == [(name, RULE, SHORT.digest)]
    else:
        assert [one.advice for one in read.problems] == ["give 1 to 200 characters without spaces"]


def test_a_long_list_is_read(tmp_path: Path) -> None:
    """More values than a record may hold: 4,000 entries of three."""
    entries = [AcceptedShortfall(f"r{number:04}", RULE, SHORT.digest) for number in range(4000)]
    (tmp_path / ACCEPTED_FILE).write_text(as_file(entries), encoding="utf-8")

    read = read_accepted(tmp_path, None)

    assert read.problems == ()
    assert read.value is not None
    assert len(read.value.accepted) == 4000
