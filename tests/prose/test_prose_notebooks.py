"""Notebooks: their cells of prose, and the places of what stands in them."""

from __future__ import annotations

import json
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from gatecheck.prose.notebook import passages
from gatecheck.prose.source import Passage, SourceFile


def cell(source: Any, kind: str = "markdown", **more: Any) -> dict[str, Any]:
    """A cell of a notebook."""
    return {"cell_type": kind, "metadata": {}, "source": source, **more}


def read(*cells: Any, **writing: Any) -> tuple[Passage, ...]:
    """The passages of a notebook with these cells."""
    document = {"cells": cells, "metadata": {"cells": ["x"]}, "nbformat": 4, "nbformat_minor": 5}
    return tuple(passages(SourceFile("n.ipynb", json.dumps(document, **writing))))


def test_cells_of_prose_are_read_with_their_numbers() -> None:
    code = cell("t(34) = 1", "code", outputs=[{"data": {"text/plain": "# no"}}])

    found = read(
        code, cell(["# One\n", "two"]), cell("three", "raw"), cell("four", "heading"), 5, cell([]), cell(None)
    )

    assert [(one.cell, one.body) for one in found] == [(2, "# One\ntwo"), (4, "four")]


def test_what_is_no_text_in_a_source_is_passed_over() -> None:
    (one,) = read(cell(["a", 3, None, "b"]))

    assert one.body == "ab"
    assert one.file.text[one.in_file(1)] == "b"


@pytest.mark.parametrize("indent", [None, 1])
@pytest.mark.parametrize("ascii_alone", [True, False])
@pytest.mark.parametrize("source", [["é “a”\n", "\\b 😀\n", "\tx 3.3\n"], "é “a”\n\\b 😀\n\tx 3.3\n"])
def test_every_character_has_its_place_in_the_file(source: Any, ascii_alone: bool, indent: int | None) -> None:
    _, one = read(cell("first"), cell(source), ensure_ascii=ascii_alone, indent=indent)

    for offset, character in enumerate(one.body):
        written = {json.dumps(character, ensure_ascii=each)[1:-1] for each in (True, False)}
        assert any(one.file.text.startswith(each, one.in_file(offset)) for each in written), (offset, character)


def test_the_line_is_that_of_the_string() -> None:
    first, second = read(cell(["one\n", "two\n"]), cell("three\nfour"), indent=1)

    text = first.file.text.splitlines()
    assert [text[first.line(at) - 1].strip() for at in (0, 4)] == ['"one\\n",', '"two\\n"']
    assert text[second.line(6) - 1].strip() == '"source": "three\\nfour"'


@given(st.lists(st.text(), min_size=1, max_size=4))
def test_the_place_of_any_text_is_found(source: list[str]) -> None:
    found = read(cell(source))

    whole = "".join(source)
    assert [one.body for one in found] == ([whole] if whole else [])
    for one in found:
        last = one.in_file(len(whole) - 1)
        assert (
            json.loads(f'["{one.file.text[last:].split(chr(34))[0]}"]')[0].startswith(whole[-1:])
            or whole[-1] in '"\\'
        )


def test_worksheets_of_older_notebooks() -> None:
    document = {"nbformat": 3, "worksheets": [{"cells": [cell("x", "code"), cell(["one"])], "metadata": {}}, 3]}

    (one,) = passages(SourceFile("n.ipynb", json.dumps(document)))

    assert (one.cell, one.body) == (2, "one")


def test_of_a_source_that_stands_twice_the_later_one_counts() -> None:
    text = '{"cells": [{"cell_type": "markdown", "source": "aa", "source": "bb"}]}'

    (one,) = passages(SourceFile("n.ipynb", text))

    assert one.body == "bb"
    assert text[one.in_file(0) :].startswith("bb")


@pytest.mark.parametrize("text", ["[]", "3", '{"cells": 3}', '{"cells": {}}', '{"worksheets": []}', "{}"])
def test_what_is_no_notebook_has_no_prose(text: str) -> None:
    assert list(passages(SourceFile("n.ipynb", text))) == []


@pytest.mark.parametrize("text", ["", "{", '{"cells": [', '{"cells": [{"a": tru}]}', '{"a"', "\ufeff"])
def test_what_is_no_json_is_refused(text: str) -> None:
    with pytest.raises(ValueError, match=r"\w"):
        list(passages(SourceFile("n.ipynb", text)))
