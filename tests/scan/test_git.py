"""Git: what it lists and reads, and that its failures are never taken for an empty answer."""

from __future__ import annotations

import os
import re
import shutil
import subprocess
from pathlib import Path

import pytest
from scan.scanning import Git, Write

from gatecheck.errors import CannotJudge
from gatecheck.git import (
    Blob,
    Entry,
    list_files,
    list_tree,
    read_blobs,
    read_file_at,
    resolve,
    safe,
    toplevel,
)

MOST = 1 << 20


def kinds(entries: tuple[Entry, ...]) -> dict[str, str]:
    """Return the kind of each path."""
    return {entry.path: entry.kind for entry in entries}


def refusal(work: object, *arguments: object) -> CannotJudge:
    """Return what `work` raises, which must be a `CannotJudge` that says the same as a text."""
    assert callable(work)
    with pytest.raises(CannotJudge) as caught:
        work(*arguments)
    assert str(caught.value) == f"{caught.value.message}: {caught.value.advice}"
    return caught.value


def test_toplevel_of_a_folder_in_a_repository(git: Git, root: Path, write: Write) -> None:
    write("a/b/c.json", "{}")
    assert git("status", "--porcelain") == "?? a/"
    assert toplevel(root / "a" / "b") == root


def test_toplevel_keeps_line_breaks_of_a_folder(git: Git, root: Path) -> None:
    odd = root / "line\nbreak\n"
    odd.mkdir()
    git("init", "-q", at=odd)
    assert toplevel(odd) == odd


def test_toplevel_outside_of_any_repository(root: Path) -> None:
    assert toplevel(root) is None


def test_a_broken_link_to_a_repository_is_no_missing_one(root: Path, write: Write) -> None:
    write(".git", "gitdir: /nowhere/at/all\n")
    error = refusal(toplevel, root)
    assert error.message == f"git rev-parse failed in {root}: not a git repository: /nowhere/at/all"
    assert error.advice == "mend the repository, then run again"


@pytest.mark.parametrize("head", [b"ref: elsewhere\n", b"", b"no id\n"])
def test_a_repository_whose_head_is_broken_is_no_plain_folder(
    git: Git, root: Path, write: Write, head: bytes
) -> None:
    """Git passes it over as if there were none (seen with git 2.39)."""
    write("sub/a.json", "{}")
    git("commit", "-q", "--allow-empty", "-m", "first")
    write(".git/HEAD", head)
    error = refusal(toplevel, root / "sub")
    assert error.message == f"there is a repository at {root}, and git cannot read it"
    assert error.advice == "see that .git/HEAD there names a branch or a commit, or clone the repository anew"


def test_a_repository_above_where_git_stops_is_none(git: Git, root: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    inner = root / "inner" / "most"
    inner.mkdir(parents=True)
    monkeypatch.setenv("GIT_CEILING_DIRECTORIES", str(root / "inner"))
    assert git("rev-parse", "--is-inside-work-tree") == "true"
    assert toplevel(inner) is None


def test_a_bare_repository_has_no_work_tree(git: Git, root: Path) -> None:
    git("clone", "-q", "--bare", ".", "bare.git")
    assert "must be run in a work tree" in refusal(toplevel, root / "bare.git").message


def test_a_repository_of_another_owner(git: Git, root: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Git refuses it with status 128 (git-config, safe.directory); as an empty list it would pass in silence."""
    git("commit", "-q", "--allow-empty", "-m", "first")
    monkeypatch.setenv("GIT_TEST_ASSUME_DIFFERENT_OWNER", "1")
    for work in (toplevel, list_files):
        error = refusal(work, root)
        assert error.message == f"git does not read the repository at {root}, since another user owns it"
        assert error.advice == f"run `git config --global --add safe.directory {root}`"
    assert refusal(resolve, root, "HEAD").advice == error.advice


def test_without_git_a_repository_cannot_be_judged(
    git: Git, root: Path, write: Write, monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    write("sub/a.json", "{}")
    assert git("rev-parse", "--is-inside-work-tree") == "true"
    monkeypatch.setenv("PATH", str(tmp_path / "nothing"))
    error = refusal(toplevel, root / "sub")
    assert error.message == "git cannot be started (No such file or directory)"
    assert error.advice == "install git, and see that it is on the PATH"


def test_without_git_a_plain_folder_is_in_no_repository(
    root: Path, monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    monkeypatch.setenv("PATH", str(tmp_path / "nothing"))
    assert toplevel(root) is None


def test_variables_of_a_hook_do_not_lead_to_its_repository(
    git: Git, root: Path, write: Write, monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    write("a.json", "{}")
    git("add", ".")
    monkeypatch.setenv("GIT_DIR", str(tmp_path / "elsewhere"))
    monkeypatch.setenv("GIT_INDEX_FILE", str(tmp_path / "index"))
    assert kinds(list_files(root)) == {"a.json": "file"}


def test_a_program_named_in_the_settings_is_not_run(git: Git, root: Path, write: Write) -> None:
    hook = write("monitor.sh", "#!/bin/sh\ntouch ran\n")
    hook.chmod(0o755)
    git("config", "core.fsmonitor", str(hook))
    list_files(root)
    assert not (root / "ran").exists()


def test_tracked_and_untracked_files_but_not_ignored_ones(git: Git, root: Path, write: Write) -> None:
    write(".gitignore", "out/\n")
    write("tracked.json", "{}")
    git("add", ".")
    write("out/ignored.json", "{}")
    write("new.json", "{}")
    listed = {entry.path: entry.object_id for entry in list_files(root)}
    assert set(listed) == {".gitignore", "tracked.json", "new.json"}
    assert listed["tracked.json"] == git("rev-parse", ":tracked.json")
    assert listed["new.json"] is None


def test_names_that_are_not_plain(git: Git, root: Path, write: Write) -> None:
    """Without -z git would quote these, and they would be missed (git-config, core.quotePath)."""
    tracked, untracked = (
        ["é.json", "line\nbreak.json", 'quo"te.json'],
        ["100644 ab 0\tx.json", "ü b.json", "? q.json"],
    )
    for name in tracked:
        write(name, "{}")
    git("add", ".")
    for name in untracked:
        write(name, "{}")
    (root / os.fsdecode(b"latin-\xe9.json")).write_bytes(b"{}")
    assert set(kinds(list_files(root))) == {*tracked, *untracked, os.fsdecode(b"latin-\xe9.json")}
    assert [entry.path for entry in list_files(root) if entry.object_id] == sorted(tracked, key=os.fsencode)


def test_paths_are_relative_to_the_listed_folder(git: Git, root: Path, write: Write) -> None:
    write("a/b/c.json", "{}")
    write("other.json", "{}")
    git("add", ".")
    git("commit", "-q", "-m", "files")
    assert kinds(list_files(root / "a")) == {"b/c.json": "file"}
    assert kinds(list_tree(root / "a", "HEAD")) == {"b/c.json": "file"}


def test_links_submodules_and_repositories_inside(git: Git, root: Path, write: Write) -> None:
    other = root.parent / "other"
    other.mkdir()
    git("init", "-q", at=other)
    git("commit", "-q", "--allow-empty", "-m", "first", at=other)
    git("submodule", "add", "-q", str(other), "vendor")
    (root / "link.json").symlink_to("target.json")
    git("add", ".")
    git("commit", "-q", "-m", "files")
    shutil.copytree(other, root / "nested")
    write("new.json", "{}")
    tracked = {".gitmodules": "file", "link.json": "link", "vendor": "submodule"}
    assert kinds(list_tree(root, "HEAD")) == tracked
    assert kinds(list_files(root)) == tracked | {"nested": "submodule", "new.json": "file"}


def test_a_file_whose_merge_is_not_resolved_is_listed_once(git: Git, root: Path, write: Write) -> None:
    merge_in_conflict(git, write)
    assert [(entry.path, entry.kind) for entry in list_files(root)] == [("a.json", "unmerged")]


def merge_in_conflict(git: Git, write: Write, ours: str = "2", theirs: str = "3") -> None:
    """Leave a.json in the middle of a merge."""
    for branch, content in (("main", "1"), ("theirs", theirs), ("main", ours)):
        git("checkout", "-q", "-B", branch) if content == "1" else git(
            "checkout", "-q", *(["-b"] if branch == "theirs" else []), branch
        )
        write("a.json", content)
        git("add", ".")
        git("commit", "-q", "-m", content[:9])
    with pytest.raises(subprocess.CalledProcessError):
        git("merge", "-q", "theirs")


def test_a_sparse_checkout_says_what_it_leaves_out(git: Git, root: Path, write: Write) -> None:
    write("in/a.json", "{}")
    write("out/b.json", "{}")
    git("add", ".")
    git("commit", "-q", "-m", "files")
    git("sparse-checkout", "set", "in")
    assert {entry.path: entry.checked_out for entry in list_files(root)} == {"in/a.json": True, "out/b.json": False}


def test_a_failure_to_list_is_no_empty_list(git: Git, root: Path) -> None:
    git("commit", "-q", "--allow-empty", "-m", "first")
    (root / ".git" / "index").write_bytes(b"not an index, yet long enough to be one")
    assert refusal(list_files, root).message.startswith(f"git ls-files failed in {root}: ")


def test_a_folder_that_git_cannot_open_is_no_empty_one(root: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Git warns of it and ends with status 0; these words are those of git 2.39.5."""
    (root / "git").write_text("#!/bin/sh\necho \"warning: could not open directory 'x/': Permission denied\" >&2\n")
    (root / "git").chmod(0o755)
    monkeypatch.setenv("PATH", f"{root}:{os.environ['PATH']}")
    error = refusal(list_files, root)
    assert error.message == f"git cannot open every folder of {root}"
    assert error.advice == "mend their permissions"


def test_a_failure_without_a_word_gives_its_status(root: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (root / "git").write_text("#!/bin/sh\nexit 7\n")
    (root / "git").chmod(0o755)
    monkeypatch.setenv("PATH", str(root))
    assert refusal(list_files, root).message == f"git ls-files failed in {root}: exit status 7"


def test_blobs_come_in_the_order_asked_for(git: Git, root: Path, write: Write) -> None:
    ids = []
    for content in (b"one\n", b"", b"\0two\nlines\n" * 100):
        write("x", content)
        ids.append(git("hash-object", "-w", "x"))
    blobs = list(read_blobs(root, [ids[2], ids[0], "0" * 40, ids[1], ids[0]], MOST))
    assert [blob.content for blob in blobs] == [b"\0two\nlines\n" * 100, b"one\n", None, b"", b"one\n"]
    assert [blob.size for blob in blobs] == [1100, 4, None, 0, 4]


def test_a_long_blob_is_passed_over(git: Git, root: Path, write: Write) -> None:
    write("x", b"7" * 3_000_000)
    long = git("hash-object", "-w", "x")
    write("x", b"short")
    short = git("hash-object", "-w", "x")
    assert list(read_blobs(root, [long, short], MOST)) == [Blob(3_000_000, None), Blob(5, b"short")]


def test_very_many_blobs_do_not_stall(git: Git, root: Path, write: Write) -> None:
    """Both pipes would be full if one thread asked for all before it read the first."""
    write("x", b"7" * 1000)
    one = git("hash-object", "-w", "x")
    assert sum(blob.size or 0 for blob in read_blobs(root, [one] * 5000, MOST)) == 5_000_000


def test_a_reader_of_blobs_may_stop_early(git: Git, root: Path, write: Write) -> None:
    write("x", b"7" * 1000)
    blobs = read_blobs(root, [git("hash-object", "-w", "x")] * 5000, MOST)
    assert next(blobs).size == 1000
    blobs.close()  # type: ignore[attr-defined]  # it is a generator, and says Iterator


def test_git_that_stops_is_no_missing_blob(root: Path) -> None:
    """Outside of a repository the process ends before it answers."""
    error = refusal(lambda: list(read_blobs(root, ["0" * 40], MOST)))
    assert error.message == f"git stopped before it had read the files of {root}"
    assert error.advice == "run `git fsck` there"


@pytest.mark.parametrize(
    ("batch", "asked", "before"),
    [
        ("exit", ["aa"], []),  # all that is asked for is here, and git ends all the same
        ("exit", ["bb", "aa"], [Blob(None, None)]),  # what is not here is missing; of the rest git says nothing
        ("echo 'aa blob 2'; echo 12; echo 'aa blob 9'; printf 123; exit", ["aa", "aa"], [Blob(2, b"12")]),
    ],
)
def test_git_that_stops_halfway_is_no_missing_blob(  # three cases and their folder
    root: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, batch: str, asked: list[str], before: list[Blob]
) -> None:
    program = tmp_path / "bin" / "git"
    program.parent.mkdir()
    program.write_text(f'#!/bin/sh\ncase "$*" in *--batch-all-objects*) echo aa;; *) {batch};; esac\n')
    program.chmod(0o755)
    monkeypatch.setenv("PATH", f"{program.parent}:/usr/bin:/bin")
    given: list[Blob] = []

    error = refusal(lambda: given.extend(read_blobs(root, asked, MOST)))

    assert error.message == f"git stopped before it had read the files of {root}"
    assert given == before


def test_a_file_at_a_revision(git: Git, root: Path, write: Write) -> None:
    write("sub/policy.yaml", "first\n")
    (root / "link.yaml").symlink_to("sub/policy.yaml")
    git("add", ".")
    git("commit", "-q", "-m", "files")
    write("sub/policy.yaml", "second\n")
    assert read_file_at(root, "HEAD", "sub/policy.yaml") == b"first\n"
    assert read_file_at(root / "sub", "HEAD", "policy.yaml") == b"first\n"
    assert read_file_at(root / "sub", "HEAD", "./policy.yaml") == b"first\n"
    for none in ("other.yaml", "sub", "sub/", "-x", "nul\0", "*.yaml"):
        assert read_file_at(root, "HEAD", none) is None
    error = refusal(read_file_at, root, "HEAD", "link.yaml")
    assert error.message == "link.yaml is a symbolic link at HEAD"
    assert error.advice == "commit the file itself there"


def test_a_revision_is_resolved_to_its_commit(git: Git, root: Path) -> None:
    git("commit", "-q", "--allow-empty", "-m", "first")
    git("tag", "-a", "v1", "-m", "annotated")
    commit = git("rev-parse", "HEAD")
    assert re.fullmatch("[0-9a-f]{40}", commit)
    assert [resolve(root, name) for name in ("HEAD", "main", "v1", commit[:9], commit)] == [commit] * 5


@pytest.mark.parametrize("name", ["nope", "0" * 39 + "1", "", "--all", "a\0b", "HEAD~9", "two words"])
def test_an_unknown_revision_is_named(git: Git, root: Path, name: str) -> None:
    """What may be fetched is in `test_fetching.py`: here there is nothing to fetch from."""
    git("commit", "-q", "--allow-empty", "-m", "first")
    error = refusal(resolve, root, name)
    assert error.message == f"git knows no revision {name.replace(chr(0), chr(92) + 'x00')} here"
    assert error.advice.startswith("name a commit that is here")


def test_a_shallow_clone_advises_the_fetch_and_does_not_fetch(git: Git, root: Path, tmp_path: Path) -> None:
    git("commit", "-q", "--allow-empty", "-m", "first")
    first = git("rev-parse", "HEAD")
    git("commit", "-q", "--allow-empty", "-m", "second")
    clone = tmp_path / "clone"
    git("clone", "-q", "--depth=1", f"file://{root}", str(clone))
    error = refusal(resolve, clone, first)
    assert error.message == f"the revision {first} is not in this shallow clone"
    assert error.advice == f"run `git fetch --depth=1 origin {first}`"
    git("fetch", "-q", "--depth=1", "origin", first, at=clone)
    assert resolve(clone, first) == first


def test_a_partial_clone_is_not_filled_by_reading(git: Git, root: Path, write: Write, tmp_path: Path) -> None:
    write("a.json", "{}")
    git("add", ".")
    git("commit", "-q", "-m", "files")
    git("config", "uploadpack.allowFilter", "true")
    clone = tmp_path / "clone"
    git("clone", "-q", "--no-checkout", "--filter=blob:none", f"file://{root}", str(clone))
    (entry,) = list_tree(clone, "HEAD")
    before = git("count-objects", "-v", at=clone)
    assert list(read_blobs(clone, [entry.object_id or ""], MOST)) == [Blob(None, None)]
    assert git("count-objects", "-v", at=clone) == before


def test_a_partial_clone_gives_the_blobs_that_it_has(git: Git, root: Path, write: Write, tmp_path: Path) -> None:
    """Git ends at the first object that it may not fetch, and says nothing of those behind it."""
    asked = []
    for number in range(6):
        write("a.json", str(number))
        git("add", ".")
        git("commit", "-q", "-m", "files")
        asked.append(git("rev-parse", "HEAD:a.json"))
    git("config", "uploadpack.allowFilter", "true")
    clone = tmp_path / "clone"
    git("clone", "-q", "--filter=blob:none", f"file://{root}", str(clone))
    before = git("count-objects", "-v", at=clone)
    here, gone = Blob(1, b"5"), Blob(None, None)

    assert list(read_blobs(clone, asked, MOST)) == [gone] * 5 + [here]
    assert list(read_blobs(clone, [asked[5], asked[0], "", asked[5]], MOST)) == [here, gone, gone, here]
    assert git("count-objects", "-v", at=clone) == before


def test_text_in_a_message_is_plain_and_short() -> None:
    assert safe("é\n::error::x\x1b[0m") == "\\xe9\\n::error::x\\x1b[0m"
    assert safe("a" * 201) == "a" * 200 + "…"
