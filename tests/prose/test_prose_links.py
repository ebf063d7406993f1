"""Links: which number or sentence a marker ties to a record."""

from __future__ import annotations

from pathlib import Path

import pytest
from prose.prosing import passage
from scan.scanning import Write

from gatecheck.prose.links import Link, LinkedSentence, linked_sentences, links_in
from gatecheck.prose.sentences import paragraph_start, sentence_at, sentence_before


def told(link: Link) -> tuple[str, str, str | None]:
    """A link with the number that it ties."""
    return link.record, link.field, link.number.text if link.number else None


def sentence(link: Link) -> str:
    """The sentence of a link in one line."""
    return " ".join(link.passage.visible[link.start : link.end].split())


def test_a_link_ties_the_last_number_before_it() -> None:
    text = "Of 36 plots, yield rose by 3.3 g/m2 <!-- gatecheck: y/x estimate.value --> (95 % CI 1.1 to 5.4)."

    (link,) = links_in(passage(text))

    assert told(link) == ("y/x", "estimate.value", "3.3")
    assert (link.line, link.says) == (1, "y/x estimate.value")
    assert sentence(link) == "Of 36 plots, yield rose by 3.3 g/m2 (95 % CI 1.1 to 5.4)."


def test_links_that_stand_together_tie_the_last_numbers_in_order() -> None:
    text = """Yield rose by 3.3 g (95 % CI 1.1 to 5.4).
<!-- gatecheck: y estimate.value --> <!-- gatecheck: y estimate.interval.level -->
<!-- gatecheck: y claim --> <!-- gatecheck: y estimate.interval.low --> <!-- gatecheck: y estimate.interval.high -->
"""

    links = links_in(passage(text))

    assert [told(link)[1:] for link in links] == [
        ("estimate.value", "3.3"),
        ("estimate.interval.level", "95"),
        ("claim", None),
        ("estimate.interval.low", "1.1"),
        ("estimate.interval.high", "5.4"),
    ]
    assert {sentence(link) for link in links} == {"Yield rose by 3.3 g (95 % CI 1.1 to 5.4)."}


def test_a_link_reaches_neither_behind_another_nor_out_of_its_paragraph() -> None:
    text = "It was 1 <!-- gatecheck: a b --> or so <!-- gatecheck: a c -->.\n\nNone here. <!-- gatecheck: a d -->"

    assert [told(link) for link in links_in(passage(text))] == [("a", "b", "1"), ("a", "c", None), ("a", "d", None)]


@pytest.mark.parametrize("text", ["3 gatecheck: a b", "3 `x` gatecheck: <!-- a b -->"])
def test_a_text_that_only_names_the_marker_has_no_links(text: str) -> None:
    assert links_in(passage(text)) == ()


def test_with_too_few_numbers_the_first_links_have_none() -> None:
    text = "One 5 <!-- gatecheck: a b --><!-- gatecheck: a c -->"

    assert [told(link) for link in links_in(passage(text))] == [("a", "b", None), ("a", "c", "5")]


@pytest.mark.parametrize("says", ["", "a", "a b c"])
def test_a_marker_that_is_no_id_and_field(says: str) -> None:
    (link,) = links_in(passage(f"3 <!-- gatecheck: {says} -->"))

    assert told(link) == ("", "", None)
    assert link.says == says


def test_markers_of_other_formats() -> None:
    latex = "Yield rose by 3.3~g % gatecheck: y estimate.value\n(95\\,\\% CI 1.1 to 5.4). % gatecheck: y claim\n"
    restructured = (
        "Yield rose by 3.3 g\nwith 36 plots.\n\n.. gatecheck: y estimate.value\n.. gatecheck: y sample.n\n"
    )

    assert [told(link) for link in links_in(passage(latex, "a.tex"))] == [
        ("y", "estimate.value", "3.3"),
        ("y", "claim", None),
    ]
    assert sentence(links_in(passage(latex, "a.tex"))[1]) == "Yield rose by 3.3~g (95\\,\\% CI 1.1 to 5.4)."
    assert [told(link) for link in links_in(passage(restructured, "a.rst"))] == [
        ("y", "estimate.value", "3.3"),
        ("y", "sample.n", "36"),
    ]


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("One. Two is here. Three.", "Two is here."),
        (
            "One. Two, as Fig. 3 and Smith et al. Found it, is here. Three.",
            "Two, as Fig. 3 and Smith et al. Found it, is here.",
        ),
        ("Is it? Two is here! Three.", "Two is here!"),
        ("# Head\n\nTwo is here", "Two is here"),
        ("# Head\nTwo is here\n\nThree", "Two is here"),
        ("Nothing No. Two is here", "Two is here"),
        ("By J. Two is here", "By J. Two is here"),
        ("- One\n- Two is here\n- Three", "Two is here"),
        ("1. One\n2. Two is here\n3. Three", "Two is here"),
        ("> One.\n> Two is here.\n", "Two is here."),
        ("(One.) “Two is here.” Three.", "“Two is here.”"),
        ("\\item One\n\\item Two is here\n\\end{itemize}", "\\item Two is here"),
        ("It was 3.3 as Two is here with 1.5 g. Next.", "It was 3.3 as Two is here with 1.5 g."),
    ],
)
def test_sentences(text: str, expected: str) -> None:
    start, end = sentence_at(text, text.index("Two"))

    assert " ".join(text[start:end].split()) == expected


def test_the_sentence_before_an_offset() -> None:
    text = "One. Two is here.  \n\n  <!-- -->"

    start, end = sentence_before(text, len(text) - 8)

    assert text[start:end] == "Two is here."
    assert sentence_before("", 0) == (0, 0)


def test_paragraphs() -> None:
    text = "One.\n\nTwo.\nThree. \n\n"

    assert paragraph_start(text, len(text)) == 6
    assert paragraph_start(text, 4) == 0
    assert paragraph_start("9" * 5000, 5000) == 3000


def test_the_sentences_of_a_tree(root: Path, write: Write) -> None:
    write(
        "b.md",
        "Biomass rose. <!-- gatecheck: y claim -->\nIt rose by 3 <!-- gatecheck: y test.value --> g. More.\n",
    )
    write("a.tex", "Biomass\nrose by 3 % gatecheck: z test.value\nand 4. % gatecheck: z test.p\n")
    write("c.md", "A 3 <!-- gatecheck: nothing -->")
    write("d.md", b"A \xff <!-- gatecheck: y claim -->")

    assert linked_sentences(root, ["**/*"], []) == (
        LinkedSentence("a.tex", 1, "z", "Biomass rose by 3 and 4."),
        LinkedSentence("b.md", 1, "y", "Biomass rose."),
        LinkedSentence("b.md", 2, "y", "It rose by 3 g."),
    )
    assert linked_sentences(root, ["**/*"], ["*.md"]) == (
        LinkedSentence("a.tex", 1, "z", "Biomass rose by 3 and 4."),
    )
