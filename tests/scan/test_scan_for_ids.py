"""The quick search for records by their ids: it parses little, and misses none that a whole scan finds."""

from __future__ import annotations

import base64
import json
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st
from scan.scanning import Git, Write

from gatecheck.errors import CannotJudge
from gatecheck.scan import scan, scan_for
from gatecheck.scan.candidates import may_hold
from gatecheck.scan.readers import READERS
from gatecheck.scan.readers.document import Document

ALL = ["**"]
ID = "plot/77"
MEDIA_TYPE = "application/vnd.gatecheck.record+json"


def record(identifier: str, **more: Any) -> dict[str, Any]:
    """Return a record."""
    return {"gatecheck": "record/1", "id": identifier, **more}


def notebook(data: Any) -> dict[str, Any]:
    """Return a notebook with one output of that content."""
    output = {"output_type": "display_data", "metadata": {}, "data": {MEDIA_TYPE: data}}
    cell = {"cell_type": "code", "source": ['print("\\n")'], "metadata": {}, "outputs": [output]}
    return {"nbformat": 4, "nbformat_minor": 5, "metadata": {}, "cells": [cell]}


def searched(root: Path, *ids: str) -> list[tuple[str, str]]:
    """Return the ids that the search finds, with their places."""
    return [(one.record.id, str(one.at)) for one in scan_for(root, ids, ALL, [])]


TEXT = json.dumps(record(ID))


@pytest.mark.parametrize(
    ("path", "text"),
    [
        ("a.json", TEXT),
        ("a.json", TEXT.replace("/77", "\\/77")),
        ("a.json", TEXT.replace("/77", "\\u002f77")),
        ("a.json", TEXT.replace("/77", "\\u002F77")),
        ("a.json", TEXT.replace('"plot', '"\\u0070lot')),
        ("a.json", json.dumps([record("plot/1"), record(ID)])),
        ("a.jsonl", json.dumps(record("plot/1")) + "\n" + TEXT + "\n"),
        ("a.yaml", TEXT.replace("/77", "\\x2f77")),
        ("a.yaml", TEXT.replace("/77", "\\U0000002f77")),
        ("a.yaml", TEXT.replace("/77", "\\\n   /77")),
        ("a.yaml", TEXT.replace("/77", "\\\r\n   /77")),
        ("a.yaml", TEXT.replace("/77", "\\\u2028/77")),
        ("a.yml", f"gatecheck: record/1\nid: {ID}\n"),
        ("a.yml", f"gatecheck: record/1\nid: >-\n  {ID}\n"),
        ("a.yml", f"gatecheck: record/1\ntags: [&one {ID}]\nid: *one\n"),
        ("a.ipynb", json.dumps(notebook(record(ID)))),
        ("a.ipynb", json.dumps(notebook([record("plot/1"), record(ID)]))),
        ("a.ipynb", json.dumps(notebook(TEXT))),
        ("a.ipynb", json.dumps(notebook([TEXT[:42], TEXT[42:]]))),
        ("a.ipynb", json.dumps(notebook(base64.b64encode(TEXT.encode()).decode()))),
        ("a.ipynb", json.dumps(notebook(base64.encodebytes(TEXT.encode()).decode()), indent=1)),
    ],
)
def test_an_id_is_found_however_it_is_written(root: Path, write: Write, path: str, text: str) -> None:
    write(path, text)
    whole = [(one.record.id, str(one.at)) for one in scan(root, ALL, []).found]

    assert ID in [name for name, _ in whole]
    assert searched(root, ID) == whole


@pytest.mark.parametrize(
    "identifier",
    ["it's", 'say"so', "back\\slash", "forsøg/1", "試験/1", "😀/1", "wide\u3000blank", "line\n"],
)  # fmt: skip
def test_an_id_of_any_letters_is_found(root: Path, write: Write, identifier: str) -> None:
    """The pattern of an id admits one end of line behind it."""
    quoted = identifier.replace("'", "''")
    write("a.json", json.dumps(record(identifier)))
    write("b.json", json.dumps(record(identifier), ensure_ascii=False))
    write("c.yaml", f"gatecheck: record/1\nid: '{quoted}'\n" if "\n" not in quoted else "{}")
    write("d.yaml", f"gatecheck: record/1\r\nid: |\r\n  {identifier.strip()}\r\n".encode())

    (one,) = (each for each in scan_for(root, [identifier], ALL, []) if each.record.id == identifier)

    whole = next(each for each in scan(root, ALL, []).found if each.record.id == identifier)
    assert (str(one.at), one.also_at) == (str(whole.at), one.also_at)
    assert [str(at) for at in one.also_at] == [str(at) for at in whole.also_at]


def plain(letter: str) -> str:
    """Write the letter as it is."""
    return json.dumps(letter, ensure_ascii=False)[1:-1]


def in_json(letter: str) -> str:
    """Write the letter as JSON escapes it."""
    units = letter.encode("utf-16-be").hex()
    return "".join(f"\\u{units[at : at + 4]}" for at in range(0, len(units), 4))


def in_yaml(letter: str) -> str:
    """Write the letter as only YAML escapes it."""
    return f"\\x{ord(letter):02X}" if ord(letter) < 256 else f"\\U{ord(letter):08x}"


def in_short(letter: str) -> str:
    """Write the letter as JSON and YAML may each escape it, where its number is short enough."""
    return f"\\u{ord(letter):04X}" if ord(letter) < 0x10000 else plain(letter)


LETTERS = st.characters(min_codepoint=0x21, exclude_categories=["Cs", "Zs", "Zl", "Zp", "Cc", "Cn", "Co"])
FORMS: dict[str, list[Callable[[str], str]]] = {
    ".json": [plain, in_short, in_json],
    ".yaml": [plain, in_short, in_yaml],
}


@pytest.mark.parametrize("suffix", FORMS)
@given(data=st.data())
def test_no_spelling_of_an_id_is_passed_over(suffix: str, data: st.DataObject) -> None:
    spelled = st.tuples(LETTERS, st.sampled_from(FORMS[suffix]))
    letters = data.draw(st.lists(spelled, min_size=1, max_size=9))
    identifier = "".join(letter for letter, _ in letters)
    written = "".join(form(letter) for letter, form in letters)
    content = f'{{"gatecheck": "record/1", "id": "{written}"}}'.encode()

    (told,) = READERS[suffix](f"a{suffix}", content)

    assert isinstance(told, Document), told
    assert told.value["id"] == identifier
    assert may_hold([identifier])(content)


def test_what_cannot_hold_the_id_is_not_parsed(root: Path, write: Write) -> None:
    """Escapes by which no letter of the id can be written do not count."""
    write("a.json", record("plot/1", claim='A "quoted" claim \u2013 of two\nlines, caf\u00e9.'))
    write("b.yaml", 'gatecheck: record/1\nid: plot/2\nclaim: "a\\tb \\" c\\\\d"\n')
    write("c.ipynb", notebook(record("plot/3")))
    write("d.json", record(ID))

    assert searched(root, ID) == [(ID, "d.json:1")]
    assert searched(root, "none") == []


def test_more_ids_than_are_worth_a_search_are_found_by_parsing(root: Path, write: Write) -> None:
    write("a.json", record("plot/1"))
    write("b.json", record(ID))

    assert searched(root, *(f"none/{number}" for number in range(16))) == []
    assert searched(root, *(f"none/{number}" for number in range(17))) == [("plot/1", "a.json:1"), (ID, "b.json:1")]


def test_an_id_that_stands_twice_is_that_of_the_earlier_place(root: Path, write: Write) -> None:
    write("b.json", record(ID, claim="One."))
    write("a.json", record(ID, claim="Two."))
    write("c.json", record(ID, claim="Two."))

    (one,) = scan_for(root, [ID], ALL, [])

    assert (one.record.claim, str(one.at), [str(at) for at in one.also_at]) == ("Two.", "a.json:1", ["c.json:1"])


def test_the_globs_hold_for_it_and_what_is_no_file_of_the_tree_is_passed_over(
    git: Git, root: Path, write: Write
) -> None:
    write("a.json", record("gone"))
    write("scratch/b.json", record(ID))
    write("c.txt", json.dumps(record(ID)))
    write(".gitignore", "d.json\n")
    write("d.json", record(ID))
    git("add", ".")
    (root / "a.json").unlink()
    (root / "e.json").symlink_to("scratch/b.json")

    assert searched(root, ID, "gone") == [(ID, "scratch/b.json:1")]
    assert scan_for(root, [ID], ALL, ["scratch/**"]) == ()
    assert scan_for(root, [ID], ["kept/**"], []) == ()


def test_an_alias_is_found_as_an_id_is(root: Path, write: Write) -> None:
    write("a.json", record("plot/new", aliases=["plot/old"]))
    write("b.json", record("plot/1"))

    assert searched(root, "plot/old") == [("plot/new", "a.json:1")]


def test_a_folder_that_is_none_stops_it(tmp_path: Path) -> None:
    with pytest.raises(CannotJudge, match="does not exist"):
        scan_for(tmp_path / "none", [ID], ALL, [])
