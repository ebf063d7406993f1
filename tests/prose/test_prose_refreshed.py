"""Linked numbers written anew, in every format."""

from __future__ import annotations

import json

import pytest
from prose.prosing import DIALECTS, ID, known, passage

from gatecheck.prose.reading import read_file
from gatecheck.prose.refreshed import RenewedFile, renewed


def link(field: str) -> str:
    """A marker in Markdown."""
    return f"<!-- gatecheck: {ID} {field} -->"


def anew(path: str, content: bytes) -> RenewedFile:
    """The only file, with its linked numbers from the records."""
    (one,) = renewed(read_file(path, content), known())
    return one


def test_only_what_differs_is_written() -> None:
    biomass = f"Biomass rose by 3.8 g {link('estimate.value')}"
    text = f"{biomass} in 30 {link('sample.n')} plots, p = .034 {link('test.p')}.\r\n"

    one = anew("a.md", text.encode())

    assert one.text == text.replace("3.8", "4.2").replace("30", "36")
    assert (one.edits, one.kept) == (2, ())
    assert [each.body for each in one.passages] == [one.text]


def test_a_file_that_agrees_is_left_out() -> None:
    assert renewed([passage(f"4.2 {link('estimate.value')}"), passage("nothing")], known()) == ()


def test_what_cannot_be_written_is_kept() -> None:
    one = anew("a.md", f"\np < .001 {link('test.p')} and p = 0.3 {link('test.p')}".encode())

    assert (one.edits, one.passages, one.text) == (0, (), one.file.text)
    assert [(each.line, each.what.number.told) for each in one.kept] == [(2, "< .001"), (2, "0.3")]


def test_other_formats() -> None:
    latex = f"rose by $3.8$~g % gatecheck: {ID} estimate.value\n"
    restructured = f"rose by 3.8 g\n\n.. gatecheck: {ID} estimate.value\n"

    assert anew("a.tex", latex.encode()).text == latex.replace("3.8", "4.2")
    assert anew("a.rst", restructured.encode()).text == restructured.replace("3.8", "4.2")
    assert set(DIALECTS) == {"a.md", "a.tex", "a.rst"}


@pytest.mark.parametrize("ascii_alone", [True, False])
def test_a_notebook_keeps_all_else_as_it_was_written(ascii_alone: bool) -> None:
    marker = link("estimate.value")
    sources = ["“é” \\ −3.8 " + marker, ["one\n", "−2 × 10⁻⁵ " + marker + "\n", "x"]]
    cells = [{"cell_type": "markdown", "source": source, "metadata": {}} for source in sources]
    text = json.dumps({"cells": cells, "nbformat": 4}, ensure_ascii=ascii_alone, indent=1)

    one = anew("n.ipynb", text.encode())

    expected = text
    for old, new in (("−3.8", "4.2"), ("−2 × 10⁻⁵", "4 × 10⁰")):
        old_written, new_written = (json.dumps(each, ensure_ascii=ascii_alone)[1:-1] for each in (old, new))
        expected = expected.replace(old_written, new_written)
    assert one.text == expected
    assert one.edits == 2
    assert [each.passage.cell for each in one.passages] == [1, 2]


def test_a_number_that_is_broken_over_two_texts_is_kept() -> None:
    source = ["It rose by 3.", f"8 {link('estimate.value')}"]
    text = json.dumps({"cells": [{"cell_type": "markdown", "source": source}]})

    one = anew("n.ipynb", text.encode())

    assert (one.text, one.edits, one.passages) == (text, 0, ())
    assert [each.what.anew for each in one.kept] == ["4.2"]
