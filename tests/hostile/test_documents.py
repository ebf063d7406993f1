"""Hostile documents: whatever is done to a valid one, it is found, or a problem, or declares nothing any more.

`GATECHECK_HOSTILE` is the number of documents that are made (1,000 where it is not set).
"""

from __future__ import annotations

import base64
import json
import os
import random
import re
from collections import Counter
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import yaml
from hypothesis import given
from hypothesis import strategies as st

from gatecheck.model.found import Found, Scan
from gatecheck.model.verdict import Problem
from gatecheck.scan import scan
from gatecheck.scan.documents import judged
from gatecheck.scan.readers import READERS
from gatecheck.scan.readers.document import Document

COUNT = int(os.environ.get("GATECHECK_HOSTILE", "1000"))
SEED = 20_310_402
TYPE = "application/vnd.gatecheck.record+json"
DECLARATION = re.compile(rb"gatecheck[\"']?\s*:\s*[\"']?(record|plan|policy|waivers|verdict)/")
MARK = "MARKED"

RECORD: dict[str, Any] = {
    "gatecheck": "record/1",
    "id": "soil/one",
    "claim": "Drainage increases biomass.",
    "test": {"name": "two-sample t", "statistic": "t", "value": 2.21, "df": [34], "p": "0.034", "sides": 2},
    "estimate": {
        "measure": "mean difference",
        "value": 4.2,
        "interval": {"level": 0.95, "low": 0.34, "high": 8.06},
    },
    "sample": {"unit": "plot", "n": 36, "groups": [{"name": "drained", "n": 18}, {"name": "undrained", "n": 18}]},
    "prior": {"probability": 0.25, "basis": "4 of 16 held up"},
    "provenance": {"inputs": [{"path": "data/plots.csv"}], "software": {"r": "4.5"}},
}

#: Values that no field may have, as JSON and as YAML write them.
NEVER = [
    ("NaN", ".nan"),
    ("Infinity", "+.INF"),
    ("-Infinity", "-.inf"),
    ("1e400", "1e400"),
    ("-1e999", "-1e999"),
    ("9" * 5000, "9" * 5000),
    ("9" * 500, "0x" + "F" * 500),
    ('"\\ud800"', '"\\ud800"'),
    ("[" * 100 + "]" * 100, "[" * 100 + "]" * 100),
    ("[" * 50_000, "[" * 50_000),
    ('{"a":' * 70 + "1" + "}" * 70, "{a: " * 70 + "1" + "}" * 70),
    ('{"x": 1, "x": 2}', "{x: 1, x: 2}"),
    ('"' + "x" * 10_001 + '"', "x" * 10_001),
]
#: Values that some fields may have.
SOMETIMES = [
    *(("true", "yes"), ("null", "~"), ('"text"', "text"), ("[]", "[]"), ("{}", "{}"), ('""', "''"), ("0", "0")),
    *(("-1", "-1"), ("1e-5", "1e-5"), ("1.5", "1.5"), ('"0.05"', "'0.05'"), ('"<0.001"', "'<0.001'")),
    *(('"\\u0000\\u001b[0m\\n::error::x"', '"\\0\\e[0m\\n::error::x"'), ("[[1]]", "[[1]]"), ("1e308", "1e308")),
    *(('{"gatecheck": "record/1"}', "{gatecheck: record/1}"), ('"NaN"', "NaN"), ("1E+2", "012"), ("5e-324", ".5")),
]


@dataclass(frozen=True)
class Made:
    """A file, how many records it had, and whether what was done to it must be noticed."""

    suffix: str
    content: bytes
    records: int
    must_fail: bool = False


def paths(value: Any, path: tuple[Any, ...] = ()) -> Iterator[tuple[Any, ...]]:
    """Yield the path of every value inside `value`."""
    members = value.items() if isinstance(value, dict) else enumerate(value) if isinstance(value, list) else ()
    for step, inner in members:
        yield (*path, step)
        yield from paths(inner, (*path, step))


def changed(chance: random.Random, number: int) -> tuple[dict[str, Any], tuple[Any, ...]]:
    """Return a record of its own id with the mark in place of one value, and the path of that."""
    record = json.loads(json.dumps(RECORD)) | {"id": f"soil/{number}"}
    path = chance.choice(list(paths(record)))
    holder = record
    for step in path[:-1]:
        holder = holder[step]
    holder[path[-1]] = MARK
    return record, path


def written(suffix: str, record: dict[str, Any], put: tuple[str, str]) -> str:
    """Return the record as text, with the raw value where the mark is."""
    if suffix in {".yaml", ".yml"}:
        return yaml.dump(record, Dumper=yaml.CSafeDumper, sort_keys=False).replace(MARK, put[1])
    return json.dumps(record).replace(f'"{MARK}"', put[0])


def in_file(chance: random.Random, suffix: str, text: str) -> tuple[bytes, int]:
    """Return a file around the text of a record, and the number of records in it."""
    other = json.dumps(RECORD | {"id": f"other/{chance.random()}"})
    if suffix == ".ipynb":
        return in_notebook(chance, text), 1
    if suffix == ".jsonl":
        return f'{{"log": 1}}\n\n{text}\n{other}\n'.encode(), 2
    if suffix == ".json" and chance.random() < 0.5:
        return f"[\n{other},\n{text}\n]\n".encode(), 2
    if suffix == ".yml":
        return f"---\n{text}\n---\n{other}\n".encode(), 2
    return text.encode(), 1


def in_notebook(chance: random.Random, text: str) -> bytes:
    """Return a notebook with the text of a record in one of the forms that kernels write."""
    forms: list[Callable[[], str]] = [
        lambda: text,
        lambda: json.dumps(text),
        lambda: json.dumps(text.splitlines(keepends=True)),
        lambda: json.dumps(base64.encodebytes(text.encode()).decode()),
    ]
    output = {"output_type": "display_data", "data": {"text/plain": "x", TYPE: MARK}, "metadata": {}}
    cells = [{"cell_type": "code", "metadata": {}, "outputs": [output], "source": "show(result)"}]
    notebook = {"cells": cells, "metadata": {}, "nbformat": 4, "nbformat_minor": 5}
    return json.dumps(notebook, indent=1).replace(f'"{MARK}"', chance.choice(forms)()).encode()


def with_a_value(chance: random.Random, number: int) -> Made:
    """Put a wrong value in place of one that the record had."""
    suffix = chance.choice(list(READERS))
    record, path = changed(chance, number)
    never = chance.random() < 0.5
    content, records = in_file(
        chance, suffix, written(suffix, record, chance.choice(NEVER if never else SOMETIMES))
    )
    return Made(suffix, content, records, must_fail=never and path != ("gatecheck",))


def with_a_key_twice(chance: random.Random, number: int) -> Made:
    """Give one key of the record twice, at the top or within."""
    suffix = chance.choice([".json", ".jsonl", ".ipynb"])
    record, path = changed(chance, number)
    key = next(step for step in reversed(path) if isinstance(step, str))
    text = written(suffix, record, ('"soil"', "")).replace(f'"{key}":', f'"{key}": 1, "{key}":', 1)
    content, records = in_file(chance, suffix, text)
    return Made(suffix, content, records, must_fail=True)


def with_bytes_changed(chance: random.Random, number: int) -> Made:
    """Flip, cut, drop, repeat or insert bytes anywhere in the file."""
    suffix = chance.choice(list(READERS))
    record = json.loads(json.dumps(RECORD)) | {"id": f"soil/{number}"}
    content, records = in_file(chance, suffix, written(suffix, record, ("", "")))
    for _ in range(chance.choice([1, 1, 1, 2, 5, 20])):
        content = one_change(chance, content)
    return Made(suffix, content, records)


def one_change(chance: random.Random, content: bytes) -> bytes:
    """Return `content` with one change."""
    at, to = sorted(chance.randrange(len(content) + 1) for _ in range(2))
    piece = content[at : min(to, at + 30)]
    odd = chance.choice([
        bytes([chance.randrange(256)]),
        b'"',
        b"{",
        b"[",
        b"\\",
        b"\n",
        b"\xff\xfe",
        b"\0",
        b"#",
        b": ",
        b"&a *a",
    ])
    return chance.choice([
        content[:at] + odd + content[at + 1 :],
        content[:at] + odd + content[at:],
        content[:at] + content[at + len(piece) :],
        content[:at] + piece + piece + content[at + len(piece) :],
        content[: max(at, 1)],
    ])


def recoded(chance: random.Random, number: int) -> Made:
    """Write the file in another encoding."""
    made = with_a_value(chance, number)
    text = made.content.decode()
    encoding = chance.choice(["utf-16", "utf-16-le", "utf-16-be", "utf-32", "utf-8-sig"])
    must_fail = made.must_fail or (encoding != "utf-8-sig" and DECLARATION.search(made.content) is not None)
    return Made(made.suffix, text.encode(encoding), made.records, must_fail and made.suffix != ".ipynb")


MAKERS = [with_a_value, with_a_value, with_a_key_twice, with_bytes_changed, with_bytes_changed, recoded]


def outcomes(found: Scan) -> tuple[Counter[str], Counter[str]]:
    """Return how many records were found, and how many problems, in each file."""
    at = [place for one in found.found for place in (one.at, *one.also_at)]
    return Counter(place.path for place in at), Counter(one.at.path for one in found.problems)


def declared(made: Made) -> int:
    """Return how many records the file still declares, by other parsers than those under test.

    What these cannot parse declares one if its bytes look so.
    """
    wide = made.content[:2] in {b"\xff\xfe", b"\xfe\xff"} or b"\0" in made.content[:4]
    narrow = made.content.replace(b"\0", b"") if wide else made.content
    if made.suffix == ".ipynb":
        return int(b"vnd.gatecheck" in narrow and _notebook_declares(made.content))
    if made.suffix == ".jsonl" and not wide:
        lines = [line for line in made.content.split(b"\n") if line.strip()]
        return sum(declared(Made(".json", line, 1)) for line in lines)
    try:
        text = made.content.decode("utf-8-sig")
        values = [_plain(node) for node in yaml.compose_all(text)] if "y" in made.suffix else [json.loads(text)]
        json.dumps(values, ensure_ascii=False).encode()  # half of a surrogate pair is no text
    except (ValueError, RecursionError, yaml.YAMLError):
        return int(DECLARATION.search(narrow) is not None)
    return sum(_declared(value) for value in values)


def _notebook_declares(content: bytes) -> bool:
    try:
        notebook = json.loads(content.decode("utf-8-sig"))
    except (ValueError, RecursionError):
        return True
    return any(path[-1] == TYPE and "metadata" not in path for path in paths(notebook))


def _plain(node: yaml.Node | None) -> Any:
    """Return a YAML node as dicts, lists and texts; other scalars do not matter here."""
    if isinstance(node, yaml.MappingNode):
        return {str(key.value): _plain(value) for key, value in node.value}
    if isinstance(node, yaml.SequenceNode):
        return [_plain(value) for value in node.value]
    # YAML 1.1, which this parser follows, takes 1e-5 for a text.
    return node.value if node is not None and node.tag.endswith(":str") and node.value[1:2] != "e" else None


def _declared(value: Any) -> int:
    tops = value if isinstance(value, list) else [value]
    declaring = sum(isinstance(top, dict) and isinstance(top.get("gatecheck"), str) for top in tops)
    inner = [(path[-1], at(value, path)) for path in paths(value)]
    nested = any(key == "gatecheck" and isinstance(one, str) and one.startswith("record/") for key, one in inner)
    return max(declaring, int(nested))


def at(value: Any, path: tuple[Any, ...]) -> Any:
    """Return what stands at the path."""
    for step in path:
        value = value[step]
    return value


def test_no_hostile_document_passes_unnoticed(tmp_path: Path) -> None:
    chance = random.Random(SEED)  # noqa: S311  # the same documents every time, not secret ones
    made = {}
    for number in range(COUNT):
        one = chance.choice(MAKERS)(chance, number)
        made[f"{number:06}{one.suffix}"] = one
        (tmp_path / f"{number:06}{one.suffix}").write_bytes(one.content)
    result = scan(tmp_path, ["**"], [])
    found, problems = outcomes(result)
    assert result.files == COUNT
    missed = [name for name, one in made.items() if not problems[name] and found[name] < one.records]
    assert [name for name in missed if found[name] < declared(made[name])] == []
    accepted = [name for name, one in made.items() if one.must_fail and not problems[name]]
    assert accepted == []
    assert len(missed) < 0.15 * COUNT  # else the documents were too broken to test anything
    assert sum(found.values()) > 0.1 * COUNT
    assert all(one.message.isprintable() and one.advice.isprintable() for one in result.problems)
    assert max(len(one.message) for one in result.problems) < 400


def all_of(suffix: str, content: bytes) -> list[Found | Problem]:
    """Read bytes and judge what they hold."""
    read = READERS[suffix](f"x{suffix}", content)
    return [each for one in read for each in (judged(one) if isinstance(one, Document) else [one])]


WORDS = b"""gatecheck "gatecheck": "record/1" gatecheck:record/1 { } [ ] : , " \\ud800 - ? &a *a << !!int | 1e400
NaN .nan --- "cells": "outputs": "data": "application/vnd.gatecheck.record+json": null 0x %YAML"""
PIECES = st.sampled_from([*WORDS.split(), b"\n", b" ", b"\0", b"\xff", b"\xef\xbb\xbf", b"\xff\xfe", b"\n---\n"])


@given(
    st.sampled_from(sorted(READERS)),
    st.one_of(st.binary(max_size=200), st.lists(PIECES, max_size=40).map(b"".join)),
)
def test_no_bytes_raise(suffix: str, content: bytes) -> None:
    """Places stay within the file, whatever is in it."""
    lines = content.count(b"\n") + 1
    for one in all_of(suffix, content):
        at_line = one.at.line
        assert 1 <= at_line <= lines + 1


@given(
    st.sampled_from(sorted(READERS)),
    st.recursive(
        st.none() | st.booleans() | st.floats() | st.text(),
        lambda inner: st.lists(inner) | st.dictionaries(st.sampled_from([*RECORD, "x", "p", "n"]), inner),
    ),
)
def test_a_record_of_any_values_is_a_record_or_a_problem(suffix: str, value: Any) -> None:
    document = (
        {**value, "gatecheck": "record/1"} if isinstance(value, dict) else {"gatecheck": "record/1", "id": value}
    )
    text = json.dumps(document)
    if suffix == ".ipynb":
        text = json.dumps({"cells": [{"outputs": [{"data": {TYPE: document}}]}]})
    assert all_of(suffix, text.encode()) != []
