"""Hostile prose: long lines, patterns that would make a search explode, and text that is no text."""

from __future__ import annotations

import time

import pytest
from prose.prosing import DIALECTS, held, known

from gatecheck.prose.agree import held_against
from gatecheck.prose.reading import READERS, read_file

#: Each is made long; with a search that is not linear the longer one would take many times as long.
UNITS = {
    "equals": "=",
    "symbols": "p = ",
    "backticks": "`",
    "runs of backticks": "` `` ```` ",
    "comments": "<!--",
    "links": "3 <!-- gatecheck: a b -->",
    "markers": "<!-- gatecheck: a b -->",
    "levels": "95 % CI ",
    "digits": "9",
    "percent": "1%)",
    "commas": "1,",
    "opened": "t(",
    "sentences": ". A",
    "lines": "\n",
    "indented": "\n\n    ",
    "fences": "~~~\n",
    "destinations": "](",
    "blanks": " ",
    "explicit": ".. a\n",
    "literal": "a::\n\n x\n",
    "environments": "\\begin{verbatim}",
    "verbs": "\\verb|",
    "counts": "1/2 (50 %) ",
    "powers": "2 × 10",
    "markup": " *_$~{}",
    "addresses": "http://",
    "headings": "# References\n",
    "results": "t(34) = 2.21, p = .03 ",
}
SIZE = 2_000
#: A search that is quadratic takes 16 times as long for four times the text.
MOST_LONGER = 10


def _seconds(path: str, text: str) -> float:
    start = time.process_time()
    held(text, path=path)
    return time.process_time() - start


@pytest.mark.parametrize("path", sorted(DIALECTS))
@pytest.mark.parametrize("unit", UNITS.values(), ids=UNITS)
def test_no_text_takes_more_than_its_share(path: str, unit: str) -> None:
    text = unit * (SIZE // len(unit))

    short, long = _seconds(path, text), _seconds(path, text * 4)

    assert long < max(0.2, MOST_LONGER * short)


@pytest.mark.parametrize("suffix", sorted(READERS))
def test_a_line_of_a_megabyte_is_read(suffix: str) -> None:
    line = "word " * 200_000 + "t(34) = 2.21, p = .034 and t(34) = 9.99."
    content = f'{{"cells": [{{"cell_type": "markdown", "source": "{line}"}}]}}' if suffix == ".ipynb" else line

    facts = held_against(read_file(f"a{suffix}", content.encode()), known())

    (fact,) = facts.facts
    assert fact.passage.body[fact.at :] == "t(34) = 9.99."
    assert fact.passage.line(fact.at) == 1


def test_a_marker_in_a_comment_in_code_or_cut_short_is_none() -> None:
    text = (
        "3 <!-- <!-- gatecheck: a b --> 4 `<!-- gatecheck: a b -->`\n\n```\n5 <!-- gatecheck: a b -->\n```\n"
        "6 <!-- gatecheck: a b"
    )

    assert [(one.message, one.at.line) for one in held(text).problems] == [("the link to a leads to no record", 6)]


def test_names_from_outside_are_made_safe() -> None:
    facts = held("3 <!-- gatecheck: \u202e::error::\x1b[31m claim --> 4 <!-- gatecheck: a\U0001f600 b -->")

    assert [one.message for one in facts.problems] == [
        "the link to \\u202e::error::\\x1b[31m leads to no record",
        "the link to a\\U0001f600 leads to no record",
    ]


def test_numbers_beyond_measure_are_compared_all_the_same() -> None:
    identifier = "drainage/earthworm-biomass"
    text = " ".join(
        f"{shown} <!-- gatecheck: {identifier} estimate.value -->,"
        for shown in ("1e999", "1e-999", f"0.{'0' * 29}1", "9" * 40, "−9e308", "t(34) = 9e999")
    )
    text += " z = 9e999, p = 1e-999; 95 % CI 9e999 to 9e999"

    facts = held(text)

    assert facts.problems == ()
    assert len(facts.facts) == 8
