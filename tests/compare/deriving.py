"""What the tests of derived figures share: bare records by id, judged in one tree."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from support import Answer, Document, judge


def judged(tmp_path: Path, records: dict[str, Document]) -> Answer:
    """The answer of the real command on these records, each with its id."""
    made = [{"gatecheck": "record/1", "id": name, **record} for name, record in records.items()]
    return judge(tmp_path, *made)


def said_of(tmp_path: Path, **record: Any) -> tuple[str, str, str]:
    """What `numbers-agree` says of one record: outcome, message and remedy."""
    said = judged(tmp_path, {"one": record}).rule("numbers-agree", "one")
    return str(said["outcome"]), str(said["message"]), str(said.get("remedy", ""))


def alarms(tmp_path: Path, records: dict[str, Document]) -> dict[str, str]:
    """What `numbers-agree` says of those records that do not meet it."""
    answer = judged(tmp_path, records)
    assert not answer.verdict["problems"]
    said = {name: answer.rule("numbers-agree", name) for name in records}
    return {name: each["message"] for name, each in said.items() if each["outcome"] != "met"}
