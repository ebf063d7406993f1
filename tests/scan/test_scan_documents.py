"""Documents: what is a record, what is something else, and how every fault is said and placed."""

from __future__ import annotations

import base64
import dataclasses
import json
import re
from pathlib import Path
from typing import Any

import pytest
from scan.scanning import Write, places, said

from gatecheck.model.found import Scan
from gatecheck.model.record import Record
from gatecheck.model.verdict import Place
from gatecheck.scan import scan
from gatecheck.scan.readers import yaml_text
from gatecheck.scan.readers.document import Document
from gatecheck.scan.readers.positions import Positions
from gatecheck.schema.read import shown

TYPE = "application/vnd.gatecheck.record+json"
FLAT = "write the document flat, as its format is"
UNKNOWN = "leave the field out where it is unknown"
AGAIN = "mend the JSON there, or write the file again with a JSON library"
CUT = "the text ends too early: write the file again, whole"
STORE = "store each record as its own document, as an element of a list that is the document, or as a .jsonl line"


def record(identifier: str = "plot/one", **fields: Any) -> dict[str, Any]:
    """Return a record."""
    return {"gatecheck": "record/1", "id": identifier, "test": {"statistic": "t", "df": 34, "p": 0.034}, **fields}


def everything(root: Path) -> Scan:
    """Scan all of the folder."""
    return scan(root, ["**"], [])


def problem(root: Path, write: Write, name: str, content: Any) -> tuple[str, str, str]:
    """Return the one problem of a tree that holds one file, in which there is no record."""
    write(name, content)
    found = everything(root)
    assert found.found == ()
    assert len(found.problems) == 1
    return said(found)[0]


def silent(root: Path, write: Write, name: str, content: Any) -> bool:
    """Whether a tree that holds one file has neither record nor problem."""
    write(name, content)
    found = everything(root)
    assert found.files == 1
    return not found.found and not found.problems


# --- What is a record


def test_records_in_every_form(root: Path, write: Write) -> None:
    write("a.json", record("json"))
    write("b.jsonl", f"\n{json.dumps(record('line/1'))}\n  \n{json.dumps(record('line/2'))}\r\n")
    write("c.yaml", "# made by hand\n\ngatecheck: record/1\nid: yaml/1\n---\n{gatecheck: record/1, id: yaml/2}\n")
    write("d.yml", "- gatecheck: record/1\n  id: yml/1\n- gatecheck: record/1\n  id: yml/2\n")
    write("e.JSON", [record("list/1"), record("list/2")])
    write("f.txt", record("text"))
    assert places(everything(root)) == [
        ("json", "a.json:1"),
        ("line/1", "b.jsonl:2"),
        ("line/2", "b.jsonl:4"),
        ("yaml/1", "c.yaml:3"),
        ("yaml/2", "c.yaml:6"),
        ("yml/1", "d.yml:1"),
        ("yml/2", "d.yml:3"),
        ("list/1", "e.JSON:2"),
        ("list/2", "e.JSON:11"),
    ]
    assert said(everything(root)) == []
    assert everything(root).files == 5


def test_a_record_begins_where_its_brace_stands(root: Path, write: Write) -> None:
    write("a.json", "\ufeff\n\n  " + json.dumps(record()))
    assert places(everything(root)) == [("plot/one", "a.json:3")]


def test_the_digest_is_of_the_canonical_document(root: Path, write: Write) -> None:
    r"""The digest was made with `printf '{"gatecheck":"record/1","id":"caf\\u00e9"}' | sha256sum` of coreutils."""
    write("a.json", '{ "id": "caf\\u00e9",\n "gatecheck": "record/1" }')
    write("b.yaml", "gatecheck: record/1\nid: café\n")
    (one,) = everything(root).found
    assert one.digest == "cc4695e8dc1866ac8f36ed20902c8d91b550658f3b5c975bea5123ceaff80250"
    assert one.also_at == (Place("b.yaml", 1),)


@pytest.mark.parametrize(
    "content",
    [
        {"name": "site", "dependencies": {"gatecheck": "^1.0"}},
        {"gatecheck": {"policy": "strict"}},
        {"gatecheck": None},
        {"gatecheck": 1},
        {"gatecheck": "plan/1", "hypotheses": [{"p": float("nan")}]},
        [{"gatecheck": "waivers/1"}, {"gatecheck": "verdict/1"}],
        [[{"gatecheck": 1}]],
        {"text": '{"gatecheck": "record/1"'},
        "gatecheck: record",
        '{"gatecheck": ["^1.0", ',
        '{"gatecheck": 1, "gatecheck": 2, ',
    ],
)
def test_what_is_not_ours_is_passed_over(root: Path, write: Write, content: Any) -> None:
    assert silent(root, write, "a.json", content)


def test_a_workflow_that_runs_the_command_is_passed_over(root: Path, write: Write) -> None:
    assert silent(root, write, "ci.yml", "on: push\njobs:\n  gatecheck:\n    steps: [{run: gatecheck weigh}]\n")


@pytest.mark.parametrize("kind", ["plan", "policy", "waivers", "verdict"])
def test_other_kinds_are_passed_over(root: Path, write: Write, kind: str) -> None:
    assert silent(root, write, "a.yaml", f"gatecheck: {kind}/1\n")


# --- Declarations


@pytest.mark.parametrize("kind", ["record", "plan", "policy", "waivers", "verdict"])
def test_an_unknown_version(root: Path, write: Write, kind: str) -> None:
    assert problem(root, write, "a.json", {"id": "x", "gatecheck": f"{kind}/2"}) == (
        "a.json:3",
        f"the document is declared as '{kind}/2'; this version of gatecheck reads {kind}/1",
        f"write it as {kind}/1, or update gatecheck",
    )


def test_an_unknown_kind(root: Path, write: Write) -> None:
    assert problem(root, write, "a.json", {"gatecheck": "recrod/1\n::error::"}) == (
        "a.json:2",
        "the document is declared as 'recrod/1\\n::error::', which is no known kind of document",
        "the nearest known one is record (known: accepted, plan, policy, record, seal, verdict, waivers)",
    )


def test_a_declaration_that_is_given_twice(root: Path, write: Write) -> None:
    content = '{"gatecheck": "record/1",\n "gatecheck": "plan/1"}'
    assert problem(root, write, "a.json", content) == (
        "a.json:2",
        "the key gatecheck is given twice",
        "keep one of the two",
    )


def test_a_record_inside_another_document(root: Path, write: Write) -> None:
    assert problem(root, write, "a.json", {"results": [record()]}) == (
        "a.json:3",
        "the document holds a record inside it (at results[0]), where none is looked for",
        STORE,
    )


def test_records_inside_another_document_are_one_problem(root: Path, write: Write) -> None:
    content = {"gatecheck": "plan/1", "old": {"a: b": [record("a"), record("b")]}, "x": {"gatecheck": "record/7"}}
    assert problem(root, write, "a.json", content) == (
        "a.json:5",
        "the document holds 3 records inside it (at old.'a: b'[0]), where none is looked for",
        STORE,
    )


def test_an_element_that_declares_nothing_among_others(root: Path, write: Write) -> None:
    write("a.json", [record("a"), {"id": "b"}, None, record("c")])
    found = everything(root)
    advice = 'add "gatecheck": "record/1" to it, or take it out'
    assert [one[0] for one in places(found)] == ["a", "c"]
    assert said(found) == [
        ("a.json:11", "element 1 of this list does not declare what it is, and others do", advice),
        ("a.json:14", "element 2 of this list does not declare what it is, and others do", advice),
    ]


# --- Faults of records


def test_all_faults_of_a_record_are_told_at_their_lines(root: Path, write: Write) -> None:
    content = (
        '{"gatecheck": "record/1",\n'
        ' "id": "plot/one",\n'
        ' "status": "planed",\n'
        ' "sample": {"groups": [{"name": "a",\n'
        '   "n": "18"}]},\n'
        ' "test": {"p": NaN,\n'
        '  "value": 1e400,\n'
        '  "alpha": 0.05, "statistic": "t",\n'
        '  "alpha": 0.1},\n'
        ' "estimate": {"value": -Infinity},\n'
        ' "prior": [0.5],\n'
        ' "claim": "\\ud800"\n'
        "}\n"
    )
    write("a.json", content)
    assert said(everything(root)) == [
        (
            "a.json:3",
            "plot/one: status is 'planed'",
            "known: confirmatory, descriptive, exploratory",
        ),
        (
            "a.json:5",
            "plot/one: sample.groups[0].n is the text '18', where only a number is meant",
            "write 18 without quotes",
        ),
        ("a.json:6", "plot/one: test.p is NaN, which is no number in JSON or in a record", UNKNOWN),
        (
            "a.json:7",
            "plot/one: test.value is 1e400, too large for a double",
            "give a number that a double can hold",
        ),
        ("a.json:9", "plot/one: test.alpha is given twice", "keep one of the two"),
        (
            "a.json:10",
            "plot/one: estimate.measure is missing",
            "give it: what is estimated, such as mean difference or odds ratio",
        ),
        (
            "a.json:10",
            "plot/one: estimate.value is -Infinity, which is no number in JSON or in a record",
            UNKNOWN,
        ),
        (
            "a.json:11",
            "plot/one: prior is a list, not an object",
            "write an object: Probability of a real effect before these data, and what it rests on.",
        ),
        ("a.json:12", "plot/one: claim holds half of a surrogate pair", "write the text in valid Unicode"),
    ]


def test_a_record_without_a_usable_id(root: Path, write: Write) -> None:
    write("a.json", record() | {"id": 5})
    write("b.json", record("has spaces ::error::"))
    assert said(everything(root)) == [
        ("a.json:3", "a record: id is 5, not a text", "put it in quotes"),
        (
            "b.json:3",
            "'has spaces ::error::': id is 'has spaces ::error::'",
            "give 1 to 200 characters without spaces",
        ),
    ]


def test_a_key_from_a_file_is_told_in_plain_letters(root: Path, write: Write) -> None:
    key = "x\n::error::\x1b[0m" + "y" * 90
    place, message, _ = problem(root, write, "a.json", record() | {key: 1})
    assert (place, message) == ("a.json:9", f"plot/one: {shown(key)} is no known key")
    assert message.isprintable()
    assert message.startswith("plot/one: 'x\\n::error::\\x1b[0myyy")


def test_a_surrogate_in_a_key(root: Path, write: Write) -> None:
    content = json.dumps(record()).replace('"id"', '"\\udfff": 1, "id"')
    assert problem(root, write, "a.json", content) == (
        "a.json:1",
        "plot/one: '\\udfff' holds half of a surrogate pair",
        "write the text in valid Unicode",
    )


def test_a_very_long_whole_number(root: Path, write: Write) -> None:
    content = json.dumps(record()).replace("34", "9" * 5000)
    assert problem(root, write, "a.json", content)[1:] == (
        "plot/one: test.df is a number of 5000 digits",
        "give a number that a double can hold",
    )


def test_a_number_too_large_for_a_double_but_short(root: Path, write: Write) -> None:
    content = json.dumps(record()).replace("34", "9" * 400)
    message = "plot/one: test.df[0] is a number of very many digits, not a finite number"
    assert problem(root, write, "a.json", content)[1] == message


def test_numbers_as_text_are_taken_where_they_are_allowed(root: Path, write: Write) -> None:
    write("a.json", record(test={"p": "<0.001", "alpha": "0.05"}))
    assert said(everything(root)) == [
        (
            "a.json:6",
            "plot/one: test.alpha is the text '0.05', where only a number is meant",
            "write 0.05 without quotes",
        )
    ]


@pytest.mark.parametrize(
    ("depth", "message"),
    [
        (63, "plot/one: tags[0] is a list, not a text"),
        (65, "plot/one: tags is nested more than 64 deep"),
        (400, "plot/one: tags is nested more than 64 deep"),
    ],
)
def test_a_record_that_nests_too_deep(root: Path, write: Write, depth: int, message: str) -> None:
    content = json.dumps(record()).replace('"id"', f'"tags": {"[" * depth}{"]" * depth}, "id"')
    assert problem(root, write, "a.json", content)[1] == message


def test_a_file_that_nests_deeper_than_can_be_parsed(root: Path, write: Write) -> None:
    content = '{"gatecheck": "record/1",\n "x": "[[[",\n "y":\n' + "[\n" * 62 + "[" * 200_000
    assert problem(root, write, "a.json", content) == ("a.json:66", "the text is nested more than 64 deep", FLAT)


def test_the_text_in_strings_nests_nothing(root: Path, write: Write) -> None:
    brackets = "[" * 5000
    write("a.json", record(claim=brackets))
    assert places(everything(root)) == [("plot/one", "a.json:1")]


def test_a_nesting_of_objects_on_one_line(root: Path, write: Write) -> None:
    content = '{"x": ' * 50_000 + '"gatecheck": "record/1"'
    assert problem(root, write, "a.json", content) == ("a.json:1", "the text is nested more than 64 deep", FLAT)


def test_a_record_of_too_many_values(root: Path, write: Write) -> None:
    place, message, advice = problem(root, write, "a.json", record(tags=["x"] * 10_000))
    assert (place, message) == ("a.json:1", "plot/one: has more than 10000 values")
    assert advice == "keep tables of data apart from the record"


def test_a_record_with_a_very_long_text(root: Path, write: Write) -> None:
    assert problem(root, write, "a.json", record(status="x" * 10_001)) == (
        "a.json:9",
        "plot/one: status is a text of 10001 characters",
        "keep it to 10000",
    )


# --- Texts that are broken


@pytest.mark.parametrize(
    ("content", "told"),
    [
        ('{"gatecheck": "record/1",\n "id": }', ("a.json:2", "the text is no JSON: Expecting value", AGAIN)),
        (
            '{"gatecheck": "record/1",\n "id": "a"',
            ("a.json:2", "the text is no JSON: Expecting ',' delimiter", CUT),
        ),
        (
            '{"gatecheck": "record/1"}\n{"gatecheck": "record/1"}',
            (
                "a.json:2",
                "the text is no JSON: Extra data",
                "put one document into the file, or one on each line of a .jsonl file",
            ),
        ),
        (
            '{"gatecheck": "record/1",\n "id": "a\tb"}',
            ("a.json:2", "the text is no JSON: Invalid control character at", AGAIN),
        ),
        (
            '{"gatecheck": "record/1",\n<<<<<<< HEAD\n "id": "a"\n=======\n "id": "b"\n>>>>>>> other\n}',
            (
                "a.json:2",
                "the text holds the conflict markers of a merge",
                "resolve the merge, and take the markers out",
            ),
        ),
        (
            b'{"gatecheck": "record/1",\n "id": "caf\xe9"}',
            ("a.json:2", "the text is not UTF-8: byte 0xE9 at offset 37", "save the file as UTF-8"),
        ),
        (
            '{"gatecheck": "record/1"}'.encode("utf-16"),
            ("a.json:1", "the text is UTF-16 or UTF-32, not UTF-8", "save the file as UTF-8"),
        ),
        (
            '{"gatecheck": "record/1"}'.encode("utf-16-be"),
            ("a.json:1", "the text is UTF-16 or UTF-32, not UTF-8", "save the file as UTF-8"),
        ),
        (
            '{"gatecheck": "record/1"}'.encode("utf-32-le"),
            ("a.json:1", "the text is UTF-16 or UTF-32, not UTF-8", "save the file as UTF-8"),
        ),
    ],
)
def test_broken_json(root: Path, write: Write, content: Any, told: tuple[str, str, str]) -> None:
    assert problem(root, write, "a.json", content) == told


@pytest.mark.parametrize("content", ['{"gatecheck": "^1.0"'.encode("utf-16"), b"{\xff gatecheck", b"\0\0"])
def test_what_is_broken_and_not_ours_is_passed_over(root: Path, write: Write, content: bytes) -> None:
    assert silent(root, write, "package.json", content)


def test_very_many_markers_that_open_and_never_close(root: Path, write: Write) -> None:
    """They are no merge, and looking for the end of each would take hours."""
    content = '{"gatecheck": "record/1",\n' + "<<<<<<< a\n" * 200_000
    assert problem(root, write, "a.json", content)[:2] == (
        "a.json:2",
        "the text is no JSON: Expecting property name enclosed in double quotes",
    )


def test_a_broken_line_hides_no_other(root: Path, write: Write) -> None:
    good = json.dumps(record("good")).encode()
    write("a.jsonl", b'{"gatecheck": "record/1", "id": \n' + good + b'\n{"id": "\xff"}\n[1, 2\n{"other": 1}\n')
    found = everything(root)
    assert places(found) == [("good", "a.jsonl:2")]
    assert said(found) == [
        ("a.jsonl:1", "the text is no JSON: Expecting value", CUT),
        ("a.jsonl:3", "the text is not UTF-8: byte 0xFF at offset 8", "save the file as UTF-8"),
        ("a.jsonl:4", "the text is no JSON: Expecting ',' delimiter", CUT),
    ]


def test_lines_in_the_middle_of_a_merge_are_one_problem(root: Path, write: Write) -> None:
    content = f"{json.dumps(record())}\n<<<<<<< HEAD\n{{}}\n=======\n{{}}\n>>>>>>> other\n"
    assert problem(root, write, "a.jsonl", content)[:2] == (
        "a.jsonl:2",
        "the text holds the conflict markers of a merge",
    )


def test_wide_lines_are_one_problem(root: Path, write: Write) -> None:
    content = (json.dumps(record()) + "\n").encode("utf-16-le") * 3
    assert problem(root, write, "a.jsonl", content)[:2] == ("a.jsonl:1", "the text is UTF-16 or UTF-32, not UTF-8")


# --- YAML


def test_yaml_scalars_follow_the_core_schema() -> None:
    """Values of YAML 1.2.2, section 10.3.2 (https://yaml.org/spec/1.2.2/#1032-tag-resolution)."""
    content = (
        "{a: 1e-5, b: no, c: on, d: 012, e: 0o17, f: 0xFF, g: ~, h: null, i: Null, j: NULL, k: , l: true,\n"
        "m: True, n: FALSE, o: 2001-12-14, p: 1:30, q: +12e03, r: -2E+05, s: .5, t: 1., u: 'no', v: \"5\",\n"
        "w: 1_000, x: nan, y: !!str 5, z: !!float 5, aa: !!int '7', ab: ! 5, ac: !!null '', ad: !!bool 'true',\n"
        "ae: -0, af: tRUE, ag: !!map {}, ah: !!seq [], ai: 0b1}"
    )
    (document,) = yaml_text.read("a.yaml", content.encode())
    assert isinstance(document, Document)
    values = {
        "a": 1e-5,
        "b": "no",
        "c": "on",
        "d": 12,
        "e": 15,
        "f": 255,
        "g": None,
        "h": None,
        "i": None,
        "j": None,
        "k": None,
        "l": True,
        "m": True,
        "n": False,
        "o": "2001-12-14",
        "p": "1:30",
        "q": 12000.0,
        "r": -200000.0,
        "s": 0.5,
        "t": 1.0,
        "u": "no",
        "v": "5",
        "w": "1_000",
        "x": "nan",
        "y": "5",
        "z": 5,
        "aa": 7,
        "ab": "5",
        "ac": None,
        "ad": True,
        "ae": 0,
        "af": "tRUE",
        "ag": {},
        "ah": [],
        "ai": "0b1",
    }
    assert document.value == values
    assert {key: type(value) for key, value in document.value.items()} == {
        key: type(value) for key, value in values.items()
    }


def test_faults_of_yaml_are_told_like_those_of_json(root: Path, write: Write) -> None:
    content = (
        "gatecheck: record/1\n"
        "id: plot/one\n"
        "claim: !python/object/apply:os.system [touch, ran]\n"
        "role: !!int no\n"
        "status: !env HOME\n"
        "test: {p: .nan,\n"
        "  alpha: -.inf,\n"
        "  alpha: 0.05,\n"
        "  value: 1e999}\n"
        "tags: &loop\n"
        "- *loop\n"
        "- *none\n"
        "yes: 1\n"
        "5: x\n"
        "? [a, b]\n"
        ": x\n"
    )
    write("a.yaml", content)
    found = [(one[0], one[1].removeprefix("plot/one: "), one[2]) for one in said(everything(root))]
    assert found == [
        (
            "a.yaml:3",
            "claim has the tag '!python/object/apply:os.system', which is not read",
            "leave the tag out",
        ),
        ("a.yaml:4", "role is 'no', which its tag does not admit", "leave the tag out"),
        ("a.yaml:5", "status has the tag '!env', which is not read", "leave the tag out"),
        ("a.yaml:6", "test.p is .nan, which is no number in JSON or in a record", UNKNOWN),
        ("a.yaml:8", "test.alpha is given twice", "keep one of the two"),
        ("a.yaml:9", "test.value is 1e999, too large for a double", "give a number that a double can hold"),
        ("a.yaml:11", "tags[0] holds itself through the anchor 'loop'", "write the value out"),
        ("a.yaml:12", "tags[1] is an alias of 'none', which is no anchor above", "write the value out"),
        (
            "a.yaml:13",
            "yes is no known key",
            f"known: {', '.join(sorted(field.name for field in dataclasses.fields(Record)))}",
        ),
        ("a.yaml:14", "5 is a key that is no text", "put it in quotes"),
        ("a.yaml:15", "'a list' is a key that is no text", "put it in quotes"),
    ]


def test_a_fault_of_what_is_missing_in_yaml_is_told_at_what_is_around_it(root: Path, write: Write) -> None:
    assert problem(root, write, "a.yaml", "gatecheck: record/1\nid: a\nprior:\n  probability: 0.5\n") == (
        "a.yaml:3",
        "a: prior.basis is missing",
        "give it: what the probability rests on",
    )


def test_a_yaml_alias_stands_for_its_value(root: Path, write: Write) -> None:
    content = "gatecheck: record/1\nid: a\nclaim: &c words\ntags: [*c, &d x, *d]\n"
    content += "sample: {groups: [&g {name: a, n: 3}, *g]}\n"
    write("a.yaml", content)
    (one,) = everything(root).found
    assert one.record.tags == ("words", "x", "x")
    assert one.record.sample is not None
    assert [group.n for group in one.record.sample.groups] == [3, 3]


def test_yaml_aliases_that_grow_without_bound(root: Path, write: Write) -> None:
    """Nine levels of nine would be 387 million values."""
    levels = "".join(f"l{n}: &l{n} [{', '.join([f'*l{n - 1}'] * 9)}]\n" for n in range(1, 9))
    content = "gatecheck: record/1\nid: a\nl0: &l0 [x, x, x, x, x, x, x, x, x]\n" + levels
    place, message, advice = problem(root, write, "a.yaml", content)
    assert (place, message) == ("a.yaml:8", "the text has aliases that stand for more than 100000 values")
    assert advice == "write the values out, without aliases"


@pytest.mark.parametrize(
    ("content", "told"),
    [
        (
            "gatecheck: record/1\nid: [a\nclaim: x\n",
            ("a.yaml:3", "the text is no YAML: did not find expected ',' or ']'", "mend the YAML there"),
        ),
        (
            "gatecheck: record/1\nid: a\x01\n",
            ("a.yaml:2", "the text is no YAML: control characters are not allowed", "take the character out"),
        ),
        (
            "gatecheck: record/1\n<<<<<<< HEAD\nid: a\n=======\nid: b\n>>>>>>> other\n",
            (
                "a.yaml:2",
                "the text holds the conflict markers of a merge",
                "resolve the merge, and take the markers out",
            ),
        ),
        (
            "gatecheck: record/1\n\nx: " + "[" * 70 + "]" * 70,
            ("a.yaml:3", "the text is nested more than 64 deep", FLAT),
        ),
        (
            "gatecheck: record/1\nid: caf\xe9".encode("latin-1"),
            ("a.yaml:2", "the text is not UTF-8: byte 0xE9 at offset 27", "save the file as UTF-8"),
        ),
    ],
)
def test_broken_yaml(root: Path, write: Write, content: Any, told: tuple[str, str, str]) -> None:
    assert problem(root, write, "a.yaml", content) == told


def test_yaml_documents_before_a_broken_one_are_read(root: Path, write: Write) -> None:
    write("a.yaml", "gatecheck: record/1\nid: a\n---\n[\n")
    found = everything(root)
    assert places(found) == [("a", "a.yaml:1")]
    assert [one[0] for one in said(found)] == ["a.yaml:5"]


# --- Notebooks


def notebook(*outputs: Any, **more: Any) -> dict[str, Any]:
    """Return a notebook of two cells; the second has these outputs under the media type of records."""
    data = [
        {"output_type": "display_data", "data": {"text/plain": "x", TYPE: one}, "metadata": {}} for one in outputs
    ]
    cells = [
        {"cell_type": "markdown", "source": ["gatecheck: none"]},
        {
            "cell_type": "code",
            "outputs": [{"output_type": "stream", "text": "hi"}, *data],
            "source": [TYPE, f"'{TYPE}'"],
        },
    ]
    return {"cells": cells, "metadata": {}, "nbformat": 4, "nbformat_minor": 5, **more}


def test_records_as_kernels_write_them(root: Path, write: Write) -> None:
    text = json.dumps(record("text"))
    coded = base64.encodebytes(json.dumps(record("base64")).encode()).decode()
    lines = json.dumps(record("lines"), indent=1).splitlines(keepends=True)
    several = [record("list/1"), record("list/2")]
    content = notebook(record("object"), text, lines, coded, json.dumps([record("text/list")]), several)
    file = write("a.ipynb", content)
    found = everything(root)
    assert said(found) == []
    entries = [
        n for n, line in enumerate(file.read_text().splitlines(), 1) if line.strip().startswith(f'"{TYPE}":')
    ]
    assert places(found) == [
        ("object", f"a.ipynb:{entries[0]} (cell 2, output 2)"),
        ("text", f"a.ipynb:{entries[1]} (cell 2, output 3)"),
        ("lines", f"a.ipynb:{entries[2]} (cell 2, output 4)"),
        ("base64", f"a.ipynb:{entries[3]} (cell 2, output 5)"),
        ("text/list", f"a.ipynb:{entries[4]} (cell 2, output 6)"),
        ("list/1", f"a.ipynb:{entries[5] + 1} (cell 2, output 7)"),
        ("list/2", f"a.ipynb:{entries[5] + 10} (cell 2, output 7)"),
    ]


def test_faults_in_a_notebook_are_told_at_their_lines(root: Path, write: Write) -> None:
    file = write("a.ipynb", notebook(record("a", role="main"), json.dumps(record("b", role="main"))))
    lines = file.read_text().splitlines()
    role = next(n for n, line in enumerate(lines, 1) if '"role"' in line)
    output = [n for n, line in enumerate(lines, 1) if line.strip().startswith(f'"{TYPE}":')][1]
    assert [one[:2] for one in said(everything(root))] == [
        (f"a.ipynb:{role} (cell 2, output 2)", "a: role is 'main'"),
        (f"a.ipynb:{output} (cell 2, output 3)", "b: role is 'main'"),
    ]


@pytest.mark.parametrize(
    ("value", "message", "advice"),
    [
        (
            '{"gatecheck": "record/1",',
            f"the text under {TYPE} is no JSON: Expecting property name enclosed in double quotes",
            "emit the record again, as an object or as JSON text",
        ),
        (
            "no JSON",
            f"the text under {TYPE} is neither JSON nor base64 of JSON",
            "emit the record again, as an object or as JSON text",
        ),
        (
            base64.b64encode(b"\xff\xfe").decode(),
            f"the text under {TYPE} is UTF-16 or UTF-32, not UTF-8",
            "emit the record again, as an object or as JSON text",
        ),
        (
            [],
            f"what stands under {TYPE} does not declare itself a record",
            'give it the key "gatecheck" with the value "record/1"',
        ),
        (
            {"gatecheck": "plan/1"},
            f"what stands under {TYPE} does not declare itself a record",
            'give it the key "gatecheck" with the value "record/1"',
        ),
        (
            {"id": "x"},
            f"what stands under {TYPE} does not declare itself a record",
            'give it the key "gatecheck" with the value "record/1"',
        ),
        (float("nan"), "the output of a record is NaN, which is no number in JSON or in a record", UNKNOWN),
    ],
)
def test_broken_outputs(root: Path, write: Write, value: Any, message: str, advice: str) -> None:
    place, *rest = problem(root, write, "a.ipynb", notebook(value))
    assert place.endswith(" (cell 2, output 2)")
    assert rest == [message, advice]


def test_other_outputs_may_hold_what_json_does_not(root: Path, write: Write) -> None:
    """Plotting libraries write NaN into notebooks, which is no fault of the record beside it."""
    write("a.ipynb", notebook(record(), metadata={"plot": [float("nan"), 1e308]}))
    assert places(everything(root)) == [("plot/one", "a.ipynb:20 (cell 2, output 2)")]
    assert said(everything(root)) == []


def test_an_unknown_media_type_of_ours(root: Path, write: Write) -> None:
    content = json.dumps(notebook(record())).replace("vnd.gatecheck.record", "vnd.gatecheck.result")
    assert problem(root, write, "a.ipynb", content) == (
        "a.ipynb:1 (cell 2, output 2)",
        "the media type 'application/vnd.gatecheck.result+json' is not known",
        f"emit records as {TYPE}",
    )


def test_a_record_where_no_output_is(root: Path, write: Write) -> None:
    content = notebook(record("good"), attachments={"list": [{TYPE: record("lost")}]})
    content["cells"][1]["outputs"][1]["metadata"] = {TYPE: {"expanded": True}}
    file = write("a.ipynb", content)
    lines = file.read_text().splitlines()
    line = max(number for number, text in enumerate(lines, 1) if text.strip() == f'"{TYPE}": {{')
    found = everything(root)
    assert [one[0] for one in places(found)] == ["good"]
    assert said(found) == [
        (
            f"a.ipynb:{line}",
            f"{TYPE} stands where no output of a cell does",
            "let the kernel write it, as the data of a cell's output",
        )
    ]


def test_notebooks_of_other_formats(root: Path, write: Write) -> None:
    old = notebook(record(), nbformat=3)
    assert silent(root, write, "a.ipynb", {"worksheets": [{"cells": old.pop("cells")}], **old})
    assert problem(root, write, "a.ipynb", notebook(record(), nbformat=5)) == (
        "a.ipynb:1",
        "the file is a notebook of format 5, where format 4 is read",
        "save it in format 4, or update gatecheck",
    )


@pytest.mark.parametrize(
    "content", ["", "{", '{"cells": [1, {"outputs": [1, {"data": 1}]}, {"outputs": {}}], "x": "gatecheck: 1"}']
)
def test_notebooks_without_records_are_passed_over(root: Path, write: Write, content: str) -> None:
    assert silent(root, write, "a.ipynb", content)


def test_a_notebook_that_mistakes_its_format_is_read(root: Path, write: Write) -> None:
    """Older formats have no cells at the top, so the number is what is wrong."""
    write("a.ipynb", json.dumps(notebook(record(), nbformat=3)))
    assert places(everything(root)) == [("plot/one", "a.ipynb:1 (cell 2, output 2)")]


def test_a_broken_notebook_with_records(root: Path, write: Write) -> None:
    content = json.dumps(notebook(record()), indent=1)
    lines = content.count("\n")
    assert problem(root, write, "a.ipynb", content[:-2]) == (
        f"a.ipynb:{lines}",
        "the text is no JSON: Expecting ',' delimiter",
        CUT,
    )


def test_a_notebook_that_is_a_list(root: Path, write: Write) -> None:
    assert problem(root, write, "a.ipynb", [{TYPE: 1}])[:2] == (
        "a.ipynb:3",
        f"{TYPE} stands where no output of a cell does",
    )


# --- The same id


def test_copies_of_a_record_are_one(root: Path, write: Write) -> None:
    write("a.ipynb", json.dumps(notebook(record())))
    write("b/r.json", record())
    write("c.yaml", "gatecheck: record/1\nid: plot/one\ntest: {p: 0.034, statistic: t, df: 34}\n")
    found = everything(root)
    assert said(found) == []
    (one,) = found.found
    assert one.at == Place("a.ipynb", 1, 2, 2)
    assert one.also_at == (Place("b/r.json", 1), Place("c.yaml", 1))


def test_one_id_with_different_content_is_a_clash(root: Path, write: Write) -> None:
    write("a.json", [record(), record(harm=True)])
    write("line\nbreak.json", record(role="primary"))
    found = everything(root)
    advice = "give each result its own id, or remove the older of the two"
    message = "plot/one: this id already stands at a.json:2, with other content"
    assert places(found) == [("plot/one", "a.json:2")]
    assert said(found) == [("a.json:11", message, advice), ("line\nbreak.json:1", message, advice)]


def test_an_id_that_is_the_alias_of_another(root: Path, write: Write) -> None:
    write("a.json", record("new", aliases=["new", "old", "older"]))
    write("b.json", record("old"))
    found = everything(root)
    assert [one[0] for one in places(found)] == ["new", "old"]
    assert said(found) == [
        (
            "a.json:1",
            "new: its alias old is the id of the record at b.json:1",
            "take the alias out, or remove the record under the earlier id",
        )
    ]


def test_a_text_on_one_line_is_searched_for_its_lines_once(monkeypatch: pytest.MonkeyPatch) -> None:
    """A long list of records without a line break must not cost a search of the whole text for each of them."""
    searches = []

    def search(pattern: str, text: str) -> list[re.Match[str]]:
        searches.append(pattern)
        return list(re.compile(pattern).finditer(text))

    monkeypatch.setattr("gatecheck.scan.readers.positions.re.finditer", search)
    positions = Positions(json.dumps([{"a": number} for number in range(50)]))

    assert {positions.line((number,)) for number in range(50)} == {1}
    assert len(searches) == 1
