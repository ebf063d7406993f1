"""What many records say stands in the page once: what is shared, what stays, and that nothing is lost."""

from __future__ import annotations

import re
from html import unescape

from hypothesis import given
from hypothesis import strategies as st

from gatecheck.render.page.notes import MANY, Notes, Text, parts
from gatecheck.render.text import plain

TAIL = ", even against an effect as large as the one observed, which errs in favour of the claim; 5 % is allowed."
BRACKET = " (an effect found significant is more often too large than too small); as it stands, call it suggestive."
PIECES = st.lists(
    st.sampled_from([
        "a",
        "12",
        " ",
        "; ",
        ". ",
        ", ",
        ": ",
        " (",
        "(",
        ")",
        "&",
        "<b>",
        "'",
        " %",
        "x" * 40,
        "y" * 25,
    ]),
    max_size=12,
).map(lambda pieces: plain("".join(pieces)))


def notes(*texts: Text, times: int = MANY, remarks: tuple[str, ...] = ()) -> Notes:
    return Notes([texts] * times, remarks)


def same(text: str) -> str:
    return re.sub(r"[\s;:.,]+", " ", text).strip()


def put_back(told: str, shared: Notes) -> str:
    """A told text with its notes in their places."""
    return unescape(
        re.sub(r'(?:^see)? <a href="#n(\d+)">\[\1\]</a>', lambda to: f" {shared.entries[int(to[1]) - 1]}", told)
    )


def test_the_parts_of_a_text() -> None:
    assert parts("p = 0.02 (t(34) = 2.1, 18 + 18 plots) leaves 5 %, even so; the policy: 1 %.") == [
        "p = 0.02",
        " (t(34) = 2.1, 18 + 18 plots)",
        " leaves 5 %",
        ", even so",
        "; the policy",
        ": 1 %.",
    ]
    assert parts("an (open bracket, and (more") == ["an (open bracket", ", and (more"]
    assert parts("") == []


@given(PIECES)
def test_the_parts_joined_are_the_text(text: str) -> None:
    assert "".join(parts(text)) == text


def test_many_share_what_follows_on_a_figure_of_their_own() -> None:
    shared = Notes([[Text(f"The risk is {number} %{TAIL}")] for number in range(MANY)], [])
    assert shared.entries == [TAIL[2:-1]]
    assert shared.told(Text(f"The risk is 7 %{TAIL}")) == 'The risk is 7\u00a0% <a href="#n1">[1]</a>.'


def test_fewer_say_it_themselves() -> None:
    told = [[Text(f"The risk is {number} %{TAIL}")] for number in range(MANY - 1)]
    shared = Notes(told, [])
    assert shared.entries == []
    assert shared.told(told[0][0]) == f"The risk is 0\u00a0%{TAIL}".replace("5 %", "5\u00a0%")


def test_one_record_that_says_it_twice_is_one() -> None:
    assert notes(*[Text(f"It is {number}{TAIL}") for number in range(MANY)], times=1).entries == []


def test_a_text_keeps_its_first_words() -> None:
    shared = notes(Text(f"The whole interval is below it{BRACKET}"))
    assert shared.told(Text(f"The whole interval is below it{BRACKET}")) == (
        'The whole interval is below it <a href="#n1">[1]</a>.'
    )
    long = notes(Text(f"If it were so, {'x' * 40}, and more{BRACKET}"))
    assert long.told(Text(f"If it were so, {'x' * 40}, and more{BRACKET}")).startswith(
        f"If it were so, {'x' * 40}, and more <a"
    )
    assert long.entries == [BRACKET.strip(" .")]


def test_all_of_a_text_goes_to_a_note_where_it_may() -> None:
    whole = Text(f"Do it so{BRACKET}", whole=True)
    assert notes(whole).told(whole) == 'see <a href="#n1">[1]</a>.'
    assert notes(whole).entries == [f"Do it so{BRACKET}".rstrip(".")]
    mixed = [[Text(f"Take {number}{BRACKET}", whole=True)] for number in range(MANY)]
    assert Notes(mixed, []).told(mixed[3][0]) == 'Take 3 <a href="#n1">[1]</a>.'


def test_a_figure_of_each_record_stays_with_it_however_often_it_is_said() -> None:
    said = [
        [Text(f"If so, as large as it was observed at that time, {n % 6} plots do{BRACKET}")] for n in range(60)
    ]
    assert Notes(said, []).entries == [BRACKET.strip(" .")]
    few = [[Text(f"At a look; {n % 5} looks that were never planned have a risk of 0.1.")] for n in range(50)]
    assert Notes(few, []).entries == [f"{n} looks that were never planned have a risk of 0.1" for n in range(5)]


def test_short_words_stay() -> None:
    assert notes(Text("It is so; the policy allows 5 %.")).entries == []
    assert notes(Text(f"a{'. ;' * 30}")).entries == []


def test_remarks_on_figures_come_first_and_need_but_two() -> None:
    shared = Notes([[Text(f"It is {number}{TAIL}")] for number in range(MANY)], ["b", "a", "b", "c", "a"])
    assert shared.entries == ["a", "b", TAIL[2:-1]]
    assert shared.mark("b") == ' <a href="#n2">[2]</a>'
    assert shared.mark("c") == ""


@given(st.lists(st.tuples(PIECES, st.booleans()), max_size=4))
def test_with_its_notes_in_place_every_text_is_whole(given_texts: list[tuple[str, bool]]) -> None:
    texts = [Text(text, whole=whole) for text, whole in given_texts]
    shared = notes(*texts)
    for text in texts:
        told = shared.told(text)
        assert same(put_back(told, shared)) == same(text.words.replace(" %", "\u00a0%"))
        assert set(re.findall("<[^>]*>", told)) <= {*(f'<a href="#n{n}">' for n in range(1, 9)), "</a>"}
