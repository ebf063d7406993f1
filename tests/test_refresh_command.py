"""Command `refresh`: the diff, what is written, and what is left to do."""

from __future__ import annotations

import json
from collections.abc import Sequence
from pathlib import Path

import pytest
from support import POLICY, Document, changed, drainage, write_tree

from gatecheck.cli import main
from gatecheck.prose.reading import Prose, read_prose

ID = "drainage/earthworm-biomass"
POLICY_WITH_TEXT = changed(POLICY, rules={"text-agrees": {}})


def link(field: str) -> str:
    """A marker in Markdown."""
    return f"<!-- gatecheck: {ID} {field} -->"


@pytest.fixture
def tree(tmp_path: Path) -> Path:
    """A record, and a text in which two numbers differ from it, one of which cannot be written."""
    folder = tmp_path / "tree"
    folder.mkdir()
    write_tree(folder, drainage(), policy=POLICY_WITH_TEXT)
    return folder


def run(folder: Path, capsys: pytest.CaptureFixture[str], *arguments: str) -> tuple[int, str]:
    """Run the command, and return its status and what it said."""
    capsys.readouterr()
    status = main(["refresh", str(folder), *arguments])
    said = capsys.readouterr()
    return status, said.out + said.err


def test_the_diff_comes_first_and_nothing_is_written(tree: Path, capsys: pytest.CaptureFixture[str]) -> None:
    text = f"# Results\n\nBiomass rose by 3.8 g {link('estimate.value')}.\nIt did.\n"
    (tree / "a.md").write_text(text, encoding="utf-8")

    status, said = run(tree, capsys)

    assert status == 1
    assert said == (
        "--- a.md\n"
        "+++ a.md (from the records)\n"
        "@@ -2,3 +2,3 @@\n"
        "\n"
        f"-Biomass rose by 3.8 g {link('estimate.value')}.\n"
        f"+Biomass rose by 4.2 g {link('estimate.value')}.\n"
        " It did.\n"
        "\n"
        "1 linked number to be changed; `gatecheck refresh --write` writes what is shown\n"
        "above.\n"
    )
    assert (tree / "a.md").read_text(encoding="utf-8") == text


def test_what_is_written_keeps_line_ends_mark_and_mode(tree: Path, capsys: pytest.CaptureFixture[str]) -> None:
    content = f"\ufeffÉ\r\n3.8 {link('estimate.value')}\r\nx".encode()
    (tree / "a.md").write_bytes(content)
    (tree / "a.md").chmod(0o640)
    (tree / "b.md").write_bytes(content.removeprefix(b"\xef\xbb\xbf"))

    status, said = run(tree, capsys, "--write")

    assert status == 0
    assert said.endswith("2 linked numbers written from the records.\n")
    assert (tree / "a.md").read_bytes() == content.replace(b"3.8", b"4.2")
    assert (tree / "b.md").read_bytes() == content.replace(b"3.8", b"4.2").removeprefix(b"\xef\xbb\xbf")
    assert (tree / "a.md").stat().st_mode & 0o777 == 0o640
    assert sorted(path.name for path in tree.iterdir()) == ["a.md", "b.md", "gatecheck.yaml", "r000.json"]
    assert run(tree, capsys) == (0, "No linked number is to be changed.\n")


def test_a_number_that_cannot_be_written_is_told(tree: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tree / "a.md").write_text(f"4.0 {link('estimate.value')}, p < .001 {link('test.p')}", encoding="utf-8")

    status, said = run(tree, capsys, "--write")
    again = run(tree, capsys)

    assert status == 1
    kept = (
        "Left as it is\n\n"
        "  a.md, line 1\n"
        f"  Found    the text says < .001 for test.p of {ID}, and\n"
        "           the record's 0.034 cannot be written in these digits.\n"
        "  To mend  write it by hand.\n\n"
    )
    assert said.endswith(kept + "1 linked number written from the records.\n")
    assert again == (1, kept + "Every other linked number is that of its record.\n")


def test_cells_of_notebooks(tree: Path, capsys: pytest.CaptureFixture[str]) -> None:
    cells = [{"cell_type": "markdown", "source": ["# A\n", f"3.8 {link('estimate.value')}"]}] * 2
    (tree / "n.ipynb").write_text(json.dumps({"cells": cells}), encoding="utf-8")

    status, said = run(tree, capsys)

    assert status == 1
    assert "--- n.ipynb (cell 1)\n+++ n.ipynb (cell 1) (from the records)\n" in said
    assert said.count(f"+4.2 {link('estimate.value')}\n") == 2
    assert run(tree, capsys, "--write")[0] == 0
    assert (tree / "n.ipynb").read_text(encoding="utf-8") == json.dumps({"cells": cells}).replace("3.8", "4.2")


def test_what_is_broken_is_no_success(tree: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tree / "a.md").write_text("3 <!-- gatecheck: drainage/earthworm test.p -->", encoding="utf-8")
    (tree / "b.md").write_bytes(b"\xff")
    (tree / "broken.json").write_text('{"gatecheck": "record/1"', encoding="utf-8")

    status, said = run(tree, capsys)

    assert status == 3
    assert said == (
        "Could not be read or linked\n\n"
        "  a.md, line 1\n"
        "  Found    the link to drainage/earthworm leads to no record.\n"
        f"  To mend  the nearest known one is {ID}.\n\n"
        "  b.md, line 1\n"
        "  Found    the text is not UTF-8: byte 0xFF at offset 0.\n"
        "  To mend  save the file as UTF-8.\n\n"
        "  broken.json, line 1\n"
        "  Found    the text is no JSON: Expecting ',' delimiter.\n"
        "  To mend  the text ends too early: write the file again, whole.\n\n"
        "No linked number is to be changed.\n"
    )


def test_figures_of_the_evidence_are_written_too(tree: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tree / "a.md").write_text(f"The risk is 12 % {link('risk')}.", encoding="utf-8")

    assert run(tree, capsys, "--write")[0] == 0
    assert (tree / "a.md").read_text(encoding="utf-8") == f"The risk is 17 % {link('risk')}."


@pytest.mark.parametrize(
    ("rules", "status"),
    [
        ({"text-agrees": {"exclude": ["a.md"]}}, 0),
        ({"text-agrees": {"enforce": "off"}}, 1),
        ({}, 1),
    ],
)
def test_the_policy_says_what_is_prose(
    tree: Path, capsys: pytest.CaptureFixture[str], rules: Document, status: int
) -> None:
    write_tree(tree, policy=changed(POLICY, rules=rules))
    (tree / "a.md").write_text(f"3.8 {link('estimate.value')}", encoding="utf-8")

    assert run(tree, capsys)[0] == status


def test_text_from_outside_cannot_act_on_the_terminal(tree: Path, capsys: pytest.CaptureFixture[str]) -> None:
    text = f"\t\x1b[31m ::error::x ##[group] \u2028 3.8 {link('estimate.value')}"
    (tree / "a.md").write_text(text, encoding="utf-8")

    _, said = run(tree, capsys)

    assert f"-\t{{U+001B}}[31m : :error: :x ## [group]   3.8 {link('estimate.value')}\n" in said


def test_a_file_that_changes_meanwhile_is_left_alone(
    tree: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    (tree / "a.md").write_text(f"3.8 {link('estimate.value')}", encoding="utf-8")

    def read_and_change(root: Path, include: Sequence[str], exclude: Sequence[str]) -> Prose:
        prose = read_prose(root, include, exclude)
        (tree / "a.md").write_text("other", encoding="utf-8")
        return prose

    monkeypatch.setattr("gatecheck.commands.refresh.read_prose", read_and_change)

    status, said = run(tree, capsys, "--write")

    assert (status, said) == (
        3,
        "gatecheck: cannot judge: 'a.md' has changed since it was read; run the command again.\n",
    )
    assert (tree / "a.md").read_text(encoding="utf-8") == "other"


def test_nothing_is_left_behind_where_a_file_cannot_be_replaced(
    tree: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    text = f"3.8 {link('estimate.value')}"
    (tree / "a.md").write_text(text, encoding="utf-8")

    def refuse(*_: object) -> None:
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr("shutil.copymode", refuse)

    status, said = run(tree, capsys, "--write")

    assert (status, said) == (
        3,
        "gatecheck: cannot judge: 'a.md' cannot be written (Permission denied); make it writable.\n",
    )
    assert sorted(path.name for path in tree.iterdir()) == ["a.md", "gatecheck.yaml", "r000.json"]
    assert (tree / "a.md").read_text(encoding="utf-8") == text


def test_without_prose_nothing_is_to_be_done(tree: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(tree, capsys) == (0, "No linked number is to be changed.\n")
