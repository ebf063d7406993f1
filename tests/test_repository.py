"""The repository as a whole: what lies where, how long the code is, and that the documents tell the truth."""

from __future__ import annotations

import ast
import json
import re
from collections.abc import Iterable, Iterator
from pathlib import Path

import make_pages
import pytest
from make_schemas import FOLDER, schemas, text_of
from support import git

from gatecheck.model.exit import Exit
from gatecheck.rules import ALWAYS_ON, NAMES, rules_among

PROJECT = Path(__file__).parents[1]
DOCUMENTS = ("README.md", "DEVELOPERS.md")
TOP = {*DOCUMENTS, "LICENSE", "action", "examples", "gatecheck", "pyproject.toml", "tests"}
LONGEST_FUNCTION = 40
LONGEST_MODULE = 350
CODE = sorted(path for room in ("action", "gatecheck") for path in (PROJECT / room).rglob("*.py"))
TESTS = sorted((PROJECT / "tests").rglob("test_*.py"))
Function = ast.FunctionDef | ast.AsyncFunctionDef


def _name(path: Path) -> str:
    return path.relative_to(PROJECT).as_posix()


def _tracked() -> list[str]:
    return git(PROJECT, "ls-files", "-z").strip("\0").split("\0")


def _functions(path: Path) -> Iterator[Function]:
    tree = ast.parse(path.read_bytes())
    return (node for node in ast.walk(tree) if isinstance(node, Function))


def _lines(function: Function) -> int:
    """The lines of the body without its docstring."""
    body = function.body[1:] if ast.get_docstring(function) is not None else function.body
    return (body[-1].end_lineno or 0) - body[0].lineno + 1 if body else 0


def _asserting(functions: Iterable[Function]) -> set[str]:
    """The names of the functions that assert something, by themselves or through one another."""
    called = {each.name: _called(each) for each in functions}
    asserting = {name for name, calls in called.items() if any(map(_is_assertion, calls))}
    while more := {name for name, calls in called.items() if calls & asserting} - asserting:
        asserting |= more
    return asserting


def _called(function: Function) -> set[str]:
    """The names that `function` calls, and `assert` where it asserts."""
    nodes = list(ast.walk(function))
    calls = [node.func for node in nodes if isinstance(node, ast.Call)]
    names = {call.id for call in calls if isinstance(call, ast.Name)}
    names |= {call.attr for call in calls if isinstance(call, ast.Attribute)}
    return names | {"assert" for node in nodes if isinstance(node, ast.Assert)}


def _is_assertion(name: str) -> bool:
    return name in {"assert", "raises"} or name.startswith("assert_")


def _text(document: str) -> str:
    return (PROJECT / document).read_text(encoding="utf-8")


def _paths_named(document: str) -> set[str]:
    """What stands in backticks and looks like a path of the repository: a room's name, a slash, no placeholder."""
    prose = re.sub(r"^```.*?^```$", "", _text(document), flags=re.MULTILINE | re.DOTALL)
    quoted = set(re.findall(r"`([^`\n]+)`", prose))
    rooms = {path.split("/")[0] for path in _tracked()}
    paths = {word for word in quoted if re.fullmatch(r"[\w./-]+", word)}
    return {path for path in paths if path.split("/")[0] in rooms and ("/" in path or path in rooms)}


def test_the_top_level_is_bare() -> None:
    top = {path.split("/")[0] for path in _tracked()}

    assert {name for name in top if not name.startswith(".")} == TOP


@pytest.mark.parametrize("document", DOCUMENTS)
def test_paths_that_documents_name_are_there(document: str) -> None:
    named = _paths_named(document)

    assert named, "the document names no path at all"
    assert {path for path in named if not (PROJECT / path).exists()} == set()


@pytest.mark.parametrize("path", CODE, ids=_name)
def test_code_is_short(path: Path) -> None:
    long = {each.name: _lines(each) for each in _functions(path) if _lines(each) > LONGEST_FUNCTION}
    lines = path.read_bytes().count(b"\n")

    assert long == {}
    assert lines <= LONGEST_MODULE


@pytest.mark.parametrize("path", TESTS, ids=_name)
def test_tests_assert(path: Path) -> None:
    tests = [each for each in _functions(path) if each.name.startswith("test_")]

    assert tests
    assert {each.name for each in tests} - _asserting(_functions(path)) == set()


def test_exit_statuses_in_the_documents() -> None:
    """The table gives a row to each status, and to no other."""
    rows = re.findall(r"^\|\s*`?(\d)`?\s*\|", _text("README.md"), re.MULTILINE)

    assert [int(row) for row in rows] == [status.value for status in Exit]


def test_each_rule_has_a_row_and_its_page_as_generated() -> None:
    """A rule is its module; what is told of it elsewhere follows from there."""
    row = r"^\| \[`([a-z-]+)`\]\(gatecheck/rules/pages/([a-z-]+)\.md\) \|"
    rows = re.findall(row, _text("README.md"), re.MULTILINE)
    pages = {path.stem: path.read_text(encoding="utf-8") for path in make_pages.FOLDER.iterdir()}

    assert rows == [(name, name) for name in NAMES]
    assert pages == {rule.name: make_pages.page(rule) for rule in rules_among(NAMES)}


def test_each_rule_is_the_module_of_its_name() -> None:
    assert [rule.name for rule in rules_among(NAMES)] == list(NAMES)
    assert set(NAMES) > ALWAYS_ON


@pytest.mark.parametrize("kind", sorted(schemas()))
def test_published_schemas_are_those_of_the_models(kind: str) -> None:
    """`python tests/make_schemas.py` writes them."""
    published = (FOLDER / f"{kind}.schema.json").read_text(encoding="utf-8")

    assert published == text_of(schemas()[kind])


def test_every_schema_is_published_for_a_kind() -> None:
    names = {path.name.removesuffix(".schema.json") for path in FOLDER.glob("*.schema.json")}

    assert names - {"verdict"} == set(schemas())
    assert json.loads((FOLDER / "verdict.schema.json").read_text(encoding="utf-8"))["title"] == "verdict/1"
