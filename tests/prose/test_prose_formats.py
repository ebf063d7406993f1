"""Formats of prose: what in them is code, comment or address, and which comments are markers."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st
from prose.prosing import DIALECTS, passage


def markers(text: str, path: str) -> list[str]:
    """What the markers of a text say."""
    return [one.marker for one in passage(text, path).hidden if one.marker is not None]


@pytest.mark.parametrize(
    ("text", "seen"),
    [
        ("a `b` c", "a     c"),
        ("a ``b ` c`` d", "a           d"),
        ("a ` b", "a ` b"),
        ("a `b\n\nc` d", "a `b\n\nc` d"),
        ("a\n```r\nt(34) = 1\n```\nb", "a\n    \n         \n   \nb"),
        ("a\n~~~\nb ```\n~~~~\nc", "a\n   \n     \n    \nc"),
        ("> ```\n> b\n> ```\n> c", ">    \n   \n     \n> c"),
        ("a\n```\nb", "a\n   \n "),
        ("a ```b``` c", "a         c"),
        ("a ~~~ b", "a ~~~ b"),
        ("a <!-- b --> c", "a            c"),
        ("a <!-- b", "a       "),
        ("a <!--> b", "a       b"),
        ("[a](b/12.html) c", f"[a{' ' * 11}) c"),
        ("a https://b.c/1 d", "a               d"),
        ("a (http://b.c/1) d", "a (            ) d"),
        ("a\n\n    b = 1\n\n    c\nd", "a\n\n         \n\n     \nd"),
        ("a\n\n\tb\n", "a\n\n\t \n"),
        ("- a\n\n    b\n\nc", "- a\n\n    b\n\nc"),
        ("12. a\n\n    b", "12. a\n\n    b"),
        ("a <!-- x <!-- gatecheck: b c --> d", f"a {' ' * 30} d"),
    ],
)
def test_markdown(text: str, seen: str) -> None:
    assert passage(text).visible == seen
    assert markers(text, "a.md") == []


@pytest.mark.parametrize(
    ("text", "says"),
    [
        ("3 <!-- gatecheck: a/b estimate.value -->", ["a/b estimate.value"]),
        ("3 <!--gatecheck:a b--> 4 <!--\ngatecheck: c\td\n-->", ["a b", "c\td"]),
        ("`<!-- gatecheck: a b -->` ```\n<!-- gatecheck: a b -->", ["a b"]),
        ("```\n<!-- gatecheck: a b -->\n```\n", []),
        ("<!-- see gatecheck: a b -->", []),
        ("<!-- gatecheck -->", []),
        ("<!-- gatecheck: -->", [""]),
    ],
)
def test_markers_of_markdown(text: str, says: list[str]) -> None:
    assert markers(text, "a.md") == says


@pytest.mark.parametrize(
    ("text", "seen", "says"),
    [
        ("a % b\nc", "a    \nc", []),
        ("a % b", "a    ", []),
        (r"25 \% c", r"25 \% c", []),
        (r"a \\% b", r"a \\   ", []),
        (r"\verb|t(3) = 1| b", "b", []),
        (r"\lstinline!a b", "a b", []),
        (r"\url{a.b/1} \href{c}{d 1} e", "{d 1} e", []),
        ("\\begin{verbatim}\nt\n\\end{verbatim} a", "                \n \n              } a", []),
        ("a \\begin{thebibliography}{9} t(3) = 1", "a                                    ", []),
        (r"\begin{tabular} a", r"\begin{tabular} a", []),
        ("3.3 % gatecheck: a b\nc", "3.3                 \nc", ["a b"]),
        ("3.3 % the gatecheck: a b", "3.3                     ", []),
    ],
)
def test_latex(text: str, seen: str, says: list[str]) -> None:
    assert passage(text, "a.tex").visible.split() == seen.split()
    assert len(passage(text, "a.tex").visible) == len(text)
    assert markers(text, "a.tex") == says


@pytest.mark.parametrize(
    ("text", "seen", "says"),
    [
        ("a ``b`` c", "a c", []),
        ("a ``b", "a ``b", []),
        ("a `b`_ c", "a `b`_ c", []),
        ("a https://b.c d", "a d", []),
        (".. comment\n   more\n\na", "a", []),
        ("..\n   more\na", "a", []),
        (".. note:: b\n\n   c", ".. note:: b c", []),
        (".. _target: b", ".. _target: b", []),
        (".. [1] b", ".. [1] b", []),
        (".. |b| replace:: c", ".. |b| replace:: c", []),
        (".. code-block:: r\n\n   t(3) = 1\n\na", "a", []),
        (".. code:: python\n\n   b\n\n  c\n", "", []),
        ("a::\n\n   t(3) = 1\n\nb", "a:: b", []),
        ("  a::\n\n  b", "a:: b", []),
        ("a::\nb", "a:: b", []),
        ("a\n\n>>> p = 0.5\n>>> p\n0.5\n\nb", "a b", []),
        ("a\n\n  >>> t(3)\n  t(3) = 1\n  \n  b", "a b", []),
        ("a >>> b", "a >>> b", []),
        ("Yield rose by 3.3 g.\n\n.. gatecheck: a b\n\nc", "Yield rose by 3.3 g. c", ["a b"]),
        ("- a 3\n\n  .. gatecheck: a b\n  .. gatecheck: c d\n", "- a 3", ["a b", "c d"]),
        ("a .. gatecheck: a b", "a .. gatecheck: a b", []),
    ],
)
def test_restructured_text(text: str, seen: str, says: list[str]) -> None:
    assert passage(text, "a.rst").visible.split() == seen.split()
    assert markers(text, "a.rst") == says


PARTS = [
    "`",
    "``",
    "```\n",
    "~~~\n",
    "<!--",
    "-->",
    "<!-- gatecheck: a b -->",
    "](",
    "http://",
    "\n\n    a",
    "\n\n",
    "\n",
]
PARTS += [
    "a",
    "%",
    "\\",
    "\\begin{verbatim}",
    "\\end{verbatim}",
    "\\verb|",
    "\\url{",
    "}",
    ".. ",
    "::\n",
    ".. code::\n",
    "3 ",
]


@given(st.sampled_from(sorted(DIALECTS)), st.lists(st.sampled_from(PARTS), max_size=30).map("".join))
def test_what_is_hidden_is_in_order_and_leaves_every_line_where_it_is(path: str, text: str) -> None:
    one = passage(text, path)

    ends = [0, *(each.end for each in one.hidden)]
    starts = [each.start for each in one.hidden]
    assert all(end <= start < stop for end, start, stop in zip(ends, starts, ends[1:], strict=False))
    assert ends[-1] <= len(text)
    assert len(one.visible) == len(text)
    assert one.visible.count("\n") == text.count("\n")
