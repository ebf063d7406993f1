"""Where a request departs from its base, and which files it changes, in real repositories and clones."""

from __future__ import annotations

from pathlib import Path

import pytest
from support import commit_all, git

from gatecheck.errors import CannotJudge
from gatecheck.history.departure import changed_files, departure, gained


def commit(folder: Path, path: str, text: str = "x\n") -> str:
    """Write one file and commit everything."""
    (folder / path).parent.mkdir(parents=True, exist_ok=True)
    (folder / path).write_text(text, encoding="utf-8")
    return commit_all(folder, path)


@pytest.fixture
def repository(tmp_path: Path) -> Path:
    """A branch that departs from `start`, one commit ahead of it, while `main` has gone on by one too."""
    folder = tmp_path / "repository"
    folder.mkdir()
    commit(folder, "old.txt")
    git(folder, "branch", "start")
    git(folder, "checkout", "-q", "-b", "request")
    commit(folder, "of-request.txt")
    git(folder, "checkout", "-q", "main")
    commit(folder, "of-base.txt")
    git(folder, "checkout", "-q", "request")
    return folder


def at(folder: Path, revision: str) -> str:
    return git(folder, "rev-parse", revision)


def test_a_base_that_has_gone_on_is_told(repository: Path) -> None:
    start, main = at(repository, "start"), at(repository, "main")

    since = departure(repository, "main")

    assert (since.base, since.commit) == (main, start)
    assert since.told == (
        f"The base has gone on since {start[:12]}, from which this request departs: what the request changes is "
        f"told against that commit, and what is trusted is that of the base, {main[:12]}."
    )
    assert gained(repository, since) == {"of-base.txt"}


@pytest.mark.parametrize("base", ["start", "HEAD", "request"])
def test_a_base_that_the_request_holds_needs_no_word(repository: Path, base: str) -> None:
    since = departure(repository, base)

    assert (since.base, since.commit, since.told) == (at(repository, base), at(repository, base), "")


def test_a_merge_checkout_of_depth_one_is_known_by_its_raw_parents(repository: Path, tmp_path: Path) -> None:
    main = at(repository, "main")
    git(repository, "checkout", "-q", "main")
    git(repository, "merge", "-q", "--no-ff", "request", "-m", "merge")
    clone = tmp_path / "clone"
    git(tmp_path, "clone", "-q", "--depth=1", f"file://{repository}", str(clone))
    git(clone, "fetch", "-q", "--depth=1", "origin", main)

    since = departure(clone, main)

    assert (since.base, since.commit, since.told) == (main, main, "")


def test_a_shallow_clone_that_hides_it_says_so(repository: Path, tmp_path: Path) -> None:
    main = at(repository, "main")
    clone = tmp_path / "clone"
    git(tmp_path, "clone", "-q", "--depth=1", "--branch=request", f"file://{repository}", str(clone))
    git(clone, "fetch", "-q", "--depth=1", "origin", main)

    since = departure(clone, main)

    assert (since.base, since.commit) == (main, main)
    assert since.told == (
        "The commit from which this request departs is not in this shallow clone, so that its changes are told "
        f"against the base, {main[:12]}, and what the base has gained meanwhile may appear as withdrawn; run "
        "`git fetch --unshallow origin` to tell them apart."
    )
    git(clone, "fetch", "-q", "--unshallow", "origin")
    assert departure(clone, main).commit == at(repository, "start")


@pytest.mark.parametrize("born", [True, False])
def test_a_line_of_its_own_shares_no_commit(repository: Path, *, born: bool) -> None:
    git(repository, "checkout", "-q", "--orphan", "apart")
    if born:
        commit(repository, "apart.txt")

    since = departure(repository, "main")

    assert since.commit == since.base == at(repository, "main")
    assert since.told.startswith(
        "The commit from which this request departs is not there, as the two share no commit, so that its changes"
    )
    assert since.told.endswith("may appear as withdrawn.")


def test_a_base_that_is_not_known_stops(repository: Path) -> None:
    with pytest.raises(CannotJudge, match="git knows no revision nowhere"):
        departure(repository, "nowhere")


def test_files_differ_by_what_the_work_tree_holds(repository: Path) -> None:
    commit(repository, "data/plots.csv", "1\n")
    commit(repository, "data/same.csv", "1\n")
    before = commit(repository, "data/gone.csv", "1\n")
    (repository / "data" / "plots.csv").write_text("2\n", encoding="utf-8")
    (repository / "data" / "same.csv").write_text("1\n", encoding="utf-8")
    (repository / "data" / "gone.csv").unlink()
    (repository / "data" / "näw.csv").write_text("1\n", encoding="utf-8")
    git(repository, "rm", "-q", "--cached", "old.txt")

    files = changed_files(repository, before)

    named = ["data/plots.csv", "data/same.csv", "data/gone.csv", "data/näw.csv", "old.txt", "nowhere.csv"]
    assert [files.at(path) for path in named] == ["changed", None, "removed", "new", "changed", None]
    assert files.at("./data/../data/plots.csv") == "changed"
    assert files.at("data/plots.csv\0") is None


def test_a_file_is_named_from_the_judged_folder_or_from_the_top(repository: Path) -> None:
    commit(repository, "study/data/plots.csv")
    before = commit(repository, "common.csv")
    (repository / "study" / "data" / "plots.csv").write_text("2\n", encoding="utf-8")
    (repository / "common.csv").write_text("2\n", encoding="utf-8")

    files = changed_files(repository / "study", before)

    named = ["data/plots.csv", "study/data/plots.csv", "common.csv", "../common.csv", "plots.csv"]
    assert [files.at(path) for path in named] == ["changed", "changed", "changed", "changed", None]


def test_links_and_submodules_lead_to_what_changed(repository: Path, tmp_path: Path) -> None:
    (repository / "data").symlink_to("stored", target_is_directory=True)
    commit(repository, "stored/plots.csv")
    inner = tmp_path / "inner"
    inner.mkdir()
    commit(inner, "plots.csv", "1\n")
    git(repository, "-c", "protocol.file.allow=always", "submodule", "add", "-q", f"file://{inner}", "other")
    before = commit_all(repository, "a submodule")
    (repository / "stored" / "plots.csv").write_text("2\n", encoding="utf-8")
    commit(repository / "other", "plots.csv", "2\n")

    files = changed_files(repository, before)

    assert (files.at("data/plots.csv"), files.at("other/plots.csv")) == ("changed", "changed")
    assert files.at("data") is None


def test_nothing_differs_from_what_is_checked_out(repository: Path) -> None:
    files = changed_files(repository, "HEAD")

    assert (dict(files.how), files.at("old.txt")) == ({}, None)
