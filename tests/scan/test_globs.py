"""Globs: what they name, and which name paths inside a folder."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from gatecheck.globs import matches, name_inside


@pytest.mark.parametrize(
    ("glob", "path", "named"),
    [
        ("**", "a.json", True),
        ("**", "a/b/c.json", True),
        ("**/*", "a.json", True),
        ("results/**", "results/a.json", True),
        ("results/**", "results/deep/a.json", True),
        ("results/**", "results", False),
        ("results/**", "other/results/a.json", False),
        ("**/scratch/**", "scratch/a.json", True),
        ("**/scratch/**", "x/y/scratch/z/a.json", True),
        ("**/scratch/**", "x/unscratch/a.json", False),
        ("a/**/b.json", "a/b.json", True),
        ("a/**/b.json", "a/x/y/b.json", True),
        ("a/**/**/b.json", "a/x/b.json", True),
        ("*.json", "a.json", True),
        ("*.json", "a/b.json", False),
        ("a**b.json", "a/b.json", False),
        ("a**b.json", "axxb.json", True),
        ("?.json", "a.json", True),
        ("?.json", "ab.json", False),
        ("a?b", "a/b", False),
        ("[ab].json", "b.json", True),
        ("[!ab].json", "b.json", False),
        ("[^ab].json", "c.json", True),
        ("a[!b]c", "a/c", False),
        ("[a-c]1", "b1", True),
        ("[]x]1", "]1", True),
        ("[!]]1", "]1", False),
        ("[z-a]1", "z1", False),
        ("[z-a]1", "[z-a]1", True),
        ("[]1", "[]1", True),
        ("[a", "[a", True),
        ("[a&&b]1", "&1", True),
        ("[a--]1", "-1", True),
        ("[\\]1", "\\1", True),
        ("a.json", "aXjson", False),
        ("*.json", "line\nbreak.json", True),
        ("**/b.json", "line\nbreak/b.json", True),
        ("A.json", "a.json", False),
    ],
)
def test_a_glob_names_a_path(glob: str, path: str, named: bool) -> None:
    assert matches([glob], path) is named


def test_no_glob_names_no_path() -> None:
    assert matches([], "a.json") is False
    assert matches([], "") is False


def test_one_of_several_globs_is_enough() -> None:
    assert matches(["x/*", "*.json"], "a.json") is True
    assert matches(["x/*", "y|a.json"], "a.json") is False


@given(st.text(alphabet="ab*?[]!^-/\\.&~|", max_size=20), st.text(alphabet="ab/[]", max_size=8))
def test_no_glob_is_too_odd(glob: str, path: str) -> None:
    """Any text is a glob, and a glob that names the path still names it in company."""
    assert matches([glob, "q"], path) is matches([glob], path)


@given(st.lists(st.text(alphabet="ab.-_ é", min_size=1, max_size=5), min_size=1, max_size=4))
def test_a_plain_path_names_itself(segments: list[str]) -> None:
    path = "/".join(segments)
    assert matches([path], path) is True
    assert matches(["**/" + segments[-1]], path) is True


@pytest.mark.parametrize(
    ("glob", "folder", "inside"),
    [
        ("**", "vendor", False),
        ("**/*.json", "vendor", False),
        ("vendor/**", "vendor", True),
        ("vendor/**", "vendor/data", True),
        ("vendor/data/*.json", "vendor", True),
        ("vendor/data/*.json", "vendor/data", True),
        ("vendor/data/*.json", "vendor/other", False),
        ("results/**", "vendor", False),
        ("*/results/*.json", "vendor", True),
        ("*.json", "vendor", False),
        ("vendor", "vendor", False),
        ("vendor/*", "vendor/data", False),
    ],
)
def test_a_glob_names_paths_inside_a_folder(glob: str, folder: str, inside: bool) -> None:
    assert name_inside(["q", glob], folder) is inside
