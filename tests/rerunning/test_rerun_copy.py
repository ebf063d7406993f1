"""The clean copy in which analysis code runs."""

from __future__ import annotations

import json
import os
import stat
from pathlib import Path
from typing import Any

import pytest
from support import commit_all, drainage, git

from gatecheck.errors import CannotJudge
from gatecheck.model.found import Scan
from gatecheck.rerunning.copying import Copy, copied, without_records
from gatecheck.scan import scan

ALL = (("**",), ())


@pytest.fixture
def tree(tmp_path: Path) -> Path:
    folder = tmp_path / "tree"
    folder.mkdir()
    return folder


@pytest.fixture
def into(tmp_path: Path) -> Path:
    folder = tmp_path / "copy"
    folder.mkdir()
    return folder


def write(folder: Path, **files: Any) -> None:
    """Write files by their names, in which two underscores are a slash and one before the last word a dot."""
    for name, content in files.items():
        path = folder / name.replace("__", "/").replace("_", ".")
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(content if isinstance(content, str) else json.dumps(content), encoding="utf-8")


def names(folder: Path) -> list[str]:
    """All files and links below the folder, save those of git."""
    paths = (path.relative_to(folder) for path in folder.rglob("*") if path.is_symlink() or not path.is_dir())
    return sorted(path.as_posix() for path in paths if path.parts[0] != ".git")


def test_tracked_and_untracked_files_are_copied_and_ignored_ones_are_not(tree: Path, into: Path) -> None:
    write(tree, a_py="committed", gone_py="", _gitignore="cache\n", data__d_csv="1")
    commit_all(tree, "first")
    write(tree, a_py="changed", new_py="new", cache="x")
    (tree / "gone.py").unlink()

    copy = copied(tree, into)

    assert (copy.folder, copy.notes) == (into, ())
    assert names(into) == [".gitignore", "a.py", "data/d.csv", "new.py"]
    assert (into / "a.py").read_text(encoding="utf-8") == "changed"


def test_the_copy_is_a_repository_without_commits(tree: Path, into: Path) -> None:
    write(tree, a_py="")
    commit_all(tree, "first")
    copied(tree, into)

    assert git(into, "rev-parse", "--show-toplevel") == str(into)
    assert git(into, "for-each-ref") == ""
    assert not (into / ".git" / "hooks").exists()


def test_a_folder_in_no_repository_is_walked(tree: Path, into: Path) -> None:
    write(tree, a__b__c_py="1")

    assert copied(tree, into).notes == ()
    assert names(into) == ["a/b/c.py"]
    assert not (into / ".git").exists()


def test_the_whole_repository_around_the_folder_is_copied(tree: Path, into: Path) -> None:
    write(tree, data__d_csv="1", study__a_py="2")
    commit_all(tree, "first")

    copy = copied(tree / "study", into)

    assert copy.folder == into / "study"
    assert names(into) == ["data/d.csv", "study/a.py"]


def test_a_folder_without_files_is_there_in_the_copy(tree: Path, into: Path) -> None:
    write(tree, a_py="")
    commit_all(tree, "first")
    (tree / "empty").mkdir()

    assert copied(tree / "empty", into).folder.is_dir()


def test_permissions_and_odd_names_are_kept(tree: Path, into: Path) -> None:
    odd = ["a b.py", "-x.py", "semi;colon $(x).py", "Äpfel\u200b.py", "li\nne.py", os.fsdecode(b"by\xffte.py")]
    for name in odd:
        (tree / name).write_text("1", encoding="utf-8")
    (tree / "a b.py").chmod(0o750)
    commit_all(tree, "first")
    copied(tree, into)

    assert names(into) == sorted(odd)
    assert stat.S_IMODE((into / "a b.py").stat().st_mode) == 0o750


def test_links_within_the_tree_lead_to_the_copy(tree: Path, into: Path) -> None:
    write(tree, data__d_csv="1", deep__x_txt="")
    (tree / "deep" / "link.csv").symlink_to("../data/d.csv")
    (tree / "absolute.csv").symlink_to(tree / "data" / "d.csv")
    (tree / "chain.csv").symlink_to("absolute.csv")
    (tree / "folder").symlink_to("data")
    commit_all(tree, "first")
    (tree / "new.csv").symlink_to("data/d.csv")

    assert copied(tree, into).notes == ()
    for name in ("deep/link.csv", "absolute.csv", "chain.csv", "new.csv", "folder/d.csv"):
        (into / name).write_text(name, encoding="utf-8")
        assert (into / "data" / "d.csv").read_text(encoding="utf-8") == name
    assert (tree / "data" / "d.csv").read_text(encoding="utf-8") == "1"


def test_links_out_of_the_tree_are_left_out_and_told(tree: Path, into: Path, tmp_path: Path) -> None:
    write(tmp_path, outside_csv="secret")
    for number in range(5):
        (tree / f"{number}.csv").symlink_to("../outside.csv")
    commit_all(tree, "first")

    assert copied(tree, into).notes == (
        "Not copied, as symbolic links out of the tree are not: 0.csv, 1.csv, 2.csv and 2 more.",
    )
    assert names(into) == []


def test_a_folder_that_became_a_link_is_no_way_out(tree: Path, into: Path, tmp_path: Path) -> None:
    """Git takes what lay in the folder for gone."""
    write(tree, data__d_csv="1")
    commit_all(tree, "first")
    (tree / "data").rename(tmp_path / "elsewhere")
    (tree / "data").symlink_to(tmp_path / "elsewhere")

    assert copied(tree, into).notes == ("Not copied, as symbolic links out of the tree are not: data.",)
    assert names(into) == []


def test_submodules_and_pointers_are_told(tree: Path, into: Path) -> None:
    write(tree, a_py="", vendor__x_py="")
    commit_all(tree / "vendor", "inner")
    (tree / "big.csv").write_text(
        f"version https://git-lfs.github.com/spec/v1\noid sha256:{'0' * 64}\nsize 12345\n", encoding="utf-8"
    )

    assert copied_repository(tree, into).notes == (
        "Not copied, as repositories inside this one are not: vendor.",
        "Copied as pointers of Git LFS, without the content that these stand for: big.csv.",
    )
    assert names(into) == ["a.py", "big.csv"]


def copied_repository(tree: Path, into: Path) -> Copy:
    git(tree, "init", "-q")
    return copied(tree, into)


def test_what_is_no_file_is_told(tree: Path, into: Path) -> None:
    write(tree, a_py="")
    os.mkfifo(tree / "pipe")

    assert copied(tree, into).notes == ("Not copied, as they cannot be read: pipe.",)
    assert names(into) == ["a.py"]


def test_a_sparse_checkout_is_copied_whole(tree: Path, into: Path) -> None:
    write(tree, a__x_py="1", b__y_py="2")
    commit_all(tree, "first")
    git(tree, "sparse-checkout", "set", "a")
    assert names(tree) == ["a/x.py"]

    assert copied(tree, into).notes == ()
    assert (into / "b" / "y.py").read_text(encoding="utf-8") == "2"


def test_what_a_partial_clone_lacks_is_told(tree: Path, into: Path) -> None:
    write(tree, a__x_py="1", b__y_py="2")
    commit_all(tree, "first")
    git(tree, "sparse-checkout", "set", "a")
    blob = git(tree, "rev-parse", "HEAD:b/y.py")
    (tree / ".git" / "objects" / blob[:2] / blob[2:]).unlink()

    assert copied(tree, into).notes == ("Not copied, as they cannot be read: b/y.py.",)


def test_a_copy_that_cannot_be_written_is_told(tree: Path, tmp_path: Path) -> None:
    write(tree, a__b_py="")
    write(tmp_path, file="")

    with pytest.raises(CannotJudge) as caught:
        copied(tree, tmp_path / "file")

    assert caught.value.message == f"the tree cannot be copied to {tmp_path / 'file'} (Not a directory)"
    assert caught.value.advice == "see that there is room to write"


def test_no_folder_cannot_be_copied(tree: Path, into: Path) -> None:
    with pytest.raises(CannotJudge, match="does not exist"):
        copied(tree / "no", into)


def notebook(*records: Any) -> dict[str, Any]:
    outputs = [
        {"output_type": "display_data", "data": {"application/vnd.gatecheck.record+json": each}} for each in records
    ]
    cells = [
        {"cell_type": "markdown", "source": "text"},
        {"cell_type": "code", "execution_count": 3, "outputs": outputs},
    ]
    return {"nbformat": 4, "nbformat_minor": 5, "metadata": {}, "cells": cells}


def records_in(folder: Path) -> Scan:
    return scan(folder, *ALL)


def test_records_are_taken_out_of_the_copy(tree: Path) -> None:
    lines = "\n".join(json.dumps(drainage(id=name)) for name in "bc")
    write(
        tree, a_json=drainage(id="a"), twin_json=drainage(id="a"), l_jsonl=lines, n_ipynb=notebook(drainage(id="d"))
    )
    write(tree, plain_json={"a": 1}, other_ipynb=notebook({"x": 1}), a_py="")
    found = records_in(tree)
    assert [one.record.id for one in found.found] == ["a", "b", "c", "d"]

    without_records(tree, found, ["other.ipynb", "a.py"])

    left = records_in(tree)
    assert (left.found, left.problems) == ((), ())
    assert names(tree) == ["a.py", "n.ipynb", "other.ipynb", "plain.json"]
    for name in ("n.ipynb", "other.ipynb"):
        cells = json.loads((tree / name).read_bytes())["cells"]
        assert cells[0] == {"cell_type": "markdown", "source": "text"}
        assert cells[1] == {"cell_type": "code", "execution_count": None, "outputs": []}


@pytest.mark.parametrize("content", ["", "[]", "{}", '{"cells": 3}', '{"cells": [1, {}]}', "[" * 100_000, "\udcff"])
def test_a_notebook_that_cannot_be_read_is_left(tree: Path, content: str) -> None:
    raw = content.encode("utf-8", "surrogateescape")
    (tree / "n.ipynb").write_bytes(raw)

    without_records(tree, records_in(tree), ["n.ipynb"])

    assert (tree / "n.ipynb").read_bytes().replace(b"\n", b"").replace(b" ", b"") == raw.replace(b" ", b"")
