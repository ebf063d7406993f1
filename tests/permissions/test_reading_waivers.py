"""The file of waivers: every fault with its line, and the base of a pull request."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
from support import commit_all

from gatecheck.errors import CannotJudge
from gatecheck.permissions.waivers import WAIVERS_FILE, read_waivers

ENTRY: dict[str, Any] = {
    "record": "yield_2030",
    "rule": "fresh",
    "reason": "The archive is moved next week.",
    "granted_by": "Bo Sample",
    "granted_on": "2031-05-01",
    "until": "2031-05-31",
    "digest": "sha256:" + "0" * 64,
}


def write(root: Path, *entries: dict[str, Any]) -> None:
    """Write the file with one entry on each line from the third on."""
    lines = "".join(f"  - {json.dumps(entry)}\n" for entry in entries)
    (root / WAIVERS_FILE).write_text(f"gatecheck: waivers/1\nwaivers:\n{lines}", encoding="utf-8")


def faults(root: Path) -> list[tuple[int, str, str]]:
    """The problems of the file as line, message and advice."""
    read = read_waivers(root, None)
    assert read.value is None
    assert {one.at.path for one in read.problems} == {WAIVERS_FILE}
    return [(one.at.line, one.message, one.advice) for one in read.problems]


def test_no_file_is_no_waiver(tmp_path: Path) -> None:
    read = read_waivers(tmp_path, None)

    assert (read.value, read.file, read.problems, read.notes) == (None, None, (), ())


def test_dates_need_no_quotes(tmp_path: Path) -> None:
    (tmp_path / WAIVERS_FILE).write_text(
        "gatecheck: waivers/1\n"
        "waivers:\n"
        "  - record: yield_2030\n"
        "    rule: fresh\n"
        "    reason: The archive is moved next week.\n"
        "    granted_by: Bo Sample <bo@example.org>\n"
        "    granted_on: 2031-05-01\n"
        "    until: 2031-05-31\n"
        f"    digest: sha256:{'0' * 64}\n",
        encoding="utf-8",
    )

    read = read_waivers(tmp_path, None)

    assert read.value is not None
    (one,) = read.value.waivers
    assert (one.record, one.until, one.granted_by) == ("yield_2030", "2031-05-31", "Bo Sample <bo@example.org>")


def test_dates_that_no_calendar_has(tmp_path: Path) -> None:
    write(tmp_path, ENTRY, {**ENTRY, "rule": "family", "granted_on": "2031-02-29", "until": "2031-13-01"})

    assert faults(tmp_path) == [
        (4, "waivers[1].granted_on is 2031-02-29, a day that no calendar has", "give a real day"),
        (4, "waivers[1].until is 2031-13-01, a day that no calendar has", "give a real day"),
    ]


def test_an_end_before_the_beginning(tmp_path: Path) -> None:
    write(tmp_path, {**ENTRY, "until": "2031-04-30"})

    assert faults(tmp_path) == [
        (3, "waivers[0].until is 2031-04-30, before granted_on", "give a day from 2031-05-01 on")
    ]


def test_one_day_is_long_enough(tmp_path: Path) -> None:
    write(tmp_path, {**ENTRY, "until": "2031-05-01"})

    assert read_waivers(tmp_path, None).problems == ()


def test_the_same_permission_twice(tmp_path: Path) -> None:
    write(tmp_path, ENTRY, {**ENTRY, "record": "other"}, {**ENTRY, "until": "2031-06-30"})

    assert faults(tmp_path) == [(5, "waivers[2] waives fresh on yield_2030 a second time", "keep one of the two")]


def test_all_faults_of_fields_are_told(tmp_path: Path) -> None:
    broken = {key: value for key, value in ENTRY.items() if key != "reason"}
    write(tmp_path, {**broken, "digest": "abc", "til": "2031-05-31", "until": "May"})

    assert faults(tmp_path) == [
        (
            3,
            "waivers[0].til is no known key",
            "the nearest known one is until (known: digest, granted_by, granted_on, reason, record, rule, until)",
        ),
        (3, "waivers[0].until is 'May'", "give a date such as 2031-04-02"),
        (3, "waivers[0].digest is 'abc'", "give a SHA-256 digest in hexadecimal digits"),
        (3, "waivers[0].reason is missing", "give it: why the claim may be merged all the same"),
    ]


@pytest.mark.parametrize(
    ("text", "line", "message"),
    [
        ("- 1\n", 1, "the file is a list, not an object"),
        ("gatecheck: waivers/1\nwaivers: [\n", 3, None),
        ("gatecheck: waivers/1\nwaivers: []\nwaivers: []\n", 3, "waivers is given twice"),
        ("gatecheck: waivers/1\n---\ngatecheck: waivers/1\n", 1, "the file holds 2 documents"),
        ("gatecheck: policy/1\n", 1, "gatecheck is 'policy/1'"),
        ("", 1, None),
    ],
)
def test_a_file_that_is_none_is_a_problem(tmp_path: Path, text: str, line: int, message: str | None) -> None:
    (tmp_path / WAIVERS_FILE).write_text(text, encoding="utf-8")

    (only,) = faults(tmp_path)

    assert only[0] == line
    assert message is None or only[1] == message


def test_a_folder_in_its_place_is_no_missing_file(tmp_path: Path) -> None:
    (tmp_path / WAIVERS_FILE).mkdir()

    with pytest.raises(CannotJudge, match=r"gatecheck\.waivers\.yaml cannot be read"):
        read_waivers(tmp_path, None)


def test_what_counts_is_the_base(tmp_path: Path) -> None:
    """A request neither grants itself a waiver, nor does it break or take away those of the base."""
    write(tmp_path, ENTRY)
    base = commit_all(tmp_path, "base")
    unchanged = read_waivers(tmp_path, "HEAD")
    write(tmp_path, ENTRY, {**ENTRY, "record": "other", "until": "never"})
    changed = read_waivers(tmp_path, "HEAD")
    (tmp_path / WAIVERS_FILE).unlink()
    removed = read_waivers(tmp_path, "HEAD")
    commit_all(tmp_path, "without")
    write(tmp_path, ENTRY)
    new = read_waivers(tmp_path, "HEAD")

    at_base = [read.value for read in (unchanged, changed, removed)]
    assert [value and [one.record for one in value.waivers] for value in at_base] == [["yield_2030"]] * 3
    counts = f"what counts is the base, {base[:12]}."
    assert unchanged.notes == ()
    assert changed.notes == (f"gatecheck.waivers.yaml is changed here; {counts}",)
    assert removed.notes == (f"gatecheck.waivers.yaml is removed here; {counts}",)
    assert new.value is None
    assert new.notes[0].startswith("gatecheck.waivers.yaml is new here; what counts is the base, ")
    assert changed.problems == ()
