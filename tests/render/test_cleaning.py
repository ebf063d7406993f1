"""Cleaning and escaping, text by text."""

from __future__ import annotations

import html
import json
import re
from xml.etree import ElementTree as ET

import pytest
import yaml
from hypothesis import given
from hypothesis import strategies as st

from gatecheck.render.text import (
    command_data,
    command_property,
    cut,
    fitted,
    json_text,
    log_message,
    log_property,
    markdown,
    plain,
    point_text,
    sarif_message,
    uri,
    xml,
)

ANY_TEXT = st.text(st.characters(exclude_categories=()), max_size=60) | st.text(
    st.sampled_from("#[]:%@w. \n\\|`*-+=1vso"), max_size=20
)


@pytest.mark.parametrize(
    ("text", "cleaned"),
    [
        ("Drainage increases biomass.", "Drainage increases biomass."),
        ("é, β and 差 stay", "é, β and 差 stay"),
        ("two\nlines\r\nand\u2028more\x85here", "two lines and more here"),
        ("  a\t b\u00a0c  ", "a b c"),
        ("\x1b[31mred", "{U+001B}[31mred"),
        ("nul\x00", "nul{U+0000}"),
        ("\u202eright to left", "{U+202E}right to left"),
        ("\ud800", "{U+D800}"),
        ("\ufffe\ufdd0\U0001ffff", "{U+FFFE}{U+FDD0}{U+1FFFF}"),
        ("zero\u200bwidth", "zero{U+200B}width"),
        ("joined\u200dletters", "joined\u200dletters"),
        ("::error::x", ": :error: :x"),
        (":::", ": : :"),
        ("x ##[error]y", "x ## [error]y"),
        ("###[error]", "### [error]"),
        ("##vso[task.complete]", "## vso[task.complete]"),
        ("##\n[error]", "## [error]"),
        ("## heading", "## heading"),
    ],
)
def test_plain(text: str, cleaned: str) -> None:
    assert plain(text) == cleaned


@given(ANY_TEXT)
def test_plain_text_is_one_printable_line_without_a_command(text: str) -> None:
    cleaned = plain(text)
    assert cleaned.replace("\u200c", "").replace("\u200d", "").encode().decode().splitlines() in ([], [cleaned])
    assert "::" not in cleaned
    assert re.search(r"##\w*\[", cleaned) is None
    assert plain(cleaned) == cleaned


@pytest.mark.parametrize(
    ("text", "escaped"),
    [
        ("a|b", "a&#124;b"),
        ("`x` *y* _z_ ~w~ $v$", r"\`x\` \*y\* \_z\_ \~w\~ \$v\$"),
        ("<script>&amp;", "&lt;script&gt;&amp;amp;"),
        ("[a](b) ![c]", r"\[a\](b) \!\[c\]"),
        ("back\\slash", r"back\\slash"),
        ("# head", r"\# head"),
        ("#1 and @name", r"\#&#8203;1 and @&#8203;name"),
        ("a@b.example", "a@&#8203;b.example"),
        ("see https://a.example or WWW.a.example", "see https:&#8203;//a.example or WWW&#8203;.a.example"),
        (":seedling: at 1:2", ":&#8203;seedling: at 1:2"),
        ("- item", r"\- item"),
        ("12. item", r"12\. item"),
        ("12) item", r"12\) item"),
        ("1.", r"1\."),
        ("0.05 is a number", "0.05 is a number"),
        ("=== ", r"\==="),
        ("p < 0.05", "p &lt; 0.05"),
    ],
)
def test_markdown(text: str, escaped: str) -> None:
    assert markdown(text) == escaped


@given(ANY_TEXT)
def test_markdown_reads_back_as_the_plain_text(text: str) -> None:
    """Undo the two kinds of escape that Markdown knows, and the characters without width."""
    unescaped = re.sub(r"\\([!-/:-@\[-`{-~])", lambda match: f"&#{ord(match[1])};", markdown(text))
    assert html.unescape(unescaped).replace("\u200b", "") == plain(text)


def test_command_escapes() -> None:
    """Data: percent, CR, LF. Properties: colon and comma too (SOURCE: workflow commands, the runner's toolkit)."""
    assert command_data("100 %,\r\na:b%0A") == "100 %25,%0D%0Aa:b%250A"
    assert command_property("100 %,\r\na:b") == "100 %25%2C%0D%0Aa%3Ab"


def test_xml_escapes() -> None:
    assert xml("<a href='x'>&amp;\"]]>\x00\x1b\ufffe") == (
        "&lt;a href=&#39;x&#39;&gt;&amp;amp;&quot;]]&gt;{U+0000}{U+001B}{U+FFFE}"
    )


@given(ANY_TEXT)
def test_xml_holds_any_text(text: str) -> None:
    """A parser that refuses what XML 1.0 cannot hold gives the cleaned text back, from both places for a text."""
    element = ET.fromstring(f'<a b="{xml(text)}">{xml(text)}</a>'.encode())  # noqa: S314  # our own
    assert element.attrib["b"] == (element.text or "") == plain(text)


@given(ANY_TEXT)
def test_json_and_yaml_read_one_quoted_text_alike(text: str) -> None:
    quoted = json_text(text)
    assert json.loads(quoted) == yaml.safe_load(f"- a: {quoted}")[0]["a"] == plain(text)
    assert len(quoted.splitlines()) == 1


def test_a_point_holds_no_mark_of_a_directive() -> None:
    assert point_text("plot #2 \\# SKIP") == "plot {U+0023}2 {U+005C}{U+0023} SKIP"


def test_logging_commands_escape_what_ends_a_property_and_take_apart_what_is_no_escape() -> None:
    """SOURCE: the logging commands of Azure Pipelines; the escape of the percent sign is from memory."""
    assert log_message("5 %; a]b %0A %5d %azp25 %0\n") == "5 %; a]b % 0A % 5d % azp25 %0"
    assert log_property("a;b]c %3B") == "a%3Bb%5Dc % 3B"


def test_a_message_of_sarif_has_no_placeholder_and_no_link() -> None:
    assert sarif_message("{0} [a](1) \x1b") == "{{0}} [a] (1) {{U+001B}}"


def test_a_path_becomes_a_uri_byte_by_byte() -> None:
    assert uri("a b/ü#?.json") == "a%20b/%C3%BC%23%3F.json"
    assert uri("/a") == "%2Fa"
    assert uri("\udcff") == "%FF"
    assert uri("\ud800") == "%ED%A0%80"


def test_cut_keeps_what_fits() -> None:
    assert cut("abcdef", 6) == "abcdef"
    assert cut("abcdefg", 6) == "abc..."


def test_fitted_counts_escaped_characters() -> None:
    assert fitted("%%", 6, command_data) == "%25%25"
    assert fitted("%%%", 8, command_data) == "%25..."


@given(ANY_TEXT, st.integers(3, 40))
def test_fitted_never_exceeds_and_never_splits_an_escape(text: str, most: int) -> None:
    shown = fitted(text, most, command_property)
    assert len(shown) <= most
    assert re.fullmatch(r"(%25|%0D|%0A|%3A|%2C|[^%\r\n:,])*", shown)
