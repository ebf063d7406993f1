"""Trees: which files are read, in the work tree and in a commit, and what is said of those that are not."""

from __future__ import annotations

import errno
import json
import os
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest
from scan.scanning import Git, Write, ids, places, said

from gatecheck.errors import CannotJudge
from gatecheck.scan import scan, tree

ALL = ["**"]
POINTER = (
    "version https://git-lfs.github.com/spec/v1\n"
    "oid sha256:4d7a214614ab2935c943f9e0ff69d22eadbb8f32b1258daaa5e2ca24d17e2393\nsize 12345\n"
)


def record(identifier: str) -> dict[str, Any]:
    """Return a record."""
    return {"gatecheck": "record/1", "id": identifier}


def refusal(*arguments: Any) -> tuple[str, str]:
    """Return what stops a scan."""
    with pytest.raises(CannotJudge) as caught:
        scan(*arguments)
    return caught.value.message, caught.value.advice


# --- Which files


def test_a_folder_in_no_repository_is_walked(root: Path, write: Write) -> None:
    for path in ("b/x.json", "a.json", "b.json", ".git/hidden.json", "b/.dot/y.json", "b/z.txt"):
        write(path, record(path))
    found = scan(root, ALL, [])
    assert ids(found) == ["a.json", "b.json", "b/.dot/y.json", "b/x.json"]
    assert (said(found), found.files) == ([], 4)


def test_a_walk_without_git(root: Path, write: Write, monkeypatch: pytest.MonkeyPatch) -> None:
    write("a.json", record("a"))
    monkeypatch.setenv("PATH", "")
    assert ids(scan(root, ALL, [])) == ["a"]


def test_ignored_files_are_not_read(git: Git, root: Path, write: Write) -> None:
    write(".gitignore", "out/\n")
    write("a.json", record("tracked"))
    git("add", ".")
    write("b.json", record("new"))
    write("out/c.json", record("ignored"))
    write("sub/.git/d.json", record("in git's own folder"))
    assert ids(scan(root, ALL, [])) == ["tracked", "new"]


def test_globs_choose_the_files(root: Path, write: Write) -> None:
    for path in ("results/a.json", "results/scratch/b.json", "notebooks/c.json", "d.json"):
        write(path, record(path))
    found = scan(root, ["results/**", "*.json"], ["**/scratch/**"])
    assert (ids(found), found.files) == (["d.json", "results/a.json"], 2)
    assert scan(root, [], []).files == 0


def test_places_are_relative_to_the_judged_folder(git: Git, root: Path, write: Write) -> None:
    write("team/results/a.json", record("a"))
    write("b.json", record("b"))
    git("add", ".")
    git("commit", "-q", "-m", "files")
    for revision in (None, "HEAD"):
        (one,) = scan(root / "team", ["results/*"], [], revision).found
        assert str(one.at) == "results/a.json:1"


def test_odd_names(git: Git, root: Path, write: Write) -> None:
    write("é.json", record("accent"))
    write("line\nbreak.json", record("break"))
    (root / os.fsdecode(b"latin-\xe9.json")).write_text(json.dumps(record("latin")))
    git("add", ".")
    git("commit", "-q", "-m", "files")
    for revision in (None, "HEAD"):
        found = scan(root, ALL, [], revision)
        assert [str(one.at) for one in found.found] == ["latin-\\xe9.json:1", "line\nbreak.json:1", "é.json:1"]


def test_a_file_that_is_deleted_in_the_work_tree_is_gone(git: Git, root: Path, write: Write) -> None:
    write("a.json", record("a"))
    write("b/c.json", record("c"))
    write("d/e.json", record("e"))
    git("add", ".")
    git("commit", "-q", "-m", "files")
    (root / "a.json").unlink()
    (root / "a.json").mkdir()
    (root / "b/c.json").unlink()
    (root / "b").rmdir()
    write("b", "a file now")
    found = scan(root, ALL, [])
    assert (ids(found), said(found), found.files) == (["e"], [], 1)
    assert ids(scan(root, ALL, [], "HEAD")) == ["a", "c", "e"]


def test_a_commit_is_read_as_it_was(git: Git, root: Path, write: Write) -> None:
    write("a.json", record("first"))
    git("add", ".")
    git("commit", "-q", "-m", "files")
    write("a.json", record("second"))
    write("b.json", record("new"))
    assert ids(scan(root, ALL, [], "HEAD")) == ["first"]
    assert ids(scan(root, ALL, [], git("rev-parse", "HEAD"))) == ["first"]
    assert ids(scan(root, ALL, [])) == ["second", "new"]


def test_files_left_out_of_a_sparse_checkout_are_read_from_git(git: Git, root: Path, write: Write) -> None:
    write("in/a.json", record("a"))
    write("out/b.json", record("b"))
    git("add", ".")
    git("commit", "-q", "-m", "files")
    git("sparse-checkout", "set", "in")
    assert not (root / "out").exists()
    assert ids(scan(root, ALL, [])) == ["a", "b"]


def test_contents_that_a_clone_lacks(git: Git, root: Path, write: Write) -> None:
    write("a.json", record("a"))
    write("b.json", record("b"))
    write("c.json", record("c"))
    git("add", ".")
    git("commit", "-q", "-m", "files")
    lost = [git("rev-parse", f":{name}.json") for name in "bc"]
    for one in lost:
        (root / ".git/objects" / one[:2] / one[2:]).unlink()
    found = scan(root, ALL, [], "HEAD")
    advice = "clone without --filter, or narrow `scan.include`"
    message = "the content of this file and 1 more are not in this clone, which is a partial one"
    assert (ids(found), said(found)) == (["a"], [("b.json:1", message, advice)])
    found = scan(root, ["b.json"], [], "HEAD")
    assert said(found)[0][1] == "the content of this file is not in this clone, which is a partial one"


# --- What stops a scan


def test_a_folder_that_is_missing(root: Path, write: Write) -> None:
    advice = "name the folder to judge"
    assert refusal(root / "none", ALL, []) == (f"{root}/none does not exist", advice)
    write("a.json", record("a"))
    assert refusal(root / "a.json", ALL, []) == (f"{root}/a.json is not a folder", advice)


def test_a_revision_without_a_repository(root: Path) -> None:
    assert refusal(root, ALL, [], "HEAD") == (
        f"{root} is in no git repository, so it has no revision HEAD",
        "leave the revision out, or name a repository",
    )


def test_an_unknown_revision(git: Git, root: Path) -> None:
    git("commit", "-q", "--allow-empty", "-m", "first")
    assert refusal(root, ALL, [], "nope")[0] == "git knows no revision nope here"


def test_another_owner_is_no_empty_tree(git: Git, root: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    git("commit", "-q", "--allow-empty", "-m", "first")
    monkeypatch.setenv("GIT_TEST_ASSUME_DIFFERENT_OWNER", "1")
    assert refusal(root, ALL, [])[1] == f"run `git config --global --add safe.directory {root}`"


def test_a_folder_that_cannot_be_read(root: Path, write: Write, monkeypatch: pytest.MonkeyPatch) -> None:
    write("sub/a.json", record("a"))
    listing = os.scandir

    def refuse(path: Path) -> Any:
        if path.name == "sub":
            raise PermissionError(errno.EACCES, "Permission denied")
        return listing(path)

    monkeypatch.setattr(os, "scandir", refuse)
    message, advice = refusal(root, ALL, [])
    assert (message, advice) == (
        f"the folder {root}/sub cannot be read (Permission denied)",
        "mend its permissions",
    )


# --- Links, submodules, merges, pointers


LINK_ADVICE = "put a copy of the file in its place, or exclude the link"
OUTSIDE = "a symbolic link out of the tree is not followed"


@pytest.mark.parametrize("mode", ["walked", "untracked", "tracked", "commit"])
def test_links(git: Git, root: Path, write: Write, mode: str) -> None:
    """A link to a file that is read says nothing; any other would hide a record, or lead out of the tree."""
    (root.parent / "out.json").write_text(json.dumps(record("outside")))
    write("real.json", record("real"))
    write("plain.txt", record("text"))
    for name, target in {
        "good.json": "real.json",
        "far/good.json": "../hop.json",
        "hop.json": "./real.json",
        "out.json": "../out.json",
        "absolute.json": str(root.parent / "out.json"),
        "broken.json": "none.json",
        "loop.json": "loop.json",
        "text.json": "plain.txt",
        "folder": "far",
    }.items():
        (root / name).parent.mkdir(exist_ok=True)
        (root / name).symlink_to(target)
    if mode in {"tracked", "commit"}:
        git("add", ".")
        git("commit", "-q", "-m", "files")
    if mode == "walked":
        (root / ".git").rename(root.parent / "git")
    found = scan(root, ALL, [], "HEAD" if mode == "commit" else None)
    other = "a symbolic link to {}, which is not read itself, is not followed"
    assert ids(found) == ["real"]
    assert said(found) == [
        ("absolute.json:1", OUTSIDE, LINK_ADVICE),
        ("broken.json:1", other.format("none.json"), LINK_ADVICE),
        ("loop.json:1", other.format("loop.json"), LINK_ADVICE),
        ("out.json:1", OUTSIDE, LINK_ADVICE),
        ("text.json:1", other.format("plain.txt"), LINK_ADVICE),
    ]


@pytest.mark.parametrize("mode", ["walked", "untracked", "tracked", "commit"])
def test_a_link_to_a_folder_that_a_glob_names(git: Git, root: Path, write: Write, mode: str) -> None:
    write("data/v2/a.json", record("a"))
    write("results.md", "")
    (root / "results").symlink_to("data/v2")
    (root / "other").symlink_to("data/v2")
    if mode in {"tracked", "commit"}:
        git("add", ".")
        git("commit", "-q", "-m", "files")
    if mode == "walked":
        (root / ".git").rename(root.parent / "git")
    revision = "HEAD" if mode == "commit" else None
    advice = "name the folder that it leads to, and leave it out of `scan.include`"
    problem = ("results:1", "a symbolic link to a folder is not followed", advice)
    assert said(scan(root, ["results/**"], [], revision)) == [problem]
    assert said(scan(root, ["results/**"], ["results/**"], revision)) == []
    assert said(scan(root, ["**/*.json"], [], revision)) == []


def test_a_tracked_folder_that_has_become_a_link_is_not_entered(git: Git, root: Path, write: Write) -> None:
    outside = root.parent / "outside"
    outside.mkdir()
    (outside / "a.json").write_text(json.dumps(record("outside")))
    write("results/a.json", record("inside"))
    git("add", ".")
    git("commit", "-q", "-m", "files")
    (root / "results/a.json").unlink()
    (root / "results").rmdir()
    (root / "results").symlink_to(outside)
    assert ids(scan(root, ALL, [])) == []
    assert [one[1] for one in said(scan(root, ["results/**"], []))] == [
        "a symbolic link to a folder is not followed"
    ]


def test_a_root_that_is_a_link_is_entered(root: Path, write: Write) -> None:
    write("a.json", record("a"))
    (root.parent / "link").symlink_to(root)
    assert ids(scan(root.parent / "link", ALL, [])) == ["a"]


def test_submodules_and_repositories_inside(git: Git, root: Path) -> None:
    other = root.parent / "other"
    other.mkdir()
    git("init", "-q", at=other)
    (other / "a.json").write_text(json.dumps(record("elsewhere")))
    git("add", ".", at=other)
    git("commit", "-q", "-m", "files", at=other)
    git("submodule", "add", "-q", str(other), "vendor/data")
    git("commit", "-q", "-m", "submodule")
    git("clone", "-q", str(other), "nested")
    message = "the files of a submodule, or of a repository inside this one, are not read"
    advice = "judge them in their own repository, and leave it out of `scan.include`"
    for revision in (None, "HEAD"):
        assert said(scan(root, ["vendor/**"], [], revision)) == [("vendor/data:1", message, advice)]
        assert said(scan(root, ["vendor/data/*.json"], [], revision)) == [("vendor/data:1", message, advice)]
        assert said(scan(root, ["vendor/**"], ["vendor/data/**"], revision)) == []
        found = scan(root, ALL, [], revision)
        assert (ids(found), said(found)) == ([], [])
    assert said(scan(root, ["nested/*"], [])) == [("nested:1", message, advice)]


def test_a_merge_that_is_not_resolved(git: Git, root: Path, write: Write) -> None:
    def commit(**fields: str) -> None:
        write("a.json", record("a") | fields)
        write("b.json", {"dependencies": {"gatecheck": "^1.0", **fields}})
        git("add", ".")
        git("commit", "-q", "-m", "files")

    commit()
    git("checkout", "-q", "-b", "theirs")
    commit(claim="theirs")
    git("checkout", "-q", "main")
    commit(claim="ours")
    with pytest.raises(subprocess.CalledProcessError):
        git("merge", "-q", "theirs")
    assert said(scan(root, ALL, [])) == [
        ("a.json:1", "the file is in the middle of a merge", "resolve it, then `git add a.json`")
    ]


@pytest.mark.parametrize(
    ("path", "include", "told"),
    [
        ("results/a.json", ["**"], False),
        ("results/a.json", ["**/*"], False),
        ("results/a.json", ["results/**"], True),
        ("results/a.json", ["**/*.json"], True),
        ("a.record.json", ["**"], True),
        ("a.Record.yaml", ["**"], True),
        ("a.csv", ["a.csv"], False),
    ],
)
def test_pointers_of_large_file_storage(
    root: Path, write: Write, path: str, include: list[str], told: bool
) -> None:
    """The pointer is the example of https://github.com/git-lfs/git-lfs, docs/spec.md."""
    write(path, POINTER)
    message = "the file is a Git LFS pointer, so its content is not here"
    advice = "run `git lfs pull`; with actions/checkout, set `lfs: true`"
    assert said(scan(root, include, [])) == ([(f"{path}:1", message, advice)] if told else [])


# --- Long files


def test_a_long_file_that_declares_a_record(root: Path, write: Write) -> None:
    text = json.dumps(record("a"))
    write("a.json", text[:-1] + " " * ((32 << 20) - len(text)) + "}")
    write("b.json", text[:-1] + " " * (33 << 20) + "}")
    found = scan(root, ALL, [])
    assert ids(found) == ["a"]
    assert said(found) == [
        (
            "b.json:1",
            "the file has 33.0 MiB; files of records are read up to 32 MiB",
            "split it, or exclude it if it holds no records",
        )
    ]


def test_a_long_file_that_is_not_ours_is_passed_over(root: Path, write: Write) -> None:
    write("a.json", b'{"dependencies": {"gatecheck": "^1.0"}}' + b" " * (33 << 20))
    found = scan(root, ALL, [])
    assert (found.found, found.problems, found.files) == ((), (), 1)


@pytest.mark.parametrize("revision", [None, "HEAD"])
def test_a_file_too_long_to_be_searched(
    git: Git, root: Path, write: Write, monkeypatch: pytest.MonkeyPatch, revision: str | None
) -> None:
    """The bound is lowered here, since a file above the true one takes seconds to write."""
    monkeypatch.setattr(tree, "LONGEST_SEARCHED", 1 << 20)
    write("a.json", b" " * (1 << 20))
    write("b.json", b" " * (3 << 19))
    write("c.json", record("c"))
    git("add", ".")
    git("commit", "-q", "-m", "files")
    found = scan(root, ALL, [], revision)
    assert (ids(found), found.files) == (["c"], 2)
    assert said(found) == [
        (
            "b.json:1",
            "the file has 1.5 MiB; a file is searched for records up to 256 MiB",
            "split it, or exclude it if it holds no records",
        )
    ]


def test_a_sparse_file_of_terabytes_is_not_read(root: Path, write: Write) -> None:
    os.truncate(write("a.json", ""), 1 << 40)
    found = scan(root, ALL, [])
    assert said(found)[0][1] == "the file has 1048576.0 MiB; a file is searched for records up to 256 MiB"


# --- Files that cannot be opened


def test_a_pipe_does_not_stall_the_scan(root: Path) -> None:
    os.mkfifo(root / "a.json")
    found = scan(root, ALL, [])
    assert (found.found, found.problems) == ((), ())


@pytest.mark.parametrize("call", ["open", "read"])
def test_a_file_that_cannot_be_opened(root: Path, write: Write, monkeypatch: pytest.MonkeyPatch, call: str) -> None:
    write("a.json", record("a"))

    true = getattr(os, call)

    def refuse(*arguments: Any, **named: Any) -> Any:
        if arguments[0] == str(root / "a.json") or arguments[1] == tree._FIRST_READ:
            raise PermissionError(errno.EACCES, "Permission denied")
        return true(*arguments, **named)

    monkeypatch.setattr(os, call, refuse)
    advice = "mend its permissions, or exclude it"
    assert said(scan(root, ALL, [])) == [("a.json:1", "the file cannot be opened (Permission denied)", advice)]


# --- Order and cost


def test_the_order_is_that_of_the_places(root: Path, write: Write) -> None:
    write("b.json", [record("z"), record("a")])
    write("a/x.json", '{"gatecheck": "record/1", ')
    write("B.json", record("B"))
    write("a.json", {"gatecheck": "record/1", "id": "", "x": 1})
    found = scan(root, ALL, [])
    assert ids(found) == ["B", "z", "a"]
    assert [one[0] for one in said(found)] == ["a.json:3", "a.json:4", "a/x.json:1"]
    again = scan(root, ALL, [])
    assert (places(again), again.problems, again.files) == (places(found), found.problems, found.files)


def test_yaml_is_not_loaded_without_a_candidate(root: Path, write: Write) -> None:
    """Its parser costs more at the start than a small scan does."""
    write("a.json", record("a"))
    write("b.yaml", "gatecheck is named here\n")
    program = (
        "import sys, pathlib; from gatecheck.scan import scan\n"
        "scan(pathlib.Path(sys.argv[1]), ['**'], []); print('yaml' in sys.modules)"
    )
    answers = []
    for _ in range(2):
        ran = subprocess.run([sys.executable, "-c", program, str(root)], capture_output=True, text=True, check=True)
        answers.append(ran.stdout.strip())
        write("b.yaml", "gatecheck: record/1\nid: b\n")
    assert answers == ["False", "True"]
